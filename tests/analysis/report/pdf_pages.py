"""Looking into a PDF with another library than wrote it: what stands on each page, and whether anything is cut."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pypdfium2

if TYPE_CHECKING:
    from pathlib import Path

POINTS_PER_MM = 72.0 / 25.4
SNAPPED_PT = 1.5
"""Browsers move edges onto whole CSS pixels of 0.75 points: an edge may lie two of them off, points."""


def texts(document: bytes | Path) -> list[str]:
    """The text of each page, in one line."""
    with pypdfium2.PdfDocument(document) as pdf:
        return [" ".join(page.get_textpage().get_text_range().split()) for page in pdf]


def cut_off(document: bytes | Path, margin_mm: float) -> list[tuple[int, tuple[float, ...]]]:
    """Page and bounds, points, of everything drawn that reaches into a page's margin or beyond its edge."""
    room = margin_mm * POINTS_PER_MM - SNAPPED_PT
    found = []
    with pypdfium2.PdfDocument(document) as pdf:
        for number, page in enumerate(pdf, start=1):
            wide, high = page.get_size()
            # What stands inside a group is measured with the group.
            for one in page.get_objects(max_depth=1):
                left, bottom, right, top = one.get_bounds()
                if left < room or bottom < room or right > wide - room or top > high - room:
                    found.append((number, (left, bottom, right, top)))
    return found


def shapes(document: bytes | Path) -> list[int]:
    """How many lines and surfaces are drawn on each page."""
    path = pypdfium2.raw.FPDF_PAGEOBJ_PATH
    with pypdfium2.PdfDocument(document) as pdf:
        return [sum(one.type == path for one in page.get_objects(max_depth=15)) for page in pdf]
