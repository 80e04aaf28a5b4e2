"""hingewise export: readings and verdicts for a GIS."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click
import numpy as np

from analysis.cli.check import check_table
from analysis.cli.common import (
    files_argument,
    fold_options,
    read_files,
    settings_options,
    strict_option,
)
from analysis.errors import SettingError
from analysis.fold.settings import CheckSettings

if TYPE_CHECKING:
    import numpy.typing as npt
    import pandas as pd

    from analysis.files.maplayers import MapLayer
    from analysis.files.table import ReadingTable

_FORMATS = (".gpkg", ".geojson", ".csv")


@click.command()
@files_argument
@click.option(
    "-o", "--output", metavar="FILE", required=True, type=click.Path(path_type=Path),
    help="The file to write; its ending says the format: .gpkg, .geojson or .csv.",
)  # fmt: skip
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
    if output.suffix.lower() not in _FORMATS:
        raise SettingError(
            f"{output.name} ends in no format",
            where="--output",
            expected=f"a name ending in {', '.join(_FORMATS)}",
        )
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    table = read_files(files, strict=strict)
    if output.suffix.lower() == ".csv":
        _write_csv(table, output, schema, fold, outcrop)
    elif schema == "gems":
        _write_gems(table, output, fold, outcrop)
    else:
        _write_map(table, output, settings, fold, outcrop)


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
    click.echo(f"{len(part)} revisions written to {output}")


def _write_gems(table: ReadingTable, output: Path, fold: str | None, outcrop: str | None) -> None:
    from analysis.files.gems import orientation_points  # noqa: PLC0415 - as above

    points = orientation_points(table.take(_in_place(table, fold, outcrop)))
    if not len(points.layer):
        raise SettingError(
            "no reading that stands has a position",
            where=str(output),
            expected="latitude_deg and longitude_deg, which the schema needs",
        )
    _write(output, [points.layer], points.tables)
    click.echo(f"{len(points.layer)} orientation points in {output}")
    if points.left_out:
        click.echo(
            f"{_readings(points.left_out)} without position left out: the schema needs a point", err=True
        )


def _write_map(
    table: ReadingTable, output: Path, settings: CheckSettings, fold: str | None, outcrop: str | None
) -> None:
    from analysis.files.maplayers import reading_layers, verdict_layer  # noqa: PLC0415 - as above
    from analysis.survey.squares import position_of, upward_vectors  # noqa: PLC0415
    from analysis.survey.verdicts import verdict_row  # noqa: PLC0415

    part = table.take(_in_place(table, fold, outcrop))
    layers = reading_layers(part)
    if not layers:
        raise SettingError(
            "no reading stands in these files",
            where=str(output),
            expected="at least one that is not struck out",
        )
    rows = []
    for name in part.folds():
        one = part.of_fold(name)
        latitude, longitude = one.column("latitude_deg"), one.column("longitude_deg")
        known = ~np.isnan(latitude)
        position = position_of(upward_vectors(latitude[known], longitude[known]).sum(axis=0))
        rows.append(verdict_row(check_table(one, settings, name), position, int(known.sum())))
    _write(output, [*layers, verdict_layer(rows)])
    count, unplaced = sum(map(len, layers)), sum(layer.without_position for layer in layers)
    folds = "1 verdict" if len(rows) == 1 else f"{len(rows)} verdicts"
    click.echo(f"{_readings(count)} and {folds} in {output}")
    if unplaced:
        click.echo(f"{_readings(unplaced)} without position: in the file, with no point on the map", err=True)


def _in_place(table: ReadingTable, fold: str | None, outcrop: str | None) -> npt.NDArray[np.bool_]:
    """Mark the rows of one fold, one outcrop, or both; SettingError where there is none."""
    keep = np.ones(len(table), dtype=bool)
    for option, name, names in (("--fold", fold, table.fold), ("--outcrop", outcrop, table.outcrop)):
        if name is None:
            continue
        keep &= np.array([text == name for text in names.names], dtype=bool)[names.codes]
        if not keep.any():
            raise SettingError(
                f"there is nothing at {name!r}", where=option, expected="a name that the file has"
            )
    return keep


def _write(output: Path, layers: list[MapLayer], tables: dict[str, pd.DataFrame] | None = None) -> None:
    if output.suffix.lower() == ".gpkg":
        from analysis.files.geopackage import write_geopackage  # noqa: PLC0415 - as above

        write_geopackage(output, layers, tables)
        return
    from analysis.files.geojson import write_geojson  # noqa: PLC0415 - as above

    write_geojson(output, layers)


def _readings(count: int) -> str:
    return "1 reading" if count == 1 else f"{count} readings"
