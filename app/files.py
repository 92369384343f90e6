"""Writing files so that a reader finds the old one or the new one, never half of one."""

from __future__ import annotations

import contextlib
import os
import tempfile
from pathlib import Path


def write_atomically(path: Path, data: bytes) -> None:
    """Replace the content of a file in one step; permissions of an existing file are kept.

    The bytes go to a new file beside it, which then takes its name. When anything fails the old file stands as it
    was and nothing is left behind.

    Raises
    ------
    OSError : naming the file, where the folder is missing or cannot be written.
    """
    target = path.resolve() if path.is_symlink() else path
    try:
        handle, name = tempfile.mkstemp(prefix=f".{target.name}.", dir=target.parent)
    except OSError as error:
        raise OSError(f"cannot write {path}: {error.strerror or error}") from error
    try:
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        os.chmod(name, target.stat().st_mode & 0o7777 if target.exists() else 0o666 & ~_umask())
        os.replace(name, target)
    except OSError as error:
        with contextlib.suppress(OSError):
            os.unlink(name)
        raise OSError(f"cannot write {path}: {error.strerror or error}") from error


def _umask() -> int:
    """The process's mask, which can only be read by setting it."""
    mask = os.umask(0o022)
    os.umask(mask)
    return mask
