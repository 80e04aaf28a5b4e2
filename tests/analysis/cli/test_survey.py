"""hingewise survey: the map of an archive, by fold, square and window."""

from __future__ import annotations

import json

import pyogrio
import pytest

from analysis.demo import demo_readings
from analysis.files.csvfile import write_readings


@pytest.fixture
def archive(tmp_path):
    """The demo's readings in three files, with an edit in the last of them."""
    folder = tmp_path / "archive"
    folder.mkdir()
    readings = demo_readings()
    write_readings(folder / "a.csv", readings[:50])
    write_readings(folder / "b.csv", readings[40:])
    write_readings(folder / "c.csv", [readings[0].revised(at=readings[0].recorded_at, dip_deg=56.0)])
    return folder


def test_the_map_has_the_verdicts_of_check(run, archive, tmp_path):
    """The verdict of each fold is that of `check` on the same files, with its mean attitudes in layers of their own."""
    out = tmp_path / "map.gpkg"
    result = run("survey", archive, "-o", out)
    assert result.exit_code == 0, result.output
    assert f"3 folds, {len(demo_readings())} readings, in {out}" in result.stdout
    assert result.stderr == ""
    names = set(pyogrio.list_layers(out)[:, 0])
    assert names == {"verdicts", "mean hinge", "mean cleavage", "mean intersection", "layer_styles"}
    verdicts = pyogrio.read_dataframe(out, layer="verdicts").set_index("fold")
    hinges = pyogrio.read_dataframe(out, layer="mean hinge").set_index("fold")
    assert hinges.crs.to_epsg() == 4326
    checks = json.loads(run("check", *sorted(archive.iterdir()), "--json").stdout)
    assert len(checks) == len(verdicts) == 3
    for check in checks:
        row = verdicts.loc[check["fold"]]
        assert row["verdict"] == check["verdict"]
        assert row["transection_deg"] == pytest.approx(check["transection_deg"], abs=1e-6)
        assert [row["low_deg"], row["high_deg"]] == pytest.approx(check["interval_deg"], abs=1e-6)
        hinge = hinges.loc[check["fold"]]
        assert hinge["azimuth_deg"] == pytest.approx(check["hinge"]["trend_deg"], abs=1e-6)
        assert hinge["inclination_deg"] == pytest.approx(check["hinge"]["plunge_deg"], abs=1e-6)
        assert hinge.geometry == row.geometry


def test_squares_and_windows_as_geojson(run, archive, tmp_path):
    """By square and by window the readings are those of the squares, and the workers do not matter."""
    counts = {}
    for name, options in (("square", ()), ("window", ("--moving",))):
        out = tmp_path / f"{name}.geojson"
        result = run("survey", archive, "-o", out, "--cell", 1, *options, "--workers", 2)
        assert result.exit_code == 0, result.output
        features = json.loads(out.read_text(encoding="utf-8"))["features"]
        rows = [one["properties"] for one in features if one["properties"]["layer"] == "verdicts"]
        assert f"{len(rows)} {name}s" in result.stdout
        counts[name] = [row["readings"] for row in rows]
    assert sum(counts["square"]) == len(demo_readings())
    assert sum(counts["window"]) > sum(counts["square"])
    assert len(counts["window"]) == len(counts["square"])


def test_what_is_left_out_is_said(run, archive, tmp_path):
    """Bad rows, conflicts and readings without position are told on the error stream."""
    reading = demo_readings()[7]
    clash = reading.revised(at=reading.recorded_at, dip_deg=11.0)
    other = reading.revised(at=reading.recorded_at, dip_deg=12.0, latitude_deg=None, longitude_deg=None)
    write_readings(archive / "d.csv", [clash])
    write_readings(archive / "e.csv", [other])
    (archive / "f.csv").write_text("feature,strike_deg,dip_deg\nbedding,45,99\n", encoding="utf-8")
    result = run("survey", archive, "-o", tmp_path / "map.gpkg", "--cell", 1)
    assert result.exit_code == 0
    assert "f.csv, line 2, column dip_deg" in result.stderr
    assert "1 row was left out" in result.stderr
    assert f"conflict: {reading.reading_id}, revision 2" in result.stderr
    assert "in no square: 1 reading" in result.stderr


def test_what_cannot_be_surveyed_is_said_in_one_line(run, archive, tmp_path):
    """No files, no format, a window without width, a width that no square has, no such path, no scheduler."""
    empty = tmp_path / "empty"
    empty.mkdir()
    out = tmp_path / "map.gpkg"
    for arguments, said in (
        ((empty, "-o", out), f"{empty}: there is no file of readings"),
        ((archive, "-o", tmp_path / "nowhere" / "map.gpkg"), "lies in no folder"),
        ((archive, "-o", tmp_path / "map.csv"), ".gpkg"),
        ((archive, "-o", out, "--moving"), "--cell"),
        ((archive, "-o", out, "--cell", 0), "--cell"),
        ((archive, "-o", out, "--scheduler", "no address"), "--scheduler"),
    ):
        result = run("survey", *arguments)
        assert result.exit_code == 2, result.output
        assert said in result.stderr
        assert len(result.stderr.splitlines()) == 1
    assert run("survey", tmp_path / "nowhere", "-o", out).exit_code == 2
    assert run("survey", archive, "-o", out, "--workers", 0).exit_code == 2
    (empty / "none.csv").write_text("feature,strike_deg,dip_deg\n", encoding="utf-8")
    assert "no reading stands" in run("survey", empty, "-o", out).stderr
    (empty / "none.csv").write_text("feature,strike_deg,dip_deg\nbedding,45,30\n", encoding="utf-8")
    assert (
        "--cell: no reading that stands has a position" in run("survey", empty, "-o", out, "--cell", 2).stderr
    )
    assert not out.exists()
