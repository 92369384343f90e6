"""Stages moved by hand on a graph of a control: the end of one, or where it starts from a value of its own."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from app.control_kinds import CONTROL_KINDS
from app.moving import fine_step, moved_quantity
from app.plan import Plan
from app.ramp_edits import checked, control_quantity, with_duration, with_move
from app.units import DURATION, Quantity, best_unit, quantity, unit_of
from physics.ramps import Control, Knob

_PREFIXED: Mapping[Knob, tuple[str, ...]] = {
    Knob.DEPTH: ("nK", "µK", "mK"),
    Knob.POWER: ("µW", "mW", "W"),
    Knob.KNIFE: ("Hz", "kHz", "MHz"),
}
"""Units among which a dragged value takes the one that suits it."""


def with_place_dragged(
    plan: Plan, written: Plan, place: int, control: Control, *, start: bool, time: float, value: float, end: float
) -> Plan:
    """The plan whose stage ends at another time of the ramp [s] and value [SI], or starts from another value.

    written : the plan before the drag, whose texts say in which units and how
    end : [s] of the graph's time axis, which says how fine a hand can be

    Raises
    ------
    PlanError
        No ramp can go there.
    """
    if start:
        return checked(with_start_dragged(plan, written, place, control, value))
    begin = sum(stage.duration.value for stage in written.ramp[:place])
    step = fine_step(end)
    duration: float | None = time - begin
    if abs(time - begin - plan.ramp[place].duration.value) < 0.5 * step:
        duration = None
    return checked(with_end_dragged(plan, written, place, control, duration, value, step))


def with_end_dragged(
    plan: Plan, written: Plan, place: int, control: Control, duration: float | None, value: float, step: float
) -> Plan:
    """The plan whose stage ends elsewhere, as when the end of its curve is dragged.

    written : the plan before the drag, whose texts say in which units and how
    duration : [s] rounded to whole steps [s]; None: as it is
    value : [SI] of the control
    """
    stage = written.ramp[place]
    if duration is not None:
        moved = moved_quantity(stage.duration, max(duration, step), DURATION, (), step=step)
        plan = with_duration(plan, place, moved)
    number = next((k for k, move in enumerate(stage.moves) if move.control == control), None)
    if number is None:
        return plan
    old, move = stage.moves[number], plan.ramp[place].moves[number]
    if old.points:
        last = _dragged(old.points[-1][1], value, control)
        move = replace(move, points=(*move.points[:-1], (move.points[-1][0], last)))
    else:
        end = old.end or control_quantity(control, value)
        move = replace(move, end=_dragged(end, value, control), tau=None)
    return with_move(plan, place, number, move)


def with_start_dragged(plan: Plan, written: Plan, place: int, control: Control, value: float) -> Plan:
    """The plan whose stage starts a control from another value, where it has a start of its own."""
    number = next((k for k, move in enumerate(written.ramp[place].moves) if move.control == control), None)
    if number is None:
        return plan
    old, move = written.ramp[place].moves[number], plan.ramp[place].moves[number]
    if old.points:
        first = _dragged(old.points[0][1], value, control)
        return with_move(plan, place, number, replace(move, points=((move.points[0][0], first), *move.points[1:])))
    if old.start is None:
        return plan
    return with_move(plan, place, number, replace(move, start=_dragged(old.start, value, control)))


def _dragged(old: Quantity, value: float, control: Control) -> Quantity:
    """A value of a control to three digits of the unit in which it was written, or of one with another prefix."""
    kind = CONTROL_KINDS[control.knob]
    value = min(max(value, kind.low), kind.high)
    unit = unit_of(old.text, kind)
    prefixed = _PREFIXED.get(control.knob, ())
    if unit in prefixed:
        unit = best_unit(value, prefixed, kind.si_unit)
    return quantity(value, unit, kind=kind)
