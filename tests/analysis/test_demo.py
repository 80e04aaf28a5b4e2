"""The invented folds of the demo."""

from __future__ import annotations

import pytest

from analysis.cli.check import check_table
from analysis.demo import DEMO_NOTE, demo_readings
from analysis.files.table import ReadingTable
from analysis.fold.records import Verdict
from analysis.fold.settings import CheckSettings


@pytest.fixture(scope="module")
def table():
    return ReadingTable.from_readings(demo_readings())


def test_the_demo_is_always_the_same():
    """Two calls give equal records, with ids of their own, in recorded order."""
    first, second = demo_readings(), demo_readings()
    assert first == second
    assert len({reading.reading_id for reading in first}) == len(first)
    times = [reading.recorded_at for reading in first]
    assert times == sorted(times)


@pytest.mark.parametrize(
    ("fold", "verdict", "truth"),
    [
        ("Mossgarth fold", Verdict.TRANSECTED, 9.0),
        ("Low Mossgarth fold", Verdict.AXIAL_PLANAR, 0.5),
        ("Mossgarth Edge fold", Verdict.KEEP_READING, 5.0),
    ],
)
def test_each_fold_shows_another_state(table, fold, verdict, truth):
    """The three folds are transected, axial planar and too little read, and the intervals hold what was put in."""
    check = check_table(table.of_fold(fold), CheckSettings(), fold)
    assert check.verdict is verdict
    low, high = check.interval_deg
    assert low <= truth <= high


def test_the_demo_says_that_it_is_invented(table):
    """The note stands on the first reading; observer and position source say the same of all."""
    readings = demo_readings()
    assert readings[0].note == DEMO_NOTE
    assert "Invented" in DEMO_NOTE
    assert {reading.observer for reading in readings} == {"demo"}
    assert {reading.position_source for reading in readings} == {"invented"}
    assert table.folds() == tuple(dict.fromkeys(reading.fold for reading in readings))


def test_the_places_lie_in_open_ocean():
    """Nobody can take a demo outcrop for a real one: all lie within 5 km of 47.5 N 31 W, in the Atlantic."""
    for reading in demo_readings():
        assert reading.latitude_deg == pytest.approx(47.5, abs=0.05)
        assert reading.longitude_deg == pytest.approx(-31.0, abs=0.07)


def test_readings_are_rounded_as_a_compass_is_read():
    """Angles are whole degrees, north is 000, and the text as entered says the same."""
    for reading in demo_readings():
        angles = [reading.strike_deg, reading.dip_deg, reading.trend_deg, reading.plunge_deg]
        assert all(angle is None or angle == round(angle) for angle in angles)
        azimuth = reading.strike_deg if reading.feature.is_plane else reading.trend_deg
        assert 0.0 <= azimuth < 360.0
        assert reading.as_entered.startswith(f"{azimuth:03.0f}/")
