"""Checks of one entry: when each speaks, what it says, what it offers, and how seldom it is wrong."""

from __future__ import annotations

import math

import numpy as np
import pytest

from analysis.orient import entrychecks, vectors
from analysis.orient.attitudes import Line, Plane
from analysis.orient.entrychecks import EntryCheck
from analysis.orient.features import Feature
from analysis.orient.notation import Notation

BED = Plane(45, 30)
STEEP = Plane(30, 80)


def jittered(rng, axes, sd_deg):
    """Axes (n, 3) turned by a normal error of sd_deg in each direction across them."""
    turned = rng.normal(0.0, np.radians(sd_deg), axes.shape)
    turned -= axes * np.sum(axes * turned, axis=1, keepdims=True)
    return vectors.unit(axes + turned)


def upright_fold(rng, limb_dip_deg, count, sd_deg=5.0):
    """Bedding poles (n, 3) of a horizontal north-south fold, limbs in random order."""
    east = (rng.random(count) < 0.5)[:, np.newaxis]
    limbs = np.where(east, vectors.pole_vector(0.0, limb_dip_deg), vectors.pole_vector(180.0, limb_dip_deg))
    return jittered(rng, limbs, sd_deg)


# --- the dip quadrant ---


def test_a_reversed_strike_is_offered_the_right_way_round():
    warning = entrychecks.check_quadrant(Plane(225, 30), "SE")
    assert warning.check is EntryCheck.REVERSED_STRIKE
    assert warning.mend == BED
    assert warning.message == "225/30 dips NW, not SE: use 045/30?"


def test_the_mend_is_written_as_the_user_writes():
    warning = entrychecks.check_quadrant(Plane(225, 30), "SE", notation=Notation.DIP_DIRECTION_DIP)
    assert warning.message == "315->30 dips NW, not SE: use 135->30?"


def test_a_quadrant_along_the_strike_fits_neither_side_and_has_no_mend():
    warning = entrychecks.check_quadrant(BED, "ne")
    assert warning.check is EntryCheck.QUADRANT_MISFIT
    assert warning.mend is None
    assert warning.message == "045/30 dips SE; NE lies along its strike. Read it again?"


@pytest.mark.parametrize("quadrant", ["SE", "E", "S"])
def test_a_quadrant_that_fits_says_nothing(quadrant):
    assert entrychecks.check_quadrant(BED, quadrant) is None


# --- the neighbours ---


def test_the_neighbours_offer_the_reversed_strike():
    neighbours = np.array([Plane(strike, 30).pole for strike in (43, 44, 45, 46, 47)])
    warning = entrychecks.check_neighbours(Plane(225, 30), neighbours)
    assert warning == entrychecks.EntryWarning(
        EntryCheck.REVERSED_STRIKE, "The others here dip SE: use 045/30?", BED
    )
    assert entrychecks.check_neighbours(BED, neighbours) is None


def test_where_a_quadrant_was_tapped_the_neighbours_are_not_asked():
    neighbours = np.array([Plane(strike, 30).pole for strike in (43, 44, 45, 46, 47)])
    entry = Plane(225, 30)
    assert entrychecks.check_plane(entry, Feature.BEDDING, quadrant="NW", neighbours=neighbours) == ()
    (warning,) = entrychecks.check_plane(entry, Feature.BEDDING, neighbours=neighbours)
    assert warning.check is EntryCheck.REVERSED_STRIKE


# --- flat planes ---


@pytest.mark.parametrize(("dip", "sd"), [(30, 6.0), (90, 3.0), (5, 34.42), (9.99, 17.29)])
def test_the_strike_scatters_by_the_pole_scatter_over_the_sine_of_the_dip(dip, sd):
    # 3/sin(dip): Cruden & Charlesworth (1976), cited from memory.
    assert entrychecks.strike_sd_deg(dip, 3.0) == pytest.approx(sd, abs=0.005)


def test_the_strike_scatter_is_what_a_simulation_gives():
    poles = jittered(np.random.default_rng(3), np.tile(vectors.pole_vector(90.0, 20.0), (4000, 1)), 1.0)
    seen = float(np.std(vectors.strike_dip_deg(poles)[0]))
    assert seen == pytest.approx(entrychecks.strike_sd_deg(20.0, 1.0), rel=0.05)


@pytest.mark.parametrize(
    ("dip", "message"),
    [
        (9.9, "Nearly flat: the strike is good to ±17° only."),
        (5, "Nearly flat: the strike is good to ±34° only."),
        (1, "Nearly horizontal: the strike means nothing."),
        (0, "Nearly horizontal: the strike means nothing."),
    ],
)
def test_below_a_dip_of_10_the_strike_is_said_to_be_loose(dip, message):
    warning = entrychecks.check_flat(Plane(45, dip))
    assert (warning.check, warning.message, warning.mend) == (EntryCheck.FLAT_PLANE, message, None)


