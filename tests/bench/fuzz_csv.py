"""Fuzz the reader of files with a coverage-guided fuzzer: ``python tests/bench/fuzz_csv.py [SECONDS [FOLDER]]``.

FOLDER holds inputs to begin with, if there are any; what is found to lead further is written there.

Needs the package `atheris`, which few machines can install and nothing else here uses, so it is no dependency of the
project and is imported by name. Any bytes must give a table or a CsvError, within bounded time and memory, the same
ones with arrow (if it is installed) and without, and what was read must stay what it is when it is written and read
again; anything else is a finding, printed with the bytes that made it. The fuzzer itself grows by about 5 GB in an
hour; our reader does not (6,000 random files read and written in a loop: 75 MB throughout).
"""

from __future__ import annotations

import importlib
import io
import sys
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from analysis.files.table import ReadingTable

atheris = importlib.import_module("atheris")

with atheris.instrument_imports(include=["analysis"]):
    from analysis.errors import CsvError
    from analysis.files.arrowed import parse_clean
    from analysis.files.csvfile import csv_text, read_table

_HEADER = b"reading_id,revision,feature,strike_deg,dip_deg,trend_deg,plunge_deg,fold,outcrop,note\n"


def one_input(data: bytes) -> None:
    """Read bytes as a file, with our header before them in half of the cases, and write what was read."""
    content = _HEADER + data[1:] if data[:1] < b"\x80" else data[1:]
    table, said = _read(content), None
    if isinstance(table, CsvError):
        said, table = str(table), None
    arrowed = _read(content, clean_parser=parse_clean)
    if table is None or isinstance(arrowed, CsvError):
        if said != (str(arrowed) if isinstance(arrowed, CsvError) else None):
            raise AssertionError(f"arrow changes whether a file is refused: {content!r}")
        return
    if arrowed.faults != table.faults or arrowed.readings() != table.readings():
        raise AssertionError(f"arrow changes what is read: {content!r}")
    text = "".join(csv_text(table))
    again = read_table(io.BytesIO(text.encode()))
    if again.faults or again.readings() != table.readings():
        raise AssertionError(f"a file that was read changes when it is written and read again: {content!r}")


def _read(content: bytes, **options: object) -> ReadingTable | CsvError:
    stream = io.BytesIO(content)
    stream.name = "fuzz"
    try:
        return read_table(stream, **options)
    except CsvError as error:
        return error


def main() -> None:
    """Run for so many seconds, by default an hour."""
    seconds = sys.argv[1] if len(sys.argv) > 1 else "3600"
    atheris.Setup(
        [
            sys.argv[0],
            f"-max_total_time={seconds}",
            "-max_len=4096",
            "-timeout=30",
            "-rss_limit_mb=8192",
            *sys.argv[2:],
        ],
        one_input,
    )
    atheris.Fuzz()


if __name__ == "__main__":
    main()
