"""Invented folds: what is drawn is what was asked for."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import SettingError
from analysis.orient.vectors import axis_angle_deg, line_vector, strike_dip_deg, trend_plunge_deg
from analysis.stats.axes import eigen
from analysis.stats.synthetic import FoldDesign, draw

EXACT = {"bedding_scatter_deg": 0.0, "cleavage_scatter_deg": 0.0, "line_scatter_deg": 0.0}
DESIGNS = st.builds(
    FoldDesign,
    hinge_trend_deg=st.floats(0, 360),
    hinge_plunge_deg=st.floats(0, 80),
    limb_dips_deg=st.tuples(st.floats(0, 90), st.floats(-90, 90)),
    transection_deg=st.floats(-60, 60),
    outcrops=st.integers(1, 5),
    hinge_variation_deg=st.floats(0, 5),
)


def exact(**fields):
    """Draw one fold without scatter, 40 readings of each."""
    return draw(FoldDesign(**EXACT, **fields), 40, 1, np.random.default_rng(1))


@given(DESIGNS)
def test_the_frame_of_a_design_is_orthonormal_and_right(design):
    """Hinge, upward and sideways are at right angles; sideways is horizontal, to the left of the hinge's trend."""
    frame = np.stack([design.hinge, design.upward, design.sideways])
    assert np.allclose(frame @ frame.T, np.eye(3), atol=1e-12)
    assert design.upward[2] < 0.0
    assert design.sideways[2] == pytest.approx(0.0, abs=1e-12)
    trend = np.radians(design.hinge_trend_deg)
    assert design.sideways @ [np.cos(trend - np.pi / 2), np.sin(trend - np.pi / 2), 0.0] == pytest.approx(1.0)


@given(DESIGNS)
def test_the_cleavage_makes_the_transection(design):
    """The angle between hinge and cleavage plane is the transection, clockwise positive seen from above."""
    sine = float(design.hinge @ design.cleavage_pole)
    assert np.degrees(np.arcsin(sine)) == pytest.approx(design.transection_deg, abs=1e-9)
    turning = -np.cross(design.hinge, design.cleavage_pole)[2]
    assert np.sign(sine * turning) == np.sign(design.transection_deg) or abs(sine) < 1e-12


def test_clockwise_cleavage_strikes_clockwise_of_a_horizontal_hinge():
    """Hinge 040/00 with +7 degrees: cleavage is vertical and strikes 047."""
    drawn = exact(hinge_trend_deg=40.0, transection_deg=7.0)
    strike, dip = strike_dip_deg(drawn.cleavage[0, 0])
    assert float(dip) == pytest.approx(90.0)
    assert float(strike) % 180.0 == pytest.approx(47.0)


def test_limbs_dip_as_asked_to_either_side():
    """Without scatter and plunge, bedding has two attitudes, with the dips asked for, dipping away from each other."""
    drawn = exact(hinge_trend_deg=0.0, limb_dips_deg=(30.0, 70.0), first_limb_share=0.4)
    strikes, dips = strike_dip_deg(drawn.bedding[0])
    assert set(dips.round(6).tolist()) == {30.0, 70.0}
    # The first limb dips to the left of the hinge's trend (west), the second to the right.
    assert np.allclose(strikes[dips < 50.0], 180.0)
    assert np.allclose(strikes[dips > 50.0] % 360.0, 0.0)


def test_an_overturned_fold_has_both_limbs_on_one_side():
    """A negative second dip dips the same way as the first."""
    strikes, _ = strike_dip_deg(exact(hinge_trend_deg=0.0, limb_dips_deg=(30.0, -80.0)).bedding[0])
    assert np.allclose(strikes, 180.0)


@pytest.mark.parametrize("plunge", [0.0, 20.0, 80.0])
def test_bedding_lies_on_the_girdle_and_lines_in_both_planes(plunge):
    """Without scatter each bedding pole is at right angles to the hinge, each line in its bed and in the cleavage."""
    design = FoldDesign(hinge_plunge_deg=plunge, transection_deg=12.0, **EXACT)
    drawn = draw(design, 30, 2, np.random.default_rng(2))
    assert np.allclose(drawn.bedding @ design.hinge, 0.0, atol=1e-12)
    assert np.allclose(drawn.lines @ design.cleavage_pole, 0.0, atol=1e-12)
    assert np.allclose(np.sum(drawn.lines * drawn.bedding, axis=-1), 0.0, atol=1e-12)
    assert drawn.bedding.shape == drawn.cleavage.shape == drawn.lines.shape == (2, 30, 3)


