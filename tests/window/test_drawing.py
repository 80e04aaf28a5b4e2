"""The pictures and keys as they are drawn: texel on pixel, nothing lost, nothing drawn twice for nothing."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import numpy as np
import pytest
from mossgarth import fold, type_into

from analysis.orient import vectors
from analysis.orient.features import Feature


def pixels(driver, left, bottom, width, height):
    """A part of the window as it is drawn, lowest row first: height, width, red green blue."""
    from kivy.graphics.opengl import GL_RGBA, GL_UNSIGNED_BYTE, glReadPixels

    driver.frames(3)
    driver.window.dispatch("on_draw")
    data = glReadPixels(left, bottom, width, height, GL_RGBA, GL_UNSIGNED_BYTE)
    return np.frombuffer(data, np.uint8).reshape(height, width, 4)[:, :, :3].astype(int)


def over_the_page(driver, widget, background=(1, 1, 1, 1)):
    """Lay a widget over the page, on a ground of one colour."""
    from kivy.graphics import Color, Rectangle
    from kivy.uix.widget import Widget

    ground = Widget()
    with ground.canvas:
        Color(*background)
        Rectangle(size=driver.window.size)
    driver.app.outline.add_widget(ground)
    driver.app.outline.add_widget(widget)
    driver.frames(4)
    return widget


def points_drawn(net):
    """How many markers stand in the picture, and where: (n, 2)."""
    from kivy.graphics import Point

    found = [np.reshape(one.points, (-1, 2)) for one in net._layer.children if isinstance(one, Point)]
    return np.concatenate(found)


def net_with(driver, *poles):
    """A net over the page with so many poles of bedding, each (3,)."""
    from fieldapp.drawing.net import EqualAreaNet
    from fieldapp.drawing.scene import NetScene, Points

    keys = tuple(f"reading {number}" for number in range(len(poles)))
    scene = NetScene(
        points={Feature.BEDDING: Points(np.array(poles), keys, np.full(len(poles), fill_value=True))}
    )
    net = EqualAreaNet(scene=scene, size_hint=(None, None), size=(400.3, 440.7), pos=(50.2, 60.9))
    return over_the_page(driver, net)


# -- the net -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("size", [9, 10])
@pytest.mark.usefixtures("driver")
def test_markers_are_laid_texel_on_pixel_beside_where_they_belong(size):
    """The corner of a marker is a whole pixel and its middle at most half a pixel off, each way."""
    from fieldapp.drawing.paint import on_pixels

    places = np.random.default_rng(5).uniform(-20.0, 900.0, (200, 2))
    moved = on_pixels(places, size)
    corners = moved - size / 2.0
    assert np.array_equal(corners, np.round(corners))
    assert np.abs(moved - places).max() <= 0.5


def test_readings_on_the_same_pixels_are_drawn_once_and_can_each_be_touched(driver):
    """Two poles a hundredth of a degree apart make one marker; a touch still tells the one from the other."""
    first, second = vectors.line_vector(40.0, 50.0), vectors.line_vector(40.0, 50.01)
    net = net_with(driver, first, second, vectors.line_vector(40.0, 53.0))
    assert len(points_drawn(net)) == 2
    for number, pole in enumerate((first, second)):
        assert net.at(*net.to_page(pole)) == ("reading", f"reading {number}")


def test_a_small_ellipse_is_seen_round_its_mean(driver):
    """The ground under the marker of the hinge does not hide an ellipse that lies close round it."""
    from fieldapp.drawing.net import EqualAreaNet
    from fieldapp.drawing.scene import Ellipse, Mean, NetScene

    centre = vectors.line_vector(0.0, 90.0)
    ellipse = Ellipse(2.7, 2.7, vectors.line_vector(0.0, 0.0), vectors.line_vector(90.0, 0.0))
    net = EqualAreaNet(
        scene=NetScene(hinge=Mean(centre, "", ellipse)), size_hint=(None, None), size=(400, 440), pos=(50, 60)
    )
    over_the_page(driver, net)
    middle = net.to_page(centre[np.newaxis])[0]
    away = float(np.linalg.norm(net.to_page(vectors.line_vector(0.0, 87.3)[np.newaxis])[0] - middle))
    outline = pixels(driver, int(middle[0]), int(middle[1] + away), 1, 1)
    assert outline.max() < 80


def test_a_forecast_draws_the_funnel_anew_and_leaves_the_net(driver, clock):
    """What is still to be read changes nothing that stands on the net."""
    from fieldapp.forecasting import forecast_of

    page = driver.app.page
    type_into(page, fold(16, transection_deg=3.0), clock)
    driver.resize(960, 600)
    driver.wait(lambda: page.check.more_readings is not None)
    driver.frames(30)
    leaf = driver.app.outline.leaf("Check")
    before = leaf.net.redraws, leaf.funnel.redraws
    page._forecast_came(forecast_of(page.check, page._running.version))
    driver.frames(5)
    assert (leaf.net.redraws, leaf.funnel.redraws) == (before[0], before[1] + 1)


def test_the_trail_of_the_means_is_drawn_when_a_notebook_is_opened_again(open_app, clock):
    """The past of a fold is worked out after the page stands; the net then shows it."""
    first = open_app()
    type_into(first.app.page, fold(30), clock)
    first.frames(60)
    first.wait(lambda: first.app.page.funnel.points[-1].readings == 30)
    first.stop()
    driver = open_app(size=(960, 600))
    net = driver.app.outline.leaf("Check").net
    driver.wait(lambda: len(net.scene.trail) > 1)


# -- cards, words and columns ------------------------------------------------------------------------------------


@pytest.mark.parametrize("pos", [(20.0, 30.0), (20.4, 30.7), (20.5, 30.5)])
def test_the_outline_of_a_key_is_alike_on_all_sides_wherever_it_lies(driver, pos):
    """A key on parts of a pixel, in a column on parts of a pixel, has no side thicker or thinner than the other."""
    from kivy.uix.floatlayout import FloatLayout

    from fieldapp.leaves.parts import Key, Scrolled

    column = FloatLayout(size_hint_y=None, height=500.3)
    column.add_widget(Key(text="", size_hint=(None, None), size=(100.3, 60.5), pos=pos))
    scrolled = Scrolled(size_hint=(None, None), size=(300.6, 400.2), pos=(40.5, 50.5), scroll_y=0.0)
    scrolled.add_widget(column)
    over_the_page(driver, scrolled)
    x, y = (int(edge) for edge in np.add(pos, (40.5, 50.5)))
    seen = pixels(driver, x - 6, y - 6, 114, 74)
    for profile in (seen[:, 57], seen[37]):
        marked = np.flatnonzero(profile.min(axis=1) < 254)
        outline = profile[marked[0] : marked[-1] + 1]
        assert outline[0].max() < 254
        assert np.abs(outline - outline[::-1]).max() <= 2


def test_a_column_is_moved_by_whole_pixels(driver):
    """Wherever it is scrolled to, a column lies on whole pixels, half a pixel at most from where it belongs."""
    from kivy.uix.scrollview import ScrollView
    from kivy.uix.widget import Widget

    from fieldapp.leaves.parts import Scrolled

    ours, plain = (
        kind(size_hint=(None, None), size=(200.3, 150.6), pos=(10.4, 20.7)) for kind in (Scrolled, ScrollView)
    )
    for one in (ours, plain):
        one.add_widget(Widget(size_hint_y=None, height=400.5))
        over_the_page(driver, one)
    for share in (0.0, 0.37, 1.0):
        ours.scroll_y = plain.scroll_y = share
        driver.frames(2)
        where = np.array(ours.g_translate.xy)
        assert np.array_equal(where, np.round(where))
        assert np.abs(where - plain.g_translate.xy).max() <= 0.5


@pytest.mark.parametrize("halign", ["left", "center", "right"])
def test_words_are_drawn_as_they_were_set(driver, halign):
    """Each texel of a label stands on a pixel of its own, in a column too: no letter is blurred or cut."""
    from kivy.uix.floatlayout import FloatLayout

    from fieldapp.leaves.parts import Scrolled, Words

    words = Words(
        text="Fjord [b]strike[/b] 045/30 j",
        markup=True,
        halign=halign,
        size_hint=(None, None),
    )
    words.size, words.pos = (180.3, 51.7), (15.4, 20.5)
    column = FloatLayout(size_hint_y=None, height=500.3)
    column.add_widget(words)
    scrolled = Scrolled(size_hint=(None, None), size=(300.6, 400.2), pos=(40.5, 50.5), scroll_y=0.0)
    scrolled.add_widget(column)
    over_the_page(driver, scrolled)
    wide, high = words.texture_size
    alpha = np.frombuffer(words.texture.pixels, np.uint8).reshape(high, wide, 4)[::-1, :, 3].astype(int)
    assert (alpha > 200).sum() > 100
    left = round(scrolled.g_translate.x) + int(words.center_x - wide / 2.0)
    bottom = round(scrolled.g_translate.y) + int(words.center_y - high / 2.0)
    seen = pixels(driver, left, bottom, wide, high)[:, :, 0]
    assert np.abs(seen - (255 - alpha * (1.0 - words.color[0]))).max() <= 3


@pytest.mark.parametrize("high", [300, 130])
def test_words_in_an_empty_funnel_stay_off_its_axis(driver, high):
    """What the funnel waits for is said within its frame, however low that is."""
    from fieldapp.drawing.funnel import NarrowingFunnel
    from fieldapp.drawing.scene import FunnelScene

    words = "The last readings are being gone through once more. The funnel comes with the first interval."
    funnel = NarrowingFunnel(
        scene=FunnelScene(why_empty=words), words_sp=17.0, size_hint=(None, None), size=(260, high)
    )
    over_the_page(driver, funnel)
    lines = [box for name, box in funnel.words_boxes.items() if name.startswith("empty")]
    below = [box for name, box in funnel.words_boxes.items() if name.startswith("x ")]
    assert len(lines) > 2
    assert min(bottom for _, bottom, _, _ in lines) > max(top for _, _, _, top in below)
    assert max(top for _, _, _, top in lines) <= funnel.top


def test_words_that_make_room_for_a_remark_are_gone(driver):
    """With a note, what stands under the digits is the remark alone; without it the labels are back."""
    from fieldapp.leaves.parts import Words

    def drawn():
        words = [w for w in driver.app.outline.leaf("Log").walk() if isinstance(w, Words)]
        assert [w.texture_size for w in words if not w.text and max(w.texture_size) > 0] == []
        return {w.text for w in words if max(w.texture_size) > 0}

    assert {"strike", "dip"} <= drawn()
    driver.app.page.set_note("slickenlines")
    driver.frames(4)
    assert "note" in drawn()
    assert not {"strike", "dip"} & drawn()
    driver.app.page.set_note("")
    driver.frames(4)
    assert {"strike", "dip"} <= drawn()
