"""Bosons without interaction in a harmonic trap, local-density approximation.

Valid for hbar w << kT along every axis. The condensate is the ground level of the oscillator.

Reference
---------
[1] V. Bagnato, D. E. Pritchard, D. Kleppner, Phys. Rev. A 35, 4354 (1987).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.equilibria import Equilibrium, quantity
from physics.harmonic_integrals import bose_overlap
from physics.statistics import bose, bose_inverse, zeta


@dataclass(frozen=True, kw_only=True, eq=False)
class IdealBose(Equilibrium):
    """Thermal atoms n lambda^3 = g_3/2(z e^(-V/kT)), z from N = (kT/hbar wbar)^3 g_3(z); what g_3(1) does not hold is
    condensed."""

    @cached_property
    def _alpha(self) -> Floats:
        """-ln z of the thermal atoms, 0 once condensed. [1]"""
        return np.asarray(bose_inverse(3.0, np.asarray(self._degeneracy)))

    @cached_property
    def _thermal_share(self) -> Floats:
        """N_thermal/N. [1]"""
        with np.errstate(all="ignore"):
            share: Floats = np.minimum(1.0, zeta(3.0) / self._degeneracy)
        return share

    @quantity
    def log_fugacity(self) -> Floats:
        return 0.0 - self._alpha  # 0, not -0, once condensed

    @quantity
    def peak_phase_space_density(self) -> Floats:
        return np.asarray(bose(1.5, self._alpha))

    @quantity
    def condensate_fraction(self) -> Floats:
        """1 - (T/Tc0)^3 below Tc0, else 0. [1] eq. (11) there."""
        return 1.0 - self._thermal_share

    @quantity
    def _condensate_density(self) -> Floats:
        """Density of the condensate at the centre, the oscillator's ground level. [1/m^3]"""
        volume: Floats = math.pi**1.5 * self.oscillator_length**3
        return self.condensate_atoms / volume

    @quantity
    def peak_density(self) -> Floats:
        """At the centre, with the condensate in the ground level of the trap. [1/m^3]"""
        return self.peak_phase_space_density / self._quantum_volume + self._condensate_density

    @quantity
    def mean_density(self) -> Floats:
        """(integral of n^2)/N. The condensate counts as small against the thermal cloud around it. [1/m^3]"""
        fraction, n0 = self.condensate_fraction, self._condensate_density
        thermal = self.peak_phase_space_density / self._quantum_volume
        overlap: Floats = bose_overlap(self._alpha) / self._degeneracy / self._quantum_volume
        mean: Floats = overlap + fraction * (n0 / math.sqrt(8.0) + 2.0 * thermal)
        return mean

    @cached_property
    def _potential_share(self) -> Floats:
        """<V>/(3/2 kT) of a thermal atom, g_4/g_3. [1]"""
        alpha = self._alpha
        # Both functions are e^-alpha for large alpha and vanish together only far outside any cloud.
        with np.errstate(all="ignore"):
            share: Floats = np.divide(bose(4.0, alpha), bose(3.0, alpha))
        return share

    @quantity
    def thermal_radii(self) -> Floats:
        scale: Floats = np.expand_dims(np.sqrt(self._potential_share), -1)
        return self._thermal_lengths * scale

    @quantity
    def energy_per_atom(self) -> Floats:
        """3 kT g_4/g_3 a thermal atom, 0 a condensed one. No interaction in it. [J]"""
        return 3.0 * self.thermal_energy * self._potential_share * self._thermal_share
