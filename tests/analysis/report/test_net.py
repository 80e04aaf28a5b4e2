"""The net for print: what is drawn is what was computed, and words keep clear of it."""

import numpy as np
import pytest

from analysis.errors import SettingError
from analysis.fold.words import figure_line, headline
from analysis.orient.curves import ellipse, lower_pieces, net_xy
from analysis.orient.features import Feature
from analysis.orient.vectors import axis_angle_deg, equal_area_xy, line_vector, vector_from_equal_area_xy
from analysis.report.net import crowds, draw_net


def test_readings_lie_where_the_projection_puts_them(case, net, find):
    """Each reading's marker is at its place on the equal-area net, and none is left out."""
    figure = net
    for feature, vectors in case.readings.items():
        marks = find(figure, f"readings-{feature}")
        if not len(vectors):
            assert marks is None
            continue
        np.testing.assert_allclose(marks.get_offsets(), equal_area_xy(vectors), atol=1e-12)


def test_great_circles_lie_at_right_angles_to_their_axes(case, net, find):
    """The girdle is 90 degrees from the hinge all along, the cleavage circle 90 degrees from its pole."""
    figure = net
    for gid, axis in (
        ("girdle", case.check.hinge if case.check.readings.bedding else None),
        ("cleavage-circle", case.check.cleavage),
    ):
        line = find(figure, gid)
        if axis is None:
            assert line is None
            continue
        vectors = vector_from_equal_area_xy(line.get_xydata())
        np.testing.assert_allclose(axis_angle_deg(vectors, axis.vector), 90.0, atol=1e-6)


def test_means_and_their_ellipses_are_those_of_the_check(case, net, find):
    """Hinge and mean intersection lie on their axes, and their ellipses hold the half-angles of the check."""
    figure = net
    mean = case.check.intersection
    for gid, estimate in (("hinge", case.check.hinge), ("intersection", None if mean is None else mean.axis)):
        marker = find(figure, gid)
        drawn = [line for k in range(2) if (line := find(figure, f"{gid}-ellipse-{k}")) is not None]
        if estimate is None:
            assert marker is None
            assert drawn == []
            continue
        np.testing.assert_allclose(marker.get_xydata()[0], equal_area_xy(estimate.vector), atol=1e-12)
        if estimate.ellipse is None:
            assert drawn == []
            continue
        e = estimate.ellipse
        expected = lower_pieces(
            ellipse(estimate.vector, e.major_axis, e.minor_axis, e.major_deg, e.minor_deg)
        )
        assert len(drawn) == len(expected)
        away = []
        for line, piece in zip(drawn, expected, strict=True):
            np.testing.assert_allclose(line.get_xydata(), net_xy(piece), atol=1e-12)
            vectors = vector_from_equal_area_xy(line.get_xydata())
            away.append(axis_angle_deg(vectors, estimate.vector))
        away = np.concatenate(away)
        assert away.max() == pytest.approx(min(e.major_deg, 89.5), abs=1e-3)
        assert away.min() == pytest.approx(min(e.minor_deg, 89.5), rel=2e-2)


def test_level_hinge_has_its_ellipse_on_both_sides(fold, find):
    """An ellipse that crosses the rim comes back on the other side of the net."""
    drawn = fold(hinge=(3.0, 1.0), counts=(16, 9, 5, 2), scatter_deg=6.0)
    figure = draw_net(drawn.check, drawn.readings)
    pieces = [find(figure, f"hinge-ellipse-{k}").get_xydata() for k in range(2)]
    ends = np.array([[piece[0], piece[-1]] for piece in pieces])
    np.testing.assert_allclose(np.linalg.norm(ends, axis=-1), 1.0, atol=1e-12)
    np.testing.assert_allclose(ends[0], -ends[1][::-1], atol=1e-6)


def test_words_do_not_collide(net, collisions):
    """No words overlap other words or leave the sheet."""
    assert collisions(net) == []


def test_labels_keep_off_the_readings(case, net, find):
    """No label on the net covers the middle of a reading or of a mean."""
    figure = net
    figure.canvas.draw()
    labels = figure.findobj(
        lambda a: str(a.get_gid() or "").startswith(("label-", "letter-")) and hasattr(a, "get_text")
    )
    axes = find(figure, "rim").axes
    places = [equal_area_xy(vectors) for vectors in case.readings.values()]
    means = [find(figure, gid) for gid in ("hinge", "intersection")]
    places += [mean.get_xydata() for mean in means if mean is not None]
    pixels = axes.transData.transform(np.concatenate(places).reshape(-1, 2))
    covered = {}
    for label in labels:
        box = label.get_window_extent()
        x, y = pixels.T
        inside = (x > box.x0) & (x < box.x1) & (y > box.y0) & (y < box.y1)
        if inside.any():
            covered[label.get_text()] = int(inside.sum())
    assert covered == {}


