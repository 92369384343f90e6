"""How fast atoms of a cloud in equilibrium collide, are lost and are heated, and which of these comes first.

Every public quantity is computed when first asked for, is read-only, broadcasts as those of the equilibrium do, and is
NaN where something that it needs is unknown.

References
----------
[1] W. Ketterle and N. J. van Druten, Adv. At. Mol. Opt. Phys. 37, 181 (1996): the ratio of good to bad collisions.
[2] T. Weber, J. Herbig, M. Mark, H.-C. Naegerl, R. Grimm, Phys. Rev. Lett. 91, 123201 (2003): heating by loss of the
    cold atoms of the centre.
[3] E. Timmermans, Phys. Rev. Lett. 87, 240403 (2001): heating by holes in a Fermi sea. Recalled.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from physics import collisions, equation_of_state
from physics.checks import Floats
from physics.constants import boltzmann
from physics.equilibria import Equilibrium, quantity
from physics.light_heating import harmonic_heating_rate, pointing_heating_power
from physics.loss_integrals import energies_of_lost_atoms, two_and_three_body_densities
from physics.losses import (
    FLIPPED_ENERGY,
    Losses,
    noise_heating_rate,
    scaling_ceiling,
    spin_flip_rates,
    unitary_ceiling,
)
from physics.particles import Statistics
from physics.real_equilibria import RealEquilibrium
from physics.statistics import zeta


@dataclass(frozen=True, kw_only=True, eq=False)
class Rates:
    """Rates and lifetimes of a cloud.

    Attributes
    ----------
    equilibrium : Equilibrium
    losses : Losses. What is known of them; its arrays broadcast with the cloud.
    """

    equilibrium: Equilibrium
    losses: Losses = field(default_factory=Losses)

    # Collisions.

    @quantity
    def peak_collision_rate(self) -> Floats:
        """Collisions per time of an atom where the thermal density is largest, n(0) sigma sqrt(2) vbar. [1/s]"""
        solved = self.equilibrium
        density = solved.peak_phase_space_density / solved.thermal_wavelength**3
        speed = collisions.mean_speed(solved.cloud.mass, solved.cloud.temperature)
        return collisions.peak_collision_rate(density, solved.collision_cross_section, speed)

    @quantity
    def rethermalisation_time(self) -> Floats:
        """2.7 collisions of an atom, at the mean rate; NaN where atoms do not collide. [s]"""
        rate = self.equilibrium.elastic_collision_rate
        return np.where(rate > 0.0, collisions.RETHERMALISATION_COLLISIONS / rate, np.nan)

    @quantity
    def hydrodynamic_ratio(self) -> Floats:
        """Mean collision rate over the highest angular trap frequency: above 1 atoms do not cross freely. [1]"""
        fastest: Floats = np.max(self.equilibrium.cloud.trap.angular_frequencies, axis=-1)
        return self.equilibrium.elastic_collision_rate / fastest

    @quantity
    def free_path_ratios(self) -> Floats:
        """(..., 3) Mean free path at the centre over the rms radius along each axis. [1]"""
        return np.expand_dims(self.equilibrium.mean_free_path, -1) / self.equilibrium.thermal_radii

    # Losses, of each atom in the mean.

    @cached_property
    def _densities(self) -> tuple[Floats, Floats]:
        return two_and_three_body_densities(self.equilibrium)

    @property
    def triple_density(self) -> Floats:
        """<n^2> that three-body losses meet, for a K3 of a thermal gas. [1/m^6]"""
        return self._densities[1]

    @quantity
    def background_loss_rate(self) -> Floats:
        """Collisions with the background gas. [1/s]"""
        lifetime = self.losses.background_lifetime
        return _unknown() if lifetime is None else 1.0 / lifetime

    @quantity
    def two_body_loss_rate(self) -> Floats:
        """K2 <n>, in a condensate K2/2. [1/s]"""
        constant = self.losses.two_body
        return _unknown() if constant is None else constant * self._densities[0]

    @quantity
    def three_body_loss_rate(self) -> Floats:
        """K3 <n^2>, in a condensate K3/6. [1/s]"""
        constant = self.losses.three_body
        return _unknown() if constant is None else constant * self._densities[1]

    @quantity
    def spin_flip_loss_rate(self) -> Floats:
        """At the zero of a field: the geometric mean of the least and the largest estimate. [1/s]"""
        force, cloud = self.losses.zero_force, self.equilibrium.cloud
        if force is None:
            return _unknown()
        least, largest = spin_flip_rates(cloud.mass, force, cloud.temperature)
        return np.sqrt(least * largest)

    @quantity
    def total_loss_rate(self) -> Floats:
        """Sum of those loss rates that are known: not less than this. [1/s]"""
        pairs, triples = self.two_body_loss_rate, self.three_body_loss_rate
        return _sum_of_known(self.background_loss_rate, pairs, triples, self.spin_flip_loss_rate)

    @quantity
    def background_lifetime(self) -> Floats:
        """1/e lifetime by collisions with the background gas. [s]"""
        return 1.0 / self.background_loss_rate

    @quantity
    def two_body_lifetime(self) -> Floats:
        """Atoms over their loss by two-body collisions, as the cloud is now. [s]"""
        return 1.0 / self.two_body_loss_rate

    @quantity
    def three_body_lifetime(self) -> Floats:
        """Atoms over their loss by three-body collisions, as the cloud is now. [s]"""
        return 1.0 / self.three_body_loss_rate

    @quantity
    def spin_flip_lifetime(self) -> Floats:
        """Atoms over their loss at the zero of a field, as the cloud is now: an order of magnitude. [s]"""
        return 1.0 / self.spin_flip_loss_rate

    @quantity
    def total_lifetime(self) -> Floats:
        """Atoms over their loss by all that is known: at most this. [s]"""
        return 1.0 / self.total_loss_rate

    # What limits.

    @quantity
    def good_to_bad_ratio(self) -> Floats:
        """Elastic collisions of an atom in its lifetime, both means over the cloud. [1] [1]"""
        return self.equilibrium.elastic_collision_rate / self.total_loss_rate

    @quantity
    def good_to_bad_at_ceiling(self) -> Floats:
        """That ratio with K3 = 201 hbar a^4/m, the most that theory allows near a resonance, or the known one where
        that is larger. [1] [2]

        Between this and `good_to_bad_ratio` without a three-body constant lies the true one, as far as the other losses
        are known. NaN of fermions, of which the loss grows otherwise, and for a <= 0, where Efimov resonances raise it
        further. Lengths not beyond the range of the forces may be lost faster still.
        """
        cloud = self.equilibrium.cloud
        if not self.equilibrium.bosons:
            return _unknown()
        ceiling = scaling_ceiling(cloud.mass, cloud.length) * self.triple_density
        triples = np.fmax(ceiling, self.three_body_loss_rate)
        losses = _sum_of_known(
            self.background_loss_rate, self.two_body_loss_rate, self.spin_flip_loss_rate, triples
        )  # fmt: skip
        return np.where(cloud.length > 0.0, self.equilibrium.elastic_collision_rate / losses, np.nan)

    @quantity
    def loss_per_rethermalisation(self) -> Floats:
        """Share of the atoms lost in one rethermalisation time. [1]"""
        return self.rethermalisation_time * self.total_loss_rate

    # Heating.

    @quantity
    def loss_heating_rate(self) -> Floats:
        """dT/dt of a cloud without a condensate that stays in equilibrium while it loses atoms. [K/s] [2]

        Lost atoms carry less than their share of the energy: (T/4) K2 <n> + (T/3) K3 <n^2> of a classical cloud. From
        a degenerate one, background loss changes T also: it cools bosons and heats fermions [3]. Spin flips at a zero
        take cold atoms: 4/9 of their rate times T, in a quadrupole. NaN with a condensate.
        """
        T = self.equilibrium.cloud.temperature
        two, three = self._energies_of_lost_atoms
        taken = (
            self.background_loss_rate * (self._energy_of_another - self._mean_energy),
            self.two_body_loss_rate * (self._energy_of_another - two),
            self.three_body_loss_rate * (self._energy_of_another - three),
            self.spin_flip_loss_rate * (self._energy_of_another - np.minimum(FLIPPED_ENERGY, self._mean_energy)),
        )
        rate: Floats = T * _sum_of_known(*taken) / self._heat_capacity
        if self.losses.recombination_heat is not None:
            events = self.three_body_loss_rate / 3.0
            rate = rate + events * self.losses.recombination_heat / (boltzmann * self._heat_capacity)
        return rate

    @quantity
    def noise_heating_rate(self) -> Floats:
        """T times the mean over the axes of pi^2 f^2 S(2f), by noise of the light's intensity. [K/s]

        Along an axis that light and coils hold together, times the square of the light's share of the spring constant.
        """
        spectrum = self.losses.intensity_noise
        if spectrum is None:
            return _unknown()
        growth = noise_heating_rate(self.equilibrium.cloud.trap.frequencies, np.expand_dims(spectrum, -1))
        if self.losses.light_shares is not None:
            growth = growth * self.losses.light_shares**2
        rate: Floats = self.equilibrium.cloud.temperature * np.mean(growth, axis=-1)
        return rate

    @quantity
    def pointing_heating_rate(self) -> Floats:
        """Sum over the axes of 4 pi^4 m f^4 S_x(f), over 3k, by a trap that shakes. [K/s]"""
        spectrum, cloud = self.losses.pointing_noise, self.equilibrium.cloud
        if spectrum is None:
            return _unknown()
        power = pointing_heating_power(cloud.mass, cloud.trap.frequencies, np.expand_dims(spectrum, -1))
        return harmonic_heating_rate(np.sum(power, axis=-1))

    @quantity
    def scattering_rate(self) -> Floats:
        """Photons of the trap's light that an atom scatters. [1/s]"""
        rate = self.losses.scattering_rate
        return _unknown() if rate is None else rate

    @quantity
    def light_heating_rate(self) -> Floats:
        """By light that the atoms scatter; NaN where a heating rate is given, which has it in it. [K/s]"""
        losses = self.losses
        known = losses.light_heating is not None and losses.heating is None
        return losses.light_heating if known else _unknown()

    @quantity
    def heating_rate(self) -> Floats:
        """Sum of the heating rates that are known: given, or else by scattered light; by noise; by loss. [K/s]"""
        given = self.light_heating_rate if self.losses.heating is None else self.losses.heating
        return _sum_of_known(given, self.noise_heating_rate, self.pointing_heating_rate, self.loss_heating_rate)

    @cached_property
    def _energies_of_lost_atoms(self) -> Floats:
        solved = self.equilibrium
        if isinstance(solved, RealEquilibrium):
            return solved.energies_of_lost_atoms
        return energies_of_lost_atoms(solved.cloud.statistics, solved.classical_phase_space_density)

    @cached_property
    def _reduced(self) -> tuple[Floats, Floats, Floats]:
        """Energy of an atom and of one more at this T, both in kT, and heat capacity an atom, in k, of the ideal gas
        in the trap: 3, 3 and 3 of a classical one in a harmonic trap; NaN with a condensate."""
        if isinstance(self.equilibrium, RealEquilibrium):
            condensed = np.nan_to_num(self.equilibrium.condensate_atoms) > 0.0
            mean, another, heat = (np.where(condensed, np.nan, each) for each in self.equilibrium.heat)
            return mean, another, heat
        statistics = self.equilibrium.cloud.statistics
        X = self.equilibrium.classical_phase_space_density
        if statistics is Statistics.BOSE:
            X = np.where(zeta(3.0) > X, X, np.nan)
        mean = 3.0 * equation_of_state.energy_over_classical(statistics, X)
        heat = 3.0 * equation_of_state.trapped_heat_capacity_over_classical(statistics, X)
        # E = 3 kT tau^3 g_4, N = tau^3 g_3 at fixed T: dE/dN = 3 kT g_3/g_2; and heat = 12 g_4/g_3 - 9 g_3/g_2.
        another = (4.0 * mean - heat) / 3.0
        return mean, another, heat

    @property
    def _mean_energy(self) -> Floats:
        return self._reduced[0]

    @property
    def _energy_of_another(self) -> Floats:
        return self._reduced[1]

    @property
    def _heat_capacity(self) -> Floats:
        return self._reduced[2]

    # Bounds.

    @quantity
    def three_body_ceiling(self) -> Floats:
        """The lower of the two bounds on K3 of identical bosons near a resonance; NaN where a is unknown, and of
        fermions. [m^6/s]"""
        solved = self.equilibrium
        if not solved.bosons:
            return _unknown()
        scaling = scaling_ceiling(solved.cloud.mass, solved.cloud.length)
        return np.minimum(scaling, unitary_ceiling(solved.cloud.mass, solved.cloud.temperature))


def _unknown() -> Floats:
    return np.full((), np.nan)


def _sum_of_known(*terms: Floats) -> Floats:
    """Sum of the terms that are not NaN; NaN where all are."""
    arrays = np.broadcast_arrays(*terms)
    known = ~np.isnan(np.stack(arrays))
    total: Floats = np.where(known.any(axis=0), np.where(known, arrays, 0.0).sum(axis=0), np.nan)
    return total