def test_from_a_dip_of_10_nothing_is_said():
    assert entrychecks.check_flat(Plane(45, 10)) is None


def test_a_horizontal_plane_scatters_in_strike_without_bound():
    assert entrychecks.strike_sd_deg(0.0) == math.inf


# --- lines in planes ---


def test_a_line_in_its_plane_says_nothing():
    for pitch in (0, 30, 90, 150):
        assert entrychecks.check_line_in_plane(BED.line_at_pitch(pitch), BED, "bedding") is None


def test_a_line_off_its_plane_beyond_three_sigmas_is_asked_about():
    # 3 sqrt(3^2 + 3^2) = 12.73 degrees.
    down_dip = BED.line_at_pitch(90)
    inside, outside = (Line(down_dip.trend_deg, down_dip.plunge_deg + off) for off in (12.7, 12.8))
    assert entrychecks.check_line_in_plane(inside, BED, "bedding") is None
    warning = entrychecks.check_line_in_plane(outside, BED, "bedding")
    assert warning.check is EntryCheck.LINE_OFF_PLANE
    assert warning.message == "The line lies 13° off the bedding. Read it again?"
    assert warning.mend is None


def test_larger_scatters_allow_more():
    line = Line(135, 45)
    assert entrychecks.check_line_in_plane(line, BED, "bedding") is not None
    assert entrychecks.check_line_in_plane(line, BED, "bedding", line_sd_deg=4, pole_sd_deg=4) is None


def test_a_trend_read_from_the_wrong_end_is_offered_turned():
    warning = entrychecks.check_line_in_plane(Line(315, 30), BED, "bedding")
    assert warning.mend == Line(135, 30)
    assert warning.message == "The line lies 60° off the bedding: use 135/30?"


@pytest.mark.parametrize(
    "notation", [Notation.PITCH_ON_STRIKE_DIP, Notation.TREND_PLUNGE, Notation.STRIKE_DIP]
)
def test_what_is_no_notation_of_a_plain_line_falls_back_to_trend_and_plunge(notation):
    warning = entrychecks.check_line_in_plane(Line(315, 30), BED, "bedding", notation=notation)
    assert warning.message.endswith("use 135/30?")


@pytest.mark.parametrize(
    ("plunge", "speaks"), [(29, False), (30, False), (31, False), (31.1, True), (35, True)]
)
def test_a_plunge_over_the_dip_is_said_beyond_a_whole_degree(plunge, speaks):
    warning = entrychecks.check_plunge(Line(135, plunge), BED, "bedding")
    assert (warning is not None) is speaks


def test_the_plunge_check_names_both_numbers():
    warning = entrychecks.check_plunge(Line(135, 35), BED, "bedding")
    assert warning.check is EntryCheck.PLUNGE_OVER_DIP
    assert warning.message == "Plunge 35° cannot exceed the dip 30° of the bedding."


# --- computed against measured ---


def test_the_computed_line_itself_says_nothing():
    assert entrychecks.check_computed(BED.intersection(STEEP), BED, STEEP) is None


def test_a_measured_line_far_from_the_computed_one_is_told_by_how_much():
    computed = BED.intersection(STEEP)
    measured = BED.line_at_pitch(BED.pitch_deg(computed) - 40)
    warning = entrychecks.check_computed(measured, BED, STEEP)
    assert warning.check is EntryCheck.COMPUTED_OFF_MEASURED
    assert "lies 40° from" in warning.message


def test_planes_that_nearly_coincide_fix_no_line():
    assert entrychecks.check_computed(Line(100, 25), Plane(45, 30), Plane(46, 30)) is None
    assert entrychecks.check_computed(Line(100, 25), BED, BED) is None


def test_a_small_dihedral_angle_allows_more_along_the_planes():
    # 25 degrees along the bed: beyond doubt at a dihedral angle of 60, not at 8.
    for cleavage, speaks in ((Plane(45, 90), True), (Plane(45, 38), False)):
        computed = BED.intersection(cleavage)
        measured = BED.line_at_pitch(BED.pitch_deg(computed) + 25)
        assert (entrychecks.check_computed(measured, BED, cleavage) is not None) is speaks


