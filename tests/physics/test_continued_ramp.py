"""The rest of a ramp goes on as the whole ramp would."""

from __future__ import annotations

import numpy as np
import pytest

from physics.constants import atomic_mass, boltzmann
from physics.continued_ramp import after_stage, after_time
from physics.evaporation import evaporate
from physics.gas import Gas
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_shapes import Shape
from physics.ramps import Move, Ramp, Stage
from physics.transfer import Transfer
from physics.trap_path import DEPTH, SCALE, HarmonicPath
from physics.traps import HarmonicTrap

MASS = 87.0 * atomic_mass
GAS = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
PATH = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(500.0, 500.0, 100.0), depth=boltzmann * 3e-4))
OTHER = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(200.0, 200.0, 100.0), depth=boltzmann * 9e-5))
TABLE = ((0.0, 0.02), (1.0, 0.015), (2.0, 0.01))
RAMP = Ramp(
    stages=(
        Stage(duration=2.0, moves=(Move(control=SCALE, end=0.3, shape=Shape.EXPONENTIAL),)),
        Stage(duration=1.0),
        Stage(duration=3.0, moves=(Move(control=SCALE, end=0.1, shape=Shape.POWER_LAW, exponent=1.4),)),
        Stage(duration=1.0, moves=(Move(control=SCALE, end=0.02),)),
        Stage(duration=2.0, moves=(Move(control=SCALE, shape=Shape.TABLE, points=TABLE),)),
    )
)


@pytest.mark.parametrize("time", [0.0, 0.7, 2.0, 2.5, 4.2, 6.4, 7.5, 8.5])
def test_controls_go_on_as_they_would(time: float) -> None:
    rest = after_time(RAMP, PATH, time)
    assert rest.ramp is not None
    assert rest.begin == pytest.approx(time)
    assert rest.ramp.duration == pytest.approx(9.0 - time)
    later = np.linspace(0.0, 9.0 - time, 23)
    np.testing.assert_allclose(
        rest.ramp.values(rest.path.standing, later)[SCALE], RAMP.values(PATH.standing, time + later)[SCALE], rtol=1e-9
    )


@pytest.mark.parametrize("stage", [1, 2, 3])
def test_a_cloud_measured_as_planned_ends_as_planned(stage: int) -> None:
    losses = Losses(background_lifetime=40.0)
    whole = evaporate(GAS, 2e6, 4e-5, RAMP, PATH, losses=losses)
    rest = after_stage(RAMP, PATH, stage)
    assert rest.ramp is not None
    row = whole.stages[stage - 1].last
    again = evaporate(GAS, float(whole.atoms[row]), float(whole.temperature[row]), rest.ramp, rest.path, losses=losses)
    assert again.atoms[-1] == pytest.approx(whole.atoms[-1], rel=1e-5)
    assert again.temperature[-1] == pytest.approx(whole.temperature[-1], rel=1e-5)


def test_the_trap_after_a_transfer_is_the_other_one() -> None:
    ramp = Ramp(stages=(Stage(duration=1.0), Stage(duration=1.0, transfer=Transfer(path=OTHER)), Stage(duration=1.0)))
    for rest in (after_stage(ramp, PATH, 2), after_time(ramp, PATH, 1.5)):
        assert rest.path.standing[DEPTH] == pytest.approx(boltzmann * 9e-5)
        assert rest.ramp is not None
        assert all(stage.transfer is None for stage in rest.ramp.stages)
    assert after_stage(ramp, PATH, 1).path.standing[DEPTH] == pytest.approx(boltzmann * 3e-4)


def test_nothing_follows_the_end() -> None:
    assert after_stage(RAMP, PATH, 5).ramp is None
    assert after_time(RAMP, PATH, 9.0).ramp is None
    assert after_stage(RAMP, PATH, 0).ramp == RAMP


def test_what_cannot_be_is_said_in_a_sentence() -> None:
    with pytest.raises(ValueError, match=r"^the ramp has stages 1 to 5, got 6$"):
        after_stage(RAMP, PATH, 6)
    with pytest.raises(ValueError, match=r"^the ramp lasts 9 s, got the time 9.5 s$"):
        after_time(RAMP, PATH, 9.5)
