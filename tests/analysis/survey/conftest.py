"""Archives of invented readings, and the survey's plain counterpart: one table in memory, checked fold by fold."""

from __future__ import annotations

from datetime import UTC, datetime

import numpy as np
import pytest

from analysis.cli.common import sums_of_table
from analysis.files.csvfile import read_table, write_readings
from analysis.files.reading import Reading
from analysis.fold.check import check_fold
from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg
from analysis.stats.synthetic import FoldDesign, draw
from analysis.survey.verdicts import verdict_row

NOON = datetime(2026, 5, 1, 12, tzinfo=UTC)


def invent(folds=3, seed=1, each=24):
    """Readings of invented folds with positions, four outcrops each, whose names repeat from fold to fold."""
    rng = np.random.default_rng(seed)
    readings = []
    for fold in range(folds):
        design = FoldDesign(hinge_trend_deg=40.0 + 7 * fold, transection_deg=8.0 * fold, outcrops=4)
        drawn = draw(design, each, 1, rng)
        for feature, axes in (
            ("bedding", drawn.bedding[0]),
            ("cleavage", drawn.cleavage[0][: each - 6]),
            ("intersection", drawn.lines[0][:5]),
        ):
            line = feature == "intersection"
            for k, axis in enumerate(axes):
                azimuth, inclination = (
                    round(float(value), 2) for value in (trend_plunge_deg if line else strike_dip_deg)(axis)
                )
                names = ("trend_deg", "plunge_deg") if line else ("strike_deg", "dip_deg")
                placed = k % 7 != 3
                readings.append(
                    Reading(
                        reading_id=f"{seed}-{fold}-{feature}-{k}",
                        feature=feature,
                        fold=f"Mossgarth {fold}",
                        outcrop=f"{k % 4}",
                        recorded_at=NOON,
                        latitude_deg=47.5 + 0.01 * fold if placed else None,
                        longitude_deg=-31.0 + 0.001 * (k % 4) if placed else None,
                        **dict(zip(names, (azimuth, inclination), strict=True)),
                    )
                )
    return readings


@pytest.fixture
def readings():
    """Readings of three invented folds."""
    return invent()


def plain_rows(*paths):
    """What `check` finds in files read at once: verdict rows by fold."""
    table = read_table(*paths)
    return {
        name: verdict_row(check_fold(sums_of_table(table.of_fold(name)), fold=name), None, 0)
        for name in table.folds()
    }


def assert_same_figures(found, expected):
    """Every figure of the survey is that of the check, to 1e-9, and every word the same."""
    assert {row["fold"] or "" for row in found.verdicts} == set(expected)
    for row in found.verdicts:
        plain = expected[row["fold"] or ""]
        for name in plain.keys() - {"latitude_deg", "longitude_deg", "with_position"}:
            if isinstance(plain[name], float):
                assert row[name] == pytest.approx(plain[name], rel=0, abs=1e-9), name
            else:
                assert row[name] == plain[name], name


@pytest.fixture
def written(tmp_path):
    """Write readings into files of an archive folder; gives the function, whose result are their paths."""

    def write(*files):
        folder = tmp_path / "archive"
        folder.mkdir(exist_ok=True)
        paths = []
        for number, part in enumerate(files):
            paths.append(folder / f"{number}.csv")
            write_readings(paths[-1], part)
        return paths

    return write
