"""What a user does to the beams and coils of a plan, as plans: add, duplicate, move, rename, remove, change over.

A name that the ramp uses for a power follows a rename; what could not be saved or read again is refused in a sentence.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from app.plan_field import PlanError
from app.ramp_choices import StageChoice
from app.trap_choices import LONGEST_NAME, BeamChoice, CoilsChoice, Direction, TrapChoice, free_names
from app.units import DEPTH, FREQUENCY, Quantity, best_unit, quantity
from physics.ramps import Control, Knob

if TYPE_CHECKING:
    from app.answers.trap import TrapAnswer
    from app.plan import Plan

_X: Direction = (1.0, 0.0, 0.0)
_Y: Direction = (0.0, 1.0, 0.0)
_Z: Direction = (0.0, 0.0, 1.0)
_AXES = (_X, _Y, _Z)
_WAVELENGTHS = (Quantity("1064 nm", 1.064e-6), Quantity("1550 nm", 1.55e-6), Quantity("532 nm", 5.32e-7))
"""Of the lasers that most dipole traps are made with; the first that draws the atoms in is where a new trap starts."""

_POWER, _WAIST = Quantity("1 W", 1.0), Quantity("40 µm", 4e-5)
_FREQUENCIES = (Quantity("120 Hz", 120.0), Quantity("120 Hz", 120.0), Quantity("20 Hz", 20.0))


# ---------------------------------------------------------------- frequencies, or beams and coils


@dataclass(frozen=True)
class OtherSide:
    """What was typed on the side of the choice that is not in use, to come back to; None: nothing yet."""

    frequencies: TrapChoice | None = None
    made: TrapChoice | None = None

    def noting(self, trap: TrapChoice) -> OtherSide:
        """With what this trap says of its side."""
        return replace(self, frequencies=trap) if trap.harmonic else replace(self, made=trap)


def made_of_beams(plan: Plan, other: OtherSide) -> Plan:
    """The plan with the beams and coils that it had before, else with two beams that cross."""
    before = other.made
    if before is not None:
        return replace(plan, trap=before)
    return replace(plan, trap=TrapChoice(beams=crossed_pair(plan), gravity=plan.trap.gravity))


def given_by_frequencies(plan: Plan, other: OtherSide, surveyed: TrapAnswer | None) -> Plan:
    """The plan with the frequencies and the depth that it had before, else with those that its beams and coils make."""
    before = other.frequencies
    if before is not None:
        return replace(plan, trap=replace(before, gravity=plan.trap.gravity))
    frequencies, depth = _FREQUENCIES, None
    if surveyed is not None and surveyed.trap == plan.trap:
        found = surveyed.survey
        if found.frequencies is not None:
            x, y, z = (quantity(float(f), "Hz", kind=FREQUENCY, digits=4) for f in found.frequencies)
            frequencies = x, y, z
            depth = _depth_of(found.depth)
    return replace(plan, trap=TrapChoice(frequencies=frequencies, depth=depth, gravity=plan.trap.gravity))


def _depth_of(depth: float | None) -> Quantity | None:
    if depth is None or not DEPTH.low <= depth <= DEPTH.high:
        return None
    return quantity(depth, best_unit(depth, ("nK", "µK", "mK"), "J"), kind=DEPTH, digits=4)


def crossed_pair(plan: Plan) -> tuple[BeamChoice, BeamChoice]:
    """Two beams of one waist along x and y, of a wavelength that draws the atoms of the plan in."""
    a, b = (
        BeamChoice(name=name, wavelength=drawing_wavelength(plan), power=_POWER, waists=(_WAIST,), direction=along)
        for name, along in zip("AB", (_X, _Y), strict=True)
    )
    return a, b


def drawing_wavelength(plan: Plan) -> Quantity:
    """The first usual wavelength at which the polarizability of the plan's species is known and positive."""
    from physics.light import polarizability
    from physics.species import load_species

    isotope = load_species(plan.species.key).isotope
    for wavelength in _WAVELENGTHS:
        value = polarizability(isotope, wavelength.value).value
        if value is not None and value > 0.0:
            return wavelength
    return _WAVELENGTHS[0]


# ---------------------------------------------------------------- beams


def with_new_beam(plan: Plan) -> tuple[Plan, str]:
    """The plan with one more beam at the end, and its name: like the last one, along an axis that none has."""
    trap = plan.trap
    name = _free_name(trap)
    taken = [np.abs(beam.direction) / np.linalg.norm(beam.direction) for beam in trap.beams]
    free = (axis for axis in _AXES if not any(float(np.dot(axis, other)) > 0.9 for other in taken))
    last = trap.beams[-1] if trap.beams else crossed_pair(plan)[0]
    beam = replace(last, name=name, direction=next(free, _X), on=True)
    return _with_beams(plan, (*trap.beams, beam)), name


