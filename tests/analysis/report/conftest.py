"""Invented folds to draw, and ways to look into what was drawn."""

import dataclasses
from datetime import UTC, datetime
from typing import NamedTuple

import numpy as np
import pytest

from analysis.fold.check import check_fold
from analysis.fold.records import FoldCheck
from analysis.orient.features import Feature
from analysis.orient.vectors import line_vector, unit
from analysis.report.net import draw_net
from analysis.stats.sums import RunningSums


class Drawn(NamedTuple):
    """Readings by feature, and their check."""

    readings: dict
    check: FoldCheck


def invent(
    seed=1,
    *,
    hinge=(32.0, 16.0),
    limb_dips=(-55.0, 55.0),
    delta_deg=8.0,
    counts=(13, 9, 4, 0),
    scatter_deg=5.0,
    outcrops=1,
    fold="Mossgarth fold",
    margin=None,
):
    """Readings of an invented fold: a hinge, two limbs, and cleavage turned clockwise of the hinge."""
    rng = np.random.default_rng(seed)
    beds, cleavages, lines, hinges = counts
    axis = line_vector(*hinge)
    side = line_vector(hinge[0] + 90.0, 0.0)
    up = np.cross(axis, side)
    dips = np.radians(np.resize(limb_dips, max(beds, lines)) + 8.0 * rng.normal(size=max(beds, lines)))[
        :, np.newaxis
    ]
    bedding = np.cos(dips) * up + np.sin(dips) * side
    pole = line_vector(hinge[0] + delta_deg + 90.0, 4.0)

    def read(axes):
        return (
            unit(axes + np.radians(scatter_deg) * rng.normal(size=axes.shape))
            if len(axes)
            else np.zeros((0, 3))
        )

    readings = {
        Feature.BEDDING: read(bedding[:beds]),
        Feature.CLEAVAGE: read(np.tile(pole, (cleavages, 1))),
        Feature.INTERSECTION: read(unit(np.cross(bedding[:lines], pole)) if lines else np.zeros((0, 3))),
        Feature.HINGE: read(np.tile(axis, (hinges, 1))),
    }
    sums = RunningSums()
    for feature, vectors in readings.items():
        for number in range(outcrops):
            if len(vectors[number::outcrops]):
                sums.add(feature, f"MG-{number + 1}", vectors[number::outcrops])
    settings = {} if margin is None else {"settings": margin}
    return Drawn(readings, check_fold(sums, fold=fold, **settings))


CASES = {
    "none": {"counts": (0, 0, 0, 0)},
    "one bed": {"counts": (1, 0, 0, 0)},
    "one cleavage": {"counts": (0, 1, 0, 0)},
    "few": {"counts": (5, 3, 1, 1)},
    "usual": {},
    "many": {"counts": (300, 160, 90, 30), "outcrops": 5},
    "steep": {"hinge": (120.0, 78.0), "counts": (24, 14, 8, 0)},
    "level": {"hinge": (3.0, 1.0), "counts": (16, 9, 5, 2), "scatter_deg": 6.0},
    "one limb": {"limb_dips": (50.0, 52.0), "counts": (14, 8, 3, 0)},
    "lines only": {"counts": (0, 0, 12, 9), "delta_deg": -9.0},
    "axial planar": {"delta_deg": 0.0, "counts": (60, 60, 10, 0), "scatter_deg": 4.0},
}


@pytest.fixture(scope="session", params=CASES)
def case(request):
    """Each of the invented folds."""
    return invent(**CASES[request.param])


@pytest.fixture(scope="session")
def net(case):
    """The net of each of them."""
    return draw_net(case.check, case.readings)


@pytest.fixture
def fold():
    """Make an invented fold."""
    return invent


@pytest.fixture(scope="session")
def fold_once():
    """The same for what is made once and looked at by several tests."""
    return invent


def artists(figure, gid):
    """Everything drawn under a name."""
    return figure.findobj(lambda artist: artist.get_gid() == gid)


@pytest.fixture
def find():
    """Find the one thing drawn under a name; None if there is none."""

    def one(figure, gid):
        found = artists(figure, gid)
        assert len(found) <= 1, f"{len(found)} are named {gid}"
        return found[0] if found else None

    return one


@pytest.fixture
def texts():
    """Give every text drawn, with its box in pixels."""

    def boxes(figure):
        from matplotlib.text import Text  # noqa: PLC0415 - loaded when a figure is drawn

        figure.canvas.draw()
        made = figure.findobj(
            lambda artist: isinstance(artist, Text) and bool(artist.get_text()) and artist.get_visible()
        )
        return [(text.get_text(), text.get_window_extent()) for text in made]

    return boxes


@pytest.fixture
def collisions(texts):
    """Give the pairs of texts whose boxes overlap, and the texts that leave the sheet."""

    def found(figure):
        drawn = texts(figure)
        pairs = [
            (one, other)
            for number, (one, box) in enumerate(drawn)
            for other, other_box in drawn[number + 1 :]
            if box.x0 < other_box.x1
            and other_box.x0 < box.x1
            and box.y0 < other_box.y1
            and other_box.y0 < box.y1
        ]
        wide, high = figure.bbox.width, figure.bbox.height
        outside = [text for text, box in drawn if box.x0 < 0 or box.y0 < 0 or box.x1 > wide or box.y1 > high]
        return pairs + outside

    return found


NOTE = "read again, 2 m up the wall"
HOSTILE_FOLD = "<script>alert('fold')</script> & \"Tarrow\" ]]> {{ 7 * 7 }} $x_1$"
HOSTILE_NOTE = "</td></table><img src=https://example.invalid/x.png onerror=alert(1)>"


def campaign_readings():
    """The demo's first and third fold, with readings struck out, mended and hostile ones among them."""
    from analysis.demo import demo_readings  # noqa: PLC0415 - loads the table library

    later = datetime(2026, 5, 9, tzinfo=UTC)
    readings = [one for one in demo_readings() if one.fold != "Low Mossgarth fold"]
    readings.append(readings[3].struck(at=later))
    mended = readings[10].revised(at=later, note=NOTE, warnings_kept=("quadrant-misfit", "flat-plane"))
    readings.append(mended)
    hostile = {
        "fold": HOSTILE_FOLD,
        "outcrop": "<b>MG</b>",
        "note": HOSTILE_NOTE,
        "as_entered": "'\"><svg onload=x>",
    }
    readings += [
        dataclasses.replace(one, reading_id=f"hostile-{number}", **hostile)
        for number, one in enumerate(readings[:3])
    ]
    return readings


FAULT = ("--fault-strike", "52", "--sense", "sinistral", "--zone-width-km", "2")


def write_report(folder, ending, *options):
    """Run the command on the campaign's file in a folder and return the report's path."""
    from click.testing import CliRunner  # noqa: PLC0415 - only where a report is made

    from analysis.cli import hingewise  # noqa: PLC0415
    from analysis.files.csvfile import write_readings  # noqa: PLC0415

    write_readings(folder / "mossgarth.csv", campaign_readings())
    path = folder / f"report{ending}"
    arguments = ["report", str(folder / "mossgarth.csv"), "-o", str(path), *options]
    done = CliRunner().invoke(hingewise, arguments)
    assert done.exit_code == 0, done.output
    return path


@pytest.fixture(scope="session")
def page_path(tmp_path_factory):
    """A report as a page, with the fault explained."""
    return write_report(tmp_path_factory.mktemp("page"), ".html", *FAULT)


@pytest.fixture(scope="session")
def paper_path(tmp_path_factory):
    """The same as a PDF."""
    return write_report(tmp_path_factory.mktemp("paper"), ".pdf", *FAULT)
