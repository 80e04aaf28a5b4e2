"""The invented notebook: the Mossgarth folds beside the Tarrow Fault, as `analysis.demo` makes them up.

Nothing of it was ever read on rock. It is a file of its own and cannot mix with real readings.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.demo import DEMO_FAULT_SENSE, DEMO_FAULT_STRIKE_DEG, DEMO_ZONE_WIDTH_KM, demo_readings
from fieldapp.notebook.opening import open_notebook
from fieldapp.states import FaultInput

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime
    from pathlib import Path

FAULT = FaultInput(
    strike_deg=DEMO_FAULT_STRIKE_DEG, sense=DEMO_FAULT_SENSE, zone_width_m=1000.0 * DEMO_ZONE_WIDTH_KM
)
"""The Tarrow Fault, made up like the folds."""


def make_demo(path: Path, clock: Callable[[], datetime]) -> Path:
    """Write the invented notebook at `path` unless there is one; raises NotebookError where that fails."""
    notebook = open_notebook(path, clock).notebook
    try:
        if notebook.count() == 0 and not notebook.read_only:
            readings = demo_readings()
            notebook.keep_all(readings)
            for fold in dict.fromkeys(reading.fold for reading in readings):
                notebook.set_fault(fold, FAULT)
            first = readings[0]
            notebook.save_settings({"page.fold": first.fold, "page.outcrop": first.outcrop})
    finally:
        notebook.close()
    return path
