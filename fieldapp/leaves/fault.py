"""The Fault leaf: the fault's strike, sense and zone width, and the angle of the fold's hinge to it.

What each explanation predicts at that angle is drawn by `figures` once the explanations are told apart; until
then the leaf says so instead of showing a figure.
"""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from kivy.app import App
from kivy.metrics import dp
from kivy.properties import ObjectProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout

from analysis.orient.forms import azimuth_text
from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Choice  # noqa: F401 - the .kv file uses it
from fieldapp.states import Change

if TYPE_CHECKING:
    from kivy.uix.widget import Widget

CAUTION = (
    "Several histories give the same angles. Either sense of transection is possible in either shear, and oblique "
    "beds give transection with no wrench at all (Treagus & Treagus 1981, 1992). The verdict is geometry; the "
    "shear sense is a hint."
)
SENSES = (("sinistral", "Sinistral"), ("dextral", "Dextral"), ("unknown", "Unknown"))


def fold_fault_angle_deg(hinge_trend_deg: float, fault_strike_deg: float) -> float:
    """Acute angle, 0 to 90 degrees, in plan between hinge trend and fault strike."""
    apart = abs(hinge_trend_deg - fault_strike_deg) % 180.0
    return min(apart, 180.0 - apart)


class FaultLeaf(BoxLayout):
    """The leaf."""

    form = ObjectProperty(None)
    strike = StringProperty("")
    sense = StringProperty("unknown")
    width_text = StringProperty("")
    angle = StringProperty("")
    waiting = StringProperty("")
    caution = StringProperty(CAUTION)
    senses = ObjectProperty(SENSES)

    @property
    def page(self) -> object:
        """The presenter."""
        return App.get_running_app().page

    def refresh(self, change: Change) -> None:
        """Show what has changed."""
        if not change & (Change.FAULT | Change.CHECK | Change.PLACE):
            return
        fault, check = self.page.fault, self.page.check
        self.strike = "–" if fault.strike_deg is None else f"{azimuth_text(fault.strike_deg)}°"
        self.width_text = "–" if fault.zone_width_m is None else f"{fault.zone_width_m:g} m"
        self.sense = fault.sense
        if fault.strike_deg is None:
            self.angle = "Set the fault's strike to see its angle to the fold."
        elif check.hinge is None:
            self.angle = "The angle to the fold comes with the first hinge."
        else:
            angle = fold_fault_angle_deg(check.hinge.line.trend_deg, fault.strike_deg)
            self.angle = (
                f"Hinge {azimuth_text(check.hinge.line.trend_deg)}°, {angle:.0f}° from the fault in plan"
            )
        self.show_figures()

    def show_figures(self, picture: Widget | None = None) -> None:
        """Put the picture of the explanations in its place, or say that there is none."""
        box = self.ids.figures
        box.clear_widgets()
        if picture is not None:
            self.waiting = ""
            box.add_widget(picture)
            box.height = dp(300)
        else:
            self.waiting = "The explanations are not compared in this version."
            box.height = 0

    def ask_strike(self) -> None:
        """Type the strike of the fault."""
        App.get_running_app().open_sheet(
            "number", title="Strike of the fault", unit="°", low=0.0, high=360.0, take_number=self._set_strike
        )

    def ask_width(self) -> None:
        """Type the width of the fault zone."""
        App.get_running_app().open_sheet(
            "number",
            title="Width of the fault zone",
            unit="m",
            low=0.0,
            high=100_000.0,
            take_number=self._set_width,
        )

    def choose_sense(self, sense: str) -> None:
        """Set the sense of slip."""
        self.page.set_fault(replace(self.page.fault, sense=sense))

    def _set_strike(self, value: float | None) -> None:
        self.page.set_fault(replace(self.page.fault, strike_deg=value))

    def _set_width(self, value: float | None) -> None:
        self.page.set_fault(replace(self.page.fault, zone_width_m=value))


load_kv("fault")
