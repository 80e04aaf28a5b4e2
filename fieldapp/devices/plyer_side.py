"""The device side of the ports, through plyer, which is loaded when a part is used.

plyer's own quirks are met here: sensors are polled and repeat their last value; a missing part shows as
NotImplementedError, an empty listener or an error of the bridge to the system; speaking may block for
seconds. The bridges to Java and Objective-C raise classes of their own, not known before they are loaded, so
every error of a call into plyer is taken as the device's.
"""

from __future__ import annotations

import threading
from typing import TYPE_CHECKING, Any

from analysis.orient.attitude import specific_force_from_ios
from fieldapp.devices.plyer_position import PlyerPosition
from fieldapp.devices.ports import BUZZ_SECONDS, BatteryLevel, Devices, PortState, Sample, Status
from fieldapp.devices.unavailable import UnavailableWake

if TYPE_CHECKING:
    from fieldapp.devices.clock import Clock
    from fieldapp.devices.ports import Buzz, Three, WakePort


def plyer_devices(system: str, clock: Clock, window: object | None) -> Devices:
    """Every port's device side on "android" or "ios"."""
    wake: WakePort = UnavailableWake() if window is None else WindowWake(window)
    return Devices(
        PlyerPosition(system, clock),
        PlyerAttitude(system, clock),
        PlyerVibration(),
        PlyerSpeech(),
        wake,
        PlyerBattery(),
    )


class PlyerAttitude:
    """Accelerometer and magnetometer through plyer."""

    def __init__(self, system: str, clock: Clock) -> None:
        self._ios = system == "ios"
        self._clock = clock
        self._status = Status(PortState.OFF)
        self._running: list[Any] = []
        self._last: tuple[tuple[float, ...], tuple[float, ...]] | None = None

    def status(self) -> Status:
        """How the sensors stand."""
        return self._status

    def start(self) -> None:
        """Switch both sensors on; where one is missing, both stay off and the status names it."""
        if self._status.state is PortState.ON:
            return
        from plyer import accelerometer, compass  # noqa: PLC0415 (plyer is loaded when a part is used)

        self._last = None
        for name, sensor in (("accelerometer", accelerometer), ("compass (magnetometer)", compass)):
            try:
                sensor.enable()
            except Exception:  # noqa: BLE001 (as the module says)
                self._give_up(name)
                return
            self._running.append(sensor)
            if _has_no_part(sensor):
                self._give_up(name)
                return
        self._status = Status(PortState.ON)

    def stop(self) -> None:
        """Switch both sensors off."""
        self._switch_off()
        if self._status.state is PortState.ON:
            self._status = Status(PortState.OFF)

    def read(self) -> tuple[Sample, ...]:
        """Take the sample if both sensors have given a new value since the last one."""
        if len(self._running) < 2:
            return ()
        try:
            force = _three(self._running[0].acceleration)
            field = _three(self._running[1].field)
        except Exception as error:  # noqa: BLE001 (as the module says)
            self._switch_off()
            self._status = Status(PortState.FAILED, f"the sensors cannot be read ({error}): type the reading")
            return ()
        # iOS gives a field of zero until the compass is calibrated.
        if force is None or field is None or not any(field):
            return ()
        # Polling is faster than the sensors; a value read twice is no second sample. Noise makes equal
        # successive values of a running sensor all but impossible.
        if self._last is not None and (self._last[0] == force or self._last[1] == field):
            return ()
        self._last = (force, field)
        if self._ios:
            x, y, z = (float(value) for value in specific_force_from_ios(force))
            force = (x, y, z)
        return (Sample(self._clock.elapsed_s(), force, field),)

    def _give_up(self, name: str) -> None:
        self._switch_off()
        self._status = Status(PortState.MISSING, f"this device has no {name}: type the reading")

    def _switch_off(self) -> None:
        running, self._running = self._running, []
        for sensor in running:
            try:
                sensor.disable()
            except Exception:  # noqa: BLE001 (as the module says)
                self._status = Status(PortState.FAILED, "a sensor could not be switched off")


