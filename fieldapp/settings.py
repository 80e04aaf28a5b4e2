"""The settings a geologist makes: one frozen record that cannot hold an impossible value."""

from __future__ import annotations

import math
from dataclasses import asdict, dataclass, fields
from enum import StrEnum
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError, SettingError
from analysis.files.checked import checked_name

if TYPE_CHECKING:
    from collections.abc import Mapping


class PlaneNotation(StrEnum):
    """How planes are typed and shown; lines are always trend/plunge."""

    STRIKE_DIP = "strike/dip"
    DIP_DIRECTION_DIP = "dip direction/dip"


class NorthMode(StrEnum):
    """Which north the compass is read against."""

    MAGNETIC = "magnetic"  # corrected to true north by the field model, where a position is known
    TRUE = "true"  # the declination is set on the compass; nothing is added


class Appearance(StrEnum):
    """The leaf for sunlight, the leaf for dusk, or what the system says."""

    SYSTEM = "system"
    LIGHT = "light"
    DARK = "dark"


@dataclass(frozen=True, slots=True, kw_only=True)
class Settings:
    """All settings; angles in degrees. Raises SettingError for a value outside what it may be.

    `margin_deg` is M, the transection that still counts as axial planar (0.5 to 30), `confidence` the share
    of folds whose interval holds the true transection (0.51 to below 1), `forecast_limit` the number of
    further readings beyond which the answer is that it cannot be settled here (10 to 10,000).
    `average_s` is the time that a device's position is averaged over (1 to 600 s).
    `position_explained` says that the page has told once what it wants the device's position for.
    """

    notation: PlaneNotation = PlaneNotation.STRIKE_DIP
    require_quadrant: bool = True
    north: NorthMode = NorthMode.MAGNETIC
    margin_deg: float = 5.0
    confidence: float = 0.95
    forecast_limit: int = 200
    spoken_verdict: bool = False
    left_handed: bool = False
    appearance: Appearance = Appearance.SYSTEM
    average_s: float = 30.0
    position_explained: bool = False
    observer: str = ""
    device: str = ""

    def __post_init__(self) -> None:
        for name in ("observer", "device"):
            object.__setattr__(self, name, checked_name(getattr(self, name), name))
        _within(self.margin_deg, 0.5, 30.0, "margin", "0.5 to 30 degrees")
        _within(self.confidence, 0.51, 0.999, "confidence", "0.51 to 0.999")
        _within(self.average_s, 1.0, 600.0, "averaging time", "1 to 600 seconds")
        _within(self.forecast_limit, 10, 10_000, "forecast limit", "10 to 10,000 readings")

    def to_values(self) -> dict[str, object]:
        """Give the settings as plain values, by name, as the notebook stores them."""
        return asdict(self)

    @classmethod
    def from_values(cls, values: Mapping[str, object]) -> Settings:
        """Read stored values; unknown names and impossible values are left at their defaults.

        A notebook from another version, or one recovered from damage, must not keep the page from opening.
        """
        good = cls()
        for field in fields(cls):
            if field.name not in values:
                continue
            try:
                changed = _converted(getattr(good, field.name), values[field.name])
                good = cls(**{**asdict(good), field.name: changed})
            except (HingewiseError, ValueError, TypeError):
                continue
        return good


def _within(value: float, low: float, high: float, name: str, expected: str) -> None:
    if not (math.isfinite(value) and low <= value <= high):
        raise SettingError(f"{name} {value:g} is out of range", where=name, expected=expected)


def _converted(default: object, value: object) -> object:
    """Bring a stored value to the type of the default; raises ValueError or TypeError where it is another."""
    if isinstance(default, StrEnum):
        return type(default)(str(value))
    if isinstance(default, float) and isinstance(value, int) and not isinstance(value, bool):
        return float(value)
    if type(value) is not type(default):
        raise TypeError(f"{value!r} is no {type(default).__name__}")
    return value
