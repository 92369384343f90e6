"""Clouds handed from trap to trap: entropy, energy, and what is caught."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from physics.constants import atomic_mass, boltzmann
from physics.evaporation import evaporate
from physics.gas import Gas
from physics.particles import Statistics
from physics.ramps import Ramp, Stage
from physics.transfer import Transfer, distance_in_radii, slow_transfer, sudden_transfer
from physics.trap_path import SCALE, FixedTrap, HarmonicPath, QuadrupolePath, TrapPoint
from physics.traps import HarmonicTrap
from physics.truncated_boltzmann import HARMONIC, mean_energy, reduced_number

MASS = 87.0 * atomic_mass


def harmonic(depth: float, *frequencies: float) -> TrapPoint:
    trap = HarmonicTrap(frequencies=frequencies or (100.0, 100.0, 100.0), depth=boltzmann * depth)
    path = HarmonicPath(mass=MASS, trap=trap)
    return path.at(path.standing)


def test_a_slow_transfer_between_deep_harmonic_traps_keeps_the_degeneracy() -> None:
    # T in proportion to the mean frequency.
    found = slow_transfer(1e-6, harmonic(1e-4), harmonic(1e-3, 300.0, 200.0, 100.0 / 6.0))
    assert found.share == 1.0
    assert found.energy / (3.0 * boltzmann * 1e-6) == pytest.approx(1.0, rel=1e-8)


def test_a_slow_transfer_to_another_shape_changes_it_as_the_entropy_says() -> None:
    # D = e^(5/2 + d - S/Nk) in a deep trap of exponent d, so that D2/D1 = e^(d2 - d1); also for a hotter start.
    old = harmonic(1e-4)
    path = QuadrupolePath(moment=9.27e-24, gradient=1.0, depth=boltzmann * 1e-2)
    new = path.at(path.standing)
    found = slow_transfer(1e-6, old, new)
    T = found.energy / (4.5 * boltzmann)
    centre = [
        1.0 / (point.volume * math.gamma(d + 1.0) * (boltzmann * t / (point.depth or 1.0)) ** d * t**1.5)
        for point, d, t in ((old, 1.5, 1e-6), (new, 3.0, T))
    ]
    assert centre[1] / centre[0] == pytest.approx(math.exp(1.5), rel=1e-7)


def test_a_trap_without_room_for_the_entropy_does_not_hold_the_cloud() -> None:
    found = slow_transfer(1e-4, harmonic(1e-3), harmonic(1e-7, 100.0, 100.0, 100.0))
    assert found.share == 0.0
    assert math.isnan(found.energy)


@pytest.mark.parametrize("factor", [0.2, 0.7, 1.0, 3.0])
def test_a_jump_of_the_depth_alone_cuts_the_cloud(factor: float) -> None:
    # Same potential, lower rim: the levels above are gone, T stays.
    kT, eta = boltzmann * 1e-6, 6.0
    found = sudden_transfer(1e-6, harmonic(6e-6), harmonic(factor * 6e-6))
    cut = min(factor, 1.0) * eta
    share = float(reduced_number(HARMONIC, cut) / reduced_number(HARMONIC, eta))
    assert found.share == pytest.approx(share, rel=1e-9)
    assert found.energy == pytest.approx(float(mean_energy(HARMONIC, cut)) * kT, rel=1e-9)


def test_a_jump_of_the_whole_trap_keeps_kinetic_energy() -> None:
    trap = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(100.0, 80.0, 50.0), depth=boltzmann * 2e-5))
    old, new = trap.at(trap.standing), trap.at({**trap.standing, SCALE: 4.0})
    found = sudden_transfer(1e-6, old, new)
    assert found.share == pytest.approx(1.0, abs=1e-6)
    assert found.energy == pytest.approx((1.5 + 4.0 * 1.5) * boltzmann * 1e-6, rel=1e-5)
    # A trap made weaker loses those whose old kinetic energy is above the new rim.
    weaker = sudden_transfer(1e-6, old, trap.at({**trap.standing, SCALE: 0.2}))
    assert 0.5 < weaker.share < 1.0


def test_a_displaced_transfer_adds_the_energy_of_the_way() -> None:
    old, new = harmonic(1e-4, 120.0, 90.0, 60.0), harmonic(1e-3, 100.0, 90.0, 30.0)
    shift = 5e-6
    found = sudden_transfer(1e-6, old, new, (shift, 0.0, 0.0))
    ratios = [(b / a) ** 2 for a, b in ((120.0, 100.0), (90.0, 90.0), (60.0, 30.0))]
    potential = 0.5 * sum(ratios) * boltzmann * 1e-6 + 0.5 * MASS * (2.0 * math.pi * 100.0 * shift) ** 2
    assert found.share == pytest.approx(1.0, abs=1e-6)
    assert found.energy == pytest.approx(1.5 * boltzmann * 1e-6 + potential, rel=1e-6)


def test_both_ways_of_counting_what_is_caught_agree() -> None:
    # By volume, and place by place, for a trap that keeps its shape.
    old, new = harmonic(6e-6), harmonic(4e-6, 60.0, 60.0, 60.0)
    nested = sudden_transfer(1e-6, old, new)
    placed = sudden_transfer(1e-6, old, new, (1e-15, 0.0, 0.0))
    assert placed.share == pytest.approx(nested.share, abs=3e-4)
    assert placed.energy == pytest.approx(nested.energy, rel=3e-4)


def test_a_quadrupole_turned_into_a_harmonic_trap_keeps_its_radius() -> None:
    # Of exp(-F r/kT) in stretched coordinates <z^2> = 4 (kT/F)^2 on the strong axis, four times that on the others.
    path = QuadrupolePath(moment=9.27e-24, gradient=1.0, depth=boltzmann * 1e-2, axis=(0.0, 1.0, 0.0))
    new = harmonic(1.0, 50.0, 200.0, 70.0)
    found = sudden_transfer(1e-5, path.at(path.standing), new)
    length = 2.0 * boltzmann * 1e-5 / 9.27e-24
    springs = [MASS * (2.0 * math.pi * f) ** 2 for f in (50.0, 200.0, 70.0)]
    potential = 0.5 * length**2 * (4.0 * springs[0] + springs[1] + 4.0 * springs[2])
    assert found.share == pytest.approx(1.0, abs=1e-6)
    assert found.energy == pytest.approx(1.5 * boltzmann * 1e-5 + potential, rel=1e-5)


def test_a_drawn_sample_is_caught_as_often() -> None:
    # Drawn atoms: positions and momenta of the old trap, kept where their energy in the new one is below its depth.
    rng = np.random.default_rng(1)
    old, new = harmonic(2e-4, 100.0, 100.0, 100.0), harmonic(3e-6, 40.0, 110.0, 90.0)
    x = rng.normal(size=(400_000, 3))
    kinetic = 0.5 * np.sum(rng.normal(size=(400_000, 3)) ** 2, axis=1)
    shift = 3e-6 * 2.0 * math.pi * 100.0 * math.sqrt(MASS / (boltzmann * 1e-6))
    moved = x - np.array([0.0, shift, 0.0])
    energy = kinetic + 0.5 * np.sum((np.array([0.4, 1.1, 0.9]) * moved) ** 2, axis=1)
    kept = energy < 3.0
    found = sudden_transfer(1e-6, old, new, (0.0, 3e-6, 0.0))
    assert found.share == pytest.approx(float(np.mean(kept)), abs=3e-3)
    assert found.energy / (boltzmann * 1e-6) == pytest.approx(float(np.mean(energy[kept])), rel=3e-3)


def test_a_displaced_transfer_needs_potentials() -> None:
    blind = replace(harmonic(1e-4), well=None)
    with pytest.raises(ValueError, match=r"^a displaced transfer needs traps whose potential is known$"):
        sudden_transfer(1e-6, blind, harmonic(1e-4), (1e-6, 0.0, 0.0))


def test_how_far_two_minima_lie_apart() -> None:
    old = TrapPoint(depth=boltzmann * 1e-4, volume=1e-13, frequencies=(100.0, 200.0, 50.0), minimum=(0.0, 0.0, 0.0))
    new = replace(old, minimum=(3e-5, 0.0, -4e-5))
    radius = math.sqrt(boltzmann * 1e-6 / MASS) / (2.0 * math.pi * 100.0)
    assert distance_in_radii(MASS, 1e-6, old, new) == pytest.approx(5e-5 / radius)
    assert math.isnan(distance_in_radii(MASS, 1e-6, replace(old, minimum=None), new))
    assert math.isnan(distance_in_radii(MASS, 1e-6, replace(old, frequencies=None), new))
    # A quadrupole: the geometric mean of the drawn radii of exp(-F sqrt(z^2 + (x^2 + y^2)/4)/kT).
    draw = np.random.default_rng(7)
    r, way = draw.gamma(3.0, size=200_000), draw.normal(size=(200_000, 3))
    points = r[:, np.newaxis] * way / np.linalg.norm(way, axis=1)[:, np.newaxis] * [2.0, 2.0, 1.0]
    drawn = float(np.prod(np.std(points, axis=0)) ** (1.0 / 3.0)) * boltzmann * 1e-6 / 1e-23
    zero = replace(old, frequencies=None, zero_force=1e-23)
    assert distance_in_radii(MASS, 1e-6, zero, new) == pytest.approx(5e-5 / drawn, rel=0.01)
    run = evaporate(
        Gas(statistics=Statistics.FERMI, mass=MASS),
        1e5,
        1e-6,
        Ramp(stages=(Stage(duration=0.1), Stage(duration=0.1, transfer=Transfer(path=FixedTrap(point=new))))),
        FixedTrap(point=replace(old, volume=2e-13)),
    )
    assert run.farthest_transfer == pytest.approx(5e-5 / radius, rel=1e-6)
