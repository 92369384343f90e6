"""A ramp designed for a plan: for most atoms at its target, within its limits, as stages that can be edited."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.answers.part import part
from app.answers.ramp import RAMP_FIELDS, RampAnswer, simulated
from app.answers.ramp_inputs import gas_of, limits_of, losses_of, target_of
from app.answers.ramp_start import RampStart, require_collisions, start_of
from app.control_kinds import CONTROL_KINDS
from app.kinds import DURATION
from app.plan_field import PlanError
from app.units import Quantity, best_unit, quantity, unit_of
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob, Move, Ramp, Stage

if TYPE_CHECKING:
    from app.answers.watched_path import Tick
    from app.plan import MoveChoice, Plan, StageChoice
    from physics.evaporation_target import Target
    from physics.passenger import Passenger
    from physics.ramp_design import RampDesign

CONDENSATION = 2.612
"""Peak phase-space density that a design for bosons aims at where the plan has no target; for fermions T/TF = 0.5."""

DIGITS = 4
"""Significant ones of the durations and values of a designed ramp."""

_FURTHER = (0.004, 0.02, 0.1)
_TOGETHER = Control(Knob.SCALE)
_FIRST_CHOICES = (Knob.SCALE, Knob.KNIFE, Knob.DEPTH)


@dataclass(frozen=True, kw_only=True, eq=False)
class DesignAnswer:
    """A designed ramp.

    design : the truncation parameter that is held, the trade-off, and what binds; its own ramp is not rounded
    control : the one that moves
    target : the one aimed at; assumed, where the plan has none
    stages : the whole ramp for a plan, with rounded numbers; stages before a measured cloud stay as they were
    answer : what these stages do
    others : beams that stay as they are, where the control is the power of one
    """

    design: RampDesign
    control: Control
    target: Target
    assumed: bool
    stages: tuple[StageChoice, ...]
    answer: RampAnswer
    others: tuple[str, ...] = ()

    def plan(self, plan: Plan) -> Plan:
        """The plan with the designed ramp in place of its own."""
        return replace(plan, ramp=self.stages)


def design_answer(
    plan: Plan,
    control: Control | None = None,
    since: str | None = None,
    tick: Tick | None = None,
    *,
    drift: bool = True,
) -> DesignAnswer:
    """The ramp of one control that leaves most atoms at the target.

    control : None: the one that `usual_control` names
    since : label of a measured cloud, from which the rest is designed
    tick : told the share that is done; `Cancelled` where it says to stop
    drift : whether the truncation parameter may drift with the depth; else it is held

    Raises
    ------
    PlanError
        The trap does not have the control, or as of `start_of`.
    ValueError
        Atoms that do not collide, or a range of the control that does not hold.
    """
    control = control or usual_control(plan, since)
    kept = _design.kept(plan, control, since, drift)
    if kept is None and tick is not None:
        kept = _designed(plan, control, since, drift, tick)
        _design.take(kept, plan, control, since, drift)
    return kept if kept is not None else _design(plan, control, since, drift)


def kept_design(
    plan: Plan, control: Control | None = None, since: str | None = None, *, drift: bool = True
) -> DesignAnswer | None:
    """The same if it is there already."""
    return _design.kept(plan, control or usual_control(plan, since), since, drift)


def keep_design(
    answer: DesignAnswer, plan: Plan, control: Control | None = None, since: str | None = None, *, drift: bool = True
) -> None:
    """Keep the answer of a process of its own."""
    _design.take(answer, plan, control or usual_control(plan, since), since, drift)


@part(*RAMP_FIELDS)
def _design(plan: Plan, control: Control, since: str | None, drift: bool) -> DesignAnswer:
    return _designed(plan, control, since, drift, None)


def controls_of(plan: Plan, since: str | None = None) -> tuple[Control, ...]:
    """The controls of the trap whose start is known, so that a ramp of one can be designed."""
    path = start_of(plan, since, ramp=False).path
    return tuple(control for control, value in path.standing.items() if not math.isnan(value))


def usual_control(plan: Plan, since: str | None = None) -> Control:
    """The control to design: the one that has limits, else the one that the ramp moves first, else all light together,
    the knife, or what there is. Where that is the power of one beam of several, and the ramp does not move that one
    alone, all light together: one beam leaves the cloud in the others.

    Raises
    ------
    PlanError
        The trap has none.
    """
    known = controls_of(plan, since)
    if not known:
        raise PlanError("the trap has nothing that can be ramped")
    limited = [limits.control for limits in plan.limits.controls]
    moved = [move.control for stage in plan.ramp for move in stage.moves]
    for control in (*limited, *moved, *(Control(knob) for knob in _FIRST_CHOICES)):
        if control in known:
            powers = {one for one in moved if one.knob is Knob.POWER}
            several = sum(one.knob is Knob.POWER for one in known) > 1 and powers != {control}
            return _TOGETHER if control.knob is Knob.POWER and several and _TOGETHER in known else control
    return known[0]


def design_target(plan: Plan) -> tuple[Target, bool]:
    """What a design aims at, and whether that is assumed because the plan has no target."""
    from app.answers.cloud import FERMI_THRESHOLD
    from physics.evaporation_target import Target

    target = target_of(plan)
    if target is not None:
        return target, False
    if gas_of(plan).bosons:
        return Target(peak_phase_space_density=CONDENSATION), True
    return Target(reduced_temperature=FERMI_THRESHOLD), True


def _designed(plan: Plan, control: Control, since: str | None, drift: bool, tick: Tick | None) -> DesignAnswer:
    from physics.ramp_design import design_ramp

    require_collisions(plan)
    start = start_of(plan, since, ramp=since is not None and bool(plan.ramp))
    target, assumed = design_target(plan)
    limits = limits_of(plan, control, start.path.standing)
    if limits.time is not None and start.begin:
        left = limits.time - start.begin
        if left <= 0.0:
            raise PlanError(f"limits.time, {limits.time:g} s, is over where the measured cloud stands")
        limits = replace(limits, time=left)
    path, design_tick = start.path, None
    passenger = _passenger(plan, control, start)
    if tick is not None:
        from app.answers.watched_path import Progress, WatchedPath

        # The line of the control, then a few stages; for each species.
        surveys = (3 if passenger is None else 6) * path.nodes
        progress = Progress(tick=tick, surveys=surveys, part=0.0 if plan.trap.harmonic else 0.7)
        path, design_tick = WatchedPath(path=path, progress=progress), progress.rest
        if passenger is not None:
            passenger = replace(passenger, path=WatchedPath(path=passenger.path, progress=progress))
    design = design_ramp(
        gas_of(plan), start.atoms, start.temperature, path, control, target,
        losses=losses_of(plan), limits=limits, drift=drift, passenger=passenger, tick=design_tick,
    )  # fmt: skip
    before = stages_before(plan, start)
    stages, answer = _rounded(plan, before, design, start, limits.time)
    powers = [one for one in start.path.standing if one.knob is Knob.POWER and control.knob is Knob.POWER]
    return DesignAnswer(
        design=design,
        control=control,
        target=target,
        assumed=assumed,
        stages=(*before, *stages),
        answer=answer,
        others=tuple(one.beam for one in powers if one != control and one.beam),
    )


def _passenger(plan: Plan, control: Control, start: RampStart) -> Passenger | None:
    """The passenger whose heat the designed ramp carries off; None without one, and where the simulation of the ramp
    leaves it out too, or the trap does not hold it where the control stands."""
    if plan.passenger is None:
        return None
    from app.answers.sympathetic import passenger_in, passenger_measured
    from physics.continued_ramp import StandingPath

    try:
        passenger, _ = passenger_in(plan)
        passenger, _ = passenger_measured(plan, start, passenger)
        path = passenger.path
        now = start.path.standing
        standing = {
            one: now[one] if one in now and passenger.follows(one) else value for one, value in path.standing.items()
        }
        held = path.at({one: value for one, value in standing.items() if not math.isnan(value)})
        passenger = replace(passenger, path=StandingPath(path=path, standing=standing))
    except ValueError:  # as the simulation says, in its own words
        return None
    return passenger if held.depth is not None and held.frequencies is not None else None


def _rounded(
    plan: Plan, before: tuple[StageChoice, ...], design: RampDesign, start: RampStart, longest: float | None
) -> tuple[tuple[StageChoice, ...], RampAnswer]:
    """The designed stages with round numbers, and what they do; the last goes a little further, lest rounding make the
    ramp end short of its target."""
    target, _ = design_target(plan)
    unit = unit_in_use(plan, design.ramp.stages[0].moves[0].control)
    for further in _FURTHER if design.reached else (0.0,):
        ramp = _longer(design.ramp, start, further, longest)
        stages = tuple(_choice(stage, unit) for stage in ramp.stages)
        asked = _aiming(replace(plan, ramp=(*before, *stages)), target)
        answer = simulated(asked, replace(start, ramp=Ramp(stages=tuple(_stage(choice) for choice in stages))))
        if answer.reached:
            break
    return stages, answer


def _longer(ramp: Ramp, start: RampStart, further: float, longest: float | None) -> Ramp:
    """The ramp, its last stage going on by a share of itself."""
    *_, placed = ramp.placed(start.path.standing)
    (move,) = placed.stage.moves
    first, last = placed.courses[move.control].value(0.0), move.last
    if longest is not None:
        further = max(0.0, min(further, (longest - placed.begin) / placed.stage.duration - 1.0))
    end = last * (last / first) ** further if move.shape is Shape.EXPONENTIAL else last + further * (last - first)
    try:
        move.control.check(end)
    except ValueError:
        end = last
    stage = replace(placed.stage, duration=(1.0 + further) * placed.stage.duration, moves=(replace(move, end=end),))
    return Ramp(stages=(*ramp.stages[:-1], stage))


def _choice(stage: Stage, unit: str) -> StageChoice:
    """A stage as a user would write it."""
    from app.plan import MoveChoice, StageChoice

    (move,) = stage.moves
    return StageChoice(
        duration=time_quantity(stage.duration),
        moves=(
            MoveChoice(control=move.control, end=control_quantity(move.last, move.control, unit), shape=move.shape),
        ),
    )


def _stage(choice: StageChoice) -> Stage:
    (move,) = choice.moves
    assert move.end is not None
    return Stage(
        duration=choice.duration.value,
        moves=(Move(control=move.control, end=move.end.value, shape=move.shape),),
    )


def time_quantity(seconds: float) -> Quantity:
    """A duration of a few digits."""
    return quantity(seconds, best_unit(seconds, ("s", "ms", "µs")), kind=DURATION, digits=DIGITS)


def control_quantity(value: float, control: Control, unit: str) -> Quantity:
    """A value of a control, of a few digits, in one of its units."""
    return quantity(value, unit, kind=CONTROL_KINDS[control.knob], digits=DIGITS)


def unit_in_use(plan: Plan, control: Control) -> str:
    """The unit in which the plan writes values of a control, or the usual one."""
    kind = CONTROL_KINDS[control.knob]
    moves = [move for stage in plan.ramp for move in stage.moves if move.control == control]
    written = [value for move in moves for value in (move.end, move.start, *(v for _, v in move.points)) if value]
    written += [
        value
        for limits in plan.limits.controls
        if limits.control == control
        for value in (limits.low, limits.high)
        if value
    ]
    if control.knob is Knob.DEPTH and plan.trap.depth is not None:
        written.append(plan.trap.depth)
    if control.knob is Knob.POWER:
        written += [beam.power for beam in plan.trap.beams if beam.name == control.beam]
    part = None if plan.trap.coils is None else getattr(plan.trap.coils, control.knob.value, None)
    if part is not None:
        written.append(part)
    return unit_of(written[0].text, kind) if written else kind.units[0]


def stages_before(plan: Plan, start: RampStart) -> tuple[StageChoice, ...]:
    """The stages of the plan's ramp up to a start within it."""
    before = list(plan.ramp[: start.stage])
    within = start.begin - sum(stage.duration.value for stage in before)
    if start.measured is not None and start.stage < len(plan.ramp) and within > 1e-9 * start.begin:
        before.append(_begun(plan, start, within))
    return tuple(before)


def _begun(plan: Plan, start: RampStart, within: float) -> StageChoice:
    """The part of a stage that is over at a time within it."""
    stage = plan.ramp[start.stage]

    def begun(move: MoveChoice) -> MoveChoice:
        unit = unit_in_use(plan, move.control)
        here = control_quantity(start.path.standing[move.control], move.control, unit)
        if move.shape is Shape.TABLE:
            points = [point for point in move.points if point[0].value < within]
            return replace(move, points=(*points, (time_quantity(within), here)))
        return replace(move, end=here, tau=None)

    return replace(stage, duration=time_quantity(within), moves=tuple(begun(move) for move in stage.moves))


def _aiming(plan: Plan, target: Target) -> Plan:
    """The plan with a target, where it has none of its own."""
    from app.plan import TARGETS

    if any(getattr(plan.target, name) is not None for name in TARGETS):
        return plan
    named = {name: value for name, value in vars(target).items() if value is not None}
    changes = {name: Quantity(f"{value:g}", value) for name, value in named.items()}
    return replace(plan, target=replace(plan.target, **changes))
