"""Writing files so that a reader finds the old one or the new one, never half of one."""

from __future__ import annotations

import contextlib
import os
import secrets
from pathlib import Path


def write_atomically(path: str | os.PathLike[str], data: bytes) -> None:
    """Write a file as a whole or not at all.

    The bytes go to a file beside the old one, are flushed to the disk and then take its place, with the old file's
    permissions; a link stays a link.

    Raises
    ------
    OSError
        The file could not be written; what was there is unchanged, and the message says so in one sentence.
    """
    target = Path(os.path.realpath(path))
    beside = target.with_name(f".{target.name}.{secrets.token_hex(4)}.part")
    try:
        if target.exists() and not os.access(target, os.W_OK):
            raise PermissionError(0, "it is write-protected")
        _write_through(beside, data)
        if target.exists():
            os.chmod(beside, target.stat().st_mode & 0o7777)
        os.replace(beside, target)
    except OSError as error:
        reason = error.strerror or str(error)
        raise OSError(f"{Path(path)} could not be written: {reason}; what was there is unchanged") from None
    finally:
        with contextlib.suppress(OSError):
            beside.unlink(missing_ok=True)
    _settle(target.parent)


def _write_through(path: Path, data: bytes) -> None:
    with path.open("xb") as file:
        file.write(data)
        file.flush()
        os.fsync(file.fileno())


def _settle(folder: Path) -> None:
    """Flush the folder's entry where the system can; the file itself is already safe."""
    with contextlib.suppress(OSError, AttributeError):
        handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
