"""Evaporation at a held truncation parameter: the control follows the cloud.

The control is moved so that depth/kT stays at its goal, or drifts with the depth. How fast follows from the rates of
the cloud at rest and moving; what is left of a difference is taken back within a few collisions.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np

from physics.checks import Floats
from physics.collisions import RETHERMALISATION_COLLISIONS
from physics.constants import boltzmann
from physics.evaporation_rates import FEWEST_ATOMS, CloudNow, Kinetics
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.kinetic_tables import Averages
from physics.losses import Losses
from physics.ramps import Control
from physics.runge_kutta import Integrator, OutOfRange, Step
from physics.stage_trap import TrapCurve, TrapNow
from physics.trap_path import TrapPath, TrapPoint, points_between

SLOWEST_TIME = 3600.0
"""Longest ramp where no limit is set. [s]"""

_STOPPING = 0.02
"""Distance from the end of the range, in the logarithm of the control, over which it comes to rest."""

MOST_STEPS = 4000
"""Steps after which a run is given up as not reaching the target."""

SHALLOWEST = 2.0
"""Lowest truncation parameter to which a drift may lead."""


@dataclass(frozen=True, kw_only=True)
class Limits:
    """What a designed ramp must keep to.

    Attributes
    ----------
    time : float or None. [s] Longest total time; None: an hour.
    low, high : float or None. [SI] Range of the control; None: its start, and a ten-thousandth of it.
    fastest : float or None. [SI/s] Largest speed of the control.
    depth_change : float. [1] Largest |dlnU/dt| times the rethermalisation time: a ramp is no use faster than that.
    """

    time: float | None = None
    low: float | None = None
    high: float | None = None
    fastest: float | None = None
    depth_change: float = 1.0

    def __post_init__(self) -> None:
        for name, value, unit in (("time", self.time, " s"), ("fastest", self.fastest, "")):
            if value is not None and not 0.0 < value < math.inf:
                raise ValueError(f"limit of {name} must be positive and finite, got {value:g}{unit}")
        if not 0.0 < self.depth_change < math.inf:
            raise ValueError(f"largest change of the depth must be positive and finite, got {self.depth_change:g}")
        if self.low is not None and self.high is not None and not self.low < self.high:
            raise ValueError(f"range of a control must rise, got {self.low:g} to {self.high:g}")


@dataclass(frozen=True, kw_only=True, eq=False)
class Line:
    """A trap along the range of one control, the others where they stand: at some places, and between them."""

    places: Floats
    points: tuple[TrapPoint, ...]
    curve: TrapCurve
    control: Control
    logarithmic: bool
    start: float

    def place(self, value: float) -> float:
        return math.log(value) if self.logarithmic else value

    def value(self, place: float) -> float:
        return math.exp(place) if self.logarithmic else place


def line_of(path: TrapPath, control: Control, limits: Limits) -> Line:
    """The trap along one control.

    Raises
    ------
    ValueError : for a control that the trap does not have, a start that is not known or out of range, or a trap that
        holds nothing at the start.
    """
    standing = {c: value for c, value in path.standing.items() if not math.isnan(value)}
    if control not in standing:
        known = ", ".join(c.label for c in standing) or "none"
        raise ValueError(f"{control.label} cannot be designed: controls with a known start are {known}")
    start = standing[control]
    high = start if limits.high is None else limits.high
    low = start * 1e-4 if limits.low is None else limits.low
    if not low <= start <= high:
        raise ValueError(f"{control.label} stands at {start:g}, outside of its range from {low:g} to {high:g}")
    logarithmic = low > 0.0
    ends = (math.log(low), math.log(high)) if logarithmic else (low, high)
    places = np.linspace(*ends, points_between(path.nodes, low, high))

    def point(place: float) -> TrapPoint:
        return path.at({**standing, control: math.exp(place) if logarithmic else place})

    held, points = held_along(places, point, math.log(start) if logarithmic else start)
    if len(held) < 2:
        raise ValueError(f"the trap holds nothing along the range of {control.label}")
    return Line(
        places=held,
        points=points,
        curve=TrapCurve(held, points),
        control=control,
        logarithmic=logarithmic,
        start=start,
    )


def held_along(
    places: Floats, point: Callable[[float], TrapPoint], start: float
) -> tuple[Floats, tuple[TrapPoint, ...]]:
    """The places around a start at which a trap holds something, and the trap there: a setting at which it holds
    nothing ends the range, on the side of the start that it is on."""
    points = [point(place) for place in places.tolist()]
    held = [one.depth is not None for one in points]
    here = int(np.argmin(np.abs(places - start)))
    first = last = here
    while first > 0 and held[first - 1]:
        first -= 1
    while last < len(points) - 1 and held[last + 1]:
        last += 1
    kept = slice(first, last + 1) if held[here] else slice(0, 0)
    return places[kept], tuple(points[kept])


@dataclass(frozen=True, kw_only=True)
class Law:
    """Truncation parameter to hold: `start` at the first depth, and `drift` more for each tenfold lower depth."""

    start: float
    drift: float = 0.0


@dataclass(frozen=True, kw_only=True, eq=False)
class HeldRun:
    """One evaporation at a held truncation parameter.

    Attributes
    ----------
    law : Law
    reached : bool. Whether the target was reached.
    time : float. [s] atoms, energy : at the end. place : of the control.
    steps : the solution: ln N, ln E, place; and whatever else is carried along.
    speed_limited, at_end : share of the time at the largest speed, and at an end of the range. [1]
    """

    law: Law
    reached: bool
    time: float
    atoms: float
    energy: float
    place: float
    steps: tuple[Step, ...] = field(repr=False)
    speed_limited: float
    at_end: float


class Still:
    """A line as a moving trap, for the kinetics; its place is handed over with the cloud."""

    def __init__(self, curve: TrapCurve) -> None:
        self.curve = curve
        self.bottom_exponent = curve.bottom_exponent

    def now(self, time: float) -> TrapNow:
        return self.curve.at(self.curve.high, 0.0)

    def averages(self, now: TrapNow, share: float) -> Averages | None:
        return self.curve.averages(now, share)


class Moved(NamedTuple):
    """How a held cloud changes: d ln N/dt, d ln E/dt, the speed of the place, and what limits that: 0 nothing, 1 a
    speed, 2 an end of the range. [1/s]"""

    atoms: float
    energy: float
    speed: float
    limit: int


def growth(kinetics: Kinetics, cloud: CloudNow) -> tuple[float, float]:
    """d ln N/dt and d ln E/dt. [1/s]"""
    lost, gained = kinetics.rates(cloud)
    return -sum(lost), sum(gained) * cloud.atoms / cloud.energy


def cloud_at(curve: TrapCurve, place: float, atoms: float, temperature: float) -> tuple[float, float]:
    """ln N and ln E of a cloud at a place."""
    trap = curve.at(place, 0.0)
    eta = trap.depth / (boltzmann * temperature)
    low, high = 1e-9, trap.highest * (1.0 - 1e-9)
    # The table is inverted by halving; it is asked for once a design.
    for _ in range(200):
        share = math.sqrt(low * high)
        averages = curve.averages(trap, share)
        if averages is None or averages.log_truncation < math.log(eta):
            high = share
        else:
            low = share
    return math.log(atoms), math.log(atoms * trap.depth * math.sqrt(low * high))


class HeldKinetics:
    """The kinetics with the place of the control as a third variable."""

    def __init__(self, gas: Gas, losses: Losses, line: Line, limits: Limits) -> None:
        self.kinetics = Kinetics(gas, losses, Still(line.curve))
        self.line, self.limits = line, limits
        self.gas, self.losses = gas, losses
        self.low = line.curve.low
        self.first_depth = line.curve.at(line.place(line.start), 0.0).depth

    def eased(
        self, *, gas: Gas | None = None, losses: Losses | None = None, limits: Limits | None = None
    ) -> HeldKinetics:
        """The same along the same line with other atoms, losses or limits."""
        return HeldKinetics(gas or self.gas, losses or self.losses, self.line, limits or self.limits)

    def with_lighter_load(self, values: Floats, factor: float) -> Floats | None:
        """A start with fewer atoms of whatever else this gas carries along; None where there is nothing."""
        return None

    def goal(self, law: Law, depth: float) -> float:
        """Truncation parameter to hold at a depth, not below `SHALLOWEST`."""
        return max(law.start + law.drift * math.log10(self.first_depth / depth), SHALLOWEST)

    def cloud(self, values: Sequence[float]) -> CloudNow:
        """The cloud where the place moves at -1."""
        log_atoms, log_energy, place = values[:3]
        if not (abs(log_atoms) < 700.0 and abs(log_energy) < 700.0):
            raise OutOfRange
        trap = self.line.curve.at(place, -1.0)
        return self.kinetics.cloud_in(trap, math.exp(log_atoms), math.exp(log_energy))

    def moved(self, law: Law, cloud: CloudNow) -> Moved:
        """How the place moves for a cloud that is told where it moves at -1."""
        trap, place = cloud.trap, cloud.trap.place
        per_place = -trap.depth_rate
        at_rest = growth(self.kinetics, cloud._replace(trap=trap.moving(0.0)))
        moving = growth(self.kinetics, cloud)
        # Growth of ln(E/N), at rest, and by moving one unit of ln(depth) down.
        rest = at_rest[1] - at_rest[0]
        down = (moving[1] - moving[0] - rest) / max(per_place, 1e-12)
        goal = self.goal(law, trap.depth)
        retherm = RETHERMALISATION_COLLISIONS / cloud.collision_rate if cloud.collision_rate > 0.0 else math.inf
        largest = self.limits.depth_change / retherm
        # d ln(depth)/dt = -x keeps ln(E/N) - ln(depth): rest + x down = -x.
        wanted = rest / max(1.0 + down, 0.1) + 0.3 * largest * math.log(goal / cloud.truncation)
        if wanted > 0.0:
            wanted = 0.0
        limit = 0
        if -wanted > largest:
            wanted, limit = -largest, 1
        speed = wanted / per_place if per_place > 1e-9 else 0.0
        if self.limits.fastest is not None:
            value = self.line.value(place)
            fastest = self.limits.fastest / value if self.line.logarithmic else self.limits.fastest
            if -speed > fastest:
                speed, limit = -fastest, 1
        # The control comes to rest at the end of its range, not at once, so that the solution has no corner.
        left = (place - self.low) / _STOPPING
        if left < 1.0:
            speed, limit = speed * max(left, 0.0), 2
        # Work and spilling go as the speed, in one direction.
        atoms, energy = (still - speed * (one - still) for still, one in zip(at_rest, moving, strict=True))
        return Moved(atoms, energy, speed, limit)

    def derivatives(self, law: Law, values: Sequence[float]) -> list[float]:
        """Of the variables of `start`, at the speed that the law asks for."""
        return list(self.moved(law, self.cloud(values))[:3])

    def start(self, atoms: float, temperature: float) -> Floats:
        """ln N, ln E and place of a cloud where the control stands."""
        place = self.line.place(self.line.start)
        return np.array([*cloud_at(self.line.curve, place, atoms, temperature), place])

    def run(self, law: Law, values: Floats, target: Target, time: float, tolerance: float = 1e-6) -> HeldRun:
        """From a cloud to the target, or as far as it goes in the time."""
        integrator = Integrator(
            derivatives=lambda t, y: self.derivatives(law, y.tolist()),
            tolerance=tolerance,
            scales=np.ones(len(values)),
            smallest=1e-9 * time,
        )
        steps: list[Step] = []
        now, here, reached = 0.0, values, False
        limited = [0.0, 0.0, 0.0]

        def missing(t: float, y: Floats) -> float:
            trap = self.line.curve.at(float(y[2]), 0.0)
            cloud = self.kinetics.cloud_in(trap, math.exp(y[0]), math.exp(y[1]))
            return target.missing(self.gas, self.kinetics.trap.bottom_exponent, cloud)

        try:
            reached = missing(0.0, values) <= 0.0
            while not reached and now < time and here[0] > math.log(FEWEST_ATOMS) and len(steps) < MOST_STEPS:
                step = integrator.advance(now, here, time)
                if step is None:
                    break
                steps.append(step)
                limit = self.moved(law, self.cloud(step.finish.tolist())).limit
                if missing(step.end, step.finish) <= 0.0:
                    reached = True
                    now = step.crossing(missing)
                    here = step.at(now)
                else:
                    now, here = step.end, step.finish
                limited[limit] += now - step.begin
        except OutOfRange:
            reached = False
        whole = max(now, 1e-300)
        return HeldRun(
            law=law,
            reached=reached and float(here[0]) > math.log(FEWEST_ATOMS),
            time=now,
            atoms=math.exp(here[0]),
            energy=math.exp(here[1]),
            place=float(here[2]),
            steps=tuple(steps),
            speed_limited=limited[1] / whole,
            at_end=limited[2] / whole,
        )
