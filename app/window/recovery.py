"""Work is not lost: a copy of unsaved changes aside, and one place where unexpected errors end.

Every session that has unsaved changes keeps a copy of its plan in the state folder, beside a lock that lives as long
as the process. A copy whose lock is free was left by a session that ended without a word; the next start offers it.
"""

from __future__ import annotations

import contextlib
import os
import platform
import secrets
import sys
import traceback
from collections.abc import Callable
from pathlib import Path
from types import TracebackType

from PySide6.QtCore import QLockFile, QObject, QTimer, qVersion

from app import __version__
from app.files import write_atomically
from app.plan import write_plan
from app.window.undo import Document

COPY_AFTER_MS = 4000  # an unsaved change is in the copy at most this long after it was made


class Recovery(QObject):
    """Keeps the copy of one session."""

    def __init__(self, document: Document, folder: Path, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self._folder = folder / "recovery"
        with contextlib.suppress(OSError):
            self._folder.mkdir(parents=True, exist_ok=True)
        # Not the process number alone: a later session can have that of one that was killed, and its copy.
        stem = f"session-{os.getpid()}-{secrets.token_hex(4)}"
        self.copy_path = self._folder / f"{stem}.toml"
        self._lock = QLockFile(str(self._folder / f"{stem}.lock"))
        self._lock.setStaleLockTime(0)  # stale only when its process is gone
        self._lock.tryLock(0)
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.setInterval(COPY_AFTER_MS)
        self._timer.timeout.connect(self._copy_if_unsaved)
        document.plan_changed.connect(self._plan_changed)
        document.clean_changed.connect(self._clean_changed)

    def _plan_changed(self) -> None:
        if not self._timer.isActive():  # not put off by further edits: whoever drags for minutes keeps a copy too
            self._timer.start()

    def _copy_if_unsaved(self) -> None:
        if not self._document.clean:
            self.save_copy()

    def _clean_changed(self, clean: bool) -> None:
        if clean:
            self.drop_copy()

    def save_copy(self) -> Path | None:
        """Write the copy now; None where it cannot be written."""
        self._timer.stop()
        try:
            write_atomically(self.copy_path, write_plan(self._document.plan).encode())
        except (OSError, ValueError):
            return None
        return self.copy_path

    def drop_copy(self) -> None:
        self._timer.stop()
        with contextlib.suppress(OSError):
            self.copy_path.unlink(missing_ok=True)

    def close(self) -> None:
        """The session ends in order: its copy is not needed."""
        self.drop_copy()
        self._lock.unlock()

    def left_behind(self) -> tuple[Path, ...]:
        """Copies of sessions that are no longer alive, newest first."""
        found = []
        for copy in self._folder.glob("session-*.toml"):
            if copy == self.copy_path:
                continue
            lock = QLockFile(str(copy.with_suffix(".lock")))
            lock.setStaleLockTime(0)
            if lock.tryLock(0):
                lock.unlock()
                found.append(copy)
        return tuple(sorted(found, key=lambda path: path.stat().st_mtime, reverse=True))


def install_excepthook(show: Callable[[str, str], None], save_copy: Callable[[], Path | None]) -> Callable[[], None]:
    """Send exceptions that nobody caught to `show(sentence, details)`, after saving a copy; returns the way back."""
    before = sys.excepthook

    def hook(kind: type[BaseException], error: BaseException, trace: TracebackType | None) -> None:
        if not issubclass(kind, Exception):  # an interrupt from the keyboard ends the program as it should
            before(kind, error, trace)
            return
        copy = save_copy()
        kept = f" A copy of the plan is in {copy}." if copy else ""
        show(f"Something went wrong inside Coldward: {summary(error)}.{kept}", details(error))

    sys.excepthook = hook

    def restore() -> None:
        if sys.excepthook is hook:
            sys.excepthook = before

    return restore


def summary(error: BaseException) -> str:
    """An exception in a few words, on one line."""
    text = " ".join(str(error).split()).rstrip(".")
    return f"{text[:160]} ({type(error).__name__})" if text else type(error).__name__


def details(error: BaseException) -> str:
    """All that a report of the error needs: versions and the trace."""
    about = f"Coldward {__version__}, Python {platform.python_version()}, Qt {qVersion()}, {platform.platform()}"
    return about + "\n" + "".join(traceback.format_exception(error))
