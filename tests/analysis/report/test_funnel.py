"""The funnel for print: curves are the history, the continuation is the forecast."""

from dataclasses import replace

import numpy as np
import pytest

from analysis.errors import SettingError
from analysis.fold.ahead import interval_ahead
from analysis.fold.check import check_fold
from analysis.fold.records import MoreReadings, Verdict
from analysis.fold.settings import CheckSettings
from analysis.orient.features import Feature
from analysis.report.funnel import (
    HistoryPoint,
    draw_funnel,
    history_of,
    settled_from,
    shown_span_deg,
    without_sense,
)
from analysis.stats.sums import RunningSums


def replayed(made, seed=5):
    """The checks after each reading, in a shuffled order, and the last one with its forecast."""
    order = [(feature, vector) for feature, vectors in made.readings.items() for vector in vectors]
    np.random.default_rng(seed).shuffle(shuffled := np.arange(len(order)))
    sums, checks = RunningSums(), []
    for after, number in enumerate(shuffled, start=1):
        feature, vector = order[number]
        sums.add(feature, "MG-1", vector)
        checks.append((after, check_fold(sums, fold="Mossgarth fold", forecast=after == len(order))))
    return checks


@pytest.fixture(scope="module")
def open_question(request):
    """A fold that needs more readings: its history and its check with a forecast."""
    make = request.getfixturevalue("fold_once")
    checks = replayed(make(seed=12, delta_deg=4.0, counts=(14, 12, 3, 0)))
    assert checks[-1][1].verdict is Verdict.KEEP_READING
    assert checks[-1][1].more_readings is not None
    return history_of(checks), checks[-1][1]


@pytest.fixture(scope="module")
def settled(request):
    """A fold that is settled: its history and its check."""
    make = request.getfixturevalue("fold_once")
    checks = replayed(make(seed=3, delta_deg=14.0, counts=(16, 14, 4, 0)))
    assert checks[-1][1].verdict is Verdict.TRANSECTED
    return history_of(checks), checks[-1][1]


def test_curves_are_the_history(open_question, find):
    """The estimate and both ends of the interval are drawn where they are known, number by number."""
    history, check = open_question
    figure = draw_funnel(history, check)
    expected = [(p.after, p.delta_deg) for p in history if p.delta_deg is not None]
    np.testing.assert_allclose(find(figure, "estimate").get_xydata(), expected)
    watched = [(p.after, p.low_deg, p.high_deg) for p in history if p.low_deg is not None]
    assert len(watched) > 3
    low, high = (find(figure, f"interval-{end}").get_xydata() for end in ("low", "high"))
    np.testing.assert_allclose(np.column_stack([low, high[:, 1]]), watched)


def test_the_last_point_of_the_history_is_the_check(open_question):
    """The history ends at the check's own figures and count."""
    history, check = open_question
    last = history[-1]
    assert last.after == sum(check.readings.of(feature) for feature in Feature)
    assert (last.low_deg, last.high_deg) == check.interval_deg
    assert last.delta_deg == check.transection_deg


def test_the_forecast_goes_on_from_the_interval_to_where_it_should_settle(open_question, find):
    """The dotted lines start at the interval now, close in, and end at the number of readings forecast."""
    history, check = open_question
    figure = draw_funnel(history, check)
    low, high = (find(figure, f"ahead-{end}").get_xydata() for end in ("low", "high"))
    assert low[0, 0] == history[-1].after
    assert low[-1, 0] == history[-1].after + check.more_readings.total
    np.testing.assert_allclose([low[0, 1], high[0, 1]], check.interval_deg, atol=1e-6)
    width = high[:, 1] - low[:, 1]
    assert (np.diff(width) < 0.0).all()
    np.testing.assert_allclose(find(figure, "settles").get_xdata(), low[-1, 0])
    assert find(figure, "ahead-low").get_linestyle() != "-"


def test_the_band_is_the_margin(fold, find):
    """The band reaches from -M to +M."""
    made = fold(margin=CheckSettings(margin_deg=3.5))
    band = find(draw_funnel((), made.check), "band")
    extent = band.get_xy() if not hasattr(band, "get_height") else None
    low, high = (
        (band.get_y(), band.get_y() + band.get_height())
        if extent is None
        else (extent[:, 1].min(), extent[:, 1].max())
    )
    assert (low, high) == (pytest.approx(-3.5), pytest.approx(3.5))


def test_a_settled_fold_says_since_when(settled, find, texts):
    """A line stands at the reading from which on the verdict has held, with words; there is no forecast."""
    history, check = settled
    figure = draw_funnel(history, check)
    since = settled_from(history)
    assert since is not None
    np.testing.assert_allclose(find(figure, "settled").get_xdata(), since)
    assert f"transected from {since} readings on" in [text for text, _ in texts(figure)]
    assert find(figure, "settles") is None


