"""Settings, words, the plan, dispatch, the forecast: the small parts of the page, each for itself."""

from __future__ import annotations

import threading
from concurrent.futures import ThreadPoolExecutor
from queue import Queue

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import SettingError
from analysis.fold.check import check_fold
from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature
from analysis.orient.vectors import pole_vector
from analysis.stats.sums import sums_of
from fieldapp.dispatch import ThreadDispatch, at_once
from fieldapp.draft import Digits, Key
from fieldapp.entry import EntryDraft, North, Sensed, turned
from fieldapp.forecasting import Forecaster, forecast_of, interval_ahead
from fieldapp.planning import offset_m
from fieldapp.running import LONGEST_HISTORY, RunningFold, check_settings, history_of
from fieldapp.settings import NorthMode, PlaneNotation, Settings
from fieldapp.wording import age_text, counted, next_name

BEDDING, CLEAVAGE, LINE, HINGE = Feature


# -- settings ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("field", "value"),
    [("margin_deg", 0.0), ("margin_deg", float("nan")), ("confidence", 1.0), ("forecast_limit", 1)],
)
def test_settings_out_of_range_are_refused(field, value):
    """A setting that makes no sense cannot be made."""
    with pytest.raises(SettingError):
        Settings(**{field: value})


def test_settings_survive_storing():
    """Plain values give the same settings back."""
    settings = Settings(margin_deg=3.5, notation=PlaneNotation.DIP_DIRECTION_DIP, spoken_verdict=True)
    assert Settings.from_values(settings.to_values()) == settings


@given(
    st.dictionaries(
        st.sampled_from([*Settings.__slots__, "from a later version"]),
        st.one_of(st.none(), st.booleans(), st.integers(), st.floats(), st.text(), st.lists(st.integers())),
    )
)
def test_any_stored_values_give_settings(values):
    """Spoilt values fall back to their defaults; nothing keeps the page from opening."""
    assert isinstance(Settings.from_values(values), Settings)


def test_a_spoilt_setting_leaves_the_others():
    """Only the value that makes no sense is lost."""
    settings = Settings.from_values({"margin_deg": -1, "north": "true", "left_handed": 1, "confidence": 0.9})
    assert settings == Settings(north=NorthMode.TRUE, confidence=0.9)


# -- words -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "taken", "following"),
    [
        ("MG-14", (), "MG-15"),
        ("MG-14", ("MG-15", "MG-16"), "MG-17"),
        ("MG-09", (), "MG-10"),
        ("MG-099", (), "MG-100"),
        ("quarry", (), "quarry-2"),
        ("", (), "1"),
        ("", ("1",), "2"),
        ("7", ("7",), "8"),
    ],
)
def test_the_next_name_follows_and_is_free(name, taken, following):
    """Numbers at the end go up, with their zeros; taken names are passed over."""
    assert next_name(name, taken) == following


@pytest.mark.parametrize(
    ("seconds", "text"),
    [(-5, "0 s"), (0, "0 s"), (12, "12 s"), (120, "2 min"), (7200, "2 h"), (200_000, "2 d")],
)
def test_ages_are_told_in_the_unit_that_fits(seconds, text):
    """Seconds, minutes, hours, days; a clock set back gives no negative age."""
    assert age_text(seconds) == text


def test_counts_agree_with_their_noun():
    """One reading, two readings."""
    assert [counted(n) for n in (0, 1, 2)] == ["0 readings", "1 reading", "2 readings"]


# -- the draft's meaning -----------------------------------------------------------------------------------------


@st.composite
def drafts(draw):
    digits = Digits()
    for sign in draw(st.text(alphabet="0123456789.<", max_size=9)):
        key = {".": Key.POINT, "<": Key.BACK}.get(sign, Key.DIGIT)
        digits = digits.pressed(key, sign)
    return EntryDraft(
        feature=draw(st.sampled_from(Feature)),
        digits=digits,
        quadrant=draw(st.sampled_from(["", "N", "SE"])),
        note=draw(st.text(max_size=20)),
        overturned=draw(st.booleans()),
        mending=draw(st.sampled_from(["", "x"])),
        north=draw(
            st.sampled_from([None, North(), North(reference="magnetic", correction_deg=-1.5, model="m")])
        ),
        sensed=draw(
            st.sampled_from(
                [None, Sensed(scatter_deg=1.0, samples=3, raw="r", warnings=(("field", "iron"),))]
            )
        ),
    )


@given(drafts())
def test_a_draft_survives_storing(draft):
    """Plain values give the same draft back."""
    assert EntryDraft.from_values(draft.to_values()) == draft


