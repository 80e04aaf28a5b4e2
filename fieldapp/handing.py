"""Hand-over: what leaves the notebook as a file and what a colleague's file brings in.

The reader and writer of files load pandas, so they are imported when a file is read or written and not
before.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from fieldapp.naming import line_of
from fieldapp.notebook.backups import backups_of, kept_before_restoring, made_at
from fieldapp.notebook.store import standing_of
from fieldapp.states import Backup, HandOverState, TakeInPreview
from fieldapp.wording import counted

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime
    from pathlib import Path

    from analysis.files.reading import Reading
    from fieldapp.notebook.store import Notebook, TakeIn
    from fieldapp.settings import PlaneNotation

MOST_PROBLEMS = 50  # rows that could not be read and are named in a preview; all are counted


@dataclass(frozen=True, slots=True)
class Offered:
    """A colleague's file as read: all its revisions, and those that would be new here."""

    source: Path
    new: tuple[Reading, ...]
    known: int


class HandOver:
    """Hands readings over and takes them in, on one notebook."""

    def __init__(self, notebook: Notebook, clock: Callable[[], datetime]) -> None:
        self._notebook = notebook
        self._clock = clock
        self._offered: Offered | None = None

    def state(self, readings: int) -> HandOverState:
        """What the Hand over leaf tells; `readings` is the number of readings in the notebook."""
        backups = (backup_at(path) for path in backups_of(self._notebook.path))
        last = self._notebook.last_take_in()
        return HandOverState(
            readings=readings,
            since_last=self._notebook.count_not_handed_over(),
            last_hand_over=self._notebook.last_hand_over(),
            backups=tuple(sorted(backups, key=lambda backup: backup.made_at, reverse=True)),
            space_left_bytes=self._notebook.space_left_bytes(),
            last_take_in="" if last is None else f"{counted(last.revisions)} from {last.source}",
            notebook_path=self._notebook.path,
            read_only=self._notebook.read_only,
        )

    def write(self, path: Path, *, everything: bool) -> int:
        """Write readings to a file, all or those no hand-over has carried; give their number.

        Raises CsvError where the file cannot be written, NotebookError where that cannot be noted.
        """
        from analysis.files.csvfile import write_readings  # noqa: PLC0415 - loads pandas

        readings = self._notebook.revisions() if everything else self._notebook.not_handed_over()
        write_readings(path, readings)
        if not self._notebook.read_only:
            self._notebook.note_hand_over(path.name, readings)
        return len(readings)

    def preview(self, path: Path, planes: PlaneNotation) -> TakeInPreview:
        """Read a colleague's file and tell what it would do; nothing is written. Raises CsvError."""
        from analysis.files.csvfile import read_table  # noqa: PLC0415 - loads pandas
        from analysis.files.join import join  # noqa: PLC0415 - as above

        table = read_table(path)
        theirs, faults = table.readings(), table.faults
        here = set(self._notebook.revisions())
        ids = {r.reading_id for r in here}
        joined = join(here, theirs)
        clash_keys = {(c.reading_id, c.revision) for c in joined.conflicts}
        new = [r for r in joined if r not in here]
        clashes = [r for r in new if (r.reading_id, r.revision) in clash_keys]
        clashing = {r.reading_id for r in clashes}
        standing = standing_of(new).values()
        already = len(theirs) - len(new)
        self._offered = Offered(path, tuple(new), already)
        return TakeInPreview(
            source=path,
            adds=tuple(line_of(r, planes) for r in standing if r.reading_id not in ids | clashing),
            changes=tuple(
                line_of(r, planes) for r in standing if r.reading_id in ids and r.reading_id not in clashing
            ),
            clashes=tuple(line_of(r, planes) for r in clashes),
            known=already,
            problems=tuple(str(fault) for fault in faults[:MOST_PROBLEMS]),
            unread=table.faulty_rows,
        )

    def take_in(self, preview: TakeInPreview) -> TakeIn | None:
        """Take in what was previewed, in one transaction; None where it is not the last one made."""
        offered = self._offered
        if offered is None or offered.source != preview.source:
            return None
        taken = self._notebook.take_in(offered.new, offered.source.name)
        self._offered = None
        return taken


def backup_at(path: Path) -> Backup:
    """Tell what is known of a backup without opening it."""
    return Backup(path, *made_at(path), kept_before_restoring(path))
