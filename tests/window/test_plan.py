"""The plan sketch: the symbols of planes, and that an overturned bed is drawn as one."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import numpy as np
import pytest
from mossgarth import fold

from analysis.orient.features import Feature


def plane(feature, strike_deg, dip_deg, *, overturned=False):
    """Make a plane of the plan."""
    from fieldapp.drawing.scene import PlanPlane

    return PlanPlane(feature, strike_deg, dip_deg, overturned)


@pytest.mark.usefixtures("driver")
@pytest.mark.parametrize("overturned", [False, True])
def test_the_mark_of_a_bed_ends_down_dip(overturned):
    """A bed that strikes north dips east by the right-hand rule; so does the end of its tick, hooked or not."""
    from fieldapp.drawing.plan import symbol_lines

    bar, tick = symbol_lines(plane(Feature.BEDDING, 0.0, 40.0, overturned=overturned))
    assert np.allclose(bar, [[0.0, -1.0], [0.0, 1.0]])
    assert tick[-1][0] > 0.4
    assert (tick[:, 0].min() < -0.2) == overturned  # the hook comes round from behind the bar


@pytest.mark.usefixtures("driver")
@pytest.mark.parametrize("feature", [Feature.BEDDING, Feature.CLEAVAGE])
def test_a_vertical_plane_is_marked_on_both_sides(feature):
    """Neither side of a vertical plane is down dip."""
    from fieldapp.drawing.plan import symbol_lines

    marks = np.concatenate(symbol_lines(plane(feature, 0.0, 90.0))[1:])
    assert marks[:, 0].min() == pytest.approx(-marks[:, 0].max())


def test_an_overturned_bed_is_drawn_as_one(driver, clock):
    """Where the bedding of an outcrop was read as overturned, the plan's symbol is the hooked one."""
    from fieldapp.states import PositionFix

    page = driver.app.page
    page.position_changed(PositionFix(latitude_deg=54.0, longitude_deg=-2.0, at=clock()))
    for typed in (one for one in fold(12, outcrops=1) if one.feature is Feature.BEDDING):
        page.choose_feature(Feature.BEDDING)
        page.set_overturned(overturned=True)
        for digit in typed.azimuth + typed.inclination:
            page.digit(int(digit))
        if typed.quadrant:
            page.choose_quadrant(typed.quadrant)
        assert page.keep()
    driver.app.outline.show("Check")
    check = driver.app.outline.leaf("Check")
    check.show_picture("plan")
    driver.frames(5)
    (outcrop,) = check.plan.scene.outcrops
    assert [p.overturned for p in outcrop.planes] == [True]
