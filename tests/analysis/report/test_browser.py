"""The report in a real browser: it loads alone, fits every screen, can be read in both looks, and prints whole."""

from __future__ import annotations

import shutil

import pytest

from tests.analysis.report.browser import Browser, Look, NoBrowserError, find_browser
from tests.analysis.report.conftest import HOSTILE_FOLD, NOTE
from tests.analysis.report.pdf_pages import cut_off, shapes, texts

MARGIN_MM = 15.0
"""Of the printed page: see the style sheet."""

# The contrast of every word with what lies behind it (WCAG 2.1, success criterion 1.4.6 asks for 7:1).
POOR_CONTRAST = """
(() => {
  const channel = (v) => { v /= 255; return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4; };
  const light = ([r, g, b]) => 0.2126 * channel(r) + 0.7152 * channel(g) + 0.0722 * channel(b);
  const numbers = (text) => text.match(/[0-9.]+/g).map(Number);
  const ground = (e) => {
    for (; e; e = e.parentElement) {
      const colour = numbers(getComputedStyle(e).backgroundColor);
      if (colour.length < 4 || colour[3] === 1) return colour;
    }
    return [255, 255, 255];
  };
  const poor = [];
  let looked = 0;
  const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
  while (walker.nextNode()) {
    const holder = walker.currentNode.parentElement;
    if (!walker.currentNode.data.trim() || holder.closest("svg")) continue;
    looked += 1;
    const pair = [numbers(getComputedStyle(holder).color), ground(holder)].map(light).sort((a, b) => a - b);
    const ratio = (pair[1] + 0.05) / (pair[0] + 0.05);
    if (ratio < 7) poor.push([walker.currentNode.data.trim().slice(0, 40), ratio]);
  }
  return {looked, poor};
})()
"""

# Drawings whose content reaches beyond their own frame, or whose frame reaches beyond the room they scroll in.
CUT_DRAWINGS = """
Array.from(document.querySelectorAll("main svg")).filter((svg) => {
  const frame = svg.viewBox.baseVal;
  return Array.from(svg.querySelectorAll("path, use")).some((part) => {
    if (part.closest("defs") || part.closest("[clip-path]")) return false;
    const box = part.getBBox();
    const to = svg.getScreenCTM().inverse().multiply(part.getScreenCTM());
    const corners = [[box.x, box.y], [box.x + box.width, box.y + box.height]].map(
      ([x, y]) => new DOMPoint(x, y).matrixTransform(to));
    return corners.some((p) => p.x < frame.x - 1 || p.y < frame.y - 1
      || p.x > frame.x + frame.width + 1 || p.y > frame.y + frame.height + 1);
  });
}).map((svg) => svg.getAttribute("aria-label"))
"""


@pytest.fixture(scope="module")
def browser(tmp_path_factory):
    """One browser for all tests of this file; without one they fail."""
    running = Browser(tmp_path_factory.mktemp("browser"))
    yield running
    running.close()


@pytest.fixture(scope="module")
def tab(browser, page_path):
    """The report in a tab of its own."""
    return browser.open(page_path)


def test_no_browser_is_an_error_and_no_skip(monkeypatch):
    """Where no browser is installed the tests fail and name the package."""
    monkeypatch.setattr(shutil, "which", lambda _name: None)
    with pytest.raises(NoBrowserError, match="apt-get install chromium"):
        find_browser()


def test_the_page_asks_for_nothing_and_nothing_complains(tab, page_path):
    """The only request is for the page itself; no script fails and the browser logs nothing."""
    assert tab.requests() == [page_path.as_uri()]
    assert tab.complaints() == []
    assert tab.value("document.scripts.length") == 0
    assert tab.value("document.images.length") == 0


def test_a_request_and_an_error_are_found(browser, tmp_path):
    """A page that asks for a picture and runs a faulty script is found out by the same means."""
    path = tmp_path / "bad.html"
    path.write_text("<img src='absent.png'><script>absent()</script>", encoding="utf-8")
    tab = browser.open(path)
    assert tab.requests() == [path.as_uri(), (tmp_path / "absent.png").as_uri()]
    assert any("absent is not defined" in complaint for complaint in tab.complaints())
    tab.close()


