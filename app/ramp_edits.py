"""What a user can do to the stages of a ramp: plans in, plans out.

A stage has a place, counted from 0. What cannot be raises PlanError with one sentence, as the plan's own checks do.
"""

from __future__ import annotations

import math
from bisect import bisect_left
from collections.abc import Callable, Mapping
from dataclasses import replace

from app.answers.ramp_inputs import path_of
from app.control_kinds import CONTROL_KINDS
from app.plan import Plan
from app.ramp_choices import MoveChoice, StageChoice
from app.trap_choices import BeamChoice
from app.units import (
    DEPTH,
    DURATION,
    EXPONENT,
    Quantity,
    exact_text,
    factor,
    quantity,
    read_quantity,
    unit_of,
)
from physics.constants import boltzmann
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob

USUAL_DURATION = "5 s"
USUAL_SHARE = 0.1
"""Of a control at the end of a usual ramp, over that at its start."""

_HIGHER_SHARES = (0.125, 0.16, 0.2, 0.25, 0.32, 0.4, 0.5, 0.63, 0.8)
"""Shares of the light to which it is lowered where gravity leaves too little of the trap at the usual one."""

USUAL_TRUNCATION = 10.0
"""Depth over kT at the start of a usual ramp where the trap's own depth is not known."""

_USUAL_EXPONENT = "2"
_DEPTH, _SCALE = Control(Knob.DEPTH), Control(Knob.SCALE)

Standing = Mapping[Control, float]


def standing_at(plan: Plan, place: int) -> dict[Control, float]:
    """Where each control stands when a stage begins, after its transfer; NaN where that is not known. [SI]

    A place past the last stage gives the controls at the end of the ramp.
    """
    values = dict(path_of(plan).standing)
    for stage in plan.ramp[:place]:
        values |= _begun(plan, stage, values)
        for move in stage.moves:
            values[move.control] = end_of(move, values.get(move.control, math.nan), stage.duration.value)
    if place < len(plan.ramp):
        values |= _begun(plan, plan.ramp[place], values)
    return values


def _begun(plan: Plan, stage: StageChoice, values: dict[Control, float]) -> Standing:
    if stage.trap is None:
        return values
    values.clear()
    return path_of(replace(plan, trap=stage.trap)).standing


def end_of(move: MoveChoice, standing: float, duration: float) -> float:
    """Value of a control after a move, from where it stood. [SI]"""
    if move.points:
        return move.points[-1][1].value
    if move.end is not None:
        return move.end.value
    start = standing if move.start is None else move.start.value
    assert move.tau is not None
    assert move.exponent is not None
    return float(start * (1.0 + duration / move.tau.value) ** -move.exponent.value)


def usual_ramp(plan: Plan, tell: Callable[[float], None] = lambda _share: None) -> tuple[StageChoice, ...]:
    """An exponential to a tenth in five seconds, of the depth, of the knife where there is one, or of all beams; of
    these to where a tenth of the depth is left, where gravity would take most of it before. That takes surveys of the
    trap; `tell` is told, before each, the share that is done."""
    duration = read_quantity(USUAL_DURATION, DURATION)
    trap = plan.trap
    if trap.harmonic:
        start = None
        depth = trap.depth.value if trap.depth is not None else math.nan
        if trap.depth is None:
            depth = USUAL_TRUNCATION * boltzmann * plan.cloud.temperature.value
            start = quantity(depth, usual_depth_unit(depth), kind=DEPTH, digits=2)
        end = quantity(USUAL_SHARE * depth, usual_depth_unit(USUAL_SHARE * depth), kind=DEPTH, digits=3)
        moves: tuple[MoveChoice, ...] = (MoveChoice(control=_DEPTH, start=start, end=end, shape=Shape.EXPONENTIAL),)
        return (StageChoice(duration=duration, moves=moves, label="lower the depth"),)
    coils = trap.coils
    if coils is not None and coils.knife is not None:
        move = MoveChoice(control=Control(Knob.KNIFE), end=_lower_knife(plan, coils.knife), shape=Shape.EXPONENTIAL)
        return (StageChoice(duration=duration, moves=(move,), label="lower the knife"),)
    beams = _lit(plan)
    if beams:
        share = _lowest_light(plan, tell)
        moves = tuple(
            MoveChoice(
                control=Control(Knob.POWER, beam.name),
                end=scaled(beam.power, share, Knob.POWER),
                shape=Shape.EXPONENTIAL,
            )
            for beam in beams
        )
        return (StageChoice(duration=duration, moves=moves, label="lower the light"),)
    return (StageChoice(duration=duration, label="hold"),)