def test_good_lines_are_seldom_questioned():
    """Planes and line with 3 degrees of noise each: a false alarm in at most 1% of the checks."""
    rng = np.random.default_rng(4)
    alarms = checks = 0
    for _ in range(1000):
        planes = [
            Plane(rng.uniform(0, 360), rng.uniform(15, 75)),
            Plane(rng.uniform(0, 360), rng.uniform(60, 90)),
        ]
        if planes[0].angle_deg(planes[1]) < 15.0:
            continue
        checks += 3
        line = planes[0].intersection(planes[1])
        bed, cleavage = (Plane.from_pole(jittered(rng, p.pole[None], 3.0)[0]) for p in planes)
        read = Line.from_vector(jittered(rng, line.vector[None], 3.0)[0])
        alarms += entrychecks.check_line_in_plane(read, bed, "bedding") is not None
        alarms += entrychecks.check_line_in_plane(read, cleavage, "cleavage") is not None
        alarms += entrychecks.check_computed(read, bed, cleavage) is not None
    assert checks > 2500
    assert alarms / checks <= 0.01


# --- outliers ---


@pytest.mark.parametrize("feature", list(Feature))
@pytest.mark.parametrize("n", [0, 1, 5])
def test_fewer_than_six_readings_make_no_outlier(feature, n):
    others = np.tile([1.0, 0.0, 0.0], (n, 1))
    assert entrychecks.check_outlier(np.array([0.0, 1.0, 0.0]), others, feature) is None


@pytest.mark.parametrize("feature", list(Feature))
def test_identical_readings_are_no_outliers_of_each_other(feature):
    others = np.tile(vectors.line_vector(40.0, 20.0), (8, 1))
    assert entrychecks.check_outlier(-others[0], others, feature) is None


def test_a_bed_off_the_girdle_asks_for_a_second_reading():
    poles = upright_fold(np.random.default_rng(5), 50.0, 20)
    # The pole of a bed dipping 40 northwards lies 40 degrees out of the east-west girdle.
    warning = entrychecks.check_outlier(Plane(270, 40).pole, poles, Feature.BEDDING)
    assert warning.check is EntryCheck.OUTLIER
    assert warning.mend is None
    assert warning.message.endswith("off the girdle of the bedding: take a second reading?")


def test_the_first_bed_of_the_other_limb_is_no_outlier():
    rng = np.random.default_rng(6)
    for _ in range(100):
        one_limb = jittered(rng, np.tile(vectors.pole_vector(0.0, 50.0), (12, 1)), 5.0)
        assert entrychecks.check_outlier(vectors.pole_vector(180.0, 50.0), one_limb, Feature.BEDDING) is None


def test_a_girdle_known_from_one_limb_only_does_not_judge_the_other():
    """Dips of 25 to 65 on one limb draw a girdle whose axis still wavers: 1 alarm in 100 at most."""
    rng = np.random.default_rng(10)
    alarms = 0
    for _ in range(300):
        one_limb = jittered(rng, vectors.pole_vector(0.0, rng.uniform(25.0, 65.0, 15)), 5.0)
        entry = jittered(rng, vectors.pole_vector(180.0, 50.0)[np.newaxis], 5.0)[0]
        alarms += entrychecks.check_outlier(entry, one_limb, Feature.BEDDING) is not None
    assert alarms <= 3


@pytest.mark.parametrize(
    ("feature", "words"),
    [
        (Feature.CLEAVAGE, "mean cleavage"),
        (Feature.INTERSECTION, "mean intersection"),
        (Feature.HINGE, "mean hinge"),
    ],
)
def test_a_reading_far_from_the_mean_asks_for_a_second_one(feature, words):
    others = jittered(np.random.default_rng(7), np.tile(vectors.line_vector(40.0, 20.0), (15, 1)), 4.0)
    warning = entrychecks.check_outlier(vectors.line_vector(80.0, 20.0), others, feature)
    assert words in warning.message
    assert entrychecks.check_outlier(-vectors.line_vector(42.0, 19.0), others, feature) is None


def test_past_outliers_do_not_hide_new_ones():
    rng = np.random.default_rng(8)
    others = jittered(rng, np.tile(vectors.line_vector(40.0, 20.0), (20, 1)), 4.0)
    others[[3, 9, 14]] = vectors.line_vector([100.0, 310.0, 150.0], [10.0, 60.0, 5.0])
    assert entrychecks.check_outlier(vectors.line_vector(85.0, 20.0), others, Feature.CLEAVAGE) is not None
    poles = upright_fold(rng, 50.0, 20)
    poles[[3, 9]] = vectors.pole_vector([270.0, 80.0], [60.0, 80.0])
    assert entrychecks.check_outlier(Plane(270, 45).pole, poles, Feature.BEDDING) is not None


