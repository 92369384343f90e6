"""What an answer for a cloud needs of a trap of beams and coils, worked out ahead: its survey and what hangs on it.

It takes up to a second, so the window has it done on a worker thread; after it a cloud is answered within a frame.
"""

from __future__ import annotations

from contextlib import suppress
from typing import TYPE_CHECKING

from app.answers.trap import trap_answer
from app.answers.trap_inputs import central_trap, trap_inputs, trap_slopes
from app.plan_field import PlanError

if TYPE_CHECKING:
    from app.plan import Plan

_FACTS = ("arms", "heating")
_LATER = (*_FACTS, "volume_curve", "spin_flips", "barriers", "notes")
"""What a survey works out when it is first asked for it; the first ones are soon there, and told at once."""


def surveyed(plan: Plan) -> bool:
    """Whether a cloud in the trap of the plan can be answered at once."""
    if plan.trap.harmonic:
        return True
    answer = trap_answer.kept(plan)
    if answer is None or not all(name in vars(answer.survey) for name in _LATER):
        return False
    return not _followed(plan) or not answer.trapped or trap_slopes.kept(plan) is not None


def begin_trap(plan: Plan) -> None:
    """The part of `prepare_trap` that a form of the trap tells of, about a third of the time of all."""
    if not plan.trap.harmonic:
        answer = trap_answer(plan)
        for name in _FACTS:
            getattr(answer.survey, name)


def prepare_trap(plan: Plan) -> None:
    """Survey the trap of the plan, so that afterwards it is `surveyed`; that it holds nothing is an answer.

    Raises ValueError where the species, or its state, is not known.
    """
    if plan.trap.harmonic:
        return
    answer = trap_answer(plan)
    for name in _LATER:
        getattr(answer.survey, name)
    answer.survey.forget()
    if not answer.trapped:
        return
    if _followed(plan):
        trap_slopes(plan)
    with suppress(PlanError):  # of which the cloud's answer tells
        central_trap(plan)


def _followed(plan: Plan) -> bool:
    """Whether the trap has uncertain numbers, which its frequencies and depth follow."""
    return bool(trap_inputs(plan))
