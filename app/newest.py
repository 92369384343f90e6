"""One worker thread that always works on the newest request.

Long, vectorised parts of an answer run here. While one job runs, at most one other waits; a newer request takes
the waiting one's place, and the result of a job that has been overtaken is dropped. A job in steps tells how far it is,
hands out parts of its result, and is told when nobody waits for it any more.
"""

from __future__ import annotations

import sys
import threading
from collections.abc import Callable, Hashable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import Any

BRIEF_TURN = 5e-4
"""Seconds after which a thread at Python code lets another one have a turn, while a job in steps runs; the usual 5 ms
would add up to stalls of the window."""


class Watch:
    """What a job in steps is given: a way to tell how far it is, and to learn that it may stop."""

    def __init__(self, wanted: Callable[[], bool], part: Callable[[Any], None], told: Callable[[float], None]) -> None:
        self._wanted, self._part, self._told = wanted, part, told

    def tell(self, share: float) -> bool:
        """Tell that this share of the work is done; False where nobody wants the rest."""
        if not self._wanted():
            return False
        self._told(share)
        return True

    def deliver(self, part: Any) -> bool:
        """Hand out what is there so far; False where nobody wants the rest."""
        if not self._wanted():
            return False
        self._part(part)
        return True


@dataclass(frozen=True)
class Steps:
    """A job in steps. `run` returns the last part of the result, or None if it was stopped. Two are the same job where
    `depends_on` is equal; `what` says in a few words what is being done."""

    what: str = field(compare=False)
    depends_on: Hashable
    run: Callable[[Watch], Any] = field(compare=False)


Job = Callable[[], Any] | Steps


@dataclass(frozen=True)
class _Request:
    number: int
    job: Job
    deliver: Callable[[Any], None]
    fail: Callable[[Exception], None]
    part: Callable[[Any], None]
    told: Callable[[float], None]


def _ignore(_what: object) -> None:
    pass


class Newest:
    """Runs the newest job asked for. What is handed to `ask` is called on the worker thread, for the newest job only.

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

    def ask(
        self,
        job: Job,
        deliver: Callable[[Any], None],
        fail: Callable[[Exception], None],
        *,
        part: Callable[[Any], None] = _ignore,
        told: Callable[[float], None] = _ignore,
    ) -> None:
        """Ask for `job`, in the place of whatever was still waiting. `deliver` gets its result, or `fail` its error;
        `part` and `told` get what a job in steps hands out on its way, and how far it is."""
        with self._changed:
            if self._closed:
                return
            self._number += 1
            self.dropped += self._waiting is not None
            self._waiting = _Request(self._number, job, deliver, fail, part, told)
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

    def stop(self) -> None:
        """Want nothing of what runs or waits; a job in steps ends at its next step."""
        with self._changed:
            self._number += 1
            self._waiting = None

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
                result = self._run(request)
            except Exception as error:  # whatever a job raises belongs to the one who asked for it
                self._finish(request, request.fail, error)
            else:
                self._finish(request, request.deliver, result)

    def _run(self, request: _Request) -> Any:
        if not isinstance(request.job, Steps):
            return request.job()
        with brief_turns():
            return request.job.run(Watch(lambda: self._wants(request), request.part, request.told))

    def _wants(self, request: _Request) -> bool:
        with self._changed:
            return not self._closed and request.number == self._number

    def _finish(self, request: _Request, tell: Callable[[Any], None], what: Any) -> None:
        with self._changed:
            self._running = False
        if self._wants(request):
            tell(what)


_brief = threading.Lock()
_usual: list[float] = []  # the interval to go back to, once for each that asked for brief turns and is not done


@contextmanager
def brief_turns() -> Iterator[None]:
    """Threads at Python code take turns more often, until the last one that asked for it is done."""
    with _brief:
        _usual.append(_usual[0] if _usual else sys.getswitchinterval())
        sys.setswitchinterval(BRIEF_TURN)
    try:
        yield
    finally:
        with _brief:
            before = _usual.pop()
            if not _usual:
                sys.setswitchinterval(before)