def test_settled_from_is_the_start_of_the_last_stretch():
    """A verdict that was lost in between counts from where it came back."""
    words = [
        Verdict.KEEP_READING,
        Verdict.TRANSECTED,
        Verdict.KEEP_READING,
        Verdict.TRANSECTED,
        Verdict.TRANSECTED,
    ]
    points = [HistoryPoint(n, 1.0, 0.5, 1.5, verdict) for n, verdict in enumerate(words, start=10)]
    assert settled_from(points) == 13
    assert settled_from(points[:3]) is None
    assert settled_from([]) is None
    assert settled_from([replace(p, verdict=Verdict.CANNOT_BE_SETTLED) for p in points]) is None


def test_words_do_not_collide(case, collisions):
    """No words overlap other words or leave the sheet, whatever the fold."""
    checks = [(sum(case.check.readings.of(feature) for feature in Feature), case.check)]
    assert collisions(draw_funnel(history_of(checks), case.check)) == []


@pytest.mark.parametrize("theme", ["light", "dark"])
@pytest.mark.parametrize("which", ["open_question", "settled"])
def test_words_of_a_whole_history_do_not_collide(which, theme, request, collisions):
    """With its history and forecast, by day and at dusk, no words overlap."""
    history, check = request.getfixturevalue(which)
    assert collisions(draw_funnel(history, check, theme=theme)) == []


def test_words_keep_off_the_estimate(settled, find):
    """No words in the frame cover a point of the estimate."""
    figure = draw_funnel(*settled)
    figure.canvas.draw()
    line = find(figure, "estimate")
    x, y = line.axes.transData.transform(line.get_xydata()).T
    labels = figure.findobj(lambda a: str(a.get_gid() or "").startswith("label-") and hasattr(a, "get_text"))
    assert len(labels) >= 3
    for label in labels:
        box = label.get_window_extent()
        assert not ((x > box.x0) & (x < box.x1) & (y > box.y0) & (y < box.y1)).any(), label.get_text()


def test_without_readings_it_says_when_it_starts(find, texts):
    """An empty history draws the frame, the band and a sentence."""
    figure = draw_funnel((), check_fold(RunningSums()))
    assert find(figure, "estimate") is None
    assert "The funnel starts when the hinge and the cleavage have been read." in [
        text for text, _ in texts(figure)
    ]


def test_one_point_is_drawn(fold, find):
    """A single check has a dot, if not yet a line."""
    made = fold()
    figure = draw_funnel(history_of([(26, made.check)]), made.check)
    np.testing.assert_allclose(find(figure, "estimates").get_xydata(), [[26.0, made.check.transection_deg]])


def test_history_out_of_order_is_refused(fold):
    """Counts that go down are no history."""
    points = [HistoryPoint(n, 1.0, 0.0, 2.0, Verdict.KEEP_READING) for n in (3, 2)]
    with pytest.raises(SettingError, match="not in the order of the readings"):
        draw_funnel(points, fold().check)


def test_the_wide_mouth_runs_out_of_the_frame():
    """Early intervals do not flatten the later ones, and nothing beyond 90 degrees is shown."""
    count = np.arange(40.0)
    half = 300.0 / (1.0 + count)
    low, high = shown_span_deg(np.full(40, 6.0), 6.0 - half, 6.0 + half, 5.0)
    assert -13.0 < low < -7.0
    assert 15.0 < high < 25.0
    assert shown_span_deg(np.full(3, 80.0), np.full(3, -200.0), np.full(3, 300.0), 5.0) == (-90.0, 90.0)
    assert shown_span_deg(np.zeros(0), np.zeros(0), np.zeros(0), 5.0) == (-7.5, 7.5)


def test_a_fold_without_sense_shows_sizes_only(fold, find, texts):
    """Where the angle has no sign on the map the funnel shows its size from nought up, without signs."""
    made = fold(seed=4, hinge=(120.0, 78.0), counts=(24, 14, 8, 0))
    assert made.check.sense == "unsigned"
    checks = replayed(made)
    figure = draw_funnel(history_of(checks), checks[-1][1])
    assert (find(figure, "estimate").get_ydata() >= 0.0).all()
    assert (find(figure, "interval-low").get_ydata() >= 0.0).all()
    assert not any(text.startswith(("+", "−")) for text, _ in texts(figure))  # noqa: RUF001 - a true minus sign


def test_without_sense_turns_intervals_over():
    """An interval of -9 to -2 about -5 is one of 2 to 9 about 5; one across nought starts at nought."""
    delta, low, high = without_sense(
        np.array([-5.0, -1.0, 3.0]), np.array([-9.0, -4.0, -1.0]), np.array([-2.0, 2.0, 7.0])
    )
    np.testing.assert_allclose(delta, [5.0, 1.0, 3.0])
    np.testing.assert_allclose(low, [2.0, 0.0, 0.0])
    np.testing.assert_allclose(high, [9.0, 4.0, 7.0])


def test_a_check_without_forecast_has_no_interval_ahead(fold):
    """Nothing is drawn ahead where nothing was forecast."""
    check = fold().check
    assert interval_ahead(check.changed(more_readings=None)) == ()
    assert interval_ahead(check.changed(numbers=None)) == ()
    assert interval_ahead(check_fold(RunningSums())) == ()
    none_needed = MoreReadings(0, 0, 0, 0, 0, 0, 0)
    assert interval_ahead(check.changed(more_readings=none_needed)) == ()
