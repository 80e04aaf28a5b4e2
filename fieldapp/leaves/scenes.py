"""From what the presenter tells to what the pictures draw. Plain values on both sides, no Kivy."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from analysis.fold.words import angle_line
from analysis.orient.features import Feature
from analysis.orient.notation import azimuth_text, inclination_text
from fieldapp.drawing.scene import (
    Ellipse,
    FunnelScene,
    Mean,
    NetScene,
    PlanOutcrop,
    PlanPlane,
    PlanScene,
    Points,
    no_vectors,
)
from fieldapp.settings import PlaneNotation
from fieldapp.wording import counted

if TYPE_CHECKING:
    from analysis.fold.records import AxisEstimate, FoldCheck
    from analysis.orient.attitudes import Line, Plane
    from fieldapp.states import FunnelState, NetState, PlanState


def line_text(line: Line) -> str:
    """A line as trend/plunge, whole degrees."""
    return f"{azimuth_text(line.trend_deg)}/{inclination_text(line.plunge_deg)}"


def plane_text(plane: Plane, notation: PlaneNotation) -> str:
    """A plane in the notation of the settings, whole degrees."""
    azimuth = plane.strike_deg if notation is PlaneNotation.STRIKE_DIP else plane.dip_direction_deg
    return f"{azimuth_text(azimuth)}/{inclination_text(plane.dip_deg)}"


def _mean(estimate: AxisEstimate | None, label: str) -> Mean | None:
    if estimate is None:
        return None
    ellipse = None
    if estimate.ellipse is not None:
        e = estimate.ellipse
        ellipse = Ellipse(e.major_deg, e.minor_deg, e.major_axis, e.minor_axis)
    return Mean(estimate.vector, label, ellipse)


def net_scene(check: FoldCheck, net: NetState, outcrop: str, chosen: str = "") -> NetScene:
    """What the net draws."""
    points = {
        feature: Points(
            np.asarray(some.vectors).reshape(-1, 3),
            some.reading_ids,
            np.array([name == outcrop for name in some.outcrops], dtype=bool),
        )
        for feature, some in net.points.items()
    }
    bedding = net.points.get(Feature.BEDDING)
    girdle = check.hinge is not None and bedding is not None and len(bedding.reading_ids) >= 3
    return NetScene(
        points=points,
        hinge=_mean(check.hinge, "hinge"),
        intersection=_mean(
            None if check.intersection is None else check.intersection.axis, "mean intersection"
        ),
        trail=np.asarray(net.trail).reshape(-1, 3) if len(net.trail) else no_vectors(),
        cleavage=_mean(check.cleavage, "mean cleavage"),
        girdle_pole=check.hinge.vector if girdle else None,
        chosen_key=chosen,
    )


def _or_nan(value: float | None) -> float:
    return np.nan if value is None else value


def funnel_scene(funnel: FunnelState, why_empty: str = "") -> FunnelScene:
    """What the funnel draws; `why_empty` stands there until there is an interval."""
    points = funnel.points
    ahead = funnel.ahead
    return FunnelScene(
        counts=np.array([point.readings for point in points], dtype=float),
        delta_deg=np.array([_or_nan(point.delta_deg) for point in points]),
        low_deg=np.array([_or_nan(point.low_deg) for point in points]),
        high_deg=np.array([_or_nan(point.high_deg) for point in points]),
        margin_deg=funnel.margin_deg,
        forecast_counts=np.array([point.readings for point in ahead], dtype=float),
        forecast_low_deg=np.array([point.low_deg for point in ahead]),
        forecast_high_deg=np.array([point.high_deg for point in ahead]),
        settles_at=None if funnel.settles_at is None else float(funnel.settles_at),
        why_empty=why_empty or "The funnel starts when bedding and cleavage have been read.",
    )


def plan_scene(plan: PlanState) -> PlanScene:
    """What the plan draws."""
    outcrops = []
    for outcrop in plan.outcrops:
        planes = [
            PlanPlane(feature, *attitude, overturned)
            for feature, attitude, overturned in (
                (Feature.BEDDING, outcrop.bedding, outcrop.overturned),
                (Feature.CLEAVAGE, outcrop.cleavage, False),
            )
            if attitude is not None
        ]
        outcrops.append(
            PlanOutcrop(outcrop.name, outcrop.east_m, outcrop.north_m, outcrop.here, tuple(planes))
        )
    return PlanScene(outcrops=tuple(outcrops), hinge=plan.hinge)


def mean_lines(check: FoldCheck, name: str) -> tuple[str, tuple[str, ...]]:
    """Title and particulars of a mean that was touched on the net: "hinge" or "mean intersection"."""
    if name == "hinge":
        estimate = check.hinge
        source = "" if estimate is None else f"from {estimate.source}"
    else:
        estimate = None if check.intersection is None else check.intersection.axis
        source = intersection_source(check)
    if estimate is None:
        return name.capitalize(), ()
    if estimate.ellipse is None:
        ellipse = "no confidence ellipse yet: too few readings"
    else:
        e = estimate.ellipse
        ellipse = (
            f"{check.settings.confidence:.0%} ellipse: half axes {e.major_deg:.1f}° and {e.minor_deg:.1f}°"
        )
    return f"{name.capitalize()} {line_text(estimate.line)}", (source, ellipse)


def intersection_source(check: FoldCheck) -> str:
    """How many lines the mean intersection comes from."""
    if check.intersection is None:
        return f"{check.readings.intersection} read"
    read, computed = check.intersection.measured, check.intersection.computed
    if not computed:
        return f"from {read} lines"
    return f"{read} read, {computed} computed" if read else f"from {computed} computed"


def next_words(check: FoldCheck) -> tuple[str, str]:
    """The next best reading: a sentence, and a second one with the forecast."""
    advice, more = check.next_reading, check.more_readings
    if advice is None:
        return "", ""
    where = f", {advice.where}" if advice.where else ""
    first = f"{advice.feature.value.capitalize()}{where}"
    if more is None or not more.total:
        return first, ""
    names = ("bedding", "cleavage", "intersection", "hinge")
    split = ", ".join(f"{getattr(more, name)} {name}" for name in names if getattr(more, name))
    spread = f" ({more.low} to {more.high})" if more.low != more.high else ""
    return first, f"about {more.total} more{spread}: {split}"


def outcrop_words(whole: FoldCheck, here: FoldCheck, outcrop: str, notation: PlaneNotation) -> str:
    """The outcrop's own axes, and its transection with its interval or what is missing; '' where it is the whole fold.

    `whole` is the check of the fold, `here` that of the outcrop's readings alone. No verdict: that is the fold's.
    """
    counts = here.readings
    if whole.readings.outcrops < 2:
        return ""
    name = outcrop or "unnamed"
    read = sum(counts.of(feature) for feature in Feature)
    if not read:
        return f"{name}: nothing read yet."
    axes = []
    if here.hinge is not None:
        axes.append(f"hinge {line_text(here.hinge.line)}")
    if here.cleavage is not None:
        axes.append(f"cleavage {plane_text(here.cleavage.plane, notation)}")
    if here.intersection is not None:
        axes.append(f"intersection {line_text(here.intersection.axis.line)}")
    lines = [f"{name}, {read} read" + (f": {', '.join(axes)}" if axes else "")]
    if angle := angle_line(here):
        lines.append(angle)
    if not angle or here.blocked:
        lines.extend(here.because)
    return "\n".join(lines)


def unplaced_words(plan: PlanState, room: int) -> str:
    """The outcrops that the plan cannot show, in so many characters; '' where it shows all, or none and says so."""
    if not plan.outcrops or not plan.unplaced:
        return ""
    names = [name or "unnamed" for name in plan.unplaced]
    for shown in range(min(len(names), room), 0, -1):
        more = len(names) - shown
        text = f"No position: {', '.join(names[:shown])}{f' and {more} more' if more else ''}"
        if len(text) <= room:
            return text
    return f"No position: {counted(len(names), 'outcrop')}"


def limb_words(check: FoldCheck, notation: PlaneNotation) -> str:
    """Limb against limb: attitude and count of each, the intersection on it, and the angle between the limbs."""
    if check.limbs is None:
        return ""
    lines = {line.limb: line for line in check.limb_lines}
    words = []
    for limb in check.limbs.both:
        text = f"{limb.name}: {plane_text(limb.plane, notation)}, {limb.count} read"
        line = lines.get(limb.name)
        if line is not None:
            text += f"; meets the cleavage in {line_text(line.computed)}"
            if line.measured is not None:
                text += f", measured {line_text(line.measured)}"
        words.append(text)
    return "\n".join([*words, f"interlimb angle {check.limbs.interlimb_deg:.0f}°"])
