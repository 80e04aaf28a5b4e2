"""Folds to check: invented ones, and ones put together by hand."""

from __future__ import annotations

import numpy as np
import pytest

from analysis.orient.features import Feature
from analysis.stats.sums import RunningSums
from analysis.stats.synthetic import FoldDesign, draw


def sums_from(**axes):
    """Running sums of one outcrop from axes (n, 3) by feature."""
    sums = RunningSums()
    for feature, vectors in axes.items():
        if len(vectors):
            sums.add(Feature(feature), "A", np.asarray(vectors, dtype=float))
    return sums


def drawn_sums(design=None, *, bedding=20, cleavage=15, lines=0, seed=1, outcrop_names=None):
    """Running sums of a drawn fold with so many readings of each."""
    design = design or FoldDesign(hinge_plunge_deg=10.0)
    drawn = draw(design, max(bedding, cleavage, lines), 1, np.random.default_rng(seed))
    sums = RunningSums()
    parts = ((Feature.BEDDING, drawn.bedding, bedding), (Feature.CLEAVAGE, drawn.cleavage, cleavage),
             (Feature.INTERSECTION, drawn.lines, lines))  # fmt: skip
    for feature, axes, count in parts:
        for k in range(count):
            number = int(drawn.outcrop[k])
            sums.add(feature, outcrop_names[number] if outcrop_names else f"O{number + 1}", axes[0][k])
    return sums


@pytest.fixture
def make_sums():
    return sums_from


@pytest.fixture
def draw_sums():
    return drawn_sums
