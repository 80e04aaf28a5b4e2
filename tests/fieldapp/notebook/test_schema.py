from __future__ import annotations

import sqlite3
from contextlib import closing

import pytest

from fieldapp.notebook import open_notebook
from fieldapp.notebook.errors import LockedError, NewerNotebookError, NotANotebookError
from fieldapp.notebook.rows import INSERT, digest_of, row_values
from fieldapp.notebook.schema import MIGRATIONS, Migration, migrate, version_of


@pytest.fixture
def db(tmp_path):
    with closing(sqlite3.connect(tmp_path / "n.notebook", isolation_level=None, timeout=0.05)) as opened:
        yield opened


def recorded(db):
    return [row[0] for row in db.execute("SELECT version FROM migrations ORDER BY version")]


def test_a_new_file_gets_every_migration_and_records_it(db, tmp_path, clock):
    """All migrations are made in order, each with its record; a second call makes none."""
    path = tmp_path / "n.notebook"
    assert migrate(db, path, clock) == [m.version for m in MIGRATIONS]
    assert recorded(db) == [m.version for m in MIGRATIONS]
    assert version_of(db) == MIGRATIONS[-1].version
    assert migrate(db, path, clock) == []


@pytest.mark.parametrize("version", range(1, len(MIGRATIONS)))
def test_a_notebook_of_any_earlier_version_keeps_its_readings(tmp_path, clock, make_reading, version):
    """A file left at an earlier version is brought up to date and its readings are all there."""
    path = tmp_path / "old.notebook"
    reading = make_reading()
    with closing(sqlite3.connect(path, isolation_level=None)) as old:
        migrate(old, path, clock, MIGRATIONS[:version])
        old.execute("INSERT INTO folds (name, made_at) VALUES ('Mossgarth', '')")
        old.execute("INSERT INTO outcrops VALUES ('Mossgarth', 'MG-1', '')")
        old.execute(INSERT, (1, digest_of(reading), "kept", "", *row_values(reading)))
    opened = open_notebook(path, clock)
    assert opened.report.set_aside is None
    assert opened.notebook.revisions() == [reading]
    assert version_of(opened.notebook._db) == MIGRATIONS[-1].version
    opened.notebook.close()


def test_a_migration_that_fails_leaves_no_trace(db, tmp_path, clock):
    """Half a migration is none: neither its tables nor its record nor its version stay."""
    path = tmp_path / "n.notebook"
    bad = Migration(len(MIGRATIONS) + 1, "bad", ("CREATE TABLE half (x)", "CREATE TABLE half (x)"))
    with pytest.raises(sqlite3.OperationalError):
        migrate(db, path, clock, (*MIGRATIONS, bad))
    assert version_of(db) == MIGRATIONS[-1].version
    assert recorded(db) == [m.version for m in MIGRATIONS]
    assert not db.execute("SELECT 1 FROM sqlite_master WHERE name = 'half'").fetchone()
    assert not db.in_transaction


def test_a_migration_waits_for_nobody_forever(db, tmp_path, clock):
    """While another program writes, migrating says so."""
    path = tmp_path / "n.notebook"
    with closing(sqlite3.connect(path, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        with pytest.raises(LockedError):
            migrate(db, path, clock)


def test_a_notebook_of_a_later_version_is_left_alone(tmp_path, clock):
    """A file from a newer program is neither opened nor changed."""
    path = tmp_path / "new.notebook"
    open_notebook(path, clock).notebook.close()
    with closing(sqlite3.connect(path)) as db:
        db.execute("PRAGMA user_version = 99")
        db.execute("INSERT INTO migrations VALUES (99, 'of a later version', '')")
        db.commit()
    before = path.read_bytes()
    with pytest.raises(NewerNotebookError, match="format 99"):
        open_notebook(path, clock)
    assert path.read_bytes() == before


def test_a_database_of_another_program_is_left_alone(tmp_path, clock):
    """A file with tables that are not ours is neither opened as a notebook nor taken for a damaged one."""
    path = tmp_path / "other.db"
    with closing(sqlite3.connect(path)) as db:
        db.execute("CREATE TABLE things (x)")
    with pytest.raises(NotANotebookError):
        open_notebook(path, clock)
    assert [p.name for p in tmp_path.iterdir() if "damaged" in p.name] == []
    with closing(sqlite3.connect(path)) as db:
        assert db.execute("SELECT count(*) FROM things").fetchone() == (0,)


def test_versions_are_numbered_without_gaps():
    """Migrations are numbered 1, 2, 3 in order."""
    assert [m.version for m in MIGRATIONS] == list(range(1, len(MIGRATIONS) + 1))
