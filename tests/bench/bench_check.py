"""What a verdict costs, against recomputing everything, and what a large file costs to read and check.

    python tests/bench/bench_check.py [CSV_ROWS]

Prints figures and never fails. Times are medians of several rounds, with the least beside them, since a busy
machine only ever adds. Two recomputations stand for "without running sums", both with numpy and scipy:

- by records: as a script is written that keeps a list of readings and goes through it after each new one;
- by columns: the hardest rival, everything vectorised over arrays that are ready beforehand.

Both give hinge, cleavage, mean intersection (measured, and computed where no line was read), their covariances and
ellipses, limbs, the transection with its error from readings and from outcrops, and the watched interval; they are
held to the figures of `check_fold`. What else the check gives (the angle from lines alone, lines against planes,
conditions, advice, sentences) they leave out, to their advantage. Lines are read at every third outcrop. The cost of
a verdict hangs on the number of outcrops, not on that of readings, so both are printed.
"""

from __future__ import annotations

import json
import math
import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import NamedTuple

import numpy as np
from scipy import optimize, stats

ROUNDS = 5
FEATURES = ("bedding", "cleavage", "intersection")


class Record(NamedTuple):
    """A reading as it is kept: degrees, not vectors."""

    feature: str
    outcrop: str
    azimuth_deg: float
    inclination_deg: float


def invented(readings, outcrops, seed=1):
    """Records of one invented fold: bedding and cleavage in equal parts, lines at every third outcrop."""
    from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg  # noqa: PLC0415
    from analysis.stats.synthetic import FoldDesign, draw  # noqa: PLC0415

    design = FoldDesign(
        hinge_plunge_deg=15.0, transection_deg=4.0, outcrops=outcrops, hinge_variation_deg=2.0
    )
    each = round(readings / (2.0 + 1.0 / 3.0))
    drawn = draw(design, each, 1, np.random.default_rng(seed))
    records = []
    for feature, axes in zip(FEATURES, (drawn.bedding[0], drawn.cleavage[0], drawn.lines[0]), strict=True):
        pairs = trend_plunge_deg(axes) if feature == "intersection" else strike_dip_deg(axes)
        for k, (azimuth, inclination) in enumerate(zip(*pairs, strict=True)):
            if feature == "intersection" and drawn.outcrop[k] % 3:
                continue
            records.append(Record(feature, f"O{drawn.outcrop[k]}", float(azimuth), float(inclination)))
    return records


def vector_of(record):
    """Axis of one record, by the direction cosines of any textbook."""
    trend, plunge = record.azimuth_deg, record.inclination_deg
    if record.feature != "intersection":
        trend, plunge = trend - 90.0, 90.0 - plunge
    t, p = np.radians(trend), np.radians(plunge)
    return np.array([np.cos(p) * np.cos(t), np.cos(p) * np.sin(t), np.sin(p)])


def principal(axes, away):
    """Principal axis of weighted streams: (axis, across, covariance, even covariance, freedom, pulls of outcrops)."""
    weights, scatters = [], []
    for x, along in axes:
        values = np.linalg.eigvalsh(x.T @ x)
        squares = values[:2].sum() if along else values[0]
        freedom = (2.0 if along else 1.0) * len(x) - 2.0
        assert freedom >= 4.0  # below that the check helps the scatter out
        scatters.append(squares / freedom)
        weights.append(
            (1.0 if along else -1.0) / (squares / freedom) if len(axes) > 1 else (1.0 if along else -1.0)
        )
    matrix = sum(w * x.T @ x for w, (x, _) in zip(weights, axes, strict=True))
    values, vectors = np.linalg.eigh(matrix)
    axis, across = vectors[:, 2], vectors[:, [1, 0]]
    reach = 1.0 / (values[2] - values[[1, 0]])
    n = sum(len(x) for x, _ in axes)
    meat, even = np.zeros((2, 2)), np.zeros((2, 2))
    all_residuals = sum((2.0 if along else 1.0) * len(x) for x, along in axes)
    for w, (x, along) in zip(weights, axes, strict=True):
        parts = (x @ across) * (x @ axis)[:, np.newaxis] * w
        meat += parts.T @ parts
        squares = ((x @ across) ** 2).sum() if along else ((x @ axis) ** 2).sum()
        variance = squares / ((2.0 if along else 1.0) * len(x) * (1.0 - 2.0 / all_residuals))
        spread = ((x @ axis) ** 2).sum() * np.eye(2) if along else across.T @ x.T @ x @ across
        even += w * w * variance * spread
    bend = np.outer(reach, reach)
    freedom = all_residuals - 2.0
    pulls = {
        name: sum(
            w * ((x[here] @ across) * (x[here] @ axis)[:, np.newaxis]).sum(axis=0)
            for w, (x, _), here in zip(weights, axes, masks, strict=True)
        )
        * reach
        for name, masks in away.items()
    }
    return axis, across, n / (n - 1.0) * meat * bend, even * bend, freedom, pulls


