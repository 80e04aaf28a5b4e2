"""What the page shows, as properties: frozen records, made when asked for and kept until a change."""

from __future__ import annotations

from itertools import islice
from typing import TYPE_CHECKING

from analysis.orient.features import Feature
from fieldapp.checking import Around
from fieldapp.making import entry_of
from fieldapp.naming import line_of, named_reading
from fieldapp.page.placing import PagePlacing
from fieldapp.planning import plan_of
from fieldapp.states import (
    Change,
    EntryState,
    FaultInput,
    FunnelState,
    HandOverState,
    NamedReading,
    NetState,
    PlaceState,
    PlanState,
    ReadingLine,
    StripState,
    Tab,
)
from fieldapp.strip import strip_of
from fieldapp.wording import (
    FEATURE_LABELS,
    fold_title,
    next_name,
    outcrop_title,
    position_text,
    reading_text,
)

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.files.reading import Reading
    from analysis.fold.records import FoldCheck
    from fieldapp.making import Entry
    from fieldapp.settings import Settings

RECENT = 12  # readings in the short list


class PageView(PagePlacing):
    """Everything that a leaf draws."""

    @property
    def entry(self) -> EntryState:
        """The entry as it stands."""
        return self._entry.state

    @property
    def _entry(self) -> Entry:
        return self._cached("entry", Change.ENTRY, self._make_entry)

    def _make_entry(self) -> Entry:
        base = self._all.get(self._draft.mending)
        north = self._draft.north or self._north()
        around = Around(self._running.neighbours, base.outcrop if base else self._outcrop, north.added_deg)
        text = reading_text(base, self._settings.notation) if base else ""
        return entry_of(self._draft, self._settings, around, mending_text=text, saved=self._draft_saved)

    @property
    def strip(self) -> StripState:
        """The verdict strip."""
        return self._cached("strip", Change.STRIP, lambda: strip_of(self.check))

    @property
    def check(self) -> FoldCheck:
        """The check of the current fold."""
        return self._running.check

    @property
    def outcrop_check(self) -> FoldCheck:
        """The check of the current outcrop's readings alone."""
        return self._cached(
            "outcrop", Change.CHECK | Change.PLACE, lambda: self._running.check_of_outcrop(self._outcrop)
        )

    @property
    def net(self) -> NetState:
        """Readings and trail for the net."""
        return self._cached(
            "net", Change.CHECK, lambda: NetState(self._running.net_points(), self._running.trail)
        )

    @property
    def funnel(self) -> FunnelState:
        """The narrowing funnel."""
        return self._cached("funnel", Change.CHECK | Change.FORECAST | Change.SETTINGS, self._make_funnel)

    def _make_funnel(self) -> FunnelState:
        points = self._running.funnel
        return self._forecaster.funnel(points, self._settings.margin_deg, self._running.version)

    @property
    def tabs(self) -> tuple[Tab, ...]:
        """The four features with their counts."""
        return self._cached("tabs", Change.TABS | Change.PLACE | Change.ENTRY, self._make_tabs)

    def _make_tabs(self) -> tuple[Tab, ...]:
        here = self._running.sums_of_outcrop(self._outcrop)
        return tuple(
            Tab(
                feature,
                FEATURE_LABELS[feature],
                self._running.sums.count(feature),
                here.count(feature),
                feature is self._draft.feature,
            )
            for feature in Feature
        )

    @property
    def place(self) -> PlaceState:
        """Where we stand."""
        return self._cached("place", Change.PLACE | Change.SETTINGS, self._make_place)

    def _make_place(self) -> PlaceState:
        folds = tuple(dict.fromkeys((*self._notebook.folds(), self._fold)))
        outcrops = tuple(dict.fromkeys((*self._notebook.outcrops(self._fold), self._outcrop)))
        return PlaceState(
            fold=self._fold,
            outcrop=self._outcrop,
            fold_title=fold_title(self._fold),
            outcrop_title=outcrop_title(self._outcrop),
            position_text=self._position_text(),
            position_detail=self._position_detail(),
            by_hand="" if self._by_hand is None else position_text(self._by_hand),
            north_text=self._north_text(),
            folds=folds,
            outcrops=outcrops,
            suggested_outcrop=next_name(self._outcrop, outcrops),
            demo=self._demo,
        )

    @property
    def recent(self) -> tuple[ReadingLine, ...]:
        """The newest readings of the fold, newest first; struck-out ones only when just struck."""
        return self._cached(
            "recent",
            Change.RECENT | Change.SETTINGS | Change.PLACE,
            lambda: tuple(line_of(r, self._settings.notation) for r in islice(self._not_struck(), RECENT)),
        )

    def _not_struck(self) -> Iterator[Reading]:
        """Readings of the fold, newest first, without those struck out before the last touch."""
        for reading in reversed(self._running.readings.values()):
            if not reading.struck_out or reading.reading_id == self._just_struck:
                yield reading

    @property
    def standing(self) -> tuple[ReadingLine, ...]:
        """All readings of the fold, newest first, struck-out ones included."""
        return self._cached(
            "standing",
            Change.RECENT | Change.SETTINGS | Change.PLACE,
            lambda: tuple(
                line_of(r, self._settings.notation) for r in reversed(self._running.readings.values())
            ),
        )

    @property
    def named(self) -> NamedReading | None:
        """The reading touched on the net."""
        reading = self._all.get(self._named)
        return None if reading is None else named_reading(reading, self._settings.notation)

    @property
    def plan(self) -> PlanState:
        """The plan sketch."""
        return self._cached("plan", Change.PLAN | Change.PLACE, self._make_plan)

    def _make_plan(self) -> PlanState:
        hinge = self.check.hinge
        here = self.here
        return plan_of(
            self._running.neighbours,
            self._notebook.outcrops(self._fold),
            self._outcrop,
            None if here is None else (here.latitude_deg, here.longitude_deg),
            None if hinge is None else (hinge.line.trend_deg, hinge.line.plunge_deg),
        )

    @property
    def settings(self) -> Settings:
        """The settings."""
        return self._settings

    @property
    def hand_over(self) -> HandOverState:
        """What the Hand over leaf tells."""
        return self._cached("hand over", Change.HAND_OVER, lambda: self._hand_over.state(len(self._all)))

    @property
    def fault(self) -> FaultInput:
        """The fault beside the current fold."""
        return self._cached("fault", Change.FAULT | Change.PLACE, lambda: self._notebook.fault(self._fold))
