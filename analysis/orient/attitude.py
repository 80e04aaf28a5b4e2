"""The attitude that a tablet feels: laid on a plane, or along a line.

Frames, written down once
-------------------------
Device frame: x to the right, y up and z out of the screen, for the screen held in the device's natural way
(it does not turn with the picture). This is the frame of Android's and of iOS's sensors alike.

- *Specific force*, m/s²: what an accelerometer at rest feels, 9.8 m/s² **up**. Android reports exactly this:
  lying on a table, screen up, (0, 0, +9.8). iOS reports, in units of g, the opposite sign: (0, 0, -1);
  `specific_force_from_ios` brings it to the frame used here.
- *Magnetic field*, microtesla (uT), in the device frame, pointing as a compass needle's north end does and
  down in the northern hemisphere. Both systems report it so.

World frame: north, east, down, as everywhere in `analysis`; here from *magnetic* north until a correction
is applied. Rotation matrices have shape (..., 3, 3) and take device vectors to world vectors by `matrix @ v`.

The tablet lies on a plane with its back (or its screen): the pole of the plane is the device's z axis. Along
a line it lies with an edge: its y axis (long edges of a phone) or its x axis. Both are axes, so it does not
matter which way round the tablet is held.

Rotation by TRIAD: Black (1964), A passive system for determining the attitude of a satellite, AIAA J. 2,
1350-1351. Gravity is the trusted vector; the magnetic field only turns about it.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

import numpy as np

from analysis.errors import AttitudeError, TooFewReadingsError
from analysis.orient.vectors import DOWN, axis_angle_deg, lower_hemisphere, unit

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.north import MagneticField
    from analysis.orient.vectors import Floats

STANDARD_GRAVITY = 9.80665  # m/s², by definition (3rd CGPM, 1901)
# The field at the Earth's surface lies within these, uT (WMM2025 at zero height: about 22 to 67, computed).
WEAKEST_FIELD_uT, STRONGEST_FIELD_uT = 21.0, 69.0
# 99.97% of two-dimensional normal scatter lies within 4 standard deviations: exp(-4²/2) = 0.0003.
REJECT_BEYOND_SD = 4.0
# Wider for the first pass, whose standard deviations come from medians and are loose.
SPIKE_SD = 4.5
MAD_TO_SD = 1.4826  # for normal scatter
SCATTER_FLOOR_deg = 0.02  # sensors count in steps; scatter below this is not believed
# Reading straight from few samples, one cannot tell a spike from scatter.
FEWEST_TO_REJECT = 6
# Field along gravity closer than this, in degrees, gives no north.
VERTICAL_FIELD_deg = 2.0
_LEAST_SINE = math.sin(math.radians(VERTICAL_FIELD_deg))


class Laid(StrEnum):
    """How the tablet is laid, which says what axis of it is read."""

    ON_PLANE = "on a plane"
    ALONG_Y = "along a line, side edges"
    ALONG_X = "along a line, top edge"

    @property
    def device_axis(self) -> Floats:
        """Axis read, shape (3,), in the device frame."""
        column = {"on a plane": 2, "along a line, side edges": 1, "along a line, top edge": 0}[self]
        axis: Floats = np.eye(3)[column]
        return axis


@dataclass(frozen=True, slots=True, eq=False)
class AxisMean:
    """Robust mean of sampled axes.

    `vector` is a downward unit vector, shape (3,), north, east, down. `scatter_deg` is the root mean square
    angle of the samples from it, outliers left out; `standard_error_deg` is that of the mean for samples that
    are independent.
    """

    vector: Floats
    scatter_deg: float
    samples: int
    outliers: int

    @property
    def standard_error_deg(self) -> float:
        """Root mean square error of the mean direction, degrees, from the scatter alone."""
        return self.scatter_deg / math.sqrt(self.samples)


@dataclass(frozen=True, slots=True)
class FieldCheck:
    """The magnetic field felt against the one expected: iron near, or a compass to calibrate.

    `expected` is False where no model field was given; then only the strength is held against what the Earth
    has anywhere, and `fits` True means no more than that. Strength in uT, inclination in degrees down.
    """

    strength_uT: float  # noqa: N815 (a unit keeps its case)
    inclination_deg: float
    strength_off_share: float | None
    inclination_off_deg: float | None
    fits: bool
    expected: bool
    message: str


def specific_force_from_ios(acceleration_g: npt.ArrayLike) -> Floats:
    """Specific force, m/s², shape (..., 3), from iOS's acceleration in g (which points down at rest)."""
    return np.asarray(acceleration_g, dtype=float) * -STANDARD_GRAVITY + 0.0


def triad(
    first_device: npt.ArrayLike,
    second_device: npt.ArrayLike,
    first_world: npt.ArrayLike,
    second_world: npt.ArrayLike,
) -> Floats:
    """Rotation, shape (..., 3, 3), device to world, from two directions seen in both frames.

    Black (1964). The first is matched exactly; the second only fixes the turn about it. Vectors have shape
    (..., 3) and any length but zero. Raises AttitudeError where the two are parallel.
    """
    device = _triad_base(first_device, second_device)
    world = _triad_base(first_world, second_world)
    return np.asarray(np.swapaxes(world, -1, -2) @ device, dtype=float)


