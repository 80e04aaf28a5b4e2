"""Fits of one axis of a fold from moments, whatever was not read left out."""

from __future__ import annotations

import numpy as np

from analysis.fold.transection import FoldAxis, fit_fold


def fitted(axis, *, bedding=None, cleavage=None, lines=None, hinge=None):
    """Fit one `FoldAxis` to moments (..., outcrops, 24)."""
    given = [bedding, cleavage, lines, hinge]
    shape = next(rows for rows in given if rows is not None).shape
    rows = [np.zeros(shape) if rows is None else rows for rows in given]
    return fit_fold(np.stack(rows, axis=-2), (FoldAxis(axis),)).of(0)


def fitted_hinge(bedding):
    """Fit the hinge to bedding alone."""
    return fitted(FoldAxis.HINGE, bedding=bedding)


def fitted_cleavage(cleavage):
    """Fit the cleavage to its planes alone."""
    return fitted(FoldAxis.CLEAVAGE, cleavage=cleavage)


def fitted_steep(lines):
    """Fit the cleavage to intersection lines alone."""
    return fitted(FoldAxis.STEEP, lines=lines)
