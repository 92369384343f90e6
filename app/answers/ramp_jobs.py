"""The answers about a ramp as jobs in steps: what is quick in the worker's own thread, the rest in a process.

A ramp in a harmonic trap takes some 20 ms. Designs, what each input does, and whatever a trap of beams and coils has to
be surveyed for, go to the process; surveys that it makes on the way come back, so that nothing is surveyed twice.
"""

from __future__ import annotations

from collections.abc import Callable, Hashable
from functools import partial
from typing import TYPE_CHECKING, Any

from app.answers.ramp import RAMP_FIELDS, RampAnswer, keep_ramp, kept_ramp, ramp_answer
from app.answers.ramp_design import DesignAnswer, design_answer, keep_design, kept_design, usual_control
from app.answers.ramp_sensitivity import SensitivityAnswer, keep_sensitivity, kept_sensitivity, sensitivity_answer
from app.answers.ramp_start import paths_of
from app.answers.waypoints import DeparturesAnswer, departures_answer
from app.language import translate as _
from app.newest import Steps, Watch
from app.process import Stopped, own_process

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.ramps import Control
    from physics.trap_path import TrapPoint
    from physics.waypoints import Waypoint

Surveys = list[dict[Any, "TrapPoint"]]
"""What is known of each trap of a plan, in the order of `paths_of`."""


def ramp_depends_on(plan: Plan) -> Hashable:
    """What an answer about the plan's ramp depends on."""
    from operator import attrgetter

    return attrgetter(*RAMP_FIELDS)(plan)


def ramp_job(plan: Plan, since: str | None = None) -> Steps:
    """`ramp_answer`; None where it was stopped."""

    def run(watch: Watch) -> RampAnswer | None:
        kept = kept_ramp(plan, since)
        if kept is not None:
            return kept
        if not _surveyed(plan):
            return ramp_answer(plan, since)
        answer: RampAnswer | None = apart(plan, ramp_answer, (plan, since), watch)
        if answer is not None:
            keep_ramp(answer, plan, since)
        return answer

    return Steps(what=_("ramp"), depends_on=("ramp", ramp_depends_on(plan), since), run=run)


def design_job(plan: Plan, control: Control | None = None, since: str | None = None, *, drift: bool = True) -> Steps:
    """`design_answer`; None where it was stopped."""

    def run(watch: Watch) -> DesignAnswer | None:
        asked = control or usual_control(plan, since)
        answer = kept_design(plan, asked, since, drift=drift)
        if answer is None:
            answer = apart(plan, partial(design_answer, drift=drift), (plan, asked, since), watch)
        if answer is not None:
            keep_design(answer, plan, asked, since, drift=drift)
        return answer

    return Steps(
        what=_("design of a ramp"), depends_on=("design", ramp_depends_on(plan), control, since, drift), run=run
    )


def sensitivity_job(plan: Plan, since: str | None = None) -> Steps:
    """`sensitivity_answer`; None where it was stopped."""

    def run(watch: Watch) -> SensitivityAnswer | None:
        answer = kept_sensitivity(plan, since) or apart(plan, sensitivity_answer, (plan, since), watch)
        if answer is not None:
            keep_sensitivity(answer, plan, since)
        return answer

    return Steps(what=_("what each input does"), depends_on=("sensitivity", ramp_depends_on(plan), since), run=run)


def departures_job(plan: Plan, waypoint: Waypoint, errors: tuple[float, float] | None = None) -> Steps:
    """`departures_answer`; None where it was stopped."""

    def run(watch: Watch) -> DeparturesAnswer | None:
        found: DeparturesAnswer | None = apart(plan, departures_answer, (plan, waypoint, errors), watch)
        return found

    depends_on = ("departures", ramp_depends_on(plan), waypoint.phase_space_density, errors)
    return Steps(what=_("clouds that are off"), depends_on=depends_on, run=run)


def apart(plan: Plan, answer: Callable[..., Any], arguments: tuple[Any, ...], watch: Watch) -> Any:
    """An answer about a plan, worked out in the process; None where it was stopped. The answer takes a tick last."""
    paths = list(paths_of(plan))
    try:
        found, learned = own_process.run(_there, (plan, answer, arguments, _known(paths)), watch.tell)
    except Stopped:
        return None
    for path, points in zip(paths, learned, strict=True):
        if points:
            path.learn(points)  # type: ignore[attr-defined]  # only surveyed paths have points
    return found


def _there(
    plan: Plan, answer: Callable[..., Any], arguments: tuple[Any, ...], known: Surveys, tick: Callable[[float], bool]
) -> tuple[Any, Surveys]:
    """In the process: the answer, and what was surveyed for it."""
    paths = list(paths_of(plan))
    for path, points in zip(paths, known, strict=True):
        if points:
            path.learn(points)  # type: ignore[attr-defined]
    found = answer(*arguments, tick)
    learned = [
        {key: point for key, point in now.items() if key not in before}
        for now, before in zip(_known(paths), known, strict=True)
    ]
    return found, learned


def _known(paths: list[Any]) -> Surveys:
    return [dict(getattr(path, "known", {})) for path in paths]


def _surveyed(plan: Plan) -> bool:
    """Whether surveys are needed for the plan's ramp."""
    return any(hasattr(path, "known") for path in paths_of(plan))
