"""Watch invented folds over the whole grid of designs and count how often the check is wrong.

    python tests/bench/calibration.py                   # the grid, then the stresses, then the summary
    python tests/bench/calibration.py --folds 2000 --processes 4
    python tests/bench/calibration.py --only grid --anew

Every fold is watched from the first look to 60 readings a stream, one reading at a time. Each cell has its own
seed, so a cell repeats by itself. A finished cell is written at once to calibration/grid.csv and not run
again, unless the code gives other numbers by now. A cell of which any error's upper end (Clopper-Pearson
95%) passes 7% is run again with eight times the folds and another seed, and the new count stands in its place:
of two thousand cells, many pass by luck of the draw with a thousand folds each. The summary says how many there were.
"""

from __future__ import annotations

import argparse
import hashlib
import itertools
import multiprocessing
import os
import sys
from functools import cache
from pathlib import Path
from typing import NamedTuple

# One process a core: numpy's own threads would only fight over them. Set before numpy is loaded.
os.environ.setdefault("OMP_NUM_THREADS", "1")
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import click
import numpy as np
import pandas as pd
from scipy import stats

HERE = Path(__file__).resolve().parent
ROOT = HERE.parent.parent
sys.path[:0] = [str(ROOT)]  # a script finds the project's packages, installed or not

from analysis.fold.settings import CheckSettings  # noqa: E402
from analysis.fold.tally import Tally, quantile_of_settling, tally, total  # noqa: E402
from analysis.fold.trials import run_trials  # noqa: E402
from analysis.stats.synthetic import FoldDesign  # noqa: E402
from tests.bench.calibration_figure import draw_calibration  # noqa: E402
from tests.bench.calibration_stress import STRESSES, run_stress  # noqa: E402
from tests.told import tell_many  # noqa: E402

GRID = HERE / "calibration" / "grid.csv"
STRESS = HERE / "calibration" / "stress.csv"
FORECAST = HERE / "calibration" / "forecast.csv"
PICTURE = ROOT / "buildspec" / "pictures" / "calibration"
TRANSECTIONS_DEG = (0, 2, 5, 10, 20)
LIMB_DIPS_DEG = (15, 30, 55, 75)
SCATTERS_DEG = (3, 6, 10)
PLUNGES_DEG = (0, 20, 45)
OUTCROPS = (1, 6)
HINGE_VARIATION_DEG = 3.0
MODES = ("planes", "lines", "planes and lines")
READINGS = 60
BATCH = 250  # folds at a time: what keeps the moments of a batch within a processor's cache
ERROR_AT_MOST = 0.05
UPPER_END_AT_MOST = 0.07
AGAIN_TIMES = 8


class Cell(NamedTuple):
    """One cell of the grid."""

    mode: str
    transection_deg: int
    limb_dip_deg: int
    unequal: bool
    scatter_deg: int
    plunge_deg: int
    outcrops: int

    @property
    def design(self) -> FoldDesign:
        """The fold; unequal: the second limb 20 degrees steeper, two thirds of bedding read on the first."""
        dip = float(self.limb_dip_deg)
        return FoldDesign(
            hinge_plunge_deg=float(self.plunge_deg),
            limb_dips_deg=(dip, min(dip + 20.0, 85.0) if self.unequal else dip),
            first_limb_share=2.0 / 3.0 if self.unequal else 0.5,
            transection_deg=float(self.transection_deg),
            bedding_scatter_deg=float(self.scatter_deg),
            cleavage_scatter_deg=self.scatter_deg * 5.0 / 6.0,
            line_scatter_deg=self.scatter_deg * 5.0 / 6.0,
            outcrops=self.outcrops,
            hinge_variation_deg=HINGE_VARIATION_DEG if self.outcrops > 1 else 0.0,
        )

    def rng(self, again: int) -> np.random.Generator:
        """The cell's own random numbers, whatever else is run."""
        return np.random.default_rng([1970, again, MODES.index(self.mode), *(int(v) for v in self[1:])])


def every_cell() -> list[Cell]:
    """The whole grid."""
    return [
        Cell(*values)
        for values in itertools.product(
            MODES, TRANSECTIONS_DEG, LIMB_DIPS_DEG, (False, True), SCATTERS_DEG, PLUNGES_DEG, OUTCROPS
        )
    ]


def run_cell(cell: Cell, folds: int, again: int = 0) -> dict[str, object]:
    """Count one cell: a row of the table."""
    settings = CheckSettings()
    rng = cell.rng(again)
    tallies: list[Tally] = []
    after: list[np.ndarray] = []
    for start in range(0, folds, BATCH):
        trials = run_trials(cell.design, min(BATCH, folds - start), READINGS, rng, settings, cell.mode)
        tallies.append(tally(trials, float(cell.transection_deg), settings.margin_deg))
        after.append(trials.settled_after)
    settled_after = np.concatenate(after)
    return {
        **cell._asdict(),
        **total(tallies)._asdict(),
        "median_readings": quantile_of_settling(settled_after, 0.5),
        "readings_for_80_percent": quantile_of_settling(settled_after, 0.8),
        "again": again,
    }


