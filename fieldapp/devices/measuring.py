"""One measurement: the tablet laid on a plane or along a line, from the first sample to digits in the draft.

The session is fed by `tick`, called some ten times a second while it runs and never otherwise. Rules, in the
order in which a tick applies them:

1. A port that is not usable ends the session; its words are shown, and typing stays open.
2. Ticks, or samples, farther apart than `asleep_s` mean that the device slept: what was taken is dropped.
3. No new sample for `silent_s`: the sensor is silent, what was taken is dropped; after `give_up_s` it ends.
4. A tablet that moves, by the length of the specific force or by slow turning, starts anew.
5. Short of `least_s` and `least_samples` there is no result; from then on `take` gives one.
6. A field off the model is shown all the while ("iron near"); it warns and never blocks.
7. When the mean is good to `settled_error_deg`, or after `longest_s`, the session ends with a result.

Ending in any way switches the sensors off and lets the screen sleep.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

import numpy as np

from analysis.errors import HingewiseError, NorthError
from analysis.orient import attitude, north
from fieldapp.devices.measurement import Measurement, measurement_of

if TYPE_CHECKING:
    from analysis.orient.attitude import AxisMean, FieldCheck, Laid
    from analysis.orient.north import MagneticField, NorthCorrection
    from analysis.orient.position import Position
    from analysis.orient.vectors import Floats
    from fieldapp.devices.clock import Clock
    from fieldapp.devices.ports import AttitudePort, Sample, WakePort


class MeasureState(StrEnum):
    """How a measurement stands."""

    IDLE = "idle"
    WAITING = "waiting for the sensors"
    COLLECTING = "hold still"
    READY = "still"
    IRON_NEAR = "iron near"
    MOVING = "moving"
    SILENT = "the sensors are silent"
    ASLEEP = "the tablet slept"
    UNAVAILABLE = "no sensors"
    DONE = "done"
    STOPPED = "stopped"


S = MeasureState
RUNNING = frozenset({S.WAITING, S.COLLECTING, S.READY, S.IRON_NEAR, S.MOVING, S.SILENT, S.ASLEEP})
_ENDED = frozenset({S.IDLE, S.UNAVAILABLE, S.DONE, S.STOPPED})
# From a running state to any running state or end; from an end only to a new start.
TRANSITIONS: dict[MeasureState, frozenset[MeasureState]] = {
    **{state: (RUNNING | _ENDED) - {S.IDLE} for state in RUNNING},
    **{state: frozenset({S.WAITING, S.UNAVAILABLE}) for state in _ENDED},
}


class MeasuringError(HingewiseError, RuntimeError):
    """A result asked for where there is none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasureSettings:
    """Limits of a measurement, seconds and degrees (common practice, no source)."""

    least_s: float = 1.0
    least_samples: int = 8
    settled_error_deg: float = 0.25
    longest_s: float = 10.0
    still_s: float = 0.3
    silent_s: float = 1.5
    give_up_s: float = 10.0
    asleep_s: float = 2.0
    most_samples: int = 2000


DEFAULT_MEASURE_SETTINGS = MeasureSettings()


@dataclass(frozen=True, slots=True, eq=False)
class Live:
    """What the leaf shows at a moment: words, progress 0 to 1, the running mean and the samples about it.

    `mean` and `axes`, shape (n, 3), are in magnetic north, east, down; `axes` are the latest samples, for the
    circle of scatter. `warning` is the words of the field check where it does not fit.
    """

    state: MeasureState
    message: str
    progress: float
    seconds: float
    samples: int
    can_take: bool
    mean: AxisMean | None
    axes: Floats
    field: FieldCheck | None
    warning: str = ""


_NO_AXES: Floats = np.empty((0, 3))
_NOTHING = Live(S.IDLE, "", 0.0, 0.0, 0, can_take=False, mean=None, axes=_NO_AXES, field=None)
SHOWN_AXES = 120


