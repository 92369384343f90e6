"""Writes physics/statistics_coefficients.py: the numbers from which the Bose and Fermi functions are built.

Run `python tests/generators/statistics_coefficients.py` to write the module anew (about a minute), with `--print` to
see it only. All fits are made with mpmath at 50 digits or more and rounded once, at the end.

Notation: g_s(alpha) = Li_s(e^-alpha), f_s(eta) = -Li_s(-e^eta).

Sources: analytic continuation, expansion about alpha = 0 and the large-eta expansion of polylogarithms:
[1] NIST Digital Library of Mathematical Functions, https://dlmf.nist.gov/25.12, eqs. (25.12.10)-(25.12.16).
[2] J. E. Robinson, Phys. Rev. 83, 678 (1951): expansion of the Bose integrals about alpha = 0 (from memory).
[3] A. Sommerfeld, Z. Phys. 47, 1 (1928): expansion of the Fermi integrals for large eta (from memory).
"""

from __future__ import annotations

import sys
import textwrap
from collections.abc import Callable, Sequence
from fractions import Fraction
from itertools import pairwise
from pathlib import Path
from typing import Any

import mpmath
from mpmath import mp, mpf

DIGITS = 50
RATIONAL_DIGITS = 200
CUT = 4e-17

# Twice the order, -1 (slope of order 1/2) to 8.
TWICE_ORDERS = (-1, 1, 2, 3, 4, 5, 6, 7, 8)
HALF_INTEGER = tuple(n for n in TWICE_ORDERS if n % 2)
INTEGER = tuple(n for n in TWICE_ORDERS if n % 2 == 0)

NUMERATOR_DEGREE = 7
DENOMINATOR_DEGREE = 6
EXPANSION_TERMS = 26
BOSE_SPLIT = 1
FERMI_SPLIT = Fraction(-3, 2)
FERMI_EDGES = (FERMI_SPLIT, 0, 2, 5, 11, 22, 40)
SOMMERFELD_TERMS = 13

Number = Any  # mpmath has no types


def chebyshev_nodes(count: int, low: Number, high: Number) -> list[Number]:
    """Zeros of the Chebyshev polynomial of degree `count`, moved to [low, high]."""
    half, middle = (mpf(high) - mpf(low)) / 2, (mpf(high) + mpf(low)) / 2
    return [middle + half * mpmath.cos(mpmath.pi * (2 * j + 1) / (2 * count)) for j in range(count)]


def chebyshev_coefficients(function: Callable[[Number], Number], count: int, low: Number, high: Number) -> list[Number]:
    """Coefficients of the interpolant of `function` at `count` Chebyshev nodes of [low, high]."""
    values = [function(x) for x in chebyshev_nodes(count, low, high)]
    angles = [mpmath.pi * (2 * j + 1) / (2 * count) for j in range(count)]
    result = [2 * sum(v * mpmath.cos(k * a) for v, a in zip(values, angles, strict=True)) / count for k in range(count)]
    result[0] /= 2
    return result


def to_powers(chebyshev: Sequence[Number], low: Number, high: Number) -> list[Number]:
    """Powers of x (not of the scaled variable) of a Chebyshev sum on [low, high]."""
    scale, shift = 2 / (mpf(high) - mpf(low)), -(mpf(high) + mpf(low)) / (mpf(high) - mpf(low))

    def times_argument(p: list[Number]) -> list[Number]:
        moved = [mpf(0), *(scale * c for c in p)]
        return [m + shift * c for m, c in zip(moved, [*p, mpf(0)], strict=True)]

    before, now = [mpf(1)], times_argument([mpf(1)])
    total = [mpf(0)] * len(chebyshev)
    for k, c in enumerate(chebyshev):
        polynomial = before if k == 0 else now
        if k > 1:
            following = [2 * a for a in times_argument(now)]
            for i, b in enumerate(before):
                following[i] -= b
            before, now = now, following
            polynomial = now
        for i, a in enumerate(polynomial):
            total[i] += c * a
    return total


