"""Positions: limits, grids, averages, and the forms in which people type them."""

import math

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from analysis.errors import PositionError
from analysis.orient.position import (
    Position,
    average_fixes,
    from_mgrs,
    from_utm,
    to_mgrs,
    to_utm,
    with_source,
)
from analysis.orient.position_text import parse_position

PLACE = (55.9533, -3.1883)
on_grid = st.builds(Position, st.floats(-79.99, 83.99), st.floats(-180.0, 180.0))


def across_deg(one, other):
    """Difference of longitude the short way."""
    return (one.longitude_deg - other.longitude_deg + 180.0) % 360.0 - 180.0


@pytest.mark.parametrize(
    ("fields", "word"),
    [
        ((90.1, 0.0), "latitude"),
        ((-91.0, 0.0), "latitude"),
        ((math.nan, 0.0), "latitude"),
        ((0.0, 180.1), "longitude"),
        ((0.0, math.inf), "longitude"),
        ((0.0, 0.0, math.nan), "altitude"),
        ((0.0, 0.0, 0.0, -1.0), "accuracy"),
        ((0.0, 0.0, 0.0, math.inf), "accuracy"),
    ],
)
def test_an_impossible_position_cannot_be_made(fields, word):
    """Coordinates, altitude and accuracy outside what they may be are refused, by name."""
    with pytest.raises(PositionError) as caught:
        Position(*fields)
    assert caught.value.where == word


def test_the_edges_of_the_earth_are_positions():
    """Poles, the date line and zero are places; 180 becomes -180 and -0.0 becomes 0.0."""
    assert Position(90.0, 0.0).latitude_deg == 90.0
    assert Position(0.0, 180.0) == Position(0.0, -180.0)
    assert math.copysign(1.0, Position(-0.0, -0.0).latitude_deg) == 1.0


@given(on_grid)
@example(Position(-2.2e-47, 0.0))  # took the northern band with the southern half
@example(Position(-1e-9, 0.0))
def test_degrees_survive_the_grid(place):
    """Degrees to UTM and back are the same to 1e-8 degrees."""
    utm = to_utm(place)
    back = from_utm(utm.zone, utm.is_north, utm.easting_m, utm.northing_m)
    assert back.latitude_deg == pytest.approx(place.latitude_deg, abs=1e-8)
    assert across_deg(back, place) == pytest.approx(0.0, abs=1e-8)


@given(on_grid, st.integers(1, 5))
@example(Position(-79.984375, 0.0), 1)  # the middle of this square lies beyond the grid
@example(Position(83.99, 0.0), 1)
def test_a_grid_reference_holds_its_place(place, digits):
    """A grid reference leads back to the middle of a square that holds the place."""
    text = to_mgrs(place, digits)
    back = from_mgrs(text)
    assert back.accuracy_m == pytest.approx(10 ** (5 - digits) / math.sqrt(2))
    # 1% for the sphere on which distances are taken, and for the scale of the grid.
    assert back.distance_m(place) <= back.accuracy_m * 1.01


@pytest.mark.parametrize("latitude", [84.0, 89.0, -80.001, 90.0, -90.0])
def test_the_grid_ends_before_the_poles(latitude):
    """Outside 80 S to 84 N there is no grid position, and the message says to give degrees."""
    for ask in (to_utm, to_mgrs):
        with pytest.raises(PositionError, match="Give degrees"):
            ask(Position(latitude, 10.0))


@pytest.mark.parametrize(
    ("arguments", "word"),
    [
        ((0, True, 500000.0, 0.0), "zone"),
        ((61, True, 500000.0, 0.0), "zone"),
        ((30, True, 6200898.0, 488242.0), "easting"),
        ((30, True, math.nan, 0.0), "easting"),
        ((30, True, 500000.0, -1.0), "northing"),
        ((30, False, 500000.0, 10_000_001.0), "northing"),
        ((30, True, 500000.0, 9_390_000.0), "grid position"),
        ((30, False, 500000.0, 1_050_000.0), "grid position"),
    ],
)
def test_grid_positions_off_the_grid_are_refused(arguments, word):
    """A zone, easting or northing that the grid does not have is refused, by name."""
    with pytest.raises(PositionError) as caught:
        from_utm(*arguments)
    assert caught.value.where == word


def test_a_far_zone_is_refused():
    """A position is given in its own or a neighbouring zone, not in one half round the world."""
    assert to_utm(Position(*PLACE), zone=31).zone == 31
    for zone in (0, 33, 60, 61):
        with pytest.raises(PositionError, match="zone"):
            to_utm(Position(*PLACE), zone=zone)
    # Zones 60 and 1 are neighbours.
    assert to_utm(Position(-17.0, 179.9), zone=1).zone == 1


