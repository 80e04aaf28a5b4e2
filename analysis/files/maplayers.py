"""Readings, verdicts and other rows as layers of a map: points in WGS 84 with fields, before any format.

Readings without position stay in their layer, with no point. Struck-out readings and superseded revisions are in
none: a map shows what stands.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Final

import numpy as np
import numpy.typing as npt
import pandas as pd

from analysis.files.symbols import VERDICTS, Style, inclination_label, style_for, symbol_of
from analysis.orient.features import Feature

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from analysis.files.table import ReadingTable

# Columns of a reading that become fields under their own name, beside those of its attitude.
_TEXTS: Final = ("as_entered", "note")
_CODED: Final = (
    "observer", "device", "fold", "outcrop", "dip_quadrant", "north_reference", "correction_model", "instrument",
    "position_source",
)  # fmt: skip
_NUMBERS: Final = ("correction_deg", "scatter_deg", "altitude_m", "accuracy_m")
_TIMES: Final = ("recorded_at", "revised_at")
_PLACE: Final = ("latitude_deg", "longitude_deg")


@dataclass(frozen=True, slots=True)
class MapLayer:
    """A layer of points.

    Parameters
    ----------
    name
        Of the layer.
    fields
        A row a point; None, NaN and NaT stand for nothing there.
    latitude_deg, longitude_deg
        WGS 84, shape (N,); NaN where there is no position.
    style
        How the points are drawn, or None.

    """

    name: str
    fields: pd.DataFrame
    latitude_deg: npt.NDArray[np.float64]
    longitude_deg: npt.NDArray[np.float64]
    style: Style | None = None

    def __len__(self) -> int:
        return len(self.fields)

    @property
    def without_position(self) -> int:
        """How many rows have no point."""
        return int(np.isnan(self.latitude_deg).sum())


def reading_layers(table: ReadingTable) -> list[MapLayer]:
    """Make a layer for each feature that has a standing reading, named by it.

    `azimuth_deg` is the strike by the right-hand rule or the trend, `inclination_deg` the dip or the plunge.
    """
    standing = table.take(table.standing)
    layers = []
    for code, feature in enumerate(Feature):
        part = standing.take(standing.feature == code)
        if len(part):
            fields = _fields(part, feature)
            layers.append(
                MapLayer(
                    feature.value,
                    fields,
                    np.array(part.column("latitude_deg")),
                    np.array(part.column("longitude_deg")),
                    style_for(set(fields["symbol"])),
                )
            )
    return layers


def _fields(table: ReadingTable, feature: Feature) -> pd.DataFrame:
    names = ("strike_deg", "dip_deg") if feature.is_plane else ("trend_deg", "plunge_deg")
    azimuth, inclination = (np.array(table.column(name)) for name in names)
    overturned = np.array(table.column("overturned"))
    fields: dict[str, Any] = {
        "reading_id": _texts(table.reading_id),
        "revision": np.array(table.revision),
        "feature": np.full(len(table), feature.value, dtype=object),
        "symbol": np.array(
            [
                symbol_of(feature, dip, overturned=turned)
                for dip, turned in zip(inclination.tolist(), overturned.tolist(), strict=True)
            ],
            dtype=object,
        ),
        "azimuth_deg": azimuth,
        "inclination_deg": inclination,
        "label": np.array([inclination_label(dip) for dip in inclination.tolist()], dtype=object),
    }
    if feature.is_plane:
        fields["dip_direction_deg"] = np.mod(azimuth + 90.0, 360.0)
        fields["overturned"] = overturned
    for name in _CODED:
        codes = table.codes(name)
        fields[name] = _texts(np.array([*codes.names, ""], dtype=object)[codes.codes])
    for name in _TEXTS:
        fields[name] = _texts(table.column(name))
    for name in _NUMBERS:
        fields[name] = np.array(table.column(name))
    for name in _TIMES:
        fields[name] = pd.DatetimeIndex(table.column(name)).tz_localize("UTC")
    samples = np.array(table.column("samples"))
    fields["samples"] = pd.array(np.where(samples > 0, samples, 0), dtype="Int32")
    fields["samples"][samples == 0] = pd.NA
    kept = table.codes("warnings_kept")
    fields["warnings_kept"] = _texts(
        np.array([" ".join(words) for words in kept.names], dtype=object)[kept.codes]
    )
    fields["other"] = _texts(_other(table))
    return pd.DataFrame(fields)


def _texts(values: npt.NDArray[Any]) -> pd.Series[Any]:
    """Texts, with None in place of empty ones; as objects, or pandas would make them NaN."""
    texts = np.array(values, dtype=object)
    texts[texts == ""] = None
    return pd.Series(texts, dtype=object)


def _other(table: ReadingTable) -> npt.NDArray[Any]:
    """What stands in columns that are not ours, as JSON."""
    found = np.full(len(table), "", dtype=object)
    if table.other_names:
        columns = [table.column(name).tolist() for name in table.other_names]
        for row, cells in enumerate(zip(*columns, strict=True)):
            held = {name: cell for name, cell in zip(table.other_names, cells, strict=True) if cell}
            found[row] = json.dumps(held, ensure_ascii=False) if held else ""
    return found


def layer_of_rows(name: str, rows: Sequence[Mapping[str, Any]], style: Style | None = None) -> MapLayer:
    """Make a layer of rows that each have latitude_deg and longitude_deg, None where there is no position.

    Without a style rows that have a `symbol` get the style of attitudes.
    """
    frame = pd.DataFrame([dict(row) for row in rows])
    latitude, longitude = (frame.pop(column).to_numpy(dtype=float) for column in _PLACE)
    for column in frame.columns[frame.isna().all()]:
        # A column of which nothing is known: numbers if its name has a unit, else text.
        frame[column] = frame[column].astype(float if column.endswith(("_deg", "df")) else object)
    if style is None and "symbol" in frame:
        style = style_for(set(frame["symbol"]))
    return MapLayer(name, frame, latitude, longitude, style)


def verdict_layer(rows: Sequence[Mapping[str, Any]]) -> MapLayer:
    """Make the layer of verdicts, a row a fold or square."""
    return layer_of_rows("verdicts", rows, VERDICTS)
