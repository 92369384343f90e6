"""All that a page of the ramp shows at once: the ramp, the clouds measured along it, and the rest of it from one."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from app.answers.ramp_draft import draft_answer
from app.answers.ramp_inputs import measured_clouds
from app.answers.ramp_jobs import ramp_job
from app.newest import Watch

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.ramp_inputs import MeasuredCloud
    from app.plan import Plan


@dataclass(frozen=True, kw_only=True, eq=False)
class Found:
    """What is found out about a plan.

    plan, key : to which it belongs
    rest : of the ramp, from a measured cloud
    extra : what else was asked for, or the error of that
    recalled : references of an earlier session, simulated again; None where none were asked for
    failure : why there is no answer, else empty
    draft : whether the ramp is followed from surveys of traps nearby, until its own are made
    """

    plan: Plan
    key: object = None
    ramp: RampAnswer | None = None
    rest: RampAnswer | None = None
    measured: tuple[MeasuredCloud, ...] = ()
    extra: Any = None
    recalled: tuple[Any, ...] | None = None
    failure: str = ""
    draft: bool = False


def drafted(plan: Plan) -> Found | None:
    """What can be said of the ramp at once; None where nothing is known of traps nearby."""
    answer = draft_answer(plan)
    if answer is None:
        return None
    try:
        measured = measured_clouds(plan)
    except ValueError:  # the answer with surveys says why
        measured = ()
    return Found(plan=plan, ramp=answer, measured=measured, draft=True)


def simulated_with_rest(plan: Plan, since: str | None, watch: Watch) -> Found | None:
    """The ramp of a plan, and the rest of it from a measured cloud; None where it was stopped."""
    if not plan.ramp:
        return Found(plan=plan)
    try:
        answer = ramp_job(plan).run(watch)
        if answer is None:
            return None
        measured = measured_clouds(plan)
        rest = None
        if since is not None and any(choice.label == since for choice in plan.measured):
            rest = ramp_job(plan, since).run(watch)
    except (ValueError, OSError, ArithmeticError, RuntimeError) as error:
        return Found(plan=plan, failure=str(error))
    return Found(plan=plan, ramp=answer, rest=rest, measured=measured)
