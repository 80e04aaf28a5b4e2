"""What has to stand on every page, screen and print that names an explanation."""

from __future__ import annotations

from typing import Final

NON_UNIQUENESS: Final = (
    "The transection is a fact of geometry, its cause is not: cleavage clockwise or anticlockwise of the"
    " folds can come about in sinistral and in dextral shear alike (Treagus & Treagus 1992)."
)
NO_WRENCH_NEEDED: Final = (
    "Beds that lay oblique to the strain axes give transected folds with no wrench movement at all"
    " (Treagus & Treagus 1981)."
)
SENSE_IS_A_HINT: Final = (
    "A sense of shear read from the transection is a hint only. It assumes that the folds began at the"
    " direction of fastest stretching, turned as lines in the rock, and that cleavage keeps normal to the"
    " greatest shortening."
)
CAUTIONS: Final = (NON_UNIQUENESS, NO_WRENCH_NEEDED, SENSE_IS_A_HINT)
"""The three together, in the order in which they are printed."""
