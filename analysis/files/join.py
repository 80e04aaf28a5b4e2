"""Joining the readings of several tablets: nothing is lost, and the order of joining does not matter.

What is joined is a set of revisions. Two revisions are the same when all of their content is; two contents
under one reading_id and revision are a conflict, and both stay in the set. Union of sets is commutative,
associative and idempotent, so joining is, conflicts included: a join of joins finds them again.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.files.reading import Reading
from analysis.files.standing import Conflict

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

__all__ = ["Conflict", "Joined", "join"]


@dataclass(frozen=True, slots=True)
class Joined:
    """Every revision of every reading, by id, revision and content; and where contents clash.

    Iterating gives the revisions, so that a join can be joined and written like any other readings.
    """

    readings: tuple[Reading, ...]
    conflicts: tuple[Conflict, ...]

    def __iter__(self) -> Iterator[Reading]:
        return iter(self.readings)

    def __len__(self) -> int:
        return len(self.readings)

    @property
    def standing(self) -> tuple[Reading, ...]:
        """The readings that count: the highest revision of each, unless it is struck out.

        Where the highest revision has several contents the one edited last stands (`Reading.content_order`).
        """
        last = {reading.reading_id: reading for reading in self.readings}
        return tuple(reading for reading in last.values() if not reading.struck_out)


def join(*sources: Iterable[Reading]) -> Joined:
    """Join readings from several places: tables, joins, or any iterables of readings."""
    revisions: defaultdict[tuple[str, int], set[Reading]] = defaultdict(set)
    for source in sources:
        for reading in source:
            revisions[reading.reading_id, reading.revision].add(reading)
    readings: list[Reading] = []
    conflicts: list[Conflict] = []
    for (reading_id, revision), contents in sorted(revisions.items(), key=lambda item: item[0]):
        ranked = tuple(contents if len(contents) == 1 else sorted(contents, key=Reading.content_order))
        readings += ranked
        if len(ranked) > 1:
            conflicts.append(Conflict(reading_id, revision, ranked))
    return Joined(tuple(readings), tuple(conflicts))