def device_to_magnetic(specific_force: npt.ArrayLike, magnetic_field: npt.ArrayLike) -> Floats:
    """Rotation, shape (..., 3, 3), device to magnetic north, east, down, from samples of shape (..., 3).

    Raises AttitudeError where a vector is zero or the field is parallel to gravity.
    """
    # Any world vector in the vertical plane of magnetic north does for the field: its dip is not used.
    return triad(specific_force, magnetic_field, -DOWN, [1.0, 0.0, 0.0])


def usable_samples(specific_force: npt.ArrayLike, magnetic_field: npt.ArrayLike) -> npt.NDArray[np.bool_]:
    """Which samples, shape (n, 3), give a rotation: finite, not zero, field not along gravity; (n,)."""
    force, field = np.asarray(specific_force, dtype=float), np.asarray(magnetic_field, dtype=float)
    with np.errstate(invalid="ignore", over="ignore"):
        across = np.linalg.norm(np.cross(force, field), axis=-1)
        lengths = np.linalg.norm(force, axis=-1) * np.linalg.norm(field, axis=-1)
        # Written so that a NaN is not usable.
        return np.asarray((lengths > 0.0) & np.isfinite(lengths) & (across >= _LEAST_SINE * lengths))


def sampled_axes(specific_force: npt.ArrayLike, magnetic_field: npt.ArrayLike, laid: Laid) -> Floats:
    """Axes read, shape (..., 3), in magnetic north, east, down: poles of planes, or lines."""
    return np.asarray(device_to_magnetic(specific_force, magnetic_field) @ laid.device_axis, dtype=float)


def screen_faces_down(specific_force: npt.ArrayLike) -> bool:
    """Whether the screen looks down, from samples of shape (..., 3): the tablet is held under the surface."""
    force = np.atleast_2d(np.asarray(specific_force, dtype=float))
    return bool(np.median(force[:, 2]) < 0.0)


def robust_axis_mean(axes: npt.ArrayLike) -> AxisMean:
    """Mean of sampled axes, shape (n, 3), not drawn off by spikes; raises TooFewReadingsError for n < 2.

    It starts from the sampled axis of least median distance to the rest. Scatter is judged along the
    horizontal and the vertical (a magnetometer's noise turns a pole, an accelerometer's tips it), first by
    the median absolute deviation, then by the standard deviation of the samples kept; those outside the
    ellipse are left out.
    """
    samples = lower_hemisphere(unit(axes))
    if samples.ndim != 2 or len(samples) < 2:
        raise TooFewReadingsError(
            f"{np.atleast_2d(samples).shape[0]} sample has no scatter", where="samples", expected="2 or more"
        )
    kept = np.ones(len(samples), dtype=bool)
    if len(samples) >= FEWEST_TO_REJECT:
        away = _tangent_deg(samples, _central_axis(samples))
        away = away - np.median(away, axis=0)
        # Median deviations of few samples run small (Croux & Rousseeuw 1992, from memory).
        sd = MAD_TO_SD * np.median(np.abs(away), axis=0) * len(samples) / (len(samples) - 0.8)
        kept = _within(away, sd, SPIKE_SD)
        away = _tangent_deg(samples, _principal_axis(samples[kept]))
        kept = _within(away, np.sqrt(np.mean(away[kept] ** 2, axis=0)), REJECT_BEYOND_SD)
    mean = _principal_axis(samples[kept])
    away = _tangent_deg(samples[kept], mean)
    scatter = math.sqrt(float(np.sum(away**2)) / (len(away) - 1))
    return AxisMean(lower_hemisphere(mean), scatter, len(away), int(len(samples) - len(away)))


def moving(
    specific_force: npt.ArrayLike, *, off_gravity: float = 0.5, jitter: float = 0.25, spikes: float = 0.3
) -> bool:
    """Whether the tablet moved while samples, shape (n, 3) in m/s², were taken.

    At rest the length of the specific force is gravity. The tablet moved where the median length is off
    gravity by more than `off_gravity` m/s², or more than the share `spikes` of the lengths is off their
    median by more than `jitter` m/s². (Tolerances: common practice, no source; sensors err by a few
    hundredths of g.)
    """
    force = np.atleast_2d(np.asarray(specific_force, dtype=float))
    if len(force) == 0:
        return False
    length = np.linalg.norm(force, axis=1)
    middle = float(np.median(length))
    if abs(middle - STANDARD_GRAVITY) > off_gravity:
        return True
    return float(np.mean(np.abs(length - middle) > jitter)) > spikes


