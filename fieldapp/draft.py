"""The entry draft: what each key does to the digits typed so far, as a table of states.

Rules
-----
1. An azimuth (strike, dip direction or trend) has three digits, an inclination (dip or plunge) two. After the
   third digit the entry moves on by itself; nothing needs to be pressed between the two.
2. A decimal is optional. The point, straight after the entry moved on, goes back to the azimuth and takes one
   decimal; the inclination takes its decimal after its last digit. A point after fewer digits fills up with
   zeros in front ("45." is 045.).
3. Back takes away the last sign, wherever it stands; Clear takes away everything.
4. A draft filled by the sensors or from a reading being mended is LOADED: the first digit starts it anew, Back
   takes its last digit away and goes on from there.
5. A key that has no entry in the table does nothing.

The draft is a frozen record and knows no reading, no notation and no clock; the presenter gives it meaning.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from enum import StrEnum

AZIMUTH_DIGITS = 3
INCLINATION_DIGITS = 2


class Key(StrEnum):
    """The kinds of keys that change the digits."""

    DIGIT = "digit"
    POINT = "point"
    BACK = "back"
    CLEAR = "clear"


class Place(StrEnum):
    """Where the next key lands."""

    EMPTY = "empty"
    AZIMUTH_1 = "one digit of the azimuth"
    AZIMUTH_2 = "two digits of the azimuth"
    AZIMUTH_POINT = "azimuth and point"
    MOVED_ON = "azimuth whole"
    INCLINATION_1 = "one digit of the inclination"
    WHOLE = "both whole"
    INCLINATION_POINT = "inclination and point"
    TENTH = "inclination with a decimal"
    LOADED = "filled in"


class Edit(StrEnum):
    """What a key does to the text."""

    TO_AZIMUTH = "add to the azimuth"
    TO_INCLINATION = "add to the inclination"
    POINT_AZIMUTH = "fill the azimuth up to three digits and add a point"
    POINT_INCLINATION = "fill the inclination up to two digits and add a point"
    OFF_AZIMUTH = "take the last sign off the azimuth"
    OFF_INCLINATION = "take the last sign off the inclination"
    START = "start anew with this digit"
    WIPE = "take everything away"


# Where a table entry has no place, the place follows from the text that is left (after Back).
TABLE: dict[tuple[Place, Key], tuple[Edit, Place | None]] = {
    (Place.EMPTY, Key.DIGIT): (Edit.TO_AZIMUTH, Place.AZIMUTH_1),
    (Place.AZIMUTH_1, Key.DIGIT): (Edit.TO_AZIMUTH, Place.AZIMUTH_2),
    (Place.AZIMUTH_1, Key.POINT): (Edit.POINT_AZIMUTH, Place.AZIMUTH_POINT),
    (Place.AZIMUTH_1, Key.BACK): (Edit.OFF_AZIMUTH, None),
    (Place.AZIMUTH_2, Key.DIGIT): (Edit.TO_AZIMUTH, Place.MOVED_ON),
    (Place.AZIMUTH_2, Key.POINT): (Edit.POINT_AZIMUTH, Place.AZIMUTH_POINT),
    (Place.AZIMUTH_2, Key.BACK): (Edit.OFF_AZIMUTH, None),
    (Place.AZIMUTH_POINT, Key.DIGIT): (Edit.TO_AZIMUTH, Place.MOVED_ON),
    (Place.AZIMUTH_POINT, Key.BACK): (Edit.OFF_AZIMUTH, None),
    (Place.MOVED_ON, Key.DIGIT): (Edit.TO_INCLINATION, Place.INCLINATION_1),
    (Place.MOVED_ON, Key.POINT): (Edit.POINT_AZIMUTH, Place.AZIMUTH_POINT),
    (Place.MOVED_ON, Key.BACK): (Edit.OFF_AZIMUTH, None),
    (Place.INCLINATION_1, Key.DIGIT): (Edit.TO_INCLINATION, Place.WHOLE),
    (Place.INCLINATION_1, Key.POINT): (Edit.POINT_INCLINATION, Place.INCLINATION_POINT),
    (Place.INCLINATION_1, Key.BACK): (Edit.OFF_INCLINATION, None),
    (Place.WHOLE, Key.POINT): (Edit.POINT_INCLINATION, Place.INCLINATION_POINT),
    (Place.WHOLE, Key.BACK): (Edit.OFF_INCLINATION, None),
    (Place.INCLINATION_POINT, Key.DIGIT): (Edit.TO_INCLINATION, Place.TENTH),
    (Place.INCLINATION_POINT, Key.BACK): (Edit.OFF_INCLINATION, None),
    (Place.TENTH, Key.BACK): (Edit.OFF_INCLINATION, None),
    (Place.LOADED, Key.DIGIT): (Edit.START, Place.AZIMUTH_1),
    (Place.LOADED, Key.BACK): (Edit.OFF_INCLINATION, None),
    **{(place, Key.CLEAR): (Edit.WIPE, Place.EMPTY) for place in Place},
}


_WHOLE = re.compile(r"\d{3}(\.\d)?/\d{2}(\.\d)?", re.ASCII)
_TYPED = re.compile(r"\d{0,2}/|\d{3}(\.\d?)?/|\d{3}(\.\d)?/(\d|\d{2}(\.\d?)?)", re.ASCII)


@dataclass(frozen=True, slots=True)
class Digits:
    """The digits of one entry: azimuth and inclination as typed, and where the next key lands."""

    azimuth: str = ""
    inclination: str = ""
    place: Place = Place.EMPTY

    def pressed(self, key: Key, digit: str = "") -> Digits:
        """Give the digits after a key; the same record where the table has no entry for it."""
        if (self.place, key) == (Place.MOVED_ON, Key.POINT) and "." in self.azimuth:
            return self  # the azimuth has its decimal already
        step = TABLE.get((self.place, key))
        if step is None:
            return self
        edit, place = step
        changed = _edited(self, edit, digit)
        return replace(changed, place=_place_of(changed) if place is None else place)

    @classmethod
    def loaded(cls, azimuth: str, inclination: str) -> Digits:
        """Digits filled in by the sensors or from a reading being mended."""
        return cls(azimuth, inclination, Place.LOADED)

    @classmethod
    def stored(cls, azimuth: str, inclination: str, place: Place) -> Digits:
        """Digits as they were stored; raises ValueError for what no keys and no filling in can have made."""
        digits = cls(azimuth, inclination, place)
        whole = bool(_WHOLE.fullmatch(f"{azimuth}/{inclination}"))
        typed = bool(_TYPED.fullmatch(f"{azimuth}/{inclination}"))
        if not (whole if place is Place.LOADED else typed and _place_of(digits) is place):
            raise ValueError(f"{digits} cannot have been typed")
        return digits

    @property
    def whole(self) -> bool:
        """Whether both parts are there, so that the entry says an attitude."""
        return self.place in (Place.WHOLE, Place.TENTH, Place.LOADED, Place.INCLINATION_POINT)

    @property
    def azimuth_whole(self) -> bool:
        """Whether the azimuth is there."""
        return self.whole or self.place in (Place.MOVED_ON, Place.INCLINATION_1)

    @property
    def in_inclination(self) -> bool:
        """Whether the next digit lands in the inclination (else in the azimuth)."""
        return self.azimuth_whole and self.place is not Place.LOADED


def _edited(digits: Digits, edit: Edit, digit: str) -> Digits:
    azimuth, inclination = digits.azimuth, digits.inclination
    match edit:
        case Edit.TO_AZIMUTH:
            azimuth += digit
        case Edit.TO_INCLINATION:
            inclination += digit
        case Edit.POINT_AZIMUTH:
            azimuth = azimuth.zfill(AZIMUTH_DIGITS) + "."
        case Edit.POINT_INCLINATION:
            inclination = inclination.zfill(INCLINATION_DIGITS) + "."
        case Edit.OFF_AZIMUTH:
            azimuth = azimuth[:-1]
        case Edit.OFF_INCLINATION:
            inclination = inclination[:-1]
        case Edit.START:
            azimuth, inclination = digit, ""
        case Edit.WIPE:
            azimuth, inclination = "", ""
    return replace(digits, azimuth=azimuth, inclination=inclination)


def _place_of(digits: Digits) -> Place:
    """Tell the place from the text alone, as it is after Back."""
    if digits.inclination:
        whole, _, tenth = digits.inclination.partition(".")
        if tenth:
            return Place.TENTH
        if digits.inclination.endswith("."):
            return Place.INCLINATION_POINT
        return Place.WHOLE if len(whole) == INCLINATION_DIGITS else Place.INCLINATION_1
    if digits.azimuth.endswith("."):
        return Place.AZIMUTH_POINT
    signs = len(digits.azimuth)
    return {0: Place.EMPTY, 1: Place.AZIMUTH_1, 2: Place.AZIMUTH_2}.get(signs, Place.MOVED_ON)
