"""Running the command, and files for it."""

from __future__ import annotations

import pytest
from click.testing import CliRunner

from fieldapp.command import main

HEADER = "fold,outcrop,feature,strike_deg,dip_deg,trend_deg,plunge_deg\n"


@pytest.fixture
def run():
    """Give a function that runs the command and returns what came of it."""

    def call(*arguments):
        return CliRunner().invoke(main, [str(argument) for argument in arguments], prog_name="hingewise")

    return call


@pytest.fixture
def two_folds(tmp_path, run):
    """Write a file with two invented folds, the first transected by 12 degrees and the second too little read."""
    path = tmp_path / "two.csv"
    first = run("simulate", "--transection", 12, "--outcrops", 3, "--intersection", 4, "--seed", 5)
    second = run("simulate", "--transection", 0, "--bedding", 3, "--cleavage", 2, "--seed", 6)
    assert (first.exit_code, second.exit_code) == (0, 0)
    renamed = second.stdout.replace("simulated-", "other-").replace("invented 1", "Low fold")
    path.write_text(first.stdout + "".join(renamed.splitlines(keepends=True)[1:]), encoding="utf-8")
    return path