def drifted(axes: npt.ArrayLike, *, limit_deg: float = 2.0) -> bool:
    """Whether axes, shape (n, 3), turned slowly: first and last third apart by the limit and by 4 errors."""
    samples = np.asarray(axes, dtype=float)
    third = len(samples) // 3
    if third < 3:
        return False
    first, last = robust_axis_mean(samples[:third]), robust_axis_mean(samples[-third:])
    allowed = max(limit_deg, 4.0 * math.hypot(first.standard_error_deg, last.standard_error_deg))
    return bool(axis_angle_deg(first.vector, last.vector) > allowed)


def check_field(
    specific_force: npt.ArrayLike,
    magnetic_field: npt.ArrayLike,
    expected: MagneticField | None,
    *,
    strength_share: float = 0.15,
    inclination_limit_deg: float = 6.0,
) -> FieldCheck:
    """Hold the field felt, samples of shape (n, 3) in uT, against the model's strength and inclination.

    A lump of iron or a compass out of calibration changes one or both. (Limits: common practice, no source.)
    """
    up = unit(np.median(np.atleast_2d(np.asarray(specific_force, dtype=float)), axis=0))
    field = np.median(np.atleast_2d(np.asarray(magnetic_field, dtype=float)), axis=0)
    strength = float(np.linalg.norm(field))
    inclination = math.degrees(math.asin(max(-1.0, min(1.0, float(-(unit(field) @ up))))))
    if expected is None:
        fits = WEAKEST_FIELD_uT <= strength <= STRONGEST_FIELD_uT
        text = (
            "the field is not checked: no position"
            if fits
            else _iron(f"{strength:.0f} µT is no Earth's field")
        )
        return FieldCheck(strength, inclination, None, None, fits, expected=False, message=text)
    model_uT = expected.strength_nT / 1000.0
    share = strength / model_uT - 1.0
    tilt = inclination - expected.inclination_deg
    faults = []
    if abs(share) > strength_share:
        faults.append(f"{strength:.0f} µT where {model_uT:.0f} is expected")
    if abs(tilt) > inclination_limit_deg:
        faults.append(f"field dips {inclination:.0f}° where {expected.inclination_deg:.0f}° is expected")
    text = _iron("; ".join(faults)) if faults else "field as expected"
    return FieldCheck(strength, inclination, share, tilt, not faults, expected=True, message=text)


def _iron(what: str) -> str:
    return f"iron near, or calibrate the compass: {what}"


def _triad_base(first: npt.ArrayLike, second: npt.ArrayLike) -> Floats:
    """Rows of an orthonormal base, shape (..., 3, 3): along the first, across both, and completing."""
    one, other = np.broadcast_arrays(unit(first), unit(second))
    across = np.cross(one, other)
    length = np.linalg.norm(across, axis=-1, keepdims=True)
    if np.any(length < _LEAST_SINE):
        raise AttitudeError(
            "the magnetic field runs along gravity, so it shows no north",
            where="sensors",
            expected="two different directions",
            mend="Move away from iron; near the magnetic poles use a sun compass or a map.",
        )
    across = across / length
    return np.stack([one, across, np.cross(one, across)], axis=-2)


def _principal_axis(samples: Floats) -> Floats:
    _, axes = np.linalg.eigh(samples.T @ samples)
    return np.asarray(axes[:, -1], dtype=float)


def _central_axis(samples: Floats) -> Floats:
    """Axis, of at most 60 of the samples, with the least median sine to all of them."""
    tried = samples[:: max(1, len(samples) // 60)]
    closeness = np.median(np.abs(samples @ tried.T), axis=0)
    return np.asarray(tried[int(np.argmax(closeness))], dtype=float)


def _tangent_deg(samples: Floats, mean: Floats) -> Floats:
    """Degrees, (n, 2), that samples, (n, 3), lie off a mean axis: along the horizontal, and up or down."""
    flat = np.cross(DOWN, mean)
    length = float(np.linalg.norm(flat))
    flat = flat / length if length > 1e-9 else np.array([0.0, 1.0, 0.0])
    steep = np.cross(mean, flat)
    along = samples @ mean
    sign = np.where(along < 0.0, -1.0, 1.0)[:, np.newaxis]
    across = sign * np.stack([samples @ flat, samples @ steep], axis=1)
    sine = np.linalg.norm(across, axis=1)
    angle = np.degrees(np.arctan2(sine, np.abs(along)))
    stretch = np.divide(angle, sine, out=np.zeros_like(sine), where=sine > 0.0)
    return np.asarray(across * stretch[:, np.newaxis], dtype=float)


def _within(away_deg: Floats, sd_deg: Floats, limit: float) -> npt.NDArray[np.bool_]:
    """Which places (n, 2) lie within an ellipse of `limit` standard deviations; never fewer than half."""
    sd = np.maximum(sd_deg, SCATTER_FLOOR_deg)
    inside = np.asarray(np.sum((away_deg / sd) ** 2, axis=1) <= limit**2)
    return inside if np.count_nonzero(inside) * 2 >= len(inside) else np.ones(len(inside), dtype=bool)
