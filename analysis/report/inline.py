"""Figures as drawings within a page: their SVG cut down to what the page needs, its colours left to the page.

A figure brings its own ground, heading and colours, because it may be looked at alone. Within a page the heading
stands in the page's own words, and the colours are the page's, which change between day and dusk. Letters are
outlines, so that a drawing looks alike on every machine; the outlines of all drawings of a page are kept once.
"""

from __future__ import annotations

import io
import re
import warnings
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final
from xml.etree import ElementTree as ET

from analysis.report.palette import LIGHT
from analysis.report.sheet import POINTS_PER_INCH, house_style

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

    from matplotlib.figure import Figure

COLOURS: Final = ("paper", "card", "ink", "quiet", "muted", "rule", "accent", "second", "band")
"""The palette's colours, each a custom property `--name` of the page."""
_HEADINGS: Final = re.compile(r"fold|sign|strip-edge|headline-\d+|figure-line-\d+")
_PAD_IN: Final = 0.08
_SVG: Final = "{http://www.w3.org/2000/svg}"
_LINK: Final = "{http://www.w3.org/1999/xlink}href"
_NUMBER: Final = re.compile(r"-?\d+\.\d{3,}")
_TRANSLATION: Final = re.compile(r"translate\([^)]*\)")
_REFERENCE: Final = re.compile(r"url\(#([^)]+)\)")
_GLYPH: Final = re.compile(r"DejaVuSans[\w-]*-[0-9a-f]+")


@dataclass(frozen=True, slots=True)
class Drawing:
    """A figure as SVG: its elements, the letters it uses (id to element), and its size in points."""

    name: str
    left: float
    top: float
    wide: float
    high: float
    root: ET.Element
    letters: Mapping[str, ET.Element]

    def svg(self, label: str) -> str:
        """Markup for a page that holds the letters; `label` says what is to be seen."""
        box = f"{self.left:.1f} {self.top:.1f} {self.wide:.1f} {self.high:.1f}"
        outer = ET.Element(
            "svg",
            {
                "role": "img",
                "aria-label": label,
                "viewBox": box,
                "stroke-linejoin": "round",
                "stroke-linecap": "butt",
                "width": f"{self.wide:.1f}",
                "height": f"{self.high:.1f}",
            },
        )
        outer.extend(self.root)
        return _markup(outer)

    def whole_svg(self) -> bytes:
        """A document of its own, in the colours of day, letters included."""
        box = f"{self.left:.1f} {self.top:.1f} {self.wide:.1f} {self.high:.1f}"
        outer = ET.Element(
            "svg",
            {
                "xmlns": "http://www.w3.org/2000/svg",
                "viewBox": box,
                "stroke-linejoin": "round",
                "width": f"{self.wide:.1f}",
                "height": f"{self.high:.1f}",
            },
        )
        letters = ET.SubElement(outer, "defs")
        letters.extend(self.letters[name] for name in sorted(self.letters))
        outer.extend(self.root)
        text = _markup(outer)
        for name in COLOURS:
            text = text.replace(f"var(--{name})", getattr(LIGHT, name))
        return text.encode()


def drawing_of(
    figure: Figure, name: str, titles: Mapping[str, Sequence[str]] | None = None
) -> Drawing:
    """Make a drawing of a figure in the colours of day.

    Parameters
    ----------
    figure
        Drawn with the light palette; its ground and the heading it carries are taken away for good.
    name
        Put before the names of its parts, which have to be unlike those of any other drawing of the page.
    titles
        By the name of a group of markers, what each of them is, in the order drawn: shown when it is pointed at.

    """
    for artist in figure.findobj(lambda one: bool(_HEADINGS.fullmatch(str(one.get_gid() or "")))):
        artist.remove()
    figure.patch.set_visible(False)
    stream = io.BytesIO()
    with house_style(), warnings.catch_warnings():
        # Signs that the font lacks are drawn as empty boxes; the page has the names in its own letters too.
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        left, top, right, bottom = _edges_pt(figure)
        figure.savefig(stream, format="svg", metadata={"Date": None, "Creator": None})
    whole = ET.fromstring(stream.getvalue())  # noqa: S314 - written by matplotlib a moment ago
    root, letters = _tidied(whole, name, titles or {})
    return Drawing(name, left, top, right - left, bottom - top, root, letters)


