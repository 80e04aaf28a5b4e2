"""What trials on invented folds came to: errors, verdicts and readings, counted against the known answer."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterable

    import numpy.typing as npt

    from analysis.fold.trials import Trials
    from analysis.orient.vectors import Floats


class Tally(NamedTuple):
    """Counts over folds; each error counts a fold once, however many looks showed it.

    Attributes
    ----------
    folds
        Folds watched.
    false_transected
        Folds called transected at a true 0, or with the wrong sense at any other transection, at any look.
    false_axial_planar
        Folds called axial planar at any look though the transection reaches the margin.
    missed
        Folds whose watched interval left out the truth at any look.
    naive_false_transected, naive_false_axial_planar, naive_missed
        The same three for the ordinary intervals, which are not made for watching.
    settled
        Folds with a verdict at any look.
    never_looked
        Folds that were kept from a verdict at every look.
    looks, looks_unclear, looks_off_girdle
        All looks; those kept back because the hinge was not clear; those because bedding lay off its girdle.

    """

    folds: int
    false_transected: int
    false_axial_planar: int
    missed: int
    naive_false_transected: int
    naive_false_axial_planar: int
    naive_missed: int
    settled: int
    never_looked: int
    looks: int
    looks_unclear: int
    looks_off_girdle: int


def total(tallies: Iterable[Tally]) -> Tally:
    """Tally of all these folds together."""
    return Tally(*(sum(column) for column in zip(*tallies, strict=True)))


def tally(trials: Trials, truth_deg: float, margin_deg: float) -> Tally:
    """Count what the looks at folds of one true transection came to."""
    wrong_sense = trials.delta_deg * truth_deg <= 0.0
    reaches = abs(truth_deg) >= margin_deg

    def ever(shown: npt.NDArray[np.bool_]) -> int:
        return int(np.count_nonzero(shown.any(axis=1)))

    def misses(low: Floats, high: Floats, looked: npt.NDArray[np.bool_]) -> int:
        return ever(looked & ((low > truth_deg) | (high < truth_deg)))

    finite = np.isfinite(trials.naive_high_deg)
    return Tally(
        folds=len(trials.delta_deg),
        false_transected=ever(trials.transected & wrong_sense),
        false_axial_planar=ever(trials.axial_planar) if reaches else 0,
        missed=misses(trials.low_deg, trials.high_deg, trials.looked),
        naive_false_transected=ever(trials.naive_transected & wrong_sense),
        naive_false_axial_planar=ever(trials.naive_axial_planar) if reaches else 0,
        naive_missed=misses(trials.naive_low_deg, trials.naive_high_deg, finite),
        settled=ever(trials.transected | trials.axial_planar),
        never_looked=len(trials.delta_deg) - ever(trials.looked),
        looks=trials.looked.size,
        looks_unclear=int(np.count_nonzero(trials.unclear)),
        looks_off_girdle=int(np.count_nonzero(trials.off_girdle)),
    )


def quantile_of_settling(after: Floats, share: float) -> float:
    """Readings by which this share of folds, `after` (folds,), have settled; infinite where fewer ever do."""
    return float(np.quantile(after, share, method="inverted_cdf"))
