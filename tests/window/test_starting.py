"""What the running app loads: nothing heavy until a hand-over needs it."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

HERE = Path(__file__).parent
HEAVY = ("pandas", "matplotlib", "scipy", "geopandas", "pyogrio", "jinja2")
CHILD = """
import json, sys
from pathlib import Path
sys.path[:0] = [{here!r}, {root!r}]
from driving import Driver
from mossgarth import TestClock, fold, type_into
clock = TestClock()
driver = Driver(Path({path!r}), size=(1280, 800), clock=clock)
driver.app.close_sheets()
type_into(driver.app.page, fold(14), clock)
for name in ("Check", "Fault", "Hand over", "Log"):
    driver.app.outline.show(name)
    driver.frames(4)
before = [name for name in {heavy!r} if name in sys.modules]
driver.app.outline.leaf("Hand over").write()
driver.frames(4)
print(json.dumps([before, "pandas" in sys.modules]))
"""


def test_pandas_comes_with_the_first_hand_over_and_not_before(tmp_path):
    """Readings, verdict and all four leaves need none of the heavy libraries; writing the CSV loads pandas."""
    script = CHILD.format(
        here=str(HERE), root=str(HERE.parent.parent), path=str(tmp_path / "notebook.db"), heavy=HEAVY
    )
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, timeout=120, check=False
    )
    assert done.returncode == 0, done.stderr[-2000:]
    before, after = json.loads(done.stdout.splitlines()[-1])
    assert before == []
    assert after
