"""The help of the commands."""

from __future__ import annotations

import pytest

from analysis.cli import hingewise
from fieldapp.command import main


def examples_in(text):
    """Lines that follow 'Example:' up to the next empty one."""
    after = text.split("  Example:\n")[1]
    return after.split("\n\n")[0].splitlines()


@pytest.mark.parametrize("name", sorted(main.commands))
def test_each_command_shows_an_example_on_a_line_of_its_own(run, name):
    """The example stands under 'Example:' unwrapped, and starts with the command itself."""
    result = run(name, "--help")
    assert result.exit_code == 0
    assert "\\b" not in result.stdout
    lines = examples_in(result.stdout)
    assert lines
    assert all(line.startswith(f"    hingewise {name} ") for line in lines)


def test_the_group_shows_an_example_on_a_line_of_its_own(run):
    """The help of `hingewise` has its example unwrapped, and lists each command."""
    text = run("--help").stdout
    assert "\\b" not in text
    assert examples_in(text) == ["    hingewise check readings.csv"]
    for name in main.commands:
        assert f"\n  {name} " in text


def test_the_app_only_adds_commands():
    """All commands of the analysis are in the installed command too."""
    assert set(hingewise.commands) < set(main.commands)
