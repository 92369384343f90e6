"""The uniform ideal quantum gas, and by how much the classical formulas miss it, alone and in a harmonic trap.

With x = n lambda^3 of one spin state: x = g_3/2(z) or f_3/2(z), p lambda^3/kT = g_5/2(z) or f_5/2(z). In a harmonic
trap with X = N (hbar wbar/kT)^3: X = g_3(z) or f_3(z), and E/3NkT = g_4/g_3 or f_4/f_3.

All functions take and give arrays. Bosons: up to saturation, x = zeta(3/2) or X = zeta(3); beyond it they answer for
the saturated thermal gas without its condensate.

References
----------
[1] K. Huang, Statistical Mechanics, 2nd ed. (1987), ch. 11 and 12: equations of state and the virial series. Recalled.
[2] J. E. Robinson, Phys. Rev. 83, 678 (1951): the functions near saturation.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.constants import boltzmann, planck
from physics.harmonic_integrals import legendre
from physics.particles import Statistics
from physics.smooth import through_nodes
from physics.statistics import bose, bose_inverse, fermi, fermi_inverse

VIRIAL_PRESSURE = (
    -1.0 / (4.0 * math.sqrt(2.0)),
    1.0 / 8.0 - 2.0 / (9.0 * math.sqrt(3.0)),
)
"""p/nkT = 1 + b1 x + b2 x^2 of bosons; the first changes sign for fermions. [1]"""

VIRIAL_ENERGY = (-1.0 / 16.0, 1.0 / 64.0 - 2.0 / 81.0)
"""E/3NkT = 1 + b1 X + b2 X^2 of bosons in a harmonic trap, likewise: b2 from the fugacity series."""

VIRIAL_DENSITY = (
    1.0 / math.sqrt(8.0) - 1.0 / 8.0,
    1.0 / 32.0 - 1.0 / 27.0 + 1.0 / math.sqrt(27.0) - 1.0 / math.sqrt(128.0),
)
"""D = X + b1 X^2 + b2 X^3 of bosons in a harmonic trap, likewise."""


def log_fugacity(statistics: Statistics, reduced_density: ArrayLike) -> Floats:
    """ln z of a uniform gas of x = n lambda^3. [1] 0 for saturated bosons."""
    x = np.asarray(reduced_density, dtype=np.float64)
    if statistics is Statistics.BOSE:
        return 0.0 - np.asarray(bose_inverse(1.5, x))
    return np.asarray(fermi_inverse(1.5, x))


def trapped_log_fugacity(statistics: Statistics, degeneracy: ArrayLike) -> Floats:
    """ln z of a gas of X = N (hbar wbar/kT)^3 in a harmonic trap. [1] 0 for saturated bosons."""
    X = np.asarray(degeneracy, dtype=np.float64)
    if statistics is Statistics.BOSE:
        return 0.0 - np.asarray(bose_inverse(3.0, X))
    return np.asarray(fermi_inverse(3.0, X))


def pressure(statistics: Statistics, mass: float, density: ArrayLike, temperature: ArrayLike) -> Floats:
    """Pressure of a uniform ideal gas, of one spin state. [Pa]

    Parameters
    ----------
    mass : float. [kg]
    density : array_like. [1/m^3] Of one spin state.
    temperature : array_like. [K]
    """
    n, kT = np.asarray(density, dtype=np.float64), boltzmann * np.asarray(temperature, dtype=np.float64)
    quantum_volume = (planck / np.sqrt(2.0 * math.pi * mass * kT)) ** 3
    reduced: Floats = kT / quantum_volume * _function(statistics, 2.5)(log_fugacity(statistics, n * quantum_volume))
    return reduced


def pressure_over_classical(statistics: Statistics, reduced_density: ArrayLike) -> Floats:
    """p/nkT at x = n lambda^3 of the thermal gas: 1 -/+ x/2^(5/2) ... (bosons/fermions), 0.5135 at saturation. [1]"""
    return _ratio(statistics, 2.5, 1.5, log_fugacity(statistics, reduced_density))


def peak_density_over_classical(statistics: Statistics, degeneracy: ArrayLike) -> Floats:
    """D/X of a cloud in a harmonic trap, thermal atoms only: 1 +/- 0.22855 X ... [1]"""
    return _ratio(statistics, 1.5, 3.0, trapped_log_fugacity(statistics, degeneracy))


def energy_over_classical(statistics: Statistics, degeneracy: ArrayLike) -> Floats:
    """E/3NkT of the thermal atoms in a harmonic trap: 1 -/+ X/16 ..., 0.9004 at saturation. [1]"""
    return _ratio(statistics, 4.0, 3.0, trapped_log_fugacity(statistics, degeneracy))


def heat_capacity_over_classical(statistics: Statistics, reduced_density: ArrayLike) -> Floats:
    """C_V/(3/2 N k) of a uniform gas above saturation. [1]"""
    log_z = log_fugacity(statistics, reduced_density)
    return 2.5 * _ratio(statistics, 2.5, 1.5, log_z) - 1.5 * _ratio(statistics, 1.5, 0.5, log_z)


def trapped_heat_capacity_over_classical(statistics: Statistics, degeneracy: ArrayLike) -> Floats:
    """C/(3 N k) of a gas in a harmonic trap above the threshold, at fixed N and frequencies. [1]"""
    log_z = trapped_log_fugacity(statistics, degeneracy)
    return 4.0 * _ratio(statistics, 4.0, 3.0, log_z) - 3.0 * _ratio(statistics, 3.0, 2.0, log_z)


def gaussian_fit_temperature(statistics: Statistics, log_z: ArrayLike) -> Floats:
    """T_fit/T that a Gaussian fitted to the image of the thermal cloud returns, after a long expansion. [1]

    The image is the column density g_2(z e^(-r^2/2)) or f_2, r in units of the classical width; the Gaussian has
    free height and width and the least squared difference over the plane. 1 -/+ z/9 for small z, bosons/fermions;
    0.8004 for saturated bosons. Relative error below 1e-9 for ln z < 1e3.

    Parameters
    ----------
    log_z : array_like. [1] ln z, at most 0 for bosons.
    """
    eta = np.asarray(log_z, dtype=np.float64)
    if statistics is Statistics.BOSE:
        # Near saturation the image is regular in sqrt(-ln z).
        root = np.sqrt(0.0 - eta.reshape(-1))
        flat = through_nodes(lambda root: _fitted_temperature(statistics, -root * root), root)
    else:
        flat = through_nodes(lambda log_z: _fitted_temperature(statistics, log_z), eta.reshape(-1))
    result: Floats = flat.reshape(eta.shape)
    return result[()]


def _fitted_temperature(statistics: Statistics, log_z: Floats) -> Floats:
    """T_fit/T for a flat array of ln z."""
    flat = log_z[:, np.newaxis]
    t, weights = _image_radii(flat)  # t = r^2/2
    column = weights * _function(statistics, 2.0)(flat - t)
    # With q = T/T_fit the best height leaves q P(q)^2 to be made largest, P the integral of column e^(-qt): where the
    # integral of column e^(-qt) (1 - 2qt) vanishes. It falls from positive to negative once; bisect ln q.
    low = np.log(0.2 / (1.0 + np.maximum(flat, 0.0)))
    high = np.full_like(low, math.log(2.0))
    for _ in range(50):
        middle = 0.5 * (low + high)
        q = np.exp(middle)
        positive = (column * np.exp(-q * t) * (1.0 - 2.0 * q * t)).sum(axis=-1, keepdims=True) > 0.0
        low, high = np.where(positive, middle, low), np.where(positive, high, middle)
    fitted: Floats = np.exp(-0.5 * (low + high))[:, 0]
    return fitted


def _image_radii(log_z: Floats) -> tuple[Floats, Floats]:
    """Nodes in t and weights, in two panels of sqrt(t) that meet where the Fermi edge would be."""
    x, w = legendre(48)
    edge = np.sqrt(np.maximum(log_z, 1.0))
    end = np.sqrt(np.maximum(log_z, 0.0) + 40.0)
    root = np.concatenate([edge * x, edge + (end - edge) * x], axis=-1)
    widths = np.concatenate([edge * w, (end - edge) * w], axis=-1)
    return root * root, 2.0 * root * widths


def _function(statistics: Statistics, order: float) -> Callable[[Floats], Floats]:
    """g_s or f_s of ln z, as an array whatever comes in."""
    if statistics is Statistics.BOSE:
        return lambda log_z: np.asarray(bose(order, np.asarray(0.0 - log_z)))
    return lambda log_z: np.asarray(fermi(order, np.asarray(log_z)))


def _ratio(statistics: Statistics, upper: float, lower: float, log_z: Floats) -> Floats:
    # Both are z for small z, and vanish together where z underflows.
    with np.errstate(all="ignore"):
        ratio: Floats = _function(statistics, upper)(log_z) / _function(statistics, lower)(log_z)
    return ratio
