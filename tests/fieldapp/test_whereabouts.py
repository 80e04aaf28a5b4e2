"""Outcrops and folds, position, north and the plan."""

from __future__ import annotations

from dataclasses import replace

import pytest

from analysis.orient.features import Feature
from fieldapp.settings import NorthMode
from fieldapp.states import Change, Offer, PositionFix

BEDDING, CLEAVAGE, LINE, HINGE = Feature


# -- place and north ----------------------------------------------------------------------------------------


def test_outcrops_and_folds_are_chosen_and_made(page, page_at, kept):
    """A new name makes a place; each fold has its own readings and comes back to its last outcrop."""
    kept(page, BEDDING, "045/30")
    page.choose_fold("Mossgarth")
    page.choose_outcrop("MG-14")
    kept(page, BEDDING, "045/30")
    assert page.place.suggested_outcrop == "MG-15"
    page.next_outcrop()
    assert page.place.outcrop == "MG-15"
    kept(page, CLEAVAGE, "045/80")
    assert [(t.in_fold, t.here) for t in page.tabs[:2]] == [(1, 0), (1, 1)]
    page.choose_fold("Fold 1")
    assert [t.in_fold for t in page.tabs] == [1, 0, 0, 0]
    page.choose_fold("Mossgarth")
    assert page.place.outcrop == "MG-15"
    assert page.place.outcrops == ("MG-14", "MG-15")
    again = page_at(page.hand_over.notebook_path)
    assert (again.place.fold, again.place.outcrop) == ("Mossgarth", "MG-15")


def test_a_name_that_is_none_is_refused(page):
    """A name with a line break is refused in words; the place stays."""
    assert not page.choose_outcrop("MG\n1")
    assert page.message is not None
    assert page.place.outcrop == "1"


def test_magnetic_readings_are_corrected_once_where_the_place_is_known(page, clock, kept):
    """With a position the declination is added and noted; without one the reading says that it is missing."""
    uncorrected = kept(page, BEDDING, "045/30")
    assert page._all[uncorrected].correction_deg is None
    assert "north-not-corrected" in page._all[uncorrected].warnings_kept
    page.position_changed(PositionFix(latitude_deg=48.0, longitude_deg=-28.0, accuracy_m=4.2, at=clock()))
    assert page.message.offer is Offer.CORRECT_NORTH
    corrected = page._all[kept(page, BEDDING, "045/30")]
    assert corrected.correction_deg == pytest.approx(-8.6, abs=0.5)  # from memory of the model's map
    assert corrected.strike_deg == pytest.approx((45.0 + corrected.correction_deg) % 360.0)
    assert corrected.north_reference == "magnetic"
    assert "WMM2025" in corrected.correction_model
    assert (corrected.latitude_deg, corrected.accuracy_m) == (48.0, 4.2)
    assert page.correct_north() == 1
    late = page._all[uncorrected]
    assert late.strike_deg == corrected.strike_deg
    assert late.revision == 2
    assert late.warnings_kept == ()
    assert page.correct_north() == 0


def test_mending_never_corrects_twice(page, clock):
    """A corrected reading is shown as it was typed, and mended it gets the same correction again."""
    page.position_changed(PositionFix(latitude_deg=48.0, longitude_deg=-28.0, at=clock()))
    for key in "04530":
        page.digit(int(key))
    page.choose_quadrant("SE")
    assert page.keep()
    reading_id = page.recent[0].reading_id
    first = page._all[reading_id]
    page.position_changed(PositionFix(latitude_deg=-40.0, longitude_deg=60.0, at=clock()))
    page.mend(reading_id)
    assert (page.entry.azimuth_text, page.entry.inclination_text) == ("045", "30")
    page.back()
    page.digit(1)
    assert page.keep()
    second = page._all[reading_id]
    assert (second.strike_deg, second.dip_deg) == (first.strike_deg, 31.0)
    assert second.correction_deg == first.correction_deg


