from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from analysis.fold.check import check_fold
from analysis.orient.features import Feature
from analysis.stats.sums import sums_of
from fieldapp.notebook.backups import readings_in
from fieldapp.settings import NorthMode, PlaneNotation, Settings
from fieldapp.states import Change, Measured, MessageKind, Offer, PositionFix, Sign, SignalKind

BEDDING, CLEAVAGE, LINE, HINGE = Feature
# Bedding of the two limbs of a fold about 040/20 and cleavage turned clockwise from it: METHOD's full check case,
# as strike/dip (dip direction less 90).
S0 = ("028/62", "035/55", "022/70", "031/58", "240/48", "232/57", "248/44", "236/52")
S1 = ("053/82", "057/85", "049/80", "055/84", "060/81", "051/86")


def fill(page, kept, rounds=1):
    for _ in range(rounds):
        for text in S0:
            kept(page, BEDDING, text)
        for text in S1:
            kept(page, CLEAVAGE, text)


def names(page):
    return [line.name for line in page.entry.checks if not line.passed]


# -- touches -----------------------------------------------------------------------------------------------------


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


# -- entry -------------------------------------------------------------------------------------------------------


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


# -- the draft outlives the process ------------------------------------------------------------------------------


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


# -- past readings -----------------------------------------------------------------------------------------------


def test_mending_writes_the_next_revision(page, kept):
    """A mended reading keeps its id and time and gets a further revision; the check follows it."""
    reading_id = kept(page, BEDDING, "045/30")
    before = page._all[reading_id]
    page.mend(reading_id)
    assert page.entry.mending == reading_id
    page.back()
    page.digit(5)
    page.set_note("read again")
    assert page.keep()
    after = page._all[reading_id]
    assert (after.revision, after.dip_deg, after.note) == (2, 35.0, "read again")
    assert after.recorded_at == before.recorded_at
    assert after.revised_at > before.recorded_at
    assert page._notebook.revisions(reading_id) == [before, after]
    assert len(page.recent) == 1
    assert page.entry.mending == ""


def test_a_mend_that_changes_nothing_but_the_note_keeps_the_attitude_exactly(page):
    """Digits shown in whole degrees do not round a reading that was kept with more."""
    page.measured(Measured(azimuth_deg=45.37, inclination_deg=30.26, scatter_deg=1.0, samples=9))
    assert page.keep()
    reading_id = page.recent[0].reading_id
    before = page._all[reading_id]
    page.mend(reading_id)
    page.set_note("on the wave ripples")
    assert page.keep()
    after = page._all[reading_id]
    assert (after.strike_deg, after.dip_deg) == (before.strike_deg, before.dip_deg)
    assert (after.instrument, after.scatter_deg) == (before.instrument, before.scatter_deg)
    assert after.note == "on the wave ripples"


def test_clear_gives_a_mend_up(page, kept):
    """Clear while mending leaves the reading as it was."""
    reading_id = kept(page, BEDDING, "045/30")
    page.mend(reading_id)
    page.clear()
    assert page.entry.mending == ""
    assert page._all[reading_id].revision == 1
    assert page.entry.azimuth_text == ""


def test_striking_out_takes_a_reading_from_the_count_not_from_the_notebook(page, kept):
    """Struck out it no longer counts and is still listed; counting again undoes it."""
    kept(page, BEDDING, "040/30")
    reading_id = kept(page, BEDDING, "045/30")
    assert page.strike_out(reading_id)
    assert page.tabs[0].in_fold == 1
    assert page.check.readings.bedding == 1
    assert page.standing[0].struck_out
    assert page.recent[0].reading_id == reading_id  # just struck: still in sight
    assert not page.strike_out(reading_id)
    kept(page, BEDDING, "041/30")
    assert reading_id not in {r.reading_id for r in page.recent}
    assert page.restore_reading(reading_id)
    assert page.tabs[0].in_fold == 3


def test_undo_takes_back_the_last_things_one_by_one(page, kept):
    """Undo after undo: a striking out, a mend, two keeps; the notebook still holds every revision."""
    first = kept(page, BEDDING, "040/30")
    second = kept(page, BEDDING, "050/30")
    page.mend(second)
    page.back()
    page.digit(9)
    page.keep()
    page.strike_out(first)
    assert page.message.offer is Offer.UNDO
    assert page.accept_offer()
    assert not page._all[first].struck_out
    assert page.undo()
    assert page._all[second].dip_deg == 30.0
    page.clear()
    assert page.undo()
    assert page._all[second].struck_out
    assert (page.entry.azimuth_text, page.entry.quadrant) == ("050", "SE")  # what was typed comes back
    page.clear()
    assert page.undo()
    assert page.tabs[0].in_fold == 0
    assert not page.can_undo
    assert not page.undo()
    assert len(page._notebook.revisions()) == 2 + 1 + 1 + 4


