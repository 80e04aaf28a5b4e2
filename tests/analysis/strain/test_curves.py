import math

import numpy as np
import pytest

from analysis.strain import shear
from analysis.strain.curves import ellipse_deg, fault_curves
from analysis.strain.frame import Sense
from analysis.strain.observed import Fault, FoldPair

PAIR = FoldPair(
    hinge_trend_deg=50.0, transection_deg=6.0, trend_variance_deg2=4.0, hinge_part_deg2=1.0,
    cleavage_part_deg2=2.0, covariance_deg2=-1.5, df=12.0,
)  # fmt: skip


@pytest.mark.parametrize(("sense", "sign"), [(Sense.SINISTRAL, 1), (Sense.DEXTRAL, -1), (Sense.UNKNOWN, 1)])
def test_the_curves_are_those_of_the_explanations(sense, sign):
    """Each curve goes through what its explanation predicts, with the sign of the fault's sense."""
    curves = fault_curves(PAIR, Fault(strike_deg=30.0, sense=sense), convergence_deg=(30.0,), onset=(0.5,))
    assert curves.sign == sign
    angle_deg, transection_deg = curves.rotation.T
    assert transection_deg == pytest.approx(sign * shear.rotation_transection_deg(angle_deg), abs=1e-9)
    (convergence_deg, transpression), (onset, late) = curves.transpression[0], curves.late[0]
    assert (convergence_deg, onset) == (30.0, 0.5)
    for curve, predicted in (
        (transpression, shear.transpression(30.0, 1.0)),
        (late, shear.simple_shear(2.0, 1.0)),
    ):
        order = np.argsort(curve[:, 0])
        between = np.interp(predicted.hinge_deg, curve[order, 0], curve[order, 1])
        assert between == pytest.approx(sign * predicted.transection_deg, abs=0.02)


def test_the_datum_keeps_its_clockwise_sign_on_either_fault():
    """The transection is drawn as the verdict gives it, the angle as the fault's sense asks."""
    assert fault_curves(PAIR, Fault(strike_deg=30.0)).datum == pytest.approx([20.0, 6.0])
    dextral = fault_curves(PAIR, Fault(strike_deg=70.0, sense=Sense.DEXTRAL))
    assert dextral.datum == pytest.approx([20.0, 6.0])
    # Mirroring the angle but not the transection mirrors the ellipse too: their covariance turns its sign.
    away = dextral.ellipse - dextral.datum
    assert np.sum(away[:-1, 0] * away[:-1, 1]) > 0.0


def test_the_ellipse_covers_its_confidence():
    """95% of simulated pairs with a variance estimated at 12 degrees of freedom lie in it, within 1%."""
    rng = np.random.default_rng(4)
    true = np.array([[4.0, -1.5], [-1.5, 3.0]])
    drawn = (
        rng.multivariate_normal([0, 0], true, 40_000) / np.sqrt(rng.chisquare(12, 40_000) / 12)[:, np.newaxis]
    )
    outline = ellipse_deg(true, 12.0)
    radius = np.einsum("ni,ij,nj->n", outline, np.linalg.inv(true), outline)
    assert radius == pytest.approx(np.full(len(outline), radius[0]))
    assert outline[0] == pytest.approx(outline[-1])
    inside = np.einsum("ni,ij,nj->n", drawn, np.linalg.inv(true), drawn) <= radius[0]
    assert inside.mean() == pytest.approx(0.95, abs=0.01)


def test_ranges_hold_everything_that_is_drawn():
    """Curves to 45 degrees, datum and ellipse lie within the ranges, near the curves and far away."""
    for trend_deg, transection_deg in ((50.0, 6.0), (115.0, -30.0), (20.0, 44.0)):
        pair = FoldPair(
            hinge_trend_deg=trend_deg, transection_deg=transection_deg, trend_variance_deg2=4.0,
            cleavage_part_deg2=9.0, df=8.0,
        )  # fmt: skip
        curves = fault_curves(pair, Fault(strike_deg=30.0, sense=Sense.SINISTRAL))
        points = np.vstack([curves.rotation, curves.ellipse, curves.datum[np.newaxis]])
        for values, (low, high) in zip(points.T, (curves.x_range_deg, curves.y_range_deg), strict=True):
            assert low <= values.min() < values.max() <= high


def test_no_transection_draws_the_curves_alone():
    """Without a transection there is no datum; with an endless error there is a datum without an ellipse."""
    bare = FoldPair(hinge_trend_deg=50.0, transection_deg=None, trend_variance_deg2=4.0)
    curves = fault_curves(bare, Fault(strike_deg=30.0))
    assert curves.datum is None
    assert curves.ellipse is None
    assert curves.fold_fault_angle_deg == pytest.approx(20.0)
    loose = FoldPair(hinge_trend_deg=50.0, transection_deg=1.0, trend_variance_deg2=math.inf)
    assert fault_curves(loose, Fault(strike_deg=30.0)).ellipse is None
