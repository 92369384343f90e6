"""Two clouds in one trap, each in equilibrium by itself: how far they meet, what they do to each other.

Each cloud is as it is without the other. For the overlap they are Gaussians of the rms radii of their thermal atoms,
and their collisions are those of classical clouds: estimates where one is degenerate. NaN stands for what is unknown
or does not apply.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

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
from physics.overlap import Spread, overlap_density, overlap_exponent


@dataclass(frozen=True, kw_only=True, eq=False)
class Place:
    """Where the trap of one species is.

    Attributes
    ----------
    minimum : (3,). [m]
    axes : (3, 3). Rows: unit vectors to which the radii of its cloud belong.
    """

    minimum: Any = (0.0, 0.0, 0.0)
    axes: Any = ((1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0))


@dataclass(frozen=True, kw_only=True, eq=False)
class Mixture:
    """A coolant and a passenger in one trap, each a single cloud.

    Attributes
    ----------
    coolant, passenger : Equilibrium
    places : of both.
    scattering_length : float or None. [m] Between the two; None where unknown.
    cooling : float or None. alpha = dlnT/dlnN of the coolant evaporating alone, for what is reached in the end.
    """

    coolant: Equilibrium
    passenger: Equilibrium
    places: tuple[Place, Place] = (Place(), Place())
    scattering_length: float | None = None
    cooling: float | None = None

    @property
    def masses(self) -> tuple[float, float]:
        """[kg]"""
        return float(self.coolant.cloud.mass), float(self.passenger.cloud.mass)

    @property
    def temperatures(self) -> tuple[float, float]:
        """[K]"""
        return float(self.coolant.cloud.temperature), float(self.passenger.cloud.temperature)

    @property
    def all_atoms(self) -> tuple[float, float]:
        """In all spin states. [1]"""
        first, second = (
            float(cloud.atoms) * float(cloud.spin_components) for cloud in (self.coolant.cloud, self.passenger.cloud)
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
        """(3,) From the passenger's minimum to the coolant's. [m]"""
        first, second = (np.asarray(place.minimum, dtype=np.float64) for place in self.places)
        apart: Floats = first - second
        return apart

    @property
    def distance(self) -> float:
        """Between the two minima. [m]"""
        return float(np.linalg.norm(self.displacement))

    @cached_property
    def _spread(self) -> Spread:
        total = np.zeros((3, 3))
        for solved, place in zip((self.coolant, self.passenger), self.places, strict=True):
            axes = np.asarray(place.axes, dtype=np.float64)
            total = total + axes.T @ np.diag(np.asarray(solved.thermal_radii) ** 2) @ axes
        return total[0, 0], total[1, 1], total[2, 2], total[0, 1], total[0, 2], total[1, 2]

    @cached_property
    def overlap_share(self) -> float:
        """Overlap over that of the same clouds around one centre. [1]"""
        return float(np.exp(-overlap_exponent(self._spread, self.displacement.tolist())))

    @cached_property
    def _overlap(self) -> float:
        return float(overlap_density(self._spread, self.displacement.tolist()))

    @property
    def met_density(self) -> float:
        """Mean density of the coolant, all spin states, that an atom of the passenger meets. [1/m^3]"""
        return self._overlap * self.all_atoms[0]

    # ---------------------------------------------------------------- collisions and heat

    @cached_property
    def _pair_rate(self) -> float:
        pair = self.collisions
        return math.nan if pair is None else float(pair.collision_rate(self.temperatures, self._overlap))

    @property
    def coolant_collision_rate(self) -> float:
        """Collisions of an atom of the coolant with the passenger. [1/s]"""
        return self._pair_rate * self.all_atoms[1]

    @property
    def passenger_collision_rate(self) -> float:
        """Collisions of an atom of the passenger with the coolant. [1/s]"""
        return self._pair_rate * self.all_atoms[0]

    @property
    def rethermalisation_collisions(self) -> float:
        """3/xm: collisions with a large coolant until the temperatures have come close by e. [1]"""
        share = 4.0 * self.masses[0] * self.masses[1] / sum(self.masses) ** 2
        return 3.0 / share

    @cached_property
    def relaxation_time(self) -> float:
        """In which the difference of the temperatures falls by e; infinite without collisions. [s]"""
        if self.collisions is None:
            return math.nan
        rate = float(self.collisions.relaxation_rate(self.all_atoms, self.temperatures, self._overlap))
        return 1.0 / rate if rate > 0.0 else math.inf

    @property
    def common_temperature(self) -> float:
        """After long contact, of classical clouds. [K]"""
        return float(common_temperature(self.all_atoms, self.temperatures))

    @property
    def coldest_temperature(self) -> float:
        """Of both when the last atom of the coolant is gone. [K]"""
        if self.cooling is None:
            return math.nan
        return float(coldest_temperature(self.all_atoms, self.common_temperature, self.cooling))

    @property
    def _ratio(self) -> float:
        """The passenger's threshold over the common temperature; NaN where it is passed."""
        threshold = float(self.passenger.temperature_to_threshold) * self.temperatures[1]
        ratio = threshold / self.common_temperature
        return ratio if 0.0 < ratio < 1.0 else math.nan

    @property
    def most_passengers(self) -> float:
        """Passengers, in all spin states, that the coolant can bring to the temperature at which this passenger is
        degenerate, before it is used up. [1]"""
        if self.cooling is None:
            return math.nan
        return float(most_passengers(self.all_atoms[0], self._ratio, self.cooling))

    @property
    def coolant_at_threshold(self) -> float:
        """Atoms of the coolant that are left when the passenger becomes degenerate; 0 where they do not suffice. [1]"""
        if self.cooling is None:
            return math.nan
        left = float(coolant_left(self.all_atoms, self._ratio, self.cooling))
        return left if math.isnan(left) else max(0.0, left)

    # ---------------------------------------------------------------- mean field

    def _shift(self, other: Equilibrium) -> float:
        if self.scattering_length is None:
            return math.nan
        density = float(other.peak_density) * float(other.cloud.spin_components)
        return float(mean_field_shift(self.masses, self.scattering_length, density))

    @property
    def shift_of_passenger(self) -> float:
        """g12 n of a passenger in the densest place of the coolant. [J]"""
        return self._shift(self.coolant)

    @property
    def shift_of_coolant(self) -> float:
        """g12 n of an atom of the coolant in the densest place of the passenger. [J]"""
        return self._shift(self.passenger)

    @cached_property
    def _lengths(self) -> tuple[float, float, float] | None:
        """a11, a22 and a12 of two Bose gases of one spin state each. [m]"""
        own = [solved.cloud.scattering_length for solved in (self.coolant, self.passenger)]
        single = all(int(solved.cloud.spin_components) == 1 for solved in (self.coolant, self.passenger))
        both = self.coolant.bosons and self.passenger.bosons
        if not (both and single) or self.scattering_length is None or any(a is None for a in own):
            return None
        return float(own[0]), float(own[1]), self.scattering_length

    @property
    def miscibility_parameter(self) -> float:
        """g12^2/(g11 g22) of two condensates. [1]"""
        lengths = self._lengths
        if lengths is None or not (lengths[0] > 0.0 and lengths[1] > 0.0):
            return math.nan
        return float(miscibility_parameter(self.masses, lengths))

    @property
    def mixing(self) -> Mixing | None:
        """What two condensates of these atoms do; None where it is unknown or one is a fermion."""
        return None if self._lengths is None else mixing(self.masses, self._lengths)

    @property
    def bose_fermi_parameter(self) -> float:
        """Of a condensate and a Fermi gas of this density: below 1 they are stable together. [1]"""
        boson, fermion = self.coolant, self.passenger
        if not boson.bosons:
            boson, fermion = fermion, boson
        a = boson.cloud.scattering_length
        if fermion.bosons or not boson.bosons or self.scattering_length is None or a is None or not float(a) > 0.0:
            return math.nan
        masses = (float(boson.cloud.mass), float(fermion.cloud.mass))
        return float(bose_fermi_parameter(masses, (a, self.scattering_length), fermion.peak_density))

    @property
    def relative_shift(self) -> float:
        """Largest mean-field shift of one in the other, over its thermal or Fermi energy. [1]"""
        if self.scattering_length is None:
            return math.nan
        shifts = (self.shift_of_coolant, self.shift_of_passenger)
        return max(
            abs(shift) / _energy(solved) for shift, solved in zip(shifts, (self.coolant, self.passenger), strict=True)
        )


def _energy(solved: Equilibrium) -> float:
    """What a cloud has against being moved: kT, or the energy of its Fermi sea or condensate where that is more."""
    thermal = boltzmann * float(solved.cloud.temperature)
    mu = float(solved.chemical_potential)
    return max(thermal, mu) if math.isfinite(mu) else thermal
