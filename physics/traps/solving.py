"""Traps solved backwards: which power gives this frequency or this depth, which one still holds, which gradient lifts.

The search goes up and down in factors from where the trap stands, and closes in on the first change of sign. A power at
which nothing is held counts as a frequency and a depth of zero.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from physics.checks import Floats, as_floats
from physics.constants import standard_gravity
from physics.traps.descent import settle
from physics.traps.potential import NoPotential, potential_of
from physics.traps.survey import Survey, survey

if TYPE_CHECKING:
    from physics.species import State
    from physics.traps.trap import Trap

_FACTOR = 2.0
_TIMES = 10
"""Steps up and down, each by that factor, in which a solution is looked for."""

_CLOSE = 1e-6
"""Relative accuracy of a solution."""

_MOST_STEPS = 40

_FOUND = 1e-4
"""Relative distance from the wanted value that counts as met; where the trap lets go, the values jump."""


class NoSolution(ValueError):
    """No value of the control gives what is wanted; one sentence says between what was looked."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Solved:
    """A value of the control, and the trap and its survey there."""

    value: float
    trap: Trap
    survey: Survey


Change = Callable[[float], "Trap"]
Reading = Callable[[Survey], float | None]


def solve(
    change: Change, reading: Reading, target: float, start: float, state: State, *, control: str = "value"
) -> Solved:
    """The value of a control at which a reading of the survey has the wanted value.

    Parameters
    ----------
    change : gives the trap at a value of the control.
    reading : of a survey; None counts as zero.
    target : float. Positive.
    start : float. Positive, near which the search begins.
    control : what an error calls the control.

    Raises
    ------
    NoSolution : where none is found.
    """
    if not target > 0.0:
        raise ValueError(f"wanted value must be positive, got {target:g}")
    if not start > 0.0:
        raise ValueError(f"{control} must start from a positive value, got {start:g}")
    seen: dict[float, Survey] = {}

    def excess(logarithm: float) -> float:
        seen[logarithm] = survey(change(math.exp(logarithm)), state)
        value = reading(seen[logarithm])
        return (0.0 if value is None else value) / target - 1.0

    from scipy.optimize import brentq

    low, high = _bracket(excess, math.log(start), control)
    root = float(brentq(excess, low, high, xtol=_CLOSE, rtol=1e-12)) if low < high else low
    # What was computed last need not be the root itself.
    if abs(excess(root)) > _FOUND:
        raise NoSolution(f"no {control} gives the wanted value: where the trap lets go, it jumps past it")
    value = math.exp(root)
    return Solved(value=value, trap=change(value), survey=seen[root])


def _bracket(excess: Callable[[float], float], start: float, control: str) -> tuple[float, float]:
    here = excess(start)
    if here == 0.0:
        return start, start
    step = math.log(_FACTOR)
    edges = {-1: start, 1: start}
    for _ in range(_TIMES):
        for sign in (1, -1):
            there = edges[sign] + sign * step
            if (excess(there) > 0.0) != (here > 0.0):
                return min(there, edges[sign]), max(there, edges[sign])
            edges[sign] = there
    low, high = (math.exp(edges[sign]) for sign in (-1, 1))
    raise NoSolution(f"no {control} from {low:.3g} to {high:.3g} gives the wanted value")


def levitation_gradient(state: State) -> float:
    """Gradient m g/|dE/dB| of the field's magnitude along gravity that carries an atom. [T/m]

    Raises
    ------
    ValueError : for a state without a known magnetic moment.
    """
    slope = state.zeeman_slope
    if slope is None or slope.value == 0.0:
        raise ValueError(f"{state.key} in {state.name} has no known magnetic moment to be levitated by")
    return state.mass * standard_gravity / abs(slope.value)


