"""The plan sketch: symbols point where the planes do, and places are to scale."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import SettingError
from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature
from analysis.report.plan_sketch import PlanOutcrop, bar_length_m, draw_plan, nearest_free
from analysis.report.plan_symbols import PlanPlane, azimuth_ray, plane_symbol

STRIKES = st.floats(0.0, 359.99)


def bed(strike, dip, *, overturned=False):
    return PlanPlane(Feature.BEDDING, Plane(strike, dip), overturned)


def cleavage(strike, dip):
    return PlanPlane(Feature.CLEAVAGE, Plane(strike, dip))


OUTCROPS = [
    PlanOutcrop("MG-11", 0.0, 0.0, (bed(45, 30), cleavage(40, 86))),
    PlanOutcrop("MG-12", 120.0, 35.0, (bed(225, 62), cleavage(220, 84))),
    PlanOutcrop("MG-13", 190.0, 160.0, (bed(40, 90),)),
    PlanOutcrop("MG-14", 60.0, 180.0, (bed(0, 0), cleavage(41, 90))),
    PlanOutcrop("MG-15", 68.0, 186.0, (bed(48, 75, overturned=True), cleavage(39, 80))),
    PlanOutcrop("MG-16", -90.0, 120.0),
]


def middles(figure, find, outcrops):
    """Place, inches, of each outcrop that shows its symbol or dot on the spot, by name."""
    found = {}
    for outcrop in outcrops:
        symbols = figure.findobj(lambda a, name=outcrop.name: a.get_gid() == f"symbol-{name}-bedding")
        if symbols and find(figure, f"leader-{outcrop.name}") is None:
            found[outcrop.name] = symbols[0].get_xydata().mean(axis=0)
    return found


def test_places_are_to_one_scale_with_north_up(find):
    """Between outcrops inches are metres times the scale of the bar, east to the right and north up."""
    outcrops = [o for o in OUTCROPS if o.name in ("MG-11", "MG-12", "MG-13")]
    figure = draw_plan(outcrops)
    places = middles(figure, find, outcrops)
    assert len(places) == 3
    halves = figure.findobj(lambda a: a.get_gid() == "scale-half")
    length = np.ptp(np.concatenate([half.get_xdata() for half in halves]))
    metres = float(find(figure, "scale").get_text().removesuffix(" m"))
    for outcrop in outcrops[1:]:
        moved = (places[outcrop.name] - places["MG-11"]) / (length / metres)
        np.testing.assert_allclose(moved, [outcrop.east_m, outcrop.north_m], atol=0.01)


def test_every_outcrop_is_named_and_every_dip_written(texts, find):
    """Names and dips stand on the plan; horizontal and vertical planes need no number."""
    figure = draw_plan(OUTCROPS)
    drawn = [text for text, _ in texts(figure)]
    assert {outcrop.name for outcrop in OUTCROPS} <= set(drawn)
    assert find(figure, "dip-MG-11-bedding").get_text() == "30"
    assert find(figure, "dip-MG-13-bedding") is None
    assert find(figure, "dip-MG-14-bedding") is None


def test_every_symbol_used_is_explained(find):
    """The key shows each kind of plane that is on the plan and no other."""
    figure = draw_plan(OUTCROPS)
    keys = {
        a.get_gid().removeprefix("key ")
        for a in figure.findobj(lambda a: str(a.get_gid()).startswith("key "))
    }
    assert keys == {item.kind for outcrop in OUTCROPS for item in outcrop.planes}
    assert find(figure, "empty") is None


@pytest.mark.parametrize("theme", ["light", "dark"])
@pytest.mark.parametrize("outcrops", [OUTCROPS, OUTCROPS[:1], OUTCROPS[-1:], [], OUTCROPS[3:5]])
def test_words_do_not_collide(outcrops, theme, collisions):
    """No words overlap other words or leave the sheet."""
    assert collisions(draw_plan(outcrops, hinge=Line(32.0, 16.0), fold="Mossgarth fold", theme=theme)) == []


def test_crowded_outcrops_do_not_hide_each_other(find, collisions):
    """Outcrops a few metres apart keep all their symbols apart, with lines to their places."""
    rng = np.random.default_rng(0)
    crowd = [
        PlanOutcrop(
            f"MG-{n}",
            *rng.normal(0.0, 300.0, 2),
            (bed(rng.uniform(0, 360), 40), cleavage(rng.uniform(30, 50), 80)),
        )
        for n in range(14)
    ]
    figure = draw_plan(crowd)
    assert collisions(figure) == []
    hulls = []
    for outcrop in crowd:
        lines = figure.findobj(lambda a, name=outcrop.name: str(a.get_gid()).startswith(f"symbol-{name}-"))
        hulls.append(np.concatenate([line.get_xydata() for line in lines]))
    for number, one in enumerate(hulls):
        for other in hulls[:number]:
            assert np.linalg.norm(one[:, np.newaxis] - other, axis=-1).min() > 0.02
    assert any(find(figure, f"leader-{outcrop.name}") is not None for outcrop in crowd)


@given(STRIKES, st.floats(1.0, 89.0))
def test_nearest_free_place_is_clear(strike, dip):
    """A second symbol is moved no further than it must be to stand clear of the first."""
    standing = np.concatenate(plane_symbol(bed(strike, dip))) * 0.17
    new = np.concatenate(plane_symbol(cleavage(strike, dip))) * 0.17
    away = nearest_free(standing, new)
    assert np.linalg.norm(standing[:, np.newaxis] - (new + away), axis=-1).min() >= 0.06 - 1e-12
    assert np.linalg.norm(away) < 0.6
    np.testing.assert_array_equal(nearest_free(np.zeros((0, 2)), new), [0.0, 0.0])


@pytest.mark.parametrize(("trend", "plunge", "heads"), [(32.0, 16.0, 1), (32.0, 0.0, 2), (212.0, 45.0, 1)])
def test_hinge_arrow_points_along_its_trend(find, trend, plunge, heads):
    """The arrow runs along the trend; a level hinge has two heads."""
    figure = draw_plan(OUTCROPS, hinge=Line(trend, plunge))
    shaft = find(figure, "hinge-arrow").get_xydata()
    way = shaft[1] - shaft[0]
    np.testing.assert_allclose(way / np.linalg.norm(way), azimuth_ray(trend), atol=1e-9)
    assert len(figure.findobj(lambda a: a.get_gid() == "hinge-arrow-head")) == heads
    assert find(figure, "hinge-words").get_text() == f"{trend:03.0f}/{plunge:02.0f}"


def test_vertical_hinge_is_a_dot_in_a_ring(find):
    """A vertical hinge has no trend to point along."""
    figure = draw_plan(OUTCROPS, hinge=Line(32.0, 90.0))
    ring = find(figure, "hinge-arrow").get_xydata()
    np.testing.assert_allclose(ring[0], ring[-1], atol=1e-12)


def test_no_outcrop_is_said_in_words(find):
    """An empty plan says that no outcrop has a position."""
    assert find(draw_plan([]), "empty").get_text() == "No outcrop has a position yet."


def test_one_outcrop_has_a_scale_too(find):
    """A single outcrop is drawn on a plan of some tens of metres."""
    assert find(draw_plan(OUTCROPS[:1]), "scale").get_text().endswith(" m")


@pytest.mark.parametrize(
    ("most", "length"),
    [(1.0, 1.0), (1.9, 1.0), (2.0, 2.0), (4.99, 2.0), (5.0, 5.0), (99.0, 50.0), (730.0, 500.0), (0.3, 0.2)],
)
def test_scale_bar_is_a_round_number(most, length):
    """The bar is the longest of 1, 2, 5, 10, ... that has room."""
    assert bar_length_m(most) == pytest.approx(length)


def test_a_line_is_no_plane():
    """A feature read as a line is refused, as is a place that is unknown."""
    with pytest.raises(SettingError, match="hinge is no plane"):
        PlanPlane(Feature.HINGE, Plane(0.0, 10.0))
    with pytest.raises(SettingError, match="outcrop MG-1 has no place"):
        PlanOutcrop("MG-1", float("nan"), 0.0)
