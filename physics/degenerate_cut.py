"""How degenerate a cut cloud is, by quantum statistics, from its classical occupation.

Of the classical cloud the kinetics knows z_c = n_ref lambda^3, the occupation of the lowest levels. Bosons of the same
N and T in the same cut trap have sum_j z^j b_j = b_1 z_c, with b_j the number at T/j of a classical cloud of unit
occupation: g_3 in a deep harmonic trap. Their peak phase-space density is that of the local momenta below the depth,
the sum over j of z^j j^(-3/2) P(3/2, j eta).

A cut Bose gas saturates at z = 1 with fewer atoms, and a lower density, than a deep one: 0.896 of zeta(3), and 2.594
instead of 2.612, at eta = 5. That is its threshold.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.particles import Statistics
from physics.statistics import bose, fermi, fermi_inverse
from physics.truncated_boltzmann import incomplete_gamma

_SERIES = 80
_NEAR = 6


@dataclass(frozen=True, kw_only=True, eq=False)
class Degeneracy:
    """Of arrays of clouds; NaN where it is not known.

    Attributes
    ----------
    peak_phase_space_density : largest n lambda^3 of the thermal atoms of one spin state. [1]
    condensate_fraction : of ideal bosons; 0 above the threshold, NaN of fermions. [1]
    saturated : whether bosons are beyond their threshold.
    """

    peak_phase_space_density: Floats
    condensate_fraction: Floats
    saturated: NDArray[np.bool_]


def degeneracy(
    statistics: Statistics,
    bottom_exponent: float,
    occupation: Floats,
    truncation: Floats,
    numbers: tuple[Floats, Floats, Floats],
) -> Degeneracy:
    """Quantum degeneracy of cut clouds.

    Parameters
    ----------
    bottom_exponent : d of the volume curve at the bottom of the trap.
    occupation : z_c = n_ref lambda^3. [1]
    truncation : eta. [1]
    numbers : `TruncatedAverages.number` at eta, 2 eta and 3 eta. [1]
    """
    with np.errstate(all="ignore"):
        if statistics is Statistics.FERMI:
            return _fermions(bottom_exponent, occupation, truncation)
        return _bosons(bottom_exponent, occupation, truncation, numbers)


def _bosons(d: float, occupation: Floats, eta: Floats, numbers: tuple[Floats, Floats, Floats]) -> Degeneracy:
    a = d + 1.5
    z_c = np.asarray(occupation, dtype=np.float64)
    near = [number / j**1.5 for j, number in enumerate(numbers, start=1)]
    # Beyond 3 eta nearly all atoms are at the bottom, where numbers go as a power law.
    far = numbers[2] * 3.0**d
    extra = [b - far / j**a for j, b in enumerate(near, start=1)]
    wanted = near[0] * z_c

    def missing(alpha: Floats) -> tuple[Floats, Floats]:
        """What is missing to the wanted number, and its derivative."""
        total, slope = far * _bose(a, alpha), far * _bose(a - 1.0, alpha)
        for j, b in enumerate(extra, start=1):
            part = b * np.exp(-j * alpha)
            total, slope = total + part, slope + j * part
        return wanted - total, slope

    # The number is convex in alpha, so that Newton steps from below the root never pass it; z <= z_c.
    alpha = np.maximum(0.0, -np.log(z_c))
    full = wanted - missing(np.zeros_like(alpha))[0]
    saturated = wanted >= full
    for _ in range(50):
        lack, slope = missing(alpha)
        step = np.where(saturated, 0.0, -lack / slope)
        alpha = np.where(saturated, 0.0, np.maximum(alpha + step, 0.0))
        if np.all(np.abs(step) < 1e-12 * (1.0 + alpha)):
            break
    j = np.arange(1.0, _NEAR + 1.0)
    missing_momenta = (1.0 - incomplete_gamma(1.5, np.multiply.outer(eta, j))) / j**1.5
    peak = _bose(1.5, alpha) - np.sum(np.exp(-np.multiply.outer(alpha, j)) * missing_momenta, axis=-1)
    fraction = np.where(saturated, 1.0 - full / wanted, 0.0)
    return Degeneracy(peak_phase_space_density=peak, condensate_fraction=fraction, saturated=saturated)


def _bose(order: float, alpha: Floats) -> Floats:
    if order <= 4.0 and (2.0 * order).is_integer():
        # One value by itself is looked up in a tenth of the time.
        return np.full(alpha.shape, bose(order, alpha.item())) if alpha.size == 1 else np.asarray(bose(order, alpha))
    j = np.arange(1, _SERIES + 1)
    total: Floats = np.exp(-alpha[..., np.newaxis] * j) @ j**-order
    return total


def _fermions(d: float, occupation: Floats, eta: Floats) -> Degeneracy:
    """The relation of a deep harmonic trap, cut like the classical one; elsewhere none is known."""
    z_c = np.asarray(occupation, dtype=np.float64)
    nothing = np.full_like(z_c, np.nan)
    peak = nothing
    if d == 1.5:
        peak = np.asarray(fermi(1.5, np.asarray(fermi_inverse(3.0, z_c)))) * incomplete_gamma(1.5, eta)
    return Degeneracy(peak_phase_space_density=peak, condensate_fraction=nothing, saturated=np.zeros_like(z_c) > 0.0)