@pytest.mark.parametrize("limb_dip_deg", [15.0, 50.0, 75.0])
def test_good_readings_are_seldom_called_outliers(limb_dip_deg):
    """Beds and cleavage with 5 degrees of scatter, each against those before it: false alarms at most 1%."""
    rng = np.random.default_rng(9)
    alarms = entries = 0
    for _ in range(30):
        poles = upright_fold(rng, limb_dip_deg, 30)
        cleavage = jittered(rng, np.tile(vectors.pole_vector(8.0, 85.0), (30, 1)), 5.0)
        for i in range(6, 30):
            entries += 2
            alarms += entrychecks.check_outlier(poles[i], poles[:i], Feature.BEDDING) is not None
            alarms += entrychecks.check_outlier(cleavage[i], cleavage[:i], Feature.CLEAVAGE) is not None
    assert alarms / entries <= 0.01


# --- all together ---


def test_a_good_plane_and_a_good_line_say_nothing():
    assert entrychecks.check_plane(BED, Feature.BEDDING, quadrant="SE") == ()
    line = BED.intersection(STEEP)
    assert entrychecks.check_line(line, Feature.INTERSECTION, bedding=BED, cleavage=STEEP) == ()


def test_a_reversed_flat_bed_is_told_both_with_the_mend_first():
    found = entrychecks.check_plane(Plane(225, 8), Feature.BEDDING, quadrant="SE")
    assert [warning.check for warning in found] == [EntryCheck.REVERSED_STRIKE, EntryCheck.FLAT_PLANE]


def test_a_strike_already_offered_reversed_is_not_called_an_outlier_as_well():
    poles = np.tile(vectors.pole_vector(45.0, 50.0), (10, 1))
    (warning,) = entrychecks.check_plane(Plane(225, 50), Feature.CLEAVAGE, quadrant="SE", fold_poles=poles)
    assert warning.check is EntryCheck.REVERSED_STRIKE
    (warning,) = entrychecks.check_plane(Plane(225, 50), Feature.CLEAVAGE, quadrant="NW", fold_poles=poles)
    assert warning.check is EntryCheck.OUTLIER


def test_a_hinge_line_is_checked_against_its_bed_only():
    line = BED.line_at_pitch(90)
    assert entrychecks.check_line(line, Feature.HINGE, bedding=BED, cleavage=STEEP) == ()
    found = entrychecks.check_line(line, Feature.INTERSECTION, bedding=BED, cleavage=STEEP)
    assert {warning.check for warning in found} == {
        EntryCheck.LINE_OFF_PLANE,
        EntryCheck.COMPUTED_OFF_MEASURED,
    }


def test_a_line_steeper_than_its_bed_is_told_so_once():
    near = entrychecks.check_line(Line(135, 35), Feature.HINGE, bedding=BED)
    far = entrychecks.check_line(Line(135, 60), Feature.HINGE, bedding=BED)
    assert [warning.check for warning in near] == [EntryCheck.PLUNGE_OVER_DIP]
    assert [warning.check for warning in far] == [EntryCheck.LINE_OFF_PLANE]


def test_names_of_checks_can_stand_in_a_record_separated_by_spaces():
    assert all(" " not in check and check == check.lower() for check in EntryCheck)


def test_messages_are_short_enough_for_a_phone():
    """No message is longer than 90 characters: about three lines on a phone (common practice, no source)."""
    poles = upright_fold(np.random.default_rng(5), 50.0, 20)
    found = [
        *entrychecks.check_plane(
            Plane(225, 8), Feature.BEDDING, quadrant="SE", notation=Notation.QUADRANT_BEARING
        ),
        *entrychecks.check_plane(BED, Feature.BEDDING, quadrant="NE"),
        *entrychecks.check_plane(Plane(270, 40), Feature.BEDDING, fold_poles=poles),
        *entrychecks.check_line(BED.line_at_pitch(90), Feature.INTERSECTION, bedding=BED, cleavage=STEEP),
        *entrychecks.check_line(Line(135, 35), Feature.HINGE, bedding=BED),
    ]
    assert {warning.check for warning in found} == set(EntryCheck)
    assert all(len(warning.message) <= 90 for warning in found)


@pytest.mark.parametrize("check", list(EntryCheck))
def test_every_check_has_words_for_a_list(check):
    """A reading kept against any check is listed with words of its own; an unknown name stands for itself."""
    assert EntryCheck.words_for(check.value) == check.words
    assert check.words not in ("", check.value)
    assert str(check) == check.value
    assert EntryCheck.words_for("of-a-later-version") == "of-a-later-version"
