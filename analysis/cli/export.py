"""hingewise export: readings and verdicts for a GIS."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click
import numpy as np

from analysis.cli.check import check_table
from analysis.cli.common import (
    files_argument,
    fold_options,
    no_such,
    not_over,
    nothing_stands,
    output_option,
    read_files,
    settings_options,
    strict_option,
    write_map,
)
from analysis.errors import SettingError
from analysis.fold.settings import CheckSettings
from analysis.fold.words import counted

if TYPE_CHECKING:
    from pathlib import Path

    import numpy.typing as npt

    from analysis.files.table import ReadingTable

_FORMATS = (".gpkg", ".geojson", ".csv")


@click.command()
@files_argument
@output_option(_FORMATS, "The file to write; its ending says the format: .gpkg, .geojson or .csv.")
@click.option(
    "--schema", type=click.Choice(["gems"]),
    help="Fields of another schema: gems is the U.S. Geologic Map Schema's OrientationPoints.",
)  # fmt: skip
@fold_options
@settings_options
@strict_option
def export(
    files: tuple[Path, ...],
    output: Path,
    schema: str | None,
    fold: str | None,
    outcrop: str | None,
    margin_deg: float,
    confidence: float,
    *,
    strict: bool,
) -> None:
    """Write the readings in FILE... and the verdict on each fold for a GIS.

    GeoPackage has a layer a feature and one of verdicts, with the styles that draw strike-and-dip symbols turned
    by azimuth; GeoJSON has the same as one collection. Points are in WGS 84. Readings that stand are in it, those
    without position too, with no point. Struck-out ones are not. CSV is the file of readings itself, every revision.

    \b
    Example:
      hingewise export readings.csv -o readings.gpkg
    """  # noqa: D301 - click reads the escape
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    not_over(output, files, "--output", "What is not exported would be lost from it.")
    table = read_files(files, strict=strict)
    if output.suffix.lower() == ".csv":
        _write_csv(table, output, schema, fold, outcrop)
    elif schema == "gems":
        _write_gems(table, output, fold, outcrop)
    else:
        _write_map(files, table, output, settings, fold, outcrop)


def _write_csv(
    table: ReadingTable, output: Path, schema: str | None, fold: str | None, outcrop: str | None
) -> None:
    import pandas as pd  # noqa: PLC0415 - loaded only when files are read

    from analysis.files.csvfile import write_readings  # noqa: PLC0415 - as above

    if schema is not None:
        raise SettingError(
            "the schema is one of points on a map",
            where="--schema",
            expected="an output ending in .gpkg or .geojson",
        )
    part = table
    if fold is not None or outcrop is not None:
        # A reading belongs where its last revision puts it, and takes its history along.
        codes, ids = pd.factorize(table.reading_id)
        highest = np.zeros(len(ids), dtype=np.int32)
        np.maximum.at(highest, codes, table.revision)
        last = table.revision == highest[codes]
        wanted = np.zeros(len(ids), dtype=bool)
        wanted[codes[last & _in_place(table, fold, outcrop)]] = True
        part = table.take(wanted[codes])
    write_readings(output, part)
    click.echo(f"{counted(len(part), 'revision')} written to {output}")


def _write_gems(table: ReadingTable, output: Path, fold: str | None, outcrop: str | None) -> None:
    from analysis.files.gems import orientation_points  # noqa: PLC0415 - as above

    points = orientation_points(table.take(_in_place(table, fold, outcrop)))
    if not len(points.layer):
        raise SettingError(
            "no reading that stands has a position",
            where=str(output),
            expected="latitude_deg and longitude_deg, which the schema needs",
        )
    write_map(output, [points.layer], points.tables)
    click.echo(f"{counted(len(points.layer), 'orientation point')} in {output}")
    if points.left_out:
        click.echo(
            f"{counted(points.left_out, 'reading')} without position left out: the schema needs a point",
            err=True,
        )


def _write_map(
    files: tuple[Path, ...],
    table: ReadingTable,
    output: Path,
    settings: CheckSettings,
    fold: str | None,
    outcrop: str | None,
) -> None:
    from analysis.files.maplayers import reading_layers, verdict_layer  # noqa: PLC0415 - as above
    from analysis.survey.squares import position_of, upward_vectors  # noqa: PLC0415
    from analysis.survey.verdicts import verdict_row  # noqa: PLC0415

    part = table.take(_in_place(table, fold, outcrop))
    layers = reading_layers(part)
    if not layers:
        raise nothing_stands(files)
    rows = []
    for name in part.folds():
        one = part.of_fold(name)
        latitude, longitude = one.column("latitude_deg"), one.column("longitude_deg")
        known = ~np.isnan(latitude)
        position = position_of(upward_vectors(latitude[known], longitude[known]).sum(axis=0))
        rows.append(verdict_row(check_table(one, settings, name), position, int(known.sum())))
    write_map(output, [*layers, verdict_layer(rows)])
    count, unplaced = sum(map(len, layers)), sum(layer.without_position for layer in layers)
    click.echo(f"{counted(count, 'reading')} and {counted(len(rows), 'verdict')} in {output}")
    if unplaced:
        click.echo(
            f"{counted(unplaced, 'reading')} without position: in the file, with no point on the map",
            err=True,
        )


def _in_place(table: ReadingTable, fold: str | None, outcrop: str | None) -> npt.NDArray[np.bool_]:
    """Mark the rows of one fold, one outcrop, or both; SettingError where there is none."""
    keep = np.ones(len(table), dtype=bool)
    for kind, name, names in (("fold", fold, table.fold), ("outcrop", outcrop, table.outcrop)):
        if name is None:
            continue
        there = np.array([text == name for text in names.names], dtype=bool)[names.codes]
        if not (keep & there).any():
            raise no_such(kind, name, (names.names[code] for code in np.unique(names.codes[keep])))
        keep &= there
    return keep
