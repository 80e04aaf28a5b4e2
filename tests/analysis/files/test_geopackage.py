"""GeoPackage: two builds of GDAL find layers, coordinate system, points, fields and styles."""

from __future__ import annotations

import sqlite3
import xml.etree.ElementTree as ET
from datetime import UTC, datetime

import fiona
import numpy as np
import pandas as pd
import pyogrio
import pytest

from analysis.demo import demo_readings
from analysis.errors import CsvError, SettingError
from analysis.files.geopackage import write_geopackage
from analysis.files.maplayers import layer_of_rows, reading_layers, verdict_layer
from analysis.files.reading import Reading
from analysis.files.symbols import VERDICT_MARKS
from analysis.files.table import ReadingTable

NOON = datetime(2026, 5, 1, 12, 0, 0, 250000, tzinfo=UTC)
FULL = Reading(
    reading_id="full", feature="cleavage", strike_deg=359.5, dip_deg=89.75, recorded_at=NOON, observer="A. Writer",
    fold="Mossgarth", outcrop="MG-1", note='wet, "quoted"\nÜ', samples=12, scatter_deg=1.5, latitude_deg=-12.25,
    longitude_deg=179.5, altitude_m=-3.5, accuracy_m=4.0, warnings_kept=("outlier", "flat-plane"),
    other={"lithology": "slate"},
)  # fmt: skip
NOWHERE = Reading(reading_id="nowhere", feature="cleavage", strike_deg=10, dip_deg=80)


def parsed(text):
    return ET.fromstring(text)  # noqa: S314 - written here


def layers_of(readings):
    return reading_layers(ReadingTable.from_readings(readings))


def verdict_rows(*verdicts):
    return [
        {
            "fold": f"fold {k}",
            "verdict": verdict,
            "label": verdict,
            "transection_deg": None,
            "readings": k,
            "latitude_deg": 1.0,
            "longitude_deg": 2.0,
        }
        for k, verdict in enumerate(verdicts)
    ]


@pytest.fixture(scope="module")
def demo_file(tmp_path_factory):
    """The demo's readings and a verdict of each kind as a file."""
    path = tmp_path_factory.mktemp("gpkg") / "demo.gpkg"
    write_geopackage(path, [*layers_of(demo_readings()), verdict_layer(verdict_rows(*VERDICT_MARKS))])
    return path


def test_layers_points_and_coordinate_system(demo_file):
    """One layer a feature and one of verdicts, all points in EPSG:4326, by GDAL through pyogrio."""
    names = dict(pyogrio.list_layers(demo_file).tolist())
    assert names == {
        "bedding": "Point", "cleavage": "Point", "intersection": "Point", "verdicts": "Point", "layer_styles": None,
    }  # fmt: skip
    readings = {reading.reading_id: reading for reading in demo_readings()}
    seen = set()
    for name in ("bedding", "cleavage", "intersection"):
        frame = pyogrio.read_dataframe(demo_file, layer=name)
        assert frame.crs.to_epsg() == 4326
        for row in frame.itertuples():
            reading = readings[row.reading_id]
            azimuth = reading.strike_deg if reading.feature.is_plane else reading.trend_deg
            inclination = reading.dip_deg if reading.feature.is_plane else reading.plunge_deg
            assert (row.geometry.x, row.geometry.y) == (reading.longitude_deg, reading.latitude_deg)
            assert (row.azimuth_deg, row.inclination_deg, row.fold) == (azimuth, inclination, reading.fold)
            seen.add(row.reading_id)
    assert seen == set(readings)


def test_another_build_of_gdal_reads_the_same(demo_file):
    """Fiona, which brings a GDAL of its own, finds the same system, geometry, fields and values."""
    assert fiona.__gdal_version__ != pyogrio.__gdal_version_string__
    for name in ("bedding", "verdicts"):
        frame = pyogrio.read_dataframe(demo_file, layer=name)
        with fiona.open(demo_file, layer=name) as file:
            assert file.crs.to_epsg() == 4326
            assert file.schema["geometry"] == "Point"
            assert list(file.schema["properties"]) == [
                column for column in frame.columns if column != "geometry"
            ]
            rows = list(file)
        assert [row.geometry.coordinates for row in rows] == [(p.x, p.y) for p in frame.geometry]
        for column in (
            ("azimuth_deg", "inclination_deg", "label") if name == "bedding" else ("verdict", "readings")
        ):
            assert [row.properties[column] for row in rows] == frame[column].tolist()