@pytest.mark.parametrize("digits", [0, 6])
def test_a_grid_reference_has_one_to_five_digits(digits):
    """Digits outside 1 to 5 are refused."""
    with pytest.raises(PositionError, match="1 to 5"):
        to_mgrs(Position(*PLACE), digits)


@pytest.mark.parametrize(
    "text",
    ["30UVH882", "30UVH", "30UVI8824100898", "99UVH8824100898", "30AVH8824100898", "30UZZ88241008", "VH88"],
)
def test_what_is_no_grid_reference_is_refused(text):
    """Odd figures, letters that do not occur and zones that do not exist raise PositionError."""
    with pytest.raises(PositionError):
        from_mgrs(text)


# Averages ----


def test_a_better_fix_counts_for_more():
    """Weights are 1/accuracy squared: a fix of 3 m counts nine times one of 9 m."""
    mean = average_fixes([Position(0.0, 0.0, 0.0, 3.0), Position(0.001, 0.0, 10.0, 9.0)])
    assert mean.position.latitude_deg == pytest.approx(0.0001, rel=1e-9)
    assert mean.position.altitude_m == pytest.approx(1.0)
    assert mean.fixes == 2


def test_a_mean_claims_no_more_than_its_fixes():
    """Ten like fixes are not better than one; fixes that lie apart are worse."""
    fix = Position(56.0, -4.0, None, 5.0, "gps")
    assert average_fixes([fix] * 10).position.accuracy_m == pytest.approx(5.0)
    assert average_fixes([fix] * 10).spread_m == pytest.approx(0.0, abs=1e-9)
    apart = average_fixes([fix, Position(56.001, -4.0, None, 5.0)])
    assert apart.position.accuracy_m == pytest.approx(apart.spread_m)
    assert apart.spread_m == pytest.approx(55.6, abs=0.1)  # half of 0.001 degrees of latitude
    assert apart.position.source == "gps"


def test_one_fix_is_its_own_mean_without_a_spread():
    """One fix comes back as it is, and has no spread."""
    fix = Position(-33.0, 18.0, 12.0, 4.0, "gps")
    mean = average_fixes([fix])
    assert (mean.fixes, mean.spread_m) == (1, None)
    assert mean.position.accuracy_m == pytest.approx(4.0)
    assert mean.position.distance_m(fix) == pytest.approx(0.0, abs=1e-6)


def test_fixes_of_unknown_accuracy_yield_to_known_ones():
    """A fix that says nothing of its accuracy counts only where none does."""
    known, unknown = Position(10.0, 10.0, None, 5.0), Position(11.0, 10.0)
    assert average_fixes([unknown, known]).position.latitude_deg == pytest.approx(10.0)
    mean = average_fixes([unknown, Position(11.002, 10.0)])
    assert mean.position.accuracy_m is None
    assert mean.position.latitude_deg == pytest.approx(11.001)


def test_no_fix_has_no_mean():
    """An average of nothing is refused."""
    with pytest.raises(PositionError, match="no fix"):
        average_fixes([])


@given(st.lists(st.tuples(st.floats(-1e-3, 1e-3), st.floats(-1e-3, 1e-3), st.floats(0.0, 50.0)), min_size=1))
def test_a_mean_lies_among_its_fixes(offsets):
    """A mean lies within the box of its fixes, beside the date line too."""
    fixes = [
        Position(50.0 + north, (180.0 + east + 180.0) % 360.0 - 180.0, None, accuracy)
        for north, east, accuracy in offsets
    ]
    mean = average_fixes(fixes).position
    north = [fix.latitude_deg for fix in fixes]
    east = [across_deg(fix, mean) for fix in fixes]
    assert min(north) - 1e-9 <= mean.latitude_deg <= max(north) + 1e-9
    assert min(east) - 1e-9 <= 0.0 <= max(east) + 1e-9


# Typed positions ----


