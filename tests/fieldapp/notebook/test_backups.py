from __future__ import annotations

import os
import sqlite3
import threading
from contextlib import closing
from datetime import UTC, date, datetime, timedelta

import pytest

from fieldapp.notebook import open_notebook
from fieldapp.notebook.backups import (
    KEPT,
    back_up,
    backups_of,
    count_in,
    faults_in,
    folder_of,
    is_due,
    kept_before_restoring,
    made_at,
    readings_in,
)
from fieldapp.notebook.errors import DamagedError, NotebookError

DAY = date(2026, 5, 1)


@pytest.fixture
def path(tmp_path):
    return tmp_path / "field.notebook"


@pytest.fixture
def notebook(path, clock):
    opened = open_notebook(path, clock).notebook
    yield opened
    opened.close()


def test_a_backup_holds_what_was_kept_even_while_the_notebook_is_open(notebook, path, make_reading):
    """The online backup carries readings that are only in the write-ahead log yet, as one sound file."""
    reading = make_reading()
    notebook.keep(reading)
    backup = back_up(path, DAY)
    assert readings_in(backup) == [reading]
    with closing(sqlite3.connect(backup)) as db:
        assert faults_in(db) == []
    assert [p.name for p in folder_of(path).iterdir()] == [backup.name]


def test_one_backup_a_day_and_the_newest_week_is_kept(notebook, path, make_reading):
    """A second backup of a day takes the place of the first; of many days the newest seven stay."""
    notebook.keep(make_reading())
    assert is_due(path, DAY)
    for number in range(10):
        back_up(path, DAY + timedelta(days=number))
        back_up(path, DAY + timedelta(days=number))
    assert [p.stem for p in backups_of(path)] == [
        (DAY + timedelta(days=9 - n)).isoformat() for n in range(KEPT)
    ]
    assert not is_due(path, DAY + timedelta(days=9))
    assert is_due(path, DAY + timedelta(days=10))


def test_a_damaged_notebook_pushes_no_good_backup_out(notebook, path, make_reading):
    """The copy is checked before it takes its name: a notebook gone wrong leaves the older backups as they are."""
    for number in range(40):
        notebook.keep(make_reading(note="x" * 500, strike_deg=float(number)))
    good = back_up(path, DAY).read_bytes()
    notebook.close()
    data = bytearray(path.read_bytes())
    place = data.index(b"Mossgarth", 30_000)
    data[place : place + 1] = b"N"
    path.write_bytes(data)
    with pytest.raises(DamagedError):
        back_up(path, DAY)
    assert [p.read_bytes() for p in backups_of(path)] == [good]
    assert list(folder_of(path).glob("*.partial")) == []


def test_restoring_brings_the_backup_back_and_keeps_what_was(notebook, path, make_reading):
    """After a restore the readings are those of the backup; how the notebook was is a backup of its own."""
    early, late = make_reading(), make_reading()
    notebook.keep(early)
    backup = back_up(path, DAY)
    notebook.keep(late)
    notebook.restore(backup)
    assert list(notebook.standing().values()) == [early]
    saved = next(p for p in backups_of(path) if "before restoring" in p.name)
    assert set(readings_in(saved)) == {early, late}
    notebook.keep(make_reading())
    assert notebook.add_backup(saved).revisions == 1
    assert notebook.count() == 3
    assert notebook.add_backup(saved).revisions == 0
    assert notebook.last_take_in().revisions == 1  # nothing is noted of what brought nothing


def test_adding_a_backup_shows_what_an_undone_take_in_hides(notebook, path, make_reading):
    """What the backup shows is shown again, though the notebook has it; taking it back hides it once more."""
    reading = make_reading()
    taken = notebook.take_in([reading], "tablet-b.csv")
    backup = back_up(path, DAY)
    notebook.undo_take_in(taken.take_in)
    assert notebook.count() == 0
    added = notebook.add_backup(backup)
    assert added.revisions == 1
    assert list(notebook.standing().values()) == [reading]
    notebook.undo_take_in(added.take_in)
    assert notebook.count() == 0


