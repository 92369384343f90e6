"""Ideal bosons in local density: conservation of atoms, threshold, published limits.

References
----------
[1] V. Bagnato, D. E. Pritchard, D. Kleppner, Phys. Rev. A 35, 4354 (1987).
[2] F. Dalfovo, S. Giorgini, L. P. Pitaevskii, S. Stringari, Rev. Mod. Phys. 71, 463 (1999).
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from physics.cloud import Equilibrium, Model
from physics.constants import boltzmann, reduced_planck
from physics.statistics import bose, zeta

Maker = Callable[..., Equilibrium]


@given(st.floats(0.0, 9.0), st.floats(-9.0, -5.0))
def test_thermal_and_condensed_atoms_add_up(bosons: Maker, log_atoms: float, log_temperature: float) -> None:
    atoms, temperature = 10.0**log_atoms, 10.0**log_temperature
    solved = bosons(Model.IDEAL, atoms=atoms, temperature=temperature)
    tau = boltzmann * temperature / (reduced_planck * 2.0 * math.pi * float(solved.mean_frequency))
    alpha = -float(solved.log_fugacity)
    thermal = tau**3 * bose(3.0, alpha)
    assert thermal + float(solved.condensate_atoms) == pytest.approx(atoms, rel=1e-12)


def test_condensate_fraction_is_a_cubic_law(bosons: Maker) -> None:
    # [1] eq. (11): 1 - (T/Tc)^3
    threshold = float(bosons().critical_temperature)
    t = np.linspace(0.01, 1.5, 50)
    fraction = bosons(Model.IDEAL, temperature=t * threshold).condensate_fraction
    np.testing.assert_allclose(fraction, np.maximum(0.0, 1.0 - t**3), atol=1e-14)


def test_saturated_thermal_gas_below_threshold(bosons: Maker) -> None:
    threshold = float(bosons().critical_temperature)
    below = bosons(Model.IDEAL, temperature=0.4 * threshold)
    assert below.peak_phase_space_density == pytest.approx(2.612375348685488, rel=1e-14)
    assert (below.fugacity, below.chemical_potential) == (1.0, 0.0)
    # [2] eq. (24): E/(N kTc) = 3 zeta(4)/zeta(3) t^4
    energy = 3.0 * zeta(4.0) / zeta(3.0) * 0.4**4
    assert below.energy_per_atom == pytest.approx(energy * boltzmann * threshold, rel=1e-12)


def test_the_threshold_joins_smoothly(bosons: Maker, names: list[str]) -> None:
    threshold = float(bosons().critical_temperature)
    below, above = (bosons(Model.IDEAL, temperature=threshold * f, efficiency=3.0) for f in (1 - 1e-9, 1 + 1e-9))
    for name in names:
        if name in ("condensate_fraction", "condensate_atoms", "chemical_potential", "log_fugacity"):
            assert float(getattr(below, name)) == pytest.approx(float(getattr(above, name)), abs=1e-3)
        elif name not in ("peak_density", "mean_density"):  # those take in the point-like condensate
            np.testing.assert_allclose(getattr(below, name), getattr(above, name), rtol=1e-4, err_msg=name)


def test_densities_of_a_condensate_in_the_ground_level(bosons: Maker) -> None:
    # A Gaussian |psi|^2 of widths a_i: peak 1/(pi^(3/2) aho^3), mean density that over 2^(3/2).
    cold = bosons(Model.IDEAL, temperature=1e-12)
    m, omega = cold.cloud.mass, 2.0 * math.pi * float(cold.mean_frequency)
    volume = (math.pi * reduced_planck / (m * omega)) ** 1.5
    assert cold.peak_density == pytest.approx(1e5 / volume, rel=1e-6)
    assert cold.mean_density == pytest.approx(1e5 / volume / 2.0**1.5, rel=1e-6)


def test_thermal_radii_belong_to_the_energy(bosons: Maker) -> None:
    # Half of the energy is potential, a third of it in each axis: m w_i^2 <x_i^2>/2 = E/6.
    for temperature in (5e-8, 1.3e-7, 1e-6):
        solved = bosons(Model.IDEAL, temperature=temperature)
        omega = 2.0 * math.pi * np.array([120.0, 90.0, 20.0])
        thermal_energy = float(solved.energy_per_atom) / (1.0 - float(solved.condensate_fraction))
        potential = 0.5 * solved.cloud.mass * omega**2 * np.asarray(solved.thermal_radii) ** 2
        np.testing.assert_allclose(potential, thermal_energy / 6.0, rtol=1e-12)


@given(st.floats(-8.5, -5.0), st.floats(1.001, 3.0))
def test_warming_lowers_every_measure_of_degeneracy(bosons: Maker, log_temperature: float, factor: float) -> None:
    cold = bosons(Model.IDEAL, temperature=10.0**log_temperature)
    warm = bosons(Model.IDEAL, temperature=10.0**log_temperature * factor)
    assert warm.classical_phase_space_density < cold.classical_phase_space_density
    assert warm.peak_phase_space_density <= cold.peak_phase_space_density
    assert warm.condensate_fraction <= cold.condensate_fraction
    assert warm.chemical_potential <= cold.chemical_potential
    assert warm.energy_per_atom > cold.energy_per_atom
