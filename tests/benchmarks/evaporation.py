"""Speed of evaporation: a ramp, a design, waypoints and sensitivities. Milliseconds and seconds, medians.

Times of the processor, not of the wall: a busy machine does not count.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field

import numpy as np

from physics.constants import atomic_mass, boltzmann
from physics.curve_shape import CurveShape
from physics.evaporation import evaporate
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.kinetic_tables import power_law_table
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_design import design_ramp
from physics.ramp_sensitivity import ramp_sensitivities
from physics.ramp_shapes import Shape
from physics.ramps import Control, Move, Ramp, Stage
from physics.trap_path import SCALE, HarmonicPath, TrapPoint
from physics.traps import HarmonicTrap
from physics.waypoints import waypoints

Row = tuple[str, float, float | None]

MASS = 87.0 * atomic_mass
GAS = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
LOSSES = Losses(background_lifetime=20.0, three_body=4e-41, heating=2e-8)
TARGET = Target(peak_phase_space_density=2.5)
HARMONIC = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(500.0, 500.0, 100.0), depth=boltzmann * 3e-4))
TIGHT = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(1500.0,) * 3, depth=boltzmann * 5e-4))


def ramp(duration: float) -> Ramp:
    return Ramp(
        stages=tuple(
            Stage(duration=duration, moves=(Move(control=SCALE, end=end, shape=Shape.EXPONENTIAL),))
            for end in (0.4, 0.15, 0.06, 0.025, 0.01)
        )
    )


@dataclass(frozen=True)
class Surveyed:
    """A trap of any volume curve, which is known already: one that opens like a beam, the more the weaker it is."""

    nodes: int = 25
    known: dict[float, TrapPoint] = field(default_factory=dict)

    @property
    def standing(self) -> Mapping[Control, float]:
        return HARMONIC.standing

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        s = controls[SCALE]
        if s not in self.known:
            point = HARMONIC.at(controls)
            u = np.geomspace(1e-4, 1.0, 80)
            w = u**1.5 * (1.0 + 2.0 * (1.0 - 0.5 * s) * u**3)
            curve = CurveShape(energies=u, volumes=w / w[-1])
            self.known[s] = TrapPoint(
                depth=point.depth, volume=point.volume * w[-1], curve=curve, frequencies=point.frequencies
            )
        return self.known[s]


def median(task: Callable[[], object], rounds: int = 15) -> float:
    """Median seconds of a task."""
    task()  # tables are built once
    times = []
    for _ in range(rounds):
        start = time.process_time()
        task()
        times.append(time.process_time() - start)
    return float(np.median(times))


def once(task: Callable[[], object]) -> float:
    start = time.process_time()
    task()
    return time.process_time() - start


def rows() -> Iterator[Row]:
    """(what, measured, goal)."""
    power_law_table.cache_clear()
    first = once(lambda: evaporate(GAS, 2e6, 3e-5, ramp(2.0), HARMONIC, losses=LOSSES))
    yield "ten seconds in five stages, harmonic, the first one [ms]", 1e3 * first, None
    taken = median(lambda: evaporate(GAS, 2e6, 3e-5, ramp(2.0), HARMONIC, losses=LOSSES))
    yield "ten seconds in five stages, harmonic [ms]", 1e3 * taken, 60.0
    surveyed = Surveyed()
    first = once(lambda: evaporate(GAS, 2e6, 3e-5, ramp(2.0), surveyed, losses=LOSSES))
    yield "the same with surveyed volume curves, tables made [s]", first, 10.0
    taken = median(lambda: evaporate(GAS, 2e6, 3e-5, ramp(2.0), surveyed, losses=LOSSES))
    yield "the same again [ms]", 1e3 * taken, 400.0
    taken = median(lambda: design_ramp(GAS, 2e6, 5e-5, TIGHT, SCALE, TARGET, losses=LOSSES), 3)
    yield "design of a ramp, harmonic [s]", taken, 5.0
    modest = Target(peak_phase_space_density=0.02)
    taken = once(lambda: design_ramp(GAS, 2e6, 3e-5, surveyed, SCALE, modest, losses=LOSSES))
    yield "design of a ramp, surveyed volume curves [s]", taken, 60.0
    taken = median(lambda: ramp_sensitivities(GAS, 2e6, 3e-5, ramp(2.0), HARMONIC, losses=LOSSES), 5)
    yield "what each input does to a ramp [ms]", 1e3 * taken, 1000.0
    run = evaporate(GAS, 2e6, 3e-5, ramp(2.0), HARMONIC, losses=LOSSES)
    taken = median(lambda: waypoints(run, np.geomspace(1e-3, 5e-3, 20).tolist(), 0.02))
    yield "twenty waypoints [ms]", 1e3 * taken, 20.0
