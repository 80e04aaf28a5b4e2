"""How long a large file of readings takes to read and check, against pandas.read_csv alone.

    python tests/bench/bench_csv.py [ROWS]

Writes invented files of two shapes (all columns, and only the few that are needed), reads each with bare
pandas (its default dtypes) and with the project, each in a fresh interpreter, in turn, three times, and
prints medians. Memory is the peak of the process less what it held after the imports. It never fails.
"""

from __future__ import annotations

import json
import statistics
import subprocess
import sys
import tempfile
import time
import uuid
from pathlib import Path

import numpy as np

ROUNDS = 3


def write_full(path: Path, rows: int) -> None:
    """Every column filled as the app fills it, 200 outcrops on 20 folds."""
    draw = np.random.default_rng(7)
    header = (
        "reading_id,revision,struck_out,recorded_at,revised_at,observer,device,fold,outcrop,feature,strike_deg,"
        "dip_deg,trend_deg,plunge_deg,dip_quadrant,as_entered,north_reference,correction_deg,correction_model,"
        "instrument,scatter_deg,samples,overturned,warnings_kept,latitude_deg,longitude_deg,altitude_m,"
        "accuracy_m,position_source,note\n"
    )
    features = ("bedding", "cleavage", "intersection", "hinge")
    kinds = draw.choice(4, size=rows, p=[0.45, 0.3, 0.2, 0.05]).tolist()
    azimuths, inclinations = draw.uniform(0, 360, rows).tolist(), draw.uniform(0, 90, rows).tolist()
    north, east, high = (draw.uniform(0, 0.1, rows).tolist() for _ in range(3))
    start = np.datetime64("2026-05-01T06:00:00.000", "ms")
    with path.open("w", encoding="utf-8", newline="") as stream:
        stream.write(header)
        for row in range(rows):
            azimuth, inclination = f"{azimuths[row]:.4f}", f"{inclinations[row]:.4f}"
            pair = f"{azimuth},{inclination}"
            attitude = f"{pair},," if kinds[row] < 2 else f",,{pair}"
            stream.write(
                f"{uuid.UUID(int=(row * 0x9E3779B97F4A7C15) % 2**128)},1,no,{start + row * 7000}Z,,A. Writer,"
                f"tablet {row % 3},Mossgarth {row % 20},outcrop {row % 200},{features[kinds[row]]},{attitude}"
                f",,{azimuths[row]:03.0f}/{inclinations[row]:02.0f},magnetic,-1.2500,WMM2025 2026.33,compass,"
                ",,no,,"
                f"{54 + north[row]:.7f},{-2 + east[row]:.7f},{300 + 100 * high[row]:.2f},4.00,tablet,"
                f"{'weathered face' if row % 9 == 0 else ''}\n"
            )


def write_few(path: Path, rows: int) -> None:
    """Only fold, feature, strike and dip, in whole degrees, as somebody types them into a spreadsheet."""
    draw = np.random.default_rng(8)
    strikes, dips = draw.integers(0, 360, rows).tolist(), draw.integers(0, 91, rows).tolist()
    kinds = draw.integers(0, 2, rows).tolist()
    with path.open("w", encoding="utf-8", newline="") as stream:
        stream.write("fold,feature,strike_deg,dip_deg\n")
        for row in range(rows):
            feature = ("bedding", "cleavage")[kinds[row]]
            stream.write(f"Mossgarth {row % 20},{feature},{strikes[row]:03d},{dips[row]:02d}\n")


def _memory_kib(key: str) -> int:
    for line in Path("/proc/self/status").read_text(encoding="ascii").splitlines():
        if line.startswith(key):
            return int(line.split()[1])
    return 0


def measure(what: str, path: str) -> None:
    """Run one way of reading in this process and print its figures as JSON."""
    import pandas as pd  # noqa: PLC0415 - the import is no part of the measurement

    from analysis.files.arrowed import parse_clean  # noqa: PLC0415
    from analysis.files.csvfile import read_table  # noqa: PLC0415

    before = _memory_kib("VmRSS")
    start = time.perf_counter()
    if what == "bare":
        kept = pd.read_csv(path)
        rows = len(kept)
    else:
        table = read_table(path, progress=lambda _: None, clean_parser=parse_clean)
        rows = int(table.standing.sum())
        assert len(table.vectors) == len(table)
        assert table.folds()
    seconds = time.perf_counter() - start
    print(json.dumps({"rows": rows, "s": seconds, "MiB": (_memory_kib("VmHWM") - before) / 1024}))  # noqa: T201


def main(rows: int) -> None:
    """Write the files, run the measurements and print the table."""
    with tempfile.TemporaryDirectory() as folder:
        for shape, write in (("all columns", write_full), ("few columns", write_few)):
            path = Path(folder) / "readings.csv"
            write(path, rows)
            found: dict[str, list[dict[str, float]]] = {"bare": [], "ours": []}
            for _ in range(ROUNDS):
                for what, runs in found.items():
                    out = subprocess.run(
                        [sys.executable, __file__, what, str(path)],
                        check=True,
                        capture_output=True,
                        env={"PYTHONPATH": str(Path(__file__).parents[2])},
                    )
                    runs.append(json.loads(out.stdout))
            medians = {
                (what, key): statistics.median(run[key] for run in runs)
                for what, runs in found.items()
                for key in ("s", "MiB", "rows")
            }
            size = path.stat().st_size / 2**20
            lines = [f"{shape}: {rows} rows, {size:.0f} MiB"]
            for key in ("s", "MiB"):
                bare, ours = medians["bare", key], medians["ours", key]
                lines.append(
                    f"  {key:>3}: read_csv {bare:8.2f}, read and checked {ours:8.2f}, x{ours / bare:.2f}"
                )
            print("\n".join(lines))  # noqa: T201
            assert medians["bare", "rows"] == medians["ours", "rows"]


if __name__ == "__main__":
    if len(sys.argv) == 3:
        measure(sys.argv[1], sys.argv[2])
    else:
        main(int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000)
