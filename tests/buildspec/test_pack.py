"""What pack.py says of what would go onto a device: nothing of the project's own, and a reason for each fault."""

from __future__ import annotations

import importlib.util
import json
import shutil
import sys
import types

import pack
import pytest
import setup_env
from packing import imports, manifest, requirements, sizes, staging
from packing.spec import ROOT, SPEC, Spec, check_identity, project_table

CHANGES = (
    # What is changed in a copy of buildozer.spec, and what must then be said.
    ("pygeomag==1.1.0,", "pygeomag==1.1.0,\n    contourpy==1.3.3,", "contourpy==1.3.3 has no recipe"),
    ("pygeomag==1.1.0,", "", "imports pygeomag"),
    ("numpy==v2.3.0", "numpy==v2.2.0", "numpy==v2.2.0, but its recipe builds v2.3.0"),
    ("android.minapi = 24", "android.minapi = 23", "numpy needs android.minapi 24"),
    ("six==1.17.0,", "", "six is needed by a recipe and must be pinned"),
    ("tzdata==2026.6,", "", "python-dateutil needs tzdata"),
    ("plyer==2.1.0", "plyer", "plyer has no recipe and must be pinned"),
    (", VIBRATE", ", VIBRATE, INTERNET", "asks for the permission android.permission.INTERNET"),
    (
        ", VIBRATE",
        ", VIBRATE, WRITE_EXTERNAL_STORAGE",
        "asks for the permission android.permission.WRITE_EXTERNAL",
    ),
    (", VIBRATE", "", "does not ask for android.permission.VIBRATE"),
    ("android.extra_manifest_xml", "#", "does not say that android.hardware.sensor.compass may be missing"),
    (
        "orientation = portrait, landscape, portrait-reverse, landscape-reverse",
        "orientation = portrait",
        "holds the",
    ),
    ("p4a.hook", "#", "has no provider"),
    ("android.backup_rules", "#", "names no rules for the backup"),
    (
        "android.res_xml = android/shared_files.xml, ",
        "android.res_xml = ",
        "names @xml/shared_files, which is not",
    ),
    ("android.extra_manifest_application_arguments", "#", "does not get the back key"),
    ("android.allow_backup = True", "android.allow_backup = False", "out of the device's backup"),
    ("android.api = 36", "android.api = 34", "aims at Android API 34"),
    ("android.archs = arm64-v8a, ", "android.archs = ", "is not built for arm64-v8a"),
    ("py,kv,otf,txt,md", "py,otf,txt,md", "log.kv is staged, but buildozer leaves it out"),
    ("p4a.branch = v2026.05.09", "p4a.branch = master", "p4a.branch is 'master'"),
    ("package.name = hingewise", "package.name = other", "package.name is 'other'"),
    ("version.filename = ../pyproject.toml", "version.filename = main.py", "pyproject.toml says"),
)


OFFERED_BOTH_WAYS = {"charset-normalizer"}
"""Installed here with compiled parts, offered to a device without; the test under the tracer asks the index."""


@pytest.fixture(scope="module")
def staged(tmp_path_factory):
    """The staged tree of the project as it stands."""
    return staging.stage(tmp_path_factory.mktemp("staged") / "tree")


def no_index(pin, _python):
    """Give a wheel as installed here; for what is not, one that says no more than that it is pure."""
    found = requirements.wheel_of_installed(pin)
    if found is not None and (found.pure or pin.name not in OFFERED_BOTH_WAYS):
        return found
    return requirements.Wheel(pin.name, pin.release, True, "", (), frozenset({pin.name}))


@pytest.fixture
def findings_of(staged, tmp_path, monkeypatch):
    """All that a check without the tracer finds in a copy of the spec, as text, without asking the index."""
    monkeypatch.setattr(requirements, "wheel_of", no_index)

    def find(change=lambda text: text):
        folder = tmp_path / "buildspec"
        for name in ("android", "icons"):
            shutil.copytree(SPEC.parent / name, folder / name)
        shutil.copyfile(SPEC.parent / "main.py", folder / "main.py")
        (folder / "buildozer.spec").write_text(change(SPEC.read_text(encoding="utf-8")), encoding="utf-8")
        (tmp_path / "pyproject.toml").symlink_to(ROOT / "pyproject.toml")
        spec = Spec(folder / "buildozer.spec")
        return [str(finding) for finding in pack.check(spec, staged, tmp_path / "work", None)[0]]

    return find


