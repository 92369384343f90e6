"""Ideal fermions in a harmonic trap, any number of them: the discrete levels summed instead of local density.

Grand canonical: means over an exchange of atoms. Energies and mu count from the bottom of the trap, so the zero-point
energy is in them. What is summed is the fugacity, energies and with them the radii, and the density at the centre and
along the axes. The mean density is that of local density, whose ripples average out in it; scales such as TF are those
of a large cloud. A cloud takes some milliseconds; an array is done one by one.

Reference
---------
[1] D. A. Butts and D. S. Rokhsar, Phys. Rev. A 55, 4346 (1997).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.equilibria import quantity
from physics.fermi_levels import FermiLevels
from physics.ideal_fermi import IdealFermi


@dataclass(frozen=True, kw_only=True, eq=False)
class ExactFermions(IdealFermi):
    """N = sum over levels of 1/(e^((e - mu)/kT) + 1) fixes mu."""

    @cached_property
    def spacings(self) -> Floats:
        """(..., 3) hbar w/kT, in the full shape of the cloud. [1]"""
        tau = np.expand_dims(self._levels * self.cloud.trap.mean_frequency, -1)
        spacings: Floats = np.broadcast_to(self.cloud.trap.frequencies / tau, (*self.cloud.shape, 3))
        return spacings

    def levels(self, index: tuple[int, ...] = ()) -> FermiLevels:
        """The levels of one cloud."""
        return FermiLevels(self.spacings[index], self._highest(index))

    def _highest(self, index: tuple[int, ...]) -> float:
        # A sum over levels of a falling function is more than its integral, so that local density, with its energies
        # counted from the ground level, needs a higher mu.
        local = np.broadcast_to(self._log_z, self.cloud.shape)[index]
        return float(local) + 0.5 * float(self.spacings[index].sum())

    @quantity
    def log_fugacity(self) -> Floats:
        atoms = np.broadcast_to(self._atoms, self.cloud.shape)
        local = np.broadcast_to(self._log_z, self.cloud.shape)
        found = np.empty(self.cloud.shape)
        for index in np.ndindex(self.cloud.shape):
            low, high = float(local[index]), self._highest(index)
            found[index] = FermiLevels(self.spacings[index], high).log_fugacity(float(atoms[index]), low, high)
        return found

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """n lambda^3 at the centre, where a few filled shells may leave a dip. [1]"""
        density = np.empty(self.cloud.shape)
        for index in np.ndindex(self.cloud.shape):
            density[index] = self.levels(index).central_density(float(self.log_fugacity[index]))
        return density

    @cached_property
    def _energies(self) -> Floats:
        """(..., 3) Energy of an atom along each axis, in kT. [1]"""
        energies = np.empty((*self.cloud.shape, 3))
        with np.errstate(all="ignore"):
            for index in np.ndindex(self.cloud.shape):
                energies[index] = self.levels(index).energies(float(self.log_fugacity[index]))
        each: Floats = energies / np.expand_dims(self._atoms, -1)
        return each

    @quantity
    def thermal_radii(self) -> Floats:
        """(..., 3) rms radii of all atoms. [m]"""
        # Half of an oscillator's energy is potential energy, in every level.
        return self._thermal_lengths * np.sqrt(self._energies)

    @quantity
    def energy_per_atom(self) -> Floats:
        """Zero-point energy included. No interaction in it. [J]"""
        energy: Floats = self.thermal_energy * self._energies.sum(axis=-1)
        return energy