def test_every_field_of_a_reading_comes_back(tmp_path):
    """Texts, numbers, times to the millisecond in UTC, flags and unknown columns are read back unchanged."""
    path = tmp_path / "full.gpkg"
    write_geopackage(path, layers_of([FULL, NOWHERE]))
    frame = pyogrio.read_dataframe(path, layer="cleavage").set_index("reading_id")
    full, nowhere = frame.loc["full"], frame.loc["nowhere"]
    expected = {
        "revision": 1, "feature": "cleavage", "azimuth_deg": 359.5, "inclination_deg": 89.75,
        "dip_direction_deg": 89.5, "overturned": False, "observer": "A. Writer", "fold": "Mossgarth",
        "outcrop": "MG-1", "note": 'wet, "quoted"\nÜ', "samples": 12, "scatter_deg": 1.5, "altitude_m": -3.5,
        "accuracy_m": 4.0, "warnings_kept": "outlier flat-plane", "other": '{"lithology": "slate"}',
        "symbol": "cleavage vertical", "label": "90", "north_reference": "true",
    }  # fmt: skip
    assert {name: full[name] for name in expected} == expected
    assert full["recorded_at"] == pd.Timestamp(NOON)
    assert (full.geometry.x, full.geometry.y) == (179.5, -12.25)
    assert nowhere.geometry is None
    assert pd.isna(nowhere["samples"])
    assert pd.isna(nowhere["note"])


def test_a_layer_in_which_nothing_has_a_position(tmp_path):
    """Readings without any position make a layer of points all the same."""
    path = tmp_path / "none.gpkg"
    nowhere = verdict_rows("transected")[0] | {"latitude_deg": None, "longitude_deg": None}
    write_geopackage(path, [*layers_of([NOWHERE]), verdict_layer([nowhere])])
    assert dict(pyogrio.list_layers(path).tolist())["cleavage"] == "Point"
    assert pyogrio.read_dataframe(path, layer="cleavage").geometry.isna().all()
    info = pyogrio.read_info(path, layer="verdicts")
    types = dict(zip(info["fields"], info["dtypes"], strict=True))
    assert types["transection_deg"] == "float64"


def test_styles_are_stored_for_every_layer_of_points(demo_file):
    """`layer_styles` has a default style a layer, in QML and SLD, that turns the symbols by the azimuth."""
    with sqlite3.connect(demo_file) as database:
        rows = database.execute(
            "SELECT f_table_name, f_geometry_column, styleQML, styleSLD, useAsDefault, update_time FROM layer_styles"
        ).fetchall()
        geometry = dict(
            database.execute("SELECT table_name, column_name FROM gpkg_geometry_columns").fetchall()
        )
        (kind,) = database.execute(
            "SELECT data_type FROM gpkg_contents WHERE table_name = 'layer_styles'"
        ).fetchone()
        checked = database.execute("PRAGMA integrity_check").fetchone()
    database.close()
    assert checked == ("ok",)
    assert kind == "attributes"
    assert {row[0]: row[1] for row in rows} == geometry
    assert all(row[4] == 1 for row in rows)
    for name, _, qml, sld, *_ in rows:
        frame = pyogrio.read_dataframe(demo_file, layer=name)
        renderer = parsed(qml).find("renderer-v2")
        field = renderer.get("attr")
        values = {category.get("value") for category in renderer.iter("category")}
        assert set(frame[field]) <= values
        assert len(list(renderer.find("symbols"))) == len(values)
        turned = {option.get("value") for option in renderer.iter("Option") if option.get("name") == "field"}
        rotations = {one.text for one in parsed(sld).iter() if one.tag.endswith("}PropertyName")}
        if name == "verdicts":
            assert turned == set()
            assert rotations == {"verdict", "label"}
        else:
            assert turned == {"azimuth_deg"}
            assert rotations == {"symbol", "azimuth_deg", "label"}


def test_the_version_is_one_that_older_software_opens(demo_file):
    """The header says GeoPackage 1.2 (application id GPKG, user version 10200; OGC 12-128r14, requirement 2)."""
    with sqlite3.connect(demo_file) as database:
        found = [
            database.execute(f"PRAGMA {name}").fetchone()[0] for name in ("application_id", "user_version")
        ]
    database.close()
    assert found == [0x47504B47, 10200]


def test_an_old_file_is_replaced_whole(tmp_path, demo_file):
    """Writing over a file leaves nothing of it; nothing to write and a missing folder are said, and leave it be."""
    path = tmp_path / "a.gpkg"
    path.write_bytes(demo_file.read_bytes())
    write_geopackage(path, layers_of([FULL]))
    assert set(pyogrio.list_layers(path)[:, 0]) == {"cleavage", "layer_styles"}
    before = path.read_bytes()
    with pytest.raises(SettingError, match="nothing to write"):
        write_geopackage(path, [])
    assert path.read_bytes() == before
    assert [child.name for child in tmp_path.iterdir()] == ["a.gpkg"]
    with pytest.raises(CsvError, match="cannot be written") as caught:
        write_geopackage(tmp_path / "nowhere" / "a.gpkg", layers_of([FULL]))
    assert (
        str(caught.value).count(str(tmp_path)) == 1
    )  # where it is; the draft beside it is nobody's business


def test_plain_tables_stand_beside_the_layers(tmp_path):
    """A table without points is a table of attributes."""
    path = tmp_path / "a.gpkg"
    layer = layer_of_rows("places", [{"name": "x", "latitude_deg": 1.0, "longitude_deg": 2.0}])
    write_geopackage(path, [layer], {"Terms": pd.DataFrame({"Term": ["slate"], "Number": [np.nan]})})
    assert dict(pyogrio.list_layers(path).tolist()) == {"places": "Point", "Terms": None}
    assert pyogrio.read_dataframe(path, layer="Terms")["Term"].tolist() == ["slate"]
