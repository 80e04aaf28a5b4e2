"""The exact chance that a standardised Brownian path is ever outside a boundary at any of a list of looks.

An independent check of the watched interval: Armitage, McPherson & Rowe's (1969) recursion over looks (from
memory), by numerical integration. tests/published/test_watching.py holds it to published constants.
"""

import numpy as np
from scipy import stats

POINTS = 241
FAR = 9.0  # standard deviations that stand for no boundary at all


def chance_of_leaving(information, multipliers, drift=0.0, *, one_sided=False):
    """Chance that |B(t) + drift t| >= m sqrt(t) at any look; only the upper side if `one_sided`.

    `information` (looks,) rises; `multipliers` (looks,) are the boundary in units of the standard error.
    """
    t = np.asarray(information, dtype=float)
    high = np.asarray(multipliers, dtype=float) * np.sqrt(t)
    low = drift * t - FAR * np.sqrt(t) if one_sided else -high
    high = np.minimum(high, drift * t + FAR * np.sqrt(t))
    x = np.linspace(low[0], high[0], POINTS)
    density = stats.norm.pdf(x, drift * t[0], np.sqrt(t[0]))
    for before, now, left, right in zip(t[:-1], t[1:], low[1:], high[1:], strict=True):
        weight = np.full(POINTS, x[1] - x[0])
        weight[[0, -1]] *= 0.5
        y = np.linspace(left, right, POINTS)
        step = np.sqrt(now - before)
        moved = (y[:, np.newaxis] - x - drift * (now - before)) / step
        density = np.exp(-0.5 * moved**2) @ (density * weight) / (step * np.sqrt(2.0 * np.pi))
        x = y
    weight = np.full(POINTS, x[1] - x[0])
    weight[[0, -1]] *= 0.5
    return float(1.0 - density @ weight)
