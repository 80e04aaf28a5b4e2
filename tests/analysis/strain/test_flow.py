import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from analysis.errors import HingewiseError, SettingError
from analysis.strain import flow, shear

ANGLES = np.array([0.0, 5.0, 19.47, 45.0, 70.0, 89.0])[:, np.newaxis]
STRAINS = np.array([0.01, 0.3, 1.0, 2.5, 6.0])


def strike_of_cleavage_deg(pole):
    """Angle in plan from x of a vertical plane with this pole, 0 to 180."""
    return np.degrees(np.arctan2(-pole[..., 0], pole[..., 1])) % 180.0


@pytest.mark.parametrize("steps", [1, 10, 400])
def test_stepwise_integration_agrees_with_the_closed_forms(steps):
    """Hinge, cleavage and transection after any number of steps are the closed forms', within 1e-9."""
    gradient = np.broadcast_to(flow.transpression_gradient(ANGLES), (steps, 6, 1, 3, 3))
    path = flow.deformation_path(gradient, np.broadcast_to(STRAINS / steps, (steps, 6, 5)))
    assert path.shape == (steps + 1, 6, 5, 3, 3)
    predicted = shear.transpression(ANGLES, STRAINS)
    hinge = flow.carried_lines(path[-1], flow.hinge_vector(45.0 - ANGLES / 2.0))
    pole = flow.cleavage_pole(path[-1])
    hinge_deg = np.degrees(np.arctan2(hinge[..., 1], hinge[..., 0]))
    assert hinge_deg == pytest.approx(predicted.hinge_deg, abs=1e-9)
    assert strike_of_cleavage_deg(pole) == pytest.approx(predicted.cleavage_deg, abs=1e-9)
    assert flow.transection_deg(hinge, pole) == pytest.approx(predicted.transection_deg, abs=1e-9)


@pytest.mark.parametrize("onset_step", [0, 3, 7, 9])
def test_cleavage_may_record_from_any_step_on(onset_step):
    """A marker made after some steps records the rest: the closed form of late cleavage, within 1e-9."""
    gamma = 1.8
    gradients = np.broadcast_to(flow.transpression_gradient(0.0), (10, 3, 3))
    path = flow.deformation_path(gradients, np.full(10, gamma / 10))
    hinge = flow.carried_lines(path[-1], flow.hinge_vector(45.0))
    pole = flow.cleavage_pole(flow.deformation_since(path, onset_step))
    wanted = shear.simple_shear(gamma, gamma * (1.0 - onset_step / 10)).transection_deg
    assert flow.transection_deg(hinge, pole) == pytest.approx(wanted, abs=1e-9)


def test_a_flow_may_change_from_step_to_step():
    """Shear, then head-on shortening: the deformation is the product, the last step leftmost."""
    gradients = np.stack([flow.transpression_gradient(0.0), flow.transpression_gradient(90.0)])
    path = flow.deformation_path(gradients, [1.5, 0.4])
    k = np.exp(-0.4)
    assert path[-1] == pytest.approx(
        np.diag([1.0, k, 1.0 / k]) @ [[1, 1.5, 0], [0, 1, 0], [0, 0, 1]], abs=1e-14
    )
    assert flow.deformation_since(path, 1) == pytest.approx(np.diag([1.0, k, 1.0 / k]), abs=1e-14)
    assert flow.deformation_since(path, 2) == pytest.approx(np.eye(3), abs=1e-14)


@given(st.floats(0.0, 90.0), st.floats(0.0, 4.0), st.floats(0.0, 180.0), st.floats(0.0, 90.0))
def test_lines_stay_in_the_planes_that_are_carried_with_them(convergence_deg, time, trend_deg, plunge_deg):
    """A line on a bed lies on it after any deformation, at right angles to the carried pole."""
    deformed = flow.deformation(flow.transpression_gradient(convergence_deg), time)
    pole = flow.hinge_vector(trend_deg, plunge_deg)
    lines = np.stack(
        [flow.hinge_vector(trend_deg + 90.0), flow.hinge_vector(trend_deg + 180.0, 90.0 - plunge_deg)]
    )
    assert lines @ pole == pytest.approx([0.0, 0.0], abs=1e-12)
    carried = flow.carried_lines(deformed, lines)
    assert carried @ flow.carried_poles(deformed, pole) == pytest.approx([0.0, 0.0], abs=1e-9)


