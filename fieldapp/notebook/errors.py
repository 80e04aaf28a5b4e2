"""What can go wrong with the notebook, in words that say what to do; SQLite's errors become these."""

from __future__ import annotations

import errno
import sqlite3
from contextlib import contextmanager
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path


class NotebookError(HingewiseError):
    """The notebook could not do what was asked; what was in it before is still in it."""


class StorageFullError(NotebookError):
    """No room to write."""


class ReadOnlyError(NotebookError):
    """The notebook, or the place it lies in, may not be written to."""


class LockedError(NotebookError):
    """Something else is writing to the notebook."""


class StorageError(NotebookError):
    """The storage failed while reading or writing."""


class DamagedError(NotebookError):
    """The file is a notebook, but broken."""


class NotANotebookError(NotebookError):
    """The file is something else, and was left alone."""


class NewerNotebookError(NotebookError):
    """The notebook was made by a later version of the program, and was left alone."""


def _full(where: str) -> NotebookError:
    return StorageFullError(
        "the storage is full, nothing was written",
        where=where,
        mend="Your entry is still here. Free some space, then try again.",
    )


def _read_only(where: str) -> NotebookError:
    return ReadOnlyError(
        "the notebook may only be read here, nothing was written",
        where=where,
        mend="Your entry is still here. Unlock the storage or open a notebook elsewhere.",
    )


def _locked(where: str) -> NotebookError:
    return LockedError(
        "another program holds the notebook, nothing was written",
        where=where,
        mend="Your entry is still here. Close the other program, then try again.",
    )


def _storage(where: str) -> NotebookError:
    return StorageError(
        "the storage failed, nothing was written",
        where=where,
        mend="Your entry is still here. Try again; if it fails again, hand over and move to another storage.",
    )


def _damaged(where: str) -> NotebookError:
    return DamagedError(
        "the notebook file is damaged",
        where=where,
        mend="Close and open the page again: what can be read is moved to a new notebook.",
    )


# SQLite's primary result codes (https://www.sqlite.org/rescode.html).
_BY_CODE = {
    sqlite3.SQLITE_FULL: _full,
    sqlite3.SQLITE_READONLY: _read_only,
    sqlite3.SQLITE_PERM: _read_only,
    sqlite3.SQLITE_BUSY: _locked,
    sqlite3.SQLITE_LOCKED: _locked,
    sqlite3.SQLITE_IOERR: _storage,
    sqlite3.SQLITE_CANTOPEN: _storage,
    sqlite3.SQLITE_CORRUPT: _damaged,
    sqlite3.SQLITE_NOTADB: _damaged,
}


def primary_code(error: sqlite3.Error) -> int:
    """Primary result code of an SQLite error; 1 (SQLITE_ERROR) where there is none."""
    return int(getattr(error, "sqlite_errorcode", sqlite3.SQLITE_ERROR) or sqlite3.SQLITE_ERROR) & 0xFF


@contextmanager
def plain_errors(path: Path) -> Iterator[None]:
    """Turn SQLite's errors about storage into typed ones; errors of the program itself pass unchanged."""
    try:
        yield
    except sqlite3.Error as error:
        make = _BY_CODE.get(primary_code(error))
        if make is None:
            raise
        raise make(path.name) from error


@contextmanager
def plain_os_errors(path: Path) -> Iterator[None]:
    """Turn the system's errors about files into typed ones."""
    try:
        yield
    except OSError as error:
        make = _BY_ERRNO.get(error.errno or 0, _storage)
        raise make(path.name) from error


_BY_ERRNO = {
    errno.ENOSPC: _full,
    errno.EDQUOT: _full,
    errno.EFBIG: _full,
    errno.EROFS: _read_only,
    errno.EACCES: _read_only,
    errno.EPERM: _read_only,
}
