from __future__ import annotations

import json
import os
import subprocess
import sys
from collections import Counter
from pathlib import Path

from fieldapp.notebook import open_notebook
from fieldapp.notebook.backups import faults_in, readings_in, rows_not_whole

ROOT = Path(__file__).parents[2]
TRIAL = Path(__file__).with_name("kill_trial.py")
KILLS = 200


def test_two_hundred_kills_lose_no_reading_and_double_none(tmp_path, clock):
    """Killed at 200 random moments, the page loses no acknowledged key or reading and keeps none twice."""
    path = tmp_path / "field.notebook"
    done = subprocess.run(
        [sys.executable, TRIAL, path, str(KILLS), "20260501"],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        timeout=300,
    )
    assert done.returncode == 0, done.stderr
    told = json.loads(done.stdout)
    assert told["lives"] == KILLS
    assert told["wrong"] == []
    assert len(told["kept"]) > KILLS / 4, "too few readings were entered for the kills to mean anything"

    opened = open_notebook(path, clock)
    assert opened.report.set_aside is None
    assert faults_in(opened.notebook._db) == []
    assert rows_not_whole(opened.notebook._db) == 0
    revisions = opened.notebook.revisions()
    ids = {r.reading_id for r in revisions}
    assert set(told["kept"].values()) <= ids
    # The number of a reading stands in its digits: each once, none left out.
    numbers = Counter(int(r.strike_deg) + 360 * (int(r.dip_deg) - 10) for r in revisions)
    assert numbers == Counter(range(len(revisions)))
    for backup in opened.notebook.path.parent.glob("* backups/*.backup"):
        assert set(readings_in(backup)) <= set(revisions)
    opened.notebook.close()
