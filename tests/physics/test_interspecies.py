"""Collisions of two kinds of atoms: against sampled collisions, closed forms, and what is conserved."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad, solve_ivp

from physics.collisions import low_energy_cross_section, mean_speed
from physics.constants import atomic_mass, bohr_radius, boltzmann, reduced_planck
from physics.interspecies import (
    PairCollisions,
    coldest_temperature,
    common_temperature,
    coolant_left,
    most_passengers,
)
from physics.particles import Statistics

LITHIUM_CAESIUM = PairCollisions(
    masses=(7.016 * atomic_mass, 132.905 * atomic_mass), scattering_length=-300 * bohr_radius
)
EQUAL = PairCollisions(masses=(87.0 * atomic_mass,) * 2, scattering_length=100.0 * bohr_radius)


def test_equal_masses_are_those_of_one_gas() -> None:
    T = 1e-7
    # 1 + k^2 a^2 differs from 1 by 1e-4 there.
    expected = float(low_energy_cross_section(Statistics.FERMI, np.asarray(EQUAL.scattering_length), 2))
    assert float(EQUAL.cross_section((T, T))) == pytest.approx(expected, rel=2e-3)
    assert float(EQUAL.relative_speed((T, T))) == pytest.approx(
        math.sqrt(2.0) * float(mean_speed(EQUAL.masses[0], np.asarray(T))), rel=1e-12
    )
    assert EQUAL.energy_share == 1.0
    assert EQUAL.rethermalisation_collisions == 3.0


@pytest.mark.parametrize("length", [10.0, 2000.0, 1e6])
def test_averages_over_speeds(length: float) -> None:
    pair = PairCollisions(masses=LITHIUM_CAESIUM.masses, scattering_length=length * bohr_radius)
    T1, T2 = 4e-5, 1e-5
    s = math.sqrt(boltzmann * (T1 / pair.masses[0] + T2 / pair.masses[1]))

    def mean(power: int, sigma: bool) -> float:
        def weighted(x: float) -> float:
            k = pair.reduced_mass * x * s / reduced_planck
            a = pair.scattering_length
            section = 4.0 * math.pi * a * a / (1.0 + (k * a) ** 2) if sigma else 1.0
            return section * x ** (2 + power) * math.exp(-0.5 * x * x)

        scale = 4.0 * math.pi * pair.scattering_length**2 if sigma else 1.0
        return scale * float(quad(lambda x: weighted(x) / scale, 0.0, 40.0, epsabs=0.0, epsrel=1e-10, limit=400)[0])

    assert float(pair.cross_section((T1, T2))) == pytest.approx(mean(1, True) / mean(1, False), rel=1e-8)
    assert float(pair.exchange_cross_section((T1, T2))) == pytest.approx(mean(3, True) / mean(3, False), rel=1e-8)


def test_exchanged_power_against_drawn_collisions() -> None:
    # Atoms drawn from two thermal clouds, scattered evenly into all directions; seeded, so that it always holds.
    pair, (T1, T2) = LITHIUM_CAESIUM, (5e-5, 1e-5)
    random = np.random.default_rng(3)
    count = 400_000
    velocities = [
        math.sqrt(boltzmann * T / m) * random.standard_normal((count, 3))
        for T, m in zip((T1, T2), pair.masses, strict=True)
    ]
    centre = (pair.masses[0] * velocities[0] + pair.masses[1] * velocities[1]) / sum(pair.masses)
    relative = velocities[0] - velocities[1]
    speed = np.linalg.norm(relative, axis=1)
    way = random.standard_normal((count, 3))
    after = centre + pair.masses[1] / sum(pair.masses) * speed[:, None] * way / np.linalg.norm(way, axis=1)[:, None]
    given_away = 0.5 * pair.masses[0] * (np.sum(velocities[0] ** 2, axis=1) - np.sum(after**2, axis=1))
    k = pair.reduced_mass * speed / reduced_planck
    rate = 4.0 * math.pi * pair.scattering_length**2 / (1.0 + (k * pair.scattering_length) ** 2) * speed
    power = rate * given_away
    error = power.std() / math.sqrt(count)
    assert error < 0.01 * power.mean()
    assert float(pair.exchanged_power((T1, T2), 1.0)) == pytest.approx(power.mean(), abs=4.0 * error)
    assert float(pair.collision_rate((T1, T2), 1.0)) == pytest.approx(rate.mean(), rel=5e-3)


@pytest.mark.parametrize(
    ("ratio", "drawn"), [(87.0 / 40.0, 1.06), (40.0 / 87.0, 0.733), (133.0 / 6.0, 0.515), (6.0 / 133.0, 0.289)]
)
def test_how_often_a_collision_lifts_an_atom_over_a_depth(ratio: float, drawn: float) -> None:
    # Of 20 000 atoms of mass 1 in a harmonic trap, cut at 6 kT, in collisions with a bath of mass `ratio` in a trap of
    # the same stiffness, cut there too: drawn once, 300 s of processor time. Atoms lost per collision, over the rate of
    # the kinetics for equal masses; which is 0.884 for a bath of mass 1, since the levels at the rim run empty.
    pair = PairCollisions(masses=(atomic_mass, ratio * atomic_mass), scattering_length=1e-9)
    assert pair.lifting_share == pytest.approx(drawn / 0.884, rel=0.45)


temperature = st.floats(1e-8, 1e-3)
mass = st.floats(1.0, 200.0)


@given(mass, mass, st.floats(-1e4, 1e4), temperature, temperature)
def test_it_does_not_matter_which_is_first(m1: float, m2: float, a: float, T1: float, T2: float) -> None:
    there = PairCollisions(masses=(m1 * atomic_mass, m2 * atomic_mass), scattering_length=a * bohr_radius)
    back = PairCollisions(masses=there.masses[::-1], scattering_length=there.scattering_length)
    assert float(there.collision_rate((T1, T2), 1.0)) == pytest.approx(float(back.collision_rate((T2, T1), 1.0)))
    assert float(there.exchanged_power((T1, T2), 1.0)) == pytest.approx(-float(back.exchanged_power((T2, T1), 1.0)))
    assert float(there.exchanged_power((T1, T1), 1.0)) == 0.0
    assert 0.0 < there.energy_share <= 1.0


def test_two_clouds_relax_to_the_common_temperature() -> None:
    # 3 k N dT/dt = -N1 N2 times the power of a pair; a short length, so that the cross-section does not change.
    pair = PairCollisions(masses=LITHIUM_CAESIUM.masses, scattering_length=bohr_radius)
    N, start, overlap = (1e5, 4e5), (2.2e-5, 2.0e-5), 1e14

    def slope(_: float, T: list[float]) -> list[float]:
        power = N[0] * N[1] * float(pair.exchanged_power((T[0], T[1]), overlap))
        return [-power / (3.0 * boltzmann * N[0]), power / (3.0 * boltzmann * N[1])]

    rate = float(pair.relaxation_rate(N, start, overlap))
    end = solve_ivp(slope, (0.0, 3.0 / rate), start, rtol=1e-10, atol=1e-18).y[:, -1]
    # The speed falls a little as the light one cools.
    assert end[0] - end[1] == pytest.approx((start[0] - start[1]) * math.exp(-3.0), rel=0.1)
    assert common_temperature(N, tuple(end)) == pytest.approx(common_temperature(N, start), rel=1e-9)
    # 3/xm collisions of each atom of a small cloud in the time of relaxation.
    few = (1.0, 1e5)
    collisions = few[1] * float(pair.collision_rate(start, overlap)) / float(pair.relaxation_rate(few, start, overlap))
    assert collisions == pytest.approx(pair.rethermalisation_collisions, rel=1e-3)


@given(st.floats(1e3, 1e8), st.floats(1e2, 1e7), st.floats(0.2, 3.0), st.floats(0.01, 0.9))
def test_heat_capacity_limit(coolant: float, passengers: float, cooling: float, ratio: float) -> None:
    # d ln T = alpha dN1/(N1 + N2) until the coolant is gone.
    reached = float(coldest_temperature((coolant, passengers), 1.0, cooling))
    assert reached < 1.0
    assert float(most_passengers(coolant, reached, cooling)) == pytest.approx(passengers, rel=1e-6)
    assert float(coolant_left((coolant, passengers), reached, cooling)) == pytest.approx(0.0, abs=1e-6 * coolant)
    left = float(coolant_left((coolant, passengers), ratio, cooling))
    assert (left > 0.0) == (ratio > reached) or abs(ratio - reached) < 1e-9
    # An evaporation of the coolant alone: T ~ N^alpha.
    assert float(coolant_left((coolant, 0.0), ratio, cooling)) == pytest.approx(coolant * ratio ** (1.0 / cooling))


def test_what_cannot_be() -> None:
    with pytest.raises(ValueError, match="mass must be positive and finite, got 0 kg"):
        PairCollisions(masses=(0.0, 1e-25), scattering_length=1e-9)
    with pytest.raises(ValueError, match="scattering length must be finite, got inf m"):
        PairCollisions(masses=(1e-25, 1e-25), scattering_length=math.inf)


@pytest.mark.parametrize("length", [0.0, -215.0, 5000.0])
def test_single_numbers_for_the_kinetics_are_those_of_arrays(length: float) -> None:
    pair = PairCollisions(masses=(1.44e-25, 6.6e-26), scattering_length=length * 5.29177e-11)
    temperatures = (3e-6, 8e-7)
    counted, exchanging = pair.rate_coefficients(*temperatures)
    assert counted == pytest.approx(float(pair.collision_rate(temperatures, 1.0)), rel=1e-12)
    speed = float(pair.relative_speed(temperatures))
    assert exchanging == pytest.approx(float(pair.exchange_cross_section(temperatures)) * speed, rel=1e-12)