def upper_end(errors: object, folds: object) -> np.ndarray:
    """Upper end of the two-sided 95% interval of a share (Clopper-Pearson)."""
    k, n = np.asarray(errors, dtype=float), np.asarray(folds, dtype=float)
    return np.where(k >= n, 1.0, stats.beta.ppf(0.975, k + 1.0, np.maximum(n - k, 1e-9)))


@cache
def code_stamp(mode: str) -> str:
    """Short digest of what the code makes of a few folds: the same for code that gives the same numbers."""
    digest = hashlib.sha256()
    for number, (dip, scatter, outcrops) in enumerate(itertools.product((15, 55, 75), (3, 10), OUTCROPS)):
        cell = Cell(mode, 5, dip, number % 2 == 1, scatter, 20, outcrops)
        trials = run_trials(cell.design, 10, 40, np.random.default_rng(number), CheckSettings(), mode)
        for values in trials:
            digest.update(np.round(np.nan_to_num(np.asarray(values, dtype=float)), 5).tobytes())
    return digest.hexdigest()[:12]


ERRORS = ("false_transected", "false_axial_planar", "missed")


def too_often(table: pd.DataFrame) -> pd.Series:
    """Whether any error's upper end passes what a cell may have."""
    ends = [pd.Series(upper_end(table[name], table["folds"]), index=table.index) for name in ERRORS]
    return pd.concat(ends, axis=1).max(axis=1) > UPPER_END_AT_MOST


def _job(job: tuple[Cell, int, int]) -> dict[str, object]:
    return run_cell(*job)


def run_all(jobs: list[tuple[Cell, int, int]], processes: int, path: Path, label: str) -> None:
    """Run cells in parallel and write each as it comes."""
    with (
        multiprocessing.get_context("spawn").Pool(processes) as pool,
        click.progressbar(length=len(jobs), label=label, file=sys.stderr) as bar,
    ):
        for row in pool.imap_unordered(_job, jobs):
            frame = pd.DataFrame([{**row, "code": code_stamp(str(row["mode"]))}])
            frame.to_csv(path, mode="a", header=not path.exists(), index=False, lineterminator="\n")
            bar.update(1)


def read_table(path: Path) -> pd.DataFrame:
    """Rows of this code, the last of each cell."""
    if not path.exists():
        return pd.DataFrame(columns=[*Cell._fields, "folds", "again", "code"])
    table = pd.read_csv(path)
    table = table[table["code"] == table["mode"].map(code_stamp)]
    return table.drop_duplicates(list(Cell._fields), keep="last")


def cells_of(table: pd.DataFrame) -> list[Cell]:
    """Cells of the rows of a table."""
    return [
        Cell(
            str(row.mode), int(row.transection_deg), int(row.limb_dip_deg), bool(row.unequal),
            int(row.scatter_deg), int(row.plunge_deg), int(row.outcrops),
        )
        for row in table.itertuples()
    ]  # fmt: skip


def run_grid(folds: int, processes: int, cells: list[Cell]) -> pd.DataFrame:
    """Run what of the grid is not there yet, then once more the cells that came out too high; sort the table."""
    done = read_table(GRID)
    have = set(cells_of(done[done["folds"] >= folds]))
    run_all([(cell, folds, 0) for cell in cells if cell not in have], processes, GRID, "grid ")
    table = read_table(GRID)
    doubtful = table[too_often(table) & (table["again"] == 0)]
    run_all([(cell, folds * AGAIN_TIMES, 1) for cell in cells_of(doubtful)], processes, GRID, "again")
    table = read_table(GRID).sort_values(list(Cell._fields))
    table.to_csv(GRID, index=False, lineterminator="\n")
    return table


def run_stresses(folds: int) -> pd.DataFrame:
    """Run what breaks the check's assumptions, at no and at the least transection that matters."""
    jobs = [(stress, angle, number) for number, stress in enumerate(STRESSES) for angle in (0.0, 5.0)]
    with click.progressbar(jobs, label="stress", file=sys.stderr) as bar:
        table = pd.DataFrame([run_stress(stress, angle, folds, number) for stress, angle, number in bar])
    table.to_csv(STRESS, index=False, lineterminator="\n")
    return table


