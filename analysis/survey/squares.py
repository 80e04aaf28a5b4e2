"""Squares of the map, and windows of them, without a projection.

The Earth is cut into bands of latitude, each as high as a square is wide, and each band into as many squares as
its middle holds. So squares are within a few per cent of their size everywhere, no seam falls on the date line, and
those beside the poles are as good as any. Neighbouring bands do not line up.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import SettingError

if TYPE_CHECKING:
    from collections.abc import Iterable

    import numpy.typing as npt

    from analysis.orient.vectors import Floats

EARTH_RADIUS_KM: Final = 6371.0088  # mean radius of the WGS 84 ellipsoid (Moritz 2000, from memory)
_SMALLEST_KM, _LARGEST_KM = 0.01, 2000.0


@dataclass(frozen=True, slots=True)
class Grid:
    """Squares `cell_km` wide; `moving` takes each square together with those around it, three by three."""

    cell_km: float
    moving: bool = False

    def __post_init__(self) -> None:
        if not (math.isfinite(self.cell_km) and _SMALLEST_KM <= self.cell_km <= _LARGEST_KM):
            raise SettingError(
                f"{self.cell_km:g} km is no width of a square",
                where="--cell",
                expected=f"{_SMALLEST_KM:g} to {_LARGEST_KM:g} km",
            )

    @property
    def bands(self) -> int:
        """Number of bands from pole to pole."""
        return max(1, round(math.pi * EARTH_RADIUS_KM / self.cell_km))

    def squares_in(self, band: npt.ArrayLike) -> npt.NDArray[np.int64]:
        """Number of squares in a band, 0 at the south pole."""
        middle = np.radians((np.asarray(band) + 0.5) * 180.0 / self.bands - 90.0)
        around = 2.0 * math.pi * EARTH_RADIUS_KM * np.cos(middle) / self.cell_km
        return np.maximum(np.rint(around).astype(np.int64), 1)

    def square_of(
        self, latitude_deg: Floats, longitude_deg: Floats
    ) -> tuple[npt.NDArray[np.int64], npt.NDArray[np.int64]]:
        """Band and place within the band, each (N,), of positions in degrees."""
        band = np.floor((latitude_deg + 90.0) / 180.0 * self.bands).astype(np.int64)
        band = np.clip(band, 0, self.bands - 1)
        squares = self.squares_in(band)
        # 180 degrees west is 180 degrees east.
        turn = np.mod((longitude_deg + 180.0) / 360.0, 1.0)
        return band, np.minimum((turn * squares).astype(np.int64), squares - 1)

    def centre_deg(self, name: str) -> tuple[float, float]:
        """Latitude and longitude of the middle of a square."""
        band, place = parts_of(name)
        latitude = (band + 0.5) * 180.0 / self.bands - 90.0
        return latitude, (place + 0.5) * 360.0 / int(self.squares_in(band)) - 180.0

    def window_of(self, name: str, held: Iterable[str]) -> tuple[str, ...]:
        """Names, among those held, of the square and those around it: the three nearest of three bands."""
        held = held if isinstance(held, set | frozenset) else set(held)
        band, _ = parts_of(name)
        _, longitude = self.centre_deg(name)
        found = []
        for other in range(max(0, band - 1), min(self.bands, band + 2)):
            squares = int(self.squares_in(other))
            width_deg = 360.0 / squares
            first = (longitude + 180.0) / width_deg - 0.5  # the place whose middle has this longitude
            low = math.ceil(first - 1.5)
            places = {place % squares for place in range(low, low + 3)}
            found += [square_name(other, place) for place in sorted(places)]
        return tuple(square for square in found if square in held)


def square_name(band: int, place: int) -> str:
    """Name of a square."""
    return f"square {band}-{place}"


def parts_of(name: str) -> tuple[int, int]:
    """Band and place of a square's name."""
    band, place = name.removeprefix("square ").split("-")
    return int(band), int(place)


def upward_vectors(latitude_deg: Floats, longitude_deg: Floats) -> Floats:
    """Unit vectors, shape (..., 3), from the middle of a round Earth; NaN where the position is."""
    latitude, longitude = np.radians(latitude_deg), np.radians(longitude_deg)
    level = np.cos(latitude)
    return np.stack([level * np.cos(longitude), level * np.sin(longitude), np.sin(latitude)], axis=-1)


def position_of(vector: Floats) -> tuple[float, float] | None:
    """Latitude and longitude, degrees, that a sum of upward vectors, shape (3,), points at; None for no sum."""
    x, y, z = (float(value) for value in vector)
    if math.hypot(x, y, z) < 1e-9:
        return None
    return math.degrees(math.atan2(z, math.hypot(x, y))), math.degrees(math.atan2(y, x))
