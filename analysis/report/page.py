"""The report as one HTML page that needs nothing beside itself: no script, no font, no picture from elsewhere.

The page forbids itself to load or run anything (a content security policy), so that not even a hostile name in a
file of readings could. What is pointed at names itself through SVG's own titles.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Final

from analysis import __version__
from analysis.errors import HingewiseError
from analysis.report.inline import COLOURS, letters_svg
from analysis.report.palette import DARK, LIGHT

if TYPE_CHECKING:
    from types import ModuleType

    from analysis.orient.vectors import Floats
    from analysis.report.blocks import Report
    from analysis.report.palette import Palette

_TEMPLATES: Final = Path(__file__).parent / "templates"


def render_page(report: Report) -> str:
    """Set a report as HTML; raises HingewiseError where the template library is missing."""
    jinja2 = library("jinja2")
    environment = jinja2.Environment(
        loader=jinja2.FileSystemLoader(_TEMPLATES),
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters["sign_path"] = sign_path
    environment.filters["markup"] = _markup
    return str(
        environment.get_template("report.html").render(
            report=report,
            style=(_TEMPLATES / "report.css").read_text(encoding="utf-8"),
            light=_properties(LIGHT),
            dark=_properties(DARK),
            letters=letters_svg(report.drawings()),
            version=__version__,
        )
    )


def library(name: str, package: str = "") -> ModuleType:
    """Import one of the libraries of the desk; HingewiseError says what to install where it is missing."""
    import importlib  # noqa: PLC0415 - used here only

    try:
        return importlib.import_module(name)
    except ImportError as error:
        raise HingewiseError(
            f"the library {package or name} is not installed",
            where="report",
            mend="Install what the desk needs: pip install 'hingewise[desk]'.",
        ) from error


def sign_path(stroke: Floats) -> str:
    """Path data of one line of a verdict's sign, (n, 2) from -1 to 1 with y upwards."""
    return "M" + "L".join(f"{x:.2f} {-y:.2f}" for x, y in stroke)


def _markup(text: str) -> object:
    """Mark text that is markup of our own making, so that it is not escaped again."""
    return library("markupsafe").Markup(text)


def _properties(palette: Palette) -> str:
    return ";".join(f"--{name}:{getattr(palette, name)}" for name in COLOURS)
