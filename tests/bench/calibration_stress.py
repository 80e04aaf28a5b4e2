"""Folds that break what the check takes for granted: measured beside the grid, held to no bound."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from analysis.fold.settings import CheckSettings
from analysis.fold.tally import Tally, quantile_of_settling, tally, total
from analysis.fold.trials import looks, watch_drawn
from analysis.stats.synthetic import Drawn, FoldDesign, draw

if TYPE_CHECKING:
    from collections.abc import Callable

READINGS = 60
BATCH = 250
MISREAD_SHARE = 0.05


def in_turn(drawn: Drawn, design: FoldDesign, rng: np.random.Generator) -> Drawn:
    """The readings as drawn: outcrops read in turn."""
    del design, rng
    return drawn


def one_after_another(drawn: Drawn, design: FoldDesign, rng: np.random.Generator) -> Drawn:
    """Each outcrop read to the end before the next is visited."""
    del design, rng
    order = np.argsort(drawn.outcrop, kind="stable")
    return Drawn(*(axes[:, order] for axes in drawn[:3]), drawn.outcrop[order])


def misread(drawn: Drawn, design: FoldDesign, rng: np.random.Generator) -> Drawn:
    """One reading in twenty points anywhere."""
    del design
    changed = []
    for axes in drawn[:3]:
        anywhere = rng.standard_normal(axes.shape)
        anywhere /= np.linalg.norm(anywhere, axis=-1, keepdims=True)
        bad = rng.random(axes.shape[:2]) < MISREAD_SHARE
        changed.append(np.where(bad[..., np.newaxis], anywhere, axes))
    return Drawn(*changed, drawn.outcrop)


def rough_limb(drawn: Drawn, design: FoldDesign, rng: np.random.Generator) -> Drawn:
    """Bedding drawn without scatter gets 3 degrees of it on one limb and 10 on the other."""
    one = (drawn.bedding @ design.sideways > 0.0)[..., np.newaxis]
    moved = drawn.bedding + np.radians(np.where(one, 3.0, 10.0)) * rng.standard_normal(drawn.bedding.shape)
    return drawn._replace(bedding=moved / np.linalg.norm(moved, axis=-1, keepdims=True))


class Stress(NamedTuple):
    """A fold, what is done to its readings, and the outcrops that must have been read before a look counts."""

    name: str
    change: Callable[[Drawn, FoldDesign, np.random.Generator], Drawn]
    outcrops: int = 1
    scatter_deg: float = 6.0
    from_outcrop: int = 1


STRESSES = (
    Stress("nothing amiss", in_turn),
    Stress("one limb scatters by 3, the other by 10 degrees", rough_limb, scatter_deg=0.0),
    Stress("one reading in twenty points anywhere", misread),
    Stress("four outcrops in turn", in_turn, outcrops=4, scatter_deg=3.0),
    Stress("four outcrops in turn", in_turn, outcrops=4),
    Stress("twelve outcrops in turn", in_turn, outcrops=12, scatter_deg=3.0),
    Stress("six outcrops one after another, any look", one_after_another, outcrops=6, scatter_deg=3.0),
    Stress("six outcrops one after another, any look", one_after_another, outcrops=6),
    Stress("six outcrops one after another, from the fourth", one_after_another, 6, 3.0, 4),
    Stress("six outcrops one after another, from the fourth", one_after_another, 6, 6.0, 4),
    Stress("twelve outcrops one after another, from the fourth", one_after_another, 12, 3.0, 4),
    Stress("two outcrops in turn, verdict taken for the fold", in_turn, outcrops=2, scatter_deg=3.0),
)


def run_stress(stress: Stress, transection_deg: float, folds: int, number: int) -> dict[str, object]:
    """Count one stress at one transection: a row of the table. Limbs dip 55 degrees; hinges vary by 3."""
    design = FoldDesign(
        transection_deg=transection_deg,
        bedding_scatter_deg=stress.scatter_deg,
        cleavage_scatter_deg=(stress.scatter_deg or 6.0) * 5.0 / 6.0,
        line_scatter_deg=(stress.scatter_deg or 6.0) * 5.0 / 6.0,
        outcrops=stress.outcrops,
        hinge_variation_deg=3.0 if stress.outcrops > 1 else 0.0,
    )
    settings, at = CheckSettings(), looks((6, 6), READINGS)
    rng = np.random.default_rng([1970, number, int(transection_deg)])
    tallies: list[Tally] = []
    after: list[np.ndarray] = []
    for start in range(0, folds, BATCH):
        drawn = draw(design, READINGS, min(BATCH, folds - start), rng)
        drawn = stress.change(drawn, design, rng)
        reached = np.array([len(set(drawn.outcrop[:n].tolist())) for n in at[:, 0]])
        trials = watch_drawn(drawn, at[reached >= stress.from_outcrop], settings)
        tallies.append(tally(trials, transection_deg, settings.margin_deg))
        after.append(trials.settled_after)
    return {
        "stress": stress.name,
        "outcrops": stress.outcrops,
        "scatter_deg": stress.scatter_deg or "3 and 10",
        "transection_deg": transection_deg,
        **total(tallies)._asdict(),
        "median_readings": quantile_of_settling(np.concatenate(after), 0.5),
    }
