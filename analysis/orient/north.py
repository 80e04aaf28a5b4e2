"""True north: declination and the expected magnetic field, and the convergence of the UTM grid.

Azimuths read against magnetic or grid north become true ones by adding a correction, in degrees, positive
clockwise (east):

    true azimuth = magnetic azimuth + declination        true azimuth = grid azimuth + grid convergence

The field is that of the World Magnetic Model 2025 (Chulliat et al. 2025, The US/UK World Magnetic Model for
2025-2030, NOAA), good from the start of 2025 to the end of 2029, computed offline by the library pygeomag.
Where no correction can be had the state says why; it is never a silent zero. A correction is stored with the
reading and is never applied twice.

Nothing here reads a clock: the date is always given.
"""

from __future__ import annotations

import datetime as dt
import functools
import math
import threading
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING, Any

from analysis.errors import NorthError
from analysis.orient.attitudes import Line, Plane
from analysis.orient.vectors import wrap_azimuth_deg

if TYPE_CHECKING:
    from analysis.orient.position import Position

MODEL_NAME = "WMM2025"
FIRST_YEAR = 2025
YEAR_AFTER = 2030
# Horizontal field, in nT, below which the model's authors warn of compasses, and below which they give the
# declination up ("caution" and "blackout" zones of the WMM2025 report; the figures as pygeomag carries them).
CAUTION_nT = 6000.0
BLACKOUT_nT = 2000.0

# The library keeps scratch numbers in the model object, so two threads must not compute at once.
_one_at_a_time = threading.Lock()


class Reference(StrEnum):
    """The north that an azimuth was read from; the value is the word used in files."""

    TRUE = "true"
    MAGNETIC = "magnetic"
    GRID = "grid"


class NorthState(StrEnum):
    """Whether azimuths can be given from true north, or why not."""

    TRUE = "true"
    CORRECTED = "corrected"
    CORRECTED_WEAK = "corrected, weak field"
    NO_POSITION = "no position"
    NO_DATE = "no date"
    DATE_OUTSIDE_MODEL = "date outside the model"
    BLACKOUT = "too near the magnetic pole"
    NO_GRID = "no grid here"

    @property
    def is_true(self) -> bool:
        """Whether azimuths come out from true north."""
        return self in (NorthState.TRUE, NorthState.CORRECTED, NorthState.CORRECTED_WEAK)


@dataclass(frozen=True, slots=True)
class MagneticField:
    """The field that the model expects at one place and time.

    Declination is positive east, inclination positive down, in degrees; strengths are in nanotesla (nT).
    `declination_error_deg` is the standard error that the model's authors give for the declination.
    """

    declination_deg: float
    inclination_deg: float
    strength_nT: float  # noqa: N815 (a unit keeps its case: nT is nanotesla)
    horizontal_nT: float  # noqa: N815 (as above)
    declination_error_deg: float
    year: float
    model: str = MODEL_NAME

    @property
    def zone(self) -> str:
        """What the model's authors say of compasses here: "", "caution" or "blackout"."""
        if self.horizontal_nT < BLACKOUT_nT:
            return "blackout"
        return "caution" if self.horizontal_nT < CAUTION_nT else ""


@dataclass(frozen=True, slots=True)
class NorthCorrection:
    """What to add to azimuths of one reference to reach true north, or why that cannot be said.

    `correction_deg` is None where it is unknown; `model` then is empty. `message` is a line for the page.
    """

    reference: Reference
    state: NorthState
    correction_deg: float | None
    model: str
    message: str

    @property
    def is_true(self) -> bool:
        """Whether azimuths come out from true north."""
        return self.state.is_true

    def checked_for(self, reference: Reference | str) -> NorthCorrection:
        """Give itself, or raise NorthError where azimuths of another reference are to be corrected."""
        if checked_reference(reference) is not self.reference:
            raise NorthError(
                f"a correction of {self.reference} north does not fit a reading from {reference} north",
                where="north_reference",
                expected=f"{self.reference}",
            )
        return self

    def azimuth_deg(self, azimuth_deg: float) -> float:
        """Correct an azimuth, in degrees; where the correction is unknown it stays as it was read."""
        return float(wrap_azimuth_deg(azimuth_deg + (self.correction_deg or 0.0)))

    def plane(self, plane: Plane) -> Plane:
        """Correct a plane's strike; where the correction is unknown the plane stays as it was read."""
        return Plane(self.azimuth_deg(plane.strike_deg), plane.dip_deg)

    def line(self, line: Line) -> Line:
        """Correct a line's trend; where the correction is unknown the line stays as it was read."""
        return Line(self.azimuth_deg(line.trend_deg), line.plunge_deg)


def decimal_year(when: dt.date) -> float:
    """Year with its fraction of a date or a datetime (an aware one is taken in UTC)."""
    if isinstance(when, dt.datetime):
        moment = when.astimezone(dt.UTC).replace(tzinfo=None) if when.tzinfo else when
    else:
        moment = dt.datetime(when.year, when.month, when.day)  # noqa: DTZ001 (a bare date has no zone)
    start = moment.replace(month=1, day=1, hour=0, minute=0, second=0, microsecond=0)
    days = 366 if _is_leap(moment.year) else 365
    return moment.year + (moment - start).total_seconds() / (days * 86400.0)


