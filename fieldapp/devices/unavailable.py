"""The side of every port on a machine that has no such part: it says so, and gives nothing."""

from __future__ import annotations

from typing import TYPE_CHECKING

from fieldapp.devices.ports import Devices, PortState, Status

if TYPE_CHECKING:
    from fieldapp.devices.ports import BatteryLevel, Buzz, Fix, Sample


class _Unavailable:
    def __init__(self, message: str) -> None:
        self._status = Status(PortState.UNAVAILABLE, message)

    def status(self) -> Status:
        """Unavailable, and why."""
        return self._status


class UnavailablePosition(_Unavailable):
    """No receiver."""

    def __init__(self) -> None:
        super().__init__("no position receiver on this machine: type the position")

    def will_ask(self) -> bool:
        """Nothing is asked."""
        return False

    def start(self) -> None:
        """Do nothing."""

    def stop(self) -> None:
        """Do nothing."""

    def read(self) -> tuple[Fix, ...]:
        """No fixes."""
        return ()


class UnavailableAttitude(_Unavailable):
    """No attitude sensors."""

    def __init__(self) -> None:
        super().__init__("no attitude sensors on this machine: type the reading")

    def start(self) -> None:
        """Do nothing."""

    def stop(self) -> None:
        """Do nothing."""

    def read(self) -> tuple[Sample, ...]:
        """No samples."""
        return ()


class UnavailableVibration(_Unavailable):
    """No vibrator."""

    def __init__(self) -> None:
        super().__init__("this machine does not vibrate")

    def buzz(self, kind: Buzz) -> None:
        """Do nothing."""


class UnavailableSpeech(_Unavailable):
    """No voice."""

    def __init__(self) -> None:
        super().__init__("this machine does not speak")

    def say(self, text: str) -> None:
        """Do nothing."""


class UnavailableWake(_Unavailable):
    """No sleep to hold off."""

    def __init__(self) -> None:
        super().__init__("this machine's screen is not kept awake")

    def hold(self) -> None:
        """Do nothing."""

    def release(self) -> None:
        """Do nothing."""


class UnavailableBattery(_Unavailable):
    """No battery to ask."""

    def __init__(self) -> None:
        super().__init__("this machine's battery is not watched")

    def level(self) -> BatteryLevel | None:
        """No level."""
        return None


def unavailable_devices() -> Devices:
    """Every port's unavailable side."""
    return Devices(
        UnavailablePosition(),
        UnavailableAttitude(),
        UnavailableVibration(),
        UnavailableSpeech(),
        UnavailableWake(),
        UnavailableBattery(),
    )
