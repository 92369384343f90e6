"""Bosons and fermions without interaction in a real trap: levels up to its depth, filled by their statistics.

Valid for hbar w << kT along every axis (EF of fermions), and for a trap deep enough to be in equilibrium at all. The
condensate is the ground level of the oscillator at the bottom.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.equilibria import quantity
from physics.held_densities import HeldBose, HeldFermi
from physics.level_sums import Moments
from physics.real_equilibria import Densities, RealEquilibrium, in_parts
from physics.real_sums import STEPS, ends_between, panels_to_top, turns_above
from physics.smooth_surface import through_grid

_PANEL, _REACH = 8, 42.0


@dataclass(frozen=True, kw_only=True, eq=False)
class RealIdealBose(RealEquilibrium):
    """Levels filled as 1/(e^(e/kT)/z - 1); what they do not hold at z = 1 is condensed."""

    @cached_property
    def _thermal_share(self) -> Floats:
        """N_thermal/N. [1]"""
        share: Floats = np.minimum(1.0, self._most / self._number)
        return share

    @cached_property
    def _alpha(self) -> Floats:
        """-ln z of the thermal atoms, 0 once condensed. [1]"""
        thermal = np.broadcast_to(self._thermal_share >= 1.0, self.cloud.shape)
        alpha = np.zeros(self.cloud.shape)
        if np.any(thermal):
            eta, number = (np.broadcast_to(value, self.cloud.shape)[thermal] for value in (self._eta, self._number))
            alpha[thermal] = self._levels_of_trap.boson_alpha(eta, number)
        return alpha

    @quantity
    def log_fugacity(self) -> Floats:
        return 0.0 - self._alpha  # 0, not -0, once condensed

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """Without the momenta that are not held: 2.594 once condensed at a depth of 5 kT. [1]"""
        alpha, eta = self._flat(self._alpha), self._flat(self._eta)
        found = in_parts(lambda a, e: HeldBose(top=e + a).density(a[:, np.newaxis])[:, 0], alpha, eta)
        return self._shaped(found)

    @quantity
    def condensate_fraction(self) -> Floats:
        return 1.0 - self._thermal_share

    @quantity
    def _condensate_density(self) -> Floats:
        """Density of the condensate at the centre, the ground level of the oscillator there. [1/m^3]"""
        volume: Floats = math.pi**1.5 * self.oscillator_length**3
        return np.where(self.condensate_fraction > 0.0, self.condensate_atoms / volume, 0.0)

    @quantity
    def peak_density(self) -> Floats:
        """At the centre, with the condensate in the ground level of the oscillator there. [1/m^3]"""
        return self.peak_phase_space_density / self._quantum_volume + self._condensate_density

    @cached_property
    def _densities(self) -> Densities:
        """Of the thermal atoms."""
        return ideal_densities(self, HeldBose, -self._flat(self._alpha))

    @quantity
    def mean_density(self) -> Floats:
        """The condensate counts as small against the thermal cloud around it. [1/m^3]"""
        fraction, n0 = self.condensate_fraction, self._condensate_density
        thermal = self.peak_phase_space_density / self._quantum_volume
        overlap = self._over_atoms(self._densities.squared) / self._quantum_volume
        return overlap + fraction * (n0 / math.sqrt(8.0) + 2.0 * thermal)

    @quantity
    def pair_density(self) -> Floats:
        fraction, n0 = self.condensate_fraction, self._condensate_density
        thermal = self.peak_phase_space_density / self._quantum_volume
        pairs = self._over_atoms(self._densities.pairs) / self._quantum_volume
        return pairs + fraction * (0.5 * n0 / math.sqrt(8.0) + 2.0 * thermal)

    @quantity
    def triple_density(self) -> Floats:
        fraction, n0 = self.condensate_fraction, self._condensate_density
        thermal = self.peak_phase_space_density / self._quantum_volume
        triples = self._over_atoms(self._densities.triples) / self._quantum_volume**2
        condensate = n0**2 / math.sqrt(27.0) / 6.0 + 1.5 * n0 / math.sqrt(8.0) * thermal + 3.0 * thermal**2
        return triples + fraction * condensate

    @cached_property
    def _moments(self) -> Moments:
        return self._levels_of_trap.boson_moments(self._flat(self._eta), self._flat(self._alpha))

    @cached_property
    def _potential_share(self) -> Floats:
        thermal = self._shaped(self._densities.thermal_potential) / self._volume_number
        share: Floats = thermal / self._thermal_share / 1.5
        return share

    @quantity
    def energy_per_atom(self) -> Floats:
        """Of the thermal atoms; 0 a condensed one. No interaction in it. [J]"""
        moments = self._moments
        energy: Floats = self.trap.held * self._shaped(moments.energy / moments.number)
        return energy * self._thermal_share


@dataclass(frozen=True, kw_only=True, eq=False)
class RealIdealFermi(RealEquilibrium):
    """Levels filled as 1/(e^(e/kT)/z + 1)."""

    @cached_property
    def _log_z(self) -> Floats:
        eta, number = self._flat(self._eta), self._flat(self._number)
        levels = self._levels_of_trap
        most = float(levels.levels_below(np.ones(1))[0])
        if np.any(number > 0.5 * most):
            return self._shaped(levels.fermi_log_z(eta, number))

        def softened(log_eta: Floats, log_number: Floats) -> Floats:
            """ln(1 + z), which is positive."""
            return np.logaddexp(0.0, levels.fermi_log_z(np.exp(log_eta), np.exp(log_number)))[np.newaxis]

        (soft,) = through_grid(softened, np.log(eta), np.log(number))
        return self._shaped(soft + np.log(-np.expm1(-soft)))

    @quantity
    def log_fugacity(self) -> Floats:
        return self._log_z

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """At the centre of the cloud, of the momenta that are held. [1]"""
        log_z, eta = self._flat(self._log_z), self._flat(self._eta)
        known = np.nan_to_num(log_z)
        found = in_parts(lambda z, e: HeldFermi(top=e - z).density(-z[:, np.newaxis])[:, 0], known, eta)
        return self._shaped(np.where(np.isnan(log_z), np.nan, found))

    @quantity
    def peak_density(self) -> Floats:
        return self.peak_phase_space_density / self._quantum_volume

    @cached_property
    def _densities(self) -> Densities:
        log_z = self._flat(self._log_z)
        return ideal_densities(self, HeldFermi, np.nan_to_num(log_z)).where(~np.isnan(log_z))

    @cached_property
    def _moments(self) -> Moments:
        log_z, levels = self._flat(self._log_z), self._levels_of_trap

        def sums(log_eta: Floats, place: Floats) -> Floats:
            return levels.fermion_moments(np.exp(log_eta), np.sinh(place)).rows

        rows = through_grid(sums, np.log(self._flat(self._eta)), np.arcsinh(np.nan_to_num(log_z)))
        return Moments.of(rows).where(~np.isnan(log_z))

    @cached_property
    def _potential_share(self) -> Floats:
        share: Floats = self._over_atoms(self._densities.thermal_potential) / 1.5
        return share

    @quantity
    def energy_per_atom(self) -> Floats:
        """No interaction in it. [J]"""
        moments = self._moments
        energy: Floats = self.trap.held * self._shaped(moments.energy / moments.number)
        return energy


def ideal_densities(solved: RealEquilibrium, kind: type[HeldBose] | type[HeldFermi], log_z: Floats) -> Densities:
    """Sums over the trap of a gas without interaction, whose thermal atoms have the given ln z; (cells,)."""
    curve = solved.trap.curve

    def sums(eta: Floats, log_z: Floats) -> Floats:
        gas = kind(top=eta - log_z)
        end = np.minimum(eta, np.maximum(log_z, 0.0) + _REACH)
        nothing = np.zeros_like(eta)
        # Energies are counted from the bottom; a Fermi edge may lie anywhere.
        ends = ends_between(turns_above(curve.turns, eta, nothing), nothing, end, STEPS)
        edge = np.clip(log_z[:, np.newaxis] + np.array([-6.0, 0.0, 6.0]), 0.0, end[:, np.newaxis])
        root, width = panels_to_top(np.sqrt(np.sort(np.concatenate([ends, edge], axis=-1), axis=-1)), _PANEL)
        V = root * root
        w = curve.volume(np.minimum(V / eta[:, np.newaxis], 1.0)) * 2.0 * root * width
        v = V - log_z[:, np.newaxis]
        d, fall = gas.density_and_fall(v)
        energy, rise = gas.kinetic(v) + V * d, 0.5 * d + V * fall  # of all atoms there, and how it falls with V
        # Sums over the volumes are done by parts: -d/dV of what is summed.
        values = (2.0 * d * fall, 3.0 * d * d * fall, fall * energy + d * rise,
                  2.0 * d * fall * energy + d * d * rise, V * fall - d)  # fmt: skip
        with np.errstate(invalid="ignore"):
            return np.stack([np.sum(np.where(w > 0.0, w * value, 0.0), axis=-1) for value in values])

    eta = solved._flat(solved._eta)
    if kind is HeldBose:
        found = through_grid(
            lambda x, y: in_parts(sums, np.exp(x), -y * y), np.log(eta), np.sqrt(np.maximum(-log_z, 0.0))
        )
    else:
        found = through_grid(lambda x, y: in_parts(sums, np.exp(x), np.sinh(y)), np.log(eta), np.arcsinh(log_z))
    squared, cubed, pair_energy, triple_energy, potential = found
    return Densities(
        squared=squared,
        pairs=squared,
        triples=cubed,
        pair_energy=pair_energy,
        triple_energy=triple_energy,
        thermal_potential=potential,
    )
