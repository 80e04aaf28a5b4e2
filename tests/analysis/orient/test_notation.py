"""Notations: what is read, what is refused and how the refusal teaches, and the way back."""

from __future__ import annotations

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from analysis.errors import AttitudeError, NotationError
from analysis.orient import notation as notations
from analysis.orient import vectors
from analysis.orient.attitudes import Line, Plane
from analysis.orient.notation import LineEntry, Notation, PlaneEntry, read, read_line, read_plane, write

SD = Notation.STRIKE_DIP
DD = Notation.DIP_DIRECTION_DIP
DIP_FIRST = Notation.DIP_DIP_DIRECTION
BEARING = Notation.QUADRANT_BEARING
TP = Notation.TREND_PLUNGE
PT = Notation.PLUNGE_TREND
PITCH_SD = Notation.PITCH_ON_STRIKE_DIP
PITCH_DD = Notation.PITCH_ON_DIP_DIRECTION_DIP
PITCHES = (PITCH_SD, PITCH_DD)
WRITTEN_LINES = tuple(notation for notation in notations.LINE_NOTATIONS if notation not in PITCHES)

PLANES = st.builds(Plane, st.floats(0.0, 360.0), st.floats(0.0, 90.0))
LINES = st.builds(Line, st.floats(0.0, 360.0), st.floats(0.0, 90.0))
# Half a unit of the last digit in each of two angles, and a little for the rounding of floats.
WORST_ROUNDING = 0.5 * 2**0.5 + 1e-9


@pytest.mark.parametrize(
    ("text", "notation", "plane", "quadrant"),
    [
        ("045/30 SE", SD, Plane(45, 30), "SE"),
        ("045/30", SD, Plane(45, 30), None),
        ("045/30SE", SD, Plane(45, 30), "SE"),
        ("045/30 se", SD, Plane(45, 30), "SE"),
        # A quadrant that contradicts the strike is for the entry check to find: it changes nothing here.
        ("225/30 SE", SD, Plane(225, 30), "SE"),
        ("000/00", SD, Plane(0, 0), None),
        ("360/90", SD, Plane(0, 90), None),
        ("045/5", SD, Plane(45, 5), None),
        ("  045 ° / 30 °  SE ", SD, Plane(45, 30), "SE"),
        ("045º/30˚", SD, Plane(45, 30), None),
        ("045\u00a0/\u202f30", SD, Plane(45, 30), None),
        ("045\u221530", SD, Plane(45, 30), None),
        ("045.5/30.25", SD, Plane(45.5, 30.25), None),
        ("045,5/30,25", SD, Plane(45.5, 30.25), None),
        ("135->30", DD, Plane(45, 30), None),
        ("135 -> 30", DD, Plane(45, 30), None),
        ("135→30", DD, Plane(45, 30), None),
        ("135⇒30", DD, Plane(45, 30), None),
        ("135-->30", DD, Plane(45, 30), None),
        ("135\u2013>30", DD, Plane(45, 30), None),
        ("135/30", DD, Plane(45, 30), None),
        ("135/30 SE", DD, Plane(45, 30), "SE"),
        ("000->30", DD, Plane(270, 30), None),
        ("360->30", DD, Plane(270, 30), None),
        ("30->135", DIP_FIRST, Plane(45, 30), None),
        ("30/135", DIP_FIRST, Plane(45, 30), None),
        ("30->045", DIP_FIRST, Plane(315, 30), None),
        ("N45E 30SE", BEARING, Plane(45, 30), "SE"),
        ("S45W/30SE", BEARING, Plane(45, 30), "SE"),
        ("N45E 30NW", BEARING, Plane(225, 30), "NW"),
        ("S45W 30 NW", BEARING, Plane(225, 30), "NW"),
        ("n45°e, 30°se".replace(",", ""), BEARING, Plane(45, 30), "SE"),
        ("N30W 60SW", BEARING, Plane(150, 60), "SW"),
        ("N30W 60NE", BEARING, Plane(330, 60), "NE"),
        ("S30E 60NE", BEARING, Plane(330, 60), "NE"),
        ("N0E 20E", BEARING, Plane(0, 20), "E"),
        ("N0W 20W", BEARING, Plane(180, 20), "W"),
        ("N90E 20S", BEARING, Plane(90, 20), "S"),
        ("S90W 20N", BEARING, Plane(270, 20), "N"),
        # Quarters of the compass as many write them: the side up to 45 degrees off the dip direction.
        ("N1E 30SE", BEARING, Plane(1, 30), "SE"),
        ("N1E 30NE", BEARING, Plane(1, 30), "NE"),
        ("N45E 90", BEARING, Plane(45, 90), None),
        ("N45W 00", BEARING, Plane(315, 0), None),
    ],
)
def test_planes_are_read_in_the_notation_of_their_field(text, notation, plane, quadrant):
    assert read(text, notation) == read_plane(text, notation) == PlaneEntry(plane, quadrant)


