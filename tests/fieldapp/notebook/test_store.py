from __future__ import annotations

import sqlite3
from dataclasses import replace
from datetime import timedelta

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from analysis.files.join import join
from analysis.files.reading import Other, Reading
from fieldapp.notebook import open_notebook
from fieldapp.notebook.store import standing_of
from fieldapp.states import FaultInput


@pytest.fixture
def notebook(tmp_path, clock):
    opened = open_notebook(tmp_path / "field.notebook", clock).notebook
    yield opened
    opened.close()


def test_what_is_kept_is_read_back_unchanged(notebook, make_reading, tmp_path, clock):
    """Every field of a reading survives, unknown columns and odd text included."""
    full = make_reading(
        feature="cleavage",
        strike_deg=359.9999,
        dip_deg=0.0,
        dip_quadrant="",
        note="wet, 'quoted', \n two lines = Größe",
        other=Other({"lithology": "slate", "=formula": "1+1"}),
        warnings_kept=("flat-plane", "outlier"),
        correction_deg=-1.25,
        north_reference="magnetic",
        correction_model="WMM2025 2026-05-01",
        samples=40,
        scatter_deg=1.5,
        instrument="tablet",
        overturned=True,
        latitude_deg=-0.0000001,
        longitude_deg=180.0,
        altitude_m=-3.5,
    )
    line = make_reading(feature="intersection", trend_deg=0.0, plunge_deg=90.0)
    notebook.keep(full)
    notebook.keep(line)
    notebook.close()
    again = open_notebook(tmp_path / "field.notebook", clock).notebook
    assert again.revisions() == [full, line]
    again.close()


def test_the_highest_revision_stands(notebook, make_reading, clock):
    """A mend and a striking out are further revisions; the last one stands and all are kept."""
    first = make_reading()
    second = first.revised(at=clock(), dip_deg=33.0)
    third = second.struck(at=clock())
    for reading in (first, third, second):
        notebook.keep(reading)
    assert notebook.standing() == {first.reading_id: third}
    assert notebook.revisions(first.reading_id) == [first, third, second]
    assert notebook.next_revision(first.reading_id) == 4
    assert notebook.next_revision("unknown") == 1


@pytest.mark.parametrize("statement", ["UPDATE revisions SET dip_deg = 1", "DELETE FROM revisions"])
def test_revisions_cannot_be_changed_or_deleted(notebook, make_reading, statement):
    """The file itself refuses to change or delete a revision."""
    notebook.keep(make_reading())
    with pytest.raises(sqlite3.IntegrityError, match="a revision is never"):
        notebook._db.execute(statement)


def test_the_same_revision_cannot_be_kept_twice(notebook, make_reading):
    """The file itself refuses the same content under the same id and revision."""
    reading = make_reading()
    notebook.keep(reading)
    with pytest.raises(sqlite3.IntegrityError):
        notebook.keep(reading)
    assert notebook.count() == 1


def test_a_reading_belongs_to_a_place_that_exists(notebook, make_reading):
    """Foreign keys are enforced: keeping makes the fold and the outcrop, and they cannot be dropped."""
    notebook.keep(make_reading(fold="Tarrow Beck", outcrop="TB-1"))
    assert notebook.folds() == ["Tarrow Beck"]
    assert notebook.outcrops("Tarrow Beck") == ["TB-1"]
    with pytest.raises(sqlite3.IntegrityError):
        notebook._db.execute("DELETE FROM outcrops")


def test_keep_replaces_the_draft_with_the_reading_or_not_at_all(notebook, make_reading):
    """A keep that fails leaves the old draft; one that succeeds leaves the new one."""
    reading = make_reading()
    notebook.save_draft({"azimuth": "045"})
    notebook.keep(reading, draft={"azimuth": ""})
    assert notebook.draft() == {"azimuth": ""}
    notebook.save_draft({"azimuth": "046"})
    with pytest.raises(sqlite3.IntegrityError):
        notebook.keep(reading, draft={"azimuth": ""})
    assert notebook.draft() == {"azimuth": "046"}


def test_settings_faults_and_places_are_kept(notebook):
    """Settings and the fault beside a fold come back; folds and outcrops keep their order."""
    notebook.save_settings({"margin_deg": 4.0, "north": "true"})
    notebook.save_settings({"margin_deg": 3.0})
    notebook.make_place("B", "2")
    notebook.make_place("A")
    notebook.make_place("B", "1")
    fault = FaultInput(20.0, "sinistral", 350.0)
    notebook.set_fault("B", fault)
    assert notebook.settings() == {"margin_deg": 3.0, "north": "true"}
    assert notebook.folds() == ["B", "A"]
    assert notebook.outcrops("B") == ["2", "1"]
    assert notebook.fault("B") == fault
    assert notebook.fault("nowhere") == FaultInput()


def test_settings_that_make_no_sense_are_passed_over(notebook):
    """A setting or draft spoilt in the file does not keep the notebook from opening."""
    notebook._db.execute("INSERT INTO settings VALUES ('bad', '{')")
    notebook._db.execute("INSERT INTO draft VALUES (1, '[1', '')")
    assert notebook.settings() == {}
    assert notebook.draft() == {}
    notebook._db.execute("UPDATE draft SET content = '[1]'")
    assert notebook.draft() == {}


