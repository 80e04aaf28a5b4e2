"""Simulated entry of planes on the page, some with the strike read from the wrong end; counts what the page saw.

Three folds, each outcrop on one limb, dips 15 to 75 degrees, 2% of the strikes reversed, 3 degrees of compass noise,
and of the sides tapped one in ten is a neighbour of the right one. The page is told what a geologist would tell it: a
question about a reversed strike is answered by the mend where the strike was reversed, and kept against where not.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from analysis.orient.features import Feature
from analysis.orient.righthand import OCTANTS, octant_of
from analysis.orient.vectors import pole_vector, strike_dip_deg, unit
from fieldapp.outcrop import open_page
from fieldapp.settings import NorthMode

if TYPE_CHECKING:
    from pathlib import Path

NOISE_DEG = 3.0
REVERSED = 0.02
NEIGHBOUR_TAPPED = 0.1
FOLDS = 3
AT_AN_OUTCROP = 40  # readings: half bedding, half cleavage
AFTER = 5  # without a side the neighbours are asked only after so many readings of the feature at the outcrop
QUESTIONS = ("reversed-strike", "quadrant-misfit")


@dataclass
class Seen:
    """How many reversed strikes there were and were caught, and how many good ones were questioned."""

    entries: int = 0
    reversed_: int = 0
    caught: int = 0
    good: int = 0
    questioned: int = 0

    @property
    def caught_share(self) -> float:
        """Share of the reversed strikes that the page offered to mend."""
        return self.caught / self.reversed_ if self.reversed_ else float("nan")

    @property
    def false_alarm_share(self) -> float:
        """Share of the good entries that the page questioned."""
        return self.questioned / self.good if self.good else float("nan")


def entered(path: Path, clock, entries: int, seed: int, *, with_side: bool) -> Seen:
    """Enter planes on a page and count; without a side only entries after the first five count."""
    rng = np.random.default_rng(seed)
    # Funnels and forecasts are no matter here and would take most of the time.
    page = open_page(path, clock=clock, dispatch=lambda _work, _done, _failed: None)
    page.change_settings(replace(page.settings, require_quadrant=with_side, north=NorthMode.TRUE))
    page._notebook._db.execute("PRAGMA synchronous = OFF")  # nothing here need outlive a power cut
    seen = Seen()
    number = 0
    while seen.entries < entries:
        page.choose_fold(f"Fold {number % FOLDS + 1}")
        page.choose_outcrop(f"{number}")
        number += 1
        true = {
            feature: pole_vector(rng.uniform(0.0, 360.0), rng.uniform(15.0, 75.0))
            for feature in (Feature.BEDDING, Feature.CLEAVAGE)
        }
        for place in range(AT_AN_OUTCROP):
            feature = (Feature.BEDDING, Feature.CLEAVAGE)[place % 2]
            counts = with_side or place // 2 >= AFTER
            seen.entries += 1
            _enter(page, feature, true[feature], rng, seen if counts else Seen(), with_side=with_side)
    page.close()
    return seen


def _enter(page, feature, true_pole, rng, seen: Seen, *, with_side: bool) -> None:
    noisy = unit(true_pole + rng.normal(0.0, np.radians(NOISE_DEG), 3))
    strike, dip = (round(float(value)) for value in strike_dip_deg(noisy))
    turned = rng.random() < REVERSED
    typed = (strike + 180 * turned) % 360
    page.choose_feature(feature)
    for digit in f"{typed:03d}{min(dip, 90):02d}":
        page.digit(int(digit))
    if with_side:
        # What is tapped is what is seen: the side the bed truly dips to.
        true_strike, _ = strike_dip_deg(true_pole)
        side = OCTANTS.index(octant_of(float(true_strike) + 90.0))
        side += int(rng.choice((-1, 1))) * (rng.random() < NEIGHBOUR_TAPPED)
        page.choose_quadrant(OCTANTS[side % 8])
    asked = [line for line in page.entry.checks if not line.passed and line.name in QUESTIONS]
    offered = any(line.name == "reversed-strike" and line.mend_label for line in asked)
    seen.reversed_ += turned
    seen.good += not turned
    if turned:
        seen.caught += offered
        if offered:
            page.apply_mend("reversed-strike")
    else:
        seen.questioned += bool(asked)
    assert page.keep(), page.message
