"""Map symbols: drawn pointing north, with the dip to the right, one for each case."""

from __future__ import annotations

import base64
import re
import xml.etree.ElementTree as ET

import pytest

from analysis.files.symbols import ATTITUDES, SYMBOLS, VERDICT_MARKS, VERDICTS, style_for, symbol_of
from analysis.fold.records import Verdict
from analysis.orient.features import Feature

BEDDING, CLEAVAGE, INTERSECTION, HINGE = Feature


def parsed(text):
    return ET.fromstring(text)  # noqa: S314 - written here


@pytest.mark.parametrize(
    ("feature", "inclination", "overturned", "symbol"),
    [
        (BEDDING, 30.0, False, "bedding"),
        (BEDDING, 30.0, True, "bedding overturned"),
        (BEDDING, 0.0, False, "bedding horizontal"),
        (BEDDING, 0.5, False, "bedding"),
        (BEDDING, 89.5, False, "bedding"),
        (BEDDING, 90.0, True, "bedding vertical"),
        (CLEAVAGE, 0.2, False, "cleavage horizontal"),
        (CLEAVAGE, 90.0, False, "cleavage vertical"),
        (INTERSECTION, 0.0, False, "intersection"),
        (HINGE, 90.0, False, "hinge"),
    ],
)
def test_which_symbol_shows_a_reading(feature, inclination, overturned, symbol):
    """Inclined, overturned, horizontal and vertical planes and lines each have a symbol that is there."""
    assert symbol_of(feature, inclination, overturned=overturned) == symbol
    assert symbol in SYMBOLS


@pytest.mark.parametrize("symbol", [*SYMBOLS.values(), *VERDICT_MARKS.values()], ids=lambda one: one.name)
def test_drawings_are_svg_within_their_square(symbol):
    """Each drawing is well-formed SVG on a square of 24 by 24, with nothing beyond it."""
    root = parsed(base64.b64decode(symbol.svg))
    assert root.tag == "{http://www.w3.org/2000/svg}svg"
    assert (root.get("viewBox"), root.get("width"), root.get("height")) == ("0 0 24 24", "24", "24")
    for path in root.iter("{http://www.w3.org/2000/svg}path"):
        assert all(0.0 <= float(number) <= 24.0 for number in re.findall(r"[0-9.]+", path.get("d")))


@pytest.mark.parametrize("name", ["bedding", "bedding overturned", "cleavage"])
def test_a_plane_is_drawn_with_its_strike_north_and_its_dip_to_the_right(name):
    """The long line runs along the axis that is turned to the strike, and all else lies on its right."""
    root = parsed(base64.b64decode(SYMBOLS[name].svg))
    strike, mark = (path.get("d") for path in root.iter("{http://www.w3.org/2000/svg}path"))
    assert strike == "M12 1V23"
    assert re.fullmatch(r"M12 .*", mark)
    ends = [float(x) for x in re.findall(r"[HL](\d+\.?\d*)", mark)]
    assert max(ends) > 12.0
    assert min(ends) >= 12.0


def test_every_verdict_has_a_mark():
    """The four verdicts have marks of different shapes, so that none is told by colour alone."""
    assert {symbol.name for symbol in VERDICTS.symbols} == {verdict.value for verdict in Verdict}
    assert len({symbol.drawing for symbol in VERDICTS.symbols}) == len(Verdict)


def test_a_style_lists_what_its_layer_has():
    """The style of a layer has the symbols that stand in it and no other, and is well-formed in both forms."""
    style = style_for({"bedding", "bedding vertical"})
    assert [symbol.name for symbol in style.symbols] == ["bedding", "bedding vertical"]
    for whole in (style, ATTITUDES, VERDICTS):
        assert parsed(whole.qml).get("version")
        assert parsed(whole.sld.encode()).get("version") == "1.1.0"
