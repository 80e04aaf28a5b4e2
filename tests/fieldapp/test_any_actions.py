"""Any actions in any order: nothing that was said to be kept is lost, and the page says what the notebook holds.

A model is not needed for what the page shows: it is held against a page made anew from the same notebook. What undo
must bring back is noted before each step.
"""

from __future__ import annotations

import shutil
import tempfile
from collections import deque
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, Phase, settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, initialize, invariant, precondition, rule

from analysis.errors import PositionError
from analysis.files.csvfile import write_readings
from analysis.files.reading import Reading
from analysis.orient.features import Feature
from fieldapp.dispatch import at_once
from fieldapp.entry import EntryDraft
from fieldapp.notebook.ids import ReadingIds
from fieldapp.notebook.rows import SELECT, reading_from
from fieldapp.outcrop import open_page
from fieldapp.running import RunningFold
from fieldapp.settings import NorthMode, PlaneNotation
from fieldapp.states import QUADRANTS, Change, Measured, Offer, PositionFix
from fieldapp.undoing import DEPTH
from tests.fieldapp.conftest import SetClock

azimuths = st.one_of(st.sampled_from([0.0, 90.0, 359.9, 360.0]), st.floats(0.0, 360.0))
inclinations = st.one_of(st.sampled_from([0.0, 90.0]), st.floats(0.0, 90.0))
notes = st.text(st.characters(exclude_categories=["Cs"]), max_size=8)


def contents(page):
    """What stands, without the numbers and times of its revisions."""
    cells = {key: reading.cells() for key, reading in page._all.items()}
    return {key: cell | dict.fromkeys(("revision", "revised_at"), "") for key, cell in cells.items()}


