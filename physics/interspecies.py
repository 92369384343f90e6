"""Collisions between atoms of two kinds: speeds, cross-sections, rates, and the energy that they hand over.

The two clouds are classical, each thermal at its own temperature. In a collision that scatters evenly into all
directions the first hands over, on average, the share xm = 4 m1 m2/(m1+m2)^2 of k (T1-T2); with a cross-section that
depends on speed the average over energies is weighted with v^3, that of collisions with v.

References
----------
[1] M. Mudrich, S. Kraft, K. Singer, R. Grimm, A. Mosk, M. Weidemueller, Phys. Rev. Lett. 88, 253001 (2002): rate of
    collisions of two clouds, relaxation of their temperatures, 3/xm collisions.
[2] G. Delannoy, S. G. Murdoch, V. Boyer, V. Josse, P. Bouyer, A. Aspect, Phys. Rev. A 63, 051602 (2001): how far a
    coolant cools a passenger before it is used up. Recalled.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.collisions import thermal_factor
from physics.constants import boltzmann, reduced_planck

_LOG_T = np.arange(-24.0, 4.0, 0.25)
_T = np.exp(_LOG_T)
_WEIGHTS = 0.25 * np.exp(-_T) * np.array([_T**2, 0.5 * _T**3])


@dataclass(frozen=True, kw_only=True)
class PairCollisions:
    """Collisions of two kinds of atoms that can be told apart.

    Attributes
    ----------
    masses : [kg] of the first and the second. scattering_length : array_like. [m]
    """

    masses: tuple[float, float]
    scattering_length: ArrayLike

    def __post_init__(self) -> None:
        for mass in self.masses:
            if not 0.0 < mass < math.inf:
                raise ValueError(f"mass must be positive and finite, got {mass:g} kg")
        length = np.asarray(self.scattering_length, dtype=np.float64)
        if not np.all(np.isfinite(length)):
            raise ValueError(f"scattering length must be finite, got {length[~np.isfinite(length)].flat[0]:g} m")

    @property
    def reduced_mass(self) -> float:
        """[kg]"""
        return self.masses[0] * self.masses[1] / sum(self.masses)

    @property
    def energy_share(self) -> float:
        """xm, 1 for equal masses. [1] [1]"""
        return 4.0 * self.masses[0] * self.masses[1] / sum(self.masses) ** 2

    @property
    def lifting_share(self) -> float:
        """How often a collision of the two lifts an atom over a depth, over a collision of equal masses: about
        sqrt(xm). [1]

        An estimate. By drawn collisions of two clouds cut at one depth of 6 kT in traps of one stiffness it is right
        within 45 percent for masses from 1:22 to 22:1.
        """
        return math.sqrt(self.energy_share)

    @property
    def rethermalisation_collisions(self) -> float:
        """Collisions that an atom of a small cloud needs until its temperature has come close by e, 3/xm. [1] [1]"""
        return 3.0 / self.energy_share

    def _speed_spread(self, temperatures: tuple[ArrayLike, ArrayLike]) -> Floats:
        """Mean square of the relative speed along one direction. [m^2/s^2]"""
        T1, T2 = (np.asarray(T, dtype=np.float64) for T in temperatures)
        spread: Floats = boltzmann * (T1 / self.masses[0] + T2 / self.masses[1])
        return spread

    def relative_speed(self, temperatures: tuple[ArrayLike, ArrayLike]) -> Floats:
        """Mean of it, sqrt(8 k (T1/m1 + T2/m2)/pi). [m/s]"""
        speed: Floats = np.sqrt(8.0 / math.pi * self._speed_spread(temperatures))
        return speed

    def _energy_parameter(self, temperatures: tuple[ArrayLike, ArrayLike]) -> Floats:
        """k^2 a^2 at the square of the relative speed 2 <v_x^2>. [1]"""
        k = self.reduced_mass * np.asarray(self.scattering_length, dtype=np.float64) / reduced_planck
        parameter: Floats = 2.0 * k * k * self._speed_spread(temperatures)
        return parameter

    def cross_section(self, temperatures: tuple[ArrayLike, ArrayLike]) -> Floats:
        """<sigma v>/<v> of 4 pi a^2/(1 + k^2 a^2), which counts collisions. [m^2]"""
        sigma: Floats = self._cold * thermal_factor(np.asarray(self._energy_parameter(temperatures)))
        return sigma

    def exchange_cross_section(self, temperatures: tuple[ArrayLike, ArrayLike]) -> Floats:
        """<sigma v^3>/<v^3> of it, with which they hand over energy. [m^2]"""
        K = np.asarray(self._energy_parameter(temperatures))[..., np.newaxis]
        sigma: Floats = self._cold * np.sum(_WEIGHTS[1] / (1.0 + K * _T), axis=-1)
        return sigma

    @property
    def _cold(self) -> Floats:
        cold: Floats = 4.0 * math.pi * np.asarray(self.scattering_length, dtype=np.float64) ** 2
        return cold

    def collision_rate(self, temperatures: tuple[ArrayLike, ArrayLike], overlap: ArrayLike) -> Floats:
        """Collisions per time of one pair of atoms, sigma12 v12 times the overlap; times N1 N2 it is Z12. [1/s] [1]

        Parameters
        ----------
        overlap : array_like. [1/m^3] As of `physics.overlap.overlap_density`.
        """
        rate: Floats = self.cross_section(temperatures) * self.relative_speed(temperatures) * np.asarray(overlap)
        return rate

    def exchanged_power(self, temperatures: tuple[ArrayLike, ArrayLike], overlap: ArrayLike) -> Floats:
        """Power from the first atom of a pair to the second, xm k (T1-T2) times the rate that hands over energy. [W]

        For clouds that are thermal at two temperatures this is exact, not only for small differences.
        """
        T1, T2 = (np.asarray(T, dtype=np.float64) for T in temperatures)
        rate = self.exchange_cross_section(temperatures) * self.relative_speed(temperatures) * np.asarray(overlap)
        power: Floats = self.energy_share * boltzmann * (T1 - T2) * rate
        return power

    @cached_property
    def _scalars(self) -> tuple[float, float]:
        """4 pi a^2, and k^2 a^2 over half the square of a speed, of one pair. [m^2], [s^2/m^2]"""
        a = float(self.scattering_length)  # type: ignore[arg-type]
        return 4.0 * math.pi * a * a, 2.0 * (self.reduced_mass * a / reduced_planck) ** 2

    def rate_coefficients(self, first: float, second: float) -> tuple[float, float]:
        """sigma v of collisions, and as it hands over energy, at two temperatures. [m^3/s]

        For the kinetics, which asks for single numbers a thousand times.
        """
        spread = boltzmann * (first / self.masses[0] + second / self.masses[1])
        cold, parameter = self._scalars
        counted, exchanging = (_WEIGHTS @ (1.0 / (1.0 + parameter * spread * _T))).tolist()
        flux = cold * math.sqrt(8.0 / math.pi * spread)
        return counted * flux, exchanging * flux

    def relaxation_rate(
        self, atoms: tuple[ArrayLike, ArrayLike], temperatures: tuple[ArrayLike, ArrayLike], overlap: ArrayLike
    ) -> Floats:
        """Rate at which T1-T2 of two clouds in harmonic traps falls by e, (xm/3)(1/N1 + 1/N2) Z12. [1/s] [1]

        Z12 as it hands over energy; without the dependence of the cross-section on speed it is that of collisions.
        """
        rate = self.exchange_cross_section(temperatures) * self.relative_speed(temperatures) * np.asarray(overlap)
        total = sum(np.asarray(N, dtype=np.float64) for N in atoms)
        relaxation: Floats = self.energy_share / 3.0 * total * rate
        return relaxation


def common_temperature(atoms: tuple[ArrayLike, ArrayLike], temperatures: tuple[ArrayLike, ArrayLike]) -> Floats:
    """Temperature of two classical clouds after long contact, (N1 T1 + N2 T2)/(N1 + N2): 3 k N T is kept. [K]"""
    (N1, N2), (T1, T2) = (tuple(np.asarray(v, dtype=np.float64) for v in pair) for pair in (atoms, temperatures))
    mean: Floats = (N1 * T1 + N2 * T2) / (N1 + N2)
    return mean


def coldest_temperature(atoms: tuple[ArrayLike, ArrayLike], temperature: ArrayLike, cooling: ArrayLike) -> Floats:
    """Temperature of both when the last atom of the coolant evaporates, T (N2/(N1 + N2))^alpha. [K] [2]

    From 3 k d((N1+N2) T) = (eta + kappa) k T dN1 in close contact, at fixed frequencies: an evaporated atom cools all
    that are left, d ln T = alpha dN1/(N1 + N2).

    Parameters
    ----------
    atoms : of coolant and passenger. temperature : [K] of both at the start.
    cooling : alpha = dlnT/dlnN of the coolant evaporating alone; (gamma + 1)/3 of an efficiency gamma.
    """
    N1, N2 = (np.asarray(N, dtype=np.float64) for N in atoms)
    coldest: Floats = np.asarray(temperature) * (N2 / (N1 + N2)) ** np.asarray(cooling)
    return coldest


def most_passengers(atoms: ArrayLike, ratio: ArrayLike, cooling: ArrayLike) -> Floats:
    """Number of passengers that a coolant can bring to a share of the starting temperature before it is gone. [1] [2]

    N1 x/(1 - x) with x = ratio^(1/alpha): the inverse of `coldest_temperature`.
    """
    x = np.asarray(ratio, dtype=np.float64) ** (1.0 / np.asarray(cooling, dtype=np.float64))
    most: Floats = np.asarray(atoms) * x / (1.0 - x)
    return most


def coolant_left(atoms: tuple[ArrayLike, ArrayLike], ratio: ArrayLike, cooling: ArrayLike) -> Floats:
    """Atoms of the coolant left when both have come to a share of the starting temperature. [1] Negative where it
    cannot: then it is used up before."""
    N1, N2 = (np.asarray(N, dtype=np.float64) for N in atoms)
    left: Floats = (N1 + N2) * np.asarray(ratio) ** (1.0 / np.asarray(cooling)) - N2
    return left
