"""The Fault leaf in a real window: what stands on it before and after a fault is entered, and how it follows."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from mossgarth import fold, type_into

from analysis.strain.cautions import CAUTIONS

SIZES = [(360, 640), (800, 1280), (740, 360), (1280, 800)]


@pytest.fixture
def tarrow():
    """The invented fault of the tests: 20 degrees off the hinge of the invented fold."""
    from fieldapp.states import FaultInput

    return FaultInput(strike_deg=12.0, sense="sinistral", zone_width_m=2000.0)


def fault_leaf(driver):
    """Show the leaf."""
    driver.app.outline.show("Fault")
    driver.frames(12)
    return driver.app.outline.leaf("Fault")


def words_on(leaf):
    """Every word that is on the leaf, from the top."""
    from kivy.uix.label import Label

    return [widget.text for widget in leaf.walk() if isinstance(widget, Label) and widget.text]


def test_without_a_fault_the_leaf_only_asks_for_one(driver, clock):
    """One sentence says what to do; there is no picture, no curve, and no explanation is named."""
    leaf = fault_leaf(driver)
    assert leaf.plane.get_root_window() is None
    assert leaf.ids.ask.text.startswith("Enter the strike of the fault")
    assert not any("ransp" in text or "otation" in text for text in words_on(leaf))
    type_into(driver.app.page, fold(18, outcrops=1), clock)
    driver.frames(5)
    assert leaf.plane.scene is None
    assert leaf.plane.redraws == 0


@pytest.mark.parametrize("size", SIZES)
def test_the_leaf_shows_all_that_the_folds_say(open_app, clock, tarrow, size):
    """Picture, sentence, ratio, displacement, key, reasons in order and cautions; nothing cut off or colliding."""
    from geometry import faults

    driver = open_app(size)
    page = driver.app.page
    type_into(page, fold(24, outcrops=1), clock)
    page.set_fault(tarrow)
    leaf = fault_leaf(driver)
    state = page.faulting
    text = words_on(leaf)
    assert state.headline in text
    assert [each for each in text if each in state.because] == list(state.because)
    assert [each for each in text if each in CAUTIONS] == list(CAUTIONS)
    for told in state.figures:
        assert {told.name, told.figure, told.more} <= set(text)
    for line in state.lines:
        assert text[text.index(line.name) + 1] == line.words
    assert leaf.plane.get_root_window() is not None
    assert faults(driver.app.outline) == []
    page.change_settings(replace(page.settings, appearance=type(page.settings.appearance)("dark")))
    driver.frames(5)
    assert faults(driver.app.outline) == []


def test_the_picture_shows_curves_pair_and_ellipse_where_they_belong(driver, clock, tarrow):
    """Each curve has a label and lies in the frame; the cross stands at the pair, in ink."""
    from kivy.graphics.opengl import GL_RGBA, GL_UNSIGNED_BYTE, glReadPixels

    page = driver.app.page
    type_into(page, fold(24, outcrops=1), clock)
    page.set_fault(tarrow)
    leaf = fault_leaf(driver)
    plane, curves = leaf.plane, page.faulting.curves
    left, bottom, right, top = plane._box
    assert len(plane.scene.curves) == 6
    for curve in plane.scene.curves:
        assert f"curve {curve.label}" in plane.words_boxes
        for part in plane.curves_drawn[curve.label]:
            assert part[:, 0].min() >= left - 0.01
            assert part[:, 0].max() <= right + 0.01
            assert part[:, 1].min() >= bottom - 0.01
            assert part[:, 1].max() <= top + 0.01
    assert plane.cross is not None
    low, high = curves.x_range_deg
    assert plane.cross[0] == pytest.approx(left + (curves.datum[0] - low) / (high - low) * (right - left))
    low, high = curves.y_range_deg
    assert plane.cross[1] == pytest.approx(bottom + (curves.datum[1] - low) / (high - low) * (top - bottom))
    # Rotation predicts most at a shear strain of 1, an angle of 26.57 degrees: METHOD section 6.
    drawn = np.concatenate(plane.curves_drawn["rotation"])
    highest = drawn[np.argmax(drawn[:, 1]), 0]
    low, high = curves.x_range_deg
    assert low + (highest - left) / (right - left) * (high - low) == pytest.approx(26.57, abs=0.5)
    driver.window.dispatch("on_draw")
    x, y = plane.to_window(plane.x + plane.cross[0], plane.y + plane.cross[1])
    seen = np.frombuffer(glReadPixels(round(x), round(y), 1, 1, GL_RGBA, GL_UNSIGNED_BYTE), np.uint8)[:3]
    np.testing.assert_allclose(seen / 255.0, driver.app.theme.ink[:3], atol=0.1)


def test_it_follows_each_kept_reading_and_rests_between(driver, clock, tarrow):
    """A kept reading moves the cross, redrawn once; with nothing done, nothing is drawn."""
    page = driver.app.page
    readings = fold(30, outcrops=1)
    type_into(page, readings[:20], clock)
    page.set_fault(tarrow)
    leaf = fault_leaf(driver)
    plane = leaf.plane
    driver.frames(20)
    drawn, cross, angle = plane.redraws, plane.cross, leaf.angle
    driver.frames(20)
    assert plane.redraws == drawn
    type_into(page, readings[20:21], clock)
    driver.frames(10)
    assert plane.redraws == drawn + 1
    assert plane.cross != cross
    page.set_fault(replace(tarrow, strike_deg=32.0))
    driver.frames(5)
    assert plane.redraws == drawn + 2
    assert leaf.angle != angle
    assert "from the fault" in leaf.angle


def test_strike_and_width_are_typed_and_taken_away_on_our_own_keys(driver, clock):
    """With the strike typed the answer is there; with it taken away the leaf asks again."""
    page = driver.app.page
    type_into(page, fold(12, outcrops=1), clock)
    leaf = fault_leaf(driver)
    for key, digits in ((leaf.ids.strike, "012"), (leaf.ids.width, "2000")):
        driver.press(key)
        for digit in digits:
            driver.press(driver.app.outline.sheet.fields.ids.pad.keys[digit])
        driver.tap("Done")
        driver.frames(3)
    driver.tap("Dextral", leaf)
    driver.frames(8)
    assert (page.fault.strike_deg, page.fault.zone_width_m, page.fault.sense) == (12.0, 2000.0, "dextral")
    assert leaf.width_text == "2000 m"
    assert leaf.plane.get_root_window() is not None
    assert leaf.plane.scene.way == "anticlockwise"
    driver.press(leaf.ids.strike)
    driver.tap("Done")
    driver.frames(5)
    assert page.fault.strike_deg is None
    assert leaf.plane.get_root_window() is None
    assert leaf.ids.ask.text.startswith("Enter the strike of the fault")


def test_it_is_arranged_anew_when_the_tablet_is_turned(open_app, clock, tarrow):
    """Upright the picture stands in the column, on its side beside it, and nothing is lost on the way."""
    from geometry import faults

    driver = open_app((800, 1280))
    page = driver.app.page
    type_into(page, fold(24, outcrops=1), clock)
    page.set_fault(tarrow)
    leaf = fault_leaf(driver)
    before = words_on(leaf)
    in_column = leaf.plane.parent
    driver.resize(1280, 800)
    driver.frames(10)
    assert leaf.plane.parent is not in_column
    assert leaf.plane.x > leaf.width * 0.4
    assert words_on(leaf) == before
    assert faults(driver.app.outline) == []
    driver.resize(800, 1280)
    driver.frames(10)
    assert leaf.plane.parent is in_column
    assert words_on(leaf) == before


def test_the_demo_shows_the_invented_fault(open_app):
    """On the demo the leaf is filled in from the start."""
    from analysis.demo import DEMO_FAULT_STRIKE_DEG

    driver = open_app((412, 915), first_time=True, name="demo-mossgarth.db", demo=True)
    leaf = fault_leaf(driver)
    assert leaf.strike == f"{DEMO_FAULT_STRIKE_DEG:03.0f}°"
    assert leaf.plane.cross is not None
    assert set(CAUTIONS) <= set(words_on(leaf))
