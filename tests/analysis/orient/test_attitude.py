"""The attitude felt: frames, robust means, motion and the field check."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import AttitudeError, TooFewReadingsError
from analysis.orient.attitude import (
    STANDARD_GRAVITY,
    Laid,
    check_field,
    device_to_magnetic,
    drifted,
    moving,
    robust_axis_mean,
    sampled_axes,
    screen_faces_down,
    specific_force_from_ios,
    triad,
    usable_samples,
)
from analysis.orient.north import MagneticField
from analysis.orient.vectors import axis_angle_deg, line_vector, strike_dip_deg, trend_plunge_deg

G = STANDARD_GRAVITY
# A field of 50 uT that dips 60 degrees: north 25, down 43.3.
NORTH_uT, DOWN_uT = 25.0, 43.301
EXPECTED = MagneticField(2.0, 60.0, 50_000.0, 25_000.0, 0.3, 2026.4)


# Frames ----


def test_a_tablet_on_a_table_with_its_top_to_the_north():
    """Screen up, top edge north: x is east, y is north, and the screen's normal is up."""
    # Android: specific force up through the screen; the field north along y, down into the table.
    rotation = device_to_magnetic([0.0, 0.0, G], [0.0, NORTH_uT, -DOWN_uT])
    np.testing.assert_allclose(rotation @ [1.0, 0.0, 0.0], [0.0, 1.0, 0.0], atol=1e-12)
    np.testing.assert_allclose(rotation @ [0.0, 1.0, 0.0], [1.0, 0.0, 0.0], atol=1e-12)
    np.testing.assert_allclose(rotation @ [0.0, 0.0, 1.0], [0.0, 0.0, -1.0], atol=1e-12)


def test_a_tablet_on_a_table_in_the_southern_hemisphere():
    """Where the field points up the north found is the same."""
    rotation = device_to_magnetic([0.0, 0.0, G], [0.0, NORTH_uT, DOWN_uT])
    np.testing.assert_allclose(rotation @ [0.0, 1.0, 0.0], [1.0, 0.0, 0.0], atol=1e-12)


def test_a_tablet_upright_facing_south():
    """Held upright, screen to the south, the back lies on a vertical plane that strikes east."""
    # y is up; the screen faces south, so the field runs out of the back: -z is north.
    force, field = [0.0, G, 0.0], [0.0, -DOWN_uT, -NORTH_uT]
    strike, dip = strike_dip_deg(sampled_axes(force, field, Laid.ON_PLANE))
    assert float(dip) == pytest.approx(90.0)
    assert float(strike) % 180.0 == pytest.approx(90.0)
    _, plunge = trend_plunge_deg(sampled_axes(force, field, Laid.ALONG_Y))
    assert float(plunge) == pytest.approx(90.0)
    trend, plunge = trend_plunge_deg(sampled_axes(force, field, Laid.ALONG_X))
    assert float(plunge) == pytest.approx(0.0, abs=1e-9)
    assert float(trend) % 180.0 == pytest.approx(90.0)


def test_a_plane_that_dips_east():
    """A tablet, top to the north, tipped with its right edge 30 degrees down lies on a plane 000/30."""
    tip = np.radians(30.0)
    # Up, in the tipped device frame, leans to the left; the field keeps its north along y.
    force = [-G * np.sin(tip), 0.0, G * np.cos(tip)]
    field = [DOWN_uT * np.sin(tip), NORTH_uT, -DOWN_uT * np.cos(tip)]
    strike, dip = strike_dip_deg(sampled_axes(force, field, Laid.ON_PLANE))
    assert float(axis_angle_deg(line_vector(strike, 0.0), line_vector(0.0, 0.0))) < 1e-9
    assert float(np.cos(np.radians(strike))) == pytest.approx(1.0)  # 000, not 180: it dips east
    assert float(dip) == pytest.approx(30.0)
    trend, plunge = trend_plunge_deg(sampled_axes(force, field, Laid.ALONG_X))
    assert (float(trend), float(plunge)) == pytest.approx((90.0, 30.0))


def test_ios_reports_the_opposite_sign_in_units_of_gravity():
    """The same tablet on the same table under iOS gives the same attitude once its sign is turned."""
    np.testing.assert_allclose(specific_force_from_ios([0.0, 0.0, -1.0]), [0.0, 0.0, G])
    tip = np.radians(30.0)
    android = [-G * np.sin(tip), 0.0, G * np.cos(tip)]
    ios = [np.sin(tip), 0.0, -np.cos(tip)]
    np.testing.assert_allclose(specific_force_from_ios(ios), android)
    assert not np.any(np.signbit(specific_force_from_ios([0.0, 0.0, -1.0])))


