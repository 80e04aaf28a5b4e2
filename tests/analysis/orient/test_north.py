"""True north: corrections, their states and their limits."""

import subprocess
import sys
import threading
from datetime import UTC, date, datetime, timedelta, timezone

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import NorthError, PositionError
from analysis.orient.attitudes import Line, Plane
from analysis.orient.north import (
    NorthState,
    Reference,
    correct_once,
    decimal_year,
    grid_convergence_deg,
    magnetic_field,
    north_correction,
)
from analysis.orient.position import Position

PLACE = Position(56.1, -4.2, altitude_m=300.0)
DAY = date(2026, 5, 14)


@pytest.mark.parametrize(
    ("when", "year"),
    [
        (date(2026, 1, 1), 2026.0),
        (datetime(2027, 7, 2, 12, tzinfo=UTC), 2027.5),
        (date(2028, 12, 31), 2028.0 + 365 / 366),  # a leap year
        (datetime(2026, 1, 1, 1, tzinfo=timezone(timedelta(hours=2))), 2025.0 + (365 - 1 / 24) / 365),
        (datetime(2026, 1, 1), 2026.0),  # noqa: DTZ001 (a time without a zone is taken as it stands)
    ],
)
def test_a_date_becomes_a_decimal_year(when, year):
    """Dates and times become years with their fraction, aware times in UTC."""
    assert decimal_year(when) == pytest.approx(year, abs=1e-9)


def test_a_magnetic_azimuth_becomes_a_true_one():
    """The correction is the declination, is named with model and date, and turns azimuths clockwise."""
    found = north_correction("magnetic", PLACE, DAY)
    field = magnetic_field(PLACE, DAY)
    assert found.state is NorthState.CORRECTED
    assert found.correction_deg == pytest.approx(field.declination_deg, abs=0.005)
    assert found.model == "WMM2025 2026-05-14"
    assert found.azimuth_deg(100.0) == pytest.approx(100.0 + found.correction_deg)
    assert found.plane(Plane(100.0, 30.0)).dip_deg == 30.0
    assert found.line(Line(0.0, 20.0)).trend_deg == pytest.approx(found.correction_deg % 360.0)


def test_altitude_changes_little_and_its_lack_nothing():
    """Without an altitude the ellipsoid is taken; a kilometre changes the declination by less than 0.02°."""
    low = magnetic_field(Position(56.1, -4.2), DAY).declination_deg
    assert low == magnetic_field(Position(56.1, -4.2, altitude_m=0.0), DAY).declination_deg
    high = magnetic_field(Position(56.1, -4.2, altitude_m=1000.0), DAY).declination_deg
    assert 0.0 < abs(high - low) < 0.02


def test_the_longitude_may_be_zero_and_the_date_line():
    """The field is continuous through longitudes 0 and 180 and through the equator."""
    for one, other in [((50, -1e-6), (50, 1e-6)), ((50, 180.0), (50, 179.999999)), ((-1e-6, 20), (1e-6, 20))]:
        first, second = magnetic_field(Position(*one), DAY), magnetic_field(Position(*other), DAY)
        assert first.declination_deg == pytest.approx(second.declination_deg, abs=1e-4)


@pytest.mark.parametrize(
    ("position", "when", "state", "words"),
    [
        (None, DAY, NorthState.NO_POSITION, "no position"),
        (PLACE, None, NorthState.NO_DATE, "no date"),
        (PLACE, date(2024, 12, 31), NorthState.DATE_OUTSIDE_MODEL, "2024-12-31"),
        (PLACE, date(2030, 1, 1), NorthState.DATE_OUTSIDE_MODEL, "2030-01-01"),
        (PLACE, datetime(1970, 1, 1, tzinfo=UTC), NorthState.DATE_OUTSIDE_MODEL, "1970-01-01"),
        (Position(85.8, 139.0), DAY, NorthState.BLACKOUT, "magnetic pole"),
    ],
)
def test_what_cannot_be_corrected_says_so_and_is_no_zero(position, when, state, words):
    """Without position or date, or outside the model, the azimuth stays magnetic and the state says why."""
    found = north_correction(Reference.MAGNETIC, position, when)
    assert found.state is state
    assert found.correction_deg is None
    assert found.model == ""
    assert not found.is_true
    assert found.message.startswith("magnetic, not corrected: ")
    assert words in found.message
    assert found.azimuth_deg(123.4) == 123.4


