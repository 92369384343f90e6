"""Universal integrals of thermal bosons around a Thomas-Fermi condensate in a harmonic trap.

The condensate, of chemical potential mu = x kT > 0, lifts the potential V = u kT of the thermal atoms to |V - mu| above
mu, so that n lambda^3 = g_3/2(e^-|u-x|). A sum over the trap is then <h> = (2/sqrt(pi)) integral of sqrt(u) h du over
u > 0, and depends on x only. Outside the condensate it is taken over v = u - x, by the trapezoidal rule in ln sqrt(v):
its nodes, and g there, are the same for every x. Inside it, Gauss-Legendre in theta, v = x - u = x cos^2 theta,
in which both square roots are regular.

Reference
---------
[1] M. Naraschewski and D. M. Stamper-Kurn, Phys. Rev. A 58, 2423 (1998).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import cache

import numpy as np

from physics.checks import Floats
from physics.harmonic_integrals import legendre
from physics.smooth import through_nodes
from physics.statistics import bose, zeta
from physics.statistics_tables import Segments, first_index, split

# g is regular for |arg sqrt(v)| < pi/4: the rule converges as e^(-pi^2/(2 step)). The slowest integrand (that of
# `excess`) falls as sqrt(v) at the low end, e^-v ends the high one.
_STEP = 0.14
_LOG_ROOT = np.arange(-33.0, 1.83, _STEP)
_INSIDE = 40  # nodes
_REACH = 40.0  # g_3/2(e^-v) is nothing beyond
_CELLS = 256  # values of x at once, to bound the memory

# Table of `excess`. Below its start excess is its limit to rounding times sqrt(x) ln x; above its end the series holds.
_BITS, _DEGREE = 2, 12
_BINADES = (-36, 7)
_LOW, _HIGH = 2.0 ** _BINADES[0], math.nextafter(2.0 ** _BINADES[1], 0.0)
_ZETA_9_2, _ZETA_13_2, _ZETA_17_2 = 1.0547075107614543, 1.0120058998885248, 1.0028592508824156

Integrand = Callable[[Floats, Floats, Floats], Floats]
"""h of u, v = |u - x| and g(e^-v)."""


@cache
def _outside(order: float) -> tuple[Floats, Floats, Floats]:
    """v, its weights and g of the given order."""
    v = np.exp(2.0 * _LOG_ROOT)
    return v, 4.0 / math.sqrt(math.pi) * _STEP * v, bose(order, v)


def _inside(x: Floats, order: float) -> tuple[Floats, Floats, Floats, Floats]:
    """u, v, weights and g for a column of x."""
    theta, weights = legendre(_INSIDE)
    sine, cosine = np.sin(0.5 * math.pi * theta), np.cos(0.5 * math.pi * theta)
    reach = np.minimum(x, _REACH)
    v = reach * cosine**2
    u = (x - reach) + reach * sine**2  # x - v, without the difference
    weights = 2.0 / math.sqrt(math.pi) * math.pi * reach * sine * cosine * weights
    return u, v, weights, bose(order, v)


def _in_parts(function: Callable[[Floats], Floats], x: Floats) -> Floats:
    """The function of flat columns, over any number of x."""

    def everywhere(x: Floats) -> Floats:
        result = np.empty_like(x)
        for start in range(0, x.size, _CELLS):
            part = slice(start, start + _CELLS)
            result[part] = function(x[part, np.newaxis])
        return result

    # Near x = 0 these functions are regular in sqrt(x), but for logarithms.
    root = np.sqrt(np.asarray(x, dtype=np.float64).reshape(-1))
    return through_nodes(lambda root: everywhere(root * root), root).reshape(np.shape(x))


def _mean(x: Floats, integrand: Integrand, order: float = 1.5) -> Floats:
    """<integrand> over the whole trap."""

    def column(x: Floats) -> Floats:
        v, weights, g = _outside(order)
        outside: Floats = (weights * np.sqrt(v + x) * integrand(v + x, v, g)).sum(axis=-1)
        u, v, weights, g = _inside(x, order)
        inside: Floats = (weights * np.sqrt(u) * integrand(u, v, g)).sum(axis=-1)
        return outside + inside

    return _in_parts(column, x)


def _excess_by_quadrature(x: Floats) -> Floats:
    def column(x: Floats) -> Floats:
        v, weights, g = _outside(1.5)
        # (sqrt(v + x) - sqrt(v))/x without the difference.
        outside: Floats = (weights * g / (np.sqrt(v + x) + np.sqrt(v))).sum(axis=-1)
        u, _, weights, g = _inside(x, 1.5)
        inside: Floats = (weights * g * np.sqrt(u) / x).sum(axis=-1)
        return outside + inside

    return _in_parts(column, x)


@cache
def _excess_table() -> tuple[Segments, int]:
    segments = Segments.by_bits(_excess_by_quadrature, *_BINADES, _BITS, _DEGREE)
    return segments, first_index(_BINADES[0], _BITS)


def excess(x: Floats) -> tuple[Floats, Floats]:
    """(F - zeta(3))/x of the thermal number F = N_thermal (hbar wbar/kT)^3, and its derivative by ln x.

    Parameters
    ----------
    x : array of more than 0 dimensions. [1] mu/kT > 0. The first result has a relative error below 1e-13.
    """
    segments, offset = _excess_table()
    clipped = np.ascontiguousarray(np.minimum(np.maximum(x, _LOW), _HIGH).reshape(-1))
    index, t = np.empty(clipped.shape, np.int64), np.empty_like(clipped)
    split(clipped, _BITS, index, t)
    index -= offset
    top, *rest = segments.coefficients[::-1]
    value, slope = np.take(top, index, mode="clip"), np.zeros_like(clipped)
    scratch = np.empty_like(clipped)
    for row in rest:
        slope *= t
        slope += value
        value *= t
        np.take(row, index, out=scratch, mode="clip")
        value += scratch
    # dt/d ln x = x 2^bits/2^exponent, and t counts segments of the mantissa.
    slope *= t + (index % (1 << _BITS)) + (0.5 + (1 << _BITS))
    value, slope = value.reshape(np.shape(x)), slope.reshape(np.shape(x))
    if np.max(x, initial=0.0) > _HIGH:
        far = x > _HIGH
        number, rise = _thermal_number_far(x[far])
        value[far] = (number - zeta(3.0)) / x[far]
        slope[far] = rise / x[far] - value[far]
    return value, slope


def _thermal_number_far(x: Floats) -> tuple[Floats, Floats]:
    """F and dF/d ln x for large x, where thermal atoms sit in a thin shell: sqrt(1 + v/x) expanded over it."""
    y = 1.0 / (x * x)
    c1, c2, c3 = _ZETA_9_2 / 4.0, _ZETA_13_2 * 15.0 / 16.0, _ZETA_17_2 * 945.0 / 64.0
    root = 4.0 / math.sqrt(math.pi) * np.sqrt(x)
    number = root * (zeta(2.5) - y * (c1 + y * (c2 + y * c3)))
    rise = root * (0.5 * zeta(2.5) + y * (1.5 * c1 + y * (3.5 * c2 + y * 5.5 * c3)))
    return number, rise


def thermal_number(x: Floats) -> Floats:
    """F(x) = <g_3/2>: N_thermal (hbar wbar/kT)^3. [1] F(0) = zeta(3), and it rises."""
    return zeta(3.0) + x * excess(x)[0]


def kinetic_energy(x: Floats) -> Floats:
    """Kinetic energy of the thermal atoms, (3/2) <g_5/2>, in kT (kT/hbar wbar)^3. [1]"""
    return 1.5 * _mean(x, lambda u, v, g: g, 2.5)


def trap_energy(x: Floats) -> Floats:
    """Potential energy of the thermal atoms in the trap, <u g_3/2>, in kT (kT/hbar wbar)^3. [1]"""
    return _mean(x, lambda u, v, g: u * g)


def lifted_energy(x: Floats) -> Floats:
    """Energy of the thermal atoms in the lifted potential above mu, <v g_3/2>, in kT (kT/hbar wbar)^3. [1]"""
    return _mean(x, lambda u, v, g: v * g)


def density_squared(x: Floats) -> Floats:
    """<(n_thermal lambda^3)^2> = <g_3/2^2>. [1]"""
    return _mean(x, lambda u, v, g: g * g)


def density_product(x: Floats) -> Floats:
    """<(x - u) n_thermal lambda^3> over the condensate, whose density is proportional to x - u. [1]"""

    def column(x: Floats) -> Floats:
        u, v, weights, g = _inside(x, 1.5)
        product: Floats = (weights * np.sqrt(u) * v * g).sum(axis=-1)
        return product

    return _in_parts(column, x)


def triple_products(x: Floats) -> Floats:
    """(3, ...) <(x - u)^2 d>, <(x - u) d^2> over the condensate and <d^3> over all, of d = n_thermal lambda^3. [1]"""

    def column(x: Floats) -> Floats:
        v, weights, g = _outside(1.5)
        outside: Floats = (weights * np.sqrt(v + x) * g**3).sum(axis=-1)
        u, v, weights, g = _inside(x, 1.5)
        shares = weights * np.sqrt(u) * g
        # Deeper than the reach of g the condensate is alone, so its first two products end there too.
        return np.stack([(shares * v * v).sum(axis=-1), (shares * v * g).sum(axis=-1),
                         outside + (shares * g * g).sum(axis=-1)])  # fmt: skip

    flat = np.asarray(x, dtype=np.float64).reshape(-1)
    parts = [column(flat[start : start + _CELLS, np.newaxis]) for start in range(0, max(flat.size, 1), _CELLS)]
    return np.concatenate(parts, axis=-1).reshape((3, *np.shape(x)))


def column_through_shell(height: Floats) -> Floats:
    """integral of g_3/2(e^-|t^2 - height|) dt/sqrt(pi) over all t, for a line of sight through the condensate whose
    chemical potential over kT there is `height` >= 0. [1] g_2(1) at height 0."""

    def column(x: Floats) -> Floats:
        v, weights, g = _outside(1.5)
        outside: Floats = 0.5 * (weights * g / np.sqrt(v + x)).sum(axis=-1)
        u, _, weights, g = _inside(x, 1.5)
        inside: Floats = 0.5 * (weights * g / np.sqrt(np.maximum(u, np.finfo(float).tiny))).sum(axis=-1)
        return outside + inside

    return _in_parts(column, height)
