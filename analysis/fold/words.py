"""The check in plain sentences: what the verdict strip, the command and the report print."""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.fold.records import Verdict
from analysis.orient.features import Feature
from analysis.orient.forms import azimuth_text, inclination_text

if TYPE_CHECKING:
    from analysis.fold.records import AxisEstimate, FoldCheck, MoreReadings
    from analysis.orient.attitudes import Line, Plane

_PLURAL = {
    Feature.BEDDING: "bedding",
    Feature.CLEAVAGE: "cleavage",
    Feature.INTERSECTION: "intersection",
    Feature.HINGE: "hinge",
}


def degrees(value: float) -> str:
    """Write an angle to whole degrees, or to a tenth below ten, without a minus zero."""
    text = f"{abs(value):.1f}" if abs(value) < 9.95 else f"{abs(value):.0f}"
    return f"{text.removesuffix('.0')}°"


def plane_text(plane: Plane) -> str:
    """Write a plane as strike/dip by the right-hand rule, to whole degrees: '054/83'."""
    return f"{azimuth_text(plane.strike_deg)}/{inclination_text(plane.dip_deg)}"


def line_text(line: Line) -> str:
    """Write a line as trend/plunge, to whole degrees: '040/20'."""
    return f"{azimuth_text(line.trend_deg)}/{inclination_text(line.plunge_deg)}"


def ellipse_text(axis: AxisEstimate) -> str:
    """Write the half axes of an axis' ellipse to stand behind it: ' (±4° by ±2.8°)'; nothing where there is none."""
    if axis.ellipse is None:
        return ""
    return f" (±{degrees(axis.ellipse.major_deg)} by ±{degrees(axis.ellipse.minor_deg)})"


def counted(number: int, word: str) -> str:
    """Write a number with its word, in the plural where it is not one: '3 readings'."""
    return f"{number} {word}{'' if number == 1 else 's'}"


def turned(value: float, *, signed: bool = True) -> str:
    """Write a transection with its sense: '7° clockwise'."""
    if not signed or degrees(value) == "0°":
        return degrees(value)
    return f"{degrees(value)} {'clockwise' if value > 0 else 'anticlockwise'}"


def against_hinge(value: float, *, signed: bool = True) -> str:
    """Write where the cleavage lies: 'cleavage 7° clockwise of the hinge'."""
    if degrees(value) == "0°":
        return "cleavage along the hinge"
    return f"cleavage {turned(value, signed=signed)} {'of' if signed else 'off'} the hinge"


def between(low: float, high: float, *, signed: bool = True) -> str:
    """Write an interval of a transection: 'between 2° and 12° clockwise'."""
    if not signed:
        return f"between {degrees(max(low, 0.0))} and {degrees(high)}"
    if low * high > 0.0:
        near, far = sorted((abs(low), abs(high)))
        return f"between {degrees(near)} and {degrees(far)} {'clockwise' if low > 0 else 'anticlockwise'}"
    return f"between {turned(low)} and {turned(high)}"


def headline(check: FoldCheck) -> str:
    """Give the first line of the verdict strip: the state as a sentence."""
    delta = check.transection_deg
    if check.verdict is Verdict.TRANSECTED and delta is not None:
        if degrees(delta) == "0°":
            return "Transected, by less than 0.1°"
        return f"Transected: {against_hinge(delta, signed=check.sense != 'unsigned')}"
    if check.verdict is Verdict.AXIAL_PLANAR:
        return f"Axial planar within {degrees(check.settings.margin_deg)}"
    if check.verdict is Verdict.CANNOT_BE_SETTLED:
        return "Cannot be settled here"
    if check.more_readings is not None:
        return f"Keep reading: about {more(check.more_readings)} should settle it"
    return "Keep reading"


def figure_line(check: FoldCheck) -> str:
    """Give the second line of the verdict strip: the figure, and never without its interval."""
    if check.transection_deg is None or check.interval_deg is None:
        return check.because[0] if check.because else "No readings yet."
    if check.verdict is Verdict.TRANSECTED:  # the headline has the figure
        interval = between(*check.interval_deg, signed=check.sense != "unsigned")
        return f"{interval}, at {100.0 * check.settings.confidence:g}% confidence"
    return angle_line(check)


def angle_line(check: FoldCheck) -> str:
    """Give the angle, never without its interval: 'cleavage 7° clockwise of the hinge, between ...'; '' without one."""
    if check.transection_deg is None or check.interval_deg is None:
        return ""
    signed = check.sense != "unsigned"
    return f"{against_hinge(check.transection_deg, signed=signed)}, {between(*check.interval_deg, signed=signed)}"


def more(readings: MoreReadings) -> str:
    """Write further readings by feature: '6 more cleavage and 2 more bedding readings'."""
    parts = [(getattr(readings, feature.value), _PLURAL[feature]) for feature in Feature]
    wanted = sorted(((n, name) for n, name in parts if n > 0), reverse=True)
    text = " and ".join(f"{n} more {name}" for n, name in wanted)
    return f"{text} reading{'s' if sum(n for n, _ in wanted) != 1 else ''}"
