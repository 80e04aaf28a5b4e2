"""hingewise simulate: invented folds that check can read."""

from __future__ import annotations

import csv
import io
import json

import pytest


def rows_of(result):
    assert result.exit_code == 0, result.output
    return list(csv.DictReader(io.StringIO(result.stdout)))


def test_the_same_seed_gives_the_same_file(run):
    """Two runs agree to the byte; another seed differs."""
    first, second = (run("simulate", "--seed", 3).stdout for _ in range(2))
    assert first == second
    assert run("simulate", "--seed", 4).stdout != first


def test_counts_folds_and_outcrops_are_those_asked_for(run):
    """Every fold has the readings asked for, dealt in turn over the outcrops, and says that it is invented."""
    rows = rows_of(
        run("simulate", "--bedding", 7, "--cleavage", 4, "--intersection", 3, "--folds", 2, "--outcrops", 3)
    )
    assert len(rows) == 28
    for fold in ("invented 1", "invented 2"):
        some = [row for row in rows if row["fold"] == fold]
        counts = {
            f: sum(row["feature"] == f for row in some) for f in ("bedding", "cleavage", "intersection")
        }
        assert counts == {"bedding": 7, "cleavage": 4, "intersection": 3}
        assert {row["outcrop"] for row in some} == {"O01", "O02", "O03"}
    assert "invented" in rows[0]["note"]
    assert len({row["reading_id"] for row in rows}) == 28


def test_whole_degrees_are_whole_and_below_360(run):
    """--whole-degrees rounds as a compass is read, and writes north as 0."""
    rows = rows_of(
        run("simulate", "--hinge", "000/00", "--bedding", 200, "--cleavage", 200, "--whole-degrees")
    )
    for row in rows:
        assert float(row["strike_deg"]) % 1.0 == 0.0
        assert float(row["strike_deg"]) < 360.0
        assert float(row["dip_deg"]) % 1.0 == 0.0


@pytest.mark.parametrize("truth", [-20.0, -8.0, 0.0, 8.0, 20.0])
def test_check_finds_the_answer_that_was_put_in(run, tmp_path, truth):
    """Check reads what simulate writes, and its interval holds the transection asked for, with its sense."""
    path = tmp_path / "known.csv"
    args = ("--transection", truth, "--bedding", 80, "--cleavage", 60, "--intersection", 10, "-o", path)
    assert run("simulate", *args).exit_code == 0
    (one,) = json.loads(run("check", path, "--json").stdout)
    low, high = one["interval_deg"]
    assert low <= truth <= high
    assert one["verdict"] == ("transected" if truth else "axial planar")
    if truth:
        assert one["sense"] == ("clockwise" if truth > 0 else "anticlockwise")


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("--limbs", "100", "20"), "first limb dip"),
        (("--transection", "80"), "transection"),
        (("--scatter", "nan", "5", "5"), "bedding scatter"),
        (("--outcrops", "0"), "number of outcrops"),
        (("--hinge", "40"), "060/25"),
        (("--hinge", "040/95"), "plunge"),
        (("--seed", "-1"), "--seed"),
        (("--bedding", "0", "--cleavage", "0"), "at least one reading"),
        (("-o", "no-such-folder/x.csv"), "no-such-folder"),
    ],
)
def test_what_cannot_be_simulated_is_said_in_one_line(run, arguments, said):
    """Settings outside their range and unwritable files end in one line and exit code 2."""
    result = run("simulate", *arguments)
    assert result.exit_code == 2
    assert len(result.stderr.splitlines()) == 1
    assert said in result.stderr
