"""The reading: a frozen record that cannot hold an impossible one.

Attributes have the names and units of the columns of a file of readings (`analysis.files.columns`).
Numbers are kept to the decimals that are written, times to the millisecond in UTC, line ends as LF, so that a
reading written and read back is equal to itself. Loads no pandas: the app imports this.
"""

from __future__ import annotations

import dataclasses
import uuid
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, cast

from analysis.errors import ReadingError
from analysis.files.checked import (
    checked_name,
    checked_number,
    checked_text,
    checked_time,
    checked_whole,
    checked_word,
    checked_words,
    kept,
)
from analysis.files.columns import (
    BY_NAME,
    CONTENT_NAMES,
    DIP_DIRECTION,
    NAMES,
    QUADRANTS,
    Column,
    Kind,
)
from analysis.orient import vectors
from analysis.orient.features import Feature
from analysis.orient.righthand import ALONG_STRIKE_DEG

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.orient.vectors import Floats

MAX_OTHER_TEXT = 200_000  # characters in all the unknown columns of one reading together
MAX_OTHER = 1000  # unknown columns of one reading
# The name space of the ids made from content: a constant, or the same row would get another id.
CONTENT_SPACE = uuid.uuid5(uuid.NAMESPACE_OID, "hingewise/reading/content/1")
# A quadrant word fits as far from the dip direction as the right-hand-rule check at entry lets it: what passes
# there without a word must not be refused here (see ALONG_STRIKE_DEG for why it is more than 45 degrees).
QUADRANT_FITS_DEG = 90.0 - ALONG_STRIKE_DEG

_NAME_FIELDS = tuple(c for c in BY_NAME.values() if c.kind is Kind.NAME)
_TEXT_FIELDS = tuple(c for c in BY_NAME.values() if c.kind is Kind.TEXT)
_NUMBER_FIELDS = tuple(c for c in BY_NAME.values() if c.kind is Kind.NUMBER)


class Other(Mapping[str, str]):
    """What stood in columns that are not ours: column name to text; frozen, without empty cells."""

    __slots__ = ("_items",)
    _items: dict[str, str]

    def __init__(self, items: Mapping[str, str] | Iterable[tuple[str, str]] = ()) -> None:
        given = dict(items)
        self._items = {name: given[name] for name in sorted(given) if given[name]}

    def __getitem__(self, name: str) -> str:
        return self._items[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self._items)

    def __len__(self) -> int:
        return len(self._items)

    def __hash__(self) -> int:
        return hash(tuple(self._items.items()))

    def __repr__(self) -> str:
        return f"Other({self._items!r})"


