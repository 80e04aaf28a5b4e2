"""The explanations: what shear and transpression predict beside a fault, and what the folds say of it."""
