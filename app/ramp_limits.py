"""What a user can do to the limits that a designed ramp keeps: plans in, plans out."""

from __future__ import annotations

from dataclasses import replace

from app.plan import Plan
from app.ramp_choices import ControlLimits
from app.units import Quantity
from physics.ramps import Control

BOUNDS = ("low", "high", "fastest")


def limits_for(plan: Plan, control: Control) -> ControlLimits:
    """The limits of a control; without any bound where none are given."""
    found = next((limits for limits in plan.limits.controls if limits.control == control), None)
    return found or ControlLimits(control=control)


def with_longest_time(plan: Plan, time: Quantity | None) -> Plan:
    """The plan with another longest time of a ramp."""
    return replace(plan, limits=replace(plan.limits, time=time))


def with_bound(plan: Plan, control: Control, name: str, value: Quantity | None) -> Plan:
    """The plan with another bound of a control, one of `BOUNDS`; None takes it away."""
    changed = replace(limits_for(plan, control), **{name: value})  # type: ignore[arg-type]
    others = tuple(limits for limits in plan.limits.controls if limits.control != control)
    empty = all(getattr(changed, bound) is None for bound in BOUNDS)
    return replace(plan, limits=replace(plan.limits, controls=others if empty else (*others, changed)))
