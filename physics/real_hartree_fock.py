"""Bosons in a real trap in the Hartree-Fock mean field: all atoms repel one another, above and below threshold.

The model of `physics.hartree_fock`, in a trap of any volume curve, with the atoms gone whose whole energy, mean field
included, is above the depth.

Reference
---------
[1] S. Giorgini, L. P. Pitaevskii, S. Stringari, J. Low Temp. Phys. 109, 309 (1997): the mean field in a trap.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.constants import boltzmann, planck
from physics.equilibria import quantity
from physics.models import Model
from physics.real_equilibria import Densities, RealEquilibrium
from physics.real_hartree_fock_edge import local_densities
from physics.real_hartree_fock_integrals import SUMS, Solution
from physics.real_ideal import RealIdealBose
from physics.real_semi_ideal import atoms_over_most
from physics.roots import rising_roots


@dataclass(frozen=True, kw_only=True, eq=False)
class RealHartreeFock(RealEquilibrium):
    """mu solves N lambda^3 = densities of the mean field, summed over the trap."""

    @cached_property
    def repulsion(self) -> Floats:
        """g = 2a/lambda, the one parameter of the local densities. [1]"""
        repulsion: Floats = 2.0 * self.cloud.length / self._wavelength
        return repulsion

    @quantity
    def atoms_over_most(self) -> Floats:
        return atoms_over_most(self)

    @cached_property
    def _ideal(self) -> RealIdealBose:
        return RealIdealBose(cloud=self.cloud, model=Model.IDEAL)

    @quantity
    def onset_temperature(self) -> Floats:
        """Where the condensate of the model appears at this atom number. [K]"""
        field, trap = self.trap.mean_field, self.trap
        shape = np.broadcast_shapes(np.shape(self._atoms), trap.shape, np.shape(self.cloud.length))
        ideal = self._ideal.critical_temperature
        tc, atoms, held, volume, length = (
            np.broadcast_to(each, shape).reshape(-1)
            for each in (ideal, self._atoms, trap.held, trap.volume, self.cloud.length)
        )

        def miss(log_ratio: Floats) -> Floats:
            T = tc * np.exp(log_ratio)
            wavelength = planck / np.sqrt(2.0 * np.pi * self._mass * boltzmann * T)
            most = field.threshold(held / (boltzmann * T), 2.0 * length / wavelength) * volume / wavelength**3
            ratio: Floats = np.log(most / atoms)
            return ratio

        start = np.where(length > 0.0, -0.01, np.nan)
        log_ratio = rising_roots(miss, np.full(tc.shape, -2.0), np.full(tc.shape, 0.1), start, slope=3.0)
        return (tc * np.exp(log_ratio)).reshape(shape)

    @cached_property
    def _solution(self) -> Solution:
        eta, wanted, g = (self._flat(each) for each in (self._eta, self._volume_number, self.repulsion))
        with np.errstate(all="ignore"):
            return self.trap.mean_field.solve(eta, g, wanted, self._flat(self._ideal._alpha))

    def local_densities(self, potential: Floats) -> tuple[Floats, Floats]:
        """n lambda^3 of thermal atoms and condensate, (places,), where the potential is so many kT; of a single cloud.
        [1]"""
        g, m = (float(np.ravel(each)[0]) for each in (self.repulsion, self._solution.m))
        condensed = bool(np.isfinite(self._solution.rise[0]))
        return local_densities(g, m, float(self._eta) - m, potential, condensed=condensed)

    def _sum(self, name: str) -> Floats:
        """A sum over N lambda^3, in the cloud's shape."""
        mean: Floats = self._shaped(self._solution.sums[SUMS.index(name)]) / self._volume_number
        return mean

    @quantity
    def log_fugacity(self) -> Floats:
        """mu/kT, mu from the bottom of the trap. [1]"""
        return self._shaped(self._solution.m)

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """At the centre, or at the edge of the condensate, which thermal atoms avoid. [1]"""
        return self._shaped(self._solution.densest)

    @quantity
    def condensate_fraction(self) -> Floats:
        return np.clip(self._sum("condensate"), 0.0, 1.0)

    @quantity
    def peak_density(self) -> Floats:
        """At the centre. [1/m^3]"""
        return self._shaped(self._solution.centre) / self._quantum_volume

    @quantity
    def edge_density_jump(self) -> Floats:
        """Density just inside the condensate's edge over that outside, minus 1: an artefact of the mean field. [1]"""
        return self._shaped(self._solution.jump)

    @cached_property
    def _densities(self) -> Densities:
        sums = dict(zip(SUMS, self._solution.sums, strict=True))
        nothing = np.full(sums["squared"].shape, np.nan)
        return Densities(
            squared=sums["squared"],
            pairs=0.5 * sums["pairs"],
            triples=sums["triples"] / 6.0,
            pair_energy=nothing,
            triple_energy=nothing,
            thermal_potential=sums["thermal_potential"],
        )

    @cached_property
    def heat(self) -> tuple[Floats, Floats, Floats]:
        """Of the ideal gas of the same N and T."""
        return self._ideal.heat

    @cached_property
    def energies_of_lost_atoms(self) -> Floats:
        """Of the ideal gas of the same N and T."""
        return self._ideal.energies_of_lost_atoms

    @cached_property
    def _potential_share(self) -> Floats:
        share: Floats = self._sum("thermal_potential") / self._sum("thermal") / 1.5
        return share

    @quantity
    def condensate_radii(self) -> Floats:
        """Where the condensate ends, in the harmonic trap of these frequencies. [m]"""
        return np.expand_dims(np.sqrt(2.0 * self._shaped(self._solution.rise)), -1) * self._thermal_lengths

    @quantity
    def kinetic_energy_per_atom(self) -> Floats:
        """Of the thermal atoms; that of the condensate is left out. [J]"""
        return self.thermal_energy * self._sum("kinetic")

    @quantity
    def trap_energy_per_atom(self) -> Floats:
        """Potential energy in the trap. [J]"""
        return self.thermal_energy * (self._sum("condensate_potential") + self._sum("thermal_potential"))

    @quantity
    def interaction_energy_per_atom(self) -> Floats:
        """(G/2) (n_c^2 + 4 n_c n_th + 2 n_th^2), summed over the trap. [J]"""
        return self.thermal_energy * 0.5 * self.repulsion * self._sum("pairs")

    @quantity
    def energy_per_atom(self) -> Floats:
        """Kinetic and trap energy, and the repulsion among all atoms. [J]"""
        return self.kinetic_energy_per_atom + self.trap_energy_per_atom + self.interaction_energy_per_atom
