"""The options that describe an invented fold, shared by the commands that draw one."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from analysis.stats.synthetic import FoldDesign

if TYPE_CHECKING:
    from analysis.cli.common import AnyCommand


def _trend_plunge(_ctx: click.Context, _option: click.Parameter, text: str) -> tuple[float, float]:
    from analysis.orient.notation import Notation, read_line  # noqa: PLC0415 - only two commands need it

    line = read_line(text, Notation.TREND_PLUNGE).line
    return line.trend_deg, line.plunge_deg


_OPTIONS = (
    click.option(
        "--hinge",
        metavar="TREND/PLUNGE",
        default="040/10",
        show_default=True,
        callback=_trend_plunge,
        help="The hinge.",
    ),
    click.option(
        "--limbs",
        metavar="DIP DIP",
        nargs=2,
        type=float,
        default=(55.0, 55.0),
        show_default=True,
        help="Dips of both limbs in the profile, away from the axial surface.",
    ),
    click.option(
        "--scatter",
        metavar="BEDDING CLEAVAGE LINES",
        nargs=3,
        type=float,
        default=(6.0, 5.0, 5.0),
        show_default=True,
        help="Standard deviations of a reading in one direction, degrees.",
    ),
    click.option(
        "--outcrops", metavar="N", type=int, default=1, show_default=True, help="Outcrops, read in turn."
    ),
    click.option(
        "--hinge-variation",
        metavar="DEG",
        type=float,
        default=0.0,
        show_default=True,
        help="Standard deviation of the real hinge between outcrops.",
    ),
)


def design_options(command: AnyCommand) -> AnyCommand:
    """Add --hinge, --limbs, --scatter, --outcrops and --hinge-variation."""
    for option in reversed(_OPTIONS):
        command = option(command)
    return command


def design_of(
    hinge: tuple[float, float],
    limbs: tuple[float, float],
    scatter: tuple[float, float, float],
    outcrops: int,
    hinge_variation: float,
    **more: Any,  # noqa: ANN401 - the record checks its own fields
) -> FoldDesign:
    """Make the design that these options, as the command gets them, describe."""
    return FoldDesign(
        hinge_trend_deg=hinge[0],
        hinge_plunge_deg=hinge[1],
        limb_dips_deg=limbs,
        bedding_scatter_deg=scatter[0],
        cleavage_scatter_deg=scatter[1],
        line_scatter_deg=scatter[2],
        outcrops=outcrops,
        hinge_variation_deg=hinge_variation,
        **more,
    )
