"""The U.S. Geologic Map Schema's orientation points against the schema as published."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pyogrio
import pytest

from analysis.demo import demo_readings
from analysis.files.gems import orientation_points
from analysis.files.geopackage import write_geopackage
from analysis.files.reading import Reading
from analysis.files.table import ReadingTable

# Field, type, whether it may be empty, suggested length. U.S. Geological Survey, GeMS_Definition.py, version of
# 24 March 2023, "OrientationPoints"; the schema: Techniques and Methods 11-B10 (2020). "Single" is a 32-bit float.
PUBLISHED = {
    "Type": ("String", "NoNulls", 254),
    "Azimuth": ("Single", "NoNulls", None),
    "Inclination": ("Single", "NoNulls", None),
    "Symbol": ("String", "NullsOK", 254),
    "Label": ("String", "NullsOK", 50),
    "LocationConfidenceMeters": ("Single", "NoNulls", None),
    "IdentityConfidence": ("String", "NoNulls", 50),
    "OrientationConfidenceDegrees": ("Single", "NoNulls", None),
    "PlotAtScale": ("Single", "NoNulls", None),
    "StationsID": ("String", "NullsOK", 50),
    "MapUnit": ("String", "NoNulls", 10),
    "LocationSourceID": ("String", "NoNulls", 50),
    "OrientationSourceID": ("String", "NoNulls", 50),
    "Notes": ("String", "Optional", 254),
    "OrientationPoints_ID": ("String", "NoNulls", 50),
}
# The same source: domains of the angles, and of confidences, where -9 stands for unknown.
DOMAINS = {"Azimuth": (0, 360), "Inclination": (-90, 90)}
UNKNOWN = -9.0


def points_of(*readings):
    return orientation_points(ReadingTable.from_readings(readings))


def plane(feature="bedding", strike=45.0, dip=30.0, **fields):
    place = {"latitude_deg": 1.0, "longitude_deg": 2.0}
    return Reading(
        **{"reading_id": "a", "feature": feature, "strike_deg": strike, "dip_deg": dip} | place | fields
    )


@pytest.fixture(scope="module")
def written(tmp_path_factory):
    """The demo's readings as a GeoPackage of the schema."""
    path = tmp_path_factory.mktemp("gems") / "gems.gpkg"
    points = points_of(*demo_readings())
    write_geopackage(path, [points.layer], points.tables)
    return path


def test_fields_are_those_published(written):
    """Names, order-free, and types are the published ones; what may not be empty is not; texts are short enough."""
    info = pyogrio.read_info(written, layer="OrientationPoints")
    types = dict(zip(info["fields"], info["dtypes"], strict=True))
    assert {name: {"float32": "Single", "object": "String"}[kind] for name, kind in types.items()} == {
        name: kind for name, (kind, _, _) in PUBLISHED.items()
    }
    frame = pyogrio.read_dataframe(written, layer="OrientationPoints")
    assert frame.crs.to_epsg() == 4326
    assert len(frame) == len(demo_readings())
    for name, (kind, nulls, length) in PUBLISHED.items():
        if nulls == "NoNulls":
            assert frame[name].notna().all(), name
        if kind == "String" and length is not None:
            assert (frame[name].dropna().str.len() <= length).all(), name
    for name, (low, high) in DOMAINS.items():
        assert frame[name].between(low, high).all()
    assert frame["OrientationPoints_ID"].is_unique
    assert (frame["PlotAtScale"] > 0).all()
    for name in ("LocationConfidenceMeters", "OrientationConfidenceDegrees"):
        assert ((frame[name] > 0) | (frame[name] == UNKNOWN)).all()


def test_keys_lead_to_the_tables(written):
    """Each source stands in DataSources, and each term in the Glossary with a source of its own."""
    frame = pyogrio.read_dataframe(written, layer="OrientationPoints")
    sources = pyogrio.read_dataframe(written, layer="DataSources")
    glossary = pyogrio.read_dataframe(written, layer="Glossary")
    keys = set(sources["DataSources_ID"])
    assert sources["DataSources_ID"].is_unique
    assert set(frame["LocationSourceID"]) | set(frame["OrientationSourceID"]) <= keys
    assert set(glossary["DefinitionSourceID"]) <= keys
    assert set(frame["Type"]) | set(frame["IdentityConfidence"]) == set(glossary["Term"])
    assert glossary["Definition"].str.len().gt(0).all()
    # The same source as PUBLISHED: fields of both tables.
    assert set(sources.columns) == {"Source", "Notes", "URL", "DataSources_ID"}
    assert set(glossary.columns) == {"Term", "Definition", "DefinitionSourceID", "Glossary_ID"}