def mean_intersection(vectors, here, side, h, s):
    """Mean of measured lines, and of lines computed limb by limb at outcrops without any: (axis, covariance, count)."""
    bedding, cleavage, lines = (vectors[name] for name in FEATURES)
    v_bed = ((bedding @ h) ** 2).sum() / (len(bedding) - 2.0)
    residuals = 2.0 * len(cleavage) + len(lines)
    off = len(cleavage) - ((cleavage @ s) ** 2).sum()
    v_cleavage = off / (2.0 * len(cleavage) * (1.0 - 2.0 / residuals))
    found, weights = [lines], [np.ones(len(lines))]
    for name, at in here["cleavage"].items():
        if here["intersection"][name].any() or not at.any():
            continue
        pole = np.linalg.eigh(cleavage[at].T @ cleavage[at])[1][:, 2]
        for limb in (side, ~side):
            beds = bedding[here["bedding"][name] & limb]
            if not len(beds):
                continue
            line = np.cross(np.linalg.eigh(beds.T @ beds)[1][:, 2], pole)
            sine = np.linalg.norm(line)
            if sine >= 0.1:
                found.append(line[np.newaxis] / sine)
                error = v_bed / len(beds) + v_cleavage / at.sum()
                weights.append([2.0 * math.radians(5.5) ** 2 * sine**2 / error])
    x, w = np.concatenate(found), np.concatenate(weights)
    values, axes = np.linalg.eigh((x.T * w) @ x)
    parts = (x @ axes[:, :2]) * (x @ axes[:, 2] * w)[:, np.newaxis]
    reach = 1.0 / (values[2] - values[:2])
    n = len(x)
    return axes[:, 2], n / (n - 1.0) * (parts.T @ parts) * np.outer(reach, reach), n


def ellipse(covariance, n, freedom):
    """Half-angles of the 95% ellipse, degrees."""
    m = min(n - 2.0, freedom - 1.0)
    scale = 2.0 * (n - 1.0) / m * stats.f.ppf(0.95, 2, m)
    return np.degrees(np.arctan(np.sqrt(np.linalg.eigvalsh(covariance) * scale)))


