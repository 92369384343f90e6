"""One worker thread that always works on the newest request.

Long, vectorised parts of an answer run here. While one job runs, at most one other waits; a newer request takes
the waiting one's place, and the result of a job that has been overtaken is dropped.
"""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True)
class _Request:
    number: int
    job: Callable[[], Any]
    deliver: Callable[[Any], None]
    fail: Callable[[Exception], None]


class Newest:
    """Runs the newest job asked for. `deliver` and `fail` are called on the worker thread, for the newest job only.

    Attributes
    ----------
    started, dropped : how many jobs were begun, and how many requests were overtaken before they were begun.
    most_waiting : the longest queue ever seen; it never passes 1.
    """

    def __init__(self) -> None:
        self._changed = threading.Condition()
        self._waiting: _Request | None = None
        self._running = False
        self._number = 0
        self._closed = False
        self._thread: threading.Thread | None = None
        self.started = 0
        self.dropped = 0
        self.most_waiting = 0

    def ask(self, job: Callable[[], Any], deliver: Callable[[Any], None], fail: Callable[[Exception], None]) -> None:
        """Ask for `job`, in the place of whatever was still waiting."""
        with self._changed:
            if self._closed:
                return
            self._number += 1
            self.dropped += self._waiting is not None
            self._waiting = _Request(self._number, job, deliver, fail)
            self.most_waiting = max(self.most_waiting, 1)
            if self._thread is None:
                self._thread = threading.Thread(target=self._work, name="coldward-newest", daemon=True)
                self._thread.start()
            self._changed.notify_all()

    @property
    def busy(self) -> bool:
        """Whether a job runs or waits."""
        with self._changed:
            return self._running or self._waiting is not None

    def close(self) -> None:
        """Drop what waits, let what runs end, and stop the thread."""
        with self._changed:
            self._closed = True
            self._waiting = None
            self._changed.notify_all()
        if self._thread is not None:
            self._thread.join()

    def _work(self) -> None:
        while True:
            with self._changed:
                while self._waiting is None and not self._closed:
                    self._changed.wait()
                if self._closed or self._waiting is None:
                    return
                request, self._waiting = self._waiting, None
                self._running = True
                self.started += 1
            try:
                result = request.job()
            except Exception as error:  # whatever a job raises belongs to the one who asked for it
                self._finish(request, request.fail, error)
            else:
                self._finish(request, request.deliver, result)

    def _finish(self, request: _Request, tell: Callable[[Any], None], what: Any) -> None:
        with self._changed:
            self._running = False
            overtaken = self._closed or request.number != self._number
        if not overtaken:
            tell(what)
