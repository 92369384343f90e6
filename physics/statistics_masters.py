"""Bose and Fermi functions from their coefficients: exact to rounding, not fast; the tables are sampled from here.

g_s(alpha) = Li_s(e^-alpha) and f_s(eta) = -Li_s(-e^eta) take twice the order, -1 to 8, and float64 arrays.
Inside the stated ranges every value is good to about 1e-15; callers keep the edges (0, inf, NaN, negative) away.
Where the coefficients come from is said in tests/generators/statistics_coefficients.py.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from physics.statistics_coefficients import (
    BOSE_EXPANSION,
    BOSE_RATIONAL,
    BOSE_SERIES,
    BOSE_SINGULAR,
    BOSE_SPLIT,
    FERMI_EDGES,
    FERMI_PIECES,
    FERMI_SERIES,
    SOMMERFELD,
)

Array = NDArray[np.float64]

# Below this the first two terms of the power series in z are exact to rounding, and so is their inversion.
SMALL_VALUE = 2.0**-30
# Above this eta one correction term inverts the Sommerfeld expansion.
LARGE_ETA = 1.0e5
# g_1/2 above this is sqrt(pi/alpha) + zeta(1/2), its next term being below rounding.
LARGE_BOSE_HALF = 2.0**20
# Below this deficit zeta(s) - g_s the leading term is alone, but for logarithms.
SMALL_DEFICIT = 2.0**-112

_NEWTON_STEPS = 4


def horner(coefficients: Sequence[float], x: Array) -> Array:
    """Polynomial with ascending powers."""
    total = np.full_like(x, coefficients[-1])
    for c in reversed(coefficients[:-1]):
        total *= x
        total += c
    return total


def half_power(twice: int, x: Array) -> Array:
    """x^(twice/2) by products and one root: a power function would lose digits for large x."""
    power = np.ones_like(x) if twice % 2 == 0 else np.sqrt(x) if twice > 0 else 1 / np.sqrt(x)
    for _ in range(twice // 2 if twice > 0 else 0):
        power *= x
    return power


def bose_master(twice: int, alpha: Array) -> Array:
    """g_s for alpha >= 0 (inf at alpha = 0 where it diverges)."""
    if twice == 0:
        return 1 / np.expm1(alpha)
    if twice == 2:
        # log1p loses alpha near 0, expm1 loses e^-alpha far away.
        return -np.where(alpha < math.log(2), np.log(-np.expm1(-alpha)), np.log1p(-np.exp(-alpha)))
    z = np.exp(-alpha)
    if twice % 2:
        numerator, denominator = BOSE_RATIONAL[twice]
        y = np.sqrt(-np.expm1(-alpha))
        value = z * horner(numerator, y) / horner(denominator, y)
        return value / y if twice == 1 else value / y**3 if twice == -1 else value
    near = np.minimum(alpha, BOSE_SPLIT)
    return np.where(alpha < BOSE_SPLIT, _expansion(twice, near, 0), z * horner(BOSE_SERIES[twice], z))


def bose_deficit_master(twice: int, alpha: Array) -> Array:
    """zeta(s) - g_s for 0 <= alpha <= 1 and s >= 3/2, without cancellation."""
    return -_expansion(twice, alpha, 1)


def _expansion(twice: int, alpha: Array, first: int) -> Array:
    """Expansion about alpha = 0 from power `first` on, s >= 1/2."""
    powers = BOSE_EXPANSION[twice][first:]
    regular = horner(powers, alpha) * alpha**first
    singular = BOSE_SINGULAR[twice] * half_power(twice - 2, alpha)
    if twice % 2 == 0:
        singular *= np.log(np.maximum(alpha, 1e-308))
    return regular + singular


def fermi_master(twice: int, eta: Array) -> Array:
    """f_s for any eta above about -700."""
    if twice == 0:
        return 1 / (1 + np.exp(-eta))
    if twice == 2:
        return np.maximum(eta, 0) + np.log1p(np.exp(-np.abs(eta)))
    value = np.empty_like(eta)
    below, above = eta <= FERMI_EDGES[0], eta > FERMI_EDGES[-1]
    z = np.exp(eta[below])
    value[below] = z * horner(FERMI_SERIES[twice], z)
    for low, high, piece in zip(FERMI_EDGES[:-1], FERMI_EDGES[1:], FERMI_PIECES[twice], strict=True):
        here = (eta > low) & (eta <= high)
        value[here] = horner(piece, (eta[here] - (high + low) / 2) / ((high - low) / 2))
    value[above] = fermi_large(twice, eta[above])
    return value


def fermi_large(twice: int, eta: Array) -> Array:
    """f_s for eta >= 40, inf included."""
    return half_power(twice, eta) * horner(SOMMERFELD[twice], (1 / eta) ** 2)


def _newton(seed: Array, target: Array, function: Callable[[Array], Array], slope: Callable[[Array], Array]) -> Array:
    """Root of ln function = ln target; the logarithm makes the exponential sides straight."""
    x = seed
    for _ in range(_NEWTON_STEPS):
        value = function(x)
        x = x - np.log1p((value - target) / target) * value / slope(x)
    return x


def fermi_root(twice: int, value: Array) -> Array:
    """eta with f_s(eta) = value, for SMALL_VALUE <= value <= f_s(LARGE_ETA)."""
    grid = np.concatenate([np.linspace(-23, 12, 281)[:-1], np.geomspace(12, LARGE_ETA, 320)])
    seed = np.interp(np.log(value), np.log(fermi_master(twice, grid)), grid)
    return _newton(seed, value, lambda x: fermi_master(twice, x), lambda x: fermi_master(twice - 2, x))


def bose_root(twice: int, value: Array) -> Array:
    """alpha with g_s(alpha) = value, for SMALL_VALUE <= value <= 0.54 zeta(s), for s = 1/2 LARGE_BOSE_HALF."""
    grid = np.concatenate([np.geomspace(1e-13, 1, 601)[:-1], np.linspace(1, 24, 185)])[::-1]
    seed = np.interp(np.log(value), np.log(bose_master(twice, grid)), grid)
    return _newton(seed, value, lambda x: bose_master(twice, x), lambda x: -bose_master(twice - 2, x))


def bose_deficit_root(twice: int, deficit: Array) -> Array:
    """alpha with zeta(s) - g_s(alpha) = deficit, for SMALL_DEFICIT <= deficit <= 0.54 zeta(s)."""
    # (ln alpha against ln deficit is nearly straight: few grid points do.)
    grid = np.geomspace(1e-72, 1, 1401)
    seed = np.exp(np.interp(np.log(deficit), np.log(bose_deficit_master(twice, grid)), np.log(grid)))
    return _newton(seed, deficit, lambda x: bose_deficit_master(twice, x), lambda x: bose_master(twice - 2, x))


def fermi_inverse_small(twice: int, value: Array) -> Array:
    """ln z for f_s = z - z^2/2^s + ... below SMALL_VALUE."""
    return np.log(value) + value * math.pow(0.5, twice / 2)


def bose_inverse_small(twice: int, value: Array) -> Array:
    """alpha = -ln z for g_s = z + z^2/2^s + ... below SMALL_VALUE."""
    return value * math.pow(0.5, twice / 2) - np.log(value)


def bose_inverse_large_half(value: Array) -> Array:
    """alpha of g_1/2 = sqrt(pi/alpha) + zeta(1/2) above LARGE_BOSE_HALF."""
    return math.pi / (value - BOSE_EXPANSION[1][0]) ** 2


def fermi_inverse_large(twice: int, value: Array) -> Array:
    """eta from f_s = eta^s/Gamma(s+1) (1 + c/eta^2) above f_s(LARGE_ETA); inf where eta overflows."""
    s, (leading, *rest) = twice / 2, SOMMERFELD[twice]
    target = value / leading
    eta = target * target if twice == 1 else target ** (1 / s)
    finite = np.isfinite(eta)
    e = eta[finite]
    # The rounded exponent 1/s costs up to 1e-13; one Newton step on products gives it back.
    e *= 1 + (1 - half_power(twice, e) / target[finite]) / s
    if rest:
        e -= rest[0] / leading / s / e
    eta[finite] = e
    return eta


def bose_deficit_inverse_small(twice: int, deficit: Array) -> Array:
    """alpha from the leading term of zeta(s) - g_s below SMALL_DEFICIT, s >= 3/2."""
    if twice == 3:
        return (deficit / -BOSE_SINGULAR[twice]) ** 2
    if twice > 4:
        return deficit / BOSE_EXPANSION[twice - 2][0]
    # deficit = alpha (1 - ln alpha): the map shrinks errors by 1/(1 - ln alpha) < 1/75 each time.
    alpha = deficit / 80
    for _ in range(10):
        alpha = deficit / (1 - np.log(np.maximum(alpha, 5e-324)))
    return alpha