def test_a_mend_is_offered_in_the_digits_of_the_compass(page, clock, kept, typed):
    """With a declination in force the neighbours are compared, and the mend is offered, in magnetic degrees."""
    page.change_settings(replace(page.settings, require_quadrant=False))
    page.position_changed(PositionFix(latitude_deg=48.0, longitude_deg=-28.0, at=clock()))
    for text in ("044/30", "047/33", "042/29", "046/31", "043/32"):
        kept(page, BEDDING, text, "")
    typed(page, "225/30", "")
    assert [line.mend_label for line in page.entry.checks if line.name == "reversed-strike"] == ["Use 045/30"]


def test_the_position_is_told_with_its_age_and_goes_stale(page, clock, kept):
    """The page tells accuracy and age, again only when the words change; an old fix is not written down."""
    changes = []
    page.listen(changes.append)
    page.position_changed(PositionFix(latitude_deg=48.0, longitude_deg=-28.0, accuracy_m=4.2, at=clock.now))
    clock.later(seconds=10)
    assert page.place.position_text.startswith("±4 m, 1")
    changes.clear()
    clock.later(minutes=10)
    page.tick()
    page.tick()
    assert changes == [Change.PLACE]
    assert page.place.position_text == "±4 m, 10 min"
    assert page._all[kept(page, BEDDING, "045/30")].latitude_deg is None


def test_true_north_adds_nothing(page, clock, kept):
    """With the declination set on the compass nothing is added, wherever we are."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    page.position_changed(PositionFix(latitude_deg=48.0, longitude_deg=-28.0, at=clock()))
    reading = page._all[kept(page, BEDDING, "045/30")]
    assert (reading.strike_deg, reading.north_reference, reading.correction_deg) == (45.0, "true", None)
    assert reading.warnings_kept == ()


def test_the_plan_lays_outcrops_out_in_metres(page, clock, kept):
    """Outcrops stand north and east of the current one in metres, with the main bed read there."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    for name, latitude in (("A", 48.0), ("B", 48.001)):
        page.choose_outcrop(name)
        page.position_changed(PositionFix(latitude_deg=latitude, longitude_deg=-28.0, at=clock()))
        kept(page, BEDDING, "045/30")
        kept(page, LINE, "050/10")
    page.position_changed(None)
    page.choose_outcrop("A")
    a, b = sorted(page.plan.outcrops, key=lambda o: o.name)
    assert a.here
    assert (a.east_m, a.north_m) == (0.0, 0.0)
    assert b.east_m == pytest.approx(0.0, abs=1e-6)
    assert b.north_m == pytest.approx(111.2, abs=0.1)  # a thousandth of a degree of latitude at 48 N, WGS 84
    assert b.bedding == pytest.approx((45.0, 30.0))
    assert b.lines == pytest.approx((50.0, 10.0))
    page.choose_outcrop("C")
    assert page.plan.unplaced == ("C",)


def test_the_plan_tells_overturned_beds(page, clock, typed):
    """An outcrop is drawn as overturned where more than half of its bedding was read so, as in the report."""
    page.position_changed(PositionFix(latitude_deg=54.0, longitude_deg=-2.0, at=clock()))
    for outcrop, marks in (("MG-01", (True, True, False)), ("MG-02", (True, False))):
        page.choose_outcrop(outcrop)
        for overturned in marks:
            page.choose_feature(BEDDING)
            page.set_overturned(overturned=overturned)
            typed(page, "045/30")
            assert page.keep()
    assert {outcrop.name: outcrop.overturned for outcrop in page.plan.outcrops} == {
        "MG-01": True,
        "MG-02": False,
    }


def test_a_late_correction_that_turns_a_strike_off_its_side_is_kept_as_seen(page, clock, typed):
    """A side that fitted the compass and just misses true north stays, and the record says so."""
    typed(page, "075/30", "E")  # dips 165 from magnetic north, 75 degrees from east: within the 80 that fit
    assert page.keep()
    reading_id = page.recent[0].reading_id
    page.position_changed(PositionFix(latitude_deg=60.0, longitude_deg=-140.0, at=clock()))
    assert page.correct_north() == 1
    late = page._all[reading_id]
    assert late.correction_deg > 10.0
    assert (late.dip_quadrant, late.warnings_kept) == ("E", ("quadrant-misfit",))