def magnetic_field(position: Position, when: dt.date) -> MagneticField:
    """Field that the model expects at a position and date.

    A position without an altitude is taken at the ellipsoid: a kilometre changes the declination by about
    0.01 degrees. Raises NorthError for a date outside the model's years.
    """
    year = decimal_year(when)
    if not FIRST_YEAR <= year < YEAR_AFTER:
        raise NorthError(
            f"{when:%Y-%m-%d} is outside the years of the magnetic model {MODEL_NAME}",
            where="date",
            expected=f"{FIRST_YEAR}-01-01 to {YEAR_AFTER - 1}-12-31",
            mend="Set the tablet's clock; if it is right, a newer Hingewise carries a newer model.",
        )
    return _field(position.latitude_deg, position.longitude_deg, position.altitude_m or 0.0, year)


def north_correction(
    reference: Reference | str,
    position: Position | None,
    when: dt.date | None,
    *,
    grid_zone: int | None = None,
) -> NorthCorrection:
    """Correction that takes azimuths read from `reference` to true north at a place and date.

    `grid_zone` is the UTM zone of the map in use, 1 to 60, where it is not the position's own.

    Raises NorthError for a reference that is no word of Reference; everything else that stands in the way is
    a state of the result, with a message.
    """
    named = checked_reference(reference)
    if named is Reference.TRUE:
        return NorthCorrection(named, NorthState.TRUE, 0.0, "", "true north as entered")
    if position is None:
        return _unknown(named, NorthState.NO_POSITION, "no position yet")
    if named is Reference.GRID:
        return _grid_correction(position, grid_zone)
    if when is None:
        return _unknown(named, NorthState.NO_DATE, "no date")
    return _magnetic_correction(position, when)


def correct_once(
    azimuth_deg: float, *, stored_correction_deg: float | None, correction: NorthCorrection
) -> float:
    """Give the true azimuth of one that was kept uncorrected, now that a correction is known.

    Raises NorthError where the reading was corrected already, and where the correction is still unknown.
    """
    if stored_correction_deg is not None:
        raise NorthError(
            f"the azimuth {azimuth_deg:g} was corrected by {stored_correction_deg:+g} degrees already",
            where="correction_deg",
            expected="a reading kept without correction",
            mend="Enter it anew if that correction was wrong.",
        )
    if correction.correction_deg is None:
        raise NorthError(correction.message, where="correction_deg", expected="a known correction")
    return correction.azimuth_deg(azimuth_deg)


def grid_convergence_deg(position: Position, zone: int | None = None) -> float:
    """Azimuth of UTM grid north at a position, in degrees, positive clockwise of true north.

    `zone` is the UTM zone, 1 to 60; without it the position's own. Raises PositionError outside the grid
    (80 S to 84 N).
    """
    from analysis.orient.position import to_utm  # noqa: PLC0415 (positions are needed by grid users only)

    return to_utm(position, zone=zone).convergence_deg


def checked_reference(reference: Reference | str) -> Reference:
    """Give the reference that a word names, or raise NorthError."""
    try:
        return Reference(reference)
    except ValueError:
        raise NorthError(
            f"{reference!r} names no north", where="north_reference", expected="true, magnetic or grid"
        ) from None


def _magnetic_correction(position: Position, when: dt.date) -> NorthCorrection:
    try:
        field = magnetic_field(position, when)
    except NorthError as error:
        return _unknown(Reference.MAGNETIC, NorthState.DATE_OUTSIDE_MODEL, error.what)
    if field.zone == "blackout":
        why = "too near the magnetic pole for a compass"
        return _unknown(Reference.MAGNETIC, NorthState.BLACKOUT, why)
    correction = round(field.declination_deg, 2)
    text = f"true north: {correction:+.1f}° added to magnetic ({MODEL_NAME})"
    state = NorthState.CORRECTED
    if field.zone:
        state = NorthState.CORRECTED_WEAK
        text += f"; the compass is weak here, north ±{field.declination_error_deg:.1f}°"
    return NorthCorrection(Reference.MAGNETIC, state, correction, f"{MODEL_NAME} {when:%Y-%m-%d}", text)


def _grid_correction(position: Position, zone: int | None) -> NorthCorrection:
    from analysis.errors import PositionError  # noqa: PLC0415 (beside its use)
    from analysis.orient.position import to_utm  # noqa: PLC0415 (as in grid_convergence_deg)

    try:
        utm = to_utm(position, zone=zone)
    except PositionError as error:
        return _unknown(Reference.GRID, NorthState.NO_GRID, error.what)
    correction = round(utm.convergence_deg, 2)
    model = f"UTM {utm.zone}{utm.band}"
    text = f"true north: {correction:+.1f}° added to grid ({model})"
    return NorthCorrection(Reference.GRID, NorthState.CORRECTED, correction, model, text)


def _unknown(reference: Reference, state: NorthState, why: str) -> NorthCorrection:
    return NorthCorrection(reference, state, None, "", f"{reference}, not corrected: {why}")


def _is_leap(year: int) -> bool:
    return year % 4 == 0 and (year % 100 != 0 or year % 400 == 0)


@functools.lru_cache(maxsize=1)
def _model() -> Any:  # noqa: ANN401 (the library ships no types)
    from pygeomag import GeoMag  # noqa: PLC0415 (start time: loaded with the first declination asked for)

    return GeoMag(coefficients_file="wmm/WMM_2025.COF")


def _field(latitude_deg: float, longitude_deg: float, altitude_m: float, year: float) -> MagneticField:
    with _one_at_a_time:
        found = _model().calculate(latitude_deg, longitude_deg, altitude_m / 1000.0, year)
        error_deg = found.calculate_uncertainty().d if found.h > 0.0 else math.inf
    return MagneticField(
        declination_deg=float(found.d),
        inclination_deg=float(found.i),
        strength_nT=float(found.f),
        horizontal_nT=float(found.h),
        declination_error_deg=float(error_deg),
        year=year,
    )
