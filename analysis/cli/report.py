"""hingewise report: one self-contained page per campaign, or the same as a PDF."""

from __future__ import annotations

import hashlib
import shlex
from importlib.metadata import PackageNotFoundError, version
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
    output_option,
    progress,
    read_files,
    settings_options,
    strict_option,
)
from analysis.cli.explain import explained
from analysis.cli.fault import FAULT_DETAILS, fault_of, fault_options
from analysis.cli.replay import checks_in_order
from analysis.errors import SettingError
from analysis.files.atomic import whole_file
from analysis.fold.outliers import find_outliers
from analysis.fold.settings import CheckSettings
from analysis.fold.words import counted
from analysis.stats.sums import FEATURES
from analysis.strain.frame import Sense

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from analysis.files.reading import Reading
    from analysis.files.table import ReadingTable
    from analysis.report.campaign import FoldPart, SourceFile
    from analysis.report.funnel import HistoryPoint
    from analysis.strain.observed import Fault

_PAGES: Final = (".html", ".htm")
_LOOKS: Final = 300  # points of a funnel's history; more would lie on each other
_LEFT_OUT_LISTED: Final = 20
_RECKONED_WITH: Final = ("numpy", "pandas", "matplotlib", "jinja2")
_SAID_ALREADY: Final = ("files", "output", "strict")


@click.command("report")
@files_argument
@output_option((*_PAGES, ".pdf"), "The report, a name that ends in .html or .pdf.")
@click.option(
    "--title", metavar="TEXT", default="Fold hinges and cleavage", show_default=True, help="Its title."
)
@click.option(
    "--paper", type=click.Choice(["a4", "letter"]), default="a4", show_default=True, help="Paper of a PDF."
)
@fault_options("Also explain: strike of the fault, either end.", required=False)
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
    _only_files_that_stay(files)
    library("matplotlib")
    library(*(("fpdf", "fpdf2") if ending == ".pdf" else ("jinja2",)))
    if not title.strip():
        raise SettingError("the title is empty", where="--title", expected="words for the head of the report")
    settings = CheckSettings(margin_deg=margin_deg, confidence=confidence)
    fault = None
    if fault_strike is not None:
        fault = fault_of(fault_strike, fault_strike_se, sense, zone_width_km)
    elif _said(ctx, *FAULT_DETAILS):
        raise click.UsageError("what is said of a fault needs --fault-strike too.", ctx)
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
    click.echo(f"The report on {counted(len(folds), 'fold')} is in {output}")


def _only_files_that_stay(files: tuple[Path, ...]) -> None:
    """Refuse pipes: the report gives the SHA-256 of each file, and what was read from a pipe is gone."""
    for path in files:
        if path.exists() and not (path.is_file() or path.is_dir()):
            raise SettingError(
                "this is no file that stays",
                where=str(path),
                expected="a file, whose SHA-256 the report can give",
                mend="Save the readings as a file first.",
            )


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
        history=_history(part, settings, name),
        off_deg=off_deg,
        struck=struck,
        fault=None if fault is None else explained(check, fault),
    )


def _history(table: ReadingTable, settings: CheckSettings, fold: str) -> tuple[HistoryPoint, ...]:
    """The check after each reading in recorded order, or after every so many where there are very many."""
    from analysis.report.funnel import history_of  # noqa: PLC0415 - as above

    looks = set(np.unique(np.linspace(1, len(table), _LOOKS).round().astype(int)).tolist())
    return history_of(checks_in_order(table, settings, fold, forecast=False, looks=looks))


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
    rows = counted(table.faulty_rows, "row")
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
