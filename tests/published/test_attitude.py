"""The attitude against other libraries: scipy's Rotation.align_vectors, and ahrs 0.4.0 (MIT), frozen."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from analysis.orient.attitude import (
    STANDARD_GRAVITY,
    Laid,
    device_to_magnetic,
    robust_axis_mean,
    sampled_axes,
    triad,
    usable_samples,
)
from analysis.orient.attitudes import Line, Plane
from analysis.orient.vectors import axis_angle_deg

# ahrs.common.orientation.ecompass(acceleration, field, frame="ENU"): rows east, north, up, device frame
ECOMPASS = [
    (
        (0.3, -0.2, 9.8),
        (3.0, 18.0, -45.0),
        ((0.968112633, -0.248100549, -0.034699378),
         (0.248640477, 0.968519585, 0.012154263),
         (0.030591547, -0.020394365, 0.999323885)),
    ),
    (
        (4.1, -5.2, 7.1),
        (-22.0, 14.0, -38.0),
        ((-0.864857592, 0.003522842, 0.502004916),
         (-0.271449498, -0.844465200, -0.461729028),
         (0.422299084, -0.535598838, 0.731298413)),
    ),
    (
        (-6.3, 2.2, -7.1),
        (10.0, -31.0, 33.0),
        ((0.555396028, -0.515482822, -0.652543265),
         (-0.522954821, -0.826618349, 0.207895071),
         (-0.646570574, 0.225786550, -0.728674774)),
    ),
    (
        (9.79, 0.4, -0.3),
        (-41.0, 12.0, 22.0),
        ((-0.050912498, 0.833815329, -0.549690744),
         (0.003087733, 0.550533343, 0.834807465),
         (0.998698345, 0.040804835, -0.030603626)),
    ),
    (
        (0.1, 9.7, 1.2),
        (25.0, -43.0, 8.0),
        ((-0.461265275, -0.104248808, 0.881116639),
         (0.887203290, -0.065643547, 0.456685063),
         (0.010230748, 0.992382543, 0.122768974)),
    ),
    (
        (-2.0, -9.5, -1.5),
        (19.0, 30.0, -12.0),
        ((-0.770742079, 0.254490309, -0.584115853),
         (0.603743215, -0.001233640, -0.797177903),
         (-0.203594639, -0.967074537, -0.152695980)),
    ),
]  # fmt: skip
# Field strength in uT and inclination: mid latitudes, near the equator, far north.
FIELDS = [(50.0, 66.0), (42.0, -15.0), (57.0, 76.0)]


def world_vectors(strength_uT, inclination_deg):
    """Specific force at rest and the field, in magnetic north, east, down."""
    dip = np.radians(inclination_deg)
    return np.array([0.0, 0.0, -STANDARD_GRAVITY]), strength_uT * np.array([np.cos(dip), 0.0, np.sin(dip)])


def all_orientations():
    """Device-to-world rotations: random ones, every quadrant, vertical both ways, flat, upside down."""
    turns = [0.0, 45.0, 90.0, 135.0, 180.0, 225.0, 270.0, 315.0, 359.999]
    tips = [0.0, 1e-6, 30.0, 89.9999, 90.0, 120.0, 179.9999, 180.0]
    fixed = Rotation.from_euler("ZX", [(turn, tip) for turn in turns for tip in tips], degrees=True)
    return np.concatenate([Rotation.random(400, random_state=7).as_matrix(), fixed.as_matrix()])


def angle_deg(first, second):
    """Angle of the rotation that leads from one matrix to another."""
    return np.degrees((Rotation.from_matrix(first) * Rotation.from_matrix(second).inv()).magnitude())


@pytest.mark.parametrize(("strength", "inclination"), FIELDS)
def test_triad_finds_every_orientation(strength, inclination):
    """Noise-free sensors give back the orientation simulated, as scipy finds it too, to 0.01 degrees."""
    up, field = world_vectors(strength, inclination)
    for truth in all_orientations():
        force, felt = truth.T @ up, truth.T @ field
        found = device_to_magnetic(force, felt)
        independent, _ = Rotation.align_vectors([up, field], [force, felt], weights=[np.inf, 1.0])
        assert angle_deg(found, independent.as_matrix()) < 0.01
        assert angle_deg(found, truth) < 0.01


def test_triad_trusts_gravity_where_the_two_disagree():
    """With noise in both sensors TRIAD is scipy's alignment that keeps the first vector exactly."""
    rng = np.random.default_rng(11)
    up, field = world_vectors(50.0, 60.0)
    for truth in Rotation.random(100, random_state=rng).as_matrix():
        force = truth.T @ up + rng.normal(0.0, 0.3, 3)
        felt = truth.T @ field + rng.normal(0.0, 3.0, 3)
        found = triad(force, felt, up, field)
        independent, _ = Rotation.align_vectors([up, field], [force, felt], weights=[np.inf, 1.0])
        assert angle_deg(found, independent.as_matrix()) < 0.01


