"""hingewise plan: how many readings of each feature, before the field."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from analysis.cli.common import output_option, print_json, progress, settings_options
from analysis.cli.design import design_of, design_options
from analysis.fold.planning import FOLDS_AT_MOST, READINGS_AT_MOST, plan
from analysis.fold.settings import CheckSettings

if TYPE_CHECKING:
    from pathlib import Path

    from analysis.fold.planning import Plan, ReadingsNeeded
    from analysis.fold.trials import Mode


@click.command("plan")
@design_options
@click.option(
    "--transection",
    "transections",
    metavar="DEG",
    type=float,
    multiple=True,
    help="A true transection to try; may be given again. Default: 0 to three times the margin.",
)
@click.option(
    "--read",
    "mode",
    type=click.Choice(["planes", "lines", "planes and lines"]),
    default="planes",
    show_default=True,
    help="What is read of the cleavage: planes, intersection lines, or both together.",
)
@click.option(
    "--most",
    metavar="N",
    type=click.IntRange(20, READINGS_AT_MOST),
    default=200,
    show_default=True,
    help="Readings of a fold at which a trial ends.",
)
@click.option(
    "--trials",
    metavar="N",
    type=click.IntRange(20, FOLDS_AT_MOST),
    default=300,
    show_default=True,
    help="Invented folds for each transection.",
)
@settings_options
@click.option("--json", "as_json", is_flag=True, help="Print the plan as JSON.")
@output_option((".png", ".svg"), "Also draw it, to a .png or .svg file.", required=False)
def plan_command(
    hinge: tuple[float, float],
    limbs: tuple[float, float],
    scatter: tuple[float, float, float],
    outcrops: int,
    hinge_variation: float,
    transections: tuple[float, ...],
    mode: Mode,
    most: int,
    trials: int,
    margin_deg: float,
    confidence: float,
    output: Path | None,
    *,
    as_json: bool,
) -> None:
    """Say how many readings a fold of this shape would need, from trials on invented folds.

    \b
    Example:
      hingewise plan --limbs 40 70 --scatter 6 5 5 --margin 5 -o plan.png
    """  # noqa: D301 - click reads the escape
    design = design_of(hinge, limbs, scatter, outcrops, hinge_variation)
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    with progress("trying folds") as show:
        planned = plan(
            design,
            settings,
            transections_deg=transections or None,
            mode=mode,
            most_readings=most,
            folds=trials,
            progress=show,
        )
    if as_json:
        print_json(planned.to_json())
    else:
        click.echo(text_of(planned))
    if output is not None:
        from analysis.report.planning_figure import draw_plan_of_readings  # noqa: PLC0415 - matplotlib only here
        from analysis.report.sheet import save  # noqa: PLC0415

        save(draw_plan_of_readings(planned), output)
        click.echo(f"The picture is in {output}", err=True)


def text_of(planned: Plan) -> str:
    """Write a plan as a table."""
    most = int(planned.total[-1])
    lines = [
        f"Readings until the verdict; {planned.folds} invented folds a row, at most {most} readings each.",
        "",
        "transection   right verdict   wrong   half of the folds need      four in five need",
    ]
    lines += [
        f"{row.transection_deg:>10.1f}°   {row.found:>12.0%}   {row.wrong:>5.1%}   "
        f"{_needed(row.median, most):<25}   {_needed(row.for_80_percent, most)}"
        for row in planned.rows
    ]
    margin = f"{planned.settings.margin_deg:g}°"
    lines += [
        "",
        f"Right is axial planar below {margin}, transected from {margin} on, and either between 0° and {margin}.",
        "Invented folds scatter evenly and are cylindrical; natural ones need more.",
    ]
    return "\n".join(lines)


def _needed(needed: ReadingsNeeded | None, most: int) -> str:
    if needed is None:
        return f"more than {most}"
    parts = ((needed.bedding, "S0"), (needed.cleavage, "S1"), (needed.intersection, "L01"))
    return f"{needed.total:>3} ({' + '.join(f'{n} {name}' for n, name in parts if n)})"
