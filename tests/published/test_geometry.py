"""Planes, lines, fold axes and rotations against published figures and against scipy.

Planes are written dip direction/dip and lines trend/plunge where nothing else is said. Where a figure was not
read in a publication, the comment says "computed": with vector algebra written apart from this package
(numpy 2, Python 3.11), to the digits given.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from analysis.orient import vectors
from analysis.orient.attitudes import Line, Plane
from analysis.orient.notation import Notation, read_line, read_plane

LAST_DIGIT = 0.0005001  # half a unit in the third decimal, which is the last one given


def plane(text):
    return read_plane(text, Notation.DIP_DIRECTION_DIP).plane


def principal_axes(planes):
    """Eigenvalues (ascending, sum 1) and axes of the orientation tensor of the planes' poles."""
    poles = np.array([p.pole for p in planes])
    return np.linalg.eigh(poles.T @ poles / len(poles))


def assert_line(line, trend_deg, plunge_deg, tolerance_deg=LAST_DIGIT):
    assert line.trend_deg == pytest.approx(trend_deg, abs=tolerance_deg)
    assert line.plunge_deg == pytest.approx(plunge_deg, abs=tolerance_deg)


def test_two_planes_meet_as_in_hudson_and_harrison():
    """Hudson & Harrison, Engineering Rock Mechanics, appendix B: 266/36 and 146/59 meet in 219/26."""
    line = plane("266/36").intersection(plane("146/59"))
    assert (round(line.trend_deg), round(line.plunge_deg)) == (219, 26)
    # The exact figures behind the book's whole degrees: computed.
    assert_line(line, 218.759, 26.256)


@pytest.mark.parametrize(
    ("first", "second", "trend_deg", "plunge_deg"),
    [
        # Computed.
        ("110/50", "340/35", 38.092, 20.309),
        # Two limbs of a fold and their axis: computed.
        ("105/22", "340/40", 52.825, 13.916),
    ],
)
def test_two_planes_meet(first, second, trend_deg, plunge_deg):
    assert_line(plane(first).intersection(plane(second)), trend_deg, plunge_deg)


def test_the_pi_axis_of_six_planes():
    """Six planes drawn from an axis 060/25 and rounded to whole degrees; axis and eigenvalues computed."""
    planes = [plane(text) for text in ("141/72", "127/50", "092/29", "037/27", "001/42", "341/67")]
    values, axes = principal_axes(planes)
    axis = Line.from_vector(axes[:, 0])
    assert_line(axis, 59.748, 25.036)
    np.testing.assert_allclose(values[::-1], [0.563236, 0.436760, 4.53e-6], rtol=0, atol=5e-7)
    assert values[0] == pytest.approx(4.53e-6, rel=2e-3)
    assert axis.angle_deg(Line(60, 25)) < 0.5


def test_the_apparent_dip_on_an_oblique_section():
    """A dip of 40 on a section 30 off the strike: 22.760 (tan a = tan 40 sin 30, computed)."""
    assert Plane(0, 40).apparent_dip_deg(30) == pytest.approx(22.760, abs=LAST_DIGIT)
    assert Plane(350, 40).apparent_dip_deg(20) == pytest.approx(22.760, abs=LAST_DIGIT)


def test_the_line_at_a_pitch():
    """Pitch 40 from the north end in 090/60: 022.760/33.826 (sin plunge = sin 40 sin 60, computed)."""
    assert_line(plane("090/60").line_at_pitch(40, 0), 22.760, 33.826)
    entry = read_line("40N on 090/60", Notation.PITCH_ON_DIP_DIRECTION_DIP)
    assert_line(entry.line, 22.760, 33.826)


def test_the_plane_through_two_lines():
    """The plane through 000/20 and 070/35: dip direction 059.287, dip 35.475 (computed)."""
    through = Line(0, 20).plane_with(Line(70, 35))
    assert through.dip_direction_deg == pytest.approx(59.287, abs=LAST_DIGIT)
    assert through.dip_deg == pytest.approx(35.475, abs=LAST_DIGIT)


