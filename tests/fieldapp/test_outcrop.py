"""Past readings and the running check."""

from __future__ import annotations

from dataclasses import replace

import pytest

from analysis.fold.check import check_fold
from analysis.orient.features import Feature
from analysis.stats.sums import sums_of
from fieldapp.settings import NorthMode, PlaneNotation, Settings
from fieldapp.states import Measured, Offer, Sign, SignalKind

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


# -- past readings ------------------------------------------------------------------------------------------


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
    assert not page.undo()
    assert len(page._notebook.revisions()) == 2 + 1 + 1 + 4


def test_a_reading_is_named_with_its_particulars(page, kept):
    """A reading touched on the net is named until another touch, also when it is struck out meanwhile."""
    reading_id = kept(page, BEDDING, "045/30")
    kept(page, LINE, "200/70")
    assert page.net.points[BEDDING].reading_ids == (reading_id,)
    page.name_reading(reading_id)
    assert page.named.title == "Bedding 045/30 SE"
    assert "entered as strike/dip 045/30 SE" in page.named.lines
    page.strike_out(reading_id)
    assert page.named.struck_out
    page.name_nothing()
    assert page.named is None


# -- the running check --------------------------------------------------------------------------------------


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


# -- settings -----------------------------------------------------------------------------------------------


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
