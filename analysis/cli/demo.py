"""The demo without a window: verdicts on the invented folds, pictures of each, and the report on all."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from analysis.cli.check import check_table, text_of
from analysis.cli.common import axes_by_feature
from analysis.cli.pictures import file_names, make_folder
from analysis.cli.replay import checks_in_order
from analysis.cli.report import report_command
from analysis.demo import (
    DEMO_FAULT,
    DEMO_FAULT_SENSE,
    DEMO_FAULT_STRIKE_DEG,
    DEMO_ZONE_WIDTH_KM,
    demo_readings,
)
from analysis.files.csvfile import write_readings
from analysis.files.table import ReadingTable
from analysis.fold.settings import CheckSettings
from analysis.orient.features import Feature

if TYPE_CHECKING:
    from pathlib import Path

_TITLE = f"The invented Mossgarth folds beside the {DEMO_FAULT}"


def show_demo(output: Path) -> None:
    """Print the verdict on each demo fold; write the CSV, net and funnel of each as PNG and SVG, and the report."""
    from analysis.report.funnel import draw_funnel, history_of  # noqa: PLC0415 - matplotlib is loaded only here
    from analysis.report.net import draw_net  # noqa: PLC0415
    from analysis.report.sheet import save_all  # noqa: PLC0415

    make_folder(output)
    table = ReadingTable.from_readings(demo_readings())
    readings = output / "mossgarth.csv"
    write_readings(readings, table)
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
    click.echo()
    report_command.main(
        [
            str(readings), "-o", str(output / "report.html"), "--title", _TITLE, "--sense", DEMO_FAULT_SENSE,
            "--fault-strike", str(DEMO_FAULT_STRIKE_DEG), "--zone-width-km", str(DEMO_ZONE_WIDTH_KM),
        ],
        prog_name="hingewise report",
        standalone_mode=False,
    )  # fmt: skip
    click.echo(f"Pictures and readings are in {output}")
