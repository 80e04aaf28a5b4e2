"""Past readings as lines of a list, and the particulars of one that was touched."""

from __future__ import annotations

from typing import TYPE_CHECKING

from fieldapp.states import NamedReading, ReadingLine
from fieldapp.wording import FEATURE_LABELS, outcrop_title, reading_text

if TYPE_CHECKING:
    from analysis.files.reading import Reading
    from fieldapp.settings import PlaneNotation


def line_of(reading: Reading, planes: PlaneNotation) -> ReadingLine:
    """Give a past reading as a line of a list."""
    return ReadingLine(
        reading.reading_id,
        reading.feature,
        reading_text(reading, planes),
        reading.outcrop,
        reading.struck_out,
        reading.note,
        reading.warnings_kept,
        reading.recorded_at,
    )


def named_reading(reading: Reading, planes: PlaneNotation) -> NamedReading:
    """Tell a reading's particulars line by line."""
    title = f"{FEATURE_LABELS[reading.feature]} {reading_text(reading, planes)}"
    north = ""
    if reading.correction_deg is not None:
        north = f"{reading.north_reference} {reading.correction_deg:+.1f}°, {reading.correction_model}"
    elif reading.north_reference != "true":
        north = f"{reading.north_reference}, not corrected"
    when = "" if reading.recorded_at is None else f"{reading.recorded_at:%Y-%m-%d %H:%M} UTC"
    lines = (
        outcrop_title(reading.outcrop),
        when,
        f"entered as {reading.as_entered}" if reading.as_entered else "",
        north,
        "overturned" if reading.overturned else "",
        f"scatter {reading.scatter_deg:.1f}°" if reading.scatter_deg is not None else "",
        f"kept against: {', '.join(reading.warnings_kept)}" if reading.warnings_kept else "",
        f"by {reading.observer}" if reading.observer else "",
        f"revision {reading.revision}" if reading.revision > 1 else "",
        "struck out" if reading.struck_out else "",
        reading.note,
    )
    return NamedReading(reading.reading_id, title, tuple(t for t in lines if t), reading.struck_out)
