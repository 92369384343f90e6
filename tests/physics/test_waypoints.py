"""Waypoints: on the ramp, from an assumed efficiency, and what follows where a cloud is off."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.cloud import Cloud, equilibrium
from physics.constants import atomic_mass, boltzmann
from physics.evaporation import evaporate
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_shapes import Shape
from physics.ramps import Control, Move, Ramp, Stage
from physics.trap_path import DEPTH, SCALE, HarmonicPath
from physics.traps import HarmonicTrap
from physics.waypoints import Waypoint, assumed_waypoints, departures, expanded_widths, waypoints

MASS = 87.0 * atomic_mass
GAS = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
PATH = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(1500.0, 1000.0, 700.0), depth=boltzmann * 5e-4))
RAMP = Ramp(
    stages=tuple(
        Stage(duration=0.4, moves=(Move(control=SCALE, end=end, shape=Shape.EXPONENTIAL),))
        for end in (0.3, 0.1, 0.03, 0.01, 0.003)
    )
)
LOSSES = Losses(background_lifetime=20.0, three_body=4e-41)
DENSITIES = (0.01, 0.1, 1.0)


def points() -> tuple[Waypoint, ...]:
    return waypoints(evaporate(GAS, 2e6, 5e-5, RAMP, PATH, losses=LOSSES), (*DENSITIES, 1e-9, 5.0), 0.02)


def test_waypoints_are_where_the_ramp_ends_at_that_target() -> None:
    found = points()
    assert [point.phase_space_density for point in found] == list(DENSITIES)
    for point in found:
        target = Target(peak_phase_space_density=point.phase_space_density)
        run = evaporate(GAS, 2e6, 5e-5, RAMP, PATH, losses=LOSSES, target=target)
        assert point.atoms == pytest.approx(run.final["atoms"], rel=1e-3)
        assert point.temperature == pytest.approx(run.final["temperature"], rel=1e-3)
        assert point.time == pytest.approx(run.final["time"], rel=2e-3)
        assert point.collision_rate == pytest.approx(run.final["elastic_collision_rate"], rel=2e-3)
        assert point.controls[SCALE] == pytest.approx(float(run.controls[SCALE][-1]), rel=2e-3)
        assert point.depth == pytest.approx(point.truncation * boltzmann * point.temperature, rel=1e-3)


@pytest.mark.parametrize("statistics", list(Statistics))
@pytest.mark.parametrize("temperature", [3e-7, 5e-6])
def test_widths_start_as_the_cloud_and_grow_as_its_momenta(statistics: Statistics, temperature: float) -> None:
    gas = Gas(statistics=statistics, mass=MASS)
    frequencies = (120.0, 80.0, 20.0)
    trap = HarmonicTrap(frequencies=frequencies)
    cloud = Cloud(statistics=statistics, mass=MASS, trap=trap, atoms=1e5, temperature=temperature)
    radii = equilibrium(cloud).thermal_radii
    np.testing.assert_allclose(expanded_widths(gas, 1e5, temperature, frequencies, 0.0), radii, rtol=1e-6)
    # Anisotropy is lost far from the trap.
    late = expanded_widths(gas, 1e5, temperature, frequencies, 10.0)
    assert max(late) / min(late) == pytest.approx(1.0, abs=1e-3)
    assert late[0] / 10.0 == pytest.approx(radii[0] * 2.0 * math.pi * 120.0, rel=1e-5)
    assert all(math.isnan(width) for width in expanded_widths(gas, 1e5, temperature, (math.nan,) * 3, 1.0))


@pytest.mark.parametrize(
    ("control", "alpha_of_gamma"), [(DEPTH, lambda g: (g + 1.0) / 3.0), (SCALE, lambda g: (g + 1.0) / 1.5)]
)
def test_an_assumed_efficiency_gives_the_straight_line(control: Control, alpha_of_gamma) -> None:  # type: ignore[no-untyped-def]
    # gamma = 3 alpha - 1 at fixed frequencies, (3/2) alpha - 1 where w^2 goes as T.
    efficiency = 2.4
    found = assumed_waypoints(GAS, 2e6, 5e-5, PATH, control, (0.01, 0.1, 0.9, 9.0), efficiency, 0.01)
    assert [point.phase_space_density for point in found] == [0.01, 0.1, 0.9]
    alpha = alpha_of_gamma(efficiency)
    for point in found:
        assert math.isnan(point.time)
        assert point.truncation == pytest.approx(10.0, rel=1e-6)
        lost = math.log(point.atoms / 2e6)
        assert math.log(point.temperature / 5e-5) / lost == pytest.approx(alpha, rel=1e-6)
    first = found[0]
    # D0 of the start, classical: N (hbar wbar/kT)^3, nearly, since eta = 10 cuts 0.3 %.
    cloud = Cloud(statistics=Statistics.BOSE, mass=MASS, trap=PATH.trap, atoms=2e6, temperature=5e-5)
    start = float(equilibrium(cloud).classical_phase_space_density)
    assert first.atoms == pytest.approx(2e6 * (0.01 / start) ** (-1.0 / efficiency), rel=0.01)


def test_a_cloud_that_is_off_changes_the_rest() -> None:
    point = points()[0]
    found = departures(point, GAS, RAMP, PATH, atoms_error=0.1, temperature_error=0.05, losses=LOSSES)
    assert [(one.atoms_factor, one.temperature_factor) for one in found] == [
        (1.0, 1.0), (0.9, 1.0), (1.1, 1.0), (1.0, 0.95), (1.0, 1.05)]  # fmt: skip
    planned = evaporate(GAS, 2e6, 5e-5, RAMP, PATH, losses=LOSSES)
    assert found[0].run.atoms[-1] == pytest.approx(planned.atoms[-1], rel=2e-3)
    ends = [float(one.run.atoms[-1]) for one in found]
    assert ends[1] < ends[0] < ends[2]
    assert ends[4] < ends[0] < ends[3]


def test_what_cannot_be_is_said_in_a_sentence() -> None:
    run = evaporate(GAS, 2e6, 5e-5, RAMP, PATH)
    with pytest.raises(ValueError, match=r"^expansion time must not be negative, got -1 s$"):
        waypoints(run, (0.1,), -1.0)
    with pytest.raises(ValueError, match=r"^evaporation efficiency must be positive and finite, got 0$"):
        assumed_waypoints(GAS, 2e6, 5e-5, PATH, SCALE, (0.1,), 0.0, 0.01)
    (assumed,) = assumed_waypoints(GAS, 2e6, 5e-5, PATH, SCALE, (0.1,), 3.0, 0.01)
    with pytest.raises(ValueError, match=r"^a waypoint from an assumed efficiency has no time"):
        departures(assumed, GAS, RAMP, PATH, atoms_error=0.1, temperature_error=0.1)
