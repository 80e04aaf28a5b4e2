"""Files go out through the share sheet and come in through the system's chooser; a fake Android stands in."""

# The stand-ins have the names of Java's classes and functions.
# ruff: noqa: N802, D102

from __future__ import annotations

import os
import sys
import types
from pathlib import Path

import pytest

from fieldapp.devices import passing

ROOT = Path(__file__).resolve().parents[3]


class Intent:
    """An intent that remembers what was put into it."""

    ACTION_SEND, ACTION_OPEN_DOCUMENT, CATEGORY_OPENABLE = "send", "open", "openable"
    EXTRA_STREAM, FLAG_GRANT_READ_URI_PERMISSION = "stream", 1

    def __init__(self, action):
        self.action, self.kind, self.extras, self.flags, self.categories = action, "", {}, 0, []

    def setType(self, kind):
        self.kind = kind

    def putExtra(self, name, value):
        self.extras[name] = value

    def addFlags(self, flags):
        self.flags |= flags

    def addCategory(self, name):
        self.categories.append(name)

    @staticmethod
    def createChooser(intent, title):
        return ("chooser", intent, title)


class Provider:
    """Gives the address that a file is shared under."""

    @staticmethod
    def getUriForFile(_context, authority, file):
        return f"content://{authority}{file}"


class Rows:
    """The system's answer about a file."""

    def __init__(self, name):
        self.name = name

    def getColumnIndex(self, column):
        return 0 if column == "_display_name" else -1

    def moveToFirst(self):
        return True

    def getString(self, _column):
        return self.name

    def close(self):
        pass


class Resolver:
    """Opens the file that was chosen."""

    def __init__(self, path, name):
        self.path, self.name = path, name

    def query(self, *_):
        return Rows(self.name)

    def openFileDescriptor(self, _place, _mode):
        return types.SimpleNamespace(detachFd=lambda: os.open(self.path, os.O_RDONLY))


class Activity:
    """The activity: what was started on it, and who listens for answers."""

    def __init__(self):
        self.started, self.listeners, self.resolver = [], [], None

    def getPackageName(self):
        return "org.example.app"

    def getContentResolver(self):
        return self.resolver

    def startActivity(self, intent):
        self.started.append(intent)

    def startActivityForResult(self, intent, asked):
        self.started.append((intent, asked))

    def bind(self, *, on_activity_result):
        self.listeners.append(on_activity_result)

    def unbind(self, *, on_activity_result):
        self.listeners.remove(on_activity_result)

    def answer(self, asked, data):
        for listener in list(self.listeners):
            listener(asked, -1, data)


@pytest.fixture
def activity(monkeypatch):
    """A fake Android."""
    one = Activity()
    classes = {
        "android.content.Intent": Intent,
        "androidx.core.content.FileProvider": Provider,
        "java.io.File": str,
        "java.lang.String": str,
    }
    android = types.SimpleNamespace(mActivity=one, activity=one)
    jnius = types.SimpleNamespace(autoclass=classes.__getitem__, cast=lambda _kind, value: value)
    monkeypatch.setitem(sys.modules, "android", android)
    monkeypatch.setitem(sys.modules, "jnius", jnius)
    monkeypatch.setenv("ANDROID_ARGUMENT", "app")
    return one


@pytest.fixture
def answers():
    """What `done` was told."""
    return []


def ask(folder, answers):
    """Ask for a file and collect what comes back."""
    passing.choose_file(folder, lambda path, words: answers.append((path, words)))


def test_a_csv_is_offered_under_an_address_that_may_be_read(activity, tmp_path):
    """The share sheet gets the file's address of the provider, its type, and leave to read it."""
    assert passing.share_file(tmp_path / "readings.csv") == ""
    (_, intent, title) = activity.started[0]
    assert (intent.action, intent.kind, intent.flags) == ("send", "text/csv", 1)
    assert intent.extras["stream"] == f"content://org.example.app.files{tmp_path / 'readings.csv'}"
    assert title == "readings.csv"


