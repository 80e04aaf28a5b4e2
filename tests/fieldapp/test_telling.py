"""What the page tells: listeners, messages, backups, damage."""

from __future__ import annotations

from analysis.orient.features import Feature
from fieldapp.notebook.backups import readings_in
from fieldapp.states import Change, Offer

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


# -- telling ------------------------------------------------------------------------------------------------


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
        held.append(len(readings_in(page.hand_over.backups[0].path)))
    assert held == [1] * 25 + [26] * 5
    clock.later(days=1)
    kept(page, BEDDING, "045/31")
    assert [len(readings_in(b.path)) for b in page.hand_over.backups] == [31, 26]
    kept(page, BEDDING, "045/32")
    newest = page.hand_over.backups[0].path
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
