"""The sheet that a figure is drawn on: its size, its type, the verdict at its head, and writing it to a file.

Figures are made without pyplot, so that nothing is kept between two of them. The same check gives the same
file, byte for byte, with one version of matplotlib.
"""

from __future__ import annotations

import contextlib
import os
from pathlib import Path
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import SettingError
from analysis.files.atomic import whole_file
from analysis.fold.records import Verdict
from analysis.fold.words import figure_line, headline
from analysis.report.placing import Box

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from matplotlib.axes import Axes
    from matplotlib.figure import Figure
    from matplotlib.text import Text

    from analysis.fold.records import FoldCheck
    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

FONT: Final = "DejaVu Sans"  # comes with matplotlib
PNG_DPI: Final = 200
POINTS_PER_INCH: Final = 72.0
_EDGE_IN: Final = 0.3
_SIGN_IN: Final = 0.25  # half the size of the verdict's sign
_LEAN_DEG: Final = 32.0
SUFFIXES: Final = (".png", ".svg")


@contextlib.contextmanager
def house_style() -> Iterator[None]:
    """Draw with matplotlib's own defaults and our few changes, whatever the user has configured."""
    import matplotlib as mpl  # noqa: PLC0415 - loaded when a figure is drawn

    with mpl.rc_context():
        mpl.rcdefaults()
        mpl.rcParams.update({"font.family": FONT, "svg.hashsalt": "hingewise", "axes.unicode_minus": True})
        yield


class Sheet:
    """A figure with one coordinate system in inches over all of it, the origin at the lower left."""

    def __init__(self, wide_in: float, high_in: float, palette: Palette) -> None:
        from matplotlib.backends.backend_agg import FigureCanvasAgg  # noqa: PLC0415 - loaded when a figure is drawn
        from matplotlib.figure import Figure  # noqa: PLC0415 - as above

        self.wide_in, self.high_in, self.palette = wide_in, high_in, palette
        self.figure: Figure = Figure(figsize=(wide_in, high_in), dpi=100, facecolor=palette.paper)
        FigureCanvasAgg(self.figure)  # what the figure measures its words with
        self.axes: Axes = self.figure.add_axes((0.0, 0.0, 1.0, 1.0), zorder=0)
        self.axes.set_axis_off()
        self.axes.set_xlim(0.0, wide_in)
        self.axes.set_ylim(0.0, high_in)

    def axes_at(self, left: float, bottom: float, wide: float, high: float) -> Axes:
        """Make axes at a place on the sheet, inches."""
        place = (left / self.wide_in, bottom / self.high_in, wide / self.wide_in, high / self.high_in)
        return self.figure.add_axes(place, zorder=1)

    def words(
        self,
        x: float,
        y: float,
        text: str,
        size: float,
        *,
        quiet: bool = False,
        bold: bool = False,
        align: str = "left",
        gid: str | None = None,
    ) -> Text:
        """Write one line with its baseline at a place in inches; `size` is in points."""
        made = self.axes.text(
            x,
            y,
            text,
            fontsize=size,
            fontweight="bold" if bold else "normal",
            color=self.palette.quiet if quiet else self.palette.ink,
            verticalalignment="baseline",
            parse_math=False,  # a fold's name may hold a dollar sign
        )
        made.set_horizontalalignment(
            "right" if align == "right" else "center" if align == "center" else "left"
        )
        made.set_gid(gid)
        return made

    def strokes(self, lines: Sequence[Floats], width: float, colour: str, gid: str) -> None:
        """Draw open lines, each (n, 2) in inches; `width` is in points."""
        for line in lines:
            self.axes.plot(
                line[:, 0], line[:, 1], color=colour, linewidth=width, solid_capstyle="butt", gid=gid
            )

    def box_of(self, text: Text) -> Box:
        """The box, in pixels, that a text takes up."""
        extent = text.get_window_extent()
        return Box(float(extent.x0), float(extent.y0), float(extent.x1), float(extent.y1))

    def size_in(self, text: str, size: float, *, bold: bool = False) -> tuple[float, float]:
        """Width and height, inches, of one line."""
        made = self.words(0.0, 0.0, text, size, bold=bold)
        box = self.box_of(made)
        made.remove()
        return (box.right - box.left) / self.figure.dpi, (box.top - box.bottom) / self.figure.dpi

    def broken(self, text: str, size: float, wide_in: float, *, bold: bool = False) -> list[str]:
        """Break a text into lines of at most this width and of about one length; a long word stays whole."""
        lines = self._filled(text, size, wide_in, bold=bold)
        if len(lines) < 2:
            return lines
        # The narrowest column with no more lines leaves no single word on the last one.
        for share in np.arange(0.5, 1.0, 0.05):
            even = self._filled(text, size, wide_in * float(share), bold=bold)
            if len(even) == len(lines):
                return even
        return lines

    def _filled(self, text: str, size: float, wide_in: float, *, bold: bool) -> list[str]:
        lines: list[str] = []
        for word in text.split():
            longer = f"{lines[-1]} {word}" if lines else word
            if lines and self.size_in(longer, size, bold=bold)[0] <= wide_in:
                lines[-1] = longer
            else:
                lines.append(word)
        return lines

    def draw_strip(self, check: FoldCheck) -> float:
        """Draw the verdict at the head of the sheet: its sign, its sentence, its figure, never one alone.

        Returns the height, inches above the sheet's lower edge, at which it ends.
        """
        left = _EDGE_IN + 2.0 * _SIGN_IN + 0.25
        room = self.wide_in - left - _EDGE_IN
        y = self.high_in - 0.3
        if check.fold:
            self.words(left, y, check.fold, 9.0, quiet=True, gid="fold")
            y -= 0.05
        sentence = headline(check)
        sizes = [size for size in (15.0, 14.0, 13.0) if self.size_in(sentence, size, bold=True)[0] <= room]
        size = sizes[0] if sizes else 14.0
        for number, line in enumerate(self.broken(sentence, size, room, bold=True)):
            y -= 0.25
            self.words(left, y, line, size, bold=True, gid=f"headline-{number}")
        y -= 0.05
        for number, line in enumerate(self.broken(figure_line(check), 10.5, room)):
            y -= 0.2
            self.words(left, y, line, 10.5, gid=f"figure-line-{number}")
        end = y - 0.17
        middle = np.array([_EDGE_IN + _SIGN_IN, (self.high_in - 0.18 + end) / 2.0])
        for stroke, width in verdict_sign(check):
            self.strokes(
                [middle + stroke * _SIGN_IN], width * _SIGN_IN * POINTS_PER_INCH, self.palette.ink, "sign"
            )
        edge = np.array([[0.0, end], [self.wide_in, end]])
        self.strokes([edge], 1.4, self.palette.ink, "strip-edge")
        return end