@given(st.floats(0.0, 90.0), st.floats(0.0, 5.0))
def test_transpression_keeps_volume_and_its_ellipsoid_is_in_order(convergence_deg, time):
    """The stretches multiply to one, the greatest comes first, and the axes are at right angles."""
    ellipsoid = flow.strain_ellipsoid(flow.deformation(flow.transpression_gradient(convergence_deg), time))
    assert np.prod(ellipsoid.stretches) == pytest.approx(1.0, rel=1e-9)
    assert np.all(np.diff(ellipsoid.stretches) <= 0.0)
    assert ellipsoid.axes.T @ ellipsoid.axes == pytest.approx(np.eye(3), abs=1e-12)


def test_a_plunging_hinge_flattens_and_turns_in_transpression():
    """A plunging hinge steepens where the zone thickens upwards, and turns towards the fault."""
    deformed = flow.deformation(flow.transpression_gradient(40.0), 1.0)
    hinge = flow.carried_lines(deformed, flow.hinge_vector(25.0, 20.0))
    plunge_deg = np.degrees(np.arcsin(hinge[2]))
    # By hand: D v with D = [[1, G, 0], [0, k, 0], [0, 0, 1/k]].
    shear_term, k = shear.transpression_strain(40.0, 1.0)
    start = flow.hinge_vector(25.0, 20.0)
    by_hand = np.array([start[0] + shear_term * start[1], k * start[1], start[2] / k])
    assert hinge == pytest.approx(by_hand / np.linalg.norm(by_hand), abs=1e-14)
    assert plunge_deg > 20.0
    assert np.degrees(np.arctan2(hinge[1], hinge[0])) < 25.0


def test_rigid_rotation_leaves_the_transection_alone():
    """Hinge and cleavage turned about the vertical keep angle and sense; mirrored, the sense turns."""
    hinge, pole = flow.hinge_vector(20.0, 10.0), flow.hinge_vector(125.0, 8.0)
    turned = Rotation.from_euler("z", 73.0, degrees=True)
    at_rest = flow.transection_deg(hinge, pole)
    assert flow.transection_deg(turned.apply(hinge), turned.apply(pole)) == pytest.approx(at_rest, abs=1e-12)
    mirror = np.array([1.0, -1.0, 1.0])
    assert flow.transection_deg(hinge * mirror, pole * mirror) == pytest.approx(-at_rest, abs=1e-12)
    assert flow.transection_deg(-hinge, pole) == pytest.approx(at_rest, abs=1e-12)
    assert flow.transection_deg(hinge, -pole) == pytest.approx(at_rest, abs=1e-12)


def test_the_sense_of_a_transection_is_that_of_the_method():
    """Hinge 000/00 and vertical cleavage striking 010 make +10 degrees (METHOD section 4)."""
    assert flow.transection_deg(flow.hinge_vector(0.0), flow.hinge_vector(100.0)) == pytest.approx(10.0)


def test_hinges_start_where_the_flow_stretches_fastest():
    """45 - convergence/2 in transpression; along x in pure shear; both for stacks and for one."""
    angles = np.array([0.0, 30.0, 90.0])
    assert flow.instantaneous_hinge_deg(flow.transpression_gradient(angles)) == pytest.approx(
        [45.0, 30.0, 0.0]
    )
    assert flow.instantaneous_hinge_deg(flow.transpression_gradient(30.0)).shape == ()


def test_no_deformation_changes_nothing():
    """Zero time gives the unit deformation, and an empty stack an empty one."""
    assert flow.deformation(flow.transpression_gradient(30.0), 0.0) == pytest.approx(np.eye(3), abs=0.0)
    assert flow.matrix_exponential(np.empty((0, 3, 3))).shape == (0, 3, 3)


def test_rates_that_are_no_numbers_are_refused():
    """Infinite rates and steps that a path does not have are named."""
    with pytest.raises(SettingError, match="not finite"):
        flow.deformation(np.full((3, 3), np.inf), 1.0)
    path = flow.deformation_path(np.zeros((2, 3, 3)), [1.0, 1.0])
    with pytest.raises(HingewiseError, match="no step 3"):
        flow.deformation_since(path, 3)
