"""The measuring session, from the first sample to the draft, and all that can go wrong between."""

from datetime import UTC, datetime

import numpy as np
import pytest

from analysis.orient.attitude import Laid
from analysis.orient.attitudes import Line, Plane
from analysis.orient.north import NorthState, magnetic_field
from analysis.orient.position import Position
from fieldapp.devices import replay
from fieldapp.devices.measurement import FIELD_UNCHECKED, FIELD_WARNING
from fieldapp.devices.measuring import (
    RUNNING,
    TRANSITIONS,
    MeasureSettings,
    MeasureState,
    Measuring,
    MeasuringError,
)
from fieldapp.devices.ports import PortState, Status

S = MeasureState
PLACE = Position(56.1, -4.2, 300.0, 5.0, "gps")


@pytest.fixture
def session(port, clock, wake):
    return Measuring(port, clock, wake)


@pytest.fixture
def expected(clock):
    """Field of the model at the place: simulated sensors that feel it pass the field check."""
    return magnetic_field(PLACE, clock.now())


@pytest.fixture
def flat(simulator, expected):
    """Sensors on a bed 045/30 in the place's field, with ordinary noise."""
    return simulator.on_plane(
        45, 30, strength=expected.strength_nT / 1000.0, inclination=expected.inclination_deg
    )


@pytest.fixture
def steep(simulator, expected):
    """Sensors on a steep bed, whose strike takes longer to steady: some three seconds."""
    return simulator.on_plane(
        45, 80, strength=expected.strength_nT / 1000.0, inclination=expected.inclination_deg
    )


def feed(session, port, clock, sensors, seconds, *, rate=50.0, push=None):
    """Let samples come and tick after each; stops with the session. Gives the states gone through."""
    states = []
    for i in range(round(seconds * rate)):
        clock.go(1.0 / rate)
        shove = (0.0, 0.0, 0.0) if push is None else push(i / rate)
        port.waiting.append(sensors.sample(clock.seconds, shove))
        states.append(session.tick().state)
        if not session.is_running:
            break
    return states


# A measurement ----


def test_a_bed_is_measured_and_the_sensors_go_off(session, port, clock, wake, flat):
    """Laid still, the session settles by itself: strike and dip within 1°, scatter, samples, sensors off."""
    assert session.start(Laid.ON_PLANE, PLACE).state is S.WAITING
    assert wake.held
    assert port.switched == ["on"]
    states = feed(session, port, clock, flat, 10.0)
    assert states[0] is S.COLLECTING
    assert states[-2:] == [S.READY, S.DONE]
    assert port.switched == ["on", "off"]
    assert not wake.held
    found = session.result
    assert found.plane.angle_deg(Plane(45, 30)) < 1.0
    assert found.line is None
    assert found.samples + found.outliers == session.live.samples >= 50
    assert found.standard_error_deg <= 0.25
    assert found.warnings == {}
    assert not found.screen_down
    # Ticks after the end switch nothing on.
    session.tick()
    assert port.switched == ["on", "off"]


@pytest.mark.parametrize("seed", range(25))
def test_noisy_traces_with_spikes_come_out_within_a_degree(session, port, clock, simulator, seed):
    """With 0.05 m/s², 1 uT and 3% spikes the attitude is within 1° of the truth, whichever way it lies."""
    rng = np.random.default_rng(1000 + seed)
    truth = Plane(rng.uniform(0, 360), np.degrees(np.arccos(rng.uniform(0, 1))))
    sensors = simulator.on_plane(truth.strike_deg, truth.dip_deg, over=bool(seed % 2), spikes=0.03, seed=seed)
    session.start(Laid.ON_PLANE)
    feed(session, port, clock, sensors, 30.0)
    assert session.live.state is S.DONE
    assert session.result.plane.angle_deg(truth) < 1.0
    assert session.result.screen_down is bool(seed % 2)


@pytest.mark.parametrize(("laid", "edge"), [(Laid.ALONG_Y, (0, 1, 0)), (Laid.ALONG_X, (1, 0, 0))])
@pytest.mark.parametrize(("trend", "plunge"), [(0, 0), (123, 40), (300, 85)])
def test_a_line_is_measured_with_an_edge(session, port, clock, simulator, laid, edge, trend, plunge):
    """Along a line the edge's axis is read, with either edge, horizontal to steep."""
    truth = Line(trend, plunge)
    session.start(laid)
    feed(session, port, clock, simulator.along(truth.vector, edge), 15.0)
    assert session.result.line.angle_deg(truth) < 1.0
    assert session.result.plane is None


