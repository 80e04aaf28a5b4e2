"""Positions typed by hand: the page without a receiver."""

from __future__ import annotations

from dataclasses import replace

import pytest

from analysis.errors import PositionError, ReadingError
from analysis.orient.features import Feature
from fieldapp.notebook.errors import NotebookError
from fieldapp.settings import NorthMode, Settings
from fieldapp.states import Change, MessageKind, Offer, PositionFix

BEDDING = Feature.BEDDING
TYPED = "48 30.000 N, 28 15.000 W"  # open ocean


@pytest.fixture
def true_page(page):
    """A page whose azimuths need no correction, so that only the position matters."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    return page


@pytest.mark.parametrize("text", [TYPED, "48.5 -28.25", "26U 407661.07 5372630.03", "26UMU 07661 72630"])
def test_readings_are_taken_where_the_outcrop_was_said_to_lie(true_page, kept, text):
    """Degrees, minutes and both grids give one place; the reading says that it was typed."""
    true_page.place_by_hand(text)
    reading = true_page._all[kept(true_page, BEDDING, "045/30")]
    assert (reading.latitude_deg, reading.longitude_deg) == pytest.approx((48.5, -28.25), abs=1e-5)
    assert reading.position_source == "hand"
    assert true_page.place.by_hand.startswith("48.50000° N, 28.2")
    assert true_page.place.position_text.endswith("by hand")


def test_a_coarse_grid_reference_says_how_coarse_it_is(true_page, kept):
    """A square of 100 m is known to 71 m, half its diagonal, on the page and in the reading."""
    true_page.place_by_hand("26UMU 076 726")
    assert true_page.place.position_text == "±71 m, by hand"
    assert true_page._all[kept(true_page, BEDDING, "045/30")].accuracy_m == pytest.approx(70.7, abs=0.1)


def test_what_was_typed_outweighs_the_device_at_this_outcrop_alone(true_page, clock, kept):
    """Somebody who types a position knows better; the next outcrop goes by the device, and coming back by the hand."""
    true_page.position_changed(
        PositionFix(latitude_deg=48.0, longitude_deg=-28.0, accuracy_m=4.0, at=clock())
    )
    true_page.choose_outcrop("A")
    true_page.place_by_hand(TYPED)
    assert true_page._all[kept(true_page, BEDDING, "045/30")].latitude_deg == 48.5
    true_page.choose_outcrop("B")
    assert true_page.place.by_hand == ""
    assert true_page._all[kept(true_page, BEDDING, "045/30")].latitude_deg == 48.0
    true_page.choose_outcrop("A")
    assert true_page.place.by_hand != ""
    assert true_page.here.latitude_deg == 48.5
    true_page.forget_position()
    assert true_page.place.by_hand == ""
    assert true_page.here.latitude_deg == 48.0


def test_a_position_that_was_typed_outlives_the_app(true_page, page_at, kept):
    """It is in the notebook at once, for the outcrop that it was typed for."""
    true_page.choose_outcrop("A")
    true_page.place_by_hand(TYPED)
    again = page_at(true_page.hand_over.notebook_path)
    assert again.place.outcrop == "A"
    assert again._all[kept(again, BEDDING, "045/30")].latitude_deg == 48.5


def test_text_that_is_no_position_changes_nothing(true_page):
    """What was wrong is told in one error, with the forms that are taken; the position stays."""
    true_page.place_by_hand(TYPED)
    with pytest.raises(PositionError, match="expected"):
        true_page.place_by_hand("over there")
    assert true_page.place.by_hand == "48.50000° N, 28.25000° W"


def test_readings_kept_before_the_position_may_be_placed_together(true_page, page_at, kept):
    """They are offered the position, get it as a further revision, and give it back as one."""
    early = [kept(true_page, BEDDING, text) for text in ("045/30", "050/32")]
    struck = kept(true_page, BEDDING, "060/30")
    true_page.strike_out(struck)
    true_page.choose_outcrop("elsewhere")
    other = kept(true_page, BEDDING, "047/31")
    true_page.choose_outcrop("1")
    true_page.place_by_hand(TYPED)
    assert true_page.message.text == "3 readings here without a position."
    assert true_page.message.offer is Offer.PLACE_READINGS
    assert true_page.accept_offer()
    for reading_id in early:
        reading = true_page._all[reading_id]
        assert (reading.latitude_deg, reading.position_source, reading.revision) == (48.5, "hand", 2)
        assert reading.dip_quadrant == "SE"
    assert true_page._all[struck].struck_out
    assert true_page._all[other].latitude_deg is None
    assert page_at(true_page.hand_over.notebook_path)._all[early[0]].latitude_deg == 48.5
    assert true_page.message.offer is Offer.UNDO
    assert true_page.accept_offer()
    assert all(true_page._all[reading_id].latitude_deg is None for reading_id in (*early, struck))
    assert true_page._all[struck].struck_out
    assert true_page.message.offer is Offer.PLACE_READINGS
    assert true_page.accept_offer()
    assert true_page._all[early[0]].latitude_deg == 48.5


def test_north_comes_with_the_position(page, kept):
    """Magnetic readings wait for a place: typed by hand it gives the declination, first placed, then corrected."""
    early = kept(page, BEDDING, "045/30")
    assert page._all[early].correction_deg is None
    changes = []
    page.listen(changes.append)
    page.place_by_hand(TYPED)
    assert changes[-1] & Change.ENTRY
    assert page.accept_offer()
    assert page.message.offer is Offer.CORRECT_NORTH
    assert page.accept_offer()
    corrected = page._all[early]
    assert corrected.correction_deg == pytest.approx(-8.6, abs=0.7)  # from memory of the model's map
    assert corrected.latitude_deg == 48.5
    later = page._all[kept(page, BEDDING, "045/30")]
    assert later.correction_deg == corrected.correction_deg


def test_a_slip_of_a_figure_is_asked_about(true_page, kept):
    """An outcrop hundreds of kilometres from the others of its fold is told as such."""
    true_page.choose_outcrop("A")
    true_page.place_by_hand(TYPED)
    kept(true_page, BEDDING, "045/30")
    true_page.choose_outcrop("B")
    true_page.place_by_hand("45 30.000 N, 28 15.000 W")
    assert true_page.message.kind is MessageKind.WARNING
    assert "333 km" in true_page.message.text or "334 km" in true_page.message.text  # 3 degrees of latitude
    true_page.place_by_hand("48 30.500 N, 28 15.000 W")
    assert true_page.message.kind is MessageKind.NOTE
    assert true_page.message.text == "Outcrop B lies at 48.50833° N, 28.25000° W."


def test_the_plan_shows_an_outcrop_that_was_placed_by_hand(true_page, kept):
    """It stands where it was said to lie before anything is read there."""
    true_page.choose_outcrop("A")
    true_page.place_by_hand(TYPED)
    kept(true_page, BEDDING, "045/30")
    true_page.choose_outcrop("B")
    assert "B" in true_page.plan.unplaced
    true_page.place_by_hand("48 30.100 N, 28 15.000 W")
    a, b = sorted(true_page.plan.outcrops, key=lambda outcrop: outcrop.name)
    assert b.here
    # A tenth of a minute of latitude at 48.5 N on WGS 84, from the length of a degree there, 111.2 km.
    assert a.north_m == pytest.approx(-185.3, abs=0.1)


def test_a_position_that_cannot_be_stored_is_refused_and_not_used(true_page, kept):
    """The page never shows a position that the notebook does not hold."""
    true_page._notebook._db.execute("PRAGMA query_only = ON")
    with pytest.raises(NotebookError):
        true_page.place_by_hand(TYPED)
    true_page._notebook._db.execute("PRAGMA query_only = OFF")
    assert true_page.place.by_hand == ""
    assert true_page._all[kept(true_page, BEDDING, "045/30")].latitude_deg is None


def test_who_reads_and_with_what_is_written_with_each_reading(true_page, kept):
    """Observer and device are settings, and go into the record; a name that no file holds is refused."""
    true_page.change_settings(replace(true_page.settings, observer=" A. Writer ", device="tablet 2"))
    reading = true_page._all[kept(true_page, BEDDING, "045/30")]
    assert (reading.observer, reading.device) == ("A. Writer", "tablet 2")
    with pytest.raises(ReadingError):
        replace(true_page.settings, observer="two\nlines")
    assert Settings.from_values({"observer": "two\nlines", "device": "tablet 2"}) == Settings(
        device="tablet 2"
    )


def test_readings_go_where_the_outcrop_is_known_to_lie(true_page, kept):
    """Back at an outcrop without receiver or hand, its own readings say where it is, and the page says so."""
    true_page.place_by_hand(TYPED)
    kept(true_page, BEDDING, "045/30")
    true_page.forget_position()
    assert true_page.place.position_text == "as before here"
    reading = true_page._all[kept(true_page, BEDDING, "046/30")]
    assert (reading.latitude_deg, reading.position_source) == (48.5, "outcrop")
    true_page.choose_outcrop("elsewhere")
    assert true_page.place.position_text == ""
