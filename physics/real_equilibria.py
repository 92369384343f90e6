"""What every model answers for a cloud in a real trap: of any volume curve, and with nothing above its depth.

Large clouds: local density, and sums over levels that lie close together. Atoms of more energy than the trap holds are
gone, so that a Bose gas saturates with fewer atoms than in the harmonic trap of the same frequencies, or with many more
where the trap is wide, and only so many fermions find a place. NaN stands where a cloud does not fit into the trap.

`classical_phase_space_density` stays N (hbar wbar/kT)^3, the harmonic one, and so do first-order shifts, the
oscillator's ground level and the radii, which a volume curve does not know: rms radii are those of a harmonic cloud of
the same mean potential energy, radii of condensates those at which the harmonic potential reaches mu. All these are NaN
without frequencies.

References
----------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996): occupation of a trap of finite depth.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from physics import collisions, equation_of_state
from physics.checks import Floats
from physics.constants import boltzmann
from physics.equilibria import Equilibrium, quantity
from physics.level_sums import LevelSums, Moments
from physics.real_sums import STEPS, ends_between, panels_to_top, turns_above
from physics.real_trap import RealTrap
from physics.smooth_surface import through_grid
from physics.truncated_boltzmann import incomplete_gamma

_REACH, _PANEL = 42.0, 8
CELLS_AT_ONCE = 256
"""Clouds whose densities are summed at once, to bound the memory."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Densities:
    """Sums of densities over the trap: with d = n lambda^3, integrals over dw, the volume over that at the highest
    energy, (cells,) each. [1]

    squared : of the square of all atoms' density
    pairs, triples : of n_c^2 + 4 n_c n_t + 2 n_t^2 over 2, of n_c^3 + 9 n_c^2 n_t + 18 n_c n_t^2 + 6 n_t^3 over 6:
        atoms of a condensate do not bunch
    pair_energy, triple_energy : of n_t^2 and n_t^3 times the mean energy in kT of a thermal atom there, from the
        bottom; NaN with a condensate
    thermal_potential : of n_t times the potential of the trap in kT
    """

    squared: Floats
    pairs: Floats
    triples: Floats
    pair_energy: Floats
    triple_energy: Floats
    thermal_potential: Floats

    def where(self, known: NDArray[np.bool_]) -> Densities:
        """The same, NaN elsewhere."""
        return Densities(**{name: np.where(known, value, np.nan) for name, value in vars(self).items()})


@dataclass(frozen=True, kw_only=True, eq=False)
class ClassicalCloud:
    """Sums over a classical gas cut at the highest energy, z = 1, in the shape of eta. [1]

    number, squared : integrals of n lambda^3 and of its square over dw
    energy : of an atom, in kT
    centre : n lambda^3 at the centre
    """

    number: Floats
    energy: Floats
    centre: Floats
    squared: Floats


