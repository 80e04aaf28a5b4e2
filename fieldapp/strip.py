"""The verdict strip: the sign of a check, its sentence and its figures."""

from __future__ import annotations

import re
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
    figures = figure_line(check)
    return StripState(sign_of(check), headline(check), figures, shortened(figures))


def shortened(figures: str) -> str:
    """Say the figures for a narrow strip: what is angle and what is interval stays, the rest is known there.

    Lines without figures, such as what a verdict still lacks, stay as they are.
    """
    if "between" not in figures:
        return figures
    short = figures.removeprefix("cleavage ").replace(" of the hinge", "", 1).replace(" off the hinge", "", 1)
    # Where the interval holds 0, signs say the sense: clockwise is positive, as on the funnel.
    short = re.sub(r"between (\S+) anticlockwise and (\S+) clockwise", "−\\1 to +\\2", short)  # noqa: RUF001
    return re.sub(r", at (\S+) confidence$", r" (\1)", short)
