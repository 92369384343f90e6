"""Where a ramp begins: with the plan's cloud, or in the midst of the ramp with one that was measured there."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.answers.inputs import scattering_in_use
from app.answers.ramp_inputs import MeasuredCloud, measured_clouds, path_of, ramp_of, state_of
from app.plan_field import PlanError
from physics.scattering import WhyUnknown

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.continued_ramp import RestOfRamp
    from physics.ramps import Ramp
    from physics.trap_path import TrapPath

_AFTER_STAGE = re.compile(r"after stage ([0-9]{1,4})")


@dataclass(frozen=True, kw_only=True, eq=False)
class RampStart:
    """A cloud, and the ramp that is before it.

    ramp : what follows; None where nothing does
    path : the trap, its controls where they stand then
    begin : [s] in the time of the plan's ramp
    stage : number of the plan's stage that comes first, from 0
    measured : the cloud, where it was measured
    """

    atoms: float
    temperature: float
    ramp: Ramp | None
    path: TrapPath
    begin: float = 0.0
    stage: int = 0
    measured: MeasuredCloud | None = None


def start_of(plan: Plan, since: str | None = None, *, ramp: bool = True) -> RampStart:
    """The start of the plan's ramp, or the measured cloud of that label with the rest of the ramp.

    ramp : False where the stages are still to be designed, and the plan need have none

    Raises
    ------
    PlanError
        No cloud of that label was measured; or its temperature does not follow; or as of `ramp_of`.
    """
    path = path_of(plan)
    if since is None:
        return RampStart(
            atoms=plan.cloud.atoms.value,
            temperature=plan.cloud.temperature.value,
            ramp=ramp_of(plan) if ramp else None,
            path=path,
        )
    cloud = measured_cloud(plan, since)
    if math.isnan(cloud.temperature):
        raise PlanError(f'the temperature of the measured cloud "{cloud.choice.label}" is not known: {cloud.reason}')
    rest = rest_after(plan, cloud)
    if rest is None:
        whole = ramp_of(plan) if plan.ramp else None
        return RampStart(atoms=cloud.atoms, temperature=cloud.temperature, ramp=whole, path=path, measured=cloud)
    return RampStart(
        atoms=cloud.atoms,
        temperature=cloud.temperature,
        ramp=rest.ramp,
        path=rest.path,
        begin=rest.begin,
        stage=_stage_at(plan, cloud),
        measured=cloud,
    )


def require_collisions(plan: Plan) -> None:
    """Raise PlanError where the scattering length, which decides how fast atoms evaporate, is not known.

    Fermions of one spin state have none, and need none: they do not collide.
    """
    length = scattering_in_use(plan, state_of(plan))
    if length.reason is None or length.reason is WhyUnknown.POLARISED:
        return
    raise PlanError(f"{length.reason.value}: give species.scattering_length, or species.field")


def measured_cloud(plan: Plan, label: str) -> MeasuredCloud:
    """The measured cloud of that label; case and spaces do not matter. "after stage 3" is also the one cloud that was
    measured there, whatever it is called.

    Raises
    ------
    PlanError
        None has it, or two have.
    """

    def plain(text: str) -> str:
        return " ".join(text.split()).casefold()

    found = [choice for choice in plan.measured if plain(choice.label) == plain(label)]
    stage = stage_named(label)
    if not found and stage is not None:
        found = [choice for choice in plan.measured if choice.stage == stage]
    if len(found) == 1:
        return measured_clouds(replace(plan, measured=tuple(found)))[0]
    if found:
        raise PlanError(f'"{label}" may be two measured clouds or more: give them different labels')
    known = ", ".join(f'"{choice.label}"' for choice in plan.measured)
    what = f"the plan has {known}" if known else "the plan has none: give it [[measured]]"
    raise PlanError(f'no measured cloud is called "{label}"; {what}')


def stage_named(text: str) -> int | None:
    """The stage that "after stage 3" means, counted from 1; None for any other text."""
    found = _AFTER_STAGE.fullmatch(" ".join(text.split()).casefold())
    return None if found is None else int(found[1])


def rest_after(plan: Plan, cloud: MeasuredCloud) -> RestOfRamp | None:
    """What is left of the plan's ramp; None for a cloud that was measured in the trap before it."""
    from physics.continued_ramp import after_stage, after_time

    choice = cloud.choice
    if choice.stage is not None:
        return after_stage(ramp_of(plan), path_of(plan), choice.stage)
    if choice.time is not None:
        return after_time(ramp_of(plan), path_of(plan), choice.time.value)
    return None


def _stage_at(plan: Plan, cloud: MeasuredCloud) -> int:
    """Number of the stage in which the rest begins, from 0."""
    if cloud.choice.stage is not None:
        return cloud.choice.stage
    begin = 0.0
    for number, stage in enumerate(plan.ramp):
        begin += stage.duration.value
        if cloud.time is not None and cloud.time < begin * (1.0 - 1e-12):
            return number
    return len(plan.ramp)


def paths_of(plan: Plan) -> Iterator[TrapPath]:
    """The trap of the plan, as its passenger sees it too, and every one that its ramp hands the cloud to."""
    yield path_of(plan)
    if plan.passenger is not None:
        from app.answers.passenger import passenger_plan

        with suppress(PlanError):  # one that cannot be is left out of the ramp
            yield path_of(passenger_plan(plan))
    for stage in plan.ramp:
        if stage.trap is not None:
            yield path_of(replace(plan, trap=stage.trap))
