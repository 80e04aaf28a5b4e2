"""Positions as people type them: degrees, degrees and minutes, UTM, and grid references.

Taken: `48.5000, -28.2500`; `48.5000N 28.2500W`; `48 30.000 N, 28 15.000 W`; `48°30'00"N 28°15'00"W`;
`26U 407661 5372630`; `26 north 407661 5372630`; `26UMU 07661 72630`. A decimal comma is taken where it cannot
be a separator. What could be two places is refused with the two ways to write it.
"""

from __future__ import annotations

import re

from analysis.errors import PositionError
from analysis.orient.position import BANDS, HAND, Position, from_mgrs, from_utm, with_source

FORMS = "48.5000 -28.2500, or 48 30.000 N 28 15.000 W, or 26U 407661 5372630, or 26UMU 07661 72630"

_MGRS = re.compile(r"\d{1,2}\s*[A-Z]\s*[A-Z]{2}[\s\d]+", re.IGNORECASE)
_UTM = re.compile(
    r"(?P<zone>\d{1,2})\s*(?P<letter>north|south|[A-Z])[\s,]+(?P<east>\d{5,6}(?:[.,]\d+)?)\s*m?\s*E?[\s,]+"
    r"(?P<north>\d{1,8}(?:[.,]\d+)?)\s*m?\s*N?",
    re.IGNORECASE,
)
_NUMBER = r"\d+(?:\.\d+)?"
_ANGLE = re.compile(
    rf"(?P<before>[NSEW])?\s*(?P<sign>[+-])?\s*(?P<degrees>{_NUMBER})\s*°?"
    rf"(?:\s*(?P<minutes>{_NUMBER})\s*'?)?(?:\s*(?P<seconds>{_NUMBER})\s*\"?)?\s*(?P<after>[NSEW])?",
    re.IGNORECASE,
)
# What typewriters, phones and web pages make of the signs for minutes, seconds, degrees and minus.
_SIGNS = str.maketrans(
    {
        "\N{PRIME}": "'",
        "\N{RIGHT SINGLE QUOTATION MARK}": "'",
        "\N{LEFT SINGLE QUOTATION MARK}": "'",
        "\N{DOUBLE PRIME}": '"',
        "\N{RIGHT DOUBLE QUOTATION MARK}": '"',
        "\N{LEFT DOUBLE QUOTATION MARK}": '"',
        "\N{MASCULINE ORDINAL INDICATOR}": "°",
        "\N{MINUS SIGN}": "-",
        "\N{NO-BREAK SPACE}": " ",
        "\N{NARROW NO-BREAK SPACE}": " ",
    }
)


def parse_position(text: str) -> Position:
    """Read a position as typed; raises PositionError for text that is none, or could be two."""
    cleaned = " ".join(text.translate(_SIGNS).replace("''", '"').split())
    if not cleaned:
        raise PositionError("nothing was typed", where="position", expected=FORMS)
    if _MGRS.fullmatch(cleaned):
        return with_source(from_mgrs(cleaned), HAND)
    if found := _UTM.fullmatch(cleaned):
        return with_source(_from_utm_text(found, cleaned), HAND)
    return with_source(_from_degrees(cleaned), HAND)


def _from_utm_text(found: re.Match[str], text: str) -> Position:
    letter = found["letter"].upper()
    easting = float(found["east"].replace(",", "."))
    northing = float(found["north"].replace(",", "."))
    zone = int(found["zone"])
    if letter in ("NORTH", "SOUTH"):
        return from_utm(zone, letter == "NORTH", easting, northing)
    if letter not in BANDS:
        raise PositionError(
            f"{letter} is no band of the UTM grid", where="grid position", expected="C to X, no I or O"
        )
    if letter == "S":
        return _from_zone_s(zone, easting, northing, text)
    place = from_utm(zone, letter >= "N", easting, northing)
    # N alone is band N as well as the northern half: both count northings from the equator.
    if letter != "N" and not _in_band(place, letter):
        raise PositionError(
            f"northing {northing:g} m is not in band {letter}",
            where="grid position",
            expected="a band letter that fits the northing",
            mend=f"Check the figures, or write '{zone} {'north' if letter >= 'N' else 'south'}'.",
        )
    return place


