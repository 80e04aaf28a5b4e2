from __future__ import annotations

from fieldapp.dispatch import at_once
from fieldapp.notebook import open_notebook
from fieldapp.notebook.demo import demo_readings, make_demo
from fieldapp.outcrop import open_page
from fieldapp.states import Sign


def test_the_invented_notebook_is_the_same_each_time():
    """Its readings never change, and each says that it is invented."""
    readings = demo_readings()
    assert readings == demo_readings()
    assert {r.observer for r in readings} == {"invented"}
    assert len({r.reading_id for r in readings}) == len(readings)


def test_it_shows_one_fold_of_each_kind(tmp_path, clock):
    """One fold is transected, one axial planar, one is hardly begun; the page says that it is the demo."""
    path = make_demo(tmp_path / "demo.notebook", clock)
    page = open_page(path, clock=clock, dispatch=at_once, demo=True)
    signs = {}
    for fold in page.place.folds:
        page.choose_fold(fold)
        signs[fold] = page.strip.sign
        assert page.fault.sense == "sinistral"
    assert signs == {
        "Mossgarth": Sign.CROSSED_CLOCKWISE,
        "Mossgarth east": Sign.PARALLEL,
        "Tarrow Beck": Sign.OPEN_RING,
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
