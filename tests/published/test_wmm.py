"""The magnetic field against the values published with its model, and against another model.

Sources: the test values that NOAA/NCEI and BGS publish with WMM2025 (12 rows, as the library ahrs 0.4.0, MIT,
carries them in WMM2025_TEST_VALUES.txt); IGRF-14 (Alken et al.) by the library ppigrf, which shares no code
with the one used.
"""

from datetime import UTC, datetime

import numpy as np
import ppigrf
import pytest

from analysis.orient.attitude import STRONGEST_FIELD_uT, WEAKEST_FIELD_uT
from analysis.orient.north import BLACKOUT_nT, magnetic_field
from analysis.orient.position import Position

# year, height km, latitude, longitude, horizontal nT, total nT, inclination, declination
WMM2025_VALUES = [
    (2025.0, 0.0, 80.0, 0.0, 6523.2, 55178.5, 83.21, 1.28),
    (2025.0, 0.0, 0.0, 120.0, 39677.9, 41064.3, -14.93, -0.16),
    (2025.0, 0.0, -80.0, 240.0, 16898.1, 54698.2, -72.00, 68.78),
    (2025.0, 100.0, 80.0, 0.0, 6216.7, 52964.9, 83.26, 0.85),
    (2025.0, 100.0, 0.0, 120.0, 37688.7, 39032.1, -15.08, -0.15),
    (2025.0, 100.0, -80.0, 240.0, 15917.1, 52035.0, -72.19, 68.21),
    (2027.5, 0.0, 80.0, 0.0, 6507.5, 55253.9, 83.24, 2.59),
    (2027.5, 0.0, 0.0, 120.0, 39702.0, 41036.9, -14.65, -0.24),
    (2027.5, 0.0, -80.0, 240.0, 16908.3, 54474.2, -71.92, 68.49),
    (2027.5, 100.0, 80.0, 0.0, 6201.1, 53034.3, 83.29, 2.16),
    (2027.5, 100.0, 0.0, 120.0, 37711.8, 39007.4, -14.81, -0.23),
    (2027.5, 100.0, -80.0, 240.0, 15927.0, 51825.7, -72.10, 67.93),
]
MOMENTS = {2025.0: datetime(2025, 1, 1, tzinfo=UTC), 2027.5: datetime(2027, 7, 2, 12, tzinfo=UTC)}
# Half a unit of the last digit given, and a hair for the halves.
HALF_TENTH, HALF_HUNDREDTH = 0.05 + 1e-6, 0.005 + 1e-6


@pytest.mark.parametrize("row", WMM2025_VALUES, ids=str)
def test_the_published_values_come_out_to_the_digits_given(row):
    """Declination, inclination and both strengths equal the published test values as they are rounded."""
    year, height_km, latitude, longitude, horizontal, total, inclination, declination = row
    place = Position(latitude, (longitude + 180.0) % 360.0 - 180.0, altitude_m=height_km * 1000.0)
    field = magnetic_field(place, MOMENTS[year])
    assert field.declination_deg == pytest.approx(declination, abs=HALF_HUNDREDTH)
    assert field.inclination_deg == pytest.approx(inclination, abs=HALF_HUNDREDTH)
    assert field.strength_nT == pytest.approx(total, abs=HALF_TENTH)
    assert field.horizontal_nT == pytest.approx(horizontal, abs=HALF_TENTH)


@pytest.fixture(scope="module", params=[datetime(2025, 7, 2), datetime(2029, 12, 31)], ids=str)  # noqa: DTZ001
def world(request):
    """Both models on a grid of the world, 10 by 15 degrees: list of (field, igrf declination, strength)."""
    latitudes, longitudes = np.meshgrid(np.arange(-80.0, 81.0, 10.0), np.arange(-180.0, 180.0, 15.0))
    # ppigrf takes dates without a zone.
    east, north, up = (
        np.ravel(part) for part in ppigrf.igrf(np.ravel(longitudes), np.ravel(latitudes), 0.0, request.param)
    )
    places = [Position(*degrees) for degrees in zip(np.ravel(latitudes), np.ravel(longitudes), strict=True)]
    fields = [magnetic_field(place, request.param) for place in places]
    return list(
        zip(fields, np.degrees(np.arctan2(east, north)), np.sqrt(east**2 + north**2 + up**2), strict=True)
    )


def test_another_model_agrees_outside_the_polar_zones(world):
    """IGRF-14 and the field used differ by less than half a degree of declination wherever compasses work."""
    compared = [(field, igrf) for field, igrf, _ in world if not field.zone]
    assert len(compared) > 350
    off = [abs((field.declination_deg - igrf + 180.0) % 360.0 - 180.0) for field, igrf in compared]
    assert max(off) < 0.5


def test_another_model_agrees_on_the_strength(world):
    """IGRF-14 and the field used differ by less than one percent in strength all over the world."""
    assert max(abs(field.strength_nT / strength - 1.0) for field, _, strength in world) < 0.01


def test_the_bounds_of_the_earths_field_hold_the_world(world):
    """The strengths taken as possible anywhere hold the whole grid, and not much more."""
    strengths = [field.strength_nT / 1000.0 for field, _, _ in world]
    assert WEAKEST_FIELD_uT < min(strengths) < WEAKEST_FIELD_uT + 4.0
    assert STRONGEST_FIELD_uT - 4.0 < max(strengths) < STRONGEST_FIELD_uT


def test_the_magnetic_pole_has_no_declination():
    """Near the magnetic pole (86 N, 139 E in 2025: NOAA, from memory) the field lies in the blackout zone."""
    field = magnetic_field(Position(85.8, 139.0), MOMENTS[2025.0])
    assert field.horizontal_nT < BLACKOUT_nT
    assert field.zone == "blackout"
