"""Opening the notebook: check it, bring it up to date, and when it is damaged save what can be saved.

A damaged file is never written to again: it is copied aside as it is, a new notebook is made of every
reading in it that is whole, and only then does the new one take the old one's name. The page opens in any of
these cases; the report says what happened.
"""

from __future__ import annotations

import shutil
import sqlite3
import tempfile
from contextlib import closing, contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from fieldapp.notebook.backups import backups_of, faults_in, rows_not_whole
from fieldapp.notebook.carving import carve
from fieldapp.notebook.errors import (
    DamagedError,
    NotANotebookError,
    NotebookError,
    plain_errors,
    plain_os_errors,
    primary_code,
)
from fieldapp.notebook.rows import INSERT, digest_of, row_values
from fieldapp.notebook.schema import MIGRATIONS, check_owner, migrate
from fieldapp.notebook.store import Notebook

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from datetime import datetime

    from fieldapp.notebook.carving import Carved

LOCK_WAIT_S = 0.5  # how long a write waits for another program before the page says so
_SIDE_FILES = ("-wal", "-shm")
_SUFFIXES = (".notebook", ".db")


@dataclass(frozen=True, slots=True, kw_only=True)
class OpeningReport:
    """What opening found: `new` a fresh file, `set_aside` where a damaged one lies, what came of it."""

    new: bool = False
    read_only: bool = False
    set_aside: Path | None = None
    recovered: int = 0
    doubtful: int = 0
    newest_backup: Path | None = None


@dataclass(frozen=True, slots=True)
class Opening:
    """An open notebook and the report of its opening."""

    notebook: Notebook
    report: OpeningReport


def open_notebook(path: Path, clock: Callable[[], datetime]) -> Opening:
    """Open the notebook at `path`, or make it; `clock` gives aware times.

    A notebook that may not be written to opens for reading. Raises NotANotebookError and NewerNotebookError
    for files that must be left alone, LockedError and StorageError where it cannot be opened at all.
    """
    path = Path(path)
    with plain_os_errors(path):
        if not path.exists():
            path.parent.mkdir(parents=True, exist_ok=True)
        _finish_recovery(path)
        new = not path.exists() or path.stat().st_size == 0
    try:
        db, read_only = _connected(path)
        try:
            _made_ready(db, path, clock, read_only=read_only)
        except BaseException:
            db.close()
            raise
    except (DamagedError, NotANotebookError) as error:
        report = _recover(path, clock, error)
        db, read_only = _connected(path)
        return Opening(Notebook(path, db, clock, read_only=read_only), report)
    report = OpeningReport(new=new, read_only=read_only)
    return Opening(Notebook(path, db, clock, read_only=read_only), report)


def _connected(path: Path) -> tuple[sqlite3.Connection, bool]:
    """Give a connection for writing, or for reading where the storage allows no more."""
    with plain_errors(path), _spoilt_tables(path):
        try:
            return _for_writing(path), False
        except sqlite3.OperationalError as error:
            if primary_code(error) not in (
                sqlite3.SQLITE_READONLY,
                sqlite3.SQLITE_CANTOPEN,
                sqlite3.SQLITE_PERM,
            ):
                raise
            if not path.exists():
                raise
        return _for_reading(path), True


def _for_writing(path: Path) -> sqlite3.Connection:
    db = sqlite3.connect(path, timeout=LOCK_WAIT_S, isolation_level=None)
    try:
        db.execute("PRAGMA journal_mode = WAL")
        db.execute("PRAGMA synchronous = FULL")
        db.execute("PRAGMA foreign_keys = ON")
        # Ask for the lock once, without writing: a file that may only be read says so here.
        db.execute("BEGIN IMMEDIATE")
        db.execute("ROLLBACK")
    except BaseException:
        db.close()
        raise
    return db


def _for_reading(path: Path) -> sqlite3.Connection:
    try:
        return _for_reading_as(path, "mode=ro")
    except sqlite3.OperationalError:  # where no side file can be made either
        return _for_reading_as(path, "mode=ro&immutable=1")


def _for_reading_as(path: Path, options: str) -> sqlite3.Connection:
    db = sqlite3.connect(f"{path.resolve().as_uri()}?{options}", uri=True, isolation_level=None)
    try:
        db.execute("SELECT count(*) FROM sqlite_master").fetchone()
    except BaseException:
        db.close()
        raise
    return db


def _made_ready(
    db: sqlite3.Connection, path: Path, clock: Callable[[], datetime], *, read_only: bool
) -> None:
    with _spoilt_tables(path):
        _check_whole(db, path, read_only=read_only)
        if not read_only:
            migrate(db, path, clock)


@contextmanager
def _spoilt_tables(path: Path) -> Iterator[None]:
    """While opening, an error that is no matter of the storage can only be damage to the header or the tables."""
    try:
        yield
    except sqlite3.Error as error:
        if primary_code(error) != sqlite3.SQLITE_ERROR:
            raise
        raise DamagedError(str(error), where=path.name) from error
    except UnicodeDecodeError as error:  # SQLite's own message quotes the spoilt table
        raise DamagedError(str(error), where=path.name) from error


def _check_whole(db: sqlite3.Connection, path: Path, *, read_only: bool) -> None:
    with plain_errors(path):
        check_owner(db, path, MIGRATIONS[-1].version)
        faults = faults_in(db)
        has_readings = db.execute("SELECT 1 FROM sqlite_master WHERE name = 'revisions'").fetchone()
        broken = rows_not_whole(db) if has_readings and not faults else 0
    if (faults or broken) and not read_only:
        raise DamagedError("; ".join(faults) or f"{broken} readings are not whole", where=path.name)


