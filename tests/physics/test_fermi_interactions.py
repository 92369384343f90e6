"""Estimates for interacting fermions: published numbers, quadrature, and where they end."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from physics import fermi_interactions as interactions
from physics.cloud import Equilibrium
from physics.constants import atomic_mass, reduced_planck
from physics.fermi_interactions import FermiEstimates
from physics.profiles import density_profile

Maker = Callable[..., Equilibrium]


@pytest.mark.parametrize(("kFa", "expected"), [(-0.2, 0.28 * math.exp(-math.pi / 0.4)), (-0.8, 0.28 * 0.1403)])
def test_weak_attraction(kFa: float, expected: float) -> None:
    # Tc/TF = 0.28 exp(-pi/(2 kF |a|)), Gorkov and Melik-Barkhudarov (1961), two digits.
    assert interactions.superfluid_temperature_ratio(1.0 / kFa) == pytest.approx(expected, rel=0.02)


def test_unitarity() -> None:
    # Ku et al., Science 335, 563 (2012): xi = 0.376(4), so mu = 0.613 EF in a trap; Tc about 0.2 TF there.
    assert interactions.chemical_potential_ratio(0.0) == pytest.approx(math.sqrt(0.376), abs=0.004)
    assert interactions.superfluid_temperature_ratio(0.0) == pytest.approx(0.2, abs=0.02)


def test_pairs_condense_at_half_the_fermi_temperature() -> None:
    # 0.518 TF: N pairs in the trap of 2N atoms, whatever their number.
    assert interactions.superfluid_temperature_ratio(3.0) == pytest.approx(0.518, abs=5e-4)


def test_between_the_ranges_there_is_no_number() -> None:
    x = np.array([-5.0, -1.0, -0.6, -0.21, -0.2, 0.0, 0.2, 0.21, 1.0, 1.1, np.nan])
    known = [True, False, False, False, True, True, True, False, False, True, False]
    for function in (interactions.superfluid_temperature_ratio, interactions.chemical_potential_ratio):
        assert np.isfinite(function(x)).tolist() == known


def test_the_mean_field_of_a_filled_sea_by_quadrature() -> None:
    # First order: E1 = (4 pi hbar^2 a/m) integral of n^2; with N^(3/2) the power of N in it, mu1 = (1/2) dE1/dN.
    r = np.linspace(0.0, 1.0, 200001)
    n = (1.0 - r * r) ** 1.5
    ratio = np.trapezoid(n * n * r * r, r) / np.trapezoid(n * r * r, r)  # <n>/n(0)
    # n(0) = kF^3/(6 pi^2), EF = hbar^2 kF^2/(2m): E1/N = EF kF a (4/(3 pi)) <n>/n(0).
    expected = 0.75 * 4.0 / (3.0 * math.pi) * ratio
    for kFa in (-0.1, 0.1):
        assert interactions.chemical_potential_ratio(1.0 / kFa) == pytest.approx(1.0 + expected * kFa, rel=1e-9)


def test_no_interaction_leaves_the_ideal_sea() -> None:
    x = interactions.interaction_parameter(1e7, 0.0)
    assert np.isinf(x)
    assert interactions.chemical_potential_ratio(-1e12) == pytest.approx(1.0, rel=1e-12)
    assert interactions.superfluid_temperature_ratio(-1e12) == 0.0
    assert interactions.chemical_potential_ratio(x) == 1.0


def test_pairs_of_lithium() -> None:
    # 6Li at 690 G, a = 1.4e3 a0 (recalled): E_b/h = hbar/(2 pi m a^2) ... about 0.3 MHz, one digit.
    m, a = 6.0151 * atomic_mass, 1.4e3 * 5.29177e-11
    energy = float(interactions.pair_binding_energy(m, a))
    assert energy == pytest.approx(reduced_planck**2 / (m * a * a), rel=1e-14)
    assert energy / (2.0 * math.pi * reduced_planck) == pytest.approx(0.3e6, rel=0.2)
    assert np.isnan(interactions.pair_binding_energy(m, -a))


def test_pairs_form_the_thomas_fermi_condensate_of_their_mass_and_length() -> None:
    # S. Giorgini et al., Rev. Mod. Phys. 80, 1215 (2008): mu of N bosons of mass 2m and length 0.6 a, here by
    # integrating the inverted parabola: N = (mu/G)(8 pi/15) R^3, R = sqrt(2 mu/(2m))/w.
    m, N, w, a = 6.0151 * atomic_mass, 1e5, 2.0 * math.pi * 100.0, 3e-8
    mu = float(interactions.pair_chemical_potential(m, N, w, a))
    G = 4.0 * math.pi * reduced_planck**2 * 0.6 * a / (2.0 * m)
    R = math.sqrt(2.0 * mu / (2.0 * m)) / w
    assert mu / G * 8.0 * math.pi / 15.0 * R**3 == pytest.approx(N, rel=1e-12)
    assert np.isnan(interactions.pair_chemical_potential(m, N, w, -a))


# --- of an equilibrium ---


def test_the_ideal_cloud_ends_at_the_fermi_radii(fermions: Maker) -> None:
    cold = fermions(temperature=1e-12)
    radii = FermiEstimates(equilibrium=cold).fermi_radii
    for axis in range(3):
        edge = density_profile(cold, axis, np.array([0.0, 0.99, 1.01]) * radii[axis]).total
        assert edge[1] > 1e-3 * edge[0]
        assert edge[2] < 1e-9 * edge[0]


def test_two_states_have_a_coupling_and_one_has_none(fermions: Maker, bosons: Maker) -> None:
    mixture = FermiEstimates(equilibrium=fermions(spin_components=2, scattering_length=-5e-8))
    solved = mixture.equilibrium
    kFa = float(solved.fermi_wavenumber) * -5e-8
    assert mixture.interaction_parameter == pytest.approx(1.0 / kFa, rel=1e-14)
    expected = interactions.GORKOV * math.exp(-math.pi / (2.0 * abs(kFa))) * float(solved.fermi_temperature)
    assert mixture.superfluid_temperature == pytest.approx(expected, rel=1e-12)
    assert np.isnan(mixture.pair_binding_energy)
    for other in (fermions(scattering_length=-5e-8), fermions(spin_components=2), bosons()):
        found = FermiEstimates(equilibrium=other)
        names = ("interaction_parameter", "superfluid_temperature", "interacting_chemical_potential")
        assert all(np.isnan(getattr(found, name)) for name in (*names, "pair_binding_energy"))


def test_unitarity_of_a_cloud(fermions: Maker) -> None:
    found = FermiEstimates(equilibrium=fermions(spin_components=2, scattering_length=1e-4))
    assert abs(float(found.interaction_parameter)) < 0.01
    EF = float(found.equilibrium.fermi_energy)
    assert found.interacting_chemical_potential == pytest.approx(0.613 * EF, rel=2e-3)
    lengths = FermiEstimates(equilibrium=fermions(spin_components=2, scattering_length=[1e-9, 3e-7, -1e-9]))
    assert lengths.superfluid_temperature.shape == (3,)
    assert np.isnan(lengths.superfluid_temperature).tolist() == [False, True, False]