@pytest.mark.parametrize(
    ("text", "notation", "line"),
    [
        ("060/25", TP, Line(60, 25)),
        ("360/00", TP, Line(0, 0)),
        ("060.5°/25.5°", TP, Line(60.5, 25.5)),
        ("25->060", PT, Line(60, 25)),
        ("25→060", PT, Line(60, 25)),
        ("25/060", PT, Line(60, 25)),
        ("90->000", PT, Line(0, 90)),
        ("5->005", PT, Line(5, 5)),
    ],
)
def test_lines_are_read_in_the_notation_of_their_field(text, notation, line):
    assert read(text, notation) == read_line(text, notation) == LineEntry(line)


@pytest.mark.parametrize(
    ("text", "notation", "plane", "trend", "plunge"),
    [
        # Pitch 40 from the north end in a plane dipping 60 towards 090: 022.760/33.826 (see test_geometry).
        ("40N on 090/60", PITCH_DD, Plane(0, 60), 22.760, 33.826),
        ("40° N on 090→60", PITCH_DD, Plane(0, 60), 22.760, 33.826),
        ("40S on 090/60", PITCH_DD, Plane(0, 60), 157.240, 33.826),
        ("40E on 090/60", PITCH_SD, Plane(90, 60), 112.760, 33.826),
        ("40 w ON 090/60 S", PITCH_SD, Plane(90, 60), 247.240, 33.826),
        ("0E on 090/60", PITCH_SD, Plane(90, 60), 90, 0),
        ("90E on 090/60", PITCH_SD, Plane(90, 60), 180, 60),
        ("30E on 090/00", PITCH_SD, Plane(90, 0), 120, 0),
        ("30E on 090/90", PITCH_SD, Plane(90, 90), 90, 30),
    ],
)
def test_a_pitch_is_measured_from_the_end_that_is_named(text, notation, plane, trend, plunge):
    entry = read_line(text, notation)
    assert entry.on_plane == plane
    assert vectors.axis_angle_deg(entry.line.vector, vectors.line_vector(trend, plunge)) < 1e-3


@pytest.mark.parametrize(
    ("text", "notation", "teaches"),
    [
        ("45/30", SD, r"Write 045/30 if 45 is the strike, 030/45 if 30 is the strike"),
        ("30/45", DIP_FIRST, r"Write 45->030 if 30 is the dip direction, 30->045 if 45 is"),
        ("95/30", SD, r"Write 095/30 if 95 is the strike\.$"),
        ("30->45", DIP_FIRST, r"30->045 if 45"),
        ("45,5->30", DD, r"Write 045,5->30 if 45,5"),
        ("45->30", PT, r"45->030"),
        ("30/135", SD, r"Write 135/30 if 135 is the strike and 045/30 if it is the dip direction"),
        ("30->135", SD, r"set the notation of the field"),
        ("30/135", DD, r"Write 135->30"),
        ("135->30", DIP_FIRST, r"Write 30->135"),
        ("045->30", SD, r"An arrow stands for the dip direction. Write 045/30"),
        ("060->25", TP, r"An arrow stands for plunge -> trend. Write 060/25"),
        ("060->25", PT, r"Write 25->060 if 060 is the trend"),
        ("25->060", TP, r"Write 060/25 if 060 is the trend"),
        ("25->060 NE", PT, r"leave the letters out"),
        ("045/030", SD, r"Write the dip with two digits"),
        ("045 30", SD, r"strike then dip, as 045/30"),
        ("045", SD, r"is not two numbers"),
        ("045,30", SD, r"is not two numbers"),
        ("", SD, r"an empty field"),
        ("   ", TP, r"an empty field"),
        ("-45/30", SD, r"three digits"),
        ("0450/30", SD, r"three digits"),
        ("045/30/10", SD, r"three digits"),
        # A one-half sign must not become two numbers.
        ("04½/30", SD, r"three digits"),
        ("045/30 SX", SD, r"N NE E SE S SW W NW"),
        ("045/30 ESE", SD, r"N NE E SE S SW W NW"),
        ("nan/30", SD, r"three digits"),
        ("N45E 30NE", BEARING, r"along its strike; expected dip to the SE or NW"),
        ("N45E 30SW", BEARING, r"Check the strike and the side"),
        ("N0E 30N", BEARING, r"dip to the E or W"),
        ("N45E 30", BEARING, r"as N45E 30SE. Only a horizontal or vertical"),
        ("N95E 30S", BEARING, r"0 to 90 degrees from N or S"),
        ("E45N 30SE", BEARING, r"as N45E 30SE"),
        ("045/30", BEARING, r"as N45E 30SE"),
        ("N45E 30XY", BEARING, r"N NE E SE S SW W NW"),
        ("40N on 090/60", PITCH_SD, r"expected E or W. If the first number of the plane is no strike, set"),
        ("40E on 090/60", PITCH_DD, r"expected N or S"),
        ("40 on 090/60", PITCH_SD, r"expected 40E or 40W before 'on'"),
        ("140E on 090/60", PITCH_SD, r"Measure from the other end"),
        ("40Q on 090/60", PITCH_SD, r"'Q' is no end of a strike"),
        ("40E 090/60", PITCH_SD, r"'on' and the plane"),
        ("40E on 90/60", PITCH_SD, r"Write 090/60"),
        ("40E on ", PITCH_SD, r"'on' and the plane"),
    ],
)
def test_what_is_nothing_or_could_be_two_things_is_refused_with_advice(text, notation, teaches):
    with pytest.raises(NotationError) as caught:
        read(text, notation)
    assert caught.match(teaches)
    assert caught.value.where
    assert caught.value.expected


