"""Level sums against level-by-level and term-by-term sums, oscillator eigenfunctions and quadrature."""

from __future__ import annotations

import itertools
import math
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.special import eval_hermite, factorial

from physics.checks import Floats
from physics.oscillator_levels import OscillatorLevels, integer_rule, squared_density

TRAPS = [(0.9, 0.8, 0.7), (3.0, 0.6, 1.1)]


def level_sums(spacings: tuple[float, float, float], alpha: float) -> tuple[float, Floats]:
    """Atoms above the ground level and their energies per axis, level by level up to 45 kT."""
    atoms, energies = 0.0, np.zeros(3)
    for levels in itertools.product(*(range(int(45.0 / b) + 1) for b in spacings)):
        height = float(np.dot(levels, spacings))
        if 0.0 < height < 45.0:
            occupation = 1.0 / math.expm1(alpha + height)
            atoms += occupation
            energies += occupation * (np.array(levels) + 0.5) * spacings
    return atoms, energies


@pytest.mark.parametrize("spacings", TRAPS)
@pytest.mark.parametrize("alpha", [0.0, 1e-4, 0.3])
def test_atoms_and_energies_level_by_level(spacings: tuple[float, float, float], alpha: float) -> None:
    levels = OscillatorLevels(np.array(spacings))
    atoms, energies = level_sums(spacings, alpha)
    assert levels.excited_atoms(alpha) == pytest.approx(atoms, rel=1e-12)
    np.testing.assert_allclose(levels.excited_energies(alpha), energies, rtol=1e-12)


@pytest.mark.parametrize("spacings", [(0.05, 0.05, 0.05), (0.5, 0.5, 0.005), (2.0, 0.3, 1e-3), (1e-3, 1e-3, 1e-4)])
@pytest.mark.parametrize("alpha", [0.0, 1e-6, 1e-3, 0.3, 5.0])
def test_a_few_nodes_sum_as_all_terms_do(spacings: tuple[float, float, float], alpha: float) -> None:
    j = np.arange(1.0, 60.0 / min(spacings))
    x, y, z = (1.0 / np.expm1(np.minimum(j * b, 690.0)) for b in spacings)
    terms = np.exp(-j * alpha) * (x + y + z + x * y + y * z + z * x + x * y * z)
    levels = OscillatorLevels(np.array(spacings))
    assert levels.excited_atoms(alpha) == pytest.approx(math.fsum(terms), rel=3e-15)
    assert levels._j.size < 400


def eigenfunction(n: int, x: Floats) -> Floats:
    """Of the oscillator, x in units of a."""
    norm = 1.0 / np.sqrt(2.0**n * factorial(n) * math.sqrt(math.pi))
    value: Floats = norm * np.exp(-x * x / 2.0) * eval_hermite(n, x)
    return value


@pytest.mark.parametrize("alpha", [1e-3, 0.5])
def test_density_is_the_sum_of_squared_eigenfunctions(alpha: float) -> None:
    spacings = np.array([0.9, 0.7, 0.5])
    x = np.array([0.0, 0.4, 1.3, 2.5])
    squared = [np.stack([eigenfunction(n, x) ** 2 for n in range(60)]) for _ in range(2)]
    at_centre = [np.array([eigenfunction(n, np.zeros(1))[0] ** 2 for n in range(60)])] * 2
    expected = np.zeros_like(x)
    for i, j, k in itertools.product(range(60), range(60), range(60)):
        height = float(spacings @ (i, j, k))
        if 0.0 < height < 40.0:
            expected += squared[0][i] * at_centre[0][j] * at_centre[1][k] / math.expm1(alpha + height)
    squares = np.stack([x * x, np.zeros_like(x), np.zeros_like(x)])
    density = OscillatorLevels(spacings).excited_density(alpha, squares) / math.pi**1.5
    np.testing.assert_allclose(density, expected, rtol=1e-10)


@pytest.mark.parametrize(
    ("spacings", "alpha"), [((0.02, 0.05, 0.03), 1e-4), ((3.0, 2.0, 1.0), 0.1), ((0.5, 0.5, 0.01), 0.0)]
)
def test_a_column_is_the_density_summed_along_it(spacings: tuple[float, float, float], alpha: float) -> None:
    levels = OscillatorLevels(np.array(spacings))
    z = np.linspace(-130.0, 130.0, 13001)  # the trapezoidal rule is exact for these Gaussians
    squares = np.stack([np.full_like(z, 0.25), np.full_like(z, 1.7), z * z])
    column = levels.excited_density(alpha, squares).sum() * (z[1] - z[0]) / math.sqrt(math.pi)
    assert levels.excited_column(alpha, squares[:, :1], 2)[0] == pytest.approx(column, rel=1e-12)


@pytest.mark.parametrize(("spacing", "ground"), [(0.05, 3.0), (0.3, 1e3), (0.01, 1e5), (4.0, 10.0)])
def test_squared_density_integrates_the_density(spacing: float, ground: float) -> None:
    spacings = np.full(3, spacing)
    alpha = math.log1p(1.0 / ground)
    levels = OscillatorLevels(spacings)

    def shell(r: float) -> float:
        squares = np.array([[r * r], [0.0], [0.0]])
        density = levels.excited_density(alpha, squares)[0] + ground * math.exp(-r * r)
        return 4.0 * math.pi * r * r * density**2 / math.pi**1.5

    reach = math.sqrt(2.0 * 40.0 / spacing) + 6.0
    cuts = [0.0, 1.0, 2.0, 4.0, reach]
    expected = sum(quad(shell, a, b, epsrel=1e-10, limit=200)[0] for a, b in pairwise(cuts))
    assert squared_density(spacings, alpha, ground) == pytest.approx(expected, rel=1e-8)


@given(st.floats(-3.0, 12.0), st.tuples(*[st.floats(-8.0, 3.0)] * 3))
def test_ground_level_completes_the_number(log_atoms: float, log_spacings: tuple[float, float, float]) -> None:
    atoms = 10.0**log_atoms
    levels = OscillatorLevels(10.0 ** np.array(log_spacings))
    ground = levels.ground_atoms(atoms)
    total = ground + levels.excited_atoms(math.log1p(1.0 / ground))
    assert total == pytest.approx(atoms, rel=1e-11)
    assert 0.0 < ground <= atoms


@given(st.integers(1, 4000), st.integers(1, 25))
def test_integer_rule_sums_powers_exactly(count: int, order: int) -> None:
    nodes, weights = integer_rule(count, order)
    assert len(nodes) == min(count, order) or len(nodes) == count
    scaled, exact = nodes / count, np.arange(count) / count
    for degree in range(min(2 * order, 12)):
        assert weights @ scaled**degree == pytest.approx(math.fsum(exact**degree), rel=1e-11, abs=1e-11)
