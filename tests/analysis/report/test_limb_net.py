"""Limb against limb: what is drawn is what was computed, and words keep apart."""

from __future__ import annotations

import numpy as np
import pytest

from analysis.orient.curves import great_circle, net_xy
from analysis.orient.vectors import axis_angle_deg, equal_area_xy, vector_from_equal_area_xy
from analysis.report.limb_net import draw_limbs


@pytest.mark.parametrize(
    "design", [{}, {"delta_deg": 0.0}, {"hinge": (120.0, 60.0)}, {"hinge": (3.0, 1.0), "outcrops": 4}]
)
def test_the_lines_of_both_limbs_lie_where_limb_and_cleavage_meet(fold, find, collisions, design):
    """Each diamond lies on its limb's circle and on the cleavage's, the disc on the hinge, and no words collide."""
    check = fold(counts=(30, 20, 8, 0), **design).check
    figure = draw_limbs(check)
    np.testing.assert_allclose(
        find(figure, "hinge").get_xydata()[0], equal_area_xy(check.hinge.vector), atol=1e-12
    )
    for number, (limb, line) in enumerate(zip(check.limbs.both, check.limb_lines, strict=True)):
        assert limb.name == line.limb
        np.testing.assert_allclose(
            find(figure, f"limb-{number}").get_xydata(), net_xy(great_circle(limb.plane.pole)), atol=1e-12
        )
        place = vector_from_equal_area_xy(find(figure, f"computed-{number}").get_xydata()[0])
        assert axis_angle_deg(place, limb.plane.pole) == pytest.approx(90.0, abs=1e-6)
        assert axis_angle_deg(place, check.cleavage.vector) == pytest.approx(90.0, abs=1e-6)
    assert collisions(figure) == []


@pytest.mark.parametrize(
    "design", [{"counts": (0, 0, 0, 0)}, {"limb_dips": (50.0, 52.0)}, {"counts": (20, 0, 0, 0)}]
)
def test_without_both_limbs_and_cleavage_there_is_no_figure(fold, design):
    """Where one of them is not known nothing is drawn."""
    assert draw_limbs(fold(**design).check) is None