def test_every_feature_read_is_named_by_its_letter(case, net, texts):
    """Each feature with readings has its letter on the net as well as in the key, so that colour is not needed."""
    drawn = [text for text, _ in texts(net)]
    for feature, letter in zip(Feature, "BCLH", strict=True):
        on_net = drawn.count(letter) - 1
        assert on_net in ((1, 2) if len(case.readings[feature]) else (0,))


def test_features_differ_by_marker(fold, find):
    """No two features share the shape of their marker."""
    drawn = fold(counts=(5, 4, 3, 2))
    figure = draw_net(drawn.check, drawn.readings)
    shapes = {find(figure, f"readings-{f}").get_paths()[0].vertices.tobytes() for f in Feature}
    assert len(shapes) == 4


def test_counts_and_verdict_stand_beside_the_net(case, net, find, texts):
    """The key counts the readings, and the strip says the verdict and its figure in the check's own words."""
    figure = net
    for feature in Feature:
        assert find(figure, f"count-{feature}").get_text() == str(case.check.readings.of(feature))
    words = " ".join(text for text, _ in texts(figure))
    assert headline(case.check) in words
    assert figure_line(case.check) in words


def test_north_is_up_and_ticks_stand_every_ten_degrees(fold, find):
    """The N stands above the net, and the tick of azimuth 090 points east."""
    drawn = fold()
    figure = draw_net(drawn.check, drawn.readings)
    assert find(figure, "north").get_position()[1] > 1.0
    np.testing.assert_allclose(find(figure, "tick-090").get_xydata()[0], [1.0, 0.0], atol=1e-12)
    ticks = [find(figure, f"tick-{azimuth:03d}") for azimuth in range(0, 360, 10)]
    assert all(tick is not None for tick in ticks)


def test_a_feature_left_out_is_a_feature_without_readings(fold, find):
    """A mapping without some feature draws the others."""
    drawn = fold()
    figure = draw_net(drawn.check, {Feature.BEDDING: drawn.readings[Feature.BEDDING]})
    assert find(figure, "readings-bedding") is not None
    assert find(figure, "readings-cleavage") is None


def test_sign_of_an_axis_does_not_matter(fold, find):
    """Readings given by their upper ends are drawn where their lower ends are."""
    drawn = fold()
    flipped = {feature: -vectors for feature, vectors in drawn.readings.items()}
    one, other = (draw_net(drawn.check, readings) for readings in (drawn.readings, flipped))
    for feature in (Feature.BEDDING, Feature.CLEAVAGE):
        gid = f"readings-{feature}"
        np.testing.assert_allclose(find(one, gid).get_offsets(), find(other, gid).get_offsets(), atol=1e-12)


def test_dusk_draws_the_same_geometry_on_a_dark_ground(fold, find):
    """The dark theme changes colours only."""
    drawn = fold()
    day, dusk = (draw_net(drawn.check, drawn.readings, theme=theme) for theme in ("light", "dark"))
    assert sum(day.get_facecolor()[:3]) > 2.5
    assert sum(dusk.get_facecolor()[:3]) < 0.5
    for gid in ("cleavage-circle", "girdle", "hinge-ellipse-0"):
        np.testing.assert_array_equal(find(day, gid).get_xydata(), find(dusk, gid).get_xydata())


def test_unknown_theme_is_refused(fold):
    """A theme that does not exist is named in the error."""
    drawn = fold()
    with pytest.raises(SettingError, match="'sepia' is no theme; expected light or dark"):
        draw_net(drawn.check, drawn.readings, theme="sepia")


def test_fold_name_with_signs_is_set_as_it_stands(fold, texts):
    """A name with dollar signs and underscores is no formula."""
    drawn = fold(fold="Mossgarth $a_1$ fold")
    assert "Mossgarth $a_1$ fold" in [text for text, _ in texts(draw_net(drawn.check, drawn.readings))]


def test_letters_go_to_both_limbs():
    """Two crowds of poles get a letter each, one crowd gets one, and no reading gets none."""
    limbs = line_vector([300.0, 302.0, 301.0, 120.0, 121.0], [30.0, 31.0, 32.0, 40.0, 41.0])
    assert [len(crowd) for crowd in crowds(limbs)] == [3, 2]
    assert len(crowds(limbs[:3])) == 1
    assert len(crowds(limbs[:1])) == 1
    assert crowds(np.zeros((0, 3))) == []
