"""What the app may ask of a device: six ports, each with a device side, an unavailable one and a replay one.

A port never raises for trouble of the device: its `status` says what is the matter, in words for the page,
and typing by hand stays open whatever it says. Samples and fixes wait in the port until they are read, so
that nothing calls back into the page from another thread.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING, Protocol

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.orient.position import Position

Three = tuple[float, float, float]


class PortState(StrEnum):
    """How a port stands."""

    OFF = "off"  # there, and not running
    ASKING = "asking"  # waits for the permission to be answered
    ON = "on"
    DENIED = "denied"  # the permission was refused
    UNANSWERED = "unanswered"  # the question was closed without an answer
    SWITCHED_OFF = "switched off"  # location is off in the device's settings
    MISSING = "missing"  # the device has no such part
    FAILED = "failed"  # the device's system refused
    UNAVAILABLE = "unavailable"  # this kind of machine is not asked at all

    @property
    def is_usable(self) -> bool:
        """Whether the port gives something now or may after `start`."""
        return self in (PortState.OFF, PortState.ASKING, PortState.ON)


@dataclass(frozen=True, slots=True)
class Status:
    """State of a port, and what to tell the user ('' where there is nothing to tell)."""

    state: PortState
    message: str = ""

    @property
    def is_usable(self) -> bool:
        """Whether the port gives something now or may after `start`."""
        return self.state.is_usable


@dataclass(frozen=True, slots=True)
class Sample:
    """One sample of both sensors, in the device frame of `analysis.orient.attitude`.

    `time_s` is the clock's `elapsed_s`; specific force in m/s² (up at rest), magnetic field in microtesla.
    """

    time_s: float
    specific_force: Three
    magnetic_field: Three


@dataclass(frozen=True, slots=True)
class Fix:
    """One fix of the receiver: `time_s` is the clock's `elapsed_s`, `at` its date and time, aware, UTC."""

    time_s: float
    at: datetime
    position: Position


@dataclass(frozen=True, slots=True)
class BatteryLevel:
    """Charge left, 0 to 100, and whether the device is charging (None where it does not say)."""

    percent: float
    charging: bool | None = None


class Buzz(StrEnum):
    """The vibrations, told apart by feel."""

    KEPT = "kept"  # one short
    VERDICT = "verdict"  # two long
    REFUSED = "refused"  # three short


BUZZ_SECONDS: dict[Buzz, tuple[float, ...]] = {
    # Waits and vibrations in turn, beginning with a wait.
    Buzz.KEPT: (0.0, 0.06),
    Buzz.VERDICT: (0.0, 0.25, 0.15, 0.25),
    Buzz.REFUSED: (0.0, 0.06, 0.08, 0.06, 0.08, 0.06),
}


class PositionPort(Protocol):
    """The receiver of positions."""

    def status(self) -> Status:
        """How the port stands."""

    def will_ask(self) -> bool:
        """Whether `start` would make the system ask for the permission, so that it can be explained before."""

    def start(self) -> None:
        """Ask for the permission where it is needed, and begin."""

    def stop(self) -> None:
        """Stop the receiver; fixes not read yet stay."""

    def read(self) -> tuple[Fix, ...]:
        """Take the fixes that came since the last call, oldest first."""


class AttitudePort(Protocol):
    """Accelerometer and magnetometer together."""

    def status(self) -> Status:
        """How the port stands."""

    def start(self) -> None:
        """Switch the sensors on."""

    def stop(self) -> None:
        """Switch the sensors off."""

    def read(self) -> tuple[Sample, ...]:
        """Take the samples that are new since the last call, oldest first; one sensor value is given once."""


class VibrationPort(Protocol):
    """The vibrator."""

    def status(self) -> Status:
        """How the port stands."""

    def buzz(self, kind: Buzz) -> None:
        """Vibrate; does nothing where there is no vibrator."""


class SpeechPort(Protocol):
    """The voice."""

    def status(self) -> Status:
        """How the port stands."""

    def say(self, text: str) -> None:
        """Speak, without waiting for the end; what waits to be spoken gives way to the newest."""


class WakePort(Protocol):
    """The screen's sleep."""

    def status(self) -> Status:
        """How the port stands."""

    def hold(self) -> None:
        """Keep the screen awake; calls do not add up."""

    def release(self) -> None:
        """Let the screen sleep again."""


class BatteryPort(Protocol):
    """The battery."""

    def status(self) -> Status:
        """How the port stands."""

    def level(self) -> BatteryLevel | None:
        """Charge left; None where the device does not say."""


@dataclass(frozen=True, slots=True)
class Devices:
    """One side of every port."""

    position: PositionPort
    attitude: AttitudePort
    vibration: VibrationPort
    speech: SpeechPort
    wake: WakePort
    battery: BatteryPort
