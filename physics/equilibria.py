"""What every equilibrium answers, whatever its model: the scales of the cloud and all that follows from them.

A model is a subclass that adds how atoms share the levels. Every public quantity is computed when first asked for and
is read-only. Its shape broadcasts to that of the cloud: what depends on temperature only does not spread over the atom
numbers of a map. Radii have one more axis, of three. NaN stands where a quantity does not apply.

References
----------
[1] V. Bagnato, D. E. Pritchard, D. Kleppner, Phys. Rev. A 35, 4354 (1987): threshold in a harmonic trap.
[2] S. Grossmann and M. Holthaus, Phys. Lett. A 208, 188 (1995); W. Ketterle and N. J. van Druten, Phys. Rev. A 54, 656
    (1996): its finite-size shift.
[3] S. Giorgini, L. P. Pitaevskii, S. Stringari, Phys. Rev. A 54, R4633 (1996): its shift by interaction.
[4] D. A. Butts and D. S. Rokhsar, Phys. Rev. A 55, 4346 (1997): trapped fermions.
"""

from __future__ import annotations

import functools
import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike

from physics import collisions, equation_of_state
from physics.checks import Floats
from physics.constants import boltzmann, planck, reduced_planck
from physics.models import Model, Replacement
from physics.particles import Statistics
from physics.statistics import zeta

if TYPE_CHECKING:
    from physics.cloud import Cloud

FINITE_SIZE_COEFFICIENT = zeta(2.0) / (2.0 * zeta(3.0) ** (2.0 / 3.0))
"""0.7275: -dTc/Tc0 = 0.7275 (wmean/wbar) N^(-1/3), first order. [2]"""

INTERACTION_COEFFICIENT = 1.3255028
"""-dTc/Tc0 = 1.3255 (a/aho) N^(1/6), first order: an integral of g_1/2 g_3/2 over the trap. [3]"""


def quantity(function: Callable[[Any], ArrayLike]) -> cached_property[Floats]:
    """A quantity, computed once and then kept, read-only; np.float64 for a single cloud."""

    @functools.wraps(function)
    def finished(self: Equilibrium) -> Floats:
        # Far from everything known a scale may leave the range of a float; the answer then says inf or NaN.
        with np.errstate(all="ignore"):
            value = np.asarray(function(self), dtype=np.float64)
        if value.ndim:
            value = value.view()
            value.setflags(write=False)
        result: Floats = value[()]
        return result

    return cached_property(finished)


