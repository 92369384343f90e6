"""Two quantum gases in one trap: whether they mix, and how far each shifts the other by its mean field.

Estimates at zero temperature in the local density: each gas is taken as it is without the other.

References
----------
[1] C. J. Pethick and H. Smith, Bose-Einstein Condensation in Dilute Gases (2008), chapter 12: mixtures. Recalled.
[2] L. Viverit, C. J. Pethick, H. Smith, Phys. Rev. A 61, 053605 (2000): Bose-Fermi mixtures. Recalled; the condition
    is worked out here from the energy of the uniform mixture.
"""

from __future__ import annotations

import math
from enum import Enum

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.constants import reduced_planck


class Mixing(Enum):
    """What two condensates do."""

    MISCIBLE = "miscible"
    APART = "phase separation"
    COLLAPSE = "collapse"
    UNSTABLE_ALONE = "one of them is not stable alone"


def coupling(masses: tuple[float, float], scattering_length: ArrayLike) -> Floats:
    """g = 2 pi hbar^2 a/m_r of two kinds of atoms; of one kind with itself 4 pi hbar^2 a/m. [J m^3]"""
    reduced = masses[0] * masses[1] / sum(masses)
    strength: Floats = 2.0 * math.pi * reduced_planck**2 * np.asarray(scattering_length, dtype=np.float64) / reduced
    return strength


def miscibility_parameter(masses: tuple[float, float], lengths: tuple[ArrayLike, ArrayLike, ArrayLike]) -> Floats:
    """g12^2/(g11 g22) of two condensates: below 1 they mix. [1] [1] section 12.1

    Parameters
    ----------
    lengths : a11, a22 and a12. [m]
    """
    m1, m2 = masses
    a11, a22, a12 = (np.asarray(a, dtype=np.float64) for a in lengths)
    with np.errstate(divide="ignore", invalid="ignore"):
        parameter: Floats = a12**2 * (m1 + m2) ** 2 / (4.0 * m1 * m2 * a11 * a22)
    return parameter


def mixing(masses: tuple[float, float], lengths: tuple[float, float, float]) -> Mixing:
    """What two condensates do, by g12^2 < g11 g22, for a uniform gas. [1]

    In a trap the kinetic energy of small clouds, and different sags, shift the border.
    """
    if not (lengths[0] > 0.0 and lengths[1] > 0.0):
        return Mixing.UNSTABLE_ALONE
    if miscibility_parameter(masses, lengths) < 1.0:
        return Mixing.MISCIBLE
    return Mixing.APART if lengths[2] > 0.0 else Mixing.COLLAPSE


def mean_field_shift(masses: tuple[float, float], scattering_length: ArrayLike, density: ArrayLike) -> Floats:
    """Energy g12 n of an atom in the middle of a gas of the other kind. [J] Positive: it is pushed out.

    Without exchange: the atoms can be told apart, so that condensed and thermal ones count alike.
    """
    shift: Floats = coupling(masses, scattering_length) * np.asarray(density, dtype=np.float64)
    return shift


def bose_fermi_parameter(
    masses: tuple[float, float], lengths: tuple[ArrayLike, ArrayLike], fermi_density: ArrayLike
) -> Floats:
    """g12^2 n_F^(1/3)/(2/3 A g_B), A = hbar^2 (6 pi^2)^(2/3)/(2 m_F): a condensate and one spin state of fermions are
    stable together below 1, for a uniform mixture at zero temperature. [1] [2]

    It is the determinant of the second derivatives of g_B n_B^2/2 + g12 n_B n_F + 3/5 A n_F^(5/3). Above 1 they
    separate for a12 > 0 and collapse for a12 < 0.

    Parameters
    ----------
    masses : of the boson and the fermion. [kg]
    lengths : of the boson with itself, and between the two. [m]
    fermi_density : array_like. [1/m^3]
    """
    own = coupling((masses[0], masses[0]), lengths[0])
    between = coupling(masses, lengths[1])
    kinetic = reduced_planck**2 * (6.0 * math.pi**2) ** (2.0 / 3.0) / (2.0 * masses[1])
    n = np.asarray(fermi_density, dtype=np.float64)
    parameter: Floats = between**2 * np.cbrt(n) / (2.0 / 3.0 * kinetic * own)
    return parameter
