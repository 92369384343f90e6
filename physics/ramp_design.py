"""The ramp of one control that leaves most atoms at a target.

The truncation parameter is held, or drifts with the depth. Each choice of it is one evaporation: how many atoms are
left at the target, and how long it takes. The best within the limits becomes a ramp of a few exponential stages.

References
----------
[1] C. A. Sackett, C. C. Bradley, R. G. Hulet, Phys. Rev. A 55, 3797 (1997): optimising evaporation. Recalled.
[2] K. M. O'Hara, M. E. Gehm, S. R. Granade, J. E. Thomas, Phys. Rev. A 64, 051403 (2001): held truncation in light.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from enum import Enum
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from physics.checks import Floats
from physics.evaporation import Cancelled, Evaporation, evaporate
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.held_truncation import SLOWEST_TIME, HeldKinetics, HeldRun, Law, Limits, Line, line_of
from physics.losses import Losses
from physics.passenger import Passenger
from physics.ramp_shapes import Shape
from physics.ramps import Control, Move, Ramp, Stage
from physics.trap_path import TrapPath

if TYPE_CHECKING:
    from physics.sympathetic import SympatheticCooling

LOWEST_HELD, HIGHEST_HELD = 3.5, 14.0
"""Range of the truncation parameter that is searched."""

_SCAN, _REFINE = 15, 9
_DRIFTS = (-1.5, -0.75, 0.75, 1.5)
_EASED = 0.1
_MUCH_OF_IT = 0.2
"""Share of its time for which a control that does not reach the target rests at an end, or moves as fast as it may."""


class Bound(Enum):
    """What keeps more atoms from the target."""

    BACKGROUND = "background gas"
    TWO_BODY = "two-body loss"
    THREE_BODY = "three-body loss"
    HEATING = "heating"
    COLLISIONS = "slow collisions"
    PASSENGER = "heat of the passenger"
    TIME = "time limit"
    SPEED = "speed limit"
    RANGE = "range of the control"

    @property
    def label(self) -> str:
        return self.value


@dataclass(frozen=True, kw_only=True, eq=False)
class TradeOff:
    """What the choice of the truncation parameter does: one entry a run, held without drift.

    Attributes
    ----------
    truncation, atoms, time, reached : (n,) of the runs, by truncation parameter. Atoms are those at the end of the run.
    times, best_atoms, best_truncation : (m,) the fewest times, and the most atoms at the target for each, drift or not.
    """

    truncation: Floats
    atoms: Floats
    time: Floats
    reached: Floats
    times: Floats
    best_atoms: Floats
    best_truncation: Floats


@dataclass(frozen=True, kw_only=True, eq=False)
class RampDesign:
    """A designed ramp.

    Attributes
    ----------
    ramp : Ramp. Stages of one control, to be changed like any other.
    simulated : Evaporation. Along that ramp, to the target.
    truncation, drift : the law that it follows. [1]
    reached : bool. Whether any run reached the target; where none did the ramp is that of the highest degeneracy.
    trade_off : TradeOff
    passenger : SympatheticCooling or None. Both along that ramp, where there is a passenger.
    bounds : what binds: gain in ln N at the target for easing each by a tenth, the largest first; NaN where that is not
        told: of a range, and of all where the target is out of reach.
    """

    ramp: Ramp
    simulated: Evaporation
    truncation: float
    drift: float
    reached: bool
    trade_off: TradeOff
    passenger: SympatheticCooling | None = None
    bounds: tuple[tuple[Bound, float], ...] = field(default_factory=tuple)


def design_ramp(
    gas: Gas,
    atoms: float,
    temperature: float,
    path: TrapPath,
    control: Control,
    target: Target,
    *,
    losses: Losses | None = None,
    limits: Limits | None = None,
    drift: bool = True,
    stages: int = 6,
    passenger: Passenger | None = None,
    tick: Callable[[float], bool] | None = None,
) -> RampDesign:
    """Choose the truncation parameter, and with it the time, for most atoms at the target.

    Parameters
    ----------
    gas, atoms, temperature, path, losses, target : as of `physics.evaporation.evaporate`.
    control : Control. The one that moves; the others stay where they stand.
    limits : Limits
    drift : bool. Whether the truncation parameter may drift.
    stages : int. Of the ramp that comes back.
    passenger : Passenger or None. A second gas, whose heat the first carries off; the range of the control ends where
        it is not held any more. The aim stays most atoms of the first at its target.
    tick : called with the share that is done; False ends with `Cancelled`.

    Raises
    ------
    ValueError : for atoms that do not collide, what `line_of` refuses, or a passenger that is not held at the start.
    """
    limits, losses = limits or Limits(), losses or Losses()
    _ = gas.cold_cross_section
    if not gas.collides:
        raise ValueError("atoms that do not collide cannot be evaporated")
    if stages < 1:
        raise ValueError(f"a designed ramp needs one stage or more, got {stages}")
    line = line_of(path, control, limits)
    held = HeldKinetics(gas, losses, line, limits)
    if passenger is not None:
        from physics.held_together import HeldTogether

        held = HeldTogether(gas, losses, line, limits, passenger)
    search = _Search(held, atoms, temperature, target, limits, tick)
    best = search.optimise(drift)
    bounds = _bounds(search, best, losses)
    case = _Case(gas, atoms, temperature, path, losses, target, passenger)
    ramp, (simulated, together) = _as_ramp(search, best, stages, case, limits)
    return RampDesign(
        ramp=ramp,
        simulated=simulated,
        passenger=together,
        truncation=best.law.start,
        drift=best.law.drift,
        reached=best.reached,
        trade_off=search.trade_off(),
        bounds=bounds,
    )


class _Search:
    """Runs at held truncation parameters, each done once."""

    def __init__(
        self,
        held: HeldKinetics,
        atoms: float,
        temperature: float,
        target: Target,
        limits: Limits,
        tick: Callable[[float], bool] | None,
    ) -> None:
        self.held, self.target, self.tick = held, target, tick
        self.start = held.start(atoms, temperature)
        # A ramp of a few stages may take a little longer than the run that it follows.
        self.longest = SLOWEST_TIME if limits.time is None else 0.99 * limits.time
        self.runs: dict[Law, HeldRun] = {}
        self.expected = _SCAN + _REFINE + len(_DRIFTS) * _REFINE + 14

    def run(self, law: Law) -> HeldRun:
        if law not in self.runs:
            if self.tick is not None and not self.tick(min(len(self.runs) / self.expected, 0.95)):
                raise Cancelled
            self.runs[law] = self.held.run(law, self.start, self.target, self.longest)
        return self.runs[law]

    def score(self, run: HeldRun) -> float:
        """ln N where the target is reached; below all of these, by how far it went, where not."""
        if run.reached:
            return math.log(run.atoms)
        # ln of E^(-3) N^4 w^3 in a harmonic trap: how degenerate; it orders runs that fall short.
        trap = self.held.line.curve.at(run.place, 0.0)
        density = 4.0 * math.log(run.atoms) - 3.0 * math.log(run.energy) + 1.5 * math.log(trap.depth)
        return -1e6 + density - math.log(trap.level_volume)

    def best_between(self, low: float, high: float, drift: float, count: int) -> HeldRun:
        """Golden-section search."""
        ratio = 0.5 * (math.sqrt(5.0) - 1.0)
        ends = [low, high]
        inner = [high - ratio * (high - low), low + ratio * (high - low)]
        found = [self.run(Law(start=x, drift=drift)) for x in inner]
        for _ in range(count):
            if self.score(found[0]) >= self.score(found[1]):
                ends[1] = inner[1]
                inner = [ends[1] - ratio * (ends[1] - ends[0]), inner[0]]
                found = [self.run(Law(start=inner[0], drift=drift)), found[0]]
            else:
                ends[0] = inner[0]
                inner = [inner[1], ends[0] + ratio * (ends[1] - ends[0])]
                found = [found[1], self.run(Law(start=inner[1], drift=drift))]
        return max(found, key=self.score)

    def optimise(self, drift: bool) -> HeldRun:
        grid = np.linspace(LOWEST_HELD, HIGHEST_HELD, _SCAN).tolist()
        scanned = [self.run(Law(start=eta)) for eta in grid]
        index = max(range(_SCAN), key=lambda k: self.score(scanned[k]))
        low, high = grid[max(index - 1, 0)], grid[min(index + 1, _SCAN - 1)]
        best = max(self.best_between(low, high, 0.0, _REFINE - 2), scanned[index], key=self.score)
        if drift:
            for rate in _DRIFTS:
                # Half of the drift over the first decade is taken off the start.
                centre = best.law.start + 0.5 * (best.law.drift - rate)
                near = self.best_between(max(centre - 1.2, 2.5), centre + 1.2, rate, _REFINE - 3)
                best = max(best, near, key=self.score)
        return best

    def trade_off(self) -> TradeOff:
        held = sorted((run for law, run in self.runs.items() if law.drift == 0.0), key=lambda run: run.law.start)
        front: list[HeldRun] = []
        for run in sorted((run for run in self.runs.values() if run.reached), key=lambda run: run.time):
            if not front or run.atoms > front[-1].atoms:
                front.append(run)
        return TradeOff(
            truncation=np.array([run.law.start for run in held]),
            atoms=np.array([run.atoms for run in held]),
            time=np.array([run.time for run in held]),
            reached=np.array([run.reached for run in held]),
            times=np.array([run.time for run in front]),
            best_atoms=np.array([run.atoms for run in front]),
            best_truncation=np.array([run.law.start for run in front]),
        )


def _bounds(search: _Search, best: HeldRun, losses: Losses) -> tuple[tuple[Bound, float], ...]:
    """Gain in ln N for easing each by a tenth, at the same law; of the time limit, by easing it at the best law."""
    held, found = search.held, {}
    limits, gas = held.limits, held.gas
    if not best.reached:
        in_the_way = (
            (Bound.RANGE, best.at_end > _MUCH_OF_IT),
            (Bound.SPEED, best.speed_limited > _MUCH_OF_IT),
            (Bound.TIME, limits.time is not None and best.time > 0.99 * search.longest and best.at_end < _MUCH_OF_IT),
        )
        return tuple((bound, math.nan) for bound, binds in in_the_way if binds)

    def gain(gas: Gas, losses: Losses, limits: Limits, law: Law = best.law, longest: float = 0.0) -> float:
        eased = held.eased(gas=gas, losses=losses, limits=limits)
        run = eased.run(law, search.start, search.target, longest or search.longest)
        return math.log(run.atoms / best.atoms) if run.reached else -math.inf

    less = 1.0 - _EASED
    if losses.background_lifetime is not None:
        eased = replace(losses, background_lifetime=losses.background_lifetime / less)
        found[Bound.BACKGROUND] = gain(gas, eased, limits)
    for bound, names in (
        (Bound.TWO_BODY, ("two_body",)),
        (Bound.THREE_BODY, ("three_body",)),
        (Bound.HEATING, ("heating", "intensity_noise", "pointing_noise")),
    ):
        values = {name: value for name in names if (value := getattr(losses, name)) is not None and float(value) > 0.0}
        if values:
            easier = {name: less * value for name, value in values.items()}
            found[bound] = gain(gas, replace(losses, **easier), limits)
    root = math.sqrt(1.0 + _EASED)
    faster = replace(
        gas,
        scattering_length=None if gas.scattering_length is None else gas.scattering_length * root,
        dipolar_length=None if gas.dipolar_length is None else gas.dipolar_length * root,
    )
    found[Bound.COLLISIONS] = gain(faster, losses, limits)
    fewer = held.with_lighter_load(search.start, less)
    if fewer is not None:
        run = held.run(best.law, fewer, search.target, search.longest)
        found[Bound.PASSENGER] = math.log(run.atoms / best.atoms) if run.reached else -math.inf
    longer = search.longest * (1.0 + _EASED)
    # More time allows a higher truncation parameter: worth something only where the limit was in the way.
    steps = (0.1, 0.2, 0.4)
    gains = [gain(gas, losses, limits, replace(best.law, start=best.law.start + s), longer) for s in steps]
    if best.time > 0.8 * search.longest:
        found[Bound.TIME] = max(0.0, *gains)
    if best.speed_limited > 0.01 and limits.fastest is not None:
        quicker = replace(limits, fastest=limits.fastest * (1.0 + _EASED))
        found[Bound.SPEED] = gain(gas, losses, quicker)
    if best.at_end > 0.01:
        found[Bound.RANGE] = math.nan
    ordered = sorted(found.items(), key=lambda item: math.inf if math.isnan(item[1]) else item[1], reverse=True)
    return tuple((bound, value) for bound, value in ordered if math.isnan(value) or value > 1e-4)


class _Case(NamedTuple):
    """What a designed ramp is simulated with."""

    gas: Gas
    atoms: float
    temperature: float
    path: TrapPath
    losses: Losses
    target: Target
    passenger: Passenger | None

    def run(self, ramp: Ramp) -> _Simulated:
        gas, atoms, temperature, path, losses, target, passenger = self
        if passenger is None:
            return evaporate(gas, atoms, temperature, ramp, path, losses=losses, target=target), None
        from physics.sympathetic import evaporate_with_passenger

        both = evaporate_with_passenger(
            gas, atoms, temperature, ramp, path, passenger, losses=losses, target=target
        )  # fmt: skip
        return both.coolant, both


_Simulated = tuple[Evaporation, "SympatheticCooling | None"]


def _as_ramp(search: _Search, best: HeldRun, stages: int, case: _Case, limits: Limits) -> tuple[Ramp, _Simulated]:
    """Stages through the course of the control, a little further than the target, cut where that is reached."""
    line = search.held.line
    times, places = _course(best)
    knots = _knots(times, places, stages)
    values = [line.value(float(np.interp(t, times, places))) for t in knots]
    ramp = _staged(line, knots, values, limits)
    if best.reached:
        # Straight on, since the stages are not the run itself: the target may come a little later.
        last, before = knots[-1], knots[-2]
        further = last + 0.2 * (last - before)
        if limits.time is not None:
            further = max(min(further, limits.time), last)
        slope = (line.place(values[-1]) - line.place(values[-2])) / (last - before)
        place = max(line.place(values[-1]) + slope * (further - last), search.held.low)
        ramp = _staged(line, [*knots[:-1], further], [*values[:-1], line.value(place)], limits)
    found = case.run(ramp)
    end = float(found[0].time[-1])
    if found[0].reason.value == "target reached" and end < ramp.duration:
        ramp = _cut(line, ramp, end * (1.0 + 1e-6))
        found = case.run(ramp)
    return ramp, found


def _course(run: HeldRun) -> tuple[Floats, Floats]:
    """Place of the control at many times of a run."""
    if not run.steps:
        return np.array([0.0, 1.0]), np.array([run.place, run.place])
    times, places = [0.0], [float(run.steps[0].start[2])]
    for step in run.steps:
        for t in np.linspace(step.begin, step.end, 9)[1:]:
            if t <= run.time:
                times.append(float(t))
                places.append(float(step.at(t)[2]))
    return np.array(times), np.array(places)


def _knots(times: Floats, places: Floats, count: int) -> list[float]:
    """Times that divide a curve for straight lines to fit it evenly: as dense as the root of its second derivative."""
    even = np.linspace(times[0], times[-1], 400)
    curve = np.interp(even, times, places)
    bend = np.abs(np.gradient(np.gradient(curve, even), even))
    bend = np.convolve(bend, np.ones(9) / 9.0, mode="same")
    density = np.sqrt(bend) + 0.05 * np.max(np.sqrt(bend)) + 1e-12
    total = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]))])
    found: list[float] = np.interp(np.linspace(0.0, total[-1], count + 1), total, even).tolist()
    return found


def _staged(line: Line, knots: list[float], values: list[float], limits: Limits) -> Ramp:
    """Exponential stages; linear ones where an exponential would begin faster than the control may move."""
    stages = []
    for (before, a), (after, b) in itertools.pairwise(zip(knots, values, strict=True)):
        shape = Shape.EXPONENTIAL if line.logarithmic else Shape.LINEAR
        if line.logarithmic and limits.fastest is not None:
            steepest = max(a, b) * abs(math.log(a / b)) / (after - before)
            shape = Shape.LINEAR if steepest > limits.fastest else shape
        stages.append(Stage(duration=after - before, moves=(Move(control=line.control, end=b, shape=shape),)))
    return Ramp(stages=tuple(stages))


def _cut(line: Line, ramp: Ramp, end: float) -> Ramp:
    """The ramp up to a time."""
    kept: list[Stage] = []
    for placed in ramp.placed({line.control: line.start}):
        if placed.begin + 1e-9 * end >= end:
            break
        duration = min(placed.stage.duration, end - placed.begin)
        (move,) = placed.stage.moves
        value = placed.courses[line.control].value(duration)
        kept.append(replace(placed.stage, duration=duration, moves=(replace(move, end=value),)))
    return Ramp(stages=tuple(kept))
