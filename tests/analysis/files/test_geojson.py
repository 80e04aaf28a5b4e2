"""GeoJSON: valid by RFC 7946, longitude first, nothing lost but what does not stand."""

from __future__ import annotations

import io
import json
from dataclasses import replace

import fiona
import pyogrio
import pytest
from geojson_pydantic import FeatureCollection, Point
from hypothesis import given
from hypothesis import strategies as st

from analysis.demo import demo_readings
from analysis.errors import CsvError
from analysis.files.geojson import features_of, write_geojson
from analysis.files.maplayers import reading_layers, verdict_layer
from analysis.files.reading import Reading
from analysis.files.table import ReadingTable

ROW = {
    "fold": "Mossgarth fold",
    "verdict": "transected",
    "transection_deg": 9.25,
    "low_deg": None,
    "because": "so",
}


def refuse(text):
    """Fail on NaN and infinities, which JSON does not know."""
    raise AssertionError(text)


def strictly(text):
    return json.loads(text, parse_constant=refuse)


def layers_of(readings):
    return reading_layers(ReadingTable.from_readings(readings))


def bed(**fields):
    return Reading(**{"reading_id": "a", "feature": "bedding", "strike_deg": 45, "dip_deg": 30} | fields)


@pytest.fixture(scope="module")
def demo_file(tmp_path_factory):
    """The demo's readings and one verdict as a file."""
    path = tmp_path_factory.mktemp("geojson") / "demo.geojson"
    rows = [ROW | {"latitude_deg": 47.5, "longitude_deg": -31.0}]
    write_geojson(path, [*layers_of(demo_readings()), verdict_layer(rows)])
    return path


def test_it_is_a_valid_feature_collection(demo_file):
    """An independent model of RFC 7946 accepts the whole file, every geometry is a point, and no crs is named."""
    text = demo_file.read_text(encoding="utf-8")
    collection = FeatureCollection.model_validate_json(text)
    assert len(collection.features) == len(demo_readings()) + 1
    assert all(isinstance(feature.geometry, Point) for feature in collection.features)
    # RFC 7946 section 4: the crs member of 2008 is gone; section 7.1: nothing may take its defined names.
    assert set(strictly(text)) == {"type", "features"}


def test_longitude_stands_first(demo_file):
    """RFC 7946 section 3.1.1: easting, northing; the demo lies at 31 west, 47.5 north."""
    for feature in strictly(demo_file.read_text(encoding="utf-8"))["features"]:
        longitude, latitude = feature["geometry"]["coordinates"]
        assert -31.1 < longitude < -30.9
        assert 47.4 < latitude < 47.6


def test_two_builds_of_gdal_read_it(demo_file):
    """GDAL by way of pyogrio and, another build, by way of fiona find the same points in WGS 84."""
    frame = pyogrio.read_dataframe(demo_file)
    assert frame.crs.to_epsg() == 4326
    assert len(frame) == len(demo_readings()) + 1
    with fiona.open(demo_file) as file:
        assert file.crs.to_epsg() == 4326
        assert [feature.geometry.coordinates for feature in file] == [(p.x, p.y) for p in frame.geometry]


def test_fields_are_those_of_the_reading():
    """Azimuth and inclination are strike and dip, or trend and plunge; nothing is null, times are ISO 8601."""
    plane = bed(dip_quadrant="SE", note="wet", overturned=True, other={"lithology": "slate"}, samples=4)
    line = Reading(reading_id="b", feature="hinge", trend_deg=359.5, plunge_deg=0.5, recorded_at=noon())
    beds, hinges = layers_of([plane, line])
    (one,), (two,) = features_of(beds), features_of(hinges)
    assert one["id"] == "a"
    assert {
        name: one["properties"][name] for name in ("azimuth_deg", "inclination_deg", "dip_direction_deg")
    } == {
        "azimuth_deg": 45.0,
        "inclination_deg": 30.0,
        "dip_direction_deg": 135.0,
    }
    assert one["properties"]["overturned"] is True
    assert one["properties"]["symbol"] == "bedding overturned"
    assert one["properties"]["samples"] == 4
    assert json.loads(one["properties"]["other"]) == {"lithology": "slate"}
    assert one["properties"]["observer"] is None
    assert one["properties"]["recorded_at"] is None
    assert (two["properties"]["azimuth_deg"], two["properties"]["inclination_deg"]) == (359.5, 0.5)
    assert two["properties"]["recorded_at"] == "2026-05-01T12:00:00.000Z"
    assert "overturned" not in two["properties"]


def noon():
    from datetime import UTC, datetime  # noqa: PLC0415 - one moment

    return datetime(2026, 5, 1, 12, tzinfo=UTC)


def test_what_does_not_stand_is_left_out():
    """Struck-out readings and superseded revisions are on no map; a reading without position has no geometry."""
    edited = bed(reading_id="b").revised(at=noon(), dip_deg=31)
    readings = [bed(), bed().struck(at=noon()), bed(reading_id="b"), edited]
    (layer,) = layers_of(readings)
    (feature,) = features_of(layer)
    assert (feature["id"], feature["properties"]["revision"]) == ("b", 2)
    assert feature["geometry"] is None
    assert layer.without_position == 1
    assert layers_of([]) == layers_of([bed(struck_out=True)]) == []


@given(st.data())
def test_any_reading_makes_a_valid_feature(any_reading, data):
    """Whatever a reading holds, its feature is valid, and comes back from JSON with its figures."""
    reading = replace(data.draw(any_reading()), struck_out=False)
    (layer,) = layers_of([reading])
    (feature,) = features_of(layer)
    again = strictly(json.dumps(feature, allow_nan=False))
    FeatureCollection.model_validate({"type": "FeatureCollection", "features": [again]})
    names = ("strike_deg", "dip_deg") if reading.feature.is_plane else ("trend_deg", "plunge_deg")
    assert again["properties"]["azimuth_deg"] == getattr(reading, names[0])
    assert again["properties"]["inclination_deg"] == getattr(reading, names[1])
    assert again["id"] == reading.reading_id
    assert again["properties"]["note"] == (reading.note or None)
    if reading.latitude_deg is None:
        assert again["geometry"] is None
    else:
        assert again["geometry"]["coordinates"] == [reading.longitude_deg, reading.latitude_deg]


def test_a_file_is_there_whole_or_not_at_all(tmp_path):
    """What goes wrong in the middle leaves the old file and no draft; a folder that is not there is named."""
    path = tmp_path / "a.geojson"
    path.write_text("old", encoding="utf-8")
    (layer,) = layers_of([bed()])
    layer.fields["note"] = [io.BytesIO()]  # nothing that JSON could hold
    with pytest.raises(TypeError):
        write_geojson(path, [layer])
    assert [child.name for child in tmp_path.iterdir()] == ["a.geojson"]
    assert path.read_text(encoding="utf-8") == "old"
    with pytest.raises(CsvError, match="nowhere"):
        write_geojson(tmp_path / "nowhere" / "a.geojson", [])
