"""The simulated ramp of a plan: what the kinetics says of it, and what that does not cover."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.answers.inputs import scattering_in_use
from app.answers.losses import losses_in_use, typed_losses
from app.answers.part import part
from app.answers.ramp_inputs import gas_of, state_of, target_of
from app.answers.ramp_start import RampStart, require_collisions, start_of
from app.answers.trap import trap_answer
from app.plan_field import PlanError
from physics.particles import Certainty

if TYPE_CHECKING:
    from app.answers.ramp_inputs import MeasuredCloud
    from app.answers.sympathetic import SympatheticAnswer
    from app.answers.watched_path import Tick
    from app.plan import Plan, StageChoice
    from physics.evaporation import Evaporation
    from physics.evaporation_target import Target
    from physics.ramp_caveats import RampCaveat
    from physics.ramp_extremes import RampExtremes
    from physics.scattering import LengthInUse
    from physics.species import State

RAMP_FIELDS = (
    "species",
    "trap",
    "cloud.atoms",
    "cloud.temperature",
    "losses",
    "target",
    "ramp",
    "measured",
    "limits",
    "passenger",
)  # fmt: skip
"""What a simulated or designed ramp depends on."""


@dataclass(frozen=True, kw_only=True, eq=False)
class RampAnswer:
    """A simulated ramp.

    run : columns, budget, stages with their efficiency, and why it ended
    target : where it was to end; None: at the end of its stages
    begin : [s] at which it begins, in the time of the plan's ramp
    first : number of the plan's stage with which it begins, from 0
    stages : of the plan
    measured : the cloud that it begins with, where that was measured
    passenger : the passenger along with it, whose heat is in `run`; None without one
    passenger_left_out : why there is none though the plan has one; else empty
    """

    state: State
    run: Evaporation
    target: Target | None
    extremes: RampExtremes
    caveats: tuple[RampCaveat, ...]
    scattering: LengthInUse
    stages: tuple[StageChoice, ...]
    begin: float = 0.0
    first: int = 0
    measured: MeasuredCloud | None = None
    passenger: SympatheticAnswer | None = None
    passenger_left_out: str = ""

    @property
    def bosons(self) -> bool:
        return self.run.gas.bosons

    @property
    def reached(self) -> bool:
        from physics.evaporation import EndReason

        return self.run.reason is EndReason.TARGET


def ramp_answer(plan: Plan, since: str | None = None, tick: Tick | None = None) -> RampAnswer:
    """The plan's ramp, or the rest of it for the measured cloud whose label is `since`.

    A trap of beams and coils is surveyed along the ramp, for seconds where it was not before; `tick` is told how far
    that is, and `Cancelled` raised where it says to stop.

    Raises
    ------
    PlanError
        There is no ramp, or none is left; or one that no trap of the plan can follow.
    ValueError
        The scattering length is needed and not known; or numbers that no simulation can follow.
    """
    kept = _ramp.kept(plan, since)
    if kept is None and tick is not None:
        kept = simulated(plan, start_of(plan, since), tick)
        _ramp.take(kept, plan, since)
    return kept if kept is not None else _ramp(plan, since)


def kept_ramp(plan: Plan, since: str | None = None) -> RampAnswer | None:
    """The same if it is there already."""
    return _ramp.kept(plan, since)


def keep_ramp(answer: RampAnswer, plan: Plan, since: str | None = None) -> None:
    """Keep the answer of a process of its own."""
    _ramp.take(answer, plan, since)


@part(*RAMP_FIELDS)
def _ramp(plan: Plan, since: str | None) -> RampAnswer:
    return simulated(plan, start_of(plan, since))


def simulated(plan: Plan, start: RampStart, tick: Tick | None = None) -> RampAnswer:
    """The ramp from a start, with the passenger if the plan has one. `tick` as of `ramp_answer`."""
    from physics.evaporation import evaporate
    from physics.ramp_caveats import ramp_caveats
    from physics.ramp_extremes import ramp_extremes

    if start.ramp is None:
        raise PlanError("nothing is left of the ramp after its last stage")
    require_collisions(plan)
    state, target, gas = state_of(plan), target_of(plan), gas_of(plan)
    used = losses_in_use(plan, state, {name: quantity.value for name, quantity in typed_losses(plan).items()})
    passenger, left_out = _with_passenger(plan, start, tick)
    if passenger is None:
        ramp, path = start.ramp, start.path
        if tick is not None:
            from app.answers.watched_path import Progress, WatchedPath, surveys_along, watched_ramp

            progress = Progress(tick=tick, surveys=surveys_along(ramp, path))
            ramp, path = watched_ramp(ramp, progress), WatchedPath(path=path, progress=progress)
        run = evaporate(gas, start.atoms, start.temperature, ramp, path, losses=used.losses, target=target)
    else:
        run = passenger.run.coolant
    extremes = ramp_extremes(run)
    scattering = scattering_in_use(plan, state)
    return RampAnswer(
        state=state,
        run=run,
        target=target,
        extremes=extremes,
        caveats=(
            *ramp_caveats(run, extremes, open_share=_open_share(plan, start.temperature)),
            *_recalled(scattering, used.certainties(), run),
        ),
        scattering=scattering,
        stages=plan.ramp,
        begin=start.begin,
        first=start.stage,
        measured=start.measured,
        passenger=passenger,
        passenger_left_out=left_out,
    )


def _with_passenger(plan: Plan, start: RampStart, tick: Tick | None) -> tuple[SympatheticAnswer | None, str]:
    """The ramp with the plan's passenger; without one, or where it cannot be computed, None and why."""
    if plan.passenger is None:
        return None, ""
    from app.answers.sympathetic import sympathetic_run

    try:
        return sympathetic_run(plan, start, tick), ""
    except ValueError as error:  # what is wrong with the first species alone is said there
        return None, str(error)


def _open_share(plan: Plan, temperature: float) -> float | None:
    """Share of all directions in which the trap, as it stands, lets hot atoms out; None where it is not known."""
    return None if plan.trap.harmonic else trap_answer(plan).survey.open_share(temperature)


def _recalled(
    scattering: LengthInUse, certainties: Mapping[str, Certainty], run: Evaporation
) -> tuple[RampCaveat, ...]:
    from physics.caveats import Severity
    from physics.ramp_caveats import RampCaveat, RampCaveatKind

    found = {
        RampCaveatKind.LENGTH_RECALLED: (scattering.certainty, scattering.value),
        RampCaveatKind.TWO_BODY_RECALLED: (certainties.get("two_body"), run.losses.two_body),
        RampCaveatKind.THREE_BODY_RECALLED: (certainties.get("three_body"), run.losses.three_body),
    }
    return tuple(
        RampCaveat(kind=kind, severity=Severity.NOTE, value=float(value))
        for kind, (certainty, value) in found.items()
        if certainty is Certainty.MEMORY and value is not None
    )
