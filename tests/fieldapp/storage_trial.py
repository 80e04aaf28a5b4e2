"""Run as a process of its own: a page on storage that the operating system really refuses to write to.

    storage_trial.py full NOTEBOOK       the process may write no file beyond a little more than now (RLIMIT_FSIZE)
    storage_trial.py read-only NOTEBOOK  the process is no longer the owner, and the modes forbid writing

Prints what the page said and did, as JSON.
"""

from __future__ import annotations

import json
import os
import resource
import signal
import sys
from datetime import UTC, datetime
from pathlib import Path

from analysis.orient.features import Feature
from fieldapp.dispatch import at_once
from fieldapp.outcrop import open_page

NOBODY = 65534


def clock() -> datetime:
    return datetime(2026, 5, 1, 12, tzinfo=UTC)


def type_in(page):
    page.choose_feature(Feature.BEDDING)
    for digit in "04530":
        page.digit(int(digit))
    page.choose_quadrant("SE")


def told(page, kept):
    return {
        "kept": kept,
        "message": page.message.text if page.message else "",
        "azimuth": page.entry.azimuth_text,
        "inclination": page.entry.inclination_text,
        "quadrant": page.entry.quadrant,
        "saved": page.entry.saved,
        "readings": len(page.standing),
        "read_only": page.hand_over.read_only,
    }


def full(path):
    page = open_page(path, clock=clock, dispatch=at_once)
    signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    largest = max(p.stat().st_size for p in path.parent.iterdir() if p.is_file())
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    resource.setrlimit(resource.RLIMIT_FSIZE, (largest + 200_000, hard))
    kept = 0
    while kept < 500:
        type_in(page)
        if not page.keep():
            break
        kept += 1
    refused = told(page, kept)
    resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))
    again = page.keep()
    return [refused, told(page, again)]


def read_only(path):
    for module in (
        "analysis.files.csvfile",
        "analysis.files.join",
    ):  # what is loaded when used, before the drop
        __import__(module)
    if os.getuid() == 0:
        os.setgroups([])
        os.setgid(NOBODY)
        os.setuid(NOBODY)
    page = open_page(path, clock=clock, dispatch=at_once)
    opening = page.message.text if page.message else ""
    type_in(page)
    kept = page.keep()
    return [{"opening": opening, "strip": page.strip.headline}, told(page, kept)]


if __name__ == "__main__":
    trial = {"full": full, "read-only": read_only}[sys.argv[1]]
    sys.stdout.write(json.dumps(trial(Path(sys.argv[2]))))
