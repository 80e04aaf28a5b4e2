"""Readings as rows of the notebook and back; and the digest by which a row shows that it is whole."""

from __future__ import annotations

import hashlib
import json
from datetime import datetime
from typing import TYPE_CHECKING

from analysis.files.columns import BY_NAME, NAMES, Kind
from analysis.files.reading import NO_OTHER, Other, Reading

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

READING_COLUMNS: tuple[str, ...] = (*NAMES, "other")
_COLUMN_LIST = ", ".join(READING_COLUMNS)
INSERT = (
    f"INSERT INTO revisions (seq, digest, origin, stored_at, {_COLUMN_LIST}) "  # noqa: S608 - fixed names
    f"VALUES ({', '.join('?' * (4 + len(READING_COLUMNS)))})"
)
SELECT = f"seq, digest, {_COLUMN_LIST}"
_FIRST = 2  # columns of SELECT before those of the reading

_YES_NO = frozenset(name for name in NAMES if BY_NAME[name].kind is Kind.YES_NO)
_TIMES = frozenset(name for name in NAMES if BY_NAME[name].kind is Kind.TIME)
_WORDS = frozenset(name for name in NAMES if BY_NAME[name].kind is Kind.WORDS)


def digest_of(reading: Reading) -> str:
    """Digest of all that a revision says (SHA-256, 32 hexadecimal digits): equal for equal contents only.

    It tells two contents under one (reading_id, revision) apart, and a whole row from a damaged one.
    """
    text = json.dumps(list(reading.cells().items()), ensure_ascii=False)
    return hashlib.sha256(text.encode()).hexdigest()[:32]


def row_values(reading: Reading) -> list[object]:
    """Values of READING_COLUMNS."""
    values: list[object] = []
    for name in NAMES:
        value = getattr(reading, name)
        if name in _YES_NO:
            value = int(value)
        elif name in _TIMES:
            value = None if value is None else value.isoformat()
        elif name in _WORDS:
            value = " ".join(value)
        elif name == "feature":
            value = str(value)
        values.append(value)
    values.append(json.dumps(dict(reading.other), ensure_ascii=False) if reading.other else "")
    return values


def reading_from(row: Sequence[object]) -> Reading:
    """Make the reading of a row of SELECT; raises ReadingError or ValueError for a row that holds none."""
    return reading_from_values(dict(zip(READING_COLUMNS, row[_FIRST:], strict=True)))


def reading_from_values(values: Mapping[str, object]) -> Reading:
    """Make the reading of values by column; raises ReadingError or ValueError where they make none."""
    fields = dict(values)
    for name in _YES_NO:
        fields[name] = bool(fields[name])
    for name in _TIMES:
        text = fields[name]
        fields[name] = None if text is None else datetime.fromisoformat(str(text))
    for name in _WORDS:
        fields[name] = tuple(str(fields[name]).split())
    fields["other"] = Other(json.loads(str(fields["other"]))) if fields["other"] else NO_OTHER
    return Reading(**fields)  # type: ignore[arg-type]  # Reading checks each value
