"""Speed of the boson models that take longest, and of what compares them. Milliseconds and seconds, medians."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator

import numpy as np

from physics.caveats import caveats_of
from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.comparison import compare_models
from physics.condensate import Condensate
from physics.constants import atomic_mass
from physics.particles import Statistics
from physics.profiles import column_density_profile, density_profile
from physics.rows import answer_rows
from physics.thresholds import Thresholds
from physics.traps import HarmonicTrap

Row = tuple[str, float, float | None]

ROUNDS = 15
CELLS = 60
TRAP = HarmonicTrap(frequencies=(120.0, 90.0, 20.0), depth=1e-29)
NAMES = (
    *("classical_phase_space_density", "peak_phase_space_density", "fugacity", "log_fugacity", "chemical_potential"),
    *("critical_temperature", "critical_temperature_shifted", "condensate_fraction", "condensate_atoms"),
    *("condensate_radii", "thermal_wavelength", "mean_frequency", "peak_density", "mean_density", "thermal_radii"),
    *("energy_per_atom", "truncation", "elastic_collision_rate", "mean_free_path", "classical_density_error"),
    *("classical_energy_error", "classical_pressure_error", "fitted_temperature_error", "reduced_temperature"),
    *("temperature_to_threshold", "atoms_to_threshold", "atoms_left_at_target"),
)
MAP_NAMES = ("peak_phase_space_density", "condensate_fraction", "reduced_temperature")
CONDENSATE = (
    "thomas_fermi_weight",
    "rms_radii",
    "chemical_potential",
    "energy_per_atom",
    "peak_density",
    "healing_length",
)


def median(task: Callable[[], object], rounds: int = ROUNDS) -> float:
    """Median seconds of a task."""
    task()  # tables are built once
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        task()
        times.append(time.perf_counter() - start)
    return float(np.median(times))


def cloud(atoms: object = 1e5, temperature: object = 6e-8, frequencies: object = None) -> Cloud:
    trap = TRAP if frequencies is None else HarmonicTrap(frequencies=frequencies)
    return Cloud(
        statistics=Statistics.BOSE,
        mass=87.0 * atomic_mass,
        trap=trap,
        atoms=atoms,
        temperature=temperature,
        scattering_length=5.3e-9,
    )


def read(answer: Equilibrium) -> None:
    for name in NAMES:
        getattr(answer, name)


def rows() -> Iterator[Row]:
    """(what, measured, goal)."""
    for where, temperature in (("condensed", 6e-8), ("just below the threshold", 1.2e-7), ("not condensed", 3e-7)):
        taken = median(
            lambda t=temperature: read(equilibrium(cloud(temperature=t), Model.HARTREE_FOCK, efficiency=3.0))
        )
        yield f"one cloud, all quantities, Hartree-Fock, {where} [ms]", 1e3 * taken, 30.0
    taken = median(lambda: caveats_of(equilibrium(cloud(), Model.HARTREE_FOCK)))
    yield "one cloud and its caveats, Hartree-Fock [ms]", 1e3 * taken, 30.0

    # Half of it below threshold.
    atoms, temperature = np.geomspace(1e3, 1e8, CELLS), np.geomspace(1e-8, 3e-6, CELLS)[:, np.newaxis]
    for model, frequencies, trap in (
        (Model.HARTREE_FOCK, None, "crossed trap"),
        (Model.EXACT_LEVELS, None, "crossed trap"),
        (Model.EXACT_LEVELS, (300.0, 300.0, 3.0), "long trap"),
    ):
        plane = cloud(atoms, temperature, frequencies)
        taken = median(lambda m=model, p=plane: answer_rows(p, m, MAP_NAMES, lambda share: True), 3)
        yield f"map of 60 x 60 by rows, {model.value}, {trap} [s]", taken, 5.0

    positions = np.linspace(-4e-5, 4e-5, 300)
    solved = equilibrium(cloud(), Model.HARTREE_FOCK)
    read(solved)
    yield "density of 300 points, Hartree-Fock [ms]", 1e3 * median(lambda: density_profile(solved, 0, positions)), 10.0
    taken = median(lambda: column_density_profile(solved, 0, positions, 2))
    yield "column density of 300 points, Hartree-Fock [ms]", 1e3 * taken, 20.0

    def condensate() -> None:
        alone = Condensate(equilibrium=equilibrium(cloud(), Model.SEMI_IDEAL))
        for name in CONDENSATE:
            getattr(alone, name)

    yield "condensate between two shapes [ms]", 1e3 * median(condensate), 5.0
    taken = median(lambda: Thresholds(equilibrium=equilibrium(cloud(), Model.IDEAL)).exact_saturation)
    yield "exact saturation temperature [ms]", 1e3 * taken, 5.0
    taken = median(lambda: Thresholds(equilibrium=equilibrium(cloud(), Model.IDEAL)).hartree_fock)
    yield "Hartree-Fock onset [ms]", 1e3 * taken, 10.0
    yield "one cloud by four models [ms]", 1e3 * median(lambda: compare_models(cloud())), 50.0
