"""What can be taken back, newest first. Kept in memory: after a restart, striking out is still there."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import StrEnum
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable

    from analysis.files.reading import Reading
    from fieldapp.entry import EntryDraft

DEPTH = 50


class StepKind(StrEnum):
    """What was done."""

    KEPT = "kept"
    REVISED = "revised"
    TAKEN_IN = "taken in"
    CORRECTED = "corrected to true north"
    PLACED = "placed by hand"


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One thing done: the reading (or the take-in), how it was before, the draft it came from.

    `all_before` are the readings before something was done to many.
    """

    kind: StepKind
    reading_id: str = ""
    before: Reading | None = None
    draft: EntryDraft | None = None
    take_in: int = 0
    all_before: tuple[Reading, ...] = ()


def content_of(reading: Reading) -> dict[str, object]:
    """All of a reading that a revision may change."""
    fixed = ("reading_id", "revision", "revised_at")
    return {name: getattr(reading, name) for name in reading.__dataclass_fields__ if name not in fixed}


class UndoStack:
    """The last things done, at most DEPTH."""

    def __init__(self) -> None:
        self._steps: list[Step] = []

    def push(self, step: Step) -> None:
        """Note one thing done."""
        self._steps = [*self._steps[-(DEPTH - 1) :], step]

    def newest(self) -> Step | None:
        """The thing done last."""
        return self._steps[-1] if self._steps else None

    def pop(self) -> None:
        """Forget the thing done last: it was taken back."""
        self._steps.pop()

    def turn_drafts(self, turn: Callable[[EntryDraft], EntryDraft]) -> None:
        """Bring the drafts that may come back into another notation, as the one in hand is brought."""
        self._steps = [s if s.draft is None else replace(s, draft=turn(s.draft)) for s in self._steps]

    def forget_take_in(self, take_in: int) -> None:
        """Forget a take-in that was undone from its own leaf."""
        self._steps = [s for s in self._steps if s.kind is not StepKind.TAKEN_IN or s.take_in != take_in]
