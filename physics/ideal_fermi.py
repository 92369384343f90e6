"""Fermions without interaction in a harmonic trap, local-density approximation.

Valid for hbar w << EF along every axis and, for smooth profiles, hbar w << kT. Spin states do not interact either.

Reference
---------
[1] D. A. Butts and D. S. Rokhsar, Phys. Rev. A 55, 4346 (1997).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.equilibria import Equilibrium, quantity
from physics.harmonic_integrals import fermi_overlap
from physics.statistics import fermi, fermi_inverse


@dataclass(frozen=True, kw_only=True, eq=False)
class IdealFermi(Equilibrium):
    """n lambda^3 = f_3/2(z e^(-V/kT)), z from N = (kT/hbar wbar)^3 f_3(z)."""

    @cached_property
    def _log_z(self) -> Floats:
        return np.asarray(fermi_inverse(3.0, np.asarray(self._degeneracy)))

    @quantity
    def log_fugacity(self) -> Floats:
        return self._log_z

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """f_3/2(z), at the centre of the cloud. [1]"""
        return np.asarray(fermi(1.5, self._log_z))

    @quantity
    def peak_density(self) -> Floats:
        return self.peak_phase_space_density / self._quantum_volume

    @quantity
    def mean_density(self) -> Floats:
        return fermi_overlap(self._log_z) / self._degeneracy / self._quantum_volume

    @cached_property
    def _potential_share(self) -> Floats:
        """<V>/(3/2 kT) of an atom, f_4/f_3. [1]"""
        with np.errstate(all="ignore"):
            share: Floats = np.divide(fermi(4.0, self._log_z), self._degeneracy)
        return share

    @quantity
    def thermal_radii(self) -> Floats:
        """(..., 3) rms radii of all atoms. [m]"""
        scale: Floats = np.expand_dims(np.sqrt(self._potential_share), -1)
        return self._thermal_lengths * scale

    @quantity
    def energy_per_atom(self) -> Floats:
        """3 kT f_4/f_3. No interaction in it. [J]"""
        return 3.0 * self.thermal_energy * self._potential_share
