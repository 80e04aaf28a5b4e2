"""The bundled font: B612 (SIL Open Font License 1.1, see fonts/OFL.txt), made for legibility.

It has the letters of western Europe. Names and notes in others are set in the wide font that Kivy brings.
"""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

import re
from pathlib import Path

FONT_NAME = "B612"
FONT_FOLDER = Path(__file__).parent / "fonts"
REGULAR_FILE = FONT_FOLDER / "B612-Regular.otf"
BOLD_FILE = FONT_FOLDER / "B612-Bold.otf"

# Letters and signs that appear in the app's own words. A test finds each of them in both files, and finds
# no other in the sources of the leaves. What the font has not (a pencil, a backspace arrow) is drawn.
SIGNS = "°±−–×·…₀₁→←↑↓✓Δσ≥≤’"

WIDE_FONT_NAME = "wide"
WIDE_FILE = "DejaVuSans.ttf"  # in Kivy's own folder of fonts: Latin, Greek, Cyrillic, Hebrew, Arabic and more
# ASCII, Latin-1, and what else is common in the names of western Europe; a test finds each in both files.
HELD = re.compile(f"[\n\r\t -~\u00a0-\u00ffŒœŠšŸ‘’“”„†•€{SIGNS}]*")


def font_for(text: str) -> str:
    """The font that a text is set in: ours where it holds every sign, else the wide one."""
    return FONT_NAME if text.isascii() or HELD.fullmatch(text) else WIDE_FONT_NAME


def register() -> None:
    """Make the fonts known under their names; safe to call again."""
    from kivy import kivy_data_dir  # noqa: PLC0415 - this module must be importable without Kivy
    from kivy.core.text import LabelBase  # noqa: PLC0415 - as above

    LabelBase.register(FONT_NAME, str(REGULAR_FILE), fn_bold=str(BOLD_FILE))
    LabelBase.register(WIDE_FONT_NAME, str(Path(kivy_data_dir) / "fonts" / WIDE_FILE))
