"""The trap of a cloud: harmonic where its frequencies are given, else what the survey of beams and coils found.

Frequencies, depth, volume and minimum of a surveyed trap follow its uncertain numbers (powers, waists, gradients ...)
to first order, its volume curve keeps its shape: W at a low energy goes as 1 over the product of the frequencies.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, fields, replace
from functools import partial
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from app.answers.part import part
from app.answers.trap import KEPT, TrapAnswer, trap_answer, trap_of
from app.plan_field import PlanError
from app.units import Quantity
from physics.traps import HarmonicTrap, Trap

if TYPE_CHECKING:
    from app.plan import Plan, TrapChoice
    from physics.real_trap import RealTrap

Array = NDArray[np.float64]

STEP = 1e-3
"""Change of a number, in standard deviations, by which the first derivatives are taken."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Slope:
    """How the logarithms of the three frequencies, of the depth and of the volume at a low energy, and the place of the
    minimum [m], follow one number of the trap: in its logarithm where it is positive, else in itself."""

    centre: float
    frequencies: Array
    depth: float
    room: float
    minimum: Array

    def distance(self, values: float | Array) -> Array:
        """How far values of the number are from its central one."""
        moved = np.asarray(values, dtype=np.float64)
        return np.log(moved / self.centre) if self.centre > 0.0 else moved - self.centre


def trap_inputs(plan: Plan) -> dict[str, Quantity]:
    """The quantities of the trap that enter an answer, by name: frequencies and depth, or what is uncertain of beams
    and coils."""
    choice = plan.trap
    if choice.frequencies is None:
        return {name: quantity for name, (quantity, _) in _uncertain(choice)}
    named = {f"frequency {axis}": quantity for axis, quantity in enumerate(choice.frequencies)}
    return named if choice.depth is None else {**named, "depth": choice.depth}


def trap_in_use(plan: Plan, numbers: Mapping[str, float | Array]) -> HarmonicTrap | RealTrap:
    """The trap of these numbers; many draws of a number make as many traps.

    Raises PlanError, in one sentence, where beams and coils hold nothing.
    """
    if plan.trap.frequencies is not None:
        frequencies = np.stack(np.broadcast_arrays(*(numbers[f"frequency {axis}"] for axis in range(3))), axis=-1)
        return HarmonicTrap(frequencies=frequencies, depth=numbers.get("depth"))
    central, slopes = central_trap(plan), trap_slopes(plan)
    if not slopes:
        return central
    exponents, deeper, wider = np.zeros(3), np.zeros(()), np.zeros(())
    for name, slope in slopes.items():
        away = slope.distance(numbers[name])
        exponents = exponents + away[..., np.newaxis] * slope.frequencies
        deeper, wider = deeper + away * slope.depth, wider + away * slope.room
    if isinstance(central, HarmonicTrap):
        depth = None if central.depth is None else central.depth * np.exp(deeper)
        return HarmonicTrap(frequencies=central.frequencies * np.exp(exponents), depth=depth)
    return central.resized(depth=np.exp(deeper), frequencies=np.exp(exponents), room=np.exp(wider))


def minimum_in_use(plan: Plan, numbers: Mapping[str, float | Array]) -> Array:
    """(..., 3) Where the minimum of the plan's beams and coils is for these numbers. [m]"""
    place = np.asarray(_held(plan).survey.minimum, dtype=np.float64)
    for name, slope in trap_slopes(plan).items():
        place = place + slope.distance(numbers[name])[..., np.newaxis] * slope.minimum
    return place


@part("species.key", "species.state", "trap", keep=KEPT)
def central_trap(plan: Plan) -> HarmonicTrap | RealTrap:
    """The trap of the plan's beams and coils, with what clouds in it need; harmonic where its depth is not known.

    Raises PlanError, in one sentence, where they hold nothing, or have neither a known depth nor frequencies.
    """
    from physics.real_trap import real_trap

    found = _held(plan).survey
    if found.depth is None or found.volume_curve is None:
        return surveyed_trap(plan)
    trap = real_trap(found)
    trap.levels.prepare()
    trap.condensates.prepare()
    return trap


def _held(plan: Plan) -> TrapAnswer:
    from app.trap_words import reason_not_trapped

    answer = trap_answer(plan)
    if not answer.trapped:
        raise PlanError(f"the trap of this plan, {plan.trap.makers}, holds no atoms: {reason_not_trapped(answer)}")
    return answer


def surveyed_trap(plan: Plan) -> HarmonicTrap:
    """The harmonic trap at the minimum of the plan's beams and coils.

    Raises PlanError, in one sentence, where they hold nothing or have no frequencies.
    """
    from app.trap_words import reason_no_frequencies

    answer = _held(plan)
    harmonic = answer.survey.harmonic
    if harmonic is None:
        raise PlanError(
            f"the trap of this plan, {plan.trap.makers}, has no frequencies, which are needed here: "
            f"{reason_no_frequencies(answer)}"
        )
    return harmonic


