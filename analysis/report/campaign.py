"""What a report is made from: the readings of a campaign fold by fold, with their checks, and the fault if given."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.attitudes import Plane
from analysis.orient.features import Feature
from analysis.orient.position import EARTH_RADIUS_m
from analysis.orient.righthand import robust_centre
from analysis.orient.vectors import axis_angle_deg
from analysis.report.plan_sketch import PlanOutcrop
from analysis.report.plan_symbols import PlanPlane

if TYPE_CHECKING:
    from collections.abc import Mapping

    from analysis.files.reading import Reading
    from analysis.files.standing import Conflict
    from analysis.files.table import ReadingTable
    from analysis.fold.records import FoldCheck
    from analysis.orient.vectors import Floats
    from analysis.report.funnel import HistoryPoint
    from analysis.strain.explanations import FaultCheck

UNNAMED: Final = "(unnamed fold)"
_FEATURES: Final = tuple(Feature)
_OTHER_LIMB_FROM_DEG: Final = 40.0
_FEWEST_OF_OTHER_LIMB: Final = 2
_SAMPLE: Final = 400  # readings of an outcrop from which its middle attitude is taken


@dataclass(frozen=True, slots=True)
class FoldPart:
    """One fold of the campaign.

    Attributes
    ----------
    check
        Its check, with the forecast.
    table
        Its standing readings.
    axes
        The same as axes (n, 3) by feature: poles of planes, lines.
    history
        The check as it stood after so many readings, in recorded order.
    off_deg
        By row of the table, how far a reading lies off the fit, degrees, where it is named as far off.
    struck
        Readings of the fold that were struck out, in their last revision.
    fault
        What the fold says about the fault, if one is given and the fold has a hinge.

    """

    check: FoldCheck
    table: ReadingTable
    axes: Mapping[Feature, Floats]
    history: tuple[HistoryPoint, ...]
    off_deg: Mapping[int, float]
    struck: tuple[Reading, ...]
    fault: FaultCheck | None = None

    @property
    def name(self) -> str:
        """Name of the fold for a heading."""
        return self.check.fold or UNNAMED


@dataclass(frozen=True, slots=True)
class SourceFile:
    """A file read: its name, the readings of it that stand, and the SHA-256 of its content in hexadecimal."""

    name: str
    standing: int
    sha256: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Campaign:
    """Everything that the report prints from.

    `command` repeats it, `versions` are names and releases of what reckoned it, `left_out` says what could not be
    read (at most a few sentences, then a count), `struck_only` counts the readings of folds of which none stands, and
    `fault_words` describes the fault, or is empty.
    """

    title: str
    folds: tuple[FoldPart, ...]
    files: tuple[SourceFile, ...]
    command: str
    versions: tuple[tuple[str, str], ...]
    left_out: tuple[str, ...] = ()
    conflicts: tuple[Conflict, ...] = ()
    struck_only: Mapping[str, int] = field(default_factory=dict)
    fault_words: str = ""


def struck_out_of(table: ReadingTable) -> dict[str, tuple[Reading, ...]]:
    """Readings whose last revision is struck out, by fold, in file order; for a whole table."""
    rows = np.flatnonzero(table.struck_out)
    if not len(rows):
        return {}
    _, codes = np.unique(table.reading_id.astype(str), return_inverse=True)
    last = np.zeros(codes.max() + 1, dtype=np.int64)
    np.maximum.at(last, codes, table.revision)
    live = np.zeros(len(last), dtype=bool)
    live[codes[table.standing]] = True
    found: dict[str, dict[int, Reading]] = {}
    for row in rows.tolist():
        code = int(codes[row])
        if table.revision[row] == last[code] and not live[code]:
            found.setdefault(table.fold[row], {}).setdefault(code, table.reading(row))
    return {fold: tuple(readings.values()) for fold, readings in found.items()}


def outcrops_on_plan(table: ReadingTable) -> tuple[list[PlanOutcrop], list[str]]:
    """Outcrops of a fold in metres about the first, each with its middle bedding and cleavage; and those without.

    Where both limbs stand in an outcrop it has two beds: the mean of both would be none.
    """
    outcrop, features, vectors = table.outcrop, table.feature, table.vectors
    latitude, longitude = table.column("latitude_deg"), table.column("longitude_deg")
    overturned = table.column("overturned")
    placed: list[tuple[str, float, float, tuple[PlanPlane, ...]]] = []
    unplaced: list[str] = []
    for code in dict.fromkeys(outcrop.codes.tolist()):
        name = cutoff(outcrop.names[code] or "(unnamed)")
        here = outcrop.codes == code
        known = here & np.isfinite(latitude) & np.isfinite(longitude)
        if not known.any():
            unplaced.append(name)
            continue
        first = float(longitude[known][0])
        about = (longitude[known] - first + 180.0) % 360.0 - 180.0
        planes: list[PlanPlane] = []
        for feature in (Feature.BEDDING, Feature.CLEAVAGE):
            rows = here & (features == _FEATURES.index(feature))
            turned = bool(rows.any()) and float(overturned[rows].mean()) > 0.5
            planes += [
                PlanPlane(feature, plane, overturned=turned and feature is Feature.BEDDING)
                for plane in _middle_planes(vectors[rows], twice=feature is Feature.BEDDING)
            ]
        place = (float(np.median(latitude[known])), first + float(np.median(about)))
        placed.append((name, *place, tuple(planes)))
    if not placed:
        return [], unplaced
    _, latitude_0, longitude_0, _ = placed[0]
    across = float(np.cos(np.radians(latitude_0))) * EARTH_RADIUS_m
    shown = [
        PlanOutcrop(
            name,
            float(np.radians((east - longitude_0 + 180.0) % 360.0 - 180.0)) * across,
            float(np.radians(north - latitude_0)) * EARTH_RADIUS_m,
            planes,
        )
        for name, north, east, planes in placed
    ]
    return shown, unplaced


def cutoff(name: str, longest: int = 24) -> str:
    """A name short enough to stand on a drawing."""
    return name if len(name) <= longest else f"{name[: longest - 1]}…"


def _middle_planes(poles: Floats, *, twice: bool) -> list[Plane]:
    if not len(poles):
        return []
    sample = poles[:: max(len(poles) // _SAMPLE, 1)]
    middle, _ = robust_centre(sample)
    planes = [Plane.from_pole(middle)]
    others = sample[axis_angle_deg(sample, middle) > _OTHER_LIMB_FROM_DEG]
    if twice and len(others) >= _FEWEST_OF_OTHER_LIMB:
        planes.append(Plane.from_pole(robust_centre(others)[0]))
    return planes
