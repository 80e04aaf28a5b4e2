"""What a reading is a reading of."""

from __future__ import annotations

from enum import StrEnum


class Feature(StrEnum):
    """The four features read on a fold; the value is the word used in files."""

    BEDDING = "bedding"
    CLEAVAGE = "cleavage"
    INTERSECTION = "intersection"
    HINGE = "hinge"

    @property
    def is_plane(self) -> bool:
        """Whether the feature is read as a plane (else as a line)."""
        return self in (Feature.BEDDING, Feature.CLEAVAGE)

    @property
    def symbol(self) -> str:
        """The trade's short sign: S0 and S1 for planes, L01 for their intersection, h for a hinge line."""
        return {"bedding": "S0", "cleavage": "S1", "intersection": "L01", "hinge": "h"}[self.value]