class PlyerVibration:
    """The vibrator through plyer."""

    def __init__(self) -> None:
        self._status = Status(PortState.OFF)

    def status(self) -> Status:
        """How the vibrator stands."""
        return self._status

    def buzz(self, kind: Buzz) -> None:
        """Vibrate; a device without a vibrator is noted once and left alone."""
        if not self._status.is_usable:
            return
        try:
            from plyer import vibrator  # noqa: PLC0415 (as above)

            if not vibrator.exists():
                self._status = Status(PortState.MISSING, "this device does not vibrate")
                return
            vibrator.pattern(pattern=list(BUZZ_SECONDS[kind]), repeat=-1)
        except Exception:  # noqa: BLE001 (as the module says)
            self._status = Status(PortState.FAILED, "the device refused to vibrate")
        else:
            self._status = Status(PortState.ON)


class PlyerSpeech:
    """The voice through plyer, on a thread of its own, since plyer may wait seconds for the voice."""

    def __init__(self) -> None:
        self._status = Status(PortState.OFF)
        self._lock = threading.Lock()
        self._next: str | None = None
        self._speaking = False

    def status(self) -> Status:
        """How the voice stands."""
        return self._status

    def say(self, text: str) -> None:
        """Speak the newest text; one that still waits gives way to it."""
        if not self._status.is_usable or not text:
            return
        with self._lock:
            self._next = text
            if self._speaking:
                return
            self._speaking = True
        threading.Thread(target=self._speak, name="speech", daemon=True).start()

    def _speak(self) -> None:
        while True:
            with self._lock:
                text, self._next = self._next, None
                if text is None:
                    self._speaking = False
                    return
            try:
                from plyer import tts  # noqa: PLC0415 (as above)

                tts.speak(message=text)
            except Exception:  # noqa: BLE001 (as the module says)
                self._status = Status(PortState.FAILED, "the device cannot speak")
            else:
                self._status = Status(PortState.ON)


class WindowWake:
    """Keeps the screen awake through the app's window (Kivy's `allow_screensaver`)."""

    def __init__(self, window: Any) -> None:  # noqa: ANN401 (this room does not import Kivy)
        self._window = window
        self._before: bool | None = None

    def status(self) -> Status:
        """Whether the screen is held awake."""
        return Status(PortState.OFF if self._before is None else PortState.ON)

    def hold(self) -> None:
        """Keep the screen awake."""
        if self._before is None:
            self._before = bool(self._window.allow_screensaver)
            self._window.allow_screensaver = False

    def release(self) -> None:
        """Let the screen do as it did before."""
        if self._before is not None:
            self._window.allow_screensaver = self._before
            self._before = None


class PlyerBattery:
    """The battery through plyer."""

    def __init__(self) -> None:
        self._status = Status(PortState.OFF)

    def status(self) -> Status:
        """How the battery's port stands."""
        return self._status

    def level(self) -> BatteryLevel | None:
        """Charge left, or None where the device does not say."""
        try:
            from plyer import battery  # noqa: PLC0415 (as above)

            told = battery.status
            percent = told["percentage"]
        except Exception:  # noqa: BLE001 (as the module says)
            self._status = Status(PortState.FAILED, "the device does not tell its charge")
            return None
        # iOS says -100 where it does not know.
        if percent is None or not 0.0 <= percent <= 100.0:
            return None
        self._status = Status(PortState.ON)
        return BatteryLevel(float(percent), told.get("isCharging"))


def _has_no_part(sensor: Any) -> bool:  # noqa: ANN401 (plyer ships no types)
    """Whether Android gave no sensor: plyer then listens to nothing and says nothing."""
    for name in ("listener", "listenerm"):
        try:
            listener = getattr(sensor, name)
        except AttributeError:
            continue
        if getattr(listener, "sensor", listener) is None:
            return True
    return False


def _three(values: Any) -> Three | None:  # noqa: ANN401 (plyer ships no types)
    if values is None or len(values) != 3 or any(value is None for value in values):
        return None
    x, y, z = (float(value) for value in values)
    return (x, y, z)
