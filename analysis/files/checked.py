"""Single values of a reading: each brought to what is written and read back, or refused with a ReadingError.

Numbers come to the decimals of their column, times to whole milliseconds in UTC, names to one line in Unicode form C.
Loads no pandas: the app imports this.
"""

from __future__ import annotations

import math
import unicodedata
from collections.abc import Iterable
from datetime import UTC, datetime
from typing import TYPE_CHECKING, SupportsFloat, cast

from analysis.errors import ReadingError
from analysis.files.columns import BY_NAME, MAX_NAME, MAX_TEXT

if TYPE_CHECKING:
    from analysis.files.columns import Column

_AZIMUTHS = ("strike_deg", "trend_deg")


def checked_name(value: object, where: str) -> str:
    """One line of text without spaces at its ends, in Unicode form C, or ReadingError."""
    text = checked_text(value, where).strip()
    if not text.isascii():
        # Two tablets may type the same accent in two ways; it is one name all the same.
        text = unicodedata.normalize("NFC", text).strip()
    if len(text) > MAX_NAME or not (text.isprintable() or not any(map(_is_control, text))):
        raise ReadingError(f"{_short(text)!r} is no name", where=where, expected=BY_NAME["fold"].expected)
    return text


def checked_text(value: object, where: str) -> str:
    """Text that can be written to a file, with line ends LF, or ReadingError."""
    if not isinstance(value, str):
        raise ReadingError(f"{value!r} is no text", where=where, expected="text")
    if len(value) > MAX_TEXT:
        raise ReadingError(
            f"a text of {len(value)} characters", where=where, expected=f"at most {MAX_TEXT} characters"
        )
    if "\0" in value or not (value.isascii() or _encodable(value)):
        raise ReadingError("a character that no file can hold", where=where, expected="text without NUL")
    return with_plain_line_ends(str(value))


def checked_words(value: object) -> tuple[str, ...]:
    """Names without spaces or control characters, or ReadingError."""
    if isinstance(value, str) or not isinstance(value, Iterable):
        raise ReadingError(f"{value!r} are no names", where="warnings_kept", expected="a tuple of names")
    words = tuple(checked_text(word, "warnings_kept") for word in value)
    if any(word.split() != [word] or not word.isprintable() for word in words):
        raise ReadingError(f"{words!r} are no names", where="warnings_kept", expected="names without spaces")
    if sum(map(len, words)) + len(words) > MAX_TEXT:
        raise ReadingError("too many names", where="warnings_kept", expected=f"{MAX_TEXT} characters in all")
    return words


def with_plain_line_ends(text: str) -> str:
    """Text with LF for CRLF and CR, as spreadsheets and editors turn one into the other on their own."""
    return text.replace("\r\n", "\n").replace("\r", "\n") if "\r" in text else text


def checked_number(value: object, column: Column) -> float | None:
    """Bring a number to the decimals written, within the bounds of its column; None stays None."""
    if value is None:
        return None
    try:
        # Text and truth values have a float of their own, and are no measurement.
        number = float("text" if isinstance(value, bool | str | bytes) else cast("SupportsFloat", value))
    except (TypeError, ValueError, OverflowError):
        raise ReadingError(f"{value!r} is no number", where=column.name, expected=column.expected) from None
    if not (math.isfinite(number) and column.low <= number <= column.high):
        raise ReadingError(f"{number:g} is out of range", where=column.name, expected=column.expected)
    number = kept(number, column)
    return 0.0 if number == 360.0 and column.name in _AZIMUTHS else number


def checked_whole(value: object, column: Column) -> int | None:
    """Check a whole number within the bounds of its column; None stays None."""
    if value is None:
        return None
    number = checked_number(value, column)
    try:
        exact = float(cast("SupportsFloat", value))
    except (TypeError, ValueError):  # pragma: no cover - checked_number has refused it
        exact = math.nan
    if number is None or number != exact:
        raise ReadingError(f"{value!r} is no whole number", where=column.name, expected=column.expected)
    return int(number)


def checked_time(value: object, where: str) -> datetime | None:
    """Bring a time that knows its offset to UTC and whole milliseconds; None stays None."""
    if value is None:
        return None
    if not isinstance(value, datetime) or value.utcoffset() is None:
        raise ReadingError(
            f"{value!s} is no time with an offset", where=where, expected=BY_NAME["recorded_at"].expected
        )
    try:
        utc = value.astimezone(UTC)
    except OverflowError:
        raise ReadingError(f"{value!s} is out of range", where=where, expected="a year 1 to 9999") from None
    return datetime(
        utc.year, utc.month, utc.day, utc.hour, utc.minute, utc.second, utc.microsecond // 1000 * 1000, UTC
    )


def checked_word(value: object, column: Column) -> str:
    """One of the words of a column; nothing becomes what an empty cell means."""
    if value == "":
        return column.blank
    if value not in column.words:
        raise ReadingError(f"{value!r} is unknown", where=column.name, expected=column.expected)
    return str(value)


def kept(number: float, column: Column) -> float:
    """Round a number to the decimals that its column keeps."""
    # Written so that the column reader, which works on whole arrays, gets the very same float.
    scale = 10.0**column.decimals
    return round(number * scale) / scale + 0.0


def _is_control(character: str) -> bool:
    return unicodedata.category(character) in ("Cc", "Zl", "Zp")


def _encodable(text: str) -> bool:
    try:
        text.encode()
    except UnicodeEncodeError:
        return False
    return True


def _short(text: str, limit: int = 60) -> str:
    return text if len(text) <= limit else text[:limit] + "..."
