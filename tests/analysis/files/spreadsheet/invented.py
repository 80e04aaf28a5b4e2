"""A small notebook of the invented Mossgarth folds with what hurts in a spreadsheet, handed over by the app."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta, timezone
from pathlib import Path
from tempfile import TemporaryDirectory

from analysis.files.reading import Reading
from fieldapp.handing import HandOver
from fieldapp.notebook import open_notebook
from fieldapp.notebook.ids import ReadingIds

START = datetime(2026, 5, 1, 9, 30, tzinfo=UTC)

NOTES = [
    "plain",
    "grey slate, cleaved; thin beds",
    'he called it "steep", I did not',
    "two lines\nof one note\n\nand a third after a gap",
    "Müller's Höhe, naïve façade, 30° — ½",
    "=1+1",
    "+5 m along strike",
    "-3",
    "@home",
    "'quoted by nobody",
    "''=x",
    "\ttab before and\tinside",
    "  spaces round it  ",
    "1/2",
    "3-4",
    "1E5",
    "007",
    "1.50",
    "1,5",
    "1.000",
    "1,000",
    "1'000",
    "12:30",
    "12 %",
    "(5)",
    "3.5.",
    "2026-5-1",
    "May 5",
    "TRUE",
    "wahr",
    "12345678901234567890",
    "$5",
    "#N/A",
    '"',
    ";",
    "sep=;",
    "42",
]
OUTCROPS = ["MG-1", "007", "1.10", "1/2", "Sep-7", "12", "Ödland 3", 'the "wall"', "a;b", "=2", "3-4", "TRUE"]


def readings() -> list[Reading]:
    """Thirty-seven readings and the revisions of some of them."""
    moment = START

    def clock() -> datetime:
        return moment

    ids = ReadingIds(clock, lambda count: bytes(range(count)))
    made = []
    for number, note in enumerate(NOTES):
        moment = START + timedelta(minutes=7 * number, milliseconds=3 * number)
        made.append(_reading(ids(), number, note, moment))
    # Two ids that came with a colleague's file, and are no UUIDs.
    made.append(_reading("007", 3, "an id of digits", moment))
    made.append(_reading("1E5", 4, "an id like a number", moment))
    evening = moment + timedelta(hours=5)
    edited = made[13].revised(at=evening, note="1/4", strike_deg=0.0, dip_deg=20.0)
    return [*made, edited, edited.struck(at=evening + timedelta(minutes=1)), made[5].struck(at=evening)]


def _reading(reading_id: str, number: int, note: str, moment: datetime) -> Reading:
    """One reading; which cells are filled and which are empty follows its number."""
    azimuth, inclination = [0.0, 7.0, 45.0, 359.9999, 312.5, 90.0, 180.0][number % 7], (number * 11.25) % 90
    plane = number % 4 < 2
    attitude: dict[str, object] = (
        {"strike_deg": azimuth, "dip_deg": inclination}
        if plane
        else {"trend_deg": azimuth, "plunge_deg": inclination}
    )
    filled: dict[str, object] = {
        "correction_deg": -1.05,
        "correction_model": "WMM2025 2026-05-01",
        "scatter_deg": 2.1,
        "samples": 1200,
        "latitude_deg": 55.1234567,
        "longitude_deg": -3.200001,
        "altitude_m": 1412.5,
        "accuracy_m": 5.1,
        "position_source": "gps",
        "other": {"lab no": note, "007": OUTCROPS[(number + 5) % 12], "checked by": "2/7"},
    }
    by_hand: dict[str, object] = {
        "latitude_deg": -0.0000001,
        "longitude_deg": -179.9999999,
        "altitude_m": -0.25,
        "warnings_kept": ("flat-plane", "outlier"),
        "overturned": plane,
    }
    typed = f"{azimuth:03.0f}/{inclination:02.0f}"
    return Reading(
        reading_id=reading_id,
        feature=["bedding", "cleavage", "intersection", "hinge"][number % 4],
        recorded_at=moment.astimezone(timezone(timedelta(hours=1))),
        observer=["Ann Ödegård", "J. O'Nill; B. Ray", "7"][number % 3],
        device="tablet 2",
        fold=["Mossgarth east", "Mossgarth, west", "3"][number % 3],
        outcrop=OUTCROPS[number % 12],
        as_entered=[f"{'strike/dip' if plane else 'trend/plunge'} {typed}", typed, f"{typed} SE"][number % 3],
        north_reference=["true", "magnetic", "grid"][number % 3],
        instrument=["compass", "tablet", "other", ""][number % 4],
        note=note,
        **attitude,
        **([{}, filled, by_hand][number % 3]),
    )


def hand_over(path: Path) -> None:
    """Write the readings into a notebook, and hand all of it over as the app does."""
    with TemporaryDirectory() as folder:
        notebook = open_notebook(Path(folder) / "mossgarth.notebook", lambda: START).notebook
        try:
            notebook.keep_all(readings())
            HandOver(notebook, lambda: START).write(path, everything=True)
        finally:
            notebook.close()
