"""Keeps the answer up to date with the plan: the cheap part in the GUI thread, the long ones on a worker.

However many edits come between two turns of the event loop, the cloud is answered once, for the newest plan. The part
that the visible page shows is asked from the one worker thread, where the newest request wins.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import QObject, Qt, QTimer, Signal

from app.engine import CloudAnswer, cloud_answer
from app.newest import Newest

if TYPE_CHECKING:
    from app.plan import Plan


class Answers(QObject):
    """Signals: cloud_ready(CloudAnswer); cloud_failed(str), one sentence, when the plan cannot be answered;
    part_failed(str) when the visible page's part cannot."""

    cloud_ready = Signal(object)
    cloud_failed = Signal(str)
    part_failed = Signal(str)
    _arrived = Signal(int, object, object)

    # Attributes: cloud, the newest answer; current, whether it answers the newest plan; cloud_count, for tests.

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.newest = Newest()
        self.cloud: CloudAnswer | None = None
        self.cloud_count = 0
        self.current = False
        self._plan: Plan | None = None
        self._asked = self._taken = 0  # numbers of the newest part asked for, and of the newest that arrived
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
        except (ValueError, OSError) as error:
            self.cloud_failed.emit(str(error))
        else:
            self.current = True
            self.cloud_ready.emit(self.cloud)

    def ask_part(self, job: Callable[[], Any], deliver: Callable[[Any], None]) -> None:
        """Run `job` on the worker; `deliver` is called with its result in the GUI thread, unless it was overtaken."""
        self._asked += 1
        number = self._asked
        self.newest.ask(
            job,
            lambda result: self._arrived.emit(number, deliver, result),
            lambda error: self._arrived.emit(number, self._part_trouble, error),
        )

    def _take(self, number: int, deliver: Callable[[Any], None], result: Any) -> None:
        self._taken = number
        deliver(result)

    def _part_trouble(self, error: Exception) -> None:
        if not isinstance(error, ValueError | OSError):
            raise error
        self.part_failed.emit(str(error))

    @property
    def settled(self) -> bool:
        """Whether nothing is under way: no plan to answer, no job on the worker, no result to be shown."""
        return not self._turn.isActive() and self._taken == self._asked

    def close(self) -> None:
        self._turn.stop()
        self.newest.close()
