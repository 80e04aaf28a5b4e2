"""Invented readings of the Mossgarth fold beside the Tarrow Fault: for tests and pictures, nowhere real.

The fold's hinge is 032/16 with limbs of 60 and 50 degrees; the cleavage is turned clockwise off the hinge.
"""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta

import numpy as np

from analysis.orient import vectors
from analysis.orient.features import Feature
from analysis.orient.righthand import octant_of

START = datetime(2026, 5, 4, 9, 0, tzinfo=UTC)


class TestClock:
    """A clock that goes on by a twentieth of a second each time it is asked."""

    __test__ = False

    def __init__(self) -> None:
        self.now = START

    def __call__(self) -> datetime:
        """Give the time, a little later than the last one."""
        self.now += timedelta(seconds=0.05)
        return self.now


@dataclass(frozen=True)
class Typed:
    """One reading as it is typed."""

    feature: Feature
    azimuth: str
    inclination: str
    quadrant: str = ""
    outcrop: str = "MG-14"


def _turned(axis, angle_deg, v):
    angle = np.radians(angle_deg)
    return v * np.cos(angle) + np.cross(axis, v) * np.sin(angle) + axis * (axis @ v) * (1 - np.cos(angle))


def fold(
    count: int = 30,
    *,
    transection_deg: float = 9.0,
    scatter_deg: float = 3.0,
    seed: int = 14,
    outcrops: int = 3,
) -> list[Typed]:
    """Give so many readings in turn: bedding of both limbs, cleavage, now and then an intersection line."""
    chance = np.random.default_rng(seed)
    hinge = vectors.line_vector(32.0, 16.0)
    cleavage = vectors.pole_vector(32.0 + transection_deg, 84.0)
    upright = vectors.unit(np.cross(hinge, np.cross(vectors.DOWN, hinge)))
    limbs = [_turned(hinge, angle, upright) for angle in (58.0, -52.0)]
    readings = []
    for number in range(count):
        outcrop = f"MG-{14 + number * outcrops // count}"
        kind = number % 6
        if kind in (0, 2, 4):
            pole, feature = limbs[(number // 2) % 2], Feature.BEDDING
        elif kind in (1, 3):
            pole, feature = cleavage, Feature.CLEAVAGE
        else:
            pole, feature = vectors.unit(np.cross(limbs[number // 6 % 2], cleavage)), Feature.INTERSECTION
        noisy = vectors.unit(pole + chance.normal(0.0, np.radians(scatter_deg), 3))
        if feature.is_plane:
            azimuth, inclination = (float(x) for x in vectors.strike_dip_deg(noisy))
        else:
            azimuth, inclination = (float(x) for x in vectors.trend_plunge_deg(noisy))
        whole, dip = round(azimuth) % 360, min(round(inclination), 90)
        quadrant = octant_of(whole + 90.0) if feature.is_plane else ""
        readings.append(Typed(feature, f"{whole:03d}", f"{dip:02d}", quadrant, outcrop))
    return readings


def type_into(page, readings, clock) -> None:
    """Enter readings through the presenter, as the keys do, with a fresh position for each."""
    from fieldapp.states import PositionFix

    for typed in readings:
        if page.place.outcrop != typed.outcrop:
            page.choose_outcrop(typed.outcrop)
        place = int(typed.outcrop.split("-")[1])
        page.position_changed(
            PositionFix(
                latitude_deg=54.20 + 0.0004 * (place - 14) + 0.0003 * (place % 2),
                longitude_deg=-2.60 + 0.0011 * (place % 3),
                accuracy_m=4.0,
                source="test",
                at=clock.now,
            )
        )
        page.choose_feature(typed.feature)
        for digit in typed.azimuth + typed.inclination:
            page.digit(int(digit))
        if typed.quadrant and page.entry.quadrant_offered:
            page.choose_quadrant(typed.quadrant)
        assert page.keep(), page.message
