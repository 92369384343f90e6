"""Mean densities for losses against quadrature over the profiles, closed forms and the published factors."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from scipy.integrate import quad

from physics.cloud import Equilibrium, Model
from physics.loss_integrals import energies_of_lost_atoms, two_and_three_body_densities
from physics.particles import Statistics
from physics.profiles import density_profile
from physics.statistics import bose, fermi, zeta

Maker = Callable[..., Equilibrium]

FREQUENCIES = np.array([120.0, 90.0, 20.0])


def by_profile(solved: Equilibrium, reach: float) -> tuple[float, float, float]:
    """N, and losses of all atoms for K2 = K3 = 1, by direct quadrature of -K2 n^2 and -K3 n^3 over the density.

    In local density n depends on V only: a shell at x along the first axis has the volume
    4 pi x^2 dx w1^2/(w2 w3).
    """
    x = np.linspace(0.0, reach, 40001)
    profile = density_profile(solved, 0, x)
    c, t = profile.condensate, profile.thermal
    volume = 4.0 * math.pi * x * x * FREQUENCIES[0] ** 2 / (FREQUENCIES[1] * FREQUENCIES[2])
    # As printed in the appendix of J. Soeding et al., Appl. Phys. B 69, 257 (1999).
    two = (c**2 + 4.0 * c * t + 2.0 * t**2) / 2.0
    three = (c**3 + 9.0 * c**2 * t + 18.0 * c * t**2 + 6.0 * t**3) / 6.0
    return tuple(float(np.trapezoid(volume * values, x)) for values in (c + t, two, three))


@pytest.mark.parametrize("temperature", [3e-7, 1.3e-7, 1.15e-7, 6e-8, 2e-8])
@pytest.mark.parametrize("model", [Model.SEMI_IDEAL, Model.HARTREE_FOCK])
def test_losses_are_the_quadrature_over_the_density(bosons: Maker, model: Model, temperature: float) -> None:
    solved = bosons(model, temperature=temperature)
    reach = 8.0 * float(solved.thermal_radii[0]) + 2.0 * float(np.nan_to_num(solved.condensate_radii)[0])
    atoms, two, three = by_profile(solved, reach)
    assert atoms == pytest.approx(1e5, rel=3e-5)
    found = two_and_three_body_densities(solved)
    assert 1e5 * found[0] == pytest.approx(two, rel=2e-4)
    assert 1e5 * found[1] == pytest.approx(three, rel=4e-4)


@pytest.mark.parametrize("temperature", [1e-6, 2e-7, 5e-8, 5e-9])
def test_losses_of_fermions_are_the_quadrature_over_the_density(fermions: Maker, temperature: float) -> None:
    solved = fermions(temperature=temperature)
    atoms, two, three = by_profile(solved, 9.0 * float(solved.thermal_radii[0]))
    assert atoms == pytest.approx(1e5, rel=1e-6)
    found = two_and_three_body_densities(solved)
    assert 1e5 * found[0] == pytest.approx(two, rel=1e-6)
    assert 1e5 * found[1] == pytest.approx(three, rel=1e-6)


@pytest.mark.parametrize("model", [Model.IDEAL, Model.SEMI_IDEAL, Model.EXACT_LEVELS])
def test_a_classical_cloud_has_the_averages_of_gaussians(bosons: Maker, model: Model) -> None:
    solved = bosons(model, temperature=1e-4)
    n = float(solved.peak_density)
    two, three = two_and_three_body_densities(solved)
    assert two == pytest.approx(n / 2.0**1.5, rel=1e-6)
    assert three == pytest.approx(n * n / 3.0**1.5, rel=1e-6)


def test_a_condensate_alone_loses_half_and_a_sixth(bosons: Maker) -> None:
    # Thomas-Fermi averages <n> = (4/7) n(0), <n^2> = (8/21) n(0)^2; factors 1/2! and 1/3!.
    solved = bosons(temperature=1e-10)
    n = float(solved.peak_density)
    two, three = two_and_three_body_densities(solved)
    assert two == pytest.approx(4.0 / 7.0 * n / 2.0, rel=1e-4)
    assert three == pytest.approx(8.0 / 21.0 * n * n / 6.0, rel=1e-4)
    ideal = bosons(Model.IDEAL, temperature=1e-10)
    n = float(ideal.peak_density)
    two, three = two_and_three_body_densities(ideal)
    assert two == pytest.approx(n / math.sqrt(8.0) / 2.0, rel=1e-4)
    assert three == pytest.approx(n * n / math.sqrt(27.0) / 6.0, rel=1e-4)


@pytest.mark.parametrize("temperature", [2e-7, 1.1e-7, 4e-8])
def test_exact_levels_agree_with_their_mean_density(bosons: Maker, temperature: float) -> None:
    # integral n^2 = integral of (n_c^2/2 + 2 n_c n_t + n_t^2) + n_c^2/2; the last of the Gaussian ground level.
    solved = bosons(Model.EXACT_LEVELS, temperature=temperature)
    ground = float(solved.condensate_atoms)
    alone = ground * ground / (math.sqrt(8.0) * math.pi**1.5 * float(solved.oscillator_length) ** 3)
    two, _ = two_and_three_body_densities(solved)
    assert 1e5 * two + 0.5 * alone == pytest.approx(1e5 * float(solved.mean_density), rel=1e-6)


@pytest.mark.parametrize(("model", "temperature"), [(Model.IDEAL, 1.4e-7), (Model.SEMI_IDEAL, 9e-8)])
def test_many_clouds_at_once_are_the_clouds_one_by_one(bosons: Maker, model: Model, temperature: float) -> None:
    temperatures = temperature * np.linspace(0.8, 1.25, 300)
    many = two_and_three_body_densities(bosons(model, temperature=temperatures))
    for index in (0, 140, 299):
        one = two_and_three_body_densities(bosons(model, temperature=temperatures[index]))
        assert many[0][index] == pytest.approx(float(one[0]), rel=3e-8)
        assert many[1][index] == pytest.approx(float(one[1]), rel=3e-8)


def test_a_whole_map_is_taken_without_interpolation_that_fails(bosons: Maker, fermions: Maker) -> None:
    temperatures = np.geomspace(1e-9, 1e-3, 400)
    for solved, maker in ((bosons(temperature=temperatures), bosons), (fermions(temperature=temperatures), fermions)):
        two, three = two_and_three_body_densities(solved)
        for index in (3, 200, 255, 390):
            one = two_and_three_body_densities(maker(temperature=temperatures[index]))
            assert two[index] == pytest.approx(float(one[0]), rel=1e-7)
            assert three[index] == pytest.approx(float(one[1]), rel=1e-7)


# --- energies of lost atoms ---


@pytest.mark.parametrize("statistics", list(Statistics))
def test_lost_classical_atoms_carry_nine_quarters_and_two(statistics: Statistics) -> None:
    # T. Weber et al., Phys. Rev. Lett. 91, 123201 (2003): all of the kinetic energy, 3/2 kT, and of the potential
    # energy, 3/2 kT too, one half in two-body and one third in three-body loss.
    two, three = energies_of_lost_atoms(statistics, np.asarray(1e-8))
    assert two == pytest.approx(2.25, rel=1e-7)
    assert three == pytest.approx(2.0, rel=1e-7)


@pytest.mark.parametrize("degeneracy", [0.01, 0.3, 1.0])
def test_energies_of_lost_bosons_by_quadrature(degeneracy: float) -> None:
    from physics.statistics import bose_inverse

    alpha = bose_inverse(3.0, degeneracy)

    def mean(power: int, weight: Callable[[float, float], float]) -> float:
        def integrand(w: float) -> float:
            u = w * w
            return 2.0 * w * w * bose(1.5, alpha + u) ** (power - 1) * weight(u, alpha + u)

        return quad(integrand, 0.0, 7.0, epsrel=1e-11, limit=200)[0]

    for power, found in zip((2, 3), energies_of_lost_atoms(Statistics.BOSE, np.asarray(degeneracy)), strict=True):
        energy = mean(power, lambda u, deep: 1.5 * bose(2.5, deep) + u * bose(1.5, deep))
        assert found == pytest.approx(energy / mean(power, lambda u, deep: bose(1.5, deep)), rel=1e-9)


def test_energies_of_lost_atoms_of_a_filled_sea() -> None:
    # n ~ (1 - y)^(3/2), y = V/EF; local kinetic energy (3/5)(1 - y) EF. Beta functions over sqrt(y) dy.
    degeneracy = 1e9  # T/TF = 5.5e-4
    log_z = (6.0 * degeneracy) ** (1.0 / 3.0)

    def beta(a: float, b: float) -> float:
        return math.gamma(a) * math.gamma(b) / math.gamma(a + b)

    for power, found in zip((2, 3), energies_of_lost_atoms(Statistics.FERMI, np.asarray(degeneracy)), strict=True):
        p = 1.5 * power
        share = 0.6 * beta(1.5, p + 2.0) / beta(1.5, p + 1.0) + beta(2.5, p + 1.0) / beta(1.5, p + 1.0)
        assert found / log_z == pytest.approx(share, rel=1e-4)
    assert fermi(3.0, log_z) == pytest.approx(degeneracy, rel=1e-4)


def test_a_condensed_gas_has_no_energy_of_lost_thermal_atoms() -> None:
    found = energies_of_lost_atoms(Statistics.BOSE, np.array([0.5, 1.3]))
    assert np.all(np.isfinite(found[:, 0]))
    assert np.all(np.isnan(found[:, 1]))
    assert zeta(3.0) < 1.3