def test_the_journal_is_durable(notebook):
    """Write-ahead log, full synchronous and foreign keys are on, also after a draft was saved."""
    notebook.save_draft({})
    pragma = {
        name: notebook._db.execute(f"PRAGMA {name}").fetchone()[0]
        for name in ("journal_mode", "synchronous", "foreign_keys")
    }
    assert pragma == {"journal_mode": "wal", "synchronous": 2, "foreign_keys": 1}


def test_take_in_adds_changes_and_is_undone_as_a_whole(notebook, make_reading, clock):
    """A colleague's revisions are seen after taking in, gone after undoing, and seen again when taken anew."""
    mine = make_reading()
    notebook.keep(mine)
    theirs = [mine.revised(at=clock(), dip_deg=35.0), make_reading(observer="B"), mine]
    taken = notebook.take_in(theirs, "b.csv")
    assert taken.revisions == 2
    assert notebook.last_take_in() == taken
    assert notebook.standing()[mine.reading_id].dip_deg == 35.0
    assert len(notebook.standing()) == 2
    notebook.undo_take_in(taken.take_in)
    assert notebook.standing() == {mine.reading_id: mine}
    assert notebook.last_take_in() is None
    assert notebook.next_revision(mine.reading_id) == 3  # never reuse a number that was seen once
    assert notebook.take_in(theirs, "b.csv").revisions == 2
    assert len(notebook.standing()) == 2


def test_a_mend_made_here_outlives_the_take_in_it_rests_on(notebook, make_reading, clock):
    """Undoing a take-in does not take back what was mended here since."""
    theirs = make_reading()
    taken = notebook.take_in([theirs], "b.csv")
    mended = theirs.revised(at=clock(), dip_deg=44.0)
    notebook.keep(mended)
    notebook.undo_take_in(taken.take_in)
    assert notebook.standing() == {theirs.reading_id: mended}


def test_a_take_in_that_fails_midway_leaves_nothing(notebook, make_reading):
    """One transaction: a bad reading among good ones brings nothing in."""
    with pytest.raises(AttributeError):
        notebook.take_in([make_reading(), None], "b.csv")
    assert notebook.count() == 0
    assert notebook.last_take_in() is None


def test_hand_over_carries_each_revision_once(notebook, make_reading, clock):
    """What was handed over is not due again; new revisions and readings taken in since are."""
    first = make_reading()
    notebook.keep(first)
    assert notebook.not_handed_over() == [first]
    notebook.note_hand_over("a.csv", [first])
    assert notebook.count_not_handed_over() == 0
    assert notebook.last_hand_over() is not None
    struck = first.struck(at=clock())
    notebook.keep(struck)
    theirs = make_reading()
    notebook.take_in([theirs], "b.csv")
    assert notebook.not_handed_over() == [struck, theirs]


def test_the_last_hand_over_is_the_one_made_last(notebook, make_reading, clock):
    """A clock set back between two hand-overs does not bring the older one to the front."""
    notebook.keep(make_reading())
    notebook.note_hand_over("a.csv", [])
    clock.later(days=-400)
    notebook.note_hand_over("b.csv", [])
    assert clock.now - timedelta(minutes=1) < notebook.last_hand_over() <= clock.now


def test_settings_bring_the_draft_in_their_notation_or_not_at_all(notebook, monkeypatch):
    """Digits of one notation are never stored beside the other: both are written, or neither."""
    notebook.save_settings({"notation": "strike/dip"}, draft={"azimuth": "045"})
    assert notebook.draft() == {"azimuth": "045"}

    def fails(*_values):
        raise sqlite3.OperationalError("the storage is gone")

    monkeypatch.setattr(notebook, "_put_draft", fails)
    with pytest.raises(sqlite3.OperationalError):
        notebook.save_settings({"notation": "dip direction/dip"}, draft={"azimuth": "135"})
    assert notebook.settings() == {"notation": "strike/dip"}
    assert notebook.draft() == {"azimuth": "045"}


@st.composite
def histories(draw):
    """Revisions of a few readings, clashing ones among them, split over three files."""
    revisions = []
    for number in range(draw(st.integers(1, 4))):
        for revision in range(1, draw(st.integers(1, 3)) + 1):
            revisions += [
                Reading(
                    reading_id=f"r{number}",
                    revision=revision,
                    feature="bedding",
                    strike_deg=draw(st.integers(0, 359)),
                    dip_deg=30.0,
                    struck_out=draw(st.booleans()),
                )
                for _ in range(draw(st.integers(1, 2)))
            ]
    return [[r for r in revisions if draw(st.booleans())] for _ in range(3)]


@given(files=histories(), order=st.permutations([0, 1, 2]))
@settings(max_examples=60, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_taking_in_equals_joining(files, order, clock, tmp_path_factory):
    """Files taken in, in any order and twice over, leave the readings that joining them leaves, clashes too."""
    notebook = open_notebook(tmp_path_factory.mktemp("n") / "field.notebook", clock).notebook
    for place in (*order, order[0]):
        notebook.take_in(files[place], f"{place}.csv")
    joined = join(*files)
    assert set(notebook.revisions()) == set(joined)
    assert {r for r in notebook.standing().values() if not r.struck_out} == set(joined.standing)
    assert set(join(notebook.revisions()).conflicts) == set(joined.conflicts)
    notebook.close()


def test_of_two_contents_the_same_one_stands_everywhere(make_reading):
    """Where contents clash under one revision, their order of arrival does not matter."""
    one = make_reading()
    other = replace(one, dip_deg=31.0)
    assert standing_of([one, other]) == standing_of([other, one])