def test_the_provider_is_the_one_of_the_manifest():
    """The address used is the one that the hook writes into the manifest, and the folder the one it may share."""
    android = ROOT / "buildspec" / "android"
    assert f'"${{applicationId}}{passing.AUTHORITY}"' in (android / "hook.py").read_text(encoding="utf-8")
    handover = (ROOT / "fieldapp" / "leaves" / "handover.py").read_text(encoding="utf-8")
    assert 'FOLDER_NAME = "hand-over"' in handover
    assert 'path="notebook/hand-over/"' in (android / "shared_files.xml").read_text(encoding="utf-8")


@pytest.mark.parametrize("broken", ["android", "jnius"])
def test_a_device_that_refuses_is_told_of(activity, broken, tmp_path, monkeypatch, answers):
    """Where Android refuses, the words say what to do instead, and nothing is raised."""
    monkeypatch.setitem(sys.modules, broken, None)
    assert passing.share_file(tmp_path / "readings.csv") == passing.NOT_SHARED
    ask(tmp_path, answers)
    assert answers == [(None, passing.NOT_CHOSEN)]
    assert activity.started == []


def test_a_chosen_file_is_copied_whole_under_its_name(activity, tmp_path, answers):
    """The file chosen comes as a copy of ours, and the question is asked once."""
    source = tmp_path / "source"
    source.write_bytes(b"feature,strike_deg\n" * 5000)
    activity.resolver = Resolver(source, "Ann's readings (2).csv")
    ask(tmp_path / "in", answers)
    assert activity.started[0][0].categories == ["openable"]
    activity.answer(7, None)
    assert answers == []
    activity.answer(passing.ASKED, types.SimpleNamespace(getData=lambda: "content://x"))
    ((path, words),) = answers
    assert words == ""
    assert path.name == "Ann_s readings _2_.csv"
    assert path.read_bytes() == source.read_bytes()
    assert activity.listeners == []


@pytest.mark.parametrize("name", ["../../notebook.db", "/etc/passwd", "..", "", "a/b.csv"])
def test_a_name_cannot_lead_out_of_the_folder(activity, name, tmp_path, answers):
    """Whatever another app calls its file, the copy lies in the folder."""
    source = tmp_path / "source"
    source.write_bytes(b"x")
    activity.resolver = Resolver(source, name)
    ask(tmp_path / "in", answers)
    activity.answer(passing.ASKED, types.SimpleNamespace(getData=lambda: "content://x"))
    assert answers[0][0].parent == tmp_path / "in"
    assert answers[0][0].is_file()


def test_closing_the_chooser_gives_nothing_and_says_nothing(activity, tmp_path, answers):
    """A question without an answer changes nothing."""
    ask(tmp_path, answers)
    activity.answer(passing.ASKED, None)
    assert answers == [(None, "")]


def test_a_file_that_cannot_be_read_is_told_of(activity, tmp_path, answers):
    """A file that is gone when it is opened is said to be unreadable."""
    activity.resolver = Resolver(tmp_path / "gone", "gone.csv")
    ask(tmp_path / "in", answers)
    activity.answer(passing.ASKED, types.SimpleNamespace(getData=lambda: "content://x"))
    assert answers == [(None, passing.NOT_READ)]


def test_elsewhere_the_file_stands_where_it_is(monkeypatch, tmp_path):
    """At a desk nothing is shared and no chooser is there; iOS names the Files app."""
    monkeypatch.delenv("ANDROID_ARGUMENT", raising=False)
    monkeypatch.delenv("KIVY_BUILD", raising=False)
    assert passing.share_file(tmp_path / "a.csv") == ""
    assert not passing.can_choose()
    monkeypatch.setenv("KIVY_BUILD", "ios")
    assert passing.share_file(tmp_path / "a.csv") == passing.IN_FILES
    assert not passing.can_choose()
