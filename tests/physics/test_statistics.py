"""Bose and Fermi functions against independent values: mpmath, a stored table, quadrature, closed forms, SciPy.

References
----------
[1] NIST Digital Library of Mathematical Functions, https://dlmf.nist.gov/25.12: series (25.12.10), integrals
    (25.12.15), (25.12.16).
[2] tests/reference/polylog_table.csv: its header says how it was made (mpmath at 50 digits, checked by quadrature).
[3] Trapezoid rule with pole terms for integrals of this kind: L. N. Trefethen and J. A. C. Weideman, SIAM Rev. 56, 385
    (2014) (from memory); here the residues are written out.
"""

from __future__ import annotations

import cmath
import csv
import math
from pathlib import Path

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from physics.statistics import bose, bose_inverse, bose_inverse_from_deficit, fermi, fermi_inverse, zeta

ORDERS = [0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5, 4.0]
SATURATING = ORDERS[2:]
HALF_INTEGER = ORDERS[::2]

# What is promised is 1e-14; what is kept is this.
RTOL = 2e-15

REFERENCE = Path(__file__).parents[1] / "reference" / "polylog_table.csv"


def exact_bose(s: float, alpha: float) -> mpmath.mpf:
    with mpmath.workdps(40):
        a = mpmath.mpf(alpha)
        if s == 1:
            return -mpmath.log1p(-mpmath.exp(-a)) if a > 1 else -mpmath.log(-mpmath.expm1(-a))
        return mpmath.polylog(mpmath.mpf(s), mpmath.exp(-a)).real


def exact_fermi(s: float, log_z: float) -> mpmath.mpf:
    with mpmath.workdps(40):
        x = mpmath.mpf(log_z)
        if s == 1:
            return mpmath.log1p(mpmath.exp(x))
        return -mpmath.polylog(mpmath.mpf(s), -mpmath.exp(x)).real


def relative_error(value: float, exact: mpmath.mpf) -> float:
    with mpmath.workdps(40):
        return float(abs(mpmath.mpf(value) / exact - 1))


# --- Values ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("s", ORDERS)
@pytest.mark.parametrize(("low", "high"), [(-14, -6), (-6, -2), (-2, -0.3), (-0.3, 0.3), (0.3, 1), (1, 2.8)])
def test_bose_agrees_with_mpmath_at_random_points_of_every_region(s: float, low: float, high: float) -> None:
    alphas = 10 ** np.random.default_rng([int(2 * s), 1]).uniform(low, high, 12)
    for alpha, value in zip(alphas.tolist(), bose(s, alphas), strict=True):
        exact = exact_bose(s, alpha)
        assert relative_error(value, exact) < RTOL
        assert relative_error(bose(s, alpha), exact) < RTOL


@pytest.mark.parametrize("s", ORDERS)
@pytest.mark.parametrize(
    ("low", "high"), [(-700, -40), (-40, -30), (-30, -2), (-2, 2), (2, 10), (10, 40), (40, 60), (60, 1000), (1e3, 1e5)]
)
def test_fermi_agrees_with_mpmath_at_random_points_of_every_region(s: float, low: float, high: float) -> None:
    points = np.random.default_rng([int(2 * s), 2]).uniform(low, high, 12)
    for x, value in zip(points.tolist(), fermi(s, points), strict=True):
        exact = exact_fermi(s, x)
        assert relative_error(value, exact) < RTOL
        assert relative_error(fermi(s, x), exact) < RTOL


def neighbours(*points: float) -> list[float]:
    return [q for p in points for q in (math.nextafter(p, -math.inf), p, math.nextafter(p, math.inf))]


@pytest.mark.parametrize("s", ORDERS)
def test_bose_agrees_with_mpmath_around_switch_points(s: float) -> None:
    # Ends of the table, binade and segment edges, the split of the integer orders, ln 2 of order 1.
    points = neighbours(2.0**-112, 2.0**-60, 2.0**-7, 0.5, math.log(2), 1.0, 1 + 1 / 32, 1.5, 64.0, 700.0)
    for alpha, value in zip(points, bose(s, points), strict=True):
        exact = exact_bose(s, alpha)
        assert relative_error(value, exact) < RTOL, alpha
        assert relative_error(bose(s, alpha), exact) < RTOL, alpha