@pytest.mark.parametrize(
    ("reading", "kind", "azimuth", "inclination"),
    [
        (plane(), "inclined bedding", 45.0, 30.0),
        (plane(overturned=True), "overturned bedding", 45.0, 30.0),
        (plane(dip=0.25), "horizontal bedding", 45.0, 0.0),
        (plane(dip=90.0), "vertical bedding", 45.0, 90.0),
        (plane("cleavage", 359.5, 80.0), "inclined cleavage", 359.5, 80.0),
    ],
)
def test_types_of_planes(reading, kind, azimuth, inclination):
    """Strike by the right-hand rule and dip; horizontal ones are given inclination 0, as the schema asks."""
    points = points_of(reading)
    row = points.layer.fields.iloc[0]
    assert (row["Type"], row["Azimuth"], row["Inclination"]) == (kind, azimuth, inclination)


def test_lines_are_given_by_trend_and_plunge():
    """Intersections and hinges are points of their own types."""
    place = {"latitude_deg": 1.0, "longitude_deg": 2.0}
    lines = [
        Reading(reading_id=name, feature=name, trend_deg=12.5, plunge_deg=3.0, **place)
        for name in ("intersection", "hinge")
    ]
    fields = points_of(*lines).layer.fields
    assert fields["Type"].tolist() == ["bedding-cleavage intersection lineation", "minor fold hinge"]
    assert fields["Azimuth"].tolist() == [12.5, 12.5]
    assert fields["Label"].tolist() == ["3", "3"]


def test_what_is_known_is_handed_on():
    """Accuracy, scatter, outcrop, observer, map unit, note and warnings kept are where the schema has them."""
    row = points_of(
        plane(accuracy_m=4.0, scatter_deg=1.5, outcrop="MG-1", observer="A. Writer", fold="Mossgarth", note="wet",
              other={"MapUnit": "Sl"}, warnings_kept=("outlier",), position_source="tablet"),
    )  # fmt: skip
    fields = row.layer.fields.iloc[0]
    assert (fields["LocationConfidenceMeters"], fields["OrientationConfidenceDegrees"]) == (4.0, 1.5)
    assert (fields["StationsID"], fields["MapUnit"]) == ("MG-1", "Sl")
    assert fields["Notes"] == "fold Mossgarth; wet; kept against: outlier"
    sources = row.tables["DataSources"].set_index("DataSources_ID")["Source"]
    assert sources[fields["OrientationSourceID"]] == "Field reading by A. Writer"
    assert sources[fields["LocationSourceID"]] == "Position: tablet"


def test_what_is_not_known_is_said_in_the_schemas_way():
    """Unknown confidences are -9, the unknown map unit is #null, and identity is unspecified."""
    points = points_of(plane())
    row = points.layer.fields.iloc[0]
    assert (row["LocationConfidenceMeters"], row["OrientationConfidenceDegrees"]) == (UNKNOWN, UNKNOWN)
    assert (row["MapUnit"], row["IdentityConfidence"]) == ("#null", "unspecified")
    assert pd.isna(row["Symbol"])
    assert pd.isna(row["StationsID"])
    assert pd.isna(row["Notes"])
    sources = points.tables["DataSources"].set_index("DataSources_ID")["Source"]
    assert sources[row["OrientationSourceID"]] == "Field reading by an unnamed observer"


def test_readings_without_position_are_left_out_and_counted():
    """Every point has a place: readings without one are counted, struck-out ones are not even that."""
    nowhere = plane(reading_id="b", latitude_deg=None, longitude_deg=None)
    points = points_of(plane(), nowhere, plane(reading_id="c", struck_out=True))
    assert points.layer.fields["OrientationPoints_ID"].tolist() == ["a"]
    assert points.left_out == 1
    assert not np.isnan(points.layer.latitude_deg).any()
    nothing = points_of(nowhere)
    assert (len(nothing.layer), nothing.left_out) == (0, 1)
    assert len(points_of().layer) == 0


def test_long_names_make_short_keys():
    """An id or outcrop longer than a key may be is replaced by one that is short and differs for each."""
    fields = points_of(
        plane(reading_id="x" * 60, outcrop="o" * 60), plane(reading_id="x" * 61, outcrop="o" * 60)
    ).layer.fields
    assert fields["OrientationPoints_ID"].is_unique
    assert (fields["OrientationPoints_ID"].str.len() <= 50).all()
    assert len(set(fields["StationsID"])) == 1
    assert (fields["StationsID"].str.len() <= 50).all()
