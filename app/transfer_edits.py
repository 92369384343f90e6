"""What a user can do to the traps that a ramp hands its cloud to: plans in, plans out, as in `ramp_edits`.

The trap of a stage is edited as the trap of a plan of its own: that stage and those after it.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

from app.plan import LimitsChoice, Plan
from app.plan_field import PlanError
from app.ramp_choices import Handing
from app.ramp_edits import USUAL_TRUNCATION, control_quantity, standing_at, usual_depth_unit, with_stage
from app.trap_choices import TrapChoice
from app.units import DEPTH, quantity
from physics.constants import boltzmann
from physics.ramps import Control, Knob

_COIL_PARTS = {
    Knob.KNIFE: "knife",
    Knob.BIAS: "bias",
    Knob.GRADIENT: "gradient",
    Knob.CURVATURE: "curvature",
    Knob.LEVITATION: "levitation",
}


def with_transfer(plan: Plan, place: int, handing: Handing | None, trap: TrapChoice | None = None) -> Plan:
    """The plan whose stage begins in another trap, slowly or suddenly; None: in the trap of the stage before.

    trap : None: the one that it has, or else one like that of the stage before, as its controls stand then
    """
    stage = plan.ramp[place]
    if handing is None:
        return with_stage(plan, place, replace(stage, handing=None, trap=None))
    return with_stage(
        plan, place, replace(stage, handing=handing, trap=trap or stage.trap or _trap_before(plan, place))
    )


def _trap_before(plan: Plan, place: int) -> TrapChoice:
    trap = next((stage.trap for stage in reversed(plan.ramp[:place]) if stage.trap is not None), plan.trap)
    if trap.frequencies is not None:
        depth = trap.depth
        if depth is None:
            value = USUAL_TRUNCATION * boltzmann * plan.cloud.temperature.value
            depth = quantity(value, usual_depth_unit(value), kind=DEPTH, digits=2)
        return replace(trap, depth=depth)
    standing = standing_at(plan, place)
    scale = standing.get(Control(Knob.SCALE), 1.0)
    for beam in trap.beams:
        control = Control(Knob.POWER, beam.name)
        power = scale * standing.get(control, math.nan)
        if math.isfinite(power) and not math.isclose(power, beam.power.value, rel_tol=1e-9):
            trap = trap.with_beam(beam.name, replace(beam, power=control_quantity(control, power)))
    if trap.coils is not None:
        parts: dict[str, Any] = {
            name: control_quantity(Control(knob), standing[Control(knob)])
            for knob, name in _COIL_PARTS.items()
            if math.isfinite(standing.get(Control(knob), math.nan))
            and not math.isclose(standing[Control(knob)], getattr(trap.coils, name).value, rel_tol=1e-9)
        }
        trap = replace(trap, coils=replace(trap.coils, **parts))
    return trap


def trap_text(trap: TrapChoice) -> str:
    """A trap in a few words: its frequencies, or what makes it."""
    if trap.frequencies is None:
        return trap.makers
    depth = f", {trap.depth.text} deep" if trap.depth is not None else ""
    return " × ".join(f.text for f in trap.frequencies) + depth


def piece_of(plan: Plan, place: int) -> Plan:
    """The plan whose trap is that of a stage, and whose ramp is that stage and those after it.

    Raises
    ------
    PlanError
        The stage does not begin in another trap.
    """
    stage = plan.ramp[place]
    if stage.trap is None:
        raise PlanError(f"stage {place + 1} of the ramp does not begin in another trap")
    own = replace(stage, handing=None, trap=None)
    return replace(
        plan, trap=stage.trap, ramp=(own, *plan.ramp[place + 1 :]), limits=LimitsChoice(), measured=(), passenger=None
    )


def with_piece(plan: Plan, place: int, piece: Plan) -> Plan:
    """The plan whose stage begins in the trap of an edited piece; names that its ramp has changed are taken over."""
    own = replace(piece.ramp[0], handing=plan.ramp[place].handing, trap=piece.trap)
    return replace(plan, ramp=(*plan.ramp[:place], own, *piece.ramp[1:]))
