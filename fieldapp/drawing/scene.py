"""What the pictures show, as plain values. No Kivy import: a leaf fills these in, a widget draws them."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from analysis.orient.features import Feature

Floats = npt.NDArray[np.float64]

# Features differ by shape and letter, never by colour alone.
MARKERS = {
    Feature.BEDDING: "dot",
    Feature.CLEAVAGE: "triangle",
    Feature.INTERSECTION: "diamond",
    Feature.HINGE: "square",
}
LETTERS = {
    Feature.BEDDING: "B",
    Feature.CLEAVAGE: "C",
    Feature.INTERSECTION: "L",
    Feature.HINGE: "H",
}


def no_vectors() -> Floats:
    """No vectors, shape (0, 3)."""
    return np.zeros((0, 3))


@dataclass(frozen=True, slots=True, eq=False)
class Ellipse:
    """A confidence ellipse round an axis: half axes in degrees along two tangents, each (3,)."""

    major_deg: float
    minor_deg: float
    major_axis: Floats
    minor_axis: Floats


@dataclass(frozen=True, slots=True, eq=False)
class Mean:
    """An axis with its ellipse and its words: the hinge, the mean intersection."""

    vector: Floats
    label: str
    ellipse: Ellipse | None = None


@dataclass(frozen=True, slots=True, eq=False)
class Points:
    """The readings of one feature: poles or lines (n, 3), their keys, and which are of this outcrop (n,)."""

    vectors: Floats
    keys: tuple[str, ...]
    here: npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class NetScene:
    """Everything on the equal-area net."""

    points: dict[Feature, Points] = field(default_factory=dict)
    hinge: Mean | None = None
    intersection: Mean | None = None
    trail: Floats = field(default_factory=no_vectors)  # the last mean intersections, oldest first, (n, 3)
    cleavage: Mean | None = None  # its vector is the pole
    girdle_pole: Floats | None = None
    chosen_key: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FunnelScene:
    """The transection against the count of readings; angles in degrees, clockwise positive.

    `counts`, `delta_deg`, `low_deg`, `high_deg` have shape (n,); NaN where there was no interval yet.
    The forecast arrays continue them; `settles_at` is the count at which it should settle.
    """

    counts: Floats = field(default_factory=lambda: np.zeros(0))
    delta_deg: Floats = field(default_factory=lambda: np.zeros(0))
    low_deg: Floats = field(default_factory=lambda: np.zeros(0))
    high_deg: Floats = field(default_factory=lambda: np.zeros(0))
    margin_deg: float = 5.0
    forecast_counts: Floats = field(default_factory=lambda: np.zeros(0))
    forecast_low_deg: Floats = field(default_factory=lambda: np.zeros(0))
    forecast_high_deg: Floats = field(default_factory=lambda: np.zeros(0))
    settles_at: float | None = None
    why_empty: str = "The funnel starts when bedding and cleavage have been read."

    @property
    def known(self) -> npt.NDArray[np.bool_]:
        """Where there was an angle with its interval, (n,)."""
        return np.isfinite(self.delta_deg) & np.isfinite(self.low_deg) & np.isfinite(self.high_deg)


@dataclass(frozen=True, slots=True)
class PlanPlane:
    """A plane on the plan: feature, right-hand-rule strike and dip in degrees."""

    feature: Feature
    strike_deg: float
    dip_deg: float
    overturned: bool = False


@dataclass(frozen=True, slots=True)
class PlanOutcrop:
    """An outcrop on the plan, in metres east and north of the current one."""

    name: str
    east_m: float
    north_m: float
    here: bool = False
    planes: tuple[PlanPlane, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class PlanScene:
    """The plan sketch: outcrops, and the hinge's trend and plunge in degrees."""

    outcrops: tuple[PlanOutcrop, ...] = ()
    hinge: tuple[float, float] | None = None
    why_empty: str = "No outcrop has a position yet."
