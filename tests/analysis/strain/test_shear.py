import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import SettingError
from analysis.strain import shear


def test_no_shear_leaves_hinge_and_cleavage_together():
    """At the start both lie at 45 degrees, in transpression at 45 - convergence/2: no transection."""
    assert shear.simple_shear(0.0) == pytest.approx((45.0, 45.0))
    angles = np.array([0.0, 20.0, 60.0, 90.0])
    start = shear.transpression(angles, 0.0)
    assert start.hinge_deg == pytest.approx(45.0 - angles / 2.0, abs=1e-12)
    assert start.transection_deg == pytest.approx(np.zeros(4), abs=1e-12)


def test_head_on_convergence_keeps_folds_and_cleavage_along_the_fault():
    """At 90 degrees of convergence hinge and cleavage lie along the fault whatever the strain."""
    predicted = shear.transpression(90.0, np.array([0.1, 1.0, 5.0]))
    assert predicted.hinge_deg == pytest.approx(np.zeros(3), abs=1e-12)
    assert predicted.cleavage_deg == pytest.approx(np.zeros(3), abs=1e-12)


def test_transpression_without_convergence_is_simple_shear():
    """Convergence 0 gives simple shear exactly, and close to 0 goes over into it smoothly."""
    gamma = np.geomspace(0.01, 20.0, 30)
    exact = shear.simple_shear(gamma)
    assert shear.transpression(0.0, gamma).hinge_deg == pytest.approx(exact.hinge_deg, abs=1e-12)
    assert shear.transpression(0.0, gamma).cleavage_deg == pytest.approx(exact.cleavage_deg, abs=1e-12)
    assert shear.transpression(1e-7, gamma).transection_deg == pytest.approx(exact.transection_deg, abs=1e-4)


@given(st.floats(0.0, 50.0))
def test_shear_and_fold_fault_angle_are_each_others_inverse(gamma):
    """The shear of the angle of a shear is that shear."""
    assert shear.gamma_of_angle(shear.simple_shear(gamma).hinge_deg) == pytest.approx(
        gamma, abs=1e-9, rel=1e-9
    )


@given(st.floats(0.01, 20.0), st.floats(0.01, 1.0))
def test_the_recorded_shear_can_be_had_back_from_the_pair(gamma, share):
    """Late cleavage, inverted, gives the shear that was put in."""
    predicted = shear.simple_shear(gamma, share * gamma)
    recorded = shear.late_shear_of_pair(predicted.hinge_deg, predicted.transection_deg)
    assert recorded == pytest.approx(share * gamma, rel=1e-7)


def test_shear_never_brings_a_hinge_to_the_fault():
    """At the fault and beyond it the shear is endless; above 45 degrees it is negative."""
    assert np.all(np.isinf(shear.gamma_of_angle([0.0, -3.0])))
    assert shear.gamma_of_angle(50.0) < 0.0
    assert shear.rotation_transection_deg([-5.0, 0.0, 45.0, 60.0]) == pytest.approx(np.zeros(4), abs=1e-12)


def test_the_hinge_may_start_at_a_given_angle():
    """A hinge from 70 degrees obeys cot(hinge) = cot(70) + gamma; one along the fault stays there."""
    by_hand = np.degrees(np.arctan(1.0 / (1.0 / np.tan(np.radians(70.0)) + 1.3)))
    assert shear.simple_shear(1.3, start_deg=70.0).hinge_deg == pytest.approx(by_hand)
    assert shear.transpression(0.0, 1.3, start_deg=70.0).hinge_deg == pytest.approx(by_hand)
    assert shear.transpression(30.0, 1.0, start_deg=0.0).hinge_deg == pytest.approx(0.0)


def test_cleavage_that_has_recorded_nothing_lies_where_folds_would_start():
    """Onset at the very end: cleavage at the instantaneous axis, the largest transection there can be."""
    predicted = shear.transpression(20.0, 2.0, onset=1.0)
    assert predicted.cleavage_deg == pytest.approx(35.0)


def test_later_onset_means_larger_transection():
    """The transection grows with the share of the strain that cleavage has missed."""
    onset = np.linspace(0.0, 1.0, 21)
    for convergence_deg in (0.0, 15.0, 50.0):
        assert np.all(np.diff(shear.transpression(convergence_deg, 1.5, onset).transection_deg) > 0.0)


def test_displacement_over_the_present_width_grows_with_convergence():
    """Offset over present width is gamma in simple shear and more where the zone has narrowed since."""
    assert shear.offset_per_width(0.0, 2.0) == pytest.approx(2.0)
    term, k = shear.transpression_strain(40.0, 2.0)
    assert shear.offset_per_width(40.0, 2.0) == pytest.approx(term / k)


def test_arrays_broadcast_and_scalars_stay_scalar():
    """Any shapes that broadcast are taken, and a scalar gives a scalar."""
    grid = shear.transpression(np.linspace(0, 90, 7)[:, None, None], np.ones((1, 4, 1)), np.linspace(0, 1, 3))
    assert grid.transection_deg.shape == (7, 4, 3)
    assert grid.hinge_deg.shape in ((7, 4, 1), (7, 4, 3))
    assert np.ndim(shear.simple_shear(1.0).transection_deg) == 0
    assert shear.simple_shear(np.empty(0)).hinge_deg.shape == (0,)


@pytest.mark.parametrize(
    "call",
    [
        lambda: shear.simple_shear(-0.1),
        lambda: shear.simple_shear(np.nan),
        lambda: shear.simple_shear(1.0, -0.5),
        lambda: shear.transpression(91.0, 1.0),
        lambda: shear.transpression(-1.0, 1.0),
        lambda: shear.transpression(np.nan, 1.0),
        lambda: shear.transpression(10.0, 1.0, onset=1.5),
        lambda: shear.effective_convergence_deg(10.0, -0.2),
    ],
)
def test_values_outside_the_model_are_refused(call):
    """Negative shear, angles beyond 0 to 90 and shares beyond 0 to 1 raise a SettingError that says so."""
    with pytest.raises(SettingError, match="expected"):
        call()
