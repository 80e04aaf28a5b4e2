"""hingewise export: formats, schemas, choices of folds, and what is said of what is left out."""

from __future__ import annotations

import json

import pyogrio
import pytest

from analysis.demo import demo_readings
from analysis.files.csvfile import read_readings, write_readings
from analysis.files.join import join


@pytest.fixture
def demo(tmp_path):
    """The demo's readings with one edited, one struck out and one that lost its position, as a file."""
    readings = demo_readings()
    when = readings[-1].recorded_at
    readings += [
        readings[0].revised(at=when, dip_deg=55.0),
        readings[1].struck(at=when),
        readings[2].revised(at=when, latitude_deg=None, longitude_deg=None),
    ]
    path = tmp_path / "demo.csv"
    write_readings(path, readings)
    return path


def test_geopackage_has_layers_and_the_verdicts_of_check(run, demo, tmp_path):
    """The layer of verdicts has the figures that `check --json` prints, at the folds' mean positions."""
    out = tmp_path / "out.gpkg"
    result = run("export", demo, "-o", out)
    assert result.exit_code == 0, result.output
    assert f"119 readings and 3 verdicts in {out}" in result.stdout
    assert "1 reading without position: in the file, with no point on the map" in result.stderr
    verdicts = pyogrio.read_dataframe(out, layer="verdicts").set_index("fold")
    for check in json.loads(run("check", demo, "--json").stdout):
        row = verdicts.loc[check["fold"]]
        assert row["verdict"] == check["verdict"]
        assert row["transection_deg"] == pytest.approx(check["transection_deg"], abs=1e-6)
        assert [row["low_deg"], row["high_deg"]] == pytest.approx(check["interval_deg"], abs=1e-6)
        assert row["readings"] == sum(
            check["readings"][name] for name in ("bedding", "cleavage", "intersection")
        )
        assert row["because"] == " ".join(check["because"])
        assert (row["warnings"] or "") == " ".join(check["warnings"])
        assert 47.4 < row.geometry.y < 47.6
        assert -31.1 < row.geometry.x < -30.9
    beds = pyogrio.read_dataframe(out, layer="bedding").set_index("reading_id")
    assert beds.loc[demo_readings()[0].reading_id, "inclination_deg"] == 55.0
    assert demo_readings()[1].reading_id not in beds.index
    assert beds.loc[demo_readings()[2].reading_id].geometry is None


def test_settings_reach_the_verdicts(run, demo, tmp_path):
    """The margin and the confidence asked for are those of the verdicts."""
    out = tmp_path / "out.gpkg"
    assert run("export", demo, "-o", out, "--margin", 3, "--confidence", 0.9).exit_code == 0
    verdicts = pyogrio.read_dataframe(out, layer="verdicts")
    assert set(verdicts["margin_deg"]) == {3.0}
    assert set(verdicts["confidence"]) == {0.9}


def test_geojson_has_the_same(run, demo, tmp_path):
    """GeoJSON holds every reading that stands and every verdict."""
    out = tmp_path / "OUT.GeoJSON"
    result = run("export", demo, "-o", out)
    assert result.exit_code == 0, result.output
    features = json.loads(out.read_text(encoding="utf-8"))["features"]
    counts = {}
    for feature in features:
        name = feature["properties"]["layer"]
        counts[name] = counts.get(name, 0) + 1
    standing = join(read_readings(demo)[0]).standing
    assert counts.pop("verdicts") == 3
    assert counts == {
        name: sum(reading.feature == name for reading in standing)
        for name in ("bedding", "cleavage", "intersection")
    }


def test_csv_is_the_file_of_readings_with_every_revision(run, demo, tmp_path):
    """CSV keeps what a map leaves out: earlier revisions and what is struck out."""
    out = tmp_path / "out.csv"
    assert run("export", demo, "-o", out).exit_code == 0
    assert read_readings(out)[0] == read_readings(demo)[0]


def test_a_part_is_not_written_over_the_whole(run, demo):
    """An export goes to another file than it was read from: what is not exported would be gone."""
    before = demo.read_bytes()
    result = run("export", demo, "--fold", "Mossgarth fold", "-o", demo)
    assert result.exit_code == 2
    assert result.stderr.count("\n") == 1
    assert "would be written over" in result.stderr
    assert demo.read_bytes() == before


