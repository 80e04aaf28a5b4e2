"""Attitudes as geologists write them: text in, planes and lines out, and back.

The reader is told the notation of a field and never guesses between two readings of the same digits:

======================================  ===========================  =====================================
notation                                written                      read as
======================================  ===========================  =====================================
strike/dip                              045/30   045/30 SE           right-hand-rule strike, dip, quadrant
dip direction/dip                       135->30  135/30              azimuth the plane dips towards, dip
dip/dip direction                       30->135  30/135              the same, dip first
quadrant bearing                        N45E 30SE   S45W/30SE        strike line, dip and the side it dips to
trend/plunge                            060/25                       trend, plunge
plunge/trend                            25->060  25/060              the same, plunge first
pitch on strike/dip                     40E on 090/60                pitch from that end of the strike
pitch on dip direction/dip              40N on 090/60                the same on a plane by dip direction
======================================  ===========================  =====================================

One rule keeps the digits apart: **an azimuth has three digits, a dip or plunge one or two.** 30/45 is refused
in every notation, because it is 030/45 to one reader and 30->045 to another. On a line the arrow always goes
from the plunge to the trend, so 060->25 is refused too. Degree signs, spaces, typographic arrows and decimal
commas are taken; quadrants are the English letters N E S W in either case.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from analysis.errors import AttitudeError
from analysis.orient import righthand, vectors
from analysis.orient.attitudes import Line, Plane
from analysis.orient.forms import (
    LINE_NOTATIONS,
    NUMBER,
    PAIRS,
    PITCHED_ON,
    PLANE_NOTATIONS,
    Notation,
    azimuth_text,
    cleaned,
    inclination_text,
    is_azimuth,
    number_value,
    refuse,
    shown,
    suggested,
)

__all__ = [
    "LINE_NOTATIONS",
    "PLANE_NOTATIONS",
    "LineEntry",
    "Notation",
    "PlaneEntry",
    "azimuth_text",
    "inclination_text",
    "read",
    "read_line",
    "read_plane",
    "write",
    "write_pitch",
]

_PAIR_TEXT = re.compile(rf"({NUMBER})\s*(->|/)\s*({NUMBER})\s*([A-Z]*)")
_BEARING_TEXT = re.compile(rf"([NS])\s*({NUMBER})\s*([EW])\s*/?\s*({NUMBER})\s*([A-Z]*)")
_PITCH_TEXT = re.compile(rf"({NUMBER})\s*([A-Z]*)\s+ON\s+(.+)")


@dataclass(frozen=True, slots=True)
class PlaneEntry:
    """A plane as it was read, with the dip quadrant if one was typed.

    The quadrant is kept for the right-hand-rule check of `analysis.orient.righthand`; except in a quadrant
    bearing, where it is part of the plane, it does not change the plane.
    """

    plane: Plane
    quadrant: str | None = None


@dataclass(frozen=True, slots=True)
class LineEntry:
    """A line as it was read, with the plane it was pitched on, if it was."""

    line: Line
    on_plane: Plane | None = None


def read(text: str, notation: Notation) -> PlaneEntry | LineEntry:
    """Read an attitude in the notation of its field: a PlaneEntry or a LineEntry.

    Raises NotationError for text that is nothing in this notation or could be two things, and AttitudeError
    (its parent) for a number outside its range.
    """
    return read_plane(text, notation) if Notation(notation).is_plane else read_line(text, notation)


def read_plane(text: str, notation: Notation) -> PlaneEntry:
    """Read a plane in one of PLANE_NOTATIONS; errors as for `read`."""
    notation = Notation(notation)
    if not notation.is_plane:
        refuse(f"{notation.value} is a notation for lines", notation, "a notation for planes")
    if notation is Notation.QUADRANT_BEARING:
        return _read_bearing(text)
    azimuth, inclination, quadrant = _read_pair(text, notation)
    if notation is Notation.STRIKE_DIP:
        plane = Plane(azimuth, inclination)
    else:
        plane = Plane.from_dip_direction(azimuth, inclination)
    return PlaneEntry(plane, _quadrant(quadrant, text, notation) if quadrant else None)


def read_line(text: str, notation: Notation) -> LineEntry:
    """Read a line in one of LINE_NOTATIONS; errors as for `read`."""
    notation = Notation(notation)
    if notation.is_plane:
        refuse(f"{notation.value} is a notation for planes", notation, "a notation for lines")
    if notation in PITCHED_ON:
        return _read_pitch(text, notation)
    trend, plunge, quadrant = _read_pair(text, notation)
    if quadrant:
        refuse(
            f"{shown(text)} has letters after a line",
            notation,
            f"two numbers, as {notation.example}",
            "A trend already says which way the line plunges: leave the letters out.",
        )
    return LineEntry(Line(trend, plunge))


def write(attitude: Plane | Line, notation: Notation, *, decimals: int = 0) -> str:
    """Write a plane or a line in a notation that fits it: three-digit azimuth, two-digit inclination.

    Strikes keep the right-hand rule; `decimals` digits follow the point. A pitch needs its plane: see
    `write_pitch`. Raises NotationError for a notation of the other kind.
    """
    notation = Notation(notation)
    if isinstance(attitude, Plane) != notation.is_plane or notation in PITCHED_ON:
        kind = "plane" if isinstance(attitude, Plane) else "line"
        mend = "Write a pitch with write_pitch." if notation in PITCHED_ON else ""
        refuse(f"a {kind} cannot be written as {notation.value}", notation, f"a notation for a {kind}", mend)
    if isinstance(attitude, Line):
        azimuth, inclination = attitude.trend_deg, attitude.plunge_deg
    elif notation is Notation.QUADRANT_BEARING:
        return _write_bearing(attitude, decimals)
    else:
        is_strike = notation is Notation.STRIKE_DIP
        azimuth = attitude.strike_deg if is_strike else attitude.dip_direction_deg
        inclination = attitude.dip_deg
    pair = PAIRS[notation]
    parts = [azimuth_text(azimuth, decimals), inclination_text(inclination, decimals)]
    return pair.separators[0].join(parts if pair.azimuth_first else reversed(parts))


def write_pitch(line: Line, plane: Plane, notation: Notation, *, decimals: int = 0) -> str:
    """Write a line by its pitch, 0 to 90 degrees, from an end of the strike of the plane it lies in.

    Raises AttitudeError where the line lies more than a degree out of the plane, and NotationError where the
    notation is none of a pitch.
    """
    notation = Notation(notation)
    if notation not in PITCHED_ON:
        refuse(f"{notation.value} is no notation of a pitch", notation, " or ".join(PITCHED_ON))
    off = 90.0 - float(vectors.axis_angle_deg(line.vector, plane.pole))
    if off > 1.0:
        raise AttitudeError(
            f"the line lies {off:.1f} degrees out of the plane",
            where="pitch",
            expected="a line in the plane",
            mend="Write it by trend and plunge.",
        )
    pitch, end = plane.pitch_deg(line), plane.strike_deg
    if pitch > 90.0:
        pitch, end = 180.0 - pitch, plane.strike_deg + 180.0
    on = write(plane, PITCHED_ON[notation], decimals=decimals)
    return f"{inclination_text(pitch, decimals)}{righthand.octant_of(end)} on {on}"


def _read_pair(text: str, notation: Notation) -> tuple[float, float, str]:
    """Split into azimuth, inclination and the letters behind them."""
    pair = PAIRS[notation]
    match = _PAIR_TEXT.fullmatch(cleaned(text))
    if match is None:
        refuse(
            f"{shown(text)} is not two numbers",
            notation,
            f"{pair.order}, as {notation.example}",
            "An azimuth has three digits, a dip or plunge one or two.",
        )
    first, separator, second, letters = match.groups()
    azimuths = (is_azimuth(first), is_azimuth(second))
    if azimuths == (False, False):
        forms = [
            f"{suggested(pair, azimuth, inclination)} if {azimuth} is the {pair.azimuth}"
            for azimuth, inclination in ((first, second), (second, first))
            if number_value(inclination) <= 90.0
        ]
        refuse(
            f"{shown(text)} does not say which number is the {pair.azimuth}",
            notation,
            f"an azimuth of three digits, as {notation.example}",
            f"Write {', '.join(forms)}." if forms else "",
        )
    if azimuths == (True, True):
        refuse(
            f"{shown(text)} holds two azimuths of three digits and no {pair.inclination}",
            notation,
            f"{pair.order}, as {notation.example}",
            f"Write the {pair.inclination} with two digits.",
        )
    azimuth, inclination = (first, second) if azimuths[0] else (second, first)
    if azimuths[0] != pair.azimuth_first:
        form = f"{suggested(pair, azimuth, inclination)} if {azimuth} is the {pair.azimuth}"
        if notation is Notation.STRIKE_DIP and number_value(azimuth) <= 360.0:
            strike = azimuth_text(float(vectors.wrap_azimuth_deg(number_value(azimuth) - 90.0)))
            form += f" and {suggested(pair, strike, inclination)} if it is the dip direction"
        refuse(
            f"{shown(text)} has its azimuth {'first' if azimuths[0] else 'second'}",
            notation,
            f"{pair.order}, as {notation.example}",
            f"Write {form}, or set the notation of the field to the one you use.",
        )
    if separator not in pair.separators:
        meaning = "the dip direction" if notation.is_plane else "plunge -> trend"
        refuse(
            f"{shown(text)} has an arrow",
            notation,
            f"{pair.order} with a slash, as {notation.example}",
            f"An arrow stands for {meaning}. Write {suggested(pair, azimuth, inclination)} "
            f"if {azimuth} is the {pair.azimuth}.",
        )
    return number_value(azimuth), number_value(inclination), letters


def _read_bearing(text: str) -> PlaneEntry:
    notation = Notation.QUADRANT_BEARING
    match = _BEARING_TEXT.fullmatch(cleaned(text))
    if match is None:
        refuse(
            f"{shown(text)} is no quadrant bearing with a dip",
            notation,
            f"a bearing, a dip and the side it dips to, as {notation.example}",
        )
    pole, angle, side, dip, letters = match.groups()
    if not 0.0 <= number_value(angle) <= 90.0:
        refuse(
            f"bearing {pole}{angle}{side} turns by more than a right angle",
            notation,
            "0 to 90 degrees from N or S towards E or W",
            "Write a full azimuth as strike/dip instead.",
        )
    toward = number_value(angle) * (1.0 if (pole == "N") == (side == "E") else -1.0)
    # A bearing names the strike line, not an end of it: start from the northern end.
    plane = Plane(float(vectors.wrap_azimuth_deg(toward)), number_value(dip))
    if not letters:
        if plane.dip_deg in (0.0, 90.0):
            return PlaneEntry(plane)
        refuse(
            f"{shown(text)} does not say to which side the plane dips",
            notation,
            f"the side behind the dip, as {notation.example}",
            "Only a horizontal or vertical plane goes without.",
        )
    quadrant = _quadrant(letters, text, notation)
    fit = righthand.quadrant_fit(plane, quadrant)
    if fit is righthand.QuadrantFit.MISFIT:
        sides = " or ".join(righthand.octant_of(plane.dip_direction_deg + turn) for turn in (0.0, 180.0))
        refuse(
            f"a plane striking {pole}{angle}{side} cannot dip {quadrant}, along its strike",
            notation,
            f"dip to the {sides}",
            "Check the strike and the side it dips to.",
        )
    return PlaneEntry(plane.reversed if fit is righthand.QuadrantFit.REVERSED else plane, quadrant)


def _write_bearing(plane: Plane, decimals: int) -> str:
    half_turn = plane.strike_deg % 180.0
    angle, side = (half_turn, "E") if half_turn <= 90.0 else (180.0 - half_turn, "W")
    dip = inclination_text(plane.dip_deg, decimals)
    # What is written horizontal or vertical dips to neither side.
    quadrant = "" if float(dip) in (0.0, 90.0) else righthand.octant_of(plane.dip_direction_deg)
    return f"N{inclination_text(angle, decimals)}{side} {dip}{quadrant}"


def _read_pitch(text: str, notation: Notation) -> LineEntry:
    match = _PITCH_TEXT.fullmatch(cleaned(text))
    if match is None:
        refuse(
            f"{shown(text)} is no pitch on a plane",
            notation,
            f"a pitch, the end of the strike it is measured from, 'on' and the plane, as {notation.example}",
        )
    number, letters, on = match.groups()
    plane = read_plane(on, PITCHED_ON[notation]).plane
    pitch = number_value(number)
    if not 0.0 <= pitch <= 90.0:
        refuse(
            f"pitch {number} is more than a right angle",
            notation,
            "0 to 90 degrees from the end of the strike that is named",
            "Measure from the other end.",
        )
    ends = [righthand.octant_of(plane.strike_deg + turn) for turn in (0.0, 180.0)]
    if not letters:
        refuse(
            f"{shown(text)} does not say from which end of the strike the pitch is measured",
            notation,
            f"{number}{ends[0]} or {number}{ends[1]} before 'on'",
        )
    end = righthand.octant_azimuth_deg(_quadrant(letters, text, notation))
    if abs(righthand.off_deg(end, plane.strike_deg) - 90.0) <= righthand.ALONG_STRIKE_DEG:
        other = next(other for other in PITCHED_ON if other is not notation)
        refuse(
            f"{letters} names no end of a strike of {azimuth_text(plane.strike_deg)}",
            notation,
            " or ".join(ends),
            f"If the first number of the plane is no {PAIRS[PITCHED_ON[notation]].azimuth}, "
            f"set the notation of the field to {other.value}.",
        )
    return LineEntry(plane.line_at_pitch(pitch, end), plane)


def _quadrant(letters: str, text: str, notation: Notation) -> str:
    if letters not in righthand.OCTANTS:
        refuse(
            f"{shown(text)} ends in {letters!r}, which is no side of the compass"
            if notation not in PITCHED_ON
            else f"{letters!r} is no end of a strike",
            notation,
            "one of " + " ".join(righthand.OCTANTS),
        )
    return letters
