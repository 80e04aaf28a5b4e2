"""The demo without a window: verdicts on the invented folds, and pictures of each."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from analysis.cli.check import check_table, text_of
from analysis.cli.common import axes_by_feature
from analysis.cli.pictures import file_names, make_folder
from analysis.cli.replay import checks_in_order
from analysis.demo import demo_readings
from analysis.files.csvfile import write_readings
from analysis.files.table import ReadingTable
from analysis.fold.settings import CheckSettings
from analysis.orient.features import Feature

if TYPE_CHECKING:
    from pathlib import Path


def show_demo(output: Path) -> None:
    """Print the verdict on each demo fold; write the CSV, and net and funnel of each as PNG and SVG."""
    from analysis.report.funnel import draw_funnel, history_of  # noqa: PLC0415 - matplotlib is loaded only here
    from analysis.report.net import draw_net  # noqa: PLC0415
    from analysis.report.sheet import save_all  # noqa: PLC0415

    make_folder(output)
    table = ReadingTable.from_readings(demo_readings())
    write_readings(output / "mossgarth.csv", table)
    settings = CheckSettings()
    folds = table.folds()
    for fold, name in zip(folds, file_names(list(folds)), strict=True):
        part = table.of_fold(fold)
        check = check_table(part, settings, fold)
        axes = axes_by_feature(part)
        click.echo(f"\n{text_of(check, axes[Feature.BEDDING])}")
        history = history_of(checks_in_order(part, settings, fold, forecast=False))
        save_all(draw_net(check, axes), output, f"{name}-net")
        save_all(draw_funnel(history, check), output, f"{name}-funnel")
    click.echo(f"\nPictures and readings are in {output}")
