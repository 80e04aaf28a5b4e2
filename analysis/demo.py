"""The invented folds of Mossgarth beside the Tarrow Fault: demo data, of no place on any map.

Three folds whose answers are known: one transected, one axial planar, one with too few readings yet. The
positions lie in open ocean on purpose, so that nobody takes them for outcrops.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING, Any, Final

import numpy as np

from analysis.files.reading import Reading
from analysis.orient.features import Feature
from analysis.orient.righthand import octant_of
from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg
from analysis.stats.synthetic import Drawn, FoldDesign, draw

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.orient.vectors import Floats

DEMO_FAULT: Final = "Tarrow Fault"
DEMO_FAULT_STRIKE_DEG: Final = 52.0
DEMO_FAULT_SENSE: Final = "sinistral"
DEMO_ZONE_WIDTH_KM: Final = 2.0
DEMO_NOTE: Final = "Invented data: the Mossgarth folds beside the Tarrow Fault exist on no map."
_FIRST_READING: Final = datetime(2026, 5, 4, 9, 12, tzinfo=UTC)
_LATITUDE_DEG, _LONGITUDE_DEG = 47.5, -31.0  # open ocean
_DEGREES_PER_METRE: Final = 1.0 / 111_320.0


@dataclass(frozen=True, slots=True)
class _DemoFold:
    name: str
    letters: str
    design: FoldDesign
    counts: tuple[int, int, int]  # bedding, cleavage, intersection
    east_m: float
    north_m: float
    seed: int


_FOLDS: Final = (
    _DemoFold(
        "Mossgarth fold",
        "MG",
        FoldDesign(
            hinge_trend_deg=76.0,
            hinge_plunge_deg=14.0,
            limb_dips_deg=(48.0, 64.0),
            transection_deg=9.0,
            bedding_scatter_deg=5.0,
            cleavage_scatter_deg=4.0,
            line_scatter_deg=4.0,
            outcrops=5,
            hinge_variation_deg=1.0,
        ),
        (24, 18, 8),
        0.0,
        0.0,
        11,
    ),
    _DemoFold(
        "Low Mossgarth fold",
        "LM",
        FoldDesign(
            hinge_trend_deg=57.0,
            hinge_plunge_deg=8.0,
            limb_dips_deg=(55.0, 60.0),
            transection_deg=0.5,
            bedding_scatter_deg=4.0,
            cleavage_scatter_deg=3.5,
            line_scatter_deg=4.0,
            outcrops=6,
            hinge_variation_deg=0.5,
        ),
        (30, 24, 0),
        900.0,
        400.0,
        13,
    ),
    _DemoFold(
        "Mossgarth Edge fold",
        "ME",
        FoldDesign(
            hinge_trend_deg=68.0,
            hinge_plunge_deg=20.0,
            limb_dips_deg=(40.0, 70.0),
            transection_deg=5.0,
            bedding_scatter_deg=6.0,
            cleavage_scatter_deg=5.0,
            line_scatter_deg=5.0,
            outcrops=2,
        ),
        (8, 6, 2),
        1500.0,
        -350.0,
        3,
    ),
)


def demo_readings() -> list[Reading]:
    """Make the readings of the demo, always the same, in the order in which they would be taken."""
    return [reading for fold in _FOLDS for reading in _readings(fold)]


def _readings(fold: _DemoFold) -> Iterator[Reading]:
    drawn = draw(fold.design, max(fold.counts), 1, np.random.default_rng(fold.seed))
    places = np.random.default_rng(fold.seed + 100).normal(0.0, 60.0, (fold.design.outcrops, 2))
    along = np.linspace(-260.0, 260.0, fold.design.outcrops)[:, np.newaxis]
    turn = np.radians(fold.design.hinge_trend_deg)
    places = places * 0.4 + along * np.array([np.sin(turn), np.cos(turn)])
    day = timedelta(days=[f.name for f in _FOLDS].index(fold.name))
    minute = 0
    # Outcrop by outcrop, as one walks: bedding, cleavage, then the lines.
    for outcrop in range(fold.design.outcrops):
        for feature, axes, count in _streams(fold, drawn):
            for k in range(outcrop, count, fold.design.outcrops):
                minute += 3
                yield _reading(
                    fold,
                    feature,
                    axes[k],
                    outcrop,
                    places[outcrop],
                    _FIRST_READING + day + timedelta(minutes=minute),
                )


def _streams(fold: _DemoFold, drawn: Drawn) -> Iterator[tuple[Feature, Floats, int]]:
    yield Feature.BEDDING, drawn.bedding[0], fold.counts[0]
    yield Feature.CLEAVAGE, drawn.cleavage[0], fold.counts[1]
    yield Feature.INTERSECTION, drawn.lines[0], fold.counts[2]


def _reading(
    fold: _DemoFold, feature: Feature, axis: Floats, outcrop: int, place: Floats, when: datetime
) -> Reading:
    number = int((when - _FIRST_READING).total_seconds())
    north = fold.north_m + float(place[1])
    east = fold.east_m + float(place[0])
    attitude: dict[str, Any]
    quadrant = ""
    if feature.is_plane:
        # Rounded as a compass is read; 360 is written 000.
        strike, dip = (float(np.round(value)) for value in strike_dip_deg(axis))
        attitude = {"strike_deg": strike % 360.0, "dip_deg": dip}
        quadrant = octant_of((strike + 90.0) % 360.0) if 0.0 < dip < 90.0 else ""
        text = f"{strike % 360.0:03.0f}/{dip:02.0f} {quadrant}".strip()
    else:
        trend, plunge = (float(np.round(value)) for value in trend_plunge_deg(axis))
        attitude = {"trend_deg": trend % 360.0, "plunge_deg": plunge}
        text = f"{trend % 360.0:03.0f}/{plunge:02.0f}"
    return Reading(
        reading_id=f"demo-{number:06d}",
        feature=feature,
        recorded_at=when,
        observer="demo",
        fold=fold.name,
        outcrop=f"{fold.letters}-{outcrop + 1:02d}",
        dip_quadrant=quadrant,
        as_entered=text,
        instrument="compass",
        latitude_deg=round(_LATITUDE_DEG + north * _DEGREES_PER_METRE, 7),
        longitude_deg=round(
            _LONGITUDE_DEG + east * _DEGREES_PER_METRE / float(np.cos(np.radians(_LATITUDE_DEG))), 7
        ),
        accuracy_m=4.0,
        position_source="invented",
        note=DEMO_NOTE if number == 180 else "",
        **attitude,
    )
