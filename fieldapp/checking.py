"""The entry checks as the page shows them: one line each, with its mend, live while one types.

The checks themselves are `analysis.orient.entrychecks`. They run against the north that the entry is typed
in: the neighbours, which are kept from true north, are turned back by the correction, so that a mend is
offered in the very digits that the compass shows.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from analysis.errors import AttitudeError
from analysis.orient.attitudes import Line, Plane
from analysis.orient.entrychecks import EntryCheck, check_line, check_plane
from analysis.orient.features import Feature
from analysis.orient.notation import write
from analysis.orient.righthand import QuadrantFit, octant_of, quadrant_fit
from analysis.orient.vectors import line_vector
from fieldapp.entry import turned
from fieldapp.settings import PlaneNotation
from fieldapp.states import CheckLine
from fieldapp.wording import attitude_of, labels_of, notation_of

if TYPE_CHECKING:
    from analysis.files.reading import Reading
    from analysis.orient.entrychecks import EntryWarning
    from analysis.orient.vectors import Floats
    from fieldapp.entry import EntryDraft

RANGE = "range"
RIGHT_HAND_RULE = "right-hand-rule"
NEWEST = 300  # readings of the fold that the checks look at: the newest ones, so that the time stays bounded


@dataclass(frozen=True, slots=True)
class Neighbour:
    """A standing reading, as the checks need it."""

    reading_id: str
    feature: Feature
    outcrop: str
    vector: Floats
    reading: Reading

    @property
    def side_known(self) -> bool:
        """Whether its side is known: a quadrant that fits, or kept against this very question."""
        kept = self.reading.warnings_kept
        return EntryCheck.REVERSED_STRIKE in kept or (
            self.reading.dip_quadrant != "" and EntryCheck.QUADRANT_MISFIT not in kept
        )


@dataclass(frozen=True, slots=True)
class Around:
    """What an entry is held against: readings of the fold, its outcrop, its correction in degrees."""

    neighbours: tuple[Neighbour, ...] = ()
    outcrop: str = ""
    added_deg: float = 0.0

    def but(self, reading_id: str) -> Around:
        """Leave one reading out (the one being mended) and all but the newest."""
        others = tuple(n for n in self.neighbours if n.reading_id != reading_id)
        return Around(others[-NEWEST:], self.outcrop, self.added_deg)

    def of(self, feature: Feature, *, here: bool = False) -> list[Neighbour]:
        """Neighbours of one feature, in the fold or at this outcrop, oldest first."""
        return [
            n for n in self.neighbours if n.feature is feature and (not here or n.outcrop == self.outcrop)
        ]

    def vectors(self, feature: Feature, *, here: bool = False) -> Floats:
        """Vectors (n, 3) of neighbours, turned back from true north to the north typed in."""
        found = self.of(feature, here=here)
        if not found:
            return np.zeros((0, 3))
        true = np.stack([n.vector for n in found])
        if self.added_deg == 0.0:
            return true
        north, east = line_vector(-self.added_deg, 0.0)[:2]
        turn = np.array([[north, -east, 0.0], [east, north, 0.0], [0.0, 0.0, 1.0]])
        return np.asarray(true @ turn.T)


@dataclass(frozen=True, slots=True)
class Checked:
    """What the checks found: lines to show, and the attitudes that their mends would put in."""

    lines: tuple[CheckLine, ...] = ()
    mends: tuple[tuple[str, Plane | Line], ...] = ()
    possible: bool = True  # whether the digits are an attitude at all


def expected_quadrant(draft: EntryDraft, planes: PlaneNotation) -> str:
    """The quadrant that the right-hand rule expects of a strike typed, '' until it is whole."""
    if not draft.feature.is_plane or planes is not PlaneNotation.STRIKE_DIP or not draft.digits.azimuth_whole:
        return ""
    strike = float(draft.digits.azimuth.rstrip("."))
    return octant_of(strike + 90.0) if strike <= 360.0 else ""


def checked(draft: EntryDraft, planes: PlaneNotation, around: Around) -> Checked:
    """Run all checks on a draft."""
    if not draft.digits.whole:
        return _range_so_far(draft, planes)
    try:
        attitude = draft.attitude(planes)
    except AttitudeError as error:
        return Checked((CheckLine(RANGE, str(error), passed=False),), possible=False)
    others = around.but(draft.mending)
    if isinstance(attitude, Plane):
        warnings = _plane_warnings(attitude, draft, planes, others)
    else:
        warnings = _line_warnings(attitude, draft.feature, others)
    lines = [_line(warning, planes) for warning in warnings]
    mends = [(str(w.check), w.mend) for w in warnings if w.mend is not None]
    if isinstance(attitude, Plane) and _quadrant_agrees(attitude, draft.quadrant):
        words = f"Dips {draft.quadrant}, as the right-hand rule says."
        lines.insert(0, CheckLine(RIGHT_HAND_RULE, words, passed=True))
    if draft.sensed is not None:
        lines += [CheckLine(name, words, passed=False) for name, words in draft.sensed.warnings]
    return Checked(tuple(lines), tuple(mends))


def _quadrant_agrees(plane: Plane, quadrant: str) -> bool:
    """Whether a quadrant was given that says something and agrees; flat and vertical planes dip nowhere."""
    return bool(quadrant) and 0.0 < plane.dip_deg < 90.0 and quadrant_fit(plane, quadrant) is QuadrantFit.FITS


def _range_so_far(draft: EntryDraft, planes: PlaneNotation) -> Checked:
    """Say as soon as the azimuth is whole that it is none."""
    if not draft.digits.azimuth_whole or float(draft.digits.azimuth.rstrip(".")) <= 360.0:
        return Checked()
    name, typed = labels_of(draft.feature, planes)[0], draft.digits.azimuth.rstrip(".")
    words = f"The {name} {typed} is outside 0 to 360. Take it back with the key, or clear."
    return Checked((CheckLine(RANGE, words, passed=False),), possible=False)


def _plane_warnings(
    plane: Plane, draft: EntryDraft, planes: PlaneNotation, others: Around
) -> tuple[EntryWarning, ...]:
    return check_plane(
        plane,
        draft.feature,
        notation=notation_of(draft.feature, planes),
        quadrant=draft.quadrant or None,
        neighbours=others.vectors(draft.feature, here=True),
        confirmed=np.array([n.side_known for n in others.of(draft.feature, here=True)], dtype=bool),
        fold_poles=others.vectors(draft.feature),
    )


def _line_warnings(line: Line, feature: Feature, others: Around) -> tuple[EntryWarning, ...]:
    return check_line(
        line,
        feature,
        notation=notation_of(feature, PlaneNotation.STRIKE_DIP),
        bedding=_plane_through(line, others, Feature.BEDDING),
        cleavage=_plane_through(line, others, Feature.CLEAVAGE),
        fold_lines=others.vectors(feature),
    )


def _plane_through(line: Line, others: Around, feature: Feature) -> Plane | None:
    """The plane of the outcrop that holds the line best: where both limbs stand, it lies on one of them."""
    here = others.of(feature, here=True)
    if not here:
        return None
    off = np.abs(others.vectors(feature, here=True) @ line.vector)
    found = turned(attitude_of(here[int(np.argmin(off))].reading), -others.added_deg)
    return found if isinstance(found, Plane) else None


def _line(warning: EntryWarning, planes: PlaneNotation) -> CheckLine:
    label = ""
    if warning.mend is not None:
        feature = Feature.BEDDING if isinstance(warning.mend, Plane) else Feature.HINGE
        label = f"Use {write(warning.mend, notation_of(feature, planes))}"
    return CheckLine(str(warning.check), warning.message, passed=False, mend_label=label)
