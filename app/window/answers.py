"""Keeps the answer up to date with the plan: the cheap part in the GUI thread, the long ones on workers.

However many edits come between two turns of the event loop, the cloud is answered once, for the newest plan. The part
that the visible page shows is asked from a worker thread, where the newest request wins. A trap of beams and coils that
was not met before is first surveyed, on a worker of its own; while it is, the last good answer stays.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING, Any, Protocol

from PySide6.QtCore import QObject, Qt, QTimer, Signal

from app.engine import CloudAnswer, begin_trap, cloud_answer, prepare_trap, surveyed
from app.newest import Job, Newest, Steps, brief_turns
from app.process import own_process

if TYPE_CHECKING:
    from app.plan import Plan

LONG_SURVEY_MS = 120
"""Milliseconds after which a survey that is not there yet is told of; a shorter one would only flicker."""


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
    surveying() when the answer waits for the survey of a trap; trap_known(Plan) when so much of that is there that a
    form can tell of the trap, ahead of the cloud; part_failed(str) when the visible page's part cannot."""

    cloud_ready = Signal(object)
    cloud_failed = Signal(str)
    surveying = Signal()
    trap_known = Signal(object)
    part_failed = Signal(str)
    _arrived = Signal(int, bool, object)
    _begun = Signal(object)
    _surveyed = Signal(object, object)
    _solved = Signal(int, object)

    # Attributes: cloud, the newest answer; current, whether it answers the newest plan; failure, why the newest plan
    # that was tried has no answer, or empty; waiting, whether the newest plan's trap is being surveyed, and that was
    # told; cloud_count, for tests.

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.newest = Newest()
        self.surveyor = Newest()
        self.solver = Newest()
        self.cloud: CloudAnswer | None = None
        self.cloud_count = 0
        self.current = False
        self.failure = ""
        self.waiting = False
        self._plan: Plan | None = None
        self._under_survey = False
        self._solving, self._solvings = False, 0
        self._asked = self._taken = 0  # numbers of the newest part asked for, and of the newest that arrived
        self._view: PartView | None = None  # that waits for a job in steps
        self._job: Steps | None = None
        self._stopped: Steps | None = None  # by the user, who does not want it again
        self._turn = QTimer(self)
        self._turn.setSingleShot(True)
        self._turn.timeout.connect(self.answer_now)
        self._patience = QTimer(self)
        self._patience.setSingleShot(True)
        self._patience.setInterval(LONG_SURVEY_MS)
        self._patience.timeout.connect(self._tell_of_survey)
        # The workers' results hop to the GUI thread here.
        self._arrived.connect(self._take, Qt.ConnectionType.QueuedConnection)
        self._begun.connect(self._take_beginning, Qt.ConnectionType.QueuedConnection)
        self._surveyed.connect(self._take_survey, Qt.ConnectionType.QueuedConnection)
        self._solved.connect(self._take_solved, Qt.ConnectionType.QueuedConnection)

    def set_plan(self, plan: Plan) -> None:
        """Answer this plan at the next turn of the event loop."""
        self._plan, self.current = plan, False
        self._turn.start(0)

    def answer_now(self) -> None:
        """Answer the newest plan: at once, or where its trap has not been surveyed yet, as soon as it is."""
        self._turn.stop()
        if self._plan is None:
            return
        if surveyed(self._plan):
            self._end_survey()
            self._answer(self._plan)
            return
        if not self._under_survey:
            self._patience.start()
        self._under_survey = True
        plan = self._plan
        # Not through the worker's own delivery, which drops what was overtaken: surveys on the way of a long drag are
        # worth showing.
        self.surveyor.ask(partial(self._survey, plan), _ignore, _ignore)

    def _answer(self, plan: Plan) -> None:
        self.cloud_count += 1
        newest = plan == self._plan
        try:
            cloud = cloud_answer(plan)
        except (ValueError, OSError, ArithmeticError) as error:
            if newest:
                self._fail(str(error))
            return
        # Kept answers belong to plans that may differ in what the cloud does not depend on, such as the ramp.
        self.cloud = cloud if cloud.plan == plan else replace(cloud, plan=plan)
        self.current = newest
        self.failure = "" if newest else self.failure
        self.cloud_ready.emit(self.cloud)

    def _fail(self, sentence: str) -> None:
        self.failure = sentence
        self.cloud_failed.emit(sentence)

    # ---------------------------------------------------------------- surveys

    def _survey(self, plan: Plan) -> None:
        """On the worker."""
        try:
            with brief_turns():
                begin_trap(plan)
                self._begun.emit(plan)
                prepare_trap(plan)
        except Exception as error:  # whatever it is, it is the GUI thread's to tell
            self._surveyed.emit(plan, error)
        else:
            self._surveyed.emit(plan, None)

    def _take_beginning(self, plan: Plan) -> None:
        if self._under_survey and plan == self._plan:
            self.trap_known.emit(plan)

    def _take_survey(self, plan: Plan, error: Exception | None) -> None:
        if not self._under_survey or self._plan is None:
            return
        if error is not None:
            if plan == self._plan:
                self._end_survey()
                if not isinstance(error, ValueError | OSError | ArithmeticError):
                    raise error
                self._fail(str(error))
        elif plan == self._plan or surveyed(self._plan):
            self._end_survey()
            self._answer(self._plan)
        else:
            self.waiting = True
            self._answer(plan)  # on the way to the newest one

    def _end_survey(self) -> None:
        self._under_survey = self.waiting = False
        self._patience.stop()

    def _tell_of_survey(self) -> None:
        self.waiting = True
        self.surveying.emit()

    # ---------------------------------------------------------------- questions on the side

    def solve(self, job: Callable[[], Any], take: Callable[[Any], None], refuse: Callable[[str], None]) -> None:
        """Run a job that is no part of the plan's answer on a worker of its own; its result, or the sentence of its
        ValueError, is given in the GUI thread. A newer job, or `drop_solving`, overtakes it."""
        self._solving, self._solvings = True, self._solvings + 1
        number = self._solvings

        def fail(error: Exception) -> None:
            self._solved.emit(number, partial(self._refuse, error, refuse))

        def run() -> Any:
            with brief_turns():
                return job()

        self.solver.ask(run, lambda result: self._solved.emit(number, partial(take, result)), fail)

    def drop_solving(self) -> None:
        """Nobody waits for that job any more."""
        self._solving = False
        self.solver.stop()

    def _take_solved(self, number: int, act: Callable[[], None]) -> None:
        if self._solving and number == self._solvings:
            self._solving = False
            act()

    def _refuse(self, error: Exception, refuse: Callable[[str], None]) -> None:
        if not isinstance(error, ValueError | OSError | ArithmeticError):
            raise error
        refuse(str(error))

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
        """Whether nothing is under way: no plan to answer, no job on a worker, no result to be shown."""
        busy = self._turn.isActive() or self._under_survey or self._solving
        return not busy and self._taken == self._asked

    def close(self) -> None:
        self._turn.stop()
        self._patience.stop()
        self.newest.stop()
        own_process.close()
        self.newest.close()
        self.surveyor.close()
        self.solver.close()


def _ignore(_what: object) -> None:
    pass
