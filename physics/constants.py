"""Fundamental constants, CODATA 2022, in SI units, and the factors that the data files use.

Literals, not imports: loading scipy.constants takes longer than a whole answer. A test holds every number
against the library's own table.

Reference
---------
[1] P. J. Mohr, D. B. Newell, B. N. Taylor, E. Tiesinga, CODATA recommended values of the fundamental physical
    constants: 2022, Rev. Mod. Phys. 97, 025002 (2025).
"""

from __future__ import annotations

import math
from types import MappingProxyType

planck = 6.62607015e-34  # [J s], exact
reduced_planck = planck / (2.0 * math.pi)  # [J s]
boltzmann = 1.380649e-23  # [J/K], exact
speed_of_light = 299792458.0  # [m/s], exact
elementary_charge = 1.602176634e-19  # [C], exact
atomic_mass = 1.66053906892e-27  # [kg]
electron_mass = 9.1093837139e-31  # [kg]
bohr_radius = 5.29177210544e-11  # [m]
bohr_magneton = 9.2740100657e-24  # [J/T]
vacuum_permittivity = 8.8541878188e-12  # [F/m]
vacuum_permeability = 1.25663706127e-6  # [N/A^2]
polarizability_atomic_unit = 1.64877727212e-41  # [C^2 m^2/J]
standard_gravity = 9.80665  # [m/s^2], exact by convention

DATA_FACTORS = MappingProxyType(
    {
        "1": 1.0,
        "u": atomic_mass,
        "a0": bohr_radius,
        "muB": bohr_magneton,
        "nm": 1e-9,
        "MHz": 1e6,
        "Hz": 1.0,
        "G": 1e-4,
        "K": 1.0,
        "cm^3/s": 1e-6,
        "cm^6/s": 1e-12,
        "au": polarizability_atomic_unit,
    }
)
"""Unit texts that appear in the preset files, each with its factor to SI."""
