"""What a report is made from: which readings were struck out, and where the outcrops lie."""

from __future__ import annotations

from datetime import UTC, datetime

import pytest

from analysis.files.reading import Reading
from analysis.files.table import ReadingTable
from analysis.orient.features import Feature
from analysis.report.campaign import outcrops_on_plan, struck_out_of

LATER = datetime(2026, 5, 9, tzinfo=UTC)


def bed(name, strike=40.0, dip=50.0, **fields):
    return Reading(
        reading_id=name, feature=Feature.BEDDING, strike_deg=strike, dip_deg=dip, fold="F", **fields
    )


def struck_of(*readings):
    return {
        fold: [one.reading_id for one in found]
        for fold, found in struck_out_of(ReadingTable.from_readings(readings)).items()
    }


def test_a_reading_is_struck_out_when_its_last_revision_is():
    """A revision that was struck out and then taken back counts again; one struck out twice is listed once."""
    first, second, third = bed("a"), bed("b"), bed("c")
    struck = second.struck(at=LATER)
    back = struck.revised(at=LATER, struck_out=False)
    gone = third.struck(at=LATER)
    assert struck_of(first, second, struck) == {"F": ["b"]}
    assert struck_of(first, second, struck, back) == {}
    assert struck_of(gone, third, gone, first, second, struck) == {"F": ["c", "b"]}
    assert struck_of() == {}


def test_outcrops_lie_in_metres_about_the_first():
    """A minute of latitude is a nautical mile, and the date line is no wall (1852 m, by definition to 0.1%)."""
    table = ReadingTable.from_readings(
        [
            bed("a", outcrop="one", latitude_deg=10.0, longitude_deg=179.999),
            bed("b", outcrop="two", latitude_deg=10.0 + 1.0 / 60.0, longitude_deg=-179.999),
            bed("c", outcrop="nowhere"),
        ]
    )
    shown, unplaced = outcrops_on_plan(table)
    assert unplaced == ["nowhere"]
    assert [one.name for one in shown] == ["one", "two"]
    assert (shown[0].east_m, shown[0].north_m) == (0.0, 0.0)
    assert shown[1].north_m == pytest.approx(1852.0, rel=2e-3)
    assert 200.0 < shown[1].east_m < 230.0


def test_an_outcrop_with_both_limbs_has_two_beds():
    """Two crowds of bedding are drawn as two planes, never as the mean between them."""
    beds = [bed(f"a{n}", 40.0 + n, 50.0) for n in range(4)] + [
        bed(f"b{n}", 220.0 + n, 55.0) for n in range(3)
    ]
    table = ReadingTable.from_readings(
        [one.revised(at=None, outcrop="O", latitude_deg=1.0, longitude_deg=1.0) for one in beds]
    )
    ((outcrop,), _) = outcrops_on_plan(table)
    assert sorted(round(one.plane.dip_deg) for one in outcrop.planes) == [50, 55]
