"""Sums over levels: power laws in closed form, quadrature by SciPy, inverses, limits."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import beta, gamma, gammainc, zeta

from physics.curve_shape import CurveShape
from physics.level_sums import LevelSums, level_unit

HARMONIC, QUADRUPOLE = LevelSums(shape=CurveShape()), LevelSums(shape=CurveShape(exponent=3.0))
BOTH = pytest.mark.parametrize(("levels", "d"), [(HARMONIC, 1.5), (QUADRUPOLE, 3.0)], ids=["harmonic", "quadrupole"])


def one(value: float) -> np.ndarray:
    return np.array([value])


@BOTH
def test_density_and_number_of_levels_of_power_laws(levels: LevelSums, d: float) -> None:
    x = np.array([1e-9, 1e-4, 0.03, 0.5, 1.0])
    expected = beta(d + 1.0, 0.5) * x ** (d + 0.5)  # of x^d convolved with x^(-1/2)
    np.testing.assert_allclose(levels.density(x), expected, rtol=1e-12)
    np.testing.assert_allclose(levels.levels_below(x), expected * x / (d + 1.5), rtol=1e-12)
    np.testing.assert_allclose(levels.energy_of_levels(levels.levels_below(x)), x, rtol=1e-11)
    assert np.isnan(levels.levels_below(one(1.1)))
    assert np.isnan(levels.energy_of_levels(2.0 * levels.levels_below(one(1.0))))


def test_the_unit_of_levels_is_that_of_a_harmonic_trap() -> None:
    # Levels below e of a harmonic trap: e^3/(6 (hbar w)^3).
    mass, energy, w = 1.4e-25, 3e-29, 2.0 * math.pi * 120.0
    volume = 4.0 * math.pi / 3.0 * (2.0 * energy / mass) ** 1.5 / w**3
    levels = level_unit(mass, one(energy), one(volume)) * HARMONIC.levels_below(one(1.0))
    assert levels.item() == pytest.approx((energy / (1.054571817e-34 * w)) ** 3 / 6.0, rel=1e-8)


@pytest.mark.parametrize(("eta", "share"), [(5.0, 0.896), (4.0, 0.800)])
def test_a_cut_gas_saturates_with_fewer_atoms(eta: float, share: float) -> None:
    deep = beta(2.5, 0.5) * gamma(3.0) * zeta(3.0) / eta**3
    assert HARMONIC.saturated(one(eta)).item() / deep == pytest.approx(share, abs=5e-4)


@BOTH
@pytest.mark.parametrize("eta", [2.0, 9.0, 80.0])
@pytest.mark.parametrize("alpha", [0.0, 0.02, 1.5])
def test_bosons_against_quadrature(levels: LevelSums, d: float, eta: float, alpha: float) -> None:
    def integrand(t: float) -> float:
        return 2.0 * t * beta(d + 1.0, 0.5) * t ** (2.0 * d + 1.0) / math.expm1(eta * t * t + alpha)

    expected = quad(integrand, 0.0, 1.0, epsrel=1e-12, limit=200)[0]
    moments = levels.boson_moments(one(eta), one(alpha))
    assert levels.bosons(one(eta), one(alpha)).item() == pytest.approx(expected, rel=1e-10)
    assert moments.number.item() == pytest.approx(expected, rel=1e-10)
    energy = quad(lambda t: t * t * integrand(t), 0.0, 1.0, epsrel=1e-12, limit=200)[0]
    assert moments.energy.item() == pytest.approx(energy, rel=1e-10)


@BOTH
@pytest.mark.parametrize(("eta", "log_z"), [(5.0, -2.0), (5.0, 7.0), (60.0, 30.0), (900.0, 400.0)])
def test_fermions_against_quadrature(levels: LevelSums, d: float, eta: float, log_z: float) -> None:
    def integrand(x: float) -> float:
        return beta(d + 1.0, 0.5) * x ** (d + 0.5) / (math.exp(min(eta * x - log_z, 700.0)) + 1.0)

    ends = sorted({0.0, 1.0, *(min(max((log_z + step) / eta, 0.0), 1.0) for step in (-30.0, -8.0, 0.0, 8.0, 30.0))})
    expected = sum(quad(integrand, low, high, epsrel=1e-12)[0] for low, high in pairwise(ends))
    moments = levels.fermion_moments(one(eta), one(log_z))
    assert moments.number.item() == pytest.approx(expected, rel=1e-9)
    assert levels.fermi_log_z(one(eta), moments.number).item() == pytest.approx(log_z, rel=1e-8)


def test_thermodynamic_derivatives_are_those_of_the_sums() -> None:
    for statistics, log_z in (("boson", -0.2), ("fermion", 1.3)):
        moments = getattr(HARMONIC, f"{statistics}_moments")
        sign = -1.0 if statistics == "boson" else 1.0

        def energy_at(T: float, moments=moments, sign=sign, log_z=log_z) -> float:
            """E at the atoms of T = 1, eta = 7."""
            solve = HARMONIC.boson_alpha if sign < 0.0 else HARMONIC.fermi_log_z
            number = moments(one(7.0), one(sign * log_z)).number
            return float(moments(one(7.0 / T), solve(one(7.0 / T), number)).energy.item())

        at = moments(one(7.0), one(sign * log_z))
        slope = (energy_at(1.001) - energy_at(0.999)) / 0.002 / at.number.item()
        assert at.heat_capacity(one(7.0)).item() == pytest.approx(7.0 * slope, rel=1e-5)
        near = [moments(one(7.0), one(sign * (log_z + step))) for step in (-1e-4, 1e-4)]
        another = (near[1].energy - near[0].energy) / (near[1].number - near[0].number)
        assert at.energy_of_another.item() == pytest.approx(another.item(), rel=1e-6)


def test_inverses_come_back() -> None:
    eta = np.geomspace(1.5, 300.0, 40)
    number = HARMONIC.saturated(eta) * np.linspace(1e-4, 0.999, 40)
    alpha = HARMONIC.boson_alpha(eta, number)
    np.testing.assert_allclose(HARMONIC.bosons(eta, alpha), number, rtol=1e-9)
    np.testing.assert_allclose(HARMONIC.eta_at_saturation(HARMONIC.saturated(eta)), eta, rtol=1e-10)


def test_a_classical_gas_is_the_incomplete_gamma_function() -> None:
    eta = np.array([3.0, 8.0])
    number, energy = HARMONIC.classical(eta)
    np.testing.assert_allclose(number, beta(2.5, 0.5) * gamma(3.0) * gammainc(3.0, eta) / eta**3, rtol=1e-12)
    np.testing.assert_allclose(eta * energy, 3.0 * gammainc(4.0, eta) / gammainc(3.0, eta), rtol=1e-12)
