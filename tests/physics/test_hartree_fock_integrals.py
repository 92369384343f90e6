"""The mean field's local densities against root finding, and their sums over the trap against scipy's quadrature.

References
----------
[1] S. Giorgini, L. P. Pitaevskii, S. Stringari, Phys. Rev. A 54, R4633 (1996).
"""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import brentq, minimize_scalar

from physics import hartree_fock_integrals as integrals
from physics.hartree_fock_integrals import Edge
from physics.semi_ideal_integrals import thermal_number
from physics.statistics import bose, zeta

REPULSIONS = [1e-6, 1e-3, 0.02, 0.1, 1.0]


def edge_of(g: float) -> Edge:
    return Edge.of(np.array([g]))


def least_height(g: float) -> tuple[float, float]:
    """The least (mu - V)/kT of a condensed solution, and g d_c there, by scipy; no derivative used."""
    found = minimize_scalar(
        lambda log_c: math.exp(log_c) + 2.0 * g * bose(1.5, math.exp(log_c)),
        bounds=(math.log(0.01 * g * g), math.log(100.0 * g * g + 10.0)), method="bounded", options={"xatol": 1e-10},
    )  # fmt: skip
    return float(found.fun), math.exp(found.x)


def brute_force(g: float, height: float) -> tuple[float, float]:
    """Thermal and condensate n lambda^3 at (mu - V)/kT = height: the self-consistent equations, by bracketing."""
    lowest, at = least_height(g)
    if height >= lowest:
        # alpha = V + 2G(n_c + n_t) - mu over kT with n_c = (mu - V - 2G n_t)/G: the larger of the two roots n_c.
        c = brentq(lambda c: c + 2.0 * g * bose(1.5, c) - height, at, height, xtol=1e-300, rtol=1e-14)
        return bose(1.5, c), c / g
    low = max(height / (2.0 * g), 0.0)
    d = brentq(lambda d: bose(1.5, max(2.0 * g * d - height, 0.0)) - d, low, zeta(1.5), xtol=1e-300, rtol=1e-14)
    return d, 0.0


@pytest.mark.parametrize("g", REPULSIONS)
def test_the_edge_is_where_condensed_solutions_begin(g: float) -> None:
    edge = edge_of(g)
    lowest, at = least_height(g)
    assert edge.height[0] == pytest.approx(lowest, rel=1e-12)
    assert edge.inside[0] == pytest.approx(at, rel=1e-4)  # a minimum is flat
    assert 2.0 * g * bose(1.5, float(edge.outside[0])) - edge.outside[0] == pytest.approx(lowest, rel=1e-12)
    # Thermal solutions go on above it, to where mu - V is twice the mean field of the saturated gas.
    assert edge.height[0] < 2.0 * g * zeta(1.5)


def test_the_edge_of_a_weak_repulsion() -> None:
    # From g_3/2 = zeta(3/2) - 2 sqrt(pi alpha): alpha = 4 pi g^2 inside, (sqrt(2) - 1)^2 of that outside, and n
    # lambda^3 jumps by half their difference over g: by 2 g = 4 a/lambda of the density, to a percent.
    g = 1e-5
    edge = edge_of(g)
    assert edge.inside[0] == pytest.approx(4.0 * math.pi * g * g, rel=1e-4)
    assert edge.outside[0] == pytest.approx((math.sqrt(2.0) - 1.0) ** 2 * 4.0 * math.pi * g * g, rel=1e-3)
    inside = edge.inside[0] / g + bose(1.5, float(edge.inside[0]))
    jump = inside / bose(1.5, float(edge.outside[0])) - 1.0
    assert jump == pytest.approx(4.0 * math.pi * g * (math.sqrt(2.0) - 1.0) / zeta(1.5), rel=1e-3)
    assert jump == pytest.approx(2.0 * g, rel=0.01)


def test_the_jump_at_a_hundredth_of_the_wavelength() -> None:
    edge = edge_of(0.02)
    inside = edge.inside[0] / 0.02 + bose(1.5, float(edge.inside[0]))
    assert 100.0 * (inside / bose(1.5, float(edge.outside[0])) - 1.0) == pytest.approx(3.7, abs=0.05)


@pytest.mark.parametrize("g", REPULSIONS)
def test_local_densities_by_root_finding(g: float) -> None:
    lowest, _ = least_height(g)
    heights = lowest + np.array([-20.0, -3.0, -0.3, -0.01, 0.003, 0.1, 2.0, 30.0]) * max(g, 0.1)
    thermal, condensate = integrals.local_densities(g, heights, condensed=True)
    expected = np.array([brute_force(g, float(height)) for height in heights])
    np.testing.assert_allclose(thermal, expected[:, 0], rtol=1e-9)
    np.testing.assert_allclose(condensate, expected[:, 1], rtol=1e-9)


