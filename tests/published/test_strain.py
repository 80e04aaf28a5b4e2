"""Predictions of shear and transpression against numbers and facts from outside the code.

The numbers marked METHOD were computed twice, independently of this code, when the method was written down.
"""

import mpmath
import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from analysis.strain import flow, shear

# METHOD section 6: simple shear from 45 degrees (Ramsay & Huber 1983, from memory): gamma, transection.
SIMPLE_SHEAR = [(0.25, 2.778), (0.5, 4.292), (1.0, 5.152), (2.0, 4.065), (5.0, 1.438)]
# METHOD section 6: fold-fault angle, transection (two decimals), gamma (to the digits given there).
BY_ANGLE = [
    (20, 4.43, 1.75, 2),
    (15, 3.10, 2.73, 2),
    (10, 1.59, 4.67, 2),
    (5, 0.43, 10.4, 1),
    (2, 0.07, 27.6, 1),
]
# METHOD section 6: cleavage that records only the last gamma2 of gamma1 + gamma2.
LATE = [(0.5, 0.5, 11.42), (1.0, 1.0, 13.28), (2.0, 1.0, 17.68)]
# METHOD section 6: transpression at t = 1 (Sanderson & Marchini 1984; Fossen & Tikoff 1993).
TRANSPRESSION = [(10, 5.07), (20, 4.81), (45, 3.54), (60, 2.47), (75, 1.27)]
# METHOD section 6: partitioning (Tikoff & Teyssier 1994), convergence 20 degrees, t = 1.
PARTITIONING = [(0.0, 4.81), (0.5, 3.69), (0.8, 1.80), (1.0, 0.0)]


@pytest.mark.parametrize(("gamma", "transection_deg"), SIMPLE_SHEAR)
def test_simple_shear_predicts_the_transection_of_the_method(gamma, transection_deg):
    """Rotation in simple shear gives the transections of METHOD section 6 to a thousandth of a degree."""
    assert shear.simple_shear(gamma).transection_deg == pytest.approx(transection_deg, abs=5e-4)


@pytest.mark.parametrize(("angle_deg", "transection_deg", "gamma", "decimals"), BY_ANGLE)
def test_the_fold_fault_angle_fixes_shear_and_transection(angle_deg, transection_deg, gamma, decimals):
    """The shear and the transection that a fold-fault angle asks for are those of METHOD section 6."""
    assert shear.rotation_transection_deg(angle_deg) == pytest.approx(transection_deg, abs=5e-3)
    assert shear.gamma_of_angle(angle_deg) == pytest.approx(gamma, abs=0.5 * 10.0**-decimals)


def test_the_greatest_transection_of_rotation_is_exactly_at_a_shear_strain_of_one():
    """Fifty digits: no slope at gamma = 1, the value is atan(2)/2 - atan(1/2), and nothing is larger."""
    with mpmath.workdps(50):

        def transection(gamma):
            return mpmath.atan2(2, gamma) / 2 - mpmath.acot(1 + gamma)

        def slope(gamma):
            # By hand: d/dg atan(2/g)/2 = -1/(g^2 + 4), d/dg acot(1 + g) = -1/(1 + (1 + g)^2).
            return 1 / (1 + (1 + gamma) ** 2) - 1 / (gamma**2 + 4)

        assert slope(mpmath.mpf(1)) == 0
        assert abs(mpmath.diff(transection, 1) - slope(mpmath.mpf(1))) < mpmath.mpf(10) ** -20
        top = mpmath.findroot(slope, (mpmath.mpf("0.3"), mpmath.mpf(3)), solver="anderson")
        assert abs(top - 1) < mpmath.mpf(10) ** -40
        exact = mpmath.atan(2) / 2 - mpmath.atan(mpmath.mpf(1) / 2)
        assert abs(transection(mpmath.mpf(1)) - exact) < mpmath.mpf(10) ** -48
        assert slope(mpmath.mpf("0.99")) > 0 > slope(mpmath.mpf("1.01"))
        exact_deg = float(mpmath.degrees(exact))
    assert exact_deg == pytest.approx(5.1524, abs=5e-5)  # METHOD section 6
    assert shear.simple_shear(1.0).transection_deg == pytest.approx(exact_deg, abs=1e-13)
    assert np.all(shear.simple_shear(np.geomspace(1e-4, 1e4, 2001)).transection_deg <= exact_deg + 1e-13)


