"""Which input counts: known powers where a ramp has them, ordering, and what is left out."""

from __future__ import annotations

from dataclasses import replace

import pytest

from physics.constants import atomic_mass, boltzmann
from physics.evaporation import Cancelled, EndReason, evaporate
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_sensitivity import Input, RampSensitivity, ramp_sensitivities
from physics.ramp_shapes import Shape
from physics.ramps import Move, Ramp, Stage
from physics.trap_path import SCALE, HarmonicPath, QuadrupolePath
from physics.traps import HarmonicTrap

MASS = 87.0 * atomic_mass
GAS = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
PATH = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(500.0, 500.0, 100.0), depth=boltzmann * 3e-4))
RAMP = Ramp(
    stages=tuple(
        Stage(duration=2.0, moves=(Move(control=SCALE, end=end, shape=Shape.EXPONENTIAL),)) for end in (0.3, 0.1)
    )
)


def by_input(found: tuple[RampSensitivity, ...]) -> dict[Input, RampSensitivity]:
    return {one.input: one for one in found}


def test_a_decay_has_the_slopes_of_its_exponential() -> None:
    # N = N0 e^(-t/tau) of atoms that do nothing else.
    still = Ramp(stages=(Stage(duration=5.0),))
    apart = Gas(statistics=Statistics.FERMI, mass=MASS)
    found = by_input(
        ramp_sensitivities(apart, 1e6, 1e-5, still, PATH, losses=Losses(background_lifetime=10.0), change=0.01)
    )
    assert found[Input.ATOMS].slope == pytest.approx(1.0, rel=1e-6)
    assert found[Input.BACKGROUND_LIFETIME].slope == pytest.approx(0.5, rel=1e-3)
    assert found[Input.DURATION].slope == pytest.approx(-0.5, rel=1e-3)
    assert found[Input.TEMPERATURE].slope == pytest.approx(0.0, abs=1e-6)
    assert found[Input.FREQUENCIES].slope == pytest.approx(0.0, abs=1e-6)
    assert set(found) == {
        *(Input.ATOMS, Input.BACKGROUND_LIFETIME, Input.DURATION, Input.TEMPERATURE, Input.FREQUENCIES)
    }


def test_the_strongest_comes_first_and_signs_are_those_of_the_trade() -> None:
    losses = Losses(background_lifetime=30.0, two_body=1e-21, three_body=4e-41, heating=1e-7)
    losses = replace(losses, intensity_noise=1e-12, pointing_noise=1e-18)
    found = ramp_sensitivities(GAS, 2e6, 4e-5, RAMP, PATH, losses=losses)
    slopes = [abs(one.slope) for one in found]
    assert slopes == sorted(slopes, reverse=True)
    of_passenger = {Input.PASSENGER_ATOMS, Input.PASSENGER_TEMPERATURE, Input.LENGTH_BETWEEN}
    assert {one.input for one in found} == set(Input) - of_passenger
    named = by_input(found)
    assert named[Input.CONTROL].control == SCALE
    assert named[Input.TEMPERATURE].slope < 0.0
    assert named[Input.BACKGROUND_LIFETIME].slope > 0.0
    assert named[Input.THREE_BODY].slope < 0.0
    assert named[Input.HEATING].slope < 0.0


def test_a_quadrupole_has_no_frequencies_to_change() -> None:
    zero = QuadrupolePath(moment=4.64e-24, gradient=2.0, depth=boltzmann * 1e-3)
    found = by_input(ramp_sensitivities(GAS, 1e8, 1e-4, Ramp(stages=(Stage(duration=1.0),)), zero))
    assert Input.FREQUENCIES not in found
    assert Input.TEMPERATURE in found


def test_an_input_that_decides_whether_the_target_is_reached_comes_first() -> None:
    reached = evaporate(GAS, 2e6, 4e-5, RAMP, PATH).final["peak_phase_space_density"]
    target = Target(peak_phase_space_density=0.999 * reached)
    found = ramp_sensitivities(GAS, 2e6, 4e-5, RAMP, PATH, target=target)
    changed = [one.changes_end for one in found]
    assert changed == sorted(changed, reverse=True)
    assert any(changed)
    assert {found[0].reason_less, found[0].reason_more} == {EndReason.TARGET, EndReason.RAMP}


def test_limits_of_the_change_and_cancelling() -> None:
    with pytest.raises(ValueError, match=r"^relative change of an input must be between 0 and 1, got 0$"):
        ramp_sensitivities(GAS, 2e6, 4e-5, RAMP, PATH, change=0.0)
    with pytest.raises(Cancelled):
        ramp_sensitivities(GAS, 2e6, 4e-5, RAMP, PATH, tick=lambda share: False)
