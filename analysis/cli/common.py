"""What the commands share: one-line errors, progress, options, and the way from files to running sums."""

from __future__ import annotations

import codecs
import io
import json
import os
import sys
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click
import numpy as np

from analysis.errors import HingewiseError, SettingError
from analysis.fold.words import counted
from analysis.stats.sums import FEATURES, RunningSums

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator, Sequence

    import pandas as pd

    from analysis.files.maplayers import MapLayer
    from analysis.files.table import ReadingTable
    from analysis.orient.features import Feature

_FAULTS_SHOWN = 20
_NAMES_SHOWN = 12
_SHOW_PROGRESS_FROM_BYTES = 2**22

NOTHING_STANDS = "No readings stand in these files."

AnyCommand = TypeVar("AnyCommand", bound="Callable[..., Any]")


class OneLineErrors(click.Group):
    """A group of commands whose errors, ours, the files' and the command line's, are one line and exit code 2."""

    def make_context(
        self,
        info_name: str | None,
        args: list[str],
        parent: click.Context | None = None,
        **extra: Any,  # noqa: ANN401 - as click has it
    ) -> click.Context:
        """Read the command line of the group."""
        _bear_any_name()
        with _one_line():
            return super().make_context(info_name, args, parent, **extra)

    def invoke(self, ctx: click.Context) -> Any:  # noqa: ANN401 - as click has it
        """Run a command."""
        with _one_line(ctx):
            return super().invoke(ctx)


