"""Speed of clouds: one cloud with all it can tell, maps of 200 x 200 cells, profiles of 300 points.

Maps are ratios to numpy.exp on as many numbers, in turns with it, medians; the rest is in milliseconds.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator

import numpy as np

from physics.caveats import caveats_of
from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.constants import atomic_mass
from physics.particles import Statistics
from physics.profiles import column_density_profile, density_profile
from physics.traps import HarmonicTrap

CELLS = 200
ROUNDS = 15
TRAP = HarmonicTrap(frequencies=(120.0, 90.0, 20.0), depth=1e-29)
NAMES = (
    *("classical_phase_space_density", "peak_phase_space_density", "fugacity", "log_fugacity", "chemical_potential"),
    *("critical_temperature", "critical_temperature_shifted", "condensate_fraction", "condensate_atoms"),
    *("condensate_radii", "fermi_temperature", "fermi_energy", "fermi_wavenumber", "thermal_wavelength"),
    *("mean_frequency", "peak_density", "mean_density", "thermal_radii", "energy_per_atom", "truncation"),
    *("elastic_collision_rate", "mean_free_path", "classical_density_error", "classical_energy_error"),
    *("reduced_temperature", "temperature_to_threshold", "atoms_to_threshold", "atoms_left_at_target"),
)
MAP_NAMES = ("peak_phase_space_density", "condensate_fraction", "reduced_temperature")
BOSONS = (Model.IDEAL, Model.SEMI_IDEAL, Model.EXACT_LEVELS)


def medians(*tasks: Callable[[], object]) -> list[float]:
    """Median seconds of each task, all run in turns."""
    times: list[list[float]] = [[] for _ in tasks]
    for task in tasks:
        task()  # tables are built once
    for _ in range(ROUNDS):
        for task, taken in zip(tasks, times, strict=True):
            start = time.perf_counter()
            task()
            taken.append(time.perf_counter() - start)
    return [float(np.median(taken)) for taken in times]


def solved(statistics: Statistics, model: Model, atoms: object = 1e5, temperature: object = 6e-8) -> Equilibrium:
    cloud = Cloud(
        statistics=statistics,
        mass=87.0 * atomic_mass,
        trap=TRAP,
        atoms=atoms,
        temperature=temperature,
        spin_components=2,
        scattering_length=5.3e-9,
    )
    return equilibrium(cloud, model, efficiency=3.0)


def read(answer: Equilibrium, names: tuple[str, ...]) -> None:
    for name in names:
        getattr(answer, name)


def map_of(statistics: Statistics, model: Model) -> Callable[[], None]:
    # Half of it below threshold.
    atoms, temperature = np.geomspace(1e3, 1e8, CELLS)[:, np.newaxis], np.geomspace(1e-8, 3e-6, CELLS)
    return lambda: read(solved(statistics, model, atoms, temperature), MAP_NAMES)


def rows() -> Iterator[tuple[str, float, float | None]]:
    """(what, measured, goal)."""
    exponents = np.linspace(-20.0, 0.0, CELLS * CELLS)
    maps = [(Statistics.BOSE, Model.IDEAL, 25.0, 60.0), (Statistics.BOSE, Model.SEMI_IDEAL, 80.0, 180.0)]
    maps.append((Statistics.FERMI, Model.IDEAL, 25.0, 60.0))
    reference, *times = medians(lambda: np.exp(exponents), *(map_of(kind, model) for kind, model, _, _ in maps))
    for (kind, model, milliseconds, ratio), taken in zip(maps, times, strict=True):
        name = f"map of 200 x 200, {model.value} {kind.value}s"
        yield f"{name}, over exp", taken / reference, ratio
        yield f"{name} [ms]", 1e3 * taken, milliseconds

    clouds = [(Statistics.BOSE, model) for model in BOSONS] + [(Statistics.FERMI, Model.IDEAL)]
    times = medians(*(lambda k=k, m=m: read(solved(k, m), NAMES) for k, m in clouds))
    for (kind, model), taken in zip(clouds, times, strict=True):
        yield f"one cloud, all quantities, {model.value} {kind.value}s [ms]", 1e3 * taken, 5.0
    (taken,) = medians(lambda: caveats_of(solved(Statistics.BOSE, Model.SEMI_IDEAL)))
    yield "one cloud and its caveats, semi-ideal bosons [ms]", 1e3 * taken, 5.0

    positions = np.linspace(-4e-5, 4e-5, 300)
    for (kind, model), goal in zip(clouds, (2.0, 5.0, None, 2.0), strict=True):
        answer = solved(kind, model)
        answer.log_fugacity, answer.condensate_atoms  # noqa: B018 the cloud itself is solved
        plain, column = medians(
            lambda answer=answer: density_profile(answer, 0, positions),
            lambda answer=answer: column_density_profile(answer, 0, positions, 2),
        )
        yield f"density of 300 points, {model.value} {kind.value}s [ms]", 1e3 * plain, goal
        yield f"column density of 300 points, {model.value} {kind.value}s [ms]", 1e3 * column, goal
