"""Clouds for tests: a rubidium-like boson and a potassium-like fermion in a trap of three unlike frequencies."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.constants import atomic_mass, bohr_radius
from physics.particles import Statistics
from physics.traps import HarmonicTrap

BOSON = {"statistics": Statistics.BOSE, "mass": 87.0 * atomic_mass, "scattering_length": 100.0 * bohr_radius}
FERMION = {"statistics": Statistics.FERMI, "mass": 40.0 * atomic_mass}

Maker = Callable[..., Equilibrium]


def _maker(kind: dict[str, Any]) -> Maker:
    def solved(model: Model | None = None, **given: Any) -> Equilibrium:
        options = {name: given.pop(name) for name in ("fermi_threshold", "efficiency") if name in given}
        trap = HarmonicTrap(frequencies=given.pop("frequencies", (120.0, 90.0, 20.0)), depth=given.pop("depth", None))
        cloud = Cloud(**{**kind, "trap": trap, "atoms": 1e5, "temperature": 2e-7, **given})
        return equilibrium(cloud, model, **options)

    return solved


@pytest.fixture(scope="session")
def bosons() -> Maker:
    """equilibrium of bosons: bosons(model, atoms=..., temperature=..., frequencies=...).

    1e5 atoms at 200 nK by default, where Tc0 is 126 nK."""
    return _maker(BOSON)


@pytest.fixture(scope="session")
def fermions() -> Maker:
    """The same for fermions, one spin state; TF is 243 nK."""
    return _maker(FERMION)


@pytest.fixture(scope="session")
def names() -> list[str]:
    """Every NAME of the `state` answer that needs no losses."""
    degeneracy = "classical_phase_space_density peak_phase_space_density fugacity log_fugacity chemical_potential"
    bose = "critical_temperature critical_temperature_shifted condensate_fraction condensate_atoms condensate_radii"
    fermi = "fermi_temperature fermi_energy fermi_wavenumber"
    cloud = "thermal_wavelength mean_frequency peak_density mean_density thermal_radii energy_per_atom truncation"
    collisions = "elastic_collision_rate mean_free_path"
    classical = "classical_density_error classical_energy_error"
    threshold = "reduced_temperature temperature_to_threshold atoms_to_threshold atoms_left_at_target"
    return " ".join((degeneracy, bose, fermi, cloud, collisions, classical, threshold)).split()
