"""What is worked out along a ramp with a second gas: which input counts, clouds to aim at, by runs of their own."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from physics.constants import atomic_mass, bohr_radius, boltzmann
from physics.gas import Gas
from physics.losses import Losses
from physics.particles import Statistics
from physics.passenger import Passenger
from physics.ramp_sensitivity import Input, RampSensitivity, ramp_sensitivities
from physics.ramp_shapes import Shape
from physics.ramps import Move, Ramp, Stage
from physics.sympathetic import evaporate_with_passenger
from physics.trap_path import SCALE, HarmonicPath
from physics.traps import HarmonicTrap
from physics.waypoints import departures, waypoints

HEAVY, LIGHT = 87.0 * atomic_mass, 40.0 * atomic_mass
RUBIDIUM = Gas(statistics=Statistics.BOSE, mass=HEAVY, scattering_length=100.0 * bohr_radius)
POTASSIUM = Gas(statistics=Statistics.FERMI, mass=LIGHT)
RATIO = math.sqrt(HEAVY / LIGHT)
LOSSES = Losses(background_lifetime=30.0)
RAMP = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=SCALE, end=0.2, shape=Shape.EXPONENTIAL),)),))


def trap(mass: float, factor: float, depth: float) -> HarmonicPath:
    """Depth in kelvin."""
    frequencies = [factor * f for f in (340.0, 540.0, 640.0)]
    return HarmonicPath(mass=mass, trap=HarmonicTrap(frequencies=frequencies, depth=boltzmann * depth))


PATH = trap(HEAVY, 1.0, 6e-5)
RIDER = Passenger(
    gas=POTASSIUM,
    path=trap(LIGHT, RATIO, 2e-4),
    atoms=2e5,
    temperature=8e-6,
    scattering_length=-60.0 * bohr_radius,
    losses=LOSSES,
)
START = (RUBIDIUM, 1.5e6, 8e-6, RAMP)


@pytest.fixture(scope="module")
def found() -> dict[Input, RampSensitivity]:
    rows = ramp_sensitivities(*START, PATH, losses=LOSSES, passenger=RIDER)
    return {one.input: one for one in rows}


@pytest.mark.parametrize(
    ("kind", "path", "rider", "losses"),
    [
        (Input.PASSENGER_TEMPERATURE, PATH, replace(RIDER, temperature=8.8e-6), LOSSES),
        (Input.LENGTH_BETWEEN, PATH, replace(RIDER, scattering_length=-66.0 * bohr_radius), LOSSES),
        (
            Input.BACKGROUND_LIFETIME,
            PATH,
            replace(RIDER, losses=Losses(background_lifetime=33.0)),
            Losses(background_lifetime=33.0),
        ),
        (Input.FREQUENCIES, trap(HEAVY, 1.1, 6e-5), replace(RIDER, path=trap(LIGHT, 1.1 * RATIO, 2e-4)), LOSSES),
    ],
)
def test_a_tenth_more_by_a_run_of_its_own(
    found: dict[Input, RampSensitivity], kind: Input, path: HarmonicPath, rider: Passenger, losses: Losses
) -> None:
    run = evaporate_with_passenger(*START, path, rider, losses=losses)
    assert found[kind].atoms_more == pytest.approx(float(run.coolant.atoms[-1]), rel=1e-5)
    end = run.passenger.final["reduced_temperature"]
    assert found[kind].passenger_more == pytest.approx(end, rel=1e-5)
    # A slope of the two of them.
    one = found[kind]
    expected = math.log(one.passenger_more / one.passenger_less) / (2.0 * math.log(1.1))
    assert one.passenger_slope == pytest.approx(expected, rel=1e-12)


def test_without_contact_the_passenger_answers_to_nothing_but_itself() -> None:
    rows = ramp_sensitivities(*START, PATH, losses=LOSSES, passenger=replace(RIDER, scattering_length=0.0))
    alone = ramp_sensitivities(*START, PATH, losses=LOSSES)
    assert Input.LENGTH_BETWEEN not in {one.input for one in rows}
    by_input = {one.input: one for one in rows}
    for one in alone:
        assert math.isnan(one.passenger_slope)
        assert by_input[one.input].atoms_more == pytest.approx(one.atoms_more, rel=2e-5)
    assert by_input[Input.ATOMS].passenger_slope == pytest.approx(0.0, abs=1e-6)
    # T/TF of a gas that keeps its atoms goes as N^(-1/3) and as T.
    assert by_input[Input.PASSENGER_ATOMS].passenger_slope == pytest.approx(-1.0 / 3.0, abs=1e-3)
    assert by_input[Input.PASSENGER_TEMPERATURE].passenger_slope == pytest.approx(1.0, abs=1e-2)


def test_waypoints_have_the_passenger_of_their_time() -> None:
    both = evaporate_with_passenger(*START, PATH, RIDER, losses=LOSSES)
    D = both.coolant.rows.peak_phase_space_density
    (point,) = waypoints(both.coolant, [float(np.sqrt(D[0] * D[-1]))], 0.015, both.passenger)
    then = point.passenger
    assert then is not None
    row = int(np.searchsorted(both.passenger.time, point.time))
    around = both.passenger.temperature[row - 1 : row + 1]
    assert around.min() <= then.temperature <= around.max()
    # T/TF of its atoms, by kTF = hbar wbar (6N)^(1/3).
    wbar = 2.0 * math.pi * float(np.prod(both.passenger.rows.frequencies[row])) ** (1.0 / 3.0)
    fermi = 1.054571817e-34 * wbar * (6.0 * then.atoms) ** (1.0 / 3.0) / boltzmann
    assert then.reduced_temperature == pytest.approx(then.temperature / fermi, rel=0.02)
    # From there on as planned it ends as the whole ramp does.
    rider = replace(RIDER, atoms=then.atoms, temperature=then.temperature)
    planned = departures(
        point, RUBIDIUM, RAMP, PATH, atoms_error=0.1, temperature_error=0.0, losses=LOSSES, passenger=rider
    )
    assert len(planned) == 3
    assert planned[0].passenger is not None
    for name in ("atoms", "temperature", "reduced_temperature"):
        assert planned[0].passenger.final[name] == pytest.approx(both.passenger.final[name], rel=3e-3)
    # More coolant leaves the passenger colder.
    fewer, more = (one.passenger.final["temperature"] for one in planned[1:] if one.passenger is not None)
    assert more < planned[0].passenger.final["temperature"] < fewer
