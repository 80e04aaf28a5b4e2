"""Writing a file wholly or not at all."""

from __future__ import annotations

import contextlib
import os
import secrets
from pathlib import Path
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError

if TYPE_CHECKING:
    from collections.abc import Iterator
    from typing import BinaryIO


@contextlib.contextmanager
def written_whole(path: str | os.PathLike[str]) -> Iterator[BinaryIO]:
    """Open a stream whose content stands under `path` once it is whole, and nowhere if it never is.

    The file is written under another name beside its place, flushed to disk and renamed. Raises HingewiseError
    where the folder cannot be written to; nothing is left behind then.
    """
    target = Path(os.path.realpath(path))
    draft = target.with_name(f".{target.name[:100]}.{secrets.token_hex(6)}.part")
    try:
        with draft.open("xb") as stream:
            yield stream
            stream.flush()
            os.fsync(stream.fileno())
        draft.replace(target)
    except OSError as error:
        raise HingewiseError(
            f"cannot be written: {error.strerror or error}",
            where=os.fspath(path),
            expected="a folder that can be written to, with room on the disk",
            mend="Choose another folder.",
        ) from error
    finally:
        with contextlib.suppress(OSError):
            draft.unlink(missing_ok=True)
