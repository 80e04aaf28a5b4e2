"""The right-hand rule against a dip quadrant and against the neighbours."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import AttitudeError, NotationError
from analysis.orient import righthand, vectors
from analysis.orient.attitudes import Plane
from analysis.orient.righthand import QuadrantFit

AZIMUTHS = st.floats(0.0, 360.0)


@pytest.mark.parametrize(
    ("azimuth_deg", "octant"),
    [(0, "N"), (360, "N"), (22.49, "N"), (22.5, "NE"), (67.5, "E"), (135, "SE"), (180, "S"), (225, "SW"),
     (270, "W"), (337.49, "NW"), (337.5, "N"), (-10, "N"), (720 + 90, "E")],
)  # fmt: skip
def test_octant_of_names_the_eighth_and_holds_its_anticlockwise_edge(azimuth_deg, octant):
    assert righthand.octant_of(azimuth_deg) == octant


@given(AZIMUTHS)
def test_every_azimuth_lies_within_half_an_octant_of_the_middle_of_its_own(azimuth_deg):
    middle = righthand.octant_azimuth_deg(righthand.octant_of(azimuth_deg))
    assert righthand.off_deg(azimuth_deg, middle) <= 22.5


@pytest.mark.parametrize("value", [float("nan"), float("inf")])
def test_octant_of_no_number_is_refused(value):
    with pytest.raises(AttitudeError, match="finite"):
        righthand.octant_of(value)


def test_a_word_that_is_no_quadrant_is_refused_with_those_there_are():
    with pytest.raises(NotationError, match="N NE E SE S SW W NW"):
        righthand.checked_octant("SSE")


def test_quadrants_are_taken_in_either_case():
    assert righthand.checked_octant(" se ") == "SE"


@pytest.mark.parametrize(
    ("strike", "quadrant", "fit"),
    [
        (45, "SE", QuadrantFit.FITS),
        (45, "E", QuadrantFit.FITS),
        (45, "S", QuadrantFit.FITS),
        (45, "NW", QuadrantFit.REVERSED),
        (45, "N", QuadrantFit.REVERSED),
        (45, "W", QuadrantFit.REVERSED),
        (45, "NE", QuadrantFit.MISFIT),
        (45, "SW", QuadrantFit.MISFIT),
        (225, "SE", QuadrantFit.REVERSED),
        (0, "E", QuadrantFit.FITS),
        (360, "E", QuadrantFit.FITS),
        (0, "N", QuadrantFit.MISFIT),
        # A bed dipping 112 lies in the octant E; its neighbours SE and NE are 23 and 67 degrees off.
        (22, "NE", QuadrantFit.FITS),
        (202, "NE", QuadrantFit.REVERSED),
    ],
)
def test_the_side_nearer_to_the_quadrant_decides(strike, quadrant, fit):
    assert righthand.quadrant_fit(Plane(strike, 40), quadrant) is fit


@pytest.mark.parametrize(
    ("strike", "fit"),
    [
        (259.5, QuadrantFit.FITS),
        (260, QuadrantFit.MISFIT),
        (280, QuadrantFit.MISFIT),
        (280.5, QuadrantFit.REVERSED),
    ],
)
def test_the_band_about_the_strike_line_holds_its_own_edges(strike, fit):
    # The quadrant W is 270: strikes from 260 to 280 run along it.
    assert righthand.quadrant_fit(Plane(strike, 40), "W") is fit


@pytest.mark.parametrize("dip", [0, 90])
@pytest.mark.parametrize("quadrant", righthand.OCTANTS)
def test_a_horizontal_or_vertical_plane_dips_to_no_side_and_is_not_questioned(dip, quadrant):
    assert righthand.quadrant_fit(Plane(45, dip), quadrant) is QuadrantFit.FITS


@given(AZIMUTHS, st.floats(1.0, 89.0), st.sampled_from(righthand.OCTANTS))
def test_reversing_the_plane_exchanges_fits_and_reversed(strike, dip, quadrant):
    plane = Plane(strike, dip)
    fits = (righthand.quadrant_fit(plane, quadrant), righthand.quadrant_fit(plane.reversed, quadrant))
    assert fits in {
        (QuadrantFit.FITS, QuadrantFit.REVERSED),
        (QuadrantFit.REVERSED, QuadrantFit.FITS),
        (QuadrantFit.MISFIT, QuadrantFit.MISFIT),
    }


def jittered(rng, axes, sd_deg):
    """Axes (n, 3) turned by a normal error of sd_deg in each direction across them."""
    turned = rng.normal(0.0, np.radians(sd_deg), axes.shape)
    turned -= axes * np.sum(axes * turned, axis=1, keepdims=True)
    return vectors.unit(axes + turned)


def outcrop(rng, *, beds_sd_deg, entries=20):
    """One outcrop on one limb: the true poles and the read ones, with 3 degrees of compass noise."""
    pole = vectors.pole_vector(rng.uniform(0, 360), rng.uniform(15, 75))
    beds = (
        jittered(rng, np.tile(pole, (entries, 1)), beds_sd_deg)
        if beds_sd_deg
        else np.tile(pole, (entries, 1))
    )
    return beds, jittered(rng, beds, 3.0)


def test_with_a_quadrant_reversed_strikes_are_caught_and_good_ones_left_in_peace():
    """10,000 entries, one quadrant in ten a neighbour: caught at least 99.5%, false alarms at most 1%."""
    rng = np.random.default_rng(20260)
    caught = alarms = entries = 0
    for _ in range(500):
        beds, read = outcrop(rng, beds_sd_deg=0.0)
        for bed, pole in zip(beds, read, strict=True):
            dips_to = righthand.octant_of(Plane.from_pole(bed).dip_direction_deg)
            turn = rng.choice([-1, 1]) if rng.random() < 0.1 else 0
            tapped = righthand.OCTANTS[(righthand.OCTANTS.index(dips_to) + turn) % 8]
            plane = Plane.from_pole(pole)
            entries += 1
            alarms += righthand.quadrant_fit(plane, tapped) is not QuadrantFit.FITS
            caught += righthand.quadrant_fit(plane.reversed, tapped) is QuadrantFit.REVERSED
    assert entries == 10_000
    assert caught / entries >= 0.995
    assert alarms / entries <= 0.01


@pytest.mark.parametrize("beds_sd_deg", [0.0, 3.0, 6.0])
def test_without_a_quadrant_the_neighbours_see_reversed_strikes(beds_sd_deg):
    """From the sixth reading on, one past strike in fifty reversed and kept: caught 95%, false alarms 1%."""
    rng = np.random.default_rng(20261)
    caught = alarms = entries = 0
    for _ in range(150):
        _, read = outcrop(rng, beds_sd_deg=beds_sd_deg)
        planes = [Plane.from_pole(pole) for pole in read]
        wrong = rng.random(len(planes)) < 0.02
        kept = np.array([(p.reversed if w else p).pole for p, w in zip(planes, wrong, strict=True)])
        for i in range(5, len(planes)):
            entries += 1
            alarms += righthand.reversed_among_neighbours(planes[i], kept[:i]) is not None
            caught += righthand.reversed_among_neighbours(planes[i].reversed, kept[:i]) is not None
    assert caught / entries >= 0.95
    assert alarms / entries <= 0.01


LIMB = np.array([Plane(s, d).pole for s, d in [(43, 48), (45, 52), (47, 50), (44, 49), (46, 51), (45, 50)]])
OTHER_LIMB = np.array([Plane(s, d).pole for s, d in [(223, 48), (225, 52), (227, 50), (224, 49)]])


def test_the_mend_is_the_plane_that_falls_among_the_neighbours():
    entry = Plane(226, 50)
    assert righthand.reversed_among_neighbours(entry, LIMB) == entry.reversed == Plane(46, 50)


def test_the_sign_of_the_poles_does_not_matter():
    signs = np.array([[1], [-1], [1], [-1], [-1], [1]])
    assert righthand.reversed_among_neighbours(Plane(226, 50), LIMB * signs) == Plane(46, 50)


@pytest.mark.parametrize("n", [0, 1, 4])
def test_fewer_than_five_neighbours_say_nothing(n):
    assert righthand.reversed_among_neighbours(Plane(226, 50), LIMB[:n]) is None


def test_the_newest_two_hundred_neighbours_speak_for_the_outcrop():
    neighbours = np.vstack([np.tile(OTHER_LIMB, (100, 1)), np.tile(LIMB[5], (200, 1))])
    assert righthand.reversed_among_neighbours(Plane(225, 50), neighbours) == Plane(45, 50)


def test_identical_neighbours_are_a_cluster():
    assert righthand.reversed_among_neighbours(Plane(225, 50), np.tile(LIMB[5], (5, 1))) == Plane(45, 50)


@pytest.mark.parametrize("entry", [Plane(225, 50), Plane(45, 50)])
def test_with_both_limbs_in_the_outcrop_neither_is_questioned(entry):
    assert righthand.reversed_among_neighbours(entry, np.vstack([LIMB, OTHER_LIMB])) is None


def test_one_confirmed_neighbour_of_the_second_limb_ends_the_questions():
    neighbours = np.vstack([LIMB, OTHER_LIMB[:1]])
    entry = Plane(226, 51)
    assert righthand.reversed_among_neighbours(entry, neighbours) == entry.reversed
    confirmed = [False] * 6 + [True]
    assert righthand.reversed_among_neighbours(entry, neighbours, confirmed=confirmed) is None


def test_confirmations_that_do_not_match_the_neighbours_are_refused():
    with pytest.raises(AttitudeError, match="one for each"):
        righthand.reversed_among_neighbours(Plane(226, 50), LIMB, confirmed=[True])


@pytest.mark.parametrize("dip", [0, 2, 88, 90])
def test_flat_and_upright_planes_look_the_same_reversed_and_are_not_questioned(dip):
    neighbours = np.array([Plane(45, dip).pole] * 6)
    assert righthand.reversed_among_neighbours(Plane(225, dip), neighbours) is None


def test_an_entry_that_fits_neither_way_round_is_no_reversed_strike():
    assert righthand.reversed_among_neighbours(Plane(135, 50), LIMB) is None


def test_the_centre_holds_though_two_in_five_lie_elsewhere():
    axes = np.vstack([LIMB, OTHER_LIMB])
    centre, scatter = righthand.robust_centre(axes)
    assert vectors.axis_angle_deg(centre, Plane(45, 50).pole) < 2.0
    assert scatter < 10.0
