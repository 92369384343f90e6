"""Quantum degeneracy in a cut trap: sums over the levels, the deep trap's own relations, saturation."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import quad

from physics.checks import Floats
from physics.curve_shape import CurveShape
from physics.degenerate_cut import Degeneracy, degeneracy
from physics.equation_of_state import peak_density_over_classical
from physics.particles import Statistics
from physics.statistics import zeta
from physics.truncated_averages import relative_number
from physics.truncated_boltzmann import HARMONIC, QUADRUPOLE, reduced_number


def solve(statistics: Statistics, exponent: float, occupation: list[float], eta: float) -> Degeneracy:
    curve, truncation = CurveShape(exponent=exponent), np.full(len(occupation), eta)
    numbers = tuple(relative_number(curve, j * truncation) for j in (1, 2, 3))
    return degeneracy(statistics, exponent, np.array(occupation), truncation, numbers)  # type: ignore[arg-type]


@pytest.mark.parametrize(("eta", "density", "number"), [(5.0, 2.594, 0.896), (4.0, 2.566, 0.800)])
def test_a_shallow_trap_saturates_early(eta: float, density: float, number: float) -> None:
    # Direct quadrature of 1/(e^(e/kT) - 1) over the cut levels, three digits.
    full = quad(lambda e: 0.5 * e * e / math.expm1(e), 0.0, eta)[0]
    assert full / zeta(3.0) == pytest.approx(number, abs=5e-4)
    P = float(reduced_number(HARMONIC, eta))
    solved = solve(Statistics.BOSE, HARMONIC, [0.999 * full / P, 1.001 * full / P, 2.0 * full / P], eta)
    assert solved.saturated.tolist() == [False, True, True]
    assert solved.peak_phase_space_density[1:] == pytest.approx(density, abs=5e-4)
    assert solved.condensate_fraction == pytest.approx([0.0, 1e-3, 0.5], abs=3e-4)


@pytest.mark.parametrize("alpha", [0.02, 0.3, 3.0])
@pytest.mark.parametrize("exponent", [HARMONIC, QUADRUPOLE])
@pytest.mark.parametrize("eta", [3.0, 6.0, 12.0])
def test_bosons_are_the_sum_over_cut_levels(alpha: float, exponent: float, eta: float) -> None:
    a = exponent + 1.5
    number = quad(lambda e: e ** (a - 1.0) / math.expm1(e + alpha), 0.0, eta)[0] / math.gamma(a)
    local = 2.0 / math.sqrt(math.pi) * quad(lambda e: math.sqrt(e) / math.expm1(e + alpha), 0.0, eta)[0]
    solved = solve(Statistics.BOSE, exponent, [number / float(reduced_number(exponent, eta))], eta)
    # Terms beyond the third are taken as a power law, which a trap as shallow as eta = 3 is not.
    assert float(solved.peak_phase_space_density[0]) == pytest.approx(local, rel=2e-3 if eta < 4.0 else 2e-6)


@pytest.mark.parametrize("statistics", list(Statistics))
def test_a_deep_trap_has_the_relation_of_an_uncut_one(statistics: Statistics) -> None:
    X = [1e-6, 0.01, 0.3, 1.1]
    found: Floats = solve(statistics, HARMONIC, X, 60.0).peak_phase_space_density
    np.testing.assert_allclose(found, X * peak_density_over_classical(statistics, X), rtol=1e-9)


def test_fermions_in_a_quadrupole_are_not_known() -> None:
    assert np.isnan(solve(Statistics.FERMI, QUADRUPOLE, [0.1], 8.0).peak_phase_space_density[0])
