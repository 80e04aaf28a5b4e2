"""Errors of the command: one line each, exit code 2, and no traceback."""

from __future__ import annotations

import json
import os
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
        (("two.csv", "--confidence", "0.5"), "expected 0.51 to 0.9999"),
        (("two.csv", "--fold", "Nowhere"), "no fold 'Nowhere'; expected one of: 'invented 1', 'Low fold'"),
        (("two.csv", "--outcrop", "Nowhere"), "no outcrop 'Nowhere'; expected one of: 'O01', 'O02', 'O03'"),
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


def test_a_misused_option_points_to_the_help_of_its_command(run):
    """Also where click does not say which command was misused."""
    result = run("simulate", "--limbs", "55")
    assert result.exit_code == 2
    assert "See 'hingewise simulate --help'." in result.stderr


@pytest.mark.parametrize(
    ("command", "name"),
    [
        (("join", "two.csv"), "out.csv"),
        (("join", "two.csv", "-o", "all.csv", "--conflicts"), "out.csv"),
        (("export", "two.csv", "-o"), "out.csv"),
        (("export", "two.csv", "-o"), "out.gpkg"),
        (("export", "two.csv", "-o"), "out.geojson"),
        (("report", "two.csv", "-o"), "out.html"),
        (("report", "two.csv", "-o"), "out.pdf"),
        (("survey", "two.csv", "-o"), "out.gpkg"),
        (("simulate", "-o"), "out.csv"),
        (("plan", "-o"), "out.png"),
    ],
    ids=lambda part: part if isinstance(part, str) else part[0],
)
def test_where_a_file_cannot_go_is_said_before_any_work(run, two_folds, monkeypatch, command, name):
    """A wrong ending, a folder of that name, no such folder: one line, nothing on the screen, nothing written."""
    monkeypatch.chdir(two_folds.parent)
    command = command if command[-1].startswith("-") else (*command, "-o")
    ending = name[name.index(".") :]
    Path(f"folder{ending}").mkdir()
    before = sorted(two_folds.parent.rglob("*"))
    for target, said in (
        (f"nowhere/{name}", "lies in no folder that is there"),
        (f"folder{ending}", "is a folder"),
        ("out.xyz", f"expected a name ending in {'.html' if ending == '.pdf' else ''}"),
        ("out", "ends in no format"),
        ("-", "ends in no format"),
    ):
        result = run(*command, target)
        assert result.exit_code == 2, result.output
        assert result.stdout == ""
        (line,) = result.stderr.splitlines()
        assert line.startswith(f"hingewise: {'--conflicts' if '--conflicts' in command else '--output'}: ")
        assert said in line
    assert sorted(two_folds.parent.rglob("*")) == before


def test_a_demo_that_can_make_no_folder_says_where(run, two_folds):
    """A folder asked for inside a file cannot be made; the command says which and goes."""
    result = run("demo", "--no-window", "-o", two_folds / "out")
    assert result.exit_code == 2
    (line,) = result.stderr.splitlines()
    assert line.startswith(f"hingewise: {two_folds / 'out'}: the folder cannot be made")


@pytest.mark.parametrize("command", [("check",), ("replay",), ("explain", "--fault-strike", "52")])
def test_where_nothing_stands_every_command_says_so(run, tmp_path, command):
    """A file of a header only is no error, but it is not passed over in silence."""
    path = tmp_path / "header.csv"
    path.write_text(HEADER, encoding="utf-8")
    result = run(*command, path)
    assert (result.exit_code, result.stdout, result.stderr) == (0, "No readings stand in these files.\n", "")


def test_more_names_than_one_can_read_are_counted(run, tmp_path):
    """Of a hundred folds a dozen are named where one is asked for that is not there."""
    path = tmp_path / "many.csv"
    path.write_text(HEADER + "".join(f"F{k:02d},A,bedding,45,30,,\n" for k in range(100)), encoding="utf-8")
    result = run("check", path, "--fold", "F100")
    assert "'F00', 'F01'" in result.stderr
    assert "'F11' and 88 more" in result.stderr


@pytest.mark.parametrize("encoding", ["ascii", "latin-1", "cp1252", "utf-8"])
def test_a_name_that_the_terminal_has_no_letters_for_ends_no_command(tmp_path, encoding):
    """Where the output is not in UTF-8, such letters are written as escapes, in words and in JSON."""
    path = tmp_path / "named.csv"
    path.write_text(HEADER + "\U0001faa8 \u017fold,A,bedding,45,30,,\n", encoding="utf-8")
    for options in ((), ("--json",), ("--fold", "\u4e00")):
        done = subprocess.run(
            [sys.executable, "-c", "from fieldapp.command import main; main()", "check", str(path), *options],
            capture_output=True,
            check=False,
            cwd=Path(__file__).parents[3],
            env={**os.environ, "PYTHONIOENCODING": encoding},
        )
        assert b"Traceback" not in done.stderr, done.stderr
        assert done.returncode == (2 if "--fold" in options else 0)
        if options == ("--json",):
            assert json.loads(done.stdout)[0]["fold"] == "\U0001faa8 \u017fold"


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
