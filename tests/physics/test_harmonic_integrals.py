"""Means of squared densities over a harmonic trap against quadrature, series and limits."""

from __future__ import annotations

import math
from itertools import pairwise

import mpmath
import numpy as np
import pytest
from scipy.integrate import quad

from physics.harmonic_integrals import bose_overlap, fermi_overlap, legendre
from physics.statistics import bose, fermi


@pytest.mark.parametrize("alpha", [1e-3, 0.1, 1.0, 5.0, 40.0])
def test_bose_overlap_is_the_quadrature_of_the_squared_function(alpha: float) -> None:
    # w = sqrt(u); the scale of the root singularity at w = i sqrt(alpha) is given to the routine.
    def integrand(w: float) -> float:
        return w * w * bose(1.5, alpha + w * w) ** 2

    scale = math.exp(-2.0 * alpha)
    edges = [0.0, math.sqrt(alpha) / 3, math.sqrt(alpha), 3 * math.sqrt(alpha) + 1.0, 9.0]
    total = sum(quad(integrand, a, b, epsabs=1e-15 * scale, epsrel=1e-13)[0] for a, b in pairwise(edges))
    assert bose_overlap(alpha) == pytest.approx(4.0 / math.sqrt(math.pi) * total, rel=1e-11)


def test_bose_overlap_at_saturation_is_its_double_sum() -> None:
    # sum over i, j of (i j (i + j))^(-3/2); terms in i fall as i^-3, so those beyond n add up to n/2 times the last.
    def summed_over_j(i: int) -> float:
        with mpmath.workdps(25):
            return float(mpmath.nsum(lambda j: (i * j * (i + j)) ** -1.5, [1, mpmath.inf], method="e"))

    terms = [summed_over_j(i) for i in range(1, 33)]
    beyond = float(bose_overlap(0.0)) - sum(terms)
    assert beyond == pytest.approx(terms[-1] * 32.5 / 2.0, rel=0.1)
    assert beyond < 2e-3 * sum(terms)


@pytest.mark.parametrize("log_z", [-30.0, -2.0, 0.0, 3.0, 12.0, 60.0, 500.0])
def test_fermi_overlap_is_the_quadrature_of_the_squared_function(log_z: float) -> None:
    def integrand(w: float) -> float:
        return w * w * fermi(1.5, log_z - w * w) ** 2

    edge = math.sqrt(max(log_z, 1.0))
    end = math.sqrt(max(log_z, 0.0) + 45.0)
    total = sum(quad(integrand, a, b, epsabs=0.0, epsrel=1e-12, limit=400)[0] for a, b in ((0.0, edge), (edge, end)))
    assert fermi_overlap(log_z) == pytest.approx(4.0 / math.sqrt(math.pi) * total, rel=1e-10)


def test_fermi_overlap_of_a_filled_sea() -> None:
    # f_3/2 -> (ln z - u)^(3/2)/Gamma(5/2): (2/sqrt(pi)) ln(z)^(9/2) B(3/2, 4)/Gamma(5/2)^2.
    log_z = 1e6
    beta = math.gamma(1.5) * math.gamma(4.0) / math.gamma(5.5)
    expected = 2.0 / math.sqrt(math.pi) * beta * log_z**4.5 / math.gamma(2.5) ** 2
    assert fermi_overlap(log_z) == pytest.approx(expected, rel=1e-8)


def test_both_overlaps_of_a_classical_gas() -> None:
    # z^2 <e^(-2u)> = z^2/2^(3/2)
    assert bose_overlap(30.0) == pytest.approx(math.exp(-60.0) / math.sqrt(8.0), rel=1e-12)
    assert fermi_overlap(-30.0) == pytest.approx(math.exp(-60.0) / math.sqrt(8.0), rel=1e-12)


def test_shapes_are_kept_whatever_their_size() -> None:
    alpha = np.linspace(0.1, 3.0, 2400).reshape(2, 3, 400)
    assert bose_overlap(alpha).shape == alpha.shape
    assert bose_overlap(alpha)[1, 2, 7] == pytest.approx(float(bose_overlap(alpha[1, 2, 7])), rel=1e-14)
    assert fermi_overlap(alpha)[1, 0, 7] == pytest.approx(float(fermi_overlap(alpha[1, 0, 7])), rel=1e-14)


def test_legendre_integrates_polynomials_over_the_unit_interval() -> None:
    x, w = legendre(5)
    assert w @ x**9 == pytest.approx(0.1, rel=1e-14)
