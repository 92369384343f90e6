"""The simulated ramp of a plan before its trap is surveyed along it: from what is known of traps nearby."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from app.answers.ramp import RampAnswer, simulated
from app.answers.ramp_start import start_of

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.ramps import Stage
    from physics.trap_path import TrapPath


def draft_answer(plan: Plan) -> RampAnswer | None:
    """The plan's ramp, good to some percent where its controls go near places that were surveyed; without a passenger.

    None where nothing was surveyed yet, or no ramp can be drafted: the answer with surveys says why.
    """
    from physics.followed_path import FollowedPath
    from physics.surveyed_path import SurveyedPath

    unknown = False

    def followed(path: TrapPath) -> TrapPath:
        nonlocal unknown
        if not isinstance(path, SurveyedPath):
            return path
        other = FollowedPath(path=path)
        unknown = unknown or not other.able
        return other

    def handed(stage: Stage) -> Stage:
        if stage.transfer is None:
            return stage
        return replace(stage, transfer=replace(stage.transfer, path=followed(stage.transfer.path)))

    try:
        alone = replace(plan, passenger=None)
        start = start_of(alone)
        if start.ramp is None:
            return None
        ramp = replace(start.ramp, stages=tuple(handed(stage) for stage in start.ramp.stages))
        path = followed(start.path)
        return None if unknown else simulated(alone, replace(start, ramp=ramp, path=path))
    except (ValueError, ArithmeticError):
        return None
