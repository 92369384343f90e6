"""The atoms of an evaporation: what they are and how they collide."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics import collisions
from physics.checks import Floats
from physics.cloud import Cloud
from physics.constants import boltzmann, planck, reduced_planck
from physics.particles import Statistics
from physics.spline import Spline


@dataclass(frozen=True, kw_only=True)
class Gas:
    """Identical atoms, apart from trap, number and temperature. The fields are those of `physics.cloud.Cloud`."""

    statistics: Statistics
    mass: float
    spin_components: int = 1
    scattering_length: float | None = None
    dipolar_length: float | None = None

    def __post_init__(self) -> None:
        if not 0.0 < self.mass < math.inf:
            raise ValueError(f"mass must be positive and finite, got {self.mass:g} kg")
        if self.spin_components < 1:
            raise ValueError(f"spin components must be a whole number from 1 on, got {self.spin_components:g}")

    @classmethod
    def of(cls, cloud: Cloud) -> Gas:
        """The atoms of a single cloud."""
        length = cloud.scattering_length
        return cls(
            statistics=cloud.statistics,
            mass=float(cloud.mass),
            spin_components=int(cloud.spin_components),
            scattering_length=None if length is None or np.isnan(length) else float(length),
            dipolar_length=cloud.dipolar_length,
        )

    @property
    def bosons(self) -> bool:
        return self.statistics is Statistics.BOSE

    @property
    def collides(self) -> bool:
        """Whether there are elastic collisions at all; polarised fermions without a moment have none."""
        waves = self.bosons or self.spin_components > 1
        return (waves and bool(self.scattering_length)) or bool(self.dipolar_length)

    @cached_property
    def cold_cross_section(self) -> float:
        """s-wave part for slow atoms. [m^2]

        Raises
        ------
        ValueError : where it needs a scattering length that is not known.
        """
        if not self.bosons and self.spin_components == 1:
            return 0.0
        if self.scattering_length is None:
            raise ValueError("the scattering length must be known to compute an evaporation")
        a = np.asarray(self.scattering_length)
        return float(collisions.low_energy_cross_section(self.statistics, a, self.spin_components))

    @cached_property
    def dipolar_cross_section(self) -> float:
        """Part of the magnetic dipoles. [m^2]"""
        if self.dipolar_length is None:
            return 0.0
        return float(collisions.dipolar_cross_section(self.statistics, np.asarray(self.dipolar_length)))

    def cross_section(self, temperature: float) -> float:
        """sigma of an atom with its partners in all states, such that n counts those of one. [m^2]

        That of `Equilibrium.collision_cross_section`, through a table of relative error below 1e-7.
        """
        cold = self.cold_cross_section
        if cold == 0.0:
            return self.dipolar_cross_section
        a = self.scattering_length or 0.0
        K = self.mass * boltzmann * temperature * a * a / reduced_planck**2
        if K <= _SLOW:
            return cold + self.dipolar_cross_section
        return cold * math.exp(_thermal_factor().at(math.log(K))[0]) + self.dipolar_cross_section

    def mean_speed(self, temperature: float) -> float:
        """sqrt(8 kT/(pi m)). [m/s]"""
        return math.sqrt(8.0 * boltzmann * temperature / (math.pi * self.mass))

    def wavelength(self, temperature: float) -> float:
        """Thermal de Broglie wavelength. [m]"""
        return planck / math.sqrt(2.0 * math.pi * self.mass * boltzmann * temperature)


_SLOW, _FAST = 1e-9, 1e9
_TABLE: list[Spline] = []


def _thermal_factor() -> Spline:
    """ln of the thermal average over ln K, made when first needed."""
    if not _TABLE:
        logs: Floats = np.linspace(math.log(_SLOW), math.log(_FAST), 300)
        # K = m kT a^2/hbar^2 with everything else 1.
        lengths = np.exp(0.5 * logs)
        unit = reduced_planck**2 / boltzmann
        factor = collisions.thermal_cross_section_factor(unit, np.ones(()), lengths)
        _TABLE.append(Spline(logs, np.log(factor)[:, np.newaxis]))
    return _TABLE[0]
