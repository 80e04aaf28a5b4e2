"""One plane, one line: frozen records that cannot hold an impossible attitude.

For many at once use the arrays of `analysis.orient.vectors`; these records are for single readings,
where a wrong number must be named, not computed with.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from analysis.errors import AttitudeError
from analysis.orient import vectors

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats

SAME_DIRECTION = 1e-12  # sine of the angle below which two axes are taken as one


def checked_azimuth_deg(value: float, name: str) -> float:
    """Give an azimuth in degrees as 0 <= azimuth < 360 (360 becomes 0), or raise AttitudeError naming it."""
    if not (math.isfinite(value) and 0.0 <= value <= 360.0):
        raise AttitudeError(
            f"{name} {value:.10g} is no azimuth",
            where=name,
            expected="0 to 360 degrees clockwise from north",
            mend="Read the compass again, or type the azimuth with three digits, as 045.",
        )
    return 0.0 if value == 360.0 else value + 0.0


def checked_inclination_deg(value: float, name: str) -> float:
    """Give a dip or plunge in degrees, 0 to 90, or raise AttitudeError naming it."""
    if not (math.isfinite(value) and 0.0 <= value <= 90.0):
        raise AttitudeError(
            f"{name} {value:.10g} is outside 0 to 90",
            where=name,
            expected="0 (horizontal) to 90 (vertical) degrees",
            mend="An overturned bed keeps its dip below 90 and is marked overturned.",
        )
    return value + 0.0


@dataclass(frozen=True, slots=True)
class Line:
    """A line by trend (0 to 360 degrees, 360 becomes 0) and plunge (0 to 90 degrees down)."""

    trend_deg: float
    plunge_deg: float

    def __post_init__(self) -> None:
        object.__setattr__(self, "trend_deg", checked_azimuth_deg(float(self.trend_deg), "trend"))
        object.__setattr__(self, "plunge_deg", checked_inclination_deg(float(self.plunge_deg), "plunge"))

    @classmethod
    def from_vector(cls, vector: Floats) -> Line:
        """Make the line along an axis, shape (3,), of any length but zero."""
        return cls(*_trend_plunge_deg(vector))

    @property
    def vector(self) -> Floats:
        """Downward unit vector, shape (3,): north, east, down."""
        return _line_vector(self.trend_deg, self.plunge_deg)

    def angle_deg(self, other: Line) -> float:
        """Acute angle to another line, 0 to 90 degrees."""
        return float(vectors.axis_angle_deg(self.vector, other.vector))

    def plane_with(self, other: Line) -> Plane:
        """Find the plane that holds both lines; raises AttitudeError where they are parallel."""
        return Plane.from_pole(_crossed(self.vector, other.vector, "two parallel lines span no plane"))


@dataclass(frozen=True, slots=True)
class Plane:
    """A plane by right-hand-rule strike (0 to 360 degrees, 360 becomes 0) and dip (0 to 90 degrees)."""

    strike_deg: float
    dip_deg: float

    def __post_init__(self) -> None:
        object.__setattr__(self, "strike_deg", checked_azimuth_deg(float(self.strike_deg), "strike"))
        object.__setattr__(self, "dip_deg", checked_inclination_deg(float(self.dip_deg), "dip"))

    @classmethod
    def from_dip_direction(cls, dip_direction_deg: float, dip_deg: float) -> Plane:
        """Make a plane from the azimuth it dips towards, 0 to 360 degrees, and its dip."""
        azimuth = checked_azimuth_deg(float(dip_direction_deg), "dip direction")
        return cls(float(vectors.wrap_azimuth_deg(azimuth - 90.0)), dip_deg)

    @classmethod
    def from_pole(cls, pole: Floats) -> Plane:
        """Make the plane at right angles to an axis, shape (3,), of any length but zero."""
        trend, plunge = _trend_plunge_deg(pole)
        return cls(_wrapped_deg(trend + 90.0), 90.0 - plunge)

    @property
    def dip_direction_deg(self) -> float:
        """Azimuth the plane dips towards: strike + 90, 0 to 360 degrees."""
        return _wrapped_deg(self.strike_deg + 90.0)

    @property
    def pole(self) -> Floats:
        """Downward unit normal, shape (3,): north, east, down."""
        return _line_vector(self.strike_deg - 90.0, 90.0 - self.dip_deg)

    @property
    def reversed(self) -> Plane:
        """The plane of the same dip that dips the opposite way: strike + 180."""
        return Plane(float(vectors.wrap_azimuth_deg(self.strike_deg + 180.0)), self.dip_deg)

    def angle_deg(self, other: Plane) -> float:
        """Acute dihedral angle to another plane, 0 to 90 degrees."""
        return float(vectors.axis_angle_deg(self.pole, other.pole))

    def intersection(self, other: Plane) -> Line:
        """Find the line in which two planes meet; raises AttitudeError where they are parallel."""
        return Line.from_vector(_crossed(self.pole, other.pole, "two parallel planes meet in no line"))

    def line_at_pitch(self, pitch_deg: float, from_strike_end_deg: float | None = None) -> Line:
        """Find the line in this plane at a pitch, 0 to 180 degrees, measured down from one end of the strike.

        `from_strike_end_deg` is the azimuth of the end meant, within 90 degrees of it; without it the strike
        itself is the end. Raises AttitudeError for a pitch outside 0 to 180 and for an end at right angles to
        the strike, which names neither.
        """
        if not (math.isfinite(pitch_deg) and 0.0 <= pitch_deg <= 180.0):
            raise AttitudeError(
                f"pitch {pitch_deg:g} is outside 0 to 180", where="pitch", expected="0 to 180 degrees"
            )
        along = vectors.line_vector(self.strike_deg, 0.0)
        if from_strike_end_deg is not None:
            end = checked_azimuth_deg(float(from_strike_end_deg), "end of the strike")
            leaning = math.cos(math.radians(end - self.strike_deg))
            if abs(leaning) < SAME_DIRECTION:
                raise AttitudeError(
                    f"azimuth {from_strike_end_deg:g} lies at right angles to the strike {self.strike_deg:g}",
                    where="pitch",
                    expected="the end of the strike that the pitch is measured from",
                )
            along = along * math.copysign(1.0, leaning)
        down_dip = vectors.line_vector(self.dip_direction_deg, self.dip_deg)
        pitch = math.radians(pitch_deg)
        return Line.from_vector(along * math.cos(pitch) + down_dip * math.sin(pitch))

    def pitch_deg(self, line: Line) -> float:
        """Pitch, 0 <= pitch < 180 degrees from the strike, of a line projected onto this plane.

        Raises AttitudeError for the pole, which has no pitch.
        """
        flat = vectors.line_vector(self.strike_deg, 0.0)
        down_dip = vectors.line_vector(self.dip_direction_deg, self.dip_deg)
        along, down = float(line.vector @ flat), float(line.vector @ down_dip)
        if math.hypot(along, down) < SAME_DIRECTION:
            raise AttitudeError("the pole of a plane has no pitch on it", where="pitch")
        pitch = math.degrees(math.atan2(down, along)) % 180.0
        # A tiny negative angle is rounded up to 180.0 by the remainder; it is the strike all the same.
        return pitch if pitch < 180.0 else 0.0

    def apparent_dip_deg(self, section_azimuth_deg: float) -> float:
        """Apparent dip, 0 to 90 degrees, on a vertical section of this azimuth.

        tan(apparent dip) = tan(dip) sin(angle between section and strike). A section along the strike shows
        0, also of a vertical plane. Raises AttitudeError for an azimuth outside 0 to 360.
        """
        section = checked_azimuth_deg(float(section_azimuth_deg), "section azimuth")
        off_strike = math.radians(section - self.strike_deg)
        if abs(math.sin(off_strike)) < SAME_DIRECTION:
            return 0.0
        return math.degrees(
            math.atan2(
                math.sin(math.radians(self.dip_deg)) * abs(math.sin(off_strike)),
                math.cos(math.radians(self.dip_deg)),
            )
        )


# The check makes a dozen records after every reading, so these do for one axis in the standard library's numbers
# what `analysis.orient.vectors` does for arrays; a test holds them to it.


def _line_vector(trend_deg: float, plunge_deg: float) -> Floats:
    trend, plunge = math.radians(trend_deg), math.radians(plunge_deg)
    horizontal = math.cos(plunge)
    return np.array([horizontal * math.cos(trend), horizontal * math.sin(trend), math.sin(plunge)])


def _trend_plunge_deg(vector: Floats) -> tuple[float, float]:
    north, east, down = (float(part) for part in vector)
    length = math.hypot(north, east, down)
    if not (math.isfinite(length) and length > 0.0):
        vectors.unit(vector)  # raises, in the words that arrays get
    rounding = vectors.ROUNDING * length
    level, along_north = abs(down) <= rounding, abs(east) <= rounding
    if (down if not level else north if along_north else east) < 0.0:
        north, east, down = -north, -east, -down
    plunge = math.degrees(math.atan2(max(down, 0.0), math.hypot(north, east)))
    # Adding zero turns -0.0 into 0.0, which atan2 would read as the opposite direction.
    return _wrapped_deg(math.degrees(math.atan2(east + 0.0, north + 0.0))), plunge


def _wrapped_deg(azimuth_deg: float) -> float:
    wrapped = azimuth_deg % 360.0
    return wrapped if wrapped < 360.0 else 0.0


def _crossed(first: Floats, second: Floats, fault: str) -> Floats:
    product = np.cross(first, second)
    if float(np.linalg.norm(product)) < SAME_DIRECTION:
        raise AttitudeError(fault, expected="two different directions")
    return np.asarray(product, dtype=float)
