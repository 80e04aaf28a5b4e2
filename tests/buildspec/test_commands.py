"""The test command's counting, its refusal to pass over window tests, and the writing of constraints."""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path

import pytest

BUILDSPEC = Path(__file__).resolve().parents[2] / "buildspec"


def load(name, monkeypatch):
    """Load one of buildspec's scripts under a name of its own."""
    monkeypatch.syspath_prepend(str(BUILDSPEC))
    spec = importlib.util.spec_from_file_location(f"buildspec_{name}", BUILDSPEC / f"{name}.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture
def command(tmp_path, monkeypatch):
    """Return the test command with its root in a temporary folder that holds one window test."""
    module = load("test", monkeypatch)
    monkeypatch.setattr(module.setup_env, "ROOT", tmp_path)
    (tmp_path / "tests" / "window").mkdir(parents=True)
    (tmp_path / "tests" / "window" / "test_page.py").write_text("def test_page():\n    pass\n")
    return module


def report(tests, failures=0, errors=0, skipped=0):
    """Return a report in the form that pytest writes."""
    numbers = f'tests="{tests}" failures="{failures}" errors="{errors}" skipped="{skipped}"'
    return f'<?xml version="1.0"?><testsuites><testsuite name="pytest" {numbers}/></testsuites>'


@pytest.mark.parametrize(
    ("text", "line"),
    [
        (report(5), "5 passed, 0 failed"),
        (report(7, failures=1, errors=2, skipped=1), "3 passed, 3 failed, 1 skipped"),
        (report(0), "0 passed, 0 failed"),
    ],
)
def test_outcomes_are_counted(command, tmp_path, text, line):
    """Errors count as failures, and skipped tests are named only where there are some."""
    (tmp_path / "report.xml").write_text(text)
    assert command.read_count(tmp_path / "report.xml").line() == line


def test_no_report_counts_nothing(command, tmp_path):
    """A pytest that died before its report adds nothing to the count."""
    assert command.read_count(tmp_path / "absent.xml") == command.Count()


@pytest.fixture
def run_with(command, tmp_path, monkeypatch):
    """Return a function that runs all steps with made-up exit codes and counts of both pytest calls."""

    def run_with(tests, window, extra=(), failing=""):
        run = command.Run(Path(sys.executable), {}, tmp_path)

        def step(name, arguments, *, empty_code=0):
            del arguments, empty_code
            outcome = {"tests": tests, "window tests": window}.get(name)
            if outcome is None:
                return int(name == failing)
            code, text = outcome
            if text:
                (tmp_path / f"{name.replace(' ', '-')}.xml").write_text(text)
            return code

        monkeypatch.setattr(run, "step", step)
        command.run_checks(run, list(extra))
        return run.failed_steps, run.count.line()

    return run_with


def test_all_well_passes(run_with):
    """Both calls of pytest are added up."""
    assert run_with((0, report(8)), (0, report(3))) == ([], "11 passed, 0 failed")


def test_failed_step_is_named_and_the_tests_still_run(run_with):
    """A linter's complaint fails the run and does not hide the tests' outcome."""
    assert run_with((0, report(8)), (0, report(3)), failing="mypy") == (["mypy"], "11 passed, 0 failed")


@pytest.mark.parametrize(
    "window", [(5, report(0)), (0, report(3, skipped=3)), (4, ""), (-6, ""), (1, report(3, failures=1))]
)
def test_window_tests_that_did_not_run_fail_the_run(run_with, window):
    """Window tests none of which ran, for want of a display or after a crash, fail the run."""
    assert run_with((0, report(8)), window)[0] == ["window tests"]


def test_no_tests_at_all_fail_the_run(run_with):
    """A run that collected nothing is no success."""
    assert run_with((5, report(0)), (0, report(1)))[0] == ["tests"]


def test_chosen_tests_need_not_include_window_tests(run_with):
    """With arguments of one's own only what they choose has to run, but something must."""
    assert run_with((0, report(2)), (5, report(0)), extra=["-k", "strike"]) == ([], "2 passed, 0 failed")
    assert run_with((5, report(0)), (5, report(0)), extra=["-k", "nothing"])[0] == ["tests"]


@pytest.mark.parametrize(("extra", "said"), [(["-k", "strike"], "done"), ([], "FAILED")])
def test_tests_that_were_not_chosen_are_not_called_failed(
    command, tmp_path, monkeypatch, capsys, extra, said
):
    """A call of pytest that may choose no test, and does, is done; where all must run it has failed."""
    ends_empty = ["-c", f"raise SystemExit({command.NOTHING_COLLECTED})"]
    monkeypatch.setattr(command, "pytest_arguments", lambda *_: ends_empty)
    run = command.Run(Path(sys.executable), {}, tmp_path)
    run.tests("window tests", "window", extra, must_run=not extra)
    assert f"-- window tests: {said} in" in capsys.readouterr().out
    assert run.failed_steps == ([] if extra else ["window tests"])


def test_users_arguments_come_last(command, tmp_path):
    """What the user gives prevails over the command's own arguments."""
    arguments = command.pytest_arguments("window", tmp_path / "r.xml", ["-n", "0"], workers=2)
    assert arguments[-2:] == ["-n", "0"]
    assert command.names_a_path(["-k", "x", "tests/window/test_page.py::test_page"])
    assert not command.names_a_path(["-k", "x", "tests/absent.py"])


def test_constraints_keep_pinned_releases_only(monkeypatch):
    """Names are written in one way and sorted; addresses, the project and the installer are left out."""
    frozen = "zeta==1\npip==26.0\nhingewise @ file:///somewhere\nA_b.c==2.0.post1\n-e git+x\n"
    lines = load("constraints", monkeypatch).as_constraints(frozen).splitlines()
    assert [line for line in lines if not line.startswith("#")] == ["a-b-c==2.0.post1", "zeta==1"]
