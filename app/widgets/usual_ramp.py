"""The wish for a usual ramp on a page: its trap may have to be surveyed several times, which is a worker's to do."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from app.language import translate as _
from app.newest import Steps, Watch

if TYPE_CHECKING:
    from app.plan import Plan
    from app.widgets.page import Page


@dataclass(frozen=True, kw_only=True, eq=False)
class _Found:
    """The plan with its usual ramp, or why there is none, as a sentence."""

    plan: Plan | None
    refusal: str = ""


class UsualRamp:
    """What a page does about it: its `part` offers the job, its `take_part` the answer; the ramp becomes an edit."""

    def __init__(self, page: Page) -> None:
        self._page = page
        self._wanted = False

    def ask(self) -> None:
        """Give the plan its usual ramp, as soon as that is worked out."""
        if self._page.cloud is not None:
            self._wanted = True
            self._page.part_allowed.emit()

    def job(self, plan: Plan) -> Steps | None:
        """What is to be worked out; None where nobody wishes for it."""
        self._wanted = self._wanted and not plan.ramp
        if not self._wanted:
            return None
        return Steps(
            what=_("usual ramp"),
            depends_on=("usual ramp", plan.trap, plan.species, plan.cloud),
            run=lambda watch: _work_out(plan, watch),
        )

    def take(self, answer: Any) -> bool:
        """Make the ramp the plan's, or tell why there is none; whether this was the answer to the wish."""
        if not isinstance(answer, _Found):
            return False
        self._wanted = False
        if answer.plan is None:
            self._page.told.emit(f"{answer.refusal}.")
        else:
            self._page.plan_edited.emit(answer.plan, "ramp", "")
        return True


def _work_out(plan: Plan, watch: Watch) -> _Found | None:
    from app.process import Stopped
    from app.ramp_edits import checked, usual_ramp

    def tell(share: float) -> None:
        if not watch.tell(share):
            raise Stopped

    try:
        return _Found(plan=checked(replace(plan, ramp=usual_ramp(plan, tell))))
    except ValueError as error:
        return _Found(plan=None, refusal=str(error))
    except Stopped:
        return None
