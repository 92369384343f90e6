"""Traps of beams and coils along their controls: what moves, what is remembered, and a ramp in a real trap."""

from __future__ import annotations

import numpy as np
import pytest

from physics.constants import boltzmann
from physics.evaporation import EndReason, evaporate
from physics.gas import Gas
from physics.losses import Losses
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob, Move, Ramp, Stage
from physics.species import load_species
from physics.surveyed_path import SurveyedPath
from physics.trap_path import SCALE
from physics.traps.beam import GaussianBeam
from physics.traps.coils import Coils
from physics.traps.trap import Trap

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
A, B = Control(Knob.POWER, "A"), Control(Knob.POWER, "B")


def crossed(power: float = 2.5) -> Trap:
    return Trap(
        beams=(
            GaussianBeam(name="A", wavelength=1064e-9, power=power, waists=70e-6, direction=(1.0, 0.0, 0.0)),
            GaussianBeam(name="B", wavelength=1064e-9, power=1.7, waists=55e-6, direction=(0.0, 1.0, 0.0)),
        )
    )


@pytest.fixture(scope="module")
def path() -> SurveyedPath:
    return SurveyedPath(trap=crossed(), state=RUBIDIUM)


def test_controls_are_those_that_the_trap_has() -> None:
    assert dict(SurveyedPath(trap=crossed(), state=RUBIDIUM).standing) == {A: 2.5, B: 1.7, SCALE: 1.0}
    coils = Trap(coils=Coils(bias=1e-4, gradient=2.0, curvature=250.0, knife=2e6))
    standing = SurveyedPath(trap=coils, state=RUBIDIUM).standing
    assert {control.knob for control in standing} == {Knob.BIAS, Knob.GRADIENT, Knob.CURVATURE, Knob.KNIFE}


def test_scale_and_powers_make_the_same_trap_and_are_surveyed_once() -> None:
    counted: list[None] = []
    path = SurveyedPath(trap=crossed(), state=RUBIDIUM, progress=lambda: counted.append(None))
    scaled = path.at({A: 2.5, B: 1.7, SCALE: 0.5})
    assert path.at({A: 1.25, B: 0.85, SCALE: 1.0}) is scaled
    assert len(counted) == 1
    assert path.trap_at({A: 2.5, B: 1.7, SCALE: 0.5}).beam("A").power == pytest.approx(1.25)


def test_the_bottom_of_the_volume_curve_is_that_of_the_frequencies(path: SurveyedPath) -> None:
    point = path.at(path.standing)
    assert point.depth is not None
    assert point.frequencies is not None
    u = 1e-3
    angular = (2.0 * np.pi) ** 3 * np.prod(point.frequencies)
    harmonic = 4.0 * np.pi / 3.0 * (2.0 * u * point.depth / RUBIDIUM.mass) ** 1.5 / angular
    assert point.volume * float(point.curve.volume(np.asarray(u))) == pytest.approx(harmonic, rel=0.01)
    assert point.light_heating > 0.0
    assert point.light_shares == pytest.approx((1.0, 1.0, 1.0), abs=1e-9)
    assert point.noise_share == pytest.approx(1.0, abs=1e-9)
    assert point.zero_force == 0.0


def test_coils_are_not_shaken_by_light_and_a_zero_has_its_force() -> None:
    held = Trap(coils=Coils(bias=1e-4, gradient=2.0, curvature=250.0, knife=8e6))
    path = SurveyedPath(trap=held, state=RUBIDIUM)
    assert path.at(path.standing).noise_share == 0.0
    quadrupole = Trap(coils=Coils(gradient=1.5, knife=2e7), gravity=None)
    path = SurveyedPath(trap=quadrupole, state=RUBIDIUM)
    point = path.at({**path.standing, Control(Knob.GRADIENT): 3.0})
    # |gF mF| muB times the gradient on the strong axis: half a Bohr magneton.
    assert point.zero_force == pytest.approx(0.5 * 9.2740100657e-24 * 3.0, rel=5e-3)
    assert point.frequencies is None


def test_no_trap_is_an_answer_with_a_reason() -> None:
    weak = SurveyedPath(trap=crossed(), state=RUBIDIUM)
    point = weak.at({A: 1e-3, B: 1e-3, SCALE: 1.0})
    assert point.depth is None
    assert "gravity" in point.reason


def test_a_ramp_in_a_real_trap(path: SurveyedPath) -> None:
    depth = path.at(path.standing).depth
    assert depth is not None
    length = RUBIDIUM.scattering_length
    assert length is not None
    gas = Gas(statistics=RUBIDIUM.statistics, mass=RUBIDIUM.mass, scattering_length=length.value)
    ramp = Ramp(stages=(Stage(duration=2.0, moves=(Move(control=SCALE, end=0.5, shape=Shape.EXPONENTIAL),)),))
    losses = Losses(background_lifetime=30.0)
    run = evaporate(gas, 1e6, depth / boltzmann / 9.0, ramp, path, losses=losses)
    assert run.reason is EndReason.RAMP
    assert abs(run.budget.atoms_missing) < 1e-6
    assert abs(run.budget.energy_missing) < 1e-6
    assert run.temperature[-1] < 0.7 * run.temperature[0]
    # Points twice as dense change little: counted volumes are good to some percent at the rim.
    dense = SurveyedPath(trap=crossed(), state=RUBIDIUM, nodes=60)
    again = evaporate(gas, 1e6, depth / boltzmann / 9.0, ramp, dense, losses=losses)
    assert again.atoms[-1] == pytest.approx(run.atoms[-1], rel=5e-3)
    # Turned off, it drops its atoms, with the survey's reason.
    off = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=SCALE, end=0.02, shape=Shape.EXPONENTIAL),)),))
    lost = evaporate(gas, 1e6, depth / boltzmann / 9.0, off, path)
    assert lost.reason in (EndReason.NOT_TRAPPED, EndReason.ATOMS)
