"""The worst numbers along a ramp are those of its rows."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.constants import atomic_mass, boltzmann
from physics.evaporation import evaporate
from physics.gas import Gas
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramp_extremes import ramp_extremes
from physics.ramp_shapes import Shape
from physics.ramps import Move, Ramp, Stage
from physics.trap_path import SCALE, HarmonicPath
from physics.traps import HarmonicTrap

MASS = 87.0 * atomic_mass
PATH = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(1500.0, 1000.0, 700.0), depth=boltzmann * 5e-4))
RAMP = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=SCALE, end=0.01, shape=Shape.EXPONENTIAL),)),))


def test_worst_numbers_of_bosons() -> None:
    gas = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
    run = evaporate(gas, 2e6, 5e-5, RAMP, PATH, losses=Losses(background_lifetime=20.0, three_body=4e-41))
    found = ramp_extremes(run)
    assert found.lowest_truncation == np.min(run.rows.truncation)
    assert found.highest_classical_density == np.max(run.rows.classical_phase_space_density)
    # |dlnw/dt| = ln(100)/2 a second, over the lowest frequency at the end.
    assert found.fastest_trap == pytest.approx(0.5 * math.log(100.0) / (2.0 * math.pi * 70.0), rel=1e-6)
    assert found.most_hydrodynamic == np.max(run.rows.hydrodynamic_ratio)
    assert 0.0 < found.fastest_loss < 1.0
    assert 0.0 < found.three_body_scaling < 10.0
    assert found.three_body_unitarity > 0.0
    assert math.isnan(found.lowest_fermi_temperature)
    assert not found.polarised
    assert not found.background_unknown


def test_worst_numbers_of_fermions() -> None:
    mixture = Gas(statistics=Statistics.FERMI, mass=MASS, spin_components=2, scattering_length=5.3e-9)
    run = evaporate(mixture, 2e6, 5e-5, RAMP, PATH)
    found = ramp_extremes(run)
    assert found.lowest_fermi_temperature == np.min(run.rows.reduced_temperature)
    assert found.background_unknown
    assert math.isnan(found.three_body_scaling)
    alone = ramp_extremes(evaporate(Gas(statistics=Statistics.FERMI, mass=MASS), 2e6, 5e-5, RAMP, PATH))
    assert alone.polarised
    assert math.isnan(alone.fastest_depth)
    assert math.isnan(alone.fastest_loss)
