"""Checks of one entry before it is kept: each warns in one sentence and may offer a mend; none blocks.

Every function takes plain values and returns an EntryWarning or None. `check_plane` and `check_line` run the
checks that fit what is known. A reading kept against a warning carries the name of the check
(`EntryCheck.value`) in its record. Ranges are no matter of warnings: `Plane` and `Line` refuse them.

Scatters are standard deviations in degrees of a direction on the sphere, per direction (Cruden & Charlesworth
1976): 3 degrees is taken for one careful compass reading (common practice, no source).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING, Self

import numpy as np

from analysis.orient import righthand, vectors
from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature
from analysis.orient.notation import Notation, write

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

READING_SD_DEG = 3.0
FLAT_DIP_DEG = 10.0
WHOLE_DEGREE = 1.0  # plunge and dip are both read to the whole degree
SIGMAS = 3.0
# The chi-square value of two degrees of freedom that is passed as often as three sigmas: -2 ln(0.0027).
PAIR_LIMIT = -2.0 * math.log(0.0026998)
FEWEST_FOR_OUTLIER = 6  # METHOD: nothing is concluded from fewer readings in a stream
OUTLIER_SIGMAS = 3.5
OUTLIER_PAIR_LIMIT = -2.0 * math.log(0.001)
NO_GIRDLE_CHANCE = 0.001
PRIOR_READINGS = 4.0
PRIOR_SCATTER_DEG = 6.0


class EntryCheck(StrEnum):
    """The checks; the value is the word stored with a reading that was kept against one.

    `words` say it beside such a reading in a list.
    """

    words: str

    REVERSED_STRIKE = "reversed-strike", "strike reversed?"
    QUADRANT_MISFIT = "quadrant-misfit", "quadrant does not fit the strike"
    FLAT_PLANE = "flat-plane", "nearly flat, strike loose"
    LINE_OFF_PLANE = "line-off-plane", "line off its plane"
    PLUNGE_OVER_DIP = "plunge-over-dip", "plunge exceeds dip"
    COMPUTED_OFF_MEASURED = "computed-off-measured", "measured and computed line differ"
    OUTLIER = "outlier", "far off the others"

    def __new__(cls, value: str, words: str) -> Self:
        """Make a check of its stored word and of the words for people."""
        check = str.__new__(cls, value)
        check._value_ = value
        check.words = words
        return check

    @classmethod
    def words_for(cls, name: str) -> str:
        """Give the words of the check of this name; the name itself for one of a later version, or somebody's own."""
        return next((check.words for check in cls if check.value == name), name)


@dataclass(frozen=True, slots=True)
class EntryWarning:
    """What a check found: its name, one sentence for the screen, and the attitude it offers instead."""

    check: EntryCheck
    message: str
    mend: Plane | Line | None = None


def check_plane(
    plane: Plane,
    feature: Feature,
    *,
    notation: Notation = Notation.STRIKE_DIP,
    quadrant: str | None = None,
    neighbours: npt.ArrayLike | None = None,
    confirmed: npt.ArrayLike | None = None,
    fold_poles: npt.ArrayLike | None = None,
    sd_deg: float = READING_SD_DEG,
) -> tuple[EntryWarning, ...]:
    """Run every check on a plane that the facts at hand allow; the ones to act on come first.

    Parameters
    ----------
    plane, feature
        The entry. `notation` is used to write the mend.
    quadrant
        Dip quadrant tapped or typed. With one, the neighbours are not asked about the strike.
    neighbours, confirmed
        Poles (n, 3) of this feature at this outcrop, and whether each one's side is known: see
        `analysis.orient.righthand.reversed_among_neighbours`.
    fold_poles
        Poles (n, 3) of this feature in the whole fold, for the outlier check.
    sd_deg
        Scatter of a pole, degrees.

    """
    if quadrant is not None:
        found = check_quadrant(plane, quadrant, notation=notation)
    elif neighbours is not None:
        found = check_neighbours(plane, neighbours, confirmed=confirmed, notation=notation)
    else:
        found = None
    warnings = [found, check_flat(plane, sd_deg=sd_deg)]
    if fold_poles is not None and (found is None or found.mend is None):
        warnings.append(check_outlier(plane.pole, fold_poles, feature))
    return tuple(warning for warning in warnings if warning is not None)