def test_a_reading_takes_its_history_along(run, demo, tmp_path):
    """A reading that was moved to another fold is exported with that fold, all its revisions, and not with the old."""
    readings = read_readings(demo)[0]
    moved = readings[5].revised(at=readings[5].recorded_at, fold="Mossgarth Edge fold")
    write_readings(demo, [*readings, moved])
    out = tmp_path / "out.csv"
    run("export", demo, "-o", out, "--fold", "Mossgarth Edge fold")
    found = [reading for reading in read_readings(out)[0] if reading.reading_id == moved.reading_id]
    assert found == [readings[5], moved]
    run("export", demo, "-o", out, "--fold", "Mossgarth fold")
    assert moved.reading_id not in {reading.reading_id for reading in read_readings(out)[0]}


@pytest.mark.parametrize("ending", ["gpkg", "geojson", "csv"])
def test_one_fold_or_outcrop(run, demo, tmp_path, ending):
    """Only the readings of the fold or outcrop asked for are written; a name that is not there is refused."""
    out = tmp_path / f"out.{ending}"
    assert run("export", demo, "-o", out, "--fold", "Low Mossgarth fold").exit_code == 0
    text = out.read_bytes()
    assert b"LM-01" in text
    assert b"MG-01" not in text
    assert run("export", demo, "-o", out, "--outcrop", "MG-01").exit_code == 0
    text = out.read_bytes()
    assert b"MG-01" in text
    assert b"LM-01" not in text
    out.unlink()
    result = run("export", demo, "-o", out, "--fold", "Nowhere")
    assert result.exit_code == 2
    assert "--fold" in result.stderr
    assert not out.exists()


def test_gems(run, demo, tmp_path):
    """The schema's layer is written to either map format; what has no position is counted; CSV is refused."""
    out = tmp_path / "out.gpkg"
    result = run("export", demo, "-o", out, "--schema", "gems")
    assert result.exit_code == 0, result.output
    assert f"118 orientation points in {out}" in result.stdout
    assert "1 reading without position left out" in result.stderr
    assert set(pyogrio.list_layers(out)[:, 0]) == {"OrientationPoints", "DataSources", "Glossary"}
    out = tmp_path / "out.geojson"
    assert run("export", demo, "-o", out, "--schema", "gems").exit_code == 0
    features = json.loads(out.read_text(encoding="utf-8"))["features"]
    assert len(features) == 118
    assert features[0]["properties"]["Type"] == "inclined bedding"
    result = run("export", demo, "-o", tmp_path / "out.csv", "--schema", "gems")
    assert result.exit_code == 2
    assert ".gpkg" in result.stderr


def test_what_cannot_be_exported_is_said_in_one_line(run, demo, tmp_path):
    """An ending that names no format, nothing that stands, nothing with a position, a folder that is not there."""
    struck = tmp_path / "struck.csv"
    write_readings(struck, [demo_readings()[0].struck(at=None)])
    bare = tmp_path / "bare.csv"
    bare.write_text("feature,strike_deg,dip_deg\nbedding,45,30\n", encoding="utf-8")
    for arguments, said in (
        ((demo, "-o", tmp_path / "out.shp"), ".gpkg"),
        ((struck, "-o", tmp_path / "out.gpkg"), "no reading stands"),
        ((bare, "-o", tmp_path / "out.gpkg", "--schema", "gems"), "latitude_deg"),
        ((demo, "-o", tmp_path / "nowhere" / "out.gpkg"), "lies in no folder"),
        ((demo, "-o", tmp_path / "nowhere" / "out.geojson"), "lies in no folder"),
    ):
        result = run("export", *arguments)
        assert result.exit_code == 2, result.output
        assert said in result.stderr
        assert len(result.stderr.splitlines()) == 1
    one = run("export", bare, "-o", tmp_path / "out.csv")
    assert "1 revision written" in one.stdout
    assert run("export", bare, "-o", tmp_path / "out.gpkg").exit_code == 0


def test_a_fold_or_outcrop_that_is_not_there_is_answered_with_those_that_are(run, demo, tmp_path):
    """The names that could have been meant stand in the error, for an outcrop those of the fold asked for."""
    out = tmp_path / "out.gpkg"
    result = run("export", demo, "-o", out, "--fold", "Nowhere")
    assert result.exit_code == 2
    assert (
        "there is no fold 'Nowhere'; expected one of: 'Mossgarth fold', 'Low Mossgarth fold'" in result.stderr
    )
    result = run("export", demo, "-o", out, "--fold", "Mossgarth Edge fold", "--outcrop", "MG-01")
    assert result.exit_code == 2
    assert "'ME-01'" in result.stderr
    assert "'MG-02'" not in result.stderr
    assert not out.exists()
