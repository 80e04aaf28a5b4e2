"""The plan sketch: outcrops in metres around the current one, each with the mean attitudes read there."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from analysis.orient.righthand import robust_centre
from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg
from fieldapp.states import PlanOutcrop, PlanState

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from analysis.orient.vectors import Floats
    from fieldapp.checking import Neighbour

# WGS 84: equatorial radius in metres and first eccentricity squared.
EQUATOR_M = 6_378_137.0
ECCENTRICITY_2 = 0.006_694_379_990_14


def offset_m(
    latitude_deg: float, longitude_deg: float, from_latitude_deg: float, from_longitude_deg: float
) -> tuple[float, float]:
    """Metres east and north of a place, on the plane that touches the ellipsoid there.

    Good to a few centimetres in a kilometre, which a sketch does not show. Radii of curvature of the
    meridian and the prime vertical from any textbook of geodesy (from memory).
    """
    latitude = math.radians(from_latitude_deg)
    w2 = 1.0 - ECCENTRICITY_2 * math.sin(latitude) ** 2
    meridian_m = EQUATOR_M * (1.0 - ECCENTRICITY_2) / w2**1.5
    across_m = EQUATOR_M / math.sqrt(w2) * math.cos(latitude)
    turned = (longitude_deg - from_longitude_deg + 180.0) % 360.0 - 180.0
    return across_m * math.radians(turned), meridian_m * math.radians(latitude_deg - from_latitude_deg)


def positions_of(neighbours: Sequence[Neighbour]) -> dict[str, tuple[float, float]]:
    """Latitude and longitude of each outcrop that has any: the medians of its readings' positions."""
    found: dict[str, list[tuple[float, float]]] = {}
    for n in neighbours:
        if n.reading.latitude_deg is not None and n.reading.longitude_deg is not None:
            found.setdefault(n.outcrop, []).append((n.reading.latitude_deg, n.reading.longitude_deg))
    return {name: _middle(places) for name, places in found.items()}


def plan_of(
    neighbours: Sequence[Neighbour],
    outcrops: Sequence[str],
    current: str,
    fix: tuple[float, float] | None,
    hinge: tuple[float, float] | None,
) -> PlanState:
    """Lay out the outcrops around the current one; `fix` stands in for an outcrop without readings yet."""
    places = positions_of(neighbours)
    if fix is not None:
        places.setdefault(current, fix)
    names = dict.fromkeys((*outcrops, *(n.outcrop for n in neighbours)))
    unplaced = tuple(name for name in names if name not in places)
    if not places:
        return PlanState((), unplaced, hinge)
    centre = places[current] if current in places else next(iter(places.values()))
    attitudes = _attitudes(neighbours)
    overturned = _overturned(neighbours)
    shown = tuple(
        PlanOutcrop(
            name,
            *offset_m(*places[name], *centre),
            name == current,
            attitudes.get((name, "bedding")),
            attitudes.get((name, "cleavage")),
            attitudes.get((name, "lines")),
            name in overturned,
        )
        for name in names
        if name in places
    )
    return PlanState(shown, unplaced, hinge)


def _attitudes(neighbours: Sequence[Neighbour]) -> Mapping[tuple[str, str], tuple[float, float]]:
    axes: dict[tuple[str, str], list[Floats]] = {}
    for n in neighbours:
        kind = str(n.feature) if n.feature.is_plane else "lines"
        axes.setdefault((n.outcrop, kind), []).append(n.vector)
    return {key: _middle_attitude(np.stack(rows), plane=key[1] != "lines") for key, rows in axes.items()}


def _overturned(neighbours: Sequence[Neighbour]) -> set[str]:
    """Outcrops where more than half of the bedding was read as overturned, as the report draws it too."""
    marks: dict[str, list[bool]] = {}
    for n in neighbours:
        if str(n.feature) == "bedding":
            marks.setdefault(n.outcrop, []).append(n.reading.overturned)
    return {name for name, turned in marks.items() if sum(turned) * 2 > len(turned)}


def _middle_attitude(axes: Floats, *, plane: bool) -> tuple[float, float]:
    """Centre of the main cluster: where both limbs stand in an outcrop, their mean would be no bed at all."""
    centre, _ = robust_centre(axes)
    azimuth, inclination = strike_dip_deg(centre) if plane else trend_plunge_deg(centre)
    return float(azimuth), float(inclination)


def _middle(places: Sequence[tuple[float, float]]) -> tuple[float, float]:
    rows = np.array(places)
    # Longitudes are taken about the first one, so that the date line does not matter.
    about = (rows[:, 1] - rows[0, 1] + 180.0) % 360.0 - 180.0
    longitude = float(rows[0, 1] + np.median(about))
    return float(np.median(rows[:, 0])), (longitude + 180.0) % 360.0 - 180.0
