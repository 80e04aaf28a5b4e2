"""The sheet: the verdict at its head, and files written wholly or not at all."""

import os
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree as ET

import numpy as np
import pytest

from analysis.errors import HingewiseError, SettingError
from analysis.fold.records import Verdict
from analysis.report.net import draw_net
from analysis.report.palette import LIGHT
from analysis.report.sheet import Sheet, save, verdict_sign


@pytest.fixture(scope="module")
def picture():
    """A small sheet with a line of words."""
    sheet = Sheet(3.0, 1.0, LIGHT)
    sheet.words(0.2, 0.5, "Mossgarth fold", 10.0)
    return sheet.figure


@pytest.mark.parametrize("ending", ["png", "svg", "PNG"])
def test_the_ending_says_what_is_written(picture, tmp_path, ending):
    """A name in .png gives a PNG, one in .svg an SVG, and nothing else is left in the folder."""
    path = tmp_path / f"net.{ending}"
    save(picture, path)
    start = path.read_bytes()[:8]
    if ending.lower() == "png":
        assert start == b"\x89PNG\r\n\x1a\n"
    else:
        assert ET.fromstring(path.read_text(encoding="utf-8")).tag.endswith("svg")  # noqa: S314 - our own file
    assert [entry.name for entry in tmp_path.iterdir()] == [path.name]


@pytest.mark.parametrize("ending", ["png", "svg"])
def test_the_same_check_gives_the_same_file(fold, tmp_path, ending):
    """Drawn and written twice, even under another configuration of matplotlib, the bytes are the same."""
    import matplotlib as mpl  # noqa: PLC0415 - loaded when a figure is drawn

    made = fold()
    first, second = tmp_path / f"a.{ending}", tmp_path / f"b.{ending}"
    save(draw_net(made.check, made.readings), first)
    with mpl.rc_context(
        {"lines.linewidth": 9.0, "font.size": 30.0, "svg.hashsalt": None, "axes.facecolor": "red"}
    ):
        save(draw_net(made.check, made.readings), second)
    assert first.read_bytes() == second.read_bytes()


def test_no_date_and_no_program_in_the_file(picture, tmp_path):
    """The files tell neither when nor with which version they were written."""
    for ending in ("png", "svg"):
        path = tmp_path / f"net.{ending}"
        save(picture, path)
        text = path.read_bytes()
        assert b"dc:date" not in text
        assert b"Software" not in text
        assert b"dc:creator" not in text


@pytest.mark.parametrize("name", ["net.pdf", "net", "net.svgz", "png"])
def test_another_ending_is_refused(picture, tmp_path, name):
    """An ending that is not written is named, and no file appears."""
    with pytest.raises(SettingError, match=r"expected a name that ends in \.png or \.svg"):
        save(picture, tmp_path / name)
    assert list(tmp_path.iterdir()) == []


def test_a_folder_that_is_not_there_is_said_in_one_line(picture, tmp_path):
    """Where nothing can be written the error says what to do."""
    with pytest.raises(HingewiseError, match=r"cannot be written: .*\. Choose another folder\."):
        save(picture, tmp_path / "nowhere" / "net.png")


def test_an_interrupted_write_leaves_the_old_file(picture, tmp_path, monkeypatch):
    """If the disk fails before the new file is whole, the old one stands and no part is left behind."""
    path = tmp_path / "net.png"
    path.write_bytes(b"old")

    def full(_handle):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(HingewiseError, match="No space left"):
        save(picture, path)
    assert path.read_bytes() == b"old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["net.png"]


def test_drawing_leaves_matplotlib_as_it_was(fold):
    """The user's own settings are back after a drawing, and pyplot is never loaded."""
    import matplotlib as mpl  # noqa: PLC0415 - loaded when a figure is drawn

    made = fold()
    with mpl.rc_context({"font.size": 17.0}):
        draw_net(made.check, made.readings)
        assert mpl.rcParams["font.size"] == 17.0
    script = (
        "import sys; from analysis.report import net, sheet, funnel, plan_sketch; "
        "from analysis.fold.check import check_fold; from analysis.stats.sums import RunningSums; "
        "assert 'matplotlib' not in sys.modules; net.draw_net(check_fold(RunningSums()), {}); "
        "print('matplotlib.pyplot' in sys.modules, 'pandas' in sys.modules)"
    )
    root = Path(__file__).resolve().parents[3]
    answer = subprocess.run(
        [sys.executable, "-c", script], cwd=root, capture_output=True, text=True, check=False
    )
    assert answer.stdout.split() == ["False", "False"], answer.stderr


def lean_deg(stroke):
    """How far a bar leans clockwise from upright."""
    east, north = stroke[-1] - stroke[0]
    return float(np.degrees(np.arctan2(east, north)))


@pytest.mark.parametrize(
    ("verdict", "sense", "leans"),
    [
        (Verdict.AXIAL_PLANAR, "none", [0.0, 0.0]),
        (Verdict.TRANSECTED, "clockwise", [0.0, 32.0]),
        (Verdict.TRANSECTED, "anticlockwise", [0.0, -32.0]),
        (Verdict.TRANSECTED, "unsigned", [32.0, -32.0]),
    ],
)
def test_the_sign_leans_as_the_cleavage_does(fold, verdict, sense, leans):
    """Parallel bars for axial planar, a heavy bar leaning to the side that the cleavage is turned to else."""
    check = fold().check.changed(verdict=verdict, sense=sense)
    strokes = verdict_sign(check)
    np.testing.assert_allclose([lean_deg(stroke) for stroke, _ in strokes], leans, atol=1e-9)
    if sense in ("clockwise", "anticlockwise"):
        assert strokes[1][1] > strokes[0][1]


def test_an_open_question_has_an_open_ring(fold):
    """Keep reading is a ring with a gap, cannot be settled a closed one with a bar."""
    check = fold().check
    (ring, _), *rest = verdict_sign(check.changed(verdict=Verdict.KEEP_READING))
    assert rest == []
    assert np.linalg.norm(ring[0] - ring[-1]) > 0.5
    (ring, _), (bar, _) = verdict_sign(check.changed(verdict=Verdict.CANNOT_BE_SETTLED))
    np.testing.assert_allclose(ring[0], ring[-1], atol=1e-12)
    assert len(bar) == 2


def test_long_sentences_are_broken_without_a_lonely_word():
    """Every line fits, no word is lost, and the last line is not a single short word."""
    sheet = Sheet(8.6, 7.0, LIGHT)
    text = "Keep reading: about 18 more cleavage and 6 more bedding readings should settle it"
    lines = sheet.broken(text, 15.0, 6.5, bold=True)
    assert " ".join(lines) == text
    assert len(lines) == 2
    assert all(sheet.size_in(line, 15.0, bold=True)[0] <= 6.5 for line in lines)
    assert len(lines[1]) > 0.6 * len(lines[0])
    assert sheet.broken("", 15.0, 6.5) == []
    assert sheet.broken("Mossgarthunderlowtarrowbeckside", 15.0, 0.5) == ["Mossgarthunderlowtarrowbeckside"]
