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


SLD, SE, OGC = (f"{{http://www.opengis.net/{name}}}" for name in ("sld", "se", "ogc"))
# Children in the order that the schemas give them. Graphic, TextSymbolizer and PointPlacement after the published
# Symbolizer.xsd of Symbology Encoding 1.1.0 (OGC 05-077r4); the others from memory of it, of FeatureStyle.xsd and of
# StyledLayerDescriptor.xsd 1.1.0 (OGC 05-078r4). "+" is once or more, "?" once or not at all.
CONTENT = {
    SLD + "StyledLayerDescriptor": "sld:NamedLayer+",
    SLD + "NamedLayer": "se:Name sld:UserStyle+",
    SLD + "UserStyle": "se:Name? se:FeatureTypeStyle+",
    SE + "FeatureTypeStyle": "se:Name? se:Rule+",
    SE + "Rule": "se:Name? ogc:Filter? se:PointSymbolizer? se:TextSymbolizer?",
    OGC + "Filter": "ogc:PropertyIsEqualTo",
    OGC + "PropertyIsEqualTo": "ogc:PropertyName ogc:Literal",
    SE + "PointSymbolizer": "se:Graphic?",
    SE
    + "Graphic": "se:ExternalGraphic? se:Mark? se:Opacity? se:Size? se:Rotation? se:AnchorPoint? se:Displacement?",
    SE + "ExternalGraphic": "se:InlineContent se:Format",
    SE + "Mark": "se:WellKnownName? se:Fill? se:Stroke?",
    SE + "Fill": "se:SvgParameter+",
    SE + "Stroke": "se:SvgParameter+",
    SE + "Rotation": "ogc:PropertyName",
    SE + "TextSymbolizer": "se:Label? se:Font? se:LabelPlacement? se:Halo? se:Fill?",
    SE + "Label": "ogc:PropertyName",
    SE + "Font": "se:SvgParameter+",
    SE + "LabelPlacement": "se:PointPlacement",
    SE + "PointPlacement": "se:AnchorPoint? se:Displacement? se:Rotation?",
    SE + "Displacement": "se:DisplacementX se:DisplacementY",
}
WELL_KNOWN = {"square", "circle", "triangle", "star", "cross", "x"}  # those that SE 1.1.0, 11.3.2, names


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


def as_named(element):
    """Name of an element as the table of contents has it."""
    space, name = element.tag[1:].split("}")
    return f"{space.rsplit('/', 1)[1]}:{name}"


@pytest.mark.parametrize("style", [ATTITUDES, VERDICTS], ids=lambda one: one.name)
def test_the_sld_is_built_as_its_schemas_say(style):
    """Every element is one that the schemas know, its children are in their order, the rest is text."""
    for element in parsed(style.sld.encode()).iter():
        children = "".join(f"{as_named(child)} " for child in element)
        content = CONTENT.get(element.tag, "")
        pattern = "".join(
            f"(?:{part.rstrip('?+')} ){part[-1:] if part[-1] in '?+' else ''}" for part in content.split()
        )
        assert re.fullmatch(pattern, children), (element.tag, children)
        assert bool(content) != bool((element.text or "").strip()), element.tag


@pytest.mark.parametrize("style", [ATTITUDES, VERDICTS], ids=lambda one: one.name)
def test_each_rule_of_the_sld_draws_its_symbol_turned_by_the_azimuth(style):
    """A rule picks a symbol by its name, has the drawing and a well-known mark for it, and turns what points."""
    root = parsed(style.sld.encode())
    rules = root.findall(f".//{SE}Rule")
    assert len(rules) == len(style.symbols)
    for rule, symbol in zip(rules, style.symbols, strict=True):
        equal = rule.find(f"{OGC}Filter/{OGC}PropertyIsEqualTo")
        assert [child.text for child in equal] == [style.field, symbol.name]
        graphic = rule.find(f"{SE}PointSymbolizer/{SE}Graphic")
        inline = graphic.find(f"{SE}ExternalGraphic/{SE}InlineContent")
        assert inline.get("encoding") == "base64"
        assert parsed(base64.b64decode(inline.text)).tag == "{http://www.w3.org/2000/svg}svg"
        assert graphic.findtext(f"{SE}Mark/{SE}WellKnownName") in WELL_KNOWN
        assert float(graphic.findtext(f"{SE}Size")) > 0.0
        turn = graphic.findtext(f"{SE}Rotation/{OGC}PropertyName")
        assert turn == ("azimuth_deg" if symbol.turned else None)


def test_a_mark_that_may_stay_unturned_points_nowhere():
    """Programs draw the mark where they cannot draw the symbol, and some do not turn it: it must not say a strike."""
    marks = {symbol.name: (symbol.mark, symbol.filled) for symbol in SYMBOLS.values()}
    # A triangle points; a cross is the symbol of horizontal beds.
    assert {mark for mark, _ in marks.values()} <= WELL_KNOWN - {"triangle", "cross"}
    assert (
        len({marks[name] for name in ("bedding", "bedding overturned", "cleavage", "intersection", "hinge")})
        == 5
    )
    assert len({symbol.mark for symbol in VERDICT_MARKS.values()}) == len(VERDICT_MARKS)
