"""From the draft to what the page shows of it, and to the reading that is kept."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.errors import ReadingError
from analysis.files.reading import Reading
from analysis.orient.attitudes import Plane
from analysis.orient.entrychecks import EntryCheck
from fieldapp.checking import Around, Checked, checked, expected_quadrant
from fieldapp.draft import Place
from fieldapp.entry import EntryDraft, turned
from fieldapp.settings import PlaneNotation
from fieldapp.states import EntryState
from fieldapp.wording import labels_of

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.orient.attitudes import Line
    from analysis.orient.position import Position
    from fieldapp.draft import Digits
    from fieldapp.entry import North
    from fieldapp.settings import Settings

NOT_CORRECTED = "north-not-corrected"  # kept from magnetic north because no correction was known


@dataclass(frozen=True, slots=True)
class Entry:
    """A draft with all that is said about it."""

    draft: EntryDraft
    checked: Checked
    state: EntryState


def entry_of(
    draft: EntryDraft, settings: Settings, around: Around, *, mending_text: str = "", saved: bool = True
) -> Entry:
    """Check a draft and say what the page shows of it."""
    planes = settings.notation
    found = checked(draft, planes, around)
    by_strike = draft.feature.is_plane and planes is PlaneNotation.STRIKE_DIP
    # A reading mended without touching its digits needs no more than it was kept with.
    as_it_was = draft.sensed is not None or (bool(draft.mending) and draft.digits.place is Place.LOADED)
    asked = by_strike and settings.require_quadrant and not as_it_was
    required = asked and _dips(draft, planes, found)
    missing = _missing(draft, settings, found, required=required)
    azimuth_label, inclination_label = labels_of(draft.feature, planes)
    whole = draft.digits.whole
    state = EntryState(
        feature=draft.feature,
        notation=planes,
        azimuth_label=azimuth_label,
        inclination_label=inclination_label,
        azimuth_text=draft.digits.azimuth,
        inclination_text=draft.digits.inclination,
        active="" if whole else "inclination" if draft.digits.in_inclination else "azimuth",
        quadrant_offered=by_strike,
        quadrant=draft.quadrant,
        expected_quadrant=expected_quadrant(draft, planes),
        checks=found.lines,
        ready=not missing,
        missing=missing,
        mending=draft.mending,
        mending_text=mending_text,
        note=draft.note,
        overturned=draft.overturned,
        instrument="compass" if draft.sensed is None else "tablet",
        saved=saved,
    )
    return Entry(draft, found, state)


def _dips(draft: EntryDraft, planes: PlaneNotation, found: Checked) -> bool:
    """Whether there is a side to tell: a plane typed as horizontal or vertical dips to neither."""
    if not draft.digits.whole or not found.possible:
        return True
    attitude = draft.attitude(planes)
    return isinstance(attitude, Plane) and 0.0 < attitude.dip_deg < 90.0


def _missing(draft: EntryDraft, settings: Settings, found: Checked, *, required: bool) -> str:
    azimuth, inclination = labels_of(draft.feature, settings.notation)
    if not found.possible:
        return found.lines[0].text
    if not draft.digits.azimuth_whole:
        return f"Type the {azimuth} with three digits."
    if not draft.digits.whole:
        return f"Type the {inclination} with two digits."
    if required and not draft.quadrant:
        return "Tap the side it dips to."
    return ""


def new_reading(
    entry: Entry,
    north: North,
    *,
    reading_id: str,
    now: datetime,
    fold: str,
    outcrop: str,
    settings: Settings,
    place: Position | None,
) -> Reading:
    """Make the reading of a whole draft; `north` is added here, once. Raises ReadingError."""
    draft = entry.draft
    sensed = draft.sensed
    position: dict[str, object] = {}
    if place is not None:
        position = {
            "latitude_deg": place.latitude_deg,
            "longitude_deg": place.longitude_deg,
            "altitude_m": place.altitude_m,
            "accuracy_m": place.accuracy_m,
            "position_source": place.source,
        }
    return _made(
        {
            "reading_id": reading_id,
            "feature": draft.feature,
            "recorded_at": now,
            "observer": settings.observer,
            "device": settings.device,
            "fold": fold,
            "outcrop": outcrop,
            **_attitude_fields(turned(draft.attitude(settings.notation), north.added_deg)),
            "dip_quadrant": draft.quadrant,
            "as_entered": draft.as_entered(settings.notation),
            "north_reference": north.reference,
            "correction_deg": north.correction_deg,
            "correction_model": north.model,
            "instrument": "compass" if sensed is None else "tablet",
            "scatter_deg": None if sensed is None else sensed.scatter_deg,
            "samples": None if sensed is None else sensed.samples,
            "overturned": draft.overturned,
            "warnings_kept": _warnings(entry, north),
            "note": draft.note,
            **position,
        }
    )


def mended_reading(
    entry: Entry, base: Reading, settings: Settings, *, revision: int, now: datetime
) -> Reading:
    """Make the next revision of a reading from its mended draft, against the north it was read in."""
    draft, planes = entry.draft, settings.notation
    before = EntryDraft.of_reading(base, planes)
    north = draft.north or before.north
    assert north is not None  # noqa: S101 - of_reading sets it
    fields: dict[str, object] = {
        **{name: getattr(base, name) for name in Reading.__dataclass_fields__},
        "revision": revision,
        "revised_at": now,
        "feature": draft.feature,
        "dip_quadrant": draft.quadrant,
        "overturned": draft.overturned,
        "note": draft.note,
        "warnings_kept": _warnings(entry, north),
    }
    same = _same(draft.digits, before.digits) and draft.feature is base.feature
    if not same or draft.quadrant != before.quadrant:
        fields["as_entered"] = draft.as_entered(planes)
    if not same:
        fields |= _attitude_fields(turned(draft.attitude(planes), north.added_deg))
        fields |= {"scatter_deg": None, "samples": None, "instrument": "compass"}
        if draft.sensed is not None:
            fields |= {
                "scatter_deg": draft.sensed.scatter_deg,
                "samples": draft.sensed.samples,
                "instrument": "tablet",
            }
        fields |= {
            "north_reference": north.reference,
            "correction_deg": north.correction_deg,
            "correction_model": north.model,
        }
    return _made(fields)


def _made(fields: dict[str, object]) -> Reading:
    try:
        return Reading(**fields)  # type: ignore[arg-type]  # Reading checks each value
    except ReadingError as error:
        # The side was tapped against the north of the compass; from true north it may just miss. It is kept
        # as seen, and the record says so.
        kept = fields["warnings_kept"]
        if error.where != "dip_quadrant" or not isinstance(kept, tuple):
            raise
        return Reading(**{**fields, "warnings_kept": (*kept, str(EntryCheck.QUADRANT_MISFIT))})  # type: ignore[arg-type]


def _attitude_fields(attitude: Plane | Line) -> dict[str, object]:
    if isinstance(attitude, Plane):
        return {
            "strike_deg": attitude.strike_deg,
            "dip_deg": attitude.dip_deg,
            "trend_deg": None,
            "plunge_deg": None,
        }
    return {
        "strike_deg": None,
        "dip_deg": None,
        "trend_deg": attitude.trend_deg,
        "plunge_deg": attitude.plunge_deg,
    }


def _warnings(entry: Entry, north: North) -> tuple[str, ...]:
    names = [line.name for line in entry.checked.lines if not line.passed]
    if north.reference != "true" and north.correction_deg is None:
        names.append(NOT_CORRECTED)
    return tuple(dict.fromkeys(names))


def _same(one: Digits, other: Digits) -> bool:
    return (one.azimuth, one.inclination) == (other.azimuth, other.inclination)
