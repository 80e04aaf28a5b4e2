"""What the page shows: frozen records that the presenter gives and the leaves draw. Plain values, no Kivy."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import Flag, StrEnum, auto
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping
    from datetime import datetime
    from pathlib import Path

    from analysis.orient.features import Feature
    from analysis.orient.vectors import Floats
    from analysis.strain.curves import FaultCurves
    from fieldapp.settings import PlaneNotation

QUADRANTS = ("N", "NE", "E", "SE", "S", "SW", "W", "NW")


class Change(Flag):
    """What a listener is told has changed; several at once are joined with |."""

    ENTRY = auto()  # page.entry
    STRIP = auto()  # page.strip
    PLACE = auto()  # page.place
    TABS = auto()  # page.tabs
    RECENT = auto()  # page.recent, page.standing
    CHECK = auto()  # page.check, page.outcrop_check, page.net, page.funnel
    FORECAST = auto()  # the dotted part of page.funnel; in page.check the words on what is still to be read
    NAMED = auto()  # page.named
    PLAN = auto()  # page.plan
    SETTINGS = auto()  # page.settings
    MESSAGE = auto()  # page.message
    HAND_OVER = auto()  # page.hand_over
    FAULT = auto()  # page.fault, page.faulting


EVERYTHING = ~Change(0)


class SignalKind(StrEnum):
    """What the device may say or do beside the screen."""

    KEPT = "kept"  # short vibration
    VERDICT = "verdict"  # longer vibration, and speech where the settings ask for it
    REFUSED = "refused"  # nothing was kept; the message says why


@dataclass(frozen=True, slots=True)
class Signal:
    """One signal; `spoken` is empty where nothing is to be said."""

    kind: SignalKind
    spoken: str = ""


@dataclass(frozen=True, slots=True)
class CheckLine:
    """One entry check on the draft: words, whether it passed, label of its one-tap mend ('' none).

    `name` goes to `page.apply_mend(name)`, and into warnings_kept when the reading is kept against it.
    """

    name: str
    text: str
    passed: bool
    mend_label: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class EntryState:
    """The entry as it stands.

    `azimuth_text` and `inclination_text` are the digits typed ("045", "30"), with the labels that the
    notation gives them. `active` is "azimuth", "inclination" or "" when both are whole. The direction grid
    is shown where `quadrant_offered`; `expected_quadrant` is the one the right-hand rule expects (""  until
    the strike is whole). `ready` says that Keep would keep; else `missing` says in words what it waits for.
    `mending` is the id of the reading being mended, "" for a new one. `saved` is false where the draft could
    not be written to storage (it is still here).
    """

    feature: Feature
    notation: PlaneNotation
    azimuth_label: str
    inclination_label: str
    azimuth_text: str = ""
    inclination_text: str = ""
    active: str = "azimuth"
    quadrant_offered: bool = False
    quadrant: str = ""
    expected_quadrant: str = ""
    checks: tuple[CheckLine, ...] = ()
    ready: bool = False
    missing: str = ""
    mending: str = ""
    mending_text: str = ""
    note: str = ""
    overturned: bool = False
    instrument: str = "compass"  # or "tablet", as the sensors gave it
    saved: bool = True


class Sign(StrEnum):
    """The sign of the verdict strip; the value says its drawing in words."""

    PARALLEL = "two parallel bars"
    CROSSED_CLOCKWISE = "crossed bars leaning clockwise"
    CROSSED_ANTICLOCKWISE = "crossed bars leaning anticlockwise"
    CROSSED = "crossed bars"
    OPEN_RING = "open ring"
    BARRED_RING = "ring with a bar"


@dataclass(frozen=True, slots=True)
class StripState:
    """The verdict strip: sign, sentence (first line), figures (second line, '' where there are none yet).

    `short_figures` says the same figures for a narrow strip.
    """

    sign: Sign
    headline: str
    figures: str = ""
    short_figures: str = ""


@dataclass(frozen=True, slots=True)
class PlaceState:
    """Where we stand: names as stored, titles as shown, position quality and age ('' where unknown).

    `position_detail` is how the device came by it, `by_hand` where this outcrop lies as somebody typed it, ''
    where nobody did.
    """

    fold: str
    outcrop: str
    fold_title: str
    outcrop_title: str
    position_text: str
    position_detail: str
    by_hand: str
    north_text: str
    folds: tuple[str, ...]
    outcrops: tuple[str, ...]
    suggested_outcrop: str  # the name a "next outcrop" tap would give
    demo: bool  # the invented notebook: marked on screen


@dataclass(frozen=True, slots=True)
class Tab:
    """One feature to choose: its label, readings standing in the fold and at this outcrop."""

    feature: Feature
    label: str
    in_fold: int
    here: int
    chosen: bool


@dataclass(frozen=True, slots=True)
class ReadingLine:
    """One past reading in a list, in the notation of the settings; `text` as "045/30 SE" or "032/16"."""

    reading_id: str
    feature: Feature
    text: str
    outcrop: str
    struck_out: bool
    note: str
    warnings_kept: tuple[str, ...]
    recorded_at: datetime | None


@dataclass(frozen=True, slots=True)
class NamedReading:
    """The reading touched on the net: a title, its particulars line by line."""

    reading_id: str
    title: str
    lines: tuple[str, ...]
    struck_out: bool


@dataclass(frozen=True, slots=True)
class NetPoints:
    """Standing readings of one feature of the fold: ids, unit vectors (n, 3) (poles for planes), outcrops."""

    reading_ids: tuple[str, ...]
    vectors: Floats
    outcrops: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class NetState:
    """What the net draws beside page.check: readings by feature, last mean intersections (oldest first)."""

    points: Mapping[Feature, NetPoints]
    trail: Floats  # (k, 3), at most 12; the last one is the present mean


@dataclass(frozen=True, slots=True)
class FunnelPoint:
    """The check as it stood after `readings` readings of the fold; angles in degrees, clockwise positive.

    `intersection` is the mean intersection then, shape (3,), or None.
    """

    readings: int
    delta_deg: float | None
    low_deg: float | None
    high_deg: float | None
    verdict: str
    intersection: Floats | None = field(default=None, compare=False)


@dataclass(frozen=True, slots=True)
class ForecastPoint:
    """Where the interval is expected after so many readings, degrees."""

    readings: int
    low_deg: float
    high_deg: float


@dataclass(frozen=True, slots=True)
class FunnelState:
    """The narrowing funnel: what was seen, the band +-M, the dotted continuation, where it should settle."""

    points: tuple[FunnelPoint, ...]
    margin_deg: float
    ahead: tuple[ForecastPoint, ...] = ()
    settles_at: int | None = None


@dataclass(frozen=True, slots=True)
class PlanOutcrop:
    """One outcrop on the plan: metres east and north of the current one, mean attitudes where there are any.

    `bedding` and `cleavage` are (strike_deg, dip_deg) of the mean plane, `lines` is (trend_deg, plunge_deg)
    of the mean intersection or hinge line read there. `overturned` where most of the bedding read there is.
    """

    name: str
    east_m: float
    north_m: float
    here: bool
    bedding: tuple[float, float] | None
    cleavage: tuple[float, float] | None
    lines: tuple[float, float] | None
    overturned: bool = False


@dataclass(frozen=True, slots=True)
class PlanState:
    """Outcrops of the fold with a position, names of those without, and the hinge (trend_deg, plunge_deg)."""

    outcrops: tuple[PlanOutcrop, ...]
    unplaced: tuple[str, ...]
    hinge: tuple[float, float] | None


class MessageKind(StrEnum):
    """How loudly a message is shown."""

    NOTE = "note"
    WARNING = "warning"
    TROUBLE = "trouble"


class Offer(StrEnum):
    """What one tap on the message does: `page.accept_offer()`."""

    NONE = ""
    UNDO = "Undo"
    ADD_BACKUP = "Add the backup"
    CORRECT_NORTH = "Correct them"
    PLACE_READINGS = "Place them"


@dataclass(frozen=True, slots=True)
class Message:
    """One message to the geologist, with at most one offer."""

    text: str
    kind: MessageKind = MessageKind.NOTE
    offer: Offer = Offer.NONE


@dataclass(frozen=True, slots=True)
class Backup:
    """One backup of the notebook: its file, when it was made (aware, UTC), and whether that is known to the minute.

    `kept_before` where it is how the notebook was before going back to another one.
    """

    path: Path
    made_at: datetime
    to_the_minute: bool
    kept_before: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class HandOverState:
    """What the Hand over leaf tells. Times are aware, UTC; None where it never happened or is not known."""

    readings: int
    since_last: int
    last_hand_over: datetime | None
    backups: tuple[Backup, ...]  # newest first
    space_left_bytes: int | None
    last_take_in: str  # "" or "12 readings from tablet-b.csv", as long as it can be undone
    notebook_path: Path
    read_only: bool


@dataclass(frozen=True, slots=True)
class TakeInPreview:
    """What a colleague's file would do, before anything is written.

    `adds` are readings not here yet, `changes` new revisions of readings that are, `clashes` revisions whose
    content differs from the same revision here (both are kept), `known` what is here already. Lists are
    readings as lines; `unread` is how many rows could not be read, `problems` names the first of them.
    """

    source: Path
    adds: tuple[ReadingLine, ...]
    changes: tuple[ReadingLine, ...]
    clashes: tuple[ReadingLine, ...]
    known: int
    problems: tuple[str, ...]
    unread: int


@dataclass(frozen=True, slots=True)
class FaultInput:
    """The fault beside the fold; `sense` is "sinistral", "dextral" or "unknown"."""

    strike_deg: float | None = None
    sense: str = "unknown"
    zone_width_m: float | None = None


@dataclass(frozen=True, slots=True)
class Told:
    """A figure with what it is called and what belongs to it."""

    name: str
    figure: str
    more: str


@dataclass(frozen=True, slots=True)
class ExplanationLine:
    """One explanation: its kind ("rotation", "partitioned", "transpression", "late"), name and figures."""

    kind: str
    name: str
    words: str


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultState:
    """What the folds say of the fault.

    `ask` says what is still needed, and everything else is empty then. `curves` is what the picture shows,
    `lines` its key with `note` below. The cautions are there wherever an explanation is named.
    """

    ask: str = ""
    headline: str = ""
    angle: str = ""
    figures: tuple[Told, ...] = ()
    curves: FaultCurves | None = field(default=None, compare=False)
    confidence: float = 0.95  # of the ellipse
    zone_width_km: float | None = None
    lines: tuple[ExplanationLine, ...] = ()
    note: str = ""
    because: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class PositionFix:
    """A position, WGS 84; `accuracy_m` the 68% radius, None where unknown; `at` aware, UTC.

    `fixes` is the number of a receiver's fixes that it is the mean of, `spread_m` how far they scatter about it.
    """

    latitude_deg: float
    longitude_deg: float
    altitude_m: float | None = None
    accuracy_m: float | None = None
    source: str = ""
    fixes: int = 1
    spread_m: float | None = None
    at: datetime


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """An attitude from the sensors, against `north` ("magnetic" or "true"), before any correction.

    For a plane `azimuth_deg` is the right-hand-rule strike, for a line the trend; `raw` goes into as_entered.
    `warnings` are names of sensor checks it failed (see METHOD: magnetic field), with their words.
    """

    azimuth_deg: float
    inclination_deg: float
    scatter_deg: float
    samples: int
    north: str = "magnetic"
    raw: str = ""
    warnings: Mapping[str, str] = field(default_factory=dict)
