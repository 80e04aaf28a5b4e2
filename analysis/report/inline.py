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


def drawing_of(figure: Figure, name: str, titles: Mapping[str, Sequence[str]] | None = None) -> Drawing:
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
        frame = {axes.patch, axes.xaxis, axes.yaxis, *axes.spines.values()}
        parts = [axes] if axes.axison else [one for one in axes.get_children() if one not in frame]
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
    tidier = _Tidier(name.replace("-", "_"), titles)
    root = ET.Element("g")
    root.extend(part for child in whole if (part := tidier.clean(child)) is not None)
    _straighten(root, tidier.definitions)
    if len(tidier.definitions):
        root.insert(0, tidier.definitions)
    return root, tidier.letters


class _Tidier:
    """Copies elements without namespaces, needless names and needless digits; takes definitions out."""

    def __init__(self, name: str, titles: Mapping[str, Sequence[str]]) -> None:
        self.name, self.titles = name, titles
        self.letters: dict[str, ET.Element] = {}
        self.definitions = ET.Element("defs")
        self._names: dict[str, str] = {}

    def clean(self, element: ET.Element, *, defined: bool = False) -> ET.Element | None:
        """Copy an element with all in it; None for what the page does not need, or has elsewhere."""
        tag = element.tag.removeprefix(_SVG)
        if tag in ("metadata", "style"):
            return None
        made = ET.Element(tag)
        for key, value in element.attrib.items():
            # Of the names only those that something else refers to are kept.
            if key != "id" or (defined and tag in ("path", "clipPath")):
                made.set("href" if key == _LINK else key, self._value(key, value))
        inside = defined or tag == "defs"
        made.extend(part for child in element if (part := self.clean(child, defined=inside)) is not None)
        marks = self.titles.get(element.get("id", ""))
        if marks is not None:
            _entitle(made, marks)
        if tag != "defs":
            return made
        for part in made:
            name = part.get("id", "")
            if _GLYPH.fullmatch(name):
                self.letters[name] = part
            else:
                self.definitions.append(part)
        return None

    def _value(self, key: str, value: str) -> str:
        text = _REFERENCE.sub(lambda found: f"url(#{self._renamed(found[1])})", value)
        if key == "id":
            return self._renamed(text)
        if key == _LINK:
            return f"#{self._renamed(text.removeprefix('#'))}"
        if key == "style":
            return _themed(text)
        if key == "transform":
            return _TRANSLATION.sub(lambda found: _shorter(found[0]), text)
        return _shorter(text) if key in ("d", "x", "y", "width", "height") else text

    def _renamed(self, name: str) -> str:
        if _GLYPH.fullmatch(name):
            return name
        return self._names.setdefault(name, f"{self.name}_{len(self._names)}")


def _straighten(root: ET.Element, definitions: ET.Element) -> None:
    """Draw what is defined for one use only where it is used: some readers do not clip what is used."""
    uses: dict[str, list[tuple[ET.Element, ET.Element]]] = {}
    for parent in root.iter("g"):
        for child in parent:
            if child.tag == "use" and "clip-path" in parent.attrib:
                uses.setdefault(child.get("href", "#")[1:], []).append((parent, child))
    for path in list(definitions):
        found = uses.get(path.get("id", ""), [])
        if path.tag != "path" or len(found) != 1 or "transform" in path.attrib:
            continue
        parent, use = found[0]
        if len(use):  # it carries a title
            continue
        shift = float(use.get("x", "0")), float(use.get("y", "0"))
        made = {"d": _shifted(path.get("d", ""), shift), "clip-path": parent.get("clip-path", "")}
        style = ";".join(filter(None, (path.get("style"), use.get("style"))))
        parent.insert(list(parent).index(use), ET.Element("path", {**made, "style": style}))
        parent.remove(use)
        definitions.remove(path)


def _shifted(data: str, shift: tuple[float, float]) -> str:
    """Path data in absolute coordinates, moved."""
    place = 0
    words = []
    for word in data.split():
        if word.isalpha():
            words.append(word)
            continue
        words.append(f"{float(word) + shift[place % 2]:.2f}")
        place += 1
    return " ".join(words)


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
    return " ".join(cut.split())


def _markup(element: ET.Element) -> str:
    return ET.tostring(element, encoding="unicode", short_empty_elements=True)
