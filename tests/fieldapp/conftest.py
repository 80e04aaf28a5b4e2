"""A clock that tests set, and hands that type on the page as a geologist does."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING

import pytest

from analysis.files.reading import Reading
from analysis.orient.features import Feature
from fieldapp.dispatch import at_once
from fieldapp.notebook.ids import ReadingIds
from fieldapp.outcrop import open_page

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from pathlib import Path

    from fieldapp.outcrop import OutcropPage

START = datetime(2026, 5, 1, 9, 30, tzinfo=UTC)


@dataclass
class SetClock:
    """A clock that moves one second at each look, and when it is told to."""

    now: datetime = field(default=START)

    def __call__(self) -> datetime:
        """Give the time, a second later at each look."""
        self.now += timedelta(seconds=1)
        return self.now

    def later(self, **by: float) -> None:
        """Let time pass."""
        self.now += timedelta(**by)


@pytest.fixture
def clock() -> SetClock:
    return SetClock()


@pytest.fixture
def make_reading(clock: SetClock) -> Callable[..., Reading]:
    """Make readings with ids that rise; bedding 045/30 unless told otherwise."""
    ids = ReadingIds(clock)

    def make(**fields: object) -> Reading:
        feature = Feature(fields.get("feature", "bedding"))
        attitude = (
            {"strike_deg": 45.0, "dip_deg": 30.0}
            if feature.is_plane
            else {"trend_deg": 45.0, "plunge_deg": 10.0}
        )
        return Reading(
            **{
                "reading_id": ids(),
                "feature": feature,
                "recorded_at": clock(),
                "fold": "Mossgarth",
                "outcrop": "MG-1",
                **attitude,
                **fields,
            }
        )

    return make


@pytest.fixture
def page_at(clock: SetClock) -> Iterator[Callable[..., OutcropPage]]:
    """Open pages on notebooks; what they compute elsewhere is computed at once."""
    pages: list[OutcropPage] = []

    def make(path: Path, **options: object) -> OutcropPage:
        page = open_page(path, **{"clock": clock, "dispatch": at_once, **options})
        pages.append(page)
        return page

    yield make
    for page in pages:
        page.close()


@pytest.fixture
def page(page_at: Callable[..., OutcropPage], tmp_path: Path) -> OutcropPage:
    return page_at(tmp_path / "field.notebook")


def press(page: OutcropPage, digits: str) -> int:
    """Press keys as they are written ("045", ".", "30"); gives the number of touches."""
    for sign in digits:
        if sign == ".":
            page.point()
        else:
            page.digit(int(sign))
    return len(digits)


@pytest.fixture
def typed() -> Callable[..., int]:
    """Type an attitude as "045/30" and tap a side, or the side the right-hand rule expects; count touches."""

    def type_in(page: OutcropPage, text: str, side: str | None = None) -> int:
        touches = press(page, text.replace("/", ""))
        if page.entry.quadrant_offered:
            page.choose_quadrant(page.entry.expected_quadrant if side is None else side)
            touches += 1
        return touches

    return type_in


@pytest.fixture
def kept(typed: Callable[..., int]) -> Callable[..., str]:
    """Type and keep an attitude; gives the id of the reading."""

    def keep(page: OutcropPage, feature: Feature, text: str, side: str | None = None) -> str:
        page.choose_feature(feature)
        typed(page, text, side)
        assert page.keep(), page.message
        return page.recent[0].reading_id

    return keep
