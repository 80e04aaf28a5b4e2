"""What a geologist does, done by touch in a real window."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import pytest
from mossgarth import fold, type_into

from analysis.orient.features import Feature

PLANE_TOUCHES, LINE_TOUCHES = 7, 6


def log_of(driver):
    """Give the Log leaf."""
    return driver.app.outline.leaf("Log")


def enter(driver, typed) -> int:
    """Type a reading by touch and keep it; gives how many touches it took, without choosing the feature."""
    log, page = log_of(driver), driver.app.page
    if page.entry.feature is not typed.feature:
        driver.press(log.feature_keys[typed.feature])
    touches = 0
    for digit in typed.azimuth + typed.inclination:
        driver.press(log.pad.keys[digit])
        touches += 1
    if page.entry.quadrant_offered and typed.quadrant:
        grid = log.grid_small if log.form.grid_beside else log.grid_large
        driver.press(grid.keys[typed.quadrant])
        touches += 1
    driver.press(log.side.keys["keep"])
    return touches + 1


def touch_reading(driver, leaf, key):
    """Touch a reading on the net."""
    net = leaf.net
    x, y = net._places[net._keys.index(key)]
    driver.touch(*net.to_window(x, y))


@pytest.mark.parametrize("size", [(600, 960), (360, 640)], ids=["tablet", "small phone"])
def test_a_fold_is_logged_by_touch_until_the_verdict_changes(open_app, size):
    """From an empty notebook, touches alone bring the strip from keep reading to transected, in few touches."""
    driver = open_app(size, first_time=True)
    driver.tap("I will. Start reading")
    strip = driver.app.outline.ids.strip
    assert strip.sign == "open ring"
    planes, lines, kept = set(), set(), 0
    for typed in fold(60, transection_deg=14.0, scatter_deg=2.0, outcrops=1):
        touches = enter(driver, typed)
        kept += 1
        (planes if typed.feature.is_plane else lines).add(touches)
        assert len(driver.app.page.standing) == kept
        if strip.sign != "open ring":
            break
    driver.frames(3)
    assert strip.sign == "crossed bars leaning clockwise"
    assert "clockwise" in strip.headline
    assert kept >= 12, "no verdict may come before 6 readings in each stream"
    assert max(planes) <= PLANE_TOUCHES
    assert max(lines) <= LINE_TOUCHES


def test_a_reversed_strike_is_caught_and_mended_in_one_touch(driver):
    """A strike typed the wrong way round is named on entry, and one touch turns it."""
    log, page = log_of(driver), driver.app.page
    for digit in "04530":
        driver.press(log.pad.keys[digit])
    driver.press(log.grid_small.keys["NW"])
    assert log.check_slot.asks
    assert "225" in log.check_slot.offer
    driver.press(log.check_slot.ids.offer)
    assert page.entry.azimuth_text == "225"
    assert not log.check_slot.asks
    driver.press(log.side.keys["keep"])
    assert page.recent[0].text == "225/30 NW"


def test_a_warned_reading_can_be_kept_all_the_same(driver):
    """A check never blocks keeping, and the record says that it was kept against a warning."""
    log, page = log_of(driver), driver.app.page
    for digit in "04530":
        driver.press(log.pad.keys[digit])
    driver.press(log.grid_small.keys["NW"])
    driver.press(log.side.keys["keep"])
    assert page.recent[0].warnings_kept


def test_a_reading_is_struck_out_and_the_touch_undone(driver, clock):
    """Striking out takes the reading from the counts, undo puts it back."""
    log, page = log_of(driver), driver.app.page
    type_into(page, fold(8, outcrops=1), clock)
    driver.frames(3)
    chip = next(w for w in log.recent_row.walk() if getattr(w, "reading_id", "") == page.recent[0].reading_id)
    strike = [w for w in chip.walk() if getattr(w, "sign", "") == "strike out" and hasattr(w, "on_release")]
    driver.press(strike[0])
    assert sum(tab.in_fold for tab in page.tabs) == 7
    assert page.standing[0].struck_out
    driver.press(log.check_slot.ids.offer)
    assert sum(tab.in_fold for tab in page.tabs) == 8
    assert not page.standing[0].struck_out


def test_a_past_reading_is_mended_without_leaving_the_leaf(driver, clock):
    """The pencil loads a reading into the entry; Keep writes its next revision."""
    log, page = log_of(driver), driver.app.page
    type_into(page, fold(3, outcrops=1), clock)
    driver.frames(3)
    line = page.recent[0]
    chip = next(w for w in log.recent_row.walk() if getattr(w, "reading_id", "") == line.reading_id)
    driver.press(
        next(w for w in chip.walk() if getattr(w, "sign", "") == "mend" and hasattr(w, "on_release"))
    )
    assert page.entry.mending == line.reading_id
    assert "mending" in log.readout.remark
    enter(driver, fold(3, outcrops=1)[0].__class__(line.feature, "050", "40", "SE"))
    assert len(page.standing) == 3
    assert next(r for r in page.standing if r.reading_id == line.reading_id).text.startswith("050/40")


def test_turning_the_tablet_keeps_everything_and_shows_both_leaves(driver, clock):
    """Portrait shows one leaf, landscape Log and Check; what was typed stands."""
    log, page = log_of(driver), driver.app.page
    type_into(page, fold(8, outcrops=1), clock)
    page.choose_feature(Feature.BEDDING)
    for digit in "045":
        driver.press(log.pad.keys[digit])
    assert driver.app.outline.names_shown == ("Log",)
    driver.resize(1280, 800)
    driver.frames(5)
    assert driver.app.outline.names_shown == ("Log", "Check")
    check = driver.app.outline.leaf("Check")
    assert check.get_root_window() is not None
    assert check.x >= log.right
    assert len(check.net._keys) == 8
    for digit in "30":
        driver.press(log.pad.keys[digit])
    driver.press(log.grid_large.keys["SE"])
    driver.press(log.side.keys["keep"])
    assert len(check.net._keys) == 9
    driver.resize(600, 960)
    driver.frames(5)
    assert driver.app.outline.names_shown == ("Log",)
    assert page.recent[0].text == "045/30 SE"


def test_the_notation_can_be_switched_midway(driver):
    """After switching to dip direction the next plane is typed so, and past ones are shown so."""
    log, page = log_of(driver), driver.app.page
    enter(driver, fold(1)[0].__class__(Feature.BEDDING, "045", "30", "SE"))
    driver.press(log.place_row.ids.settings)
    driver.tap("dip direction/dip")
    driver.app.close_sheets()
    driver.frames(3)
    assert log.readout.azimuth_label == "dip direction"
    assert page.recent[0].text == "135/30"
    for digit in "13531":
        driver.press(log.pad.keys[digit])
    driver.press(log.side.keys["keep"])
    reading = page.standing[0]
    assert reading.text == "135/31"
    driver.press(log.place_row.ids.settings)
    driver.tap("strike/dip")
    driver.app.close_sheets()
    driver.frames(3)
    assert [line.text[:6] for line in page.recent[:2]] == ["045/31", "045/30"]


def test_touching_a_reading_on_the_net_names_it_and_strikes_it_out(driver, clock):
    """A touch on the net opens the reading's particulars, whose key strikes it out."""
    page = driver.app.page
    type_into(page, fold(12, outcrops=1), clock)
    driver.tap("Check", driver.app.outline.ids.leaf_keys)
    driver.frames(5)
    leaf = driver.app.outline.leaf("Check")
    key = next(r.reading_id for r in page.standing if r.feature is Feature.CLEAVAGE)
    touch_reading(driver, leaf, key)
    driver.wait(lambda: leaf.named.parent is not None)
    assert page.named.reading_id in leaf.net._keys
    assert leaf.named.title.startswith("Cleavage")
    named = page.named.reading_id
    driver.frames(2)
    driver.tap("Strike out", leaf.named)
    assert named not in leaf.net._keys
    assert next(r for r in page.standing if r.reading_id == named).struck_out


