"""How light heats the atoms that it holds: recoil of scattered photons, and beams whose position shakes.

Noise of the intensity is in `physics.losses.noise_heating_rate`.

References
----------
[1] R. Grimm, M. Weidemueller, Yu. B. Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000), section II.
[2] T. A. Savard, K. M. O'Hara, J. E. Thomas, Phys. Rev. A 56, R1095 (1997): heating by shaking beams. Recalled.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.constants import boltzmann, planck


def recoil_energy(mass: ArrayLike, wavelength: ArrayLike) -> Floats:
    """Kinetic energy h^2/(2 m wavelength^2) of an atom that took up one photon. [J]

    Parameters
    ----------
    mass : array_like. [kg]
    wavelength : array_like. [m]
    """
    m, length = np.asarray(mass, dtype=np.float64), np.asarray(wavelength, dtype=np.float64)
    energy: Floats = planck**2 / (2.0 * m * length**2)
    return energy


def recoil_temperature(mass: ArrayLike, wavelength: ArrayLike) -> Floats:
    """Twice the recoil energy over k, as the trade quotes it. [K] [1]"""
    temperature: Floats = 2.0 * recoil_energy(mass, wavelength) / boltzmann
    return temperature


def recoil_heating_power(mass: ArrayLike, wavelength: ArrayLike, scattering_rate: ArrayLike) -> Floats:
    """Energy that scattered photons leave per atom and second, two recoil energies each. [W] [1]"""
    power: Floats = 2.0 * recoil_energy(mass, wavelength) * np.asarray(scattering_rate, dtype=np.float64)
    return power


def harmonic_heating_rate(power: ArrayLike) -> Floats:
    """Rise dT/dt of the temperature of a cloud in a harmonic trap, where an atom holds 3kT. [K/s] [1]

    Parameters
    ----------
    power : array_like. [W] Energy per atom and second.
    """
    rate: Floats = np.asarray(power, dtype=np.float64) / (3.0 * boltzmann)
    return rate


def pointing_heating_power(mass: ArrayLike, frequency: ArrayLike, spectral_density: ArrayLike) -> Floats:
    """Energy 4 pi^4 m f^4 S_x(f) per atom and second that a shaking trap adds along one axis. [W] [2]

    Parameters
    ----------
    mass : array_like. [kg]
    frequency : array_like. [Hz] Of the trap, along the axis.
    spectral_density : array_like. [m^2/Hz] One-sided, of the position of the trap's centre, at that frequency.
    """
    m, f = np.asarray(mass, dtype=np.float64), np.asarray(frequency, dtype=np.float64)
    power: Floats = 4.0 * math.pi**4 * m * f**4 * np.asarray(spectral_density, dtype=np.float64)
    return power
