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
from physics.constants import boltzmann
from physics.light import scattering_rate
from physics.light_heating import harmonic_heating_rate, pointing_heating_power, recoil_heating_power
from physics.losses import noise_heating_rate, spin_flip_rates
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


def thermal_heating(potential: Potential, minimum: StationaryPoint, temperature: float) -> Heating:
    """Scattering averaged over a classical cloud in the harmonic trap of the minimum's curvature.

    Good for clouds much smaller than the beams, that is for a depth of several kT. In a red-detuned trap it is below
    the scattering at the minimum.

    Raises
    ------
    ValueError : at a cusp or a flat minimum, which have no harmonic trap.
    """
    values, vectors = np.linalg.eigh(minimum.curvature)
    if minimum.cusp or values[0] <= 0.0:
        raise ValueError("a thermal average of the scattering needs a minimum with three frequencies")
    nodes, weights = np.polynomial.hermite_e.hermegauss(7)
    grid = np.stack(np.meshgrid(nodes, nodes, nodes, indexing="ij"), axis=-1).reshape(-1, 3)
    product = np.prod(np.stack(np.meshgrid(weights, weights, weights, indexing="ij"), axis=-1), axis=-1).ravel()
    points = minimum.position + (grid * np.sqrt(boltzmann * temperature / values)) @ vectors.T
    return heating_of(potential, points, product / np.sum(product))


def light_shares(potential: Potential, minimum: Floats, axes: Floats) -> Floats:
    """(3,) Share of the spring constant along each axis (rows of `axes`) that the light makes, at the minimum.

    Noise of the intensity shakes this share alone: what it does is in proportion to the share squared.
    """
    _, _, whole = potential.hessian(minimum)
    _, _, light = replace(potential.without_coils, weight=np.zeros(3)).hessian(minimum)
    along = [np.einsum("ij,jk,ik->i", axes, hessian, axes) for hessian in (light, whole)]
    shares: Floats = np.abs(along[0] / along[1])
    return shares


def noise_growth_rate(frequencies: ArrayLike, intensity_noise: ArrayLike) -> float:
    """Mean over the axes of the rate pi^2 f^2 S(2f) at which noise of the intensity makes the energy grow. [1/s]

    Parameters
    ----------
    frequencies : (3,). [Hz] Of a trap of light alone; where coils and gravity have a part in them, an upper bound.
    intensity_noise : one number, or one for each axis. [1/Hz] One-sided, relative, at twice the frequency.
    """
    return float(np.mean(noise_heating_rate(frequencies, intensity_noise)))


def pointing_power(mass: float, frequencies: ArrayLike, pointing_noise: ArrayLike) -> float:
    """Energy per atom and second that a shaking trap adds, over all axes. [W]

    Parameters
    ----------
    frequencies : (3,). [Hz]
    pointing_noise : one number, or one for each axis. [m^2/Hz] One-sided, of the position, at the frequency.
    """
    return float(np.sum(pointing_heating_power(mass, frequencies, pointing_noise)))


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
