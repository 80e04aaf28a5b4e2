"""Colours, markers and letters of the printed figures.

Near-black on near-white, one accent and a second colour, and the same for dusk. The palettes set words only in
`ink` and `quiet`, whose contrast on `paper` and `card` is at least 7:1 (WCAG 2.1, success criterion 1.4.6); the
other colours are for marks and lines. No state and no feature is told by colour alone: features differ by
marker and letter, verdicts by sign and words.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from analysis.errors import SettingError
from analysis.orient.features import Feature

INK: Final = "#16191d"
PAPER: Final = "#f7f6f1"
ACCENT: Final = "#0b6e69"
SECOND: Final = "#8a3b12"
MUTED: Final = "#6b6a63"


@dataclass(frozen=True, slots=True, kw_only=True)
class Palette:
    """The colours of one look, as "#rrggbb"."""

    name: str
    paper: str  # ground of the sheet
    card: str  # ground inside the net and the funnel
    ink: str  # words and the lines that matter
    quiet: str  # words that only name something
    muted: str  # hairlines: ticks, girdle, leaders
    rule: str  # dividing lines and frames
    accent: str  # mean intersection, the watched interval
    second: str  # cleavage
    band: str  # ground of the band of M

    def colour_of(self, feature: Feature) -> str:
        """Colour of a feature's marks."""
        return {Feature.CLEAVAGE: self.second, Feature.INTERSECTION: self.accent}.get(feature, self.ink)


LIGHT: Final = Palette(
    name="light",
    paper=PAPER,
    card="#ffffff",
    ink=INK,
    quiet="#4e4d47",
    muted=MUTED,
    rule="#b9b6a8",
    accent=ACCENT,
    second=SECOND,
    band="#ece5d3",
)
DARK: Final = Palette(
    name="dark",
    paper="#101315",
    card="#1a1f22",
    ink="#f4f1e8",
    quiet="#bdbab0",
    muted="#9b988e",
    rule="#4b555c",
    accent="#63cfc2",
    second="#f2ab7c",
    band="#33342b",
)

# matplotlib's marker, the letter, and the words of each feature.
MARKERS: Final = {
    Feature.BEDDING: "o",
    Feature.CLEAVAGE: "^",
    Feature.INTERSECTION: "D",
    Feature.HINGE: "s",
}
LETTERS: Final = {
    Feature.BEDDING: "B",
    Feature.CLEAVAGE: "C",
    Feature.INTERSECTION: "L",
    Feature.HINGE: "H",
}
NAMES: Final = {
    Feature.BEDDING: "bedding",
    Feature.CLEAVAGE: "cleavage",
    Feature.INTERSECTION: "intersection",
    Feature.HINGE: "hinge line",
}


def palette_named(name: str) -> Palette:
    """Give the palette of a theme, "light" or "dark"; raises SettingError for any other word."""
    for palette in (LIGHT, DARK):
        if palette.name == name:
            return palette
    raise SettingError(f"{name!r} is no theme", where="theme", expected="light or dark")


def _luminance(colour: str) -> float:
    channels = [int(colour[i : i + 2], 16) / 255.0 for i in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast_ratio(first: str, second: str) -> float:
    """Contrast, 1 to 21, of two colours "#rrggbb" (WCAG 2.1, definitions of contrast ratio and luminance)."""
    dark, bright = sorted((_luminance(first), _luminance(second)))
    return (bright + 0.05) / (dark + 0.05)