def test_the_oldest_backup_can_be_restored_again_and_again(notebook, path, make_reading):
    """What is kept before restoring never pushes out the very backup that is to be restored."""
    for number in range(KEPT):
        notebook.keep(make_reading())
        back_up(path, DAY + timedelta(days=number))
    oldest = backups_of(path)[-1]
    for _ in range(4):
        notebook.keep(make_reading())
        notebook.restore(oldest)
        assert notebook.count() == 1
    assert oldest in backups_of(path)


def test_a_clock_set_back_does_not_cost_the_backup_of_the_day(notebook, path, make_reading):
    """A backup that is dated before all others is still there after it was written."""
    for number in range(KEPT):
        back_up(path, DAY + timedelta(days=number))
    reading = make_reading()
    notebook.keep(reading)
    backup = back_up(path, DAY - timedelta(days=3000))
    assert readings_in(backup) == [reading]


def test_a_backup_that_cannot_be_read_restores_nothing(notebook, make_reading, tmp_path):
    """A broken backup is refused and the notebook stays as it is."""
    notebook.keep(make_reading())
    broken = tmp_path / "broken.backup"
    broken.write_bytes(b"SQLite format 3\0" + bytes(5000))
    with pytest.raises(NotebookError):
        notebook.restore(broken)
    assert notebook.count() == 1


def test_backups_run_beside_keeping(notebook, path, make_reading):
    """Backups made on another thread while readings are kept are each whole."""
    stop = threading.Event()
    made, trouble = [], []

    def work():
        day = DAY
        while not stop.is_set():
            try:
                made.append(len(readings_in(back_up(path, day))))
            except NotebookError as error:
                trouble.append(error)
            day += timedelta(days=1)

    notebook.keep(make_reading())
    thread = threading.Thread(target=work)
    thread.start()
    for _ in range(60):
        notebook.keep(make_reading())
    stop.set()
    thread.join()
    assert trouble == []
    assert made == sorted(made)
    assert notebook.count() == 61


def test_a_backup_says_how_many_readings_it_holds(notebook, path, make_reading):
    """Revisions of one reading are one reading, a struck-out one counts; a file that is no backup has no number."""
    first = make_reading()
    notebook.keep(first)
    notebook.keep(make_reading())
    notebook.keep(first.revised(at=first.recorded_at, struck_out=True))
    backup = back_up(path, DAY)
    assert count_in(backup) == 2
    for number, content in enumerate((b"", b"SQLite format 3\0" + bytes(5000))):
        broken = backup.with_name(f"broken-{number}.backup")
        broken.write_bytes(content)
        assert count_in(broken) is None
    assert count_in(backup.with_name("nowhere.backup")) is None


def test_a_backup_says_when_it_was_made(notebook, path, make_reading):
    """Day and hour of the file where it is of that day, the moment named before restoring, else the day alone."""
    notebook.keep(make_reading())
    backup = back_up(path, DAY)
    at = datetime(2026, 5, 1, 16, 40, tzinfo=UTC)
    os.utime(backup, (at.timestamp(), at.timestamp()))
    assert made_at(backup) == (at, True)
    copied = at + timedelta(days=90)
    os.utime(backup, (copied.timestamp(), copied.timestamp()))
    assert made_at(backup) == (datetime(2026, 5, 1, tzinfo=UTC), False)
    assert not kept_before_restoring(backup)
    notebook.restore(backup)
    (before,) = (b for b in backups_of(path) if kept_before_restoring(b))
    when, to_the_minute = made_at(before)
    assert to_the_minute
    assert when.date() == DAY


def test_no_folder_no_backups(path):
    """A notebook that was never backed up has none."""
    assert backups_of(path) == []
