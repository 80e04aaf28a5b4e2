import io
import itertools

import pytest

from analysis.report.fault_figures import plane_figure, region_figure, turning_figure
from analysis.strain.cautions import CAUTIONS
from analysis.strain.explanations import explain
from analysis.strain.frame import Sense
from analysis.strain.inverse import fitting_region
from analysis.strain.observed import Fault, FoldPair

CASES = [
    (Sense.SINISTRAL, 50.0, 9.0),
    (Sense.DEXTRAL, 3.0, -3.0),
    (Sense.UNKNOWN, 35.0, 1.0),
    (Sense.SINISTRAL, 100.0, -8.0),
    (Sense.SINISTRAL, 45.0, None),
]


def check_of(sense, trend_deg, transection_deg):
    pair = FoldPair(
        hinge_trend_deg=trend_deg, transection_deg=transection_deg, trend_variance_deg2=2.0, hinge_part_deg2=1.0,
        cleavage_part_deg2=1.2, covariance_deg2=-1.1, df=20.0, hinge_readings=30, cleavage_readings=20,
    )  # fmt: skip
    return explain(Fault(strike_deg=30.0, sense=sense, zone_width_km=4.0), pair, fold="Mossgarth fold")


def texts_of(figure):
    figure.canvas.draw()
    every = [*figure.texts, *(text for axes in figure.axes for text in axes.texts)]
    return [text for text in every if text.get_text()]


def assert_clear(figure):
    """No words on other words, and none outside the figure."""
    texts = texts_of(figure)
    boxes = [text.get_window_extent() for text in texts]
    boxes += [
        axes.get_tightbbox()
        for axes in figure.axes
        for axes in (axes.xaxis, axes.yaxis)
        if axes.get_visible()
    ]
    boxes = [box for box in boxes if box is not None and box.width > 0 and box.height > 0]
    for one, other in itertools.combinations(boxes[: len(texts)], 2):
        assert not one.overlaps(other), (one, other)
    width, height = figure.canvas.get_width_height()
    for box in boxes:
        assert box.x0 >= 0.0
        assert box.y0 >= 0.0
        assert box.x1 <= width
        assert box.y1 <= height


def assert_cautioned(figure):
    words = " ".join(" ".join(text.get_text() for text in texts_of(figure)).split())
    for caution in CAUTIONS:
        assert caution in words


@pytest.mark.parametrize(("sense", "trend_deg", "transection_deg"), CASES)
def test_the_plane_names_every_curve_and_nothing_covers_its_words(sense, trend_deg, transection_deg):
    """Each explanation is named beside its curve, no words overlap or leave the page, the cautions stand below."""
    figure = plane_figure(check_of(sense, trend_deg, transection_deg))
    words = {text.get_text() for text in texts_of(figure)}
    assert {
        "rotation",
        "partitioned",
        "transpression 20°",
        "transpression 45°",
        "late cleavage, after 50%",
    } <= words
    assert_clear(figure)
    assert_cautioned(figure)


@pytest.mark.parametrize(
    ("sense", "gamma", "gamma_late", "words"),
    [
        (Sense.SINISTRAL, 1.0, None, "transection 5.2° clockwise"),  # METHOD section 6: 5.152
        (Sense.DEXTRAL, 2.0, 1.0, "transection 13.3° anticlockwise"),  # METHOD section 6: (1, 1) 13.28
        (Sense.UNKNOWN, 0.0, None, "no cleavage yet"),
        (Sense.SINISTRAL, 12.0, None, "shear strain 12"),
    ],
)
def test_the_turning_folds_tell_their_angles(sense, gamma, gamma_late, words):
    """The map view says the transection it shows, with the sense of the fault, and stays clear and cautioned."""
    figure = turning_figure(gamma, sense=sense, fault_strike_deg=70.0, gamma_late=gamma_late)
    assert words in {text.get_text() for text in texts_of(figure)}
    assert_clear(figure)
    assert_cautioned(figure)


def test_the_region_is_drawn_with_its_cautions():
    """The region has an outline on both maps; one that nothing fits says so; both carry the cautions."""
    check = check_of(Sense.SINISTRAL, 50.0, 9.0)
    figure = region_figure(fitting_region(check.pair, check.fault, cells=(24, 30, 12)), fold="Mossgarth fold")
    assert all(axes.lines for axes in figure.axes)
    assert_clear(figure)
    assert_cautioned(figure)
    wrong_way = check_of(Sense.SINISTRAL, 50.0, -25.0)
    empty = region_figure(fitting_region(wrong_way.pair, wrong_way.fault, cells=(24, 30, 12)))
    assert [text.get_text() for axes in empty.axes for text in axes.texts] == ["nothing fits"] * 2


@pytest.mark.parametrize(("kind", "start"), [("png", b"\x89PNG"), ("svg", b"<?xml")])
def test_figures_are_written_as_pictures(kind, start):
    """A figure can be saved as PNG and as SVG."""
    target = io.BytesIO()
    plane_figure(check_of(*CASES[0])).savefig(target, format=kind)
    assert target.getvalue().startswith(start)
    assert len(target.getvalue()) > 10_000
