"""Backups of the notebook: one a day, the newest few kept, by SQLite's online backup while in use."""

from __future__ import annotations

import os
import sqlite3
import threading
from contextlib import closing, suppress
from datetime import UTC, date, datetime, time
from typing import TYPE_CHECKING

from fieldapp.notebook.errors import DamagedError, plain_errors, plain_os_errors, primary_code
from fieldapp.notebook.rows import SELECT, digest_of, reading_from

if TYPE_CHECKING:
    from pathlib import Path

    from analysis.files.reading import Reading

KEPT = 7
_SUFFIX = ".backup"
_MOMENT = len("2026-05-04T093000Z")


def folder_of(notebook: Path) -> Path:
    """The folder beside a notebook that holds its backups."""
    return notebook.parent / f"{notebook.stem} backups"


def backups_of(notebook: Path) -> list[Path]:
    """Backups of a notebook, newest first."""
    try:
        return sorted(folder_of(notebook).glob(f"*{_SUFFIX}"), key=lambda path: path.name, reverse=True)
    except OSError:
        return []


def made_at(backup: Path) -> tuple[datetime, bool]:
    """When a backup was made, aware, UTC, and whether to the minute.

    Its name says the day, or the moment before another was restored. The hour of a day's backup is that of the file,
    unless the file was copied since and carries another day.
    """
    stem = backup.stem
    with suppress(ValueError):
        return datetime.strptime(stem[:_MOMENT], "%Y-%m-%dT%H%M%SZ").replace(tzinfo=UTC), True
    with suppress(OSError):
        written = datetime.fromtimestamp(backup.stat().st_mtime, tz=UTC)
        if written.date().isoformat() == stem:
            return written, True
    with suppress(ValueError):
        return datetime.combine(date.fromisoformat(stem), time(), UTC), False
    return datetime.fromtimestamp(0, tz=UTC), False


def kept_before_restoring(backup: Path) -> bool:
    """Whether a backup is how the notebook was before another one was restored."""
    return backup.stem.endswith("before restoring")


def count_in(backup: Path) -> int | None:
    """Number of readings that a backup holds, struck-out ones included; None where it cannot be read."""
    try:
        with closing(sqlite3.connect(f"{backup.resolve().as_uri()}?mode=ro&immutable=1", uri=True)) as db:
            return int(db.execute("SELECT count(DISTINCT reading_id) FROM seen").fetchone()[0])
    except sqlite3.Error:
        return None


def is_due(notebook: Path, day: date) -> bool:
    """Whether the day has no backup yet."""
    return not (folder_of(notebook) / f"{day.isoformat()}{_SUFFIX}").exists()


_one_at_a_time = threading.Lock()  # a worker and a closing page may both be at the backup of the day


def back_up(
    notebook: Path, day: date, *, kept: int = KEPT, name: str = "", spared: Path | None = None
) -> Path:
    """Write the backup of a day and drop the oldest beyond `kept`; may run on any thread.

    The one just written is never dropped, though a clock set back may have dated it the oldest; nor is `spared`.

    The copy is checked row by row before it takes its name, so that a damaged notebook never pushes a good
    backup out. Raises DamagedError for such a notebook, and other NotebookErrors for trouble with the
    storage.
    """
    folder = folder_of(notebook)
    target = folder / f"{name or day.isoformat()}{_SUFFIX}"
    partial = target.with_suffix(".partial")
    with _one_at_a_time, plain_errors(target), plain_os_errors(target):
        folder.mkdir(parents=True, exist_ok=True)
        partial.unlink(missing_ok=True)
        try:
            with (
                closing(sqlite3.connect(f"{notebook.resolve().as_uri()}?mode=ro", uri=True)) as source,
                closing(sqlite3.connect(partial, isolation_level=None)) as copy,
            ):
                source.backup(copy)
                copy.execute("PRAGMA journal_mode = DELETE")
                _check(copy, target)
            _to_disk(partial)
            partial.replace(target)
            _to_disk(folder)
        finally:
            with suppress(OSError):
                partial.unlink(missing_ok=True)
        for old in backups_of(notebook)[kept:]:
            if old not in (target, spared):
                old.unlink(missing_ok=True)
    return target


def readings_in(backup: Path) -> list[Reading]:
    """All revisions that a backup holds."""
    with (
        plain_errors(backup),
        closing(sqlite3.connect(f"{backup.resolve().as_uri()}?mode=ro&immutable=1", uri=True)) as db,
    ):
        rows = db.execute(f"SELECT {SELECT} FROM seen ORDER BY seq").fetchall()  # noqa: S608 - fixed names
        return [reading_from(row) for row in rows]


def faults_in(db: sqlite3.Connection) -> list[str]:
    """What is wrong with an open notebook file, in SQLite's words; empty where it is whole."""
    rows = db.execute("PRAGMA integrity_check(5)").fetchall()
    faults = [str(row[0]) for row in rows if row[0] != "ok"]
    if not faults:
        faults += [f"a {row[0]} without its {row[2]}" for row in db.execute("PRAGMA foreign_key_check")]
    return faults


def rows_not_whole(db: sqlite3.Connection) -> int:
    """Number of revisions whose content no longer agrees with its digest."""
    broken = 0
    rows = db.execute(f"SELECT {SELECT} FROM revisions")  # noqa: S608 - fixed names
    while True:
        try:
            row = rows.fetchone()
            if row is None:
                return broken
            broken += digest_of(reading_from(row)) != row[1]
        except (ValueError, TypeError):  # ReadingError is a ValueError
            broken += 1
        except sqlite3.OperationalError as error:
            if primary_code(error) != sqlite3.SQLITE_ERROR:
                raise
            return broken + 1  # text that is no text: SQLite's reader goes no further


def _check(db: sqlite3.Connection, path: Path) -> None:
    faults = faults_in(db)
    broken = 0 if faults else rows_not_whole(db)
    if faults or broken:
        what = faults[0] if faults else f"{broken} readings changed on the storage"
        raise DamagedError(
            f"the notebook is damaged ({what}), and the older backups were kept",
            where=path.name,
            mend="Close and open the page again: what can be read is moved to a new notebook.",
        )


def _to_disk(path: Path) -> None:
    """Flush a file or a folder to the disk, where the system can."""
    try:
        handle = os.open(path, os.O_RDONLY)
    except OSError:  # some systems open no folders
        return
    try:
        with suppress(OSError):
            os.fsync(handle)
    finally:
        os.close(handle)