def test_the_model_serves_its_first_and_last_day():
    """2025-01-01 and the end of 2029-12-31 are inside the model."""
    for when in (date(2025, 1, 1), datetime(2029, 12, 31, 23, 59, 59, tzinfo=UTC)):
        assert north_correction("magnetic", PLACE, when).is_true


def test_a_date_outside_the_model_is_a_typed_error_of_the_field():
    """The field itself refuses a date outside the model, and says which dates it takes."""
    with pytest.raises(NorthError, match="2025-01-01 to 2029-12-31"):
        magnetic_field(PLACE, date(2031, 6, 1))


def test_a_weak_field_is_corrected_with_a_caution():
    """In the model's caution zone the correction is given, and the message says how loose north is."""
    found = north_correction("magnetic", Position(74.0, -95.0), DAY)
    assert magnetic_field(Position(74.0, -95.0), DAY).zone == "caution"
    assert found.state is NorthState.CORRECTED_WEAK
    assert found.is_true
    assert "weak" in found.message


def test_true_north_needs_nothing():
    """Azimuths from true north are true without position or date."""
    found = north_correction("true", None, None)
    assert (found.state, found.correction_deg, found.model) == (NorthState.TRUE, 0.0, "")


def test_grid_azimuths_get_the_convergence():
    """Azimuths from UTM grid north are turned by the convergence, in the map's zone."""
    found = north_correction("grid", PLACE, None)
    assert found.correction_deg == pytest.approx(grid_convergence_deg(PLACE), abs=0.005)
    assert found.model == "UTM 30V"
    # West of the central meridian in the north, grid north lies west of true north.
    assert grid_convergence_deg(Position(56.1, -4.2)) < 0 < grid_convergence_deg(Position(56.1, -1.8))
    beside = north_correction("grid", PLACE, None, grid_zone=29)
    assert beside.correction_deg == pytest.approx(grid_convergence_deg(PLACE, 29), abs=0.005)
    assert beside.correction_deg > 3.0


def test_grid_north_outside_the_grid_is_a_state():
    """Beyond 84 N there is no grid to correct, and no error either."""
    found = north_correction("grid", Position(86.0, 10.0), None)
    assert (found.state, found.correction_deg) == (NorthState.NO_GRID, None)
    with pytest.raises(PositionError, match="80 S to 84 N"):
        grid_convergence_deg(Position(86.0, 10.0))


def test_an_unknown_reference_is_refused():
    """A word that names no north raises and lists the three."""
    with pytest.raises(NorthError, match="true, magnetic or grid"):
        north_correction("compass", PLACE, DAY)


def test_a_reading_is_corrected_once_only():
    """A kept azimuth takes one correction; a second, and an unknown one, are refused."""
    correction = north_correction("magnetic", PLACE, DAY)
    assert correct_once(359.9, stored_correction_deg=None, correction=correction) == pytest.approx(
        (359.9 + correction.correction_deg) % 360.0
    )
    for stored in (0.0, correction.correction_deg):
        with pytest.raises(NorthError, match="already"):
            correct_once(10.0, stored_correction_deg=stored, correction=correction)
    with pytest.raises(NorthError, match="no position"):
        correct_once(10.0, stored_correction_deg=None, correction=north_correction("magnetic", None, DAY))


@given(
    st.floats(0.0, 360.0), st.floats(-80.0, 80.0), st.floats(-180.0, 180.0), st.sampled_from(list(Reference))
)
def test_corrected_azimuths_are_azimuths(azimuth, latitude, longitude, reference):
    """Whatever the place and the reference, a corrected azimuth is 0 <= azimuth < 360."""
    found = north_correction(reference, Position(latitude, longitude), DAY)
    assert 0.0 <= found.azimuth_deg(azimuth) < 360.0


def test_threads_do_not_disturb_each_other():
    """Fields computed on several threads at once are those computed one after the other."""
    places = [Position(latitude, 10.0 * latitude % 180.0) for latitude in range(-60, 61, 6)]
    alone = [magnetic_field(place, DAY) for place in places]
    faults = []

    def work():
        faults.extend(p for p, field in zip(places, alone, strict=True) if magnetic_field(p, DAY) != field)

    threads = [threading.Thread(target=work) for _ in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert faults == []


def test_importing_orient_loads_no_library_but_numpy():
    """The models and grids are loaded at first use, so the app starts without them."""
    script = (
        "import sys, analysis.orient, analysis.orient.north, analysis.orient.position;"
        "import analysis.orient.position_text, analysis.orient.attitude;"
        "print(sorted({'pygeomag', 'pygeodesy', 'plyer', 'kivy', 'pandas', 'scipy'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
