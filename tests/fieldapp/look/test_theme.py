"""The colours: words that matter can be read in sunlight and at dusk."""

from __future__ import annotations

import pytest

from fieldapp.look.theme import DARK, LIGHT, contrast_ratio, rgba

NEEDED = 7.0  # WCAG 2.1, success criterion 1.4.6 (enhanced contrast)


def test_contrast_of_black_and_white_is_21():
    """Black on white has the highest contrast there is (WCAG 2.1, definition of contrast ratio)."""
    assert contrast_ratio(rgba("#000000"), rgba("#ffffff")) == pytest.approx(21.0)


def test_contrast_of_a_known_grey():
    """#767676 on white has a contrast of 4.54 (WCAG's own worked figure for AA text, from memory)."""
    assert contrast_ratio(rgba("#767676"), rgba("#ffffff")) == pytest.approx(4.54, abs=0.005)


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_every_pair_of_words_and_ground_has_enough_contrast(theme):
    """Each pair of words and ground that the page uses has a contrast of at least 7:1."""
    low = {
        name: contrast_ratio(*pair)
        for name, pair in theme.text_pairs().items()
        if contrast_ratio(*pair) < NEEDED
    }
    assert low == {}


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_a_pressed_key_looks_different(theme):
    """A key held down differs from one that is not."""
    assert theme.pressed != theme.card
    assert theme.accent_pressed != theme.accent
