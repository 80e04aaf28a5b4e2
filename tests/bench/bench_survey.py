"""How long a survey of a large archive takes, in how much memory, and whether workers change its figures.

    python tests/bench/bench_survey.py [READINGS] [FOLDS] [csv|parquet]

Writes an archive of invented folds, a thousand readings a fold unless told otherwise, in 64 files through which the
outcrops of each fold are spread; surveys it with 1, 2 and 4 threads, each in a fresh interpreter, and prints
seconds, readings a second, the peak memory of the whole process, and whether all figures are the same bit for bit.
Then the first folds are checked the ordinary way, from a table in memory, and the largest difference is printed. It
never fails for being slow.
"""

from __future__ import annotations

import hashlib
import json
import subprocess
import sys
import tempfile
import time
import uuid
from pathlib import Path

import numpy as np

FILES = 64
OUTCROPS = 5
COMPARED = 50
WORKERS = (1, 2, 4)


def write_archive(folder: Path, readings: int, folds: int, kind: str) -> None:
    """Write invented folds: 45% bedding, 35% cleavage, 20% intersection lines."""
    import pyarrow as pa  # noqa: PLC0415 - not needed by the measured process before it starts
    from pyarrow import csv, parquet  # noqa: PLC0415

    from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg  # noqa: PLC0415
    from analysis.stats.synthetic import FoldDesign, draw  # noqa: PLC0415

    each = readings // folds
    counts = {"bedding": round(each * 0.45), "cleavage": round(each * 0.35)}
    counts["intersection"] = each - sum(counts.values())
    rng = np.random.default_rng(3)
    writers = {}
    number = 0
    for start in range(0, folds, 500):
        some = min(500, folds - start)
        design = FoldDesign(
            hinge_trend_deg=float(rng.uniform(0, 360)),
            hinge_plunge_deg=float(rng.uniform(0, 25)),
            transection_deg=float(rng.uniform(-12, 12)),
            outcrops=OUTCROPS,
        )
        drawn = draw(design, max(counts.values()), some, rng)
        columns: dict[str, list[np.ndarray]] = {}
        for feature, axes in zip(counts, (drawn.bedding, drawn.cleavage, drawn.lines), strict=True):
            count = counts[feature]
            fold = np.repeat(np.arange(start, start + some), count)
            outcrop = np.tile(drawn.outcrop[:count], some)
            values = (trend_plunge_deg if feature == "intersection" else strike_dip_deg)(
                axes[:, :count].reshape(-1, 3)
            )
            nothing = np.full(len(fold), np.nan)
            azimuth, inclination = (np.round(value, 4) for value in values)
            is_line = feature == "intersection"
            for name, column in {
                "fold": fold,
                "outcrop": outcrop,
                "feature": np.full(len(fold), feature),
                "strike_deg": nothing if is_line else azimuth % 360.0,
                "dip_deg": nothing if is_line else inclination,
                "trend_deg": azimuth % 360.0 if is_line else nothing,
                "plunge_deg": inclination if is_line else nothing,
                "latitude_deg": np.round(40.0 + fold // 100 * 0.01 + rng.normal(0, 1e-3, len(fold)), 7),
                "longitude_deg": np.round(-31.0 + fold % 100 * 0.01 + rng.normal(0, 1e-3, len(fold)), 7),
            }.items():
                columns.setdefault(name, []).append(column)
        whole = {name: np.concatenate(parts) for name, parts in columns.items()}
        file = (whole["fold"] * 7 + whole["outcrop"]) % FILES
        ids = [
            str(uuid.UUID(int=((number + k) * 0x9E3779B97F4A7C15) % 2**128))
            for k in range(len(whole["fold"]))
        ]
        number += len(ids)
        table = pa.table(
            {
                "reading_id": ids,
                "fold": [f"fold {k:05d}" for k in whole.pop("fold").tolist()],
                "outcrop": [f"outcrop {k}" for k in whole.pop("outcrop").tolist()],
                **{name: pa.array(column, from_pandas=True) for name, column in whole.items()},
            }
        )
        for at in range(FILES):
            rows = table.filter(pa.array(file == at))
            path = folder / f"part-{at:02d}.{kind}"
            if path not in writers:
                writers[path] = (
                    parquet.ParquetWriter(path, table.schema)
                    if kind == "parquet"
                    else csv.CSVWriter(path, table.schema)
                )
            writers[path].write_table(rows)
    for writer in writers.values():
        writer.close()


def measure(folder: str, workers: int) -> None:
    """Survey the archive once, in a process that has done nothing else."""
    from analysis.survey.run import survey  # noqa: PLC0415 - this is the process that is measured

    start = time.perf_counter()
    found = survey([folder], workers=workers)
    seconds = time.perf_counter() - start
    status = Path("/proc/self/status").read_text(encoding="ascii")
    peak = next(int(line.split()[1]) for line in status.splitlines() if line.startswith("VmHWM:"))
    text = json.dumps([found.verdicts, found.means], sort_keys=True)
    print(  # noqa: T201
        json.dumps(
            {
                "s": seconds,
                "MiB": peak / 1024,
                "readings": found.readings,
                "folds": len(found.verdicts),
                "digest": hashlib.sha256(text.encode()).hexdigest(),
                "some": found.verdicts[:COMPARED],
            }
        )
    )


def largest_difference(folder: Path, some: list[dict[str, object]]) -> float:
    """Check some folds from a table in memory; the largest difference of any number."""
    from analysis.cli.common import sums_of_table  # noqa: PLC0415 - as above
    from analysis.fold.check import check_fold  # noqa: PLC0415
    from analysis.survey.archive import find_archive, tables_of  # noqa: PLC0415
    from analysis.survey.verdicts import verdict_row  # noqa: PLC0415

    names = {row["fold"] for row in some}
    sums = {}
    for part in find_archive([folder]).parts:
        for table in tables_of(part):
            for name in names & set(table.folds()):
                one = sums_of_table(table.of_fold(name))
                sums[name] = sums[name] + one if name in sums else one
    largest = 0.0
    for row in some:
        plain = verdict_row(check_fold(sums[row["fold"]], fold=str(row["fold"])), None, 0)
        assert plain["verdict"] == row["verdict"]
        numbers = [key for key, value in plain.items() if isinstance(value, float)]
        largest = max([largest, *(abs(plain[key] - row[key]) for key in numbers)])
    return largest


def main(readings: int, folds: int, kind: str) -> None:
    """Write the archive, survey it and print the table."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        write_archive(folder, readings, folds, kind)
        size = sum(path.stat().st_size for path in folder.iterdir()) / 2**20
        print(f"{kind}: {readings} readings, {folds} folds, {FILES} files, {size:.0f} MiB")  # noqa: T201
        digests = set()
        for workers in WORKERS:
            out = subprocess.run(
                [sys.executable, __file__, "measure", str(folder), str(workers)],
                check=True,
                capture_output=True,
                env={"PYTHONPATH": str(Path(__file__).parents[2])},
            )
            found = json.loads(out.stdout)
            assert found["readings"] == readings // folds * folds
            digests.add(found["digest"])
            print(  # noqa: T201
                f"  {workers} workers: {found['s']:7.1f} s, {found['readings'] / found['s']:9.0f} readings/s, "
                f"peak {found['MiB']:5.0f} MiB, {found['folds']} folds",
                flush=True,
            )
        same = "the same bit for bit" if len(digests) == 1 else "NOT the same"
        print(f"  figures with {', '.join(map(str, WORKERS))} workers: {same}")  # noqa: T201
        print(f"  largest difference to check: {largest_difference(folder, found['some']):.1e}")  # noqa: T201


if __name__ == "__main__":
    if sys.argv[1:2] == ["measure"]:
        measure(sys.argv[2], int(sys.argv[3]))
    else:
        given = sys.argv[1:]
        main(
            int(given[0]) if given else 1_000_000,
            int(given[1]) if len(given) > 1 else 1_000,
            given[2] if len(given) > 2 else "csv",
        )