def _edges_pt(figure: Figure) -> tuple[float, float, float, float]:
    """Left, top, right and bottom edge of what is drawn, points from the upper left corner of the sheet."""
    boxes = []
    for axes in figure.axes:
        # Axes without lines of their own count by what stands in them, not by the room they take.
        parts = [axes] if axes.axison else [one for one in axes.get_children() if one is not axes.patch]
        boxes += [box for one in parts if one.get_visible() and (box := one.get_tightbbox()) is not None]
    boxes += [box for text in figure.texts if (box := text.get_tightbbox()) is not None]
    boxes = [box for box in boxes if box.width > 0.0 or box.height > 0.0]
    dpi = float(figure.dpi)
    wide, high = (float(size) for size in figure.get_size_inches())
    left = min((float(box.x0) for box in boxes), default=0.0) / dpi - _PAD_IN
    right = max((float(box.x1) for box in boxes), default=wide * dpi) / dpi + _PAD_IN
    bottom = min((float(box.y0) for box in boxes), default=0.0) / dpi - _PAD_IN
    top = max((float(box.y1) for box in boxes), default=high * dpi) / dpi + _PAD_IN
    inside = max(left, 0.0), max(high - top, 0.0), min(right, wide), min(high - bottom, high)
    return tuple(edge * POINTS_PER_INCH for edge in inside)  # type: ignore[return-value]


def letters_svg(drawings: Iterable[Drawing]) -> str:
    """Markup of the letters that drawings use, each once, to stand ahead of them in the page."""
    letters: dict[str, ET.Element] = {}
    for drawing in drawings:
        letters.update(drawing.letters)
    outer = ET.Element("svg", {"width": "0", "height": "0", "aria-hidden": "true", "class": "letters"})
    holder = ET.SubElement(outer, "defs")
    holder.extend(letters[name] for name in sorted(letters))
    return _markup(outer)


def _tidied(
    whole: ET.Element, name: str, titles: Mapping[str, Sequence[str]]
) -> tuple[ET.Element, dict[str, ET.Element]]:
    """Group of all that is drawn, and the letters; definitions go first, under names of this drawing's own."""
    letters: dict[str, ET.Element] = {}
    definitions = ET.Element("defs")
    used: dict[str, str] = {}

    def renamed(old: str) -> str:
        return old if _GLYPH.fullmatch(old) else used.setdefault(old, f"{name}-{len(used)}")

    def clean(element: ET.Element) -> ET.Element | None:
        tag = element.tag.removeprefix(_SVG)
        if tag in ("metadata", "style"):
            return None
        made = ET.Element(tag)
        for key, value in element.attrib.items():
            text = _REFERENCE.sub(lambda found: f"url(#{renamed(found[1])})", value)
            if key == _LINK:
                made.set("href", text if text.startswith("data:") else f"#{renamed(text[1:])}")
            elif key == "style":
                made.set("style", _themed(text))
            elif key == "transform":
                made.set(key, _TRANSLATION.sub(lambda found: _shorter(found[0]), text))
            elif key in ("d", "points", "x", "y", "width", "height"):
                made.set(key, _shorter(text))
            elif key == "id":
                if tag in ("path", "clipPath") and inside_definitions[-1]:
                    made.set("id", renamed(text))
            else:
                made.set(key, text)
        inside_definitions.append(inside_definitions[-1] or tag == "defs")
        for child in element:
            part = clean(child)
            if part is not None:
                made.append(part)
        inside_definitions.pop()
        marks = titles.get(element.get("id", ""))
        if marks is not None:
            _entitle(made, marks)
        if tag == "defs":
            for part in made:
                if _GLYPH.fullmatch(part.get("id", "")):
                    letters[part.get("id", "")] = part
                else:
                    definitions.append(part)
            return None
        return made

    inside_definitions = [False]
    root = ET.Element("g")
    for child in whole:
        part = clean(child)
        if part is not None:
            root.append(part)
    if len(definitions):
        root.insert(0, definitions)
    return root, letters


def _entitle(group: ET.Element, titles: Sequence[str]) -> None:
    """Give each marker of a group its title; none where the markers are not drawn one by one."""
    marks = list(group.iter("use"))
    if len(marks) != len(titles):
        return
    for mark, title in zip(marks, titles, strict=True):
        ET.SubElement(mark, "title").text = title


def _themed(style: str) -> str:
    """A style with the palette's colours by name, without spaces."""
    text = re.sub(r"\s*([:;,])\s*", r"\1", style)
    for name in COLOURS:
        text = text.replace(getattr(LIGHT, name), f"var(--{name})")
    return _shorter(text)


def _shorter(text: str) -> str:
    """Numbers to a hundredth of a point, which nobody sees, and no needless spaces."""
    cut = _NUMBER.sub(lambda found: f"{float(found[0]):.2f}".rstrip("0").rstrip("."), text)
    return " ".join(cut.split()) if not cut.startswith("data:") else cut


def _markup(element: ET.Element) -> str:
    return ET.tostring(element, encoding="unicode", short_empty_elements=True)
