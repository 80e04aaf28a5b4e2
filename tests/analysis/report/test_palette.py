"""Words can be read on every ground, by day and at dusk."""

import pytest

from analysis.errors import SettingError
from analysis.orient.features import Feature
from analysis.report.palette import DARK, LETTERS, LIGHT, MARKERS, contrast_ratio, palette_named


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda palette: palette.name)
@pytest.mark.parametrize("ground", ["paper", "card", "band"])
def test_words_have_a_contrast_of_seven(palette, ground):
    """Ink on every ground, and quiet words on paper and card, reach 7:1 (WCAG 2.1, success criterion 1.4.6)."""
    assert contrast_ratio(palette.ink, getattr(palette, ground)) >= 7.0
    if ground != "band":
        assert contrast_ratio(palette.quiet, getattr(palette, ground)) >= 7.0


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda palette: palette.name)
def test_marks_have_a_contrast_of_four_and_a_half(palette):
    """Marks and lines that carry meaning stand out from the ground by more than the 3:1 asked of graphics."""
    for colour in (palette.ink, palette.accent, palette.second, palette.muted):
        assert contrast_ratio(colour, palette.card) >= 4.5


def test_contrast_of_black_and_white():
    """Black on white is 21:1 and a colour on itself 1:1 (WCAG 2.1, definition of contrast ratio)."""
    assert contrast_ratio("#000000", "#ffffff") == pytest.approx(21.0)
    assert contrast_ratio("#8a3b12", "#8a3b12") == 1.0


def test_features_differ_without_colour():
    """Each feature has a marker and a letter of its own."""
    assert len(set(MARKERS.values())) == len(set(LETTERS.values())) == len(Feature)
    assert set(MARKERS) == set(LETTERS) == set(Feature)


def test_theme_by_name():
    """Light and dark are known; another word is refused with what is allowed."""
    assert palette_named("light") is LIGHT
    assert palette_named("dark") is DARK
    with pytest.raises(SettingError, match="expected light or dark"):
        palette_named("Light")