@given(st.floats(-9.0, 2.0), st.floats(0.0, 8.0))
def test_local_solutions_satisfy_their_equations(log_g: float, log_scale: float) -> None:
    g = 10.0**log_g
    edge = edge_of(g)
    beyond = np.array([10.0**-log_scale, 10.0 ** (2.0 - log_scale)])
    ones = Edge.of(np.full(2, g))
    above, below = edge.height + beyond, edge.height - beyond
    c = integrals.condensed_alpha(ones, above)
    assert np.all(c >= edge.inside)
    np.testing.assert_allclose(c + 2.0 * g * bose(1.5, c), above, rtol=1e-12)
    b = integrals.thermal_alpha(ones, below)
    assert np.all(b >= edge.outside)
    np.testing.assert_allclose(2.0 * g * bose(1.5, b) - b, below, rtol=1e-12, atol=1e-12 * g)


def sums_by_quadrature(g: float, mu: float) -> dict[str, float]:
    """<h> over the trap, from local densities found by bracketing and an integral over V = w^2 kT by scipy."""
    lowest, _ = least_height(g)
    edge = math.sqrt(max(mu - lowest, 0.0))

    def total(values: str) -> float:
        def shell(w: float) -> float:
            t, c = brute_force(g, mu - w * w)
            u = w * w
            value = {"c": c, "t": t, "ut": u * t, "uc": u * c, "pairs": c * c + 4.0 * c * t + 2.0 * t * t}[values]
            return 4.0 / math.sqrt(math.pi) * u * value

        cuts = [edge + d for d in (0.0, 0.05, 0.3, 1.5, 6.5)]
        if edge:
            cuts = [0.0, 0.9 * edge, *cuts]
        # At the edge itself rounding decides which solution there is; quad does not ask there.
        return sum(quad(shell, a, b, epsrel=1e-10, limit=200)[0] for a, b in pairwise(cuts))

    return {name: total(name) for name in ("c", "t", "ut", "uc", "pairs")}


@pytest.mark.parametrize(("g", "alpha"), [(0.02, 0.006), (0.02, 0.7), (0.3, 3.0)])
def test_sums_with_a_condensate_by_quadrature(g: float, alpha: float) -> None:
    edge, centre = edge_of(g), np.array([alpha])
    mu = alpha + 2.0 * g * bose(1.5, alpha)
    inner, outer = integrals.inner_shells(edge, centre), edge.outer_shells().lifted(edge.rise(centre))
    expected = sums_by_quadrature(g, mu)
    found = {
        "c": inner.total(inner.condensate),
        "t": inner.total(inner.thermal) + outer.total(outer.thermal),
        "ut": inner.total(inner.potential * inner.thermal) + outer.total(outer.potential * outer.thermal),
        "uc": inner.total(inner.potential * inner.condensate),
        "pairs": inner.total(inner.condensate**2 + 4.0 * inner.condensate * inner.thermal + 2.0 * inner.thermal**2)
        + outer.total(2.0 * outer.thermal**2),
    }
    for name, value in expected.items():
        assert found[name][0] == pytest.approx(value, rel=2e-6, abs=1e-9), name


@pytest.mark.parametrize(("g", "beyond"), [(1e-3, 0.02), (0.02, 0.0), (0.02, 1.0), (0.5, 0.1), (0.5, 4.0)])
def test_sums_without_a_condensate_by_quadrature(g: float, beyond: float) -> None:
    alpha = edge_of(g).outside + beyond
    mu = 2.0 * g * bose(1.5, float(alpha[0])) - float(alpha[0]) - (1e-12 if beyond == 0.0 else 0.0)
    shells = integrals.thermal_shells(np.array([g]), alpha)
    expected = sums_by_quadrature(g, mu)
    assert shells.total(shells.thermal)[0] == pytest.approx(expected["t"], rel=1e-7)
    assert shells.total(shells.potential * shells.thermal)[0] == pytest.approx(expected["ut"], rel=1e-7)
    assert shells.total(2.0 * shells.thermal**2)[0] == pytest.approx(expected["pairs"], rel=1e-7)