def test_touching_the_hinge_shows_its_figures(driver, clock):
    """A touch on the hinge says trend and plunge, its source and its ellipse."""
    page = driver.app.page
    type_into(page, fold(24, outcrops=1), clock)
    driver.tap("Check", driver.app.outline.ids.leaf_keys)
    driver.frames(5)
    leaf = driver.app.outline.leaf("Check")
    driver.touch(*leaf.net.to_window(*leaf.net._means["hinge"]))
    driver.wait(lambda: leaf.named.parent is not None)
    hinge = page.check.hinge.line
    assert leaf.named.title == f"Hinge {hinge.trend_deg:03.0f}/{hinge.plunge_deg:02.0f}"
    assert "ellipse" in leaf.named.lines
    assert leaf.named.reading_id == ""


def test_a_keyboard_types_keeps_clears_and_chooses(driver):
    """Digits type, Enter keeps, Esc clears and arrows choose the feature."""
    page = driver.app.page
    driver.type_key("right")
    driver.type_key("right")
    assert page.entry.feature is Feature.INTERSECTION
    for sign in "04510":
        driver.type_key(sign)
    driver.type_key("enter")
    assert page.recent[0].text == "045/10"
    for sign in "123":
        driver.type_key(sign)
    driver.type_key("escape")
    assert page.entry.azimuth_text == ""
    driver.type_key("left")
    assert page.entry.feature is Feature.CLEAVAGE


