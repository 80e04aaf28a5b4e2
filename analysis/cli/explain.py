"""hingewise explain: what the folds can and cannot say about the fault."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from analysis.cli.common import (
    NOTHING_STANDS,
    chosen_folds,
    files_argument,
    fold_options,
    print_json,
    read_files,
    settings_options,
    strict_option,
    sums_of_table,
)
from analysis.cli.fault import fault_of, fault_options
from analysis.cli.pictures import file_names, make_folder
from analysis.fold import words
from analysis.fold.check import check_fold
from analysis.fold.settings import CheckSettings
from analysis.strain.explanations import ExplainSettings, FaultCheck, explain
from analysis.strain.ofcheck import pair_of_check
from analysis.strain.wording import headline, two_digits

if TYPE_CHECKING:
    from analysis.fold.records import FoldCheck
    from analysis.strain.explanations import Explanation
    from analysis.strain.observed import Fault


@click.command("explain")
@files_argument
@fault_options("Strike of the fault, either end.", required=True)
@click.option(
    "--pictures",
    metavar="FOLDER",
    type=click.Path(path_type=Path, file_okay=False),
    help="Also draw, for each fold: the plane of explanations, the convergence, shear and onset of cleavage that fit, "
    "and folds turning by the shear that rotation needs.",
)
@click.option("--json", "as_json", is_flag=True, help="Print one JSON array, an object per fold.")
@fold_options
@settings_options
@strict_option
def explain_command(
    files: tuple[Path, ...],
    fault_strike: float,
    fault_strike_se: float,
    sense: str,
    zone_width_km: float | None,
    pictures: Path | None,
    fold: str | None,
    outcrop: str | None,
    margin_deg: float,
    confidence: float,
    *,
    as_json: bool,
    strict: bool,
) -> None:
    """Compare what rotation and transpression predict with the folds in FILE...

    \b
    Example:
      hingewise explain readings.csv --fault-strike 052 --sense sinistral --zone-width-km 2 --pictures explained
    """  # noqa: D301 - click reads the escape
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    fault = fault_of(fault_strike, fault_strike_se, sense, zone_width_km)
    if pictures is not None:
        make_folder(pictures)
    table = read_files(files, strict=strict)
    done: list[FaultCheck] = []
    for name, part in chosen_folds(table, fold, outcrop):
        check = check_fold(sums_of_table(part), settings, fold=name)
        one = explained(check, fault)
        if one is None:
            click.echo(
                f"{name or '(unnamed fold)'}: no hinge yet, so nothing to hold against the fault", err=True
            )
            continue
        done.append(one)
        if not as_json:
            click.echo(f"{text_of(one, check)}\n")
    if not (done or as_json or table.folds()):
        click.echo(NOTHING_STANDS)
    if as_json:
        print_json([one.to_json() for one in done])
    if pictures is not None:
        draw(done, pictures, confidence)


def draw(done: list[FaultCheck], folder: Path, confidence: float) -> None:
    """Write the pictures of explained folds into a folder, and say so where somebody reads along."""
    from analysis.report.fault_pictures import fault_pictures  # noqa: PLC0415 - matplotlib is loaded only here
    from analysis.report.sheet import save_all  # noqa: PLC0415

    for one, name in zip(done, file_names([one.fold for one in done]), strict=True):
        for kind, figure in fault_pictures(one, confidence):
            save_all(figure, folder, f"{name}-{kind}")
    click.echo(f"Pictures are in {folder}", err=True)


def explained(check: FoldCheck, fault: Fault) -> FaultCheck | None:
    """Explain a checked fold; None where it has no hinge yet."""
    pair = pair_of_check(check)
    if pair is None:
        return None
    limits = ExplainSettings(
        confidence=check.settings.confidence, forecast_limit=check.settings.forecast_limit
    )
    return explain(fault, pair, limits, fold=check.fold)


def text_of(one: FaultCheck, check: FoldCheck) -> str:
    """Write an explanation as readable lines, with the cautions that belong to it."""
    lines = [
        one.fold or "(unnamed fold)",
        f"  {headline(one)}",
        f"  {words.headline(check)}",
        f"  {words.figure_line(check)}",
        "",
    ]
    lines += [f"  {_explanation(e)}" for e in one.explanations]
    lines += [
        "",
        *(f"  {sentence}" for sentence in one.because),
        "",
        *(f"  {caution}" for caution in one.cautions),
    ]
    return "\n".join(lines)


def _explanation(e: Explanation) -> str:
    figures = [f"{e.name:<32}"]
    if e.predicted_transection_deg is not None:
        # Rounded first and added to zero, so that nothing is "-0.0".
        figures.append(f"transection {round(e.predicted_transection_deg, 1) + 0.0:+.1f}°")
    if e.gamma is not None:
        figures.append(f"shear strain {e.gamma:.2f}")
    if e.displacement_km is not None:
        figures.append(f"displacement {two_digits(e.displacement_km)} km")
    return "  ".join(figures)
