from __future__ import annotations

import random
import sqlite3
from contextlib import closing, suppress

import pytest

from fieldapp.dispatch import at_once
from fieldapp.notebook import Notebook, NotebookError, open_notebook, opening
from fieldapp.notebook.backups import back_up
from fieldapp.notebook.carving import carve
from fieldapp.notebook.errors import NotANotebookError
from fieldapp.notebook.schema import APPLICATION_ID
from fieldapp.outcrop import open_page

PAGE = 4096


@pytest.fixture
def full(tmp_path, clock, make_reading):
    """A notebook of 300 readings, long notes among them, closed; its path and readings."""
    path = tmp_path / "field.notebook"
    notebook = open_notebook(path, clock).notebook
    readings = [
        make_reading(
            strike_deg=float(i), dip_deg=20.0 + i % 50 + 0.25, note="n" * (9000 if i % 40 == 0 else i % 7)
        )
        for i in range(300)
    ]
    notebook.keep_all(readings[:-1])
    taken = [readings[-1]]
    notebook.take_in(taken, "b.csv")
    notebook.save_settings({"margin_deg": 4.0})
    notebook.save_draft({"azimuth": "04"})
    notebook.close()
    return path, readings


def damage(path, changes):
    data = bytearray(path.read_bytes())
    for start, content in changes:
        data[start : start + len(content)] = content
    path.write_bytes(data)


def test_a_new_place_gets_a_new_notebook(tmp_path, clock):
    """Folders are made as needed; the report says that the file is new."""
    opened = open_notebook(tmp_path / "a" / "b" / "field.notebook", clock)
    assert opened.report.new
    assert opened.notebook.count() == 0
    opened.notebook.close()


def test_carving_finds_every_reading_of_a_healthy_file(full):
    """Read page by page, without any index, a healthy file gives all its readings."""
    path, readings = full
    carved = carve(path.read_bytes())
    assert [carved.rows[seq].reading for seq in sorted(carved.rows)] == readings
    assert carved.doubtful == 0


def test_carving_reads_the_write_ahead_log(tmp_path, clock, make_reading):
    """Readings that are only in the log yet are carved too."""
    path = tmp_path / "field.notebook"
    notebook = open_notebook(path, clock).notebook
    readings = [make_reading(strike_deg=float(i), note="x" * 6000) for i in range(9)]
    for reading in readings:
        notebook.keep(reading)
    wal = path.with_name(path.name + "-wal").read_bytes()
    carved = carve(path.read_bytes()[:PAGE], wal)
    notebook.close()
    assert {row.reading for row in carved.rows.values()} == set(readings)


def test_a_lost_header_loses_no_reading(full, clock):
    """With the first page gone everything but the small tables is recovered; the damaged file is set aside."""
    path, readings = full
    damage(path, [(0, bytes(PAGE))])
    broken = path.read_bytes()
    opened = open_notebook(path, clock)
    assert opened.report.recovered == len(readings)
    assert opened.report.set_aside.read_bytes() == broken
    assert list(opened.notebook.standing().values()) == readings
    opened.notebook.keep(readings[0].revised(at=clock(), note="usable"))
    opened.notebook.close()
    again = open_notebook(path, clock)
    assert again.report.set_aside is None
    again.notebook.close()


def test_one_spoilt_page_loses_only_its_own_readings(full, clock):
    """A page of readings overwritten costs those on it; all others, settings and draft are recovered."""
    path, readings = full
    data = path.read_bytes()
    leaf, on_page = next(
        (at, held)
        for at in range(PAGE * 4, len(data), PAGE)
        if data[at] == 0x0D
        and (held := sum(r.reading_id.encode() in data[at : at + PAGE] for r in readings)) > 1
    )
    damage(path, [(leaf, b"\x55" * PAGE)])
    opened = open_notebook(path, clock)
    assert opened.report.recovered == len(readings) - on_page
    assert set(opened.notebook.standing().values()) < set(readings)
    assert opened.notebook.settings() == {"margin_deg": 4.0}
    assert opened.notebook.draft() == {"azimuth": "04"}
    opened.notebook.close()


