"""Words and figures of the page: readings in the notation of the settings, places, ages. Plain functions."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature
from analysis.orient.forms import Notation
from analysis.orient.notation import azimuth_text, inclination_text
from fieldapp.settings import PlaneNotation

if TYPE_CHECKING:
    from collections.abc import Collection
    from datetime import datetime

    from analysis.files.reading import Reading
    from analysis.orient.position import Position
    from fieldapp.states import Backup

FEATURE_LABELS = {
    Feature.BEDDING: "Bedding",
    Feature.CLEAVAGE: "Cleavage",
    Feature.INTERSECTION: "Intersection",
    Feature.HINGE: "Hinge",
}
FIRST_FOLD = "Fold 1"
FIRST_OUTCROP = "1"


def notation_of(feature: Feature, planes: PlaneNotation) -> Notation:
    """The notation that a feature is typed and shown in."""
    if not feature.is_plane:
        return Notation.TREND_PLUNGE
    return Notation.STRIKE_DIP if planes is PlaneNotation.STRIKE_DIP else Notation.DIP_DIRECTION_DIP


def labels_of(feature: Feature, planes: PlaneNotation) -> tuple[str, str]:
    """What the two parts of an entry are called."""
    if not feature.is_plane:
        return "trend", "plunge"
    return ("strike" if planes is PlaneNotation.STRIKE_DIP else "dip direction"), "dip"


def attitude_of(reading: Reading) -> Plane | Line:
    """The plane or line of a reading, from true north."""
    if reading.feature.is_plane:
        return Plane(_number(reading.strike_deg), _number(reading.dip_deg))
    return Line(_number(reading.trend_deg), _number(reading.plunge_deg))


def parts_of(attitude: Plane | Line, planes: PlaneNotation) -> tuple[str, str]:
    """Azimuth and inclination as digits, with one decimal only where there is one."""
    if isinstance(attitude, Line):
        azimuth, inclination = attitude.trend_deg, attitude.plunge_deg
    else:
        by_strike = planes is PlaneNotation.STRIKE_DIP
        azimuth = attitude.strike_deg if by_strike else attitude.dip_direction_deg
        inclination = attitude.dip_deg
    return azimuth_text(azimuth, _decimals(azimuth)), inclination_text(inclination, _decimals(inclination))


def reading_text(reading: Reading, planes: PlaneNotation) -> str:
    """A past reading as "045/30 SE" or "032/16", from true north, in whole degrees."""
    attitude = attitude_of(reading)
    if isinstance(attitude, Line):
        return f"{azimuth_text(attitude.trend_deg)}/{inclination_text(attitude.plunge_deg)}"
    by_strike = planes is PlaneNotation.STRIKE_DIP
    azimuth = attitude.strike_deg if by_strike else attitude.dip_direction_deg
    text = f"{azimuth_text(azimuth)}/{inclination_text(attitude.dip_deg)}"
    return f"{text} {reading.dip_quadrant}" if by_strike and reading.dip_quadrant else text


def fold_title(fold: str) -> str:
    """A fold's name as shown."""
    return fold or "unnamed fold"


def position_text(place: Position) -> str:
    """A position as "48.50000° N, 28.25000° W": to a metre."""
    north = "N" if place.latitude_deg >= 0.0 else "S"
    east = "E" if place.longitude_deg >= 0.0 else "W"
    return f"{abs(place.latitude_deg):.5f}° {north}, {abs(place.longitude_deg):.5f}° {east}"


def outcrop_title(outcrop: str) -> str:
    """An outcrop's name as shown."""
    return f"Outcrop {outcrop}" if outcrop else "unnamed outcrop"


def next_name(name: str, taken: Collection[str]) -> str:
    """The next name in a row of outcrops: MG-14 gives MG-15, A gives A-2; never one that is taken."""
    match = re.fullmatch(r"(.*?)(\d{1,9})", name)
    stem, number, width = (match[1], int(match[2]), len(match[2])) if match else (f"{name}-", 1, 1)
    if not name:
        stem, number = "", 0
    while True:
        number += 1
        made = f"{stem}{number:0{width}d}"
        if made not in taken:
            return made


def age_text(seconds: float) -> str:
    """An age in the largest unit that fits: 12 s, 4 min, 3 h, 2 d."""
    for limit, size, unit in ((90.0, 1.0, "s"), (5400.0, 60.0, "min"), (129_600.0, 3600.0, "h")):
        if seconds < limit:
            return f"{max(0.0, seconds) / size:.0f} {unit}"
    return f"{seconds / 86_400.0:.0f} d"


def when_text(at: datetime | None) -> str:
    """A time as the geologist's clock shows it, or "never"."""
    return "never" if at is None else at.astimezone().strftime("%d %b %Y, %H:%M")


def backup_text(backup: Backup) -> str:
    """When a backup was made; the day alone, as its name says it, where the time is not known."""
    return when_text(backup.made_at) if backup.to_the_minute else backup.made_at.strftime("%d %b %Y")


def counted(number: int, thing: str = "reading") -> str:
    """A count with its noun: 1 reading, 2 readings."""
    return f"{number} {thing}" if number == 1 else f"{number} {thing}s"


def _decimals(value: float) -> int:
    return 0 if abs(value - round(value)) < 0.05 else 1


def _number(value: float | None) -> float:
    if value is None:  # Reading does not let this happen
        raise TypeError("a reading without its attitude")
    return value
