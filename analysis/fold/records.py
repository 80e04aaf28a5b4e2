"""What a check says: frozen records, and the same as plain values for JSON."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from enum import StrEnum
from typing import TYPE_CHECKING, Any

from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature

if TYPE_CHECKING:
    from analysis.fold.limbs import Limbs
    from analysis.fold.settings import CheckSettings
    from analysis.orient.vectors import Floats
    from analysis.stats.axes import AxisFit


class Verdict(StrEnum):
    """The four states of a check."""

    TRANSECTED = "transected"
    AXIAL_PLANAR = "axial planar"
    KEEP_READING = "keep reading"
    CANNOT_BE_SETTLED = "cannot be settled"


@dataclass(frozen=True, slots=True)
class Counts:
    """Readings that stand, by feature, and the outcrops they come from."""

    bedding: int
    cleavage: int
    intersection: int
    hinge: int
    outcrops: int

    def of(self, feature: Feature) -> int:
        """Count of one feature."""
        return int(getattr(self, feature.value))

    def to_json(self) -> dict[str, int]:
        """As plain values."""
        return {**{feature.value: self.of(feature) for feature in Feature}, "outcrops": self.outcrops}


@dataclass(frozen=True, slots=True)
class EllipseDeg:
    """Confidence ellipse of an axis: half-angles in degrees, and the unit vectors (3,) they open along."""

    major_deg: float
    minor_deg: float
    major_axis: Floats = field(repr=False)
    minor_axis: Floats = field(repr=False)


@dataclass(frozen=True, slots=True)
class AxisEstimate:
    """An axis, shape (3,), what it comes from, its ellipse (None while undetermined) and the fit behind it."""

    vector: Floats
    source: str
    ellipse: EllipseDeg | None
    fit: AxisFit = field(repr=False)

    @property
    def line(self) -> Line:
        """The axis as a line."""
        return Line.from_vector(self.vector)

    @property
    def plane(self) -> Plane:
        """The plane whose pole the axis is."""
        return Plane.from_pole(self.vector)

    @property
    def ellipse_json(self) -> list[float] | None:
        """[major, minor] half-angles, degrees."""
        return (
            None
            if self.ellipse is None
            else [round(half, 6) for half in (self.ellipse.major_deg, self.ellipse.minor_deg)]
        )


@dataclass(frozen=True, slots=True)
class MeanIntersection:
    """The mean intersection line, from so many measured and so many computed lines."""

    axis: AxisEstimate
    measured: int
    computed: int


@dataclass(frozen=True, slots=True)
class LimbLine:
    """Where bedding of one limb meets the cleavage: computed from means, and measured lines on that limb."""

    limb: str
    computed: Line
    measured: Line | None
    measured_count: int


@dataclass(frozen=True, slots=True)
class SideEstimate:
    """One of the two estimates of the transection: from planes, or from lines."""

    source: str
    delta_deg: float
    se_deg: float


@dataclass(frozen=True, slots=True)
class MoreReadings:
    """How many further readings should settle it: half of such folds need no more than `total`.

    `low` and `high` hold the middle 60 per cent of simulated futures; the four features split `total`.
    """

    total: int
    low: int
    high: int
    bedding: int
    cleavage: int
    intersection: int
    hinge: int

    def to_json(self) -> dict[str, int]:
        """As plain values."""
        return {
            name: getattr(self, name)
            for name in ("total", "low", "high", "bedding", "cleavage", "intersection", "hinge")
        }


@dataclass(frozen=True, slots=True)
class NextReading:
    """The reading that narrows the interval most: which feature, and where to take it."""

    feature: Feature
    where: str


@dataclass(frozen=True, slots=True)
class WatchNumbers:
    """What the decision and the forecast were reckoned from; variances in degrees squared."""

    delta_deg: float
    hinge_variance: float
    cleavage_variance: float
    variance: float
    freedom: float
    information: float
    by_outcrop: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class FoldCheck:
    """The whole check of one fold; None stands for what the readings do not give yet."""

    fold: str
    settings: CheckSettings
    readings: Counts
    hinge: AxisEstimate | None = None
    cleavage: AxisEstimate | None = None
    intersection: MeanIntersection | None = None
    limbs: Limbs | None = None
    limb_lines: tuple[LimbLine, ...] = ()
    estimates: tuple[SideEstimate, ...] = ()
    transection_deg: float | None = None
    sense: str = "none"
    se_deg: float | None = None
    df: float | None = None
    fixed_interval_deg: tuple[float, float] | None = None
    interval_deg: tuple[float, float] | None = None
    verdict: Verdict = Verdict.KEEP_READING
    because: tuple[str, ...] = ()
    blocked: bool = False  # a condition keeps a verdict back, not the interval
    more_readings: MoreReadings | None = None
    next_reading: NextReading | None = None
    warnings: tuple[str, ...] = ()
    numbers: WatchNumbers | None = None

    def changed(self, **fields: Any) -> FoldCheck:  # noqa: ANN401 - the fields' own types are checked by the record
        """Make the same check with other values in some fields."""
        return replace(self, **fields)

    def to_json(self) -> dict[str, Any]:
        """As plain values, with exactly the keys that the command documents."""
        return {
            "fold": self.fold,
            "readings": self.readings.to_json(),
            "hinge": None
            if self.hinge is None
            else {
                "trend_deg": _rounded(self.hinge.line.trend_deg),
                "plunge_deg": _rounded(self.hinge.line.plunge_deg),
                "from": self.hinge.source,
                "ellipse_deg": self.hinge.ellipse_json,
            },
            "cleavage": None
            if self.cleavage is None
            else {
                "strike_deg": _rounded(self.cleavage.plane.strike_deg),
                "dip_deg": _rounded(self.cleavage.plane.dip_deg),
                "ellipse_deg": self.cleavage.ellipse_json,
            },
            "intersection": None
            if self.intersection is None
            else {
                "trend_deg": _rounded(self.intersection.axis.line.trend_deg),
                "plunge_deg": _rounded(self.intersection.axis.line.plunge_deg),
                "ellipse_deg": self.intersection.axis.ellipse_json,
                "measured": self.intersection.measured,
                "computed": self.intersection.computed,
            },
            "transection_deg": _rounded(self.transection_deg),
            "sense": self.sense,
            "se_deg": _rounded(self.se_deg),
            "df": _rounded(self.df),
            "fixed_interval_deg": _pair(self.fixed_interval_deg),
            "interval_deg": _pair(self.interval_deg),
            "verdict": self.verdict.value,
            "because": list(self.because),
            "more_readings": None if self.more_readings is None else self.more_readings.to_json(),
            "next_reading": None
            if self.next_reading is None
            else {"feature": self.next_reading.feature.value, "where": self.next_reading.where},
            "warnings": list(self.warnings),
        }


def rounded(value: float) -> float:
    """Round as `FoldCheck.to_json` writes: to a millionth, with no minus zero.

    A millionth of a degree is below what any instrument reads and above what two machines differ by.
    """
    return round(value, 6) + 0.0


def _rounded(value: float | None) -> float | None:
    return None if value is None else rounded(value)


def _pair(values: tuple[float, float] | None) -> list[float | None] | None:
    return None if values is None else [_rounded(value) for value in values]