@given(st.floats(-12.0, 6.0), st.floats(-18.0, 12.0))
def test_the_centre_holds_all_atoms(log_g: float, log_ratio: float) -> None:
    # Atoms from far below what the edge allows to far above, with differences of it down to 1e-12.
    edge = edge_of(10.0**log_g)
    outer = edge.outer_shells()
    without = outer.total(outer.thermal)
    for X in (
        without * 10.0**log_ratio,
        without * (1.0 + 10.0 ** -abs(log_ratio)),
        without * (1.0 - 0.5 * 10.0 ** -abs(log_ratio)),
    ):
        if X[0] > without[0]:
            centre = integrals.condensed_centre(edge, X, without)
            inner, around = integrals.inner_shells(edge, centre), outer.lifted(edge.rise(centre))
            total = inner.total(inner.condensate + inner.thermal) + around.total(around.thermal)
        else:
            shells = integrals.thermal_shells(edge.repulsion, integrals.thermal_centre(edge, X))
            total = shells.total(shells.thermal)
        assert total[0] == pytest.approx(X[0], rel=1e-12)


@given(st.floats(-6.0, 1.0))
def test_atoms_rise_with_mu_through_the_edge(log_g: float) -> None:
    edge = edge_of(10.0**log_g)
    steps = np.geomspace(1e-6, 30.0, 40)
    below = edge.outside + steps[::-1]
    shells = integrals.thermal_shells(np.full(40, edge.repulsion[0]), below)
    many = Edge.of(np.full(40, edge.repulsion[0]))
    above = edge.inside + steps
    inner, outer = integrals.inner_shells(many, above), many.outer_shells().lifted(many.rise(above))
    condensed = inner.total(inner.condensate)
    total = np.concatenate(
        [shells.total(shells.thermal), condensed + inner.total(inner.thermal) + outer.total(outer.thermal)]
    )
    g = edge.repulsion[0]
    mu = np.concatenate([2.0 * g * bose(1.5, below) - below, above + 2.0 * g * bose(1.5, above)])
    assert np.all(np.diff(mu) >= 0.0)
    assert np.all(np.diff(total) >= -1e-14 * total[1:])
    assert np.all(np.diff(condensed) > 0.0)
    # Nothing jumps where the condensate begins.
    assert total[40] == pytest.approx(total[39], rel=1e-2)
    assert condensed[0] < 1e-3 * total[40]


def test_column_is_the_density_along_the_line_of_sight() -> None:
    # (1/sqrt(pi)) integral of d du/sqrt(u) with u = s^2 is an integral over s, by scipy with the local densities.
    g = 0.05
    lowest = float(edge_of(g).height[0])
    for height in (lowest - 0.4, lowest + 0.3, lowest + 4.0):
        thermal, condensate = integrals.column_densities(g, np.array([height]), condensed=True)
        edge = math.sqrt(max(height - lowest, 0.0))
        cuts = sorted({0.0, edge, edge + 0.2, edge + 1.0, edge + 6.0})
        for part, found in ((0, thermal), (1, condensate)):
            expected = sum(
                quad(lambda s: 2.0 / math.sqrt(math.pi) * brute_force(g, height - s * s)[part], a, b, epsrel=1e-9)[0]  # noqa: B023
                for a, b in pairwise(cuts)
            )
            assert found[0] == pytest.approx(expected, rel=1e-5, abs=1e-9)


def test_a_vanishing_repulsion_is_the_semi_ideal_condensate() -> None:
    # Thermal atoms that do not repel one another, mu = g d_c at the centre: the condensate's own density vanishes from
    # their sum but for the lifted potential |u - x|.
    edge, x = edge_of(1e-9), np.array([0.3])
    inner, outer = integrals.inner_shells(edge, x), edge.outer_shells().lifted(edge.rise(x))
    thermal = inner.total(inner.thermal) + outer.total(outer.thermal)
    assert thermal[0] == pytest.approx(float(thermal_number(x)[0]), rel=1e-7)


def test_the_onset_of_a_weak_repulsion_is_that_of_first_order() -> None:
    # [1]: dTc/Tc0 = -1.3255 (a/aho) N^(1/6) = -3.426 a/lambda at Tc0, with g = 2a/lambda.
    g = np.array([1e-4, 1e-5, 1e-6])
    slope = (integrals.onset_ratio(g) - 1.0) / (0.5 * g)
    assert slope[2] == pytest.approx(-3.426, abs=1e-3)
    # What is left falls with g.
    assert np.all(np.diff(np.abs(slope + 3.42603)) < 0.0)
    assert np.all(np.abs(slope + 3.42603) < 0.05)


def test_the_onset_is_where_the_cloud_reaches_the_edge() -> None:
    for g in (1e-3, 0.02, 0.5, 10.0, 1e4):
        t = float(integrals.onset_ratio(np.array([g]))[0])
        outer = edge_of(g * math.sqrt(t)).outer_shells()
        assert outer.total(outer.thermal)[0] == pytest.approx(zeta(3.0) / t**3, rel=1e-11)
