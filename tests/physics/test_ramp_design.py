"""Designed ramps: the best of the runs, limits, and a ramp that does what its law did."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.constants import atomic_mass, boltzmann
from physics.evaporation import Cancelled, EndReason, evaporate
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.held_truncation import Limits
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_design import Bound, RampDesign, design_ramp
from physics.trap_path import DEPTH, SCALE, HarmonicPath
from physics.traps import HarmonicTrap

MASS = 87.0 * atomic_mass
GAS = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
PATH = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(1500.0, 1500.0, 1500.0), depth=boltzmann * 5e-4))
LOSSES = Losses(background_lifetime=20.0, three_body=4e-41)
TARGET = Target(peak_phase_space_density=2.5)


def design(**given: object) -> RampDesign:
    arguments: dict[str, object] = {"losses": LOSSES, "drift": False, **given}
    return design_ramp(GAS, 2e6, 5e-5, PATH, SCALE, TARGET, **arguments)  # type: ignore[arg-type]


@pytest.fixture(scope="module")
def designed() -> RampDesign:
    return design(drift=True)


def test_the_ramp_reaches_the_target_with_the_atoms_of_the_best_run(designed: RampDesign) -> None:
    assert designed.reached
    run = designed.simulated
    assert run.reason is EndReason.TARGET
    assert run.time[-1] == pytest.approx(designed.ramp.duration, rel=1e-5)
    assert run.atoms[-1] == pytest.approx(designed.trade_off.best_atoms[-1], rel=5e-3)
    assert len(designed.ramp.stages) == 6
    # A normal ramp: simulated again it gives the same.
    again = evaporate(GAS, 2e6, 5e-5, designed.ramp, PATH, losses=LOSSES, target=TARGET)
    assert again.atoms[-1] == run.atoms[-1]


def test_no_held_truncation_does_better(designed: RampDesign) -> None:
    trade = designed.trade_off
    assert trade.best_atoms[-1] >= np.max(trade.atoms[trade.reached.astype(bool)])
    assert np.all(np.diff(trade.times) > 0.0)
    assert np.all(np.diff(trade.best_atoms) > 0.0)
    assert np.all(np.diff(trade.truncation) > 0.0)
    # Too shallow loses atoms, too deep loses time: the best is inside.
    best = float(trade.truncation[np.argmax(np.where(trade.reached, trade.atoms, 0.0))])
    assert 7.0 < best < 12.0


def test_what_binds_is_named_with_its_gain(designed: RampDesign) -> None:
    bounds = dict(designed.bounds)
    # A dense cloud in a tight trap: three-body loss and collisions before the background gas.
    assert bounds[Bound.THREE_BODY] > bounds[Bound.BACKGROUND] > 0.0
    assert Bound.TIME not in bounds
    gains = [gain for _, gain in designed.bounds]
    assert gains == sorted(gains, reverse=True)


def test_heat_of_every_kind_binds() -> None:
    # Noise that brings the energy up by e in a few seconds is in the way as heat is.
    noisy = design_ramp(
        GAS, 2e6, 5e-5, PATH, SCALE, TARGET, losses=Losses(intensity_noise=3e-8, background_lifetime=20.0), drift=False
    )
    assert dict(noisy.bounds)[Bound.HEATING] > 0.0


def test_a_time_limit_costs_atoms_and_binds(designed: RampDesign) -> None:
    hurried = design(limits=Limits(time=0.3))
    assert hurried.reached
    assert hurried.simulated.time[-1] <= 0.3 * (1.0 + 1e-6)
    assert hurried.simulated.atoms[-1] < designed.simulated.atoms[-1]
    assert dict(hurried.bounds)[Bound.TIME] > 0.0


def test_a_speed_limit_and_a_range_bind() -> None:
    slow = design(limits=Limits(fastest=2.0))
    assert dict(slow.bounds)[Bound.SPEED] > 0.0
    values = np.diff(slow.simulated.controls[SCALE]) / np.diff(slow.simulated.time)
    assert np.max(np.abs(values)) < 2.0 * 1.001
    shallow = design(limits=Limits(low=0.015, time=30.0))
    assert shallow.reached
    assert Bound.RANGE in dict(shallow.bounds)
    assert np.min(shallow.simulated.controls[SCALE]) >= 0.015 * (1.0 - 1e-9)


def test_an_unreachable_target_gives_the_best_ramp_and_says_so() -> None:
    thin = design_ramp(GAS, 2e4, 5e-5, PATH, SCALE, TARGET, losses=Losses(background_lifetime=0.5), drift=False)
    assert not thin.reached
    assert thin.bounds == ()  # no limit is in the way
    short = design_ramp(GAS, 2e4, 5e-5, PATH, SCALE, TARGET, limits=Limits(low=0.3, time=2.0), drift=False)
    assert not short.reached
    assert [bound for bound, _ in short.bounds] == [Bound.RANGE]
    assert math.isnan(short.bounds[0][1])
    slow = design_ramp(GAS, 2e6, 5e-5, PATH, SCALE, TARGET, limits=Limits(fastest=0.1, time=2.0), drift=False)
    assert [bound for bound, _ in slow.bounds] == [Bound.SPEED, Bound.TIME]
    assert thin.simulated.reason is not EndReason.TARGET
    assert len(thin.trade_off.times) == 0


def test_the_depth_alone_can_be_the_control() -> None:
    knife = design_ramp(GAS, 2e6, 5e-5, PATH, DEPTH, TARGET, losses=LOSSES, drift=False)
    assert knife.reached
    # At fixed frequencies the collision rate runs away: less time.
    assert knife.simulated.rows.frequencies[-1, 0] == pytest.approx(1500.0)


def test_progress_and_cancelling() -> None:
    seen: list[float] = []

    def tick(share: float) -> bool:
        seen.append(share)
        return len(seen) < 4

    with pytest.raises(Cancelled):
        design(tick=tick)
    assert seen == sorted(seen)
    assert all(0.0 <= share < 1.0 for share in seen)


def test_what_cannot_be_is_said_in_a_sentence() -> None:
    polarised = Gas(statistics=Statistics.FERMI, mass=MASS)
    with pytest.raises(ValueError, match=r"^atoms that do not collide cannot be evaporated$"):
        design_ramp(polarised, 1e6, 5e-5, PATH, SCALE, Target(reduced_temperature=0.5))
    with pytest.raises(ValueError, match=r"^a designed ramp needs one stage or more, got 0$"):
        design(stages=0)
