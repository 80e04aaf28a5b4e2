"""Readings kept before there was a position: corrected to true north once, as a new revision each."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

from analysis.errors import ReadingError
from analysis.orient.entrychecks import EntryCheck
from analysis.orient.north import Reference, correct_once

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.files.reading import Reading
    from analysis.orient.north import NorthCorrection


def waits_for_north(reading: Reading) -> bool:
    """Whether a reading stands uncorrected against magnetic or grid north."""
    return (
        not reading.struck_out
        and reading.north_reference != Reference.TRUE
        and reading.correction_deg is None
    )


def corrected_late(reading: Reading, correction: NorthCorrection, revised_at: datetime) -> Reading:
    """Give the next revision of a reading, from true north, with its correction stored.

    Raises NorthError for a reading that was corrected already, for a correction of another north than the
    reading's, and for one that is still unknown.
    """
    correction = correction.checked_for(reading.north_reference)
    changes: dict[str, Any] = {}
    for name in ("strike_deg", "trend_deg"):
        azimuth = getattr(reading, name)
        if azimuth is not None:
            changes[name] = correct_once(
                azimuth, stored_correction_deg=reading.correction_deg, correction=correction
            )
    changes |= {
        "revision": reading.revision + 1,
        "revised_at": revised_at,
        "correction_deg": correction.correction_deg,
        "correction_model": correction.model,
    }
    try:
        return replace(reading, **changes)
    except ReadingError as error:
        # The side was tapped against the compass's north; from true north it may just miss. It stays as seen.
        if error.where != "dip_quadrant":
            raise
        kept = (*reading.warnings_kept, str(EntryCheck.QUADRANT_MISFIT))
        return replace(reading, **changes, warnings_kept=kept)