def recompute(vectors, outcrops):
    """Everything that the check gives, from axes (n, 3) and outcrops (n,) by feature, with numpy and scipy."""
    bedding, cleavage, lines = (vectors[name] for name in FEATURES)
    names = np.unique(np.concatenate([outcrops[name] for name in FEATURES]))
    here = {f: {name: outcrops[f] == name for name in names} for f in FEATURES}
    h, h_across, h_cov, h_even, h_df, h_pull = principal(
        [(bedding, False)], {name: [here["bedding"][name]] for name in names}
    )
    s, s_across, s_cov, s_even, s_df, s_pull = principal(
        [(cleavage, True), (lines, False)],
        {name: [here["cleavage"][name], here["intersection"][name]] for name in names},
    )
    # Limbs: doubled angles about the hinge, cut across their longest extent; interlimb angle of the mean poles.
    x, y = (bedding @ h_across).T
    doubled = np.stack([x * x - y * y, 2.0 * x * y], axis=1)
    away = doubled - doubled.mean(axis=0)
    side = away @ np.linalg.eigh(away.T @ away)[1][:, 1] > 0.0
    poles = [np.linalg.eigh(part.T @ part)[1][:, 2] for part in (bedding[side], bedding[~side])]
    limb_lines = [np.cross(pole, s) for pole in poles]
    mean_line, l_cov, l_count = mean_intersection(vectors, here, side, h, s)
    ellipses = [
        ellipse(h_cov, len(bedding), h_df),
        ellipse(s_cov, len(cleavage) + len(lines), s_df),
        ellipse(l_cov, l_count, 2.0 * l_count - 2.0),
    ]
    interlimb = np.degrees(np.arccos(abs(poles[0] @ poles[1])))
    # Transection, its error from readings and from outcrops, and the watched interval.
    sine = h @ s
    turning = -np.cross(h, s)[2]
    delta = np.degrees(np.arcsin(abs(sine))) * (1.0 if sine * turning >= 0.0 else -1.0)
    to_h, to_s = h_across.T @ s, s_across.T @ h
    scale = np.degrees(1.0) ** 2 / (1.0 - sine * sine)
    parts = [to_h @ h_cov @ to_h * scale, to_s @ s_cov @ to_s * scale]
    steady = [
        max(parts[0], to_h @ h_even @ to_h * scale),
        max(parts[1], to_s @ s_even @ to_s * scale),
    ]
    fixed = sum(parts)
    df = fixed**2 / (parts[0] ** 2 / (len(bedding) - 2) + parts[1] ** 2 / (len(cleavage) + len(lines) - 1))
    half = stats.t.ppf(0.975, df) * math.sqrt(fixed)
    pull = np.array([h_pull[name] @ to_h + s_pull[name] @ to_s for name in names])
    outcrop_variance = (pull @ pull) * scale * len(names) / (len(names) - 2.0)
    first = optimize.brentq(lambda a: 2.0 * (stats.norm.sf(a) + a * stats.norm.pdf(a)) - 0.05, 0.0, 10.0)
    grown = math.log(len(bedding) / 6.0)
    tail = stats.norm.sf(math.sqrt(first**2 + grown))
    watched = stats.t.isf(tail, min(h_df, s_df)) * math.sqrt(max(sum(steady), outcrop_variance))
    return (
        delta,
        math.sqrt(fixed),
        df,
        (delta - half, delta + half),
        watched,
        ellipses,
        limb_lines,
        interlimb,
        mean_line,
    )


def from_records(records):
    """Recompute everything from a list of records, reading by reading."""
    vectors = {f: np.array([vector_of(r) for r in records if r.feature == f]) for f in FEATURES}
    outcrops = {f: np.array([r.outcrop for r in records if r.feature == f]) for f in FEATURES}
    return recompute(vectors, outcrops)


def timed(call, times):
    """Median and least time of a call, seconds."""
    taken = []
    for _ in range(times):
        start = time.perf_counter()
        call()
        taken.append(time.perf_counter() - start)
    return statistics.median(taken), min(taken)


def sums_of_records(records):
    from analysis.stats.sums import sums_of  # noqa: PLC0415

    return sums_of((r.feature, r.outcrop, vector_of(r)) for r in records)


def verdicts():
    """Print what a verdict costs by number of readings, and against recomputing everything."""
    from analysis.fold.check import check_fold  # noqa: PLC0415

    sums = {n: sums_of_records(invented(n, 6)) for n in (20, 2_000, 20_000)}
    taken = {n: [] for n in sums}
    for _ in range(ROUNDS * 3):  # in turn, so that a busy minute meets all alike
        for n, held in sums.items():
            taken[n].append(timed(lambda held=held: check_fold(held, forecast=False), 60))
    best = {
        n: (statistics.median(m for m, _ in runs), min(low for _, low in runs)) for n, runs in taken.items()
    }
    for n, (median, least) in best.items():
        say(f"verdict at {n:6d} readings, 6 outcrops", median, least)
    ratio = best[20_000][0] / best[20][0], best[20_000][1] / best[20][1]
    print(f"  ratio 20,000 to 20: x{ratio[0]:.2f} (least times x{ratio[1]:.2f}); at most 1.3 wanted")  # noqa: T201

    for outcrops in (1, 6, 20, 100, 500):
        held = sums_of_records(invented(20 * outcrops, outcrops))
        say(
            f"verdict at {20 * outcrops:6d} readings, {outcrops} outcrops",
            *timed(lambda held=held: check_fold(held), 60),
        )
    for outcrops in (6, 100):
        against_recomputing(outcrops)


