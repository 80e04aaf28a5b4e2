"""The report on paper: the same sections as the page, set as a PDF.

Set with a library in pure Python, so that it works wherever the command was installed. The letters are those that
come with the figures; a sign that they lack is set as □, and the report says so.
"""

from __future__ import annotations

import io
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

from analysis import __version__
from analysis.report.blocks import Picture, Table
from analysis.report.page import library
from analysis.report.palette import LIGHT

if TYPE_CHECKING:
    from collections.abc import Callable

    from fpdf import FPDF

    from analysis.report.blocks import (
        Block,
        Facts,
        Points,
        Report,
        Section,
        Typed,
        Verdict,
        Words,
    )

_MM_PER_POINT: Final = 25.4 / 72.0
_EDGE_MM: Final = 17.0
_FOOT_MM: Final = 16.0
_DRAWN_AT: Final = 0.68  # of the size of a figure that stands alone
_HIGHEST_MM: Final = 118.0
_WORDS_PT: Final = 9.5
_SMALL_PT: Final = 8.0
_SIGN_MM: Final = 5.5  # half the size of a verdict's sign
_BESIDE_MM: Final = 15.0
_ABSENT: Final = "□"
_FIXED_DATE: Final = datetime(2000, 1, 1, tzinfo=UTC)
"""The same readings give the same file: it does not tell when it was made."""
_SMALL_TABLE_ROWS: Final = 12  # rows up to which a table stands on one page
_FACT_SHARE: Final = 0.22


def render_paper(
    report: Report, *, paper: str = "a4", progress: Callable[[float], None] | None = None
) -> bytes:
    """Set a report as PDF, on "a4" or "letter"; raises HingewiseError where the PDF library is missing."""
    library("fpdf", "fpdf2")
    setting = _Setting(report, paper)
    setting.head()
    for number, section in enumerate(report.sections, start=1):
        setting.section(section)
        if progress is not None:
            progress(number / len(report.sections))
    setting.foot()
    return bytes(setting.pdf.output())


def _new_pdf(paper: str, title: str) -> FPDF:
    """Make an empty document with our letters and a foot on every page."""
    from fpdf import FPDF  # noqa: PLC0415 - loaded when a PDF is made
    from matplotlib import get_data_path  # noqa: PLC0415 - the letters come with it

    class Paper(FPDF):
        """Pages with a foot."""

        def footer(self) -> None:
            """Say what this is and which page."""
            self.set_y(-_FOOT_MM + 4.0)
            self.set_font("letters", "", 7.5)
            self.set_text_color(LIGHT.quiet)
            self.cell(0, 4, foot, align="L", new_x="LMARGIN")
            self.cell(0, 4, f"{self.page_no()} of {{nb}}", align="R")

    pdf = Paper(format=paper)
    folder = Path(get_data_path()) / "fonts" / "ttf"
    for style, name in (("", "DejaVuSans"), ("B", "DejaVuSans-Bold"), ("I", "DejaVuSans-Oblique")):
        pdf.add_font("letters", style, folder / f"{name}.ttf")
    pdf.add_font("typed", "", folder / "DejaVuSansMono.ttf")
    foot = title if len(title) <= 80 else f"{title[:79]}…"
    pdf.set_margins(_EDGE_MM, 15.0)
    pdf.set_auto_page_break(auto=True, margin=_FOOT_MM)
    pdf.set_creation_date(_FIXED_DATE)
    pdf.set_lang("en")
    pdf.set_title(title)
    pdf.set_producer(f"Hingewise {__version__}")
    return pdf


