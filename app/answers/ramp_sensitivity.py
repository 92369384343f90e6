"""Which input of a plan's ramp counts most: what a tenth more or less of each does to the atoms at the end."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.answers.part import part
from app.answers.ramp import RAMP_FIELDS
from app.answers.ramp_inputs import gas_of, losses_of, target_of
from app.answers.ramp_start import require_collisions, start_of
from app.answers.sympathetic import passenger_or_none
from app.plan_field import PlanError

if TYPE_CHECKING:
    from app.answers.watched_path import Tick
    from app.plan import Plan
    from physics.ramp_sensitivity import RampSensitivity

CHANGE = 0.1


@dataclass(frozen=True, kw_only=True, eq=False)
class SensitivityAnswer:
    """change : relative, of every input. found : the strongest first. planned : atoms at the end without any change.

    planned_passenger : T/Tc or T/TF of the passenger at the end without any change; NaN without one
    passenger_bosons : of which of the two, where there is one in these runs; else None
    alone : whether the plan has a passenger, which is in none of these runs
    """

    change: float
    found: tuple[RampSensitivity, ...]
    planned: float
    alone: bool
    planned_passenger: float = math.nan
    passenger_bosons: bool | None = None

    def strongest_for_passenger(self) -> RampSensitivity | None:
        """The input that moves T/Tc or T/TF of the passenger most; None where none is known to."""
        known = [one for one in self.found if math.isfinite(one.passenger_slope)]
        return max(known, key=lambda one: abs(one.passenger_slope), default=None)


def sensitivity_answer(plan: Plan, since: str | None = None, tick: Tick | None = None) -> SensitivityAnswer:
    """What a tenth of each input does to the atoms at the end of the ramp. Arguments as of `ramp_answer`."""
    kept = _sensitivity.kept(plan, since)
    if kept is None and tick is not None:
        kept = _worked_out(plan, since, tick)
        _sensitivity.take(kept, plan, since)
    return kept if kept is not None else _sensitivity(plan, since)


def kept_sensitivity(plan: Plan, since: str | None = None) -> SensitivityAnswer | None:
    """The same if it is there already."""
    return _sensitivity.kept(plan, since)


def keep_sensitivity(answer: SensitivityAnswer, plan: Plan, since: str | None = None) -> None:
    """Keep the answer of a process of its own."""
    _sensitivity.take(answer, plan, since)


@part(*RAMP_FIELDS)
def _sensitivity(plan: Plan, since: str | None) -> SensitivityAnswer:
    return _worked_out(plan, since, None)


def _worked_out(plan: Plan, since: str | None, tick: Tick | None) -> SensitivityAnswer:
    from physics.ramp_sensitivity import ending, ramp_sensitivities

    require_collisions(plan)
    start = start_of(plan, since)
    if start.ramp is None:
        raise PlanError("nothing is left of the ramp after its last stage")
    ramp, path, passenger = start.ramp, start.path, passenger_or_none(plan, start, tick)
    if tick is not None:
        from app.answers.watched_path import Progress, WatchedPath, watched_ramp

        # The tick of the runs says how far it is; surveys between them only whether to go on.
        progress = Progress(tick=tick, part=0.0)
        ramp, path, tick = watched_ramp(ramp, progress), WatchedPath(path=path, progress=progress), progress.rest
        if passenger is not None:
            passenger = replace(passenger, path=WatchedPath(path=passenger.path, progress=progress))
    case = (gas_of(plan), start.atoms, start.temperature, ramp, path)
    losses, target = losses_of(plan), target_of(plan)
    found = ramp_sensitivities(*case, losses=losses, target=target, passenger=passenger, change=CHANGE, tick=tick)
    planned, end = ending(*case, losses=losses, target=target, passenger=passenger)
    return SensitivityAnswer(
        change=CHANGE,
        found=found,
        planned=float(planned.atoms[-1]) if len(planned.atoms) else math.nan,
        alone=plan.passenger is not None and passenger is None,
        planned_passenger=end,
        passenger_bosons=None if passenger is None else passenger.gas.bosons,
    )