@pytest.mark.parametrize(
    ("text", "notation", "field"),
    [
        ("400/30", SD, "strike"),
        ("361/30", SD, "strike"),
        ("045/91", SD, "dip"),
        ("400->30", DD, "dip direction"),
        ("91->060", PT, "plunge"),
        ("400/25", TP, "trend"),
        ("N45E 91SE", BEARING, "dip"),
        ("40E on 090/95", PITCH_SD, "dip"),
    ],
)
def test_a_number_outside_its_range_is_refused_by_the_name_of_its_field(text, notation, field):
    with pytest.raises(AttitudeError) as caught:
        read(text, notation)
    assert caught.value.where == field


def test_the_same_digits_are_two_attitudes_in_two_notations_and_never_guessed():
    assert read_plane("135/30", SD).plane == Plane(135, 30)
    assert read_plane("135/30", DD).plane == Plane(45, 30)
    assert read_line("135/30", TP).line == Line(135, 30)


@pytest.mark.parametrize("notation", list(Notation))
def test_every_notation_reads_its_own_example_and_says_its_name_in_settings(notation):
    entry = read(notation.example, notation)
    assert isinstance(entry, PlaneEntry if notation.is_plane else LineEntry)
    assert Notation(str(notation)) is notation


def test_notations_of_lines_read_no_planes_and_the_other_way_round():
    with pytest.raises(NotationError, match="a notation for planes"):
        read_plane("060/25", TP)
    with pytest.raises(NotationError, match="a notation for lines"):
        read_line("045/30", SD)


@pytest.mark.parametrize(
    ("attitude", "notation", "text"),
    [
        (Plane(45, 30), SD, "045/30"),
        (Plane(5, 3), SD, "005/03"),
        (Plane(45, 30), DD, "135->30"),
        (Plane(45, 30), DIP_FIRST, "30->135"),
        (Plane(270, 30), DD, "000->30"),
        (Plane(45, 30), BEARING, "N45E 30SE"),
        (Plane(225, 30), BEARING, "N45E 30NW"),
        (Plane(150, 60), BEARING, "N30W 60SW"),
        (Plane(0, 20), BEARING, "N00E 20E"),
        (Plane(45, 90), BEARING, "N45E 90"),
        (Plane(45, 0), BEARING, "N45E 00"),
        (Line(60, 25), TP, "060/25"),
        (Line(60, 25), PT, "25->060"),
        # What rounds to 360 is north.
        (Plane(359.6, 30), SD, "000/30"),
        (Line(359.7, 0.4), TP, "000/00"),
        (Plane(45, 89.6), SD, "045/90"),
    ],
)
def test_written_azimuths_have_three_digits_and_inclinations_two(attitude, notation, text):
    assert write(attitude, notation) == text


