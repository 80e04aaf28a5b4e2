"""Map symbols of strike and dip, trend and plunge: what each looks like, and the styles that turn it by azimuth.

Styles are made in two open forms, both kept in a GeoPackage's `layer_styles` table: QML, which desktop GIS open by
themselves, and SLD 1.1 (OGC 05-078r4 with Symbology Encoding 05-077r4) for others. Symbols are drawn pointing
north and turned clockwise by `azimuth_deg`: the long line of a plane is its strike and its mark shows the dip side,
which lies to the right of the strike by the right-hand rule. The shapes are common practice on geological maps, no
source.

Not every program that reads SLD draws a picture that stands in the style itself, and not every one of those that
draw a well-known mark instead turns it by a field. So each picture has such a mark after it, for programs that
cannot draw it, and that mark points nowhere: unturned it says nothing wrong.
"""

from __future__ import annotations

import base64
from dataclasses import dataclass
from typing import Final
from xml.sax.saxutils import escape, quoteattr

from analysis.orient.features import Feature

_INK: Final = "#16191d"
_SECOND: Final = "#8a3b12"
_ACCENT: Final = "#0b6e69"
_PAPER: Final = "#ffffff"
_SIZE_MM: Final = 6.0
_SIZE_PX: Final = 22
_LABEL_OFFSET_MM: Final = 2.6
# Dips within half a degree of these are drawn with the symbols of horizontal and vertical planes.
_FLAT_DEG, _UPRIGHT_DEG = 0.5, 89.5


@dataclass(frozen=True, slots=True)
class Symbol:
    """One symbol: the word in the field `symbol`, its drawing on a square of 24 by 24, whether it is turned.

    `mark` is what stands for it where the drawing cannot be shown: one of the marks that Symbology Encoding names,
    and none that seems to point anywhere. It is filled where that tells it from another.
    """

    name: str
    drawing: str
    mark: str
    colour: str = _INK
    turned: bool = True
    filled: bool = False

    @property
    def svg(self) -> str:
        """The drawing as an SVG document, base64."""
        text = (
            '<svg xmlns="http://www.w3.org/2000/svg" width="24" height="24" viewBox="0 0 24 24">'
            f'<g fill="none" stroke="{self.colour}" stroke-width="1.8">{self.drawing}</g></svg>'
        )
        return base64.b64encode(text.encode()).decode()


def _solid(path: str, colour: str) -> str:
    return f'<path d="{path}" fill="{colour}" stroke="none"/>'


_STRIKE: Final = '<path d="M12 1V23"/>'
SYMBOLS: Final = {
    symbol.name: symbol
    for symbol in (
        Symbol("bedding", _STRIKE + '<path d="M12 12H18"/>', "circle"),
        Symbol(
            "bedding overturned",
            _STRIKE + '<path d="M12 8.5H15.5A3.5 3.5 0 0 1 15.5 15.5H12"/>',
            "circle",
            filled=True,
        ),
        Symbol(
            "bedding horizontal",
            '<circle cx="12" cy="12" r="6"/><path d="M12 3V21M3 12H21"/>',
            "circle",
            turned=False,
        ),
        Symbol("bedding vertical", _STRIKE + '<path d="M7 12H17"/>', "circle"),
        Symbol("cleavage", _STRIKE + _solid("M12 8V16L18 12Z", _SECOND), "square", _SECOND),
        Symbol(
            "cleavage horizontal",
            '<path d="M6 6H18V18H6ZM12 3V21M3 12H21"/>',
            "square",
            _SECOND,
            turned=False,
        ),
        Symbol(
            "cleavage vertical",
            _STRIKE + _solid("M12 8V16L18 12ZM12 8V16L6 12Z", _SECOND),
            "square",
            _SECOND,
        ),
        Symbol(
            "intersection",
            '<path d="M12 23V4M8.5 19H15.5"/>' + _solid("M12 0L15.5 8H8.5Z", _ACCENT),
            "star",
            _ACCENT,
        ),
        Symbol("hinge", '<path d="M12 23V2M7.5 8L12 1.5L16.5 8M8 21A4 4 0 0 1 16 21"/>', "x"),
    )
}
VERDICT_MARKS: Final = {
    symbol.name: symbol
    for symbol in (
        Symbol(
            "transected",
            '<circle cx="12" cy="12" r="9"/><path d="M6 18L18 6"/>',
            "star",
            _SECOND,
            turned=False,
        ),
        Symbol(
            "axial planar",
            '<circle cx="12" cy="12" r="9"/><path d="M9 5V19M15 5V19"/>',
            "square",
            _ACCENT,
            turned=False,
        ),
        Symbol(
            "keep reading",
            '<circle cx="12" cy="12" r="9" stroke-dasharray="4 3"/>',
            "circle",
            turned=False,
        ),
        Symbol("cannot be settled", '<path d="M4 4L20 20M20 4L4 20"/>', "x", turned=False),
    )
}


