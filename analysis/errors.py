"""The errors that Hingewise raises: each says what was wrong, where, what was expected and what to do."""

from __future__ import annotations


class HingewiseError(Exception):
    """Something that the caller can mend.

    Parameters
    ----------
    what
        What was wrong, with the value that was found.
    where
        The place: a field, a file with its line and column, a fold.
    expected
        What would have been right.
    mend
        What to do about it.

    """

    def __init__(self, what: str, *, where: str = "", expected: str = "", mend: str = "") -> None:
        self.what = what
        self.where = where
        self.expected = expected
        self.mend = mend
        super().__init__(what)

    def __str__(self) -> str:
        text = f"{self.where}: {self.what}" if self.where else self.what
        if self.expected:
            text += f"; expected {self.expected}"
        if self.mend:
            text += f". {self.mend}"
        return text


class AttitudeError(HingewiseError, ValueError):
    """A strike, dip, trend, plunge or vector that is no attitude."""


class NotationError(AttitudeError):
    """Text that is no attitude in the notation asked for, or could be two."""


class ReadingError(HingewiseError, ValueError):
    """A reading with a field that it cannot have."""


class CsvError(HingewiseError, ValueError):
    """A file of readings that cannot be read as one."""


class TooFewReadingsError(HingewiseError, ValueError):
    """An estimate asked of fewer readings than it needs."""


class SettingError(HingewiseError, ValueError):
    """An option or setting outside what it may be."""


class PositionError(HingewiseError, ValueError):
    """Coordinates, or text for them, that are no place on the Earth, or could be two."""


class NorthError(HingewiseError, ValueError):
    """True north that cannot be had: no model for the date or place, or a reading corrected already."""