class Geologist(RuleBasedStateMachine):
    """Somebody who does anything."""

    def __init__(self):
        super().__init__()
        self.folder = Path(tempfile.mkdtemp(prefix="actions"))
        self.clock = SetClock()
        self.queue = deque()
        self.files = 0
        self.said = {}  # what the page said was kept: (id, revision) to reading
        self.before = []  # for each step that can be taken back: what stood before it, and the ids it may leave
        self.open()

    def open(self):
        """Open the page; its work waits until it is done."""
        self.queue.clear()
        self.before.clear()
        self.page = open_page(
            self.folder / "any.notebook",
            clock=self.clock,
            dispatch=lambda *work: self.queue.append(work),
        )
        self.page.listen(self.look)

    def look(self, change):
        """Look at what a leaf looks at, in the midst of each change."""
        page = self.page
        shown = (
            page.entry,
            page.strip,
            page.place,
            page.tabs,
            page.recent,
            page.net,
            page.funnel,
            page.named,
        )
        assert shown
        if change & Change.PLAN:
            assert page.plan is not None

    def teardown(self):
        """Close the page and forget its files."""
        self.page.close()
        shutil.rmtree(self.folder)

    def doing(self, do, *values):
        """Do what can be taken back; note what stood before."""
        before, newest = contents(self.page), self.page._undo.newest()
        done = do(*values)
        if done and self.page._undo.newest() is not newest:
            self.before = [*self.before[-(DEPTH - 1) :], (before, set())]
        changed = {key for key, content in contents(self.page).items() if before.get(key) != content}
        for _, touched in self.before[:-1]:  # a revision made here outlives the take-in that it rests on
            touched.update(changed)
        return done, changed

    def note(self):
        """Note what is said to be kept."""
        for reading in self.page._all.values():
            self.said[reading.reading_id, reading.revision, reading] = True

    # -- entry --

    @rule(keys=st.text(alphabet="0123456789.<", min_size=1, max_size=6))
    def press(self, keys):
        """Press keys."""
        for key in keys:
            if key in ".<":
                (self.page.point if key == "." else self.page.back)()
            else:
                self.page.digit(int(key))

    @rule(feature=st.sampled_from(Feature))
    def choose_feature(self, feature):
        """Choose what is read."""
        self.page.choose_feature(feature)

    @rule(quadrant=st.sampled_from(QUADRANTS))
    def tap(self, quadrant):
        """Tap a side."""
        self.page.choose_quadrant(quadrant)

    @rule(text=notes, overturned=st.booleans())
    def write(self, text, overturned):
        """Write a note and mark the bed."""
        self.page.set_note(text)
        self.page.set_overturned(overturned)

    @rule()
    def clear(self):
        """Clear the entry."""
        self.page.clear()
        assert self.page.entry.azimuth_text == ""

    @rule()
    def use_a_mend(self):
        """Take the first mend that a check offers."""
        for line in self.page.entry.checks:
            if line.mend_label:
                self.page.apply_mend(line.name)
                return

    @rule(azimuth=azimuths, inclination=inclinations, north=st.sampled_from(["magnetic", "true"]))
    def measure(self, azimuth, inclination, north):
        """Measure with the sensors."""
        self.page.measured(
            Measured(
                azimuth_deg=azimuth,
                inclination_deg=inclination,
                scatter_deg=1.2,
                samples=30,
                north=north,
                raw="raw",
            )
        )

    @rule()
    def keep(self):
        """Press Keep, whatever stands there."""
        ready = self.page.entry.ready
        done, changed = self.doing(self.page.keep)
        assert done is ready, self.page.message
        assert len(changed) <= 1
        assert not done or self.page.message.text.startswith("Kept")

    @rule(
        feature=st.sampled_from(Feature),
        azimuth=st.integers(0, 360),
        inclination=st.integers(0, 90),
        often=st.integers(1, 4),
    )
    def read(self, feature, azimuth, inclination, often):
        """Read and keep an attitude as it is meant to be done, a few times."""
        self.page.clear()
        self.page.choose_feature(feature)
        for number in range(often):
            for digit in f"{(azimuth + 3 * number) % 360:03d}{max(inclination - number, 0):02d}":
                self.page.digit(int(digit))
            if self.page.entry.quadrant_offered:
                self.page.choose_quadrant(self.page.entry.expected_quadrant)
            assert self.page.entry.ready, self.page.entry
            done, changed = self.doing(self.page.keep)
            assert done
            assert len(changed) == 1

    # -- past readings --

    def one(self, choice):
        """One of the readings there are."""
        return list(self.page._all)[choice % len(self.page._all)]

    has_readings = precondition(lambda self: self.page._all)

    @has_readings
    @rule(choice=st.integers(0, 10_000))
    def mend(self, choice):
        """Load a past reading."""
        self.page.mend(self.one(choice))

    @has_readings
    @rule(choice=st.integers(0, 10_000))
    def strike_or_restore(self, choice):
        """Strike a reading out, or let it count again."""
        key = self.one(choice)
        struck = self.page._all[key].struck_out
        done, _ = self.doing(self.page.restore_reading if struck else self.page.strike_out, key)
        assert done, self.page.message

    @has_readings
    @rule(choice=st.integers(0, 10_000), azimuth=st.integers(0, 359), text=notes)
    def mend_and_keep(self, choice, azimuth, text):
        """Mend a past reading as it is meant to be done."""
        self.page.mend(self.one(choice))
        self.page.set_note(text)
        for digit in f"{azimuth:03d}40":
            self.page.digit(int(digit))
        if self.page.entry.quadrant_offered and self.page.entry.quadrant != self.page.entry.expected_quadrant:
            self.page.choose_quadrant(self.page.entry.expected_quadrant)
        done, changed = self.doing(self.page.keep)
        assert done, self.page.entry
        assert len(changed) <= 1

    @has_readings
    @rule(choice=st.integers(0, 10_000))
    def name(self, choice):
        """Name a reading."""
        self.page.name_reading(self.one(choice))

    @rule()
    def undo(self):
        """Take back; what stood before the step stands again, and a reading that was new is struck out or gone."""
        done = self.page.undo()
        assert done is bool(self.before), self.page.message
        if not done:
            return
        before, touched = self.before.pop()
        now = contents(self.page)
        assert set(before) - touched <= set(now)
        for key, content in now.items():
            if key in before:
                assert content == before[key] or key in touched
            else:
                assert content["struck_out"] == "yes" or key in touched

    @rule()
    def take_the_offer(self):
        """Touch what the message offers."""
        offer = self.page.message.offer if self.page.message else Offer.NONE
        if offer is Offer.UNDO:
            self.undo()
        else:
            self.doing(self.page.accept_offer)

    # -- place, north, settings, time --

    @rule(
        fold=st.sampled_from(["Fold 1", "Mossgarth", " "]), outcrop=st.sampled_from(["1", "MG-2", "", "\n"])
    )
    def go(self, fold, outcrop):
        """Go elsewhere; names that are none are refused."""
        self.page.choose_fold(fold)
        self.page.choose_outcrop(outcrop)

    @rule(
        place=st.one_of(
            st.none(), st.tuples(st.sampled_from([56.0, -33.0, 89.9]), st.sampled_from([-3.0, 180.0]))
        ),
        old_s=st.sampled_from([0.0, 400.0, -100.0]),
    )
    def move(self, place, old_s):
        """Get a position, or lose it."""
        fix = None
        if place is not None:
            at = self.clock.now - timedelta(seconds=old_s)
            fix = PositionFix(
                latitude_deg=place[0], longitude_deg=place[1], accuracy_m=5.0, source="gps", at=at
            )
        self.page.position_changed(fix)
        self.page.tick()

    @rule(text=st.sampled_from(["48.5 -28.25", "26UMU 076 726", "-33 180", "over there", None]))
    def place(self, text):
        """Type where the outcrop lies, or go by the device again."""
        stood = self.page.place.by_hand
        if text is None:
            self.page.forget_position()
            assert self.page.place.by_hand == ""
            return
        try:
            self.page.place_by_hand(text)
        except PositionError:
            assert text == "over there"
            assert self.page.place.by_hand == stood
        else:
            assert self.page.place.by_hand

    @rule()
    def place_readings(self):
        """Give the position typed to the readings here that have none."""
        waiting = [
            key
            for key, reading in self.page._all.items()
            if (reading.fold, reading.outcrop) == (self.page.place.fold, self.page.place.outcrop)
            and reading.latitude_deg is None
        ]
        by_hand = self.page.place.by_hand
        done, changed = self.doing(lambda: self.page.place_readings() > 0)
        assert done is bool(waiting and by_hand)
        assert changed == (set(waiting) if done else set())

    @rule()
    def correct(self):
        """Correct what waits for north."""
        self.doing(lambda: self.page.correct_north() > 0)

    @rule(
        notation=st.sampled_from(PlaneNotation),
        north=st.sampled_from(NorthMode),
        margin_deg=st.sampled_from([2.0, 5.0]),
        require=st.booleans(),
    )
    def set(self, notation, north, margin_deg, require):
        """Change settings."""
        changed = replace(
            self.page.settings,
            notation=notation,
            north=north,
            margin_deg=margin_deg,
            require_quadrant=require,
        )
        assert self.page.change_settings(changed)

    @rule(days=st.sampled_from([-800, -1, 0, 1, 800]))
    def set_the_clock(self, days):
        """Set the tablet's clock."""
        self.clock.later(days=days)

    # -- files --

    @rule(
        strikes=st.lists(st.integers(0, 359), min_size=1, max_size=3),
        choice=st.none() | st.integers(0, 10_000),
        fold=st.sampled_from(["Fold 1", "Mossgarth"]),
    )
    def take_in(self, strikes, choice, fold):
        """Take in a colleague's readings, and a revision of one of ours."""
        ids = ReadingIds(self.clock)
        theirs = [
            Reading(
                reading_id=ids(),
                feature=Feature.BEDDING,
                strike_deg=float(s),
                dip_deg=40.0,
                fold=fold,
                outcrop="C",
            )
            for s in strikes
        ]
        if choice is not None and self.page._all:
            ours = self.page._all[self.one(choice)]
            theirs.append(ours.revised(at=self.clock(), note=f"theirs {self.files}"))
        self.files += 1
        path = self.folder / f"theirs-{self.files}.csv"
        write_readings(path, theirs)
        preview = self.page.preview_take_in(path)
        assert preview.problems == ()
        done, _ = self.doing(self.page.take_in, preview)
        assert done, self.page.message

    @rule()
    def take_back_a_take_in(self):
        """Take the last take-in back from its own leaf."""
        self.page.undo_take_in()
        self.forget_the_order()

    def forget_the_order(self):
        """What a step must bring back is no longer known once one is taken out from under it."""
        self.before = [(before, set(self.page._all) | set(before)) for before, _ in self.before]
        self.before = self.before[: len(self.page._undo._steps)]

    @rule()
    def hand_over(self):
        """Hand over what is new."""
        self.files += 1
        assert self.page.write_hand_over(self.folder / f"ours-{self.files}.csv")
        assert self.page.hand_over.since_last == 0

    @precondition(lambda self: self.page.hand_over.backups)
    @rule(choice=st.integers(0, 100), whole=st.booleans())
    def from_a_backup(self, choice, whole):
        """Put the notebook back to a backup, or add what it holds."""
        backups = self.page.hand_over.backups
        backup = backups[choice % len(backups)]
        if whole:
            assert self.page.restore(backup), self.page.message
            self.said.clear()
            self.before.clear()
        else:
            done, _ = self.doing(self.page.add_backup, backup)
            assert done, self.page.message

    @rule()
    def restart(self):
        """Close the page and open it again, with what was under way coming to nothing."""
        draft, place = self.page._draft, self.page.place
        self.page.close()
        self.open()
        assert self.page._draft == draft
        assert (self.page.place.fold, self.page.place.outcrop) == (place.fold, place.outcrop)

    @rule(count=st.integers(1, 4))
    def wait(self, count):
        """Let work come back."""
        for _ in range(min(count, len(self.queue))):
            at_once(*self.queue.popleft())

    # -- always --

    @initialize()
    def begin(self):
        """Begin on an empty page."""
        assert self.page.standing == ()

    @invariant()
    def all_that_was_kept_is_there(self):
        """Each revision that ever stood on the page is in the notebook; what stands is what the notebook says."""
        notebook = self.page._notebook
        assert notebook.standing() == self.page._all
        held = {(r.reading_id, r.revision, r) for r in _all_revisions(notebook)}
        self.note()
        assert self.said.keys() <= held

    @invariant()
    def entry_and_place_are_stored(self):
        """What stands in the entry, and where the page stands, is in the notebook."""
        stored, place = self.page._notebook.settings(), self.page.place
        assert self.page._by_hand == self.page._notebook.position_by_hand(place.fold, place.outcrop)
        assert (stored["page.fold"], stored["page.outcrop"]) == (place.fold, place.outcrop)
        assert self.page.entry.saved
        assert EntryDraft.from_values(self.page._notebook.draft()) == self.page._draft

    @invariant()
    def the_check_is_that_of_the_notebook(self):
        """Sums, counts and check are those of a fold made anew from what stands."""
        page, running = self.page, self.page._running
        of_fold = [r for r in page._notebook.standing().values() if r.fold == page.place.fold]
        anew = RunningFold(page.place.fold, running.settings, of_fold)
        assert {n.reading_id for n in anew.neighbours} == {n.reading_id for n in running.neighbours}
        assert anew.check.readings == running.check.readings
        assert (anew.check.interval_deg is None) is (running.check.interval_deg is None)
        if anew.check.interval_deg is not None:  # without it no transection is shown
            assert anew.check.transection_deg == pytest.approx(running.check.transection_deg, abs=1e-6)
            assert anew.check.interval_deg == pytest.approx(running.check.interval_deg, abs=1e-6)
        assert anew.check.blocked is running.check.blocked
        assert sum(tab.in_fold for tab in page.tabs) == len(anew.neighbours)
        for feature, points in page.net.points.items():
            assert np.allclose(points.vectors, anew.net_points()[feature].vectors) or len(points.vectors) > 1

    @invariant()
    def the_funnel_goes_up_to_now(self):
        """Its points follow one another, and with no work under way the last one is the check as it stands."""
        points = self.page.funnel.points
        counts = [point.readings for point in points]
        assert counts == sorted(set(counts))
        assert not counts or counts[-1] <= self.page._running.standing_count
        if not self.queue:
            assert (counts[-1] if counts else 0) == self.page._running.standing_count


def _all_revisions(notebook):
    return [reading_from(row) for row in notebook._read(f"SELECT {SELECT} FROM revisions")]  # noqa: S608 - fixed names


Geologist.TestCase.settings = settings(
    max_examples=40,
    stateful_step_count=40,
    deadline=None,
    derandomize=True,
    phases=[Phase.generate],  # a run that fails is shown as it was: making it smaller would take minutes
    suppress_health_check=list(HealthCheck),
)
TestAnyActions = Geologist.TestCase
