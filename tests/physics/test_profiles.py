"""Profiles: what they sum to, how they decay, and that they agree with the scalar answers."""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import quad

from physics.cloud import AVAILABLE_MODELS, Equilibrium, Model
from physics.profiles import Profile, column_density_profile, density_profile

Maker = Callable[..., Equilibrium]
LOCAL_DENSITY = [Model.IDEAL, Model.SEMI_IDEAL, Model.HARTREE_FOCK]
PARTS = ("thermal", "condensate", "total", "classical")

# Below and above Tc0 (126 nK), or T/TF = 0.2 and 0.8.
TEMPERATURES = [5e-8, 2e-7]


def column_by_quadrature(solved: Equilibrium, part: str, x: float, along: int) -> float:
    """The density at (x, 0, z) summed over z by scipy; in local density it depends on V only, so that along one axis
    serves all."""
    f = np.asarray(solved.cloud.trap.frequencies)

    def density(z: float) -> float:
        r = math.hypot(x * f[0], z * f[along]) / f[0]
        return float(getattr(density_profile(solved, 0, [r]), part)[0])

    sizes = [solved.thermal_radii[along], solved.oscillator_lengths[along]]
    radii = solved.condensate_radii
    edges = [0.0]
    if np.all(np.isfinite(radii)):
        edge = math.sqrt(max(0.0, 1.0 - (x / radii[0]) ** 2)) * radii[along]
        edges += [0.98 * edge, edge, 1.02 * edge] if edge else []
    edges += [float(edges[-1] + k * s) for k, s in ((1.0, sizes[1]), (1.0, sizes[0]), (12.0, sizes[0]))]
    edges = sorted(set(edges))
    return 2.0 * sum(quad(density, a, b, epsrel=1e-9, epsabs=1e-30, limit=100)[0] for a, b in pairwise(edges))


@pytest.mark.parametrize("temperature", TEMPERATURES)
@pytest.mark.parametrize("model", LOCAL_DENSITY)
@pytest.mark.parametrize("x", [0.0, 2e-6, 7e-6])
def test_column_density_of_bosons_by_quadrature(bosons: Maker, model: Model, temperature: float, x: float) -> None:
    solved = bosons(model, temperature=temperature)
    column = column_density_profile(solved, 0, [x], 2)
    for part in ("thermal", "classical") if model is Model.IDEAL else PARTS:
        expected = column_by_quadrature(solved, part, x, 2)
        assert getattr(column, part)[0] == pytest.approx(expected, rel=1e-6, abs=1e-3), part


@pytest.mark.parametrize("temperature", TEMPERATURES)
def test_column_density_of_fermions_by_quadrature(fermions: Maker, temperature: float) -> None:
    solved = fermions(temperature=temperature)
    for x in (0.0, 5e-6):
        column = column_density_profile(solved, 0, [x], 1)
        assert column.thermal[0] == pytest.approx(column_by_quadrature(solved, "thermal", x, 1), rel=1e-7)
        assert column.condensate[0] == 0.0


def atoms_in(profile: Profile, part: str, frequencies: tuple[float, float, float]) -> float:
    """A column density f(x) of a local-density cloud along x, summed over the plane of sight."""
    # In the plane (x, y) it depends on wx^2 x^2 + wy^2 y^2.
    x, values = profile.positions, getattr(profile, part)
    return 2.0 * math.pi * frequencies[0] / frequencies[1] * float(np.trapezoid(values * x, x))


@pytest.mark.parametrize("temperature", TEMPERATURES)
@pytest.mark.parametrize("model", LOCAL_DENSITY)
def test_profiles_hold_all_atoms(bosons: Maker, model: Model, temperature: float) -> None:
    solved = bosons(model, temperature=temperature)
    x = np.linspace(0.0, 12.0 * float(solved.thermal_radii[0]), 200_001)
    profile = column_density_profile(solved, 0, x, 2)
    f = (120.0, 90.0, 20.0)
    condensed = float(solved.condensate_atoms)
    assert atoms_in(profile, "thermal", f) == pytest.approx(1e5 - condensed, rel=1e-6)
    assert atoms_in(profile, "classical", f) == pytest.approx(1e5, rel=1e-6)
    if model is not Model.IDEAL and condensed:
        assert atoms_in(profile, "condensate", f) == pytest.approx(condensed, rel=1e-6)


