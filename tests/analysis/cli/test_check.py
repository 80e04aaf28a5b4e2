"""hingewise check: its JSON, its text, its choice of folds and outcrops."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest

from analysis.orient.vectors import axis_angle_deg, line_vector, pole_vector
from tests.analysis.cli.conftest import HEADER

# The keys that the issue "First light" lists, in its order.
KEYS = [
    "fold",
    "readings",
    "hinge",
    "cleavage",
    "intersection",
    "transection_deg",
    "sense",
    "se_deg",
    "df",
    "fixed_interval_deg",
    "interval_deg",
    "verdict",
    "because",
    "more_readings",
    "next_reading",
    "warnings",
]
INNER = {
    "readings": ["bedding", "cleavage", "intersection", "hinge", "outcrops"],
    "hinge": ["trend_deg", "plunge_deg", "from", "ellipse_deg"],
    "cleavage": ["strike_deg", "dip_deg", "ellipse_deg"],
    "intersection": ["trend_deg", "plunge_deg", "ellipse_deg", "measured", "computed"],
    "more_readings": ["total", "low", "high", "bedding", "cleavage", "intersection", "hinge"],
    "next_reading": ["feature", "where"],
}
VERDICTS = {"transected", "axial planar", "keep reading", "cannot be settled"}


def refuse(text):
    """Fail on a constant that JSON does not know."""
    raise AssertionError(text)


def strictly(text):
    """Read JSON; NaN and infinities, which JSON does not know, are errors."""
    return json.loads(text, parse_constant=refuse)


def checks_of(result):
    assert result.exit_code == 0, result.output
    return strictly(result.stdout)


def test_json_has_exactly_the_documented_keys_in_order(run, two_folds):
    """Each fold is one object with the keys of the issue, and no more, in that order."""
    checks = checks_of(run("check", two_folds, "--json"))
    assert [one["fold"] for one in checks] == ["invented 1", "Low fold"]
    seen = set()
    for one in checks:
        assert list(one) == KEYS
        assert one["verdict"] in VERDICTS
        for name, keys in INNER.items():
            if one[name] is not None:
                assert list(one[name]) == keys
                seen.add(name)
        for name in ("because", "warnings"):
            assert all(isinstance(sentence, str) and sentence for sentence in one[name])
        assert one["because"]
    assert seen == set(INNER)


def test_json_and_text_give_the_same_verdict(run, two_folds):
    """The known fold comes out transected, clockwise, near its 12 degrees; the text says the same."""
    first, second = checks_of(run("check", two_folds, "--json"))
    assert first["verdict"] == "transected"
    assert first["sense"] == "clockwise"
    assert first["interval_deg"][0] <= 12.0 <= first["interval_deg"][1]
    assert first["interval_deg"][0] > 0.0
    assert first["readings"] == {
        "bedding": 20,
        "cleavage": 15,
        "intersection": 4,
        "hinge": 0,
        "outcrops": 3,
    }
    assert second["verdict"] == "keep reading"
    assert second["interval_deg"] is None
    text = run("check", two_folds).stdout
    assert f"Transected: cleavage {first['transection_deg']:.0f}° clockwise of the hinge" in text
    assert "Low fold\n  Keep reading" in text


def test_text_describes_the_cloud_of_bedding(run, two_folds):
    """The text has one line with K, C, P, G, R and the shares of bedding within 10 and 20 degrees of the girdle."""
    table = run("check", two_folds, "--fold", "invented 1").stdout
    (line,) = [line for line in table.splitlines() if "Bedding poles" in line]
    words = line.replace(",", " ").replace(";", " ").split()
    values = {name: float(words[words.index(name) + 1]) for name in "KCPGR"}
    assert values["P"] + values["G"] + values["R"] == pytest.approx(1.0, abs=0.02)
    assert 0.0 < values["K"] < 1.0  # a girdle, not a cluster
    assert "% within 10° of the girdle" in line
    assert "% within 20°" in line


def test_a_fold_can_be_chosen(run, two_folds):
    """--fold leaves out the other folds."""
    (one,) = checks_of(run("check", two_folds, "--json", "--fold", "Low fold"))
    assert one["fold"] == "Low fold"


def test_an_outcrop_can_be_chosen(run, two_folds):
    """--outcrop leaves out the readings of other outcrops, and folds that have none there."""
    (one,) = checks_of(run("check", two_folds, "--json", "--outcrop", "O02", "--fold", "invented 1"))
    assert one["readings"]["outcrops"] == 1
    assert one["readings"]["bedding"] == 7
    assert [c["fold"] for c in checks_of(run("check", two_folds, "--json", "--outcrop", "O03"))] == [
        "invented 1"
    ]


def test_margin_and_confidence_count(run, two_folds):
    """A wider margin makes the large angle 'smaller than M', a higher confidence widens the interval."""
    (narrow,) = checks_of(run("check", two_folds, "--json", "--fold", "invented 1"))
    (wide,) = checks_of(
        run("check", two_folds, "--json", "--fold", "invented 1", "--margin", 40, "--confidence", 0.99)
    )
    assert wide["interval_deg"][1] > narrow["interval_deg"][1]
    assert "Measurable, but smaller than 40°." in wide["because"]


def test_files_are_read_together(run, tmp_path, two_folds):
    """Two files of one fold give the check of both together."""
    lines = two_folds.read_text(encoding="utf-8").splitlines(keepends=True)
    for k in (0, 1):
        (tmp_path / f"{k}.csv").write_text("".join([lines[0], *lines[1 + k :: 2]]), encoding="utf-8")
    whole = checks_of(run("check", two_folds, "--json"))
    parts = checks_of(run("check", tmp_path / "0.csv", tmp_path / "1.csv", "--json"))
    key = {one["fold"]: one for one in parts}
    for one in whole:
        assert key[one["fold"]]["transection_deg"] == pytest.approx(one["transection_deg"], abs=1e-6)
        assert key[one["fold"]]["verdict"] == one["verdict"]


def test_a_file_with_only_a_header_holds_no_fold(run, tmp_path):
    """No readings give an empty array, and a sentence."""
    path = tmp_path / "bare.csv"
    path.write_text(HEADER, encoding="utf-8")
    assert checks_of(run("check", path, "--json")) == []
    assert run("check", path).stdout == "No readings stand in these files.\n"


@pytest.mark.parametrize(
    "rows",
    [
        ["bedding,000,00,,"],
        ["bedding,360,90,,"] * 2,
        ["bedding,000,30,,", "bedding,180,30,,"],
        ["cleavage,010,90,,"],
        ["hinge,,,000,00"],
        ["intersection,,,360,90"],
        ["bedding,090,00,,"] * 8 + ["cleavage,090,90,,"] * 8,
        ["bedding,000,90,,", "bedding,180,90,,"] * 4 + ["cleavage,000,90,,", "cleavage,180,90,,"] * 4,
        ["hinge,,,000,00"] * 8 + ["cleavage,000,90,,"] * 8,
        ["bedding,000,45,,", "bedding,180,45,,"] * 4 + ["cleavage,000,90,,"] * 8 + ["intersection,,,0,0"] * 6,
    ],
)
def test_json_is_json_at_the_edges(run, tmp_path, rows):
    """Single, equal, flat, vertical and opposite readings give valid JSON, sentences and no NaN."""
    path = tmp_path / "edge.csv"
    path.write_text(HEADER + "".join(f"F,A,{row}\n" for row in rows), encoding="utf-8")
    (one,) = checks_of(run("check", path, "--json"))
    assert list(one) == KEYS
    assert one["because"]
    for name in ("interval_deg", "fixed_interval_deg"):
        if one[name] is not None:
            low, high = one[name]
            assert -90.0 <= low <= high <= 90.0
    text = run("check", path)
    assert text.exit_code == 0
    assert "360/" not in text.stdout


def test_a_perfect_axial_planar_fold_is_not_called_transected(run, tmp_path):
    """Whole-degree readings that fit without any scatter end as axial planar, not as transected by rounding."""
    rows = [f"bedding,{strike:03d},{dip},," for dip in (30, 45, 60, 75) for strike in (0, 180)]
    path = tmp_path / "perfect.csv"
    path.write_text(
        HEADER + "".join(f"F,A,{row}\n" for row in [*rows, *["cleavage,000,90,,"] * 8]), encoding="utf-8"
    )
    (one,) = checks_of(run("check", path, "--json"))
    assert one["verdict"] == "axial planar"
    assert abs(one["transection_deg"]) < 1e-6
    assert one["interval_deg"][0] < 0.0 < one["interval_deg"][1]


def test_azimuths_that_round_to_360_are_written_000(run, tmp_path):
    """A hinge that trends 359.9 is printed as 000."""
    lines = "".join(f"F,A,hinge,,,{359.8 + 0.05 * k:.2f},10\n" for k in range(3))
    path = tmp_path / "north.csv"
    path.write_text(HEADER + lines, encoding="utf-8")
    assert "Hinge          000/10" in run("check", path).stdout


def test_an_outlier_is_named_and_kept(run, tmp_path, two_folds):
    """One reading far off is named with its file and line, counts all the same, and the check without it is told."""
    path = tmp_path / "with.csv"
    columns = two_folds.read_text(encoding="utf-8").splitlines()[0].split(",")
    cells = {
        "reading_id": "odd",
        "fold": "invented 1",
        "outcrop": "O01",
        "feature": "cleavage",
        "strike_deg": "140",
        "dip_deg": "20",
    }
    body = two_folds.read_text(encoding="utf-8")
    path.write_text(body + ",".join(cells.get(name, "") for name in columns) + "\n", encoding="utf-8")
    (one,) = checks_of(run("check", path, "--json", "--fold", "invented 1"))
    assert one["readings"]["cleavage"] == 16
    (warning,) = [text for text in one["warnings"] if "far off" in text]
    assert f"line {len(body.splitlines()) + 1} " in warning
    assert "without: Transected" in warning


def test_rows_left_out_are_named_on_the_error_stream(run, tmp_path):
    """A bad row is named with its line, the others are used, and --strict refuses the file."""
    path = tmp_path / "bad.csv"
    path.write_text(HEADER + "F,A,bedding,100,95,,\nF,A,bedding,100,40,,\n", encoding="utf-8")
    result = run("check", path, "--json")
    assert checks_of(result)[0]["readings"]["bedding"] == 1
    assert "line 2" in result.stderr
    assert "1 row was left out" in result.stderr
    strict = run("check", path, "--strict")
    assert strict.exit_code == 2
    assert len(strict.stderr.splitlines()) == 1


def test_hinge_and_cleavage_of_the_json_are_the_fitted_ones(run, two_folds):
    """The angles in the JSON lie within their own ellipses of the truth: hinge 040/10, cleavage turned 12 degrees."""
    (one,) = checks_of(run("check", two_folds, "--json", "--fold", "invented 1"))
    hinge = line_vector(one["hinge"]["trend_deg"], one["hinge"]["plunge_deg"])
    assert axis_angle_deg(hinge, line_vector(40.0, 10.0)) < one["hinge"]["ellipse_deg"][0]
    pole = pole_vector(one["cleavage"]["strike_deg"], one["cleavage"]["dip_deg"])
    size = math.degrees(math.asin(abs(float(np.dot(hinge, pole)))))
    assert size == pytest.approx(abs(one["transection_deg"]), abs=1e-5)


def test_many_rows_are_checked(run, tmp_path):
    """A file of 1e5 rows is read and checked, and the known 5 degrees come out."""
    path = tmp_path / "many.csv"
    made = run(
        "simulate", "--bedding", 60_000, "--cleavage", 40_000, "--transection", 5, "--seed", 2, "-o", path
    )
    assert made.exit_code == 0, made.output
    (one,) = checks_of(run("check", path, "--json"))
    assert one["readings"]["bedding"] + one["readings"]["cleavage"] == 100_000
    assert one["transection_deg"] == pytest.approx(5.0, abs=5.0 * one["se_deg"])
    assert one["se_deg"] < 0.1
    assert one["verdict"] == "transected"
