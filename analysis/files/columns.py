"""The columns of a file of readings: their order, what each holds, and the bounds of each number.

This is the one place where a column is described; the record, the reader and the writer all follow it.
Imports nothing but the standard library.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum, auto

MAX_TEXT = 32_000  # characters in a cell; common spreadsheets cut cells at 32,767 (from memory)
MAX_NAME = 200  # characters in the name of a fold, an outcrop, an observer, and in a reading_id


class Kind(Enum):
    """What the cells of a column hold."""

    NAME = auto()  # one line of text; spaces at its ends mean nothing
    TEXT = auto()  # any text, kept as it is
    NUMBER = auto()  # a number with fixed decimals, or nothing
    WHOLE = auto()  # a whole number, or nothing
    YES_NO = auto()
    TIME = auto()  # ISO 8601 with offset
    WORD = auto()  # one of a few words
    WORDS = auto()  # words separated by spaces


@dataclass(frozen=True, slots=True)
class Column:
    """One column: its name, what it holds, and for numbers the decimals written and the bounds, inclusive."""

    name: str
    kind: Kind
    decimals: int = 0
    low: float = float("-inf")
    high: float = float("inf")
    words: tuple[str, ...] = ()
    blank: str = ""  # what an empty cell means

    @property
    def expected(self) -> str:
        """What a cell of this column may hold, in words."""
        return {
            Kind.NUMBER: f"a number from {self.low:g} to {self.high:g}",
            Kind.WHOLE: f"a whole number from {self.low:g} to {self.high:g}",
            Kind.YES_NO: "yes or no",
            Kind.TIME: "a date and time with its offset, as 2026-05-01T09:30:00Z",
            Kind.WORD: "one of " + ", ".join(self.words),
            Kind.NAME: f"one line of text of at most {MAX_NAME} characters",
            Kind.WORDS: "words separated by spaces",
            Kind.TEXT: f"text of at most {MAX_TEXT} characters",
        }[self.kind]


FEATURES = ("bedding", "cleavage", "intersection", "hinge")
# Azimuth in degrees of each quadrant word.
QUADRANTS = {"N": 0.0, "NE": 45.0, "E": 90.0, "SE": 135.0, "S": 180.0, "SW": 225.0, "W": 270.0, "NW": 315.0}

_NAME, _TEXT, _NUMBER, _WHOLE = Kind.NAME, Kind.TEXT, Kind.NUMBER, Kind.WHOLE

# In the order in which they are written.
COLUMNS: tuple[Column, ...] = (
    Column("reading_id", _NAME),
    Column("revision", _WHOLE, low=1, high=1_000_000, blank="1"),
    Column("struck_out", Kind.YES_NO, blank="no"),
    Column("recorded_at", Kind.TIME),
    Column("revised_at", Kind.TIME),
    Column("observer", _NAME),
    Column("device", _NAME),
    Column("fold", _NAME),
    Column("outcrop", _NAME),
    Column("feature", Kind.WORD, words=FEATURES),
    Column("strike_deg", _NUMBER, decimals=4, low=0, high=360),
    Column("dip_deg", _NUMBER, decimals=4, low=0, high=90),
    Column("trend_deg", _NUMBER, decimals=4, low=0, high=360),
    Column("plunge_deg", _NUMBER, decimals=4, low=0, high=90),
    Column("dip_quadrant", Kind.WORD, words=tuple(QUADRANTS)),
    Column("as_entered", _TEXT),
    Column("north_reference", Kind.WORD, words=("true", "magnetic", "grid"), blank="true"),
    Column("correction_deg", _NUMBER, decimals=4, low=-180, high=180),
    Column("correction_model", _NAME),
    Column("instrument", Kind.WORD, words=("compass", "tablet", "other")),
    Column("scatter_deg", _NUMBER, decimals=4, low=0, high=90),
    Column("samples", _WHOLE, low=1, high=1_000_000_000),
    Column("overturned", Kind.YES_NO, blank="no"),
    Column("warnings_kept", Kind.WORDS),
    Column("latitude_deg", _NUMBER, decimals=7, low=-90, high=90),
    Column("longitude_deg", _NUMBER, decimals=7, low=-180, high=180),
    # From below the deepest sea floor to above the highest summit, above the WGS 84 ellipsoid.
    Column("altitude_m", _NUMBER, decimals=2, low=-12_000, high=10_000),
    Column("accuracy_m", _NUMBER, decimals=2, low=0, high=10_000_000),
    Column("position_source", _NAME),
    Column("note", _TEXT),
)
BY_NAME: dict[str, Column] = {column.name: column for column in COLUMNS}
NAMES: tuple[str, ...] = tuple(BY_NAME)

# Read in place of strike_deg, never written.
DIP_DIRECTION = Column("dip_direction_deg", _NUMBER, decimals=4, low=0, high=360)

# What a reading made without an identity is recognised by: all of it but its history.
CONTENT_NAMES: tuple[str, ...] = tuple(
    name for name in NAMES if name not in ("reading_id", "revision", "struck_out", "revised_at")
)
