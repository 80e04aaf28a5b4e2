"""The help is five pages of plain text that the app can show as it stands."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from fontTools.ttLib import TTFont
from hypothesis import given
from hypothesis import strategies as st

from fieldapp.help import FOLDER, PAGES, BlockKind, parse_page, read_page, read_pages
from fieldapp.look.fonts import BOLD_FILE, REGULAR_FILE

ROOT = Path(__file__).resolve().parents[2]
LONGEST_WORDS = 420
"""A page is read standing up: some two minutes (200 words a minute; common practice, no source)."""


def words_of(page):
    """All words of a page."""
    return [word for block in page.blocks for word in block.text.split()]


def test_there_are_five_pages_each_with_its_title():
    """Every page has a file, every file is a page, and no two share a title."""
    pages = read_pages()
    assert len(pages) == 5
    assert {path.stem for path in FOLDER.glob("*.md")} == set(PAGES)
    assert len({page.title for page in pages}) == 5


@pytest.mark.parametrize("name", PAGES)
def test_a_page_is_short(name):
    """A page has no more words than can be read at an outcrop."""
    assert 100 < len(words_of(read_page(name))) <= LONGEST_WORDS


@pytest.mark.parametrize("name", PAGES)
@pytest.mark.parametrize("font", [REGULAR_FILE, BOLD_FILE], ids=lambda path: path.stem)
def test_the_font_has_every_sign_of_a_page(name, font):
    """No sign of the help is missing from the bundled font."""
    has = set(TTFont(font).getBestCmap())
    page = read_page(name)
    assert {sign for text in (page.title, *words_of(page)) for sign in text if ord(sign) not in has} == set()


def test_nothing_of_a_file_is_lost():
    """Every word of a file is in its page, in order."""
    for name in PAGES:
        text = (FOLDER / f"{name}.md").read_text(encoding="utf-8")
        bare = re.sub(r"^(#+|-|\d+\.) ", "", text, flags=re.MULTILINE).split()
        page = read_page(name)
        assert [*page.title.split(), *words_of(page)] == bare


def test_safety_and_licensed_practice_are_said():
    """The cautions name the dangers of an outcrop and say what orientation data are not."""
    text = " ".join(words_of(read_page("cautions-and-method")))
    for words in (
        "traffic",
        "overhangs alone",
        "tides",
        "no slope or excavation design",
        "licensed",
        "local codes",
    ):
        assert words in text
    assert "look up" in " ".join(words_of(read_page("logging")))


def test_steps_are_counted_from_one():
    """Numbered lists run 1, 2, 3 and begin anew in each list."""
    for page in read_pages():
        last = 0
        for block in page.blocks:
            if block.kind is BlockKind.STEP:
                assert block.number == last + 1
            last = block.number


def test_the_docs_point_to_every_page():
    """README shows the way to each page, so that the help has one source."""
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    assert [name for name in PAGES if f"(fieldapp/help/{name}.md)" not in readme] == []


def test_kinds_of_blocks_are_told_apart():
    """A title, a heading, a paragraph over two lines, items and steps become what they are."""
    page = parse_page("p", "# T\n\none\ntwo\n\n## H\n- a\n  b\n- c\n\n1. d\n2. e\n   f\n")
    assert page.title == "T"
    assert [(b.kind, b.text, b.number) for b in page.blocks] == [
        (BlockKind.PARAGRAPH, "one two", 0),
        (BlockKind.HEADING, "H", 0),
        (BlockKind.ITEM, "a b", 0),
        (BlockKind.ITEM, "c", 0),
        (BlockKind.STEP, "d", 1),
        (BlockKind.STEP, "e f", 2),
    ]


@pytest.mark.parametrize(
    "text",
    [
        "",
        "words first",
        "# T",
        "# T\n\n### deep\n",
        "# T\n\na *mark*\n",
        "# T\n\n[a](b)\n",
        "# T\n\n  indented\n",
        "# T\n# U\n",
    ],
)
def test_what_does_not_fit_is_refused(text):
    """A text that a tablet could show wrongly is refused with the page's name."""
    with pytest.raises(ValueError, match="p"):
        parse_page("p", text)


@given(st.text())
def test_any_text_is_a_page_or_is_refused(text):
    """No text brings the parser down, and no block is empty."""
    try:
        page = parse_page("p", text)
    except ValueError:
        return
    assert page.title
    assert all(block.text.strip() for block in page.blocks)


def test_another_name_is_no_page():
    """A name that is no page's is refused, and opens no other file."""
    with pytest.raises(ValueError, match="there is no help page"):
        read_page("../app")
