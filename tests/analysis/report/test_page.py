"""The report as a page: valid HTML that says what was computed, whatever stands in the file."""

from __future__ import annotations

import itertools
import re
from xml.etree import ElementTree as ET

import html5lib
import numpy as np
import pytest

from analysis.cli.check import check_table
from analysis.files.table import ReadingTable
from analysis.fold.settings import CheckSettings
from analysis.fold.words import between, figure_line, headline, line_text, turned
from analysis.orient.features import Feature
from analysis.orient.vectors import equal_area_xy
from analysis.report.method_words import CAUTIONS
from analysis.strain.cautions import CAUTIONS as FAULT_CAUTIONS
from tests.analysis.report.conftest import (
    FAULT,
    HOSTILE_FOLD,
    HOSTILE_NOTE,
    NOTE,
    campaign_readings,
    write_report,
)

SVG = "{http://www.w3.org/2000/svg}"


@pytest.fixture(scope="session")
def source(page_path):
    """The page's text."""
    return page_path.read_text(encoding="utf-8")


@pytest.fixture(scope="session")
def page(source):
    """The page as a strict reader of HTML sees it: a single fault of syntax raises."""
    reader = html5lib.HTMLParser(
        strict=True, tree=html5lib.getTreeBuilder("etree"), namespaceHTMLElements=False
    )
    return reader.parse(source)


@pytest.fixture(scope="session")
def table():
    """The campaign's readings."""
    return ReadingTable.from_readings(campaign_readings())


@pytest.fixture(scope="session")
def checks(table):
    """The check of each fold, by name."""
    return {name: check_table(table.of_fold(name), CheckSettings(), name) for name in table.folds()}


def words(element):
    """All the text in an element, in one line."""
    return " ".join("".join(element.itertext()).split())


def section(page, heading):
    """The section under a heading of the second level."""
    return next(
        one for one in page.iter("section") if one.find("h2") is not None and words(one.find("h2")) == heading
    )


def test_a_fault_of_syntax_is_found(source):
    """The strict reader refuses the same page with one quote too many."""
    reader = html5lib.HTMLParser(strict=True)
    with pytest.raises(html5lib.html5parser.ParseError):
        reader.parse(source.replace('<th scope="col">', '<th scope="col"">', 1))


def test_names_of_elements_are_unique_and_all_links_lead_somewhere(page):
    """No two elements share a name, and what refers to a name finds it on the page."""
    names = [one.get("id") for one in page.iter() if one.get("id")]
    assert len(names) == len(set(names))
    referred = set()
    for one in page.iter():
        for key in ("href", "{http://www.w3.org/1999/xlink}href"):
            if one.get(key):
                assert one.get(key).startswith("#")
                referred.add(one.get(key)[1:])
        referred |= set((one.get("aria-labelledby") or "").split())
        for value in one.attrib.values():
            referred |= set(re.findall(r"url\(#([^)]+)\)", value))
    assert len(referred) > 50
    assert referred <= set(names)


def test_headings_go_down_by_one_level_at_a_time(page):
    """There is one heading of the first level, and none skips a level."""
    levels = [int(one.tag[1]) for one in page.iter() if re.fullmatch(r"h[1-6]", str(one.tag))]
    assert levels.count(1) == 1
    assert levels[0] == 1
    assert all(after - before <= 1 for before, after in itertools.pairwise(levels))


def test_landmarks_tables_and_drawings_are_named(page):
    """The page has its landmarks, each head of a table its scope, each drawing its words, or is left out."""
    assert page.get("lang") == "en"
    assert [len(list(page.iter(tag))) for tag in ("header", "nav", "main", "footer")] == [1, 1, 1, 1]
    heads = list(page.iter("th"))
    assert heads
    assert {one.get("scope") for one in heads} == {"col", "row"}
    drawings = list(page.iter(f"{SVG}svg"))
    assert drawings
    for one in drawings:
        assert one.get("aria-hidden") == "true" or (
            one.get("role") == "img" and len(one.get("aria-label")) > 20
        )


