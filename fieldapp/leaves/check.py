"""The Check leaf: net or plan, funnel, means, the next best reading, whatever blocks a verdict, and this outcrop."""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

from typing import TYPE_CHECKING

from kivy.app import App
from kivy.metrics import dp, sp
from kivy.properties import BooleanProperty, ListProperty, ObjectProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.floatlayout import FloatLayout

from fieldapp.drawing.funnel import NarrowingFunnel
from fieldapp.drawing.net import EqualAreaNet
from fieldapp.drawing.plan import PlanSketch
from fieldapp.leaves import load_kv, scenes
from fieldapp.leaves.parts import Choice, Scrolled, Words
from fieldapp.look.form import TOUCH_DP
from fieldapp.states import Change

if TYPE_CHECKING:
    from fieldapp.look.form import Form


UNPLACED_LINES = 1.8  # of the two that stand below the plan: words that wrap leave some of the first one free
LETTER = 0.55  # mean width of a letter, as a share of the size of the type


class MeanFigure(BoxLayout):
    """A mean: what it is, its attitude in large figures, and from how many readings."""

    name = StringProperty("")
    figure = StringProperty("")
    source = StringProperty("")
    colour = ListProperty((0, 0, 0, 1))


class Legend(BoxLayout):
    """Which marker and which letter stand for which feature."""


class LegendItem(BoxLayout):
    """One marker with its letter and word."""

    shape = StringProperty("dot")
    text = StringProperty("")
    colour = ListProperty((0, 0, 0, 1))


class Named(BoxLayout):
    """What was touched on the net: its particulars, and the keys that mend it."""

    title = StringProperty("")
    lines = StringProperty("")
    reading_id = StringProperty("")
    struck_out = BooleanProperty(False)


class AdviceWords(BoxLayout):
    """A name and a sentence below it."""

    name = StringProperty("")
    text = StringProperty("")
    more = StringProperty("")
    strong = BooleanProperty(True)


class PlanNote(Words):
    """What the plan cannot show, below it."""


