"""What a phone or tablet does to an app: pause, back key, turning, bars, lost textures, low memory, the end."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import sqlite3
from contextlib import closing

import numpy as np
import pytest
from mossgarth import fold, type_into

BACK = 27  # the code that Kivy gives to Android's back key, the same as of Esc


@pytest.fixture
def android(driver, monkeypatch):
    """The app, made to believe from now on that python-for-android started it."""
    monkeypatch.setenv("ANDROID_ARGUMENT", "app")
    return driver


def type_digits(driver, digits):
    """Type digits on the keys of the Log leaf."""
    log = driver.app.outline.leaf("Log")
    for digit in digits:
        driver.press(log.pad.keys[digit])


def entry_of(page):
    """What stands in the entry."""
    return page.entry.azimuth_text, page.entry.inclination_text


def pixels(driver):
    """The window as it is drawn: height, width, red green blue."""
    from kivy.graphics.opengl import GL_RGBA, GL_UNSIGNED_BYTE, glReadPixels

    driver.frames(5)
    driver.app._executor.submit(int).result()  # one worker: what was asked of it before is done
    driver.frames(25)
    width, height = driver.window.size
    data = glReadPixels(0, 0, width, height, GL_RGBA, GL_UNSIGNED_BYTE)
    return np.frombuffer(data, np.uint8).reshape(height, width, 4)[:, :, :3].astype(int)


def share_that_differs(one, other):
    """Share of the pixels that differ visibly."""
    apart = np.abs(one - other)[:, :-8]  # at the right edge a scroll bar fades as time passes
    return float((apart.max(axis=2) > 8).mean())


def spoil_textures():
    """Empty every texture of the window, as when its GL context is lost."""
    from kivy.graphics import opengl as gl

    # Names count up from test to test; those of the window made last are the highest.
    found = [number for number in range(1, 100_000) if gl.glIsTexture(number)]
    assert found
    for number in found:
        gl.glBindTexture(gl.GL_TEXTURE_2D, number)
        gl.glTexImage2D(gl.GL_TEXTURE_2D, 0, gl.GL_RGBA, 1, 1, 0, gl.GL_RGBA, gl.GL_UNSIGNED_BYTE, bytes(4))


@pytest.fixture
def counting():
    """Devices whose receiver counts how often it was switched on and off."""
    from dataclasses import replace

    from fieldapp.devices.ports import PortState, Status
    from fieldapp.devices.unavailable import UnavailablePosition, unavailable_devices

    class CountingPosition(UnavailablePosition):
        def __init__(self):
            self._status, self.calls, self.asks = Status(PortState.OFF), [], False

        def will_ask(self):
            return self.asks

        def start(self):
            self.calls.append("start")
            self.asks = False  # the system asks once

        def stop(self):
            self.calls.append("stop")

    return replace(unavailable_devices(), position=CountingPosition())


def test_back_closes_a_sheet_then_leaves_the_leaf_and_never_touches_the_entry(android):
    """The back key goes one step back; on the Log leaf it is left to the system, and digits stay typed."""
    driver = android
    type_digits(driver, "0453")
    outline, page = driver.app.outline, driver.app.page
    driver.app.open_sheet("settings")
    outline.show("Check")
    driver.frames(2)
    key_down = driver.window.dispatch
    assert key_down("on_key_down", BACK, 0, None, [])
    assert outline.sheet is None
    assert outline.shown == "Check"
    assert key_down("on_key_down", BACK, 0, None, [])
    assert outline.shown == "Log"
    assert not key_down("on_key_down", BACK, 0, None, [])
    assert entry_of(page) == ("045", "3")


def test_esc_of_a_keyboard_still_clears_the_entry_at_a_desk(driver):
    """Where there is no back key the same code is Esc and clears."""
    type_digits(driver, "0453")
    driver.type_key("escape")
    assert entry_of(driver.app.page) == ("", "")


def test_pause_stops_the_receiver_and_stores_the_entry_and_resume_goes_on(
    open_app, counting, tmp_path, clock
):
    """While the app is away nothing listens; what was typed is on disk; coming back starts the receiver again."""
    from fieldapp.dispatch import at_once
    from fieldapp.outcrop import open_page

    devices = counting
    driver = open_app(devices=devices)
    driver.frames(3)
    assert devices.position.calls == ["start"]
    type_digits(driver, "0453")
    assert driver.app.dispatch("on_pause") is True
    assert devices.position.calls == ["start", "stop"]
    other = open_page(tmp_path / "notebook.db", clock=clock, dispatch=at_once)
    assert entry_of(other) == ("045", "3")
    other.close()
    driver.app.dispatch("on_resume")
    assert devices.position.calls == ["start", "stop", "start"]
    type_digits(driver, "0")
    assert entry_of(driver.app.page) == ("045", "30")


@pytest.mark.parametrize("leaf", ["Log", "Check"])
def test_lost_textures_are_made_anew_on_resume(driver, clock, leaf, monkeypatch):
    """When the content of every texture is gone, the page after resuming looks as it did before."""
    from fieldapp.drawing.paint import PAINTS

    type_into(driver.app.page, fold(20), clock)
    driver.app.outline.show(leaf)
    pixels(driver)
    before = pixels(driver)
    assert share_that_differs(before, pixels(driver)) == 0.0
    driver.app.dispatch("on_pause")
    spoil_textures()
    monkeypatch.setattr(PAINTS, "were_lost", lambda: True)
    driver.window.canvas.ask_update()
    assert share_that_differs(before, pixels(driver)) > 0.005, "the loss must show, or the test shows nothing"
    driver.app.dispatch("on_resume")
    pixels(driver)
    assert share_that_differs(before, pixels(driver)) == 0.0


def test_a_lost_context_is_noticed(driver):
    """A texture that the system no longer knows means that all are lost; after resuming it knows it again."""
    import struct

    from kivy.graphics.opengl import glDeleteTextures

    from fieldapp.drawing.paint import PAINTS

    driver.frames(2)
    assert not PAINTS.were_lost()
    glDeleteTextures(1, struct.pack("=I", PAINTS.edge().id))
    assert PAINTS.were_lost()
    driver.app.dispatch("on_resume")
    assert not PAINTS.were_lost()


def lose_the_context():
    """Take away all that a GL context holds: textures, vertices and shaders."""
    import struct

    from kivy.graphics import opengl as gl

    kinds = (
        (gl.glIsTexture, lambda number: gl.glDeleteTextures(1, struct.pack("=I", number))),
        (gl.glIsBuffer, lambda number: gl.glDeleteBuffers(1, struct.pack("=I", number))),
        (gl.glIsProgram, gl.glDeleteProgram),
    )
    for is_there, delete in kinds:
        found = [number for number in range(1, 200_000) if is_there(number)]
        assert found
        for number in found:
            delete(number)


@pytest.mark.parametrize("leaf", ["Log", "Check"])
def test_a_whole_lost_context_is_made_anew_on_resume(driver, clock, leaf):
    """With textures, vertices and shaders gone the loss is noticed, and the page looks as before after resuming."""
    type_into(driver.app.page, fold(20), clock)
    driver.app.outline.show(leaf)
    pixels(driver)
    before = pixels(driver)
    driver.app.dispatch("on_pause")
    lose_the_context()
    driver.app.dispatch("on_resume")
    pixels(driver)
    assert share_that_differs(before, pixels(driver)) == 0.0


def test_low_memory_stores_the_entry(driver, tmp_path, clock):
    """A warning of the system loses nothing, and the page goes on."""
    from fieldapp.dispatch import at_once
    from fieldapp.outcrop import open_page

    type_digits(driver, "04530")
    driver.window.dispatch("on_memorywarning")
    other = open_page(tmp_path / "notebook.db", clock=clock, dispatch=at_once)
    assert entry_of(other) == ("045", "30")
    other.close()
    driver.press(driver.app.outline.leaf("Log").side.keys["note"])
    assert driver.app.outline.sheet is not None


def test_turning_keeps_the_entry_and_the_leaf(driver):
    """Portrait, landscape and back: what was typed stands, and the leaf that was shown is shown."""
    type_digits(driver, "0453")
    driver.resize(960, 600)
    assert driver.app.outline.names_shown == ("Log", "Check")
    driver.resize(600, 960)
    assert driver.app.outline.names_shown == ("Log",)
    assert entry_of(driver.app.page) == ("045", "3")


def test_the_page_keeps_clear_of_the_bars_of_the_system(driver):
    """Bars and a notch take their pixels from the page, on each turn anew, and give them back."""
    from fieldapp.devices.insets import NO_INSETS, Insets

    app, outline = driver.app, driver.app.outline
    app.read_insets = lambda: Insets(0, 60, 0, 40)
    app.dispatch("on_resume")
    driver.frames(3)
    assert (tuple(outline.pos), tuple(outline.size)) == ((0, 40), (600, 860))
    assert (app.form.width_dp, app.form.height_dp) == (600, 860)
    strip = outline.ids.strip
    assert strip.to_window(strip.x, strip.top)[1] <= 900
    app.read_insets = lambda: Insets(80, 0, 40, 20)
    driver.resize(960, 600)
    assert (tuple(outline.pos), tuple(outline.size)) == ((80, 20), (840, 580))
    app.open_sheet("settings")
    driver.frames(3)
    card = outline.sheet.ids.card
    assert card.x >= 80
    assert card.right <= 920
    app.close_sheets()
    app.read_insets = lambda: NO_INSETS
    driver.resize(600, 960)
    assert (tuple(outline.pos), tuple(outline.size)) == ((0, 0), (600, 960))


def test_the_field_typed_into_stays_in_sight_over_the_keyboard(driver):
    """The window makes room for the device's keyboard below the field, and closing it gives the room back."""
    assert driver.window.softinput_mode == "below_target"
    driver.app.open_sheet("note")
    driver.frames(2)
    field = driver.app.outline.sheet.fields.ids.note
    field.focus = True
    driver.frames(2)
    assert field.focus
    driver.app.close_sheets()
    driver.frames(2)
    assert not field.focus