def test_at_least_a_second_is_taken(port, clock, wake, simulator):
    """Sensors without noise give no result before one second and eight samples."""
    session = Measuring(port, clock, wake)
    session.start(Laid.ON_PLANE)
    quiet = simulator.on_plane(10, 20, noise=(0.0, 0.0))
    feed(session, port, clock, quiet, 0.98)
    assert session.live.state is S.COLLECTING
    assert not session.live.can_take
    feed(session, port, clock, quiet, 0.1)
    assert session.live.state is S.DONE
    slow = Measuring(port, clock, wake)
    slow.start(Laid.ON_PLANE)
    feed(slow, port, clock, quiet, 1.4, rate=5.0)  # seven samples
    assert slow.live.state is S.COLLECTING
    feed(slow, port, clock, quiet, 0.2, rate=5.0)
    assert slow.live.state is S.DONE
    assert slow.result.samples == 8


def test_the_longest_time_ends_a_measurement_that_does_not_settle(session, port, clock, simulator):
    """Where the field is too weak for a steady mean the session ends after ten seconds and states its error."""
    session.start(Laid.ON_PLANE)
    feed(session, port, clock, simulator.on_plane(45, 89, strength=57, inclination=87), 15.0)
    assert session.live.state is S.DONE
    assert session.live.seconds == pytest.approx(10.0, abs=0.1)
    assert session.result.standard_error_deg > 0.25


def test_a_result_can_be_taken_early(session, port, clock, steep):
    """After a second `take` gives what there is and switches off; before, it refuses with the way on."""
    session.start(Laid.ON_PLANE, PLACE)
    with pytest.raises(MeasuringError, match="type the reading"):
        session.take()
    feed(session, port, clock, steep, 1.1)
    assert session.live.can_take
    found = session.take()
    assert found is session.result
    assert port.switched[-1] == "off"
    assert session.take() is found
    assert session.start(Laid.ON_PLANE).state is S.WAITING
    assert session.result is None


def test_what_the_leaf_shows_grows(session, port, clock, steep):
    """Progress rises to 1, the mean and the samples about it are there, and the words say what to do."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, steep, 0.5)
    early = session.live
    assert early.message == "hold still"
    assert early.axes.shape == (25, 3)
    assert early.mean.scatter_deg > 0.0
    assert early.field.fits
    feed(session, port, clock, steep, 0.7)
    assert 0.0 < early.progress < session.live.progress < 1.0
    feed(session, port, clock, steep, 10.0)
    assert session.live.progress == 1.0
    assert len(session.live.axes) <= 120


# Into the draft ----


def test_the_digits_for_the_draft_are_magnetic_and_the_correction_goes_along(session, port, clock, flat):
    """The draft gets magnetic digits with scatter and raw words; true north is one correction away."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 10.0)
    found = session.result
    draft = found.for_draft()
    assert draft.north == "magnetic"
    assert Plane(draft.azimuth_deg, draft.inclination_deg).angle_deg(Plane(45, 30)) < 1.0
    assert (draft.scatter_deg, draft.samples) == (found.scatter_deg, found.samples)
    assert draft.raw == f"{draft.azimuth_deg:05.1f}/{draft.inclination_deg:04.1f} magnetic, on a plane"
    assert found.correction.state is NorthState.CORRECTED
    turned = (found.true_plane.strike_deg - found.plane.strike_deg) % 360.0
    assert turned == pytest.approx(found.correction.correction_deg % 360.0)
    assert found.true_line is None


def test_without_a_position_it_is_magnetic_and_unchecked(session, port, clock, flat):
    """Without a position the result stays magnetic, has no true attitude, and says the field was not checked."""
    session.start(Laid.ON_PLANE)
    feed(session, port, clock, flat, 10.0)
    assert session.result.correction.state is NorthState.NO_POSITION
    assert session.result.true_plane is None
    assert set(session.result.warnings) == {FIELD_UNCHECKED}


def test_a_clock_outside_the_model_is_magnetic_and_unchecked(session, port, clock, flat):
    """A calendar years off measures all the same, uncorrected, and says why."""
    clock.calendar = datetime(2020, 1, 1, tzinfo=UTC)
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 10.0)
    assert session.result.correction.state is NorthState.DATE_OUTSIDE_MODEL
    assert session.result.true_plane is None


