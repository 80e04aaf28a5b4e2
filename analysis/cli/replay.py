"""hingewise replay: the check after each reading, as it would have been seen in the field."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from analysis.cli.common import (
    NOTHING_STANDS,
    chosen_folds,
    files_argument,
    fold_options,
    print_json,
    read_files,
    settings_options,
    strict_option,
)
from analysis.fold.check import check_fold
from analysis.fold.settings import CheckSettings
from analysis.fold.words import figure_line, headline
from analysis.stats.sums import FEATURES, RunningSums

if TYPE_CHECKING:
    from collections.abc import Container, Iterator
    from pathlib import Path

    from analysis.files.table import ReadingTable
    from analysis.fold.records import FoldCheck


@click.command()
@files_argument
@click.option("--json", "as_json", is_flag=True, help="Print one JSON object a line.")
@fold_options
@settings_options
@strict_option
def replay(
    files: tuple[Path, ...],
    fold: str | None,
    outcrop: str | None,
    margin_deg: float,
    confidence: float,
    *,
    as_json: bool,
    strict: bool,
) -> None:
    """Print the check after each reading in FILE..., in recorded order (file order where no time is given).

    \b
    Example:
      hingewise replay readings.csv --fold "Mossgarth fold" --json
    """  # noqa: D301 - click reads the escape
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    table = read_files(files, strict=strict)
    if not (as_json or table.folds()):
        click.echo(NOTHING_STANDS)
    for name, part in chosen_folds(table, fold, outcrop):
        for after, one in checks_in_order(part, settings, name):
            if as_json:
                print_json({"fold": name, "after": after, **one.to_json()}, indent=None)
            else:
                click.echo(f"{name or '(unnamed fold)'}  after {after}: {headline(one)} ({figure_line(one)})")


def checks_in_order(
    table: ReadingTable,
    settings: CheckSettings,
    fold: str,
    *,
    forecast: bool = True,
    looks: Container[int] | None = None,
) -> Iterator[tuple[int, FoldCheck]]:
    """Give (number of readings so far, check) after each reading of one fold, in recorded order.

    With `looks`, the check is made after those numbers of readings only.
    """
    ordered = table.in_recorded_order()
    outcrop, features, vectors = ordered.outcrop, ordered.feature, ordered.vectors
    sums = RunningSums()
    for row in range(len(ordered)):
        sums.add(FEATURES[features[row]], outcrop[row], vectors[row])
        if looks is None or row + 1 in looks:
            yield row + 1, check_fold(sums, settings, fold=fold, forecast=forecast)
