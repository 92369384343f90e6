"""Caveats of a ramp come from its worst numbers, each at its limit, gravest first."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from physics.caveats import Severity
from physics.constants import atomic_mass, boltzmann
from physics.evaporation import Evaporation, evaporate
from physics.evaporation_rates import Process
from physics.gas import Gas
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_caveats import RampCaveatKind, ramp_caveats
from physics.ramp_extremes import RampExtremes
from physics.ramp_shapes import Shape
from physics.ramps import Move, Ramp, Stage
from physics.trap_path import SCALE, HarmonicPath, QuadrupolePath
from physics.traps import HarmonicTrap

MASS = 87.0 * atomic_mass
GAS = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
PATH = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(500.0,) * 3, depth=boltzmann * 3e-4))
RAMP = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=SCALE, end=0.5, shape=Shape.EXPONENTIAL),)),))
NOTHING = RampExtremes(
    lowest_truncation=8.0,
    highest_classical_density=0.01,
    fastest_trap=0.01,
    fastest_depth=0.3,
    most_hydrodynamic=0.1,
    fastest_loss=0.01,
    lowest_fermi_temperature=math.nan,
    three_body_scaling=math.nan,
    three_body_unitarity=math.nan,
    farthest_transfer=math.nan,
    polarised=False,
    background_unknown=False,
)


@pytest.fixture(scope="module")
def run() -> Evaporation:
    return evaporate(GAS, 1e6, 3e-5, RAMP, PATH, losses=Losses(background_lifetime=20.0, three_body=4e-41))


def test_a_quiet_ramp_has_none(run: Evaporation) -> None:
    assert ramp_caveats(run, NOTHING) == ()


@pytest.mark.parametrize(
    ("name", "kind", "shown", "grave"),
    [
        ("lowest_truncation", RampCaveatKind.SHALLOW, 4.9, 3.9),
        ("highest_classical_density", RampCaveatKind.ESTIMATES, 0.31, None),
        ("fastest_trap", RampCaveatKind.FAST_TRAP, 0.11, 1.1),
        ("fastest_depth", RampCaveatKind.FAST_DEPTH, 1.1, 3.1),
        ("most_hydrodynamic", RampCaveatKind.HYDRODYNAMIC, 1.1, 5.1),
        ("fastest_loss", RampCaveatKind.FAST_LOSS, 0.11, 1.1),
        ("farthest_transfer", RampCaveatKind.TRANSFER_APART, 0.4, 1.1),
        ("lowest_fermi_temperature", RampCaveatKind.PAULI_BLOCKING, 0.4, None),
        ("three_body_scaling", RampCaveatKind.THREE_BODY_SCALING, None, 1.1),
        ("three_body_unitarity", RampCaveatKind.THREE_BODY_UNITARITY, None, 1.1),
    ],
)
def test_each_worst_number(
    run: Evaporation, name: str, kind: RampCaveatKind, shown: float | None, grave: float | None
) -> None:
    for value, severity in ((shown, Severity.NOTE), (grave, Severity.WARNING)):
        if value is not None:
            (caveat,) = ramp_caveats(run, replace(NOTHING, **{name: value}))
            assert (caveat.kind, caveat.severity, caveat.value) == (kind, severity, value)
            assert caveat.id == kind.name.lower()


def test_what_is_not_known_and_what_cannot_be(run: Evaporation) -> None:
    bare = replace(run, losses=Losses())
    found = ramp_caveats(bare, replace(NOTHING, background_unknown=True), open_share=0.04)
    kinds = RampCaveatKind
    assert [c.kind for c in found] == [kinds.ONE_WAY_OUT, kinds.NO_BACKGROUND, kinds.THREE_BODY_UNKNOWN]
    assert found[0].value == 0.04
    assert kinds.ONE_WAY_OUT not in {c.kind for c in ramp_caveats(bare, NOTHING, open_share=0.3)}
    fast = replace(NOTHING, polarised=True, fastest_trap=2.0, background_unknown=True, lowest_fermi_temperature=0.1)
    found = ramp_caveats(run, fast, open_share=0.04)
    assert [c.kind for c in found] == [kinds.POLARISED, kinds.FAST_TRAP, kinds.NO_BACKGROUND]
    assert found[0].severity is Severity.REFUSAL


def test_heat_of_scattered_light_counts_against_the_energy_at_the_end() -> None:
    rate = 5e-7 * boltzmann
    lit = HarmonicPath(mass=MASS, trap=PATH.trap, light_heating=rate)
    hold = Ramp(stages=(Stage(duration=60.0),))
    run = evaporate(GAS, 1e6, 1e-5, hold, lit, losses=Losses(background_lifetime=1e3, three_body=0.0))
    (caveat,) = ramp_caveats(run, NOTHING)
    assert caveat.kind is RampCaveatKind.LIGHT_HEATING
    assert caveat.value == pytest.approx(run.budget.energy[Process.LIGHT] / run.budget.energy_after)
    assert caveat.value == pytest.approx(60.0 * 5e-7 / (3.0 * run.final["temperature"]), rel=0.05)


def test_loss_at_the_zero_of_a_field() -> None:
    zero = QuadrupolePath(moment=4.64e-24, gradient=2.0, depth=boltzmann * 5e-3)
    for temperature, severity in ((4e-4, None), (1e-4, Severity.NOTE), (1e-5, Severity.WARNING)):
        run = evaporate(
            replace(GAS, scattering_length=0.0),
            1e5,
            temperature,
            Ramp(stages=(Stage(duration=3.0),)),
            zero,
            losses=Losses(background_lifetime=1e3, three_body=0.0),
        )
        found = [c for c in ramp_caveats(run, NOTHING) if c.kind is RampCaveatKind.SPIN_FLIPS]
        assert [c.severity for c in found] == ([] if severity is None else [severity])
        if found:
            assert found[0].value == pytest.approx(run.budget.atoms[Process.SPIN_FLIPS] / 1e5)
