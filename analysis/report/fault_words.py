"""What a report says of the fault: each explanation held against each fold, under the cautions that belong to it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.fold.words import turned
from analysis.report.blocks import Column, Picture, Points, Row, Section, Table, Words
from analysis.report.fault_figures import plane_figure
from analysis.report.inline import drawing_of
from analysis.strain.cautions import CAUTIONS
from analysis.strain.explanations import PARTITIONED
from analysis.strain.wording import headline, two_digits

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.report.blocks import Block
    from analysis.report.campaign import Campaign, FoldPart
    from analysis.strain.explanations import Explanation, FaultCheck

_FITS = {True: "yes", False: "no", None: "not known yet"}


def fault_section(campaign: Campaign) -> Section:
    """Make the section on the fault; the cautions stand first, ahead of any explanation."""
    blocks = (Words(campaign.fault_words), Points(CAUTIONS, title="Before any explanation", boxed=True))
    parts = tuple(
        Section(f"fault-{number}", part.name, tuple(_fold(part, number)))
        for number, part in enumerate(campaign.folds, start=1)
    )
    return Section("fault", "Beside the fault", blocks, parts, new_page=True)


def _fold(part: FoldPart, number: int) -> Iterator[Block]:
    check = part.fault
    if check is None:
        yield Words("No hinge yet, so there is nothing to hold against the fault.")
        return
    yield Points((headline(check), *check.because))
    if not check.explanations:
        return
    figure = plane_figure(check, confidence=part.check.settings.confidence)
    # The headline and the cautions that the figure carries when it stands alone are on the page already.
    for words in list(figure.texts):
        words.remove()
    caption = (
        "Fold-fault angle against transection: the curve or area that each explanation predicts, and what was found"
        " (cross) with its ellipse."
    )
    yield Picture(drawing_of(figure, f"fault-{number}"), caption, _seen(check))
    columns = (
        Column("Explanation", 30),
        Column("Predicted transection", 22, figures=True),
        Column("Shear strain", 14, figures=True),
        Column("Displacement", 18, figures=True),
        Column("Fits", 16),
    )
    rows = tuple(Row(_cells(one)) for one in check.explanations)
    yield Table(
        "What each explanation predicts and needs. One that fits is one of several that may.", columns, rows
    )


def _seen(check: FaultCheck) -> str:
    angle = (
        "" if check.fold_fault_angle_deg is None else f"fold-fault angle {check.fold_fault_angle_deg:.0f}°"
    )
    found = "" if check.transection_deg is None else f", transection {turned(check.transection_deg)}"
    fitting = [one.name for one in check.explanations if one.fits]
    return f"Plane of explanations: {angle}{found}; within reach: {', '.join(fitting) or 'none'}."


def _cells(one: Explanation) -> tuple[str, ...]:
    return (
        one.name[:1].upper() + one.name[1:],
        turned(one.predicted_transection_deg),
        _strain(one),
        "" if one.displacement_km is None else f"{two_digits(one.displacement_km)} km",
        _FITS[one.fits],
    )


def _strain(one: Explanation) -> str:
    if one.gamma is not None:
        return two_digits(one.gamma)
    return "none" if one.name == PARTITIONED else "without end"
