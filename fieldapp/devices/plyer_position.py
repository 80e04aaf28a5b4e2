"""The device side of positions, through plyer: the permission asked at use, and fixes collected as they come.

The system calls back on threads of its own; everything it says is put behind a lock until it is read. The
bridges to Java and Objective-C raise classes of their own, not known before they are loaded, so every error
of a call into plyer is taken as the device's.
"""

from __future__ import annotations

import math
import threading
from collections import deque
from typing import TYPE_CHECKING, Any

from analysis.errors import PositionError
from analysis.orient.position import Position
from fieldapp.devices.ports import Fix, PortState, Status

if TYPE_CHECKING:
    from collections.abc import Sequence

    from fieldapp.devices.clock import Clock

MOST_WAITING = 600  # fixes; ten minutes at one a second that nobody read
EVERY_ms = 1000
DENIED = "position not allowed: allow it in the device's settings, or type the position"
UNANSWERED = "the question about the position was not answered: try again, or type the position"
SWITCHED_OFF = "location is switched off on this device: switch it on, or type the position"
MISSING = "this device has no position receiver: type the position"
COARSE_ONLY = "only an approximate position is allowed: allow the precise one in the device's settings"


class PlyerPosition:
    """The receiver through plyer, on "android" or "ios"."""

    def __init__(self, system: str, clock: Clock) -> None:
        self._ios = system == "ios"
        self._clock = clock
        # Re-entrant: a system may answer a question before the asking call has returned.
        self._lock = threading.RLock()
        self._status = Status(PortState.OFF)
        self._wanted = False
        self._waiting: deque[Fix] = deque(maxlen=MOST_WAITING)

    def status(self) -> Status:
        """How the receiver stands."""
        with self._lock:
            return self._status

    def will_ask(self) -> bool:
        """Whether Android has yet to ask; iOS asks in the words of the app's Info.plist, which explain it."""
        if self._ios:
            return False
        try:
            from android.permissions import Permission, check_permission  # noqa: PLC0415 (exists on Android only)

            return not check_permission(Permission.ACCESS_FINE_LOCATION)
        except Exception:  # noqa: BLE001 (as the module says)
            return False

    def start(self) -> None:
        """Ask for the permission where it is needed, and begin; does nothing while running or asking."""
        with self._lock:
            if self._wanted and self._status.is_usable:
                return
            self._wanted = True
            self._status = Status(PortState.ASKING)
        if self._ios:
            self._begin(precise=True)  # iOS asks by itself, and says what was answered
        else:
            self._ask()

    def stop(self) -> None:
        """Stop the receiver."""
        with self._lock:
            running = self._status.state in (PortState.ON, PortState.SWITCHED_OFF) or self._ios
            wanted, self._wanted = self._wanted, False
            if self._status.is_usable:
                self._status = Status(PortState.OFF)
        if wanted and running:
            try:
                from plyer import gps  # noqa: PLC0415 (plyer is loaded when a part is used)

                gps.stop()
            except Exception:  # noqa: BLE001 (as the module says)
                self._set(PortState.FAILED, "the receiver could not be stopped")

    def read(self) -> tuple[Fix, ...]:
        """Take the fixes that came since the last call, oldest first."""
        with self._lock:
            fixes = tuple(self._waiting)
            self._waiting.clear()
            return fixes

    def _ask(self) -> None:
        try:
            from android.permissions import (  # noqa: PLC0415 (exists on Android only)
                Permission,
                check_permission,
                request_permissions,
            )

            precise = Permission.ACCESS_FINE_LOCATION
            if check_permission(precise):
                self._begin(precise=True)
            else:
                request_permissions([precise, Permission.ACCESS_COARSE_LOCATION], self._answered)
        except Exception as error:  # noqa: BLE001 (as the module says)
            self._set(PortState.FAILED, f"the device did not ask for the position ({error}): type it")

    def _answered(self, permissions: Sequence[str], granted: Sequence[bool]) -> None:
        """Hear what the user answered; an interrupted question comes back with empty lists."""
        with self._lock:
            if not self._wanted:
                return
        if not permissions or not granted:
            self._set(PortState.UNANSWERED, UNANSWERED)
        elif any(granted):
            self._begin(precise=bool(granted[0]))
        else:
            self._set(PortState.DENIED, DENIED)

    def _begin(self, *, precise: bool) -> None:
        try:
            from plyer import gps  # noqa: PLC0415 (as above)

            gps.configure(on_location=self._located, on_status=self._told)
            # No least distance: a tablet that lies still must go on getting fixes.
            gps.start(minTime=EVERY_ms, minDistance=0)
        except NotImplementedError:
            self._set(PortState.MISSING, MISSING)
        except Exception as error:  # noqa: BLE001 (as the module says)
            # With only the approximate permission Android refuses the receiver itself.
            text = f"the receiver did not start ({error}): type the position" if precise else COARSE_ONLY
            self._set(PortState.FAILED, text)
        else:
            with self._lock:
                # iOS may have said "denied" while starting.
                if self._status.state is PortState.ASKING:
                    self._status = Status(PortState.ON, "" if precise else COARSE_ONLY)

    def _located(self, **told: Any) -> None:  # noqa: ANN401 (plyer ships no types)
        """Take a fix from the system; one that is no place on the Earth is left out."""
        accuracy = _number(told.get("accuracy"))
        try:
            position = Position(
                float(told["lat"]),
                float(told["lon"]),
                altitude_m=_number(told.get("altitude")),
                # Zero or less is how both systems say that they do not know.
                accuracy_m=accuracy if accuracy is not None and accuracy > 0.0 else None,
                source="gps",
            )
        except (PositionError, KeyError, TypeError, ValueError):
            return
        fix = Fix(self._clock.elapsed_s(), self._clock.now(), position)
        with self._lock:
            if not self._wanted:
                return
            self._waiting.append(fix)
            if self._status.state is PortState.SWITCHED_OFF:
                self._status = Status(PortState.ON)

    def _told(self, kind: str, text: str) -> None:
        """Hear of the system's switches: the receiver's own on Android, the permission on iOS."""
        if self._ios:
            if "denied" in text or "restricted" in text:
                self._set(PortState.DENIED, DENIED)
            elif "authorized" in text:
                self._set(PortState.ON, "")
        elif "gps" in text.lower():
            if kind == "provider-disabled":
                self._set(PortState.SWITCHED_OFF, SWITCHED_OFF)
            elif kind == "provider-enabled":
                self._set(PortState.ON, "")

    def _set(self, state: PortState, message: str) -> None:
        with self._lock:
            # A word that comes after `stop` changes nothing, except that a failure to stop is told.
            if self._wanted or state is PortState.FAILED:
                self._status = Status(state, message)


def _number(value: Any) -> float | None:  # noqa: ANN401 (plyer ships no types)
    try:
        number = float(value)
    except (TypeError, ValueError):
        return None
    return number if math.isfinite(number) else None
