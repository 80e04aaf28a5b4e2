from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldapp.draft import TABLE, Digits, Edit, Key, Place


def after(keys: str, start: Digits | None = None) -> Digits:
    digits = start or Digits()
    for sign in keys:
        match sign:
            case ".":
                digits = digits.pressed(Key.POINT)
            case "<":
                digits = digits.pressed(Key.BACK)
            case "C":
                digits = digits.pressed(Key.CLEAR)
            case _:
                digits = digits.pressed(Key.DIGIT, sign)
    return digits


@pytest.mark.parametrize(
    ("keys", "azimuth", "inclination", "place"),
    [
        ("", "", "", Place.EMPTY),
        ("0", "0", "", Place.AZIMUTH_1),
        ("04", "04", "", Place.AZIMUTH_2),
        ("045", "045", "", Place.MOVED_ON),
        ("0453", "045", "3", Place.INCLINATION_1),
        ("04530", "045", "30", Place.WHOLE),
        ("045307", "045", "30", Place.WHOLE),
        ("045.", "045.", "", Place.AZIMUTH_POINT),
        ("045.5", "045.5", "", Place.MOVED_ON),
        ("045.5.", "045.5", "", Place.MOVED_ON),
        ("045.530", "045.5", "30", Place.WHOLE),
        ("04530.2", "045", "30.2", Place.TENTH),
        ("04530.25", "045", "30.2", Place.TENTH),
        ("45.", "045.", "", Place.AZIMUTH_POINT),
        ("0455.", "045", "05.", Place.INCLINATION_POINT),
        (".", "", "", Place.EMPTY),
        ("04530<", "045", "3", Place.INCLINATION_1),
        ("04530<<", "045", "", Place.MOVED_ON),
        ("04530<<<", "04", "", Place.AZIMUTH_2),
        ("04530<<<<<<<", "", "", Place.EMPTY),
        ("045.5<", "045.", "", Place.AZIMUTH_POINT),
        ("045.<", "045", "", Place.MOVED_ON),
        ("04530.2<<", "045", "30", Place.WHOLE),
        ("04530C", "", "", Place.EMPTY),
    ],
)
def test_keys_lead_to_text_and_place(keys, azimuth, inclination, place):
    """Three digits, then two, moving on by itself; decimals are optional and keys that fit nowhere do nothing."""
    assert after(keys) == Digits(azimuth, inclination, place)


def test_every_place_is_reached_and_left():
    """The table names every place as a beginning, and Clear and Back lead out of each that holds text."""
    assert {place for place, _ in TABLE} == set(Place)
    for place in Place:
        assert TABLE[place, Key.CLEAR] == (Edit.WIPE, Place.EMPTY)
        assert place is Place.EMPTY or (place, Key.BACK) in TABLE


def test_loaded_draft_starts_anew_with_a_digit_and_is_mended_with_back():
    """A filled draft gives way to the first digit typed; Back goes on from its last digit."""
    loaded = Digits.loaded("045", "30")
    assert loaded.whole
    assert after("1", loaded) == Digits("1", "", Place.AZIMUTH_1)
    assert after("<5", loaded) == Digits("045", "35", Place.WHOLE)
    assert after("<.", Digits.loaded("045", "30.5")).inclination == "30."


@given(st.text(alphabet="0123456789.<C", max_size=40))
def test_any_keys_leave_a_place_that_agrees_with_the_text(keys):
    """Whatever is pressed, the text keeps its form and says whole exactly when both parts are there."""
    digits = after(keys)
    assert re.fullmatch(r"\d{0,3}|\d{3}\.\d?", digits.azimuth)
    assert re.fullmatch(r"\d{0,2}|\d{2}\.\d?", digits.inclination)
    assert digits.whole == bool(re.fullmatch(r"\d{2}(\.\d?)?", digits.inclination))
    assert digits.azimuth_whole == bool(digits.inclination or re.fullmatch(r"\d{3}(\.\d)?", digits.azimuth))


@given(st.text(alphabet="0123456789.", max_size=20))
def test_back_always_ends_at_the_empty_draft(keys):
    """Back, pressed once for each sign typed and once more, empties the draft."""
    digits = after(keys)
    signs = len(digits.azimuth) + len(digits.inclination)
    assert after("<" * (signs + 1), digits) == Digits()


@given(st.text(alphabet="0123456789.<C", max_size=20), st.booleans())
def test_whatever_was_typed_is_read_back_from_storage(keys, filled):
    """Digits that keys or filling in have made are taken as they were stored."""
    digits = after(keys, Digits.loaded("045.5", "30") if filled else None)
    assert Digits.stored(digits.azimuth, digits.inclination, digits.place) == digits


@given(
    st.text(alphabet="0123456789.-x", max_size=6),
    st.text(alphabet="0123456789.-x", max_size=5),
    st.sampled_from(Place),
)
def test_stored_digits_that_nobody_typed_are_refused_or_harmless(azimuth, inclination, place):
    """What a spoilt file says is refused unless it says whole exactly what is there."""
    try:
        digits = Digits.stored(azimuth, inclination, place)
    except ValueError:
        return
    assert digits.whole == bool(re.fullmatch(r"\d{2}(\.\d?)?", inclination))
    assert not digits.azimuth_whole or 0.0 <= float(azimuth.rstrip(".")) <= 999.9
    for key in Key:
        assert digits.pressed(key, "1") == Digits.stored(*_parts(digits.pressed(key, "1")))


def _parts(digits: Digits) -> tuple[str, str, Place]:
    return digits.azimuth, digits.inclination, digits.place
