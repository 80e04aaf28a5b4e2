"""The page and its position: where a reading is taken, from the device, from what was typed, or from the outcrop."""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.orient.position import Position
from fieldapp.page.northing import PageNorth
from fieldapp.planning import positions_of
from fieldapp.states import Change, Message, MessageKind, Offer
from fieldapp.undoing import Step, StepKind
from fieldapp.wording import age_text, counted, outcrop_title, position_text

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.files.reading import Reading
    from fieldapp.states import PositionFix

FIX_GOOD_FOR_S = 300.0  # an older position is no longer where a reading is taken
# Outcrops of one fold further apart than this are more likely a slip of a figure. Common practice, no source: a map
# sheet at 1:25 000 is 10 to 15 km across.
FAR_M = 20_000.0


class PagePlacing(PageNorth):
    """Position."""

    # -- from the device ------------------------------------------------------------------------------------

    def position_changed(self, fix: PositionFix | None, best: PositionFix | None = None) -> None:
        """Take the newest position, or None where there is none any more, and the best one of this outcrop."""
        north = self._north()
        self._fix, self._best_fix = fix, best or fix
        change = Change.PLACE | Change.PLAN
        if self._north() != north:
            change |= Change.ENTRY
        offered = self._correction_offered() if north.correction_deg is None else None
        if offered is not None:
            self._message = offered
            change |= Change.MESSAGE
        self._position_shown = self._position_text()
        self._tell(change)

    @property
    def newest_reading_at(self) -> datetime | None:
        """When the newest reading was taken, by the clock of its time."""
        return max((r.recorded_at for r in self._all.values() if r.recorded_at is not None), default=None)

    def tick(self) -> None:
        """Let the age of the position be told again, if its words have changed."""
        text = self._position_text()
        if text != self._position_shown:
            self._position_shown = text
            self._tell(Change.PLACE)

    @property
    def here(self) -> Position | None:
        """Where we are: as typed for this outcrop, else by the device; None where nobody knows."""
        return self._by_hand or (None if self._fix is None else _position_of(self._fix))

    def _position_text(self) -> str:
        accuracy, known = None, ""
        if self._by_hand is not None:
            accuracy, known = self._by_hand.accuracy_m, "by hand"
        elif self._fix is not None:
            accuracy, known = self._fix.accuracy_m, age_text((self._clock() - self._fix.at).total_seconds())
        elif self._known_here() is not None:
            known = "as before here"
        return known if accuracy is None else f"±{accuracy:.0f} m, {known}"

    def _position_detail(self) -> str:
        fix = self._fix
        if self._by_hand is not None or fix is None or fix.spread_m is None:
            return ""
        return f"mean of {fix.fixes} fixes, spread {fix.spread_m:.0f} m"

    def _place_for_reading(self, now: datetime) -> Position | None:
        """Where a reading is taken: as typed, by the best fix while one is fresh, else as known of the outcrop."""
        if self._by_hand is not None:
            return self._by_hand
        if self._fix is not None and (now - self._fix.at).total_seconds() <= FIX_GOOD_FOR_S:
            return _position_of(self._best_fix)
        return self._known_here()

    def _known_here(self) -> Position | None:
        """Where this outcrop lies by its readings."""
        return self._cached("known here", Change.PLACE, self._find_known)

    def _find_known(self) -> Position | None:
        here = [one for one in self._running.neighbours if one.outcrop == self._outcrop]
        known = positions_of(here).get(self._outcrop)
        return None if known is None else Position(*known, source="outcrop")

    # -- by hand --------------------------------------------------------------------------------------------

    def place_by_hand(self, text: str) -> None:
        """Say where this outcrop lies, in degrees or on a grid; its next readings are taken there.

        Raises PositionError for text that is no position, and NotebookError where it cannot be stored.
        """
        # Loaded with the first position that is typed, so that the page comes up without.
        from analysis.orient.position_text import parse_position  # noqa: PLC0415

        self._set_by_hand(parse_position(text))

    def forget_position(self) -> None:
        """Go by the device again at this outcrop; raises NotebookError."""
        self._set_by_hand(None)

    def _set_by_hand(self, place: Position | None) -> None:
        self._notebook.set_position_by_hand(self._fold, self._outcrop, place)
        self._by_hand = place
        self._message = None if place is None else self._after_placing(place)
        self._position_shown = self._position_text()
        self._tell(Change.PLACE | Change.PLAN | Change.ENTRY | Change.MESSAGE)

    def _after_placing(self, place: Position) -> Message:
        name = outcrop_title(self._outcrop)
        others = [
            place.distance_m(Position(*other))
            for outcrop, other in positions_of(self._running.neighbours).items()
            if outcrop != self._outcrop
        ]
        if others and min(others) > FAR_M:
            words = f"{name} would lie {min(others) / 1000.0:,.0f} km from the nearest of its fold. Is that right?"
            return Message(words, MessageKind.WARNING)
        unplaced = len(self._unplaced())
        if unplaced:
            return Message(f"{counted(unplaced)} here without a position.", offer=Offer.PLACE_READINGS)
        return self._correction_offered() or Message(f"{name} lies at {position_text(place)}.")

    def _unplaced(self) -> list[Reading]:
        """Readings of this outcrop without a position."""
        return [
            reading
            for reading in self._all.values()
            if (reading.fold, reading.outcrop) == (self._fold, self._outcrop) and reading.latitude_deg is None
        ]

    def place_readings(self) -> int:
        """Give the position typed to the readings here that have none, all or none; give their number."""
        place, before = self._by_hand, self._unplaced()
        if place is None or not before:
            return 0
        placed = self._revise_many(
            before,
            lambda one: one.revised(
                at=self._clock(),
                latitude_deg=place.latitude_deg,
                longitude_deg=place.longitude_deg,
                accuracy_m=place.accuracy_m,
                position_source=place.source,
            ),
        )
        if placed is None:
            return 0
        self._undo.push(Step(kind=StepKind.PLACED, all_before=tuple(before)))
        self._message = self._correction_offered() or Message(
            f"{counted(len(placed))} placed.", offer=Offer.UNDO
        )
        self._revised(placed)
        return len(placed)


def _position_of(fix: PositionFix) -> Position:
    return Position(fix.latitude_deg, fix.longitude_deg, fix.altitude_m, fix.accuracy_m, fix.source)
