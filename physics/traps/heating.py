"""What light, noise and a field's zero do to the atoms in a trap.

References
----------
[1] R. Grimm, M. Weidemueller, Yu. B. Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000), section II.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.light import scattering_rate
from physics.light_heating import harmonic_heating_rate, recoil_heating_power
from physics.losses import spin_flip_rates
from physics.traps.potential import Potential
from physics.traps.stationary import StationaryPoint


@dataclass(frozen=True, kw_only=True, eq=False)
class Heating:
    """Photon scattering, and the heat that it brings; zero in the dark.

    Attributes
    ----------
    scattering_rates : by the name of the beam. [1/s]
    power : float. [W] Energy that scattering leaves per atom and second.
    """

    scattering_rates: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    power: float = 0.0

    @property
    def scattering_rate(self) -> float:
        """Photons scattered per atom and second. [1/s]"""
        return float(sum(self.scattering_rates.values()))

    @property
    def heating_rate(self) -> float:
        """dT/dt of a cloud in a harmonic trap. [K/s] [1]"""
        return float(harmonic_heating_rate(self.power))


def heating_of(potential: Potential, points: Floats, weights: Floats | None = None) -> Heating:
    """Scattering at a point (3,), or its mean over points (n, 3) with weights (n,) of sum 1."""
    rates, power = {}, 0.0
    for beam in potential.beams:
        rate = scattering_rate(potential.lights[beam.name], beam.intensity(points))
        mean = float(rate if weights is None else rate @ weights)
        rates[beam.name] = mean
        power += float(recoil_heating_power(potential.mass, beam.wavelength, mean))
    return Heating(scattering_rates=MappingProxyType(rates), power=power)


def light_shares(potential: Potential, minimum: Floats, axes: Floats) -> Floats:
    """(3,) Share of the spring constant along each axis (rows of `axes`) that the light makes, at the minimum.

    Noise of the intensity shakes this share alone: what it does is in proportion to the share squared.
    """
    _, _, whole = potential.hessian(minimum)
    _, _, light = replace(potential.without_coils, weight=np.zeros(3)).hessian(minimum)
    along = [np.einsum("ij,jk,ik->i", axes, hessian, axes) for hessian in (light, whole)]
    shares: Floats = np.abs(along[0] / along[1])
    return shares


@dataclass(frozen=True, kw_only=True, eq=False)
class SpinFlips:
    """Loss of atoms that pass close to the zero of a quadrupole and lose the field's direction.

    `force` [N] is dE/dB times the gradient on the strong axis.
    """

    mass: float
    force: float

    def rates(self, temperature: ArrayLike) -> tuple[Floats, Floats]:
        """The least and the largest estimate chi (hbar/m)(mu B'/kT)^2 at temperatures of any shape [K]. [1/s]"""
        return spin_flip_rates(self.mass, self.force, temperature)


def spin_flips_of(potential: Potential, minimum: StationaryPoint) -> SpinFlips:
    """The loss at a minimum that is a zero of the field."""
    return SpinFlips(mass=potential.mass, force=float(np.max(np.linalg.svd(minimum.curvature)[1])))
