"""Ideal fermions in a harmonic trap, any number of them: the discrete levels summed instead of local density.

Grand canonical: means over an exchange of atoms. Energies and mu count from the bottom of the trap, so the zero-point
energy is in them. What is summed is the fugacity, energies and with them the radii, and the density at the centre and
along the axes. The mean density is that of local density, whose ripples average out in it; scales such as TF are those
of a large cloud. A cloud takes a millisecond or some; those of an array with many levels within kT are done at once.

Reference
---------
[1] D. A. Butts and D. S. Rokhsar, Phys. Rev. A 55, 4346 (1997).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.equilibria import quantity
from physics.fermi_levels import FermiLevels
from physics.fermi_series import FINE, FineLevels
from physics.ideal_fermi import IdealFermi
from physics.statistics import fermi


@dataclass(frozen=True, kw_only=True, eq=False)
class ExactFermions(IdealFermi):
    """N = sum over levels of 1/(e^((e - mu)/kT) + 1) fixes mu."""

    @cached_property
    def spacings(self) -> Floats:
        """(..., 3) hbar w/kT, in the full shape of the cloud. [1]"""
        tau = np.expand_dims(self._levels * self.cloud.trap.mean_frequency, -1)
        spacings: Floats = np.broadcast_to(self.cloud.trap.frequencies / tau, (*self.cloud.shape, 3))
        return spacings

    @cached_property
    def _fine(self) -> NDArray[np.bool_]:
        """Clouds with many levels within kT along every axis: all done at once."""
        fine: NDArray[np.bool_] = np.all(self.spacings <= FINE, axis=-1)
        return fine

    @cached_property
    def _fine_levels(self) -> FineLevels:
        return FineLevels(self.spacings[self._fine])

    def levels(self, index: tuple[int, ...] = ()) -> FermiLevels:
        """The levels of one cloud."""
        return FermiLevels(self.spacings[index], self._highest(index))

    def _highest(self, index: tuple[int, ...]) -> float:
        # A sum over levels of a falling function is more than its integral, so that local density, with its energies
        # counted from the ground level, needs a higher mu.
        local = np.broadcast_to(self._log_z, self.cloud.shape)[index]
        return float(local) + 0.5 * float(self.spacings[index].sum())

    def _filled(self, values: Floats, fine: Callable[[], Floats], one: Callable[[tuple[int, ...]], Any]) -> Floats:
        """Values of fine clouds and of the others, these one by one."""
        if np.any(self._fine):
            values[self._fine] = fine()
        for index in zip(*np.nonzero(np.atleast_1d(~self._fine)), strict=True):
            place = index if self.cloud.shape else ()
            values[place] = one(place)
        return values

    @quantity
    def log_fugacity(self) -> Floats:
        atoms, local = (np.broadcast_to(value, self.cloud.shape) for value in (self._atoms, self._log_z))
        # The first correction to local density is a good start everywhere.
        start = local + np.sum(self.spacings**2, axis=-1) / 24.0 * fermi(1.0, local) / fermi(2.0, local)

        def one(index: tuple[int, ...]) -> float:
            return self.levels(index).log_fugacity(float(atoms[index]), float(start[index]), self._highest(index))

        fine = self._fine
        return self._filled(
            np.empty(self.cloud.shape), lambda: self._fine_levels.log_fugacity(atoms[fine], start[fine]), one
        )

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """n lambda^3 at the centre, where a few filled shells may leave a dip. [1]"""
        return self._filled(
            np.empty(self.cloud.shape),
            lambda: self._fine_levels.central_density(self.log_fugacity[self._fine]),
            lambda index: self.levels(index).central_density(float(self.log_fugacity[index])),
        )

    @cached_property
    def _energies(self) -> Floats:
        """(..., 3) Energy of an atom along each axis, in kT. [1]"""
        energies = self._filled(
            np.empty((*self.cloud.shape, 3)),
            lambda: self._fine_levels.energies(self.log_fugacity[self._fine]),
            lambda index: self.levels(index).energies(float(self.log_fugacity[index])),
        )
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
