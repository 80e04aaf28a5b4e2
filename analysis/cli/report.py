"""hingewise report: one self-contained page per campaign, or the same as a PDF."""

from __future__ import annotations

import hashlib
import shlex
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from platform import python_version
from typing import TYPE_CHECKING, Final

import click
import numpy as np
from click.core import ParameterSource

from analysis import __version__
from analysis.cli.check import check_table
from analysis.cli.common import (
    axes_by_feature,
    chosen_folds,
    files_argument,
    fold_options,
    progress,
    read_files,
    settings_options,
    strict_option,
)
from analysis.cli.explain import explained
from analysis.errors import SettingError
from analysis.files.atomic import whole_file
from analysis.fold.check import check_fold
from analysis.fold.outliers import find_outliers
from analysis.fold.settings import CheckSettings
from analysis.stats.sums import FEATURES, RunningSums
from analysis.strain.frame import Sense
from analysis.strain.observed import Fault

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.files.reading import Reading
    from analysis.files.table import ReadingTable
    from analysis.report.campaign import FoldPart, SourceFile
    from analysis.report.funnel import HistoryPoint

_PAGES: Final = (".html", ".htm")
_LOOKS: Final = 300  # points of a funnel's history; more would lie on each other
_LEFT_OUT_LISTED: Final = 20
_RECKONED_WITH: Final = ("numpy", "pandas", "matplotlib", "jinja2")
_SAID_ALREADY: Final = ("files", "output", "strict")


