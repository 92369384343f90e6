"""How trapped atoms are lost and heated: the constants that say so, and the bounds on them.

Rate constants are those of a THERMAL gas, dn/dt = -K2 n^2 and -K3 n^3, n the density of one spin state. In a condensate
identical bosons meet K2/2 and K3/6 as often [1]: a quoted value for a condensate is to be multiplied by 2 or 6.

References
----------
[1] E. A. Burt et al., Phys. Rev. Lett. 79, 337 (1997): the factor 3! between condensate and thermal gas.
[2] T. Weber, J. Herbig, M. Mark, H.-C. Naegerl, R. Grimm, Phys. Rev. Lett. 91, 123201 (2003): three-body loss at large
    scattering lengths, 3 x 67 hbar a^4/m at most, and the heat that it leaves.
[3] J. P. D'Incao, H. Suno, B. D. Esry, Phys. Rev. Lett. 93, 123201 (2004): the unitarity limit. Recalled.
[4] T. A. Savard, K. M. O'Hara, J. E. Thomas, Phys. Rev. A 56, R1095 (1997): heating by noise of a laser's intensity.
[5] W. Petrich, M. H. Anderson, J. R. Ensher, E. A. Cornell, Phys. Rev. Lett. 74, 3352 (1995): loss at the zero of a
    quadrupole. Recalled.
[6] R. Dubessy et al., Phys. Rev. A 85, 013643 (2012): the heat that spin flips leave in a quadrupole. Recalled.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats, as_floats, require_not_infinite, require_positive
from physics.constants import boltzmann, reduced_planck

SCALING_CEILING = 201.0
"""K3 m/(hbar a^4) that large scattering lengths allow at most. [1] [2]"""

FLIP_COEFFICIENTS = (0.16, 1.85)
"""The least and the largest factor quoted for the loss at a quadrupole's zero. Recalled: an order of magnitude. [5]"""

FLIPPED_ENERGY = 2.5
"""Energy over kT of an atom that is lost there [6]: it passes at the bottom, where it has only kinetic energy, and as
often as its speed times the area where its spin does not follow, which grows as the speed."""

_UNITS = {
    "two_body": "m^3/s",
    "three_body": "m^6/s",
    "heating": "K/s",
    "scattering_rate": "1/s",
    "light_heating": "K/s",
    "intensity_noise": "1/Hz",
    "pointing_noise": "m^2/Hz",
    "light_shares": "",
    "zero_force": "N",
    "recombination_heat": "J",
}


@dataclass(frozen=True, kw_only=True, eq=False)
class Losses:
    """What takes atoms from a trap or heats them. None where unknown, which is not 0.

    Attributes
    ----------
    background_lifetime : array_like or None. [s] 1/e, of collisions with the background gas.
    two_body : array_like or None. [m^3/s] K2 of a thermal gas.
    three_body : array_like or None. [m^6/s] K3 of a thermal gas.
    heating : array_like or None. [K/s] By light, noise and whatever else does not depend on density.
    scattering_rate : array_like or None. [1/s] Photons of the trap's light that an atom scatters.
    light_heating : array_like or None. [K/s] By light that the atoms scatter, where `heating` does not tell it.
    intensity_noise : array_like or None. [1/Hz] One-sided spectrum of the relative intensity of the trapping light,
        at twice the trap frequencies.
    pointing_noise : array_like or None. [m^2/Hz] One-sided spectrum of the position of the trap, along each axis at the
        frequency of that axis.
    light_shares : (3,) or None. Share of the spring constant along each axis that the light makes; None: all of it.
    zero_force : array_like or None. [N] Force of the field on its strong axis, where it vanishes at the minimum.
    recombination_heat : array_like or None. [J] Left in the cloud by one three-body event.

    Raises
    ------
    ValueError : for a lifetime that is not positive, or another value that is negative or infinite.
    """

    background_lifetime: Any = None
    two_body: Any = None
    three_body: Any = None
    heating: Any = None
    scattering_rate: Any = None
    light_heating: Any = None
    intensity_noise: Any = None
    pointing_noise: Any = None
    light_shares: Any = None
    zero_force: Any = None
    recombination_heat: Any = None

    def __post_init__(self) -> None:
        if self.background_lifetime is not None:
            lifetime = as_floats(self.background_lifetime)
            require_positive("background lifetime", lifetime, "s")
            object.__setattr__(self, "background_lifetime", lifetime)
        for name, unit in _UNITS.items():
            value = getattr(self, name)
            if value is not None:
                floats, words = as_floats(value), name.replace("_", " ")
                require_not_infinite(words, floats, unit)
                if np.any(floats < 0.0):
                    raise ValueError(f"{words} must not be negative, got {np.min(floats):g} {unit}".rstrip())
                object.__setattr__(self, name, floats)


def scaling_ceiling(mass: float, scattering_length: ArrayLike) -> Floats:
    """Largest K3 = 201 hbar a^4/m of identical bosons near a resonance, where a is the only length. [m^6/s] [2]

    For a < 0 the factor is larger at each Efimov resonance; far from a magnetic resonance, where a is no longer than
    the range of the forces, there is no such law.
    """
    a = np.asarray(scattering_length, dtype=np.float64)
    ceiling: Floats = SCALING_CEILING * reduced_planck * a**4 / mass
    return ceiling


def unitary_ceiling(mass: float, temperature: ArrayLike) -> Floats:
    """Largest K3 of identical bosons at a temperature, 36 sqrt(3) pi^2 hbar^5/(m^3 (kT)^2). [m^6/s] [3]"""
    kT = boltzmann * np.asarray(temperature, dtype=np.float64)
    ceiling: Floats = 36.0 * math.sqrt(3.0) * math.pi**2 * reduced_planck**5 / (mass**3 * kT**2)
    return ceiling


def noise_heating_rate(frequency: ArrayLike, spectral_density: ArrayLike) -> Floats:
    """Rate pi^2 f^2 S(2f) at which the energy along an axis grows by e. [1/s] [4]

    Parameters
    ----------
    frequency : array_like. [Hz] Of the trap, along the axis.
    spectral_density : array_like. [1/Hz] One-sided, of the relative intensity, at twice that frequency.
    """
    f, S = np.asarray(frequency, dtype=np.float64), np.asarray(spectral_density, dtype=np.float64)
    rate: Floats = math.pi**2 * f**2 * S
    return rate


def spin_flip_rates(mass: float, force: ArrayLike, temperature: ArrayLike) -> tuple[Floats, Floats]:
    """The least and the largest estimate chi (hbar/m)(F/kT)^2 of the loss at the zero of a quadrupole. [1/s] [5]

    Parameters
    ----------
    mass : float. [kg]
    force : array_like. [N] F = dE/dB times the gradient on the strong axis.
    temperature : array_like. [K]
    """
    kT = boltzmann * np.asarray(temperature, dtype=np.float64)
    unit = reduced_planck / mass * (np.asarray(force, dtype=np.float64) / kT) ** 2
    low, high = FLIP_COEFFICIENTS
    return low * unit, high * unit


def usual_spin_flip_rate(mass: float, force: float, thermal_energy: float) -> float:
    """The geometric mean of both estimates, of single numbers; kT [J] in the place of the temperature. [1/s]"""
    low, high = FLIP_COEFFICIENTS
    return math.sqrt(low * high) * reduced_planck / mass * (force / thermal_energy) ** 2
