"""The open notebook: readings as revisions that are only ever added, places, draft and settings.

Every method that writes is one transaction: but for the draft (see `save_draft`) it is all there, on the
disk, when the method returns, or none of it is and a NotebookError says why. Only the thread that opened it
may use it.
"""

from __future__ import annotations

import json
import shutil
import sqlite3
from contextlib import closing, contextmanager
from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING

from analysis.orient.position import HAND, Position
from fieldapp.notebook.backups import KEPT, back_up, readings_in
from fieldapp.notebook.errors import plain_errors
from fieldapp.notebook.rows import INSERT, SELECT, digest_of, reading_from, row_values
from fieldapp.notebook.schema import migrate
from fieldapp.states import FaultInput

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
    from pathlib import Path

    from analysis.files.reading import Reading


@dataclass(frozen=True, slots=True)
class TakeIn:
    """One file of a colleague's that was taken in: its name, when, how many revisions it brought."""

    take_in: int
    source: str
    taken_at: datetime
    revisions: int


def standing_of(readings: Iterable[Reading]) -> dict[str, Reading]:
    """The revision that stands for each id, by id in the order first seen: the highest revision.

    Two contents under one revision: the later in `Reading.content_order`, so that every tablet picks the
    same.
    """
    best: dict[str, Reading] = {}
    for reading in readings:
        held = best.get(reading.reading_id)
        if (
            held is None
            or reading.revision > held.revision
            or (reading.revision == held.revision and reading.content_order() > held.content_order())
        ):
            best[reading.reading_id] = reading
    return best