def fit(
    function: Callable[[Number], Number], low: Number, high: Number, *, scaled: bool, count: int = 34
) -> list[float]:
    """Shortest Chebyshev sum good to CUT relative to the smallest value, as powers of x or of t in [-1, 1]."""
    series = chebyshev_coefficients(function, count, low, high)
    limit = CUT * min(abs(function(mpf(low))), abs(function(mpf(high))))
    while abs(series[-1]) < limit:
        series.pop()
    if len(series) > count - 2:
        raise RuntimeError(f"{count} nodes are too few for [{low}, {high}]")
    powers = to_powers(series, -1, 1) if scaled else to_powers(series, low, high)
    return [float(c) for c in powers]


def order(twice: int) -> Number:
    return mpf(twice) / 2


def bose_rational(twice: int) -> tuple[list[float], list[float]]:
    """Numerator and denominator of e^alpha g_s y^m in y = sqrt(1 - e^-alpha), half-integer s.

    Li_s(z)/z times y^m (m = 1 for s = 1/2, 3 for s = -1/2, else 0) is analytic in the plane of y cut from -inf to -1,
    because sqrt(alpha) is odd in y; one rational serves 0 <= z <= 1. Linear collocation at Chebyshev nodes.
    """
    with mp.workdps(RATIONAL_DIGITS):
        s, power = order(twice), {1: 1, -1: 3}.get(twice, 0)
        size = NUMERATOR_DEGREE + DENOMINATOR_DEGREE + 1
        matrix, right = mpmath.matrix(size, size), mpmath.matrix(size, 1)
        for row, y in enumerate(chebyshev_nodes(size, 0, 1)):
            z = 1 - y * y
            value = mpmath.polylog(s, z).real / z * y**power
            for k in range(NUMERATOR_DEGREE + 1):
                matrix[row, k] = y**k
            for k in range(1, DENOMINATOR_DEGREE + 1):
                matrix[row, NUMERATOR_DEGREE + k] = -value * y**k
            right[row] = value
        solution = mpmath.lu_solve(matrix, right)
        numerator = [float(solution[k]) for k in range(NUMERATOR_DEGREE + 1)]
        denominator = [1.0] + [float(solution[NUMERATOR_DEGREE + k]) for k in range(1, DENOMINATOR_DEGREE + 1)]
    return numerator, denominator


