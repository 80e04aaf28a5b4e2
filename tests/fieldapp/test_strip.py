"""The verdict strip: its short form for narrow screens."""

from __future__ import annotations

import pytest

from fieldapp.strip import shortened


@pytest.mark.parametrize(
    ("figures", "short"),
    [
        (
            "cleavage 7° clockwise of the hinge, between 2° anticlockwise and 16° clockwise",
            "7° clockwise, −2° to +16°",  # noqa: RUF001 - a true minus sign
        ),
        ("cleavage 7° off the hinge, between 2° and 12°", "7°, between 2° and 12°"),
        ("cleavage along the hinge, between 2° and 3°", "along the hinge, between 2° and 3°"),
        ("between 4° and 12° clockwise, at 95% confidence", "between 4° and 12° clockwise (95%)"),
        ("between 4° and 12° clockwise, at 97.5% confidence", "between 4° and 12° clockwise (97.5%)"),
        ("No readings yet.", "No readings yet."),
    ],
)
def test_the_short_form_keeps_the_angle_and_its_interval(figures, short):
    """A narrow strip says the same figures in fewer words, and what is no figure as it stands."""
    assert shortened(figures) == short