@pytest.mark.parametrize(("before", "recorded", "transection_deg"), LATE)
def test_late_cleavage_predicts_the_transection_of_the_method(before, recorded, transection_deg):
    """Cleavage of the last part of the shear gives the transections of METHOD section 6, and back."""
    predicted = shear.simple_shear(before + recorded, recorded)
    assert predicted.transection_deg == pytest.approx(transection_deg, abs=5e-3)
    assert shear.late_shear_of_pair(predicted.hinge_deg, predicted.transection_deg) == pytest.approx(recorded)


def test_transpression_at_thirty_degrees_matches_the_method():
    """Convergence 30 degrees, t = 1: k, shear term, hinge, ellipse and transection of METHOD section 6."""
    gamma_term, k = shear.transpression_strain(30.0, 1.0)
    assert k == pytest.approx(0.606531, abs=5e-7)
    assert gamma_term == pytest.approx(0.681509, abs=5e-7)
    predicted = shear.transpression(30.0, 1.0)
    assert predicted.hinge_deg == pytest.approx(14.11, abs=5e-3)
    assert predicted.cleavage_deg == pytest.approx(18.51, abs=5e-3)
    assert predicted.transection_deg == pytest.approx(4.40, abs=5e-3)


@pytest.mark.parametrize(("convergence_deg", "transection_deg"), TRANSPRESSION)
def test_transpression_predicts_the_transection_of_the_method(convergence_deg, transection_deg):
    """Transpression at t = 1 gives the transections of METHOD section 6."""
    assert shear.transpression(convergence_deg, 1.0).transection_deg == pytest.approx(
        transection_deg, abs=5e-3
    )


@pytest.mark.parametrize(("share", "transection_deg"), PARTITIONING)
def test_partitioning_predicts_the_transection_of_the_method(share, transection_deg):
    """The more of the movement the faults take, the smaller the transection: METHOD section 6."""
    predicted = shear.transpression(20.0, 1.0, share=share)
    assert predicted.transection_deg == pytest.approx(transection_deg, abs=5e-3)


def test_fastest_stretching_turns_upwards_where_the_sine_is_a_third():
    """Below arcsin(1/3) the fastest stretching is horizontal, above it vertical (Fossen & Tikoff 1993)."""
    assert pytest.approx(19.47, abs=5e-3) == shear.STRETCH_SWAP_DEG  # METHOD section 6

    def horizontal_minus_vertical(convergence_deg):
        rate = flow.transpression_gradient(convergence_deg)
        symmetric = 0.5 * (rate + rate.T)
        return np.linalg.eigvalsh(symmetric[:2, :2])[-1] - symmetric[2, 2]

    assert horizontal_minus_vertical(shear.STRETCH_SWAP_DEG) == pytest.approx(0.0, abs=1e-15)
    assert horizontal_minus_vertical(19.0) > 0.0 > horizontal_minus_vertical(20.0)


def test_the_matrix_exponential_agrees_with_scipy():
    """Ours against scipy.linalg.expm, for stacks of any shape, tiny to large, defective ones too."""
    rng = np.random.default_rng(7)
    for size in (1e-8, 1e-2, 1.0, 8.0):
        stack = size * rng.normal(size=(5, 4, 3, 3))
        ours, theirs = flow.matrix_exponential(stack), expm(stack)
        scale = np.max(np.abs(theirs), axis=(-2, -1), keepdims=True)
        assert np.max(np.abs(ours - theirs) / scale) < 1e-12
    defective = np.array([[0.0, 30.0, 5.0], [0.0, 0.0, 7.0], [0.0, 0.0, 0.0]])
    assert flow.matrix_exponential(defective) == pytest.approx(expm(defective), abs=1e-12)
    mixed = np.stack([1e-9 * defective, defective])  # a small one keeps its digits beside a large one
    assert flow.matrix_exponential(mixed)[0] == pytest.approx(expm(1e-9 * defective), rel=1e-15, abs=1e-30)


def test_a_hinge_carried_by_an_ode_solver_goes_where_the_closed_form_says():
    """dv/dt = L v solved by scipy takes the hinge to the closed form's angle, within 1e-9 degrees."""
    for convergence_deg in (0.0, 12.0, 40.0, 80.0):
        gradient = flow.transpression_gradient(convergence_deg)
        start = flow.hinge_vector(45.0 - convergence_deg / 2.0)
        solved = solve_ivp(
            lambda _, v, rate=gradient: rate @ v, (0.0, 1.7), start, method="DOP853", rtol=1e-13, atol=1e-15
        )
        end = solved.y[:, -1]
        angle_deg = np.degrees(np.arctan2(end[1], end[0]))
        assert angle_deg == pytest.approx(shear.transpression(convergence_deg, 1.7).hinge_deg, abs=1e-9)