# -- recovery ----------------------------------------------------------------------------------------------


def _recover(path: Path, clock: Callable[[], datetime], why: NotebookError) -> OpeningReport:
    with plain_errors(path), plain_os_errors(path):
        main = path.read_bytes()
        wal_path = _beside(path, "-wal")
        wal = wal_path.read_bytes() if wal_path.exists() else b""
        carved = carve(main, wal)
        if not carved.rows and not _was_notebook(path, main, why):
            raise NotANotebookError(
                "this file is no notebook and was left alone",
                where=path.name,
                expected="a notebook of this program",
                mend="Choose another file.",
            ) from why
        building = _beside(path, ".recovering")
        building.unlink(missing_ok=True)
        _build(building, path, carved, clock)
        aside = _copy_aside(path, clock)
        building.replace(_beside(path, ".recovered"))
        _finish_recovery(path)
    backups = backups_of(path)
    return OpeningReport(
        set_aside=aside,
        recovered=len(carved.rows),
        doubtful=carved.doubtful,
        newest_backup=backups[0] if backups else None,
    )


def _was_notebook(path: Path, main: bytes, why: NotebookError) -> bool:
    """Tell a damaged notebook without a whole reading from a file that never was one.

    A database of another program that can be read is none of ours. What cannot be read is, if anything of the
    header or the tables is ours, or if it stands where only a notebook stands.
    """
    if isinstance(why, NotANotebookError):
        return False
    marks = main.startswith(b"SQLite") or b"CREATE TABLE revisions" in main or not any(main)
    beside = path.suffix in _SUFFIXES or bool(backups_of(path)) or _beside(path, "-wal").exists()
    return marks or beside


def _finish_recovery(path: Path) -> None:
    """Let a recovered notebook take its name; also the end of a recovery that was interrupted here."""
    recovered = _beside(path, ".recovered")
    if recovered.exists():
        for suffix in _SIDE_FILES:  # the old log must not be played into the new file
            _beside(path, suffix).unlink(missing_ok=True)
        recovered.replace(path)


def _copy_aside(path: Path, clock: Callable[[], datetime]) -> Path:
    stem = f"{path.name}.damaged-{clock():%Y%m%dT%H%M%SZ}"
    aside, again = path.with_name(stem), 1
    while aside.exists():
        again += 1
        aside = path.with_name(f"{stem}-{again}")
    for suffix in ("", *_SIDE_FILES):
        source = _beside(path, suffix)
        if source.exists():
            shutil.copy2(source, _beside(aside, suffix))
    return aside


def _build(target: Path, damaged: Path, carved: Carved, clock: Callable[[], datetime]) -> None:
    with closing(sqlite3.connect(target, isolation_level=None)) as db:
        db.execute("PRAGMA foreign_keys = ON")
        db.execute("PRAGMA synchronous = FULL")
        migrate(db, target, clock)
        db.execute("BEGIN IMMEDIATE")
        now = clock().isoformat()
        for seq in sorted(carved.rows):
            row = carved.rows[seq]
            place = (row.reading.fold, row.reading.outcrop, now)
            db.execute("INSERT OR IGNORE INTO folds (name, made_at) VALUES (?, ?)", (place[0], now))
            db.execute("INSERT OR IGNORE INTO outcrops (fold, name, made_at) VALUES (?, ?, ?)", place)
            values = (seq, digest_of(row.reading), row.origin, row.stored_at, *row_values(row.reading))
            db.execute(INSERT.replace("INSERT", "INSERT OR IGNORE", 1), values)
        _copy_what_answers(damaged, db)
        # A reading taken in whose take-in was lost must not vanish.
        lost = "origin = 'taken in' AND seq NOT IN (SELECT seq FROM taken)"
        if db.execute(f"SELECT 1 FROM revisions WHERE {lost}").fetchone():  # noqa: S608 - fixed text
            number = db.execute(
                "INSERT INTO take_ins (source, taken_at) VALUES ('a damaged notebook', ?)", (now,)
            ).lastrowid
            db.execute(f"INSERT INTO taken SELECT ?, seq FROM revisions WHERE {lost}", (number,))  # noqa: S608
        db.execute("COMMIT")


def _copy_what_answers(damaged: Path, db: sqlite3.Connection) -> None:
    """Copy what SQLite can still read of the small tables; each row for itself."""
    tables = ("folds", "outcrops", "settings", "draft", "take_ins", "taken", "hand_overs", "handed")
    with tempfile.TemporaryDirectory(prefix="notebook") as scratch:
        copy = Path(scratch) / "damaged"
        for suffix in ("", *_SIDE_FILES[:1]):
            if _beside(damaged, suffix).exists():
                shutil.copyfile(_beside(damaged, suffix), _beside(copy, suffix))
        with closing(sqlite3.connect(copy, isolation_level=None)) as old:
            for table in tables:
                columns = [row[1] for row in db.execute(f"PRAGMA table_info({table})")]
                marks = ", ".join("?" * len(columns))
                names = ", ".join(columns)
                with suppress(sqlite3.DatabaseError, UnicodeDecodeError):
                    for row in old.execute(f"SELECT {names} FROM {table} ORDER BY rowid"):  # noqa: S608
                        with suppress(sqlite3.DatabaseError):
                            db.execute(
                                f"INSERT OR REPLACE INTO {table} ({names}) VALUES ({marks})",  # noqa: S608
                                row,
                            )


def _beside(path: Path, suffix: str) -> Path:
    return path.with_name(path.name + suffix)