@pytest.mark.parametrize("s", ORDERS)
def test_fermi_agrees_with_mpmath_around_switch_points(s: float) -> None:
    # Ends of the table, segment edges, edges of the pieces the table is made from.
    points = neighbours(-40.0, -39.96875, -1.5, -1 / 32, 0.0, 1 / 32, 2.0, 5.0, 11.0, 22.0, 39.96875, 40.0)
    for x, value in zip(points, fermi(s, points), strict=True):
        exact = exact_fermi(s, x)
        assert relative_error(value, exact) < RTOL, x
        assert relative_error(fermi(s, x), exact) < RTOL, x


def table_rows(kind: str) -> list[dict[str, str]]:
    with REFERENCE.open(encoding="utf-8") as file:
        lines = (line for line in file if not line.startswith("#"))
        return [row for row in csv.DictReader(lines) if row["kind"] == kind]


@pytest.mark.parametrize("s", ORDERS)
def test_bose_agrees_with_the_stored_table(s: float) -> None:
    rows = [row for row in table_rows("bose") if float(row["s_float"]) == s]
    assert len(rows) > 50
    alphas = np.array([-float(row["ln_z"]) for row in rows])
    values = np.array([float(row["value"]) for row in rows])
    # [2] prints ln z to 25 digits; rounding it to a float moves g_s by up to alpha g_(s-1)/g_s half ulps, < 28.
    np.testing.assert_allclose(bose(s, alphas), values, rtol=RTOL + 2**-53 * 28)


@pytest.mark.parametrize("s", ORDERS)
def test_fermi_agrees_with_the_stored_table(s: float) -> None:
    rows = [row for row in table_rows("fermi") if float(row["s_float"]) == s]
    assert len(rows) > 50
    points = np.array([float(row["ln_z"]) for row in rows])
    values = np.array([float(row["value"]) for row in rows])
    np.testing.assert_allclose(fermi(s, points), values, rtol=RTOL)


def trapezoid_fermi(s: float, eta: float, step: float = 0.5) -> float:
    """Integral (25.12.15)-like of [1] with t = u^2, by the trapezoid rule less what the poles add to it [3]."""
    power = round(2 * s - 1)
    u = np.arange(-60, 61) * step
    total = step * np.sum(u**power / (np.exp(u**2 - eta) + 1))
    for j in range(8):
        pole = cmath.sqrt(complex(eta, math.pi * (2 * j + 1)))
        total -= 4 * math.pi * (pole ** (power - 1) / (cmath.exp(-2j * math.pi * pole / step) - 1)).imag
    return float(total / math.gamma(s))


@pytest.mark.parametrize("s", HALF_INTEGER)
@pytest.mark.filterwarnings("ignore:overflow encountered in exp")
def test_fermi_agrees_with_trapezoid_rule_and_poles(s: float) -> None:
    for eta in np.linspace(-20, 39, 60).tolist():
        assert fermi(s, eta) == pytest.approx(trapezoid_fermi(s, eta), rel=1e-14)


def trapezoid_bose(s: float, alpha: float, step: float = 0.5) -> float:
    """As for the Fermi integral; the poles are at u^2 = -alpha + 2 pi i j [3]."""
    power = round(2 * s - 1)
    u = np.arange(-60, 61) * step
    total = step * np.sum(u**power / np.expm1(u**2 + alpha))
    for j in range(1, 9):
        pole = cmath.sqrt(complex(-alpha, 2 * math.pi * j))
        total += 4 * math.pi * (pole ** (power - 1) / (cmath.exp(-2j * math.pi * pole / step) - 1)).imag
    root = math.sqrt(alpha)
    sign = 1 if power % 4 == 2 else -1
    total += sign * 2 * math.pi * root ** (power - 1) / math.expm1(2 * math.pi * root / step)
    return float(total / math.gamma(s))


@pytest.mark.parametrize("s", [1.5, 2.5, 3.5])
@pytest.mark.filterwarnings("ignore:overflow encountered in exp")
def test_bose_agrees_with_trapezoid_rule_and_poles(s: float) -> None:
    for alpha in np.geomspace(1e-6, 8, 60).tolist():
        assert bose(s, alpha) == pytest.approx(trapezoid_bose(s, alpha), rel=2e-14)


def test_first_order_is_elementary() -> None:
    x = np.linspace(-39, 39, 500)
    np.testing.assert_allclose(fermi(1, x), np.logaddexp(0, x), rtol=RTOL)
    alpha = np.geomspace(1e-12, 30, 500)
    np.testing.assert_allclose(bose(1, alpha), -np.log(-np.expm1(-alpha)), rtol=1e-14, atol=1e-15)


