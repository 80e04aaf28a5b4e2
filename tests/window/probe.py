"""Run in a process of its own: opens the app at one size, density and font scale and prints what is at fault.

Density and font scale come from KIVY_METRICS_DENSITY and KIVY_METRICS_FONTSCALE, which Kivy reads once.
"""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import json
import os
import sys
import tempfile
from dataclasses import replace
from pathlib import Path

os.environ.setdefault("KIVY_NO_ARGS", "1")
os.environ.setdefault("KIVY_NO_FILELOG", "1")
os.environ.setdefault("KIVY_LOG_MODE", "PYTHON")


def main(width_dp: float, height_dp: float) -> dict[str, list[str]]:  # noqa: PLR0915 - one walk through all
    """Visit every leaf and every sheet; give faults by place."""
    from driving import Driver
    from geometry import faults
    from kivy.config import Config
    from mossgarth import TestClock, fold, type_into

    from analysis.orient.features import Feature
    from fieldapp.help import PAGES
    from fieldapp.settings import Appearance
    from fieldapp.states import Measured

    Config.set("graphics", "maxfps", "0")
    density = float(os.environ.get("KIVY_METRICS_DENSITY", "1"))
    clock = TestClock()
    found: dict[str, list[str]] = {}
    with tempfile.TemporaryDirectory() as folder:
        size = (round(width_dp * density), round(height_dp * density))
        driver = Driver(Path(folder) / "notebook.db", size=size, clock=clock)
        app, outline = driver.app, driver.app.outline

        def look(place: str) -> None:
            driver.frames(8)
            found[place] = faults(outline)

        look("safety")
        app.close_sheets()
        page = app.page
        page.choose_fold("Mossgarth upper limb")
        page.choose_outcrop("MG-14 north face")
        look("Log, nothing read")
        outline.show("Check")
        look("Check, nothing read")
        outline.show("Log")
        type_into(page, fold(20, transection_deg=4.0, scatter_deg=5.0), clock)
        look("Log, just kept")
        page.choose_feature(Feature.BEDDING)
        for digit in "04530":
            page.digit(int(digit))
        look("Log, digits whole")
        page.choose_quadrant("NW")
        look("Log, a check asks")
        page.choose_quadrant("E")
        look("Log, the quadrant does not fit")
        page.clear()
        for digit in "045":
            page.digit(int(digit))
        page.point()
        page.digit(5)
        for digit in "30":
            page.digit(int(digit))
        page.point()
        page.digit(5)
        look("Log, decimals")
        page.clear()
        page.measured(Measured(azimuth_deg=45.2, inclination_deg=30.4, scatter_deg=1.2, samples=40))
        look("Log, measured")
        page.clear()
        page.mend(page.standing[0].reading_id)
        page.set_overturned(overturned=True)
        look("Log, mending")
        page.clear()
        for name in ("settings", "place", "readings", "note", "position", "help"):
            app.open_sheet(name)
            look(f"sheet {name}")
            app.close_sheets()
        page.place_by_hand("26UMU 076 726")
        app.open_sheet("place").place_by_hand("48 degrees north or so, on the other side of the bay")
        look("sheet place, by hand, and a position that is none")
        app.close_sheets()
        look("Log, readings to be placed")
        for name in PAGES:
            app.open_sheet("help", page=name)
            look(f"help {name}")
            app.close_sheets()
        page.strike_out(page.standing[2].reading_id)
        look("Log, struck out")
        outline.show("Check")
        check = outline.leaf("Check")
        look("Check, net")
        page.name_reading(page.standing[0].reading_id)
        look("Check, a reading named")
        check.close_named()
        check.show_picture("plan")
        look("Check, plan")
        here = page.place.outcrop
        page.position_changed(None)
        for name in ("MG-31", "MG-32 beside the stream below the old sheepfold", "MG-33", "MG-34", "MG-35"):
            page.choose_outcrop(name)
        look("Check, plan, outcrops without a position")
        check.show_picture("net")
        look("Check, nothing read at this outcrop")
        page.choose_outcrop(here)
        outline.show("Fault")
        look("Fault")
        outline.leaf("Fault").ask_strike()
        look("sheet number")
        app.close_sheets()
        page.set_fault(replace(page.fault, strike_deg=12.0, zone_width_m=1500.0, sense="sinistral"))
        look("Fault, filled in")
        outline.show("Hand over")
        look("Hand over")
        outline.leaf("Hand over").write_elsewhere()
        outline.sheet.go_to(Path(folder))
        outline.sheet.fields.fault = "There is a file of that name: give another."
        look("sheet to write elsewhere")
        app.close_sheets()
        page.back_up()
        driver.wait(lambda: page.hand_over.backups)
        outline.leaf("Hand over").show_backups()
        look("sheet backups")
        next(iter(outline.sheet.keys.values())).dispatch("on_release")
        look("sheet backups, one chosen")
        outline.sheet.go_back.dispatch("on_release")
        look("Hand over, gone back")
        outline.leaf("Hand over").show_backups()
        look("sheet backups, with the one from before")
        app.close_sheets()
        outline.leaf("Hand over").read_only = True
        look("Hand over, of a notebook that may only be read")
        outline.leaf("Hand over").read_only = False
        page.change_settings(replace(page.settings, appearance=Appearance.DARK, left_handed=True))
        outline.show("Log")
        look("Log, dark, left-handed")
        app.open_demo()
        look("Log, demo")
        outline.show("Check")
        look("Check, demo")
        outline.show("Fault")
        for fold_name in app.page.place.folds:
            app.page.choose_fold(fold_name)
            look(f"Fault, demo, {fold_name}")
        app.page.set_fault(replace(app.page.fault, strike_deg=110.0, zone_width_m=None, sense="dextral"))
        look("Fault, demo, dextral and of no known width")
        outline.show("Log")
        outline.tell_trouble("Something went wrong on the screen. Your readings are safe.")
        look("Log, demo and a mishap told")
        outline.show("Hand over")
        look("Hand over, demo and a mishap told")
        driver.stop()
    return {place: texts for place, texts in found.items() if texts}


if __name__ == "__main__":
    here = Path(__file__).resolve().parent
    sys.path[:0] = [str(here), str(here.parent.parent)]
    print(json.dumps(main(float(sys.argv[1]), float(sys.argv[2]))))  # noqa: T201 - its output
