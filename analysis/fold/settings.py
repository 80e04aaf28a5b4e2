"""What the user decides about the check."""

from __future__ import annotations

import math
from dataclasses import dataclass

from analysis.errors import SettingError


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckSettings:
    """Settings of the check; cannot be invalid.

    Parameters
    ----------
    margin_deg
        M: a transection smaller than this counts as axial planar, degrees, 0.5 to 45.
    confidence
        Of the intervals, over all looks together, 0.51 to 0.9999: "axial planar" is tested at
        twice the error level, which is no test at 0.5.
    forecast_limit
        More further readings than this, and the verdict is "cannot be settled here"; 1 to 100 000.

    """

    margin_deg: float = 5.0
    confidence: float = 0.95
    forecast_limit: int = 200

    def __post_init__(self) -> None:
        for name, value, low, high, unit in (
            ("margin", self.margin_deg, 0.5, 45.0, " degrees"),
            ("confidence", self.confidence, 0.51, 0.9999, ""),
            ("forecast limit", self.forecast_limit, 1, 100_000, " readings"),
        ):
            if not (math.isfinite(value) and low <= value <= high):
                raise SettingError(
                    f"{value:g}{unit} is no {name}", where=name, expected=f"{low:g} to {high:g}{unit}"
                )