def test_the_net_names_the_nearest_reading(page, kept):
    """A touch on the net within reach names the reading, one elsewhere names none."""
    reading_id = kept(page, BEDDING, "045/30")
    kept(page, LINE, "200/70")
    pole = page.net.points[BEDDING]
    assert pole.reading_ids == (reading_id,)
    north, east, down = pole.vectors[0]
    x, y = np.array([east, north]) / np.sqrt(1 + down)
    named = page.name_at(x + 0.02, y)
    assert named.title == "Bedding 045/30 SE"
    assert "entered as strike/dip 045/30 SE" in named.lines
    assert page.name_at(0.9, 0.0) is None
    page.name_reading(reading_id)
    page.strike_out(reading_id)
    assert page.named.struck_out
    page.name_nothing()
    assert page.named is None


# -- the running check -------------------------------------------------------------------------------------------


def test_the_verdict_is_that_of_the_check_on_the_same_readings(page, kept):
    """The strip says what a check from scratch says of the readings that stand."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    fill(page, kept)
    readings = [r for r in page._all.values() if not r.struck_out]
    direct = check_fold(
        sums_of((r.feature, r.outcrop, r.vector) for r in readings), page.check.settings, fold=page.place.fold
    )
    assert page.check.verdict == direct.verdict
    assert page.check.transection_deg == pytest.approx(direct.transection_deg, abs=1e-9)
    assert page.check.transection_deg == pytest.approx(15.399, abs=0.001)  # METHOD section 4, full check case
    assert page.check.interval_deg == pytest.approx(direct.interval_deg, abs=1e-9)
    assert page.outcrop_check.transection_deg == pytest.approx(direct.transection_deg, abs=1e-9)


def test_striking_out_and_mending_leave_the_sums_of_what_stands(page, kept):
    """After keeping, mending, striking out and undoing the check is that of the standing readings alone."""
    fill(page, kept)
    odd = kept(page, BEDDING, "300/80")
    page.mend(odd)
    page.back()
    page.digit(5)
    page.keep()
    page.strike_out(odd)
    wrong = kept(page, CLEAVAGE, "100/40")
    page.strike_out(wrong)
    page.undo()
    page.strike_out(wrong)
    readings = [r for r in page._all.values() if not r.struck_out]
    assert len(readings) == len(S0) + len(S1)
    direct = check_fold(sums_of((r.feature, r.outcrop, r.vector) for r in readings), page.check.settings)
    assert page.check.transection_deg == pytest.approx(direct.transection_deg, abs=1e-9)


def test_a_page_opened_anew_shows_what_the_old_one_showed(page, page_at, kept):
    """Sums rebuilt at start give the same strip, funnel and lists."""
    fill(page, kept)
    page.strike_out(kept(page, LINE, "050/20"))
    again = page_at(page.hand_over.notebook_path)
    assert again.strip == page.strip
    assert again.standing == page.standing
    assert again.tabs == page.tabs
    assert [p.readings for p in again.funnel.points] == [p.readings for p in page.funnel.points]
    assert again.funnel.points[-1].delta_deg == pytest.approx(page.funnel.points[-1].delta_deg, abs=1e-9)
    assert again.place.outcrop == page.place.outcrop


def test_the_funnel_has_a_point_for_each_reading_and_follows_the_past(page, kept):
    """One point a reading; striking out an earlier one computes the funnel anew without it."""
    fill(page, kept)
    assert [p.readings for p in page.funnel.points] == list(range(1, len(S0) + len(S1) + 1))
    first = page.standing[-1].reading_id
    page.strike_out(first)
    assert [p.readings for p in page.funnel.points] == list(range(1, len(S0) + len(S1)))
    assert page.funnel.points[-1].delta_deg == pytest.approx(page.check.transection_deg, abs=1e-9)
    assert page.net.trail.shape[1] == 3
    assert page.net.trail[-1] == pytest.approx(page.check.intersection.axis.vector)


def test_the_verdict_changes_while_one_reads_and_is_signalled_once(page, kept):
    """From an open ring to crossed bars; the change is signalled, spoken if the settings ask for it."""
    page.change_settings(replace(page.settings, spoken_verdict=True))
    signals = []
    page.on_signal(signals.append)
    assert page.strip.sign is Sign.OPEN_RING
    fill(page, kept)
    assert page.strip.sign is Sign.CROSSED_CLOCKWISE
    changes = [s for s in signals if s.kind is SignalKind.VERDICT]
    assert len(changes) == 1
    assert "Transected" in changes[0].spoken
    assert sum(s.kind is SignalKind.KEPT for s in signals) == len(S0) + len(S1)
    # The figure never stands without its interval.
    assert "between" in page.strip.figures


def test_a_wider_margin_is_used_at_once(page, kept):
    """Margin and confidence change the check and its funnel when they are set."""
    fill(page, kept, rounds=2)
    narrow = page.check.interval_deg
    page.change_settings(replace(page.settings, margin_deg=25.0, confidence=0.99))
    assert page.check.settings.margin_deg == 25.0
    assert page.check.interval_deg[0] < narrow[0]
    assert page.funnel.margin_deg == 25.0
    assert page.funnel.points[-1].low_deg == pytest.approx(page.check.interval_deg[0])


# -- settings ----------------------------------------------------------------------------------------------------


def test_switching_the_notation_midway_keeps_the_plane(page, typed):
    """A strike typed becomes the dip direction of the same plane, and back; past readings follow."""
    typed(page, "045/3", "SE")
    page.change_settings(replace(page.settings, notation=PlaneNotation.DIP_DIRECTION_DIP))
    assert (page.entry.azimuth_text, page.entry.inclination_text) == ("135", "3")
    assert page.entry.azimuth_label == "dip direction"
    assert not page.entry.quadrant_offered
    page.digit(0)
    assert page.keep()
    assert page.recent[0].text == "135/30"
    page.change_settings(replace(page.settings, notation=PlaneNotation.STRIKE_DIP))
    assert page.recent[0].text == "045/30"


def test_settings_are_kept(page, page_at):
    """Settings come back with the notebook."""
    settings = Settings(margin_deg=3.0, left_handed=True, observer="A. N. Other", north=NorthMode.TRUE)
    page.change_settings(settings)
    assert page_at(page.hand_over.notebook_path).settings == settings


# -- place and north ---------------------------------------------------------------------------------------------


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


# -- telling -----------------------------------------------------------------------------------------------------


def test_each_action_tells_once_and_nothing_when_nothing_changed(page):
    """Listeners hear once per action; a key that does nothing is silent; an ended listener hears no more."""
    changes = []
    stop = page.listen(changes.append)
    page.digit(0)
    assert len(changes) == 1
    assert changes[0] & Change.ENTRY
    page.point()
    page.point()
    page.point()
    heard = len(changes)
    page.point()
    assert len(changes) == heard
    stop()
    page.clear()
    assert len(changes) == heard
    stop()


def test_records_are_made_once_until_something_changes(page, kept):
    """What nothing has changed is the same record, so that nothing is drawn again."""
    kept(page, BEDDING, "045/30")
    before = (page.entry, page.strip, page.net, page.plan, page.place, page.recent)
    page.dismiss_message()
    after = (page.entry, page.strip, page.net, page.plan, page.place, page.recent)
    assert all(one is other for one, other in zip(before, after, strict=True))


def test_the_message_says_what_was_kept_and_can_be_dismissed(page, kept):
    """After a keep the message names the reading."""
    kept(page, BEDDING, "045/30")
    assert page.message.text == "Kept 045/30 SE."
    page.dismiss_message()
    assert page.message is None
    assert not page.accept_offer()


def test_todays_backup_is_made_and_renewed(page, clock, kept):
    """The first reading of a day brings a backup; after 25 more, and at closing, it is written again."""
    held = []
    for number in range(30):
        kept(page, BEDDING, f"0{40 + number % 9}/30")
        held.append(len(readings_in(page.hand_over.backups[0])))
    assert held == [1] * 25 + [26] * 5
    clock.later(days=1)
    kept(page, BEDDING, "045/31")
    assert [len(readings_in(b)) for b in page.hand_over.backups] == [31, 26]
    kept(page, BEDDING, "045/32")
    newest = page.hand_over.backups[0]
    page.close()
    assert len(readings_in(newest)) == 32


def test_a_damaged_notebook_is_told_on_the_page_and_its_backup_added_in_one_tap(page, page_at, kept):
    """The page opens, says what was saved, and one tap adds what the newest backup holds beyond it."""
    fill(page, kept, rounds=2)
    path = page.hand_over.notebook_path
    page.back_up()
    everything = page.standing
    page.close()
    data = bytearray(path.read_bytes())
    for at in range(4096 * 6, len(data), 8192):
        data[at : at + 4096] = b"\x55" * 4096
    path.write_bytes(data)
    again = page_at(path)
    assert "damaged" in again.message.text
    assert again.message.offer is Offer.ADD_BACKUP
    assert len(again.standing) < len(everything)
    assert again.accept_offer()
    assert {r.reading_id for r in again.standing} == {r.reading_id for r in everything}