def check_line(
    line: Line,
    feature: Feature,
    *,
    notation: Notation = Notation.TREND_PLUNGE,
    bedding: Plane | None = None,
    cleavage: Plane | None = None,
    fold_lines: npt.ArrayLike | None = None,
    sd_deg: float = READING_SD_DEG,
) -> tuple[EntryWarning, ...]:
    """Run every check on a line that the facts at hand allow.

    `bedding` and `cleavage` are the planes the line was read on, where they were read: an intersection lies
    in both, a hinge line in its own bed. `fold_lines` are vectors (n, 3) of this feature in the whole fold.
    """
    planes = [("bedding", bedding)]
    if feature is Feature.INTERSECTION:
        planes.append(("cleavage", cleavage))
    warnings: list[EntryWarning | None] = []
    for name, plane in planes:
        if plane is not None:
            off = check_line_in_plane(
                line, plane, name, notation=notation, line_sd_deg=sd_deg, pole_sd_deg=sd_deg
            )
            # A line that is off its plane is said to be so once.
            warnings.append(off or check_plunge(line, plane, name))
    if feature is Feature.INTERSECTION and bedding is not None and cleavage is not None:
        warnings.append(check_computed(line, bedding, cleavage, notation=notation, sd_deg=sd_deg))
    if fold_lines is not None:
        warnings.append(check_outlier(line.vector, fold_lines, feature))
    return tuple(warning for warning in warnings if warning is not None)


def _written(attitude: Plane | Line, notation: Notation) -> str:
    """The attitude as the user writes it; lines entered by their pitch are offered by trend and plunge."""
    pitched = isinstance(attitude, Line) and notation not in (Notation.TREND_PLUNGE, Notation.PLUNGE_TREND)
    return write(attitude, Notation.TREND_PLUNGE if pitched else notation)


def check_quadrant(
    plane: Plane, quadrant: str, *, notation: Notation = Notation.STRIKE_DIP
) -> EntryWarning | None:
    """Right-hand-rule check against a dip quadrant; a reversed strike is offered the other way round."""
    fit = righthand.quadrant_fit(plane, quadrant)
    if fit is righthand.QuadrantFit.FITS:
        return None
    written, octant = _written(plane, notation), righthand.checked_octant(quadrant)
    by_rule = righthand.octant_of(plane.dip_direction_deg)
    if fit is righthand.QuadrantFit.REVERSED:
        mend = plane.reversed
        return EntryWarning(
            EntryCheck.REVERSED_STRIKE,
            f"{written} dips {by_rule}, not {octant}: use {_written(mend, notation)}?",
            mend,
        )
    return EntryWarning(
        EntryCheck.QUADRANT_MISFIT,
        f"{written} dips {by_rule}; {octant} lies along its strike. Read it again?",
    )


def check_neighbours(
    plane: Plane,
    neighbours: npt.ArrayLike,
    *,
    confirmed: npt.ArrayLike | None = None,
    notation: Notation = Notation.STRIKE_DIP,
) -> EntryWarning | None:
    """Reversed strike seen by the other readings of the outcrop, where no dip quadrant was given."""
    mend = righthand.reversed_among_neighbours(plane, neighbours, confirmed=confirmed)
    if mend is None:
        return None
    return EntryWarning(
        EntryCheck.REVERSED_STRIKE,
        f"The others here dip {righthand.octant_of(mend.dip_direction_deg)}: use {_written(mend, notation)}?",
        mend,
    )


def check_flat(plane: Plane, *, sd_deg: float = READING_SD_DEG) -> EntryWarning | None:
    """Say how loose the strike of a plane with a dip below 10 degrees is: sd(strike) = sd(pole)/sin(dip)."""
    if plane.dip_deg >= FLAT_DIP_DEG:
        return None
    sd_strike = strike_sd_deg(plane.dip_deg, sd_deg)
    if sd_strike > 90.0:
        return EntryWarning(EntryCheck.FLAT_PLANE, "Nearly horizontal: the strike means nothing.")
    return EntryWarning(EntryCheck.FLAT_PLANE, f"Nearly flat: the strike is good to ±{sd_strike:.0f}° only.")


def strike_sd_deg(dip_deg: float, pole_sd_deg: float = READING_SD_DEG) -> float:
    """Scatter of the strike, degrees, of planes whose poles scatter by pole_sd_deg; infinite at dip 0.

    sd(strike) = sd(pole)/sin(dip) (Cruden & Charlesworth 1976).
    """
    sine = math.sin(math.radians(dip_deg))
    return pole_sd_deg / sine if sine > 0.0 else math.inf