def test_bedding_along_the_cleavage_is_read_as_the_hinge():
    """Vertical limbs of an axial-planar fold meet the cleavage in no line; the hinge stands in."""
    drawn = exact(hinge_trend_deg=10.0, limb_dips_deg=(90.0, 90.0))
    assert np.allclose(axis_angle_deg(drawn.lines[0], line_vector(10.0, 0.0)), 0.0, atol=1e-9)


def test_scatter_is_the_standard_deviation_in_one_direction():
    """Cleavage poles scatter by the stated degrees along both directions across their mean, within 3%."""
    design = FoldDesign(cleavage_scatter_deg=4.0, bedding_scatter_deg=8.0)
    drawn = draw(design, 20_000, 1, np.random.default_rng(3))
    values, _ = eigen(drawn.cleavage[0].T @ drawn.cleavage[0] / 20_000)
    assert np.degrees(np.sqrt(values[1:])).tolist() == pytest.approx([4.0, 4.0], rel=0.03)
    off = np.degrees(np.arcsin(drawn.bedding[0] @ design.hinge))
    assert off.std() == pytest.approx(8.0, rel=0.03)
    assert off.mean() == pytest.approx(0.0, abs=0.3)


def test_hinges_of_outcrops_vary_as_asked():
    """With real variation the hinge of each outcrop is its own, by the stated degrees; within one it is the same."""
    design = FoldDesign(outcrops=8, hinge_variation_deg=3.0, **EXACT)
    drawn = draw(design, 64, 300, np.random.default_rng(4))
    assert drawn.outcrop.tolist() == [k % 8 for k in range(64)]
    tensors = np.stack(
        [np.swapaxes(b, -1, -2) @ b for b in (drawn.bedding[:, k::8] for k in range(8))], axis=1
    )
    values, vectors = eigen(tensors)
    both = values[..., 1] > 1e-6  # outcrops where both limbs were drawn
    assert np.allclose(values[both][:, 2], 0.0, atol=1e-9)
    hinges = vectors[both][..., 2]
    hinges *= np.sign(hinges @ design.hinge)[:, np.newaxis]
    for across in (design.upward, design.sideways):
        assert np.degrees(np.std(hinges @ across)) == pytest.approx(3.0, rel=0.05)


def test_shares_of_limbs_are_those_asked_for():
    """A quarter on the first limb comes out as a quarter, within sampling."""
    drawn = draw(FoldDesign(first_limb_share=0.25, **EXACT), 4000, 1, np.random.default_rng(5))
    assert np.mean(drawn.bedding[0] @ FoldDesign().sideways > 0.0) == pytest.approx(0.25, abs=0.03)


def test_the_same_seed_draws_the_same_fold():
    """Two generators of one seed agree to the last bit."""
    first, second = (draw(FoldDesign(), 9, 3, np.random.default_rng(6)) for _ in range(2))
    for ours, theirs in zip(first, second, strict=True):
        assert np.array_equal(ours, theirs)


def test_no_readings_are_no_error():
    """Nothing asked for gives empty arrays."""
    assert draw(FoldDesign(), 0, 2, np.random.default_rng(7)).bedding.shape == (2, 0, 3)


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("hinge_trend_deg", 361.0),
        ("hinge_trend_deg", float("nan")),
        ("hinge_plunge_deg", 81.0),
        ("limb_dips_deg", (91.0, 20.0)),
        ("limb_dips_deg", (20.0, -91.0)),
        ("limb_dips_deg", (20.0, float("inf"))),
        ("transection_deg", 61.0),
        ("bedding_scatter_deg", -1.0),
        ("cleavage_scatter_deg", 31.0),
        ("line_scatter_deg", float("nan")),
        ("hinge_variation_deg", -0.1),
        ("first_limb_share", 1.1),
        ("outcrops", 0),
    ],
)
def test_an_impossible_design_is_refused(field, value):
    """Values outside their range raise SettingError that says what is allowed."""
    with pytest.raises(SettingError, match="expected"):
        FoldDesign(**{field: value})


def test_the_edges_of_a_design_are_allowed():
    """Hinge trend 360, plunge 80, limbs 0 and 90 and a transection of 60 degrees draw unit vectors."""
    design = FoldDesign(
        hinge_trend_deg=360.0, hinge_plunge_deg=80.0, limb_dips_deg=(0.0, 90.0), transection_deg=-60.0
    )
    drawn = draw(design, 50, 1, np.random.default_rng(8))
    for axes in (drawn.bedding, drawn.cleavage, drawn.lines):
        assert np.allclose(np.linalg.norm(axes, axis=-1), 1.0)
    assert float(trend_plunge_deg(design.hinge)[0]) == pytest.approx(0.0, abs=1e-9)
