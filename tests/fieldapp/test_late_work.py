"""Work that comes back late: it is about readings, a fold or a page that may be gone by then."""

from __future__ import annotations

from collections import deque
from dataclasses import replace
from datetime import timedelta

import pytest

from analysis.orient.features import Feature
from fieldapp.dispatch import at_once
from fieldapp.notebook import backups
from fieldapp.page import core
from fieldapp.page.core import BACKUP_EVERY
from fieldapp.states import MessageKind

BEDDING, CLEAVAGE = Feature.BEDDING, Feature.CLEAVAGE


class Waiting:
    """A dispatch whose work is done when a test says so; `closed` as an executor that takes no more."""

    def __init__(self) -> None:
        self.queue = deque()
        self.closed = False

    def __call__(self, work, done, failed):
        """Take a work."""
        if self.closed:
            raise RuntimeError("cannot schedule new futures after shutdown")
        self.queue.append((work, done, failed))

    def one(self):
        """Do the oldest work and bring it back."""
        at_once(*self.queue.popleft())

    def all(self):
        """Do all the work there is, and what comes of it."""
        while self.queue:
            self.one()


@pytest.fixture
def waiting():
    return Waiting()


@pytest.fixture
def slow(page_at, tmp_path, waiting):
    return page_at(tmp_path / "slow.notebook", dispatch=waiting)


def read_fold(page, kept, count):
    """So many readings of both limbs and the cleavage."""
    for number in range(count):
        strike, feature = ((30, BEDDING), (230, BEDDING), (40, CLEAVAGE))[number % 3]
        dip = 50 if feature is BEDDING else 80
        kept(page, feature, f"{strike + 7 * number % 23:03d}/{dip + 5 * number % 9}")


def test_the_history_of_one_fold_never_stands_in_anothers_funnel(slow, waiting, kept):
    """A funnel worked out for the fold before comes back to another one and is left."""
    read_fold(slow, kept, 9)
    waiting.all()
    slow.choose_fold("Other")
    kept(slow, BEDDING, "040/30")
    slow.choose_fold("Fold 1")
    slow.choose_fold("Other")
    kept(slow, BEDDING, "041/31")
    kept(slow, BEDDING, "042/32")
    while waiting.queue:
        waiting.one()
        assert len(slow.funnel.points) <= 3
        assert slow.funnel.points[-1].readings == 3
    assert [point.readings for point in slow.funnel.points] == [1, 2, 3]


def test_the_funnel_ends_at_the_check_while_its_past_is_worked_out(slow, waiting, kept):
    """Strike out, set another margin, keep: the last point is always the check, and no count stands twice."""
    read_fold(slow, kept, 24)
    slow.change_settings(replace(slow.settings, confidence=0.9))  # the whole funnel comes from elsewhere
    waiting.all()

    def ends_at_the_check(count):
        points, check = slow.funnel.points, slow.check
        assert [point.readings for point in points] == list(range(1, count + 1))
        assert points[-1].delta_deg == pytest.approx(check.transection_deg, abs=1e-9)
        assert (points[-1].low_deg, points[-1].high_deg) == pytest.approx(check.interval_deg, abs=1e-9)

    ends_at_the_check(24)
    slow.strike_out(slow.recent[-1].reading_id)
    ends_at_the_check(23)
    kept(slow, BEDDING, "041/31")
    ends_at_the_check(24)
    slow.change_settings(replace(slow.settings, confidence=0.95))
    ends_at_the_check(24)
    waiting.all()
    ends_at_the_check(24)


def test_the_forecast_of_one_fold_never_continues_anothers_funnel(slow, waiting, kept):
    """Between going to another fold and its own forecast, its funnel has no dotted part."""
    read_fold(slow, kept, 30)
    slow.choose_fold("Other")
    slow.choose_fold("Fold 1")
    waiting.all()
    here = slow.funnel
    assert here.ahead, "this fold must have a forecast, or the test shows nothing"
    assert here.settles_at is not None
    slow.choose_fold("Other")
    assert slow.funnel.ahead == ()
    assert slow.funnel.settles_at is None
    waiting.all()
    slow.choose_fold("Fold 1")
    waiting.all()
    assert slow.funnel == here


def test_what_comes_back_to_a_closed_page_asks_for_nothing_more(slow, waiting, kept):
    """A forecast under way while another waits, and the page closed: nothing is asked of a worker that is gone."""
    read_fold(slow, kept, 7)
    told = []
    slow.listen(told.append)
    slow.close()
    waiting.closed = True
    told.clear()
    waiting.all()
    assert told == []
    slow.close()  # as the system may ask twice


def test_a_page_whose_draft_could_not_be_stored_closes_all_the_same(slow, typed):
    """Closing again after closing touches no notebook, even with a draft that was never stored."""
    slow._notebook._db.execute("PRAGMA query_only = ON")
    typed(slow, "045", "")
    assert not slow.entry.saved
    slow.close()
    slow.close()


def test_a_backup_that_never_came_back_is_made_on_closing(slow, kept):
    """Closed while the backup of the day waits behind other work, the page writes it itself."""
    read_fold(slow, kept, 1)
    assert backups.backups_of(slow._notebook.path) == []
    slow.close()
    (backup,) = backups.backups_of(slow._notebook.path)
    assert len(backups.readings_in(backup)) == 1


def test_a_backup_that_fails_is_said_once_and_tried_again(page, kept, monkeypatch):
    """Every 25 readings the backup is tried; where it fails it is said then, not at each reading."""
    kept(page, BEDDING, "040/30")
    tried = []

    def fails(path, _day):
        tried.append(path)
        raise backups.DamagedError("the notebook is damaged", where=path.name)

    monkeypatch.setattr(core, "back_up", fails)
    warned = 0
    for number in range(2 * BACKUP_EVERY):
        kept(page, BEDDING, f"0{40 + number % 9}/30")
        warned += page.message.kind is MessageKind.WARNING
    assert len(tried) == 2
    assert warned == 2
    monkeypatch.undo()
    for _ in range(BACKUP_EVERY):
        kept(page, BEDDING, "040/30")
    newest = backups.backups_of(page._notebook.path)[0]
    assert len(backups.readings_in(newest)) > 2 * BACKUP_EVERY


def test_backups_follow_the_days(page, kept, clock):
    """On a new day the first reading brings that day's backup."""
    kept(page, BEDDING, "040/30")
    clock.now += timedelta(days=1)
    kept(page, BEDDING, "041/30")
    assert len(backups.backups_of(page._notebook.path)) == 2
