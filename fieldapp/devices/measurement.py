"""The result of a measurement: a plane or a line with its scatter, as sensed and corrected to true north."""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.orient.attitude import Laid
from analysis.orient.attitudes import Line, Plane
from analysis.orient.north import NorthState
from fieldapp.states import Measured

if TYPE_CHECKING:
    from collections.abc import Mapping

    from analysis.orient.attitude import AxisMean, FieldCheck
    from analysis.orient.north import NorthCorrection

FIELD_WARNING = "magnetic-field"
FIELD_UNCHECKED = "field-not-checked"
WEAK_FIELD = "weak-field"


@dataclass(frozen=True, slots=True, kw_only=True)
class Measurement:
    """What one measurement gave; `plane` and `line` are from magnetic north, one of them is None.

    `scatter_deg` is the root mean square angle of the samples from their mean, `standard_error_deg` that of
    the mean. `warnings` are names of sensor checks with their words. `correction` leads to true north where
    it is known.
    """

    laid: Laid
    plane: Plane | None
    line: Line | None
    correction: NorthCorrection | None
    scatter_deg: float
    standard_error_deg: float
    samples: int
    outliers: int
    screen_down: bool
    overturned: bool
    field: FieldCheck | None
    warnings: Mapping[str, str] = dataclasses.field(default_factory=dict)

    @property
    def true_plane(self) -> Plane | None:
        """The plane from true north; None for a line, and where the correction is unknown."""
        if self.plane is None or self.correction is None or not self.correction.is_true:
            return None
        return self.correction.plane(self.plane)

    @property
    def true_line(self) -> Line | None:
        """The line from true north; None for a plane, and where the correction is unknown."""
        if self.line is None or self.correction is None or not self.correction.is_true:
            return None
        return self.correction.line(self.line)

    @property
    def azimuth_deg(self) -> float:
        """Strike (right-hand rule) or trend, from magnetic north, 0 to 360 degrees."""
        return self.plane.strike_deg if self.plane else self.line.trend_deg if self.line else 0.0

    @property
    def inclination_deg(self) -> float:
        """Dip or plunge, 0 to 90 degrees."""
        return self.plane.dip_deg if self.plane else self.line.plunge_deg if self.line else 0.0

    @property
    def as_entered(self) -> str:
        """The sensors' raw mean in words, for the record."""
        return f"{self.azimuth_deg:05.1f}/{self.inclination_deg:04.1f} magnetic, {self.laid}"

    def for_draft(self) -> Measured:
        """The values that the page's draft takes."""
        return Measured(
            azimuth_deg=self.azimuth_deg,
            inclination_deg=self.inclination_deg,
            scatter_deg=self.scatter_deg,
            samples=self.samples,
            north="magnetic",
            raw=self.as_entered,
            warnings=dict(self.warnings),
        )


def measurement_of(
    laid: Laid,
    mean: AxisMean,
    field_check: FieldCheck | None,
    correction: NorthCorrection | None,
    *,
    screen_down: bool = False,
    shows_top: bool = False,
) -> Measurement:
    """Put a measurement together from the mean axis, in magnetic north, east, down, and the checks."""
    on_plane = laid is Laid.ON_PLANE
    warnings = {}
    if field_check is not None and not field_check.fits:
        warnings[FIELD_WARNING] = field_check.message
    elif field_check is None or not field_check.expected:
        warnings[FIELD_UNCHECKED] = "the magnetic field was not checked"
    if correction is not None and correction.state is NorthState.CORRECTED_WEAK:
        warnings[WEAK_FIELD] = correction.message
    return Measurement(
        laid=laid,
        plane=Plane.from_pole(mean.vector) if on_plane else None,
        line=None if on_plane else Line.from_vector(mean.vector),
        correction=correction,
        scatter_deg=mean.scatter_deg,
        standard_error_deg=mean.standard_error_deg,
        samples=mean.samples,
        outliers=mean.outliers,
        screen_down=screen_down,
        overturned=on_plane and shows_top and screen_down,
        field=field_check,
        warnings=warnings,
    )
