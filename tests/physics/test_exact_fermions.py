"""Exact levels of fermions as an equilibrium: agreement with local density, profiles, arrays, caveats, cost."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from physics.caveats import caveats_of
from physics.cloud import Equilibrium, Model
from physics.constants import boltzmann, reduced_planck
from physics.exact_fermions import ExactFermions
from physics.profiles import column_density_profile, density_profile
from physics.statistics import fermi

Maker = Callable[..., Equilibrium]

FREQUENCIES = np.array([120.0, 90.0, 20.0])


def test_the_model_asked_for_is_used(fermions: Maker) -> None:
    solved = fermions(Model.EXACT_LEVELS)
    assert isinstance(solved, ExactFermions)
    assert (solved.model, solved.replaced) == (Model.EXACT_LEVELS, None)


@pytest.mark.parametrize("temperature", [2e-8, 1e-7, 1e-6])
def test_many_atoms_are_those_of_local_density(fermions: Maker, temperature: float) -> None:
    exact, local = fermions(Model.EXACT_LEVELS, temperature=temperature), fermions(temperature=temperature)
    for name in ("peak_density", "energy_per_atom", "thermal_radii", "mean_density", "reduced_temperature"):
        np.testing.assert_allclose(getattr(exact, name), getattr(local, name), rtol=1e-3)
    # First order: tau^3 f_3 - tau (sum (w_i/wbar)^2/24) f_1 moves ln z by (sum b_i^2/24) f_1/f_2.
    log_z, b = float(local.log_fugacity), reduced_planck * 2.0 * math.pi * FREQUENCIES / (boltzmann * temperature)
    expected = float(np.sum(b**2)) / 24.0 * fermi(1.0, log_z) / fermi(2.0, log_z)
    assert float(exact.log_fugacity) - log_z == pytest.approx(expected, rel=2e-3)


@pytest.mark.parametrize(("atoms", "temperature"), [(20.0, 2e-9), (300.0, 5e-9), (1e4, 5e-8)])
def test_profiles_pass_through_the_peak_and_hold_the_atoms(fermions: Maker, atoms: float, temperature: float) -> None:
    solved = fermions(Model.EXACT_LEVELS, atoms=atoms, temperature=temperature, frequencies=(90.0, 90.0, 90.0))
    x = np.linspace(0.0, 7.0 * float(solved.thermal_radii[0]), 2001)
    for axis in range(3):
        profile = density_profile(solved, axis, x)
        assert profile.total[0] == pytest.approx(float(solved.peak_density), rel=1e-6)
        assert 4.0 * math.pi * np.trapezoid(x * x * profile.total, x) == pytest.approx(atoms, rel=1e-5)
        square = 4.0 * math.pi / 3.0 * np.trapezoid(x**4 * profile.total, x) / atoms
        assert float(solved.thermal_radii[axis]) ** 2 == pytest.approx(square, rel=1e-4)
    column = column_density_profile(solved, 0, x, 1).total
    assert 2.0 * math.pi * np.trapezoid(x * column, x) == pytest.approx(atoms, rel=1e-5)


def test_where_levels_are_too_many_the_profile_is_of_local_density(fermions: Maker) -> None:
    exact, local = fermions(Model.EXACT_LEVELS, temperature=5e-6), fermions(temperature=5e-6)
    x = np.linspace(0.0, 1e-4, 50)
    np.testing.assert_allclose(density_profile(exact, 2, x).total, density_profile(local, 2, x).total, rtol=1e-5)


def test_energy_and_radii_obey_the_virial_theorem(fermions: Maker) -> None:
    solved = fermions(Model.EXACT_LEVELS, atoms=50.0, temperature=4e-9)
    omega = 2.0 * math.pi * FREQUENCIES
    potential = 0.5 * solved.cloud.mass * np.sum(omega**2 * np.asarray(solved.thermal_radii) ** 2)
    assert potential == pytest.approx(0.5 * float(solved.energy_per_atom), rel=1e-12)


def test_a_shell_leaves_its_mark_on_the_central_density(fermions: Maker) -> None:
    # One atom, the ground level; four, three more in the first shell, which has no density at the centre.
    one, four, ten = (
        float(fermions(Model.EXACT_LEVELS, atoms=n, temperature=1e-10, frequencies=(90.0, 90.0, 90.0)).peak_density)
        for n in (1.0, 4.0, 10.0)
    )
    assert four == pytest.approx(one, rel=1e-6)
    # Even states of the second shell: one along each axis, with psi_2(0)^2/psi_0(0)^2 = 1/2.
    assert ten == pytest.approx(2.5 * one, rel=1e-6)


def test_arrays_are_done_one_by_one(fermions: Maker) -> None:
    atoms, temperature = np.array([[50.0], [500.0]]), np.array([3e-9, 1e-8, 5e-8])
    grid = fermions(Model.EXACT_LEVELS, atoms=atoms, temperature=temperature)
    one = fermions(Model.EXACT_LEVELS, atoms=500.0, temperature=1e-8)
    for name in ("log_fugacity", "peak_density", "energy_per_atom"):
        assert getattr(grid, name).shape == (2, 3)
        assert getattr(grid, name)[1, 1] == pytest.approx(float(getattr(one, name)), rel=1e-12)
    assert grid.thermal_radii.shape == (2, 3, 3)


def test_hot_and_dilute_it_is_classical(fermions: Maker) -> None:
    hot = fermions(Model.EXACT_LEVELS, atoms=100.0, temperature=1e-5)
    assert hot.energy_per_atom == pytest.approx(3.0 * boltzmann * 1e-5, rel=1e-4)
    assert hot.peak_phase_space_density == pytest.approx(float(hot.classical_phase_space_density), rel=1e-4)


def test_local_density_caveats_fall_away(fermions: Maker) -> None:
    cold = {"atoms": 50.0, "temperature": 1e-9}
    local = {caveat.id for caveat in caveats_of(fermions(**cold))}
    exact = {caveat.id for caveat in caveats_of(fermions(Model.EXACT_LEVELS, **cold))}
    assert {"shell_structure"} <= local
    assert not {"shell_structure", "local_density", "low_dimension"} & exact
    assert "few_atoms" in exact


@pytest.mark.timeout(30)
def test_the_cost_is_bounded(fermions: Maker) -> None:
    # Any cloud: large and cold, with unlike frequencies; long; hot. Each takes milliseconds.
    for given in (
        {"atoms": 1e7, "temperature": 1e-9},
        {"atoms": 1e6, "temperature": 5e-9, "frequencies": (1000.0, 1370.0, 2110.0)},
        {"atoms": 1e5, "temperature": 1e-8, "frequencies": (1e4, 1e4, 1.0)},
        {"atoms": 1e3, "temperature": 1e-3},
    ):
        solved = fermions(Model.EXACT_LEVELS, **given)
        assert np.isfinite(solved.energy_per_atom)
        assert np.isfinite(solved.peak_density)
