"""hingewise survey: the map of verdicts of a large archive."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from analysis.cli.common import (
    nothing_stands,
    output_option,
    say_left_out,
    settings_options,
    write_map,
)
from analysis.errors import SettingError
from analysis.fold.settings import CheckSettings
from analysis.fold.words import counted

if TYPE_CHECKING:
    from analysis.survey.run import Survey

_MAPS = (".gpkg", ".geojson")


@click.command("survey")
@click.argument(
    "paths", metavar="DIR|FILE...", nargs=-1, required=True, type=click.Path(path_type=Path, exists=True)
)
@output_option(_MAPS, "The map to write: .gpkg or .geojson.")
@click.option("--cell", "cell_km", metavar="KM", type=float, help="Check squares of this width, not folds.")
@click.option("--moving", is_flag=True, help="With --cell: each square together with the eight around it.")
@click.option(
    "--workers", metavar="N", type=click.IntRange(min=1), help="Threads; one a processor unless given."
)
@click.option(
    "--scheduler", metavar="ADDRESS",
    help="Work on the Dask cluster at this address. Its workers must see the files under the same paths.",
)  # fmt: skip
@settings_options
def survey_command(
    paths: tuple[Path, ...],
    output: Path,
    cell_km: float | None,
    workers: int | None,
    scheduler: str | None,
    margin_deg: float,
    confidence: float,
    *,
    moving: bool,
) -> None:
    """Map hinge, cleavage, intersection, transection and verdict over an archive of CSV and Parquet files.

    Folders are searched for files. The archive is read piece by piece and never held whole; the figures are those
    that `check` gives fold by fold. By fold, each is placed at the mean position of its readings; by square, at the
    middle of the square.

    \b
    Example:
      hingewise survey archive/ -o map.gpkg --cell 2
    """  # noqa: D301 - click reads the escape
    from analysis.survey.run import survey  # noqa: PLC0415 - pandas is loaded only when files are read
    from analysis.survey.squares import Grid  # noqa: PLC0415 - as above

    if moving and cell_km is None:
        raise SettingError("a window needs a width", where="--moving", expected="--cell KM beside it")
    found = survey(
        paths,
        CheckSettings(margin_deg=margin_deg, confidence=confidence),
        grid=None if cell_km is None else Grid(cell_km, moving=moving),
        workers=workers,
        scheduler=scheduler,
        progress=sys.stderr if sys.stderr.isatty() else None,
    )
    _say_left_out(found)
    if not found.verdicts:
        if found.unplaced:
            raise SettingError(
                "no reading that stands has a position",
                where="--cell",
                expected="latitude_deg and longitude_deg, by which squares are filled",
            )
        raise nothing_stands(paths)
    _write(found, output)
    unit = "fold" if cell_km is None else "window" if moving else "square"
    click.echo(f"{counted(len(found.verdicts), unit)}, {counted(found.readings, 'reading')}, in {output}")


def _say_left_out(found: Survey) -> None:
    say_left_out(found.faults, found.faulty_rows, found.conflicts)
    if found.unplaced:
        readings = counted(found.unplaced, "reading")
        click.echo(f"left out, for a reading without position is in no square: {readings}", err=True)


def _write(found: Survey, output: Path) -> None:
    from analysis.files.maplayers import layer_of_rows, verdict_layer  # noqa: PLC0415 - as above

    layers = [layer_of_rows(name, rows) for name, rows in found.means.items()]
    layers.append(verdict_layer(found.verdicts))
    write_map(output, layers)
