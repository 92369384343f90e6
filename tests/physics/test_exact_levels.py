"""Exact levels of an ideal Bose gas: approach to local density, corrections of known order, limits.

The table of errors is of direct level sums made independently, with other code; two digits.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from physics.cloud import Equilibrium, Model
from physics.constants import boltzmann, reduced_planck
from physics.oscillator_levels import OscillatorLevels

Maker = Callable[..., Equilibrium]
Shape = tuple[float, float, float]

SPHERE, CIGAR = (1.0, 1.0, 1.0), (10.0, 10.0, 1.0)


@pytest.mark.parametrize(
    ("shape", "atoms", "error"),
    [
        (SPHERE, 1e3, -1.3e-3),
        (SPHERE, 1e4, -2.7e-4),
        (CIGAR, 1e3, -3.9e-3),
        (CIGAR, 1e4, -8.5e-4),
        (CIGAR, 1e6, -3.9e-5),
    ],
)
def test_local_density_misses_mu_by_second_order_only(bosons: Maker, shape: Shape, atoms: float, error: float) -> None:
    # (mu_LDA - mu)/kT at T/Tc0 = 1.2, mu from the trap bottom in both.
    given = {"atoms": atoms, "frequencies": 10.0 * np.array(shape)}
    given["temperature"] = 1.2 * float(bosons(**given).critical_temperature)
    exact, local = bosons(Model.EXACT_LEVELS, **given), bosons(Model.IDEAL, **given)
    assert local.log_fugacity - exact.log_fugacity == pytest.approx(error, abs=0.051 * abs(error))


@pytest.mark.parametrize("temperature", [4e-7, 2e-6, 1e-5])
def test_a_warm_cloud_is_that_of_local_density(bosons: Maker, names: list[str], temperature: float) -> None:
    exact, local = (bosons(m, temperature=temperature, efficiency=2.0) for m in (Model.EXACT_LEVELS, Model.IDEAL))
    level = reduced_planck * 2.0 * math.pi * 120.0 / (boltzmann * temperature)
    # What names the thermal atoms leaves the ground level out, which here is one level of the cloud like any other.
    without_ground_level = {"peak_phase_space_density", "elastic_collision_rate", "mean_free_path"}
    of_ground_level = {"condensate_fraction", "condensate_atoms", "classical_density_error"}
    share = 1.0 - float(exact.peak_phase_space_density / (exact.peak_density * exact.thermal_wavelength**3))
    assert 0.0 < share < 0.01
    for name in set(names) - of_ground_level:
        tolerance = level**2 / 12.0 + (1.01 * share if name in without_ground_level else 0.0)
        difference = tolerance if name == "classical_energy_error" else 0.0
        np.testing.assert_allclose(
            getattr(exact, name), getattr(local, name), rtol=tolerance, atol=difference, err_msg=name
        )


def test_a_frozen_cloud_is_the_ground_level(bosons: Maker) -> None:
    cold = bosons(Model.EXACT_LEVELS, temperature=1e-11)
    hw = reduced_planck * 2.0 * math.pi * np.array([120.0, 90.0, 20.0])
    assert cold.condensate_fraction == pytest.approx(1.0, rel=1e-15)
    assert cold.energy_per_atom == pytest.approx(0.5 * hw.sum(), rel=1e-14)
    # mu = E0 - kT/N0
    assert cold.chemical_potential == pytest.approx(0.5 * hw.sum() - boltzmann * 1e-11 / 1e5, rel=1e-12)
    ideal = bosons(Model.IDEAL, temperature=1e-11)
    assert cold.peak_density == pytest.approx(ideal.peak_density, rel=1e-6)
    assert cold.mean_density == pytest.approx(ideal.mean_density, rel=1e-6)


def test_energy_is_the_derivative_of_the_grand_potential(bosons: Maker) -> None:
    # At fixed alpha_0 = -mu/kT, E = -d ln Z/d beta, and N = -d ln Z/d alpha_0: mixed derivatives agree,
    # dE/d alpha_0 = dN/d beta, taken by differences of the program's own N and E over the level sums.
    b, alpha, h = np.array([0.3, 0.2, 0.1]), 0.05, 1e-4

    def number(scale: float, alpha: float) -> float:
        return OscillatorLevels(b * scale).excited_atoms(alpha)

    def energy(alpha: float) -> float:
        # Above the ground level: the zero-point energy of an excited atom is half the sum of spacings.
        return float(OscillatorLevels(b).excited_energies(alpha).sum()) - 0.5 * b.sum() * number(1.0, alpha)

    by_alpha = (energy(alpha + h) - energy(alpha - h)) / (2.0 * h)
    by_beta = (number(1.0 + h, alpha) - number(1.0 - h, alpha)) / (2.0 * h)
    assert by_alpha == pytest.approx(by_beta, rel=1e-5)


@settings(max_examples=30)
@given(st.floats(0.0, 7.0), st.floats(-9.0, -6.0), st.floats(1.01, 2.0))
def test_warming_empties_the_ground_level(
    bosons: Maker, log_atoms: float, log_temperature: float, factor: float
) -> None:
    cold, warm = (
        bosons(Model.EXACT_LEVELS, atoms=10.0**log_atoms, temperature=f * 10.0**log_temperature) for f in (1.0, factor)
    )
    assert warm.condensate_fraction <= cold.condensate_fraction
    assert warm.energy_per_atom >= cold.energy_per_atom * (1.0 - 1e-12)