def test_a_clock_set_back_by_a_year_in_the_middle_changes_nothing(session, port, clock, flat):
    """The calendar set back while measuring neither stops nor lengthens the measurement."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 0.5)
    clock.calendar = clock.calendar.replace(year=clock.calendar.year - 1)
    states = feed(session, port, clock, flat, 10.0)
    assert set(states) <= {S.COLLECTING, S.READY, S.DONE}
    assert states[-1] is S.DONE


@pytest.mark.parametrize(("over", "shows_top", "overturned"), [(0, 1, 0), (1, 1, 1), (1, 0, 0), (0, 0, 0)])
def test_an_overturned_bed_is_one_whose_top_looks_down(
    port, clock, wake, simulator, over, shows_top, overturned
):
    """With the screen on the side of the younger beds, a screen that looks down is an overturned bed."""
    session = Measuring(port, clock, wake)
    session.start(Laid.ON_PLANE, shows_top=bool(shows_top))
    feed(session, port, clock, simulator.on_plane(45, 60, over=bool(over)), 10.0)
    assert session.result.overturned is bool(overturned)
    assert session.result.plane.angle_deg(Plane(45, 60)) < 1.0


# What can go wrong ----


def test_a_moving_tablet_starts_anew(session, port, clock, flat):
    """Shaking while measuring drops what was taken; held still again it measures from then on."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 0.6)
    states = feed(session, port, clock, flat, 1.0, push=lambda t: (0.0, 0.0, 3.0 * np.sin(30.0 * t)))
    assert S.MOVING in states
    assert not session.live.can_take
    assert session.live.message == "hold the tablet still"
    states = feed(session, port, clock, flat, 12.0)
    assert states[-1] is S.DONE
    assert session.result.plane.angle_deg(Plane(45, 30)) < 1.0


def test_a_slowly_turning_tablet_does_not_measure(session, port, clock, simulator, expected):
    """Turning by 10 degrees a second, too slowly to be felt as a push, is told as turning."""
    session.start(Laid.ON_PLANE, PLACE)
    states = []
    for i in range(150):
        turning = simulator.on_plane(
            45 + i * 0.2,
            60,
            strength=expected.strength_nT / 1000,
            inclination=expected.inclination_deg,
            seed=i,
        )
        states += feed(session, port, clock, turning, 0.02)
    assert S.MOVING in states
    assert S.DONE not in states
    turned = next(i for i, state in enumerate(states) if state is S.MOVING)
    assert turned > 10


def test_iron_near_is_shown_and_kept_as_a_warning(session, port, clock, simulator, expected):
    """A field a third too strong is shown all the while; the result carries it as a warning, not as a refusal."""
    iron = simulator.on_plane(
        45, 30, strength=expected.strength_nT / 1000 * 1.33, inclination=expected.inclination_deg
    )
    session.start(Laid.ON_PLANE, PLACE)
    states = feed(session, port, clock, iron, 10.0)
    assert set(states[1:-1]) == {S.IRON_NEAR}
    assert "iron near" in session.live.warning
    assert "iron near" in session.result.warnings[FIELD_WARNING]
    assert session.result.for_draft().warnings.keys() == {FIELD_WARNING}


def test_a_field_without_north_gives_no_reading(session, port, clock, simulator):
    """A field along gravity shows no north: nothing can be taken, and the words say why."""
    session.start(Laid.ON_PLANE, PLACE)
    states = feed(session, port, clock, simulator.on_plane(45, 30, inclination=90.0, noise=(0.01, 0.1)), 2.0)
    assert set(states) == {S.COLLECTING}
    assert "no north" in session.live.message
    assert not session.live.can_take


@pytest.mark.parametrize(
    "status",
    [
        Status(PortState.MISSING, "this device has no compass (magnetometer): type the reading"),
        Status(PortState.DENIED, "not allowed: type the reading"),
        Status(PortState.UNAVAILABLE, "no attitude sensors on this machine: type the reading"),
    ],
)
def test_a_missing_or_refused_sensor_ends_it_in_words(session, port, wake, status):
    """Sensor missing, permission denied, or a desktop: the session does not run, says why, and frees the screen."""
    port.start_to = status
    live = session.start(Laid.ON_PLANE, PLACE)
    assert live.state is S.UNAVAILABLE
    assert live.message == status.message
    assert not session.is_running
    assert not wake.held
    assert port.switched[-1] == "off"
    with pytest.raises(MeasuringError, match="type the reading"):
        session.take()


def test_a_sensor_that_fails_in_the_middle_ends_it_in_words(session, port, clock, wake, flat):
    """A port that stops being usable while measuring ends the session with its words."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 0.5)
    port.state = Status(PortState.FAILED, "the sensors cannot be read: type the reading")
    assert session.tick().state is S.UNAVAILABLE
    assert session.live.message == "the sensors cannot be read: type the reading"
    assert not wake.held


def wait(session, clock, seconds):
    """Tick without samples."""
    states = []
    for _ in range(round(seconds / 0.1)):
        clock.go(0.1)
        states.append(session.tick().state)
    return states


def test_a_sensor_that_goes_silent_is_told_then_given_up(session, port, clock, wake, steep):
    """Silent for 1.5 s: told, and what was taken is dropped; silent for 10 s: ended, with typing as the way on."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, steep, 1.1)
    assert session.live.can_take
    states = wait(session, clock, 3.0)
    assert states[10] is S.READY
    assert states[-1] is S.SILENT
    assert not session.live.can_take
    assert session.live.samples == 0
    assert wait(session, clock, 8.0)[-1] is S.UNAVAILABLE
    assert "type the reading" in session.live.message
    assert port.switched[-1] == "off"
    assert not wake.held


