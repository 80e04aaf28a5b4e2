"""The entry on the page: touches, checks and mends, and the draft that outlives the process."""

from __future__ import annotations

from dataclasses import replace

import pytest

from analysis.orient.features import Feature
from fieldapp.settings import NorthMode, PlaneNotation, Settings
from fieldapp.states import Measured, MessageKind

BEDDING, CLEAVAGE, LINE, HINGE = Feature


def names(page):
    return [line.name for line in page.entry.checks if not line.passed]


# -- touches ------------------------------------------------------------------------------------------------


def test_a_plane_takes_seven_touches_and_a_line_six(page, typed):
    """Five digits, the side it dips to and Keep; a line has no side."""
    page.choose_feature(BEDDING)
    touches = typed(page, "045/30")
    assert page.keep()
    assert touches + 1 == 7
    page.choose_feature(LINE)
    touches = typed(page, "032/16")
    assert page.keep()
    assert touches + 1 == 6
    assert [r.text for r in page.recent] == ["032/16", "045/30 SE"]


def test_a_plane_by_dip_direction_takes_six_touches(page, typed):
    """With the dip direction typed there is no side to tap."""
    page.change_settings(Settings(notation=PlaneNotation.DIP_DIRECTION_DIP))
    assert typed(page, "135/30") + 1 == 6
    assert page.keep()
    reading = page._all[page.recent[0].reading_id]
    assert (reading.strike_deg, reading.dip_deg, reading.dip_quadrant) == (45.0, 30.0, "")
    assert reading.as_entered == "dip direction/dip 135/30"


# -- entry --------------------------------------------------------------------------------------------------


def test_the_entry_says_what_it_waits_for(page):
    """Step by step the page names what is missing until Keep would keep."""
    asked = [page.entry.missing]
    for keys in ("04", "5", "3", "0"):
        for key in keys:
            page.digit(int(key))
        asked.append(page.entry.missing)
    page.choose_quadrant("SE")
    asked.append(page.entry.missing)
    assert asked == [
        "Type the strike with three digits.",
        "Type the strike with three digits.",
        "Type the dip with two digits.",
        "Type the dip with two digits.",
        "Tap the side it dips to.",
        "",
    ]
    assert page.entry.ready


def test_keep_before_it_is_ready_keeps_nothing(page, typed):
    """Keep on half an entry says what is missing and leaves the entry."""
    typed(page, "045/3")
    assert not page.keep()
    assert page.message.text == "Type the dip with two digits."
    assert page.message.kind is MessageKind.WARNING
    assert page.standing == ()
    assert page.entry.azimuth_text == "045"


def test_a_strike_beyond_the_circle_is_said_at_once_and_not_kept(page, typed):
    """361 is no strike: said when its third digit is typed. 360 is north."""
    typed(page, "361", "")
    assert "361" in page.entry.missing
    assert not page.keep()
    page.clear()
    typed(page, "045/91")
    assert "91" in page.entry.missing
    assert not page.keep()
    page.clear()
    typed(page, "360/30", "E")
    assert page.keep()
    assert page._all[page.recent[0].reading_id].strike_deg == 0.0


def test_a_reversed_strike_is_mended_in_one_tap(page, typed):
    """The other side tapped: the page offers the strike the other way round, and one tap puts it in."""
    typed(page, "225/30", "SE")
    check = page.entry.checks[0]
    assert not check.passed
    assert check.mend_label == "Use 045/30"
    page.apply_mend(check.name)
    assert (page.entry.azimuth_text, page.entry.inclination_text, page.entry.quadrant) == ("045", "30", "SE")
    assert page.entry.checks[0].passed
    assert page.entry.checks[0].text == "Dips SE, as the right-hand rule says."
    assert page.keep()
    assert page.recent[0].warnings_kept == ("north-not-corrected",)


def test_what_was_seen_can_be_kept_against_a_warning(page, typed):
    """A warning never blocks; the record says that it was kept against it."""
    typed(page, "225/30", "SE")
    assert page.entry.ready
    assert page.keep()
    assert "reversed-strike" in page.recent[0].warnings_kept


def test_without_a_side_the_neighbours_tell_a_reversed_strike(page, kept, typed):
    """Where the side is not asked for, a strike read from the wrong end stands out among its neighbours."""
    page.change_settings(replace(page.settings, require_quadrant=False))
    for text in ("044/30", "047/33", "042/29", "046/31", "043/32"):
        kept(page, BEDDING, text, "")
    typed(page, "225/30", "")
    assert page.entry.ready
    assert "reversed-strike" in names(page)
    page.apply_mend("reversed-strike")
    assert page.entry.azimuth_text == "045"
    assert "reversed-strike" not in names(page)


