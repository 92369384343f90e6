"""Evaporation at a held truncation parameter: the control follows the cloud.

The control is moved so that depth/kT stays at its goal, or drifts with the depth. How fast follows from the rates of
the cloud at rest and moving; what is left of a difference is taken back within a few collisions.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

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
    """A trap along the range of one control, the others where they stand."""

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
    # Settings at which the trap holds nothing end the range, on the side of the start that they are on.
    points: list[TrapPoint | None] = []
    for place in places.tolist():
        point = path.at({**standing, control: math.exp(place) if logarithmic else place})
        points.append(point if point.depth is not None else None)
    here = int(np.argmin(np.abs(places - (math.log(start) if logarithmic else start))))
    first = here
    while first > 0 and points[first - 1] is not None:
        first -= 1
    last = here
    while last < len(points) - 1 and points[last + 1] is not None:
        last += 1
    held = [point for point in points[first : last + 1] if point is not None]
    if len(held) < 2:
        raise ValueError(f"the trap holds nothing along the range of {control.label}")
    curve = TrapCurve(places[first : last + 1], held)
    return Line(curve=curve, control=control, logarithmic=logarithmic, start=start)


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
    steps : the solution: ln N, ln E, place.
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


class _Still:
    """A line as a moving trap, for the kinetics; its place is handed over with the cloud."""

    def __init__(self, curve: TrapCurve) -> None:
        self.curve = curve
        self.bottom_exponent = curve.bottom_exponent

    def now(self, time: float) -> TrapNow:
        return self.curve.at(self.curve.high, 0.0)

    def averages(self, now: TrapNow, share: float) -> Averages | None:
        return self.curve.averages(now, share)


class HeldKinetics:
    """The kinetics with the place of the control as a third variable."""

    def __init__(self, gas: Gas, losses: Losses, line: Line, limits: Limits) -> None:
        self.kinetics = Kinetics(gas, losses, _Still(line.curve))
        self.line, self.limits = line, limits
        self.gas = gas
        self.first_depth = line.curve.at(line.place(line.start), 0.0).depth

    def goal(self, law: Law, depth: float) -> float:
        """Truncation parameter to hold at a depth, not below `SHALLOWEST`."""
        return max(law.start + law.drift * math.log10(self.first_depth / depth), SHALLOWEST)

    def moved(self, law: Law, log_atoms: float, log_energy: float, place: float) -> tuple[CloudNow, float, int]:
        """The cloud, the speed of the place, and what limits it: 0 nothing, 1 a speed, 2 an end of the range."""
        curve = self.line.curve
        atoms, energy = math.exp(log_atoms), math.exp(log_energy)
        trap = curve.at(place, -1.0)
        cloud = self.kinetics.cloud_in(trap, atoms, energy)
        per_place = -trap.depth_rate
        mean = energy / atoms
        lost, gained = self.kinetics.rates(cloud)
        still = cloud._replace(trap=curve.at(place, 0.0))
        lost_still, gained_still = self.kinetics.rates(still)
        # Growth of ln(E/N), at rest, and by moving one unit of ln(depth) down.
        rest = sum(gained_still) / mean + sum(lost_still)
        down = (sum(gained) / mean + sum(lost) - rest) / max(per_place, 1e-12)
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
        left = (place - curve.low) / _STOPPING
        if left < 1.0:
            return cloud, speed * max(left, 0.0), 2
        return cloud, speed, limit

    def derivatives(self, law: Law, values: Floats) -> list[float]:
        log_atoms, log_energy, place = (float(v) for v in values)
        if not (abs(log_atoms) < 700.0 and abs(log_energy) < 700.0):
            raise OutOfRange
        cloud, speed, _ = self.moved(law, log_atoms, log_energy, place)
        cloud = cloud._replace(trap=self.line.curve.at(place, speed))
        lost, gained = self.kinetics.rates(cloud)
        return [-sum(lost), sum(gained) * cloud.atoms / cloud.energy, speed]

    def start(self, atoms: float, temperature: float) -> Floats:
        """ln N, ln E and place of a cloud where the control stands."""
        place = self.line.place(self.line.start)
        trap = self.line.curve.at(place, 0.0)
        eta = trap.depth / (boltzmann * temperature)
        low, high = 1e-9, trap.highest * (1.0 - 1e-9)
        # The table is inverted by halving; it is asked for once a design.
        for _ in range(200):
            share = math.sqrt(low * high)
            averages = self.line.curve.averages(trap, share)
            if averages is None or averages.log_truncation < math.log(eta):
                high = share
            else:
                low = share
        return np.array([math.log(atoms), math.log(atoms * trap.depth * math.sqrt(low * high)), place])

    def run(self, law: Law, values: Floats, target: Target, time: float, tolerance: float = 1e-6) -> HeldRun:
        """From a cloud to the target, or as far as it goes in the time."""
        integrator = Integrator(
            derivatives=lambda t, y: self.derivatives(law, y),
            tolerance=tolerance,
            scales=np.ones(3),
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
                limit = self.moved(law, *(float(v) for v in step.finish))[2]
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
