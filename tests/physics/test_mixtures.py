"""Two clouds at rest in one trap: against closed forms, exchanged, apart, unknown."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.caveats import gravest_first
from physics.cloud import Cloud, equilibrium
from physics.constants import atomic_mass, bohr_radius, boltzmann
from physics.equilibria import Equilibrium
from physics.interspecies import PairCollisions
from physics.miscibility import Mixing
from physics.mixture_caveats import MixtureCaveatKind, between_caveats, mixture_caveats
from physics.mixtures import Mixture, Place
from physics.pair_scattering import PairLength, WhyNoLength
from physics.particles import Certainty, Statistics
from physics.traps import HarmonicTrap

RUBIDIUM, POTASSIUM = 86.909 * atomic_mass, 39.964 * atomic_mass
RATIO = math.sqrt(RUBIDIUM / POTASSIUM)
LENGTH = -215.0 * bohr_radius


def bosons(**changes: object) -> Equilibrium:
    given = {
        "statistics": Statistics.BOSE, "mass": RUBIDIUM, "trap": HarmonicTrap(frequencies=[215.0, 215.0, 16.3]),
        "atoms": 1e6, "temperature": 4e-6, "scattering_length": 99.0 * bohr_radius,
    }  # fmt: skip
    return equilibrium(Cloud(**(given | changes)))  # type: ignore[arg-type]


def fermions(**changes: object) -> Equilibrium:
    given = {
        "statistics": Statistics.FERMI, "mass": POTASSIUM, "atoms": 1e4, "temperature": 4.4e-6,
        "trap": HarmonicTrap(frequencies=[215.0 * RATIO, 215.0 * RATIO, 16.3 * RATIO]),
    }  # fmt: skip
    return equilibrium(Cloud(**(given | changes)))  # type: ignore[arg-type]


def test_thermal_clouds_are_those_of_the_closed_form() -> None:
    # S = kT1/(m1 w1^2) + kT2/(m2 w2^2) along each axis; at these temperatures statistics changes the radii by 1e-3.
    apart = np.array([0.0, 0.0, 3.4e-6])
    mixture = Mixture(
        coolant=bosons(), passenger=fermions(), places=(Place(minimum=-apart), Place()), scattering_length=LENGTH
    )
    w = 2.0 * math.pi * np.array([215.0, 215.0, 16.3])
    S = boltzmann * 4e-6 / (RUBIDIUM * w**2) + boltzmann * 4.4e-6 / (POTASSIUM * (RATIO * w) ** 2)
    overlap = np.prod(np.exp(-(apart**2) / (2.0 * S)) / np.sqrt(2.0 * math.pi * S))
    assert mixture.met_density == pytest.approx(1e6 * overlap, rel=5e-3)
    pair = PairCollisions(masses=(RUBIDIUM, POTASSIUM), scattering_length=LENGTH)
    rate = float(pair.collision_rate((4e-6, 4.4e-6), overlap))
    assert mixture.passenger_collision_rate == pytest.approx(1e6 * rate, rel=5e-3)
    assert mixture.coolant_collision_rate == pytest.approx(1e4 * rate, rel=5e-3)
    relaxation = float(pair.relaxation_rate((1e6, 1e4), (4e-6, 4.4e-6), overlap))
    assert 1.0 / mixture.relaxation_time == pytest.approx(relaxation, rel=5e-3)
    assert mixture.distance == pytest.approx(3.4e-6)
    assert mixture.overlap_share == pytest.approx(math.exp(-(apart[2] ** 2) / (2.0 * S[2])), rel=1e-3)


def test_it_does_not_matter_which_is_first() -> None:
    places = Place(minimum=(0.0, 1e-6, -9e-6)), Place(minimum=(0.0, 0.0, -4e-6))
    first, second = bosons(), fermions(spin_components=2, scattering_length=174.0 * bohr_radius)
    there = Mixture(coolant=first, passenger=second, places=places, scattering_length=LENGTH, cooling=1.2)
    back = Mixture(coolant=second, passenger=first, places=places[::-1], scattering_length=LENGTH, cooling=1.2)
    for name in ("distance", "overlap_share", "relaxation_time", "common_temperature", "bose_fermi_parameter"):
        assert getattr(there, name) == pytest.approx(getattr(back, name), rel=1e-12)
    assert there.coolant_collision_rate == pytest.approx(back.passenger_collision_rate, rel=1e-12)
    assert there.shift_of_coolant == pytest.approx(back.shift_of_passenger, rel=1e-12)
    assert there.relative_shift == pytest.approx(back.relative_shift, rel=1e-12)


def test_axes_of_the_trap_do_not_matter_where_both_are_turned_alike() -> None:
    angle = 0.7
    axes = [[math.cos(angle), math.sin(angle), 0.0], [-math.sin(angle), math.cos(angle), 0.0], [0.0, 0.0, 1.0]]
    down = np.array([2e-6, 0.0, 0.0])
    straight = Mixture(coolant=bosons(), passenger=fermions(), places=(Place(minimum=down), Place()))
    turned = Mixture(
        coolant=bosons(), passenger=fermions(),
        places=(Place(minimum=down @ np.array(axes), axes=axes), Place(axes=axes)),
    )  # fmt: skip
    assert turned.overlap_share == pytest.approx(straight.overlap_share, rel=1e-9)
    assert turned.met_density == pytest.approx(straight.met_density, rel=1e-9)


def test_far_apart_there_is_no_contact() -> None:
    mixture = Mixture(
        coolant=bosons(), passenger=fermions(), places=(Place(minimum=(1e-3, 0.0, 0.0)), Place()),
        scattering_length=LENGTH,
    )  # fmt: skip
    assert mixture.overlap_share == 0.0
    assert mixture.relaxation_time == math.inf
    kinds = [caveat.kind for caveat in gravest_first(mixture_caveats(mixture))]
    assert kinds[0] is MixtureCaveatKind.APART


def test_a_degenerate_fermi_gas_is_as_large_as_its_sea() -> None:
    cold = fermions(temperature=1e-9)
    mixture = Mixture(coolant=bosons(atoms=1e3), passenger=cold)
    # R_F^2/8 is the mean square radius along an axis at zero temperature: Butts and Rokhsar (1997).
    radius = np.sqrt(2.0 * float(cold.fermi_energy) / POTASSIUM) / (2.0 * math.pi * 215.0 * RATIO)
    assert mixture._spread[0] - float(bosons(atoms=1e3).thermal_radii[0]) ** 2 == pytest.approx(
        radius**2 / 8.0, rel=1e-3
    )


def test_what_is_unknown() -> None:
    mixture = Mixture(coolant=bosons(), passenger=fermions())
    for name in ("coolant_collision_rate", "relaxation_time", "shift_of_passenger", "coldest_temperature"):
        assert math.isnan(getattr(mixture, name))
    assert mixture.mixing is None
    assert math.isnan(mixture.miscibility_parameter)
    assert mixture.common_temperature == pytest.approx((1e6 * 4e-6 + 1e4 * 4.4e-6) / 1.01e6)
    found = list(between_caveats(PairLength(value=None, reason=WhyNoLength.NOT_IN_DATA)))
    assert [caveat.kind for caveat in found] == [MixtureCaveatKind.BETWEEN_UNKNOWN]
    recalled = PairLength(value=1e-9, certainty=Certainty.MEMORY, source="x", sign_unknown=True)
    assert [caveat.kind for caveat in between_caveats(recalled)] == [
        MixtureCaveatKind.BETWEEN_SIGN_UNKNOWN,
        MixtureCaveatKind.BETWEEN_RECALLED,
    ]


def test_two_condensates() -> None:
    other = bosons(mass=40.962 * atomic_mass, scattering_length=60.5 * bohr_radius, atoms=1e5, temperature=5e-8)
    mixture = Mixture(coolant=bosons(temperature=5e-8), passenger=other, scattering_length=163.0 * bohr_radius)
    assert mixture.mixing is Mixing.APART
    kinds = [caveat.kind for caveat in mixture_caveats(mixture)]
    assert MixtureCaveatKind.NOT_MISCIBLE in kinds
    assert MixtureCaveatKind.PUSHED in kinds
    assert MixtureCaveatKind.DEGENERATE_MIXTURE in kinds
    # A condensate in the middle of the coolant's: g12 n1 against mu1 = g11 n1.
    ratio = mixture.shift_of_passenger / float(mixture.coolant.chemical_potential)
    assert ratio == pytest.approx(163.0 / 99.0 * 0.5 * (1.0 + 86.909 / 40.962), rel=0.02)


def test_passengers_that_the_coolant_can_cool() -> None:
    mixture = Mixture(coolant=bosons(), passenger=fermions(), scattering_length=LENGTH, cooling=7.0 / 6.0)
    threshold = float(mixture.passenger.temperature_to_threshold) * 4.4e-6
    left = mixture.coolant_at_threshold
    assert (left + 1e4) / 1.01e6 == pytest.approx((threshold / mixture.common_temperature) ** (6.0 / 7.0), rel=1e-9)
    assert mixture.most_passengers > 1e4
    assert mixture.coldest_temperature < threshold
