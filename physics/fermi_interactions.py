"""What is known of two equally filled spin states of fermions that interact: estimates beside the ideal answer.

The coupling is x = 1/(kF a), with kF at the centre of the ideal cloud at T = 0. There are numbers for x < -1 (weak
attraction), |x| < 0.2 (unitarity) and x > 1 (pairs of mass 2m, which are bosons); for kF |a| < 1 the energy is known to
first order. Between these ranges it takes the theory of the crossover, and functions answer NaN. Energies and chemical
potentials are those at T = 0, counted from the bottom of the trap; N is the number in ONE spin state.

References
----------
[1] L. P. Gorkov and T. K. Melik-Barkhudarov, Sov. Phys. JETP 13, 1018 (1961): Tc = (2/e)^(7/3) (e^gamma/pi) TF
    exp(-pi/(2 kF |a|)), 0.277. Recalled.
[2] M. J. H. Ku, A. T. Sommer, L. W. Cheuk, M. W. Zwierlein, Science 335, 563 (2012): xi = 0.376(4), and Tc = 0.167 TF
    of a uniform unitary gas, which is about 0.2 TF in a trap. With the position of the resonance of G. Zurn et al.,
    Phys. Rev. Lett. 110, 135301 (2013), xi = 0.370(5)(8). Recalled.
[3] D. S. Petrov, C. Salomon, G. V. Shlyapnikov, Phys. Rev. Lett. 93, 090404 (2004): pairs repel with 0.6 a.
[4] S. Giorgini, L. P. Pitaevskii, S. Stringari, Rev. Mod. Phys. 80, 1215 (2008): review. Recalled.
[5] D. A. Butts and D. S. Rokhsar, Phys. Rev. A 55, 4346 (1997): radii of the ideal cloud.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.constants import reduced_planck
from physics.equilibria import Equilibrium, quantity
from physics.statistics import zeta

XI = 0.376
"""mu/EF of a uniform gas at unitarity and T = 0. [1] [2]"""

GORKOV = (2.0 / math.e) ** (7.0 / 3.0) * math.exp(np.euler_gamma) / math.pi
"""0.277: Tc/TF is this times exp(-pi/(2 kF |a|)) for weak attraction. [1] [1]"""

UNITARY_TC = 0.2
"""Tc/TF at unitarity in a harmonic trap, to about a tenth of it. [1] [2]"""

PAIRS_TC = (6.0 * zeta(3.0)) ** (-1.0 / 3.0)
"""0.518: Tc/TF of N ideal pairs in the trap of the 2N atoms. [1]"""

PAIR_LENGTH = 0.6
"""Scattering length of two pairs over that of two atoms. [1] [3]"""

MEAN_FIELD = 512.0 / (315.0 * math.pi**2)
"""mu/EF = 1 + 0.165 kF a + ...: the mean field of a filled sea, averaged over a harmonic trap. [1] [4]"""

WEAK, UNITARY, PAIRED = -1.0, 0.2, 1.0
"""Limits of 1/(kF a): below the first, within the second on both sides of 0, above the third. [1]"""


def interaction_parameter(fermi_wavenumber: ArrayLike, scattering_length: ArrayLike) -> Floats:
    """1/(kF a): 0 at unitarity, infinite without interaction, NaN where a is unknown. [1]"""
    kF, a = np.asarray(fermi_wavenumber, dtype=np.float64), np.asarray(scattering_length, dtype=np.float64)
    with np.errstate(divide="ignore"):
        parameter: Floats = 1.0 / (kF * a)
    return parameter


def fermi_radii(mass: float, fermi_energy: ArrayLike, angular_frequencies: Floats) -> Floats:
    """(..., 3) Where the ideal cloud ends at T = 0, sqrt(2 EF/m)/w_i. [m] [5]"""
    EF = np.asarray(fermi_energy, dtype=np.float64)
    radii: Floats = np.expand_dims(np.sqrt(2.0 * EF / mass), -1) / angular_frequencies
    return radii


def superfluid_temperature_ratio(parameter: ArrayLike) -> Floats:
    """Tc/TF below which a trapped mixture is superfluid, from 1/(kF a); NaN between the ranges with an estimate. [1]"""
    x = np.asarray(parameter, dtype=np.float64)
    with np.errstate(all="ignore"):
        weak = GORKOV * np.exp(0.5 * math.pi * x)
    return _by_range(x, weak, UNITARY_TC, PAIRS_TC)


def chemical_potential_ratio(parameter: ArrayLike) -> Floats:
    """mu/EF of a trapped mixture at T = 0, from 1/(kF a): to first order for kF |a| < 1, a repulsive gas without pairs
    included; sqrt(xi) at unitarity; NaN between. [1]

    Pairs are not in it: where they form, x > 1, the gas of unpaired atoms is not the ground state.
    """
    x = np.asarray(parameter, dtype=np.float64)
    with np.errstate(all="ignore"):
        first_order = 1.0 + MEAN_FIELD / x
    return _by_range(x, first_order, math.sqrt(XI), first_order)


def pair_binding_energy(mass: float, scattering_length: ArrayLike) -> Floats:
    """hbar^2/(m a^2) of a weakly bound pair, a beyond the range of the forces; NaN for a <= 0, without a pair. [J]"""
    a = np.asarray(scattering_length, dtype=np.float64)
    with np.errstate(all="ignore"):
        energy: Floats = np.where(a > 0.0, reduced_planck**2 / (mass * a * a), np.nan)
    return energy


def pair_chemical_potential(
    mass: float, atoms: ArrayLike, mean_angular_frequency: ArrayLike, scattering_length: ArrayLike
) -> Floats:
    """mu of a Thomas-Fermi condensate of N pairs of mass 2m and length 0.6 a, without their binding energy. [J]

    (hbar w/2) (15 N 0.6 a/aho)^(2/5), aho of mass 2m. For kF a < 1 and N a/aho >> 1; NaN for a <= 0.
    """
    N, w = np.asarray(atoms, dtype=np.float64), np.asarray(mean_angular_frequency, dtype=np.float64)
    a = np.asarray(scattering_length, dtype=np.float64)
    oscillator_length = np.sqrt(reduced_planck / (2.0 * mass * w))
    with np.errstate(all="ignore"):
        size = 15.0 * N * PAIR_LENGTH * np.where(a > 0.0, a, np.nan) / oscillator_length
        potential: Floats = 0.5 * reduced_planck * w * size**0.4
    return potential


def _by_range(x: Floats, weak: Floats, unitary: float, paired: Floats | float) -> Floats:
    ranges = [x < WEAK, np.abs(x) <= UNITARY, x > PAIRED]
    chosen: Floats = np.select(ranges, [weak, np.full(x.shape, unitary), np.broadcast_to(paired, x.shape)], np.nan)
    return chosen


@dataclass(frozen=True, kw_only=True, eq=False)
class FermiEstimates:
    """The estimates for the cloud of an equilibrium; NaN for bosons, and for one spin state where two are needed."""

    equilibrium: Equilibrium

    @property
    def _length(self) -> Floats:
        """a between two spin states. [m]"""
        cloud = self.equilibrium.cloud
        return cloud.length if cloud.spin_components > 1 and not self.equilibrium.bosons else np.full((), np.nan)

    @quantity
    def interaction_parameter(self) -> Floats:
        """1/(kF a), kF at the centre. [1]"""
        return interaction_parameter(self.equilibrium.fermi_wavenumber, self._length)

    @quantity
    def fermi_radii(self) -> Floats:
        """(..., 3) Where the ideal cloud ends at T = 0. [m]"""
        cloud = self.equilibrium.cloud
        return fermi_radii(cloud.mass, self.equilibrium.fermi_energy, cloud.trap.angular_frequencies)

    @quantity
    def superfluid_temperature(self) -> Floats:
        """Estimate of Tc of a mixture in a trap. [K]"""
        return superfluid_temperature_ratio(self.interaction_parameter) * self.equilibrium.fermi_temperature

    @quantity
    def interacting_chemical_potential(self) -> Floats:
        """Estimate of mu at T = 0 with interaction, of unpaired atoms. [J]"""
        return chemical_potential_ratio(self.interaction_parameter) * self.equilibrium.fermi_energy

    @quantity
    def pair_binding_energy(self) -> Floats:
        """hbar^2/(m a^2) for a > 0. [J]"""
        return pair_binding_energy(self.equilibrium.cloud.mass, self._length)