def _bar(lean_deg: float, half: float, x: float = 0.0) -> Floats:
    turn = np.radians(lean_deg)
    end = half * np.array([np.sin(turn), np.cos(turn)])
    return np.asarray(np.stack([-end, end]) + np.array([x, 0.0]), dtype=float)


def _arc(start_deg: float, stop_deg: float) -> Floats:
    turn = np.radians(np.linspace(start_deg, stop_deg, 61))
    return 0.85 * np.stack([np.cos(turn), np.sin(turn)], axis=-1)


def verdict_sign(check: FoldCheck) -> list[tuple[Floats, float]]:
    """Lines of the verdict's sign, (n, 2) from -1 to 1, each with its width on the same scale.

    The thin bar is the hinge and the heavy one the cleavage: parallel, or crossed and leaning to the side that
    the cleavage is turned to. A ring with a gap is still open; a ring with a bar is closed to a verdict.
    """
    if check.verdict is Verdict.AXIAL_PLANAR:
        return [(_bar(0.0, 0.9, -0.34), 0.26), (_bar(0.0, 0.9, 0.34), 0.26)]
    if check.verdict is Verdict.TRANSECTED:
        if check.sense == "unsigned":
            return [(_bar(_LEAN_DEG, 0.95), 0.2), (_bar(-_LEAN_DEG, 0.95), 0.2)]
        lean = _LEAN_DEG if check.sense == "clockwise" else -_LEAN_DEG
        return [(_bar(0.0, 0.95), 0.13), (_bar(lean, 1.0), 0.3)]
    if check.verdict is Verdict.CANNOT_BE_SETTLED:
        return [(_arc(0.0, 360.0), 0.2), (np.array([[-0.58, -0.58], [0.58, 0.58]]), 0.2)]
    return [(_arc(60.0, -240.0), 0.2)]


def save(figure: Figure, path: str | os.PathLike[str]) -> None:
    """Write a figure as PNG or SVG, by the file's ending, wholly or not at all.

    Raises SettingError for another ending and HingewiseError where the folder cannot be written to; nothing is
    left behind then.
    """
    suffix = Path(os.path.realpath(path)).suffix.lower()
    if suffix not in SUFFIXES:
        raise SettingError(
            f"{suffix or 'no ending'} is no kind of picture written here",
            where=os.fspath(path),
            expected="a name that ends in .png or .svg",
        )
    with house_style(), whole_file(path) as draft:
        if suffix == ".svg":
            figure.savefig(draft, format="svg", metadata={"Date": None, "Creator": None})
        else:
            figure.savefig(draft, format="png", dpi=PNG_DPI, metadata={"Software": None})


def save_all(figure: Figure, folder: Path, name: str) -> None:
    """Write a figure into a folder in every kind, under a name without ending; errors as in `save`."""
    for suffix in SUFFIXES:
        save(figure, folder / f"{name}{suffix}")
