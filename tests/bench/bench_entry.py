"""What the page sees of reversed strikes over 10,000 entries, and how long it takes to keep a reading.

    python tests/bench/bench_entry.py [ENTRIES]

The first part enters planes on the page (see tests/fieldapp/reversed_strikes.py), with the side tapped and without.
Asked for: caught 99.5% with a side and 95% without after the first five readings of an outcrop, false alarms 1%. The
second part times each key and Keep, without a window, at 500 and 2,000 readings in the fold, and opening such a
notebook. It prints figures and never fails.
"""

from __future__ import annotations

import statistics
import sys
import tempfile
import time
from datetime import UTC, datetime
from pathlib import Path

import numpy as np

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE.parent.parent), str(HERE.parent / "fieldapp")]

from reversed_strikes import Seen, entered  # noqa: E402 - the path is set above

from analysis.files.reading import Reading  # noqa: E402 - as above
from analysis.orient.features import Feature  # noqa: E402 - as above
from fieldapp.dispatch import at_once  # noqa: E402 - as above
from fieldapp.notebook import open_notebook  # noqa: E402 - as above
from fieldapp.notebook.ids import ReadingIds  # noqa: E402 - as above
from fieldapp.outcrop import open_page  # noqa: E402 - as above


def clock() -> datetime:
    """Give the time."""
    return datetime.now(UTC)


def told(seen: Seen) -> str:
    """Write the shares with their counts."""
    return (
        f"caught {seen.caught} of {seen.reversed_} ({seen.caught_share:.2%}), "
        f"false alarms {seen.questioned} of {seen.good} ({seen.false_alarm_share:.2%})"
    )


def fill(path: Path, count: int) -> None:
    """Write a notebook of one fold: half bedding, half cleavage, ten outcrops."""
    rng = np.random.default_rng(1)
    ids = ReadingIds(clock)
    notebook = open_notebook(path, clock).notebook
    notebook.keep_all(
        [
            Reading(
                reading_id=ids(),
                recorded_at=clock(),
                fold="Fold 1",
                outcrop=f"{n % 10}",
                feature=Feature.BEDDING if n % 2 else Feature.CLEAVAGE,
                strike_deg=((30 if n % 4 < 2 else 215) if n % 2 else 40) + rng.normal(0, 4),
                dip_deg=min(89.0, abs((55 if n % 2 else 84) + rng.normal(0, 4))),
            )
            for n in range(count)
        ]
    )
    notebook.close()


def times(path: Path) -> None:
    """Time opening, keys and keeps at the size of a notebook."""
    start = time.perf_counter()
    page = open_page(path, clock=clock, dispatch=lambda _work, _done, _failed: None)
    opening = time.perf_counter() - start
    keys, keeps = [], []
    for n in range(40):
        for digit in f"0{28 + n % 9}55":
            start = time.perf_counter()
            page.digit(int(digit))
            _ = page.entry
            keys.append(time.perf_counter() - start)
        page.choose_quadrant("SE")
        start = time.perf_counter()
        page.keep()
        _ = (page.strip, page.entry, page.tabs, page.recent, page.net, page.funnel)
        keeps.append(time.perf_counter() - start)
    count = len(page.standing) - 40
    page.close()
    parts = [f"{count} readings: open {opening * 1e3:.0f} ms"]
    for name, seconds in (("key", keys), ("Keep to strip, net and lists", keeps)):
        worst = sorted(seconds)[int(len(seconds) * 0.95)]
        parts.append(f"{name} {statistics.median(seconds) * 1e3:.1f} ms (95%: {worst * 1e3:.1f})")
    start = time.perf_counter()
    again = open_page(path, clock=clock, dispatch=at_once)
    parts.append(f"open with funnel and forecast {(time.perf_counter() - start) * 1e3:.0f} ms")
    again.close()
    say("; ".join(parts))


def say(text: str) -> None:
    """Print a line."""
    sys.stdout.write(f"{text}\n")


def main(entries: int) -> None:
    """Run both parts."""
    with tempfile.TemporaryDirectory() as folder:
        for with_side in (True, False):
            start = time.perf_counter()
            seen = entered(Path(folder) / f"{with_side}.db", clock, entries, seed=11, with_side=with_side)
            name = "with the side tapped" if with_side else "without a side, after five readings"
            say(f"{entries} entries {name}: {told(seen)}; {time.perf_counter() - start:.0f} s")
        for count in (500, 2000):
            path = Path(folder) / f"{count}.db"
            fill(path, count)
            times(path)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 10_000)