@click.command("report")
@files_argument
@click.option(
    "-o", "--output", metavar="FILE", required=True, type=click.Path(path_type=Path, dir_okay=False),
    help="The report, a name that ends in .html or .pdf.",
)  # fmt: skip
@click.option(
    "--title", metavar="TEXT", default="Fold hinges and cleavage", show_default=True, help="Its title."
)
@click.option(
    "--paper", type=click.Choice(["a4", "letter"]), default="a4", show_default=True, help="Paper of a PDF."
)
@click.option(
    "--fault-strike", metavar="DEG", type=float, help="Also explain: strike of the fault, either end."
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
@fold_options
@settings_options
@strict_option
@click.pass_context
def report_command(
    ctx: click.Context,
    files: tuple[Path, ...],
    output: Path,
    title: str,
    paper: str,
    fault_strike: float | None,
    fault_strike_se: float,
    sense: str,
    zone_width_km: float | None,
    fold: str | None,
    outcrop: str | None,
    margin_deg: float,
    confidence: float,
    *,
    strict: bool,
) -> None:
    """Write a report on every fold in FILE...: verdicts, figures, readings, and with a fault the explanations.

    The page needs nothing beside itself, and no network. A name that ends in .pdf gives the same on paper.

    \b
    Example:
      hingewise report readings.csv -o report.html --fault-strike 052 --sense sinistral
    """  # noqa: D301 - click reads the escape
    from analysis.report.campaign import Campaign, struck_out_of  # noqa: PLC0415 - as for pandas
    from analysis.report.contents import contents  # noqa: PLC0415
    from analysis.report.page import library  # noqa: PLC0415

    ending = output.suffix.lower()
    if ending not in (*_PAGES, ".pdf"):
        raise SettingError(
            f"{ending or 'no ending'} is no kind of report",
            where=str(output),
            expected="a name in .html or .pdf",
        )
    library("matplotlib")
    library(*(("fpdf", "fpdf2") if ending == ".pdf" else ("jinja2",)))
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    fault = None
    if fault_strike is None and _said(ctx, "fault_strike_se", "sense", "zone_width_km"):
        raise click.UsageError("what is said of a fault needs --fault-strike too.", ctx)
    if fault_strike is not None:
        fault = Fault(
            strike_deg=fault_strike,
            sense=Sense(sense),
            zone_width_km=zone_width_km,
            strike_se_deg=fault_strike_se,
        )
    table = read_files(files, strict=strict)
    struck = struck_out_of(table)
    parts = list(chosen_folds(table, fold, outcrop))
    with progress("checking") as show:
        folds = []
        for number, (name, part) in enumerate(parts, start=1):
            taken = tuple(one for one in struck.get(name, ()) if outcrop in (None, one.outcrop))
            folds.append(_fold_part(part, settings, name, taken, fault))
            show(number / len(parts))
    campaign = Campaign(
        title=title,
        folds=tuple(folds),
        files=tuple(_files(files, [part for _, part in parts])),
        command=_command(ctx, files, output),
        versions=tuple(_versions(ending)),
        left_out=tuple(_left_out(table)),
        conflicts=table.conflicts,
        struck_only={
            name: len(readings)
            for name, readings in struck.items()
            if fold is None and outcrop is None and name not in table.folds()
        },
        fault_words="" if fault is None else _fault_words(fault),
    )
    with progress("drawing") as show:
        report = contents(campaign, show)
    if ending == ".pdf":
        from analysis.report.paper import render_paper  # noqa: PLC0415

        with progress("setting") as show:
            made = render_paper(report, paper=paper, progress=show)
    else:
        from analysis.report.page import render_page  # noqa: PLC0415

        made = render_page(report).encode()
    with whole_file(output) as draft:
        draft.write_bytes(made)
    click.echo(f"The report on {len(folds)} fold{'' if len(folds) == 1 else 's'} is in {output}")


def _said(ctx: click.Context, *names: str) -> bool:
    """Whether any of these options was given on the command line."""
    return any(ctx.get_parameter_source(name) is ParameterSource.COMMANDLINE for name in names)


def _fold_part(
    part: ReadingTable, settings: CheckSettings, name: str, struck: tuple[Reading, ...], fault: Fault | None
) -> FoldPart:
    from analysis.report.campaign import FoldPart  # noqa: PLC0415 - as above

    check = check_table(part, settings, name)
    axes = axes_by_feature(part)
    places = {feature: np.flatnonzero(part.feature == code) for code, feature in enumerate(FEATURES)}
    off_deg = {int(places[one.feature][one.place]): one.off_deg for one in find_outliers(axes)}
    return FoldPart(
        check=check,
        table=part,
        axes=axes,
        history=tuple(_history(part, settings, name)),
        off_deg=off_deg,
        struck=struck,
        fault=None if fault is None else explained(check, fault),
    )


def _history(table: ReadingTable, settings: CheckSettings, fold: str) -> Iterator[HistoryPoint]:
    """The check after each reading in recorded order, or after every so many where there are very many."""
    from analysis.report.funnel import HistoryPoint  # noqa: PLC0415 - as above

    ordered = table.in_recorded_order()
    outcrop, features, vectors = ordered.outcrop, ordered.feature, ordered.vectors
    looks = set(np.unique(np.linspace(1, len(ordered), _LOOKS).round().astype(int)).tolist())
    sums = RunningSums()
    for row in range(len(ordered)):
        sums.add(FEATURES[features[row]], outcrop[row], vectors[row])
        if row + 1 in looks:
            yield HistoryPoint.of(check_fold(sums, settings, fold=fold, forecast=False), row + 1)


def _files(files: tuple[Path, ...], parts: list[ReadingTable]) -> Iterator[SourceFile]:
    from analysis.report.campaign import SourceFile  # noqa: PLC0415 - as above

    counts: dict[str, int] = {}
    for part in parts:
        for row in range(len(part)):
            name = part.place(row)[0]
            counts[name] = counts.get(name, 0) + 1
    shown = _names(files)
    for path, name in dict(zip(files, shown, strict=True)).items():
        with path.open("rb") as stream:
            digest = hashlib.file_digest(stream, "sha256").hexdigest()
        yield SourceFile(name, counts.get(str(path), 0), digest)


def _names(files: tuple[Path, ...]) -> list[str]:
    """Names without their folders, which are nobody's business, unless two files share one."""
    short = [path.name for path in files]
    return short if len(set(short)) == len(set(files)) else [str(path) for path in files]


def _command(ctx: click.Context, files: tuple[Path, ...], output: Path) -> str:
    """The command line that makes this report again; options left at their defaults are not named."""
    words = ["hingewise", "report", *_names(files), "-o", output.name]
    for parameter in ctx.command.params:
        value = ctx.params.get(parameter.name or "")
        if parameter.name in _SAID_ALREADY or value is None or value == parameter.get_default(ctx):
            continue
        words += [parameter.opts[-1], f"{value:g}" if isinstance(value, float) else str(value)]
    if ctx.params.get("strict"):
        words.append("--strict")
    return shlex.join(words)


def _versions(ending: str) -> Iterator[tuple[str, str]]:
    yield "Hingewise", __version__
    yield "Python", python_version()
    for name in (*_RECKONED_WITH, *(("fpdf2",) if ending == ".pdf" else ())):
        try:
            yield name, version(name)
        except PackageNotFoundError:  # pragma: no cover - each is needed to come this far
            yield name, "unknown"


def _left_out(table: ReadingTable) -> Iterator[str]:
    if not table.faulty_rows:
        return
    rows = "1 row" if table.faulty_rows == 1 else f"{table.faulty_rows} rows"
    yield f"{rows} could not be read and {'is' if table.faulty_rows == 1 else 'are'} not in this report."
    for fault in table.faults[:_LEFT_OUT_LISTED]:
        yield f"{fault}."
    if len(table.faults) > _LEFT_OUT_LISTED:
        yield f"And {len(table.faults) - _LEFT_OUT_LISTED} more."


def _fault_words(fault: Fault) -> str:
    sense = "sense of slip not given" if fault.sense is Sense.UNKNOWN else f"{fault.sense} slip"
    width = "" if fault.zone_width_km is None else f", sheared zone {fault.zone_width_km:g} km wide"
    return (
        f"Fault striking {fault.strike_deg:03.0f} (standard error {fault.strike_se_deg:g}°), {sense}{width}."
        " Where folds and fault are compared, the strike's error counts too."
    )