def test_a_sensor_that_speaks_again_goes_on(session, port, clock, flat):
    """After a silence the measurement begins anew and ends as usual."""
    session.start(Laid.ON_PLANE, PLACE)
    wait(session, clock, 1.9)
    assert session.live.state is S.SILENT
    assert feed(session, port, clock, flat, 12.0)[-1] is S.DONE


def test_a_device_that_slept_in_the_middle_starts_anew(session, port, clock, flat, simulator):
    """Ticks that stop for a minute mean sleep: samples from before, and from the gap, are not used."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 0.9)
    port.waiting.append(simulator.on_plane(200, 80).sample(clock.seconds + 30.0))
    clock.go(60.0)
    live = session.tick()
    assert live.state is S.ASLEEP
    assert live.samples == 0
    assert "starting anew" in live.message
    assert feed(session, port, clock, flat, 12.0)[-1] is S.DONE
    assert session.result.plane.angle_deg(Plane(45, 30)) < 1.0
    assert session.live.seconds < 10.1


def test_waking_without_a_sample_is_sleep_and_no_silence(session, port, clock, flat):
    """The first tick after a sleep, before any new sample, does not give the sensors up as silent."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 0.5)
    clock.go(60.0)
    assert session.tick().state is S.ASLEEP
    assert feed(session, port, clock, flat, 12.0)[-1] is S.DONE


def test_a_gap_between_samples_is_sleep_too(session, port, clock, flat):
    """Samples delivered together but minutes apart are not one measurement."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 0.9)
    clock.go(0.1)
    port.waiting = [flat.sample(clock.seconds - 0.05), flat.sample(clock.seconds + 300.0)]
    assert session.tick().state is S.ASLEEP
    assert session.live.samples == 0


@pytest.mark.parametrize("seconds", [0.0, 0.5, 1.1])
def test_stopping_switches_everything_off(session, port, clock, wake, steep, seconds):
    """Leaving the page, or a pause of the app, ends the session at any moment with the sensors off."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, steep, seconds)
    assert session.stop().state is S.STOPPED
    assert port.switched == ["on", "off"]
    assert not wake.held
    assert session.stop().state is S.STOPPED
    assert session.result is None


def test_starting_again_while_running_begins_anew(session, port, clock, flat):
    """A second start drops what the first had, and the sensors are switched off and on."""
    session.start(Laid.ON_PLANE, PLACE)
    feed(session, port, clock, flat, 0.5)
    session.start(Laid.ALONG_Y, PLACE)
    assert port.switched == ["on", "off", "on"]
    assert session.live.samples == 0


def test_a_long_measurement_does_not_grow_without_end(port, clock, wake, simulator):
    """Only so many samples are kept, however long the session lasts."""
    settings = MeasureSettings(settled_error_deg=0.0, longest_s=1e9, most_samples=100)
    session = Measuring(port, clock, wake, settings)
    session.start(Laid.ON_PLANE)
    feed(session, port, clock, simulator.on_plane(45, 30), 4.0)
    assert session.live.samples == 100


# States ----


def test_the_table_of_states_is_whole():
    """Every state has its row; running states may end in any way, ended ones only start again."""
    assert set(TRANSITIONS) == set(MeasureState)
    for state, after in TRANSITIONS.items():
        assert (S.DONE in after) is (state in RUNNING)
        if state not in RUNNING:
            assert after == {S.WAITING, S.UNAVAILABLE}


def test_a_change_that_the_table_does_not_know_is_refused(session):
    """Going from idle to done without a measurement is an error, not a result."""
    with pytest.raises(MeasuringError, match="idle cannot become done"):
        session._show(S.DONE, "")


# Traces ----


def test_a_trace_from_a_file_is_measured_like_a_tablet(tmp_path, clock, wake, flat):
    """The replay side feeds the same session: a trace of a bed 045/30 gives that bed, then falls silent."""
    replay.write_attitude_trace(tmp_path / "attitude.csv", [flat.sample(i / 50.0) for i in range(1, 500)])
    port = replay.replay_devices(tmp_path, clock).attitude
    session = Measuring(port, clock, wake)
    session.start(Laid.ON_PLANE, PLACE)
    wait(session, clock, 12.0)
    assert session.live.state is S.DONE
    assert session.result.plane.angle_deg(Plane(45, 30)) < 1.0
    assert port.status().state is PortState.OFF
