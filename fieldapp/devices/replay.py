"""The replay side of the ports: traces from files, for tests and the demo; never in a field build.

A folder of traces holds `attitude.csv` and `position.csv`, either of which may be lacking. Times are seconds
from the start of the trace; a gap in them is a sensor that was silent or a device that slept. In
`position.csv` a row with an `event` (a word of PortState, as "denied") changes the state of the port and
carries no fix.
"""

from __future__ import annotations

import csv
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError
from analysis.orient.position import Position
from fieldapp.devices.choose import is_field_build
from fieldapp.devices.clock import SystemClock
from fieldapp.devices.ports import Devices, Fix, PortState, Sample, Status

if TYPE_CHECKING:
    from collections.abc import Iterable
    from pathlib import Path

    from fieldapp.devices.clock import Clock
    from fieldapp.devices.ports import BatteryLevel, Buzz

ATTITUDE_COLUMNS = (
    "time_s",
    *(f"specific_force_{axis}_m_s2" for axis in "xyz"),
    *(f"magnetic_field_{axis}_uT" for axis in "xyz"),
)
POSITION_COLUMNS = ("time_s", "latitude_deg", "longitude_deg", "altitude_m", "accuracy_m", "event")


class ReplayError(HingewiseError, RuntimeError):
    """A replay where it may not be, or a trace that cannot be read."""


def replay_devices(folder: Path, clock: Clock | None = None) -> Devices:
    """Every port's replay side, from a folder of traces; raises ReplayError in a field build."""
    refuse_in_field_build()
    used = clock or SystemClock()
    return Devices(
        ReplayPosition(folder / "position.csv", used),
        ReplayAttitude(folder / "attitude.csv", used),
        ReplayVibration(),
        ReplaySpeech(),
        ReplayWake(),
        ReplayBattery(),
    )


def refuse_in_field_build() -> None:
    """Raise ReplayError on a phone or tablet, where what is shown must be what was sensed."""
    if is_field_build():
        raise ReplayError(
            "recorded traces are not played on a field device",
            where="replay",
            expected="a desktop",
            mend="Use the device's own sensors, or type the reading.",
        )


def write_attitude_trace(path: Path, samples: Iterable[Sample]) -> None:
    """Write samples as a trace; times are kept as they are."""
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(ATTITUDE_COLUMNS)
        for sample in samples:
            numbers = (*sample.specific_force, *sample.magnetic_field)
            writer.writerow([f"{sample.time_s:.3f}", *(f"{number:.4f}" for number in numbers)])


class _Replay:
    """What the replay sides share: the refusal, and the state."""

    def __init__(self) -> None:
        refuse_in_field_build()
        self._status = Status(PortState.OFF)

    def status(self) -> Status:
        """How the port stands."""
        return self._status


class ReplayAttitude(_Replay):
    """Samples from a trace; a trace that ended is a silent sensor."""

    def __init__(self, path: Path, clock: Clock) -> None:
        super().__init__()
        self._clock = clock
        self._trace = list(_read_attitude(path)) if path.exists() else []
        self._next = 0
        self._started_s = 0.0
        if not self._trace:
            self._status = Status(PortState.MISSING, "the trace has no attitude: type the reading")

    def start(self) -> None:
        """Play from the beginning."""
        if self._status.state is PortState.OFF:
            self._next, self._started_s = 0, self._clock.elapsed_s()
            self._status = Status(PortState.ON)

    def stop(self) -> None:
        """Stop playing."""
        if self._status.state is PortState.ON:
            self._status = Status(PortState.OFF)

    def read(self) -> tuple[Sample, ...]:
        """Take what the trace holds up to now."""
        if self._status.state is not PortState.ON:
            return ()
        due, first = self._clock.elapsed_s() - self._started_s, self._next
        while self._next < len(self._trace) and self._trace[self._next].time_s <= due:
            self._next += 1
        return tuple(
            Sample(self._started_s + sample.time_s, sample.specific_force, sample.magnetic_field)
            for sample in self._trace[first : self._next]
        )