class _Setting:
    """One PDF under way; lengths are millimetres, sizes of letters points."""

    def __init__(self, report: Report, paper: str) -> None:
        from matplotlib import get_data_path  # noqa: PLC0415
        from matplotlib.font_manager import get_font  # noqa: PLC0415 - the letters come with it

        font = get_font(str(Path(get_data_path()) / "fonts" / "ttf" / "DejaVuSans.ttf"))
        self._known = set(font.get_charmap())
        self._absent = False
        self.report = report
        self.pdf = _new_pdf(paper, self._clean(report.title))
        self.pdf.add_page()
        self._fresh = True  # nothing stands on this page yet

    @property
    def wide(self) -> float:
        """Room from margin to margin."""
        return float(self.pdf.epw)

    # -- the whole -----------------------------------------------------------------------------------------

    def head(self) -> None:
        """Set the title and the lines under it."""
        self._text(self.report.title, 17.0, style="B")
        for line in self.report.lines:
            self._text(line, _WORDS_PT, colour=LIGHT.quiet)
        self.pdf.ln(3.0)

    def foot(self) -> None:
        """Say at the end what could not be set."""
        if self._absent:
            self._text(f"{_ABSENT} stands for a sign that the letters of this file lack.", _SMALL_PT)

    def section(self, section: Section, level: int = 0) -> None:
        """Set a section and its parts."""
        if section.new_page and not self._fresh:
            self._new_page()
        size, gap = ((14.0, 5.0), (11.0, 3.0))[level]
        # A heading stays with what it heads.
        self._keep(gap + 8.0 + sum(map(self._height_of, section.blocks[:2])))
        if not self._fresh:
            self.pdf.ln(gap)
        if level == 0:
            self._rule(0.7, LIGHT.ink)
            self.pdf.ln(1.5)
        self.pdf.start_section(self._clean(section.title)[:200], level=level)
        self._text(section.title, size, style="B")
        self.pdf.ln(1.0)
        for block in section.blocks:
            self._block(block)
        for part in section.parts:
            self.section(part, level + 1)

    def _block(self, block: Block) -> None:
        self._keep(self._height_of(block))
        makers: dict[str, Callable[[Any], None]] = {
            "words": self._words,
            "points": self._points,
            "verdict": self._verdict,
            "facts": self._facts,
            "picture": self._picture,
            "table": self._table,
            "typed": self._typed,
        }
        makers[block.kind](block)
        self._fresh = False

    # -- the blocks ----------------------------------------------------------------------------------------

    def _words(self, block: Words) -> None:
        self._text(block.text, _WORDS_PT)
        self.pdf.ln(1.5)

    def _points(self, block: Points) -> None:
        left = self.pdf.l_margin
        indent = 4.0 if block.boxed else 0.0
        top, page = self.pdf.get_y(), self.pdf.page_no()
        self.pdf.set_left_margin(left + indent)
        if block.title:
            self._text(block.title, _WORDS_PT, style="B")
        self.pdf.set_left_margin(left + indent + 4.0)
        for item in block.items:
            self._keep(self._measured(item, _WORDS_PT, self.pdf.epw))
            self.pdf.set_font("letters", "", _WORDS_PT)
            self.pdf.set_x(left + indent + 0.5)
            self.pdf.cell(4.0, self._line(_WORDS_PT), "•")
            self.pdf.set_x(left + indent + 4.0)
            self._text(item, _WORDS_PT)
            self.pdf.ln(0.6)
        self.pdf.set_left_margin(left)
        self.pdf.set_x(left)
        if block.boxed:
            start = top if self.pdf.page_no() == page else self.pdf.t_margin
            self.pdf.set_draw_color(LIGHT.ink)
            self.pdf.set_line_width(0.9)
            self.pdf.line(left + 0.5, start, left + 0.5, self.pdf.get_y())
        self.pdf.ln(2.0)

    def _verdict(self, block: Verdict) -> None:
        left, top = self.pdf.l_margin, self.pdf.get_y()
        self.pdf.set_left_margin(left + _BESIDE_MM)
        self.pdf.set_xy(left + _BESIDE_MM, top + 1.0)
        self._text(block.headline, 12.5, style="B")
        self._text(block.figure, _WORDS_PT + 0.5)
        end = max(self.pdf.get_y(), top + 2.0 * _SIGN_MM + 1.0)
        self.pdf.set_left_margin(left)
        x, y = left + _SIGN_MM + 0.5, (top + end) / 2.0
        self.pdf.set_draw_color(LIGHT.ink)
        for stroke, width in block.sign:
            self.pdf.set_line_width(width * _SIGN_MM)
            self.pdf.polyline([(x + dx * _SIGN_MM, y - dy * _SIGN_MM) for dx, dy in stroke.tolist()])
        self.pdf.set_xy(left, end)
        self.pdf.ln(2.0)

    def _facts(self, block: Facts) -> None:
        self._grid([], [(name, value) for name, value in block.rows], (_FACT_SHARE, 1.0 - _FACT_SHARE), 8.5)

    def _picture(self, block: Picture) -> None:
        wide, high = self._size_of(block)
        self.pdf.image(
            io.BytesIO(block.drawing.whole_svg()),
            x=self.pdf.l_margin,
            y=self.pdf.get_y() + 1.0,
            w=wide,
            h=high,
            alt_text=self._clean(block.seen),
        )
        self.pdf.set_y(self.pdf.get_y() + high + 2.0)
        self._text(block.caption, _SMALL_PT, colour=LIGHT.quiet)
        self.pdf.ln(2.5)

    def _table(self, block: Table) -> None:
        self._text(block.caption, _WORDS_PT - 0.5, colour=LIGHT.quiet)
        self.pdf.ln(1.0)
        shares = tuple(column.share for column in block.columns)
        names = [column.name for column in block.columns]
        struck = {number for number, row in enumerate(block.rows) if row.struck}
        self._grid(names, [row.cells for row in block.rows], shares, 7.8, struck)

    def _typed(self, block: Typed) -> None:
        self.pdf.set_font("typed", "", 8.5)
        self.pdf.set_text_color(LIGHT.ink)
        self.pdf.set_fill_color(LIGHT.paper)
        self.pdf.multi_cell(
            0, 4.6, self._clean(block.text), fill=True, align="L", new_x="LMARGIN", new_y="NEXT", padding=2
        )
        self.pdf.ln(2.0)

    def _grid(
        self,
        names: list[str],
        rows: list[tuple[str, ...]],
        shares: tuple[float, ...],
        size: float,
        struck: set[int] | frozenset[int] = frozenset(),
    ) -> None:
        """Rows under headings that are repeated on every page; the first cell of a row heads it."""
        whole = sum(shares)
        widths = [share / whole * self.wide for share in shares]
        line = self._line(size)
        if names:
            self._row(tuple(names), widths, size, line, heading=True)
        for number, cells in enumerate(rows):
            high = line * max(
                self._lines(cell, width, size) for cell, width in zip(cells, widths, strict=True)
            )
            if self.pdf.get_y() + high + 1.0 > self.pdf.page_break_trigger:
                self._new_page()
                if names:
                    self._row(tuple(names), widths, size, line, heading=True)
            self._row(cells, widths, size, line, struck=number in struck)
        self.pdf.ln(2.5)

    def _row(
        self,
        cells: tuple[str, ...],
        widths: list[float],
        size: float,
        line: float,
        *,
        heading: bool = False,
        struck: bool = False,
    ) -> None:
        top = end = self.pdf.get_y() + 0.5
        x = self.pdf.l_margin
        for number, (cell, width) in enumerate(zip(cells, widths, strict=True)):
            last = number == len(cells) - 1
            style = "B" if heading or number == 0 else "S" if struck and not last else "I" if struck else ""
            self.pdf.set_font("letters", style, size)
            self.pdf.set_text_color(LIGHT.ink)
            self.pdf.set_xy(x, top)
            self.pdf.multi_cell(width - 1.5, line, self._clean(cell), align="L", new_x="RIGHT", new_y="NEXT")
            end = max(end, self.pdf.get_y())
            x += width
        self.pdf.set_xy(self.pdf.l_margin, end + 0.4)
        self._rule(0.4 if heading else 0.15, LIGHT.ink if heading else LIGHT.rule)

    # -- measures ------------------------------------------------------------------------------------------

    def _text(self, text: str, size: float, *, style: str = "", colour: str = LIGHT.ink) -> None:
        self.pdf.set_font("letters", style, size)
        self.pdf.set_text_color(colour)
        self.pdf.multi_cell(0, self._line(size), self._clean(text), align="L", new_x="LMARGIN", new_y="NEXT")

    def _clean(self, text: str) -> str:
        """Text on one line in signs that the letters have."""
        line = " ".join(text.split())
        if line.isascii() or all(ord(sign) in self._known for sign in line):
            return line
        self._absent = True
        return "".join(sign if ord(sign) in self._known else _ABSENT for sign in line)

    @staticmethod
    def _line(size: float) -> float:
        return size * _MM_PER_POINT * 1.35

    def _lines(self, text: str, width: float, size: float) -> int:
        """How many lines a cell takes."""
        self.pdf.set_font("letters", "B", size)
        if self.pdf.get_string_width(self._clean(text)) <= width - 4.0:
            return 1
        lines = self.pdf.multi_cell(
            width - 1.5, 1.0, self._clean(text), align="L", dry_run=True, output="LINES"
        )
        return max(len(lines), 1)  # type: ignore[arg-type]  # a list, by the output asked for

    def _measured(self, text: str, size: float, width: float) -> float:
        return self._line(size) * self._lines(text, width, size)

    def _size_of(self, block: Picture) -> tuple[float, float]:
        """Width and height of a picture: whole on one page, whatever its form."""
        wide = block.drawing.wide * _MM_PER_POINT * _DRAWN_AT
        high = block.drawing.high * _MM_PER_POINT * _DRAWN_AT
        scale = min(1.0, self.wide / wide, _HIGHEST_MM / high)
        return wide * scale, high * scale

    def _height_of(self, block: Block) -> float:
        """About the height of a block that has to stand together."""
        if isinstance(block, Picture):
            return self._size_of(block)[1] + 12.0
        if isinstance(block, Table) and len(block.rows) <= _SMALL_TABLE_ROWS:
            return 16.0 + 5.5 * len(block.rows)
        return {"verdict": 26.0, "table": 28.0}.get(block.kind, 14.0)

    def _keep(self, high: float) -> None:
        """Go on to the next page where what follows would be torn apart."""
        if not self._fresh and self.pdf.get_y() + high > self.pdf.page_break_trigger:
            self._new_page()

    def _new_page(self) -> None:
        self.pdf.add_page()
        self._fresh = True

    def _rule(self, width: float, colour: str) -> None:
        self.pdf.set_draw_color(colour)
        self.pdf.set_line_width(width)
        y = self.pdf.get_y()
        self.pdf.line(self.pdf.l_margin, y, self.pdf.l_margin + self.wide, y)
