"""Universal integrals of the semi-ideal model against scipy.integrate.quad, closed forms and limits."""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from physics import semi_ideal_integrals as integrals
from physics.checks import Floats
from physics.statistics import bose, zeta

Integrand = Callable[[float, float], float]


def mean(x: float, integrand: Integrand, upper: float = 60.0) -> float:
    """(2/sqrt(pi)) integral of sqrt(u) integrand(u, |u - x|), with s = sqrt(|u - x|) as variable on both sides of x."""

    def outside(s: float) -> float:
        return 2.0 * s * math.sqrt(x + s * s) * integrand(x + s * s, s * s)

    def inside(s: float) -> float:
        return 2.0 * s * math.sqrt(max(x - s * s, 0.0)) * integrand(x - s * s, s * s)

    root = math.sqrt(x)
    cuts = sorted({0.0, *(root * k for k in (0.3, 1.0, 3.0, 10.0) if root * k < 8.0), 1.0, 3.0, math.sqrt(upper)})
    total = sum(quad(outside, a, b, epsrel=1e-13, epsabs=1e-15, limit=200)[0] for a, b in pairwise(cuts))
    low = [0.0, 0.5 * root, 0.9 * root, root]
    total += sum(quad(inside, a, b, epsrel=1e-12, epsabs=1e-15, limit=400)[0] for a, b in pairwise(low))
    return 2.0 / math.sqrt(math.pi) * total


@pytest.mark.parametrize("x", [1e-4, 0.03, 0.5, 2.0, 11.0, 50.0, 200.0])
@pytest.mark.parametrize(
    ("function", "integrand"),
    [
        (integrals.thermal_number, lambda u, v: bose(1.5, v)),
        (integrals.kinetic_energy, lambda u, v: 1.5 * bose(2.5, v)),
        (integrals.trap_energy, lambda u, v: u * bose(1.5, v)),
        (integrals.lifted_energy, lambda u, v: v * bose(1.5, v)),
        (integrals.density_squared, lambda u, v: bose(1.5, v) ** 2),
    ],
)
def test_integrals_over_the_trap(function: Callable[[Floats], Floats], integrand: Integrand, x: float) -> None:
    assert function(np.array([x]))[0] == pytest.approx(mean(x, integrand), rel=1e-9)


@pytest.mark.parametrize("x", [1e-3, 0.5, 5.0, 30.0])
def test_overlap_with_the_condensate(x: float) -> None:
    # u = x sin^2: both roots regular.
    def integrand(t: float) -> float:
        c, s = math.cos(t), math.sin(t)
        return 2.0 * x * s * c * math.sqrt(x) * s * x * c * c * bose(1.5, x * c * c)

    expected = 2.0 / math.sqrt(math.pi) * quad(integrand, 0.0, math.pi / 2, epsrel=1e-12)[0]
    assert integrals.density_product(np.array([x]))[0] == pytest.approx(expected, rel=1e-10)


def test_small_condensates_leave_the_saturated_gas() -> None:
    # F = zeta(3) + zeta(2) x + ...: the first term is the derivative of <g_3/2(e^(x-u))>, the atoms outside.
    x = np.array([1e-9])
    assert integrals.excess(x)[0][0] == pytest.approx(zeta(2.0), rel=1e-7)
    assert integrals.kinetic_energy(x)[0] == pytest.approx(1.5 * zeta(4.0), rel=1e-8)
    assert integrals.lifted_energy(x)[0] == pytest.approx(1.5 * zeta(4.0), rel=1e-8)
    assert integrals.trap_energy(x)[0] == pytest.approx(1.5 * zeta(4.0), rel=1e-8)


def test_large_condensates_leave_a_thin_shell() -> None:
    # F -> (2/sqrt(pi)) sqrt(x) 2 zeta(5/2): both sides of the edge, of area ~ sqrt(x).
    x = 1e8
    expected = 4.0 / math.sqrt(math.pi) * math.sqrt(x) * zeta(2.5)
    assert integrals.thermal_number(np.array([x]))[0] == pytest.approx(expected, rel=1e-12)
    assert integrals.trap_energy(np.array([x]))[0] == pytest.approx(expected * x, rel=1e-8)


def test_table_and_quadrature_agree_everywhere() -> None:
    x = np.geomspace(2.0**-36, 2.0**7 * (1 - 1e-12), 4001)
    table, slope = integrals.excess(x)
    direct = integrals._excess_by_quadrature(x)
    np.testing.assert_allclose(table, direct, rtol=1e-14)
    # The derivative by ln x against a difference of order 4.
    step = 1e-3
    points = [integrals._excess_by_quadrature(x * math.exp(k * step)) for k in (-2, -1, 1, 2)]
    difference = (points[0] - 8 * points[1] + 8 * points[2] - points[3]) / (12 * step)
    np.testing.assert_allclose(slope, difference, rtol=1e-8, atol=1e-11)


def test_table_and_series_meet() -> None:
    # Across the switch the number must go on as the quadrature does.
    x = np.array([128.0 * (1 - 1e-12), 128.0 * (1 + 1e-12)])
    np.testing.assert_allclose(integrals.excess(x)[0], integrals._excess_by_quadrature(x), rtol=1e-13)
    below, above = integrals.excess(x)[1]
    assert above == pytest.approx(below, rel=1e-9)


@given(st.floats(1e-10, 1e6), st.floats(1.0001, 100.0))
def test_thermal_number_rises_with_the_condensate(x: float, factor: float) -> None:
    low, high = integrals.thermal_number(np.array([x, x * factor]))
    assert zeta(3.0) < low < high


@pytest.mark.parametrize("height", [0.0, 1e-6, 0.2, 3.0, 30.0])
def test_column_through_the_shell(height: float) -> None:
    def integrand(t: float) -> float:
        return bose(1.5, abs(t * t - height))

    edge = math.sqrt(height)
    cuts = [0.0, edge, edge + 0.1, edge + 1.0, edge + 8.0]
    total = sum(quad(integrand, a, b, epsrel=1e-10, epsabs=1e-12, limit=400)[0] for a, b in pairwise(cuts))
    value = integrals.column_through_shell(np.array([height]))[0]
    assert value == pytest.approx(2.0 / math.sqrt(math.pi) * total, rel=1e-8)
    if height == 0.0:
        assert value == pytest.approx(zeta(2.0), rel=1e-12)
