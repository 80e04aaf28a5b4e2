"""Fuzz the reader of files with a coverage-guided fuzzer: ``python tests/bench/fuzz_csv.py [SECONDS]``.

Needs the package `atheris`, which few machines can install and nothing else here uses, so it is no dependency of the
project and is imported by name. Any bytes must give a table or a CsvError, within
bounded time and memory; anything else is a finding, printed with the bytes that made it.
"""

from __future__ import annotations

import importlib
import io
import sys

atheris = importlib.import_module("atheris")

with atheris.instrument_imports(include=["analysis"]):
    from analysis.errors import CsvError
    from analysis.files.csvfile import csv_text, read_table

_HEADER = b"reading_id,revision,feature,strike_deg,dip_deg,trend_deg,plunge_deg,fold,outcrop,note\n"


def one_input(data: bytes) -> None:
    """Read bytes as a file, with our header before them in half of the cases, and write what was read."""
    content = _HEADER + data[1:] if data[:1] < b"\x80" else data[1:]
    stream = io.BytesIO(content)
    stream.name = "fuzz"
    try:
        table = read_table(stream)
    except CsvError:
        return
    text = "".join(csv_text(table))
    again = read_table(io.BytesIO(text.encode()))
    if again.faults or again.readings() != table.readings():
        raise AssertionError(f"a file that was read changes when it is written and read again: {content!r}")


def main() -> None:
    """Run for so many seconds, by default an hour."""
    seconds = sys.argv[1] if len(sys.argv) > 1 else "3600"
    atheris.Setup(
        [sys.argv[0], f"-max_total_time={seconds}", "-max_len=4096", "-timeout=30", "-rss_limit_mb=2048"],
        one_input,
    )
    atheris.Fuzz()


if __name__ == "__main__":
    main()
