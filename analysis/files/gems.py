"""Orientation points after the U.S. Geologic Map Schema.

Source: U.S. Geological Survey National Cooperative Geologic Mapping Program 2020, GeMS (Geologic Map Schema): a
standard format for the digital publication of geologic maps, U.S. Geological Survey Techniques and Methods 11-B10;
names, types and lengths of the fields as in the publisher's own definition of 24 March 2023. The schema asks for
values that a field reading does not have. They are written as follows, and are the map author's to fill in:

- MapUnit: what a column of that name in the file says, else "#null".
- IdentityConfidence: "unspecified".
- PlotAtScale: 10 000 000, so that every scale in use shows the point.
- Symbol: nothing, which the schema allows.
- StationsID: the outcrop's name; a table of stations comes with the map, not with the readings.

Unknown confidences are -9, as the schema has it. Every point needs a place, so readings without one are left out.
"""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Final

import numpy as np
import pandas as pd

from analysis.files.maplayers import MapLayer, reading_layers
from analysis.files.reading import CONTENT_SPACE

if TYPE_CHECKING:
    from collections.abc import Hashable, Mapping

    import numpy.typing as npt

    from analysis.files.table import ReadingTable

FIELDS: Final = (
    "Type", "Azimuth", "Inclination", "Symbol", "Label", "LocationConfidenceMeters", "IdentityConfidence",
    "OrientationConfidenceDegrees", "PlotAtScale", "StationsID", "MapUnit", "LocationSourceID",
    "OrientationSourceID", "Notes", "OrientationPoints_ID",
)  # fmt: skip
UNKNOWN: Final = -9.0
_ID_LENGTH: Final = 50
_MAP_UNIT_LENGTH: Final = 10
_NOTHING: Final = "#null"
_EVERY_SCALE: Final = 10_000_000.0

# Type by symbol, with its definition for the glossary.
_TYPES: Final = {
    "bedding": ("inclined bedding", "Strike and dip of bedding."),
    "bedding overturned": ("overturned bedding", "Strike and dip of bedding that is overturned."),
    "bedding horizontal": ("horizontal bedding", "Bedding that dips less than half a degree."),
    "bedding vertical": ("vertical bedding", "Bedding that dips more than 89.5 degrees."),
    "cleavage": ("inclined cleavage", "Strike and dip of cleavage."),
    "cleavage horizontal": ("horizontal cleavage", "Cleavage that dips less than half a degree."),
    "cleavage vertical": ("vertical cleavage", "Cleavage that dips more than 89.5 degrees."),
    "intersection": (
        "bedding-cleavage intersection lineation",
        "Trend and plunge of the line in which bedding and cleavage meet.",
    ),
    "hinge": ("minor fold hinge", "Trend and plunge of the hinge line of a minor fold."),
}
_UNSPECIFIED: Final = ("unspecified", "The confidence was not recorded with the reading.")


@dataclass(frozen=True, slots=True)
class GemsPoints:
    """The layer of orientation points, the tables that its keys point to, and how many readings have no place."""

    layer: MapLayer
    tables: dict[str, pd.DataFrame]
    left_out: int


def orientation_points(table: ReadingTable) -> GemsPoints:
    """Make the points of all standing readings that have a position."""
    layers = reading_layers(table)
    map_units = _map_units(table)
    sources = _Sources()
    frames = [_points(layer, map_units, sources) for layer in layers]
    placed = [~np.isnan(layer.latitude_deg) for layer in layers]
    kept = [frame[keep] for frame, keep in zip(frames, placed, strict=True)]
    fields = pd.concat(kept, ignore_index=True) if kept else pd.DataFrame(columns=list(FIELDS))
    latitudes = [one.latitude_deg[keep] for one, keep in zip(layers, placed, strict=True)]
    longitudes = [one.longitude_deg[keep] for one, keep in zip(layers, placed, strict=True)]
    points = MapLayer(
        "OrientationPoints",
        fields,
        np.concatenate([np.zeros(0), *latitudes]),
        np.concatenate([np.zeros(0), *longitudes]),
    )
    left_out = sum(layer.without_position for layer in layers)
    glossary = _glossary(set(fields["Type"]), sources.key("Hingewise, definitions of terms"))
    return GemsPoints(points, {"DataSources": sources.table(), "Glossary": glossary}, left_out)