def test_a_flipped_digit_in_a_reading_is_noticed(full, clock):
    """A change that leaves the database sound but a reading different is found by its digest, not shown as true."""
    path, readings = full
    data = path.read_bytes()
    place = data.index(readings[7].reading_id.encode())
    damage(path, [(place, b"f" if data[place : place + 1] != b"f" else b"e")])
    opened = open_notebook(path, clock)
    assert opened.report.set_aside is not None
    assert opened.report.recovered == len(readings) - 1
    assert opened.report.doubtful == 1
    assert readings[7] not in opened.notebook.standing().values()
    opened.notebook.close()


@pytest.mark.parametrize("seed", range(20))
def test_random_damage_never_keeps_the_page_shut_nor_invents_a_reading(full, clock, seed):
    """Whatever bytes are spoilt, the notebook opens, can be written to, and holds only true readings."""
    path, readings = full
    rng = random.Random(seed)  # noqa: S311 - places to spoil, no secrets
    size = path.stat().st_size
    damage(
        path,
        [
            (rng.randrange(size), rng.randbytes(rng.choice([1, 16, 512, PAGE])))
            for _ in range(rng.choice([1, 4, 40]))
        ],
    )
    opened = open_notebook(path, clock)
    standing = set(opened.notebook.standing().values())
    assert standing <= set(readings)
    assert len(standing) > len(readings) // 2
    opened.notebook.keep(readings[0].revised(at=clock(), note="again").revised(at=clock(), note="usable"))
    opened.notebook.close()


@pytest.mark.parametrize("length", [100, PAGE, PAGE * 10 + 17])
def test_a_cut_file_gives_what_is_left_of_it(full, clock, length):
    """A file cut short is recovered as far as it goes."""
    path, readings = full
    path.write_bytes(path.read_bytes()[:length])
    opened = open_notebook(path, clock)
    assert opened.report.set_aside is not None
    assert set(opened.notebook.standing().values()) <= set(readings)
    opened.notebook.close()


def test_a_file_of_zeros_is_a_damaged_notebook(tmp_path, clock):
    """What a power cut can leave behind is set aside; the page opens on an empty notebook."""
    path = tmp_path / "field.notebook"
    path.write_bytes(bytes(8192))
    opened = open_notebook(path, clock)
    assert opened.report.set_aside is not None
    assert opened.notebook.count() == 0
    opened.notebook.close()


def test_a_file_that_is_no_notebook_is_left_alone(tmp_path, clock):
    """A text file named by mistake is refused and stays as it is."""
    path = tmp_path / "readings.csv"
    path.write_text("feature,strike_deg,dip_deg\nbedding,45,30\n" * 50)
    before = path.read_bytes()
    with pytest.raises(NotANotebookError, match="left alone"):
        open_notebook(path, clock)
    assert path.read_bytes() == before
    assert list(tmp_path.iterdir()) == [path]


def test_the_newest_backup_is_offered(full, clock):
    """After damage the report names the newest backup, and adding it brings back what was lost."""
    path, readings = full
    clock.later(days=-1)
    back_up(path, clock().date())
    clock.later(days=1)
    newest = back_up(path, clock().date())
    data = path.read_bytes()
    damage(path, [(at, b"\x55" * PAGE) for at in range(PAGE * 8, len(data), PAGE * 2)])
    opened = open_notebook(path, clock)
    assert opened.report.newest_backup == newest
    lost = len(readings) - opened.report.recovered
    assert lost > 20
    assert opened.notebook.add_backup(newest).revisions >= lost
    assert set(opened.notebook.standing().values()) == set(readings)
    opened.notebook.close()


@pytest.mark.parametrize("step", ["before the old log is removed", "after the old log is removed"])
def test_a_recovery_that_was_interrupted_is_finished(full, clock, step):
    """A process killed while the recovered file takes its name loses nothing at the next start."""
    path, readings = full
    wal = path.with_name(path.name + "-wal")
    good = path.read_bytes()
    damage(path, [(0, bytes(PAGE))])
    path.with_name(path.name + ".recovered").write_bytes(good)
    if step == "before the old log is removed":
        wal.write_bytes(b"\x37\x7f\x06\x82" + bytes(200))
    opened = open_notebook(path, clock)
    assert list(opened.notebook.standing().values()) == readings
    assert not path.with_name(path.name + ".recovered").exists()
    opened.notebook.close()