def check_line_in_plane(
    line: Line,
    plane: Plane,
    plane_name: str,
    *,
    notation: Notation = Notation.TREND_PLUNGE,
    line_sd_deg: float = READING_SD_DEG,
    pole_sd_deg: float = READING_SD_DEG,
) -> EntryWarning | None:
    """Ask about a line that lies off a plane it should lie in: asin|l.n| > 3 sqrt(sd_l^2 + sd_n^2).

    Where the line read from the other end of the compass would lie in the plane, that is the mend.
    """
    limit = SIGMAS * math.hypot(line_sd_deg, pole_sd_deg)
    off = off_plane_deg(line, plane)
    if off <= limit:
        return None
    turned = Line(float(vectors.wrap_azimuth_deg(line.trend_deg + 180.0)), line.plunge_deg)
    message = f"The line lies {off:.0f}° off the {plane_name}"
    if off_plane_deg(turned, plane) <= limit:
        return EntryWarning(
            EntryCheck.LINE_OFF_PLANE, f"{message}: use {_written(turned, notation)}?", turned
        )
    return EntryWarning(EntryCheck.LINE_OFF_PLANE, f"{message}. Read it again?")


def off_plane_deg(line: Line, plane: Plane) -> float:
    """Angle between a line and a plane, 0 to 90 degrees."""
    return 90.0 - float(vectors.axis_angle_deg(line.vector, plane.pole))


def check_plunge(line: Line, plane: Plane, plane_name: str) -> EntryWarning | None:
    """Say that a line plunges more than the plane it lies in dips, beyond the reading of whole degrees."""
    if line.plunge_deg <= plane.dip_deg + WHOLE_DEGREE:
        return None
    return EntryWarning(
        EntryCheck.PLUNGE_OVER_DIP,
        f"Plunge {line.plunge_deg:.0f}° cannot exceed the dip {plane.dip_deg:.0f}° of the {plane_name}.",
    )


def check_computed(
    line: Line,
    bedding: Plane,
    cleavage: Plane,
    *,
    notation: Notation = Notation.TREND_PLUNGE,
    sd_deg: float = READING_SD_DEG,
) -> EntryWarning | None:
    """Compare a measured intersection with the line in which bedding and cleavage meet.

    With a dihedral angle w and pole scatter s the computed line scatters by s/(sqrt(2) sin(w/2)) towards one
    direction and s/(sqrt(2) cos(w/2)) towards the other (error propagation through the cross product); the
    scatter of the measured line adds to both. Planes too nearly parallel to meet in a line say nothing.
    """
    one, two = bedding.pole, cleavage.pole
    two = two if float(one @ two) >= 0.0 else -two
    crossed = np.cross(one, two)
    if float(np.linalg.norm(crossed)) < math.sin(math.radians(sd_deg)):
        return None
    along = vectors.unit(crossed)
    half = math.radians(bedding.angle_deg(cleavage) / 2.0)
    spread = (
        (vectors.unit(one - two), sd_deg / (math.sqrt(2.0) * math.sin(half))),
        (vectors.unit(one + two), sd_deg / (math.sqrt(2.0) * math.cos(half))),
    )
    measured = line.vector if float(line.vector @ along) >= 0.0 else -line.vector
    off = float(vectors.axis_angle_deg(measured, along))
    aside = measured - along * float(measured @ along)
    length = float(np.linalg.norm(aside))
    if length == 0.0:
        return None
    shifts = ((off * float(aside @ axis) / length, math.hypot(sd, sd_deg)) for axis, sd in spread)
    if sum((shift / sd) ** 2 for shift, sd in shifts) <= PAIR_LIMIT:
        return None
    computed = Line.from_vector(along)
    return EntryWarning(
        EntryCheck.COMPUTED_OFF_MEASURED,
        f"The line lies {off:.0f}° from {_written(computed, notation)}, where bedding and cleavage meet.",
    )


