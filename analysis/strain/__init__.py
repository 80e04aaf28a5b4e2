"""The explanations: what rotation in shear and transpression predict beside a fault, and what the folds say."""
