"""The `hingewise` command as installed: the analysis commands, and the app.

Without a command it opens the app; `analysis` itself knows nothing of the app.
"""

from __future__ import annotations

from pathlib import Path

import click

from analysis.cli import hingewise as commands
from analysis.demo import DEMO_NOTE
from fieldapp.display import has_display


def notebook_path() -> Path:
    """Where the user's notebook lies unless told otherwise."""
    return Path(click.get_app_dir("hingewise")) / "notebook.db"


@click.group(cls=type(commands), invoke_without_command=True, context_settings=commands.context_settings)
@click.version_option(package_name="hingewise", prog_name="hingewise")
@click.option(
    "--notebook", metavar="PATH", type=click.Path(path_type=Path, dir_okay=False), help="Another notebook."
)
@click.pass_context
def main(ctx: click.Context, notebook: Path | None) -> None:
    """Check whether the folds beside a fault are transected by their cleavage.

    Without a command this opens the app on your notebook.

    \b
    Example:
      hingewise check readings.csv
    """  # noqa: D301 - click reads the escape
    if ctx.invoked_subcommand is not None:
        return
    if not has_display():
        raise click.UsageError("There is no display to open the app on, and no command was given.", ctx)
    from fieldapp.app import open_app  # noqa: PLC0415 - the window toolkit is loaded only for a window

    open_app(notebook or notebook_path())


@click.command()
@click.option(
    "-o", "--output", metavar="DIR", type=click.Path(path_type=Path, file_okay=False), default=Path("out"),
    show_default=True, help="Where pictures and report go when there is no display.",
)  # fmt: skip
@click.option("--no-window", is_flag=True, help="Do without the app even where there is a display.")
def demo(output: Path, *, no_window: bool) -> None:
    """Open the app on the invented Mossgarth folds; with no display print verdicts, write pictures and a report.

    \b
    Example:
      hingewise demo --no-window -o out
    """  # noqa: D301 - click reads the escape
    if has_display() and not no_window:
        from fieldapp.app import demo_path_beside, open_app  # noqa: PLC0415 - as in main

        open_app(demo_path_beside(notebook_path()), demo=True)
        return
    from analysis.cli.demo import show_demo  # noqa: PLC0415 - pandas and the figures are loaded only here

    click.echo(DEMO_NOTE)
    show_demo(output)


for _command in commands.commands.values():
    main.add_command(_command)
main.add_command(demo)