NO_OTHER = Other()


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """One revision of one reading.

    Bedding and cleavage have `strike_deg` (right-hand rule) and `dip_deg`, intersection and hinge have
    `trend_deg` and `plunge_deg`; all degrees from true north. An empty text or None means not recorded; the
    empty fold and the empty outcrop are the unnamed ones. Raises ReadingError, whose `where` is the field.
    """

    reading_id: str
    feature: Feature
    revision: int = 1
    struck_out: bool = False
    recorded_at: datetime | None = None
    revised_at: datetime | None = None
    observer: str = ""
    device: str = ""
    fold: str = ""
    outcrop: str = ""
    strike_deg: float | None = None
    dip_deg: float | None = None
    trend_deg: float | None = None
    plunge_deg: float | None = None
    dip_quadrant: str = ""
    as_entered: str = ""
    north_reference: str = "true"
    correction_deg: float | None = None
    correction_model: str = ""
    instrument: str = ""
    scatter_deg: float | None = None
    samples: int | None = None
    overturned: bool = False
    warnings_kept: tuple[str, ...] = ()
    latitude_deg: float | None = None
    longitude_deg: float | None = None
    altitude_m: float | None = None
    accuracy_m: float | None = None
    position_source: str = ""
    note: str = ""
    other: Mapping[str, str] = NO_OTHER

    def __post_init__(self) -> None:
        put = object.__setattr__
        put(self, "feature", _feature(self.feature))
        for column in _NAME_FIELDS:
            put(self, column.name, checked_name(getattr(self, column.name), column.name))
        if not self.reading_id:
            raise ReadingError(
                "a reading needs an identity",
                where="reading_id",
                expected="a UUID or other text that no other reading has",
            )
        for column in _TEXT_FIELDS:
            put(self, column.name, checked_text(getattr(self, column.name), column.name))
        for column in _NUMBER_FIELDS:
            put(self, column.name, checked_number(getattr(self, column.name), column))
        put(self, "revision", checked_whole(self.revision, BY_NAME["revision"]))
        if self.revision is None:
            raise ReadingError("a reading needs a revision", where="revision", expected="1, 2, 3 ...")
        put(self, "samples", checked_whole(self.samples, BY_NAME["samples"]))
        for name in ("struck_out", "overturned"):
            if not isinstance(getattr(self, name), bool):
                raise ReadingError(f"{getattr(self, name)!r} is no yes or no", where=name, expected="a bool")
        for name in ("recorded_at", "revised_at"):
            put(self, name, checked_time(getattr(self, name), name))
        for name in ("dip_quadrant", "north_reference", "instrument"):
            put(self, name, checked_word(getattr(self, name), BY_NAME[name]))
        put(self, "warnings_kept", checked_words(self.warnings_kept))
        put(self, "other", _checked_other(self.other))
        self._check_attitude()
        self._check_position()

    def _check_attitude(self) -> None:
        plane = self.feature.is_plane
        needed, unwanted = ("strike_deg", "dip_deg"), ("trend_deg", "plunge_deg")
        if not plane:
            needed, unwanted = unwanted, needed
        for name in needed:
            if getattr(self, name) is None:
                raise ReadingError(
                    f"{self.feature} needs {needed[0]} and {needed[1]}",
                    where=name,
                    expected=BY_NAME[name].expected,
                )
        for name in unwanted:
            if getattr(self, name) is not None:
                raise ReadingError(
                    f"{self.feature} is read as a {'plane' if plane else 'line'} and has no {name}",
                    where=name,
                    expected="nothing",
                    mend=f"Leave it out, or enter it as {'a line' if plane else 'a plane'} of its own.",
                )
        if not plane and self.dip_quadrant:
            raise ReadingError("a line has no dip quadrant", where="dip_quadrant", expected="nothing")
        if not plane and self.overturned:
            raise ReadingError("a line cannot be overturned", where="overturned", expected="no")
        if self.dip_quadrant and not self.warnings_kept:
            self._check_quadrant(cast("float", self.strike_deg), cast("float", self.dip_deg))

    def _check_quadrant(self, strike_deg: float, dip_deg: float) -> None:
        """A strike and a quadrant that contradict each other pass only where a warning was kept."""
        if dip_deg in (0.0, 90.0) or quadrant_fits(strike_deg, self.dip_quadrant):
            return
        back = (strike_deg + 180.0) % 360.0
        mend = (
            f"Write strike {back:g} if the quadrant is right."
            if quadrant_fits(back, self.dip_quadrant)
            else "Look which of the two was misread."
        )
        raise ReadingError(
            f"a plane with strike {strike_deg:g} does not dip {self.dip_quadrant}",
            where="dip_quadrant",
            expected=f"a quadrant near azimuth {(strike_deg + 90.0) % 360.0:g} (right-hand rule)",
            mend=mend,
        )

    def _check_position(self) -> None:
        if (self.latitude_deg is None) != (self.longitude_deg is None):
            name = "latitude_deg" if self.latitude_deg is None else "longitude_deg"
            raise ReadingError(
                "latitude and longitude go together", where=name, expected=BY_NAME[name].expected
            )

    @property
    def dip_direction_deg(self) -> float | None:
        """Azimuth the plane dips towards, strike + 90, 0 <= azimuth < 360; None for a line."""
        if self.strike_deg is None:
            return None
        return kept((self.strike_deg + 90.0) % 360.0, DIP_DIRECTION)

    @property
    def vector(self) -> Floats:
        """Downward unit vector, shape (3,): the pole of a plane, or the line itself; north, east, down."""
        if self.feature.is_plane:
            return vectors.pole_vector(cast("float", self.strike_deg), cast("float", self.dip_deg))
        return vectors.line_vector(cast("float", self.trend_deg), cast("float", self.plunge_deg))

    def revised(self, *, at: datetime | None, **changes: object) -> Reading:
        """Make the next revision, with `revised_at` = at; raises ReadingError for what cannot change."""
        for name in ("reading_id", "revision", "revised_at"):
            if name in changes:
                raise ReadingError(f"{name} follows by itself in a revision", where=name, expected="nothing")
        unknown = sorted(set(changes) - set(NAMES) - {"other"})
        if unknown:
            raise ReadingError("a reading has no such field", where=unknown[0])
        return dataclasses.replace(
            self,
            revision=self.revision + 1,
            revised_at=at,
            **changes,  # type: ignore[arg-type]  # __post_init__ checks each value
        )

    def struck(self, *, at: datetime | None) -> Reading:
        """Make the next revision, struck out."""
        return self.revised(at=at, struck_out=True)

    def cells(self) -> dict[str, str]:
        """The text of every column, in the order written, and of the other columns after them."""
        return {name: cell_text(getattr(self, name), BY_NAME[name]) for name in NAMES} | dict(self.other)

    def content_order(self) -> tuple[object, ...]:
        """A key that puts any two different revisions in the same order everywhere: the later edited last."""
        cells = self.cells()
        return (
            cells["revised_at"],
            tuple(cells[name] for name in NAMES),
            tuple(sorted(self.other.items())),
        )


