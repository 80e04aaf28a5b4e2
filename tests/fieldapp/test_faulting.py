"""The fault beside the fold, and what the page says of it as readings go in. No window."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from analysis.demo import demo_readings
from analysis.orient.features import Feature
from analysis.strain.cautions import CAUTIONS
from analysis.strain.explanations import ExplainSettings, explain
from analysis.strain.frame import Sense
from analysis.strain.observed import Fault
from analysis.strain.ofcheck import pair_of_check
from analysis.strain.wording import headline
from fieldapp.page.faulting import ENTER_FAULT, NO_HINGE
from fieldapp.states import Change, FaultInput, FaultState

TARROW = FaultInput(strike_deg=52.0, sense="sinistral", zone_width_m=2000.0)


@pytest.fixture
def enter(kept):
    """Type the first readings of one of the invented folds."""

    def type_in(page, fold, count):
        readings = [reading for reading in demo_readings() if reading.fold == fold][:count]
        for reading in readings:
            if reading.feature.is_plane:
                text = f"{reading.strike_deg:03.0f}/{reading.dip_deg:02.0f}"
            else:
                text = f"{reading.trend_deg:03.0f}/{reading.plunge_deg:02.0f}"
            kept(page, reading.feature, text)

    return type_in


def asks_only(state):
    """Whether nothing but the question is shown."""
    return state == FaultState(ask=state.ask) and bool(state.ask) and state.curves is None


def test_without_a_fault_it_says_what_to_do(page, enter):
    """No figure, no curve and no explanation stands there before a strike was entered."""
    assert asks_only(page.faulting)
    enter(page, "Low Mossgarth fold", 12)
    assert asks_only(page.faulting)
    assert page.faulting.ask == ENTER_FAULT
    page.set_fault(FaultInput(sense="dextral", zone_width_m=300.0))
    assert page.faulting.ask == ENTER_FAULT


def test_without_a_hinge_it_asks_for_one(page, kept):
    """A fault alone has nothing to be compared with."""
    page.set_fault(TARROW)
    assert asks_only(page.faulting)
    assert page.faulting.ask == NO_HINGE
    kept(page, Feature.BEDDING, "045/30")
    assert page.faulting.ask == NO_HINGE


def test_before_the_first_transection_it_shows_what_rotation_needs(page, enter):
    """The hinge alone gives the angle and the displacement; nothing is compared yet, and the picture has no cross."""
    page.set_fault(TARROW)
    enter(page, "Mossgarth fold", 4)
    state = page.faulting
    assert page.check.cleavage is None
    assert "cannot be compared" in state.headline
    assert state.curves is not None
    assert state.curves.datum is None
    ratio, needs = state.figures
    assert (ratio.figure, ratio.more) == ("–", "comes with the first transection")  # noqa: RUF001 - a true dash
    assert needs.figure.endswith(" km")
    assert [line.kind for line in state.lines] == ["rotation", "partitioned", "transpression", "late"]
    assert state.cautions == CAUTIONS


def test_it_says_what_the_analysis_says(page, enter):
    """Sentence, reasons in order, cautions, ratio and displacement are those of `explain` for the same readings."""
    page.set_fault(TARROW)
    enter(page, "Low Mossgarth fold", 25)
    state, check = page.faulting, page.check
    pair = pair_of_check(check)
    fault = Fault(strike_deg=52.0, sense=Sense.SINISTRAL, zone_width_km=2.0)
    limits = ExplainSettings(
        confidence=check.settings.confidence, forecast_limit=check.settings.forecast_limit
    )
    told = explain(fault, pair, limits, fold=check.fold)
    assert state.headline == headline(told)
    assert state.because == told.because
    assert state.cautions == told.cautions == CAUTIONS
    ratio, needs = state.figures
    assert float(ratio.figure) == pytest.approx(
        max(told.likelihood_ratio, 1 / told.likelihood_ratio), rel=0.05
    )
    assert float(needs.figure.removesuffix(" km")) == pytest.approx(
        told.explanations[0].displacement_km, rel=0.05
    )
    np.testing.assert_allclose(state.curves.datum, [told.fold_fault_angle_deg, told.transection_deg])
    for line, one in zip(state.lines, told.explanations, strict=True):
        assert line.name.lower() == one.name
        assert line.words.endswith("does not fit") is (not one.fits)


def test_near_the_fault_it_says_that_readings_cannot_tell(page, enter):
    """Where folds lie a few degrees from the fault the page says so and turns to the displacement."""
    page.set_fault(TARROW)
    enter(page, "Low Mossgarth fold", 54)
    assert "cannot be told apart" in page.faulting.headline
    assert any("displacement" in sentence for sentence in page.faulting.because)
    assert "not decisive" in page.faulting.figures[0].more


def test_without_a_width_the_displacement_counts_widths(page, enter):
    """What rotation needs is then given in widths of the zone; a width of nothing is no width."""
    page.set_fault(replace(TARROW, zone_width_m=0.0))
    assert page.fault.zone_width_m is None
    enter(page, "Mossgarth fold", 4)
    needs = page.faulting.figures[1]
    assert needs.figure.endswith("× width")  # noqa: RUF001 - a true multiplication sign
    assert needs.more.endswith("times the zone width")


@pytest.mark.parametrize(
    ("angle_deg", "figure"),
    [
        (-0.01, "endless shear"),  # on the fault: shear never brings folds there
        (60.0, "no shear"),  # beyond 45 degrees, where the folds start
    ],
)
def test_an_angle_that_rotation_cannot_give_has_no_displacement(page, enter, angle_deg, figure):
    """Folds along the fault need endless shear, folds beyond 45 degrees none."""
    enter(page, "Mossgarth fold", 4)
    trend = page.check.hinge.line.trend_deg
    page.set_fault(FaultInput(strike_deg=trend - angle_deg, sense="sinistral"))
    assert page.faulting.figures[1].figure == figure


def test_the_side_of_the_angle_is_named(page, enter):
    """The hinge's trend and its angle to the fault, clockwise or anticlockwise, round north too."""
    enter(page, "Mossgarth fold", 4)  # hinge near 076
    for strike_deg, text in [
        (52.0, "Hinge 076°, 24° clockwise from the fault in plan"),
        (232.0, "Hinge 076°, 24° clockwise from the fault in plan"),
        (106.0, "Hinge 076°, 30° anticlockwise from the fault in plan"),
        (346.0, "Hinge 076°, 90° from the fault in plan"),
        (360.0, "Hinge 076°, 76° clockwise from the fault in plan"),
        (0.0, "Hinge 076°, 76° clockwise from the fault in plan"),
    ]:
        page.set_fault(FaultInput(strike_deg=strike_deg))
        assert page.faulting.angle == text


