"""Bosons in a harmonic trap in the Hartree-Fock mean field: all atoms repel one another, above and below threshold.

The condensate is in the Thomas-Fermi limit and thermal atoms in local density; both feel the mean field of all. A
condensate appears where its local equation first has a solution, so that repulsion lowers the onset below Tc0. Valid
for hbar w << kT, N0 a >> aho and a weakly interacting gas, a << lambda; correlations between atoms near the threshold
are not in it.

References
----------
[1] S. Giorgini, L. P. Pitaevskii, S. Stringari, Phys. Rev. A 54, R4633 (1996); J. Low Temp. Phys. 109, 309 (1997): the
    mean field in a trap, its threshold and thermodynamics.
[2] F. Dalfovo, S. Giorgini, L. P. Pitaevskii, S. Stringari, Rev. Mod. Phys. 71, 463 (1999), section V: review.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.equilibria import Equilibrium, quantity
from physics.hartree_fock_integrals import (
    CELLS_AT_ONCE,
    Edge,
    Shells,
    condensed_centre,
    inner_shells,
    thermal_centre,
    thermal_shells,
)
from physics.statistics import bose


@dataclass(frozen=True, kw_only=True, eq=False)
class _Sums:
    """<h> over the trap, (cells,) each: densities times lambda^3, energies in kT. [1]"""

    condensate: Floats
    thermal: Floats
    condensate_potential: Floats
    thermal_potential: Floats
    pressure: Floats  # of the thermal atoms, g_5/2
    squared: Floats  # (n_c + n_t)^2
    pairs: Floats  # n_c^2 + 4 n_c n_t + 2 n_t^2: atoms of a condensate do not bunch
    triples: Floats  # n_c^3 + 9 n_c^2 n_t + 18 n_c n_t^2 + 6 n_t^3


@dataclass(frozen=True, kw_only=True, eq=False)
class HartreeFock(Equilibrium):
    """alpha at the centre of the cloud solves N (hbar wbar/kT)^3 = <n lambda^3>."""

    def _flat(self, value: Floats) -> Floats:
        """A value that broadcasts to the cloud's shape, one element a cell."""
        flat: Floats = np.broadcast_to(value, self.cloud.shape).reshape(-1)
        return flat

    def _shaped(self, value: Floats) -> Floats:
        shaped: Floats = value.reshape(self.cloud.shape)
        return shaped

    def _parts(self) -> Iterator[slice]:
        for start in range(0, self._edge.repulsion.size, CELLS_AT_ONCE):
            yield slice(start, start + CELLS_AT_ONCE)

    @cached_property
    def repulsion(self) -> Floats:
        """g = 2a/lambda, the one parameter of the local densities. [1]"""
        repulsion: Floats = 2.0 * self.cloud.length / self._wavelength
        return repulsion

    @cached_property
    def _edge(self) -> Edge:
        return Edge.of(self._flat(self.repulsion))

    @cached_property
    def _solution(self) -> tuple[Floats, NDArray[np.bool_]]:
        """alpha at the centre, and whether there is a condensate; flat."""
        degeneracy = self._flat(self._degeneracy)
        centre, condensed = np.empty_like(degeneracy), np.empty(degeneracy.shape, np.bool_)
        with np.errstate(all="ignore"):
            for part in self._parts():
                edge, X = self._edge.at(part), degeneracy[part]
                outer = edge.outer_shells()
                without = outer.total(outer.thermal)
                below = without < X
                alpha = np.empty_like(X)
                if np.any(below):
                    alpha[below] = condensed_centre(edge.at(below), X[below], without[below])
                if not np.all(below):
                    alpha[~below] = thermal_centre(edge.at(~below), X[~below])
                centre[part], condensed[part] = alpha, below
        return centre, condensed

    def _shells(self, cells: NDArray[np.bool_] | slice) -> Iterator[tuple[NDArray[np.int_], Shells]]:
        """Nodes over the trap of some cells, with the numbers of these; of condensed ones there are two sets."""
        centre, condensed = self._solution
        numbers = np.arange(centre.size)[cells]
        below, above = numbers[condensed[numbers]], numbers[~condensed[numbers]]
        if below.size:
            edge = self._edge.at(below)
            yield below, inner_shells(edge, centre[below])
            yield below, edge.outer_shells().lifted(edge.rise(centre[below]))
        if above.size:
            yield above, thermal_shells(self._edge.repulsion[above], centre[above])

    @cached_property
    def _sums(self) -> _Sums:
        totals = np.zeros((len(fields(_Sums)), self._edge.repulsion.size))
        with np.errstate(all="ignore"):
            for part in self._parts():
                for numbers, shells in self._shells(part):
                    u, c, t = shells.potential, shells.condensate, shells.thermal
                    squared, pairs = (c + t) ** 2, c * c + 4.0 * c * t + 2.0 * t * t
                    triples = c**3 + 9.0 * c * t * (c + 2.0 * t) + 6.0 * t**3
                    values = (c, t, u * c, u * t, bose(2.5, shells.alpha), squared, pairs, triples)
                    for total, value in zip(totals, values, strict=True):
                        total[numbers] += shells.total(value)
        return _Sums(**{field.name: total for field, total in zip(fields(_Sums), totals, strict=True)})

    @quantity
    def log_fugacity(self) -> Floats:
        """mu/kT, mu from the bottom of the trap. [1]"""
        centre, condensed = self._solution
        mean_field = 2.0 * self._edge.repulsion * bose(1.5, centre)
        return self._shaped(mean_field + np.where(condensed, centre, -centre))

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """At the centre, or at the edge of the condensate, which thermal atoms avoid. [1]"""
        centre, condensed = self._solution
        return self._shaped(bose(1.5, np.where(condensed, self._edge.outside, centre)))

    @quantity
    def condensate_fraction(self) -> Floats:
        return np.minimum(self._shaped(self._sums.condensate) / self._degeneracy, 1.0)

    @quantity
    def peak_density(self) -> Floats:
        """At the centre. [1/m^3]"""
        centre, condensed = self._solution
        density = bose(1.5, centre) + np.where(condensed, centre / self._edge.repulsion, 0.0)
        return self._shaped(density) / self._quantum_volume

    @quantity
    def edge_density_jump(self) -> Floats:
        """Density just inside the condensate's edge over that just outside, minus 1: an artefact of the mean field that
        vanishes as 4 a/lambda. [1]"""
        edge = self._edge
        inside = edge.inside / edge.repulsion + bose(1.5, edge.inside)
        return self._shaped(inside / bose(1.5, edge.outside) - 1.0)

    @quantity
    def mean_density(self) -> Floats:
        """(integral of n^2)/N, n the sum of both densities. [1/m^3]"""
        return self._shaped(self._sums.squared) / self._degeneracy / self._quantum_volume

    @quantity
    def pair_density(self) -> Floats:
        """(integral of n_c^2/2 + 2 n_c n_th + n_th^2)/N: what losses with a thermal two-body constant meet. [1/m^3]"""
        return 0.5 * self._shaped(self._sums.pairs) / self._degeneracy / self._quantum_volume

    @quantity
    def triple_density(self) -> Floats:
        """(integral of n_c^3/6 + 1.5 n_c^2 n_th + 3 n_c n_th^2 + n_th^3)/N, the same of three-body losses. [1/m^6]"""
        return self._shaped(self._sums.triples) / 6.0 / self._degeneracy / self._quantum_volume**2

    @quantity
    def thermal_radii(self) -> Floats:
        share = self._shaped(self._sums.thermal_potential / self._sums.thermal) / 1.5
        return np.expand_dims(np.sqrt(share), -1) * self._thermal_lengths

    @quantity
    def condensate_radii(self) -> Floats:
        """Where the condensate ends: sqrt(2 (mu - y_min kT)/m)/w_i, less than in the Thomas-Fermi limit. [m]"""
        centre, condensed = self._solution
        height = np.where(condensed, self._edge.rise(centre), np.nan)
        return np.expand_dims(np.sqrt(2.0 * self._shaped(height)), -1) * self._thermal_lengths

    def _energy(self, sums: Floats) -> Floats:
        energy: Floats = self.thermal_energy * self._shaped(sums) / self._degeneracy
        return energy

    @quantity
    def kinetic_energy_per_atom(self) -> Floats:
        """Of the thermal atoms; that of the condensate is left out. [J]"""
        return self._energy(1.5 * self._sums.pressure)

    @quantity
    def trap_energy_per_atom(self) -> Floats:
        """Potential energy in the trap. [J]"""
        return self._energy(self._sums.condensate_potential + self._sums.thermal_potential)

    @quantity
    def interaction_energy_per_atom(self) -> Floats:
        """(G/2) (n_c^2 + 4 n_c n_th + 2 n_th^2), summed over the trap. [J]"""
        return self._energy(0.5 * self._edge.repulsion * self._sums.pairs)

    @quantity
    def energy_per_atom(self) -> Floats:
        """Kinetic and trap energy, and the repulsion among all atoms. [J]"""
        return self.kinetic_energy_per_atom + self.trap_energy_per_atom + self.interaction_energy_per_atom