class ReplayPosition(_Replay):
    """Fixes from a trace."""

    def __init__(self, path: Path, clock: Clock) -> None:
        super().__init__()
        self._clock = clock
        self._trace = list(_read_positions(path)) if path.exists() else []
        self._next = 0
        self._started_s = 0.0
        self._running = False
        if not self._trace:
            self._status = Status(PortState.MISSING, "the trace has no positions: type the position")

    def will_ask(self) -> bool:
        """A trace needs no permission."""
        return False

    def start(self) -> None:
        """Play from the beginning."""
        if self._trace and not self._running:
            self._next, self._started_s, self._running = 0, self._clock.elapsed_s(), True
            self._status = Status(PortState.ON)

    def stop(self) -> None:
        """Stop playing."""
        self._running = False
        if self._status.is_usable:
            self._status = Status(PortState.OFF)

    def read(self) -> tuple[Fix, ...]:
        """Take what the trace holds up to now."""
        if not self._running:
            return ()
        due, fixes = self._clock.elapsed_s() - self._started_s, []
        while self._next < len(self._trace) and self._trace[self._next][0] <= due:
            time_s, told = self._trace[self._next]
            self._next += 1
            if isinstance(told, PortState):
                self._status = Status(
                    told, "" if told is PortState.ON else f"position {told}: type the position"
                )
            else:
                fixes.append(Fix(self._started_s + time_s, self._clock.now(), told))
        return tuple(fixes)


class ReplayVibration(_Replay):
    """Keeps the vibrations asked for in `felt`."""

    def __init__(self) -> None:
        super().__init__()
        self.felt: list[Buzz] = []

    def buzz(self, kind: Buzz) -> None:
        """Note the vibration."""
        self.felt.append(kind)


class ReplaySpeech(_Replay):
    """Keeps what was to be spoken in `heard`."""

    def __init__(self) -> None:
        super().__init__()
        self.heard: list[str] = []

    def say(self, text: str) -> None:
        """Note the text."""
        self.heard.append(text)


class ReplayWake(_Replay):
    """Keeps whether the screen is held awake in the status."""

    def hold(self) -> None:
        """Note that the screen is held awake."""
        self._status = Status(PortState.ON)

    def release(self) -> None:
        """Note that it is not."""
        self._status = Status(PortState.OFF)


class ReplayBattery(_Replay):
    """Gives the level that was set in `told`."""

    def __init__(self) -> None:
        super().__init__()
        self.told: BatteryLevel | None = None

    def level(self) -> BatteryLevel | None:
        """Give the level set."""
        return self.told


def _read_attitude(path: Path) -> Iterable[Sample]:
    for line, row in _rows(path, ATTITUDE_COLUMNS):
        try:
            time_s, fx, fy, fz, bx, by, bz = (float(row[name]) for name in ATTITUDE_COLUMNS)
        except (TypeError, ValueError) as error:
            raise _bad_row(path, line, error) from error
        yield Sample(time_s, (fx, fy, fz), (bx, by, bz))


def _read_positions(path: Path) -> Iterable[tuple[float, Position | PortState]]:
    for line, row in _rows(path, POSITION_COLUMNS):
        try:
            time_s = float(row["time_s"])
            if row["event"]:
                yield time_s, PortState(row["event"])
                continue
            altitude, accuracy = (float(row[n]) if row[n] else None for n in ("altitude_m", "accuracy_m"))
            degrees = float(row["latitude_deg"]), float(row["longitude_deg"])
            yield time_s, Position(*degrees, altitude, accuracy, "replay")
        except (TypeError, ValueError) as error:
            raise _bad_row(path, line, error) from error


def _rows(path: Path, columns: tuple[str, ...]) -> Iterable[tuple[int, dict[str, str]]]:
    with path.open(encoding="utf-8", newline="") as file:
        reader = csv.DictReader(file, restval="")
        if tuple(reader.fieldnames or ()) != columns:
            raise ReplayError(
                f"the columns are {reader.fieldnames}", where=path.name, expected=", ".join(columns)
            )
        for row in reader:
            yield reader.line_num, row


def _bad_row(path: Path, line: int, error: Exception) -> ReplayError:
    return ReplayError(str(error), where=f"{path.name}, line {line}", expected="numbers, or a known event")
