"""Colours of the page: one class, one instance for daylight and one for dusk. No Kivy import.

Sunlight first: near-black on near-white and one strong accent. Every colour that carries words has a contrast
of at least 7:1 on every ground it stands on (WCAG 2.1, success criterion 1.4.6); the pairs are listed in
`text_pairs` and a test computes them. Lines and fills that carry no words may be softer.
"""

from __future__ import annotations

from dataclasses import dataclass

Rgba = tuple[float, float, float, float]


def rgba(code: str, alpha: float = 1.0) -> Rgba:
    """Turn a colour such as "#0b6e69" into red, green, blue and alpha, each 0 to 1."""
    red, green, blue = (int(code[i : i + 2], 16) / 255.0 for i in (1, 3, 5))
    return (red, green, blue, alpha)


def luminance(colour: Rgba) -> float:
    """Relative luminance, 0 to 1, of an opaque colour (WCAG 2.1, definition of relative luminance)."""
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in colour[:3]]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast_ratio(first: Rgba, second: Rgba) -> float:
    """Contrast, 1 to 21, of two opaque colours (WCAG 2.1, definition of contrast ratio)."""
    bright, dark = sorted((luminance(first), luminance(second)), reverse=True)
    return (bright + 0.05) / (dark + 0.05)


@dataclass(frozen=True, slots=True, kw_only=True)
class Theme:
    """The colours of one look; each is red, green, blue and alpha, 0 to 1."""

    name: str
    paper: Rgba  # the ground of a leaf
    card: Rgba  # keys, the strip, the inside of the net
    pressed: Rgba  # a key while it is held down
    rule: Rgba  # hairlines and key outlines
    ink: Rgba  # words and lines
    muted: Rgba  # words that only name something
    chosen: Rgba  # ground of what is chosen
    on_chosen: Rgba
    accent: Rgba  # the Keep key, the mean intersection
    accent_pressed: Rgba
    on_accent: Rgba
    second: Rgba  # cleavage on the figures
    good: Rgba  # ground of a check that is fine
    caution: Rgba  # ground of a check that asks
    band: Rgba  # the band of M on the funnel
    shade: Rgba  # the interval on the funnel
    grid: Rgba  # the net's quiet lines
    veil: Rgba  # over the page while a sheet is open

    def text_pairs(self) -> dict[str, tuple[Rgba, Rgba]]:
        """Every pair of words and ground that the page uses."""
        return {
            "ink on paper": (self.ink, self.paper),
            "ink on card": (self.ink, self.card),
            "ink on pressed": (self.ink, self.pressed),
            "ink on good": (self.ink, self.good),
            "ink on caution": (self.ink, self.caution),
            "muted on paper": (self.muted, self.paper),
            "muted on card": (self.muted, self.card),
            "on_chosen on chosen": (self.on_chosen, self.chosen),
            "on_accent on accent": (self.on_accent, self.accent),
            "on_accent on accent_pressed": (self.on_accent, self.accent_pressed),
            "accent on paper": (self.accent, self.paper),
            "accent on card": (self.accent, self.card),
            "second on paper": (self.second, self.paper),
            "second on card": (self.second, self.card),
        }


LIGHT = Theme(
    name="light",
    paper=rgba("#f7f6f1"),
    card=rgba("#ffffff"),
    pressed=rgba("#d9d6ca"),
    rule=rgba("#b9b6a8"),
    ink=rgba("#16191d"),
    muted=rgba("#4e4d47"),
    chosen=rgba("#16191d"),
    on_chosen=rgba("#ffffff"),
    accent=rgba("#08595a"),
    accent_pressed=rgba("#053c3d"),
    on_accent=rgba("#ffffff"),
    second=rgba("#86370f"),
    good=rgba("#e3ece6"),
    caution=rgba("#fbe3bf"),
    band=rgba("#e9e2d0"),
    shade=rgba("#08595a", 0.16),
    grid=rgba("#cfccbf"),
    veil=rgba("#16191d", 0.55),
)

DARK = Theme(
    name="dark",
    paper=rgba("#101315"),
    card=rgba("#1c2124"),
    pressed=rgba("#39424a"),
    rule=rgba("#4b555c"),
    ink=rgba("#f4f1e8"),
    muted=rgba("#bdbab0"),
    chosen=rgba("#f4f1e8"),
    on_chosen=rgba("#101315"),
    accent=rgba("#63cfc2"),
    accent_pressed=rgba("#9be5db"),
    on_accent=rgba("#08100f"),
    second=rgba("#f2ab7c"),
    good=rgba("#1d312c"),
    caution=rgba("#4a3413"),
    band=rgba("#2a2c27"),
    shade=rgba("#63cfc2", 0.20),
    grid=rgba("#3a4248"),
    veil=rgba("#000000", 0.65),
)
