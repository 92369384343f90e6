"""Ideal bosons in a harmonic trap, any number of them: the discrete levels summed instead of local density.

Grand canonical: means over an exchange of atoms. The condensate is the ground level, and there is no sharp threshold;
Tc0 of the large cloud stays the scale. Energies and mu count from the bottom of the trap, so the zero-point energy is
in them. One cloud takes about half a millisecond; an array is done one by one.

Reference
---------
[1] W. Ketterle and N. J. van Druten, Phys. Rev. A 54, 656 (1996).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.equilibria import Equilibrium, quantity
from physics.oscillator_levels import OscillatorLevels, squared_density


@dataclass(frozen=True, kw_only=True, eq=False)
class ExactLevels(Equilibrium):
    """N = 1/expm1(alpha) + atoms in excited levels fixes alpha, the ground level's distance from mu in kT."""

    @cached_property
    def spacings(self) -> Floats:
        """(..., 3) hbar w/kT, in the full shape of the cloud. [1]"""
        tau = np.expand_dims(self._levels * self.cloud.trap.mean_frequency, -1)
        spacings: Floats = np.broadcast_to(self.cloud.trap.frequencies / tau, (*self.cloud.shape, 3))
        return spacings

    @cached_property
    def _cells(self) -> Floats:
        """(..., 6) Ground-level atoms, excited atoms, their energies (3) and central density, made in one pass."""
        atoms = np.broadcast_to(self._atoms, self.cloud.shape)
        cells = np.empty((*self.cloud.shape, 6))
        centre = np.zeros((3, 1))
        with np.errstate(all="ignore"):
            for index in np.ndindex(self.cloud.shape):
                levels = OscillatorLevels(self.spacings[index])
                ground = levels.ground_atoms(float(atoms[index]))
                alpha = float(ground_distance(ground))
                cells[index][0] = ground
                cells[index][1] = levels.excited_atoms(alpha)
                cells[index][2:5] = levels.excited_energies(alpha)
                cells[index][5] = levels.excited_density(alpha, centre)[0]
        return cells

    @cached_property
    def _zero_point(self) -> Floats:
        """E0/kT. [1]"""
        energy: Floats = 0.5 * self.spacings.sum(axis=-1)
        return energy

    @cached_property
    def _ground_density(self) -> Floats:
        """Peak density of one atom in the ground level. [1/m^3]"""
        density: Floats = 1.0 / (math.pi**1.5 * self.oscillator_length**3)
        return density

    @quantity
    def log_fugacity(self) -> Floats:
        """(E0 - mu0)/kT: mu from the bottom of the trap, mu0 from the ground level. [1]"""
        return self._zero_point - ground_distance(self._cells[..., 0])

    @quantity
    def condensate_fraction(self) -> Floats:
        """Share of the atoms in the ground level. [1]"""
        return self._cells[..., 0] / self._atoms

    @quantity
    def condensate_atoms(self) -> Floats:
        return self._cells[..., 0]

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """n lambda^3 of the atoms above the ground level at the centre. [1]

        Above threshold, where the ground level is one like all others, its share of the density is missing.
        """
        return self._cells[..., 5] * self._ground_density * self._quantum_volume

    @quantity
    def peak_density(self) -> Floats:
        return (self._cells[..., 5] + self._cells[..., 0]) * self._ground_density

    @quantity
    def mean_density(self) -> Floats:
        squared = np.empty(self.cloud.shape)
        for index in np.ndindex(self.cloud.shape):
            ground = float(self._cells[index][0])
            squared[index] = squared_density(self.spacings[index], float(ground_distance(ground)), ground)
        return squared / self._atoms * self._ground_density

    @quantity
    def thermal_radii(self) -> Floats:
        """(..., 3) rms radii of the atoms above the ground level. [m]"""
        # Half of an oscillator's energy is potential energy, in every level.
        energies = self._cells[..., 2:5] / self._cells[..., 1:2]
        return self._thermal_lengths * np.sqrt(energies)

    @quantity
    def energy_per_atom(self) -> Floats:
        """Zero-point energy included. No interaction in it. [J]"""
        ground = self._cells[..., 0] * self._zero_point
        energy: Floats = self.thermal_energy * (ground + self._cells[..., 2:5].sum(axis=-1)) / self._atoms
        return energy


def ground_distance(ground_atoms: Floats | float) -> Floats:
    """alpha = (E0 - mu)/kT that puts so many atoms in the ground level. [1]"""
    distance: Floats = np.log1p(1.0 / np.asarray(ground_atoms))
    return distance