def _lit(plan: Plan) -> list[BeamChoice]:
    """The beams that make the trap."""
    return [beam for beam in plan.trap.beams if beam.on and beam.power.value > 0.0]


def _lowest_light(plan: Plan, tell: Callable[[float], None]) -> float:
    """The share of all powers at which a usual ramp ends: a tenth, as long as half a tenth of the depth is left there;
    else the lowest of a few that leave a tenth of the depth. A share of the depth, not of the power, keeps away from
    the power at which gravity pulls the atoms out."""
    from app.answers.trap import trap_answer

    surveys = 2 + len(_HIGHER_SHARES).bit_length()
    done = 0

    def depth(share: float) -> float:
        nonlocal done
        done += 1
        tell(min(done / surveys, 1.0))
        beams = tuple(
            replace(beam, power=scaled(beam.power, share, Knob.POWER)) if beam in lit else beam
            for beam in plan.trap.beams
        )
        found = trap_answer(replace(plan, trap=replace(plan.trap, beams=beams))).survey
        return found.depth if found.trapped and found.depth is not None else 0.0

    lit = _lit(plan)
    tell(0.0)
    now = trap_answer(plan).survey
    if not now.trapped or now.depth is None or depth(USUAL_SHARE) >= 0.5 * USUAL_SHARE * now.depth:
        return USUAL_SHARE
    place = bisect_left(_HIGHER_SHARES, USUAL_SHARE * now.depth, key=depth)
    return _HIGHER_SHARES[min(place, len(_HIGHER_SHARES) - 1)]


def _lower_knife(plan: Plan, knife: Quantity) -> Quantity:
    """A tenth of what the knife stands above the resonance at the bottom of the trap, which a bias field sets."""
    from app.answers.trap import trap_answer

    potential = trap_answer(plan).survey.potential
    bias = plan.trap.coils.bias if plan.trap.coils is not None else None
    bottom = 0.0
    if potential is not None and potential.knife_energy and bias is not None:
        bottom = knife.value * potential.zeeman_slope * abs(bias.value) / potential.knife_energy
    if not 0.0 <= bottom < knife.value:
        bottom = 0.0
    return scaled(knife, (bottom + USUAL_SHARE * (knife.value - bottom)) / knife.value, Knob.KNIFE)


def with_known_depth(plan: Plan) -> Plan:
    """The plan with a depth of its trap: where a harmonic one has none, that from which the ramp starts, or ten kT."""
    trap = plan.trap
    if not trap.harmonic or trap.depth is not None:
        return plan
    starts = [move.start for stage in plan.ramp[:1] for move in stage.moves if move.control == _DEPTH]
    depth = next((start for start in starts if start is not None), None)
    if depth is None:
        value = USUAL_TRUNCATION * boltzmann * plan.cloud.temperature.value
        depth = quantity(value, usual_depth_unit(value), kind=DEPTH, digits=2)
    return replace(plan, trap=replace(trap, depth=depth))


def scaled(value: Quantity, by: float, knob: Knob) -> Quantity:
    """A value of a control times a factor, in its unit, without uncertainty."""
    kind = CONTROL_KINDS[knob]
    return quantity(value.value * by, unit_of(value.text, kind), kind=kind)


def control_quantity(control: Control, value: float) -> Quantity:
    """A value of a control as a quantity to three digits, in a unit that suits it."""
    kind = CONTROL_KINDS[control.knob]
    unit = usual_depth_unit(value) if control.knob is Knob.DEPTH else _unit_for(value, control)
    return quantity(value, unit, kind=kind)


