"""hingewise join: several tablets' files as one, with nothing lost and clashes listed."""

from __future__ import annotations

from pathlib import Path

import click

from analysis.cli.common import file_to_write, not_over, output_option, read_files, strict_option
from analysis.fold.words import counted


@click.command("join")
@click.argument("files", metavar="FILE FILE...", nargs=-1, required=True, type=click.Path(path_type=Path))
@output_option((".csv",), "The joined file; a name that ends in .csv.")
@click.option(
    "--conflicts", "conflicts_file", metavar="FILE", type=click.Path(path_type=Path),
    help="Also write the readings whose contents clash, every content, to this file.",
)  # fmt: skip
@strict_option
@click.pass_context
def join_command(
    ctx: click.Context, files: tuple[Path, ...], output: Path, conflicts_file: Path | None, *, strict: bool
) -> None:
    """Join the readings of FILE FILE... into one file.

    Readings are one and the same by reading_id and revision. Two different contents under one of them are a
    conflict: both are kept, both are listed, and the exit code is 1.

    \b
    Example:
      hingewise join monday.csv tuesday.csv -o all.csv --conflicts clashes.csv
    """  # noqa: D301 - click reads the escape
    from analysis.files.csvfile import write_readings  # noqa: PLC0415 - pandas is loaded only when files are read
    from analysis.files.join import join  # noqa: PLC0415

    if conflicts_file is not None:
        file_to_write(conflicts_file, (".csv",), "--conflicts")
        not_over(conflicts_file, (output, *files), "--conflicts", "Only what clashes would be left of it.")
    table = read_files(files, strict=strict, say_conflicts=False)
    if table.faulty_rows:
        not_over(output, files, "--output", "The rows that were left out would be lost.")
    joined = join(table)
    write_readings(output, joined)
    if conflicts_file is not None:
        write_readings(
            conflicts_file, [content for conflict in joined.conflicts for content in conflict.contents]
        )
    standing = counted(len(joined.standing), "reading")
    click.echo(f"{standing} standing, in {counted(len(joined), 'revision')}, in {output}")
    for conflict in joined.conflicts:
        click.echo(f"conflict: {conflict}", err=True)
    if joined.conflicts:
        ctx.exit(1)