def run_forecasts(designs: int) -> pd.DataFrame:
    """Tell many folds how many more readings they need, and see how many they do."""
    table = pd.DataFrame(
        tell_many(designs, np.random.default_rng(1970)), columns=["told", "low", "high", "took"]
    )
    group = pd.cut(table["told"], [0, 3, 8, 20, 50, 100, 200]).astype(str)
    rows = []
    for name, part in [("all", table), *table.groupby(group, sort=False)]:
        within = part["took"] <= part["told"]
        in_range = (part["took"] >= part["low"]) & (part["took"] <= part["high"])
        rows.append(
            {
                "told": name,
                "folds": len(part),
                "settled_within": round(float(within.mean()), 4),
                "median_took_over_told": round(float((part["took"] / part["told"]).median()), 3),
                "within_range": round(float(in_range.mean()), 4),
            }
        )
    result = pd.DataFrame(rows)
    order = result["told"].str.extract(r"\((\d+)")[0].astype(float).fillna(-1.0)
    result = result.iloc[np.argsort(order, kind="stable")]
    result.to_csv(FORECAST, index=False, lineterminator="\n")
    return result


def applies(table: pd.DataFrame, error: str) -> pd.DataFrame:
    """Cells in which an error can happen as it is counted on the whole grid."""
    if error.endswith("false_transected"):
        return table[table["transection_deg"] == 0]
    return table[table["transection_deg"] >= 5] if error.endswith("false_axial_planar") else table


def say(line: str = "") -> None:
    """Print a line."""
    sys.stdout.write(line + "\n")


def summarise(table: pd.DataFrame) -> None:
    """Say what the grid came to, on the whole and in its worst cells."""
    cells = len(every_cell())
    again = int(table["again"].sum())
    say(f"{len(table)} of {cells} cells, {int(table['folds'].sum())} folds; {again} cells run again.")
    if table.empty:
        return
    say(f"{'error':22s}{'whole':>8s}{'upper':>8s}{'worst cell':>12s}{'its upper':>11s}{'ordinary':>10s}")
    for error in ERRORS:
        part = applies(table, error)
        wrong, folds = int(part[error].sum()), int(part["folds"].sum())
        ends = upper_end(part[error], part["folds"])
        worst = int(np.argmax(ends))
        naive = float(part[f"naive_{error}"].sum()) / folds
        say(
            f"{error:22s}{wrong / folds:8.4f}{float(upper_end(wrong, folds)):8.4f}"
            f"{float((part[error] / part['folds']).iloc[worst]):12.4f}{float(ends[worst]):11.4f}{naive:10.4f}"
        )
    wrong_sense = table[table["transection_deg"] > 0]
    share = float(wrong_sense["false_transected"].sum()) / float(wrong_sense["folds"].sum())
    say(f"called transected with the wrong sense, at any transection but 0: {share:.4f}")
    over = table[too_often(table)]
    say(f"cells with an upper end above {UPPER_END_AT_MOST:.0%}: {len(over)}")
    if len(over):
        say(over[[*Cell._fields, "folds", *ERRORS]].to_string(index=False))
    for name in ("mode", "limb_dip_deg", "scatter_deg", "plunge_deg", "outcrops"):
        for value, part in table.groupby(name):
            folds = float(part["folds"].sum())
            say(
                f"{name} {value}: missed {part['missed'].sum() / folds:.4f}, "
                f"settled {part['settled'].sum() / folds:.3f}, "
                f"looks kept back {part['looks_unclear'].sum() / part['looks'].sum():.3f} for axes not clear and "
                f"{part['looks_off_girdle'].sum() / part['looks'].sum():.4f} for the girdle, "
                f"folds never looked at {part['never_looked'].sum() / folds:.4f}"
            )
    usual = table[
        (table["mode"] == "planes") & (table["limb_dip_deg"] == 55) & ~table["unequal"].astype(bool)
        & (table["scatter_deg"] == 6) & (table["plunge_deg"] == 0) & (table["outcrops"] == 1)
    ]  # fmt: skip
    for row in usual.itertuples():
        say(
            f"limbs 55, scatter 6 and 5, transection {row.transection_deg}: {row.settled / row.folds:.3f} settled, "
            f"median {row.median_readings / 2:g} a stream, four in five {row.readings_for_80_percent / 2:g}"
        )


def main() -> None:
    """Run what is asked for and say what came of it."""
    parser = argparse.ArgumentParser(
        description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("--folds", type=int, default=1000, help="of each cell (default: 1000)")
    parser.add_argument("--processes", type=int, default=os.cpu_count() or 1, help="(default: all cores)")
    parser.add_argument("--only", choices=("grid", "stress", "forecast", "summary"))
    parser.add_argument("--anew", action="store_true", help="run finished cells again")
    asked = parser.parse_args()
    if asked.anew:
        GRID.unlink(missing_ok=True)
    GRID.parent.mkdir(exist_ok=True)
    if asked.only in (None, "grid"):
        run_grid(asked.folds, asked.processes, every_cell())
    if asked.only in (None, "stress"):
        say(run_stresses(2 * asked.folds).to_string(index=False))
    if asked.only in (None, "forecast"):
        say(run_forecasts(asked.folds).to_string(index=False))
    if asked.only in (None, "grid", "summary"):
        table = read_table(GRID)
        summarise(table)
        PICTURE.parent.mkdir(exist_ok=True)
        draw_calibration(table, PICTURE)


if __name__ == "__main__":
    main()