def classical_cloud(trap: RealTrap, eta: Floats) -> ClassicalCloud:
    """A classical gas in a trap, for a flat array of the highest energy over kT."""
    levels, energy = trap.levels.classical(eta)

    def squared(eta: Floats) -> Floats:
        nothing = np.zeros_like(eta)
        end = np.minimum(eta, _REACH)
        ends = ends_between(turns_above(trap.curve.turns, eta, nothing), nothing, end, STEPS)
        root, width = panels_to_top(np.sqrt(ends), _PANEL)
        # Rounding must not lead beyond the highest energy, where nothing is defined.
        V = root * root
        y = np.maximum(eta[:, np.newaxis] - V, 0.0)
        # By parts: the density e^-V P(3/2, y) falls by e^-V P(1/2, y).
        fall = 2.0 * np.exp(-2.0 * V) * incomplete_gamma(1.5, y) * incomplete_gamma(0.5, y)
        w = trap.curve.volume(np.minimum(V / eta[:, np.newaxis], 1.0))
        total: Floats = np.sum(w * fall * 2.0 * root * width, axis=-1)
        return total

    return ClassicalCloud(
        number=levels * eta**1.5 / math.sqrt(math.pi),
        energy=eta * energy,
        centre=incomplete_gamma(1.5, eta),
        squared=through_grid(lambda x, _: in_parts(squared, np.exp(x))[np.newaxis], np.log(eta), np.zeros_like(eta))[0],
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class RealEquilibrium(Equilibrium):
    """A cloud in a real trap. Made by `physics.cloud.equilibrium`."""

    @cached_property
    def trap(self) -> RealTrap:
        trap = self.cloud.trap
        assert isinstance(trap, RealTrap)
        return trap

    @cached_property
    def harmonic(self) -> Equilibrium:
        """The same cloud, by the same model, in the harmonic trap of the same frequencies, which has no end.

        Raises
        ------
        ValueError : for a trap without frequencies.
        """
        from physics.cloud import equilibrium

        cloud = replace(self.cloud, trap=self.trap.harmonic_trap)
        return equilibrium(cloud, self.model, fermi_threshold=self.fermi_threshold, efficiency=self.efficiency)

    @quantity
    def harmonic_reduced_temperature(self) -> Floats:
        return self.harmonic.reduced_temperature if self.trap.has_frequencies else np.full((), np.nan)

    @quantity
    def harmonic_peak_phase_space_density(self) -> Floats:
        return self.harmonic.peak_phase_space_density if self.trap.has_frequencies else np.full((), np.nan)

    @quantity
    def harmonic_condensate_fraction(self) -> Floats:
        return self.harmonic.condensate_fraction if self.trap.has_frequencies else np.full((), np.nan)

    # Scales, in the shape of what they depend on.

    @cached_property
    def _levels_of_trap(self) -> LevelSums:
        return self.trap.levels

    @cached_property
    def _eta(self) -> Floats:
        """Highest energy that is held over kT. [1]"""
        eta: Floats = np.asarray(self.trap.held / self.thermal_energy)
        return eta

    @cached_property
    def _number(self) -> Floats:
        """N in units of the trap's levels. [1]"""
        number: Floats = np.asarray(self._atoms / self.trap.level_unit)
        return number

    @cached_property
    def _volume_number(self) -> Floats:
        """N lambda^3 over the volume at the highest energy. [1]"""
        number: Floats = np.asarray(self._atoms * self._quantum_volume / self.trap.volume)
        return number

    def _flat(self, value: Floats) -> Floats:
        """A value that broadcasts to the cloud's shape, one element a cell."""
        flat: Floats = np.broadcast_to(value, self.cloud.shape).reshape(-1)
        return flat

    def _shaped(self, value: Floats) -> Floats:
        shaped: Floats = value.reshape(self.cloud.shape)
        return shaped

    def _by_itself(self, function: Callable[[Floats], Floats], value: Floats) -> Floats:
        """A function of flat arrays, of a value in its own shape, which may be smaller than that of the cloud."""
        found: Floats = function(value.reshape(-1)).reshape(value.shape)
        return found

    @cached_property
    def _classical(self) -> ClassicalCloud:
        """Of a classical gas of this temperature in the same trap."""
        eta = self._eta.reshape(-1)
        found = classical_cloud(self.trap, eta)
        shaped = {name: value.reshape(self._eta.shape) for name, value in vars(found).items()}
        return ClassicalCloud(**shaped)

    # Thresholds.

    @cached_property
    def _most(self) -> Floats:
        """Atoms at which the threshold is reached at this temperature, in units of the levels; NaN where there is no
        such number. [1]"""
        levels = self._levels_of_trap
        if self.bosons:
            return self._by_itself(levels.saturated, self._eta)
        return self._by_itself(levels.levels_below, 1.0 / (self.fermi_threshold * self._eta))

    @quantity
    def atoms_over_most(self) -> Floats:
        """N over the most that the trap holds: fermions one a level, bosons until mu of a repulsive condensate is the
        depth. 0 where there is no limit. [1]"""
        if self.bosons:
            return np.zeros(())
        return self._number / self._levels_of_trap.levels_below(np.ones(()))

    @quantity
    def critical_temperature(self) -> Floats:
        """T at which the trap, cut at its depth, saturates with N ideal bosons. [K] [1]"""
        if not self.bosons:
            return np.full((), np.nan)
        eta = self._by_itself(self._levels_of_trap.eta_at_saturation, self._number)
        critical: Floats = self.trap.held / (boltzmann * eta)
        return critical

    @quantity
    def fermi_temperature(self) -> Floats:
        """EF/k, EF the energy below which the trap has N levels; NaN where it has fewer. [K]"""
        if self.bosons:
            return np.full((), np.nan)
        x = self._by_itself(self._levels_of_trap.energy_of_levels, self._number)
        energy: Floats = self.trap.held * x
        return energy / boltzmann

    @quantity
    def reduced_temperature(self) -> Floats:
        """T/Tc0 of bosons, T/TF of fermions. [1]"""
        return self._temperature / (self.critical_temperature if self.bosons else self.fermi_temperature)

    @quantity
    def temperature_to_threshold(self) -> Floats:
        return (1.0 if self.bosons else self.fermi_threshold) / self.reduced_temperature

    @quantity
    def atoms_to_threshold(self) -> Floats:
        """N_threshold/N at this temperature; NaN where the trap has too few levels for so many fermions. [1]"""
        return self._most / self._number

    @quantity
    def atoms_left_at_target(self) -> Floats:
        """(N/N_threshold)^(1/efficiency): the classical phase-space density goes as N at fixed T. [1]"""
        if self.efficiency is None:
            return np.full((), np.nan)
        return np.minimum(self.atoms_to_threshold ** (-1.0 / self.efficiency), 1.0)

    @quantity
    def temperature_at_target(self) -> Floats:
        """T of this trap's threshold for the atoms that are left: D does not go as N/T^3 here. [K]"""
        if self.efficiency is None:
            return np.full((), np.nan)
        left = self.atoms_left_at_target
        if self.bosons:
            eta = self._by_itself(self._levels_of_trap.eta_at_saturation, np.asarray(left * self._number))
            there = self.trap.held / (boltzmann * eta)
        else:
            x = self._by_itself(self._levels_of_trap.energy_of_levels, np.asarray(left * self._number))
            there = self.fermi_threshold * self.trap.held * x / boltzmann
        return np.where(left < 1.0, there, self._temperature * left)

    # Densities, from the sums of each model.

    @cached_property
    def _densities(self) -> Densities:
        raise NotImplementedError

    def _over_atoms(self, sums: Floats) -> Floats:
        """A sum over the trap, an atom. [1]"""
        mean: Floats = self._shaped(sums) / self._volume_number
        return mean

    @quantity
    def mean_density(self) -> Floats:
        """(integral of n^2)/N, n the sum of both densities. [1/m^3]"""
        return self._over_atoms(self._densities.squared) / self._quantum_volume

    @quantity
    def pair_density(self) -> Floats:
        """(integral of n_c^2/2 + 2 n_c n_th + n_th^2)/N: what losses with a thermal two-body constant meet. [1/m^3]"""
        return self._over_atoms(self._densities.pairs) / self._quantum_volume

    @quantity
    def triple_density(self) -> Floats:
        """(integral of n_c^3/6 + 1.5 n_c^2 n_th + 3 n_c n_th^2 + n_th^3)/N, the same of three-body losses. [1/m^6]"""
        return self._over_atoms(self._densities.triples) / self._quantum_volume**2

    @cached_property
    def energies_of_lost_atoms(self) -> Floats:
        """(2, ...) Mean energy of an atom that two- and three-body collisions take from a thermal cloud, in kT. [1]"""
        sums = self._densities
        energies = sums.pair_energy / sums.pairs, sums.triple_energy / sums.triples
        return np.stack([self._shaped(energy) for energy in energies])

    @cached_property
    def _moments(self) -> Moments:
        """Sums over the levels, flat; of thermal clouds."""
        raise NotImplementedError

    @cached_property
    def heat(self) -> tuple[Floats, Floats, Floats]:
        """Energy of an atom and of one more at this T, both in kT, and heat capacity an atom, in k; of thermal clouds.
        3, 3 and 3 of a classical one in a deep harmonic trap."""
        moments, eta = self._moments, self._flat(self._eta)
        mean = eta * moments.energy / moments.number
        return (
            self._shaped(mean),
            self._shaped(eta * moments.energy_of_another),
            self._shaped(moments.heat_capacity(eta)),
        )

    @cached_property
    def _potential_share(self) -> Floats:
        """<V>/(3/2 kT) of a thermal atom. [1]"""
        raise NotImplementedError

    @quantity
    def thermal_radii(self) -> Floats:
        """(..., 3) rms radii of a harmonic cloud of the same mean potential energy. [m]"""
        scale: Floats = np.expand_dims(np.sqrt(self._potential_share), -1)
        return self._thermal_lengths * scale

    # Collisions.

    @quantity
    def elastic_collision_rate(self) -> Floats:
        """Mean collisions per atom and time. [1/s]

        n(0) sigma sqrt(2) vbar times the mean density over n(0) of a classical cloud in the trap: 1/sqrt(8) in a deep
        harmonic one. Quantum statistics of the colliding atoms is in n(0) only.
        """
        classical = self._classical
        share: Floats = math.sqrt(8.0) * classical.squared / (classical.number * classical.centre)
        return share * self._harmonic_rate

    @cached_property
    def _harmonic_rate(self) -> Floats:
        density, sigma = self.peak_phase_space_density / self._quantum_volume, self.collision_cross_section
        return collisions.mean_collision_rate(density, sigma, collisions.mean_speed(self._mass, self._temperature))

    @quantity
    def mean_free_path(self) -> Floats:
        rate, speed = self._harmonic_rate, collisions.mean_speed(self._mass, self._temperature)
        return np.where(rate > 0.0, speed / (2.0 * math.sqrt(2.0) * rate), np.nan)

    # How far the classical formulas, in the same trap, are off.

    @quantity
    def classical_peak(self) -> Floats:
        """n(0) lambda^3 of a classical cloud of N atoms in this trap. [1]"""
        classical = self._classical
        return self._volume_number / classical.number * classical.centre

    @quantity
    def classical_density_error(self) -> Floats:
        return self.classical_peak / self.peak_phase_space_density - 1.0

    @quantity
    def classical_energy_error(self) -> Floats:
        """Energy of a classical atom in this trap over the energy per atom, minus 1. [1]"""
        return self.thermal_energy * self._classical.energy / self.energy_per_atom - 1.0

    @quantity
    def fitted_temperature_error(self) -> Floats:
        """As in a harmonic trap, of the same fugacity of the thermal atoms. [1]"""
        statistics = self.cloud.statistics
        log_z = np.asarray(self.log_fugacity)
        log_z = np.minimum(log_z, 0.0) if self.bosons else log_z
        return equation_of_state.gaussian_fit_temperature(statistics, log_z) - 1.0


def in_parts(function: Callable[..., Floats], *columns: Floats) -> Floats:
    """A function of flat arrays, over any number of cells; its answers run along the last axis."""
    size = columns[0].size
    parts = [
        function(*(column[start : start + CELLS_AT_ONCE] for column in columns))
        for start in range(0, max(size, 1), CELLS_AT_ONCE)
    ]
    found: Floats = np.concatenate(parts, axis=-1)
    return found