@dataclass(frozen=True, kw_only=True, eq=False)
class Equilibrium:
    """A cloud in equilibrium. Made by `physics.cloud.equilibrium`.

    Attributes
    ----------
    cloud : Cloud
    model : Model. The one used.
    replaced : Replacement or None. Why the ideal model stands for the one asked for.
    fermi_threshold : float. [1] T/TF that counts as the threshold for fermions.
    efficiency : float or None. [1] Assumed evaporation efficiency -dlnD/dlnN.
    """

    cloud: Cloud
    model: Model
    replaced: Replacement | None = None
    fermi_threshold: float = 0.5
    efficiency: float | None = None

    # Scales. Private ones keep the shape of what they depend on, so that a map computes its rows once.

    @property
    def bosons(self) -> bool:
        return self.cloud.statistics is Statistics.BOSE

    @cached_property
    def _mass(self) -> float:
        return self.cloud.mass

    @cached_property
    def _atoms(self) -> Floats:
        atoms: Floats = self.cloud.atoms
        return atoms

    @cached_property
    def _temperature(self) -> Floats:
        temperature: Floats = self.cloud.temperature
        return temperature

    @cached_property
    def thermal_energy(self) -> Floats:
        """kT. [J]"""
        return boltzmann * self._temperature

    @cached_property
    def _mean_angular(self) -> Floats:
        """wbar. [rad/s]"""
        angular: Floats = 2.0 * math.pi * self.cloud.trap.mean_frequency
        return angular

    @cached_property
    def _level_temperature(self) -> Floats:
        """hbar wbar/k. [K]"""
        return reduced_planck * self._mean_angular / boltzmann

    @cached_property
    def _levels(self) -> Floats:
        """kT/(hbar wbar). [1]"""
        with np.errstate(all="ignore"):
            levels: Floats = self._temperature / self._level_temperature
        return levels

    @cached_property
    def _degeneracy(self) -> Floats:
        """X = N (hbar wbar/kT)^3. [1]"""
        with np.errstate(all="ignore"):
            tau = self._levels
            degeneracy: Floats = self._atoms / (tau * tau * tau)
        return degeneracy

    @cached_property
    def _degeneracy_at_threshold(self) -> float:
        """X at condensation, or at the T/TF that counts as the fermions' threshold. [1]"""
        return zeta(3.0) if self.bosons else 1.0 / (6.0 * self.fermi_threshold**3)

    @cached_property
    def _wavelength(self) -> Floats:
        length: Floats = planck / np.sqrt(2.0 * math.pi * self._mass * self.thermal_energy)
        return length

    @cached_property
    def _quantum_volume(self) -> Floats:
        """lambda^3. [m^3]"""
        volume: Floats = self._wavelength**3
        return volume

    @cached_property
    def oscillator_lengths(self) -> Floats:
        """(..., 3) sqrt(hbar/(m w)). [m]"""
        lengths: Floats = np.sqrt(reduced_planck / (self._mass * self.cloud.trap.angular_frequencies))
        return lengths

    @cached_property
    def _thermal_lengths(self) -> Floats:
        """(..., 3) rms radii sqrt(kT/(m w^2)) of the classical cloud. [m]"""
        speed = np.sqrt(self.thermal_energy / self._mass)
        lengths: Floats = np.expand_dims(speed, -1) / self.cloud.trap.angular_frequencies
        return lengths

    @quantity
    def thermal_wavelength(self) -> Floats:
        """h/sqrt(2 pi m kT). [m]"""
        return self._wavelength

    @quantity
    def mean_frequency(self) -> Floats:
        """Geometric mean of the trap frequencies, ordinary. [Hz]"""
        return self.cloud.trap.mean_frequency

    @quantity
    def oscillator_length(self) -> Floats:
        """aho = sqrt(hbar/(m wbar)). [m]"""
        return np.sqrt(reduced_planck / (self._mass * self._mean_angular))

    # How degenerate the cloud is.

    @quantity
    def classical_phase_space_density(self) -> Floats:
        """X = N (hbar wbar/kT)^3, 1.202 at the threshold of an ideal Bose gas. [1]"""
        return self._degeneracy

    @quantity
    def peak_phase_space_density(self) -> Floats:
        """Largest n lambda^3 of the thermal atoms of one spin state, 2.612 once condensed. [1]"""
        raise NotImplementedError

    @quantity
    def log_fugacity(self) -> Floats:
        """mu/kT, mu counted from the bottom of the trap. [1]"""
        raise NotImplementedError

    @quantity
    def fugacity(self) -> Floats:
        """exp(mu/kT); inf where that passes the largest float: then use log_fugacity. [1]"""
        return np.exp(self.log_fugacity)

    @quantity
    def chemical_potential(self) -> Floats:
        """mu, from the bottom of the trap. [J]"""
        return self.log_fugacity * self.thermal_energy

    @quantity
    def critical_temperature(self) -> Floats:
        """Tc0 = (hbar wbar/k) (N/zeta(3))^(1/3) of ideal bosons in a large harmonic trap. [K] [1]"""
        if not self.bosons:
            return _nowhere()
        return self._level_temperature * np.cbrt(self._atoms / zeta(3.0))

    @quantity
    def finite_size_shift(self) -> Floats:
        """-dTc/Tc0 by the finite size of the trap's levels, first order. [1] [2]"""
        if not self.bosons:
            return _nowhere()
        trap = self.cloud.trap
        shape: Floats = trap.arithmetic_mean_frequency / trap.mean_frequency
        shift: Floats = FINITE_SIZE_COEFFICIENT * shape / np.cbrt(self._atoms)
        return shift

    @quantity
    def interaction_shift(self) -> Floats:
        """-dTc/Tc0 by interaction, first order, 1.3255 (a/aho) N^(1/6); negative for attraction. [1] [3]"""
        if not self.bosons:
            return _nowhere()
        reduced: Floats = self.cloud.length / self.oscillator_length
        root: Floats = self._atoms ** (1.0 / 6.0)
        return INTERACTION_COEFFICIENT * reduced * root

    @quantity
    def critical_temperature_shifted(self) -> Floats:
        """Tc0 with both first-order shifts; without that by interaction where no scattering length is known. [K]

        NaN where the shifts add up to all of Tc0: a few atoms in a long trap, far outside the first order.
        """
        interaction = self.interaction_shift
        remaining = 1.0 - self.finite_size_shift - np.where(np.isnan(interaction), 0.0, interaction)
        return np.where(remaining > 0.0, self.critical_temperature * remaining, np.nan)

    @quantity
    def condensate_fraction(self) -> Floats:
        """Share N0/N of the atoms in the condensate. [1]"""
        return _nowhere()

    @quantity
    def condensate_atoms(self) -> Floats:
        """N0. [1]"""
        return self.condensate_fraction * self._atoms

    @quantity
    def fermi_temperature(self) -> Floats:
        """TF = (hbar wbar/k) (6N)^(1/3), N in one spin state. [K] [4]"""
        if self.bosons:
            return _nowhere()
        return self._level_temperature * np.cbrt(6.0 * self._atoms)

    @quantity
    def fermi_energy(self) -> Floats:
        """EF = k TF. [J]"""
        return boltzmann * self.fermi_temperature

    @quantity
    def fermi_wavenumber(self) -> Floats:
        """kF = sqrt(2 m EF)/hbar. [1/m]"""
        return np.sqrt(2.0 * self._mass * self.fermi_energy) / reduced_planck

    @quantity
    def reduced_temperature(self) -> Floats:
        """T/Tc0 of bosons, T/TF of fermions. [1]"""
        # From X itself, without the two temperatures: one cube root of the map.
        full = zeta(3.0) if self.bosons else 1.0 / 6.0
        return np.cbrt(full / self._degeneracy)

    # What the harmonic trap of the same frequencies would answer, beside the answer in a real one.

    @quantity
    def harmonic_reduced_temperature(self) -> Floats:
        """T/Tc0 or T/TF there; NaN unless the trap is a real one that has frequencies. [1]"""
        return _nowhere()

    @quantity
    def harmonic_peak_phase_space_density(self) -> Floats:
        """The same of the peak phase-space density. [1]"""
        return _nowhere()

    @quantity
    def harmonic_condensate_fraction(self) -> Floats:
        """The same of the condensed fraction; NaN of fermions. [1]"""
        return _nowhere()

    # How far it is to the threshold: condensation of ideal bosons, or fermi_threshold.

    @quantity
    def temperature_to_threshold(self) -> Floats:
        """T_threshold/T at this atom number: 0.5 means twice too hot. [1]"""
        return np.cbrt(self._degeneracy / self._degeneracy_at_threshold)

    @quantity
    def atoms_to_threshold(self) -> Floats:
        """N_threshold/N at this temperature: 8 means eight times too few atoms. [1]"""
        return self._degeneracy_at_threshold / self._degeneracy

    @quantity
    def atoms_left_at_target(self) -> Floats:
        """Share of the atoms left at the threshold after an evaporation of the assumed efficiency. [1]

        1 where the threshold is reached already; NaN without an efficiency.
        """
        if self.efficiency is None:
            return _nowhere()
        share: Floats = (self._degeneracy / self._degeneracy_at_threshold) ** (1.0 / self.efficiency)
        return np.minimum(share, 1.0)

    @quantity
    def temperature_at_target(self) -> Floats:
        """T at the threshold after that evaporation in this trap, T itself where the threshold is reached already; NaN
        without an efficiency. [K]"""
        if self.efficiency is None:
            return _nowhere()
        # D ~ N/T^3 ~ N^-gamma.
        return self._temperature * self.atoms_left_at_target ** ((1.0 + self.efficiency) / 3.0)

    # Sizes and densities.

    @quantity
    def peak_density(self) -> Floats:
        """Density of one spin state, condensate included, where it is largest. [1/m^3]"""
        raise NotImplementedError

    @quantity
    def mean_density(self) -> Floats:
        """Density of one spin state that its atoms meet on average, (integral of n^2)/N. [1/m^3]"""
        raise NotImplementedError

    @quantity
    def thermal_radii(self) -> Floats:
        """(..., 3) rms radii of the thermal atoms. [m]"""
        raise NotImplementedError

    @quantity
    def condensate_radii(self) -> Floats:
        """(..., 3) Radii of a Thomas-Fermi condensate; NaN without one. [m]"""
        return np.full(3, np.nan)

    @quantity
    def energy_per_atom(self) -> Floats:
        """Mean energy, from the bottom of the trap; its model says which interaction is in it. [J]"""
        raise NotImplementedError

    # Collisions.

    @quantity
    def collision_cross_section(self) -> Floats:
        """sigma of an atom with its partners in all spin states, such that n counts those of one state. [m^2]

        The same s-wave length is taken for all pairs; its part is averaged over classical speeds. Dipoles collide
        with those of their own state. 0 for one spin state of fermions without a moment.
        """
        cloud = self.cloud
        sigma: Floats = np.zeros(())
        if self.bosons or cloud.spin_components > 1:
            sigma = collisions.low_energy_cross_section(cloud.statistics, cloud.length, cloud.spin_components)
            sigma = sigma * collisions.thermal_cross_section_factor(self._mass, self._temperature, cloud.length)
        if cloud.dipolar_length is not None:
            sigma = sigma + collisions.dipolar_cross_section(cloud.statistics, np.asarray(cloud.dipolar_length))
        return sigma

    @quantity
    def elastic_collision_rate(self) -> Floats:
        """Mean collisions per atom and time, n(0) sigma vbar/2. [1/s]

        n(0) is the largest thermal density of one spin state, vbar the classical mean speed. Quantum statistics of
        the colliding atoms is in n(0) only. Bosons scatter rather into filled levels, so that near the threshold they
        collide more often still: by 7 % at T/Tc 1.57, 27 % at 1.1, 40 % at 1.
        """
        density, sigma = self.peak_phase_space_density / self._quantum_volume, self.collision_cross_section
        return collisions.mean_collision_rate(density, sigma, collisions.mean_speed(self._mass, self._temperature))

    @quantity
    def mean_free_path(self) -> Floats:
        """1/(sqrt(2) n sigma) where the thermal density is largest; NaN where atoms do not collide. [m]"""
        rate = self.elastic_collision_rate
        speed = collisions.mean_speed(self._mass, self._temperature)
        # The mean rate is n sigma vbar/2, at the same n and sigma.
        return np.where(rate > 0.0, speed / (2.0 * math.sqrt(2.0) * rate), np.nan)

    @quantity
    def truncation(self) -> Floats:
        """Trap depth over kT; NaN where the depth is not given. [1]"""
        depth = self.cloud.trap.depth
        return _nowhere() if depth is None else np.asarray(depth / self.thermal_energy)

    # How far the classical formulas are off.

    @quantity
    def classical_density_error(self) -> Floats:
        """Classical over quantum peak phase-space density of the thermal atoms, minus 1. [1]"""
        return self._degeneracy / self.peak_phase_space_density - 1.0

    @quantity
    def classical_energy_error(self) -> Floats:
        """3 kT over the energy per atom, minus 1. [1]"""
        return 3.0 * self.thermal_energy / self.energy_per_atom - 1.0

    @quantity
    def classical_pressure_error(self) -> Floats:
        """n kT over the pressure of the thermal atoms where they are densest, minus 1. [1]"""
        ratio = equation_of_state.pressure_over_classical(self.cloud.statistics, self.peak_phase_space_density)
        return 1.0 / ratio - 1.0

    @quantity
    def fitted_temperature_error(self) -> Floats:
        """T from a Gaussian fitted to the image of the thermal atoms after a long expansion, over T, minus 1. [1]"""
        statistics = self.cloud.statistics
        log_z = equation_of_state.trapped_log_fugacity(statistics, self._degeneracy)
        return equation_of_state.gaussian_fit_temperature(statistics, log_z) - 1.0


def _nowhere() -> Floats:
    return np.full((), np.nan)
