"""Invented folds: readings drawn from a fold whose answer is known, for planning, calibration and the demo.

A fold is upright in its profile: its axial surface holds the hinge and the vertical. Limbs dip to either side
of it in the section across the hinge; cleavage is turned off the axial surface, about the line in it at right
angles to the hinge, by the transection. Readings scatter evenly about the true attitudes: the stated scatter is
the standard deviation of a pole or line in any one direction.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from analysis.errors import SettingError
from analysis.orient.vectors import cross, line_vector

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class FoldDesign:
    """A fold with a known answer; all angles in degrees.

    Parameters
    ----------
    hinge_trend_deg, hinge_plunge_deg
        The hinge: 0 to 360, and 0 to 80 (a steeper hinge has no upright axial surface).
    limb_dips_deg
        Dips of both limbs in the profile, each from its own side of the axial surface, 0 to 90; a negative
        second one dips the same way as the first.
    transection_deg
        Cleavage against hinge, clockwise positive, -60 to 60.
    bedding_scatter_deg, cleavage_scatter_deg, line_scatter_deg
        Standard deviations of one reading in one direction, 0 to 30.
    first_limb_share
        Share of bedding read on the first limb, 0 to 1.
    outcrops
        Number of outcrops; readings go round them in turn.
    hinge_variation_deg
        Standard deviation of the real hinge between outcrops, in either direction, 0 to 30.

    """

    hinge_trend_deg: float = 40.0
    hinge_plunge_deg: float = 0.0
    limb_dips_deg: tuple[float, float] = (55.0, 55.0)
    transection_deg: float = 0.0
    bedding_scatter_deg: float = 6.0
    cleavage_scatter_deg: float = 5.0
    line_scatter_deg: float = 5.0
    first_limb_share: float = 0.5
    outcrops: int = 1
    hinge_variation_deg: float = 0.0

    def __post_init__(self) -> None:
        for name, value, low, high in (
            ("hinge trend", self.hinge_trend_deg, 0.0, 360.0),
            ("hinge plunge", self.hinge_plunge_deg, 0.0, 80.0),
            ("first limb dip", self.limb_dips_deg[0], 0.0, 90.0),
            ("second limb dip", self.limb_dips_deg[1], -90.0, 90.0),
            ("transection", self.transection_deg, -60.0, 60.0),
            ("bedding scatter", self.bedding_scatter_deg, 0.0, 30.0),
            ("cleavage scatter", self.cleavage_scatter_deg, 0.0, 30.0),
            ("line scatter", self.line_scatter_deg, 0.0, 30.0),
            ("hinge variation", self.hinge_variation_deg, 0.0, 30.0),
            ("share of the first limb", self.first_limb_share, 0.0, 1.0),
            ("number of outcrops", self.outcrops, 1, 10_000),
        ):
            if not (math.isfinite(value) and low <= value <= high):
                raise SettingError(f"{value:g} is no {name}", where=name, expected=f"{low:g} to {high:g}")

    @property
    def hinge(self) -> Floats:
        """The true hinge, shape (3,)."""
        return line_vector(self.hinge_trend_deg, self.hinge_plunge_deg)

    @property
    def cleavage_pole(self) -> Floats:
        """The true cleavage pole, shape (3,)."""
        turn = math.radians(self.transection_deg)
        return np.asarray(math.cos(turn) * self.sideways + math.sin(turn) * self.hinge)

    @property
    def upward(self) -> Floats:
        """The line in the axial surface at right angles to the hinge, shape (3,), pointing up."""
        return -line_vector(self.hinge_trend_deg + 180.0, 90.0 - self.hinge_plunge_deg)

    @property
    def sideways(self) -> Floats:
        """The pole of the axial surface, shape (3,): to the left of the hinge's trend, seen from above.

        With it a positive turn of the cleavage is clockwise: its pole turns from the left towards the trend.
        """
        return cross(self.upward, self.hinge)


class Drawn(NamedTuple):
    """Readings of many invented folds; the order along `readings` is the order in which they were read.

    `bedding`, `cleavage` and `lines` have shape (folds, readings, 3); `outcrop` (readings,) numbers their outcrops.
    """

    bedding: Floats
    cleavage: Floats
    lines: Floats
    outcrop: npt.NDArray[np.int64]


def draw(design: FoldDesign, readings: int, folds: int, rng: np.random.Generator) -> Drawn:
    """Draw so many readings of each of bedding, cleavage and intersection, for so many folds of one design."""
    shape = (folds, readings)
    outcrop = np.arange(readings) % design.outcrops
    first = rng.random(shape) < design.first_limb_share
    angle = np.radians(np.where(first, design.limb_dips_deg[0], -design.limb_dips_deg[1]))[..., np.newaxis]
    poles = np.cos(angle) * design.upward + np.sin(angle) * design.sideways
    if design.hinge_variation_deg > 0.0:
        sd = math.radians(design.hinge_variation_deg)
        across = np.stack([design.upward, design.sideways])
        turns = (rng.standard_normal((folds, design.outcrops, 2)) * sd) @ across
        poles = _turned(poles, turns[:, outcrop])
    cleavage = np.broadcast_to(design.cleavage_pole, poles.shape)
    lines = cross(poles, design.cleavage_pole)
    length = np.linalg.norm(lines, axis=-1, keepdims=True)
    # Bedding parallel to cleavage meets it in no line; such a reading is taken along the hinge.
    lines = np.where(length > 1e-9, lines / np.where(length > 1e-9, length, 1.0), design.hinge)
    return Drawn(
        bedding=_scattered(poles, design.bedding_scatter_deg, rng),
        cleavage=_scattered(cleavage, design.cleavage_scatter_deg, rng),
        lines=_scattered(lines, design.line_scatter_deg, rng),
        outcrop=outcrop,
    )


def _scattered(axes: Floats, scatter_deg: float, rng: np.random.Generator) -> Floats:
    moved = axes + math.radians(scatter_deg) * rng.standard_normal(axes.shape)
    return np.asarray(moved / np.linalg.norm(moved, axis=-1, keepdims=True))


def _turned(vectors: Floats, turns: Floats) -> Floats:
    """Vectors (..., 3) turned about axes `turns` (..., 3) by their lengths in radians (Rodrigues)."""
    size = np.linalg.norm(turns, axis=-1, keepdims=True)
    axis = turns / np.where(size > 0.0, size, 1.0)
    along = np.sum(axis * vectors, axis=-1, keepdims=True)
    turned = (
        vectors * np.cos(size) + cross(axis, vectors) * np.sin(size) + axis * along * (1.0 - np.cos(size))
    )
    return np.asarray(turned)
