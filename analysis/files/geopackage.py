"""GeoPackage, written through GDAL: layers of points, plain tables, and the styles that draw them.

The styles stand in the table `layer_styles`, which desktop GIS read by themselves; see `analysis.files.symbols`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
import pandas as pd

from analysis.errors import CsvError, SettingError
from analysis.files.atomic import whole_file

if TYPE_CHECKING:
    import os
    from collections.abc import Mapping, Sequence
    from pathlib import Path

    from analysis.files.maplayers import MapLayer

WGS84 = "EPSG:4326"
_VERSION = "1.2"  # of GeoPackage: what a GIS of some years ago opens without complaint
_GEOMETRY = "geom"  # the name that GDAL gives the column of points


def write_geopackage(
    path: str | os.PathLike[str],
    layers: Sequence[MapLayer],
    tables: Mapping[str, pd.DataFrame] | None = None,
) -> None:
    """Write layers, and tables without points, into a new file that takes the place of any old one.

    Points are in WGS 84 (EPSG:4326), longitude first; a row without position has no point. Raises SettingError
    where there is no layer or the library is missing, CsvError where the file cannot be written.
    """
    if not layers:
        raise SettingError(
            "there is nothing to write", where=str(path), expected="at least one reading that stands"
        )
    try:
        import geopandas  # noqa: F401, PLC0415 - loaded only where a map is written
        import pyogrio  # noqa: PLC0415
    except ImportError as error:  # pragma: no cover - the desk extra brings them
        raise SettingError(
            "writing GeoPackage needs geopandas and pyogrio", mend="Install hingewise with its desk extra."
        ) from error
    with whole_file(path) as draft:
        try:
            for number, layer in enumerate(layers):
                points_of(layer).to_file(
                    draft,
                    layer=layer.name,
                    driver="GPKG",
                    engine="pyogrio",
                    geometry_type="Point",
                    dataset_options={"VERSION": _VERSION} if number == 0 else None,
                )
            for name, table in (tables or {}).items():
                pyogrio.write_dataframe(table, draft, layer=name, driver="GPKG")
            _write_styles(layers, draft)
        except pyogrio.errors.DataSourceError as error:
            # The library names the draft, which nobody else has heard of.
            said = str(error).replace(str(draft), draft.name)
            raise CsvError(
                f"cannot be written: {said}",
                where=str(path),
                expected="a folder that can be written to, with room on the disk",
                mend="Choose another folder.",
            ) from error


def points_of(layer: MapLayer) -> Any:  # noqa: ANN401 - geopandas has no types
    """Make the GeoDataFrame of a layer, in WGS 84."""
    import geopandas  # noqa: PLC0415 - as above

    points = geopandas.points_from_xy(layer.longitude_deg, layer.latitude_deg)
    points[np.isnan(layer.latitude_deg)] = None
    return geopandas.GeoDataFrame(layer.fields, geometry=points, crs=WGS84)


def _write_styles(layers: Sequence[MapLayer], draft: Path) -> None:
    import pyogrio  # noqa: PLC0415 - as above

    rows = [
        {
            "f_table_catalog": "",
            "f_table_schema": "",
            "f_table_name": layer.name,
            "f_geometry_column": _GEOMETRY,
            "styleName": layer.name[:30],
            "styleQML": layer.style.qml,
            "styleSLD": layer.style.sld,
            "useAsDefault": True,
            "description": layer.style.name,
            "owner": "",
            "ui": "",
            # Must be there for a GIS to find the style; what the time is does not matter, so there is none.
            "update_time": np.datetime64("NaT", "ms"),
        }
        for layer in layers
        if layer.style is not None
    ]
    if rows:
        pyogrio.write_dataframe(pd.DataFrame(rows), draft, layer="layer_styles", driver="GPKG")