def test_nothing_is_loaded_and_nothing_can_run(page, source):
    """There is no script, no frame, no picture and no address, and the page's own policy forbids them."""
    tags = {str(one.tag).removeprefix(SVG) for one in page.iter() if isinstance(one.tag, str)}
    assert (
        tags
        & {"script", "iframe", "object", "embed", "link", "base", "form", "img", "image", "foreignObject"}
        == set()
    )
    attributes = {key for one in page.iter() for key in one.attrib}
    assert not [
        key for key in attributes if str(key).lower().startswith("on") or key in ("src", "srcset", "action")
    ]
    policy = next(one for one in page.iter("meta") if one.get("http-equiv") == "Content-Security-Policy")
    assert policy.get("content").startswith("default-src 'none'; style-src 'unsafe-inline';")
    assert "@import" not in source
    assert re.findall(r"url\((?!#)", source) == []


def test_hostile_names_and_notes_stand_as_they_are(page):
    """What a file says in place of a name is shown letter by letter, and nothing of it becomes markup."""
    hostile = section(page, HOSTILE_FOLD)
    rows = [[words(cell) for cell in row] for row in hostile.iter("tr")]
    assert [row[2] for row in rows if row[-1] == HOSTILE_NOTE] == ["<b>MG</b>"] * 3
    assert {row[5] for row in rows if row[-1] == HOSTILE_NOTE} == {"'\"><svg onload=x>"}


def test_each_verdict_stands_with_its_interval_and_numbers(page, checks):
    """The first table has a row per fold: verdict, transection, interval, and the readings of each feature."""
    rows = [[words(cell) for cell in row] for row in section(page, "Verdicts").find(".//tbody")]
    assert [row[0] for row in rows] == list(checks)
    for row, check in zip(rows, checks.values(), strict=True):
        assert row[1] == check.verdict.value.capitalize()
        assert row[4:] == [str(check.readings.of(feature)) for feature in Feature] + [
            str(check.readings.outcrops)
        ]
        if check.interval_deg is None:
            assert row[2] == row[3] == "not known yet"
        else:
            assert row[2] == turned(check.transection_deg)
            assert row[3] == between(*check.interval_deg).removeprefix("between ").replace(" and ", " to ")


def test_a_figure_never_stands_without_its_interval(page, checks):
    """Where a fold's transection is given, its interval is in the same row or paragraph."""
    assert any(check.interval_deg is None for check in checks.values())
    for name, check in checks.items():
        text = words(section(page, name))
        assert headline(check) in text
        assert figure_line(check) in text
        assert all(sentence in text for sentence in (*check.because, *check.warnings))
        if check.interval_deg is None:
            assert re.findall(r"\d° (?:anti)?clockwise", text) == []


def test_limbs_stand_against_each_other(page, checks):
    """Each limb has its row with mean bedding and the intersection computed on it."""
    check = checks["Mossgarth fold"]
    rows = [[words(cell) for cell in row] for row in section(page, "Mossgarth fold").iter("tr")]
    for line in check.limb_lines:
        (row,) = [row for row in rows if row[0].lower() == line.limb.lower()]
        assert row[4] == line_text(line.computed)


def test_every_reading_is_listed_and_those_struck_out_are_struck(page, table):
    """The table has each standing reading and each struck-out one, marked by a line and by words."""
    part = table.of_fold("Mossgarth fold")
    rows = list(section(page, "Mossgarth fold").iter("tbody"))[-1].findall("tr")
    assert len(rows) == len(part) + 1 == 50
    struck = [row for row in rows if row.get("class") == "struck"]
    assert len(struck) == 1
    cells = struck[0].findall("td")
    assert cells[-1].text == "struck out"
    assert all(cell.find("s") is not None for cell in cells[:-1])
    assert [words(row) for row in rows if "struck out" in words(row)] == [words(struck[0])]