def symbol_of(feature: Feature, inclination_deg: float, *, overturned: bool = False) -> str:
    """Name of the symbol that shows a reading."""
    if feature.is_plane and inclination_deg < _FLAT_DEG:
        return f"{feature.value} horizontal"
    if feature.is_plane and inclination_deg > _UPRIGHT_DEG:
        return f"{feature.value} vertical"
    return f"{feature.value} overturned" if overturned and feature is Feature.BEDDING else feature.value


def inclination_label(inclination_deg: float) -> str:
    """The dip or plunge as it stands beside a symbol: whole degrees."""
    return f"{inclination_deg:.0f}"


@dataclass(frozen=True, slots=True)
class Style:
    """The style of a layer: which field picks the symbol, and the symbols by its values."""

    name: str
    field: str
    symbols: tuple[Symbol, ...]

    @property
    def qml(self) -> str:
        """The style as QML."""
        return _qml(self)

    @property
    def sld(self) -> str:
        """The style as SLD 1.1."""
        return _sld(self)


ATTITUDES: Final = Style("strike and dip, trend and plunge", "symbol", tuple(SYMBOLS.values()))
VERDICTS: Final = Style("verdicts", "verdict", tuple(VERDICT_MARKS.values()))


def style_for(symbols: set[str]) -> Style:
    """Give the style of attitudes with those symbols only that a layer has."""
    return Style(
        ATTITUDES.name, ATTITUDES.field, tuple(one for one in ATTITUDES.symbols if one.name in symbols)
    )


def _option(name: str, value: str, kind: str = "QString") -> str:
    return f'<Option name="{name}" value={quoteattr(value)} type="{kind}"/>'


def _qml(style: Style) -> str:
    categories, symbols = [], []
    for place, symbol in enumerate(style.symbols):
        categories.append(
            f'<category value={quoteattr(symbol.name)} symbol="{place}" label={quoteattr(symbol.name)} '
            'render="true" type="string"/>'
        )
        turn = ""
        if symbol.turned:
            turn = (
                '<Option name="angle" type="Map">'
                + _option("active", "true", "bool")
                + _option("field", "azimuth_deg")
                + _option("type", "2", "int")
                + "</Option>"
            )
        symbols.append(
            f'<symbol name="{place}" type="marker" alpha="1" clip_to_extent="1" force_rhr="0">'
            '<layer class="SvgMarker" enabled="1" locked="0" pass="0"><Option type="Map">'
            + _option("angle", "0")
            + _option("name", f"base64:{symbol.svg}")
            + _option("size", f"{_SIZE_MM:g}")
            + _option("size_unit", "MM")
            + _option("horizontal_anchor_point", "1")
            + _option("vertical_anchor_point", "1")
            + "</Option><data_defined_properties><Option type="
            '"Map">'
            + _option("name", "")
            + (
                f'<Option name="properties" type="Map">{turn}</Option>'
                if turn
                else '<Option name="properties"/>'
            )
            + _option("type", "collection")
            + "</Option></data_defined_properties></layer></symbol>"
        )
    return (
        "<!DOCTYPE qgis PUBLIC 'http://mrcc.com/qgis.dtd' 'SYSTEM'>\n"
        '<qgis version="3.22" styleCategories="Symbology|Labeling" labelsEnabled="1">'
        f'<renderer-v2 type="categorizedSymbol" attr="{style.field}" enableorderby="0" forceraster="0" '
        f'symbollevels="0"><categories>{"".join(categories)}</categories><symbols>{"".join(symbols)}</symbols>'
        "</renderer-v2>"
        '<labeling type="simple"><settings calloutType="simple">'
        '<text-style fieldName="label" isExpression="0" fontSize="8" fontSizeUnit="Point" textColor="22,25,29,255"/>'
        f'<placement placement="1" predefinedPositionOrder="TR" quadOffset="2" xOffset="{_LABEL_OFFSET_MM}" '
        'yOffset="0" offsetUnits="MM"/>'
        '<rendering obstacle="0" displayAll="1"/></settings></labeling></qgis>\n'
    )


