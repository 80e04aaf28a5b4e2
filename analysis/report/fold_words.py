"""What a report says of one fold: its verdict, its figures, limb against limb, its plan, its readings."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from analysis.fold.words import (
    against_hinge,
    between,
    counted,
    degrees,
    ellipse_text,
    figure_line,
    headline,
    line_text,
    more,
    plane_text,
    turned,
)
from analysis.orient.features import Feature
from analysis.orient.vectors import axis_angle_deg
from analysis.report.blocks import Column, Facts, Picture, Points, Row, Section, Table, Verdict, Words, cut
from analysis.report.campaign import outcrops_on_plan
from analysis.report.funnel import draw_funnel, settled_from
from analysis.report.inline import drawing_of
from analysis.report.limb_net import draw_limbs
from analysis.report.net import draw_net
from analysis.report.plan_sketch import draw_plan
from analysis.report.reading_rows import marker_titles, readings_table
from analysis.report.sheet import verdict_sign

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.fold.records import FoldCheck
    from analysis.report.blocks import Block
    from analysis.report.campaign import FoldPart

MARKERS_DRAWN: Final = 2000
"""Readings of a fold that are drawn on its net; of more, every so-manieth is."""
_OUTCROPS_DRAWN: Final = 60  # more outcrops than these leave no room for their symbols


def fold_section(part: FoldPart, anchor: str) -> Section:
    """Make the section of one fold."""
    check = part.check
    sign = tuple(verdict_sign(check))
    blocks: list[Block] = [Verdict(sign, headline(check), figure_line(check))]
    because = tuple(sentence for sentence in check.because if sentence != figure_line(check))
    if because:
        blocks.append(Points(because, title="Because"))
    if check.warnings:
        blocks.append(Points(check.warnings, title="Mind", boxed=True))
    # The drawings carry no name of their own here: the heading has it.
    nameless = check.changed(fold="")
    step = -(-len(part.table) // MARKERS_DRAWN)
    axes = {feature: axes[::step] for feature, axes in part.axes.items()} if step > 1 else part.axes
    titles = marker_titles(part) if step <= 1 else {}
    net = drawing_of(draw_net(nameless, axes), f"{anchor}-net", titles)
    caption = "Equal-area net, lower hemisphere: poles of planes, lines as read."
    if step > 1:
        caption += f" One reading in {step} is drawn; all are counted."
    blocks.append(Picture(net, caption, _net_seen(check)))
    blocks.append(Facts(tuple(_facts(check))))
    funnel = drawing_of(draw_funnel(part.history, nameless), f"{anchor}-funnel")
    caption = (
        f"The transection against the number of readings, with the {share(check.settings.confidence)} interval that"
        f" holds at every look, and the band of ±{degrees(check.settings.margin_deg)}."
    )
    if len(part.history) < len(part.table):
        caption += f" Looked at {len(part.history)} times on the way to {len(part.table)} readings."
    blocks.append(Picture(funnel, caption, _funnel_seen(part)))
    parts = [
        Section(f"{anchor}-limbs", "Limb against limb", tuple(_limbs(check, anchor))),
        Section(f"{anchor}-plan", "Plan sketch", tuple(_plan(part, anchor))),
        Section(f"{anchor}-readings", "Readings", (readings_table(part),)),
    ]
    return Section(anchor, part.name, tuple(blocks), tuple(parts), new_page=True)


def share(confidence: float) -> str:
    """Write a confidence: '95%'."""
    return f"{100.0 * confidence:g}%"


def _facts(check: FoldCheck) -> Iterator[tuple[str, str]]:
    signed = check.sense != "unsigned"
    counts = check.readings
    read = ", ".join(f"{counts.of(feature)} {feature}" for feature in Feature)
    yield "Readings", f"{read}; at {counted(counts.outcrops, 'outcrop')}"
    if check.hinge is not None:
        yield "Hinge", f"{line_text(check.hinge.line)}{ellipse_text(check.hinge)}, from {check.hinge.source}"
    if check.cleavage is not None:
        yield "Mean cleavage", f"{plane_text(check.cleavage.plane)}{ellipse_text(check.cleavage)}"
    if check.intersection is not None:
        mean = check.intersection
        numbers = f"{mean.measured} measured, {mean.computed} computed"
        yield "Mean intersection", f"{line_text(mean.axis.line)}{ellipse_text(mean.axis)}, {numbers}"
    if check.transection_deg is not None and check.interval_deg is not None:
        figure = against_hinge(check.transection_deg, signed=signed)
        yield "Transection", f"{figure}, {between(*check.interval_deg, signed=signed)}"
    if check.se_deg is not None and check.df is not None:
        yield "Standard error", f"{check.se_deg:.1f}° with {check.df:.0f} degrees of freedom"
    if check.fixed_interval_deg is not None:
        ordinary = between(*check.fixed_interval_deg, signed=signed)
        yield "Ordinary interval", f"{ordinary}: holds at one look only, and decides nothing here"
    if len(check.estimates) > 1 and check.interval_deg is not None:
        yield (
            "Side by side",
            "; ".join(
                f"from {one.source} {turned(one.delta_deg, signed=signed)} ± {degrees(one.se_deg)}"
                for one in check.estimates
            ),
        )
    if check.more_readings is not None:
        m = check.more_readings
        yield "Forecast", f"{more(m)}; likely between {m.low} and {m.high} in all"
    if check.next_reading is not None:
        yield "Read next", cut(f"{check.next_reading.feature}, {check.next_reading.where}")


def _net_seen(check: FoldCheck) -> str:
    counts = check.readings
    seen = [", ".join(f"{counts.of(feature)} {feature}" for feature in Feature) + " readings"]
    if check.hinge is not None:
        seen.append(f"hinge {line_text(check.hinge.line)}")
    if check.cleavage is not None:
        seen.append(f"mean cleavage {plane_text(check.cleavage.plane)}")
    if check.intersection is not None:
        seen.append(f"mean intersection {line_text(check.intersection.axis.line)}")
    return f"Equal-area net: {'; '.join(seen)}."


def _funnel_seen(part: FoldPart) -> str:
    text = "The transection and its interval against the number of readings"
    known = [point for point in part.history if point.low_deg is not None and point.high_deg is not None]
    if known:
        first, last = known[0], known[-1]
        wide = [(point.high_deg or 0.0) - (point.low_deg or 0.0) for point in (first, last)]
        text += f": {degrees(wide[0])} wide after {first.after} readings, {degrees(wide[1])} wide after {last.after}"
    since = settled_from(part.history)
    if since is not None:
        text += f"; {part.history[-1].verdict} from {since} readings on"
    return f"{text}."


def _limbs(check: FoldCheck, anchor: str) -> Iterator[Block]:
    if check.limbs is None:
        yield Words(
            "Both limbs are not told apart yet: bedding so far lies on one side of the fold, or is too little."
        )
        return
    lines = {line.limb: line for line in check.limb_lines}
    figure = draw_limbs(check)
    if figure is not None:
        caption = (
            "Where each limb meets the mean cleavage (diamonds), the mean of the lines measured on it (crosses), and"
            " the hinge (disc). In a transected fold the limbs' lines lie apart, on either side of the hinge."
        )
        seen = [f"on the {line.limb} {line_text(line.computed)}" for line in check.limb_lines]
        hinge = "" if check.hinge is None else f"; hinge {line_text(check.hinge.line)}"
        yield Picture(
            drawing_of(figure, f"{anchor}-limbs"),
            caption,
            f"Net of the two limbs. Intersections: {', '.join(seen)}{hinge}.",
        )
    columns = (
        Column("Limb", 24),
        Column("Mean bedding", 15, figures=True),
        Column("Readings", 11, figures=True),
        Column("Spread", 11, figures=True),
        Column("Intersection, computed", 19, figures=True),
        Column("Intersection, measured", 20, figures=True),
    )
    rows = []
    for limb in check.limbs.both:
        line = lines.get(limb.name)
        # Lines count for a limb only where their outcrop lies on that limb alone.
        measured = "none on it alone" if check.readings.intersection else "none"
        if line is not None and line.measured is not None:
            measured = f"{line_text(line.measured)} (n = {line.measured_count})"
        computed = "" if line is None else line_text(line.computed)
        name = limb.name[:1].upper() + limb.name[1:]
        cells = (name, plane_text(limb.plane), str(limb.count), degrees(limb.spread_deg), computed, measured)
        rows.append(Row(cells))
    text = (
        f"Interlimb angle {degrees(check.limbs.interlimb_deg)}; axial surface, the plane that halves it,"
        f" {plane_text(check.limbs.axial_surface)}."
    )
    if len(check.limb_lines) == 2:
        one, other = check.limb_lines
        apart = float(axis_angle_deg(one.computed.vector, other.computed.vector))
        text += f" The computed intersections of the two limbs lie {degrees(apart)} apart."
    yield Table(text, columns, tuple(rows))


def _plan(part: FoldPart, anchor: str) -> Iterator[Block]:
    shown, unplaced = outcrops_on_plan(part.table)
    if not shown:
        yield Words("No position was recorded with these readings, so there is no plan.")
        return
    drawn = shown[:_OUTCROPS_DRAWN]
    hinge = None if part.check.hinge is None else part.check.hinge.line
    figure = draw_plan(drawn, hinge=hinge)
    caption = "Outcrops to scale, north up, each with the middle of its bedding and cleavage. No base map."
    notes = []
    if len(drawn) < len(shown):
        notes.append(f"The first {len(drawn)} of {len(shown)} outcrops are drawn.")
    if unplaced:
        notes.append(cut(f"Without a position: {', '.join(unplaced)}."))
    names = cut(", ".join(outcrop.name for outcrop in drawn), 200)
    yield Picture(
        drawing_of(figure, f"{anchor}-plan"), caption, f"Plan of {len(drawn)} outcrops, north up: {names}."
    )
    if notes:
        yield Points(tuple(notes))
