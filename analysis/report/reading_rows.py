"""The readings of a fold in words: the rows of the report's table, and what a marker on the net says."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from analysis.fold.words import counted
from analysis.orient.entrychecks import EntryCheck
from analysis.orient.features import Feature
from analysis.orient.forms import azimuth_text, inclination_text
from analysis.report.blocks import Column, Row, Table, cut
from analysis.report.palette import NAMES

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.files.reading import Reading
    from analysis.report.campaign import FoldPart

MOST_ROWS: Final = 5000
"""Readings of one fold that are listed; a report with more would be no page any more."""
_OPEN_UP_TO: Final = 12  # rows that a table may have and still stand open on the screen
_COLUMNS: Final = (
    Column("No.", 5, figures=True),
    Column("When, UTC", 17),
    Column("Outcrop", 12),
    Column("Feature", 13),
    Column("Attitude", 10, figures=True),
    Column("As entered", 17),
    Column("Remarks", 26),
)


def readings_table(part: FoldPart) -> Table:
    """Every reading of a fold in recorded order, those struck out among them and marked."""
    rows: list[tuple[Reading, float | None]] = [
        (part.table.reading(row), part.off_deg.get(row)) for row in range(min(len(part.table), MOST_ROWS))
    ]
    rows += [(reading, None) for reading in part.struck[: MOST_ROWS - len(rows)]]
    if all(reading.recorded_at is not None for reading, _ in rows):
        rows.sort(key=lambda row: _time(row[0]))
    total = len(part.table) + len(part.struck)
    struck = f", {len(part.struck)} of them struck out" if part.struck else ""
    caption = f"{counted(total, 'reading')}{struck}"
    if total > len(rows):
        caption += f"; the first {len(rows)} are listed, all are used"
    listed = tuple(
        Row(_cells(number, reading, off), struck=reading.struck_out)
        for number, (reading, off) in enumerate(rows, start=1)
    )
    return Table(caption, _COLUMNS, listed, folded=len(listed) > _OPEN_UP_TO)


def marker_titles(part: FoldPart) -> dict[str, list[str]]:
    """What the markers of a fold's net stand for, by the name of their group, in the order drawn."""
    titles: dict[str, list[str]] = {f"readings-{feature}": [] for feature in Feature}
    for reading in part.table:
        where = f", {reading.outcrop}" if reading.outcrop else ""
        when = f", {_when(reading.recorded_at)}" if reading.recorded_at else ""
        words = f"{NAMES[reading.feature]} {attitude_text(reading)}{where}{when}"
        titles[f"readings-{reading.feature}"].append(words)
    return titles


def attitude_text(reading: Reading) -> str:
    """Strike/dip or trend/plunge, to a tenth of a degree where the reading is finer than a degree."""
    azimuth, inclination = (
        (reading.strike_deg, reading.dip_deg)
        if reading.feature.is_plane
        else (reading.trend_deg, reading.plunge_deg)
    )
    azimuth, inclination = azimuth or 0.0, inclination or 0.0
    decimals = int(any(abs(value - round(value)) >= 0.05 for value in (azimuth, inclination)))
    return f"{azimuth_text(azimuth, decimals)}/{inclination_text(inclination, decimals)}"


def _cells(number: int, reading: Reading, off_deg: float | None) -> tuple[str, ...]:
    return (
        str(number),
        _when(reading.recorded_at),
        cut(reading.outcrop),
        NAMES[reading.feature] + (", overturned" if reading.overturned else ""),
        attitude_text(reading),
        _entered(reading),
        _remarks(reading, off_deg),
    )


def _entered(reading: Reading) -> str:
    parts = [cut(reading.as_entered)] if reading.as_entered else []
    if reading.correction_deg is not None:
        parts.append(
            f"{reading.north_reference} {reading.correction_deg:+.1f}°".replace("-", "\N{MINUS SIGN}")
        )
    elif reading.north_reference != "true":
        parts.append(f"{reading.north_reference} north")
    if reading.instrument and reading.instrument != "compass":
        scatter = "" if reading.scatter_deg is None else f" ±{reading.scatter_deg:.1f}°"
        parts.append(f"{reading.instrument}{scatter}")
    return ", ".join(parts)


def _remarks(reading: Reading, off_deg: float | None) -> str:
    remarks = ["struck out"] if reading.struck_out else []
    if reading.warnings_kept:
        names = [EntryCheck.words_for(name) for name in reading.warnings_kept]
        remarks.append(cut(f"kept against: {', '.join(names)}"))
    if off_deg is not None:
        remarks.append(f"{off_deg:.0f}° off the fit")
    if reading.note:
        remarks.append(cut(reading.note))
    return "; ".join(remarks)


def _when(time: datetime | None) -> str:
    return "" if time is None else f"{time:%Y-%m-%d %H:%M}"


def _time(reading: Reading) -> float:
    return 0.0 if reading.recorded_at is None else reading.recorded_at.timestamp()