def usual_depth_unit(energy: float) -> str:
    kelvin = energy / boltzmann
    return next((unit for unit, size in (("nK", 1e-6), ("µK", 1e-3)) if kelvin < size), "mK")


def _unit_for(value: float, control: Control) -> str:
    units = CONTROL_KINDS[control.knob].units
    sized = sorted(((factor(unit, CONTROL_KINDS[control.knob].si_unit), unit) for unit in units), reverse=True)
    if control.knob in (Knob.POWER, Knob.KNIFE) and value:
        return next((unit for size, unit in sized if abs(value) >= size), sized[-1][1])
    return units[0]


# --- stages -----------------------------------------------------------------------------------------------------------


def with_stage(plan: Plan, place: int, stage: StageChoice) -> Plan:
    """The plan with another stage in a place."""
    return replace(plan, ramp=(*plan.ramp[:place], stage, *plan.ramp[place + 1 :]))


def with_new_stage(plan: Plan, place: int, *, hold: bool = False) -> Plan:
    """The plan with a new stage before a place: one that goes on as the stage before it does, or a hold."""
    before = plan.ramp[place - 1] if place else None
    duration = before.duration if before is not None else read_quantity("1 s", DURATION)
    moves: tuple[MoveChoice, ...] = ()
    if not hold:
        standing = standing_at(replace(plan, ramp=plan.ramp[:place]), place)
        like = [move for move in (before.moves if before is not None else ()) if move.end is not None]
        controls = [move.control for move in like] or _moved_first(plan)
        for control in controls:
            here = standing.get(control, math.nan)
            if math.isfinite(here) and here:
                shape = Shape.EXPONENTIAL if here > 0.0 else Shape.LINEAR
                moves += (MoveChoice(control=control, end=control_quantity(control, 0.5 * here), shape=shape),)
        if not moves and not plan.ramp:
            return replace(plan, ramp=usual_ramp(plan))
    stage = StageChoice(duration=duration, moves=moves, label="hold" if hold else "")
    return replace(plan, ramp=(*plan.ramp[:place], stage, *plan.ramp[place:]))


def _moved_first(plan: Plan) -> list[Control]:
    """The controls that a usual ramp moves."""
    coils = plan.trap.coils
    if plan.trap.harmonic:
        return [_DEPTH]
    if coils is not None and coils.knife is not None:
        return [Control(Knob.KNIFE)]
    return [Control(Knob.POWER, beam.name) for beam in _lit(plan)]


def with_copy(plan: Plan, place: int) -> Plan:
    """The plan with a stage twice, one after the other. Starts that were given stay with the first."""
    stage = plan.ramp[place]
    moves = tuple(replace(move, start=None) if move.end is not None else move for move in stage.moves)
    copy = replace(stage, moves=moves, handing=None, trap=None)
    return replace(plan, ramp=(*plan.ramp[: place + 1], copy, *plan.ramp[place + 1 :]))


def without_stage(plan: Plan, place: int) -> Plan:
    """The plan without a stage."""
    return replace(plan, ramp=(*plan.ramp[:place], *plan.ramp[place + 1 :]))


def with_stage_moved(plan: Plan, place: int, by: int) -> Plan:
    """The plan with a stage earlier (-1) or later (+1); at either end nothing changes."""
    other = place + by
    if not 0 <= other < len(plan.ramp):
        return plan
    stages = list(plan.ramp)
    stages[place], stages[other] = stages[other], stages[place]
    return replace(plan, ramp=tuple(stages))


def with_duration(plan: Plan, place: int, duration: Quantity) -> Plan:
    """The plan with another duration of a stage; tables stretch with it."""
    stage = plan.ramp[place]
    stretch = duration.value / stage.duration.value
    moves = tuple(_stretched(move, stretch, duration) if move.points else move for move in stage.moves)
    return with_stage(plan, place, replace(stage, duration=duration, moves=moves))


def _stretched(move: MoveChoice, stretch: float, duration: Quantity) -> MoveChoice:
    unit = unit_of(duration.text, DURATION)
    points = [
        (Quantity(exact_text(time.value * stretch, unit, kind=DURATION), time.value * stretch), value)
        for time, value in move.points[:-1]
    ]
    return replace(move, points=(*points, (Quantity(duration.text, duration.value), move.points[-1][1])))


