"""The notations a field may be in, and the parts that their texts are made of.

`analysis.orient.notation` reads and writes whole attitudes with them.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from enum import StrEnum
from typing import NoReturn

from analysis.errors import NotationError


class Notation(StrEnum):
    """How a field is written; the value is the word used in settings."""

    STRIKE_DIP = "strike/dip"
    DIP_DIRECTION_DIP = "dip direction/dip"
    DIP_DIP_DIRECTION = "dip/dip direction"
    QUADRANT_BEARING = "quadrant bearing"
    TREND_PLUNGE = "trend/plunge"
    PLUNGE_TREND = "plunge/trend"
    PITCH_ON_STRIKE_DIP = "pitch on strike/dip"
    PITCH_ON_DIP_DIRECTION_DIP = "pitch on dip direction/dip"

    @property
    def is_plane(self) -> bool:
        """Whether a plane is written in this notation (else a line)."""
        return self in PLANE_NOTATIONS

    @property
    def example(self) -> str:
        """An attitude in this notation, as it is best written."""
        return _EXAMPLES[self]


PLANE_NOTATIONS = (
    Notation.STRIKE_DIP,
    Notation.DIP_DIRECTION_DIP,
    Notation.DIP_DIP_DIRECTION,
    Notation.QUADRANT_BEARING,
)
LINE_NOTATIONS = tuple(notation for notation in Notation if notation not in PLANE_NOTATIONS)
_EXAMPLES = {
    Notation.STRIKE_DIP: "045/30",
    Notation.DIP_DIRECTION_DIP: "135->30",
    Notation.DIP_DIP_DIRECTION: "30->135",
    Notation.QUADRANT_BEARING: "N45E 30SE",
    Notation.TREND_PLUNGE: "060/25",
    Notation.PLUNGE_TREND: "25->060",
    Notation.PITCH_ON_STRIKE_DIP: "40E on 090/60",
    Notation.PITCH_ON_DIP_DIRECTION_DIP: "40N on 090->60",
}
PITCHED_ON = {
    Notation.PITCH_ON_STRIKE_DIP: Notation.STRIKE_DIP,
    Notation.PITCH_ON_DIP_DIRECTION_DIP: Notation.DIP_DIRECTION_DIP,
}


@dataclass(frozen=True, slots=True)
class Pair:
    """A notation of two numbers: which comes first, what they are called, which separators it takes."""

    azimuth: str
    inclination: str
    azimuth_first: bool
    separators: tuple[str, ...]

    @property
    def order(self) -> str:
        """What the two numbers are called, in their order."""
        names = (self.azimuth, self.inclination) if self.azimuth_first else (self.inclination, self.azimuth)
        return " then ".join(names)


PAIRS = {
    Notation.STRIKE_DIP: Pair("strike", "dip", True, ("/",)),
    Notation.DIP_DIRECTION_DIP: Pair("dip direction", "dip", True, ("->", "/")),
    Notation.DIP_DIP_DIRECTION: Pair("dip direction", "dip", False, ("->", "/")),
    Notation.TREND_PLUNGE: Pair("trend", "plunge", True, ("/",)),
    Notation.PLUNGE_TREND: Pair("trend", "plunge", False, ("->", "/")),
}

# Only signs that mean the same are exchanged. A full compatibility normalisation would turn a typed
# one-half sign into a slash between two digits, and so one number into two.
_SAME_SIGNS = str.maketrans(
    dict.fromkeys("°º˚", "") | dict.fromkeys("\u2044\u2215", "/") | dict.fromkeys("→⟶➔➝➞⇒", "->")
)
_ARROW = re.compile(r"[-\u2010-\u2015\u2212=]+>")
NUMBER = r"[0-9]{1,3}(?:[.,][0-9]+)?"


def azimuth_text(azimuth_deg: float, decimals: int = 0) -> str:
    """An azimuth with three digits before the point; one that rounds to 360 is written 000."""
    text = f"{azimuth_deg:.{decimals}f}"
    return (f"{0.0:.{decimals}f}" if float(text) == 360.0 else text).zfill(_width(3, decimals))


def inclination_text(inclination_deg: float, decimals: int = 0) -> str:
    """A dip, plunge or pitch with two digits before the point."""
    return f"{inclination_deg:.{decimals}f}".zfill(_width(2, decimals))


def _width(digits: int, decimals: int) -> int:
    return digits + (decimals + 1 if decimals else 0)


def cleaned(text: str) -> str:
    """Text in capitals with one sign for each meaning: no degree signs, `->` for arrows, `/` for slashes."""
    return _ARROW.sub("->", text.translate(_SAME_SIGNS)).strip().upper()


def is_azimuth(number: str) -> bool:
    """Whether a number has the three digits before its point that only an azimuth has."""
    return len(re.split(r"[.,]", number)[0]) >= 3


def number_value(number: str) -> float:
    """The value of a number with a decimal point or comma."""
    return float(number.replace(",", "."))


def suggested(pair: Pair, azimuth: str, inclination: str) -> str:
    """The two numbers as this notation wants them, for the advice in an error."""
    whole, *fraction = re.split(r"(?=[.,])", azimuth, maxsplit=1)
    parts = [whole.zfill(3) + "".join(fraction), inclination]
    return pair.separators[0].join(parts if pair.azimuth_first else reversed(parts))


def shown(text: str) -> str:
    """Text as an error quotes it."""
    return repr(text.strip()) if text.strip() else "an empty field"


def refuse(what: str, notation: Notation, expected: str, mend: str = "") -> NoReturn:
    """Raise the NotationError of a field in this notation."""
    raise NotationError(what, where=notation.value, expected=expected, mend=mend)
