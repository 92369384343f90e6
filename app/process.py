"""A process of its own for what would make the window stutter: simulations and surveys, which are Python loops.

It is started when it is first needed, kept for what follows, ended by `close`, and ends by itself with the program.
A task is a function of a module with arguments that can be pickled; it may take a tick as its last argument:

    own_process.run(task, arguments, tick)

One task runs at a time. A task whose tick says to stop ends at its own next tick or, where that takes too long, with
its process; the next task starts another one.
"""

from __future__ import annotations

import threading
import time
from collections.abc import Callable
from pickle import PicklingError
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from multiprocessing.connection import Connection
    from multiprocessing.context import SpawnProcess

PATIENCE = 2.0
"""[s] After which a task that was told to stop is ended with its process."""

_LOOK = 0.05
_LEAVE = 2.0

Tick = Callable[[float], bool]
"""Told the share of a task that is done, again and again; its answer says whether to go on."""


class Stopped(Exception):
    """The tick said to stop, or the process was closed."""


class ProcessLost(RuntimeError):
    """The process ended in the midst of a task."""


class OwnProcess:
    """The process. Any thread may ask it; they are served one after the other."""

    def __init__(self) -> None:
        self._busy = threading.Lock()
        self._closing = False
        self._process: SpawnProcess | None = None
        self._connection: Connection | None = None

    def __enter__(self) -> OwnProcess:
        return self

    def __exit__(self, *_error: object) -> None:
        self.close()

    @property
    def running(self) -> bool:
        """Whether there is a process."""
        return self._process is not None and self._process.is_alive()

    def run(self, task: Callable[..., Any], arguments: tuple[Any, ...] = (), tick: Tick | None = None) -> Any:
        """The result of `task(*arguments, tick)`, worked out there; without a last argument where no tick is given.

        Raises
        ------
        Stopped
        ProcessLost : as by lack of memory.
        Whatever the task raises; what cannot be sent comes as a RuntimeError with its text.
        """
        with self._busy:
            if self._closing:
                raise Stopped
            try:
                connection = self._ready()
                connection.send((task, arguments, tick is not None))
                return self._answer(connection, tick)
            except (EOFError, ConnectionError) as error:
                self._end()
                if self._closing:
                    raise Stopped from None
                raise ProcessLost("the process that works this out has ended; try again") from error

    def close(self) -> None:
        """End the process, and stop the task that runs there. Another task would start it again."""
        self._closing = True
        with self._busy:
            self._end()
            self._closing = False

    def _ready(self) -> Connection:
        """The connection to a process that waits for work."""
        if self._connection is not None and self.running:
            return self._connection
        self._end()
        from multiprocessing import get_context

        make_picklable()
        context = get_context("spawn")
        here, there = context.Pipe()
        self._process = context.Process(target=_serve, args=(there,), name="coldward-work", daemon=True)
        self._process.start()
        there.close()
        self._connection = here
        return here

    def _answer(self, connection: Connection, tick: Tick | None) -> Any:
        share, stop_at = 0.0, float("inf")
        while True:
            if connection.poll(_LOOK):
                kind, what = connection.recv()
                if kind == "result":
                    return what
                if kind == "error":
                    raise what
                if kind == "stopped":
                    raise Stopped
                share = what
            unwanted = self._closing or (tick is not None and stop_at == float("inf") and not tick(share))
            now = time.monotonic()
            if unwanted and stop_at == float("inf"):
                connection.send(None)
                stop_at = now + PATIENCE
            if self._closing or now > stop_at:
                self._end(at_once=True)
                raise Stopped

    def _end(self, *, at_once: bool = False) -> None:
        process, connection = self._process, self._connection
        self._process = self._connection = None
        if connection is not None:
            connection.close()  # the end of which ends a process that waits for work
        if process is None:
            return
        if at_once:
            process.terminate()
        process.join(_LEAVE)
        if process.is_alive():
            process.kill()
            process.join()
        process.close()


own_process = OwnProcess()
"""The one of the program."""


def _serve(connection: Connection) -> None:
    """What the process does: one task after the other, until the other end is closed. None tells a task to stop."""
    import signal

    signal.signal(signal.SIGINT, signal.SIG_IGN)  # from the terminal, where it is meant for the program
    make_picklable()
    try:
        while True:
            message = connection.recv()
            if message is not None:  # else meant for a task that is over
                _do(connection, *message)
    except (EOFError, ConnectionError):
        return


def _do(connection: Connection, task: Callable[..., Any], arguments: tuple[Any, ...], ticks: bool) -> None:
    """Do a task and send what came of it."""
    stopped = False

    def tick(share: float) -> bool:
        nonlocal stopped
        if not stopped and connection.poll():
            connection.recv()
            stopped = True
        if not stopped:
            connection.send(("share", share))
        return not stopped

    try:
        found = ("result", task(*arguments, tick) if ticks else task(*arguments))
    except (EOFError, ConnectionError):
        raise
    except Exception as error:
        found = ("error", _sendable(error))
    try:
        connection.send(("stopped", None) if stopped else found)
    except (TypeError, AttributeError, PicklingError) as error:
        connection.send(("error", RuntimeError(f"{type(error).__name__}: {error}")))


def _sendable(error: Exception) -> Exception:
    import pickle

    try:
        pickle.loads(pickle.dumps(error))
    except Exception:
        return RuntimeError(f"{type(error).__name__}: {error}")
    return error


def make_picklable() -> None:
    """Let read-only mappings, of which answers are full, go through a pipe as what they hold."""
    from multiprocessing.reduction import ForkingPickler

    ForkingPickler.register(MappingProxyType, _contents)


def _contents(mapping: MappingProxyType[Any, Any]) -> tuple[Any, tuple[dict[Any, Any]]]:
    return _read_only, (dict(mapping),)


def _read_only(contents: dict[Any, Any]) -> MappingProxyType[Any, Any]:
    return MappingProxyType(contents)
