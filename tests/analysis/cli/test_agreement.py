"""One set of readings, one set of figures: check, replay, export, survey and report must not differ."""

from __future__ import annotations

import html
import json
import re

import pytest

from analysis.demo import demo_readings
from analysis.files.csvfile import write_readings


@pytest.fixture(scope="module")
def demo(tmp_path_factory):
    """Write the invented folds, latest reading first: the order of the file must not matter."""
    path = tmp_path_factory.mktemp("agree") / "demo.csv"
    write_readings(path, list(demo_readings())[::-1])
    return path


@pytest.fixture
def checked(run, demo):
    """Give what check says of each fold."""
    return {one["fold"]: one for one in json.loads(run("check", demo, "--json").stdout)}


def test_the_last_line_of_replay_is_the_check(run, demo, checked):
    """After the last reading replay gives what check gives, but for the outliers that only check looks for."""
    last = {}
    for line in run("replay", demo, "--json").stdout.splitlines():
        one = json.loads(line)
        last[one["fold"]] = one
    assert set(last) == set(checked)
    for fold, one in checked.items():
        assert last[fold]["after"] == sum(
            n for feature, n in one["readings"].items() if feature != "outcrops"
        )
        for key in set(one) - {"warnings"}:
            assert last[fold][key] == one[key], (fold, key)


@pytest.mark.parametrize("command", ["export", "survey"])
def test_maps_have_the_figures_of_the_check(run, demo, checked, tmp_path, command):
    """Verdict, transection, interval, hinge and cleavage on the map are those of check."""
    out = tmp_path / "out.geojson"
    assert run(command, demo, "-o", out).exit_code == 0
    rows = [one["properties"] for one in json.loads(out.read_text(encoding="utf-8"))["features"]]
    verdicts = {row["fold"]: row for row in rows if row["layer"] == "verdicts"}
    assert set(verdicts) == set(checked)
    for fold, one in checked.items():
        row = verdicts[fold]
        assert (row["verdict"], row["sense"]) == (one["verdict"], one["sense"])
        # JSON of check has six decimals.
        found = [row[name] for name in ("transection_deg", "se_deg", "low_deg", "high_deg", "hinge_trend_deg",
                                        "hinge_plunge_deg", "cleavage_strike_deg", "cleavage_dip_deg")]  # fmt: skip
        asked = [one["transection_deg"], one["se_deg"], *one["interval_deg"], one["hinge"]["trend_deg"],
                 one["hinge"]["plunge_deg"], one["cleavage"]["strike_deg"], one["cleavage"]["dip_deg"]]  # fmt: skip
        assert found == pytest.approx(asked, abs=2e-6)


def test_the_report_says_what_check_says(run, demo, tmp_path):
    """Headline and figure of every fold stand in the report as check prints them."""
    out = tmp_path / "out.html"
    assert run("report", demo, "-o", out).exit_code == 0
    text = " ".join(html.unescape(re.sub(r"<[^>]+>", " ", out.read_text(encoding="utf-8"))).split())
    heads = re.findall(r"^(\S.*)\n  (.+)\n  (.+)\n", run("check", demo).stdout, flags=re.MULTILINE)
    assert len(heads) == 3  # the demo has three folds
    for fold, headline, figure in heads:
        for words in (fold, headline, figure):
            assert words.strip() in text, words
