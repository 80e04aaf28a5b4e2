import numpy as np
import pytest

from analysis.strain import shear
from analysis.strain.frame import Sense
from analysis.strain.inverse import contour_pieces, fitting_region
from analysis.strain.observed import Fault, FoldPair

FAULT = Fault(strike_deg=0.0, sense=Sense.SINISTRAL, strike_se_deg=0.0)


def pair_at(convergence_deg, gamma, onset, *, variance=0.25, df=np.inf, sign=1):
    predicted = shear.transpression(convergence_deg, gamma / np.cos(np.radians(convergence_deg)), onset)
    return FoldPair(
        hinge_trend_deg=float(sign * predicted.hinge_deg) % 180.0,
        transection_deg=float(sign * predicted.transection_deg),
        trend_variance_deg2=variance,
        cleavage_part_deg2=variance,
        df=df,
    )


@pytest.mark.parametrize(
    ("convergence_deg", "gamma", "onset"), [(0.0, 1.0, 0.0), (25.0, 2.0, 0.4), (50.0, 0.8, 0.7)]
)
def test_the_region_holds_the_values_that_made_the_pair(convergence_deg, gamma, onset):
    """The cell nearest to the truth lies inside the outline, and cells that predict something else do not."""
    region = fitting_region(pair_at(convergence_deg, gamma, onset), FAULT)
    nearest = (
        np.argmin(np.abs(region.convergence_deg - convergence_deg)),
        np.argmin(np.abs(np.log(region.gamma / gamma))),
        np.argmin(np.abs(region.onset - onset)),
    )
    assert region.inside[nearest]
    assert 0.0 < region.inside.mean() < 0.2


def test_the_region_is_the_same_for_the_mirror_image_of_a_fault():
    """A dextral fault with the mirrored pair has the region of the sinistral one."""
    mirrored = Fault(strike_deg=0.0, sense=Sense.DEXTRAL, strike_se_deg=0.0)
    one = fitting_region(pair_at(25.0, 2.0, 0.4), FAULT)
    other = fitting_region(pair_at(25.0, 2.0, 0.4, sign=-1), mirrored)
    assert other.misfit == pytest.approx(one.misfit, rel=1e-9, abs=1e-9)


def test_more_readings_make_a_smaller_region():
    """A quarter of the variance leaves fewer cells, all of which were inside before."""
    wide, narrow = (
        fitting_region(pair_at(25.0, 2.0, 0.4, variance=v), FAULT, cells=(30, 40, 16)) for v in (4.0, 1.0)
    )
    assert narrow.inside.sum() < wide.inside.sum()
    same = fitting_region(pair_at(25.0, 2.0, 0.4, variance=1.0), FAULT, cells=(30, 40, 16), confidence=0.5)
    assert not np.any(same.inside & ~narrow.inside)


def test_few_degrees_of_freedom_widen_the_outline():
    """The outline's misfit is that of F(2, df): larger at few readings, 5.991 (chi squared table) at many."""
    limits = [
        fitting_region(pair_at(10.0, 1.0, 0.2, df=df), FAULT, cells=(4, 4, 4)).limit for df in (5, 50, np.inf)
    ]
    assert limits[0] > limits[1] > limits[2]
    assert limits[2] == pytest.approx(5.991, abs=5e-4)


def test_the_outline_lies_where_the_map_crosses_its_limit():
    """Each end of each piece lies between grid points on either side of the limit, on both maps."""
    region = fitting_region(pair_at(25.0, 2.0, 0.4, variance=2.0), FAULT)
    for pieces, xs, ys, values in (
        (region.outline(), region.convergence_deg, region.gamma, region.map()),
        (region.onset_outline(), region.gamma, region.onset, region.onset_map()),
    ):
        assert len(pieces) > 10
        for x, y in pieces.reshape(-1, 2)[:: max(len(pieces) // 20, 1)]:
            i, j = (np.clip(np.searchsorted(a, v * (1 - 1e-9)), 1, len(a) - 1) for a, v in ((xs, x), (ys, y)))
            near = values[i - 1 : i + 1, j - 1 : j + 1]
            assert near.min() <= region.limit <= near.max()


def test_the_maps_do_not_hang_on_how_fine_the_grid_is_that_they_look_along():
    """Beside the fault, where shear is strong, coarse steps of onset or convergence leave no holes in the region."""
    near_fault = FoldPair(
        hinge_trend_deg=5.3, transection_deg=3.0, trend_variance_deg2=5.0, cleavage_part_deg2=0.25
    )
    coarse, fine = (fitting_region(near_fault, FAULT, cells=(44, 64, n)) for n in (24, 1501))
    assert np.array_equal(coarse.map() <= coarse.limit, fine.map() <= fine.limit)
    finer = fitting_region(near_fault, FAULT, cells=(862, 64, 24))
    assert np.array_equal(coarse.onset_map() <= coarse.limit, finer.onset_map() <= finer.limit)
    # The nearest grid point alone would leave holes.
    assert np.any((np.min(coarse.misfit, axis=2) > coarse.limit) & (coarse.map() <= coarse.limit))


def test_a_contour_of_a_cone_is_a_circle():
    """Marching squares on a distance gives points at that distance, and a closed ring."""
    x, y = np.linspace(-2, 2, 81), np.linspace(-3, 3, 121)
    distance = np.hypot(*np.meshgrid(x, y, indexing="ij"))
    pieces = contour_pieces(x, y, distance, 1.3137)
    assert np.hypot(pieces[..., 0], pieces[..., 1]) == pytest.approx(
        np.full(pieces.shape[:2], 1.3137), abs=1e-3
    )
    ends, counts = np.unique(np.round(pieces.reshape(-1, 2), 9), axis=0, return_counts=True)
    assert len(ends) == len(pieces)
    assert np.all(counts == 2)


def test_saddles_and_empty_contours_are_drawn_or_left_out():
    """Two opposite low corners give two pieces; a level that nothing reaches gives none."""
    saddle = np.array([[0.0, 1.0], [1.0, 0.0]])
    assert contour_pieces([0, 1], [0, 1], saddle, 0.4).shape == (2, 2, 2)
    assert contour_pieces([0, 1], [0, 1], 1.0 - saddle, 0.4).shape == (2, 2, 2)
    assert contour_pieces([0, 1], [0, 1], saddle, -1.0).shape == (0, 2, 2)
    assert contour_pieces([0, 1], [0, 1], saddle, 2.0).shape == (0, 2, 2)


def test_no_transection_means_no_region():
    """A pair without a transection, or with an endless error, has no region."""
    assert (
        fitting_region(FoldPair(hinge_trend_deg=9.0, transection_deg=None, trend_variance_deg2=1.0), FAULT)
        is None
    )
    loose = FoldPair(hinge_trend_deg=9.0, transection_deg=1.0, trend_variance_deg2=np.inf)
    assert fitting_region(loose, FAULT) is None