def test_second_order_is_the_dilogarithm_of_scipy() -> None:
    special = pytest.importorskip("scipy.special")
    # spence(x) = Li_2(1 - x); it loses digits where 1 + e^x rounds (x < -2).
    x = np.linspace(-2, 30, 300)
    np.testing.assert_allclose(fermi(2, x), -special.spence(1 + np.exp(x)), rtol=5e-15)
    alpha = np.geomspace(1e-10, 1, 300)
    np.testing.assert_allclose(bose(2, alpha), special.spence(-np.expm1(-alpha)), rtol=5e-15)


@pytest.mark.parametrize("s", SATURATING)
def test_zeta_is_the_value_at_saturation(s: float) -> None:
    scipy_zeta = pytest.importorskip("scipy.special").zeta
    assert zeta(s) == pytest.approx(float(scipy_zeta(s, 1)), rel=4e-16)
    assert zeta(s) == float(mpmath.zeta(s))
    assert bose(s, 0.0) == zeta(s)
    assert bose(s, np.zeros(3)).tolist() == [zeta(s)] * 3


@pytest.mark.parametrize("s", ORDERS)
def test_fermi_at_unit_fugacity_is_the_eta_function(s: float) -> None:
    expected = math.log(2) if s == 1 else float((1 - mpmath.mpf(2) ** (1 - s)) * mpmath.zeta(s))
    assert fermi(s, 0.0) == pytest.approx(expected, rel=RTOL)


@pytest.mark.parametrize("s", ORDERS)
def test_duplication_joins_bose_and_fermi(s: float) -> None:
    # Li_s(z) + Li_s(-z) = 2^(1-s) Li_s(z^2) [1].
    alpha = np.geomspace(1e-3, 20, 200)
    np.testing.assert_allclose(
        bose(s, alpha) - fermi(s, -alpha), 2 ** (1 - s) * bose(s, 2 * alpha), rtol=1e-14, atol=1e-14
    )


@pytest.mark.parametrize("s", ORDERS[2:])
def test_derivative_is_the_order_below(s: float) -> None:
    # Five-point difference with step h: errors about h^4/30 of the fifth derivative, and rounding/h.
    h = 2e-3
    x = np.linspace(-10, 60, 141)
    slope = (fermi(s, x - 2 * h) - 8 * fermi(s, x - h) + 8 * fermi(s, x + h) - fermi(s, x + 2 * h)) / (12 * h)
    np.testing.assert_allclose(slope, fermi(s - 1, x), rtol=1e-10)
    a = np.linspace(0.5, 20, 41)
    slope = (bose(s, a - 2 * h) - 8 * bose(s, a - h) + 8 * bose(s, a + h) - bose(s, a + 2 * h)) / (12 * h)
    np.testing.assert_allclose(-slope, bose(s - 1, a), rtol=3e-10)


@pytest.mark.parametrize("s", ORDERS)
def test_functions_are_monotonic_to_an_ulp(s: float) -> None:
    x = np.linspace(-45, 45, 40001)
    values = fermi(s, x)
    assert np.all(np.diff(values) > -4e-16 * values[1:])
    values = bose(s, np.geomspace(1e-12, 100, 40001))
    assert np.all(np.diff(values) < 4e-16 * values[1:])


# --- Inverses -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("s", ORDERS)
def test_fermi_inverse_solves_for_log_z(s: float) -> None:
    rng = np.random.default_rng(int(2 * s))
    points = np.concatenate([rng.uniform(-700, 45, 4000), rng.uniform(-25, 5, 4000), 10 ** rng.uniform(0, 9, 2000)])
    found = fermi_inverse(s, fermi(s, points))
    assert np.max(np.abs(found - points) / np.maximum(1, np.abs(points))) < 4e-15


@pytest.mark.parametrize("s", ORDERS)
def test_fermi_inverse_holds_around_switch_points(s: float) -> None:
    top = 2.0 ** (math.frexp(fermi(s, 1e5))[1] - 1)
    values = np.array(neighbours(2.0**-30, 1.0, top, 17 / 16, fermi(s, 1e5)))
    found = fermi_inverse(s, values)
    # |d ln f| = |d ln z| f_(s-1)/f_s, and f_(s-1)/f_s < min(1, s/ln z).
    for value, x in zip(values.tolist(), found.tolist(), strict=True):
        assert relative_error(value, exact_fermi(s, x)) < 4e-15 * max(1.0, min(abs(x), s))
        assert fermi_inverse(s, value) == pytest.approx(x, rel=1e-15)


