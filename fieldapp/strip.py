"""The verdict strip: the sign of a check, its sentence and its figures."""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.fold.records import Verdict
from analysis.fold.words import figure_line, headline
from fieldapp.states import Sign, StripState

if TYPE_CHECKING:
    from analysis.fold.records import FoldCheck

_BY_SENSE = {"clockwise": Sign.CROSSED_CLOCKWISE, "anticlockwise": Sign.CROSSED_ANTICLOCKWISE}


def sign_of(check: FoldCheck) -> Sign:
    """The sign that stands for a verdict."""
    match check.verdict:
        case Verdict.TRANSECTED:
            return _BY_SENSE.get(check.sense, Sign.CROSSED)
        case Verdict.AXIAL_PLANAR:
            return Sign.PARALLEL
        case Verdict.CANNOT_BE_SETTLED:
            return Sign.BARRED_RING
        case _:
            return Sign.OPEN_RING


def strip_of(check: FoldCheck) -> StripState:
    """The strip of a check: two lines and a sign."""
    return StripState(sign_of(check), headline(check), figure_line(check))