def bose_expansion(twice: int) -> tuple[float, list[float]]:
    """Coefficient of the singular term and powers of alpha of g_s about alpha = 0 [1, 2].

    Half-integer s: Gamma(1-s) alpha^(s-1) + sum of zeta(s-k) (-alpha)^k / k!.
    Integer s: (-alpha)^(s-1)/(s-1)! (H_(s-1) - ln alpha) + the same sum without k = s-1; here the singular
    term is alpha^(s-1) ln alpha.
    """
    s = order(twice)
    powers = []
    for k in range(EXPANSION_TERMS):
        sign = mpf((-1) ** k) / mpmath.factorial(k)
        powers.append(sign * (mpmath.harmonic(k) if s - k == 1 else mpmath.zeta(s - k)))
    singular = mpmath.gamma(1 - s) if twice % 2 else -mpf((-1) ** (twice // 2 - 1)) / mpmath.factorial(twice // 2 - 1)
    return float(singular), [float(c) for c in powers]


def bose_series(twice: int) -> list[float]:
    """Powers of z of Li_s(z)/z for alpha >= BOSE_SPLIT."""
    s = order(twice)
    return fit(lambda z: mpmath.polylog(s, z) / z if z else mpf(1), 0, mpmath.exp(-BOSE_SPLIT), scaled=False)


def fermi_value(twice: int, eta: Number) -> Number:
    return -mpmath.polylog(order(twice), -mpmath.exp(eta)).real


def fermi_series(twice: int) -> list[float]:
    """Powers of z of f_s/z for eta <= FERMI_SPLIT."""
    s = order(twice)
    top = mpmath.exp(mpf(FERMI_SPLIT.numerator) / FERMI_SPLIT.denominator)
    return fit(lambda z: -mpmath.polylog(s, -z) / z if z else mpf(1), 0, top, scaled=False)


def fermi_pieces(twice: int) -> list[list[float]]:
    """Powers of t in [-1, 1] of f_s on each piece between FERMI_EDGES."""
    edges = [mpf(e.numerator) / e.denominator if isinstance(e, Fraction) else mpf(e) for e in FERMI_EDGES]
    return [fit(lambda eta: fermi_value(twice, eta), low, high, scaled=True) for low, high in pairwise(edges)]


def sommerfeld(twice: int) -> list[float]:
    """Powers of 1/eta^2 of f_s / eta^s for eta >= 40 [1, 3]: 2 (1 - 2^(1-2k)) zeta(2k) / Gamma(s+1-2k)."""
    s = order(twice)
    terms = []
    for k in range(SOMMERFELD_TERMS):
        weight = mpf(1) if k == 0 else 2 * (1 - mpf(2) ** (1 - 2 * k)) * mpmath.zeta(2 * k)
        terms.append(float(weight * mpmath.rgamma(s + 1 - 2 * k)))
    while terms[-1] == 0.0:
        terms.pop()
    return terms


def tuple_text(values: Sequence[Any]) -> str:
    """A tuple as Python writes it, whole numbers and nested tuples included."""
    inner = ", ".join(tuple_text(v) if isinstance(v, (list, tuple)) else repr(v) for v in values)
    return f"({inner},)" if len(values) == 1 else f"({inner})"


def table(name: str, comment: str, kind: str, entries: dict[int, Any]) -> str:
    lines = [f"# {comment}", f"{name}: dict[int, {kind}] = {{"]
    for key, value in entries.items():
        text = f"{key}: {repr(value) if isinstance(value, float) else tuple_text(value)},"
        lines.append(textwrap.fill(text, 118, initial_indent="    ", subsequent_indent="        "))
    return "\n".join([*lines, "}"])


def module_text() -> str:
    numbers, pieces = "tuple[float, ...]", "tuple[tuple[float, ...], ...]"
    parts = [
        '"""Coefficients of the Bose and Fermi functions. GENERATED: do not edit.\n\n'
        "Written by tests/generators/statistics_coefficients.py with mpmath at "
        f"{DIGITS} digits (rationals: {RATIONAL_DIGITS}); what each\n"
        "table means, and its source, is said there. Keys are twice the order s.\n"
        '"""',
        "# fmt: off",
        f"BOSE_SPLIT = {float(BOSE_SPLIT)!r}",
        f"FERMI_EDGES = ({', '.join(repr(float(e)) for e in FERMI_EDGES)})",
        table("BOSE_RATIONAL", "Numerator and denominator in y = sqrt(1 - e^-alpha)", pieces,
              {n: bose_rational(n) for n in HALF_INTEGER}),
        table("BOSE_SINGULAR", "Factor of alpha^(s-1), for integer s of alpha^(s-1) ln(alpha)", "float",
              {n: bose_expansion(n)[0] for n in TWICE_ORDERS if n > 0}),
        table("BOSE_EXPANSION", "Powers of alpha", numbers, {n: bose_expansion(n)[1] for n in TWICE_ORDERS if n > 0}),
        table("BOSE_SERIES", "g_s/z for alpha >= BOSE_SPLIT, powers of z", numbers,
              {n: bose_series(n) for n in INTEGER}),
        table("FERMI_SERIES", "f_s/z below the first edge, powers of z", numbers,
              {n: fermi_series(n) for n in TWICE_ORDERS}),
        table("FERMI_PIECES", "f_s between the edges, powers of t in [-1, 1]", pieces,
              {n: fermi_pieces(n) for n in TWICE_ORDERS}),
        table("SOMMERFELD", "f_s/eta^s above the last edge, powers of 1/eta^2", numbers,
              {n: sommerfeld(n) for n in TWICE_ORDERS}),
    ]  # fmt: skip
    return "\n\n".join([parts[0], parts[1], *parts[2:]]) + "\n"


def main() -> None:
    mp.dps = DIGITS
    text = module_text()
    if "--print" in sys.argv[1:]:
        sys.stdout.write(text)
        return
    target = Path(__file__).parents[2] / "physics" / "statistics_coefficients.py"
    target.write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