@pytest.mark.parametrize(
    "text",
    [
        "55.9533, -3.1883",
        "55.9533 -3.1883",
        "55.9533N 3.1883W",
        "55.9533n3.1883w",
        "N55.9533 W3.1883",
        "3.1883W 55.9533N",
        "55,9533 -3,1883",
        "55,9533; -3,1883",
        "55,9533, -3,1883",
        "+55.9533 \N{MINUS SIGN}3.1883",
        "55 57.198 N, 3 11.298 W",
        "55 57.198 N 3 11.298 W",
        "55 57.198 -3 11.298",
        "55°57.198'N 3°11.298'W",
        "55° 57\N{PRIME} 11.88\N{DOUBLE PRIME} N, 3° 11\N{PRIME} 17.88\N{DOUBLE PRIME} W",
        "55°57'11.88''N 3°11'17.88''W",
        "55\N{NO-BREAK SPACE}57 11.88 N 3 11 17.88 W",
        "30U 488242 6200898",
        "30 U 488242E 6200898N",
        "30 north 488242 6200898",
        "30 N 488242 6200898",
        "30U 488241.99 6200898.03",
        "30UVH8824100898",
        "30U VH 88241 00898",
        "30uvh 88241 00898",
    ],
)
def test_every_way_to_write_a_place_is_the_same_place(text):
    """Degrees, minutes, UTM and grid references of one place are read as that place, by hand."""
    place = parse_position(text)
    assert place.distance_m(Position(*PLACE)) < 1.5
    assert place.source == "hand"


@pytest.mark.parametrize(
    ("text", "latitude", "longitude"),
    [
        ("0 0", 0.0, 0.0),
        ("-90 180", -90.0, -180.0),
        ("90N 0E", 90.0, 0.0),
        ("33 30 S 151 15 E", -33.5, 151.25),
        ("33 30 151 15", 33.5, 151.25),
        ("-0 30 -0 30", -0.5, -0.5),
        ("1,5 2,5", 1.5, 2.5),
        ("55,3", 55.0, 3.0),
        ("56 south 4 west", None, None),
    ],
)
def test_odd_but_clear_positions(text, latitude, longitude):
    """Zeros, poles, the date line and small negative angles are read; words that are no letters are not."""
    if latitude is None:
        with pytest.raises(PositionError):
            parse_position(text)
    else:
        place = parse_position(text)
        assert (place.latitude_deg, place.longitude_deg) == pytest.approx((latitude, longitude))


@pytest.mark.parametrize(
    "text",
    [
        "", "   ", "hello", "55", "55.9533", "95 3", "55 190", "55 61 N 3 2 W", "55 30 60 N 3 0 0 W",
        "55N 3N",
        "55E 3W", "30I 488242 6200898", "61U 488242 6200898", "30G 488242 6200898", "1 2 3 4 5 6 7",
        "30U 488242",
        "55..9 3", "N55N 3W", "--55 3", "nan nan", "inf 0", "5e1 3e0", "30UVH8824100", "'; DROP TABLE",
    ],
)  # fmt: skip
def test_what_is_no_position_is_refused_with_the_forms(text):
    """Text that is no position raises PositionError that says what was expected."""
    with pytest.raises(PositionError) as caught:
        parse_position(text)
    assert caught.value.expected


def test_a_zone_s_that_could_be_two_places_is_refused():
    """S is a band in the north as well as the southern half; where both fit, neither is guessed."""
    with pytest.raises(PositionError, match="'16 north' or '16 south'"):
        parse_position("16S 500000 3900000")
    assert parse_position("16 north 500000 3900000").latitude_deg > 30.0
    assert parse_position("16 south 500000 3900000").latitude_deg < -50.0
    # No band S there: the northing is that of the southern half.
    assert parse_position("34S 300000 6250000").latitude_deg == pytest.approx(-33.9, abs=0.1)


@given(st.floats(-90.0, 90.0), st.floats(-180.0, 179.9999))
def test_degrees_written_are_degrees_read(latitude, longitude):
    """Signed decimal degrees and degrees with minutes come back to the digits written."""
    place = parse_position(f"{latitude:.7f} {longitude:.7f}")
    assert place.latitude_deg == pytest.approx(latitude, abs=6e-8)
    assert across_deg(place, Position(0.0, longitude)) == pytest.approx(0.0, abs=6e-8)
    parts = []
    for value, letters in ((latitude, "NS"), (longitude, "EW")):
        ten_thousandths = round(abs(value) * 600_000)
        degrees, minutes = divmod(ten_thousandths, 600_000)
        parts.append(f"{degrees}°{minutes / 10_000:.4f}'{letters[value < 0]}")
    place = parse_position(" ".join(parts))
    assert place.latitude_deg == pytest.approx(latitude, abs=1e-6)
    assert across_deg(place, Position(0.0, longitude)) == pytest.approx(0.0, abs=1e-6)


@given(st.text(max_size=40))
def test_any_text_is_a_position_or_a_position_error(text):
    """No text crashes the reader."""
    try:
        place = parse_position(text)
    except PositionError:
        return
    assert isinstance(place, Position)


def test_a_source_can_be_named():
    """The same place with another source differs in nothing else."""
    place = with_source(Position(1.0, 2.0, 3.0, 4.0, "gps"), "hand")
    assert place == Position(1.0, 2.0, 3.0, 4.0, "hand")
