"""The harmonic trap of a cloud: given by its frequencies, or from the survey of beams and coils.

Frequencies and depth of a surveyed trap follow its uncertain numbers (powers, waists, gradients ...) to first order.
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
from app.answers.trap import KEPT, trap_answer, trap_of
from app.plan_field import PlanError
from app.units import Quantity
from physics.traps import HarmonicTrap, Trap

if TYPE_CHECKING:
    from app.plan import Plan, TrapChoice

Array = NDArray[np.float64]

STEP = 1e-3
"""Change of a number, in standard deviations, by which the first derivatives are taken."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Slope:
    """How the logarithms of the three frequencies and of the depth follow one number of the trap: in its logarithm
    where it is positive, else in itself."""

    centre: float
    frequencies: Array
    depth: float

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


def trap_in_use(plan: Plan, numbers: Mapping[str, float | Array]) -> HarmonicTrap:
    """The harmonic trap of these numbers; many draws of a number make as many traps.

    Raises PlanError, in one sentence, where beams and coils hold nothing or have no frequencies.
    """
    if plan.trap.frequencies is not None:
        frequencies = np.stack(np.broadcast_arrays(*(numbers[f"frequency {axis}"] for axis in range(3))), axis=-1)
        return HarmonicTrap(frequencies=frequencies, depth=numbers.get("depth"))
    central = surveyed_trap(plan)
    exponents, deeper = np.zeros(3), np.zeros(())
    for name, slope in trap_slopes(plan).items():
        away = slope.distance(numbers[name])
        exponents = exponents + away[..., np.newaxis] * slope.frequencies
        deeper = deeper + away * slope.depth
    depth = None if central.depth is None else central.depth * np.exp(deeper)
    return HarmonicTrap(frequencies=central.frequencies * np.exp(exponents), depth=depth)


def surveyed_trap(plan: Plan) -> HarmonicTrap:
    """The harmonic trap at the minimum of the plan's beams and coils.

    Raises PlanError, in one sentence, where they hold nothing or have no frequencies.
    """
    from app.trap_words import reason_no_frequencies, reason_not_trapped

    answer = trap_answer(plan)
    if not answer.trapped:
        raise PlanError(f"the trap of this plan, {plan.trap.makers}, holds no atoms: {reason_not_trapped(answer)}")
    harmonic = answer.survey.harmonic
    if harmonic is None:
        raise PlanError(
            f"the trap of this plan, {plan.trap.makers}, has no frequencies, and this version answers for a cloud only "
            f"with them: {reason_no_frequencies(answer)}"
        )
    return harmonic


@part("species.key", "species.state", "trap", keep=KEPT)
def trap_slopes(plan: Plan) -> dict[str, Slope]:
    """Name of each uncertain number of beams and coils -> how the harmonic trap follows it."""
    from physics.traps.potential import potential_of
    from physics.traps.response import nearby

    answer = trap_answer(plan)
    slopes = {}
    for name, (quantity, put) in _uncertain(plan.trap):
        sigma = quantity.sigma or 0.0
        step = STEP * min(sigma, abs(quantity.value)) if quantity.value else STEP * sigma
        ends = []
        for value in (quantity.value - step, quantity.value + step):
            trap = trap_of(replace(plan, trap=put(replace(quantity, value=value))))
            assert isinstance(trap, Trap)  # put changes a beam or the coils
            ends.append(nearby(answer.survey, potential_of(trap, answer.state)))
        below, above = ends
        if below is None or above is None:
            continue  # at the edge of what is held, where there is no first order
        width = math.log((quantity.value + step) / (quantity.value - step)) if quantity.value > 0.0 else 2.0 * step
        depths = below.depth, above.depth
        slopes[name] = Slope(
            centre=quantity.value,
            frequencies=np.log(above.frequencies / below.frequencies) / width,
            depth=0.0 if None in depths else float(np.log(above.depth / below.depth)) / width,
        )
    return slopes


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
