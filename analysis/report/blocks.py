"""What a report consists of: sections of a few kinds of blocks, which the page and the paper both set.

The records hold words and drawings, no markup: what is said is decided once, and how it looks is decided by
`analysis.report.page` (HTML) and `analysis.report.paper` (PDF). Every text may be hostile, and is set as it stands.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats
    from analysis.report.inline import Drawing

# What is longer than this is cut in the report and stands whole in the file, characters.
LONGEST_TEXT = 400


def cut(text: str, longest: int = LONGEST_TEXT) -> str:
    """One line of text of bounded length that says when it was cut."""
    line = " ".join(text.split())
    if len(line) <= longest:
        return line
    return f"{line[:longest].rstrip()} … ({len(line)} characters, whole in the file)"


@dataclass(frozen=True, slots=True)
class Words:
    """A paragraph."""

    text: str
    kind: str = field(default="words", init=False)


@dataclass(frozen=True, slots=True)
class Points:
    """Several sentences, a point each; `boxed` where nobody may overlook them."""

    items: tuple[str, ...]
    title: str = ""
    boxed: bool = False
    kind: str = field(default="points", init=False)


@dataclass(frozen=True, slots=True)
class Verdict:
    """A verdict: the lines of its sign (each (n, 2) from -1 to 1, with its width), its sentence, its figure."""

    sign: tuple[tuple[Floats, float], ...]
    headline: str
    figure: str
    kind: str = field(default="verdict", init=False)


@dataclass(frozen=True, slots=True)
class Facts:
    """Names and what they are."""

    rows: tuple[tuple[str, str], ...]
    kind: str = field(default="facts", init=False)


@dataclass(frozen=True, slots=True)
class Picture:
    """A drawing with its caption, and the words for those who do not see it."""

    drawing: Drawing
    caption: str
    seen: str
    kind: str = field(default="picture", init=False)


@dataclass(frozen=True, slots=True)
class Row:
    """A row of a table; `struck` where it no longer counts, `link` to the section that its head names."""

    cells: tuple[str, ...]
    struck: bool = False
    link: str = ""


@dataclass(frozen=True, slots=True)
class Column:
    """A column: its heading, its share of the width, and whether figures stand in it."""

    name: str
    share: float
    figures: bool = False


@dataclass(frozen=True, slots=True)
class Table:
    """A table whose first column heads the rows; a long one is folded away on the screen, never on paper."""

    caption: str
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]
    folded: bool = False
    kind: str = field(default="table", init=False)


@dataclass(frozen=True, slots=True)
class Typed:
    """A line to be typed as it stands."""

    text: str
    kind: str = field(default="typed", init=False)


Block = Words | Points | Verdict | Facts | Picture | Table | Typed


@dataclass(frozen=True, slots=True)
class Section:
    """A section with its heading; `parts` are sections of their own within it."""

    anchor: str
    title: str
    blocks: tuple[Block, ...] = ()
    parts: tuple[Section, ...] = ()
    new_page: bool = False


@dataclass(frozen=True, slots=True)
class Report:
    """A whole report: its title, the lines under it, its sections."""

    title: str
    lines: tuple[str, ...]
    sections: tuple[Section, ...]

    def drawings(self) -> list[Drawing]:
        """Every drawing, in order."""
        sections = [one for section in self.sections for one in (section, *section.parts)]
        return [block.drawing for one in sections for block in one.blocks if isinstance(block, Picture)]
