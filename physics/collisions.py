"""Elastic collisions of trapped atoms: s-waves, and those of magnetic dipoles.

References
----------
[1] J. Dalibard, in Bose-Einstein Condensation in Atomic Gases, Proc. Int. School of Physics "Enrico Fermi" CXL, 321
    (1999): cross-sections. Recalled.
[2] W. Ketterle and N. J. van Druten, Adv. At. Mol. Opt. Phys. 37, 181 (1996): collision rates in a trap. Recalled.
[3] J. L. Bohn and D. S. Jin, Phys. Rev. A 89, 022702 (2014): dipoles.
[4] H. Wu and C. J. Foot, J. Phys. B 29, L321 (1996): collisions until energies are thermal. Recalled.
"""

from __future__ import annotations

import math

import numpy as np

from physics.checks import Floats
from physics.constants import boltzmann, reduced_planck
from physics.particles import Statistics
from physics.smooth import through_nodes

RETHERMALISATION_COLLISIONS = 2.7
"""Collisions an atom needs until energies along all axes are alike, for a cross-section without speed in it. [4]"""


def mean_speed(mass: float, temperature: Floats) -> Floats:
    """Mean speed sqrt(8 kT/(pi m)) of a classical gas. [m/s]"""
    speed: Floats = np.sqrt(8.0 * boltzmann * temperature / (math.pi * mass))
    return speed


def low_energy_cross_section(statistics: Statistics, scattering_length: Floats, spin_components: int) -> Floats:
    """Cross-section per atom for collisions slow against hbar/(m |a|), such that n sigma with the density n of ONE
    spin state counts the partners in all states. [m^2]

    8 pi a^2 for a boson with its own state, and 4 pi a^2 for every other state, bosons or fermions, for which the
    same length is taken. A single state of fermions has none, whatever the length.
    """
    states = 4.0 * math.pi * (spin_components - 1)
    if statistics is Statistics.BOSE:
        states += 8.0 * math.pi
    elif spin_components == 1:
        return np.zeros_like(scattering_length)
    return states * scattering_length**2


def cross_section(scattering_length: Floats, wavenumber: Floats) -> Floats:
    """8 pi a^2/(1 + k^2 a^2) of two identical bosons, k = m v/(2 hbar) for their relative speed v; half of it of atoms
    that can be told apart. [m^2] [1]"""
    a, k = scattering_length, wavenumber
    sigma: Floats = 8.0 * math.pi * a**2 / (1.0 + (k * a) ** 2)
    return sigma


def dipolar_cross_section(statistics: Statistics, dipolar_length: Floats) -> Floats:
    """Cross-section of aligned dipoles of one state, over all directions, in addition to that of s-waves. [m^2] [3]

    (32 pi/45) a_d^2 of bosons, (32 pi/15) a_d^2 of fermions. First Born approximation at threshold: it depends on no
    speed and on nothing of short range, for k a_d << 1.

    Parameters
    ----------
    dipolar_length : array_like. [m] a_dd = mu0 mu^2 m/(12 pi hbar^2), which is (2/3) a_d.
    """
    share = 45.0 if statistics is Statistics.BOSE else 15.0
    sigma: Floats = 32.0 * math.pi / share * (1.5 * dipolar_length) ** 2
    return sigma


# Trapezoidal rule in ln t; the integrands are regular for |arg t| < pi/2 and fall as t at the low end.
_LOG_T = np.arange(-36.0, 3.75, 0.25)


def thermal_cross_section_factor(mass: float, temperature: Floats, scattering_length: Floats) -> Floats:
    """<sigma v>/<v> of sigma0/(1 + k^2 a^2) over sigma0, for two classical atoms of equal mass. [1]

    `thermal_factor` of K = m kT a^2/hbar^2.
    """
    K = np.asarray(mass * boltzmann * temperature * scattering_length**2 / reduced_planck**2, dtype=np.float64)
    return thermal_factor(K)


def thermal_factor(K: Floats) -> Floats:
    """Mean of 1/(1 + K t) over the collision energies t kT, weighted t e^-t. [1]

    1 for K << 1, 1/K at unitarity, in closed form [1 - e^(1/K) E1(1/K)/K]/K. Relative error below 1e-13 for every K.
    """
    t = np.exp(_LOG_T)
    weights = 0.25 * t * t * np.exp(-t)

    def averaged(K: Floats) -> Floats:
        factor: Floats = (weights / (1.0 + K[:, np.newaxis] * t)).sum(axis=-1)
        return factor

    if np.all(K > 0.0):
        return through_nodes(lambda logs: averaged(np.exp(logs)), np.log(K).reshape(-1)).reshape(K.shape)
    return averaged(K.reshape(-1)).reshape(K.shape)


def mean_collision_rate(peak_density: Floats, cross_section: Floats, speed: Floats) -> Floats:
    """Collisions per atom and time, n(0) sigma vbar/2, averaged over a classical cloud in a harmonic trap. [1/s]

    The mean density is n(0)/2^(3/2), the mean relative speed sqrt(2) vbar. [2]
    """
    return 0.5 * peak_density * cross_section * speed


def peak_collision_rate(peak_density: Floats, cross_section: Floats, speed: Floats) -> Floats:
    """Collisions per time of an atom where the density is largest, n(0) sigma sqrt(2) vbar. [1/s]"""
    return math.sqrt(2.0) * peak_density * cross_section * speed
