"""The `hingewise` command: turns typed errors into one clear line, shows progress, prints.

Each command is a module of this room; `hingewise` is the group that holds them.
"""

from __future__ import annotations

import click

from analysis import __version__
from analysis.cli.check import check
from analysis.cli.common import OneLineErrors
from analysis.cli.explain import explain_command
from analysis.cli.export import export
from analysis.cli.join import join_command
from analysis.cli.plan import plan_command
from analysis.cli.replay import replay
from analysis.cli.report import report_command
from analysis.cli.simulate import simulate
from analysis.cli.survey import survey_command

__all__ = ["hingewise"]


@click.group(cls=OneLineErrors, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="hingewise")
def hingewise() -> None:
    """Check whether the folds beside a fault are transected by their cleavage.

    \b
    Example:
      hingewise check readings.csv
    """  # noqa: D301 - click reads the escape


for _command in (
    check,
    explain_command,
    export,
    join_command,
    plan_command,
    replay,
    report_command,
    simulate,
    survey_command,
):
    hingewise.add_command(_command)
