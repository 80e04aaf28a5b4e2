"""The Fault leaf: the fault beside the fold, and what the folds can and cannot say about it."""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from kivy.app import App
from kivy.factory import Factory
from kivy.metrics import dp
from kivy.properties import NumericProperty, ObjectProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout

from fieldapp.drawing.faultplane import FaultPlane
from fieldapp.drawing.faultscene import CurveLine, FaultScene
from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Choice  # noqa: F401 - the .kv file uses it
from fieldapp.states import Change

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from kivy.uix.widget import Widget

    from fieldapp.look.form import Form
    from fieldapp.states import FaultState

SENSES = (("sinistral", "Sinistral"), ("dextral", "Dextral"), ("unknown", "Unknown"))
BESIDE_LINES = 11.0  # lines of small type that the picture needs; on a lower page it stands among the words
SPEAKING = (
    "headline",
    "angle",
    "figures",
    "picture",
    "lines",
    "note",
    "because",
    "cautions",
)  # once there is an answer


def fill(
    box: BoxLayout, make: Callable[[], Widget], values: Sequence[dict[str, str]], *, first: int = 0
) -> None:
    """Give a box one child for each of the values, after its `first` ones; those there already are used again."""
    there = list(reversed(box.children))[first:]
    for child in there[len(values) :]:
        box.remove_widget(child)
    for number, properties in enumerate(values):
        child = there[number] if number < len(there) else make()
        for name, value in properties.items():
            setattr(child, name, value)
        if child.parent is None:
            box.add_widget(child)


class Told(BoxLayout):
    """A figure with its name above and what belongs to it below."""

    name = StringProperty("")
    figure = StringProperty("")
    more = StringProperty("")


class ExplanationRow(BoxLayout):
    """A piece of the curve, the explanation's name, and its figures: the key of the picture."""

    kind = StringProperty("rotation")
    name = StringProperty("")
    words = StringProperty("")


class Sentences(BoxLayout):
    """Sentences, one below the other, with their name above."""

    name = StringProperty("")
    sentences = ObjectProperty(())

    def on_sentences(self, *_: object) -> None:
        """Set the sentences anew."""
        values = [{"text": sentence} for sentence in self.sentences]
        fill(self, Factory.Sentence, values, first=1)


class FaultInputs(BoxLayout):
    """Strike and width, and the sense: beside or below one another."""

    row_px = NumericProperty(100)


def scene_of(state: FaultState) -> FaultScene | None:
    """Turn what the page says into what the picture shows."""
    curves = state.curves
    if curves is None:
        return None
    lines = [
        CurveLine("rotation", "rotation", "rotation", curves.rotation),
        CurveLine("partitioned", "partitioned", "partitioned", curves.partitioned),
        *(
            CurveLine("transpression", f"transpression {angle:g}°", f"T {angle:g}°", curve)
            for angle, curve in curves.transpression
        ),
        *(
            CurveLine("late", f"late cleavage, after {100 * share:g}%", f"late {100 * share:g}%", curve)
            for share, curve in curves.late
        ),
    ]
    return FaultScene(
        curves=tuple(lines),
        angle_deg=curves.fold_fault_angle_deg,
        datum=curves.datum,
        ellipse=curves.ellipse,
        x_range_deg=curves.x_range_deg,
        y_range_deg=curves.y_range_deg,
        way="clockwise" if curves.sign > 0 else "anticlockwise",
        confidence=state.confidence,
        zone_width_km=state.zone_width_km,
    )


class FaultLeaf(BoxLayout):
    """The leaf; `refresh` shows the presenter's state, `arrange` fits it to the screen."""

    form = ObjectProperty(None)
    strike = StringProperty("")
    sense = StringProperty("unknown")
    width_text = StringProperty("")
    ask = StringProperty("")
    headline = StringProperty("")
    angle = StringProperty("")
    note = StringProperty("")
    because = ObjectProperty(())
    cautions = ObjectProperty(())
    senses = ObjectProperty(SENSES)

    def __init__(self, **kwargs: object) -> None:
        super().__init__(**kwargs)
        app = App.get_running_app()
        self.plane = FaultPlane()
        app.bind(theme=self.plane.setter("theme"))
        self.plane.theme = app.theme
        self._state: FaultState | None = None
        # Kivy holds what has an id weakly; what is taken off the leaf for a while has to be held here.
        self._parts = {name: proxy.__self__ for name, proxy in self.ids.items()}
        self._order: list[Widget] = list(reversed(self._parts["column"].children))

    @property
    def page(self) -> object:
        """The presenter."""
        return App.get_running_app().page

    # Showing

    def refresh(self, change: Change) -> None:
        """Show what has changed."""
        if not change & (Change.FAULT | Change.CHECK | Change.PLACE):
            return
        fault, state = self.page.fault, self.page.faulting
        self.strike = "–" if fault.strike_deg is None else f"{fault.strike_deg % 360:03.0f}°"
        self.width_text = "–" if fault.zone_width_m is None else f"{fault.zone_width_m:.7g} m"
        self.sense = fault.sense
        if state is self._state:
            return
        before, self._state = self._state, state
        self.ask, self.headline, self.angle = state.ask, state.headline, state.angle
        self.note = state.note
        self.because, self.cautions = state.because, state.cautions
        self.plane.scene = scene_of(state)
        self._show_rows(state)
        if before is None or (before.curves is None) is not (state.curves is None):
            self.arrange()

    def _show_rows(self, state: FaultState) -> None:
        told = [{"name": one.name, "figure": one.figure, "more": one.more} for one in state.figures]
        fill(self._parts["figures"], Told, told)
        lines = [{"kind": one.kind, "name": one.name, "words": one.words} for one in state.lines]
        fill(self._parts["lines"], ExplanationRow, lines)

    # Arranging

    def on_form(self, *_: object) -> None:
        """Arrange for another screen."""
        self.arrange()

    def arrange(self) -> None:
        """Put everything where this screen has room for it, and leave out what has nothing to say."""
        form: Form | None = self.form
        if form is None or self._state is None:
            return
        parts, state = self._parts, self._state
        shown = state.curves is not None
        beside = form.split or (form.low and form.log_height_dp >= form.line_dp(form.small_sp, BESIDE_LINES))
        column, picture, side = parts["column"], parts["picture"], parts["side"]
        for widget in (self.plane, side):
            if widget.parent is not None:
                widget.parent.remove_widget(widget)
        self.plane.words_sp = form.small_sp
        if shown and beside:
            side.add_widget(self.plane)
            self.add_widget(side)
        elif shown:
            picture.add_widget(self.plane)
            picture.height = dp(self._picture_dp(form))
        silent = {parts["ask"]} if shown else {parts[name] for name in SPEAKING}
        if beside:
            silent.add(picture)
        kept = [part for part in self._order if part not in silent]
        if list(reversed(column.children)) != kept:
            column.clear_widgets()
            for part in kept:
                column.add_widget(part)

    @staticmethod
    def _picture_dp(form: Form) -> float:
        """Height of the picture where it stands among the words."""
        if form.low:
            return form.line_dp(form.small_sp, BESIDE_LINES)
        return form.log_height_dp * 0.42 if form.large else max(form.width_dp * 0.92, 300.0)

    # Typing

    def ask_strike(self) -> None:
        """Type the strike of the fault."""
        App.get_running_app().open_sheet(
            "number", title="Strike of the fault", unit="°", low=0.0, high=360.0, take_number=self._set_strike
        )

    def ask_width(self) -> None:
        """Type the width of the zone in which the folds lie."""
        App.get_running_app().open_sheet(
            "number",
            title="Width of the folded zone",
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
