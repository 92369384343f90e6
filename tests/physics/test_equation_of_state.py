"""Uniform and trapped equations of state: virial series, thermodynamic identities, a Gaussian fit by least squares.

Reference
---------
[1] J. E. Robinson, Phys. Rev. 83, 678 (1951).
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import curve_fit

from physics import equation_of_state as eos
from physics.constants import boltzmann, planck
from physics.particles import Statistics
from physics.statistics import bose, fermi, zeta

BOSE, FERMI = Statistics.BOSE, Statistics.FERMI
BOTH = [(BOSE, 1.0), (FERMI, -1.0)]


@pytest.mark.parametrize(("statistics", "sign"), BOTH)
def test_virial_series(statistics: Statistics, sign: float) -> None:
    # The third coefficient is left over: divided by x^2 the difference must vanish with x.
    for x in (1e-2, 1e-3):
        for function, (first, second) in (
            (eos.pressure_over_classical, eos.VIRIAL_PRESSURE),
            (eos.energy_over_classical, eos.VIRIAL_ENERGY),
            (eos.peak_density_over_classical, eos.VIRIAL_DENSITY),
        ):
            left = float(function(statistics, x)) - 1.0 - sign * first * x - second * x * x
            assert abs(left) < 0.08 * x**3 + 3e-15


def test_virial_coefficients_as_printed() -> None:
    # p/nkT: -0.176777, -0.00330006; E/3NkT: -1/16, -0.009066; D: 0.22855, 0.09827
    assert pytest.approx((-0.176777, -0.00330006), rel=3e-6) == eos.VIRIAL_PRESSURE
    assert pytest.approx((-0.0625, -0.009066), rel=1e-4) == eos.VIRIAL_ENERGY
    assert pytest.approx((0.22855, 0.09827), rel=5e-5) == eos.VIRIAL_DENSITY


def test_saturated_bosons() -> None:
    assert eos.pressure_over_classical(BOSE, zeta(1.5)) == pytest.approx(0.5135, abs=5e-5)  # zeta(5/2)/zeta(3/2)
    assert eos.energy_over_classical(BOSE, zeta(3.0)) == pytest.approx(0.900393, abs=1e-6)  # zeta(4)/zeta(3)
    assert eos.log_fugacity(BOSE, 3.0) == 0.0
    assert eos.trapped_log_fugacity(BOSE, 2.0) == 0.0


def test_degenerate_fermions_have_the_pressure_of_the_sea() -> None:
    # p = (2/5) n EF with EF = (hbar^2/2m) (6 pi^2 n)^(2/3)
    m, n = 6.6e-26, 1e19
    energy = (planck / (2.0 * math.pi)) ** 2 / (2.0 * m) * (6.0 * math.pi**2 * n) ** (2.0 / 3.0)
    assert eos.pressure(FERMI, m, n, 1e-12) == pytest.approx(0.4 * n * energy, rel=1e-8)


@given(st.sampled_from([BOSE, FERMI]), st.floats(-6.0, 0.3))
def test_pressure_is_two_thirds_of_the_energy_density(statistics: Statistics, log_x: float) -> None:
    # p = (2/3) u by d p/d T at fixed ln z and the Gibbs relation: u = T s - p + mu n; here through the classical limit
    # and the ratio of the functions, which do not share code with the ratio under test.
    x = 10.0**log_x
    log_z = float(eos.log_fugacity(statistics, x))
    function = bose if statistics is BOSE else fermi
    argument = -log_z if statistics is BOSE else log_z
    if statistics is BOSE and x >= zeta(1.5):
        return
    assert function(1.5, argument) == pytest.approx(x, rel=1e-13)
    assert eos.pressure_over_classical(statistics, x) == pytest.approx(function(2.5, argument) / x, rel=1e-12)


@pytest.mark.parametrize("x", [0.1, 1.0, 2.5])
def test_heat_capacities_are_derivatives_of_the_energy(x: float) -> None:
    # At fixed N and volume x goes as T^(-3/2); at fixed N and frequencies X goes as T^-3.
    h = 1e-4
    for statistics, _ in BOTH:
        if x < 1.2 or statistics is FERMI:
            energy = [t * float(eos.energy_over_classical(statistics, x * t**-3)) for t in (1.0 + h, 1.0 - h)]
            derivative = (energy[0] - energy[1]) / (2.0 * h)
            assert eos.trapped_heat_capacity_over_classical(statistics, x) == pytest.approx(derivative, rel=1e-6)
        energy = [t * float(eos.pressure_over_classical(statistics, x * t**-1.5)) for t in (1.0 + h, 1.0 - h)]
        derivative = (energy[0] - energy[1]) / (2.0 * h)
        assert eos.heat_capacity_over_classical(statistics, x) == pytest.approx(derivative, rel=1e-6)


@pytest.mark.parametrize(
    ("statistics", "log_z"), [(BOSE, 0.0), (BOSE, -0.3), (BOSE, -3.0), (FERMI, -1.0), (FERMI, 2.0), (FERMI, 20.0)]
)
def test_gaussian_fit_of_an_image_by_least_squares(statistics: Statistics, log_z: float) -> None:
    # A plane image as a function of the radius, each ring weighing its circumference: sigma = 1/sqrt(r).
    reach = math.sqrt(2.0 * (6.0 * max(log_z, 0.0) + 30.0))
    r = np.linspace(0.0, reach, 20_001)[1:]
    column = bose(2.0, r * r / 2.0 - log_z) if statistics is BOSE else fermi(2.0, log_z - r * r / 2.0)

    def gaussian(r: np.ndarray, height: float, width: float) -> np.ndarray:
        return height * np.exp(-r * r / (2.0 * width**2))

    start = (column[0], math.sqrt(max(1.0, log_z / 3.0)))
    (_, width), _ = curve_fit(gaussian, r, column, p0=start, sigma=1.0 / np.sqrt(r), xtol=1e-12, ftol=1e-12, gtol=1e-12)
    assert eos.gaussian_fit_temperature(statistics, log_z) == pytest.approx(width**2, rel=2e-6)


@pytest.mark.parametrize(("statistics", "sign"), BOTH)
def test_gaussian_fit_of_a_nearly_classical_image(statistics: Statistics, sign: float) -> None:
    # First order in z: T_fit/T = 1 -/+ z/9.
    z = 1e-3
    fitted = eos.gaussian_fit_temperature(statistics, math.log(z))
    assert fitted == pytest.approx(1.0 - sign * z / 9.0, abs=2.0 * z * z)


def test_arrays_keep_their_shape() -> None:
    log_z = np.linspace(-5.0, 0.0, 6).reshape(2, 3)
    assert eos.gaussian_fit_temperature(BOSE, log_z).shape == (2, 3)
    assert eos.pressure(BOSE, 1e-25, np.ones((2, 1)) * 1e18, np.full(3, 1e-6)).shape == (2, 3)
    assert eos.pressure(BOSE, 1e-25, 1e12, 1e-6) == pytest.approx(1e12 * boltzmann * 1e-6, rel=1e-6)
