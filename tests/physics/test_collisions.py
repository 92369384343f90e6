"""Cross-sections and collision rates against closed forms, quadrature and their limits."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.special import exp1

from physics import collisions
from physics.constants import boltzmann, reduced_planck
from physics.particles import Statistics

MASS, TEMPERATURE = 1.4e-25, 1e-6


def length_for(K: float) -> float:
    """Scattering length at which m kT a^2/hbar^2 has a value."""
    return math.sqrt(K) * reduced_planck / math.sqrt(MASS * boltzmann * TEMPERATURE)


def factor(K: float) -> float:
    return float(collisions.thermal_cross_section_factor(MASS, np.asarray(TEMPERATURE), np.asarray(length_for(K))))


@pytest.mark.parametrize(("K", "printed"), [(0.1, 0.844), (1.0, 0.404), (10.0, 0.0799)])
def test_thermal_cross_section_as_printed(K: float, printed: float) -> None:
    assert factor(K) == pytest.approx(printed, rel=1.3e-3)


@given(st.floats(-1.5, 3.0))
def test_thermal_cross_section_in_closed_form(log_K: float) -> None:
    # [1 - e^(1/K) E1(1/K)/K]/K; below K = 0.03 the closed form loses digits.
    K = 10.0**log_K
    y = 1.0 / K
    assert factor(K) == pytest.approx(y * (1.0 - y * math.exp(y) * float(exp1(y))), rel=1e-11)


def test_slow_and_unitary_limits() -> None:
    assert factor(1e-6) == pytest.approx(1.0 - 2e-6, rel=1e-11)  # 1 - 2K + ...
    # 8 pi a^2 times the factor -> 8 pi hbar^2/(m kT)
    K = 1e12
    sigma = 8.0 * math.pi * length_for(K) ** 2 * factor(K)
    assert sigma == pytest.approx(8.0 * math.pi * reduced_planck**2 / (MASS * boltzmann * TEMPERATURE), rel=1e-9)


@pytest.mark.parametrize(
    ("statistics", "components", "expected"),
    [
        (Statistics.BOSE, 1, 8.0),
        (Statistics.BOSE, 3, 16.0),
        (Statistics.FERMI, 1, 0.0),
        (Statistics.FERMI, 2, 4.0),
        (Statistics.FERMI, 4, 12.0),
    ],
)
def test_partners_in_all_spin_states_count(statistics: Statistics, components: int, expected: float) -> None:
    # n counts one state: 8 pi a^2 with its own kind (bosons), 4 pi a^2 with each other state.
    sigma = collisions.low_energy_cross_section(statistics, np.asarray(2.0), components)
    assert sigma == pytest.approx(expected * math.pi * 4.0, rel=1e-14)


def test_unknown_length_is_no_cross_section_but_for_one_state_of_fermions() -> None:
    unknown = np.asarray(math.nan)
    assert np.isnan(collisions.low_energy_cross_section(Statistics.BOSE, unknown, 1))
    assert np.isnan(collisions.low_energy_cross_section(Statistics.FERMI, unknown, 2))
    assert collisions.low_energy_cross_section(Statistics.FERMI, unknown, 1) == 0.0
    assert np.isnan(collisions.thermal_cross_section_factor(MASS, np.asarray(1e-6), unknown))


def test_mean_rate_is_an_average_over_the_cloud() -> None:
    # n(r) = n(0) e^(-r^2/2): (integral n^2/integral n) sigma sqrt(2) vbar
    r = np.linspace(0.0, 12.0, 4001)
    n = np.exp(-r * r / 2.0)
    mean = np.trapezoid(n * n * r * r, r) / np.trapezoid(n * r * r, r)
    speed = collisions.mean_speed(MASS, np.asarray(TEMPERATURE))
    assert speed == pytest.approx(math.sqrt(8.0 * boltzmann * TEMPERATURE / (math.pi * MASS)), rel=1e-15)
    rate = collisions.mean_collision_rate(np.asarray(3e18), np.asarray(1e-15), speed)
    assert rate == pytest.approx(3e18 * mean * 1e-15 * math.sqrt(2.0) * float(speed), rel=1e-10)


def test_thermal_cross_section_by_quadrature() -> None:
    # <sigma v>/<v> of sigma0/(1 + k^2 a^2): over relative speeds, weight v^3 e^(-m v^2/4kT).
    length = length_for(2.5)
    scale = math.sqrt(4.0 * boltzmann * TEMPERATURE / MASS)

    def weighted(v: float, sigma: bool) -> float:
        k = MASS * v * scale / (2.0 * reduced_planck)
        share = float(collisions.cross_section(np.asarray(length), np.asarray(k))) if sigma else 1.0
        return v**3 * math.exp(-v * v) * share

    mean = quad(weighted, 0.0, 9.0, (True,), epsrel=1e-12)[0] / quad(weighted, 0.0, 9.0, (False,), epsrel=1e-12)[0]
    assert 8.0 * math.pi * length**2 * factor(2.5) == pytest.approx(mean, rel=1e-10)


@given(st.floats(-12.0, 12.0))
def test_thermal_cross_section_to_rounding_everywhere(log_K: float) -> None:
    K = 10.0**log_K
    with mpmath.workdps(60):
        y = 1 / mpmath.mpf(K)
        exact = float(y * (1 - y * mpmath.exp(y) * mpmath.expint(1, y))) if K > 1e-3 else None
    if exact is None:  # 1 - 2K + 6K^2 ...: the mean of K^n t^n is (n + 1)! K^n
        exact = 1.0 - 2.0 * K + 6.0 * K**2 - 24.0 * K**3 + 120.0 * K**4 - 720.0 * K**5
    assert factor(K) == pytest.approx(exact, rel=1e-12)


def test_cross_section_at_zero_speed_and_at_unitarity() -> None:
    a, k = np.asarray(1e-8), np.asarray([0.0, 1e12])
    assert collisions.cross_section(a, k)[0] == pytest.approx(8.0 * math.pi * 1e-16, rel=1e-14)
    assert collisions.cross_section(a, k)[1] == pytest.approx(8.0 * math.pi / 1e24, rel=1e-6)


def test_dipolar_cross_sections() -> None:
    # J. L. Bohn and D. S. Jin, Phys. Rev. A 89, 022702 (2014), with a_d = 1.5 a_dd: 2.234 a_d^2 and 6.702 a_d^2.
    bosons = collisions.dipolar_cross_section(Statistics.BOSE, np.asarray(2.0 / 3.0))
    fermions = collisions.dipolar_cross_section(Statistics.FERMI, np.asarray(2.0 / 3.0))
    assert bosons == pytest.approx(2.234, rel=1e-3)
    assert fermions == pytest.approx(6.702, rel=1e-3)


def test_peak_rate_meets_atoms_at_the_relative_speed() -> None:
    assert collisions.peak_collision_rate(np.asarray(2.0), np.asarray(3.0), np.asarray(5.0)) == pytest.approx(
        30.0 * math.sqrt(2.0), rel=1e-14
    )