def test_damaged_files_of_one_second_do_not_replace_each_other(full, clock):
    """Two damaged files set aside at the same time both stay."""
    path, _ = full
    good = path.read_bytes()
    names = set()
    for _ in range(2):
        path.write_bytes(good)
        damage(path, [(0, bytes(PAGE))])
        still = clock.now
        opened = open_notebook(path, lambda still=still: still)
        names.add(opened.report.set_aside)
        opened.notebook.close()
    assert len(names) == 2
    assert all(name.exists() for name in names)


def test_an_index_gone_wrong_is_damage_too(full, clock):
    """An index that no longer agrees with its table is found at start, and every reading is recovered."""
    path, readings = full
    with closing(sqlite3.connect(path)) as db:
        root = db.execute(
            "SELECT rootpage FROM sqlite_master WHERE name LIKE 'sqlite_autoindex_revisions%'"
        ).fetchone()
    data = path.read_bytes()
    at = (root[0] - 1) * PAGE
    leaf = int.from_bytes(data[at + 8 : at + 12]) if data[at] == 0x02 else root[0]
    damage(path, [((leaf - 1) * PAGE, b"\x0a" + bytes(PAGE - 1))])
    opened = open_notebook(path, clock)
    assert opened.report.recovered == len(readings)
    opened.notebook.close()


def test_the_file_says_whose_it_is(full):
    """The header carries the program's own mark."""
    path, _ = full
    assert int.from_bytes(path.read_bytes()[68:72]) == APPLICATION_ID


# -- connections --------------------------------------------------------------------------------------------


class Counted(sqlite3.Connection):
    """A connection that says whether it was closed."""

    is_open = True

    def close(self):
        """Close and note it."""
        super().close()
        self.is_open = False


@pytest.fixture
def connections(monkeypatch):
    """Every connection made from now on."""
    made = []
    connect = sqlite3.connect

    def counting(*args, **options):
        made.append(connect(*args, factory=Counted, **options))
        return made[-1]

    monkeypatch.setattr(sqlite3, "connect", counting)
    return made


def no_notebook(path):
    path.write_text("feature,strike_deg,dip_deg\nbedding,45,30\n" * 50)


def no_header(path):
    damage(path, [(0, bytes(PAGE))])


def newer(path):
    with closing(sqlite3.connect(path)) as db:
        db.execute("PRAGMA user_version = 99")
        db.execute("INSERT INTO migrations VALUES (99, 'later', 'later')")
        db.commit()


@pytest.mark.parametrize("may_write", [True, False])
@pytest.mark.parametrize("spoil", [no_notebook, no_header, newer])
def test_only_the_notebook_that_is_given_stays_open(full, clock, connections, monkeypatch, spoil, may_write):
    """Whether opening fails, recovers or finds that it may only read: no other connection is left behind."""
    path, _ = full
    spoil(path)

    def refused(_path):
        error = sqlite3.OperationalError("attempt to write a readonly database")
        error.sqlite_errorcode = sqlite3.SQLITE_READONLY
        raise error

    if not may_write:
        monkeypatch.setattr(opening, "_for_writing", refused)
    connections.clear()
    with suppress(NotebookError):
        open_notebook(path, clock).notebook.close()
    assert connections
    assert [db.is_open for db in connections] == [False] * len(connections)


def test_a_page_that_does_not_come_up_leaves_the_notebook_closed(full, clock, connections, monkeypatch):
    """An error while the page is made closes the notebook that was opened for it."""
    path, _ = full

    def fails(_self):
        raise OSError("the storage is gone")

    monkeypatch.setattr(Notebook, "settings", fails)
    with pytest.raises(OSError, match="gone"):
        open_page(path, clock=clock, dispatch=at_once)
    assert connections
    assert not any(db.is_open for db in connections)