class Measuring:
    """The session; one at a time, used again and again."""

    def __init__(
        self,
        port: AttitudePort,
        clock: Clock,
        wake: WakePort,
        settings: MeasureSettings = DEFAULT_MEASURE_SETTINGS,
    ) -> None:
        self._port = port
        self._clock = clock
        self._wake = wake
        self._settings = settings
        self._live = _NOTHING
        self._samples: list[Sample] = []
        self._last_tick_s = 0.0
        self._last_sample_s = 0.0
        self._result: Measurement | None = None
        self._laid = attitude.Laid.ON_PLANE
        self._shows_top = False
        self._expected: MagneticField | None = None
        self._correction: NorthCorrection | None = None

    @property
    def live(self) -> Live:
        """What the leaf shows."""
        return self._live

    @property
    def is_running(self) -> bool:
        """Whether the sensors are on and `tick` is to be called."""
        return self._live.state in RUNNING

    def start(self, laid: Laid, position: Position | None = None, *, shows_top: bool = False) -> Live:
        """Begin anew, with the field and the correction of a position (None: not corrected, not checked).

        `shows_top` says that the screen looks the way the beds get younger, so that a screen that looks down
        means an overturned bed.
        """
        if self.is_running:
            self.stop()
        self._laid, self._shows_top, self._result = laid, shows_top, None
        today = self._clock.now()
        self._correction = north.north_correction(north.Reference.MAGNETIC, position, today)
        try:
            self._expected = north.magnetic_field(position, today) if position else None
        except NorthError:
            self._expected = None  # the correction's message says so
        self._samples.clear()
        self._last_tick_s = self._last_sample_s = self._clock.elapsed_s()
        self._port.start()
        if not self._port.status().is_usable:
            return self._end(S.UNAVAILABLE, self._port.status().message)
        self._wake.hold()
        return self._show(S.WAITING, "lay the tablet down and hold it still")

    def tick(self) -> Live:
        """Take what the sensors gave since the last call, and judge it by the rules above."""
        if not self.is_running:
            return self._live
        status = self._port.status()
        if not status.is_usable:
            return self._end(S.UNAVAILABLE, status.message)
        now = self._clock.elapsed_s()
        slept = now - self._last_tick_s > self._settings.asleep_s
        self._last_tick_s = now
        fresh = self._port.read()
        if not self._port.status().is_usable:
            return self._end(S.UNAVAILABLE, self._port.status().message)
        if slept or self._gap_in(fresh):
            self._samples.clear()
            self._last_sample_s = now
            return self._show(S.ASLEEP, "the tablet slept: starting anew, hold it still")
        if not fresh:
            return self._without_sample(now)
        self._last_sample_s = fresh[-1].time_s
        self._samples = [*self._samples, *fresh][-self._settings.most_samples :]
        return self._judge()

    def take(self) -> Measurement:
        """Give the result and end; raises MeasuringError where there is none yet."""
        if self._live.can_take and self._live.mean is not None:
            self._finish(self._live.mean, self._live.field)
        if self._result is None:
            raise MeasuringError(
                "there is no measurement to take",
                where="measure",
                expected=f"{self._settings.least_s:g} s of samples held still",
                mend="Hold the tablet still, or type the reading.",
            )
        return self._result

    @property
    def result(self) -> Measurement | None:
        """The result of the last session that ended with one; None after a new start."""
        return self._result

    def stop(self) -> Live:
        """End without a result (or keep the one there is), as when the page is left or the app paused."""
        if not self.is_running:
            return self._live
        return self._end(S.STOPPED, "")

    def _gap_in(self, fresh: tuple[Sample, ...]) -> bool:
        times = [sample.time_s for sample in (*self._samples[-1:], *fresh)]
        pairs = itertools.pairwise(times)
        return any(later - sooner > self._settings.asleep_s for sooner, later in pairs)

    def _without_sample(self, now: float) -> Live:
        quiet = now - self._last_sample_s
        if quiet <= self._settings.silent_s:
            return self._live
        if quiet > self._settings.give_up_s:
            return self._end(S.UNAVAILABLE, "the sensors stay silent: type the reading")
        self._samples.clear()
        return self._show(S.SILENT, "the sensors give nothing: wait, or type the reading")

    def _judge(self) -> Live:
        force, felt = self._arrays()
        recent = force[-self._recent_count() :]
        if attitude.moving(recent):
            return self._anew("hold the tablet still")
        usable = attitude.usable_samples(force, felt)
        if np.count_nonzero(usable) < max(2, len(usable) // 2):
            self._samples = self._samples[-self._settings.least_samples :]
            return self._show(S.COLLECTING, "no north from these samples: move away from iron")
        axes = attitude.sampled_axes(force[usable], felt[usable], self._laid)
        if attitude.drifted(axes):
            return self._anew("the tablet turns slowly: hold it still")
        mean = attitude.robust_axis_mean(axes)
        field = attitude.check_field(force[usable], felt[usable], self._expected)
        seconds = self._samples[-1].time_s - self._samples[0].time_s
        enough = seconds >= self._settings.least_s and mean.samples >= self._settings.least_samples
        settled = mean.standard_error_deg <= self._settings.settled_error_deg
        if enough and (settled or seconds >= self._settings.longest_s):
            return self._finish(mean, field)
        state = S.COLLECTING if field.fits else S.IRON_NEAR
        if enough and field.fits:
            state = S.READY
        message = (
            field.message if not field.fits else "hold still" if not enough else "still: steadying the mean"
        )
        return self._show(state, message, mean=mean, axes=axes, field=field, can_take=enough)

    def _anew(self, message: str) -> Live:
        self._samples = self._samples[-1:]
        return self._show(S.MOVING, message)

    def _recent_count(self) -> int:
        latest = self._samples[-1].time_s
        return max(3, sum(latest - sample.time_s <= self._settings.still_s for sample in self._samples))

    def _arrays(self) -> tuple[Floats, Floats]:
        force = np.array([sample.specific_force for sample in self._samples], dtype=float)
        return force, np.array([sample.magnetic_field for sample in self._samples], dtype=float)

    def _finish(self, mean: AxisMean, field: FieldCheck | None) -> Live:
        force, _ = self._arrays()
        self._result = measurement_of(
            self._laid,
            mean,
            field,
            self._correction,
            screen_down=attitude.screen_faces_down(force),
            shows_top=self._shows_top,
        )
        return self._end(S.DONE, "measured", mean=mean, field=field, axes=self._live.axes)

    def _end(
        self,
        state: MeasureState,
        message: str,
        *,
        mean: AxisMean | None = None,
        field: FieldCheck | None = None,
        axes: Floats = _NO_AXES,
    ) -> Live:
        self._port.stop()
        self._wake.release()
        return self._show(state, message, mean=mean, axes=axes, field=field)

    def _show(
        self,
        state: MeasureState,
        message: str,
        *,
        mean: AxisMean | None = None,
        axes: Floats = _NO_AXES,
        field: FieldCheck | None = None,
        can_take: bool = False,
    ) -> Live:
        if state is not self._live.state and state not in TRANSITIONS[self._live.state]:
            raise MeasuringError(f"{self._live.state} cannot become {state}", where="measure")
        seconds = self._samples[-1].time_s - self._samples[0].time_s if self._samples else 0.0
        warning = field.message if field is not None and not field.fits else ""
        self._live = Live(
            state,
            message,
            1.0 if state is S.DONE else self._progress(seconds, mean),
            seconds,
            len(self._samples),
            can_take,
            mean,
            axes[-SHOWN_AXES:],
            field,
            warning,
        )
        return self._live

    def _progress(self, seconds: float, mean: AxisMean | None) -> float:
        """Share of the way to a settled mean: its error falls with the root of the samples."""
        if mean is None:
            return 0.0
        by_error = (self._settings.settled_error_deg / max(mean.standard_error_deg, 1e-9)) ** 2
        by_time = seconds / self._settings.longest_s
        return min(1.0, max(min(by_error, seconds / self._settings.least_s), by_time))
