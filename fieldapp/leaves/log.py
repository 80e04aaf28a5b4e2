"""The Log leaf: a reading is typed, checked and kept here without ever leaving it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from kivy.app import App
from kivy.metrics import dp
from kivy.properties import BooleanProperty, ObjectProperty
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.widget import Widget

from fieldapp.drawing.scene import LETTERS, MARKERS
from fieldapp.leaves import load_kv
from fieldapp.leaves.keys import DirectionGrid, KeyPad
from fieldapp.leaves.logparts import CheckSlot, FeatureKey, PlaceRow, Readout, RecentChip, SideKeys
from fieldapp.states import Change, MessageKind

if TYPE_CHECKING:
    from analysis.orient.features import Feature
    from fieldapp.look.form import Form
    from fieldapp.states import EntryState, ReadingLine, Tab

SHORT_LABELS = {"Intersection": "Intersect."}


class LogLeaf(BoxLayout):
    """The leaf; `refresh` shows the presenter's state, `arrange` fits it to the screen."""

    form = ObjectProperty(None)
    left_handed = BooleanProperty(False)
    digits_wanted = BooleanProperty(False)

    SHOWS = Change.ENTRY | Change.PLACE | Change.TABS | Change.RECENT | Change.MESSAGE | Change.SETTINGS

    def __init__(self, **kwargs: object) -> None:
        super().__init__(**kwargs)
        self.place_row = PlaceRow()
        self.feature_row = BoxLayout()
        self.readout = Readout()
        self.grid_small = self.grid_large = None  # made when a screen first needs them
        self.check_slot = CheckSlot()
        self.pad = KeyPad()
        self.side = SideKeys()
        self.recent_row = BoxLayout()
        self.feature_keys: dict[Feature, FeatureKey] = {}
        self._pad_holder = BoxLayout()
        self._offer = None
        self._was_entry = ("", "")
        self._bind_keys()

    # Wiring

    @property
    def page(self) -> object:
        """The presenter."""
        return App.get_running_app().page

    def _bind_keys(self) -> None:
        self.pad.bind(on_sign=lambda _pad, sign: self.sign(sign))
        self.check_slot.bind(on_take=lambda _slot: self._take_offer())
        self.check_slot.bind(on_put_away=lambda _slot: App.get_running_app().outline.close_notice())
        for name in ("keep", "clear", "note", "measure"):
            self.side.keys[name].bind(on_release=lambda _key, name=name: getattr(self, f"press_{name}")())
        self.place_row.bind(on_release=lambda _row: App.get_running_app().open_sheet("place"))
        self.place_row.ids.list.bind(on_release=lambda _key: App.get_running_app().open_sheet("readings"))
        self.place_row.ids.settings.bind(on_release=lambda _key: App.get_running_app().open_sheet("settings"))

    def _new_grid(self, *, last_row: bool) -> DirectionGrid:
        grid = DirectionGrid(last_row=last_row)
        grid.bind(on_direction=lambda _grid, name: self.page.choose_quadrant(name))
        grid.bind(on_sign=lambda _grid, sign: self.sign(sign))
        return grid

    def sign(self, sign: str) -> None:
        """Pass a sign from a key pad or a keyboard to the entry."""
        if sign == "digits":
            self.digits_wanted = True
            self._show_pad()
        elif sign == "back":
            self.page.back()
        elif sign == "clear":
            self.press_clear()
        elif sign == ".":
            self.page.point()
        else:
            self.page.digit(int(sign))

    def press_keep(self) -> None:
        """Keep the reading, or say what it waits for."""
        self.digits_wanted = False
        self.page.keep()

    def press_clear(self) -> None:
        """Start the entry anew."""
        self.digits_wanted = False
        self.page.clear()
        self._show_pad()

    def press_note(self) -> None:
        """Write a note to the reading."""
        App.get_running_app().open_sheet("note")

    def press_measure(self) -> None:
        """Read the attitude with the device's sensors."""
        App.get_running_app().measure()

    def _take_offer(self) -> None:
        if self._offer is None:
            return
        kind, name = self._offer
        if kind == "mend":
            self.page.apply_mend(name)
        else:
            self.page.accept_offer()

    # Showing

    def refresh(self, change: Change) -> None:
        """Show what has changed."""
        if change & (Change.ENTRY | Change.MESSAGE):
            self._show_entry(self.page.entry)
        if change & (Change.PLACE | Change.SETTINGS):
            self.place_row.show(self.page.place)
        if change & Change.TABS:
            self._show_tabs(self.page.tabs)
        if change & (Change.RECENT | Change.ENTRY | Change.SETTINGS):
            self._show_recent()
        if change & Change.SETTINGS:
            self.left_handed = self.page.settings.left_handed
        if change & Change.ENTRY:
            self._show_pad()

    def _show_entry(self, entry: EntryState) -> None:
        readout = self.readout
        readout.azimuth_label, readout.inclination_label = entry.azimuth_label, entry.inclination_label
        readout.azimuth, readout.inclination = entry.azimuth_text, entry.inclination_text
        readout.active, readout.direction = entry.active, entry.quadrant
        remarks = ["mending " + entry.mending_text] if entry.mending else []
        remarks += ["measured"] if entry.instrument == "tablet" else []
        remarks += ["overturned"] if entry.overturned else []
        remarks += ["note"] if entry.note else []
        remarks += [] if entry.saved else ["not yet saved"]
        readout.remark = ", ".join(remarks)
        self._show_grids(entry)
        self.side.keys["keep"].look = "accent" if entry.ready else "plain"
        self.side.keys["keep"].text = "Keep" if not entry.mending else "Keep mended"
        self._show_check(entry)

    def _show_grids(self, entry: EntryState) -> None:
        for grid in (self.grid_small, self.grid_large):
            if grid is not None:
                grid.chosen, grid.expected = entry.quadrant, entry.expected_quadrant
        if self.grid_small is not None:
            self.grid_small.opacity = 1.0 if entry.quadrant_offered else 0.0
            self.grid_small.disabled = not entry.quadrant_offered

    def _show_check(self, entry: EntryState) -> None:
        """Trouble first, then what a check asks, then notes, then what is fine, then what is missing."""
        slot, message = self.check_slot, self.page.message
        asks = [line for line in entry.checks if not line.passed]
        fine = [line for line in entry.checks if line.passed]
        loud = message is not None and message.kind is not MessageKind.NOTE
        slot.can_close = False
        trouble = App.get_running_app().outline_trouble
        if trouble:
            self._offer = None
            slot.sign, slot.text, slot.offer, slot.asks, slot.can_close = "asks", trouble, "", True, True
        elif message is not None and (loud or not asks):
            self._offer = ("message", "") if message.offer else None
            slot.sign = "asks" if loud else "fine"
            slot.text, slot.offer, slot.asks, slot.can_close = message.text, str(message.offer), loud, True
        elif asks:
            line = next((line for line in asks if line.mend_label), asks[0])
            more = f"  (+{len(asks) - 1} more)" if len(asks) > 1 else ""
            self._offer = ("mend", line.name) if line.mend_label else None
            slot.sign, slot.text, slot.offer, slot.asks = "asks", line.text + more, line.mend_label, True
        elif fine:
            self._offer = None
            slot.sign, slot.text, slot.offer, slot.asks = "fine", fine[0].text, "", False
        else:
            self._offer = None
            slot.sign, slot.text, slot.offer, slot.asks = "", entry.missing, "", False

    def _show_tabs(self, tabs: tuple[Tab, ...]) -> None:
        for tab in tabs:
            key = self.feature_keys.get(tab.feature)
            if key is None:
                key = self.feature_keys[tab.feature] = FeatureKey(
                    shape=MARKERS[tab.feature], letter=LETTERS[tab.feature]
                )
                key.bind(on_press=lambda _key, feature=tab.feature: self.page.choose_feature(feature))
                self.feature_row.add_widget(key)
            short = self.form is not None and self.form.row_dp < 480.0
            key.text = SHORT_LABELS.get(tab.label, tab.label) if short else tab.label
            few = self.form is None or self.form.row_dp < 640.0
            key.counts = (
                f"{tab.in_fold}" if few or tab.in_fold == tab.here else f"{tab.in_fold}, {tab.here} here"
            )
            key.chosen = tab.chosen

    def _show_recent(self) -> None:
        row, form = self.recent_row, self.form
        if form is None or row.parent is None:
            return
        lines = self.page.recent[: self._recent_columns() * self._recent_rows()]
        chips = [
            chip
            for line in row.children[::-1]
            for chip in line.children[::-1]
            if isinstance(chip, RecentChip)
        ]
        if len(chips) != self._recent_columns() * self._recent_rows():
            chips = self._build_recent()
        mending = self.page.entry.mending
        for chip, line in zip(chips, (*lines, *[None] * (len(chips) - len(lines))), strict=True):
            _fill_chip(chip, line, mending)
            if line is not None and self.form.recent_columns == 1:
                chip.text = f"{line.text}  {line.feature.value}"

    def _recent_columns(self) -> int:
        return self.form.recent_columns

    def _recent_rows(self) -> int:
        spare = self._spare_dp()
        return max(1, min(int((spare + self.form.gap_dp) / (self.form.recent_dp + 4.0)), 8))

    def _spare_dp(self) -> float:
        form = self.form
        used = (
            form.place_dp
            + form.feature_dp
            + form.readout_dp
            + form.check_dp
            + form.pad_dp
            + 6.5 * form.gap_dp
        )
        return form.log_height_dp - used

    def _build_recent(self) -> list[RecentChip]:
        self.recent_row.clear_widgets()
        chips = []
        for _ in range(self._recent_rows()):
            line = BoxLayout(spacing=dp(self.form.gap_dp))
            for _ in range(self._recent_columns()):
                chip = RecentChip()
                chips.append(chip)
                line.add_widget(chip)
            self.recent_row.add_widget(line)
        return chips

    # Arranging

    def on_form(self, *_: object) -> None:
        """Arrange for another screen."""
        self.arrange()

    def on_left_handed(self, *_: object) -> None:
        """Arrange for the other hand."""
        self.arrange()

    def arrange(self) -> None:
        """Put everything where this screen has room for it."""
        form: Form | None = self.form
        if form is None:
            return
        self._take_apart()
        gap = dp(form.gap_dp)
        self.padding, self.spacing = (dp(form.edge_dp), gap, dp(form.edge_dp), gap), gap
        for row in (self.feature_row, self._pad_holder, self.recent_row):
            row.spacing = gap
        self.recent_row.orientation, self.recent_row.spacing = "vertical", dp(4)
        self.orientation = "horizontal" if form.low else "vertical"
        _tall(self.place_row, form.place_dp)
        _tall(self.feature_row, form.feature_dp)
        _tall(self.check_slot, form.check_dp)
        top = self._readout_row(form, gap)
        self._pad_holder.orientation = "horizontal"
        if form.low:
            column = BoxLayout(orientation="vertical", spacing=gap)
            for widget in (self.place_row, self.feature_row, top, self.check_slot):
                column.add_widget(widget)
            for widget in self._handed(column, self._pad_holder):
                self.add_widget(widget)
        else:
            _tall(top, form.readout_dp)
            _tall(self._pad_holder, form.pad_dp)
            for widget in (self.place_row, self.feature_row, top, self.check_slot, self._pad_holder):
                self.add_widget(widget)
            if form.shows_recent:
                self.add_widget(self.recent_row)
            elif self._spare_dp() > form.gap_dp:
                self.add_widget(Widget())
        self._show_pad()
        if self.page is not None:
            self._show_grids(self.page.entry)
            self.place_row.show(self.page.place)
            self._show_tabs(self.page.tabs)
            self._show_recent()

    def _take_apart(self) -> None:
        for box in (self, self._pad_holder, self.recent_row):
            box.clear_widgets()
        pieces = (
            self.place_row, self.feature_row, self.readout, self.grid_small, self.check_slot, self.pad,
            self.side, self.recent_row, self._pad_holder,
        )  # fmt: skip
        for piece in pieces:
            if piece is not None:
                if piece.parent is not None:
                    piece.parent.remove_widget(piece)
                piece.size_hint = (1, 1)

    def _handed(self, first: Widget, second: Widget) -> tuple[Widget, Widget]:
        return (second, first) if self.left_handed else (first, second)

    def _readout_row(self, form: Form, gap: float) -> BoxLayout:
        row = BoxLayout(spacing=gap)
        if form.grid_beside:
            self.grid_small = self.grid_small or self._new_grid(last_row=False)
            self.readout.size_hint_x, self.grid_small.size_hint_x = 0.52, 0.48
            for widget in self._handed(self.readout, self.grid_small):
                row.add_widget(widget)
        else:
            row.add_widget(self.readout)
        return row

    def _show_pad(self) -> None:
        """Show the digits, or, where they take turns, the directions once the digits are whole."""
        if self.form is None:
            return
        entry = self.page.entry
        whole = not entry.active
        if not whole:
            self.digits_wanted = False
        turn = not self.form.grid_beside and entry.quadrant_offered and whole and not self.digits_wanted
        if turn and self.grid_large is None:
            self.grid_large = self._new_grid(last_row=True)
            self._show_grids(entry)
        pad = self.grid_large if turn else self.pad
        if pad.parent is self._pad_holder and len(self._pad_holder.children) == 2:
            return
        self._pad_holder.clear_widgets()
        pad.size_hint_x, self.side.size_hint_x = 0.66, 0.34
        for widget in self._handed(pad, self.side):
            self._pad_holder.add_widget(widget)


def _tall(widget: Widget, height_dp: float) -> None:
    widget.size_hint_y = None
    widget.height = dp(height_dp)


def _fill_chip(chip: RecentChip, line: ReadingLine | None, mending: str) -> None:
    chip.opacity, chip.disabled = (0.0, True) if line is None else (1.0, False)
    if line is not None:
        chip.reading_id, chip.text, chip.struck_out = line.reading_id, line.text, line.struck_out
        chip.shape = MARKERS[line.feature]
        chip.being_mended = line.reading_id == mending


load_kv("log")
