"""Designed ramps with a second gas in the trap: against ramps with it, alone, and what is conserved."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from physics.constants import atomic_mass, bohr_radius, boltzmann
from physics.evaporation import EndReason
from physics.evaporation_rates import Process
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.held_together import HeldTogether
from physics.held_truncation import HeldKinetics, Law, Limits, line_of
from physics.losses import Losses
from physics.particles import Statistics
from physics.passenger import Passenger
from physics.ramp_design import Bound, RampDesign, design_ramp
from physics.sympathetic import evaporate_with_passenger
from physics.trap_path import DEPTH, SCALE, HarmonicPath
from physics.traps import HarmonicTrap

HEAVY, LIGHT = 87.0 * atomic_mass, 40.0 * atomic_mass
RUBIDIUM = Gas(statistics=Statistics.BOSE, mass=HEAVY, scattering_length=100.0 * bohr_radius)
POTASSIUM = Gas(statistics=Statistics.FERMI, mass=LIGHT)
RATIO = math.sqrt(HEAVY / LIGHT)
LOSSES = Losses(background_lifetime=45.0, three_body=2e-41)
TARGET = Target(reduced_temperature=0.9)
ATOMS, TEMPERATURE = 1.5e6, 8e-6


def trap(mass: float, factor: float = 1.0, depth: float = 1.8e-4) -> HarmonicPath:
    """Depth in kelvin."""
    frequencies = [factor * f for f in (340.0, 540.0, 640.0)]
    return HarmonicPath(mass=mass, trap=HarmonicTrap(frequencies=frequencies, depth=boltzmann * depth))


PATH = trap(HEAVY)


def riding(**changes: object) -> Passenger:
    """Held so deep that all that it loses of its heat goes to the first gas."""
    given = {
        "gas": POTASSIUM, "path": trap(LIGHT, RATIO, 5e-4), "atoms": 3e5, "temperature": TEMPERATURE,
        "scattering_length": -215.0 * bohr_radius, "losses": Losses(background_lifetime=45.0),
    }  # fmt: skip
    return Passenger(**(given | changes))  # type: ignore[arg-type]


def design(passenger: Passenger | None) -> RampDesign:
    return design_ramp(
        RUBIDIUM, ATOMS, TEMPERATURE, PATH, SCALE, TARGET, losses=LOSSES, passenger=passenger, drift=False
    )


def held(passenger: Passenger | None) -> HeldKinetics:
    line, limits = line_of(PATH, SCALE, Limits()), Limits()
    if passenger is None:
        return HeldKinetics(RUBIDIUM, LOSSES, line, limits)
    return HeldTogether(RUBIDIUM, LOSSES, line, limits, passenger)


@pytest.fixture(scope="module")
def together() -> RampDesign:
    return design(riding())


@pytest.fixture(scope="module")
def alone() -> RampDesign:
    return design(None)


@pytest.mark.parametrize("changes", [{"scattering_length": 0.0}, {"atoms": 101.0}])
def test_without_contact_the_first_gas_is_alone(changes: dict[str, object]) -> None:
    kinetics = (held(None), held(riding(**changes)))
    runs = [one.run(Law(start=8.0), one.start(ATOMS, TEMPERATURE), TARGET, 100.0) for one in kinetics]
    assert runs[0].reached
    assert runs[1].atoms == pytest.approx(runs[0].atoms, rel=1e-3 if "atoms" in changes else 2e-6)
    assert runs[1].time == pytest.approx(runs[0].time, rel=1e-3 if "atoms" in changes else 2e-5)


def test_the_ramp_does_what_the_held_run_did(together: RampDesign) -> None:
    """The held run slows the contact down, the ramp has it as it is: it makes no difference to what is left."""
    assert together.reached
    assert together.passenger is not None
    assert together.passenger.coolant is together.simulated
    assert together.simulated.reason is EndReason.TARGET
    assert together.simulated.atoms[-1] == pytest.approx(together.trade_off.best_atoms[-1], rel=0.02)
    again = evaporate_with_passenger(
        RUBIDIUM, ATOMS, TEMPERATURE, together.ramp, PATH, riding(), losses=LOSSES, target=TARGET
    )
    assert again.coolant.atoms[-1] == together.simulated.atoms[-1]
    end = len(again.passenger.time) - 1
    assert again.passenger.temperature[end] == pytest.approx(float(again.coolant.temperature[-1]), rel=0.03)


def test_numbers_and_energies_add_up_along_a_designed_ramp(together: RampDesign) -> None:
    assert together.passenger is not None
    first, second = together.passenger.coolant.budget, together.passenger.passenger.budget
    for budget in (first, second):
        assert abs(budget.atoms_missing) < 1e-5
        assert abs(budget.energy_missing) < 1e-5
    assert first.energy[Process.CONTACT] > 0.0
    assert first.energy[Process.CONTACT] == pytest.approx(-second.energy[Process.CONTACT], rel=1e-9)


def test_heat_of_the_passenger_costs_atoms_and_moves_the_choice(together: RampDesign, alone: RampDesign) -> None:
    assert together.simulated.atoms[-1] < 0.97 * alone.simulated.atoms[-1]
    # Simulated with the passenger, the ramp that was chosen without does no better, if it gets there at all.
    other = evaporate_with_passenger(
        RUBIDIUM, ATOMS, TEMPERATURE, alone.ramp, PATH, riding(), losses=LOSSES, target=TARGET
    ).coolant
    assert other.reason is not EndReason.TARGET or other.atoms[-1] <= together.simulated.atoms[-1] * 1.002
    bounds = dict(together.bounds)
    assert bounds[Bound.PASSENGER] > 0.0
    assert Bound.PASSENGER not in dict(alone.bounds)
    # What a tenth of the passengers costs, by a run with a tenth fewer.
    kinetics = held(riding(atoms=2.7e5))
    law = Law(start=together.truncation, drift=together.drift)
    fewer = kinetics.run(law, kinetics.start(ATOMS, TEMPERATURE), TARGET, 3600.0)
    assert math.log(fewer.atoms / together.trade_off.best_atoms[-1]) == pytest.approx(bounds[Bound.PASSENGER], rel=1e-3)


def test_the_range_ends_where_the_passenger_is_not_held() -> None:
    class Leaky(HarmonicPath):
        def at(self, controls):  # type: ignore[no-untyped-def]
            point = super().at(controls)
            return replace(point, depth=None, reason="it falls out") if controls[SCALE] < 0.03 else point

    path = riding().path
    leaky = Leaky(mass=path.mass, trap=path.trap)  # type: ignore[attr-defined]
    kinetics = held(riding(path=leaky))
    assert 0.03 <= kinetics.line.value(kinetics.low) < 0.06
    run = kinetics.run(Law(start=6.0), kinetics.start(ATOMS, TEMPERATURE), Target(reduced_temperature=1e-3), 60.0)
    assert kinetics.line.value(run.place) >= 0.03
    shut = Leaky(mass=path.mass, trap=path.trap, nodes=5)  # type: ignore[attr-defined]
    with pytest.raises(ValueError, match="does not hold the passenger where the control stands"):
        HeldTogether(
            RUBIDIUM, LOSSES, line_of(replace(PATH, nodes=5), SCALE, Limits(low=1e-3)), Limits(),
            riding(path=_Empty(path=shut)),
        )  # fmt: skip


class _Empty:
    """A trap that holds nothing."""

    def __init__(self, path: HarmonicPath) -> None:
        self.standing, self.nodes, self._path = path.standing, path.nodes, path

    def at(self, controls):  # type: ignore[no-untyped-def]
        return replace(self._path.at(controls), depth=None, reason="nothing is held")


def test_a_knife_that_the_passenger_does_not_see_leaves_its_trap_alone() -> None:
    passenger = riding()
    line, limits = line_of(PATH, DEPTH, Limits()), Limits()
    kinetics = HeldTogether(RUBIDIUM, LOSSES, line, limits, passenger)
    run = kinetics.run(Law(start=8.0), kinetics.start(ATOMS, TEMPERATURE), TARGET, 100.0)
    assert run.reached
    # Its atoms go by the background gas only: nothing else is lost over a depth that stays.
    left = math.exp(float(run.steps[-1].at(run.time)[3]))
    assert left == pytest.approx(3e5 * math.exp(-run.time / 45.0), rel=1e-4)


def test_equal_clouds_in_equal_traps_exchange_no_heat() -> None:
    """Two halves of one gas stay at one temperature, whatever the ramp: nothing flows."""
    half = Gas(statistics=Statistics.BOSE, mass=HEAVY, scattering_length=70.0 * bohr_radius)
    passenger = Passenger(
        gas=half, path=PATH, atoms=7.5e5, temperature=TEMPERATURE, scattering_length=90.0 * bohr_radius,
        losses=LOSSES, follows_depth=True,
    )  # fmt: skip
    line, limits = line_of(PATH, SCALE, Limits()), Limits()
    kinetics = HeldTogether(half, LOSSES, line, limits, passenger)
    run = kinetics.run(Law(start=7.0), kinetics.start(7.5e5, TEMPERATURE), TARGET, 100.0)
    assert run.reached
    values = np.array([step.finish for step in run.steps])
    assert values[:, 3] == pytest.approx(values[:, 0], abs=1e-4)
    assert values[:, 4] == pytest.approx(values[:, 1], abs=1e-4)