def test_the_spec_passes_every_check_under_the_tracer(staged, tmp_path):
    """The project's own spec and tree have no fault, also by what the app imports and opens in its journeys."""
    with setup_env.virtual_display() as display:
        report = tmp_path / "trace.json"
        faults = imports.trace(setup_env.kivy_environment(tmp_path / "kivy", display), report)
    assert [str(fault) for fault in faults] == []
    told = json.loads(report.read_text(encoding="utf-8"))
    assert {"pandas", "sqlite3", "kivy.core.window", "analysis.fold.check"} <= set(told["imports"])
    assert "fieldapp/leaves/log.kv" in told["files"]
    findings, notes = pack.check(Spec(), staged, tmp_path / "work", report)
    assert [str(finding) for finding in findings] == []
    assert any("staged tree" in note for note in notes)


def test_a_copy_of_the_spec_passes(findings_of):
    """The copies that the next test changes have no fault of their own."""
    assert findings_of() == []


@pytest.mark.parametrize(("old", "new", "said"), CHANGES, ids=[said for _, _, said in CHANGES])
def test_a_fault_in_the_spec_is_found_and_named(old, new, said, findings_of):
    """A copy of the spec with one thing wrong fails the check, and the finding says what."""

    def change(text):
        assert text.count(old) == 1, "the change must fit the spec in one place"
        return text.replace(old, new)

    findings = findings_of(change)
    assert any(said in finding for finding in findings), findings


def test_an_import_that_is_not_staged_is_found(staged, tmp_path):
    """A module that is missing from the tree is named by each file that imports it."""
    short = shutil.copytree(staged.folder, tmp_path / "short")
    (short / "analysis" / "stats" / "sums.py").unlink()
    (short / "fieldapp" / "wording.py").unlink()
    findings = imports.check_statements(staging.staged_at(short), requirements.resolve(Spec(), no_index))
    texts = [str(finding) for finding in findings]
    assert any("imports analysis.stats.sums" in text for text in texts)
    assert any("imports fieldapp.wording" in text for text in texts)


@pytest.mark.parametrize(
    "line",
    ["import matplotlib", "import tkinter", "def f():\n    import click", "from analysis.report import net"],
)
def test_an_import_that_no_device_has_is_found(line, staged, tmp_path):
    """A library of the desk or a part of Python that Android lacks is found, inside a function too."""
    more = shutil.copytree(staged.folder, tmp_path / "more")
    (more / "fieldapp" / "extra.py").write_text(line, encoding="utf-8")
    findings = imports.check_statements(staging.staged_at(more), requirements.resolve(Spec(), no_index))
    assert findings
    assert all("fieldapp/extra.py" in str(finding) for finding in findings)


def test_a_part_that_a_requirement_does_not_have_is_found(staged, tmp_path):
    """A name that a pure-Python requirement lacks is found in the text, though only a device would import it."""
    more = shutil.copytree(staged.folder, tmp_path / "more")
    line = "def f():\n    from plyer import gps, share\n"
    (more / "fieldapp" / "extra.py").write_text(line, encoding="utf-8")
    resolved = requirements.resolve(Spec(), no_index)
    findings = imports.check_statements(staging.staged_at(more), resolved)
    assert len(findings) == 1
    assert "plyer.share; plyer has no such thing" in str(findings[0])


def test_what_only_a_run_shows_is_found(staged, tmp_path):
    """An import and a file that the trace names and the tree lacks are findings; so is an empty trace."""
    resolved, report = requirements.resolve(Spec(), no_index), tmp_path / "trace.json"
    told = {
        "imports": {"numpy": ["a"], "analysis.report.net": ["fieldapp.outcrop"]},
        "files": ["fieldapp/leaves/log.kv", "a.kv"],
    }
    report.write_text(json.dumps(told), encoding="utf-8")
    texts = [str(finding) for finding in imports.check_trace(report, staged, resolved)]
    assert len(texts) == 2
    assert "fieldapp.outcrop imported analysis.report.net" in texts[0]
    assert "a.kv" in texts[1]
    report.write_text(json.dumps({"imports": {}, "files": []}), encoding="utf-8")
    assert "empty" in str(imports.check_trace(report, staged, resolved)[0])


def test_the_tree_holds_what_the_app_needs_and_no_more(staged):
    """No test, no command, no report of the desk is staged; layouts, fonts and their licence are."""
    names = set(staged.sizes)
    assert {"main.py", "LICENSE.txt", "fieldapp/look/fonts/OFL.txt", "fieldapp/leaves/log.kv"} <= names
    desk = ("tests/", "analysis/cli", "analysis/report", "analysis/survey")
    assert not [name for name in names if name.startswith(desk)]
    assert "fieldapp/command.py" not in names
    assert "fieldapp/devices/replay.py" not in names
    assert staged.total == sum(path.stat().st_size for path in staged.folder.rglob("*") if path.is_file())


