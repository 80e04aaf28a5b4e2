"""What is wrong with one row of a file: where it stands, what was found, what was expected."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.errors import CsvError

if TYPE_CHECKING:
    from collections.abc import Sequence

MAX_FAULTS_KEPT = 1000  # faults kept word for word; those beyond are only counted
MAX_FOUND = 60  # characters of a cell shown


@dataclass(frozen=True, slots=True)
class RowFault:
    """A fault of one row: file, line (1 is the header, as in an editor), column, found, expected, mend."""

    file: str
    line: int
    column: str
    found: str
    expected: str
    mend: str = ""

    def __str__(self) -> str:
        place = f"{self.file}, line {self.line}"
        if self.column:
            place += f", column {self.column}"
        text = f"{place}: found {self.found}; expected {self.expected}"
        return f"{text}. {self.mend}" if self.mend else text


def shown(text: str) -> str:
    """Quote what stood in a cell, shortened, with control characters made visible."""
    return repr(text if len(text) <= MAX_FOUND else text[:MAX_FOUND] + "...")


class FaultLog:
    """The faults of the files read so far: the first thousand, and how many rows in all."""

    __slots__ = ("kept", "rows")

    def __init__(self) -> None:
        self.kept: list[RowFault] = []
        self.rows = 0

    def add_rows(self, rows: Sequence[Sequence[RowFault]]) -> None:
        """Add the faults of some rows."""
        self.rows += len(rows)
        for faults in rows:
            if len(self.kept) >= MAX_FAULTS_KEPT:
                break
            self.kept.extend(faults)

    def refuse(self) -> CsvError:
        """Make the error that refuses a file with faults, naming the first of them."""
        shown_faults = self.kept[:5]
        more = self.rows - len({(fault.file, fault.line) for fault in shown_faults})
        text = "; ".join(map(str, shown_faults))
        rows = "1 row" if self.rows == 1 else f"{self.rows} rows"
        return CsvError(
            f"{rows} cannot be read: {text}" + (f"; and {more} more" if more > 0 else ""),
            where=self.kept[0].file,
            mend="Mend the rows named, or read without --strict to leave them out.",
        )
