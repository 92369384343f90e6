"""A condensate alone, of any interaction: the Gaussian that minimises its mean-field energy.

With density N prod_i e^(-(x_i/b_i)^2)/(sqrt(pi) b_i), b_i^2 = s_i hbar/(m w_i), the energy of an atom is

    sum_i (hbar w_i/4) (s_i + 1/s_i) + I,    I = hbar wbar (N a/aho)/(sqrt(2 pi) sqrt(s_1 s_2 s_3)),

I the interaction energy, aho = sqrt(hbar/(m wbar)). It is stationary where s_i = r_i + sqrt(1 + r_i^2), r_i being
I/(hbar w_i), which leaves one equation for I. Without interaction this is the ground level. With attraction there is a
minimum up to a largest number of atoms only, 0.671 aho/|a| in an isotropic trap; the exact mean field collapses at
0.575 (see `physics.condensate.COLLAPSE`), so this model holds its condensate too long. Its energy is an upper bound,
in an isotropic trap by less than 0.6 % for 0 <= N a/aho <= 1, and by 8 % where the cloud is of Thomas-Fermi shape.

References
----------
[1] G. Baym and C. J. Pethick, Phys. Rev. Lett. 76, 6 (1996).
[2] V. M. Perez-Garcia, H. Michinel, J. I. Cirac, M. Lewenstein, P. Zoller, Phys. Rev. Lett. 77, 5320 (1996): three
    widths; the collapse.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.constants import reduced_planck

_STEPS = 80  # far more than ever needed, but just before the collapse
_ROOT = math.sqrt(2.0 * math.pi)


@dataclass(frozen=True, kw_only=True, eq=False)
class GaussianCondensate:
    """The Gaussian condensate. Made by `gaussian_condensate`. NaN where there is no minimum, and where a is unknown.

    Attributes
    ----------
    atoms : array. [1]
    oscillator_lengths : (..., 3). [m] sqrt(hbar/(m w_i)).
    level_energies : (..., 3). [J] hbar w_i.
    interaction : array. [1] Interaction energy of an atom over hbar wbar.
    """

    atoms: Floats
    oscillator_lengths: Floats
    level_energies: Floats
    interaction: Floats

    @cached_property
    def _mean_level(self) -> Floats:
        mean: Floats = np.cbrt(np.prod(self.level_energies, axis=-1))
        return mean

    @cached_property
    def _squeeze(self) -> Floats:
        """(..., 3) s_i, squared widths over those of the ground level."""
        level = self.level_energies / self._mean_level[..., np.newaxis]
        return _squared_widths(self.interaction[..., np.newaxis] / level)

    @cached_property
    def rms_radii(self) -> Floats:
        """(..., 3) sqrt(<x_i^2>). [m]"""
        radii: Floats = self.oscillator_lengths * np.sqrt(0.5 * self._squeeze)
        return radii

    @cached_property
    def peak_density(self) -> Floats:
        """At the centre. [1/m^3] Up to 1.75 times too high where the cloud is of Thomas-Fermi shape."""
        volume = math.pi**1.5 * np.prod(self.oscillator_lengths * np.sqrt(self._squeeze), axis=-1)
        density: Floats = self.atoms / volume
        return density

    @cached_property
    def kinetic_energy(self) -> Floats:
        """Per atom. [J]"""
        energy: Floats = np.sum(0.25 * self.level_energies / self._squeeze, axis=-1)
        return energy

    @cached_property
    def trap_energy(self) -> Floats:
        """Potential energy per atom. [J]"""
        energy: Floats = np.sum(0.25 * self.level_energies * self._squeeze, axis=-1)
        return energy

    @cached_property
    def interaction_energy(self) -> Floats:
        """Per atom. [J]"""
        energy: Floats = self._mean_level * self.interaction
        return energy

    @cached_property
    def energy(self) -> Floats:
        """Per atom, from the bottom of the trap. [J]"""
        energy: Floats = self.kinetic_energy + self.trap_energy + self.interaction_energy
        return energy

    @cached_property
    def chemical_potential(self) -> Floats:
        """d(N E)/dN, from the bottom of the trap. [J]"""
        potential: Floats = self.energy + self.interaction_energy
        return potential


def gaussian_condensate(
    mass: float, angular_frequencies: ArrayLike, atoms: ArrayLike, scattering_length: ArrayLike
) -> GaussianCondensate:
    """The Gaussian condensate of least energy in a harmonic trap; shapes broadcast. [1] [2]

    Parameters
    ----------
    mass : float. [kg]
    angular_frequencies : (..., 3). [rad/s]
    atoms : array_like. [1] In the condensate.
    scattering_length : array_like. [m] Of any sign; NaN where unknown.
    """
    w, N, a = (np.asarray(value, dtype=np.float64) for value in (angular_frequencies, atoms, scattering_length))
    lengths = np.sqrt(reduced_planck / (mass * w))
    mean_length = np.cbrt(np.prod(lengths, axis=-1))
    levels = w / np.cbrt(np.prod(w, axis=-1))[..., np.newaxis]
    with np.errstate(all="ignore"):
        interaction = _interaction(N * a / mean_length, levels)
    return GaussianCondensate(
        atoms=N, oscillator_lengths=lengths, level_energies=reduced_planck * w, interaction=interaction
    )


def collapse_parameter(angular_frequencies: ArrayLike) -> Floats:
    """Largest N |a|/aho at which an attractive Gaussian condensate has a minimum of energy: 0.671 in an isotropic trap.
    [1] [2]

    Parameters
    ----------
    angular_frequencies : (..., 3). [rad/s] Or any numbers in proportion.
    """
    w = np.asarray(angular_frequencies, dtype=np.float64)
    levels = w / np.cbrt(np.prod(w, axis=-1))[..., np.newaxis]
    return _attraction(_softest(levels), levels)


def isotropic_parameter(interaction: Floats) -> Floats:
    """N a/aho of an isotropic trap in which the interaction energy of an atom is so many times hbar w. [1]"""
    parameter: Floats = _ROOT * interaction * _squared_widths(interaction) ** 1.5
    return parameter


def _squared_widths(ratio: Floats) -> Floats:
    """s = I/(hbar w) + sqrt(1 + (I/hbar w)^2); of a negative I without the difference."""
    magnitude = np.abs(ratio) + np.hypot(1.0, ratio)
    return np.where(ratio < 0.0, 1.0 / magnitude, magnitude)


def _attraction(strength: Floats, levels: Floats) -> Floats:
    """N |a|/aho that has the interaction energy -strength hbar wbar."""
    product = np.prod(_squared_widths(-strength[..., np.newaxis] / levels), axis=-1)
    attraction: Floats = _ROOT * strength * np.sqrt(product)
    return attraction


def _softest(levels: Floats) -> Floats:
    """|I|/(hbar wbar) of the largest attractive condensate."""
    # There d ln(N|a|)/d ln|I| = 1 - sum |I|/(2 sqrt(I^2 + (hbar w_i)^2)) vanishes. The sum is concave in |I|: Newton
    # from below does not pass the root. In an isotropic trap it starts there.
    x: Floats = 2.0 / math.sqrt(5.0) * np.min(levels, axis=-1)
    for _ in range(_STEPS):
        root = np.hypot(x[..., np.newaxis], levels)
        miss = 1.0 - 0.5 * np.sum(x[..., np.newaxis] / root, axis=-1)
        step = miss / (0.5 * np.sum(levels**2 / root**3, axis=-1))
        x = x + step
        if np.all(np.abs(step) <= 1e-15 * x):
            break
    return x


def _interaction(parameter: Floats, levels: Floats) -> Floats:
    """I/(hbar wbar) from N a/aho; NaN beyond the collapse."""
    magnitude, sign = np.abs(parameter), np.sign(parameter)
    sign, _ = np.broadcast_arrays(sign, levels[..., 0])
    # ln(N|a|) against ln|I| has a slope between 1 and 5/2 and is convex for repulsion; for attraction it is concave,
    # and flat at the collapse. Newton from the ideal gas reaches the root from one side.
    y = np.log(magnitude / _ROOT) + np.zeros(sign.shape)
    for _ in range(_STEPS):
        strength = np.exp(y)
        ratio = (sign * strength)[..., np.newaxis] / levels
        product = np.prod(_squared_widths(ratio), axis=-1)
        miss = np.log(_ROOT * strength * np.sqrt(product) / magnitude)
        slope = 1.0 + 0.5 * np.sum(ratio / np.hypot(1.0, ratio), axis=-1)
        step = np.where(slope > 0.0, miss / slope, 0.0)
        y = y - step
        if not np.any(np.abs(step) > 1e-15 * np.maximum(1.0, np.abs(y))):
            break
    interaction = np.where(sign == 0.0, 0.0, sign * np.exp(y))
    attractive = sign < 0.0
    if np.any(attractive):
        collapsed = magnitude > _attraction(_softest(levels), levels)
        interaction = np.where(attractive & collapsed, np.nan, interaction)
    return np.where(np.isnan(parameter), np.nan, interaction)
