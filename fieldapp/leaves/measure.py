"""The sheet that measures an attitude with the tablet's own sensors."""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

from kivy.app import App
from kivy.clock import Clock
from kivy.properties import BooleanProperty, NumericProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout

from analysis.orient.notation import azimuth_text, inclination_text
from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg
from fieldapp.attending import how_to_lay
from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Sheet


class MeasureSheet(Sheet):
    """A measurement with the tablet's sensors: what they say, held still or not, and the key that takes it."""

    TICK_S = 0.1

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="Measure", **kwargs)
        app = App.get_running_app()
        self._attendant = app.attendant
        feature = app.page.entry.feature
        self.fields = MeasureFields(how=how_to_lay(feature), plane=feature.is_plane)
        self.ids.content.add_widget(self.fields)
        self._attendant.measure()
        self._ticking = Clock.schedule_interval(self._tick, self.TICK_S)

    def _tick(self, _dt: float) -> None:
        live = self._attendant.measuring.tick()
        fields = self.fields
        fields.says, fields.warning, fields.progress = live.message, live.warning, live.progress
        fields.can_take = live.can_take
        if live.mean is not None:
            azimuth, inclination = _attitude_text(live.mean.vector, plane=fields.plane)
            fields.figure = f"{azimuth}/{inclination}"
        if self._attendant.measuring.result is not None:
            self.take()  # held still long enough: nothing more needs to be touched
        elif not self._attendant.measuring.is_running:
            self._ticking.cancel()

    def take(self) -> None:
        """Put what was measured into the entry."""
        self._attendant.take()
        self.close()

    def close(self, *_: object) -> None:
        """Switch the sensors off with the sheet."""
        self._ticking.cancel()
        self._attendant.measuring.stop()
        super().close()


def _attitude_text(axis: object, *, plane: bool) -> tuple[str, str]:
    """Strike and dip, or trend and plunge, from magnetic north, of an axis, shape (3,)."""
    of = strike_dip_deg if plane else trend_plunge_deg
    azimuth, inclination = (float(part) for part in of(axis))
    return azimuth_text(azimuth), inclination_text(inclination)


class MeasureFields(BoxLayout):
    """What the measure sheet shows."""

    how = StringProperty("")
    says = StringProperty("")
    warning = StringProperty("")
    figure = StringProperty("–")
    progress = NumericProperty(0.0)
    can_take = BooleanProperty(False)
    plane = BooleanProperty(True)


load_kv("measure")
