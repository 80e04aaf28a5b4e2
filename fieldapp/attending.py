"""Attends to the devices for the page: position, vibration, voice, battery, and the session of a measurement.

No Kivy: the app calls `second` once a second while `wants_seconds`, and a leaf ticks the measurement while it shows
it. On a machine without sensors every port says so, nothing is asked of it again, and typing goes on as ever.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.orient.attitude import Laid
from fieldapp.devices.battery import BatteryWatch
from fieldapp.devices.clock import clock_fault
from fieldapp.devices.measuring import Measuring
from fieldapp.devices.ports import Buzz
from fieldapp.devices.receiver import Receiver
from fieldapp.states import SignalKind

if TYPE_CHECKING:
    from collections.abc import Callable

    from analysis.orient.features import Feature
    from fieldapp.devices.clock import Clock
    from fieldapp.devices.ports import Devices
    from fieldapp.outcrop import OutcropPage
    from fieldapp.states import PositionFix, Signal

BATTERY_EVERY_S = 60
BUZZES = {SignalKind.KEPT: Buzz.KEPT, SignalKind.VERDICT: Buzz.VERDICT, SignalKind.REFUSED: Buzz.REFUSED}


class Attendant:
    """Brings devices and page together; `tell` shows a sentence on the page."""

    def __init__(
        self, devices: Devices, page: OutcropPage, clock: Clock, tell: Callable[[str], None]
    ) -> None:
        self._devices = devices
        self._clock = clock
        self._page = page
        self._tell = tell
        self._receiver = Receiver(devices.position, clock)
        self._battery = BatteryWatch()
        self._measuring = Measuring(devices.attitude, clock, devices.wake)
        self._seconds = 0
        self._said = ""
        self._outcrop = page.place.outcrop
        self._fix: PositionFix | None = None

    @property
    def has_sensors(self) -> bool:
        """Whether an attitude can be measured here."""
        return self._devices.attitude.status().is_usable

    @property
    def wants_seconds(self) -> bool:
        """Whether `second` is to be called: only while there is a receiver to listen to."""
        return self._receiver.is_running and self._devices.position.status().is_usable

    @property
    def measuring(self) -> Measuring:
        """The session of a measurement."""
        return self._measuring

    @property
    def wants_leave(self) -> bool:
        """Whether the device would ask for the position, which `use_position` lets it do."""
        return (
            not self._page.place.demo
            and not self._receiver.is_running
            and self._devices.position.status().is_usable
            and self._devices.position.will_ask()
        )

    def start(self) -> None:
        """Look at the calendar, and begin to listen for positions.

        Not for the invented notebook: its times and places are invented too.
        A device that has yet to ask for its permission is left alone until `use_position`.
        """
        if not self._page.place.demo:
            self._say(clock_fault(self._clock.now(), self._page.newest_reading_at))
        if self._page.place.demo or not self._devices.position.status().is_usable or self.wants_leave:
            return
        self._receiver.start()

    def use_position(self) -> None:
        """Begin to listen for positions; the device asks for its permission where it has not been given."""
        self._receiver.start()

    def stop(self) -> None:
        """Switch receiver and sensors off, as when the app leaves the screen."""
        self._measuring.stop()
        if self._receiver.is_running:
            self._receiver.stop()

    def second(self) -> None:
        """Pass the position on, and say what is to be said of receiver and battery, once."""
        self._receiver.average_over(self._page.settings.average_s)
        place = self._page.place.outcrop
        if place != self._outcrop:
            self._outcrop = place
            self._receiver.begin_outcrop()
        located = self._receiver.tick()
        if located.fix is not None and located.fix != self._fix:
            self._fix = located.fix
            self._page.position_changed(located.fix, self._receiver.best())
        self._page.tick()
        self._say(located.message)
        if self._seconds % BATTERY_EVERY_S == 0:
            self._say(self._battery.note(self._devices.battery.level()))
        self._seconds += 1

    def signalled(self, signal: Signal) -> None:
        """Vibrate, and speak where there is something to be spoken."""
        self._devices.vibration.buzz(BUZZES[signal.kind])
        if signal.spoken:
            self._devices.speech.say(signal.spoken)

    def measure(self) -> None:
        """Begin a measurement of the feature in hand, corrected from the place where we stand."""
        laid = Laid.ON_PLANE if self._page.entry.feature.is_plane else Laid.ALONG_Y
        self._measuring.start(laid, self._page.here)

    def take(self) -> None:
        """Put the measurement into the entry; raises MeasuringError where there is none yet."""
        self._page.measured(self._measuring.take().for_draft())

    def _say(self, text: str) -> None:
        if text and text != self._said:
            self._tell(text)
        self._said = text or self._said


def how_to_lay(feature: Feature) -> str:
    """Say how the tablet is laid for this feature."""
    if feature.is_plane:
        return "Lay the back of the tablet on the plane and hold it still."
    return "Lay a long side edge of the tablet along the line and hold it still."
