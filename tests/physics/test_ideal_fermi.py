"""Ideal fermions in local density: conservation of atoms, T = 0 and low-temperature limits.

Reference
---------
[1] D. A. Butts and D. S. Rokhsar, Phys. Rev. A 55, 4346 (1997).
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from physics.cloud import Equilibrium
from physics.constants import boltzmann, reduced_planck
from physics.statistics import fermi

Maker = Callable[..., Equilibrium]


@given(st.floats(0.0, 9.0), st.floats(-10.0, -4.0))
def test_the_occupied_levels_hold_all_atoms(fermions: Maker, log_atoms: float, log_temperature: float) -> None:
    atoms, temperature = 10.0**log_atoms, 10.0**log_temperature
    solved = fermions(atoms=atoms, temperature=temperature)
    tau = boltzmann * temperature / (reduced_planck * 2.0 * math.pi * float(solved.mean_frequency))
    assert tau**3 * fermi(3.0, float(solved.log_fugacity)) == pytest.approx(atoms, rel=1e-12)


def test_a_filled_sea_at_zero_temperature(fermions: Maker) -> None:
    cold = fermions(temperature=1e-13)
    EF, m = float(cold.fermi_energy), cold.cloud.mass
    kF = math.sqrt(2.0 * m * EF) / reduced_planck
    assert pytest.approx(kF, rel=1e-14) == cold.fermi_wavenumber
    assert cold.chemical_potential == pytest.approx(EF, rel=1e-9)
    assert cold.peak_density == pytest.approx(kF**3 / (6.0 * math.pi**2), rel=1e-9)  # [1] eq. (9)
    assert cold.energy_per_atom == pytest.approx(0.75 * EF, rel=1e-9)
    # Density (1 - r^2/R^2)^(3/2): <r_i^2> = R_i^2/8.
    edges = np.sqrt(2.0 * EF / m) / (2.0 * math.pi * np.array([120.0, 90.0, 20.0]))
    np.testing.assert_allclose(cold.thermal_radii, edges / math.sqrt(8.0), rtol=1e-9)


@pytest.mark.parametrize("ratio", [0.02, 0.05, 0.1])
def test_low_temperature_expansions(fermions: Maker, ratio: float) -> None:
    # Sommerfeld: mu/EF = 1 - (pi^2/3) t^2, E/(N EF) = (3/4)(1 + (2 pi^2/3) t^2), next order t^4. [1]
    solved = fermions(temperature=ratio * float(fermions().fermi_temperature))
    EF = float(solved.fermi_energy)
    assert float(solved.chemical_potential) / EF == pytest.approx(
        1.0 - math.pi**2 / 3.0 * ratio**2, abs=10.0 * ratio**4
    )
    assert float(solved.energy_per_atom) / EF == pytest.approx(0.75 + math.pi**2 / 2.0 * ratio**2, abs=30.0 * ratio**4)


def test_the_chosen_threshold_counts(fermions: Maker) -> None:
    solved = fermions(temperature=1e-6, fermi_threshold=0.2)
    assert solved.temperature_to_threshold == pytest.approx(0.2 / float(solved.reduced_temperature), rel=1e-12)
    assert solved.atoms_to_threshold == pytest.approx((float(solved.reduced_temperature) / 0.2) ** 3, rel=1e-12)


def test_energy_and_radii_obey_the_virial_theorem(fermions: Maker) -> None:
    solved = fermions(temperature=8e-8)
    omega = 2.0 * math.pi * np.array([120.0, 90.0, 20.0])
    potential = 0.5 * solved.cloud.mass * omega**2 * np.asarray(solved.thermal_radii) ** 2
    np.testing.assert_allclose(potential, float(solved.energy_per_atom) / 6.0, rtol=1e-12)


def test_two_spin_states_collide_and_one_does_not(fermions: Maker) -> None:
    a = 1e-9
    one = fermions(scattering_length=a)
    two, three = (fermions(scattering_length=a, spin_components=n) for n in (2, 3))
    assert one.elastic_collision_rate == 0.0
    # (gs - 1) 4 pi a^2 partners
    assert three.elastic_collision_rate == pytest.approx(2.0 * two.elastic_collision_rate, rel=1e-14)
    speed = math.sqrt(8.0 * boltzmann * 2e-7 / (math.pi * two.cloud.mass))
    slow = 0.5 * float(two.peak_density) * 4.0 * math.pi * a**2 * speed
    assert two.elastic_collision_rate == pytest.approx(slow, rel=1e-3)
    path = 1.0 / (math.sqrt(2.0) * float(two.peak_density) * 4.0 * math.pi * a**2)
    assert two.mean_free_path == pytest.approx(path, rel=1e-3)
