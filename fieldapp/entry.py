"""The entry: the draft of one reading, and what it means in the notation and north of the settings.

A draft is a frozen record. It can be stored after each key and be there again after the process was killed.
Azimuths stay as they were typed; the correction to true north is added once, when the reading is made.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature
from analysis.orient.notation import read_line, read_plane
from analysis.orient.vectors import wrap_azimuth_deg
from fieldapp.draft import Digits, Key, Place
from fieldapp.settings import PlaneNotation
from fieldapp.states import QUADRANTS
from fieldapp.wording import attitude_of, notation_of, parts_of

if TYPE_CHECKING:
    from collections.abc import Mapping

    from analysis.files.reading import Reading
    from fieldapp.states import Measured


@dataclass(frozen=True, slots=True, kw_only=True)
class North:
    """What azimuths are read against and what is added to reach true north, degrees (None: not known)."""

    reference: str = "true"
    correction_deg: float | None = None
    model: str = ""

    @property
    def added_deg(self) -> float:
        """What is added, 0 where it is not known."""
        return self.correction_deg or 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Sensed:
    """What the sensors said of a draft that they filled; angles in degrees."""

    scatter_deg: float
    samples: int
    raw: str = ""
    warnings: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class EntryDraft:
    """The entry so far. `mending` is the id of the reading being mended; `north` is set where it is fixed."""

    feature: Feature = Feature.BEDDING
    digits: Digits = field(default_factory=Digits)
    quadrant: str = ""
    note: str = ""
    overturned: bool = False
    mending: str = ""
    north: North | None = None
    sensed: Sensed | None = None

    # -- what keys do --------------------------------------------------------------------------------------

    def pressed(self, key: Key, digit: str = "") -> EntryDraft:
        """Give the draft after a key. Digits typed over a sensor's make it a compass reading."""
        digits = self.digits.pressed(key, digit)
        if digits == self.digits:
            return self
        if self.sensed is None:
            return replace(self, digits=digits)
        return replace(self, digits=digits, sensed=None, north=None)

    def cleared(self) -> EntryDraft:
        """Give an empty draft for the same feature."""
        return EntryDraft(feature=self.feature)

    def with_feature(self, feature: Feature) -> EntryDraft:
        """Give the draft for another feature; the digits stay, a line has no side it dips to."""
        if feature.is_plane:
            return replace(self, feature=feature)
        return replace(self, feature=feature, quadrant="", overturned=False)

    def with_quadrant(self, quadrant: str) -> EntryDraft:
        """Give the draft with a dip quadrant; the same one again takes it away."""
        if quadrant not in QUADRANTS or not self.feature.is_plane:
            return self
        return replace(self, quadrant="" if quadrant == self.quadrant else quadrant)

    def in_notation(self, old: PlaneNotation, new: PlaneNotation) -> EntryDraft:
        """Give the draft with its digits meaning the same plane in another notation.

        An azimuth that is not whole yet stays as typed: it was begun with the new notation in mind. A dip direction
        says the side that the plane dips to, and the side tapped goes.
        """
        if old is new or not self.feature.is_plane:
            return self
        if new is not PlaneNotation.STRIKE_DIP and self.quadrant:
            return replace(self, quadrant="").in_notation(old, new)
        if not self.digits.azimuth_whole:
            return self
        turn = 90.0 if new is PlaneNotation.DIP_DIRECTION_DIP else -90.0
        typed = self.digits.azimuth
        if not typed.rstrip(".") or float(typed) > 360.0:
            return self
        turned = float(wrap_azimuth_deg(float(typed) + turn))
        text = f"{turned:05.1f}" if "." in typed else f"{turned:03.0f}"
        return replace(self, digits=replace(self.digits, azimuth=text))

    def with_attitude(self, attitude: Plane | Line, planes: PlaneNotation) -> EntryDraft:
        """Give the draft filled with an attitude, against the north it is typed in."""
        return replace(self, digits=Digits.loaded(*parts_of(attitude, planes)))

    # -- what it means -------------------------------------------------------------------------------------

    @property
    def empty(self) -> bool:
        """Whether nothing would be lost by clearing it."""
        chosen = self.quadrant or self.note or self.overturned or self.mending
        return self.digits.place is Place.EMPTY and not chosen

    @property
    def text(self) -> str:
        """The digits as typed, as "045/30"."""
        return f"{self.digits.azimuth.rstrip('.')}/{self.digits.inclination.rstrip('.')}"

    def attitude(self, planes: PlaneNotation) -> Plane | Line:
        """The plane or line as typed, before correction; raises AttitudeError outside its range."""
        notation = notation_of(self.feature, planes)
        if self.feature.is_plane:
            return read_plane(self.text, notation).plane
        return read_line(self.text, notation).line

    def as_entered(self, planes: PlaneNotation) -> str:
        """What was typed, with its notation; or the sensor's raw mean."""
        if self.sensed is not None:
            return self.sensed.raw or f"sensor {self.text}"
        typed = f"{self.text} {self.quadrant}".rstrip()
        return f"{notation_of(self.feature, planes)} {typed}"

    # -- storing -------------------------------------------------------------------------------------------

    def to_values(self) -> dict[str, object]:
        """Give plain values for the notebook."""
        values: dict[str, object] = {
            "feature": str(self.feature),
            "azimuth": self.digits.azimuth,
            "inclination": self.digits.inclination,
            "place": str(self.digits.place),
            "quadrant": self.quadrant,
            "note": self.note,
            "overturned": self.overturned,
            "mending": self.mending,
        }
        if self.north is not None:
            values["north"] = [self.north.reference, self.north.correction_deg, self.north.model]
        if self.sensed is not None:
            s = self.sensed
            values["sensed"] = [s.scatter_deg, s.samples, s.raw, [list(w) for w in s.warnings]]
        return values

    @classmethod
    def from_values(cls, values: Mapping[str, object]) -> EntryDraft:
        """Read stored values; what makes no sense gives an empty draft."""
        try:
            north, sensed = values.get("north"), values.get("sensed")
            return cls(
                feature=Feature(str(values.get("feature", Feature.BEDDING))),
                digits=Digits.stored(
                    str(values.get("azimuth", "")),
                    str(values.get("inclination", "")),
                    Place(str(values.get("place", Place.EMPTY))),
                ),
                quadrant=_quadrant(str(values.get("quadrant", ""))),
                note=str(values.get("note", "")),
                overturned=bool(values.get("overturned", False)),
                mending=str(values.get("mending", "")),
                north=_north(north) if isinstance(north, list) else None,
                sensed=_sensed(sensed) if isinstance(sensed, list) else None,
            )
        except (ValueError, TypeError):
            return cls()

    @classmethod
    def of_reading(cls, reading: Reading, planes: PlaneNotation) -> EntryDraft:
        """Fill a draft from a past reading, against the north that it was read in."""
        north = North(
            reference=reading.north_reference,
            correction_deg=reading.correction_deg,
            model=reading.correction_model,
        )
        typed = turned(attitude_of(reading), -north.added_deg)
        return cls(
            feature=reading.feature,
            quadrant=reading.dip_quadrant,
            note=reading.note,
            overturned=reading.overturned,
            mending=reading.reading_id,
            north=north,
        ).with_attitude(typed, planes)

    def of_sensors(self, measured: Measured, north: North, planes: PlaneNotation) -> EntryDraft:
        """Fill the draft from the sensors; `north` is what they read against and its correction."""
        attitude = self._measured_attitude(measured)
        filled = replace(
            self,
            north=north,
            sensed=Sensed(
                scatter_deg=measured.scatter_deg,
                samples=measured.samples,
                raw=measured.raw,
                warnings=tuple(measured.warnings.items()),
            ),
        )
        return filled.with_attitude(attitude, planes)

    def _measured_attitude(self, measured: Measured) -> Plane | Line:
        azimuth = float(wrap_azimuth_deg(measured.azimuth_deg))
        kind = Plane if self.feature.is_plane else Line
        return kind(round(azimuth, 1), round(measured.inclination_deg, 1))


def turned(attitude: Plane | Line, by_deg: float) -> Plane | Line:
    """Give an attitude turned about the vertical by an angle in degrees, clockwise positive."""
    if isinstance(attitude, Line):
        return Line(float(wrap_azimuth_deg(attitude.trend_deg + by_deg)), attitude.plunge_deg)
    return Plane(float(wrap_azimuth_deg(attitude.strike_deg + by_deg)), attitude.dip_deg)


def _quadrant(stored: str) -> str:
    if stored and stored not in QUADRANTS:
        raise ValueError(f"{stored!r} is no quadrant")
    return stored


def _north(stored: list[object]) -> North:
    reference, correction, model = stored
    added = None if correction is None else float(str(correction))
    if added is not None and not math.isfinite(added):
        raise ValueError(f"{added} is no correction")
    return North(reference=str(reference), correction_deg=added, model=str(model))


def _sensed(stored: list[object]) -> Sensed:
    scatter, samples, raw, warnings = stored
    pairs = warnings if isinstance(warnings, list) else []
    return Sensed(
        scatter_deg=float(str(scatter)),
        samples=int(str(samples)),
        raw=str(raw),
        warnings=tuple((str(name), str(words)) for name, words in pairs),
    )