def test_unfolding_a_limb_turns_its_line():
    """Bed 250/35 (strike 160) laid flat about its strike turns line 310/40 to 294.190/17.869 (computed)."""
    bed = plane("250/35")
    assert bed.strike_deg == 160
    turn = Rotation.from_rotvec(-np.radians(bed.dip_deg) * vectors.line_vector(bed.strike_deg, 0))
    np.testing.assert_allclose(turn.apply(bed.pole), vectors.DOWN, atol=1e-12)
    assert_line(Line.from_vector(turn.apply(Line(310, 40).vector)), 294.190, 17.869)


def rotations(count=200):
    return Rotation.random(count, random_state=np.random.default_rng(7))


def random_axes(count=200, seed=8):
    return vectors.unit(np.random.default_rng(seed).normal(size=(count, 3)))


def test_directions_are_rotations_of_north_as_scipy_makes_them():
    """Down by the plunge about east, then clockwise by the trend about down (scipy Rotation)."""
    rng = np.random.default_rng(9)
    trend, plunge = rng.uniform(0, 360, 200), rng.uniform(0, 90, 200)
    expected = Rotation.from_euler("ZY", np.column_stack([trend, -plunge]), degrees=True).apply([1, 0, 0])
    np.testing.assert_allclose(vectors.line_vector(trend, plunge), expected, atol=1e-14)


def test_poles_are_rotations_of_down_as_scipy_makes_them():
    """Down tilted by the dip about the strike line (scipy Rotation), as an axis."""
    rng = np.random.default_rng(10)
    strike, dip = rng.uniform(0, 360, 200), rng.uniform(0, 90, 200)
    tilt = Rotation.from_rotvec(np.radians(dip)[:, None] * vectors.line_vector(strike, 0.0))
    np.testing.assert_allclose(vectors.pole_vector(strike, dip), tilt.apply(vectors.DOWN), atol=1e-14)


def test_angles_between_axes_are_the_turns_scipy_needs_to_align_them():
    """Acute angle between two axes against the size of the smallest rotation between them (scipy)."""
    first, second = random_axes(seed=11), random_axes(seed=12)
    for a, b in zip(first, second, strict=True):
        toward = b if a @ b >= 0 else -b
        # Two further vectors, across both, leave the aligning rotation no freedom.
        across = np.cross(a, toward)
        turn, _ = Rotation.align_vectors(
            np.array([toward, across]), np.array([a, across]), weights=np.array([np.inf, 1.0])
        )
        assert float(vectors.axis_angle_deg(a, b)) == pytest.approx(np.degrees(turn.magnitude()), abs=1e-6)


def test_intersections_turn_with_their_planes():
    """The line in which two turned planes meet is the turned line (scipy Rotation)."""
    pairs = zip(random_axes(seed=13), random_axes(seed=14), rotations(), strict=True)
    for one, two, turn in pairs:
        line = Plane.from_pole(one).intersection(Plane.from_pole(two))
        turned = Plane.from_pole(turn.apply(one)).intersection(Plane.from_pole(turn.apply(two)))
        assert vectors.axis_angle_deg(turned.vector, turn.apply(line.vector)) < 1e-6


def test_the_pi_axis_turns_with_its_planes():
    """Eigenvalues stay and the axis turns when all planes are turned alike (scipy Rotation)."""
    planes = [plane(text) for text in ("141/72", "127/50", "092/29", "037/27", "001/42", "341/67")]
    values, axes = principal_axes(planes)
    for turn in rotations(20):
        turned_values, turned_axes = principal_axes([Plane.from_pole(turn.apply(p.pole)) for p in planes])
        np.testing.assert_allclose(turned_values, values, atol=1e-12)
        assert vectors.axis_angle_deg(turned_axes[:, 0], turn.apply(axes[:, 0])) < 1e-6
