"""The volume curve W(U) of a trap: the volume, around the minimum, in which the potential is below U.

Every equilibrium quantity of a large cloud follows from it, see `physics.traps.survey`.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996), eqs. (10) and (A1): density of states
    of any potential, and occupation of a trap of finite depth.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats, as_floats, require_positive
from physics.constants import boltzmann, planck
from physics.spline import Spline


@dataclass(frozen=True, kw_only=True, eq=False)
class VolumeCurve:
    """Volume of the connected region around the minimum in which the potential, from the minimum, is below U.

    Between the given energies the logarithm of W is a cubic in that of U; below the lowest one W = coefficient U^power.

    Attributes
    ----------
    mass : float. [kg]
    energies : (n,). [J] Rising; the last one is the `ceiling`, up to which the curve is known.
    volumes : (n,). [m^3] Rising.
    arm_shares : (n,). [1] Part of the volume that lies in arms of beams.
    coefficient, power : of the curve at small U.
    """

    mass: float
    energies: Any
    volumes: Any
    arm_shares: Any
    coefficient: float
    power: float

    def __post_init__(self) -> None:
        for name in ("energies", "volumes", "arm_shares"):
            object.__setattr__(self, name, as_floats(getattr(self, name)))
        require_positive("energy of a volume curve", self.energies, "J")
        require_positive("volume of a volume curve", self.volumes, "m^3")
        if self.energies.ndim != 1 or not self.energies.shape == self.volumes.shape == self.arm_shares.shape:
            raise ValueError("energies, volumes and arm shares of a volume curve must be rows of one length")
        if np.any(np.diff(self.energies) <= 0.0) or np.any(np.diff(self.volumes) < 0.0):
            raise ValueError("energies and volumes of a volume curve must rise")

    @property
    def ceiling(self) -> float:
        """Energy up to which the curve is known. [J]"""
        return float(self.energies[-1])

    def volume(self, energy: ArrayLike) -> Floats:
        """W at energies of any shape: 0 up to zero, NaN above the ceiling. [m^3]"""
        U = np.asarray(energy, dtype=np.float64)
        with np.errstate(divide="ignore"):
            x = np.log(np.maximum(U, 0.0))
        first, lowest = float(np.log(self.energies[0])), float(np.log(self.volumes[0]))
        with np.errstate(invalid="ignore"):
            y = np.where(x < first, lowest + self.power * (x - first), self._spline(np.maximum(x, first))[..., 0])
        return np.where(self.ceiling * (1.0 + 1e-12) < U, np.nan, np.exp(np.where(U > 0.0, y, -np.inf)))[()]

    @cached_property
    def _spline(self) -> Spline:
        """The logarithm of W against that of U, never falling."""
        return Spline(np.log(self.energies), np.log(self.volumes)[:, np.newaxis], monotone=True)

    def arm_share(self, energy: ArrayLike) -> Floats:
        """Part of the volume below energies of any shape that lies in arms of beams. [1]"""
        U = np.asarray(energy, dtype=np.float64)
        share: Floats = np.interp(U, np.append(0.0, self.energies), np.append(0.0, self.arm_shares))
        return share

    def density_of_states(self, energy: ArrayLike) -> Floats:
        """States per energy of one spin state, rho(e) = pi (2m)^{3/2} h^-3 int_0^e W(U) (e-U)^{-1/2} dU. [1/J] [1]

        Energies of any shape [J], from the minimum; NaN above the ceiling.
        """
        e = np.asarray(energy, dtype=np.float64)
        x, weights = _cosine_rule()
        # U = e x with x = cos^2: the square root at the top goes, and so does the steep start of W.
        mean = self.volume(e[..., np.newaxis] * x) @ weights
        rho: Floats = 2.0 * math.pi * (2.0 * self.mass) ** 1.5 / planck**3 * np.sqrt(np.maximum(e, 0.0)) * mean
        return rho

    def atoms_in_arms(self, temperature: ArrayLike) -> Floats:
        """Part of a classical cloud, of any temperatures [K], that lies in arms of beams. [1]

        Atoms of more energy than the ceiling are missing, those at a place of potential U by the incomplete gamma
        function P(3/2, (ceiling - U)/kT).
        """
        kT = boltzmann * np.asarray(temperature, dtype=np.float64)[..., np.newaxis]
        U = np.append(0.0, self.energies)
        W = np.append(0.0, self.volumes)
        middle = 0.5 * (U[1:] + U[:-1])
        # Over the factor of the lowest step, so that the coldest cloud keeps something.
        filled = np.exp(-(middle - middle[0]) / kT) * _below(np.maximum(self.ceiling - middle, 0.0) / kT)
        arms = np.diff(W * np.append(0.0, self.arm_shares))
        share: Floats = (filled @ arms) / (filled @ np.diff(W))
        return share


def _below(x: Floats) -> Floats:
    """P(3/2, x): part of a Maxwell distribution below an energy of x kT."""
    from math import erf

    root = np.sqrt(x)
    part: Floats = np.vectorize(erf, otypes=[float])(root) - 2.0 / math.sqrt(math.pi) * root * np.exp(-x)
    return part


@lru_cache(maxsize=1)
def _cosine_rule() -> tuple[Floats, Floats]:
    """Nodes x in (0, 1) and weights for int_0^1 f(1 - t^2) dt."""
    nodes, weights = np.polynomial.legendre.leggauss(64)
    angle = 0.25 * math.pi * (nodes + 1.0)
    return np.cos(angle) ** 2, 0.25 * math.pi * weights * np.cos(angle)