def check_outlier(axis: Floats, others: npt.ArrayLike, feature: Feature) -> EntryWarning | None:
    """Ask for a second reading where one lies far from the running fit of its feature in the fold.

    Bedding is measured by the angle of its pole from the girdle of `others` (n, 3), cleavage and lines by
    their distance from the mean axis, in scatters of a fit from which distant readings are trimmed. The
    uncertainty of the fit is added, so that the first readings of a new limb are not taken for mistakes.
    Fewer than FEWEST_FOR_OUTLIER readings say nothing.
    """
    axes = np.asarray(others, dtype=float).reshape(-1, 3)
    if len(axes) < FEWEST_FOR_OUTLIER:
        return None
    off, is_far = _off_girdle(axis, axes) if feature is Feature.BEDDING else _off_cluster(axis, axes)
    if not is_far:
        return None
    where = {
        Feature.BEDDING: "off the girdle of the bedding",
        Feature.CLEAVAGE: "from the mean cleavage",
        Feature.INTERSECTION: "from the mean intersection",
        Feature.HINGE: "from the mean hinge line",
    }[feature]
    return EntryWarning(EntryCheck.OUTLIER, f"{off:.0f}° {where}: take a second reading?")


def _off_girdle(pole: Floats, poles: Floats) -> tuple[float, bool]:
    """Angle of a pole from the girdle of others, and whether that is far."""
    kept, prior = poles, math.radians(PRIOR_SCATTER_DEG) ** 2
    for _ in range(3):
        values, frame = np.linalg.eigh(kept.T @ kept / len(kept))
        squares = np.arcsin(np.clip(poles @ frame[:, 0], -1.0, 1.0)) ** 2
        # 0.4549 is the median of chi-square with one degree of freedom.
        seen = float(np.median(squares)) / 0.4549
        variance = (PRIOR_READINGS * prior + len(poles) * seen) / (PRIOR_READINGS + len(poles))
        kept = poles[squares <= OUTLIER_SIGMAS**2 * variance]
    # No girdle, no distance from it: the two smaller eigenvalues of a round cluster differ by chance alone.
    # For two normal directions the sphericity W to the power (n-2)/2 is uniform (Mauchly 1940, from memory).
    values = np.maximum(values, 0.0)  # equal readings leave a rounding error below zero
    sphericity = 4.0 * values[0] * values[1] / max((values[0] + values[1]) ** 2, 1e-300)
    if sphericity ** ((len(kept) - 2) / 2.0) > NO_GIRDLE_CHANCE:
        return 0.0, False
    # The girdle's axis wavers towards the other two principal axes by variance * value/(n gap^2), the gap
    # being the difference of eigenvalues (Tyler 1981, Prentice 1984, from memory).
    gaps = np.maximum(values[1:] - values[0], 1e-9)
    leverage = np.sum((pole @ frame[:, 1:]) ** 2 * values[1:] / gaps**2) / len(kept)
    off = math.asin(min(1.0, abs(float(pole @ frame[:, 0]))))
    return math.degrees(off), off > OUTLIER_SIGMAS * math.sqrt(variance * (1.0 + float(leverage)))


def _off_cluster(axis: Floats, axes: Floats) -> tuple[float, bool]:
    """Angle of an axis from the mean of others, and whether that is far for the shape of their scatter."""
    centre, _ = righthand.robust_centre(axes)
    kept = axes
    for _ in range(3):
        frame = np.linalg.svd(centre[np.newaxis, :])[2][1:]
        flat = _tangents(kept, centre, frame)
        prior = PRIOR_READINGS * math.radians(PRIOR_SCATTER_DEG) ** 2 * np.eye(2)
        inverse = np.linalg.inv((flat.T @ flat + prior) / (len(kept) + PRIOR_READINGS))
        place = _tangents(axis[np.newaxis, :], centre, frame)[0]
        distance = float(place @ inverse @ place) / (1.0 + 1.0 / len(kept))
        every = _tangents(axes, centre, frame)
        inside = np.einsum("ij,jk,ik->i", every, inverse, every) <= OUTLIER_PAIR_LIMIT
        if not np.any(inside):
            break
        kept = axes[inside]
        centre = np.linalg.eigh(kept.T @ kept)[1][:, -1]
    return float(np.degrees(np.linalg.norm(place))), distance > OUTLIER_PAIR_LIMIT


def _tangents(axes: Floats, centre: Floats, frame: Floats) -> Floats:
    """Places (n, 2) of axes about a centre, in radians of angle, on the flat frame (2, 3) across it."""
    cosines = axes @ centre
    aligned = np.where(cosines < 0.0, -1.0, 1.0)[:, np.newaxis] * axes
    flat = aligned @ frame.T
    sines = np.linalg.norm(flat, axis=1)
    angles = np.arctan2(sines, np.abs(cosines))
    return np.asarray(flat * (angles / np.maximum(sines, 1e-300))[:, np.newaxis], dtype=float)