@pytest.mark.parametrize(
    "values",
    [
        {"feature": "granite"},
        {"place": "nowhere"},
        {"place": "both whole"},
        {"place": "filled in", "azimuth": "0x5", "inclination": "30"},
        {"quadrant": "up"},
        {"north": [1]},
        {"north": ["magnetic", "nan", "m"]},
        {"sensed": [1]},
    ],
)
def test_a_spoilt_draft_is_an_empty_one(values):
    """What makes no sense does not keep the page from opening."""
    assert EntryDraft.from_values(values) == EntryDraft()


@given(st.integers(0, 360), st.integers(0, 90))
def test_changing_the_notation_there_and_back_changes_nothing(strike, dip):
    """The plane meant stays the same plane, and comes back digit by digit."""
    draft = EntryDraft(digits=Digits.loaded(f"{strike:03d}", f"{dip:02d}"))
    by_strike, by_direction = PlaneNotation
    other = draft.in_notation(by_strike, by_direction)
    one, two = draft.attitude(by_strike), other.attitude(by_direction)
    assert (two.strike_deg, two.dip_deg) == (one.strike_deg, one.dip_deg)
    assert other.in_notation(by_direction, by_strike).attitude(by_strike) == one


def test_turning_an_attitude_about_the_vertical():
    """Azimuths turn clockwise, past north and back; inclinations stay."""
    assert turned(Plane(355.0, 30.0), 10.0) == Plane(5.0, 30.0)
    assert turned(Line(5.0, 30.0), -10.0) == Line(355.0, 30.0)


# -- the plan ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("place", "origin", "east_m", "north_m"),
    [
        ((0.0, 0.0), (0.0, 0.0), 0.0, 0.0),
        # A degree at the equator, WGS 84: 111,319.5 m of longitude, 110,574.3 m of latitude (from memory, rounded).
        ((0.0, 0.001), (0.0, 0.0), 111.3195, 0.0),
        ((0.001, 0.0), (0.0, 0.0), 0.0, 110.5743),
        ((0.0, -179.9995), (0.0, 179.9995), 111.3195, 0.0),
        ((60.0, 0.001), (60.0, 0.0), 55.8000, 0.0),
    ],
)
def test_metres_from_degrees(place, origin, east_m, north_m):
    """Offsets are right at the equator, at 60 degrees north and across the date line."""
    assert offset_m(*place, *origin) == pytest.approx((east_m, north_m), abs=2e-4)


# -- the running fold --------------------------------------------------------------------------------------------


