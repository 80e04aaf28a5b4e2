"""Lines as triangles: where they lie and how wide they are."""

from __future__ import annotations

import numpy as np
import pytest

from fieldapp.drawing import strokes


def area(mesh):
    """Give the area of a mesh's triangles, in square pixels."""
    corners = mesh.vertices[:, :2][mesh.indices.reshape(-1, 3)].astype(float)
    one, two = corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]
    return float(np.abs(one[:, 0] * two[:, 1] - one[:, 1] * two[:, 0]).sum() / 2)


def test_a_straight_line_covers_its_length_times_its_width():
    """A line of 100 by 4 pixels with a soft edge of 1 pixel covers 100 by 5."""
    assert area(strokes.line([(0, 0), (100, 0)], 4.0)) == pytest.approx(500.0)


def test_the_edge_is_soft_and_the_middle_solid():
    """The outer vertices are clear and the inner ones solid."""
    mesh = strokes.line([(0, 0), (10, 0)], 4.0)
    outer = np.abs(mesh.vertices[:, 1]) > 2.0
    assert set(mesh.vertices[outer, 2]) == {np.float32(strokes.SOFT)}
    assert set(mesh.vertices[~outer, 2]) == {np.float32(strokes.SOLID)}


def test_a_corner_keeps_the_width():
    """At a right angle the mitre lies on the corner's diagonal."""
    mesh = strokes.line([(0, 0), (10, 0), (10, 10)], 2.0, soft=0.0)
    corner = mesh.vertices[4:8, :2]
    assert np.allclose(corner[0], (9.0, 1.0))
    assert np.allclose(corner[-1], (11.0, -1.0))


def test_a_sharp_turn_back_stays_near():
    """A line that turns back on itself has no spike longer than the mitre limit."""
    mesh = strokes.line([(0, 0), (10, 0), (0, 0.001)], 2.0)
    assert mesh.vertices[:, 0].max() < 10.0 + strokes.MITRE_LIMIT * 2.0


def test_a_closed_line_meets_itself():
    """A closed square covers its four sides without a gap at the first corner."""
    square = [(0, 0), (10, 0), (10, 10), (0, 10)]
    assert area(strokes.line(square, 2.0, closed=True, soft=0.0)) == pytest.approx(80.0)


@pytest.mark.parametrize("points", [[], [(1, 2)]])
def test_too_few_points_draw_nothing(points):
    """No point and one point make no line."""
    assert not strokes.line(points, 2.0)
    assert not strokes.dashed(points, 2.0, 3.0, 3.0)


def test_two_equal_points_draw_no_nan():
    """A step of length zero gives finite vertices."""
    assert np.isfinite(strokes.line([(1, 1), (1, 1), (5, 1)], 2.0).vertices).all()


def test_dashes_have_their_length_and_gaps():
    """A line of 10 in dashes of 3 with gaps of 2 covers two dashes of 3 by its width."""
    mesh = strokes.dashed([(0, 0), (10, 0)], 2.0, 3.0, 2.0)
    assert area(mesh) == pytest.approx(2 * 3.0 * 3.0)
    assert sorted(set(np.round(mesh.vertices[:, 0], 6))) == [0.0, 3.0, 5.0, 8.0]


def test_the_last_dash_ends_with_the_line():
    """A dash that the line is too short for is cut off."""
    assert strokes.dashed([(0, 0), (6, 0)], 2.0, 3.0, 2.0).vertices[:, 0].max() == pytest.approx(6.0)


def test_many_straight_lines_cover_as_much_as_one_by_one():
    """Drawing straight lines at once covers what drawing each alone does."""
    starts = np.array([[0, 0], [5, 5], [9, 1]], dtype=float)
    ends = np.array([[10, 0], [5, 25], [1, 7]], dtype=float)
    alone = sum(area(strokes.line(pair, 3.0)) for pair in zip(starts, ends, strict=True))
    assert area(strokes.segments(starts, ends, 3.0)) == pytest.approx(alone)


def test_a_polygon_covers_its_area():
    """A filled square of 10 covers 100."""
    assert area(strokes.polygon([(0, 0), (10, 0), (10, 10), (0, 10)])) == pytest.approx(100.0)


def test_the_strip_between_two_lines_covers_its_area():
    """The strip between y = 0 and y = 2 over 10 covers 20."""
    x = np.linspace(0, 10, 7)
    assert area(strokes.between(np.stack([x, x * 0 + 2], 1), np.stack([x, x * 0], 1))) == pytest.approx(20.0)


def test_joined_meshes_keep_their_triangles():
    """Joining meshes keeps every area and shifts the indices."""
    parts = [strokes.line([(0, y), (10, y)], 2.0) for y in range(0, 100, 10)]
    whole = strokes.joined([*parts, strokes.NOTHING])
    assert area(whole) == pytest.approx(sum(area(part) for part in parts))
    assert not strokes.joined([])


def test_a_pattern_repeats_its_dashes_and_gaps():
    """Dashes of 8 and 2 with gaps of 4 and 4 lie at 0 to 8, 12 to 14, 18 to 26; no pattern is a whole line."""
    line = [(0, 0), (30, 0)]
    mesh = strokes.patterned(line, 2.0, (8.0, 4.0, 2.0, 4.0))
    ends = sorted({float(x) for x in mesh.vertices[:, 0]})
    assert ends == pytest.approx([0.0, 8.0, 12.0, 14.0, 18.0, 26.0])
    assert area(strokes.patterned(line, 2.0, ())) == pytest.approx(area(strokes.line(line, 2.0)))