def test_warnings_that_a_reading_was_kept_against_are_kept(page):
    """The remarks say in words which checks a reading was kept against, and its note."""
    remarks = [words(row[-1]) for row in section(page, "Mossgarth fold").iter("tr")]
    expected = f"kept against: quadrant does not fit the strike, nearly flat, strike loose; {NOTE}"
    assert remarks.count(expected) == 1


def test_markers_on_the_net_say_what_they_are(page, table):
    """Each reading's marker has a title, and lies where the projection puts that very reading."""
    drawings = list(section(page, "Mossgarth fold").iter(f"{SVG}svg"))
    net = next(one for one in drawings if (one.get("aria-label") or "").startswith("Equal-area net"))
    marks = [(mark, title.text) for mark in net.iter(f"{SVG}use") for title in mark.findall(f"{SVG}title")]
    part = table.of_fold("Mossgarth fold")
    assert len(marks) == len(part)
    expected = []
    for feature in Feature:
        rows = [reading for reading in part if reading.feature is feature]
        expected += [(equal_area_xy(reading.vector), reading) for reading in rows]
    drawn = np.array([[float(mark.get("x")), float(mark.get("y"))] for mark, _ in marks])
    places = np.array([place for place, _ in expected])
    # The sheet's own scale and origin are found from all; then each marker has to lie on its place.
    for column, sign in ((0, 1.0), (1, -1.0)):
        scale, origin = np.polyfit(places[:, column], drawn[:, column], 1)
        assert sign * scale > 100.0
        np.testing.assert_allclose(scale * places[:, column] + origin, drawn[:, column], atol=0.02)
    for (_, title), (_, reading) in zip(marks, expected, strict=True):
        assert title.startswith(str(reading.feature).replace("hinge", "hinge line"))
        assert reading.outcrop in title
        assert f"{reading.recorded_at:%Y-%m-%d %H:%M}" in title


def test_drawings_leave_their_colours_to_the_page(page):
    """No drawing names a colour of its own: all come from the page, by day and by dusk."""
    for drawing in page.iter(f"{SVG}svg"):
        text = ET.tostring(drawing, encoding="unicode")
        assert re.findall(r"#[0-9a-f]{6}\b|rgb|\bblack\b|\bwhite\b", text) == []
    style = words(next(page.iter("style")))
    assert set(re.findall(r"var\(--([a-z]+)\)", style)) <= set(re.findall(r"--([a-z]+):", style)) | {"wide"}


def test_cautions_stand_on_the_page_and_ahead_of_any_explanation(page):
    """Field safety and licensed practice are named; no explanation is named before the cautions on them."""
    text = words(page.find("body"))
    assert all(caution in text for caution in (*CAUTIONS, *FAULT_CAUTIONS))
    fault = words(section(page, "Beside the fault"))
    last_caution = max(fault.index(caution) for caution in FAULT_CAUTIONS)
    assert last_caution < fault.lower().index("rotation in simple shear")
    assert "rotation in simple shear" not in text[: text.index(FAULT_CAUTIONS[0])].lower()
    assert "hints at" in fault
    assert "under the assumptions stated here only" in fault


def test_without_a_fault_nothing_is_explained(tmp_path):
    """A report without a fault names no explanation."""
    text = write_report(tmp_path, ".html", "--fold", "Mossgarth Edge fold").read_text(encoding="utf-8")
    assert "Beside the fault" not in text
    assert "transpression" not in text


def test_the_command_on_the_page_makes_the_same_page_again(page, page_path, tmp_path):
    """What is printed to repeat the report, typed in the folder of the file, gives the same bytes."""
    import shlex  # noqa: PLC0415 - used here only

    typed = shlex.split(words(section(page, "To repeat this").find(".//code")))
    assert typed[:5] == ["hingewise", "report", "mossgarth.csv", "-o", "report.html"]
    again = write_report(tmp_path, ".html", *typed[5:])
    assert typed[5:] == [*FAULT]
    assert again.read_bytes() == page_path.read_bytes()