class CheckLeaf(FloatLayout):
    """The leaf; `refresh` shows the presenter's state, `arrange` fits it to the screen."""

    form = ObjectProperty(None)
    picture = StringProperty("net")

    def __init__(self, **kwargs: object) -> None:
        super().__init__(**kwargs)
        self.net = EqualAreaNet()
        self.plan = PlanSketch()
        self.funnel = NarrowingFunnel()
        self.pictures = Choice(choices=(("net", "Net"), ("plan", "Plan")), chosen="net")
        self.legend = Legend()
        self.hinge = MeanFigure(name="Hinge")
        self.cleavage = MeanFigure(name="Cleavage")
        self.intersection = MeanFigure(name="Intersection")
        self.next_reading = AdviceWords(name="Read next")
        self.limbs = AdviceWords(name="Limb against limb", strong=False)
        self.because = AdviceWords(name="Why", strong=False)
        self.outcrop = AdviceWords(name="This outcrop", strong=False)
        self.unplaced = PlanNote()
        self.named = Named()
        self._mean_named = ""
        self._plan_is_behind = True
        self._picture_box = BoxLayout(orientation="vertical")
        self._picture_box.bind(width=lambda *_: self._show_unplaced())
        self._bind()

    @property
    def page(self) -> object:
        """The presenter."""
        return App.get_running_app().page

    def _bind(self) -> None:
        app = App.get_running_app()
        for widget in (self.net, self.plan, self.funnel):
            app.bind(theme=widget.setter("theme"))
            widget.theme = app.theme
        self.net.bind(on_reading=lambda _net, key: self._reading_touched(key))
        self.net.bind(on_mean=lambda _net, name: self._mean_touched(name))
        self.net.bind(on_miss=lambda _net: self._nothing_touched())
        self.plan.bind(on_outcrop=lambda _plan, name: self.page.choose_outcrop(name))
        self.pictures.bind(on_choice=lambda _choice, value: self.show_picture(value))

    # Showing

    def refresh(self, change: Change) -> None:
        """Show what has changed."""
        page = self.page
        if change & (Change.CHECK | Change.PLACE | Change.NAMED | Change.SETTINGS):
            chosen = page.named.reading_id if page.named is not None else ""
            self.net.scene = scenes.net_scene(page.check, page.net, page.place.outcrop, chosen)
        if change & (Change.CHECK | Change.FORECAST | Change.SETTINGS):
            self.funnel.scene = scenes.funnel_scene(page.funnel, next(iter(page.check.because), ""))
            self._show_words()
        if change & (Change.PLAN | Change.PLACE):
            self._plan_is_behind = True
            self._show_plan()
        if change & (Change.NAMED | Change.CHECK):
            self._show_named()

    def _show_plan(self) -> None:
        """Draw the plan, if it is on the screen; else it waits."""
        if self.picture == "plan" and self._plan_is_behind:
            self._plan_is_behind = False
            self.plan.scene = scenes.plan_scene(self.page.plan)
            self._show_unplaced()

    def _show_unplaced(self) -> None:
        """Name below the plan the outcrops that it cannot show, in two lines."""
        if self.form is None or self.picture != "plan":
            return
        letter = sp(self.form.small_sp) * LETTER
        self.unplaced.text = scenes.unplaced_words(
            self.page.plan, int(UNPLACED_LINES * self._picture_box.width / letter)
        )
        if bool(self.unplaced.text) is not (self.unplaced.parent is not None):
            self._fill_picture()

    def _show_words(self) -> None:
        check, notation = self.page.check, self.page.settings.notation
        counts = check.readings
        hinge, cleavage, intersection = check.hinge, check.cleavage, check.intersection
        self.hinge.figure = "–" if hinge is None else scenes.line_text(hinge.line)
        self.cleavage.figure = "–" if cleavage is None else scenes.plane_text(cleavage.plane, notation)
        self.intersection.figure = "–" if intersection is None else scenes.line_text(intersection.axis.line)
        self.hinge.source = f"{counts.bedding} bedding" if hinge is None else f"from {hinge.source}"
        self.cleavage.source = f"from {counts.cleavage} planes" if cleavage else f"{counts.cleavage} read"
        self.intersection.source = scenes.intersection_source(check)
        self.next_reading.text, self.next_reading.more = scenes.next_words(check)
        self.limbs.text = scenes.limb_words(check, notation) or "One limb only, or too few bedding readings."
        because = [*check.because, *check.warnings]
        self.because.text = "\n".join(because)
        here, name = self.page.outcrop_check, self.page.place.outcrop
        self.outcrop.text = scenes.outcrop_words(check, here, name, notation)

    def _show_named(self) -> None:
        named = self.page.named
        if named is not None:
            self._mean_named = ""
            self.named.title, self.named.lines = named.title, "\n".join(named.lines)
            self.named.reading_id, self.named.struck_out = named.reading_id, named.struck_out
        elif self._mean_named:
            title, lines = scenes.mean_lines(self.page.check, self._mean_named)
            self.named.title, self.named.lines, self.named.reading_id = title, "\n".join(lines), ""
        shown = named is not None or bool(self._mean_named)
        if shown and self.named.parent is None:
            self.add_widget(self.named)
        elif not shown and self.named.parent is not None:
            self.remove_widget(self.named)

    def _reading_touched(self, key: str) -> None:
        self._mean_named = ""
        self.page.name_reading(key)
        self._show_named()

    def _mean_touched(self, name: str) -> None:
        self._mean_named = name
        if self.page.named is not None:
            self.page.name_nothing()
        self._show_named()

    def _nothing_touched(self) -> None:
        self.close_named()

    def close_named(self) -> None:
        """Put the particulars away."""
        self._mean_named = ""
        if self.page.named is not None:
            self.page.name_nothing()
        self._show_named()

    def show_picture(self, name: str) -> None:
        """Show the net or the plan."""
        self.picture = self.pictures.chosen = name
        self._show_plan()
        self._fill_picture()

    # Arranging

    def on_form(self, *_: object) -> None:
        """Arrange for another screen."""
        self.arrange()

    def _fill_picture(self) -> None:
        box = self._picture_box
        box.clear_widgets()
        self.pictures.size_hint_y, self.legend.size_hint_y = None, None
        least = 40.0 if self.form.low else TOUCH_DP
        self.pictures.height = dp(max(self.form.line_dp(self.form.small_sp) + 14.0, least))
        self.legend.height = dp(self.form.line_dp(self.form.small_sp) + 6)
        if not self.form.low:
            box.add_widget(self.pictures)
        box.add_widget(self.net if self.picture == "net" else self.plan)
        if self.picture == "plan" and self.unplaced.text:
            box.add_widget(self.unplaced)
        if self.picture == "net" and not self.form.low:
            box.add_widget(self.legend)

    def arrange(self) -> None:
        """Put everything where this screen has room for it."""
        form: Form | None = self.form
        if form is None:
            return
        self.clear_widgets()
        for widget in (
            self._picture_box, self.funnel, self.pictures, self.legend, self.hinge, self.cleavage,
            self.intersection, self.next_reading, self.limbs, self.because, self.outcrop,
        ):  # fmt: skip
            if widget.parent is not None:
                widget.parent.remove_widget(widget)
            widget.size_hint = (1, 1)
        self._picture_box.clear_widgets()
        self.net.words_sp = self.funnel.words_sp = self.plan.words_sp = form.small_sp
        self.net.marker_dp = 12.0 if form.large else 10.0
        self._picture_box.spacing = dp(form.gap_dp)
        self._fill_picture()
        content = self._side_by_side(form) if form.split or form.low else self._column(form)
        content.pos_hint = {"x": 0.0, "y": 0.0}
        self.add_widget(content)
        self._show_named()

    def _means(self, form: Form) -> BoxLayout:
        row = BoxLayout(spacing=dp(form.gap_dp), size_hint_y=None)
        row.height = dp(form.line_dp(form.small_sp, 2.0) + form.line_dp(form.key_sp * 0.85) + 8)
        for figure in (self.hinge, self.cleavage, self.intersection):
            row.add_widget(figure)
        return row

    def _words(self) -> tuple[AdviceWords, ...]:
        words = (self.next_reading, self.limbs, self.because, self.outcrop)
        for one in words:
            one.size_hint_y = None
        return words

    def _scrolled(self, column: BoxLayout) -> Scrolled:
        column.size_hint_y = None
        column.bind(minimum_height=column.setter("height"))
        scroll = Scrolled()
        scroll.add_widget(column)
        return scroll

    def _column(self, form: Form) -> Scrolled:
        """Portrait: picture, means, funnel and words below one another."""
        edge, gap = dp(form.edge_dp), dp(form.gap_dp)
        column = BoxLayout(orientation="vertical", padding=(edge, gap, edge, gap), spacing=gap)
        self._picture_box.size_hint_y = self.funnel.size_hint_y = None
        extra = self.pictures.height + self.legend.height + self.net.head_px + 2 * gap
        across = dp(form.width_dp) - 2 * edge
        # On a tablet the words below the picture stay on the screen without scrolling, on a phone the picture does.
        most = dp(form.log_height_dp) * 0.52 if form.large else dp(form.log_height_dp) - 2 * gap
        self._picture_box.height = min(across + extra, most)
        self.funnel.height = (
            dp(form.log_height_dp) * 0.23 if form.large else dp(max(form.width_dp * 0.62, 220))
        )
        for widget in (
            self._picture_box,
            self._means(form),
            self.next_reading,
            self.funnel,
            self.limbs,
            self.because,
            self.outcrop,
        ):
            column.add_widget(widget)
        self._words()
        return self._scrolled(column)

    def _side_by_side(self, form: Form) -> BoxLayout:
        """Landscape: the picture left, funnel and words right, the means below."""
        edge, gap = dp(form.edge_dp), dp(form.gap_dp)
        whole = BoxLayout(orientation="vertical", padding=(edge, gap, edge, gap), spacing=gap)
        top = BoxLayout(spacing=gap * 2)
        self._picture_box.size_hint_x = 0.58
        top.add_widget(self._picture_box)
        side = BoxLayout(orientation="vertical", spacing=gap, padding=(0, 0, dp(10), 0))  # clear of the bar
        self.funnel.size_hint_y = None
        self.funnel.height = dp(max(form.log_height_dp * 0.42, 150))
        if form.low:
            side.add_widget(self.pictures)
        side.add_widget(self.funnel)
        for widget in self._words():
            side.add_widget(widget)
        if form.low:
            side.add_widget(self._means(form), index=len(side.children) - 1)
            side.add_widget(self.legend)
        scroll = self._scrolled(side)
        scroll.size_hint_x = 0.42
        top.add_widget(scroll)
        whole.add_widget(top)
        if not form.low:
            whole.add_widget(self._means(form))
        return whole


load_kv("check")
