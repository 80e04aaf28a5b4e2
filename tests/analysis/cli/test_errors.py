"""Errors of the command: one line each, exit code 2, and no traceback."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from tests.analysis.cli.conftest import HEADER


@pytest.mark.parametrize("command", ["check", "replay"])
@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ((), "Missing argument"),
        (("missing.csv",), "missing.csv"),
        (("two.csv", "--margin", "wide"), "--margin"),
        (("two.csv", "--margin", "0"), "margin"),
        (("two.csv", "--margin", "nan"), "margin"),
        (("two.csv", "--confidence", "1"), "confidence"),
        (("two.csv", "--confidence", "95"), "confidence"),
        (("two.csv", "--fold", "Nowhere"), "'Nowhere'"),
        (("two.csv", "--outcrop", "Nowhere"), "'Nowhere'"),
        (("two.csv", "--colour"), "--colour"),
        (("empty.csv",), "empty"),
        (("folder",), "folder"),
        (("words.csv",), "words.csv"),
        (("bytes.csv",), "bytes.csv"),
    ],
)
def test_errors_are_one_line_and_exit_code_2(run, two_folds, monkeypatch, command, arguments, said):
    """Whatever is wrong with options or files is named in one line on the error stream."""
    folder = two_folds.parent
    monkeypatch.chdir(folder)
    (folder / "empty.csv").touch()
    (folder / "folder").mkdir()
    (folder / "words.csv").write_text("these are\nno readings\n", encoding="utf-8")
    (folder / "bytes.csv").write_bytes(bytes(range(256)))
    result = run(command, *arguments)
    assert result.exit_code == 2, result.output
    assert result.stdout == ""
    (line,) = result.stderr.splitlines()
    assert line.startswith("hingewise: ")
    assert said in line


@pytest.mark.parametrize("arguments", [("nonsense",), ("--nonsense",), ("--notebook",)])
def test_errors_of_the_group_are_one_line_too(run, arguments):
    """An unknown command or option of `hingewise` itself is one line and exit code 2."""
    result = run(*arguments)
    assert result.exit_code == 2
    assert len(result.stderr.splitlines()) == 1


def test_the_command_as_installed_ends_without_a_traceback(tmp_path):
    """In a process of its own a bad file ends with exit code 2 and one line."""
    path = tmp_path / "bad.csv"
    path.write_text(HEADER + "F,A,bedding,nan,inf,,\n", encoding="utf-8")
    done = subprocess.run(
        [sys.executable, "-c", "from fieldapp.command import main; main()", "check", "--strict", str(path)],
        capture_output=True,
        text=True,
        check=False,
        cwd=Path(__file__).parents[3],
    )
    assert done.returncode == 2
    assert done.stdout == ""
    assert len(done.stderr.splitlines()) == 1
    assert "Traceback" not in done.stderr