def lowest_power(trap: Trap, state: State, beam: str) -> float:
    """Least power of a beam with which the trap still holds atoms. [W]

    Found by halving, then from the way in which the minimum softens: there the minimum and the pass merge, and the
    square of the determinant of the Hessian goes to zero as a straight line.

    Raises
    ------
    NoSolution : where the trap holds at no power, or without the beam too.
    """
    place = trap.beam(beam)
    start = place.power or 1.0

    def held(power: float) -> Survey:
        return survey(trap.with_beam(beam, power=power, on=True), state)

    high, found = start, held(start)
    while not found.trapped:
        if high > start * _FACTOR**_TIMES:
            raise NoSolution(f"the trap holds nothing up to a power of {high:.3g} W of beam {beam}")
        high *= 2.0
        found = held(high)
    if survey(trap.with_beam(beam, on=False), state).trapped:
        raise NoSolution(f"the trap holds atoms without beam {beam} too")
    low = 0.0
    while high - low > 0.1 * high:
        middle = 0.5 * (low + high)
        there = held(middle)
        if there.trapped:
            high, found = middle, there
        else:
            low = middle
        if high < 1e-12 * start:
            raise NoSolution(f"the trap holds atoms down to no power at all of beam {beam}")
    return _edge(trap, state, beam, high, as_floats(found.minimum))


def lowest_value(change: Change, start: float, state: State, *, control: str = "value") -> float:
    """Least value of a control with which the trap still holds atoms, by halving, to a relative 1e-6.

    Parameters
    ----------
    change : gives the trap at a value of the control.
    start : float. Positive, near which the search begins.
    control : what an error calls the control.

    Raises
    ------
    NoSolution : where the trap holds at no value that is looked at, or at all of them.
    """
    if not start > 0.0:
        raise ValueError(f"{control} must start from a positive value, got {start:g}")

    def held(value: float) -> bool:
        return survey(change(value), state).trapped

    high = start
    while not held(high):
        high *= _FACTOR
        if high > start * _FACTOR**_TIMES:
            raise NoSolution(f"the trap holds nothing from {start:.3g} to {high:.3g}, the {control}")
    low = high
    while held(low):
        low /= _FACTOR
        if low < start / _FACTOR**_TIMES:
            raise NoSolution(f"the trap still holds atoms at {low:.3g}, the {control}")
    high = min(high, _FACTOR * low)
    while high - low > _CLOSE * high:
        middle = 0.5 * (low + high)
        low, high = (low, middle) if held(middle) else (middle, high)
    return high


def _edge(trap: Trap, state: State, beam: str, power: float, minimum: Floats) -> float:
    """Where the square of the determinant of the Hessian goes to zero, coming down from a power at which it is not."""
    far, (far_square, minimum) = 1.02 * power, _stiffness(trap, state, beam, 1.02 * power, minimum)
    square, minimum = _stiffness(trap, state, beam, power, minimum)
    edge = power
    for _ in range(_MOST_STEPS):
        if not far_square > square > 0.0:
            break
        edge = power - square * (far - power) / (far_square - square)
        if power - edge < _CLOSE * power:
            break
        for part in (0.1, 0.3, 0.6, 0.9):
            closer = edge + part * (power - edge)
            next_square, next_minimum = _stiffness(trap, state, beam, closer, minimum)
            if next_square > 0.0:
                break
        far, far_square, power, square, minimum = power, square, closer, next_square, next_minimum
    return edge


def _stiffness(trap: Trap, state: State, beam: str, power: float, start: Floats) -> tuple[float, Floats]:
    """Square of the determinant of the Hessian at the minimum, and the minimum; NaN where it is gone."""
    try:
        potential = potential_of(trap.with_beam(beam, power=power, on=True), state)
    except NoPotential:
        return math.nan, start
    minimum = settle(potential, start, potential.length, 100.0 * potential.length)
    if minimum is None:
        return math.nan, start
    values = np.linalg.eigvalsh(potential.hessian(minimum)[2])
    return (float(np.prod(values / values[-1])) ** 2 if values[0] > 0.0 else math.nan), minimum