def test_screen_up_or_down_is_told_and_changes_no_plane():
    """Turned over on the same plane the screen looks down and the plane stays."""
    force, field = np.array([1.0, 2.0, 9.5]), np.array([5.0, 20.0, -40.0])
    over = np.diag([1.0, -1.0, -1.0])  # half a turn about x
    first = sampled_axes(force, field, Laid.ON_PLANE)
    second = sampled_axes(over @ force, over @ field, Laid.ON_PLANE)
    assert float(axis_angle_deg(first, second)) < 1e-9
    assert not screen_faces_down(force)
    assert screen_faces_down(over @ force)
    assert screen_faces_down([over @ force] * 5 + [force])


def test_rotations_are_rotations_and_come_in_arrays():
    """Arrays of samples give as many proper rotations, equal to those of the samples one by one."""
    rng = np.random.default_rng(2)
    force, field = rng.normal(0, 5, (40, 3)), rng.normal(0, 30, (40, 3))
    rotations = device_to_magnetic(force, field)
    assert rotations.shape == (40, 3, 3)
    np.testing.assert_allclose(np.linalg.det(rotations), 1.0)
    np.testing.assert_allclose(
        rotations @ np.swapaxes(rotations, 1, 2), np.broadcast_to(np.eye(3), (40, 3, 3)), atol=1e-12
    )
    np.testing.assert_allclose(rotations[7], device_to_magnetic(force[7], field[7]))
    # Up comes out as up.
    np.testing.assert_allclose(
        np.einsum("nij,nj->ni", rotations, force)[:, 2], -np.linalg.norm(force, axis=1)
    )


@pytest.mark.parametrize(
    ("force", "field"),
    [([0, 0, G], [0, 0, 40.0]), ([0, 0, G], [0, 0, -40.0]), ([0, 0, 0], [1, 0, 0]), ([0, 0, G], [0, 0, 0])],
)
def test_a_field_along_gravity_gives_no_north(force, field):
    """Parallel or zero vectors raise AttitudeError, and such samples are not usable."""
    with pytest.raises(AttitudeError):
        device_to_magnetic(force, field)
    assert not usable_samples([force], [field])[0]


def test_samples_with_holes_are_not_usable():
    """NaN and infinite samples are told from good ones."""
    good, bad = [0.0, 1.0, G], [np.nan, 0.0, G]
    field = [3.0, 20.0, -40.0]
    usable = usable_samples([good, bad, good, [np.inf, 0, 0]], [field, field, [0.0, np.nan, 0.0], field])
    assert usable.tolist() == [True, False, False, False]


def test_triad_of_parallel_world_vectors_is_refused():
    """Two references along one line fix no rotation."""
    with pytest.raises(AttitudeError):
        triad([1, 0, 0], [0, 1, 0], [0, 0, 1], [0, 0, -2])


# Robust means ----


def cone(trend, plunge, scatter_deg, count, rng):
    """Axes scattered about a line, isotropically, with the root mean square angle given."""
    middle = line_vector(trend, plunge)
    noise = rng.normal(0.0, np.radians(scatter_deg) / np.sqrt(2.0), (count, 3))
    noise -= np.outer(noise @ middle, middle)
    return middle, middle + noise


@pytest.mark.parametrize("plunge", [0.0, 0.001, 45.0, 89.999, 90.0])
@pytest.mark.parametrize("trend", [0.0, 90.0, 179.9, 359.99])
def test_the_mean_of_axes_does_not_hang_on_their_signs(trend, plunge):
    """Horizontal, vertical and all between: flipping any of the samples changes nothing."""
    rng = np.random.default_rng(4)
    middle, axes = cone(trend, plunge, 2.0, 200, rng)
    mean = robust_axis_mean(axes)
    assert float(axis_angle_deg(mean.vector, middle)) < 0.5
    assert mean.scatter_deg == pytest.approx(2.0, rel=0.15)
    flipped = axes * rng.choice([-1.0, 1.0], (200, 1))
    again = robust_axis_mean(flipped)
    assert float(axis_angle_deg(mean.vector, again.vector)) < 1e-6
    assert again.scatter_deg == pytest.approx(mean.scatter_deg)
    assert mean.vector[2] >= 0.0


def test_spikes_do_not_draw_the_mean():
    """A tenth of the samples far off to one side are left out and counted."""
    rng = np.random.default_rng(6)
    middle, axes = cone(40.0, 20.0, 1.0, 180, rng)
    _, spikes = cone(90.0, 5.0, 1.0, 20, rng)
    mean = robust_axis_mean(np.concatenate([spikes, axes]))
    assert float(axis_angle_deg(mean.vector, middle)) < 0.3
    assert 20 <= mean.outliers <= 23
    assert mean.samples + mean.outliers == 200


def test_steady_sensors_keep_their_samples():
    """Equal samples have no scatter, and none is left out; nor where they differ in a last digit."""
    axes = np.tile(line_vector(33.0, 44.0), (50, 1))
    mean = robust_axis_mean(axes)
    assert mean.scatter_deg == pytest.approx(0.0, abs=1e-6)
    assert mean.outliers == 0
    axes[::7, 0] += 1e-5
    assert robust_axis_mean(axes).outliers == 0


