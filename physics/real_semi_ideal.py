"""Bosons in a real trap: a Thomas-Fermi condensate that repels thermal atoms, which do not repel one another.

Above the threshold, which stays at that of the ideal gas in the trap, this is the ideal gas. Below, thermal atoms feel
|V - mu|, and those whose whole energy, with the repulsion, is above the depth are gone. Valid as in a harmonic trap:
hbar w << kT, N0 a >> aho and n a^3 << 1.

Reference
---------
[1] M. Naraschewski and D. M. Stamper-Kurn, Phys. Rev. A 58, 2423 (1998): the model, in a harmonic trap.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.condensed_cells import CondensedCells
from physics.equilibria import quantity
from physics.held_densities import HeldBose
from physics.real_equilibria import Densities, RealEquilibrium
from physics.real_ideal import RealIdealBose
from physics.real_semi_ideal_integrals import CondensateSums


@dataclass(frozen=True, kw_only=True, eq=False)
class RealSemiIdeal(CondensedCells, RealIdealBose):
    """mu of the condensate solves N lambda^3 = condensed and thermal densities summed over the trap."""

    @cached_property
    def _is_condensed(self) -> NDArray[np.bool_]:
        return np.asarray(self._number > self._most)

    @quantity
    def atoms_over_most(self) -> Floats:
        return atoms_over_most(self)

    @cached_property
    def _sums_of_trap(self) -> CondensateSums:
        return self.trap.condensates

    @cached_property
    def _height(self) -> Floats:
        """m = mu/kT of the condensed cells, flat; NaN where the trap does not hold so many atoms. [1]"""
        wanted = self._below(self._volume_number)
        saturated = wanted * self._below(self._most / self._number)
        return self._sums_of_trap.height(self._below(self._eta), wanted, saturated, self._below(self._density_scale))

    @cached_property
    def _thermal(self) -> Floats:
        """Sums of `CondensateSums.thermal` over N lambda^3, (8, cells), of the condensed cells."""
        sums = self._sums_of_trap.thermal_of_many(self._below(self._eta), self._height)
        return sums / self._below(self._volume_number)

    @cached_property
    def _shares(self) -> Floats:
        """Condensed share of the atoms, of the condensed cells."""
        eta, m = self._below(self._eta), self._height
        condensed = self._below(self._density_scale) * eta * self._sums_of_trap.condensed(m / eta)[0]
        share: Floats = np.minimum(condensed / self._below(self._volume_number), 1.0)
        return share

    @cached_property
    def _condensate(self) -> Floats:
        """(3, cells) Integrals of n_c, n_c^2 and n_c^3, times lambda^3, lambda^6, lambda^9, over N lambda^3."""
        eta, m, scale = self._below(self._eta), self._height, self._below(self._density_scale)
        powers = np.stack([scale * eta, (scale * eta) ** 2, (scale * eta) ** 3])
        sums: Floats = powers * self._sums_of_trap.condensate(m / eta) / self._below(self._volume_number)
        return sums

    @quantity
    def log_fugacity(self) -> Floats:
        """mu/kT, mu from the bottom of the trap: positive below threshold. [1]"""
        return self._merged(0.0 - self._alpha, lambda: self._height)

    @quantity
    def condensate_fraction(self) -> Floats:
        return self._merged(0.0, lambda: self._shares)

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """At the edge of the condensate, once there is one. [1]"""
        above = super().peak_phase_space_density

        def below() -> Floats:
            top = self._below(self._eta) - self._height
            held = HeldBose(top=np.where(np.isnan(top), 1.0, top)).density(np.zeros((top.size, 1)))[:, 0]
            return np.where(np.isnan(top), np.nan, held)

        return self._merged(above, below)

    @quantity
    def peak_density(self) -> Floats:
        """At the centre; just below threshold, where the condensate is thinner than the thermal gas at its edge, there.
        [1/m^3]"""

        def below() -> Floats:
            m = self._height
            top = np.nan_to_num(self._below(self._eta) - m, nan=1.0)
            held = HeldBose(top=top).density(np.nan_to_num(m)[:, np.newaxis])[:, 0]
            edge = self._below(np.asarray(self.peak_phase_space_density))
            return np.maximum(self._below(self._density_scale) * m + held, np.where(np.isnan(m), np.nan, edge))

        return self._merged(self.peak_phase_space_density, below) / self._quantum_volume

    @cached_property
    def _densities(self) -> Densities:
        ideal = super()._densities
        if not np.any(self._condensed):
            return ideal
        below = self._condensed.reshape(-1)
        unit = self._flat(self._volume_number)[below]
        scale = self._below(self._density_scale)
        _, _, potential, squared, cubed, product, twice, mixed = self._thermal
        _, two, three = self._condensate

        def merged(above: Floats, values: Floats | float) -> Floats:
            result = above.copy()
            result[below] = values * unit
            return result

        return Densities(
            squared=merged(ideal.squared, two + 2.0 * scale * product + squared),
            pairs=merged(ideal.pairs, 0.5 * two + 2.0 * scale * product + squared),
            triples=merged(ideal.triples, three / 6.0 + 1.5 * scale**2 * twice + 3.0 * scale * mixed + cubed),
            pair_energy=merged(ideal.pair_energy, np.nan),
            triple_energy=merged(ideal.triple_energy, np.nan),
            thermal_potential=merged(ideal.thermal_potential, potential),
        )

    @quantity
    def mean_density(self) -> Floats:
        """(integral of n^2)/N, n the sum of both densities. [1/m^3]"""
        return self._over_atoms(self._densities.squared) / self._quantum_volume

    @quantity
    def pair_density(self) -> Floats:
        return self._over_atoms(self._densities.pairs) / self._quantum_volume

    @quantity
    def triple_density(self) -> Floats:
        return self._over_atoms(self._densities.triples) / self._quantum_volume**2

    @cached_property
    def _thermal_share(self) -> Floats:
        return self._merged(1.0, lambda: 1.0 - self._shares)

    @quantity
    def condensate_radii(self) -> Floats:
        """sqrt(2 mu/m)/w_i, where the Thomas-Fermi density would end in a harmonic trap of these frequencies. [m]"""
        m = self._merged(np.nan, lambda: self._height)
        return np.expand_dims(np.sqrt(2.0 * m), -1) * self._thermal_lengths

    @quantity
    def energy_per_atom(self) -> Floats:
        """Kinetic and trap energy, and the repulsion within the condensate and between it and thermal atoms. [J]

        A thermal atom has its kinetic energy and the lifted potential; the condensate mu N0 less the integral of N0 by
        mu, (5/7) mu an atom in a harmonic trap.
        """

        def below() -> Floats:
            m = self._height
            thermal = self._thermal[1] + m * self._thermal[0]
            # The integral of N0 by mu is half that of n_c^2, as both are repeated integrals of the volume.
            condensate = m * self._shares - 0.5 * self._condensate[1] / self._below(self._density_scale)
            energy: Floats = self._below(self.thermal_energy) * (thermal + condensate)
            return energy

        moments = self._moments
        above = self.trap.held * self._shaped(moments.energy / moments.number)
        return self._merged(above, below)


def atoms_over_most(solved: RealEquilibrium) -> Floats:
    """N over that of a condensate whose mu is the depth, above which no thermal atoms are held. [1]"""
    scale = solved._wavelength / (2.0 * solved.cloud.length)
    full = solved.trap.condensates.condensate(np.ones(1))[0, 0]
    most: Floats = scale * solved._eta * full
    return solved._volume_number / most
