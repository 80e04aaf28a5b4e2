"""GeoJSON (RFC 7946): all layers as one collection of features, longitude first, WGS 84, no crs member.

Each feature names its layer in the property `layer`. A reading without position has the geometry null, which RFC
7946 section 3.2 provides for.
"""

from __future__ import annotations

import json
import math
from typing import TYPE_CHECKING, Any

import pandas as pd

from analysis.files.atomic import whole_file

if TYPE_CHECKING:
    import os
    from collections.abc import Iterator, Sequence

    from analysis.files.maplayers import MapLayer

_DECIMALS = 7  # of a degree: about a centimetre, as positions are kept (RFC 7946 section 11.2 warns of more)


def write_geojson(path: str | os.PathLike[str], layers: Sequence[MapLayer]) -> None:
    """Write layers as one feature collection. Raises CsvError where the file cannot be written."""
    with whole_file(path) as draft, draft.open("x", encoding="utf-8", newline="\n") as stream:
        stream.write('{"type": "FeatureCollection", "features": [')
        before = "\n"
        for layer in layers:
            for feature in features_of(layer):
                stream.write(before + json.dumps(feature, ensure_ascii=False, allow_nan=False))
                before = ",\n"
        stream.write("\n]}\n")


def features_of(layer: MapLayer) -> Iterator[dict[str, Any]]:
    """Make the features of a layer."""
    names = list(layer.fields.columns)
    places = zip(layer.latitude_deg.tolist(), layer.longitude_deg.tolist(), strict=True)
    rows = zip(*(layer.fields[name].tolist() for name in names), strict=True)
    for (latitude, longitude), values in zip(places, rows, strict=True):
        properties = {name: _plain(value) for name, value in zip(names, values, strict=True)}
        feature: dict[str, Any] = {
            "type": "Feature",
            "geometry": None
            if math.isnan(latitude)
            else {"type": "Point", "coordinates": [round(longitude, _DECIMALS), round(latitude, _DECIMALS)]},
            "properties": {"layer": layer.name, **properties},
        }
        if properties.get("reading_id"):
            feature["id"] = properties["reading_id"]
        yield feature


def _plain(value: Any) -> Any:  # noqa: ANN401 - any cell
    """Make the JSON value of a cell: null for nothing, ISO 8601 in UTC for times."""
    if value is None or value is pd.NaT or value is pd.NA or (isinstance(value, float) and math.isnan(value)):
        return None
    if isinstance(value, pd.Timestamp):
        return value.isoformat(timespec="milliseconds").replace("+00:00", "Z")
    return value
