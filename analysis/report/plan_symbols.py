"""The symbols of planes on the plan sketch.

Symbols after the FGDC Digital Cartographic Standard for Geologic Map Symbolization (FGDC-STD-013-2006), sections
6 (bedding), 7 (cleavage) and 9 (lineation), from memory; the sketch explains each symbol it uses. A bar lies
along strike and a tick points down dip, with the dip beside it. A vertical plane has its tick on both sides, a
horizontal one is a ring with a cross, the tick of an overturned bed is bent round like a hook, and cleavage
carries an open box in place of the tick.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import SettingError
from analysis.orient.features import Feature

if TYPE_CHECKING:
    from analysis.orient.attitudes import Plane
    from analysis.orient.vectors import Floats

FLAT_DEG: Final = 0.5
"""Below this dip or plunge a symbol is that of a horizontal plane or line."""
UPRIGHT_DEG: Final = 89.5
"""Above it, that of a vertical one."""


@dataclass(frozen=True, slots=True)
class PlanPlane:
    """A plane drawn on the plan: bedding or cleavage, most often the mean of an outcrop."""

    feature: Feature
    plane: Plane
    overturned: bool = False

    def __post_init__(self) -> None:
        if not self.feature.is_plane:
            raise SettingError(f"{self.feature} is no plane", where="plan", expected="bedding or cleavage")

    @property
    def kind(self) -> str:
        """The words that the key explains its symbol with."""
        dip = self.plane.dip_deg
        if dip < FLAT_DEG:
            return f"{self.feature}, horizontal"
        if dip > UPRIGHT_DEG:
            return f"{self.feature}, vertical"
        if self.overturned and self.feature is Feature.BEDDING:
            return "bedding, overturned"
        return f"{self.feature}, with dip"


def azimuth_ray(azimuth_deg: float) -> Floats:
    """Unit vector, shape (2,), x east and y north, of an azimuth."""
    turn = math.radians(azimuth_deg)
    return np.array([math.sin(turn), math.cos(turn)])


def plane_symbol(item: PlanPlane) -> list[Floats]:
    """Lines, each (n, 2), x east and y north, of a plane's symbol; half its strike bar has length 1."""
    plane = item.plane
    along, down = azimuth_ray(plane.strike_deg), azimuth_ray(plane.dip_direction_deg)
    frame = np.stack([along, down])
    bar = np.array([[-1.0, 0.0], [1.0, 0.0]])
    sides = (1.0, -1.0) if plane.dip_deg > UPRIGHT_DEG else (1.0,)
    if plane.dip_deg < FLAT_DEG:
        turn = np.linspace(0.0, 2.0 * np.pi, 49)
        ring = 0.6 * np.stack([np.cos(turn), np.sin(turn)], axis=-1)
        return (
            [ring, bar, bar[:, ::-1]] if item.feature is Feature.BEDDING else [_square(), bar, bar[:, ::-1]]
        )
    if item.feature is Feature.CLEAVAGE:
        marks = [np.array([[-0.34, 0.0], [-0.34, 0.5 * k], [0.34, 0.5 * k], [0.34, 0.0]]) for k in sides]
    elif item.kind == "bedding, overturned":
        # The tick comes from behind the bar, bent round: what was the top of the bed now faces down.
        turn = np.linspace(np.pi, 0.0, 25)
        bend = np.stack([0.26 * np.cos(turn), -0.36 * np.sin(turn)], axis=-1)
        marks = [np.concatenate([bend, [[0.26, 0.55]]])]
    else:
        marks = [np.array([[0.0, -0.5 if len(sides) == 2 else 0.0], [0.0, 0.5]])]
    return [line @ frame for line in (bar, *marks)]


def _square() -> Floats:
    return 0.5 * np.array([[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0], [-1.0, -1.0]])
