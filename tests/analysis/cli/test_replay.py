"""hingewise replay: the check after each reading."""

from __future__ import annotations

import json

from tests.analysis.cli.test_check import KEYS, strictly


def lines_of(result):
    assert result.exit_code == 0, result.output
    return [strictly(line) for line in result.stdout.splitlines()]


def test_json_lines_count_up_and_end_at_the_check(run, two_folds):
    """There is a line for each reading, numbered within its fold, and the last of a fold is its check."""
    lines = lines_of(run("replay", two_folds, "--json"))
    checks = {one["fold"]: one for one in json.loads(run("check", two_folds, "--json").stdout)}
    assert [line["fold"] for line in lines] == ["invented 1"] * 39 + ["Low fold"] * 5
    assert [line["after"] for line in lines] == [*range(1, 40), *range(1, 6)]
    for line in lines:
        assert list(line) == ["fold", "after", *KEYS[1:]]
        counts = line["readings"]
        assert sum(counts[name] for name in ("bedding", "cleavage", "intersection", "hinge")) == line["after"]
    for last in (lines[38], lines[-1]):
        whole = checks[last["fold"]]
        assert last["verdict"] == whole["verdict"]
        assert last["transection_deg"] == whole["transection_deg"]
        assert last["interval_deg"] == whole["interval_deg"]


def test_recorded_order_counts_not_file_order(run, tmp_path, two_folds):
    """A file turned upside down replays in the order in which the readings were recorded."""
    head, *rows = two_folds.read_text(encoding="utf-8").splitlines(keepends=True)
    path = tmp_path / "turned.csv"
    path.write_text("".join([head, *reversed(rows)]), encoding="utf-8")
    first = lines_of(run("replay", two_folds, "--json", "--fold", "invented 1"))
    second = lines_of(run("replay", path, "--json", "--fold", "invented 1"))
    assert [line["readings"] for line in second] == [line["readings"] for line in first]
    assert [line["verdict"] for line in second] == [line["verdict"] for line in first]


def test_file_order_counts_where_no_time_is_given(run, tmp_path):
    """Readings without a time are replayed as they stand in the file."""
    path = tmp_path / "plain.csv"
    rows = "bedding,010,40\ncleavage,020,80\nbedding,190,50\n"
    path.write_text("feature,strike_deg,dip_deg\n" + rows, encoding="utf-8")
    lines = lines_of(run("replay", path, "--json"))
    assert [(one["readings"]["bedding"], one["readings"]["cleavage"]) for one in lines] == [
        (1, 0),
        (1, 1),
        (2, 1),
    ]


def test_text_gives_one_line_a_reading(run, two_folds):
    """Without --json each reading makes one line with the verdict and its figure."""
    result = run("replay", two_folds, "--fold", "Low fold")
    lines = result.stdout.splitlines()
    assert [line.split(":")[0] for line in lines] == [f"Low fold  after {k}" for k in range(1, 6)]
    assert all("Keep reading" in line for line in lines)