def quadrant_fits(strike_deg: float, quadrant: str) -> bool:
    """Whether a right-hand-rule strike, in degrees, dips to within 80 degrees of a quadrant word."""
    apart = abs((strike_deg + 90.0 - QUADRANTS[quadrant] + 180.0) % 360.0 - 180.0)
    return apart <= QUADRANT_FITS_DEG + 1e-9


def content_id(cells: Mapping[str, str], occurrence: int = 1) -> str:
    """Make the id of a reading that came without one, from the text of its cells (`Reading.cells`).

    The same row gives the same id, so that importing it twice adds nothing. `occurrence` counts equal rows of
    one file, 1, 2, 3 ...: two equal measurements are two readings. Id, revision, striking out and time of
    revision do not count as content; empty cells and their columns neither. A name-based UUID (version 5,
    RFC 9562).
    """
    names = [*CONTENT_NAMES, *sorted(name for name in cells if name not in BY_NAME)]
    return id_of_content([content_part(name, cells[name]) for name in names if name in cells], occurrence)


def content_part(name: str, text: str) -> str:
    """What one cell adds to the content; nothing for an empty one."""
    return f"{name}\x1f{text}" if text else ""


def id_of_content(parts: Iterable[str], occurrence: int = 1) -> str:
    """Make the id of a content given by its parts, in the order of CONTENT_NAMES and then by name."""
    return str(uuid.uuid5(CONTENT_SPACE, "\x1e".join([*filter(None, parts), str(occurrence)])))


def imported_reading(*, occurrence: int = 1, **fields: object) -> Reading:
    """Make a reading that came without an id; its id is made from its content."""
    draft = Reading(reading_id="-", **fields)  # type: ignore[arg-type]  # __post_init__ checks each value
    return dataclasses.replace(draft, reading_id=content_id(draft.cells(), occurrence))


def cell_text(value: object, column: Column) -> str:
    """Write the text of one cell: fixed decimals, yes or no, UTC with milliseconds; nothing for None."""
    if value is None:
        return ""
    match column.kind:
        case Kind.NUMBER:
            return f"{cast('float', value):.{column.decimals}f}"
        case Kind.YES_NO:
            return "yes" if value else "no"
        case Kind.TIME:
            return f"{cast('datetime', value).replace(tzinfo=None).isoformat(timespec='milliseconds')}Z"
        case Kind.WORDS:
            return " ".join(cast("tuple[str, ...]", value))
        case _:
            return str(value)


def _feature(value: object) -> Feature:
    try:
        return Feature(value)  # type: ignore[arg-type]  # any value may be asked
    except ValueError:
        raise ReadingError(
            f"{value!r} is unknown", where="feature", expected=BY_NAME["feature"].expected
        ) from None


def _checked_other(value: object) -> Other:
    if isinstance(value, Other) and not value:
        return value
    if not isinstance(value, Mapping):
        raise ReadingError(f"{value!r} is no mapping", where="other", expected="column name to text")
    items = Other({checked_name(name, "other"): checked_text(text, "other") for name, text in value.items()})
    for name in items:
        if not name or name in BY_NAME or name == DIP_DIRECTION.name:
            raise ReadingError(f"{name!r} is no other column", where="other", expected="a name not ours")
    if len(items) > MAX_OTHER or sum(map(len, items.values())) > MAX_OTHER_TEXT:
        raise ReadingError(
            "too much in other columns",
            where="other",
            expected=f"at most {MAX_OTHER} columns and {MAX_OTHER_TEXT} characters",
        )
    return items
