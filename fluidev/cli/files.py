"""Files that the commands write: whether they can be, and all or nothing."""

from __future__ import annotations

import contextlib
import os
import tempfile
from pathlib import Path

from fluidev.errors import CaseError


def check_writable(option: str, target: Path) -> None:
    """Raise CaseError (option) where a file could not be written at this place.

    Called before a computation, so that an hour is not spent for a misspelt folder.
    """
    if target.is_dir():
        raise CaseError(option, str(target), "expected a file, got a folder")
    folder = target.parent
    while not folder.exists() and folder != folder.parent:
        folder = folder.parent
    if not folder.is_dir():
        raise CaseError(option, str(target), f"{str(folder)!r} is not a folder")
    if not os.access(folder, os.W_OK | os.X_OK):
        raise CaseError(option, str(target), f"the folder {str(folder)!r} cannot be written to")


def write_whole(option: str, target: Path, text: str) -> None:
    """Write a text file under a temporary name and move it into place, its folder made if needed.

    Raises CaseError (option) where that cannot be done.
    """
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(prefix=f".{target.name}.", dir=target.parent)
        try:
            with os.fdopen(handle, "w", encoding="utf-8") as file:
                file.write(text)
            os.chmod(name, 0o666 & ~_umask())
            os.replace(name, target)
        except BaseException:
            with contextlib.suppress(OSError):
                os.unlink(name)
            raise
    except OSError as refused:
        reason = f"cannot be written: {refused.strerror or refused}"
        raise CaseError(option, str(target), reason) from None


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
