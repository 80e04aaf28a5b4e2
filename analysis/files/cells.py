"""One cell of a file of readings: its text made into a value, and back, guarded against spreadsheets.

A spreadsheet runs a cell that starts with = + - @ tab or CR as a formula, and writes text that looks like a
number or a date its own way (`analysis.files.taken`). Such text is written with an apostrophe before it; text
that starts with apostrophes and is such text after them gets one more, so that reading, which takes one away,
always gives back what was written.
"""

from __future__ import annotations

import re
from datetime import datetime

from analysis.errors import ReadingError
from analysis.files.checked import (
    checked_name,
    checked_number,
    checked_text,
    checked_time,
    checked_whole,
    checked_word,
    checked_words,
)
from analysis.files.columns import Column, Kind
from analysis.files.faults import shown
from analysis.files.taken import TRUE_WORDS, taken_for_another

CellValue = str | float | int | bool | datetime | tuple[str, ...] | None

_RUNS = re.compile(r"[=+\-@\t\r\n]")
_NEEDS_QUOTES = re.compile(r"[\",;\r\n\t]|^\s|\s$")
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?")
_COMMA = re.compile(r"[+-]?[0-9]*,[0-9]+(?:[eE][+-]?[0-9]{1,3})?")
_THOUSANDS = re.compile(r"[+-]?[1-9][0-9]{0,2},[0-9]{3}")
_YES, _NO = ("yes", "y", "true", "1"), ("no", "n", "false", "0")


def guarded(text: str) -> str:
    """Put an apostrophe before text that a spreadsheet would run or write its own way."""
    return f"'{text}" if _needs_guard(text) else text


def unguarded(text: str) -> str:
    """Take the apostrophe away again."""
    return text[1:] if text.startswith("'") and _needs_guard(text) else text


def _needs_guard(text: str) -> bool:
    bare = text.lstrip("'")
    return bool(_RUNS.match(bare)) or taken_for_another(bare)


def quoted(text: str) -> str:
    """Write text as one cell of a comma-separated row, guarded and quoted where it needs to be."""
    text = guarded(text)
    return '"' + text.replace('"', '""') + '"' if _NEEDS_QUOTES.search(text) else text


def cell_value(cell: str, column: Column, delimiter: str = ",") -> CellValue:
    """Read one cell as a value of its column; raises ReadingError with what was found and expected.

    A decimal comma is read; where it could also part thousands, in a file whose cells are not parted by
    semicolons, the cell is refused.
    """
    if column.kind is Kind.TEXT:
        return checked_text(unguarded(cell), column.name)
    # The order matters: a spreadsheet may have put spaces round the guarded text, never inside it.
    text = unguarded(cell.strip()).strip()
    match column.kind:
        case Kind.NAME:
            return checked_name(text, column.name)
        case Kind.YES_NO:
            return _yes_no(text, column)
        case Kind.WORD:
            return _word(text, column)
        case Kind.WORDS:
            return checked_words(tuple(text.split()))
        case _:
            return _measured(text or column.blank, column, delimiter)


def _measured(text: str, column: Column, delimiter: str) -> float | int | datetime | None:
    if not text:
        return None
    if column.kind is Kind.TIME:
        return _time(text, column)
    number = _number(text, column, delimiter)
    return checked_whole(number, column) if column.kind is Kind.WHOLE else checked_number(number, column)


def _number(text: str, column: Column, delimiter: str) -> float:
    plain = text.replace("\N{MINUS SIGN}", "-")
    if _COMMA.fullmatch(plain):
        if delimiter != ";" and column.high > 999 and _THOUSANDS.fullmatch(plain):
            raise ReadingError(
                shown(text),
                where=column.name,
                expected=column.expected,
                mend="The comma could part thousands or decimals: write a point for decimals, and no comma.",
            )
        plain = plain.replace(",", ".")
    if not _NUMBER.fullmatch(plain):
        raise ReadingError(shown(text), where=column.name, expected=column.expected)
    return float(plain)


def _time(text: str, column: Column) -> datetime | None:
    try:
        return checked_time(datetime.fromisoformat(text), column.name)
    except ValueError:  # ReadingError is one too: a time without an offset
        raise ReadingError(
            shown(text),
            where=column.name,
            expected=column.expected,
            mend="Format the column as text in the spreadsheet, so that it keeps the offset.",
        ) from None


def _yes_no(text: str, column: Column) -> bool:
    word = text.lower() or column.blank
    if word not in _YES + _NO:
        raise ReadingError(shown(text), where=column.name, expected=column.expected)
    return word in _YES


def _word(text: str, column: Column) -> str:
    by_fold = {word.lower(): word for word in column.words}
    if "true" in by_fold:
        by_fold |= dict.fromkeys(TRUE_WORDS, "true")  # which a spreadsheet says in its own language
    word = by_fold.get(text.casefold(), text)
    if column.name == "feature" and not word:
        raise ReadingError("nothing", where=column.name, expected=column.expected)
    try:
        return checked_word(word, column)
    except ReadingError:
        raise ReadingError(shown(text), where=column.name, expected=column.expected) from None
