"""The picture of a plan."""

import numpy as np
import pytest

from analysis.errors import SettingError
from analysis.fold.planning import plan
from analysis.report.planning_figure import draw_plan_of_readings
from analysis.report.sheet import save
from analysis.stats.synthetic import FoldDesign

DESIGN = FoldDesign(bedding_scatter_deg=4.0, cleavage_scatter_deg=3.0)


@pytest.fixture(scope="module")
def planned():
    return plan(DESIGN, folds=40, most_readings=80)


def texts_of(figure):
    return [text for axes in figure.axes for text in axes.texts]


def test_every_transection_has_its_curve_and_its_words(planned):
    """Curves are named where they run, so that colour is not needed to tell them apart."""
    figure = draw_plan_of_readings(planned)
    labels = {text.get_text() for text in texts_of(figure)}
    assert {"0°", "2.5°", "5°", "7.5°", "10°", "15°"} <= labels
    lines = {line.get_gid(): line for axes in figure.axes for line in axes.lines}
    for number, curve in enumerate(planned.power):
        np.testing.assert_allclose(lines[f"power-{number}"].get_ydata(), 100.0 * curve)


def test_readings_are_drawn_against_the_transection(planned):
    """The lines for half and for four in five hold the plan's own numbers."""
    lines = {line.get_gid(): line for axes in draw_plan_of_readings(planned).axes for line in axes.lines}
    medians = [np.nan if row.median is None else row.median.total for row in planned.rows]
    np.testing.assert_array_equal(lines["half-of-folds"].get_ydata(), medians)
    np.testing.assert_array_equal(lines["half-of-folds"].get_xdata(), [0.0, 2.5, 5.0, 7.5, 10.0, 15.0])


def test_labels_of_curves_do_not_cover_each_other(planned):
    """No two of the words on the left overlap."""
    figure = draw_plan_of_readings(planned)
    figure.canvas.draw()
    boxes = [
        text.get_window_extent()
        for text in texts_of(figure)
        if (text.get_gid() or "").startswith("power-label")
    ]
    assert len(boxes) == len(planned.rows)
    assert not any(a.overlaps(b) for i, a in enumerate(boxes) for b in boxes[:i])


def test_a_fold_that_does_not_settle_is_marked_at_the_top():
    """A transection without a median gets a mark of its own, which the key explains."""
    rough = FoldDesign(bedding_scatter_deg=10.0, cleavage_scatter_deg=9.0)
    figure = draw_plan_of_readings(plan(rough, transections_deg=(0.0, 40.0), folds=20, most_readings=40))
    lines = {line.get_gid(): line for axes in figure.axes for line in axes.lines}
    assert list(lines["never"].get_xdata()) == [0.0]
    key = [
        text.get_text() for axes in figure.axes if axes.get_legend() for text in axes.get_legend().get_texts()
    ]
    assert "half not by 40" in key


@pytest.mark.parametrize("theme", ["light", "dark"])
def test_the_picture_is_written_both_ways(planned, theme, tmp_path):
    """It can be saved as PNG and as SVG, and twice the same."""
    for ending in ("png", "svg"):
        paths = [tmp_path / f"{n}.{ending}" for n in range(2)]
        for path in paths:
            save(draw_plan_of_readings(planned, theme=theme), path)
        assert paths[0].read_bytes() == paths[1].read_bytes()


def test_an_unknown_theme_is_refused(planned):
    """Only light and dark are known."""
    with pytest.raises(SettingError, match="light or dark"):
        draw_plan_of_readings(planned, theme="sepia")
