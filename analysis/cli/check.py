"""hingewise check: a readable verdict per fold."""

from __future__ import annotations

import os
from concurrent.futures import ThreadPoolExecutor
from typing import TYPE_CHECKING

import click
import numpy as np

from analysis.cli.common import (
    NOTHING_STANDS,
    axes_by_feature,
    chosen_folds,
    files_argument,
    fold_options,
    print_json,
    read_files,
    settings_options,
    strict_option,
    sums_of_table,
)
from analysis.fold.check import check_fold
from analysis.fold.outliers import find_outliers
from analysis.fold.settings import CheckSettings
from analysis.fold.words import (
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
from analysis.stats.descriptors import shape, share_near_girdle
from analysis.stats.sums import FEATURES

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from analysis.files.table import ReadingTable
    from analysis.fold.outliers import Outlier
    from analysis.fold.records import AxisEstimate, FoldCheck
    from analysis.orient.vectors import Floats

_OUTLIERS_NAMED = 5
_FEWEST_WITH_SHAPE = 3
_WIDTH = 15
_THREADS_FROM = 5_000  # readings a fold, on the average
_MAX_WORKERS = 4


@click.command()
@files_argument
@click.option("--json", "as_json", is_flag=True, help="Print one JSON array, an object per fold.")
@fold_options
@settings_options
@strict_option
def check(
    files: tuple[Path, ...],
    fold: str | None,
    outcrop: str | None,
    margin_deg: float,
    confidence: float,
    *,
    as_json: bool,
    strict: bool,
) -> None:
    """Give a verdict for every fold in FILE...

    \b
    Example:
      hingewise check monday.csv tuesday.csv --margin 4
    """  # noqa: D301 - click reads the escape
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    table = read_files(files, strict=strict)
    parts = list(chosen_folds(table, fold, outcrop))
    checks = check_tables(parts, settings)
    if as_json:
        print_json([one.to_json() for one in checks])
    elif checks:
        texts = (
            text_of(one, axes_by_feature(part)[Feature.BEDDING])
            for one, (_, part) in zip(checks, parts, strict=True)
        )
        click.echo("\n\n".join(texts))
    else:
        click.echo(NOTHING_STANDS)


def check_tables(parts: Sequence[tuple[str, ReadingTable]], settings: CheckSettings) -> list[FoldCheck]:
    """Check folds, each given by its name and its readings; large ones several at once."""

    def check_part(part: tuple[str, ReadingTable]) -> FoldCheck:
        return check_table(part[1], settings, part[0])

    # numpy lets other threads work while it reckons, which is most of the time where there are many readings.
    if sum(len(table) for _, table in parts) < _THREADS_FROM * len(parts):
        return [check_part(part) for part in parts]
    with ThreadPoolExecutor(min(_MAX_WORKERS, os.cpu_count() or 1)) as pool:
        return list(pool.map(check_part, parts))


def check_table(table: ReadingTable, settings: CheckSettings, fold: str) -> FoldCheck:
    """Check the readings of one fold, and say what its outliers do to the verdict."""
    table = table.by_feature()
    sums = sums_of_table(table)
    whole = check_fold(sums, settings, fold=fold)
    outliers = find_outliers(axes_by_feature(table))
    if not outliers:
        return whole
    rows = _rows_of(table, outliers)
    without = check_fold(
        sums_of_table(table.take(np.setdiff1d(np.arange(len(table)), rows))), settings, fold=fold
    )
    return whole.changed(warnings=(*whole.warnings, _outlier_sentence(table, outliers, rows, without)))


def _rows_of(table: ReadingTable, outliers: tuple[Outlier, ...]) -> list[int]:
    places = [np.flatnonzero(table.feature == code) for code in range(len(FEATURES))]
    return [int(places[FEATURES.index(outlier.feature)][outlier.place]) for outlier in outliers]


def _outlier_sentence(
    table: ReadingTable, outliers: tuple[Outlier, ...], rows: list[int], without: FoldCheck
) -> str:
    named = []
    for outlier, row in list(zip(outliers, rows, strict=True))[:_OUTLIERS_NAMED]:
        file, line = table.place(row)
        where = f"in {file}, line {line}" if file else f"at outcrop {table.outcrop[row] or '(unnamed)'}"
        named.append(f"{outlier.feature} {where} ({degrees(outlier.off_deg)} off the fit)")
    rest = len(outliers) - len(named)
    text = "; ".join(named) + (f"; and {rest} more" if rest else "")
    word = "Reading" if len(outliers) == 1 else "Readings"
    return (
        f"{word} far off: {text}. Kept all the same; without: {headline(without)} ({figure_line(without)})."
    )


def text_of(check: FoldCheck, bedding: Floats | None = None) -> str:
    """Write a check as readable lines; with the bedding poles, shape (n, 3), also the shape of their cloud."""
    lines = [check.fold or "(unnamed fold)", f"  {headline(check)}", f"  {figure_line(check)}", ""]
    counts = check.readings
    read = ", ".join(f"{counts.of(feature)} {feature}" for feature in Feature)
    lines.append(_row("Readings", f"{read}, at {counted(counts.outcrops, 'outcrop')}"))
    if check.hinge is not None:
        lines.append(_row("Hinge", f"{_line(check.hinge)}, from {check.hinge.source}"))
    if check.cleavage is not None:
        lines.append(_row("Cleavage", f"{plane_text(check.cleavage.plane)}{ellipse_text(check.cleavage)}"))
    if check.intersection is not None:
        mean = check.intersection
        lines.append(
            _row("Intersection", f"{_line(mean.axis)}, {mean.measured} measured, {mean.computed} computed")
        )
    if check.limbs is not None:
        limbs = "; ".join(f"{plane_text(limb.plane)} ({limb.count})" for limb in check.limbs.both)
        lines.append(_row("Limbs", f"{limbs}; interlimb angle {degrees(check.limbs.interlimb_deg)}"))
    if bedding is not None and len(bedding) >= _FEWEST_WITH_SHAPE and check.hinge is not None:
        lines.append(_row("Bedding poles", _cloud(bedding, check.hinge.vector)))
    lines += [
        _row("L01 on limb", f"{one.limb.removeprefix('limb ')}: {line_text(one.computed)} computed"
             + (f", {line_text(one.measured)} measured ({one.measured_count})" if one.measured else ""))
        for one in check.limb_lines
    ]  # fmt: skip
    signed = check.sense != "unsigned"
    if len(check.estimates) > 1:
        both = "; ".join(
            f"{e.source} {turned(e.delta_deg, signed=signed)} ± {degrees(e.se_deg)}" for e in check.estimates
        )
        lines.append(_row("Side by side", both))
    lines += [_row("Because" if k == 0 else "", sentence) for k, sentence in enumerate(check.because)]
    if check.more_readings is not None:
        m = check.more_readings
        lines.append(_row("Forecast", f"{more(m)}; likely between {m.low} and {m.high} in all"))
    if check.next_reading is not None:
        lines.append(_row("Read next", f"{check.next_reading.feature}, {check.next_reading.where}"))
    lines += [_row("Mind" if k == 0 else "", warning) for k, warning in enumerate(check.warnings)]
    return "\n".join(lines)


def _cloud(poles: Floats, hinge: Floats) -> str:
    cloud = shape(np.linalg.eigvalsh(poles.T @ poles))
    named = ", ".join(f"{name} {value:.2f}" for name, value in zip("KCPGR", map(float, cloud), strict=True))
    near, about = (100.0 * share_near_girdle(poles, hinge, within) for within in (10.0, 20.0))
    return f"{named}; {near:.0f}% within 10° of the girdle, {about:.0f}% within 20°"


def _row(name: str, text: str) -> str:
    return f"  {name:<{_WIDTH}}{text}"


def _line(axis: AxisEstimate) -> str:
    return f"{line_text(axis.line)}{ellipse_text(axis)}"