def test_a_mishap_is_logged_and_told_and_the_app_goes_on(driver, monkeypatch):
    """An exception in a callback reaches the log and the page, and the next reading is kept as ever."""
    log, page = log_of(driver), driver.app.page
    driver.expects_mishap = True
    with monkeypatch.context() as patch:
        patch.setattr(page, "set_note", lambda _text: 1 / 0)
        driver.press(log.side.keys["note"])
        driver.tap("Done")
    assert "ZeroDivisionError" in driver.app.mishaps.text()
    driver.app.close_sheets()
    assert "went wrong" in log.check_slot.text
    driver.tap("Fault", driver.app.outline.ids.leaf_keys)
    assert "went wrong" in driver.app.outline.notice.text
    assert driver.app.outline.notice.get_root_window() is not None
    driver.tap("Log", driver.app.outline.ids.leaf_keys)
    enter(driver, fold(1)[0])
    assert len(page.standing) == 1


def test_nothing_is_drawn_while_nothing_changes(driver, clock):
    """A settled page asks for no further frame."""
    type_into(driver.app.page, fold(12, outcrops=1), clock)
    driver.resize(1280, 800)
    leaf = driver.app.outline.leaf("Check")
    driver.frames(60)
    drawn = []
    driver.window.bind(on_draw=lambda *_: drawn.append(1))
    before = leaf.net.redraws, leaf.funnel.redraws
    driver.frames(120)
    assert (leaf.net.redraws, leaf.funnel.redraws) == before
    assert drawn == []


def test_the_dark_leaf_is_dark(driver):
    """Choosing the dark look in the settings turns the ground dark at once."""
    from kivy.graphics.opengl import GL_RGBA, GL_UNSIGNED_BYTE, glReadPixels

    from fieldapp.look.theme import DARK, LIGHT

    def ground():
        driver.frames(3)
        driver.window.dispatch("on_draw")
        pixel = glReadPixels(3, 300, 1, 1, GL_RGBA, GL_UNSIGNED_BYTE)
        return tuple(value / 255.0 for value in pixel[:3])

    assert ground() == pytest.approx(LIGHT.paper[:3], abs=0.01)
    driver.press(log_of(driver).place_row.ids.settings)
    sheet = driver.app.outline.sheet
    sheet.choices["appearance"].dispatch("on_choice", sheet.choices["appearance"].choices[2][0])
    driver.app.close_sheets()
    assert ground() == pytest.approx(DARK.paper[:3], abs=0.01)


def test_left_handed_keys_put_keep_on_the_left(driver):
    """With keys for the left hand Keep stands left of the digits."""
    from dataclasses import replace

    log, page = log_of(driver), driver.app.page
    assert log.side.x > log.pad.right - 1
    page.change_settings(replace(page.settings, left_handed=True))
    driver.frames(5)
    assert log.side.right < log.pad.x + 1
    assert log.grid_small.right < log.readout.x + 1


def test_on_first_start_the_demo_is_one_touch_away_and_cannot_mix(open_app, tmp_path):
    """The first page tells of safety; the demo opens a file of its own, is marked, and can be left."""
    driver = open_app(first_time=True)
    assert "loose rock" in "".join(getattr(w, "text", "") for w in driver.app.outline.sheet.walk())
    driver.tap("Look round in the demo first")
    driver.frames(5)
    page = driver.app.page
    assert page.place.demo
    assert driver.app.outline.demo_mark.get_root_window() is not None
    assert len(page.standing) > 10
    demo_file = page.hand_over.notebook_path
    assert demo_file != tmp_path / "notebook.db"
    driver.app.leave_demo()
    driver.frames(5)
    assert driver.app.page.standing == ()
    assert driver.app.outline.demo_mark.get_root_window() is None
    assert driver.app.page.hand_over.notebook_path == tmp_path / "notebook.db"


def test_what_was_typed_survives_closing_the_app(open_app):
    """The draft stands after the app was closed and opened again."""
    driver = open_app()
    for digit in "0453":
        driver.press(log_of(driver).pad.keys[digit])
    driver.stop()
    again = open_app()
    assert again.app.page.entry.azimuth_text == "045"
    assert log_of(again).readout.inclination == "3"


def test_the_csv_is_written_by_touch(driver, clock):
    """Hand over writes the readings to a file and says so."""
    page = driver.app.page
    type_into(page, fold(9, outcrops=1), clock)
    driver.tap("Hand over", driver.app.outline.ids.leaf_keys)
    driver.frames(5)
    leaf = driver.app.outline.leaf("Hand over")
    assert "9 new" in leaf.since
    driver.press(leaf.ids.write)
    driver.frames(5)
    files = list(leaf.target_folder.glob("*.csv"))
    assert len(files) == 1
    assert len(files[0].read_text(encoding="utf-8").splitlines()) == 10
    assert "0 new" in leaf.since