@part("species.key", "species.state", "trap", keep=KEPT)
def trap_slopes(plan: Plan) -> dict[str, Slope]:
    """Name of each uncertain number of beams and coils -> how the trap follows it."""
    answer = trap_answer(plan)
    slopes = {}
    for name, (quantity, put) in _uncertain(plan.trap):
        sigma = quantity.sigma or 0.0
        step = STEP * min(sigma, abs(quantity.value)) if quantity.value else STEP * sigma
        ends = []
        for value in (quantity.value - step, quantity.value + step):
            trap = trap_of(replace(plan, trap=put(replace(quantity, value=value))))
            assert isinstance(trap, Trap)  # put changes a beam or the coils
            ends.append(_nearby(answer, trap))
        below, above = ends
        if below is None or above is None:
            continue  # at the edge of what is held, where there is no first order
        width = math.log((quantity.value + step) / (quantity.value - step)) if quantity.value > 0.0 else 2.0 * step
        frequencies, depth, room, place = ((high - low) / width for low, high in zip(below, above, strict=True))
        slopes[name] = Slope(
            centre=quantity.value, frequencies=frequencies, depth=float(depth), room=float(room), minimum=place
        )
    return slopes


def trap_change(plan: Plan) -> float:
    """Largest change of the logarithm of a frequency, the depth or the volume by one standard deviation of one
    uncertain number of beams and coils; 0 where none is uncertain."""
    quantities, changes = trap_inputs(plan), [0.0]
    for name, slope in trap_slopes(plan).items():
        quantity = quantities[name]
        away = abs(float(slope.distance(quantity.value + (quantity.sigma or 0.0))))
        changes.append(away * max(*np.abs(slope.frequencies), abs(slope.depth), abs(slope.room)))
    return float(np.nanmax(changes))


def _nearby(answer: TrapAnswer, trap: Trap) -> tuple[Array, Array, Array, Array] | None:
    """Logarithms, but for constants, of the frequencies, the depth and the volume of a trap that differs a little from
    the surveyed one, and its minimum; None where it cannot be followed."""
    from physics.traps.potential import potential_of
    from physics.traps.response import nearby, nearby_minimum

    if answer.survey.frequencies is not None:
        potential = potential_of(trap, answer.state)
        near, place = nearby(answer.survey, potential), nearby_minimum(answer.survey, potential)
        if near is None or place is None:
            return None
        logs = np.log(near.frequencies)
        return logs, np.log(1.0 if near.depth is None else near.depth), -np.sum(logs), place
    # A cusp is quick to survey, and there is no shorter way.
    from physics.traps.survey import survey

    found = survey(trap, answer.state)
    if found.depth is None or found.volume_curve is None:
        return None
    place = np.asarray(found.minimum, dtype=np.float64)
    return np.zeros(3), np.log(found.depth), np.log(found.volume_curve.coefficient), place


_Put = Callable[[Quantity], "TrapChoice"]


def _uncertain(choice: TrapChoice) -> Iterator[tuple[str, tuple[Quantity, _Put]]]:
    """Name of each uncertain number of beams and coils, with it, and the trap with another in its place."""
    for beam in choice.beams:
        if beam.on:
            for name, quantity, put in _uncertain_of(beam):
                yield f"{name} of beam {beam.name}", (quantity, partial(_with_beam, choice, beam.name, put))
    if choice.coils is not None:
        for name, quantity, put in _uncertain_of(choice.coils):
            yield f"{name} of the coils", (quantity, partial(_with_coils, choice, put))


def _uncertain_of(item: Any) -> Iterator[tuple[str, Quantity, Callable[[Quantity], Any]]]:
    for field in fields(item):
        value = getattr(item, field.name)
        if isinstance(value, Quantity):
            if value.sigma:
                yield field.name, value, partial(_with, item, field.name)
        elif isinstance(value, tuple):
            for place, part_of in enumerate(value):
                if isinstance(part_of, Quantity) and part_of.sigma:
                    yield f"{field.name} {place}", part_of, partial(_with_place, item, field.name, place)


def _with(item: Any, name: str, quantity: Quantity) -> Any:
    return replace(item, **{name: quantity})


def _with_place(item: Any, name: str, place: int, quantity: Quantity) -> Any:
    values = list(getattr(item, name))
    values[place] = quantity
    return replace(item, **{name: tuple(values)})


def _with_beam(choice: TrapChoice, name: str, put: Callable[[Quantity], Any], quantity: Quantity) -> TrapChoice:
    return choice.with_beam(name, put(quantity))


def _with_coils(choice: TrapChoice, put: Callable[[Quantity], Any], quantity: Quantity) -> TrapChoice:
    return replace(choice, coils=put(quantity))