def test_staging_does_not_delete_what_it_did_not_make(tmp_path):
    """A folder that holds something else is left alone."""
    (tmp_path / "letter.txt").write_text("keep me", encoding="utf-8")
    with pytest.raises(FileExistsError):
        staging.stage(tmp_path)
    assert (tmp_path / "letter.txt").exists()


def test_something_large_is_found():
    """A tree or a package far above what the app takes is a finding."""
    fine = sizes.Estimate(900_000, 300_000, {"numpy": 7_000_000}, (), 2)
    assert sizes.check_sizes(fine) == []
    large = sizes.Estimate(9_000_000, 300_000, {"numpy": 700_000_000}, (), 2)
    assert [finding.check for finding in sizes.check_sizes(large)] == ["size", "size"]


def test_name_and_version_are_compared():
    """Another name or version in pyproject.toml is found."""
    project = project_table()
    assert check_identity(Spec(), project) == []
    assert len(check_identity(Spec(), {**project, "version": "9.9"})) == 1
    assert len(check_identity(Spec(), {**project, "name": "other"})) == 2


def test_a_bound_that_the_recipes_cannot_meet_is_found():
    """pyproject.toml may not ask for more than the recipes build."""
    resolved = requirements.resolve(Spec(), no_index)
    project = project_table()
    assert requirements.check_project_bounds(resolved, project) == []
    higher = {**project, "dependencies": ["pandas>=3"], "requires-python": ">=3.15"}
    assert len(requirements.check_project_bounds(resolved, higher)) == 2


def test_a_broken_spec_is_refused_with_the_reason(staged, tmp_path):
    """What buildozer itself refuses is one finding with its words."""
    copy = tmp_path / "buildozer.spec"
    text = SPEC.read_text(encoding="utf-8").replace("orientation = portrait", "orientation = sideways")
    copy.write_text(text, encoding="utf-8")
    found = manifest.render(Spec(copy), staged, tmp_path / "work")
    assert "refuses" in str(found)


def load(path):
    """Load a script of buildspec by its path."""
    spec = importlib.util.spec_from_file_location(path.stem, path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_the_hook_adds_the_provider_once():
    """The provider goes into the manifest once, however often the hook runs; without its place it says so."""
    hook = load(SPEC.parent / "android" / "hook.py")
    once = hook.with_provider("<manifest><application></application></manifest>")
    assert once.count("<provider") == 1
    assert hook.with_provider(once) == once
    with pytest.raises(ValueError, match="expected once"):
        hook.with_provider("<manifest/>")


def test_the_icon_is_what_its_sources_draw():
    """Each PNG in the repository is, to the byte, what the command draws from the vector sources."""
    icons = load(SPEC.parent / "icons" / "render.py")
    drawn = icons.pictures()
    assert set(drawn) == {path.name for path in icons.HERE.glob("*.png")}
    assert [name for name, picture in drawn.items() if (icons.HERE / name).read_bytes() != picture] == []


@pytest.mark.parametrize("private", ["", "files"])
def test_main_opens_the_notebook_of_the_device(private, tmp_path, monkeypatch):
    """On Android the notebook lies in the folder that the backup rules name; at a desk main.py declines."""
    started = load(SPEC.parent / "main.py")
    monkeypatch.delenv("KIVY_BUILD", raising=False)
    monkeypatch.setenv("ANDROID_PRIVATE", str(tmp_path / private) if private else "")
    if not private:
        with pytest.raises(SystemExit):
            started.notebook_path()
        return
    path = started.notebook_path()
    assert path == tmp_path / "files" / "notebook" / "notebook.db"
    for rules in ("backup_rules.xml", "data_extraction.xml"):
        text = (SPEC.parent / "android" / rules).read_text(encoding="utf-8")
        assert f'domain="file" path="{path.parent.name}/"' in text


def test_main_has_the_screen_say_why_a_notebook_cannot_be_opened(tmp_path, monkeypatch):
    """On a device nobody reads what a process says as it ends, so main.py asks the app to stay."""
    started = load(SPEC.parent / "main.py")
    monkeypatch.setenv("ANDROID_PRIVATE", str(tmp_path))
    asked = []
    app = types.ModuleType("fieldapp.app")
    app.open_app = lambda path, **values: asked.append((path, values))
    monkeypatch.setitem(sys.modules, "fieldapp.app", app)
    started.main()
    assert asked == [(started.notebook_path(), {"waits": True})]
