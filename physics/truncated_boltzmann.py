"""A classical gas cut off at the trap depth, in traps whose volume curve is a power law: closed forms.

Atoms fill the levels as e^(-e/kT) up to the depth e_t = eta kT, those above are gone [1]. With the volume W ~ U^d below
the potential energy U the density of states goes as e^(d + 1/2): d = 0 in a box, 3/2 in a harmonic trap, 3 in a
quadrupole. With a = d + 3/2 and P the regularised incomplete gamma function every integral over the levels is a P.

Densities are in terms of a reference density n_ref, that of the centre of an uncut cloud of the same T and occupation
of the lowest levels: N = n_ref V_e with V_e proportional to P(a, eta), and the central density is n_ref P(3/2, eta).

All functions broadcast. Traps of any volume curve are in `physics.truncated_averages`.

References
----------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996): the truncated distribution and its
    kinetics.
[2] DLMF 8.2, 8.7.1, 8.8.1, 8.8.10 and 13.2: incomplete gamma functions and their series.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats

BOX, HARMONIC, QUADRUPOLE = 0.0, 1.5, 3.0
"""Exponents d of the volume curve W ~ U^d."""

_SERIES_BELOW = 1.0
_TERMS = 24


def incomplete_gamma(a: float, x: ArrayLike) -> Floats:
    """P(a, x), the share of a gamma distribution of shape a below x >= 0. [1] Relative error below 1e-14. [2]"""
    y = np.asarray(x, dtype=np.float64)
    twice = round(2.0 * a)
    if abs(2.0 * a - twice) > 0.0:
        from scipy.special import gammainc

        return np.asarray(gammainc(a, y), dtype=np.float64)
    flat = y.reshape(-1)
    found = np.empty_like(flat)
    low = flat < a + 1.0
    if np.any(low):
        found[low] = _power(a, flat[low]) * _kummer(a + 1.0, flat[low], 40)
    high = flat[~low]
    # 1 - Q with Q a finite sum of positive terms, after erfc for half-integers.
    tail, order = (np.zeros_like(high), 0.0) if twice % 2 == 0 else (_erfc(np.sqrt(high)), 0.5)
    while order < a - 0.25:
        tail += _power(order, high)
        order += 1.0
    found[~low] = 1.0 - tail
    result: Floats = found.reshape(y.shape)[()]
    return result


def _power(order: float, x: Floats) -> Floats:
    """x^order e^-x / Gamma(order + 1)."""
    with np.errstate(divide="ignore", invalid="ignore"):
        power: Floats = np.exp(order * np.log(x) - x - math.lgamma(order + 1.0)) if order else np.exp(-x)
    return power


def _kummer(b: float, x: Floats, terms: int = _TERMS) -> Floats:
    """M(1, b, x), the sum of x^k over b (b+1) ... (b+k-1)."""
    total = np.ones_like(x)
    for k in range(terms - 1, -1, -1):
        total = 1.0 + total * x / (b + k)
    return total


def _erfc(x: Floats) -> Floats:
    return np.array([*map(math.erfc, x.tolist())], dtype=np.float64)


def _ratio(a: float, eta: Floats) -> Floats:
    """P(a + 1, eta)/P(a, eta), eta/(a + 1) for small eta."""
    below = np.minimum(eta, _SERIES_BELOW)
    series = below / (a + 1.0) * _kummer(a + 2.0, below) / _kummer(a + 1.0, below)
    above = np.maximum(eta, _SERIES_BELOW)
    closed = incomplete_gamma(a + 1.0, above) / incomplete_gamma(a, above)
    ratio: Floats = np.where(eta < _SERIES_BELOW, series, closed)
    return ratio


def _on_arrays(function: Callable[[float, Floats], Floats]) -> Callable[[float, ArrayLike], Floats]:
    def wrapped(exponent: float, truncation: ArrayLike) -> Floats:
        result: Floats = function(exponent + 1.5, np.asarray(truncation, dtype=np.float64))[()]
        return result

    wrapped.__doc__, wrapped.__name__ = function.__doc__, function.__name__
    return wrapped


@_on_arrays
def reduced_number(a: float, eta: Floats) -> Floats:
    """N over that of the uncut cloud of the same n_ref and T: P(a, eta). [1] [1] eq. for N = n_0 V_e"""
    return incomplete_gamma(a, eta)


@_on_arrays
def mean_energy(a: float, eta: Floats) -> Floats:
    """E/NkT = a P(a + 1, eta)/P(a, eta), counted from the bottom of the trap: a of an uncut cloud. [1]"""
    return a * _ratio(a, eta)


@_on_arrays
def heat_capacity(a: float, eta: Floats) -> Floats:
    """dE/dT over Nk at fixed N and depth: the spread of the energies in (kT)^2, a of an uncut cloud. [1]"""
    first = a * _ratio(a, eta)
    return first * (a + 1.0) * _ratio(a + 1.0, eta) - first**2


@_on_arrays
def evaporation_volume(a: float, eta: Floats) -> Floats:
    """V_ev/V_e = eta - (a + 1) P(a + 1, eta)/P(a, eta): dN/dt = -N n_ref sigma vbar e^-eta V_ev/V_e. [1] [1]"""
    # eta (1 - M(1, a+2)/M(1, a+1)) for small eta, where the difference is a sum of positive terms.
    below = np.minimum(eta, _SERIES_BELOW)
    term, difference = np.ones_like(below), np.zeros_like(below)
    for k in range(1, _TERMS):
        term = term * below / (a + k)
        difference = difference + term * (k / (a + k + 1.0))
    series = below * difference / _kummer(a + 1.0, below)
    return np.where(eta < _SERIES_BELOW, series, eta - (a + 1.0) * _ratio(a, eta))


@_on_arrays
def energy_volume(a: float, eta: Floats) -> Floats:
    """X_ev/V_e = P(a + 2, eta)/P(a, eta). [1] [1]"""
    return _ratio(a, eta) * _ratio(a + 1.0, eta)


def excess_energy(exponent: float, truncation: ArrayLike) -> Floats:
    """kappa = 1 - X_ev/V_ev: an evaporated atom carries (eta + kappa) kT. [1] [1]"""
    eta = np.asarray(truncation, dtype=np.float64)
    excess: Floats = 1.0 - energy_volume(exponent, eta) / evaporation_volume(exponent, eta)
    return excess


@_on_arrays
def spilled_share(a: float, eta: Floats) -> Floats:
    """-dlnN by spilling over dlnS, S the number of levels below the depth: eta^a e^-eta/(Gamma(a + 1) P(a, eta)). [1]

    Levels that a falling depth, or a weaker trap, pushes over the rim lose their atoms, each with the energy e_t.
    """
    # As 1/M(1, a + 1, eta), its own series, where that converges fast.
    below = np.minimum(eta, _SERIES_BELOW)
    above = np.maximum(eta, _SERIES_BELOW)
    closed = _power(a, above) / incomplete_gamma(a, above)
    return np.where(eta < _SERIES_BELOW, 1.0 / _kummer(a + 1.0, below), closed)


def central_density(truncation: ArrayLike) -> Floats:
    """n(0)/n_ref = P(3/2, eta): 0.981 at eta = 5. [1]"""
    return incomplete_gamma(1.5, truncation)


def highest_energy(exponent: float) -> float:
    """Mean energy over the depth that no cut cloud exceeds, however hot: a/(a + 1). [1]"""
    return (exponent + 1.5) / (exponent + 2.5)


def truncation_of(exponent: float, energy: ArrayLike) -> Floats:
    """eta of a cloud whose mean energy is this share of the depth. [1] NaN unless between 0 and `highest_energy`.

    Newton steps in ln eta against ln(highest/share - 1), two variables that are nearly in proportion; relative error
    about 1e-13.
    """
    share, top = np.asarray(energy, dtype=np.float64), highest_energy(exponent)
    with np.errstate(all="ignore"):
        wanted = np.log(top / share - 1.0)
        held = np.isfinite(wanted)
        target = np.where(held, wanted, 0.0)
        log_eta = np.log((exponent + 2.5) * np.exp(target) + exponent + 2.5)
        for _ in range(40):
            eta = np.exp(log_eta)
            here = mean_energy(exponent, eta) / eta
            excess = np.maximum(top / here - 1.0, 1e-300)
            # d ln(share)/d ln eta = -C/(E/kT)
            slope = top / here / excess * heat_capacity(exponent, eta) / mean_energy(exponent, eta)
            step = np.clip((target - np.log(excess)) / slope, -1.0, 1.0)
            log_eta = log_eta + step
            if np.all(np.abs(step) < 1e-13):
                break
        found: Floats = np.where(held, np.exp(log_eta), np.nan)[()]
    return found
