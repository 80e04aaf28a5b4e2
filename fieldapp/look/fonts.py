"""The bundled font: B612 (SIL Open Font License 1.1, see fonts/OFL.txt), made for legibility."""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

from pathlib import Path

FONT_NAME = "B612"
FONT_FOLDER = Path(__file__).parent / "fonts"
REGULAR_FILE = FONT_FOLDER / "B612-Regular.otf"
BOLD_FILE = FONT_FOLDER / "B612-Bold.otf"

# Letters and signs that appear in the app's own words. A test finds each of them in both files, and finds
# no other in the sources of the leaves. What the font has not (a pencil, a backspace arrow) is drawn.
SIGNS = "°±−–×·…₀₁→←↑↓✓Δσ≥≤’"


def register() -> None:
    """Make the font known under its name; safe to call again."""
    from kivy.core.text import LabelBase  # noqa: PLC0415 - this module must be importable without Kivy

    LabelBase.register(FONT_NAME, str(REGULAR_FILE), fn_bold=str(BOLD_FILE))