@pytest.mark.parametrize(("force", "felt", "east_north_up"), ECOMPASS)
def test_another_librarys_compass_agrees(force, felt, east_north_up):
    """The rotation, reordered from east, north, up, is that of ahrs's ecompass to the nine decimals kept."""
    east, north, up = np.array(east_north_up)
    np.testing.assert_allclose(device_to_magnetic(force, felt), [north, east, -up], atol=2e-9)


def test_planes_and_lines_come_out_as_laid():
    """A tablet laid on a plane, face up or down, or along a line, reads that plane or line."""
    up, field = world_vectors(48.0, 60.0)
    rng = np.random.default_rng(5)
    for strike, dip in [(0, 30), (45, 60), (135, 10), (225, 89), (300, 90), (359.9, 45), (90, 0.5)]:
        plane = Plane(strike, dip)
        for sign in (1.0, -1.0):
            # Device z along the pole, turned at random about it.
            frame, _ = Rotation.align_vectors([sign * plane.pole], [[0.0, 0.0, 1.0]])
            truth = (frame * Rotation.from_euler("z", rng.uniform(0, 360), degrees=True)).as_matrix()
            axis = sampled_axes(truth.T @ up, truth.T @ field, Laid.ON_PLANE)
            assert axis_angle_deg(axis, plane.pole) < 0.01
    for trend, plunge in [(0, 0), (77, 20), (181, 45), (270, 70), (10, 89.9)]:
        line = Line(trend, plunge)
        for laid, edge in [(Laid.ALONG_Y, [0.0, 1.0, 0.0]), (Laid.ALONG_X, [1.0, 0.0, 0.0])]:
            frame, _ = Rotation.align_vectors([line.vector], [edge])
            truth = frame.as_matrix()
            axis = sampled_axes(truth.T @ up, truth.T @ field, laid)
            assert axis_angle_deg(axis, line.vector) < 0.01


def noisy_axes(truth, count, field_at, rng):
    """Axes of a noisy trace, 0.05 m/s² and 1 uT with 3% spikes, and those among them that are no spikes."""
    up, field = world_vectors(*field_at)
    force = truth.T @ up + rng.normal(0.0, 0.05, (count, 3))
    felt = truth.T @ field + rng.normal(0.0, 1.0, (count, 3))
    spike = rng.random(count) < 0.03
    force[spike] += rng.normal(0.0, 3.0, (np.count_nonzero(spike), 3))
    felt[spike] += rng.normal(0.0, 30.0, (np.count_nonzero(spike), 3))
    usable = usable_samples(force, felt)
    axes = sampled_axes(force[usable], felt[usable], Laid.ON_PLANE)
    return axes, axes[~spike[usable]]


@pytest.mark.parametrize(("strength", "inclination"), FIELDS[:2])
def test_noise_and_spikes_leave_the_mean_and_the_scatter(strength, inclination):
    """From 150 noisy samples with spikes the mean is within 1 degree and the scatter within 20% of truth."""
    rng = np.random.default_rng(29)
    for truth in Rotation.random(60, random_state=rng).as_matrix():
        axes, _ = noisy_axes(truth, 150, (strength, inclination), rng)
        # The true scatter: that of a long trace without spikes about the true pole.
        _, clean = noisy_axes(truth, 20_000, (strength, inclination), rng)
        true_scatter = np.sqrt(np.mean(axis_angle_deg(clean, truth[:, 2]) ** 2))
        mean = robust_axis_mean(axes)
        assert axis_angle_deg(mean.vector, truth[:, 2]) < 1.0
        assert mean.scatter_deg == pytest.approx(true_scatter, rel=0.2)
        assert 0 < mean.outliers < 20


def test_the_scatter_of_one_second_is_that_of_its_good_samples():
    """From 50 samples the scatter is within 20% of that of the samples among them that are no spikes."""
    rng = np.random.default_rng(31)
    for truth in Rotation.random(60, random_state=rng).as_matrix():
        axes, good = noisy_axes(truth, 50, FIELDS[0], rng)
        drawn = np.sqrt(np.mean(axis_angle_deg(good, truth[:, 2]) ** 2))
        assert robust_axis_mean(axes).scatter_deg == pytest.approx(drawn, rel=0.2)


def test_the_stated_error_of_the_mean_is_true():
    """The root mean square error of many means equals the standard error stated, within 15%."""
    rng = np.random.default_rng(37)
    truth = Rotation.from_euler("ZX", (40.0, 55.0), degrees=True).as_matrix()
    means = [robust_axis_mean(noisy_axes(truth, 80, FIELDS[0], rng)[0]) for _ in range(400)]
    errors = np.array([float(axis_angle_deg(mean.vector, truth[:, 2])) for mean in means])
    stated = np.sqrt(np.mean([mean.standard_error_deg**2 for mean in means]))
    assert np.sqrt(np.mean(errors**2)) == pytest.approx(stated, rel=0.15)