class Notebook:
    """One notebook file, open. Made by `fieldapp.notebook.open_notebook`."""

    def __init__(
        self, path: Path, db: sqlite3.Connection, clock: Callable[[], datetime], *, read_only: bool = False
    ) -> None:
        self.path = path
        self.read_only = read_only
        self._db = db
        self._clock = clock

    def close(self) -> None:
        """Close the file; what was kept is in it already."""
        self._db.close()

    @contextmanager
    def _writing(self) -> Iterator[sqlite3.Connection]:
        with plain_errors(self.path):
            self._db.execute("BEGIN IMMEDIATE")
            try:
                yield self._db
                self._db.execute("COMMIT")
            except BaseException:
                if self._db.in_transaction:
                    self._db.execute("ROLLBACK")
                raise

    def _read(self, statement: str, values: Sequence[object] = ()) -> list[tuple[object, ...]]:
        with plain_errors(self.path):
            return self._db.execute(statement, values).fetchall()

    def _now(self) -> str:
        return self._clock().isoformat()

    # -- readings ------------------------------------------------------------------------------------------

    def keep(self, reading: Reading, *, draft: Mapping[str, object] | None = None) -> None:
        """Add one revision, and in the same transaction put `draft` in place of the draft that it came from.

        In one transaction, because a draft left behind by a reading that was kept would be kept twice.
        """
        with self._writing() as db:
            self._add(db, reading, "kept")
            if draft is not None:
                self._put_draft(db, draft)

    def keep_all(self, readings: Iterable[Reading]) -> None:
        """Add many revisions, all of them or none."""
        with self._writing() as db:
            for reading in readings:
                self._add(db, reading, "kept")

    def _add(self, db: sqlite3.Connection, reading: Reading, origin: str) -> int:
        self._make_place(db, reading.fold, reading.outcrop)
        values = (None, digest_of(reading), origin, self._now(), *row_values(reading))
        return int(db.execute(INSERT, values).lastrowid or 0)

    def revisions(self, reading_id: str | None = None) -> list[Reading]:
        """All revisions seen, in the order stored; of one reading if asked."""
        where = "" if reading_id is None else "WHERE reading_id = ?"
        rows = self._read(
            f"SELECT {SELECT} FROM seen {where} ORDER BY seq",  # noqa: S608 - fixed names
            () if reading_id is None else (reading_id,),
        )
        return [reading_from(row) for row in rows]

    def standing(self) -> dict[str, Reading]:
        """Readings as they stand, struck-out ones included, by id in the order first kept."""
        return standing_of(self.revisions())

    def next_revision(self, reading_id: str) -> int:
        """The number for a further revision, past all that are stored, undone take-ins included."""
        rows = self._read("SELECT max(revision) FROM revisions WHERE reading_id = ?", (reading_id,))
        return int(str(rows[0][0] or 0)) + 1

    def count(self) -> int:
        """Number of revisions seen."""
        return int(str(self._read("SELECT count(*) FROM seen")[0][0]))

    # -- places --------------------------------------------------------------------------------------------

    def _make_place(self, db: sqlite3.Connection, fold: str, outcrop: str | None) -> None:
        now = self._now()
        db.execute("INSERT OR IGNORE INTO folds (name, made_at) VALUES (?, ?)", (fold, now))
        if outcrop is not None:
            db.execute(
                "INSERT OR IGNORE INTO outcrops (fold, name, made_at) VALUES (?, ?, ?)", (fold, outcrop, now)
            )

    def make_place(self, fold: str, outcrop: str | None = None) -> None:
        """Make a fold, and an outcrop on it, unless they are there."""
        with self._writing() as db:
            self._make_place(db, fold, outcrop)

    def folds(self) -> list[str]:
        """Names of the folds, in the order made."""
        return [str(row[0]) for row in self._read("SELECT name FROM folds ORDER BY rowid")]

    def outcrops(self, fold: str) -> list[str]:
        """Names of the outcrops of a fold, in the order made."""
        rows = self._read("SELECT name FROM outcrops WHERE fold = ? ORDER BY rowid", (fold,))
        return [str(row[0]) for row in rows]

    def position_by_hand(self, fold: str, outcrop: str) -> Position | None:
        """Where an outcrop lies, as typed; None where nobody typed it."""
        rows = self._read(
            "SELECT latitude_deg, longitude_deg, accuracy_m FROM outcrops WHERE fold = ? AND name = ?",
            (fold, outcrop),
        )
        if not rows or rows[0][0] is None or rows[0][1] is None:
            return None
        latitude, longitude, accuracy = rows[0]
        return Position(latitude, longitude, accuracy_m=accuracy, source=HAND)  # type: ignore[arg-type]  # by the table

    def set_position_by_hand(self, fold: str, outcrop: str, position: Position | None) -> None:
        """Note where an outcrop lies, or that this is no longer to be taken from what was typed."""
        place = (None, None, None)
        if position is not None:
            place = (position.latitude_deg, position.longitude_deg, position.accuracy_m)
        with self._writing() as db:
            self._make_place(db, fold, outcrop)
            db.execute(
                "UPDATE outcrops SET latitude_deg = ?, longitude_deg = ?, accuracy_m = ? "
                "WHERE fold = ? AND name = ?",
                (*place, fold, outcrop),
            )

    def fault(self, fold: str) -> FaultInput:
        """The fault noted beside a fold."""
        rows = self._read(
            "SELECT fault_strike_deg, fault_sense, zone_width_m FROM folds WHERE name = ?", (fold,)
        )
        return FaultInput(*rows[0]) if rows else FaultInput()  # type: ignore[arg-type]  # typed by the table

    def set_fault(self, fold: str, fault: FaultInput) -> None:
        """Note the fault beside a fold."""
        with self._writing() as db:
            self._make_place(db, fold, None)
            db.execute(
                "UPDATE folds SET fault_strike_deg = ?, fault_sense = ?, zone_width_m = ? WHERE name = ?",
                (fault.strike_deg, fault.sense, fault.zone_width_m, fold),
            )

    # -- draft and settings --------------------------------------------------------------------------------

    def _put_draft(self, db: sqlite3.Connection, draft: Mapping[str, object]) -> None:
        text = json.dumps(draft, ensure_ascii=False)
        db.execute("INSERT OR REPLACE INTO draft VALUES (1, ?, ?)", (text, self._now()))

    def save_draft(self, draft: Mapping[str, object]) -> None:
        """Keep the draft of the entry, in place of the one before.

        This is done at each key, so it does not wait for the disk: it outlives the process, and should the
        power fail the last keys of an entry may be gone, never a reading. A log written this way stays whole
        (https://www.sqlite.org/pragma.html#pragma_synchronous).
        """
        with plain_errors(self.path):
            self._db.execute("PRAGMA synchronous = NORMAL")
        try:
            with self._writing() as db:
                self._put_draft(db, draft)
        finally:
            self._db.execute("PRAGMA synchronous = FULL")

    def draft(self) -> dict[str, object]:
        """Give the draft last saved; empty where there is none, or where it cannot be read."""
        return _as_mapping(self._read("SELECT content FROM draft"))

    def save_settings(
        self, values: Mapping[str, object], *, draft: Mapping[str, object] | None = None
    ) -> None:
        """Keep settings by name; names not given keep their values. `draft` is put in with them, or nothing is.

        In one transaction, because digits typed in one notation mean another plane in the other.
        """
        with self._writing() as db:
            if draft is not None:
                self._put_draft(db, draft)
            db.executemany(
                "INSERT OR REPLACE INTO settings VALUES (?, ?)",
                [(name, json.dumps(value)) for name, value in values.items()],
            )

    def settings(self) -> dict[str, object]:
        """Give the settings kept, by name."""
        found: dict[str, object] = {}
        for name, value in self._read("SELECT name, value FROM settings"):
            try:
                found[str(name)] = json.loads(str(value))
            except ValueError:
                continue
        return found

    # -- take-ins and hand-overs ---------------------------------------------------------------------------

    def take_in(self, readings: Sequence[Reading], source: str) -> TakeIn:
        """Add revisions that a colleague's file brought, all in one transaction.

        Revisions that are seen already are not touched; where all are, nothing is noted. Two contents under one
        revision are both kept.
        """
        with self._writing() as db:
            now = self._now()
            number = int(
                db.execute("INSERT INTO take_ins (source, taken_at) VALUES (?, ?)", (source, now)).lastrowid
                or 0
            )
            brought = 0
            for reading in readings:
                found = db.execute(
                    "SELECT revisions.seq, seen.seq FROM revisions LEFT JOIN seen USING (seq) "
                    "WHERE revisions.reading_id = ? AND revisions.revision = ? AND revisions.digest = ?",
                    (reading.reading_id, reading.revision, digest_of(reading)),
                ).fetchone()
                if found and found[1] is not None:
                    continue
                seq = found[0] if found else self._add(db, reading, "taken in")
                db.execute("INSERT INTO taken VALUES (?, ?)", (number, seq))
                brought += 1
            if not brought:
                db.execute("DELETE FROM take_ins WHERE take_in = ?", (number,))
        return TakeIn(number, source, datetime.fromisoformat(now), brought)

    def undo_take_in(self, take_in: int) -> None:
        """Make all that a take-in brought unseen again. Revisions made here on top of it stay."""
        with self._writing() as db:
            db.execute(
                "UPDATE take_ins SET undone_at = ? WHERE take_in = ? AND undone_at IS NULL",
                (self._now(), take_in),
            )

    def last_take_in(self) -> TakeIn | None:
        """The newest take-in that was not undone."""
        rows = self._read(
            "SELECT take_in, source, taken_at, (SELECT count(*) FROM taken WHERE taken.take_in = t.take_in) "
            "FROM take_ins AS t WHERE undone_at IS NULL ORDER BY take_in DESC LIMIT 1"
        )
        if not rows:
            return None
        number, source, taken_at, brought = rows[0]
        return TakeIn(int(str(number)), str(source), datetime.fromisoformat(str(taken_at)), int(str(brought)))

    def not_handed_over(self) -> list[Reading]:
        """Revisions seen that no hand-over has carried yet, in the order stored."""
        rows = self._read(
            f"SELECT {SELECT} FROM seen WHERE seq NOT IN (SELECT seq FROM handed) "  # noqa: S608 - fixed names
            "ORDER BY seq"
        )
        return [reading_from(row) for row in rows]

    def count_not_handed_over(self) -> int:
        """Number of revisions that no hand-over has carried yet."""
        rows = self._read("SELECT count(*) FROM seen WHERE seq NOT IN (SELECT seq FROM handed)")
        return int(str(rows[0][0]))

    def note_hand_over(self, target: str, readings: Iterable[Reading]) -> None:
        """Note that these revisions were written to `target`; call it when the file is on the disk."""
        with self._writing() as db:
            number = db.execute(
                "INSERT INTO hand_overs (target, made_at) VALUES (?, ?)", (target, self._now())
            ).lastrowid
            db.executemany(
                "INSERT INTO handed SELECT ?, seq FROM revisions "
                "WHERE reading_id = ? AND revision = ? AND digest = ?",
                [(number, r.reading_id, r.revision, digest_of(r)) for r in readings],
            )

    def last_hand_over(self) -> datetime | None:
        """Time of the newest hand-over."""
        rows = self._read("SELECT made_at FROM hand_overs ORDER BY hand_over DESC LIMIT 1")
        return datetime.fromisoformat(str(rows[0][0])) if rows else None

    # -- backups -------------------------------------------------------------------------------------------

    def restore(self, backup: Path) -> None:
        """Put the whole notebook back to a backup; how it is now is kept as a backup of its own first."""
        readings_in(backup)  # a backup that cannot be read must not replace anything
        now = self._clock()
        name = f"{now:%Y-%m-%dT%H%M%SZ} before restoring"
        back_up(self.path, now.date(), name=name, kept=KEPT + 1, spared=backup)
        with (
            plain_errors(self.path),
            closing(sqlite3.connect(f"{backup.resolve().as_uri()}?mode=ro", uri=True)) as source,
        ):
            source.backup(self._db)
            migrate(self._db, self.path, self._clock)

    def add_backup(self, backup: Path, name: str = "a backup") -> TakeIn:
        """Add the revisions that a backup holds and the notebook does not show: a take-in, with all that belongs to it.

        What an undone take-in hides is shown again where the backup shows it.
        """
        return self.take_in(readings_in(backup), name)

    def space_left_bytes(self) -> int | None:
        """Free bytes on the storage that the notebook lies on; None where the system does not say."""
        try:
            return shutil.disk_usage(self.path.parent).free
        except OSError:
            return None


def _as_mapping(rows: Sequence[Sequence[object]]) -> dict[str, object]:
    try:
        found = json.loads(str(rows[0][0])) if rows else {}
    except ValueError:
        return {}
    return found if isinstance(found, dict) else {}