def _from_zone_s(zone: int, easting: float, northing: float, text: str) -> Position:
    """Tell band S (32 to 40 north) from "south": both are written S."""
    south = from_utm(zone, False, easting, northing)
    try:
        north = from_utm(zone, True, easting, northing)
    except PositionError:
        return south
    if _in_band(north, "S"):
        raise PositionError(
            f"the S in {text!r} could be band S, in the north, or the southern half",
            where="grid position",
            expected=f"'{zone} north' or '{zone} south' before the figures",
        )
    return south


def _in_band(place: Position, letter: str) -> bool:
    low = -80.0 + 8.0 * BANDS.index(letter)
    high = 84.0 if letter == "X" else low + 8.0
    # Grid lines of a map at a band's edge run a little past it.
    return low - 0.1 <= place.latitude_deg <= high + 0.1


def _from_degrees(text: str) -> Position:
    first, second = _two_angles(text)
    letters = (first[1], second[1])
    if letters[0] in "EW" and letters[0] and letters[1] in ("N", "S", ""):
        first, second = second, first
    for (_, letter), allowed, name in ((first, "NS", "latitude"), (second, "EW", "longitude")):
        if letter and letter not in allowed:
            raise PositionError(
                f"{text!r} names no {name}", where="position", expected="one of N or S and one of E or W"
            )
    return Position(first[0], second[0])


def _two_angles(text: str) -> tuple[tuple[float, str], tuple[float, str]]:
    """Split at every place that could part two angles, and take the one reading that results."""
    readings = set()
    # A comma between digits may be a decimal mark; both are tried, and only one may make sense.
    for candidate in (text, re.sub(r"(?<=\d),(?=\d)", ".", text)):
        for cut in re.finditer(r"\s*[,;/]\s*|\s+|(?<=[NSEWnsew])(?=[\d+-])", candidate):
            halves = candidate[: cut.start()], candidate[cut.end() :]
            angles = [_angle(half) for half in halves]
            if angles[0] is not None and angles[1] is not None:
                readings.add((angles[0], angles[1]))
    if len(readings) > 1:
        # "55 57 3 11" is 55°57' 3°11' as well as 55° 57°3'11": forms of the same kind on both sides win.
        readings = {(a, b) for a, b in readings if a[2] == b[2] and bool(a[1]) == bool(b[1])}
    if len(readings) > 1:
        raise PositionError(
            f"{text!r} can be read in more than one way",
            where="position",
            expected=FORMS,
            mend="Put N or S after the latitude and E or W after the longitude.",
        )
    if not readings:
        raise PositionError(
            f"{text!r} is no position",
            where="position",
            expected=FORMS,
            mend="Minutes and seconds stay below 60.",
        )
    ((first, second),) = readings
    return (first[0], first[1]), (second[0], second[1])


def _angle(text: str) -> tuple[float, str, int] | None:
    """Read one angle: its degrees, its letter, and the count of numbers in it; None if it is none."""
    found = _ANGLE.fullmatch(text.strip())
    if not found or (found["before"] and found["after"]):
        return None
    letter = (found["before"] or found["after"] or "").upper()
    numbers = [found[name] for name in ("degrees", "minutes", "seconds") if found[name] is not None]
    if any("." in number for number in numbers[:-1]) or (found["sign"] and letter):
        return None
    values = [float(number) for number in numbers]
    if any(value >= 60.0 for value in values[1:]):
        return None
    degrees = sum(value / 60.0**place for place, value in enumerate(values))
    return (-degrees if found["sign"] == "-" or letter in ("S", "W") else degrees), letter, len(values)
