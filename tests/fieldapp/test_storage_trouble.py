from __future__ import annotations

import json
import os
import sqlite3
import subprocess
import sys
import tempfile
from contextlib import closing
from pathlib import Path

import pytest

from fieldapp.notebook import open_notebook
from fieldapp.notebook.errors import LockedError, ReadOnlyError, StorageFullError
from fieldapp.states import MessageKind, SignalKind

ROOT = Path(__file__).parents[2]
TRIAL = Path(__file__).with_name("storage_trial.py")


def trial(kind, path):
    done = subprocess.run(
        [sys.executable, TRIAL, kind, path],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        timeout=60,
    )
    assert done.returncode == 0, done.stderr
    return json.loads(done.stdout)


def test_full_storage_is_said_and_the_draft_is_kept(page, typed):
    """At the page limit of the database Keep says that the storage is full; the entry stays and nothing is lost."""
    db = page._notebook._db
    db.execute(f"PRAGMA max_page_count = {db.execute('PRAGMA page_count').fetchone()[0] + 4}")
    typed(page, "050/31")
    while page.keep():
        assert len(page.standing) < 200
        typed(page, f"0{50 + len(page.standing) % 20}/3{len(page.standing) % 7}")
    before = page.standing
    entry = page.entry
    signals = []
    page.on_signal(signals.append)
    assert not page.keep()
    assert "full" in page.message.text
    assert page.message.kind is MessageKind.TROUBLE
    assert [s.kind for s in signals] == [SignalKind.REFUSED]
    assert page.entry == entry
    assert page.standing == before
    db.execute("PRAGMA max_page_count = 1000000")
    assert page.keep()
    assert len(page.standing) == len(before) + 1


def test_full_storage_while_typing_keeps_the_draft_in_memory(page, typed):
    """A draft that cannot be saved is said once, stays on the page, and is saved when there is room again."""
    typed(page, "04", "")
    db = page._notebook._db
    db.execute(f"PRAGMA max_page_count = {db.execute('PRAGMA page_count').fetchone()[0]}")
    page.set_note("n" * 30_000)
    assert not page.entry.saved
    assert "full" in page.message.text
    page.dismiss_message()
    page.digit(5)
    assert page.message is None
    assert page.entry.azimuth_text == "045"
    db.execute("PRAGMA max_page_count = 1000000")
    page.flush()
    assert page.entry.saved
    assert page._notebook.draft()["azimuth"] == "045"


def test_typed_errors_say_what_to_do(tmp_path, clock, make_reading):
    """The notebook raises an error of its own for each trouble, with words on what to do."""
    path = tmp_path / "field.notebook"
    notebook = open_notebook(path, clock).notebook
    notebook._db.execute(f"PRAGMA max_page_count = {notebook._db.execute('PRAGMA page_count').fetchone()[0]}")
    with pytest.raises(StorageFullError, match="Free some space"):
        notebook.keep(make_reading(note="n" * 30_000))
    notebook._db.execute("PRAGMA max_page_count = 100000")
    notebook._db.execute("PRAGMA query_only = ON")
    with pytest.raises(ReadOnlyError, match="may only be read"):
        notebook.keep(make_reading())
    notebook._db.execute("PRAGMA query_only = OFF")
    with closing(sqlite3.connect(path, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        with pytest.raises(LockedError, match="Close the other program"):
            notebook.keep(make_reading())
    notebook.keep(make_reading())
    assert notebook.count() == 1
    notebook.close()


def test_a_locked_notebook_is_said_and_the_draft_is_kept(page, typed):
    """While another program writes, Keep says so and the entry stays; afterwards it is kept once."""
    typed(page, "045/30")
    with closing(sqlite3.connect(page.hand_over.notebook_path, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        assert not page.keep()
        assert "another program" in page.message.text
        assert page.entry.azimuth_text == "045"
        other.execute("ROLLBACK")
    assert page.keep()
    assert len(page.standing) == 1


def test_a_storage_that_refuses_to_grow_loses_nothing(tmp_path, clock):
    """The operating system refuses further bytes: the page says so, keeps the entry, and what was kept is there."""
    path = tmp_path / "field.notebook"
    refused, after = trial("full", path)
    assert refused["message"].endswith("storage.") or "full" in refused["message"]
    assert 0 < refused["kept"] < 500
    assert refused["readings"] == refused["kept"]
    assert (refused["azimuth"], refused["inclination"], refused["quadrant"]) == ("045", "30", "SE")
    assert after["kept"] is True
    opened = open_notebook(path, clock)
    assert opened.report.set_aside is None
    assert opened.notebook.count() == refused["kept"] + 1
    opened.notebook.close()


def test_read_only_storage_shows_the_readings_and_keeps_the_draft(clock, make_reading):
    """Opened by a user who may only read, the page shows everything, says so, and keeps the entry on the page."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "field.notebook"
        notebook = open_notebook(path, clock).notebook
        notebook.keep(make_reading())
        notebook.close()
        path.chmod(0o444)
        Path(folder).chmod(0o555)
        try:
            opening, after = trial("read-only", path)
        finally:
            Path(folder).chmod(0o755)
    assert "may only be read" in opening["opening"]
    assert opening["strip"]
    assert after["kept"] is False
    assert "may only be read" in after["message"]
    assert after["read_only"] is True
    assert after["saved"] is False
    assert after["readings"] == 1
    assert (after["azimuth"], after["inclination"], after["quadrant"]) == ("045", "30", "SE")