def test_a_hand_over_never_takes_the_place_of_another(driver, clock):
    """Two touches in the same second: what the first wrote is still there, and both files have their own names."""
    type_into(driver.app.page, fold(9, outcrops=1), clock)
    driver.app.outline.show("Hand over")
    leaf = driver.app.outline.leaf("Hand over")
    first, second = leaf.write(), leaf.write()
    assert len(first.read_text(encoding="utf-8").splitlines()) == 10
    assert len(second.read_text(encoding="utf-8").splitlines()) == 1


def test_a_hand_over_without_its_folder_is_told(driver, clock):
    """Where the folder of hand-overs cannot be made nothing is lost: it is said, and the readings stay due."""
    type_into(driver.app.page, fold(9, outcrops=1), clock)
    driver.app.outline.show("Hand over")
    leaf = driver.app.outline.leaf("Hand over")
    leaf.target_folder.write_bytes(b"a file stands in the way")
    assert leaf.write() is None
    assert "cannot be written" in driver.app.page.message.text
    assert driver.app.page.hand_over.since_last == 9


def test_the_fault_is_typed_on_our_own_keys(driver, clock):
    """Strike and sense of the fault are set by touch; the angle to the fold follows."""
    page = driver.app.page
    type_into(page, fold(12, outcrops=1), clock)
    driver.tap("Fault", driver.app.outline.ids.leaf_keys)
    driver.frames(5)
    leaf = driver.app.outline.leaf("Fault")
    driver.press(leaf.ids.strike)
    for digit in "012":
        driver.press(driver.app.outline.sheet.fields.ids.pad.keys[digit])
    driver.tap("Done")
    driver.tap("Sinistral", leaf)
    driver.frames(3)
    assert page.fault.strike_deg == 12.0
    assert page.fault.sense == "sinistral"
    assert "from the fault" in leaf.angle


def test_the_next_outcrop_is_two_touches_away(driver):
    """A touch on the place and one on the suggestion begin the next outcrop."""
    driver.touch(
        *log_of(driver).place_row.to_window(
            log_of(driver).place_row.x + 20, log_of(driver).place_row.center_y
        )
    )
    driver.tap("Next outcrop: MG-15")
    assert driver.app.page.place.outcrop == "MG-15"
    assert driver.app.outline.sheet is None


def type_line(driver, line, text):
    """Touch a line and type on the system's keyboard."""
    driver.press(line)
    assert line.focus
    driver.window.dispatch("on_textinput", text)
    driver.frames(2)
    assert line.text.endswith(text)


def test_a_position_is_typed_where_there_is_no_receiver(driver):
    """A slip is told beside the line and nothing is lost; the position typed then stands on the page."""
    app = driver.app
    app.open_sheet("place")
    driver.frames(3)
    sheet = app.outline.sheet
    line = sheet.chooser.ids.position
    type_line(driver, line, "over there")
    driver.tap("Set")
    assert app.outline.sheet is sheet
    assert "is no position" in sheet.chooser.fault
    assert line.text == "over there"
    line.text = ""
    type_line(driver, line, "48.5 -28.25")
    driver.tap("Set")
    assert app.outline.sheet is None
    assert log_of(driver).place_row.position == "by hand"
    assert app.page.place.by_hand == "48.50000° N, 28.25000° W"
    app.open_sheet("place")
    driver.frames(3)
    driver.tap("Go by the device again")
    assert app.page.place.by_hand == ""


def test_the_observer_is_typed_into_the_settings(driver):
    """A name is taken as the line is left, by the next touch or by closing; one that is none is told."""
    app = driver.app
    app.open_sheet("settings")
    driver.frames(3)
    sheet = app.outline.sheet
    sheet.ids.content.parent.scroll_to(sheet.names["observer"], animate=False)
    driver.frames(3)
    type_line(driver, sheet.names["observer"], "A. Writer")
    sheet.close()
    driver.frames(3)
    assert app.page.settings.observer == "A. Writer"
    app.open_sheet("settings")
    driver.frames(3)
    sheet = app.outline.sheet
    assert sheet.names["observer"].text == "A. Writer"
    sheet.ids.content.parent.scroll_to(sheet.names["device"], animate=False)
    driver.frames(3)
    type_line(driver, sheet.names["device"], "x" * 250)
    sheet.close()
    assert app.page.settings.device == ""


def test_names_in_other_letters_are_shown_in_a_font_that_has_them(driver):
    """An outcrop of another alphabet gets the wide font wherever its name stands, and one of ours ours again."""
    app = driver.app
    app.page.choose_outcrop("Обнажение 4")
    driver.frames(3)

    def fonts_of(name):
        return {w.font_name for w in app.outline.walk() if name in (getattr(w, "text", "") or "")}

    assert fonts_of("Обнажение 4") == {"wide"}
    app.page.choose_outcrop("Steinbruch Süd")
    driver.frames(3)
    assert fonts_of("Steinbruch Süd") == {"B612"}
