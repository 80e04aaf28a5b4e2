"""hingewise explain: what the folds can and cannot say about the fault."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from analysis.cli.common import (
    chosen_folds,
    files_argument,
    fold_options,
    print_json,
    read_files,
    settings_options,
    strict_option,
    sums_of_table,
)
from analysis.fold import words
from analysis.fold.check import check_fold
from analysis.fold.settings import CheckSettings
from analysis.strain.explanations import ExplainSettings, FaultCheck, explain
from analysis.strain.frame import Sense
from analysis.strain.observed import Fault
from analysis.strain.ofcheck import pair_of_check
from analysis.strain.wording import headline

if TYPE_CHECKING:
    from pathlib import Path

    from analysis.fold.records import FoldCheck
    from analysis.strain.explanations import Explanation


@click.command("explain")
@files_argument
@click.option(
    "--fault-strike", metavar="DEG", type=float, required=True, help="Strike of the fault, either end."
)
@click.option(
    "--fault-strike-se", metavar="DEG", type=float, default=2.0, show_default=True, help="Its standard error."
)
@click.option(
    "--sense", type=click.Choice(["sinistral", "dextral", "unknown"]), default="unknown", show_default=True,
    help="Sense of shear on the fault.",
)  # fmt: skip
@click.option(
    "--zone-width-km", metavar="W", type=float, help="Width of the sheared zone: gives the displacement."
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
      hingewise explain readings.csv --fault-strike 052 --sense sinistral --zone-width-km 2
    """  # noqa: D301 - click reads the escape
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    fault = Fault(
        strike_deg=fault_strike,
        sense=Sense(sense),
        zone_width_km=zone_width_km,
        strike_se_deg=fault_strike_se,
    )
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
    if as_json:
        print_json([one.to_json() for one in done])


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
        figures.append(f"transection {e.predicted_transection_deg:+.1f}°")
    if e.gamma is not None:
        figures.append(f"shear strain {e.gamma:.2f}")
    if e.displacement_km is not None:
        figures.append(f"displacement {e.displacement_km:.2g} km")
    return "  ".join(figures)
