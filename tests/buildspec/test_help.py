"""What README says of the commands agrees with the commands."""

from __future__ import annotations

import re
from pathlib import Path

import click
import pytest
from click.testing import CliRunner

from fieldapp.command import main

README = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")


def documented_commands():
    """Return the names in README's table of commands."""
    table = README.split("\n## Commands\n")[1].split("\n## ")[0]
    return set(re.findall(r"^\| `hingewise (\w+)", table, flags=re.MULTILINE))


def test_every_command_is_in_the_readme():
    """The table of commands names each command of `hingewise` and no other."""
    assert isinstance(main, click.Group)
    assert documented_commands() == set(main.commands)


def test_options_that_the_readme_names_exist():
    """Each option in README's part on commands belongs to one of them."""
    commands = [main, *main.commands.values()]
    options = {name for command in commands for parameter in command.params for name in parameter.opts}
    named = set(re.findall(r"`(--[a-z-]+)", README.split("\n## Commands\n")[1].split("\n## ")[0]))
    assert named
    assert named - options - {"--help"} == set()


@pytest.mark.parametrize("name", sorted(documented_commands()))
def test_help_of_every_command_gives_an_example(name):
    """Each command's help shows how to call it, on a line of its own that can be copied."""
    done = CliRunner().invoke(main, [name, "--help"])
    assert done.exit_code == 0
    lines = [line.strip() for line in done.output.splitlines()]
    assert any(line.startswith(f"hingewise {name}") for line in lines[lines.index("Example:") :])