def with_label(plan: Plan, place: int, label: str) -> Plan:
    """The plan with another name of a stage."""
    return with_stage(plan, place, replace(plan.ramp[place], label=label))


# --- moves ------------------------------------------------------------------------------------------------------------


def with_move(plan: Plan, place: int, number: int, move: MoveChoice) -> Plan:
    """The plan with another move in a stage."""
    moves = plan.ramp[place].moves
    return with_stage(plan, place, replace(plan.ramp[place], moves=(*moves[:number], move, *moves[number + 1 :])))


def without_move(plan: Plan, place: int, number: int) -> Plan:
    """The plan whose stage leaves a control at rest."""
    moves = plan.ramp[place].moves
    return with_stage(plan, place, replace(plan.ramp[place], moves=(*moves[:number], *moves[number + 1 :])))


def free_controls(plan: Plan, place: int) -> tuple[Control, ...]:
    """Controls that the trap of a stage has, and that it does not move yet."""
    moved = {move.control for move in plan.ramp[place].moves}
    return tuple(control for control in standing_at(plan, place) if control not in moved)


def with_new_move(plan: Plan, place: int, control: Control) -> Plan:
    """The plan whose stage moves one control more: to where it stands, so that nothing changes yet."""
    here = standing_at(plan, place).get(control, math.nan)
    start = None
    if math.isnan(here):
        here = USUAL_TRUNCATION * boltzmann * plan.cloud.temperature.value if control == _DEPTH else 1.0
        start = control_quantity(control, here)
    move = MoveChoice(control=control, start=start, end=control_quantity(control, here))
    stage = plan.ramp[place]
    return with_stage(plan, place, replace(stage, moves=(*stage.moves, move)))


def with_control(plan: Plan, place: int, number: int, control: Control) -> Plan:
    """The plan whose move turns another knob, by the same factor where both are positive."""
    old = plan.ramp[place].moves[number]
    standing = standing_at(plan, place)
    here, there = standing.get(old.control, math.nan), standing.get(control, math.nan)
    share = end_of(old, here, plan.ramp[place].duration.value) / here if here > 0.0 else math.nan
    if control.knob is old.control.knob:
        return with_move(plan, place, number, replace(old, control=control))
    start = None
    if math.isnan(there):
        there = USUAL_TRUNCATION * boltzmann * plan.cloud.temperature.value if control == _DEPTH else 1.0
        start = control_quantity(control, there)
    share = share if math.isfinite(share) and share > 0.0 else 1.0
    move = MoveChoice(
        control=control,
        start=start,
        end=control_quantity(control, share * there),
        shape=old.shape if old.shape is Shape.EXPONENTIAL and there > 0.0 else Shape.LINEAR,
    )
    return with_move(plan, place, number, move)


def with_shape(plan: Plan, place: int, number: int, shape: Shape) -> Plan:
    """The plan whose move has another shape, between the same values."""
    stage = plan.ramp[place]
    old = stage.moves[number]
    if shape is old.shape:
        return plan
    here = standing_at(plan, place).get(old.control, math.nan)
    end = old.end or control_quantity(old.control, end_of(old, here, stage.duration.value))
    start = old.points[0][1] if old.points else old.start
    if shape is Shape.TABLE:
        first = start or control_quantity(old.control, here)
        zero = Quantity("0 s", 0.0)
        last = (Quantity(stage.duration.text, stage.duration.value), end)
        move = MoveChoice(control=old.control, shape=shape, points=((zero, first), last))
    else:
        exponent = read_quantity(_USUAL_EXPONENT, EXPONENT) if shape is Shape.POWER_LAW else None
        move = MoveChoice(control=old.control, start=start, end=end, shape=shape, exponent=exponent)
    return with_move(plan, place, number, move)


def checked(plan: Plan) -> Plan:
    """The plan, if its ramp can be followed; else PlanError."""
    from app.answers.ramp_inputs import ramp_of

    if plan.ramp:
        ramp_of(plan)
    return plan
