from __future__ import annotations

import subprocess
import sys
from pathlib import Path

from analysis.demo import DEMO_FAULT_STRIKE_DEG, DEMO_NOTE, demo_readings
from fieldapp.dispatch import at_once
from fieldapp.notebook import open_notebook
from fieldapp.notebook.demo import make_demo
from fieldapp.outcrop import open_page
from fieldapp.states import Sign

ROOT = Path(__file__).resolve().parents[3]


def test_the_notebook_holds_the_invented_readings_of_the_desk(tmp_path, clock):
    """App and command show the same invented readings, each time, and they say that they are invented."""
    path = make_demo(tmp_path / "demo.notebook", clock)
    notebook = open_notebook(path, clock).notebook
    kept = notebook.standing()
    notebook.close()
    readings = demo_readings()
    assert readings == demo_readings()
    assert len(kept) == len(readings) == len({reading.reading_id for reading in readings})
    for reading in readings:
        assert kept[reading.reading_id].cells() == reading.cells()
    assert {reading.position_source for reading in readings} == {"invented"}
    assert any(reading.note == DEMO_NOTE for reading in readings)


def test_it_shows_one_fold_of_each_kind_beside_one_fault(tmp_path, clock):
    """One fold is transected, one axial planar, one is hardly begun; all lie beside the Tarrow Fault."""
    path = make_demo(tmp_path / "demo.notebook", clock)
    page = open_page(path, clock=clock, dispatch=at_once, demo=True)
    assert page.place.fold == "Mossgarth fold"
    signs = {}
    for fold in page.place.folds:
        page.choose_fold(fold)
        signs[fold] = page.strip.sign
        assert (page.fault.strike_deg, page.fault.sense) == (DEMO_FAULT_STRIKE_DEG, "sinistral")
        assert page.fault.zone_width_m == 2000.0
    assert signs == {
        "Mossgarth fold": Sign.CROSSED_CLOCKWISE,
        "Low Mossgarth fold": Sign.PARALLEL,
        "Mossgarth Edge fold": Sign.OPEN_RING,
    }
    assert page.place.demo
    page.close()


def test_it_is_made_once(tmp_path, clock, make_reading):
    """What is done on the invented notebook stays; it is not filled again."""
    path = make_demo(tmp_path / "demo.notebook", clock)
    notebook = open_notebook(path, clock).notebook
    notebook.keep(make_reading())
    count = notebook.count()
    notebook.close()
    make_demo(path, clock)
    notebook = open_notebook(path, clock).notebook
    assert notebook.count() == count
    notebook.close()


def test_making_it_loads_no_tables(tmp_path):
    """The demo is made on a tablet without pandas, scipy or figures being loaded."""
    code = (
        "import sys, datetime, pathlib\n"
        "from fieldapp.notebook.demo import make_demo\n"
        f"make_demo(pathlib.Path({str(tmp_path / 'demo.notebook')!r}), "
        "lambda: datetime.datetime(2026, 5, 4, tzinfo=datetime.UTC))\n"
        "print(sorted({'pandas', 'scipy', 'matplotlib', 'click', 'kivy'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout.strip()) == (0, "[]"), done.stderr