@pytest.mark.parametrize("temperature", TEMPERATURES)
def test_exact_profiles_hold_all_atoms(bosons: Maker, temperature: float) -> None:
    # In an isotropic trap the column density is one of the radius, whatever the model.
    solved = bosons(Model.EXACT_LEVELS, temperature=temperature, frequencies=(60.0, 60.0, 60.0))
    x = np.linspace(0.0, 14.0 * float(solved.thermal_radii[0]), 8001)
    profile = column_density_profile(solved, 0, x, 2)
    ground = float(solved.condensate_atoms)
    for part, atoms in (("condensate", ground), ("thermal", 1e5 - ground), ("total", 1e5)):
        assert atoms_in(profile, part, (60.0, 60.0, 60.0)) == pytest.approx(atoms, rel=1e-4), part


@pytest.mark.parametrize("temperature", TEMPERATURES)
@pytest.mark.parametrize("model", AVAILABLE_MODELS)
@pytest.mark.parametrize("axis", [0, 1, 2])
def test_centre_of_a_profile_is_the_peak_density(bosons: Maker, model: Model, temperature: float, axis: int) -> None:
    solved = bosons(model, temperature=temperature)
    profile = density_profile(solved, axis, [0.0])
    assert profile.total[0] == pytest.approx(float(solved.peak_density), rel=1e-12)
    column = column_density_profile(solved, axis, [0.0], (axis + 1) % 3)
    assert column.total[0] == pytest.approx(column.thermal[0] + column.condensate[0], rel=1e-14)


@pytest.mark.parametrize("model", AVAILABLE_MODELS)
def test_profiles_are_even_and_fall_outside_the_condensate(bosons: Maker, model: Model) -> None:
    solved = bosons(model, temperature=5e-8)
    x = np.linspace(-4e-5, 4e-5, 401)
    for profile in (density_profile(solved, 0, x), column_density_profile(solved, 0, x, 1)):
        for part in PARTS:
            values: NDArray[np.float64] = getattr(profile, part)
            np.testing.assert_allclose(values, values[::-1], rtol=1e-12)
            assert np.all(values >= 0.0)
        assert np.all(np.diff(profile.total[x > 6e-6]) <= 0.0)


def test_thermal_density_peaks_at_the_edge_of_the_condensate(bosons: Maker) -> None:
    solved = bosons(temperature=5e-8)
    edge = float(solved.condensate_radii[0])
    profile = density_profile(solved, 0, np.linspace(0.0, 2.0 * edge, 2001))
    assert profile.positions[np.argmax(profile.thermal)] == pytest.approx(edge, rel=1e-3)
    at_edge = density_profile(solved, 0, [edge])
    assert at_edge.thermal[0] * float(solved.thermal_wavelength) ** 3 == pytest.approx(2.612375, rel=1e-5)
    assert at_edge.condensate[0] == pytest.approx(0.0, abs=1e-9 * float(solved.peak_density))


def test_an_ideal_condensate_has_the_width_of_the_ground_level(bosons: Maker) -> None:
    solved = bosons(Model.IDEAL, temperature=1e-10)
    a = float(solved.oscillator_lengths[2])
    profile = density_profile(solved, 2, [0.0, a])
    assert profile.condensate[1] / profile.condensate[0] == pytest.approx(math.exp(-1.0), rel=1e-12)


def test_a_warm_cloud_is_classical(bosons: Maker, fermions: Maker) -> None:
    for maker in (bosons, fermions):
        solved = maker(Model.IDEAL, temperature=1e-4)
        x = np.linspace(0.0, 1e-3, 30)
        for profile in (density_profile(solved, 1, x), column_density_profile(solved, 1, x, 0)):
            np.testing.assert_allclose(profile.thermal, profile.classical, rtol=1e-6)


def test_what_has_no_profile_is_refused(bosons: Maker) -> None:
    with pytest.raises(ValueError, match=r"^a profile is of one cloud, got an array of clouds of shape \(2,\)$"):
        density_profile(bosons(atoms=[1e4, 1e5]), 0, [0.0])
    with pytest.raises(ValueError, match=r"^axis must be 0, 1 or 2, got 3$"):
        density_profile(bosons(), 3, [0.0])
    with pytest.raises(ValueError, match=r"^line of sight must be a trap axis 0, 1 or 2 other than axis 1, got 1$"):
        column_density_profile(bosons(), 1, [0.0], 1)
