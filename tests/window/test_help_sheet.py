"""The help is read by touch, page after page."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations


def words_on(sheet):
    """All that the sheet says, from top to bottom."""
    from fieldapp.leaves.help import HelpBlock

    return [widget.text for widget in sheet.ids.content.children[::-1] if isinstance(widget, HelpBlock)]


def test_every_page_is_reached_from_the_settings_by_touch(driver):
    """From the settings Help lists five pages; each shows its words, and Next leads through all of them."""
    from fieldapp.help import read_pages

    app, pages = driver.app, read_pages()
    app.open_sheet("settings")
    driver.frames(3)
    app.outline.sheet.ids.content.parent.scroll_y = 0.0
    driver.frames(3)
    driver.tap("Help")
    sheet = app.outline.sheet
    assert list(sheet.keys) == [page.name for page in pages]
    driver.press(sheet.keys[pages[0].name])
    for page in pages:
        assert sheet.title == page.title
        assert words_on(sheet) == [block.text for block in page.blocks]
        assert sheet.ids.content.parent.scroll_y == 1.0
        sheet.ids.content.parent.scroll_y = 0.0
        driver.frames(3)
        if page is not pages[-1]:
            driver.press(next(iter(sheet.keys.values())))
    driver.tap("All pages of the help")
    assert words_on(sheet) == []
    assert len(sheet.keys) == len(pages)


def test_items_and_steps_carry_their_marks(driver):
    """A list shows its dots and numbers beside the words, not in them."""
    from fieldapp.help import BlockKind, read_page
    from fieldapp.leaves.help import HelpBlock

    sheet = driver.app.open_sheet("help", page="logging")
    driver.frames(3)
    shown = [widget for widget in sheet.ids.content.children[::-1] if isinstance(widget, HelpBlock)]
    for widget, block in zip(shown, read_page("logging").blocks, strict=True):
        expected = {BlockKind.ITEM: "·", BlockKind.STEP: str(block.number)}.get(block.kind, "")
        assert widget.mark == expected
        assert widget.heading == (block.kind is BlockKind.HEADING)