def entries(count, seed=1, delta_deg=12.0):
    rng = np.random.default_rng(seed)
    found = []
    for n in range(count):
        feature = (BEDDING, CLEAVAGE)[n % 2]
        strike = (0.0, 180.0)[n // 2 % 2] if feature is BEDDING else delta_deg
        dip = 55.0 if feature is BEDDING else 86.0
        vector = pole_vector(strike, dip) + rng.normal(0.0, np.radians(3.0), 3)
        found.append((feature, "MG-1", vector / np.linalg.norm(vector)))
    return found


def test_the_history_is_that_of_checks_made_one_by_one():
    """Each point of the funnel is the check of the readings up to it."""
    settings = check_settings(Settings())
    found = entries(20)
    history = history_of(found, settings, 3)
    assert history.epoch == 3
    for point in history.points:
        direct = check_fold(sums_of(found[: point.readings]), settings, forecast=False)
        assert point.delta_deg == direct.transection_deg
        assert (point.low_deg, point.high_deg) == (direct.interval_deg or (None, None))


def test_a_long_history_is_thinned_and_ends_at_the_last_reading():
    """Beyond its length only every few readings get a point; the last one always does."""
    found = entries(LONGEST_HISTORY * 2 + 10)
    points = history_of(found, check_settings(Settings()), 0).points
    assert len(points) <= LONGEST_HISTORY
    assert points[-1].readings == len(found)


def test_an_outdated_history_is_not_taken(make_reading):
    """A funnel computed before the past was changed is refused."""
    running = RunningFold("Mossgarth", check_settings(Settings()))
    reading = make_reading()
    running.put(reading)
    old = history_of(running.entries(), running.settings, running.epoch)
    running.put(reading.struck(at=None))
    assert not running.take_history(old)
    assert running.funnel == ()
    assert running.standing_count == 0


def test_a_reading_moved_to_another_fold_leaves_this_one(make_reading):
    """A revision with another fold's name takes the reading away."""
    running = RunningFold("Mossgarth", check_settings(Settings()))
    reading = make_reading()
    running.put(reading)
    running.put(reading.revised(at=None, fold="Tarrow Beck"))
    assert running.standing_count == 0
    assert running.readings == {}


def test_sums_filled_at_once_are_those_added_one_by_one(make_reading):
    """Opening a fold and entering it give the same check."""
    readings = [make_reading(feature=f, **_attitude(f, v)) for f, _, v in entries(24)]
    at_start = RunningFold("Mossgarth", check_settings(Settings()), readings)
    one_by_one = RunningFold("Mossgarth", check_settings(Settings()))
    for reading in readings:
        one_by_one.put(reading)
    assert at_start.check.transection_deg == pytest.approx(one_by_one.check.transection_deg, abs=1e-9)
    assert [n.reading_id for n in at_start.neighbours] == [n.reading_id for n in one_by_one.neighbours]


def _attitude(feature, vector):
    if feature.is_plane:
        plane = Plane.from_pole(vector)
        return {"strike_deg": plane.strike_deg, "dip_deg": plane.dip_deg}
    line = Line.from_vector(vector)
    return {"trend_deg": line.trend_deg, "plunge_deg": line.plunge_deg}


# -- forecast and dispatch ---------------------------------------------------------------------------------------


def unsettled():
    """A fold that needs more readings: its check without forecast."""
    check = check_fold(sums_of(entries(26, delta_deg=1.0)), check_settings(Settings()), forecast=False)
    assert str(check.verdict) == "keep reading"
    return check


def test_the_interval_ahead_narrows_to_where_it_should_settle():
    """The dotted continuation starts at the interval of now and ends, narrower, at the forecast."""
    forecast = forecast_of(unsettled(), 1)
    more = forecast.check.more_readings
    first, last = forecast.ahead[0], forecast.ahead[-1]
    assert first.readings == 26
    assert (first.low_deg, first.high_deg) == pytest.approx(forecast.check.interval_deg, abs=0.05)
    assert last.readings == 26 + more.total
    widths = [p.high_deg - p.low_deg for p in forecast.ahead]
    assert widths == sorted(widths, reverse=True)
    assert interval_ahead(check_fold(sums_of([]), check_settings(Settings()))) == ()


def test_only_the_last_forecast_asked_for_is_computed_next():
    """While one is under way, those asked for wait, and only the newest is ever computed."""
    waiting = []
    came = []
    forecaster = Forecaster(lambda work, done, _failed: waiting.append((work, done)), came.append)
    check = unsettled()
    for version in (1, 2, 3, 4):
        forecaster.seek(check, version)
    assert len(waiting) == 1
    work, done = waiting.pop()
    done(work())
    assert came == []  # version 1 is outdated
    work, done = waiting.pop()
    done(work())
    assert [f.version for f in came] == [4]
    assert waiting == []
    assert forecaster.funnel((), 5.0, 4).settles_at is not None
    assert forecaster.funnel((), 5.0, 5).settles_at is None


def test_a_forecast_that_fails_does_not_stop_the_next():
    """An error goes on to the log of mishaps; the next forecast is still made."""
    failures = []

    def dispatch(work, done, failed):
        if not failures:
            failures.append(True)
            failed(RuntimeError("numbers"))
        else:
            done(work())

    came = []
    forecaster = Forecaster(dispatch, came.append)
    with pytest.raises(RuntimeError):
        forecaster.seek(unsettled(), 1)
    forecaster.seek(unsettled(), 2)
    assert [f.version for f in came] == [2]


def test_work_runs_elsewhere_and_comes_back_on_the_users_thread():
    """The worker's value, or its error, arrives through the one place that hops."""
    hops = Queue()
    with ThreadPoolExecutor(1) as executor:
        dispatch = ThreadDispatch(executor, hops.put)
        got, failed, where = [], [], []

        def work():
            where.append(threading.current_thread())
            return 42

        dispatch(work, got.append, failed.append)
        hops.get(timeout=10)()
        dispatch(lambda: 1 / 0, got.append, failed.append)
        hops.get(timeout=10)()
    assert got == [42]
    assert [type(e) for e in failed] == [ZeroDivisionError]
    assert where != [threading.current_thread()]


def test_work_given_up_when_the_app_closes_says_nothing(caplog):
    """Work that was still waiting is dropped without a value, an error or a line in the log."""
    hops, begun, go_on = Queue(), threading.Event(), threading.Event()
    executor = ThreadPoolExecutor(1)
    dispatch = ThreadDispatch(executor, hops.put)
    executor.submit(lambda: (begun.set(), go_on.wait(10)))
    assert begun.wait(10)
    dispatch(lambda: 42, print, print)
    executor.shutdown(wait=False, cancel_futures=True)
    go_on.set()
    executor.shutdown()
    assert hops.empty()
    assert caplog.text == ""


def test_at_once_runs_on_the_spot():
    """The plain dispatch gives value or error at once."""
    got, failed = [], []
    at_once(lambda: 1, got.append, failed.append)
    at_once(lambda: 1 / 0, got.append, failed.append)
    assert got == [1]
    assert len(failed) == 1