def _sld(style: Style) -> str:
    return (
        '<?xml version="1.0" encoding="UTF-8"?>\n'
        '<StyledLayerDescriptor xmlns="http://www.opengis.net/sld" xmlns:se="http://www.opengis.net/se" '
        'xmlns:ogc="http://www.opengis.net/ogc" version="1.1.0"><NamedLayer>'
        f"<se:Name>{escape(style.name)}</se:Name><UserStyle><se:Name>{escape(style.name)}</se:Name>"
        f"<se:FeatureTypeStyle>{''.join(_rule(style.field, symbol) for symbol in style.symbols)}"
        "</se:FeatureTypeStyle></UserStyle></NamedLayer></StyledLayerDescriptor>\n"
    )


def _rule(field: str, symbol: Symbol) -> str:
    """The rule of one symbol: the drawing, the mark for want of it, and the dip or plunge beside them."""
    turn = (
        "<se:Rotation><ogc:PropertyName>azimuth_deg</ogc:PropertyName></se:Rotation>" if symbol.turned else ""
    )
    return (
        f"<se:Rule><se:Name>{escape(symbol.name)}</se:Name><ogc:Filter><ogc:PropertyIsEqualTo>"
        f"<ogc:PropertyName>{field}</ogc:PropertyName><ogc:Literal>{escape(symbol.name)}</ogc:Literal>"
        "</ogc:PropertyIsEqualTo></ogc:Filter><se:PointSymbolizer><se:Graphic><se:ExternalGraphic>"
        f'<se:InlineContent encoding="base64">{symbol.svg}</se:InlineContent><se:Format>image/svg+xml</se:Format>'
        f"</se:ExternalGraphic><se:Mark><se:WellKnownName>{symbol.mark}</se:WellKnownName>"
        f'<se:Fill><se:SvgParameter name="fill">{symbol.colour if symbol.filled else _PAPER}</se:SvgParameter>'
        f'</se:Fill><se:Stroke><se:SvgParameter name="stroke">{symbol.colour}</se:SvgParameter>'
        '<se:SvgParameter name="stroke-width">1.8</se:SvgParameter></se:Stroke></se:Mark>'
        f"<se:Size>{_SIZE_PX}</se:Size>{turn}</se:Graphic></se:PointSymbolizer>"
        "<se:TextSymbolizer><se:Label><ogc:PropertyName>label</ogc:PropertyName></se:Label>"
        '<se:Font><se:SvgParameter name="font-size">10</se:SvgParameter></se:Font>'
        "<se:LabelPlacement><se:PointPlacement><se:Displacement><se:DisplacementX>12</se:DisplacementX>"
        "<se:DisplacementY>0</se:DisplacementY></se:Displacement></se:PointPlacement></se:LabelPlacement>"
        f'<se:Fill><se:SvgParameter name="fill">{_INK}</se:SvgParameter></se:Fill></se:TextSymbolizer></se:Rule>'
    )
