"""Traps solved backwards: which power gives this frequency or this depth, which one still holds, which gradient lifts.

The search goes up and down in factors from where the trap stands, and closes in on the first change of sign; without
one, it climbs the highest peak that it saw. A power at which nothing is held counts as a frequency and a depth of zero.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
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

_NARROW = 2e-4
"""Relative distance from a peak of the reading to which it is looked for."""

_MOST_STEPS = 40

_FOUND = 1e-4
"""Relative distance from the wanted value that counts as met; where the trap lets go, the values jump."""


class NoSolution(ValueError):
    """No value of the control gives what is wanted; one sentence says between what was looked.

    `closest`: the value of the control that came closest, and its reading; None where nothing was read.
    """

    def __init__(self, sentence: str, closest: tuple[float, float] | None = None) -> None:
        super().__init__(sentence)
        self.closest = closest


@dataclass(frozen=True, kw_only=True, eq=False)
class Solved:
    """A value of the control, and the trap and its survey there; `also`: another value, on the other side of the start,
    that does it too."""

    value: float
    trap: Trap
    survey: Survey
    also: float | None = None


Change = Callable[[float], "Trap"]
Reading = Callable[[Survey], float | None]
Tell = Callable[[float], str]


def _three_digits(value: float) -> str:
    return f"{value:.3g}"


def solve(
    change: Change,
    reading: Reading,
    target: float,
    start: float,
    state: State,
    *,
    control: str = "value",
    tell: Tell = _three_digits,
    likely: Sequence[float] = (),
) -> Solved:
    """The value of a control at which a reading of the survey has the wanted value: the one nearest to the start.

    Parameters
    ----------
    change : gives the trap at a value of the control.
    reading : of a survey; None counts as zero.
    target : float. Positive.
    start : float. Positive, near which the search begins.
    control, tell : what an error calls the control, and a value of it.
    likely : positive values at which the reading may be large, where a narrow peak would be missed.

    Raises
    ------
    NoSolution : where none is found.
    """
    if not target > 0.0:
        raise ValueError(f"wanted value must be positive, got {target:g}")
    if not start > 0.0:
        raise ValueError(f"{control} must start from a positive value, got {start:g}")
    search = _Search(lambda logarithm: survey(change(math.exp(logarithm)), state), reading, target)
    brackets = search.brackets(math.log(start), [math.log(value) for value in likely])
    if not brackets:
        low, high = (tell(math.exp(edge)) for edge in search.edges)
        sentence = f"no {control} from {low} to {high} gives the wanted value"
        raise NoSolution(sentence, search.closest)
    roots = sorted(filter(search.met, map(search.root, brackets)), key=lambda root: abs(root - math.log(start)))
    if not roots:
        sentence = f"no {control} gives the wanted value: where the trap lets go, it jumps past it"
        raise NoSolution(sentence, search.closest)
    value, *others = (math.exp(root) for root in roots)
    return Solved(value=value, trap=change(value), survey=search.seen[roots[0]], also=others[0] if others else None)


class _Search:
    """Looks at surveys by the logarithm of the control; `seen` keeps them, `edges` are the lowest and the highest."""

    def __init__(self, at: Callable[[float], Survey], reading: Reading, target: float) -> None:
        self._at, self._reading, self._target = at, reading, target
        self.seen: dict[float, Survey] = {}

    def excess(self, logarithm: float) -> float:
        """Reading over the wanted value, less one."""
        if logarithm not in self.seen:
            self.seen[logarithm] = self._at(logarithm)
        value = self._reading(self.seen[logarithm])
        return (0.0 if value is None else value) / self._target - 1.0

    @property
    def edges(self) -> tuple[float, float]:
        return min(self.seen), max(self.seen)

    @property
    def closest(self) -> tuple[float, float] | None:
        """The value of the control whose reading is closest to the wanted one, with that reading."""
        read = {log: self._reading(found) for log, found in self.seen.items()}
        known = [(abs(value - self._target), log, value) for log, value in read.items() if value is not None]
        if not known:
            return None
        _, log, value = min(known)
        return math.exp(log), value

    def brackets(self, start: float, likely: Sequence[float]) -> list[tuple[float, float]]:
        """Ranges in which the excess changes its sign: the first ones going out from the start, one at most on each
        side; else one beside a peak, or a trough, between the places looked at."""
        here = self.excess(start)
        if here == 0.0:
            return [(start, start)]
        step = math.log(_FACTOR)
        edges = {-1: start, 1: start}
        for _ in range(_TIMES):
            found = []
            for sign in (1, -1):
                there = edges[sign] + sign * step
                if (self.excess(there) > 0.0) != (here > 0.0):
                    found.append((min(there, edges[sign]), max(there, edges[sign])))
                edges[sign] = there
            if found:
                return found
        for place in likely:
            if (self.excess(place) > 0.0) != (here > 0.0):
                return [(min(place, start), max(place, start))]
        return self._beside_peak(here, step)

    def _beside_peak(self, here: float, step: float) -> list[tuple[float, float]]:
        best = min(self.seen, key=lambda log: abs(self.excess(log)))
        low, high = self.edges
        while step > _NARROW and low < best < high:
            nearby = (best - step, best + step)
            for there in nearby:
                if (self.excess(there) > 0.0) != (here > 0.0):
                    beyond = there + 2.0 * (there - best)
                    further = [beyond] if (self.excess(beyond) > 0.0) == (here > 0.0) else []
                    return [(min(there, side), max(there, side)) for side in (best, *further)]
            better = min(nearby, key=lambda log: abs(self.excess(log)))
            if abs(self.excess(better)) < abs(self.excess(best)):
                best = better
            else:
                step *= 0.5
        return []

    def root(self, bracket: tuple[float, float]) -> float:
        """Where the excess changes its sign."""
        from scipy.optimize import brentq

        low, high = bracket
        return float(brentq(self.excess, low, high, xtol=_CLOSE, rtol=1e-12)) if low < high else low

    def met(self, root: float) -> bool:
        """Whether the wanted value is there, and not only jumped over."""
        return abs(self.excess(root)) <= _FOUND


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


def lowest_value(
    change: Change, start: float, state: State, *, control: str = "value", tell: Tell = _three_digits
) -> float:
    """Least value of a control with which the trap still holds atoms, by halving, to a relative 1e-6.

    Parameters
    ----------
    change : gives the trap at a value of the control.
    start : float. Positive, near which the search begins.
    control, tell : what an error calls the control, and a value of it.

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
            raise NoSolution(f"the trap holds nothing with a {control} from {tell(start)} to {tell(high)}")
    low = high
    while held(low):
        low /= _FACTOR
        if low < start / _FACTOR**_TIMES:
            raise NoSolution(f"the trap still holds atoms with a {control} of {tell(low)}")
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
