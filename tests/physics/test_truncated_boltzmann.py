"""The cut Boltzmann gas in power-law traps: quadrature over the levels, limits, and the way back from the energy."""

from __future__ import annotations

import math
from typing import Any

import mpmath
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.special import gammainc

from physics import truncated_boltzmann as cut

EXPONENTS = (cut.BOX, 1.0, cut.HARMONIC, 2.2, cut.QUADRUPOLE)


def level_sums(exponent: float, eta: float) -> dict[str, float]:
    """Integrals over the density of states e^(d + 1/2), energies in kT: number, energy, V_ev and X_ev as defined by
    Luiten, Reynolds, Walraven, Phys. Rev. A 53, 381 (1996)."""
    power = exponent + 0.5

    def over(weight: Any) -> float:
        return float(quad(lambda e: e**power * weight(e), 0.0, eta, epsabs=0.0, epsrel=1e-12, limit=200)[0])

    last = math.exp(-eta)
    return {
        "number": over(lambda e: math.exp(-e)),
        "energy": over(lambda e: e * math.exp(-e)),
        "square": over(lambda e: e * e * math.exp(-e)),
        "evaporation": over(lambda e: (eta - e - 1.0) * math.exp(-e) + last),
        "taken": over(lambda e: math.exp(-e) - (eta - e + 1.0) * last),
    }


@pytest.mark.parametrize("exponent", EXPONENTS)
@pytest.mark.parametrize("eta", [0.3, 1.0, 3.0, 6.0, 11.0, 25.0])
def test_closed_forms_are_the_integrals_over_the_levels(exponent: float, eta: float) -> None:
    sums = level_sums(exponent, eta)
    number, energy = sums["number"], sums["energy"] / sums["number"]
    assert cut.reduced_number(exponent, eta) == pytest.approx(number / math.gamma(exponent + 1.5), rel=1e-10)
    assert cut.mean_energy(exponent, eta) == pytest.approx(energy, rel=1e-10)
    assert cut.heat_capacity(exponent, eta) == pytest.approx(sums["square"] / number - energy**2, rel=1e-8)
    assert cut.evaporation_volume(exponent, eta) == pytest.approx(sums["evaporation"] / number, rel=1e-8)
    assert cut.energy_volume(exponent, eta) == pytest.approx(sums["taken"] / number, rel=1e-8)
    assert cut.excess_energy(exponent, eta) == pytest.approx(1.0 - sums["taken"] / sums["evaporation"], rel=1e-8)
    # The levels go as e^(d + 3/2): their occupation at the rim, times their number, over all atoms.
    rim = eta ** (exponent + 1.5) / (exponent + 1.5) * math.exp(-eta)
    assert cut.spilled_share(exponent, eta) == pytest.approx(rim / number, rel=1e-10)


@pytest.mark.parametrize("a", [1.5, 2.0, 2.5, 3.0, 4.5, 6.5, 3.7])
def test_incomplete_gamma_is_that_of_the_library(a: float) -> None:
    x = np.geomspace(1e-6, 300.0, 4001)
    np.testing.assert_allclose(cut.incomplete_gamma(a, x), gammainc(a, x), rtol=3e-14)
    assert cut.incomplete_gamma(a, 0.0) == 0.0


@pytest.mark.parametrize("eta", [1e-3, 0.01, 0.1, 0.5, 0.999, 1.001, 2.0])
def test_evaporation_volume_keeps_its_digits_where_the_formula_cancels(eta: float) -> None:
    with mpmath.workdps(40):
        ratio = mpmath.gammainc(4, 0, eta, regularized=True) / mpmath.gammainc(3, 0, eta, regularized=True)
        exact = float(mpmath.mpf(eta) - 4 * ratio)
    assert cut.evaporation_volume(cut.HARMONIC, eta) == pytest.approx(exact, rel=1e-13)


def test_evaporation_time_in_collisions_is_far_from_its_large_eta_formula() -> None:
    # Row E17 of checks.csv: sqrt(2) e^eta V_e/V_ev = 239.67 at eta = 6 where the formula has 95.1.
    exact = math.sqrt(2.0) * math.exp(6.0) / float(cut.evaporation_volume(cut.HARMONIC, 6.0))
    assert exact == pytest.approx(239.667928322, rel=1e-10)


@pytest.mark.parametrize("exponent", EXPONENTS)
def test_a_deep_trap_has_the_uncut_gas_and_a_shallow_one_even_levels(exponent: float) -> None:
    a = exponent + 1.5
    assert cut.mean_energy(exponent, 60.0) == pytest.approx(a, rel=1e-12)
    assert cut.heat_capacity(exponent, 60.0) == pytest.approx(a, rel=1e-12)
    assert cut.excess_energy(exponent, 1e6) == pytest.approx(1.0, abs=1e-5)
    assert cut.mean_energy(exponent, 1e-6) / 1e-6 == pytest.approx(cut.highest_energy(exponent), rel=1e-6)
    assert cut.heat_capacity(exponent, 1e-3) == pytest.approx(1e-6 * a / ((a + 1.0) ** 2 * (a + 2.0)), rel=1e-3)


def test_centre_of_a_cut_cloud() -> None:
    # "0.981 at eta 5, 0.888 at eta 3": P(3/2, eta), three digits.
    assert cut.central_density(5.0) == pytest.approx(0.981, abs=5e-4)
    assert cut.central_density(3.0) == pytest.approx(0.888, abs=5e-4)


def test_spilling_of_a_light_trap_is_half_that_of_a_knife() -> None:
    # A knife lowers the levels as U^3, light as U^(3/2).
    for eta in (4.0, 7.0):
        share = float(cut.spilled_share(cut.HARMONIC, eta))
        P = float(cut.reduced_number(cut.HARMONIC, eta))
        assert 1.5 * share == pytest.approx(eta**3 / 4.0 * math.exp(-eta) / P, rel=1e-12)


@given(st.floats(0.0, 4.0), st.floats(-3.0, 7.0))
def test_the_energy_tells_the_truncation(exponent: float, log_eta: float) -> None:
    eta = math.exp(log_eta)
    share = float(cut.mean_energy(exponent, eta)) / eta
    assert 0.0 < share < cut.highest_energy(exponent)
    # Close to the highest energy the share itself loses digits.
    assert float(cut.truncation_of(exponent, share)) == pytest.approx(eta, rel=1e-9 + 1e-13 / eta)


@given(st.floats(0.0, 4.0), st.floats(0.01, 400.0))
def test_bounds_that_hold_for_every_cut_cloud(exponent: float, eta: float) -> None:
    assert 0.0 < float(cut.heat_capacity(exponent, eta)) <= exponent + 1.5 + 1e-9
    assert 0.0 < float(cut.evaporation_volume(exponent, eta)) < eta
    assert 0.0 < float(cut.excess_energy(exponent, eta)) < 1.0
    assert 0.0 <= float(cut.spilled_share(exponent, eta)) <= 1.0


def test_too_much_energy_has_no_truncation() -> None:
    found = cut.truncation_of(cut.HARMONIC, [0.74, 0.75, 0.9, -0.1, math.nan])
    assert np.isnan(found).tolist() == [False, True, True, True, True]