def test_the_policy_stops_what_a_hostile_file_might_smuggle_in(browser, page_path, tmp_path):
    """Were markup of a file ever let through, the page's own policy would still run and load nothing of it."""
    smuggled = "<img src='absent.png' onerror='document.title=1'><script>document.title=2</script>"
    path = tmp_path / "smuggled.html"
    path.write_text(
        page_path.read_text(encoding="utf-8").replace("</main>", f"{smuggled}</main>"), encoding="utf-8"
    )
    tab = browser.open(path)
    assert tab.value("document.title") == "Fold hinges and cleavage"
    assert any("Content Security Policy" in complaint for complaint in tab.complaints())
    tab.close()


@pytest.mark.parametrize("width", [320, 360, 768, 1280])
def test_the_page_fits_the_screen(tab, width):
    """On no screen does the page itself scroll sideways, and no drawing is cut off by its frame."""
    tab.look(Look(width, 800))
    assert tab.value("document.documentElement.scrollWidth") <= width
    assert tab.value(CUT_DRAWINGS) == []


def test_a_drawing_that_is_cut_off_is_found(browser, page_path):
    """The checker of drawings finds one whose frame was made too small."""
    tab = browser.open(page_path)
    label = tab.value(
        "(() => { const svg = document.querySelector('main figure svg'); svg.viewBox.baseVal.width -= 40;"
        " return svg.getAttribute('aria-label'); })()"
    )
    assert tab.value(CUT_DRAWINGS) == [label]
    tab.close()


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_words_stand_out_from_their_ground(tab, scheme):
    """By day and at dusk every word of the page has a contrast of 7:1 or more."""
    tab.look(Look(scheme=scheme))
    found = tab.value(POOR_CONTRAST)
    assert found["looked"] > 300
    assert found["poor"] == []
    dark = sum(
        tab.value("getComputedStyle(document.documentElement).backgroundColor.match(/[0-9]+/g).map(Number)")
    )
    assert (dark < 150) == (scheme == "dark")


def test_drawings_follow_the_look(tab):
    """A reading's marker is drawn dark by day and bright at dusk."""
    ink = "getComputedStyle(document.querySelector('main use:has(> title)')).fill"
    colours = []
    for scheme in ("light", "dark"):
        tab.look(Look(scheme=scheme))
        colours.append(tab.value(ink))
    assert colours == ["rgb(22, 25, 29)", "rgb(244, 241, 232)"]


def test_markers_can_be_pointed_at(tab):
    """Under the pointer at a reading's marker lies an element with that reading's title."""
    tab.look(Look(1280, 2000))
    found = tab.value(
        "(() => { const marks = Array.from(document.querySelectorAll('main use:has(> title)'));"
        " const mark = marks[0]; mark.scrollIntoView({block: 'center'}); const box = mark.getBoundingClientRect();"
        " const hit = document.elementFromPoint(box.x + box.width / 2, box.y + box.height / 2);"
        " return [marks.length, hit && hit.querySelector('title') !== null]; })()"
    )
    assert found[0] > 60
    assert found[1] is True


def test_long_tables_are_folded_on_the_screen_and_can_be_opened(tab):
    """A long table of readings takes no room until its summary is chosen."""
    tab.look(Look())
    high = "document.querySelector('details .wide').getBoundingClientRect().height"
    assert tab.value(high) == 0
    tab.value("document.querySelector('details').open = true")
    assert tab.value(high) > 300
    tab.value("document.querySelector('details').open = false")


@pytest.mark.parametrize(("wide_in", "high_in"), [(8.27, 11.69), (8.5, 11.0)], ids=["a4", "letter"])
def test_it_prints_whole(tab, wide_in, high_in):
    """On A4 and Letter nothing reaches into the margins, drawings are there, and folded tables are printed."""
    document = tab.pdf(wide_in, high_in)
    assert cut_off(document, MARGIN_MM) == []
    pages = texts(document)
    whole = " ".join(pages)
    assert len(pages) > 6
    assert max(shapes(document)) > 300
    assert NOTE in whole
    assert "struck out" in whole
    assert HOSTILE_FOLD.split(" & ", maxsplit=1)[0] in whole
    assert "To the verdicts" not in whole


def test_a_drawing_too_large_for_paper_is_found(browser, page_path, tmp_path):
    """The checker of printed pages finds drawings that paper cuts off."""
    path = tmp_path / "large.html"
    style = (
        "@media print{.drawing svg{max-height:none!important;max-width:none!important;width:300mm}}</style>"
    )
    path.write_text(page_path.read_text(encoding="utf-8").replace("</style>", style, 1), encoding="utf-8")
    tab = browser.open(path)
    assert cut_off(tab.pdf(), MARGIN_MM) != []
    tab.close()
