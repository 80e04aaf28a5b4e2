"""Folds that are told how many more readings they need, and how many they then do need."""

from typing import NamedTuple

import numpy as np

from analysis.fold.forecast import settle, split
from analysis.fold.records import WatchNumbers
from analysis.fold.settings import CheckSettings
from analysis.fold.trials import Estimates, estimate_drawn, watch_drawn
from analysis.stats.synthetic import Drawn, FoldDesign, draw

SETTINGS = CheckSettings()
LOOKED_AT_MOST = 2.5  # times what was told; what takes longer counts as longer


class Told(NamedTuple):
    """One fold: its forecast in further readings, and what it took (infinite past LOOKED_AT_MOST times that)."""

    told: float
    low: float
    high: float
    took: float


def numbers_of(estimates: Estimates, fold: int) -> WatchNumbers:
    """What the forecast starts from, at the only look."""
    at = (fold, 0)
    found = estimates.transection
    return WatchNumbers(
        delta_deg=float(found.delta_deg[at]),
        hinge_variance=float(found.steady_hinge_variance[at]),
        cleavage_variance=float(found.steady_cleavage_variance[at]),
        variance=float(found.variance[at]),
        freedom=float(found.freedom[at]),
        information=float(estimates.information[at]),
        by_outcrop=bool(found.by_outcrop[at]),
    )


def tell_and_read_on(design: FoldDesign, held: int, folds: int, rng: np.random.Generator) -> list[Told]:
    """Forecast folds with `held` readings of each stream that have no verdict, then read on as advised.

    Folds whose forecast passes the limit are told no number and are left out.
    """
    limit = SETTINGS.forecast_limit
    drawn = draw(design, held + int(LOOKED_AT_MOST * limit) + 2, folds, rng)
    at = np.array([[held, held]])
    now, estimates = watch_drawn(drawn, at, SETTINGS), estimate_drawn(drawn, at)
    result = []
    for fold in range(folds):
        if (now.transected | now.axial_planar)[fold, 0]:
            continue
        numbers = numbers_of(estimates, fold)
        forecast = settle(numbers, (held, held), (0.0, 0.0), SETTINGS)
        if forecast.median > limit:
            continue
        steps = np.arange(1, int(LOOKED_AT_MOST * forecast.median) + 2)
        first, _ = split(steps, (held, held), (numbers.hinge_variance, numbers.cleavage_variance))
        first = np.round(first).astype(int)
        one = Drawn(*(axes[fold : fold + 1] for axes in drawn[:3]), drawn.outcrop)
        later = watch_drawn(one, held + np.stack([first, steps - first], axis=1), SETTINGS)
        settled = (later.transected | later.axial_planar)[0]
        took = float(steps[settled.argmax()]) if settled.any() else np.inf
        result.append(Told(forecast.median, forecast.low, forecast.high, took))
    return result


def tell_many(designs: int, rng: np.random.Generator, folds: int = 8) -> np.ndarray:
    """Forecasts of folds of many kinds, (n, 4): limbs 30 to 75, scatter 3 to 8, transections 0 to 15 degrees."""
    rows: list[Told] = []
    for _ in range(designs):
        dip, scatter = float(rng.choice([30, 55, 75])), float(rng.choice([3, 6, 8]))
        design = FoldDesign(
            limb_dips_deg=(dip, dip),
            transection_deg=float(rng.uniform(0.0, 15.0)),
            bedding_scatter_deg=scatter,
            cleavage_scatter_deg=scatter * 5.0 / 6.0,
        )
        rows += tell_and_read_on(design, int(rng.choice([7, 10, 15, 20, 30])), folds, rng)
    return np.array(rows)