def test_flat_and_vertical_planes_need_no_side(page, typed):
    """A bed typed as horizontal or vertical dips to neither side, so none is asked for."""
    for text in ("045/00", "045/90"):
        typed(page, text, "")
        assert page.entry.ready
        assert page.keep()
    assert "flat-plane" in page.recent[1].warnings_kept


def test_a_line_off_the_beds_of_the_outcrop_is_asked_about(page, kept, typed):
    """An intersection far off the bedding and cleavage of its outcrop is asked about; one on them is not."""
    kept(page, BEDDING, "028/62")
    kept(page, CLEAVAGE, "053/82")
    page.choose_feature(LINE)
    typed(page, "130/10")
    assert "line-off-plane" in names(page)
    page.clear()
    typed(page, "058/42")
    assert names(page) == []


def test_the_expected_side_follows_the_strike(page):
    """The side that the right-hand rule expects is there with the third digit."""
    assert page.entry.expected_quadrant == ""
    for digit in (2, 7, 0):
        page.digit(digit)
    assert page.entry.expected_quadrant == "N"
    page.choose_feature(LINE)
    assert page.entry.expected_quadrant == ""
    assert not page.entry.quadrant_offered


def test_tapping_a_side_again_takes_it_away(page):
    """The same tap undoes itself; a word that is no side does nothing."""
    page.choose_quadrant("SE")
    page.choose_quadrant("up")
    assert page.entry.quadrant == "SE"
    page.choose_quadrant("SE")
    assert page.entry.quadrant == ""


def test_arrows_go_round_the_features(page):
    """Stepping on from the last feature comes back to the first; digits typed stay."""
    page.digit(3)
    for feature in (CLEAVAGE, LINE, HINGE, BEDDING):
        page.step_feature(1)
        assert page.entry.feature is feature
    page.step_feature(-1)
    assert page.entry.feature is HINGE
    assert page.entry.azimuth_text == "3"


def test_a_sensor_fills_the_entry_and_typing_over_it_makes_it_a_compass_reading(page):
    """What was measured is kept with its scatter; a digit typed over it forgets the sensor."""
    measured = Measured(
        azimuth_deg=359.98, inclination_deg=30.04, scatter_deg=1.2, samples=40, raw="359.98/30.04 magnetic"
    )
    page.measured(measured)
    assert (page.entry.azimuth_text, page.entry.inclination_text) == ("000", "30")
    assert page.entry.instrument == "tablet"
    assert page.entry.ready
    assert page.keep()
    reading = page._all[page.recent[0].reading_id]
    assert (reading.instrument, reading.scatter_deg, reading.samples) == ("tablet", 1.2, 40)
    assert reading.as_entered == "359.98/30.04 magnetic"
    page.measured(replace(measured, warnings={"field": "iron near"}))
    assert "field" in names(page)
    page.digit(1)
    assert page.entry.instrument == "compass"
    assert page.entry.azimuth_text == "1"


# -- the draft outlives the process -------------------------------------------------------------------------


def test_the_draft_is_there_again_to_the_last_key(page_at, tmp_path):
    """Opened anew without a farewell, the page shows the entry as it was: digits, feature, side, note."""
    path = tmp_path / "field.notebook"
    page = page_at(path)
    page.choose_feature(CLEAVAGE)
    for key in "0453":
        page.digit(int(key))
    page.choose_quadrant("SE")
    page.set_note("lichen")
    page.set_overturned(True)
    again = page_at(path)
    assert again.entry == page.entry
    again.digit(0)
    assert again.keep()
    assert page_at(path).entry.azimuth_text == ""


def test_a_mend_under_way_outlives_the_process(page_at, tmp_path, kept):
    """Also a past reading being mended is there again, with the north it was read in."""
    path = tmp_path / "field.notebook"
    page = page_at(path)
    reading_id = kept(page, BEDDING, "045/30")
    page.mend(reading_id)
    page.back()
    again = page_at(path)
    assert again.entry.mending == reading_id
    assert again.entry.mending_text == "045/30 SE"
    again.digit(5)
    assert again.keep()
    assert again._all[reading_id].dip_deg == 35.0


@pytest.mark.parametrize(
    ("text", "side"), [("045/30", "E"), ("045/30", "S"), ("060/30", "E"), ("030/30", "S")]
)
def test_a_neighbouring_side_is_kept_without_a_question(page, typed, side, text):
    """A side tapped next to the right one fits still: nothing is asked and nothing noted."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    typed(page, text, side)
    assert page.entry.checks[0].passed
    assert page.keep()
    assert page.recent[0].warnings_kept == ()


def test_equal_readings_one_after_the_other_are_no_trouble(page, typed):
    """The same bed read ten times alike is kept ten times, without a question."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    for _ in range(10):
        typed(page, "045/30")
        assert page.keep()
    assert {r.warnings_kept for r in page.recent} == {()}
