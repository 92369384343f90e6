"""Evaporation along a ramp: balances, the size of steps, jumps, ends, rows.

Published trajectories are missing here: none was found with all that a simulation needs. Published scaling laws stand
in `test_held_truncation`, integrations by quadratures in `test_evaporation_rates`.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.special import gammainc

from physics.constants import atomic_mass, boltzmann
from physics.curve_shape import CurveShape
from physics.evaporation import Cancelled, EndReason, Evaporation, evaporate
from physics.evaporation_rates import Process
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob, Move, Ramp, Stage
from physics.transfer import Transfer
from physics.trap_path import DEPTH, SCALE, HarmonicPath, QuadrupolePath, TrapPoint
from physics.traps import HarmonicTrap
from physics.truncated_boltzmann import HARMONIC, evaporation_volume, excess_energy, mean_energy

MASS = 87.0 * atomic_mass
RUBIDIUM = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
APART = Gas(statistics=Statistics.FERMI, mass=MASS)
"""Atoms that do not collide."""


def trap(depth: float = 3e-4, *frequencies: float) -> HarmonicPath:
    """Depth in kelvin."""
    return HarmonicPath(
        mass=MASS, trap=HarmonicTrap(frequencies=frequencies or (500.0, 500.0, 100.0), depth=boltzmann * depth)
    )


def hold(duration: float) -> Ramp:
    return Ramp(stages=(Stage(duration=duration),))


def lowering(*ends: float, duration: float = 2.0) -> Ramp:
    moves = [Move(control=SCALE, end=end, shape=Shape.EXPONENTIAL) for end in ends]
    return Ramp(stages=tuple(Stage(duration=duration, moves=(move,)) for move in moves))


BIAS = Control(Knob.BIAS)


# Balances and the size of steps.

LOSSES = Losses(
    background_lifetime=30.0,
    two_body=1e-21,
    three_body=4e-41,
    heating=5e-8,
    intensity_noise=1e-11,
    recombination_heat=boltzmann * 1e-5,
)


def assert_balanced(run: Evaporation) -> None:
    assert abs(run.budget.atoms_missing) < 1e-6
    assert abs(run.budget.energy_missing) < 1e-6
    for stage in run.stages:
        assert abs(stage.budget.atoms_missing) < 1e-6
    if run.stages:
        total = sum(stage.budget.atoms[Process.EVAPORATED] for stage in run.stages)
        assert total == pytest.approx(run.budget.atoms[Process.EVAPORATED], rel=1e-9, abs=1e-6)


@settings(max_examples=40, deadline=None)
@given(
    st.floats(4.0, 8.0),
    st.floats(0.8, 15.0),
    st.lists(st.tuples(st.floats(0.01, 5.0), st.floats(0.02, 2.0), st.sampled_from(list(Shape)[:2])), max_size=4),
)
def test_atoms_and_energy_add_up_along_any_ramp(
    log_atoms: float, eta: float, moves: list[tuple[float, float, Shape]]
) -> None:
    stages = [
        Stage(duration=duration, moves=(Move(control=SCALE, end=end, shape=shape),)) for duration, end, shape in moves
    ]
    run = evaporate(
        RUBIDIUM, 10.0**log_atoms, 3e-4 / eta, Ramp(stages=(*stages, Stage(duration=0.5))), trap(), losses=LOSSES
    )
    assert_balanced(run)
    assert np.all(np.diff(run.atoms) <= 0.0)
    assert np.all(np.diff(run.time) >= 0.0)
    assert np.all(run.temperature > 0.0)
    assert np.all(run.rows.truncation >= 0.099)


def test_results_do_not_depend_on_the_steps() -> None:
    found = [
        evaporate(RUBIDIUM, 2e6, 4e-5, lowering(0.3, 0.1, 0.03), trap(), losses=LOSSES, tolerance=tolerance).final
        for tolerance in (1e-6, 1e-7, 1e-10)
    ]
    for name in ("atoms", "temperature", "peak_phase_space_density"):
        assert found[0][name] == pytest.approx(found[2][name], rel=1e-5)
        assert found[1][name] == pytest.approx(found[2][name], rel=2e-6)


def test_a_table_is_the_straight_stages_between_its_points() -> None:
    points = ((0.0, 1.0), (1.0, 0.4), (3.0, 0.1))
    table = Ramp(stages=(Stage(duration=3.0, moves=(Move(control=SCALE, shape=Shape.TABLE, points=points),)),))
    straight = Ramp(
        stages=(
            Stage(duration=1.0, moves=(Move(control=SCALE, end=0.4),)),
            Stage(duration=2.0, moves=(Move(control=SCALE, end=0.1),)),
        )
    )
    one, other = (evaporate(RUBIDIUM, 2e6, 4e-5, ramp, trap(), losses=LOSSES) for ramp in (table, straight))
    assert one.atoms[-1] == pytest.approx(other.atoms[-1], rel=1e-7)
    assert_balanced(one)


def test_several_controls_at_once() -> None:
    # Depth down by 2 while the whole trap falls to a half: as one that falls by 4 in depth and sqrt(2) in frequency.
    moves = (Move(control=SCALE, end=0.5), Move(control=DEPTH, end=boltzmann * 1.5e-4))
    run = evaporate(RUBIDIUM, 2e6, 4e-5, Ramp(stages=(Stage(duration=2.0, moves=moves),)), trap(), losses=LOSSES)
    assert run.rows.depth[-1] / boltzmann == pytest.approx(7.5e-5)
    assert run.rows.frequencies[-1, 0] == pytest.approx(500.0 / math.sqrt(2.0))
    np.testing.assert_allclose(run.rows.depth, run.controls[SCALE] * run.controls[DEPTH], rtol=3e-5)
    assert_balanced(run)


# Jumps and transfers.


def test_a_jump_cuts_the_cloud_and_is_in_the_balance() -> None:
    jump = Ramp(
        stages=(Stage(duration=1e-6, moves=(Move(control=DEPTH, start=boltzmann * 1.5e-4, end=boltzmann * 1.5e-4),)),)
    )
    path = trap()
    run = evaporate(APART, 1e6, 5e-5, jump, path)
    # The first setting is the start: no jump, the cloud is given in the trap as it then is.
    assert run.budget.atoms[Process.TRANSFER] == 0.0
    two = Ramp(stages=(Stage(duration=1e-6), *jump.stages))
    run = evaporate(APART, 1e6, 5e-5, two, path)
    share = float(gammainc(3, 3.0) / gammainc(3, 6.0))
    assert run.budget.atoms[Process.TRANSFER] == pytest.approx(1e6 * (1.0 - share), rel=1e-6)
    assert run.temperature[-1] == pytest.approx(5e-5, rel=1e-6)
    assert_balanced(run)


@pytest.mark.parametrize("sudden", [True, False])
def test_a_transfer_into_another_trap(sudden: bool) -> None:
    other = trap(1e-3, 250.0, 250.0, 50.0)
    ramp = Ramp(stages=(Stage(duration=0.1), Stage(duration=0.1, transfer=Transfer(path=other, sudden=sudden))))
    run = evaporate(APART, 1e6, 1e-5, ramp, trap())
    # Slowly T follows the frequencies; at once the potential energy is a quarter.
    factor = 5.0 / 8.0 if sudden else 0.5
    assert run.temperature[-1] == pytest.approx(factor * 1e-5, rel=1e-5)
    assert run.rows.frequencies[-1, 0] == pytest.approx(250.0, rel=1e-12)
    assert_balanced(run)
    # All are caught, and what the transfer does to density and temperature is no evaporation.
    kept, handed = run.stages
    assert math.isnan(kept.caught)
    assert handed.caught == pytest.approx(1.0, abs=1e-9)
    assert math.isnan(handed.efficiency)


@pytest.mark.parametrize(
    ("transfer", "why"),
    [
        (Transfer(path=trap(), displacement=(1e-2, 0.0, 0.0)), "the new trap catches none of the cloud"),
        (Transfer(path=trap(1e-7), sudden=False), "the new trap is too shallow for what the cloud becomes in it"),
        (
            Transfer(path=trap(), displacement=(7.2e-5, 0.0, 0.0)),
            r"what the new trap catches, 0\.\d+ of the atoms, is too hot for its depth",
        ),
    ],
)
def test_a_trap_that_does_not_hold_what_it_is_handed(transfer: Transfer, why: str) -> None:
    run = evaporate(
        APART, 1e6, 5e-6, Ramp(stages=(Stage(duration=0.1), Stage(duration=0.1, transfer=transfer))), trap()
    )
    assert run.reason is EndReason.NOT_TRAPPED
    assert re.fullmatch(why, run.explanation)
    assert run.time[-1] == pytest.approx(0.1)
    assert len(run.stages) == 1
    assert_balanced(run)


# Ends.


def test_a_target_ends_the_run_where_it_is_reached() -> None:
    ramp = lowering(0.3, 0.1, 0.03, 0.01, 0.003)
    path = trap(5e-4, 1500.0, 1500.0, 1500.0)
    for target, name, value in (
        (Target(peak_phase_space_density=1.5), "peak_phase_space_density", 1.5),
        (Target(reduced_temperature=1.2), "reduced_temperature", 1.2),
        (Target(condensate_atoms=1e4), "condensate_atoms", 1e4),
    ):
        run = evaporate(RUBIDIUM, 2e6, 5e-5, ramp, path, target=target)
        assert run.reason is EndReason.TARGET
        assert run.final[name] == pytest.approx(value, rel=1e-6)
        assert run.time[-1] < ramp.duration
        assert_balanced(run)


def test_a_target_that_is_met_at_the_start_ends_the_run_there() -> None:
    run = evaporate(RUBIDIUM, 1e6, 2e-7, hold(1.0), trap(3e-6), target=Target(reduced_temperature=5.0))
    assert run.reason is EndReason.TARGET
    assert run.time.tolist() == [0.0]


def test_a_trap_that_is_opened_loses_the_cloud() -> None:
    # Nothing brings order into a cloud without collisions: its levels stay as full as they were.
    run = evaporate(APART, 1e6, 5e-5, lowering(1e-4, duration=1.0), trap())
    assert run.reason is EndReason.NOT_TRAPPED
    assert run.atoms[-1] < 2e4
    assert_balanced(run)
    assert evaporate(APART, 1e6, 1.0, hold(1.0), trap()).reason is EndReason.NOT_TRAPPED


def test_a_cloud_that_dies_out_ends_the_run() -> None:
    run = evaporate(RUBIDIUM, 1e6, 1e-5, hold(30.0), trap(), losses=Losses(background_lifetime=1.0))
    assert run.reason is EndReason.ATOMS
    assert run.atoms[-1] == pytest.approx(100.0, rel=1e-6)
    assert_balanced(run)


def test_a_cloud_that_was_never_trapped_has_no_rows() -> None:
    run = evaporate(RUBIDIUM, 1e6, 1.0, hold(1.0), trap())
    assert len(run.time) == 0
    assert math.isnan(run.final["atoms"])
    assert run.rows.frequencies.shape == (0, 3)


def test_heating_drives_a_cloud_out() -> None:
    run = evaporate(APART, 1e6, 5e-5, hold(1e4), trap(), losses=Losses(heating=1e-6))
    assert run.reason is EndReason.NOT_TRAPPED
    assert run.rows.truncation[-1] == pytest.approx(0.1, rel=0.05)


@dataclass(frozen=True)
class Opening:
    """Holds nothing below a control of 0.5."""

    nodes: int = 25

    @property
    def standing(self) -> Mapping[Control, float]:
        return MappingProxyType({BIAS: 1.0})

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        if controls[BIAS] < 0.5:
            return TrapPoint(depth=None, reason="gravity pulls the atoms out")
        return TrapPoint(depth=boltzmann * 1e-4, volume=1e-12)


def test_a_trap_that_stops_holding_ends_the_run_with_its_reason() -> None:
    ramp = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=BIAS, end=0.1),)),))
    run = evaporate(APART, 1e6, 1e-5, ramp, Opening())
    assert run.reason is EndReason.NOT_TRAPPED
    assert run.explanation == "gravity pulls the atoms out"
    assert 0.4 < run.time[-1] < 0.6


def test_cancelling() -> None:
    seen: list[float] = []

    def tick(share: float) -> bool:
        seen.append(share)
        return len(seen) < 2

    with pytest.raises(Cancelled):
        evaporate(RUBIDIUM, 1e6, 1e-5, lowering(0.5, 0.2, 0.1), trap(), tick=tick)
    assert seen == pytest.approx([0.0, 1.0 / 3.0])


def test_what_cannot_be_is_said_in_a_sentence() -> None:
    with pytest.raises(ValueError, match=r"^atom number must be positive and finite, got 0$"):
        evaporate(RUBIDIUM, 0.0, 1e-5, hold(1.0), trap())
    with pytest.raises(ValueError, match=r"^temperature must be positive and finite, got -1 K$"):
        evaporate(RUBIDIUM, 1e6, -1.0, hold(1.0), trap())
    bottomless = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(1.0, 1.0, 1.0)))
    with pytest.raises(ValueError, match=r"^the depth of the trap must be known to evaporate from it$"):
        evaporate(RUBIDIUM, 1e6, 1e-5, hold(1.0), bottomless)
    with pytest.raises(ValueError, match=r"^a target is one of .*: got none$"):
        Target()
    with pytest.raises(ValueError, match=r"^reduced temperature of a target must be positive and finite, got 0$"):
        Target(reduced_temperature=0.0)
    quadrupole = QuadrupolePath(moment=4.6e-24, gradient=1.0, depth=boltzmann * 1e-3)
    with pytest.raises(ValueError, match=r"^a target reduced temperature needs a trap that has frequencies$"):
        evaporate(RUBIDIUM, 1e6, 1e-5, hold(1.0), quadrupole, target=Target(reduced_temperature=1.0))
    with pytest.raises(ValueError, match=r"^a target of condensate atoms is one for bosons$"):
        evaporate(APART, 1e6, 1e-5, hold(1.0), trap(), target=Target(condensate_atoms=1.0))


# Rows.


def test_rows_are_those_of_the_cloud_at_each_time() -> None:
    run = evaporate(RUBIDIUM, 2e6, 4e-5, lowering(0.3, 0.1), trap(), losses=LOSSES)
    rows, k = run.rows, -1
    eta = rows.truncation[k]
    assert rows.depth[k] / (boltzmann * rows.temperature[k]) == pytest.approx(eta, rel=1e-12)
    mean = rows.energy[k] / rows.atoms[k] / (boltzmann * rows.temperature[k])
    assert mean == pytest.approx(float(mean_energy(HARMONIC, eta)), rel=1e-6)
    n = rows.peak_density[k] / float(gammainc(1.5, eta))
    speed = math.sqrt(8.0 * boltzmann * rows.temperature[k] / (math.pi * MASS))
    sigma = RUBIDIUM.cross_section(rows.temperature[k])
    rate = n * sigma * speed * math.exp(-eta) * float(evaporation_volume(HARMONIC, eta))
    assert rows.evaporation_rate[k] == pytest.approx(rate, rel=1e-6)
    assert rows.evaporated_energy[k] == pytest.approx(eta + float(excess_energy(HARMONIC, eta)), rel=1e-6)
    # Nearly n(0) sigma vbar/2 and n(0) sigma sqrt(2) vbar.
    assert rows.elastic_collision_rate[k] == pytest.approx(0.5 * rows.peak_density[k] * sigma * speed, rel=0.03)
    assert rows.peak_collision_rate[k] == pytest.approx(math.sqrt(2.0) * rows.peak_density[k] * sigma * speed, rel=1e-9)
    assert rows.adiabaticity[k] == pytest.approx(
        0.5 * math.log(3.0) / 2.0 / (2.0 * math.pi * rows.frequencies[k, 2]), rel=1e-6
    )
    first, last = run.stages
    assert (first.first, last.last) == (0, len(run.time) - 1)
    D, N = rows.classical_phase_space_density, rows.atoms
    assert last.efficiency == pytest.approx(
        -math.log(D[-1] / D[first.last]) / math.log(N[-1] / N[first.last]), rel=1e-9
    )


@pytest.mark.parametrize("eta", [500.0, 5000.0, 1e5])
def test_a_very_deep_trap_is_that_of_a_harmonic_bottom(eta: float) -> None:
    # Beyond the range of the tables: background loss and heating of an uncut cloud, closed and tabulated.
    losses = Losses(background_lifetime=20.0, heating=1e-7, three_body=1e-38)
    u = np.geomspace(1e-9, 1.0, 90)
    deep = trap(eta * 1e-5)

    @dataclass(frozen=True)
    class Tabulated:
        nodes: int = 9

        @property
        def standing(self) -> Mapping[Control, float]:
            return deep.standing

        def at(self, controls: Mapping[Control, float]) -> TrapPoint:
            point, w = deep.at(controls), u**1.5 * (1.0 + u)
            shape = CurveShape(energies=u, volumes=w / w[-1])
            return TrapPoint(depth=point.depth, volume=2.0 * point.volume, curve=shape, frequencies=point.frequencies)

    runs = [evaporate(APART, 1e6, 1e-5, lowering(0.8), path, losses=losses) for path in (deep, Tabulated())]
    assert runs[0].temperature[0] == pytest.approx(1e-5, rel=1e-6)
    assert runs[1].temperature[0] == pytest.approx(1e-5, rel=3e-2 if eta < 1e3 else 3e-3)
    for name in ("atoms", "temperature"):
        one, other = (run.final[name] for run in runs)
        # The table ends at eta = 2000, where the arms still hold a thousandth.
        assert other == pytest.approx(one, rel=max(5.0 / eta, 1e-3))