def test_a_keyboard_over_the_field_lifts_the_page(driver):
    """A keyboard of the device that would hide the field lifts the page by so much that the field stands over it."""
    from kivy.animation import Animation

    driver.app.open_sheet("note")
    driver.frames(2)
    field = driver.app.outline.sheet.fields.ids.note
    field.focus = True
    before = pixels(driver)
    bottom = round(field.to_window(0, field.y)[1])
    high = bottom + 120
    # Kivy takes half a second to settle at the height of no keyboard, and would undo the next line meanwhile.
    Animation.cancel_all(driver.window)
    driver.window._kheight = high  # what Kivy sets from the height that Android tells
    lifted = pixels(driver)
    driver.window._kheight = 0
    assert share_that_differs(before, lifted) > 0.05
    # Rows are counted from below. The cursor blinks.
    rows = round(field.height)
    assert share_that_differs(before[bottom : bottom + rows], lifted[high : high + rows]) < 0.02
    assert share_that_differs(before, pixels(driver)) < 0.02


def test_the_page_follows_the_device_between_light_and_dark(driver):
    """As the device: looked at when the page comes back; light and dark that were chosen stay."""
    from dataclasses import replace

    from fieldapp.look.theme import DARK, LIGHT
    from fieldapp.settings import Appearance

    app = driver.app
    assert app.page.settings.appearance is Appearance.SYSTEM
    assert app.theme is LIGHT  # a desk is not asked
    light = pixels(driver).mean()
    app.is_night = lambda: True
    app.dispatch("on_pause")
    app.dispatch("on_resume")
    assert app.theme is DARK
    assert pixels(driver).mean() < light / 2.0
    app.page.change_settings(replace(app.page.settings, appearance=Appearance.LIGHT))
    assert app.theme is LIGHT
    app.is_night = lambda: False
    app.page.change_settings(replace(app.page.settings, appearance=Appearance.DARK))
    app.dispatch("on_resume")
    assert app.theme is DARK
    app.page.change_settings(replace(app.page.settings, appearance=Appearance.SYSTEM))
    assert app.theme is LIGHT


