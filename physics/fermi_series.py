"""Sums over the levels of an oscillator as series in powers of b = hbar w/kT, for fermions.

The partition function of one axis is Z(j) = sum of e^(-j e) = 1/(2 sinh(j b/2)) = (1/b) sum of a_k j^(2k-1), and a sum
over levels of the Fermi function of e - mu is Z with each power j^(-s) replaced by f_s(mu/kT) [1]. So a sum over m axes
is a sum of f_m, f_(m-2) ..., and the density at the centre, of Z(j) = 1/sqrt(2 pi sinh(j b)) in units of 1/a, one of
f_(m/2), f_(m/2-2) .... The series are asymptotic: what they leave out, the shells of the oscillator, is of order
e^(-2 pi^2/b) in sums and e^(-pi^2/b) in densities. For b <= 1/2 that is below 1e-17 and 3e-9.

Leading dimensions of spacings are those of an array of clouds.

Reference
---------
[1] M. Brack and R. K. Bhaduri, Semiclassical Physics (1997), ch. 3. Recalled.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import cache

import numpy as np

from physics.checks import Floats
from physics.statistics import fermi

FINE = 0.5
"""b up to which the series are used."""

_TERMS = 9
_STEPS = 60


class FineLevels:
    """The levels of many clouds, all of whose axes are fine; one element a cloud.

    Parameters
    ----------
    spacings : (cells, 3). [1] b_i = hbar w_i/kT, at most `FINE` for full accuracy.
    """

    def __init__(self, spacings: Floats) -> None:
        self.spacings = spacings
        self._axes = [partition_series(spacings[..., i]) for i in range(3)]
        self._all = product_series(self._axes)
        self._volume = np.prod(spacings, axis=-1)

    def atoms(self, log_z: Floats) -> Floats:
        """(cells,) Atoms of one spin state at mu/kT."""
        atoms: Floats = fermi_series(self._all, 3.0, log_z) / self._volume
        return atoms

    def log_fugacity(self, atoms: Floats, start: Floats) -> Floats:
        """(cells,) mu/kT at which the levels hold so many atoms of one spin state; Newton from near it."""
        x = start
        for _ in range(_STEPS):
            found = self.atoms(x)
            # For ln N, which is concave in mu/kT and nearly linear where it is small.
            step = np.log(found / atoms) * found * self._volume / fermi_series(self._all, 2.0, x)
            x = x - step
            if np.max(np.abs(step), initial=0.0) < 1e-8:  # squared by the step just made
                break
        return x

    def energies(self, log_z: Floats) -> Floats:
        """(cells, 3) Energy of all atoms in each axis, zero-point energy included, in kT."""
        energies = []
        for axis, own in enumerate(self._axes):
            others = [series for i, series in enumerate(self._axes) if i != axis]
            energies.append(fermi_series(product_series([energy_series(own), *others]), 4.0, log_z) / self._volume)
        return np.stack(energies, axis=-1)

    def central_density(self, log_z: Floats) -> Floats:
        """(cells,) n lambda^3 at the centre. [1]"""
        return fermi_series(product_series([centre_series(self.spacings[..., i]) for i in range(3)]), 1.5, log_z)


def partition_series(spacing: Floats | float) -> Floats:
    """(..., terms) a_k of Z b = sum of a_k j^(2k-1)."""
    half = 0.5 * np.asarray(spacing)[..., np.newaxis]
    series: Floats = _inverse_sinh(-1.0) * half ** (2.0 * np.arange(_TERMS))
    return series


def centre_series(spacing: Floats | float) -> Floats:
    """(..., terms) The same of lambda times the density at the centre, a sum of a_k j^(2k-1/2)."""
    series: Floats = _inverse_sinh(-0.5) * np.asarray(spacing)[..., np.newaxis] ** (2.0 * np.arange(_TERMS))
    return series


def energy_series(partition: Floats) -> Floats:
    """(..., terms) The same of the energy in an axis, -b dZ/dj, a sum of a_k j^(2k-2)."""
    energy: Floats = partition * (1.0 - 2.0 * np.arange(_TERMS))
    return energy


def product_series(series: Sequence[Floats]) -> Floats:
    """(..., terms) Coefficients of a product of series; without any, of 1."""
    product = np.concatenate([[1.0], np.zeros(_TERMS - 1)])
    for factor in series:
        parts = [np.sum(product[..., : k + 1] * factor[..., k::-1], axis=-1) for k in range(_TERMS)]
        product = np.stack(parts, axis=-1)
    return product


def fermi_series(coefficients: Floats, order: float, log_z: Floats) -> Floats:
    """Sum of coefficients times f_order, f_(order-2), ... of ln z.

    Parameters
    ----------
    coefficients : (..., terms). Leading dimensions broadcast with those of `log_z`.
    """
    total = np.zeros(np.broadcast_shapes(coefficients.shape[:-1], np.shape(log_z)))
    growth = 1.0  # of the orders that follow, (2k)!/pi^(2k)
    for k in range(_TERMS):
        growth *= max(2.0 * k * (2.0 * k - 1.0), 1.0) / (math.pi**2 if k else 1.0)
        if np.max(np.abs(coefficients[..., k]), initial=0.0) * growth < 1e-17:
            break
        lower = order - 2.0 * k
        if lower < -4.75 and lower != math.floor(lower):
            break  # beyond what derivatives are good for, and small
        total += coefficients[..., k] * _fermi(lower, log_z)
    return total


@cache
def _inverse_sinh(power: float) -> Floats:
    """Series of (sinh(x)/x)^power in x^2."""
    sinh = np.array([1.0 / math.factorial(2 * k + 1) for k in range(_TERMS)])
    series = np.zeros(_TERMS)
    series[0] = 1.0
    for n in range(1, _TERMS):  # J. C. P. Miller's recurrence
        series[n] = sum((k * power - n + k) * sinh[k] * series[n - k] for k in range(1, n + 1)) / n
    return series


def _fermi(order: float, log_z: Floats) -> Floats:
    """f_s for any order that is a multiple of 1/2; below 1/2 a derivative."""
    if order > 0.0:
        return np.asarray(fermi(order, log_z))
    if order == math.floor(order):
        return _logistic(-int(order), log_z)
    # Derivatives of f_1/2, which is regular for |Im ln z| < pi, by Chebyshev polynomials over +-1.
    nodes, differentiate = _stencil(round(0.5 - order))
    values: Floats = np.asarray(fermi(0.5, log_z[..., np.newaxis] + nodes)) @ differentiate
    return values


@cache
def _stencil(derivative: int) -> tuple[Floats, Floats]:
    """Nodes and weights that make a derivative at 0 of a function at the nodes."""
    count = 20
    angle = math.pi * (np.arange(count) + 0.5) / count
    nodes = np.cos(angle)
    weights = np.empty(count)
    for place in range(count):
        coefficients = np.cos(np.arange(count) * angle[place]) * 2.0 / count
        coefficients[0] *= 0.5
        weights[place] = np.polynomial.chebyshev.chebval(0.0, np.polynomial.chebyshev.chebder(coefficients, derivative))
    return nodes, weights


@cache
def _logistic_polynomial(derivative: int) -> Floats:
    """R with the derivative of 1/(1 + e^-x) being p R(q), q = -tanh(x/2), p = (1 - q^2)/4."""
    R = np.polynomial.Polynomial([1.0])
    q, two_p = np.polynomial.Polynomial([0.0, 1.0]), np.polynomial.Polynomial([0.5, 0.0, -0.5])
    for _ in range(derivative - 1):
        R = q * R - two_p * R.deriv()
    return np.asarray(R.coef)


def _logistic(derivative: int, log_z: Floats) -> Floats:
    tail = np.exp(-np.abs(log_z))
    inner = 1.0 / (1.0 + tail)
    if derivative == 0:
        return np.where(log_z < 0.0, tail * inner, inner)
    values: Floats = (
        tail * inner * inner * np.polynomial.polynomial.polyval(-np.tanh(0.5 * log_z), _logistic_polynomial(derivative))
    )
    return values