def against_recomputing(outcrops):
    """Print what one more reading costs at 2,000, against recomputing everything."""
    from analysis.fold.check import check_fold  # noqa: PLC0415

    records = invented(2_000, outcrops)
    held = sums_of_records(records)
    extra = iter(invented(2_000, outcrops, seed=2))

    def one_more():
        record = next(extra)
        held.add(record.feature, record.outcrop, vector_of(record))
        return check_fold(held, forecast=False)

    ours = timed(one_more, 300)
    say(f"one reading added, verdict: 2,000 at {outcrops} outcrops", *ours)
    checked, rival = check_fold(sums_of_records(records)), from_records(records)
    assert abs(checked.transection_deg - rival[0]) < 1e-9
    assert abs(checked.se_deg - rival[1]) < 1e-9
    assert abs(checked.df - rival[2]) < 1e-6
    assert np.allclose(checked.fixed_interval_deg, rival[3], atol=1e-6)
    for axis, halves in zip(
        (checked.hinge, checked.cleavage, checked.intersection.axis), rival[5], strict=True
    ):
        assert np.allclose([axis.ellipse.minor_deg, axis.ellipse.major_deg], halves, atol=1e-6)
    columns = (
        {f: np.array([vector_of(r) for r in records if r.feature == f]) for f in FEATURES},
        {f: np.array([r.outcrop for r in records if r.feature == f]) for f in FEATURES},
    )
    by_records = timed(lambda: from_records(records), 15)
    by_columns = timed(lambda: recompute(*columns), 40)
    ours = min(ours, timed(one_more, 300))
    for name, rival in (("by records", by_records), ("by columns", by_columns)):
        say(f"  recomputing everything, {name}", *rival)
        print(f"  x{rival[0] / ours[0]:.1f} (least times x{rival[1] / ours[1]:.1f})")  # noqa: T201


def say(what, median, least):
    """Print one figure."""
    print(f"{what:<50} median {median * 1e3:8.3f} ms, least {least * 1e3:8.3f} ms")  # noqa: T201


def measure(what, path):
    """Read and check a file in this process as the command does; print seconds and memory as JSON."""
    import pandas as pd  # noqa: PLC0415 - the imports are no part of the measurement
    from bench_csv import _memory_kib  # noqa: PLC0415

    import analysis.files.arrowed  # noqa: PLC0415 - the command imports both when it reads a file
    import analysis.files.csvfile  # noqa: F401, PLC0415
    from analysis.cli.check import check_tables  # noqa: PLC0415
    from analysis.cli.common import chosen_folds, read_files  # noqa: PLC0415
    from analysis.fold.settings import CheckSettings  # noqa: PLC0415

    before = _memory_kib("VmRSS")
    start = time.perf_counter()
    if what == "bare":
        rows = len(pd.read_csv(path))
    else:
        table = read_files((Path(path),), strict=False)
        checks = check_tables(list(chosen_folds(table, None, None)), CheckSettings())
        counts = [one.readings for one in checks]
        rows = sum(c.bedding + c.cleavage + c.intersection + c.hinge for c in counts)
    seconds = time.perf_counter() - start
    print(json.dumps({"rows": rows, "s": seconds, "MiB": (_memory_kib("VmHWM") - before) / 1024}))  # noqa: T201


def large_file(rows):
    """Print what a large file costs to read, check and judge, against pandas.read_csv alone, in turn."""
    from bench_csv import write_few, write_full  # noqa: PLC0415

    with tempfile.TemporaryDirectory() as folder:
        for shape, write in (("all columns", write_full), ("few columns", write_few)):
            path = Path(folder) / "readings.csv"
            write(path, rows)
            runs = {"bare": [], "ours": []}
            for _ in range(3):
                for what, found in runs.items():
                    done = subprocess.run(
                        [sys.executable, __file__, what, str(path)],
                        check=True,
                        capture_output=True,
                        env={**os.environ, "PYTHONPATH": str(Path(__file__).parents[2])},
                    )
                    found.append(json.loads(done.stdout))
            for key, unit in (("s", "s"), ("MiB", "MiB")):
                bare, ours = (statistics.median(run[key] for run in runs[what]) for what in ("bare", "ours"))
                print(  # noqa: T201
                    f"{rows} rows, {shape}, {unit}: read_csv {bare:.2f}, read, checked and judged {ours:.2f}, "
                    f"x{ours / bare:.2f}; at most 4 wanted"
                )
            assert runs["bare"][0]["rows"] == runs["ours"][0]["rows"]


if __name__ == "__main__":
    if len(sys.argv) == 3:
        measure(sys.argv[1], sys.argv[2])
    else:
        verdicts()
        large_file(int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000)