@pytest.mark.parametrize("s", ORDERS)
def test_bose_inverse_returns_the_value(s: float) -> None:
    rng = np.random.default_rng(int(2 * s))
    alpha = np.concatenate([10 ** rng.uniform(-14, 1, 6000), rng.uniform(0.1, 600, 4000)])
    values = bose(s, alpha)
    found = bose_inverse(s, values)
    # A float alpha cannot hold the value better than its own rounding, alpha ulps.
    assert np.max(np.abs(bose(s, found) / values - 1) / np.maximum(1, alpha)) < 4e-15


@pytest.mark.parametrize("s", ORDERS)
def test_bose_inverse_holds_around_switch_points(s: float) -> None:
    if s <= 1:
        values = neighbours(2.0**-30, 2.0**-29, 1.0, 33 / 32, 2.0**20 if s < 1 else 20.0)
    else:
        values = neighbours(2.0**-30, 2.0**-29, zeta(s) / 2, 0.54 * zeta(s), 0.999 * zeta(s))
    for value, alpha in zip(values, bose_inverse(s, values).tolist(), strict=True):
        assert relative_error(value, exact_bose(s, alpha)) < 4e-15 * max(1.0, alpha)
        assert bose_inverse(s, value) == pytest.approx(alpha, rel=1e-15)


def exact_deficit(s: float, alpha: float) -> mpmath.mpf:
    # (Enough digits for a difference of 1e-100.)
    with mpmath.workdps(160):
        return mpmath.zeta(mpmath.mpf(s)) - mpmath.polylog(mpmath.mpf(s), mpmath.exp(-mpmath.mpf(alpha))).real


@pytest.mark.parametrize("s", SATURATING)
def test_deficit_knows_alpha_where_the_value_does_not(s: float) -> None:
    for alpha in [1e-60, 3e-35, 1e-20, 7e-13, 1e-8, 2e-5, 0.003, 0.1, 0.2]:
        deficit = float(exact_deficit(s, alpha))
        assert bose_inverse_from_deficit(s, deficit) == pytest.approx(alpha, rel=4e-15)
        assert bose_inverse_from_deficit(s, [deficit])[0] == pytest.approx(alpha, rel=4e-15)


@pytest.mark.parametrize("s", SATURATING)
def test_deficit_is_followed_around_switch_points(s: float) -> None:
    for deficit in neighbours(2.0**-112, zeta(s) / 2):
        alpha = bose_inverse_from_deficit(s, deficit)
        # d alpha/alpha is at most (for s = 3/2) twice d deficit/deficit, and mostly less.
        assert relative_error(deficit, exact_deficit(s, alpha)) < 4e-15


@pytest.mark.parametrize("s", SATURATING)
def test_tiny_deficits_follow_the_leading_term(s: float) -> None:
    deficit = 1e-100
    alpha = bose_inverse_from_deficit(s, deficit)
    if s == 1.5:  # 2 sqrt(pi alpha)
        assert 2 * math.sqrt(math.pi * alpha) == pytest.approx(deficit, rel=RTOL)
    elif s == 2.0:  # alpha (1 - ln alpha)
        assert alpha * (1 - math.log(alpha)) == pytest.approx(deficit, rel=RTOL)
    else:
        assert zeta(s - 1) * alpha == pytest.approx(deficit, rel=RTOL)


@pytest.mark.parametrize("s", SATURATING)
def test_deficit_and_value_name_the_same_alpha(s: float) -> None:
    values = zeta(s) * np.linspace(0.001, 0.9, 500)
    np.testing.assert_allclose(bose_inverse_from_deficit(s, zeta(s) - values), bose_inverse(s, values), rtol=1e-12)


@settings(max_examples=200)
@given(s=st.sampled_from(ORDERS), log_z=st.floats(-700, 1e6))
def test_fermi_round_trips(s: float, log_z: float) -> None:
    assert fermi_inverse(s, fermi(s, log_z)) == pytest.approx(log_z, rel=4e-15, abs=4e-15)


@settings(max_examples=200)
@given(s=st.sampled_from(ORDERS), alpha=st.floats(0, 700))
def test_bose_round_trips(s: float, alpha: float) -> None:
    value = bose(s, alpha)
    assert bose(s, bose_inverse(s, value)) == pytest.approx(value, rel=4e-15 * max(1.0, alpha))


@settings(max_examples=200)
@given(s=st.sampled_from(SATURATING), deficit=st.floats(1e-30, 0.5))
def test_deficit_round_trips(s: float, deficit: float) -> None:
    alpha = bose_inverse_from_deficit(s, deficit)
    assert bose(s, alpha) == pytest.approx(zeta(s) - deficit, rel=RTOL)
