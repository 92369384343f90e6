"""From the plan to what the kinetics of evaporation takes."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from scipy import constants

import physics
from app.answers.inputs import cloud_of, scattering_in_use, values_of
from app.answers.ramp_inputs import (
    gas_of,
    limits_of,
    losses_of,
    measured_clouds,
    path_of,
    ramp_of,
    state_of,
    target_of,
    temperature_of_widths,
)
from app.kinds import BEAM_POWER
from app.kinds import DEPTH as TRAP_DEPTH
from app.plan import DEFAULT_PLAN, Plan, PlanError, parse_plan, plan_with, read_plan
from app.units import CLOUD_WIDTH, TIME, Quantity, read_quantity
from physics.evaporation import EndReason
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.held_truncation import Limits
from physics.ramps import Control, Knob
from physics.surveyed_path import SurveyedPath
from physics.trap_path import HarmonicPath, QuadrupolePath

ROOT = Path(__file__).resolve().parents[2]
PRESETS = sorted((ROOT / "presets" / "plans").glob("*.toml"))
FILE = ROOT / "tests" / "data" / "plan_of_a_ramp.toml"
DEPTH = Control(Knob.DEPTH)
KELVIN = constants.k

HEAD = 'coldward = 1\n[species]\nkey = "87Rb"\nstate = "F=1 mF=-1"\n[cloud]\natoms = "1e6"\ntemperature = "5 uK"\n'
HARMONIC = '[trap]\nfrequencies = ["120 Hz", "120 Hz", "20 Hz"]\ndepth = "50 uK"\n'
BEAMS = (
    '[[trap.beam]]\nname = "A"\nwavelength = "1064 nm"\npower = "2 W"\nwaist = "60 um"\ndirection = [1, 0, 0]\n'
    '[[trap.beam]]\nname = "B"\nwavelength = "1064 nm"\npower = "3 W"\nwaist = "60 um"\ndirection = [0, 1, 0]\n'
)
QUADRUPOLE = '[trap]\ngravity = "off"\n[trap.coils]\ngradient = "200 G/cm"\nknife = "20 MHz"\n'


def plan_of(trap: str, *stages: str) -> Plan:
    return parse_plan(HEAD + trap + "".join(f"[[ramp.stage]]\n{stage}\n" for stage in stages), "a.toml")


# --- gas, losses, target, limits ---


@pytest.mark.parametrize("key", ["87Rb", "6Li", "164Dy", "52Cr"])
def test_the_gas_is_that_of_the_cloud(key: str) -> None:
    plan = plan_with(DEFAULT_PLAN, {"species.key": key})
    cloud = cloud_of(plan, state_of(plan), scattering_in_use(plan, state_of(plan)), values_of(plan))
    assert gas_of(plan) == Gas.of(cloud)


def test_losses_are_typed_ones_or_those_of_the_data() -> None:
    plan = plan_with(DEFAULT_PLAN, {"losses.background_lifetime": "60 s"})
    losses = losses_of(plan)
    assert losses.background_lifetime == 60.0
    known = state_of(plan).three_body
    assert known is not None
    assert losses.three_body == known.value
    assert losses.heating is None


def test_the_target_is_the_one_that_is_named() -> None:
    assert target_of(DEFAULT_PLAN) is None
    plan = plan_with(DEFAULT_PLAN, {"target.condensate_atoms": "2e4"})
    assert target_of(plan) == Target(condensate_atoms=2e4)


def test_limits_are_those_of_the_control() -> None:
    plan = read_plan(FILE)
    depth = limits_of(plan, DEPTH)
    assert (depth.time, depth.low, depth.high) == (
        12.0,
        read_quantity("1 uK", TRAP_DEPTH).value,
        read_quantity("60 uK", TRAP_DEPTH).value,
    )
    assert depth.fastest is not None
    assert depth.fastest / KELVIN == pytest.approx(40e-6)
    assert limits_of(plan, Control(Knob.POWER, "A")) == Limits(time=12.0, fastest=2.0)
    assert limits_of(plan, Control(Knob.SCALE)) == Limits(time=12.0)


def test_all_light_together_keeps_the_limits_of_each_beam() -> None:
    plan = read_plan(FILE)
    a, b = Control(Knob.POWER, "A"), Control(Knob.POWER, "B")
    one = next(own for own in plan.limits.controls if own.control == a)
    ranged = replace(one, low=read_quantity("0.1 W", BEAM_POWER), high=read_quantity("4 W", BEAM_POWER))
    other = replace(one, control=b, low=read_quantity("0.05 W", BEAM_POWER), high=None, fastest=None)
    plan = replace(plan, limits=replace(plan.limits, controls=(ranged, other)))
    found = limits_of(plan, Control(Knob.SCALE), {a: 2.0, b: 0.5})
    assert found == Limits(time=12.0, low=0.1, high=2.0, fastest=1.0)
    # Of beams that are not there nothing is kept.
    assert limits_of(plan, Control(Knob.SCALE), {b: 0.5}) == Limits(time=12.0, low=0.1)


# --- traps and ramps ---


def test_paths_are_of_the_kind_that_the_trap_is() -> None:
    harmonic = path_of(plan_of(HARMONIC))
    assert isinstance(harmonic, HarmonicPath)
    assert harmonic.standing[DEPTH] / KELVIN == pytest.approx(50e-6)
    beams = path_of(plan_of(BEAMS))
    assert isinstance(beams, SurveyedPath)
    assert beams.standing[Control(Knob.POWER, "B")] == 3.0
    assert path_of(plan_of(BEAMS)) is beams, "surveys are kept for the same trap"


def test_a_quadrupole_moves_by_its_knife_or_by_its_depth() -> None:
    knife = path_of(plan_of(QUADRUPOLE, 'duration = "1 s"\ncontrol = "knife"\nend = "2 MHz"'))
    assert isinstance(knife, SurveyedPath)
    by_depth = path_of(plan_of(QUADRUPOLE, 'duration = "1 s"\ncontrol = "depth"\nend = "100 uK"'))
    assert isinstance(by_depth, QuadrupolePath)
    # E = h f_knife |gF mF| / |gF| mF=1: the knife cuts at h times its frequency.
    assert by_depth.depth / constants.h == pytest.approx(20e6, rel=1e-3)
    assert by_depth.gradient == pytest.approx(2.0)
    assert by_depth.moment / constants.value("Bohr magneton") == pytest.approx(0.5, rel=5e-3)
    point, counted = by_depth.at(by_depth.standing), knife.at(knife.standing)
    assert counted.volume / point.volume == pytest.approx(1.0, rel=0.01)


def test_a_power_law_by_its_time_constant_goes_where_it_leads() -> None:
    first = 'duration = "2 s"\ncontrol = "depth"\nend = "30 uK"\nshape = "linear"'
    second = 'duration = "3 s"\ncontrol = "depth"\nshape = "power law"\ntau = "1.5 s"\nexponent = 2'
    plan = plan_of(HARMONIC, first, second)
    ramp, path = ramp_of(plan), path_of(plan)
    times = np.array([2.0, 3.0, 5.0])
    expected = 30e-6 * (1.0 + (times - 2.0) / 1.5) ** -2.0
    assert ramp.values(path.standing, times)[DEPTH] / KELVIN == pytest.approx(expected, rel=1e-9)


def test_a_transfer_goes_into_the_other_trap() -> None:
    plan = read_plan(FILE)
    ramp = ramp_of(plan)
    assert [stage.label for stage in ramp.stages] == ["fast", "", "", "handed over"]
    transfer = ramp.stages[3].transfer
    assert transfer is not None
    assert not transfer.sudden
    assert transfer.path.standing[Control(Knob.POWER, "A")] == 1.2
    assert ramp.stages[0].transfer is None
    values = ramp.values(path_of(plan).standing, np.array([1.5, 3.5]))
    assert values[Control(Knob.SCALE)] == pytest.approx([1.0, 0.4])


@pytest.mark.parametrize(
    ("plan", "sentence"),
    [
        (plan_of(HARMONIC), r"^the plan has no ramp: give it stages \[\[ramp\.stage\]\]$"),
        (
            plan_of(HARMONIC, 'duration = "1 s"', 'duration = "1 s"\ncontrol = "power"\nbeam = "A"\nend = "1 W"'),
            r"^stage 2 of the ramp moves power A, which the trap does not have: depth, scale$",
        ),
        (
            plan_of(BEAMS, 'duration = "1 s"\ncontrol = "power"\nbeam = "C"\nend = "1 W"'),
            r"^stage 1 of the ramp moves power C, which the trap does not have: power A, power B, scale$",
        ),
        (
            plan_of(HARMONIC.replace('depth = "50 uK"\n', ""), 'duration = "1 s"\ncontrol = "depth"\nend = "1 uK"'),
            r"^stage 1 of the ramp needs a start of depth, which is not known$",
        ),
        (
            plan_of(HARMONIC.replace('depth = "50 uK"\n', ""), 'duration = "1 s"\ncontrol = "scale"\nend = 0.5'),
            r"^stage 1 of the ramp: the depth of the trap is not known; give trap\.depth, or a stage that moves",
        ),
        (
            plan_of(
                HARMONIC,
                'duration = "1 s"\ntransfer = "slow"\n[ramp.stage.trap]\nfrequencies = ["9 Hz", "9 Hz", "9 Hz"]',
            ),
            r"^stage 1 of the ramp: the depth of the trap is not known; give ramp\.stage\.trap\.depth, or a stage",
        ),
        (
            plan_of(
                HARMONIC.replace('depth = "50 uK"\n', ""),
                'duration = "1 s"\ncontrol = "depth"\nshape = "power law"\ntau = "1 s"\nexponent = 1',
            ),
            r"^stage 1 of the ramp needs a start of depth, which is not known$",
        ),
        (
            plan_of(BEAMS, 'duration = "1 s"\ncontrol = "power"\nbeam = "A"\nend = "0 W"\nshape = "exponential"'),
            r"^stage 1 of the ramp: power A cannot go exponentially from 2 to 0: one sign, and not zero$",
        ),
    ],
)
def test_a_ramp_that_does_not_fit_its_trap_is_told_so(plan: Plan, sentence: str) -> None:
    with pytest.raises(PlanError, match=sentence):
        ramp_of(plan)


def test_a_ramp_may_say_the_depth_that_the_trap_does_not() -> None:
    trap = HARMONIC.replace('depth = "50 uK"\n', "")
    plan = plan_of(trap, 'duration = "1 s"\ncontrol = "depth"\nstart = "40 uK"\nend = "20 uK"', 'duration = "1 s"')
    run = physics.evaporate(gas_of(plan), 1e6, 5e-6, ramp_of(plan), path_of(plan))
    assert run.final["depth"] / KELVIN == pytest.approx(20e-6)


# --- measured clouds ---


def test_widths_say_the_temperature_that_made_them() -> None:
    """Atoms drawn from the classical cloud, and let go."""
    chance, count = np.random.default_rng(7), 400_000
    mass, temperature, time = state_of(DEFAULT_PLAN).mass, 1.3e-6, 0.012
    frequencies = (160.0, 90.0, 20.0)
    widths = []
    for f in frequencies:
        speed = math.sqrt(KELVIN * temperature / mass)
        places = chance.normal(0.0, speed / (2.0 * math.pi * f), count) + chance.normal(0.0, speed, count) * time
        widths.append(Quantity(f"{1e6 * np.std(places)} um", float(np.std(places))))
    for some in (widths, widths[:2], widths[:1]):
        found, sigma = temperature_of_widths(mass, frequencies, tuple(some), Quantity("12 ms", time))
        assert found == pytest.approx(temperature, rel=5e-3)
        assert sigma is None


def test_uncertainties_of_widths_and_time_go_into_that_of_the_temperature() -> None:
    chance, mass = np.random.default_rng(8), state_of(DEFAULT_PLAN).mass
    frequencies = (60.0, 40.0, 20.0)
    widths = (read_quantity("180(4) um", CLOUD_WIDTH), read_quantity("190(9) um", CLOUD_WIDTH))
    time = read_quantity("15(1) ms", TIME)
    _, sigma = temperature_of_widths(mass, frequencies, widths, time)
    assert sigma is not None
    found = []
    for _ in range(4000):
        drawn = tuple(replace(w, value=chance.normal(w.value, w.sigma)) for w in widths)
        found.append(
            temperature_of_widths(mass, frequencies, drawn, replace(time, value=chance.normal(0.015, 0.001)))[0]
        )
    assert sigma == pytest.approx(np.std(found), rel=0.1)


def test_a_cloud_is_measured_in_the_trap_at_its_time() -> None:
    plan = read_plan(FILE)
    first, second = measured_clouds(plan)
    assert (first.atoms, first.atoms_sigma, first.time) == (1.1e6, 1e5, 1.5)
    assert (first.temperature, first.temperature_sigma) == pytest.approx((3e-6, 2e-7))
    assert second.time == 3.8
    # At 3.8 s the new trap stands, whose frequencies are those of two beams.
    assert 0.2e-6 < second.temperature < 5e-6


def test_a_cloud_outside_of_the_ramp_is_refused() -> None:
    measured = '[[measured]]\nlabel = "late"\natoms = "1e5"\ntemperature = "1 uK"\nstage = 3\n'
    plan = parse_plan(HEAD + HARMONIC + '[[ramp.stage]]\nduration = "1 s"\n' + measured, "a.toml")
    with pytest.raises(PlanError, match=r'^the measured cloud "late": the ramp has stages 1 to 1, got 3$'):
        measured_clouds(plan)


def test_widths_say_nothing_in_a_quadrupole() -> None:
    measured = '[[measured]]\nlabel = "a"\natoms = "1e5"\nwidths = ["90 um"]\nexpansion_time = "5 ms"\n'
    (cloud,) = measured_clouds(parse_plan(HEAD + QUADRUPOLE + measured, "a.toml"))
    assert math.isnan(cloud.temperature)
    assert cloud.reason == "the trap has no frequencies, and widths say nothing there"


# --- presets ---


@pytest.mark.parametrize("path", PRESETS, ids=lambda path: path.stem)
def test_the_ramps_of_the_presets_fit_their_traps(path: Path) -> None:
    plan = read_plan(path)
    if plan.ramp:
        assert list(ramp_of(plan).placed(path_of(plan).standing))


def test_the_preset_in_five_stages_reaches_a_condensate() -> None:
    plan = read_plan(ROOT / "presets" / "plans" / "evaporation_rubidium.toml")
    run = physics.evaporate(
        gas_of(plan),
        plan.cloud.atoms.value,
        plan.cloud.temperature.value,
        ramp_of(plan),
        path_of(plan),
        losses=losses_of(plan),
        target=target_of(plan),
    )
    assert run.reason is EndReason.TARGET
    assert len(run.stages) == 5
    for cloud in measured_clouds(plan):
        index = int(np.searchsorted(run.time, cloud.time))
        assert run.atoms[index] == pytest.approx(cloud.atoms, rel=0.15)
        assert run.temperature[index] == pytest.approx(cloud.temperature, rel=0.15)
