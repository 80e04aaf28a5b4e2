"""A position that arrives late: readings kept uncorrected get their true north once, as a new revision."""

from datetime import UTC, date, datetime

import pytest

from analysis.errors import NorthError
from analysis.files.reading import Reading
from analysis.orient.north import north_correction
from analysis.orient.position import Position
from fieldapp.late_north import corrected_late, waits_for_north

PLACE = Position(56.1, -4.2)
DAY = date(2026, 5, 14)
LATER = datetime(2026, 5, 14, 17, 30, tzinfo=UTC)


def bed(**fields):
    return Reading(**{"reading_id": "a", "feature": "bedding", "strike_deg": 359.5, "dip_deg": 30.0,
                      "north_reference": "magnetic", "as_entered": "359.5/30"} | fields)  # fmt: skip


def hinge(**fields):
    return Reading(**{"reading_id": "b", "feature": "hinge", "trend_deg": 10.0, "plunge_deg": 5.0,
                      "north_reference": "magnetic"} | fields)  # fmt: skip


@pytest.mark.parametrize(("reading", "name"), [(bed(), "strike_deg"), (hinge(), "trend_deg")])
def test_a_reading_is_corrected_as_a_new_revision(reading, name):
    """The azimuth is turned, what was entered and the inclination stay, and model and date are stored."""
    correction = north_correction("magnetic", PLACE, DAY)
    later = corrected_late(reading, correction, LATER)
    turned = (getattr(later, name) - getattr(reading, name)) % 360.0
    assert turned == pytest.approx(correction.correction_deg % 360.0)
    assert (later.revision, later.revised_at) == (2, LATER)
    assert (later.correction_deg, later.correction_model) == (correction.correction_deg, "WMM2025 2026-05-14")
    assert (later.as_entered, later.north_reference) == (reading.as_entered, "magnetic")
    assert (later.dip_deg, later.plunge_deg) == (reading.dip_deg, reading.plunge_deg)
    assert waits_for_north(reading)
    assert not waits_for_north(later)


def test_a_quadrant_that_just_misses_true_north_is_kept_with_a_warning():
    """A side that fitted the compass by a hair and not true north stays as tapped, and the record says so."""
    far_west = north_correction("magnetic", Position(60.0, -140.0), DAY)
    assert far_west.correction_deg > 10.0
    reading = bed(strike_deg=75.0, dip_quadrant="E")  # dips 165 from magnetic, 75° from east: within the 80
    later = corrected_late(reading, far_west, LATER)
    assert later.dip_quadrant == "E"
    assert later.warnings_kept == ("quadrant-misfit",)
    assert corrected_late(bed(dip_quadrant="E"), far_west, LATER).warnings_kept == ()


def test_a_second_correction_is_refused():
    """A reading corrected already, also by zero, is never corrected again."""
    correction = north_correction("magnetic", PLACE, DAY)
    later = corrected_late(bed(), correction, LATER)
    for reading in (later, bed(correction_deg=0.0)):
        with pytest.raises(NorthError, match="already"):
            corrected_late(reading, correction, LATER)


def test_an_unknown_or_another_norths_correction_is_refused():
    """No correction, and one of grid north for a magnetic reading, leave the reading as it is."""
    with pytest.raises(NorthError, match="no position"):
        corrected_late(bed(), north_correction("magnetic", None, DAY), LATER)
    with pytest.raises(NorthError, match="does not fit"):
        corrected_late(bed(), north_correction("grid", PLACE, None), LATER)


def test_what_does_not_wait():
    """Readings from true north and struck-out ones do not wait for a position."""
    assert not waits_for_north(bed(north_reference="true"))
    assert not waits_for_north(bed(struck_out=True))
    assert waits_for_north(hinge(north_reference="grid"))