def _bear_any_name() -> None:
    """Write what the terminal's own letters lack as an escape: the name of a fold must not end a command."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper) and stream.errors == "strict":
            stream.reconfigure(errors="backslashreplace")


@contextmanager
def _one_line(group: click.Context | None = None) -> Iterator[None]:
    try:
        yield
    except (click.exceptions.NoArgsIsHelpError, _OneLine):
        raise
    except click.UsageError as error:
        raise _OneLine(f"{error.format_message()} See '{_path_of(error, group)} --help'.") from error
    except click.ClickException as error:
        raise _OneLine(error.format_message()) from error
    except HingewiseError as error:
        raise _OneLine(str(error)) from error
    except BrokenPipeError:  # the reader of our output has gone; click knows what to do
        raise
    except OSError as error:
        where = f"{error.filename}: " if error.filename else ""
        raise _OneLine(f"{where}{error.strerror or error}") from error


def _path_of(error: click.UsageError, group: click.Context | None) -> str:
    """The command that was misused; some errors of click do not say which, and then the group knows."""
    if error.ctx is not None:
        return error.ctx.command_path
    if group is None:
        return "hingewise"
    return " ".join(filter(None, (group.command_path, group.invoked_subcommand)))


class _OneLine(click.ClickException):
    exit_code = 2

    def show(self, file: Any = None) -> None:  # noqa: ANN401 - as click has it
        text = " ".join(self.format_message().split())
        click.echo(f"hingewise: {text}", file=file or sys.stderr)


files_argument = click.argument(
    "files", metavar="FILE...", nargs=-1, required=True, type=click.Path(path_type=Path)
)
strict_option = click.option(
    "--strict", is_flag=True, help="Refuse a file with a bad row, instead of leaving it out."
)


def output_option(
    endings: tuple[str, ...], words: str, *, required: bool = True
) -> Callable[[AnyCommand], AnyCommand]:
    """Add -o; that the file can be written there is looked at before any work is done.

    The name must end in one of `endings`; SettingError says which, and where there is no such folder.
    """

    def checked(_ctx: click.Context, _option: click.Parameter, path: Path | None) -> Path | None:
        return path if path is None else file_to_write(path, endings, "--output")

    return click.option(
        "-o",
        "--output",
        metavar="FILE",
        required=required,
        type=click.Path(path_type=Path),
        callback=checked,
        help=words,
    )


def file_to_write(path: Path, endings: tuple[str, ...], option: str) -> Path:
    """Give the path back if a file can be written there; SettingError where that is plain to see."""
    if path.suffix.lower() not in endings:
        raise SettingError(
            f"{path.name or path} ends in no format that is written here",
            where=option,
            expected=f"a name ending in {', '.join(endings)}",
        )
    if path.is_dir():
        raise SettingError(f"{path} is a folder", where=option, expected="the name of a file")
    folder = Path(os.path.realpath(path)).parent
    if not folder.is_dir():
        raise SettingError(
            f"{path} lies in no folder that is there",
            where=option,
            expected="a folder that can be written to",
            mend="Make the folder first, or choose another.",
        )
    return path


def not_over(path: Path, others: Iterable[Path], option: str, why: str) -> None:
    """Raise SettingError where writing `path` would write over one of the other files; `why` says what that loses."""
    for other in others:
        if os.path.realpath(path) == os.path.realpath(other) or (
            path.exists() and other.exists() and path.samefile(other)
        ):
            raise SettingError(
                f"{path} would be written over {other}",
                where=option,
                expected="another file",
                mend=why,
            )


def settings_options(command: AnyCommand) -> AnyCommand:
    """Add --margin and --confidence."""
    command = click.option(
        "--confidence",
        metavar="SHARE",
        type=float,
        default=0.95,
        show_default=True,
        help="Of the intervals, over all looks together.",
    )(command)
    return click.option(
        "--margin",
        "margin_deg",
        metavar="DEG",
        type=float,
        default=5.0,
        show_default=True,
        help="M: a smaller transection counts as axial planar.",
    )(command)


def fold_options(command: AnyCommand) -> AnyCommand:
    """Add --fold and --outcrop."""
    command = click.option("--outcrop", metavar="NAME", help="Only this outcrop.")(command)
    return click.option("--fold", metavar="NAME", help="Only this fold.")(command)


@contextmanager
def progress(label: str) -> Iterator[Callable[[float], None]]:
    """Show on a terminal how far a share from 0 to 1 has come; silent elsewhere."""
    if not sys.stderr.isatty():
        yield lambda share: None  # noqa: ARG005 - nobody looks
        return
    steps = 1000
    with click.progressbar(length=steps, label=label, file=sys.stderr) as bar:
        yield lambda share: bar.update(round(share * steps) - bar.pos)


def read_files(files: tuple[Path, ...], *, strict: bool, say_conflicts: bool = True) -> ReadingTable:
    """Read files into a table; rows that are left out are named on standard error."""
    from analysis.files.arrowed import parse_clean  # noqa: PLC0415 - as below
    from analysis.files.csvfile import read_table  # noqa: PLC0415 - pandas is loaded only when files are read

    if sum(path.stat().st_size for path in files if path.is_file()) >= _SHOW_PROGRESS_FROM_BYTES:
        with progress("reading") as show:
            table = read_table(*files, strict=strict, progress=show, clean_parser=parse_clean)
    else:
        table = read_table(*files, strict=strict, clean_parser=parse_clean)
    say_left_out(table.faults, table.faulty_rows, table.conflicts if say_conflicts else ())
    return table


def say_left_out(faults: Sequence[object], faulty_rows: int, conflicts: Sequence[object]) -> None:
    """Name on standard error the rows that are left out and the contents that clash, the first of each."""
    for fault in faults[:_FAULTS_SHOWN]:
        click.echo(f"left out: {fault}", err=True)
    if faulty_rows:
        were = "was" if faulty_rows == 1 else "were"
        click.echo(f"{counted(faulty_rows, 'row')} {were} left out; the others are used", err=True)
    for conflict in conflicts[:_FAULTS_SHOWN]:
        click.echo(f"conflict: {conflict}", err=True)
    if len(conflicts) > _FAULTS_SHOWN:
        click.echo(f"and {counted(len(conflicts) - _FAULTS_SHOWN, 'more conflict')}", err=True)


def nothing_stands(files: tuple[Path, ...]) -> SettingError:
    """Make the error to raise where there is nothing to write."""
    where = str(files[0]) if len(files) == 1 else counted(len(files), "file")
    return SettingError(
        "no reading stands", where=where, expected="at least one reading that is not struck out"
    )


def no_such(kind: str, name: str, names: Iterable[str]) -> SettingError:
    """Make the error to raise where a fold or an outcrop of this name was asked for and is not there."""
    known = list(names)
    shown = ", ".join(map(repr, known[:_NAMES_SHOWN])) or "none is there"
    more = f" and {len(known) - _NAMES_SHOWN} more" if len(known) > _NAMES_SHOWN else ""
    return SettingError(f"there is no {kind} {name!r}", where=f"--{kind}", expected=f"one of: {shown}{more}")


def chosen_folds(
    table: ReadingTable, fold: str | None, outcrop: str | None
) -> Iterator[tuple[str, ReadingTable]]:
    """Give the standing readings fold by fold; SettingError where a name is not there."""
    folds = table.folds()
    if fold is not None and fold not in folds:
        raise no_such("fold", fold, folds)
    found = False
    outcrops: dict[str, None] = {}
    for name in folds if fold is None else (fold,):
        part = table.of_fold(name)
        if outcrop is not None:
            names = part.outcrop
            outcrops |= dict.fromkeys(names.names[code] for code in np.unique(names.codes))
            keep = np.array([text == outcrop for text in names.names], dtype=bool)[names.codes]
            part = part.take(keep)
        if len(part) or not folds:
            found = True
            yield name, part
    if outcrop is not None and not found:
        raise no_such("outcrop", outcrop, outcrops)


def sums_of_table(table: ReadingTable) -> RunningSums:
    """Running sums of all rows of a table, which are taken to be of one fold."""
    sums = RunningSums()
    outcrop = table.outcrop
    used = np.flatnonzero(np.bincount(outcrop.codes, minlength=1))
    places = np.zeros(len(outcrop.names), dtype=np.intp)
    places[used] = np.arange(len(used))
    sums.extend(table.feature, places[outcrop.codes], [outcrop.names[code] for code in used], table.vectors)
    return sums


def axes_by_feature(table: ReadingTable) -> dict[Feature, np.ndarray[Any, np.dtype[np.float64]]]:
    """Axes (n, 3) of a table by feature, each in the order of the table."""
    codes, axes = table.feature, table.vectors
    if (codes[1:] < codes[:-1]).any():
        codes, axes = codes[order := np.argsort(codes.astype(np.int8), kind="stable")], axes[order]
    return dict(
        zip(FEATURES, np.split(axes, np.searchsorted(codes, np.arange(1, len(FEATURES)))), strict=True)
    )


def write_map(output: Path, layers: list[MapLayer], tables: dict[str, pd.DataFrame] | None = None) -> None:
    """Write layers as GeoPackage or GeoJSON, by the ending of the file."""
    if output.suffix.lower() == ".gpkg":
        from analysis.files.geopackage import write_geopackage  # noqa: PLC0415 - pandas only when files are written

        write_geopackage(output, layers, tables)
        return
    from analysis.files.geojson import write_geojson  # noqa: PLC0415 - as above

    write_geojson(output, layers)


def print_json(value: object, *, indent: int | None = 1) -> None:
    """Print one JSON value, with escapes where the output is not in UTF-8."""
    plain = codecs.lookup(getattr(sys.stdout, "encoding", None) or "utf-8").name != "utf-8"
    click.echo(json.dumps(value, indent=indent, ensure_ascii=plain, allow_nan=False))
