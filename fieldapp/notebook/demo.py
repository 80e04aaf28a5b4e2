"""The invented notebook: the Mossgarth folds beside the Tarrow Fault.

Nothing of it was ever read on rock. The folds, the fault, the outcrops and every reading are made up by the
numbers below with a fixed seed; the positions lie in the open ocean, so that they are no place. It is a file
of its own and cannot mix with real readings.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING

import numpy as np

from analysis.files.reading import Reading
from analysis.orient.features import Feature
from analysis.orient.righthand import octant_of
from analysis.orient.vectors import line_vector, pole_vector, strike_dip_deg, trend_plunge_deg, unit
from fieldapp.notebook.ids import ReadingIds
from fieldapp.notebook.opening import open_notebook
from fieldapp.states import FaultInput

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from pathlib import Path

    from analysis.orient.vectors import Floats

FAULT_NAME = "Tarrow Fault"
FAULT = FaultInput(strike_deg=18.0, sense="sinistral", zone_width_m=350.0)
_SEED = 20250603
_FIRST_DAY = datetime(2025, 6, 3, 8, 30, tzinfo=UTC)
_LATITUDE_DEG, _LONGITUDE_DEG = 48.0, -28.0  # open ocean
_LATITUDE_PER_M = 1.0 / 111_200.0
_LONGITUDE_PER_M = 1.0 / (111_400.0 * np.cos(np.radians(_LATITUDE_DEG)))


@dataclass(frozen=True, slots=True)
class _Fold:
    """One invented fold: hinge and cleavage in degrees, limbs by their strikes' dips, and what is read of it."""

    name: str
    hinge: tuple[float, float]
    cleavage: tuple[float, float]
    limb_turns_deg: tuple[float, float]  # limbs turned about the hinge from the axial surface's normal
    outcrops: tuple[tuple[str, float, float], ...]  # name, metres east, metres north
    rounds: int
    scatter_deg: float


_FOLDS = (
    _Fold(
        "Mossgarth",
        (32.0, 14.0),
        (40.0, 84.0),
        (38.0, -52.0),
        (
            ("MG-11", -62.0, -118.0),
            ("MG-12", 24.0, -55.0),
            ("MG-13", -20.0, 6.0),
            ("MG-14", 71.0, 42.0),
            ("MG-15", 18.0, 127.0),
        ),
        4,
        3.5,
    ),
    _Fold(
        "Mossgarth east",
        (28.0, 9.0),
        (26.6, 81.0),
        (45.0, -40.0),
        (
            ("ME-1", 410.0, -90.0),
            ("ME-2", 455.0, 15.0),
            ("ME-3", 431.0, 104.0),
            ("ME-4", 502.0, 160.0),
            ("ME-5", 477.0, 233.0),
            ("ME-6", 549.0, 301.0),
            ("ME-7", 512.0, 377.0),
            ("ME-8", 580.0, 420.0),
        ),
        5,
        2.5,
    ),
    _Fold(
        "Tarrow Beck", (35.0, 22.0), (41.0, 78.0), (50.0, -35.0), (("TB-1", -380.0, 210.0),), 2, 4.0
    ),
)


def make_demo(path: Path, clock: Callable[[], datetime]) -> Path:
    """Write the invented notebook at `path` unless there is one; raises NotebookError where that fails."""
    notebook = open_notebook(path, clock).notebook
    try:
        if notebook.count() == 0 and not notebook.read_only:
            notebook.keep_all(demo_readings())
            for fold in _FOLDS:
                notebook.set_fault(fold.name, FAULT)
            notebook.save_settings({"page.fold": _FOLDS[0].name, "page.outcrop": _FOLDS[0].outcrops[3][0]})
    finally:
        notebook.close()
    return path


def demo_readings() -> list[Reading]:
    """Make the invented readings; the same ones each time."""
    rng = np.random.default_rng(_SEED)
    now = [_FIRST_DAY]

    def minute() -> datetime:
        now[0] += timedelta(seconds=95)
        return now[0]

    ids = ReadingIds(lambda: now[0], rng.bytes)
    return [reading for fold in _FOLDS for reading in _readings_of(fold, rng, ids, minute)]


def _readings_of(
    fold: _Fold, rng: np.random.Generator, ids: ReadingIds, minute: Callable[[], datetime]
) -> Iterator[Reading]:
    hinge = line_vector(*fold.hinge)
    cleavage = pole_vector(*fold.cleavage)
    across = unit(np.cross(hinge, np.array([0.0, 0.0, 1.0])))  # horizontal, at right angles to the hinge
    upward = np.cross(across, hinge)
    for place, (outcrop, east_m, north_m) in enumerate(fold.outcrops):
        for turn in range(fold.rounds):
            limb = np.radians(fold.limb_turns_deg[(place + turn) % 2])
            bed = _scattered(upward * np.cos(limb) + across * np.sin(limb), fold.scatter_deg, rng)
            surface = _scattered(cleavage, fold.scatter_deg, rng)
            axes = [(Feature.BEDDING, bed), (Feature.CLEAVAGE, surface)]
            if turn % 2 == 0:
                line = _scattered(unit(np.cross(bed, surface)), fold.scatter_deg / 2.0, rng)
                axes.append((Feature.INTERSECTION, line))
            for feature, axis in axes:
                metres = rng.normal(0.0, 3.0, 2)
                fields = {
                    "reading_id": ids(),
                    "recorded_at": minute(),
                    "observer": "invented",
                    "device": "demo",
                    "fold": fold.name,
                    "outcrop": outcrop,
                    "feature": feature,
                    "instrument": "compass",
                    "latitude_deg": _LATITUDE_DEG + (north_m + metres[0]) * _LATITUDE_PER_M,
                    "longitude_deg": _LONGITUDE_DEG + (east_m + metres[1]) * _LONGITUDE_PER_M,
                    "accuracy_m": 4.0,
                    "position_source": "invented",
                    **_attitude(feature, axis),
                }
                yield Reading(**fields)


def _scattered(axis: Floats, scatter_deg: float, rng: np.random.Generator) -> Floats:
    return unit(axis + rng.normal(0.0, np.radians(scatter_deg), 3))


def _attitude(feature: Feature, axis: Floats) -> dict[str, object]:
    """A reading in whole degrees, as a compass is read."""
    read = strike_dip_deg if feature.is_plane else trend_plunge_deg
    azimuth, inclination = (round(float(value)) for value in read(axis))
    typed = f"{azimuth % 360:03d}/{inclination:02d}"
    if not feature.is_plane:
        return {"trend_deg": azimuth, "plunge_deg": inclination, "as_entered": f"trend/plunge {typed}"}
    quadrant = octant_of(azimuth + 90.0)
    return {
        "strike_deg": azimuth,
        "dip_deg": inclination,
        "dip_quadrant": quadrant,
        "as_entered": f"strike/dip {typed} {quadrant}",
    }
