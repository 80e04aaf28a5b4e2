"""The notebook's tables, made and changed by migrations; each is recorded in the transaction that makes it.

Migrations are never edited once released: a change is a new one at the end. The readings are revisions that
are only ever added: two triggers refuse to change or delete one. A revision is seen if it was kept here, or
if a take-in that was not undone brought it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from fieldapp.notebook.errors import DamagedError, NewerNotebookError, NotANotebookError, plain_errors

if TYPE_CHECKING:
    import sqlite3
    from collections.abc import Callable
    from datetime import datetime
    from pathlib import Path

APPLICATION_ID = 0x48696E67  # "Hing": SQLite keeps it in the header, so that the file can be told from others


@dataclass(frozen=True, slots=True)
class Migration:
    """One step of the schema."""

    version: int
    name: str
    statements: tuple[str, ...]


_BASE = (
    """CREATE TABLE folds (
        name TEXT PRIMARY KEY NOT NULL,
        made_at TEXT NOT NULL
    )""",
    """CREATE TABLE outcrops (
        fold TEXT NOT NULL REFERENCES folds (name),
        name TEXT NOT NULL,
        made_at TEXT NOT NULL,
        PRIMARY KEY (fold, name)
    )""",
    # The columns after stored_at are those of the CSV, in its order (see rows.py).
    """CREATE TABLE revisions (
        seq INTEGER PRIMARY KEY,
        digest TEXT NOT NULL,
        origin TEXT NOT NULL CHECK (origin IN ('kept', 'taken in')),
        stored_at TEXT NOT NULL,
        reading_id TEXT NOT NULL,
        revision INTEGER NOT NULL CHECK (revision >= 1),
        struck_out INTEGER NOT NULL CHECK (struck_out IN (0, 1)),
        recorded_at TEXT,
        revised_at TEXT,
        observer TEXT NOT NULL,
        device TEXT NOT NULL,
        fold TEXT NOT NULL,
        outcrop TEXT NOT NULL,
        feature TEXT NOT NULL CHECK (feature IN ('bedding', 'cleavage', 'intersection', 'hinge')),
        strike_deg REAL CHECK (strike_deg >= 0 AND strike_deg < 360),
        dip_deg REAL CHECK (dip_deg BETWEEN 0 AND 90),
        trend_deg REAL CHECK (trend_deg >= 0 AND trend_deg < 360),
        plunge_deg REAL CHECK (plunge_deg BETWEEN 0 AND 90),
        dip_quadrant TEXT NOT NULL,
        as_entered TEXT NOT NULL,
        north_reference TEXT NOT NULL,
        correction_deg REAL,
        correction_model TEXT NOT NULL,
        instrument TEXT NOT NULL,
        scatter_deg REAL,
        samples INTEGER,
        overturned INTEGER NOT NULL CHECK (overturned IN (0, 1)),
        warnings_kept TEXT NOT NULL,
        latitude_deg REAL,
        longitude_deg REAL,
        altitude_m REAL,
        accuracy_m REAL,
        position_source TEXT NOT NULL,
        note TEXT NOT NULL,
        other TEXT NOT NULL,
        UNIQUE (reading_id, revision, digest),
        FOREIGN KEY (fold, outcrop) REFERENCES outcrops (fold, name)
    )""",
    """CREATE TRIGGER revisions_are_not_changed BEFORE UPDATE ON revisions
        BEGIN SELECT RAISE(ABORT, 'a revision is never changed'); END""",
    """CREATE TRIGGER revisions_are_not_deleted BEFORE DELETE ON revisions
        BEGIN SELECT RAISE(ABORT, 'a revision is never deleted'); END""",
    """CREATE TABLE draft (
        only_one INTEGER PRIMARY KEY CHECK (only_one = 1),
        content TEXT NOT NULL,
        saved_at TEXT NOT NULL
    )""",
    """CREATE TABLE settings (
        name TEXT PRIMARY KEY NOT NULL,
        value TEXT NOT NULL
    )""",
)

_HAND_OVER = (
    """CREATE TABLE take_ins (
        take_in INTEGER PRIMARY KEY,
        source TEXT NOT NULL,
        taken_at TEXT NOT NULL,
        undone_at TEXT
    )""",
    """CREATE TABLE taken (
        take_in INTEGER NOT NULL REFERENCES take_ins (take_in),
        seq INTEGER NOT NULL REFERENCES revisions (seq),
        PRIMARY KEY (take_in, seq)
    )""",
    "CREATE INDEX taken_by_revision ON taken (seq)",
    """CREATE TABLE hand_overs (
        hand_over INTEGER PRIMARY KEY,
        target TEXT NOT NULL,
        made_at TEXT NOT NULL
    )""",
    """CREATE TABLE handed (
        hand_over INTEGER NOT NULL REFERENCES hand_overs (hand_over),
        seq INTEGER NOT NULL REFERENCES revisions (seq),
        PRIMARY KEY (hand_over, seq)
    )""",
    "CREATE INDEX handed_by_revision ON handed (seq)",
    """CREATE VIEW seen AS SELECT * FROM revisions WHERE origin = 'kept' OR seq IN (
        SELECT taken.seq FROM taken JOIN take_ins USING (take_in) WHERE take_ins.undone_at IS NULL)""",
)

_FAULT = (
    "ALTER TABLE folds ADD COLUMN fault_strike_deg REAL",
    "ALTER TABLE folds ADD COLUMN fault_sense TEXT NOT NULL DEFAULT 'unknown'",
    "ALTER TABLE folds ADD COLUMN zone_width_m REAL",
)

_POSITION_BY_HAND = (
    "ALTER TABLE outcrops ADD COLUMN latitude_deg REAL CHECK (latitude_deg BETWEEN -90 AND 90)",
    "ALTER TABLE outcrops ADD COLUMN longitude_deg REAL CHECK (longitude_deg BETWEEN -180 AND 180)",
    "ALTER TABLE outcrops ADD COLUMN accuracy_m REAL CHECK (accuracy_m >= 0)",
)

MIGRATIONS: tuple[Migration, ...] = (
    Migration(1, "readings, places, draft, settings", _BASE),
    Migration(2, "take-ins and hand-overs", _HAND_OVER),
    Migration(3, "the fault beside the fold", _FAULT),
    Migration(4, "positions of outcrops typed by hand", _POSITION_BY_HAND),
)


def version_of(db: sqlite3.Connection) -> int:
    """Version of the schema in the file; 0 for an empty one."""
    return int(db.execute("PRAGMA user_version").fetchone()[0])


def check_owner(db: sqlite3.Connection, path: Path, newest: int) -> None:
    """Raise NotANotebookError or NewerNotebookError for a file to be left alone, DamagedError for ours."""
    owner = int(db.execute("PRAGMA application_id").fetchone()[0])
    tables = {str(row[0]) for row in db.execute("SELECT name FROM sqlite_master")}
    ours = {"migrations", "revisions"} <= tables
    if owner != APPLICATION_ID and tables and not ours:
        raise NotANotebookError(
            "this file belongs to another program and was left alone",
            where=path.name,
            expected="a notebook of this program",
            mend="Choose another file.",
        )
    version = version_of(db)
    if ours:
        noted = int(db.execute("SELECT max(version) FROM migrations").fetchone()[0] or 0)
        if noted != version or owner != APPLICATION_ID:
            raise DamagedError(f"the header says format {version}, the tables {noted}", where=path.name)
    if version > newest:
        raise NewerNotebookError(
            f"this notebook has format {version} and was left alone",
            where=path.name,
            expected=f"format {newest} or older",
            mend="Update the program on this tablet.",
        )


def migrate(
    db: sqlite3.Connection,
    path: Path,
    clock: Callable[[], datetime],
    migrations: tuple[Migration, ...] = MIGRATIONS,
) -> list[int]:
    """Bring the file to the newest version and give the versions made; each is one transaction or nothing."""
    made = []
    with plain_errors(path):
        check_owner(db, path, migrations[-1].version)
        for migration in migrations:
            if version_of(db) >= migration.version:
                continue
            db.execute("BEGIN IMMEDIATE")
            try:
                # Another process may have made it while this one waited for the lock.
                if version_of(db) < migration.version:
                    _apply(db, migration, clock().isoformat())
                    made.append(migration.version)
                db.execute("COMMIT")
            except BaseException:
                if db.in_transaction:
                    db.execute("ROLLBACK")
                raise
    return made


def _apply(db: sqlite3.Connection, migration: Migration, now: str) -> None:
    db.execute(f"PRAGMA application_id = {APPLICATION_ID}")
    db.execute(
        "CREATE TABLE IF NOT EXISTS migrations "
        "(version INTEGER PRIMARY KEY, name TEXT NOT NULL, applied_at TEXT NOT NULL)"
    )
    for statement in migration.statements:
        db.execute(statement)
    db.execute("INSERT INTO migrations VALUES (?, ?, ?)", (migration.version, migration.name, now))
    db.execute(f"PRAGMA user_version = {migration.version}")