def test_a_demo_that_cannot_be_made_leaves_the_own_notebook_open(driver, monkeypatch, clock):
    """On a full storage the demo does not open; the page says so and goes on keeping readings."""
    from fieldapp.notebook import demo
    from fieldapp.notebook.errors import StorageFullError

    def full(path, _clock):
        raise StorageFullError("the storage is full, nothing was written", where=path.name)

    monkeypatch.setattr(demo, "make_demo", full)
    app = driver.app
    app.open_demo()
    assert "full" in app.outline.trouble
    assert not app.page.place.demo
    assert not app.demo
    type_into(app.page, fold(3, outcrops=1), clock)
    driver.frames(3)
    assert len(app.page.standing) == 3


def test_another_notebook_while_a_forecast_is_worked_out_does_no_harm(driver, clock):
    """Work of the page before, under way and waiting, comes to nothing and says nothing."""
    app = driver.app
    type_into(app.page, fold(12, outcrops=1), clock)
    before = app.page
    app.open_demo()
    driver.frames(10)
    app._executor.submit(int).result()
    driver.frames(10)  # the driver fails on any mishap
    assert app.page is not before
    assert app.page.place.demo


def test_a_return_without_a_leave_listens_once(open_app, counting):
    """Coming back without having gone starts no second receiver beside the first."""
    driver = open_app(devices=counting)
    driver.frames(3)
    driver.app.dispatch("on_resume")
    driver.app.dispatch("on_resume")
    assert counting.position.calls == ["start", "stop", "start", "stop", "start"]


def test_stopping_twice_or_while_a_sheet_is_open_does_no_harm(open_app, tmp_path, clock):
    """The system may end the app in any state; the notebook opens again as it was."""
    driver = open_app()
    type_digits(driver, "045")
    driver.app.open_sheet("settings")
    driver.app.dispatch("on_pause")
    driver.app.dispatch("on_stop")
    from fieldapp.dispatch import at_once
    from fieldapp.outcrop import open_page

    page = open_page(tmp_path / "notebook.db", clock=clock, dispatch=at_once)
    assert entry_of(page) == ("045", "")
    page.close()