def test_a_dextral_fault_turns_the_curve_over(page, enter):
    """Rotation predicts clockwise cleavage beside a sinistral fault, anticlockwise beside a dextral one."""
    enter(page, "Mossgarth fold", 12)
    page.set_fault(TARROW)
    assert page.faulting.curves.rotation[:, 1].max() > 5.0
    page.set_fault(replace(TARROW, sense="dextral"))
    assert page.faulting.curves.rotation[:, 1].min() < -5.0


def test_each_kept_reading_moves_it_and_nothing_else_does(page, enter, kept):
    """It follows a kept reading, and is the very same while only drafts, names and places change."""
    heard = []
    page.listen(heard.append)
    page.set_fault(TARROW)
    assert heard == [Change.FAULT]
    enter(page, "Mossgarth fold", 12)
    before = page.faulting
    page.digit(4)
    page.clear()
    page.name_reading(page.standing[0].reading_id)
    page.choose_outcrop("elsewhere")
    assert page.faulting is before
    kept(page, Feature.CLEAVAGE, "080/85")
    assert page.faulting is not before
    assert page.faulting.curves.datum[1] != before.curves.datum[1]
    page.undo()
    np.testing.assert_allclose(page.faulting.curves.datum, before.curves.datum, atol=1e-9)


def test_the_fault_belongs_to_its_fold(page, enter):
    """Another fold has a fault of its own, and the first one's comes back with it."""
    enter(page, "Mossgarth fold", 6)
    first = page.place.fold
    page.set_fault(TARROW)
    page.choose_fold("Low Mossgarth fold")
    assert page.faulting.ask == ENTER_FAULT
    page.choose_fold(first)
    assert page.fault == TARROW
    assert page.faulting.ask == ""


def test_a_vertical_hinge_names_no_explanation(page, kept):
    """A hinge without a trend gives the reason in place of an answer."""
    page.set_fault(TARROW)
    for strike in ("010", "050", "090", "130", "170"):
        kept(page, Feature.BEDDING, f"{strike}/90")
    assert page.check.hinge is not None
    assert asks_only(page.faulting)
    assert "too steep" in page.faulting.ask