def with_duplicate(plan: Plan, name: str) -> tuple[Plan, str]:
    """The plan with a copy of a beam behind it, and the copy's name."""
    copy = _free_name(plan.trap)
    beams: list[BeamChoice] = []
    for beam in plan.trap.beams:
        beams.append(beam)
        if beam.name == name:
            beams.append(replace(beam, name=copy))
    return _with_beams(plan, tuple(beams)), copy


def with_beam_moved(plan: Plan, name: str, step: int) -> Plan:
    """The plan with a beam so many places further down, or up; at the end it stays."""
    beams = list(plan.trap.beams)
    place = beams.index(plan.trap.beam(name))
    beams.insert(min(max(place + step, 0), len(beams) - 1), beams.pop(place))
    return _with_beams(plan, tuple(beams))


def with_beam(plan: Plan, name: str, changed: BeamChoice) -> Plan:
    """The plan with a beam as it is now; where it got another name, the ramp follows."""
    changed_plan = replace(plan, trap=plan.trap.with_beam(name, changed))
    return changed_plan if changed.name == name else _renamed_in_ramp(changed_plan, name, changed.name)


def without_beam(plan: Plan, name: str) -> Plan:
    """The plan without a beam.

    Raises PlanError where nothing would be left, or where the ramp moves its power.
    """
    if any(control.beam == name for control in _controls(plan)):
        raise PlanError(f"the ramp moves the power of beam {name}, so it stays: switch it off instead")
    rest = tuple(beam for beam in plan.trap.beams if beam.name != name)
    if not rest and plan.trap.coils is None:
        raise PlanError("a trap needs a beam or coils: switch this one off, or give frequencies instead")
    return _with_beams(plan, rest)


def _with_beams(plan: Plan, beams: tuple[BeamChoice, ...]) -> Plan:
    return replace(plan, trap=replace(plan.trap, beams=beams))


def _free_name(trap: TrapChoice) -> str:
    name = next(free_names({beam.name for beam in trap.beams}))
    assert len(name) <= LONGEST_NAME
    return name


# ---------------------------------------------------------------- coils


def with_coils(plan: Plan) -> Plan:
    """The plan with coils that make a weak bias, which moves nothing by itself."""
    coils = CoilsChoice(bias=Quantity("1 G", 1e-4))
    return replace(plan, trap=replace(plan.trap, coils=coils))


def without_coils(plan: Plan) -> Plan:
    """The plan without coils; PlanError where nothing would be left, or where the ramp moves a part of them."""
    moved = next((control for control in _controls(plan) if control.knob in _OF_COILS), None)
    if moved is not None:
        raise PlanError(f"the ramp moves the {moved.label} of the coils, so they stay")
    if not plan.trap.beams:
        raise PlanError("a trap needs a beam or coils: add a beam first, or give frequencies instead")
    return replace(plan, trap=replace(plan.trap, coils=None))


# ---------------------------------------------------------------- what the ramp moves

_OF_COILS = (Knob.KNIFE, Knob.BIAS, Knob.GRADIENT, Knob.CURVATURE, Knob.LEVITATION)


def _controls(plan: Plan) -> Iterator[Control]:
    """Controls by which ramp and limits move the plan's own trap."""
    for stage in _own_stages(plan):
        yield from (move.control for move in stage.moves)
    yield from (limits.control for limits in plan.limits.controls)


def _own_stages(plan: Plan) -> tuple[StageChoice, ...]:
    """The stages before the cloud goes into another trap, whose beams are others."""
    others = (place for place, stage in enumerate(plan.ramp) if stage.trap is not None)
    return plan.ramp[: next(others, len(plan.ramp))]


def _renamed_in_ramp(plan: Plan, old: str, new: str) -> Plan:
    def name(control: Control) -> Control:
        return replace(control, beam=new) if control.beam == old else control

    own = _own_stages(plan)
    stages = tuple(
        replace(stage, moves=tuple(replace(move, control=name(move.control)) for move in stage.moves)) for stage in own
    )
    limits = tuple(replace(limits, control=name(limits.control)) for limits in plan.limits.controls)
    return replace(plan, ramp=(*stages, *plan.ramp[len(own) :]), limits=replace(plan.limits, controls=limits))