def test_the_position_is_explained_before_the_device_asks_and_only_once(open_app, counting):
    """After the safety notes the page says what the position is for; nothing is asked before the answer is yes."""
    position = counting.position
    position.asks = True
    driver = open_app(devices=counting, first_time=True)
    driver.frames(3)
    driver.tap("I will. Start reading")
    driver.wait(lambda: driver.app.outline.sheet is not None and "position" in driver.app.outline.sheet.title)
    assert position.calls == []
    driver.tap("Use my position")
    driver.wait(lambda: position.calls == ["start"])
    assert driver.app.outline.sheet is None
    driver.app.dispatch("on_pause")
    driver.app.dispatch("on_resume")
    assert driver.app.outline.sheet is None


def test_no_is_taken_for_an_answer_and_can_be_changed(open_app, counting):
    """Without the position nothing is asked again by itself; the sheet of the place has the key."""
    position = counting.position
    position.asks = True
    driver = open_app(devices=counting)
    driver.frames(3)
    driver.tap("No, go on without")
    driver.wait(lambda: driver.app.outline.sheet is None)
    driver.app.dispatch("on_pause")
    driver.app.dispatch("on_resume")
    assert driver.app.outline.sheet is None
    assert "start" not in position.calls
    driver.app.open_sheet("place")
    driver.frames(3)
    driver.app.outline.sheet.ids.content.parent.scroll_y = 0.0
    driver.frames(3)
    driver.tap("Use the device's position")
    driver.wait(lambda: "start" in position.calls)


def test_a_file_from_the_devices_own_chooser_is_looked_at_before_it_is_taken_in(
    driver, tmp_path, monkeypatch
):
    """What the chooser brings, on a thread of the system's, is previewed like any other file; trouble is told."""
    import threading

    from fieldapp.devices import passing

    source = tmp_path / "colleague.csv"
    source.write_text("feature,strike_deg,dip_deg\nbedding,045,30\n", encoding="utf-8")
    answers = [(source, ""), (None, passing.NOT_READ)]

    def choose_file(_folder, done):
        threading.Thread(target=done, args=answers.pop(0)).start()

    monkeypatch.setattr(passing, "can_choose", lambda: True)
    monkeypatch.setattr(passing, "choose_file", choose_file)
    driver.app.outline.show("Hand over")
    leaf = driver.app.outline.leaf("Hand over")
    leaf.choose_file()
    driver.wait(lambda: "adds 1 reading," in leaf.preview_text)
    assert leaf.folder is None
    assert driver.app.page.standing == ()
    leaf.choose_file()
    driver.wait(lambda: driver.app.outline.trouble == passing.NOT_READ)


def test_a_notebook_that_cannot_be_opened_is_said_and_tried_again(open_app, tmp_path, clock):
    """Where no command could say so, the screen says why; once the trouble is over a touch opens the page."""
    from geometry import faults

    path = tmp_path / "notebook.db"
    with closing(sqlite3.connect(path, isolation_level=None)) as other:
        other.execute("PRAGMA journal_mode = WAL")
        other.execute("BEGIN EXCLUSIVE")
        driver = open_app((360, 640), first_time=True, waits=True)
        app = driver.app
        assert app.page is None
        assert "another program" in app.root.reason
        assert faults(app.root) == []
        driver.resize(640, 360)
        assert faults(app.root) == []
        app.on_memory_low()
        assert app.dispatch("on_pause")
        app.dispatch("on_resume")
        driver.tap("Try again", app.root)
        assert app.page is None
        other.execute("ROLLBACK")
    driver.tap("Try again", app.root)
    driver.frames(4)
    assert app.root is app.outline
    assert driver.window.children == [app.outline]
    type_into(app.page, fold(3, outcrops=1), clock)
    driver.frames(3)
    assert len(app.page.standing) == 3


def test_a_notebook_of_a_newer_program_is_left_alone_on_the_screen_too(open_app, tmp_path):
    """The app says that it needs an update, stays, and ends without a word in the log of mishaps."""
    path = tmp_path / "newer.db"
    open_app(name=path.name).stop()
    with closing(sqlite3.connect(path, isolation_level=None)) as db:
        db.execute("INSERT INTO migrations VALUES (99, 'of tomorrow', '')")
        db.execute("PRAGMA user_version = 99")
    driver = open_app(name=path.name, waits=True)
    assert "Update the program" in driver.app.root.reason
    driver.tap("Try again", driver.app.root)
    assert driver.app.page is None
    assert driver.app.mishaps.text() == ""
