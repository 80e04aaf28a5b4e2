"""Past readings as lines of a list, and the reading that a touch on the net names."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from analysis.orient.vectors import equal_area_xy
from fieldapp.states import NamedReading, ReadingLine
from fieldapp.wording import FEATURE_LABELS, outcrop_title, reading_text

if TYPE_CHECKING:
    from collections.abc import Sequence

    from analysis.files.reading import Reading
    from fieldapp.checking import Neighbour
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


def nearest(neighbours: Sequence[Neighbour], x: float, y: float, reach: float) -> str | None:
    """Id of the standing reading nearest to a place on the net of radius 1 (x east, y north), within reach.

    Of several equally near the newest is named. A line or pole near the rim is found at either end, for a
    horizontal axis is drawn at one of two places that mean the same.
    """
    if not neighbours:
        return None
    places = equal_area_xy(np.stack([n.vector for n in neighbours]))
    away = np.hypot(places[:, 0] - x, places[:, 1] - y)
    opposite = np.hypot(places[:, 0] + x, places[:, 1] + y)
    on_rim = np.hypot(places[:, 0], places[:, 1]) > 1.0 - reach
    away = np.where(on_rim, np.minimum(away, opposite), away)
    newest_first = away[::-1]
    found = int(np.argmin(newest_first))
    if newest_first[found] > reach:
        return None
    return neighbours[len(neighbours) - 1 - found].reading_id


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
