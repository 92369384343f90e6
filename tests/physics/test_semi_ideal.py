"""Semi-ideal bosons: conservation of atoms, the published first-order formulas, limits.

References
----------
[1] M. Naraschewski and D. M. Stamper-Kurn, Phys. Rev. A 58, 2423 (1998).
[2] F. Dalfovo, S. Giorgini, L. P. Pitaevskii, S. Stringari, Rev. Mod. Phys. 71, 463 (1999), eqs. (121), (122) for the
    fraction and the energy to first order in eta = mu(T=0)/kTc0 (recalled).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import brentq

from physics.cloud import Equilibrium, Model
from physics.constants import boltzmann, reduced_planck
from physics.semi_ideal_integrals import thermal_number
from physics.statistics import bose, zeta

Maker = Callable[..., Equilibrium]
LENGTH = 5.29177210544e-09


def thermal_atoms_by_quadrature(solved: Equilibrium, mu: float) -> float:
    """Density integrated over ellipsoidal shells of the trap, in SI units, by scipy."""
    m, kT = solved.cloud.mass, boltzmann * float(solved.cloud.temperature)
    wbar = 2.0 * math.pi * float(solved.mean_frequency)
    unit = float(solved.thermal_wavelength) ** -3

    def shell(r: float) -> float:
        V = 0.5 * m * wbar**2 * r**2
        return 4.0 * math.pi * r * r * unit * bose(1.5, abs(V - mu) / kT)

    edge = math.sqrt(2.0 * mu / m) / wbar
    width = math.sqrt(kT / m) / wbar
    cuts = [0.0, 0.7 * edge, edge, edge + 0.1 * width, edge + width, edge + 12.0 * width]
    return sum(quad(shell, a, b, epsrel=1e-11, limit=400)[0] for a, b in pairwise(cuts))


def test_atoms_add_up_by_an_independent_quadrature(bosons: Maker) -> None:
    for temperature in (2e-8, 7e-8, 1.1e-7, 1.25e-7):
        solved = bosons(temperature=temperature)
        mu = float(solved.chemical_potential)
        aho = float(solved.oscillator_length)
        hw = reduced_planck * 2.0 * math.pi * float(solved.mean_frequency)
        condensate = aho / (15.0 * LENGTH) * (2.0 * mu / hw) ** 2.5  # Thomas-Fermi, [2] eq. (51)
        assert condensate == pytest.approx(float(solved.condensate_atoms), rel=1e-11)
        assert condensate + thermal_atoms_by_quadrature(solved, mu) == pytest.approx(1e5, rel=1e-8)


def test_the_root_is_the_one_that_brent_finds(bosons: Maker) -> None:
    solved = bosons(temperature=6e-8)
    X, tau = float(solved.classical_phase_space_density), 6e-8 * boltzmann / (reduced_planck * 2 * math.pi * 60.0)
    coupling = float(solved.oscillator_length) / (15.0 * LENGTH) * 2.0**2.5 / math.sqrt(tau)
    root = brentq(
        lambda x: coupling * x**2.5 + float(thermal_number(np.array([x]))[0]) - X, 1e-6, 20.0, xtol=1e-15, rtol=1e-14
    )
    assert solved.log_fugacity == pytest.approx(root, rel=1e-12)


@given(st.floats(1.0, 10.0), st.floats(-11.0, -5.0), st.floats(-14.0, -6.0))
def test_atoms_add_up_for_any_cloud(bosons: Maker, log_atoms: float, log_temperature: float, log_length: float) -> None:
    given = {"atoms": 10.0**log_atoms, "temperature": 10.0**log_temperature, "scattering_length": 10.0**log_length}
    solved, ideal = bosons(**given), bosons(Model.IDEAL, **given)
    tau = boltzmann * given["temperature"] / (reduced_planck * 2.0 * math.pi * float(solved.mean_frequency))
    x = float(solved.log_fugacity)
    if solved.condensate_fraction > 0.0:
        thermal = tau**3 * float(thermal_number(np.array([x]))[0])
        assert thermal + float(solved.condensate_atoms) == pytest.approx(given["atoms"], rel=1e-12)
    else:
        assert tau**3 * bose(3.0, -x) == pytest.approx(given["atoms"], rel=1e-12)
    # A condensate makes room around it for thermal atoms.
    assert solved.condensate_fraction <= ideal.condensate_fraction


@pytest.mark.parametrize("t", [0.1, 0.2, 0.3, 0.4, 0.5])
@pytest.mark.parametrize("atoms", [1e4, 1e5, 1e6])
def test_fraction_to_first_order_in_the_interaction(bosons: Maker, t: float, atoms: float) -> None:
    # [2] eq. (121): N0/N = 1 - t^3 - (zeta(2)/zeta(3)) eta t^2 (1 - t^3)^(2/5), eta = 1.57 (N^(1/6) a/aho)^(2/5)
    solved = bosons(atoms=atoms, temperature=t * float(bosons(atoms=atoms).critical_temperature))
    eta = 1.5705 * (atoms ** (1 / 6) * LENGTH / float(solved.oscillator_length)) ** 0.4
    fraction = 1.0 - t**3 - zeta(2.0) / zeta(3.0) * eta * t**2 * (1.0 - t**3) ** 0.4
    assert solved.condensate_fraction == pytest.approx(fraction, abs=0.01)


@pytest.mark.parametrize("t", [0.2, 0.4, 0.6])
def test_energy_to_first_order_in_the_interaction(bosons: Maker, t: float) -> None:
    # [2] eq. (122): E/(N kTc0) = 3 zeta(4)/zeta(3) t^4 + (eta/7) (1 - t^3)^(2/5) (5 + 16 t^3)
    a = LENGTH / 100.0  # a weak one: the next order is small
    threshold = float(bosons().critical_temperature)
    solved = bosons(temperature=t * threshold, scattering_length=a)
    eta = 1.5705 * (1e5 ** (1 / 6) * a / float(solved.oscillator_length)) ** 0.4
    energy = 3.0 * zeta(4.0) / zeta(3.0) * t**4 + eta / 7.0 * (1.0 - t**3) ** 0.4 * (5.0 + 16.0 * t**3)
    assert float(solved.energy_per_atom) / (boltzmann * threshold) == pytest.approx(energy, rel=0.02)


def test_pure_condensate_of_thomas_and_fermi(bosons: Maker) -> None:
    # [2] eqs. (51) to (55): mu, radii, peak density, 5/7 mu an atom, mean density 4/7 of the peak.
    cold = bosons(temperature=1e-12)
    m, hw = cold.cloud.mass, reduced_planck * 2.0 * math.pi * 60.0
    mu = 0.5 * hw * (15.0 * 1e5 * LENGTH / float(cold.oscillator_length)) ** 0.4
    G = 4.0 * math.pi * reduced_planck**2 * LENGTH / m
    assert cold.chemical_potential == pytest.approx(mu, rel=1e-6)
    assert cold.peak_density == pytest.approx(mu / G, rel=1e-6)
    assert cold.mean_density == pytest.approx(4.0 / 7.0 * mu / G, rel=1e-6)
    assert cold.energy_per_atom == pytest.approx(5.0 / 7.0 * mu, rel=1e-6)
    omega = 2.0 * math.pi * np.array([120.0, 90.0, 20.0])
    np.testing.assert_allclose(cold.condensate_radii, np.sqrt(2.0 * mu / m) / omega, rtol=1e-6)


@pytest.mark.parametrize("temperature", [1.26e-7, 1.5e-7, 1e-6])
def test_above_threshold_it_is_the_ideal_gas(bosons: Maker, names: list[str], temperature: float) -> None:
    solved, ideal = (
        bosons(temperature=temperature, efficiency=2.0),
        bosons(Model.IDEAL, temperature=temperature, efficiency=2.0),
    )
    for name in names:
        np.testing.assert_allclose(getattr(solved, name), getattr(ideal, name), rtol=1e-14, err_msg=name)


def test_a_vanishing_repulsion_leaves_the_ideal_fractions(bosons: Maker) -> None:
    threshold = float(bosons().critical_temperature)
    for t in (0.3, 0.7, 0.95):
        solved = bosons(temperature=t * threshold, scattering_length=1e-22)
        assert solved.condensate_fraction == pytest.approx(1.0 - t**3, abs=1e-4)
        ideal = bosons(Model.IDEAL, temperature=t * threshold)
        assert solved.energy_per_atom == pytest.approx(ideal.energy_per_atom, rel=1e-3)
        assert solved.thermal_radii == pytest.approx(ideal.thermal_radii, rel=1e-3)


def test_the_threshold_joins_smoothly(bosons: Maker) -> None:
    threshold = float(bosons().critical_temperature)
    below, above = (bosons(temperature=threshold * f) for f in (1 - 1e-9, 1 + 1e-9))
    assert below.condensate_fraction > 0.0 == above.condensate_fraction
    for name in ("peak_density", "mean_density", "energy_per_atom", "thermal_radii", "fugacity"):
        np.testing.assert_allclose(getattr(below, name), getattr(above, name), rtol=1e-3, err_msg=name)


def test_the_densest_point_is_the_edge_where_the_condensate_is_thin(bosons: Maker) -> None:
    threshold = float(bosons().critical_temperature)
    strong = bosons(temperature=0.9999 * threshold, scattering_length=1e-7)
    saturated = zeta(1.5) / float(strong.thermal_wavelength) ** 3
    assert strong.peak_density == pytest.approx(saturated, rel=1e-12)
    assert bosons(temperature=0.5 * threshold).peak_density > 5.0 * saturated


@given(st.floats(0.05, 0.98), st.floats(1.001, 1.5))
def test_warming_and_repelling_empty_the_condensate(bosons: Maker, t: float, factor: float) -> None:
    threshold = float(bosons().critical_temperature)
    cold = bosons(temperature=t * threshold)
    warm = bosons(temperature=t * threshold * factor)
    strong = bosons(temperature=t * threshold, scattering_length=LENGTH * factor)
    assert warm.condensate_fraction < cold.condensate_fraction
    assert strong.condensate_fraction < cold.condensate_fraction
    assert strong.chemical_potential > cold.chemical_potential
