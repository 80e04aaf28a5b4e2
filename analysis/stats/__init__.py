"""Many readings: running sums, principal axes with their confidence, intervals, synthetic folds."""
