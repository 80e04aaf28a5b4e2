"""Taking back: what comes back is what was, whatever was set, corrected or opened in between."""

from __future__ import annotations

from dataclasses import replace

import pytest

from analysis.orient.features import Feature
from fieldapp.notebook.errors import StorageFullError
from fieldapp.settings import PlaneNotation
from fieldapp.states import EVERYTHING, Change, MessageKind, Offer, PositionFix

BEDDING = Feature.BEDDING
NOT_CORRECTED = "north-not-corrected"


def here(clock):
    """A position in Scotland, where a compass points about half a degree off (any place with a field will do)."""
    return PositionFix(latitude_deg=56.0, longitude_deg=-3.0, accuracy_m=4.0, at=clock.now)


@pytest.mark.parametrize("old", PlaneNotation)
def test_a_plane_taken_back_is_the_same_plane_in_another_notation(page, typed, old):
    """Digits that come back after the notation was changed mean the plane that was typed, not its strike's namesake."""
    (new,) = set(PlaneNotation) - {old}
    page.change_settings(replace(page.settings, notation=old))
    typed(page, "045/30")
    assert page.keep()
    kept = page._all[page.recent[0].reading_id]
    page.change_settings(replace(page.settings, notation=new))
    assert page.undo()
    assert page.entry.azimuth_text == ("135" if old is PlaneNotation.STRIKE_DIP else "315")
    if page.entry.quadrant_offered:
        page.choose_quadrant(page.entry.expected_quadrant)
    assert page.keep()
    again = page._all[page.recent[0].reading_id]
    assert (again.strike_deg, again.dip_deg) == (kept.strike_deg, kept.dip_deg)


def test_a_correction_to_north_is_taken_back_as_a_whole_and_before_what_went_before_it(page, kept, clock):
    """Undo after the correction takes the correction back, and never a mend from under it."""
    first, second = kept(page, BEDDING, "100/30"), kept(page, BEDDING, "200/40")
    page.mend(second)
    page.back()
    page.digit(1)
    assert page.keep()
    before = {key: page._all[key] for key in (first, second)}
    page.position_changed(here(clock))
    assert page.message.offer is Offer.CORRECT_NORTH
    assert page.accept_offer()
    added = page._all[first].correction_deg
    assert added
    assert page._all[second].strike_deg == pytest.approx(200.0 + added, abs=0.01)
    assert page._all[second].dip_deg == 41.0
    assert page.message.offer is Offer.UNDO
    assert page.accept_offer()
    for key, reading in before.items():
        now = page._all[key]
        assert replace(now, revision=reading.revision, revised_at=reading.revised_at) == reading
        assert NOT_CORRECTED in now.warnings_kept
    assert page.message.offer is Offer.CORRECT_NORTH
    assert page.accept_offer()
    assert page._all[second].correction_deg == added
    assert page.undo()
    assert page.undo()  # the mend
    assert page._all[second].dip_deg == 40.0
    assert page._notebook.standing() == page._all


def test_a_correction_that_cannot_be_stored_is_said_and_changes_nothing(page, kept, clock, monkeypatch):
    """With room for two of three readings none is corrected, and the words are those of the storage."""
    for strike in ("100/30", "110/30", "120/30"):
        kept(page, BEDDING, strike)
    page.position_changed(here(clock))
    before = dict(page._all)
    add, left = page._notebook._add, [2]

    def until_full(*values):
        if not left[0]:
            raise StorageFullError("the storage is full, nothing was written")
        left[0] -= 1
        return add(*values)

    monkeypatch.setattr(page._notebook, "_add", until_full)
    assert page.correct_north() == 0
    assert page.message.kind is MessageKind.TROUBLE
    assert "full" in page.message.text
    assert page._all == before
    assert page._notebook.standing() == before
    monkeypatch.undo()
    assert page.correct_north() == 3


def test_an_offer_that_can_no_longer_be_taken_goes_from_the_page(page, kept, clock):
    """Touching the offer of a correction after the position was lost says so and tells the listeners."""
    kept(page, BEDDING, "100/30")
    page.position_changed(here(clock))
    page.position_changed(None)
    told = []
    page.listen(told.append)
    assert not page.accept_offer()
    assert "position" in page.message.text
    assert page.message.offer is Offer.NONE
    assert any(change & Change.MESSAGE for change in told)


def test_nothing_to_take_back_is_no_change(page, kept):
    """Undo on an empty stack does nothing, and its old offer goes."""
    kept(page, BEDDING, "100/30")
    offered = page.message
    assert page.undo()
    page._message = offered
    told = []
    page.listen(told.append)
    assert not page.accept_offer()
    assert page.message is None
    assert told
    assert told[0] != EVERYTHING


def test_a_reading_turned_round_in_dip_directions_keeps_no_side_of_before(page, kept, typed):
    """Mended by dip direction, a reading typed with a tapped side says only the side of its new digits."""
    reading_id = kept(page, BEDDING, "080/30", "S")
    page.change_settings(replace(page.settings, notation=PlaneNotation.DIP_DIRECTION_DIP))
    page.mend(reading_id)
    assert page.entry.quadrant == "S"  # until it is touched the reading is as it was
    typed(page, "350/30")
    assert page.entry.quadrant == ""
    assert [line for line in page.entry.checks if not line.passed] == []
    assert page.keep()
    mended = page._all[reading_id]
    assert (mended.strike_deg, mended.dip_quadrant) == (260.0, "")
    assert mended.as_entered == "dip direction/dip 350/30"


def test_a_bed_marked_overturned_is_something_begun(page, kept):
    """Undo leaves an entry alone in which so far only the overturned bed was marked."""
    kept(page, BEDDING, "080/30")
    page.set_overturned(True)
    assert page.undo()
    assert page.entry.overturned
    assert page.entry.azimuth_text == ""