@pytest.mark.parametrize(
    ("azimuth", "text"), [(359.94, "359.9"), (359.96, "000.0"), (0.04, "000.0"), (7, "007.0")]
)
def test_decimals_stand_behind_the_three_digits(azimuth, text):
    assert notations.azimuth_text(azimuth, 1) == text


@given(PLANES, st.sampled_from(notations.PLANE_NOTATIONS), st.integers(0, 6))
def test_a_plane_comes_back_as_it_was_written(plane, notation, decimals):
    back = read_plane(write(plane, notation, decimals=decimals), notation).plane
    assert back.angle_deg(plane) <= WORST_ROUNDING * 10.0**-decimals
    if 1.0 < plane.dip_deg < 89.0:
        # Not only the same plane but dipping the same way.
        assert (
            abs((back.strike_deg - plane.strike_deg + 180.0) % 360.0 - 180.0) <= 0.5000001 * 10.0**-decimals
        )


@given(LINES, st.sampled_from(WRITTEN_LINES), st.integers(0, 6))
def test_a_line_comes_back_as_it_was_written(line, notation, decimals):
    back = read_line(write(line, notation, decimals=decimals), notation).line
    assert back.angle_deg(line) <= WORST_ROUNDING * 10.0**-decimals


@given(PLANES, st.floats(0.0, 180.0), st.sampled_from(PITCHES))
def test_a_pitch_comes_back_as_it_was_written(plane, pitch, notation):
    line = plane.line_at_pitch(pitch)
    back = read_line(notations.write_pitch(line, plane, notation, decimals=6), notation)
    assert back.on_plane is not None
    assert back.line.angle_deg(line) < 1e-5


@given(st.text(alphabet="0123456789/-> .,NESWon°→½", max_size=14), st.sampled_from(list(Notation)))
def test_any_text_is_either_read_or_refused_with_a_typed_error(text, notation):
    try:
        entry = read(text, notation)
    except AttitudeError:
        return
    assert isinstance(entry, PlaneEntry if notation.is_plane else LineEntry)


@given(st.integers(0, 360), st.integers(0, 90), st.sampled_from([SD, DD, DIP_FIRST, TP, PT]))
def test_signs_that_mean_the_same_are_read_the_same(azimuth, inclination, notation):
    attitude = Plane(azimuth, inclination) if notation.is_plane else Line(azimuth, inclination)
    text = write(attitude, notation)
    ornate = " " + text.replace("->", " → ").replace("/", "° / ") + "° "
    assert read(ornate, notation) == read(text, notation)


@given(st.integers(0, 99), st.integers(0, 99), st.sampled_from(["/", "->"]), st.sampled_from(list(Notation)))
def test_two_short_numbers_are_refused_in_every_notation(first, second, separator, notation):
    with pytest.raises(NotationError):
        read(f"{first}{separator}{second}", notation)


@pytest.mark.parametrize("notation", [SD, BEARING, PITCH_SD])
def test_a_line_is_not_written_as_a_plane_nor_as_a_pitch_without_its_plane(notation):
    with pytest.raises(NotationError, match="cannot be written"):
        write(Line(60, 25), notation)


def test_a_plane_is_not_written_as_a_line():
    with pytest.raises(NotationError, match="a notation for a plane"):
        write(Plane(60, 25), TP)


def test_a_pitch_is_written_only_on_a_plane_that_holds_the_line():
    with pytest.raises(AttitudeError, match="out of the plane"):
        notations.write_pitch(Line(60, 25), Plane(60, 25), PITCH_SD)
    with pytest.raises(NotationError, match="no notation of a pitch"):
        notations.write_pitch(Line(60, 0), Plane(60, 25), TP)


@given(PLANES)
def test_the_quadrant_of_a_bearing_decides_the_end_of_the_strike(plane):
    assume(1.0 < plane.dip_deg < 89.0)
    north_end = write(plane, BEARING, decimals=3)
    swapped = {"N": "S", "E": "W", "W": "E"}
    bearing, dip = north_end.split(" ")
    south_end = f"{swapped[bearing[0]]}{bearing[1:-1]}{swapped[bearing[-1]]} {dip}"
    from_north, from_south = (read_plane(text, BEARING).plane for text in (north_end, south_end))
    turned = abs((from_north.strike_deg - from_south.strike_deg + 180.0) % 360.0 - 180.0)
    assert turned < 1e-9
    assert from_north.dip_deg == from_south.dip_deg