def _points(layer: MapLayer, map_units: dict[str, str], sources: _Sources) -> pd.DataFrame:
    fields = layer.fields
    horizontal = fields["symbol"].str.endswith(" horizontal").to_numpy(dtype=bool)
    confidence = fields["scatter_deg"].to_numpy(dtype=float)
    accuracy = fields["accuracy_m"].to_numpy(dtype=float)
    ids = fields["reading_id"].tolist()
    columns: dict[str, Any] = {
        "Type": [_TYPES[symbol][0] for symbol in fields["symbol"]],
        "Azimuth": _single(fields["azimuth_deg"].to_numpy(dtype=float)),
        # "Types defined as horizontal shall have Inclination=0."
        "Inclination": _single(np.where(horizontal, 0.0, fields["inclination_deg"])),
        "Symbol": np.full(len(fields), None, dtype=object),
        "Label": [None if flat else label for flat, label in zip(horizontal, fields["label"], strict=True)],
        "LocationConfidenceMeters": _single(np.where(np.isnan(accuracy), UNKNOWN, accuracy)),
        "IdentityConfidence": _UNSPECIFIED[0],
        "OrientationConfidenceDegrees": _single(np.where(np.isnan(confidence), UNKNOWN, confidence)),
        "PlotAtScale": _single(np.full(len(fields), _EVERY_SCALE)),
        "StationsID": [None if name is None else _key(name) for name in fields["outcrop"].tolist()],
        "MapUnit": [map_units.get(name, _NOTHING) for name in ids],
        "LocationSourceID": [
            sources.key(f"Position: {source or 'source not recorded'}")
            for source in fields["position_source"]
        ],
        "OrientationSourceID": [
            sources.key(f"Field reading by {observer or 'an unnamed observer'}")
            for observer in fields["observer"]
        ],
        "Notes": [_notes(row) for row in fields.to_dict("records")],
        "OrientationPoints_ID": [_key(name) for name in ids],
    }
    return pd.DataFrame(columns)[list(FIELDS)]


def _single(values: npt.NDArray[np.float64]) -> npt.NDArray[np.float32]:
    """Make what the schema calls Single."""
    return values.astype(np.float32)


def _key(name: str) -> str:
    """Shorten a name that is too long for a key, and keep it different from any other."""
    return name if len(name) <= _ID_LENGTH else str(uuid.uuid5(CONTENT_SPACE, name))


def _notes(row: Mapping[Hashable, Any]) -> str | None:
    parts = [f"fold {row['fold']}" if row["fold"] else None, row["note"]]
    if row["warnings_kept"]:
        parts.append(f"kept against: {row['warnings_kept']}")
    return "; ".join(part for part in parts if part) or None


def _map_units(table: ReadingTable) -> dict[str, str]:
    """Give the map unit by reading_id, where a column names it."""
    if "MapUnit" not in table.other_names:
        return {}
    pairs = zip(
        table.reading_id.tolist(), table.column("MapUnit").tolist(), table.standing.tolist(), strict=True
    )
    return {name: unit[:_MAP_UNIT_LENGTH] for name, unit, stands in pairs if unit and stands}


class _Sources:
    """The rows of DataSources, made as they are needed."""

    def __init__(self) -> None:
        self._keys: dict[str, str] = {}

    def key(self, source: str) -> str:
        return self._keys.setdefault(source, f"DAS{len(self._keys) + 1}")

    def table(self) -> pd.DataFrame:
        return pd.DataFrame(
            {
                "Source": list(self._keys),
                "Notes": np.full(len(self._keys), None, dtype=object),
                "URL": np.full(len(self._keys), None, dtype=object),
                "DataSources_ID": list(self._keys.values()),
            }
        )


def _glossary(types: set[str], source: str) -> pd.DataFrame:
    terms = sorted(pair for pair in _TYPES.values() if pair[0] in types)
    terms.append(_UNSPECIFIED)
    return pd.DataFrame(
        {
            "Term": [term for term, _ in terms],
            "Definition": [definition for _, definition in terms],
            "DefinitionSourceID": source,
            "Glossary_ID": [f"GLO{place}" for place in range(1, len(terms) + 1)],
        }
    )
