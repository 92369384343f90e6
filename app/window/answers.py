"""Keeps the answer up to date with the plan: the cheap part in the GUI thread, the long ones on a worker.

However many edits come between two turns of the event loop, the cloud is answered once, for the newest plan. The part
that the visible page shows is asked from the one worker thread, where the newest request wins.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING, Any, Protocol

from PySide6.QtCore import QObject, Qt, QTimer, Signal

from app.engine import CloudAnswer, cloud_answer
from app.newest import Job, Newest, Steps

if TYPE_CHECKING:
    from app.plan import Plan


class PartView(Protocol):
    """What shows a part of the answer: a page."""

    def take_part(self, answer: Any) -> None:
        """Show a part, or so much of it as there is."""

    def show_progress(self, what: str, share: float) -> None:
        """A part is being worked out: in a few words what, and how much of it is done."""

    def show_end(self, *, stopped: bool) -> None:
        """Nothing is being worked out any more: all is there, or the user stopped it."""


class Answers(QObject):
    """Signals: cloud_ready(CloudAnswer); cloud_failed(str), one sentence, when the plan cannot be answered;
    part_failed(str) when the visible page's part cannot."""

    cloud_ready = Signal(object)
    cloud_failed = Signal(str)
    part_failed = Signal(str)
    _arrived = Signal(int, bool, object)

    # Attributes: cloud, the newest answer; current, whether it answers the newest plan; failure, why the newest plan
    # that was tried has no answer, or empty; cloud_count, for tests.

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.newest = Newest()
        self.cloud: CloudAnswer | None = None
        self.cloud_count = 0
        self.current = False
        self.failure = ""
        self._plan: Plan | None = None
        self._asked = self._taken = 0  # numbers of the newest part asked for, and of the newest that arrived
        self._view: PartView | None = None  # that waits for a job in steps
        self._job: Steps | None = None
        self._stopped: Steps | None = None  # by the user, who does not want it again
        self._turn = QTimer(self)
        self._turn.setSingleShot(True)
        self._turn.timeout.connect(self.answer_now)
        # The worker's results hop to the GUI thread here.
        self._arrived.connect(self._take, Qt.ConnectionType.QueuedConnection)

    def set_plan(self, plan: Plan) -> None:
        """Answer this plan at the next turn of the event loop."""
        self._plan, self.current = plan, False
        self._turn.start(0)

    def answer_now(self) -> None:
        """Answer the newest plan at once."""
        self._turn.stop()
        if self._plan is None:
            return
        self.cloud_count += 1
        try:
            self.cloud = cloud_answer(self._plan)
        except (ValueError, OSError, ArithmeticError) as error:
            self.failure = str(error)
            self.cloud_failed.emit(self.failure)
        else:
            self.current, self.failure = True, ""
            self.cloud_ready.emit(self.cloud)

    # ---------------------------------------------------------------- parts

    def ask_part(self, job: Job, view: PartView) -> None:
        """Run `job` on the worker for a view, which is given the result in the GUI thread, unless it was overtaken.

        A job in steps that is under way for the view already goes on; one that the user stopped is not begun again.
        """
        if isinstance(job, Steps) and job in (self._job, self._stopped):
            return
        self._leave()
        view.show_end(stopped=False)
        self._asked += 1
        number = self._asked
        told: Callable[[float], None] = lambda _share: None  # noqa: E731
        if isinstance(job, Steps):
            self._view, self._job, self._stopped = view, job, None
            told = partial(self._tell, number, view, job.what)
        self.newest.ask(
            job,
            lambda result: self._arrived.emit(number, True, partial(view.take_part, result)),
            lambda error: self._arrived.emit(number, True, partial(self._part_trouble, error)),
            part=lambda part: self._arrived.emit(number, False, partial(view.take_part, part)),
            told=told,
        )

    def stop_part(self) -> None:
        """Stop the job in steps that is under way, as the user wishes."""
        if self._job is None:
            return
        self.newest.stop()
        self._stopped, view = self._job, self._view
        self._taken = self._asked
        self._job = self._view = None
        if view is not None:
            view.show_end(stopped=True)

    def allow_part(self) -> None:
        """Let the job that was stopped be asked for again."""
        self._stopped = None

    def _tell(self, number: int, view: PartView, what: str, share: float) -> None:
        self._arrived.emit(number, False, partial(view.show_progress, what, share))

    def _take(self, number: int, last: bool, act: Callable[[], None]) -> None:
        newest = number == self._asked
        if self._taken == self._asked or not (newest or last):
            return  # stopped, or a step of a job that was overtaken, while it was on its way
        if last:
            self._taken = number
        if last and newest:
            self._leave()
        act()

    def _leave(self) -> None:
        """Nothing is under way in steps any more."""
        view, self._job, self._view = self._view, None, None
        if view is not None:
            view.show_end(stopped=False)

    def _part_trouble(self, error: Exception) -> None:
        if not isinstance(error, ValueError | OSError | ArithmeticError):
            raise error
        self.part_failed.emit(str(error))

    @property
    def settled(self) -> bool:
        """Whether nothing is under way: no plan to answer, no job on the worker, no result to be shown."""
        return not self._turn.isActive() and self._taken == self._asked

    def close(self) -> None:
        self._turn.stop()
        self.newest.close()
