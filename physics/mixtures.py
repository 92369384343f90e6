"""Two clouds in one trap, each in equilibrium by itself: how far they meet, what they do to each other.

Each cloud is as it is without the other. For the overlap they are Gaussians of the rms radii of their thermal atoms,
and their collisions are those of classical clouds: estimates where one is degenerate. NaN stands for what is unknown
or does not apply. Clouds, places, lengths and efficiencies may be draws of as many mixtures; all numbers broadcast.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.constants import boltzmann
from physics.equilibria import Equilibrium
from physics.interspecies import (
    PairCollisions,
    coldest_temperature,
    common_temperature,
    coolant_left,
    most_passengers,
)
from physics.miscibility import Mixing, bose_fermi_parameter, mean_field_shift, miscibility_parameter, mixing
from physics.overlap import Spread, overlap_density, overlap_exponent, turned


@dataclass(frozen=True, kw_only=True, eq=False)
class Place:
    """Where the trap of one species is.

    Attributes
    ----------
    minimum : (..., 3). [m]
    axes : (3, 3). Rows: unit vectors to which the radii of its cloud belong.
    """

    minimum: Any = (0.0, 0.0, 0.0)
    axes: Any = ((1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0))


@dataclass(frozen=True, kw_only=True, eq=False)
class Mixture:
    """A coolant and a passenger in one trap.

    Attributes
    ----------
    coolant, passenger : Equilibrium
    places : of both.
    scattering_length : array_like or None. [m] Between the two; None where unknown.
    cooling : array_like or None. alpha = dlnT/dlnN of the coolant evaporating alone, for what is reached in the end.
    """

    coolant: Equilibrium
    passenger: Equilibrium
    places: tuple[Place, Place] = (Place(), Place())
    scattering_length: ArrayLike | None = None
    cooling: ArrayLike | None = None

    @property
    def masses(self) -> tuple[float, float]:
        """[kg]"""
        return float(self.coolant.cloud.mass), float(self.passenger.cloud.mass)

    @property
    def temperatures(self) -> tuple[Floats, Floats]:
        """[K]"""
        first, second = (
            np.asarray(cloud.temperature, dtype=np.float64) for cloud in (self.coolant.cloud, self.passenger.cloud)
        )
        return first, second

    @property
    def all_atoms(self) -> tuple[Floats, Floats]:
        """In all spin states. [1]"""
        first, second = (
            np.asarray(cloud.atoms, dtype=np.float64) * float(cloud.spin_components)
            for cloud in (self.coolant.cloud, self.passenger.cloud)
        )
        return first, second

    @cached_property
    def collisions(self) -> PairCollisions | None:
        """None where the scattering length is not known."""
        if self.scattering_length is None:
            return None
        return PairCollisions(masses=self.masses, scattering_length=self.scattering_length)

    # ---------------------------------------------------------------- where they are

    @property
    def displacement(self) -> Floats:
        """(..., 3) From the passenger's minimum to the coolant's. [m]"""
        first, second = (np.asarray(place.minimum, dtype=np.float64) for place in self.places)
        apart: Floats = first - second
        return apart

    @property
    def distance(self) -> Floats:
        """Between the two minima. [m]"""
        apart: Floats = np.linalg.norm(self.displacement, axis=-1)
        return apart

    @cached_property
    def _spread(self) -> Spread:
        """Mean squares of both clouds together. [m^2]"""
        first, second = (
            turned(np.asarray(solved.thermal_radii) ** 2, place.axes)
            for solved, place in zip((self.coolant, self.passenger), self.places, strict=True)
        )
        xx, yy, zz, xy, xz, yz = (a + b for a, b in zip(first, second, strict=True))
        return xx, yy, zz, xy, xz, yz

    @cached_property
    def _apart(self) -> tuple[Floats, Floats, Floats]:
        apart = self.displacement
        return apart[..., 0], apart[..., 1], apart[..., 2]

    @property
    def overlap_share(self) -> Floats:
        """Overlap over that of the same clouds around one centre. [1]"""
        share: Floats = np.exp(-overlap_exponent(self._spread, self._apart))
        return share

    @cached_property
    def _overlap(self) -> Floats:
        return overlap_density(self._spread, self._apart)

    @property
    def met_density(self) -> Floats:
        """Mean density of the coolant, all spin states, that an atom of the passenger meets. [1/m^3]"""
        return self._overlap * self.all_atoms[0]

    # ---------------------------------------------------------------- collisions and heat

    @cached_property
    def _pair_rate(self) -> Floats:
        pair = self.collisions
        return _NAN if pair is None else pair.collision_rate(self.temperatures, self._overlap)

    @property
    def coolant_collision_rate(self) -> Floats:
        """Collisions of an atom of the coolant with the passenger. [1/s]"""
        return self._pair_rate * self.all_atoms[1]

    @property
    def passenger_collision_rate(self) -> Floats:
        """Collisions of an atom of the passenger with the coolant. [1/s]"""
        return self._pair_rate * self.all_atoms[0]

    @property
    def rethermalisation_collisions(self) -> float:
        """3/xm: collisions with a large coolant until the temperatures have come close by e. [1]"""
        share = 4.0 * self.masses[0] * self.masses[1] / sum(self.masses) ** 2
        return 3.0 / share

    @cached_property
    def relaxation_time(self) -> Floats:
        """In which the difference of the temperatures falls by e; infinite without collisions. [s]"""
        if self.collisions is None:
            return _NAN
        rate = self.collisions.relaxation_rate(self.all_atoms, self.temperatures, self._overlap)
        with np.errstate(divide="ignore"):
            time: Floats = 1.0 / rate
        return time

    @property
    def common_temperature(self) -> Floats:
        """After long contact, of classical clouds. [K]"""
        return common_temperature(self.all_atoms, self.temperatures)

    @property
    def coldest_temperature(self) -> Floats:
        """Of both when the last atom of the coolant is gone. [K]"""
        if self.cooling is None:
            return _NAN
        return coldest_temperature(self.all_atoms, self.common_temperature, self.cooling)

    @property
    def _ratio(self) -> Floats:
        """The passenger's threshold over the common temperature; NaN where it is passed."""
        threshold = np.asarray(self.passenger.temperature_to_threshold) * self.temperatures[1]
        ratio = threshold / self.common_temperature
        return np.where((ratio > 0.0) & (ratio < 1.0), ratio, np.nan)

    @property
    def most_passengers(self) -> Floats:
        """Passengers, in all spin states, that the coolant can bring to the temperature at which this passenger is
        degenerate, before it is used up. [1]"""
        if self.cooling is None:
            return _NAN
        return most_passengers(self.all_atoms[0], self._ratio, self.cooling)

    @property
    def coolant_at_threshold(self) -> Floats:
        """Atoms of the coolant that are left when the passenger becomes degenerate; 0 where they do not suffice. [1]"""
        if self.cooling is None:
            return _NAN
        left: Floats = np.maximum(coolant_left(self.all_atoms, self._ratio, self.cooling), 0.0)
        return left

    # ---------------------------------------------------------------- mean field

    def _shift(self, other: Equilibrium) -> Floats:
        if self.scattering_length is None:
            return _NAN
        density = np.asarray(other.peak_density) * float(other.cloud.spin_components)
        return mean_field_shift(self.masses, self.scattering_length, density)

    @property
    def shift_of_passenger(self) -> Floats:
        """g12 n of a passenger in the densest place of the coolant. [J]"""
        return self._shift(self.coolant)

    @property
    def shift_of_coolant(self) -> Floats:
        """g12 n of an atom of the coolant in the densest place of the passenger. [J]"""
        return self._shift(self.passenger)

    @cached_property
    def _lengths(self) -> tuple[Floats, Floats, Floats] | None:
        """a11, a22 and a12 of two Bose gases of one spin state each. [m]"""
        own = [solved.cloud.scattering_length for solved in (self.coolant, self.passenger)]
        single = all(int(solved.cloud.spin_components) == 1 for solved in (self.coolant, self.passenger))
        both = self.coolant.bosons and self.passenger.bosons
        if not (both and single) or self.scattering_length is None or any(a is None for a in own):
            return None
        first, second, between = (np.asarray(a, dtype=np.float64) for a in (*own, self.scattering_length))
        return first, second, between

    @property
    def miscibility_parameter(self) -> Floats:
        """g12^2/(g11 g22) of two condensates. [1]"""
        lengths = self._lengths
        if lengths is None:
            return _NAN
        stable = (lengths[0] > 0.0) & (lengths[1] > 0.0)
        return np.where(stable, miscibility_parameter(self.masses, lengths), np.nan)

    @property
    def mixing(self) -> Mixing | None:
        """What two condensates of these atoms do; None where it is unknown or one is a fermion. Of one mixture."""
        if self._lengths is None:
            return None
        first, second, between = (float(a) for a in self._lengths)
        return mixing(self.masses, (first, second, between))

    @property
    def bose_fermi_parameter(self) -> Floats:
        """Of a condensate and a Fermi gas of this density: below 1 they are stable together. [1]"""
        boson, fermion = self.coolant, self.passenger
        if not boson.bosons:
            boson, fermion = fermion, boson
        a = boson.cloud.scattering_length
        if fermion.bosons or not boson.bosons or self.scattering_length is None or a is None:
            return _NAN
        repulsive = np.where(np.asarray(a) > 0.0, a, np.nan)
        masses = (float(boson.cloud.mass), float(fermion.cloud.mass))
        return bose_fermi_parameter(masses, (repulsive, self.scattering_length), fermion.peak_density)

    @property
    def relative_shift(self) -> Floats:
        """Largest mean-field shift of one in the other, over its thermal or Fermi energy. [1]"""
        if self.scattering_length is None:
            return _NAN
        largest: Floats = np.maximum(
            np.abs(self.shift_of_coolant) / _energy(self.coolant),
            np.abs(self.shift_of_passenger) / _energy(self.passenger),
        )
        return largest


_NAN = np.array(np.nan)


def _energy(solved: Equilibrium) -> Floats:
    """What a cloud has against being moved: kT, or the energy of its Fermi sea or condensate where that is more."""
    thermal = boltzmann * np.asarray(solved.cloud.temperature, dtype=np.float64)
    mu = np.asarray(solved.chemical_potential)
    energy: Floats = np.maximum(thermal, np.where(np.isfinite(mu), mu, thermal))
    return energy
