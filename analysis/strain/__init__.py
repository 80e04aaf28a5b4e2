"""The explanations: what rotation in shear and transpression predict at the fold-fault angle seen."""
