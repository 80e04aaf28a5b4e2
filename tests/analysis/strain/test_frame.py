import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.strain import flow, shear
from analysis.strain.frame import Sense, frame_to_map, map_to_frame, signed_axis_angle_deg

AZIMUTHS = st.floats(0.0, 360.0)


@pytest.mark.parametrize(
    ("start_deg", "end_deg", "angle_deg"),
    [
        (0, 10, 10),
        (350, 10, 20),
        (10, 350, -20),
        (0, 90, 90),
        (0, 270, 90),
        (90, 0, 90),
        (0, 180, 0),
        (5, 184, -1),
    ],
)
def test_axis_angles_are_signed_clockwise(start_deg, end_deg, angle_deg):
    """Angles between axes run from above -90 to 90, clockwise positive, across north, for either end."""
    assert signed_axis_angle_deg(start_deg, end_deg) == pytest.approx(angle_deg)


@given(AZIMUTHS, AZIMUTHS)
def test_either_end_of_an_axis_gives_the_same_angle(start_deg, end_deg):
    """Turning an axis end for end changes nothing but, at most, +90 for -90."""
    angle = signed_axis_angle_deg(start_deg, end_deg)
    for turned in (
        signed_axis_angle_deg(start_deg + 180.0, end_deg),
        signed_axis_angle_deg(start_deg, end_deg - 180.0),
    ):
        assert np.cos(2 * np.radians(turned - angle)) == pytest.approx(1.0)
    assert -90.0 <= angle <= 90.0


@given(AZIMUTHS, st.sampled_from([1, -1]), AZIMUTHS, st.floats(0.0, 90.0))
def test_the_frame_of_a_fault_is_undone_by_the_way_back(strike_deg, sign, trend_deg, plunge_deg):
    """From the map into the frame and back gives the same vector."""
    vector = flow.hinge_vector(trend_deg, plunge_deg)
    assert frame_to_map(map_to_frame(vector, strike_deg, sign), strike_deg, sign) == pytest.approx(
        vector, abs=1e-12
    )


@pytest.mark.parametrize(("sense", "side"), [(Sense.SINISTRAL, 1.0), (Sense.DEXTRAL, -1.0)])
def test_shear_of_either_sense_makes_folds_on_its_own_side(sense, side):
    """On the map sinistral shear leaves folds, and cleavage beyond them, clockwise; dextral anticlockwise."""
    strike_deg, gamma = 63.0, 1.2
    predicted = shear.simple_shear(gamma)
    hinge = frame_to_map(flow.hinge_vector(predicted.hinge_deg), strike_deg, sense.sign)
    pole = frame_to_map(flow.hinge_vector(predicted.cleavage_deg + 90.0), strike_deg, sense.sign)
    trend_deg = np.degrees(np.arctan2(hinge[1], hinge[0]))
    assert signed_axis_angle_deg(strike_deg, trend_deg) == pytest.approx(side * predicted.hinge_deg)
    assert flow.transection_deg(hinge, pole) == pytest.approx(side * predicted.transection_deg)


def test_positive_shear_moves_the_far_side_to_the_left_on_a_sinistral_fault():
    """By definition: across a sinistral fault the other side has moved to the left, in either direction."""
    strike_deg = 30.0
    for across_deg, left_deg in ((strike_deg + 90.0, strike_deg), (strike_deg - 90.0, strike_deg + 180.0)):
        far = flow.hinge_vector(across_deg)  # a point across the fault
        moved = frame_to_map([[1, 0.7, 0], [0, 1, 0], [0, 0, 1]] @ map_to_frame(far, strike_deg), strike_deg)
        assert (moved - far) @ flow.hinge_vector(left_deg) == pytest.approx(0.7)
