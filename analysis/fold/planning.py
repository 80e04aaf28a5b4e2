"""Before the field: how many readings a fold would need, from trials on invented folds of the same shape.

Each trial is watched reading by reading by the functions that the page runs. Readings are split over the two
streams so that the variance of the transection falls fastest, which is also what the forecast advises.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any, Final, NamedTuple

import numpy as np

from analysis.errors import SettingError
from analysis.fold.settings import CheckSettings
from analysis.fold.trials import estimate_drawn, watch_drawn
from analysis.fold.watch import LINES_AT_FIRST_LOOK, PLANES_AT_FIRST_LOOK
from analysis.stats.synthetic import draw

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    import numpy.typing as npt

    from analysis.fold.trials import Mode, Trials
    from analysis.orient.vectors import Floats
    from analysis.stats.synthetic import FoldDesign

_DEFAULT: Final = CheckSettings()
_BATCH: Final = 100  # folds at a time: keeps the memory of a long plan below 200 MB, and the progress moving
_PILOT_READINGS: Final = 30
_SEED: Final = 1970
FOLDS_AT_MOST: Final = 20_000
READINGS_AT_MOST: Final = 1_000


class ReadingsNeeded(NamedTuple):
    """Readings of each feature."""

    bedding: int
    cleavage: int
    intersection: int

    @property
    def total(self) -> int:
        """Over all features."""
        return sum(self)


@dataclass(frozen=True, slots=True)
class PlanRow:
    """What to expect of folds with one true transection.

    Attributes
    ----------
    transection_deg
        The true transection, clockwise positive.
    found
        Share of folds with the right verdict by the last reading: transected, with the right sense; or axial
        planar, where the transection is smaller than the margin. Either is right between 0 and the margin.
    wrong
        Share of folds whose first verdict was wrong.
    median, for_80_percent
        Readings by which half and four fifths of the folds had their verdict; None where fewer ever had.

    """

    transection_deg: float
    found: float
    wrong: float
    median: ReadingsNeeded | None
    for_80_percent: ReadingsNeeded | None


@dataclass(frozen=True, slots=True)
class Plan:
    """How many readings folds of one shape need.

    Attributes
    ----------
    design, settings, mode
        What the plan is for; the design's own transection is not used.
    folds
        Trials for each transection.
    rows
        One for each transection, as asked.
    readings
        (looks, 3), bedding, cleavage and intersection readings at each look.
    power
        (rows, looks), share of folds with the right verdict by then.

    """

    design: FoldDesign
    settings: CheckSettings
    mode: Mode
    folds: int
    rows: tuple[PlanRow, ...]
    readings: npt.NDArray[np.int64]
    power: Floats

    @property
    def total(self) -> npt.NDArray[np.int64]:
        """Readings of all features at each look, (looks,)."""
        return np.asarray(self.readings.sum(axis=1))

    def to_json(self) -> dict[str, Any]:
        """As plain values: the settings, the rows, and the power at each look."""
        return {
            "margin_deg": self.settings.margin_deg,
            "confidence": self.settings.confidence,
            "read": self.mode,
            "folds": self.folds,
            "rows": [
                {
                    "transection_deg": row.transection_deg,
                    "found": row.found,
                    "wrong": row.wrong,
                    "median": None if row.median is None else row.median._asdict(),
                    "for_80_percent": None if row.for_80_percent is None else row.for_80_percent._asdict(),
                }
                for row in self.rows
            ],
            "readings": self.readings.tolist(),
            "power": np.round(self.power, 6).tolist(),
        }


def usual_transections(margin_deg: float) -> tuple[float, ...]:
    """Transections worth a row: none, half of what matters, what matters, and more of it, degrees."""
    return tuple(margin_deg * times for times in (0.0, 0.5, 1.0, 1.5, 2.0, 3.0))


def plan(
    design: FoldDesign,
    settings: CheckSettings = _DEFAULT,
    *,
    transections_deg: Sequence[float] | None = None,
    mode: Mode = "planes",
    most_readings: int = 200,
    folds: int = 300,
    seed: int = _SEED,
    progress: Callable[[float], None] | None = None,
) -> Plan:
    """Plan a fold by trials; the same arguments give the same plan.

    Parameters
    ----------
    design
        The fold as expected: limb dips, plunge, scatter, outcrops. Its transection does not matter.
    settings
        What transection matters (the margin), and at what confidence.
    transections_deg
        True transections to try, each -60 to 60; by default `usual_transections` of the margin.
    mode
        What is read of the cleavage.
    most_readings
        Readings of a fold, over all features, at which a trial ends; 20 to 1000.
    folds
        Trials of each transection, 20 to 20 000.
    seed
        Of the random numbers.
    progress
        Called with the share done, from 0 to 1.

    Raises SettingError for numbers outside these ranges.

    """
    for name, value, low, high in (
        ("number of folds", folds, 20, FOLDS_AT_MOST),
        ("most readings", most_readings, 20, READINGS_AT_MOST),
    ):
        if not low <= value <= high:
            raise SettingError(f"{value} is no {name} for a plan", where=name, expected=f"{low} to {high}")
    angles = usual_transections(settings.margin_deg) if transections_deg is None else tuple(transections_deg)
    if not angles:
        raise SettingError("a plan needs a transection", where="transections", expected="at least one")
    designs = [replace(design, transection_deg=float(angle)) for angle in angles]
    rng = np.random.default_rng(seed)
    share = _best_share(replace(design, transection_deg=0.0), mode, rng)
    at = _path(share, mode, most_readings)
    readings = _by_feature(at, mode)

    rows, power = [], []
    done = 0
    for each in designs:
        first, right = [], []
        for start in range(0, folds, _BATCH):
            batch = min(_BATCH, folds - start)
            drawn = draw(each, int(at.max()), batch, rng)
            when, good = _first_verdict(watch_drawn(drawn, at, settings, mode), each, settings)
            first.append(when)
            right.append(good)
            done += batch
            if progress is not None:
                progress(done / (folds * len(designs)))
        row, curve = _row(each.transection_deg, np.concatenate(first), np.concatenate(right), readings)
        rows.append(row)
        power.append(curve)
    return Plan(design, settings, mode, folds, tuple(rows), readings, np.stack(power))


def _first_look(mode: Mode) -> tuple[int, int]:
    cleavage = PLANES_AT_FIRST_LOOK if mode == "planes" else LINES_AT_FIRST_LOOK
    return int(PLANES_AT_FIRST_LOOK), int(cleavage)


def _best_share(design: FoldDesign, mode: Mode, rng: np.random.Generator) -> float:
    """Share of bedding at which the variance falls fastest: n times either part of it, by a pilot."""
    at = np.array([[_PILOT_READINGS, _PILOT_READINGS]])
    found = estimate_drawn(draw(design, _PILOT_READINGS, _BATCH, rng), at, mode).transection
    ease = [
        float(np.sqrt(np.median(part)))
        for part in (found.steady_hinge_variance, found.steady_cleavage_variance)
    ]
    both = ease[0] + ease[1]
    # A design without any scatter has no better share.
    return min(max(ease[0] / both, 0.1), 0.9) if np.isfinite(both) and both > 0.0 else 0.5


def _path(share: float, mode: Mode, most: int) -> npt.NDArray[np.int64]:
    """Counts of both streams, (looks, 2), from the first look on, one reading at a time towards the share."""
    held = list(_first_look(mode))
    each = (1, 2 if mode == "planes and lines" else 1)
    path = [tuple(held)]
    while held[0] * each[0] + held[1] * each[1] < most:
        held[0 if held[0] < share * (held[0] + held[1] + 1) else 1] += 1
        path.append(tuple(held))
    return np.array(path, dtype=np.int64)


def _by_feature(at: npt.NDArray[np.int64], mode: Mode) -> npt.NDArray[np.int64]:
    none = np.zeros(len(at), dtype=np.int64)
    planes = none if mode == "lines" else at[:, 1]
    lines = none if mode == "planes" else at[:, 1]
    return np.stack([at[:, 0], planes, lines], axis=1)


def _first_verdict(
    trials: Trials, design: FoldDesign, settings: CheckSettings
) -> tuple[npt.NDArray[np.int64], npt.NDArray[np.bool_]]:
    """Look at which each fold had its first verdict, (folds,), past the last where never; and whether it was right."""
    settled = trials.transected | trials.axial_planar
    when = np.where(settled.any(axis=1), settled.argmax(axis=1), settled.shape[1])
    at = np.minimum(when, settled.shape[1] - 1)[:, np.newaxis]
    transected = np.take_along_axis(trials.transected, at, axis=1)[:, 0]
    delta = np.take_along_axis(trials.delta_deg, at, axis=1)[:, 0]
    truth = design.transection_deg
    right = np.where(transected, delta * truth > 0.0, bool(abs(truth) < settings.margin_deg)) & settled.any(
        axis=1
    )
    return when, right


def _row(
    transection_deg: float,
    when: npt.NDArray[np.int64],
    right: npt.NDArray[np.bool_],
    readings: npt.NDArray[np.int64],
) -> tuple[PlanRow, Floats]:
    looks, folds = len(readings), len(when)
    curve = np.cumsum(np.bincount(when[right], minlength=looks)[:looks]) / folds
    needed = []
    for share in (0.5, 0.8):
        reached = curve >= share
        needed.append(
            ReadingsNeeded(*(int(n) for n in readings[reached.argmax()])) if reached.any() else None
        )
    wrong = float(np.count_nonzero(~right & (when < looks))) / folds
    return PlanRow(transection_deg, float(curve[-1]), wrong, *needed), np.asarray(curve, dtype=float)
