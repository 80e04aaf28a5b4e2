"""Writing a file so that it is there whole or not at all."""

from __future__ import annotations

import contextlib
import os
import secrets
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

from analysis.errors import CsvError, HingewiseError

if TYPE_CHECKING:
    from collections.abc import Iterator


@contextmanager
def whole_file(path: str | os.PathLike[str]) -> Iterator[Path]:
    """Give the path of a draft beside a file, which takes the file's place when all went well.

    The draft is flushed to disk before. Raises CsvError where it cannot be written; nothing is left behind then.
    """
    target = Path(os.path.realpath(path))
    # The ending stays, because libraries go by it.
    draft = target.with_name(f".{target.stem[:100]}.{secrets.token_hex(6)}.part{target.suffix[:20]}")
    try:
        yield draft
        with draft.open("rb+") as stream:
            os.fsync(stream.fileno())
        draft.replace(target)
        _sync_folder(target.parent)
    except HingewiseError:
        raise
    except OSError as error:
        raise CsvError(
            f"cannot be written: {error.strerror or error}",
            where=os.fspath(path),
            expected="a folder that can be written to, with room on the disk",
            mend="Choose another folder.",
        ) from error
    finally:
        with contextlib.suppress(OSError):
            draft.unlink(missing_ok=True)


def _sync_folder(folder: Path) -> None:
    """Flush the new name to disk too, where the system lets folders be opened."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
