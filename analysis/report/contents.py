"""What a report says: a campaign turned into sections, fold by fold."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from analysis.fold.words import between, counted, degrees, turned
from analysis.orient.features import Feature
from analysis.report import method_words
from analysis.report.blocks import Column, Points, Report, Row, Section, Table, Typed, Words, cut
from analysis.report.campaign import UNNAMED
from analysis.report.fault_words import fault_section
from analysis.report.fold_words import fold_section, share
from analysis.report.palette import LETTERS, NAMES

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from analysis.fold.records import FoldCheck
    from analysis.report.blocks import Block
    from analysis.report.campaign import Campaign

_CONFLICTS_LISTED: Final = 20


def contents(campaign: Campaign, progress: Callable[[float], None] | None = None) -> Report:
    """Make the report of a campaign; `progress` is called with the share of the drawing done, 0 to 1."""
    cautions = Section("cautions", "Cautions", (Points(method_words.CAUTIONS, boxed=True),))
    sections = [_summary(campaign), cautions]
    for number, part in enumerate(campaign.folds, start=1):
        sections.append(fold_section(part, f"fold-{number}"))
        if progress is not None:
            progress(number / (len(campaign.folds) + 1))
    if campaign.fault_words:
        sections.append(fault_section(campaign))
    sections += [
        Section("method", "Method in short", (Points(_method(campaign)),), new_page=True),
        Section("conventions", "Conventions", (Points(method_words.CONVENTIONS),)),
        Section("repeat", "To repeat this", tuple(_repeat(campaign))),
    ]
    if progress is not None:
        progress(1.0)
    return Report(campaign.title, tuple(_head(campaign)), tuple(sections))


def _head(campaign: Campaign) -> Iterator[str]:
    folds = len(campaign.folds)
    total = sum(len(part.table) for part in campaign.folds)
    line = f"{counted(folds, 'fold')}, {counted(total, 'reading')}"
    observers: set[str] = set()
    days: set[str] = set()
    for part in campaign.folds:
        names = part.table.codes("observer")
        observers |= {names.names[code] for code in set(names.codes.tolist())}
        read = part.table.recorded_at.astype("datetime64[D]").tolist()
        days |= {day.isoformat() for day in set(read) if day is not None}
    if days:
        first, last = min(days), max(days)
        line += f", read on {first}" if first == last else f", read from {first} to {last}"
    yield line
    if observers - {""}:
        yield cut(f"Read by {', '.join(sorted(observers - {''}))}")


def _summary(campaign: Campaign) -> Section:
    blocks: list[Block] = []
    if campaign.folds:
        settings = campaign.folds[0].check.settings
        columns = (
            Column("Fold", 20),
            Column("Verdict", 14),
            Column("Transection", 15),
            Column("Interval", 19),
            *(Column(LETTERS[feature], 6.5, figures=True) for feature in Feature),
            Column("Outcrops", 12, figures=True),
        )
        letters = ", ".join(f"{LETTERS[feature]} {NAMES[feature]}" for feature in Feature)
        caption = (
            f"Each transection stands with its {share(settings.confidence)} interval, valid at every look. The margin M"
            f" is {degrees(settings.margin_deg)}. Numbers of readings: {letters}."
        )
        rows = tuple(
            Row((part.name, *_summary_cells(part.check)), link=f"fold-{number}")
            for number, part in enumerate(campaign.folds, start=1)
        )
        blocks.append(Table(caption, columns, rows))
    else:
        blocks.append(Words("No readings stand in these files."))
    if campaign.struck_only:
        gone = (
            f"{name or UNNAMED}: {counted(number, 'reading')}, all struck out"
            for name, number in campaign.struck_only.items()
        )
        blocks.append(Points(tuple(gone), title="Folds of which no reading stands"))
    if campaign.left_out:
        blocks.append(Points(campaign.left_out, title="Left out", boxed=True))
    if campaign.conflicts:
        listed = [cut(f"{conflict}.") for conflict in campaign.conflicts[:_CONFLICTS_LISTED]]
        rest = len(campaign.conflicts) - len(listed)
        if rest:
            listed.append(f"And {rest} more.")
        title = "Readings whose contents clash: the one edited last stands"
        blocks.append(Points(tuple(listed), title=title, boxed=True))
    return Section("verdicts", "Verdicts", tuple(blocks))


def _summary_cells(check: FoldCheck) -> tuple[str, ...]:
    signed = check.sense != "unsigned"
    figure = interval = "not known yet"
    # The figure never stands without its interval.
    if check.transection_deg is not None and check.interval_deg is not None:
        figure = turned(check.transection_deg, signed=signed)
        interval = (
            between(*check.interval_deg, signed=signed).removeprefix("between ").replace(" and ", " to ")
        )
    counts = check.readings
    numbers = (*(counts.of(feature) for feature in Feature), counts.outcrops)
    return (check.verdict.value.capitalize(), figure, interval, *map(str, numbers))


def _method(campaign: Campaign) -> tuple[str, ...]:
    settings = campaign.folds[0].check.settings if campaign.folds else None
    chosen: tuple[str, ...] = ()
    if settings is not None:
        chosen = (
            (
                f"Settings of this report: M {degrees(settings.margin_deg)}, confidence {share(settings.confidence)}"
                f" over all looks together, forecast limit {settings.forecast_limit} readings."
            ),
        )
    return (*method_words.METHOD, *(method_words.FAULT_METHOD if campaign.fault_words else ()), *chosen)


def _repeat(campaign: Campaign) -> Iterator[Block]:
    yield Words("In the folder that holds the files, type:")
    yield Typed(campaign.command)
    columns = (
        Column("File", 30),
        Column("Readings used", 12, figures=True),
        Column("SHA-256 of its content", 58),
    )
    rows = tuple(Row((file.name, str(file.standing), file.sha256)) for file in campaign.files)
    yield Table("The files read. The same content has the same SHA-256.", columns, rows)
    yield Words(f"Made with {', '.join(f'{name} {release}' for name, release in campaign.versions)}.")
