"""The condensed fraction to first order against exact level sums, the mean field and the Thomas-Fermi limit."""

from __future__ import annotations

import numpy as np
import pytest

from physics.cloud import Cloud, Model, equilibrium
from physics.constants import atomic_mass, bohr_radius, boltzmann
from physics.first_order import SCALE, condensate_fraction, interaction_scale
from physics.particles import Statistics
from physics.traps import HarmonicTrap


def bosons(atoms: float, temperature: float | np.ndarray, frequencies: tuple[float, float, float], a: float) -> Cloud:
    return Cloud(
        statistics=Statistics.BOSE,
        mass=86.909180531 * atomic_mass,
        trap=HarmonicTrap(frequencies=frequencies),
        atoms=atoms,
        temperature=temperature,
        scattering_length=a * bohr_radius,
    )


def test_the_coefficient_is_that_of_the_literature() -> None:
    # Dalfovo et al., Rev. Mod. Phys. 71, 463 (1999), section V: eta = 1.57 (N^(1/6) a/aho)^(2/5). Recalled.
    assert pytest.approx(1.57, abs=0.005) == SCALE


def test_the_scale_is_the_chemical_potential_of_a_condensate_of_all_atoms_over_the_threshold() -> None:
    cloud = bosons(1e6, 1e-9, (50.0, 70.0, 90.0), 100.0)
    solved = equilibrium(cloud, Model.SEMI_IDEAL)
    ratio = float(solved.chemical_potential) / (boltzmann * float(solved.critical_temperature))
    assert float(interaction_scale(1e6, cloud.length, solved.oscillator_length)) == pytest.approx(ratio, rel=1e-3)


@pytest.mark.parametrize(
    ("shape", "exact", "corrected"),
    [((1.0, 1.0, 1.0), 0.8475, 0.8497), ((10.0, 10.0, 1.0), 0.8250, 0.8368), ((100.0, 100.0, 1.0), 0.7011, 0.7962)],
)
def test_finite_size_takes_most_of_the_error_away_where_it_is_small(
    shape: tuple[float, float, float], exact: float, corrected: float
) -> None:
    # 10 000 atoms at half the ideal threshold, which leaves 0.875: digits of a separate sum over degenerate levels.
    threshold = float(equilibrium(bosons(1e4, 1e-7, shape, 0.0)).critical_temperature)
    solved = equilibrium(bosons(1e4, 0.5 * threshold, shape, 0.0), Model.EXACT_LEVELS)
    assert float(solved.condensate_fraction) == pytest.approx(exact, abs=5e-5)
    assert float(condensate_fraction(0.5, solved.finite_size_shift, 0.0)) == pytest.approx(corrected, abs=5e-5)


@pytest.mark.parametrize("model", [Model.SEMI_IDEAL, Model.HARTREE_FOCK])
def test_repulsion_agrees_with_the_mean_field_in_a_cold_cloud(model: Model) -> None:
    t = np.array([0.2, 0.35, 0.5])
    trap = (80.0, 80.0, 80.0)
    threshold = float(equilibrium(bosons(1e6, 1e-7, trap, 100.0)).critical_temperature)
    solved = equilibrium(bosons(1e6, t * threshold, trap, 100.0), model)
    scale = interaction_scale(1e6, 100.0 * bohr_radius, solved.oscillator_length)
    np.testing.assert_allclose(condensate_fraction(t, 0.0, scale), solved.condensate_fraction, atol=0.01)


def test_without_shifts_it_is_the_ideal_gas_and_it_ends_where_it_turns_negative() -> None:
    t = np.linspace(0.0, 1.5, 31)
    plain = condensate_fraction(t, 0.0, np.nan)
    np.testing.assert_allclose(plain[t <= 1.0], 1.0 - t[t <= 1.0] ** 3, atol=1e-15)
    assert np.all(np.isnan(plain[t > 1.0]))
    shifted = condensate_fraction(t, 0.05, 0.3)
    assert np.nanmin(shifted) >= 0.0
    assert np.isnan(shifted[np.searchsorted(t, 0.99)])
    assert float(interaction_scale(1e5, -1e-9, 1e-6)) == 0.0