def test_few_samples_are_all_kept():
    """From two to five samples nothing is left out; one is too few."""
    axes = line_vector([10.0, 12.0, 60.0], [20.0, 20.0, 20.0])
    assert robust_axis_mean(axes).samples == 3
    assert robust_axis_mean(axes[:2]).scatter_deg == pytest.approx(
        float(axis_angle_deg(axes[0], axes[1])) / np.sqrt(2.0), rel=1e-3
    )
    for few in (axes[:1], np.empty((0, 3))):
        with pytest.raises(TooFewReadingsError):
            robust_axis_mean(few)


@given(st.integers(2, 40), st.integers(0, 2**32 - 1))
def test_any_axes_have_a_mean(count, seed):
    """Axes without any order still have a mean, a scatter up to 90 degrees and at least half of them kept."""
    mean = robust_axis_mean(np.random.default_rng(seed).normal(size=(count, 3)))
    assert np.linalg.norm(mean.vector) == pytest.approx(1.0)
    assert 0.0 <= mean.scatter_deg <= 130.0  # up to 90 from each, over n - 1
    assert mean.samples >= count / 2


# Motion and drift ----


def test_a_tablet_at_rest_does_not_move():
    """Noise of ordinary sensors, a sensor that is off by 3%, and a few spikes are rest."""
    rng = np.random.default_rng(8)
    still = np.array([1.0, 2.0, 9.5]) + rng.normal(0.0, 0.08, (100, 3))
    assert not moving(still)
    assert not moving(still * 1.03)
    spiked = still.copy()
    spiked[::20] += 5.0
    assert not moving(spiked)
    assert not moving(np.empty((0, 3)))


def test_shaking_lifting_and_falling_move():
    """A shaking hand, a steady pull and free fall are motion."""
    seconds = np.arange(0.0, 1.0, 0.02)
    shaken = np.array([0.0, 0.0, G]) + np.outer(np.sin(40.0 * seconds), [0.3, 0.2, 0.6])
    assert moving(shaken)
    assert moving(np.tile([0.0, 0.0, G + 0.8], (20, 1)))
    assert moving(np.zeros((5, 3)))


def test_slow_turning_is_told_from_noise():
    """Turning by some degrees a second is drift; noise of 3 degrees about one attitude is none."""
    rng = np.random.default_rng(10)
    turning = line_vector(40.0 + np.linspace(0.0, 6.0, 60), 20.0)
    assert drifted(turning)
    resting = [drifted(cone(40.0, 20.0, 3.0, 60, rng)[1]) for _ in range(50)]
    assert sum(resting) == 0
    assert not drifted(turning[:5])


# The field ----


def felt(strength=50.0, inclination=60.0):
    """Samples of a tablet lying flat in such a field."""
    dip = np.radians(inclination)
    field = strength * np.array([0.0, np.cos(dip), -np.sin(dip)])
    return np.tile([0.0, 0.0, G], (10, 1)), np.tile(field, (10, 1))


def test_the_expected_field_fits():
    """A field of the model's strength and inclination passes, with small deviations stated."""
    check = check_field(*felt(52.0, 61.0), EXPECTED)
    assert check.fits
    assert check.expected
    assert check.strength_off_share == pytest.approx(0.04)
    assert check.inclination_off_deg == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("strength", "inclination", "words"),
    [
        (60.0, 60.0, "60 µT where 50"),
        (40.0, 60.0, "40 µT"),
        (50.0, 70.0, "dips 70°"),
        (50.0, -60.0, "dips -60°"),
    ],
)
def test_iron_near_is_told_with_its_figures(strength, inclination, words):
    """A field too strong, too weak or at another dip says so, and what was expected."""
    check = check_field(*felt(strength, inclination), EXPECTED)
    assert not check.fits
    assert check.message.startswith("iron near, or calibrate the compass")
    assert words in check.message


def test_the_share_that_counts_as_off_can_be_set():
    """The same field passes or not by the limits given."""
    assert not check_field(*felt(54.0), EXPECTED, strength_share=0.05).fits
    assert not check_field(*felt(50.0, 63.0), EXPECTED, inclination_limit_deg=2.0).fits


def test_without_a_model_only_an_impossible_field_is_caught():
    """Without a position the check says that it did not check, and still refuses what no place has."""
    check = check_field(*felt(50.0), None)
    assert (check.fits, check.expected, check.strength_off_share) == (True, False, None)
    assert "not checked" in check.message
    assert not check_field(*felt(90.0), None).fits
    assert not check_field(*felt(10.0), None).fits


def test_a_spike_does_not_set_off_the_field_check():
    """One sample in ten of a field ten times as strong is passed over."""
    force, field = felt()
    field[3] *= 10.0
    assert check_field(force, field, EXPECTED).fits
