"""Where a reading was taken: coordinates typed in the ways maps and receivers print them, and fixes averaged.

Everything is WGS 84. Latitude is positive north, longitude positive east, in degrees; longitudes are kept as
-180 <= longitude < 180. Eastings and northings of the UTM grid are in metres. The convergence is the azimuth
of grid north, in degrees, positive clockwise of true north.

The grids are computed by the library pygeodesy (Krueger's series after Karney 2011, J. Geodesy 85, 475-485).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from analysis.errors import PositionError

if TYPE_CHECKING:
    from collections.abc import Sequence

GRID_SOUTH_deg, GRID_NORTH_deg = -80.0, 84.0  # the UTM grid and MGRS lettering end here
HAND = "hand"  # source of a position that somebody typed
BANDS = "CDEFGHJKLMNPQRSTUVWX"  # of 8 degrees from 80 S; X has 12
# Radius of a sphere of the Earth's volume, in metres: for distances between fixes, good to 0.6%.
EARTH_RADIUS_m = 6371000.8


@dataclass(frozen=True, slots=True)
class Position:
    """A place: latitude -90 to 90, longitude -180 to 180 degrees (180 becomes -180), WGS 84.

    `accuracy_m` is the radius that holds the place with a chance of about 68%, as receivers report it; None
    where nobody knows. `source` says how it was had ("gps", "hand").
    """

    latitude_deg: float
    longitude_deg: float
    altitude_m: float | None = None
    accuracy_m: float | None = None
    source: str = ""

    def __post_init__(self) -> None:
        latitude, longitude = float(self.latitude_deg), float(self.longitude_deg)
        if not (math.isfinite(latitude) and -90.0 <= latitude <= 90.0):
            raise PositionError(
                f"latitude {latitude:g} is outside -90 to 90",
                where="latitude",
                expected="degrees, north positive",
                mend="Check that latitude and longitude are not swapped.",
            )
        if not (math.isfinite(longitude) and -180.0 <= longitude <= 180.0):
            raise PositionError(
                f"longitude {longitude:g} is outside -180 to 180",
                where="longitude",
                expected="degrees, east positive",
                mend="West longitudes are negative, or carry a W.",
            )
        bounded = (("altitude", self.altitude_m, -math.inf), ("accuracy", self.accuracy_m, 0.0))
        for name, value, least in bounded:
            if value is not None and not (math.isfinite(value) and value >= least):
                raise PositionError(f"{name} {value:g} m is no {name}", where=name, expected="metres")
        object.__setattr__(self, "latitude_deg", latitude + 0.0)
        object.__setattr__(self, "longitude_deg", -180.0 if longitude == 180.0 else longitude + 0.0)

    def distance_m(self, other: Position) -> float:
        """Distance to another place in metres, on a sphere: for telling near from far, not for surveying."""
        north, east = _offsets_m(self, [other])[0]
        if math.hypot(north, east) < 10_000.0:
            return math.hypot(north, east)
        a, b = math.radians(self.latitude_deg), math.radians(other.latitude_deg)
        across = math.radians(other.longitude_deg - self.longitude_deg)
        h = math.sin((b - a) / 2) ** 2 + math.cos(a) * math.cos(b) * math.sin(across / 2) ** 2
        return 2.0 * EARTH_RADIUS_m * math.asin(min(1.0, math.sqrt(h)))


@dataclass(frozen=True, slots=True)
class UtmPosition:
    """A place on the UTM grid: zone 1 to 60, band letter C to X, easting and northing in metres.

    `convergence_deg` is the azimuth of grid north there, positive clockwise of true north.
    """

    zone: int
    band: str
    easting_m: float
    northing_m: float
    convergence_deg: float

    @property
    def is_north(self) -> bool:
        """Whether northings are counted from the equator (else from 10,000 km south of it)."""
        return self.band >= "N"


@dataclass(frozen=True, slots=True)
class AveragedPosition:
    """A position averaged from fixes.

    `spread_m` is the weighted root mean square distance of the fixes from their mean, None for one fix.
    """

    position: Position
    fixes: int
    spread_m: float | None


def to_utm(position: Position, zone: int | None = None) -> UtmPosition:
    """Give the place on the UTM grid, in its own zone (with the Norway and Svalbard exceptions) or in `zone`.

    Raises PositionError south of 80 S, north of 84 N, and for a zone more than one from the position's own.
    """
    if not GRID_SOUTH_deg <= position.latitude_deg < GRID_NORTH_deg:
        raise PositionError(
            f"the UTM grid does not reach latitude {position.latitude_deg:g}",
            where="latitude",
            expected="80 S to 84 N",
            mend="Give degrees.",
        )
    from pygeodesy.utm import toUtm8  # noqa: PLC0415 (start time: loaded with the first grid position)

    # A hair south of the equator, less than a micrometre, the library's band and half do not agree.
    latitude = position.latitude_deg if abs(position.latitude_deg) > 1e-11 else 0.0
    own = toUtm8(latitude, position.longitude_deg)
    found = own
    if zone is not None and zone != own.zone:
        apart = abs(zone - own.zone)
        if not 1 <= zone <= 60 or min(apart, 60 - apart) > 2:
            raise PositionError(
                f"zone {zone} is far from the position's own zone {own.zone}",
                where="zone",
                expected="the zone of the map in use, at most two from the position's own",
            )
        found = toUtm8(latitude, position.longitude_deg, zone=zone, strict=False)
    return UtmPosition(
        zone=int(found.zone),
        band=str(own.band),
        easting_m=float(found.easting),
        northing_m=float(found.northing),
        convergence_deg=float(found.convergence),
    )


def from_utm(zone: int, north: bool, easting_m: float, northing_m: float) -> Position:
    """Place at an easting and northing, in metres, of a UTM zone, 1 to 60, in the northern or southern half.

    Raises PositionError for a zone, easting or northing that the grid does not have.
    """
    if not 1 <= zone <= 60:
        raise PositionError(f"zone {zone} is no UTM zone", where="zone", expected="1 to 60")
    # Between 100 and 900 km a zone reaches past its edges on either side, as maps near an edge do.
    if not 100_000.0 <= easting_m <= 900_000.0:
        raise PositionError(
            f"easting {easting_m:g} m is outside the zone",
            where="easting",
            expected="100000 to 900000 m",
            mend="Check that easting and northing are not swapped.",
        )
    low, high = (0.0, 9_400_000.0) if north else (1_000_000.0, 10_000_000.0)
    if not low <= northing_m <= high:
        raise PositionError(
            f"northing {northing_m:g} m is outside the grid",
            where="northing",
            expected=f"{low:.0f} to {high:.0f} m",
        )
    latitude, longitude = _utm_degrees(zone, "N" if north else "S", easting_m, northing_m)
    return Position(latitude, longitude)


def to_mgrs(position: Position, digits: int = 5) -> str:
    """Grid reference of the square that holds the place, as 26UMU0766172630.

    `digits` is the count for each of easting and northing: 5 is a square of 1 m, 1 a square of 10 km.
    Raises PositionError where the lettering ends (80 S to 84 N) and for digits outside 1 to 5.
    """
    if not 1 <= digits <= 5:
        raise PositionError(f"{digits} digits are no grid reference", where="digits", expected="1 to 5")
    utm = to_utm(position)
    from pygeodesy.utm import Utm  # noqa: PLC0415 (as in to_utm)

    half = "N" if utm.is_north else "S"
    mgrs = Utm(utm.zone, half, utm.easting_m, utm.northing_m, band=utm.band).toMgrs()
    cut = 10 ** (5 - digits)
    east, north = int(float(mgrs.easting) // cut), int(float(mgrs.northing) // cut)
    return f"{utm.zone:02d}{mgrs.band}{mgrs.digraph}{east:0{digits}d}{north:0{digits}d}"


def from_mgrs(text: str) -> Position:
    """Place of a grid reference: the middle of its square, with half the square's diagonal as accuracy.

    Raises PositionError for text that is no grid reference.
    """
    squeezed = "".join(text.split()).upper()
    letters = squeezed.rstrip("0123456789")
    figures = squeezed[len(letters) :]
    if len(figures) % 2 or not 2 <= len(figures) <= 10:
        raise PositionError(
            f"{text.strip()!r} has {len(figures)} figures",
            where="grid reference",
            expected="as many for the easting as for the northing, 1 to 5 each",
        )
    from pygeodesy.errors import MGRSError  # noqa: PLC0415 (as in to_utm)
    from pygeodesy.mgrs import parseMGRS  # noqa: PLC0415

    try:
        corner = parseMGRS(squeezed if letters[:2].isdigit() else "0" + squeezed)
        utm = corner.toUtm()
    except (MGRSError, ValueError, TypeError) as error:
        raise PositionError(
            f"{text.strip()!r} is no grid reference",
            where="grid reference",
            expected="zone, band, two letters of the square, figures: 26U MU 07661 72630",
        ) from error
    size = float(10 ** (5 - len(figures) // 2))
    half = "N" if str(corner.band) >= "N" else "S"
    easting, northing = float(utm.easting) + size / 2, float(utm.northing) + size / 2
    # The middle of a large square at the grid's end may lie beyond it: a metre is some 1e-5 degrees.
    latitude, longitude = _utm_degrees(int(utm.zone), half, easting, northing, beyond_deg=size * 1e-5)
    return Position(latitude, longitude, accuracy_m=size / math.sqrt(2.0))


def average_fixes(fixes: Sequence[Position]) -> AveragedPosition:
    """Average fixes with weights 1/accuracy squared.

    Successive fixes of one receiver share their errors, so the mean is not taken to be better than its fixes:
    its accuracy is the weighted mean of theirs, or the spread where that is larger. Fixes of unknown accuracy
    count only where all are such; the mean's accuracy then is unknown too. Raises PositionError for no fix.
    """
    if not fixes:
        raise PositionError("there is no fix to average", where="position", expected="at least one fix")
    known = [fix for fix in fixes if fix.accuracy_m is not None]
    used = known or list(fixes)
    # A receiver that claims less than a centimetre claims nothing; the floor keeps its weight finite.
    radii = np.array([1.0 if fix.accuracy_m is None else max(fix.accuracy_m, 0.01) for fix in used])
    weights = 1.0 / radii**2
    weights /= weights.sum()
    first = used[0]
    offsets = _offsets_m(first, used)
    mean = weights @ offsets
    spread = float(np.sqrt(weights @ np.sum((offsets - mean) ** 2, axis=1))) if len(used) > 1 else None
    accuracy: float | None = None
    if known:
        accuracy = max(float(np.sqrt(weights @ radii**2)), spread or 0.0)
    latitude = first.latitude_deg + math.degrees(mean[0] / EARTH_RADIUS_m)
    per_degree = EARTH_RADIUS_m * max(math.cos(math.radians(first.latitude_deg)), 1e-9)
    longitude = (first.longitude_deg + math.degrees(mean[1] / per_degree) + 180.0) % 360.0 - 180.0
    pairs = zip(weights, used, strict=True)
    heights = [(float(w), fix.altitude_m) for w, fix in pairs if fix.altitude_m is not None]
    altitude = sum(w * h for w, h in heights) / sum(w for w, _ in heights) if heights else None
    place = Position(max(-90.0, min(90.0, latitude)), longitude, altitude, accuracy, first.source)
    return AveragedPosition(place, len(used), spread)


def with_source(position: Position, source: str) -> Position:
    """Give the same place with another source."""
    return replace(position, source=source)


def _offsets_m(origin: Position, places: Sequence[Position]) -> Any:  # noqa: ANN401 (a float array, (n, 2))
    """Metres north and east of an origin, shape (n, 2), across the date line where that is shorter."""
    latitudes = np.array([place.latitude_deg for place in places])
    longitudes = np.array([place.longitude_deg for place in places])
    across = (longitudes - origin.longitude_deg + 180.0) % 360.0 - 180.0
    north = np.radians(latitudes - origin.latitude_deg) * EARTH_RADIUS_m
    east = np.radians(across) * EARTH_RADIUS_m * math.cos(math.radians(origin.latitude_deg))
    return np.stack([north, east], axis=-1)


def _utm_degrees(
    zone: int, half: str, easting_m: float, northing_m: float, beyond_deg: float = 0.0
) -> tuple[float, float]:
    from pygeodesy.utm import Utm, UTMError  # noqa: PLC0415 (as in to_utm)

    try:
        # With a band given the library leaves the limits to us; which band does not change the figures.
        found = Utm(zone, half, easting_m, northing_m, band="N" if half == "N" else "M").toLatLon()
        latitude, longitude = float(found.lat), float(found.lon)
    except (UTMError, ValueError):
        latitude = longitude = math.nan
    beyond_deg += 0.001  # grid lines at the ends of the grid run a little past it
    if not GRID_SOUTH_deg - beyond_deg <= latitude <= GRID_NORTH_deg + beyond_deg:
        raise PositionError(
            f"easting {easting_m:g} m, northing {northing_m:g} m is no place in zone {zone}",
            where="grid position",
            expected="a place on the UTM grid, 80 S to 84 N",
        )
    return latitude, (longitude + 180.0) % 360.0 - 180.0
