"""Small changes of a trap, against surveys of the changed trap."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from physics.species import load_species
from physics.traps import Coils, GaussianBeam, Gravity, Trap
from physics.traps.potential import potential_of
from physics.traps.response import nearby
from physics.traps.survey import survey

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
A = GaussianBeam(name="A", wavelength=1064e-9, power=0.52, waists=72e-6, direction=(1.0, 0.0, 0.0))
B = GaussianBeam(name="B", wavelength=1064e-9, power=0.48, waists=85e-6, direction=(0.0, 1.0, 0.0))
CROSSED = Trap(beams=(A, B))
FALLING = Trap(beams=(A, B), gravity=None)
IOFFE = Trap(coils=Coils(axis=(1.0, 0.0, 0.0), bias=1.6e-4, gradient=1.65, curvature=190.0, knife=1.52e6))
SMALL = 1e-3


@pytest.mark.parametrize(
    ("trap", "changed"),
    [
        (CROSSED, CROSSED.with_beam("A", power=A.power * (1 + SMALL))),
        (CROSSED, CROSSED.with_beam("B", waists=np.array([85e-6, 85e-6 * (1 + SMALL)]))),
        (CROSSED, CROSSED.with_beam("A", focus=(0.0, 0.0, 1e-8))),
        (FALLING, FALLING.with_powers_scaled(1 + SMALL)),
        (IOFFE, IOFFE.with_coils(bias=1.6e-4 * (1 + SMALL))),
        (IOFFE, IOFFE.with_coils(knife=1.52e6 * (1 + SMALL))),
        (IOFFE, IOFFE.with_coils(gradient=1.65 * (1 + SMALL))),
        (CROSSED, replace(CROSSED, gravity=Gravity(direction=(0.0, SMALL, -1.0)))),
    ],
    ids=["power", "waist", "focus", "all powers", "bias", "knife", "gradient", "tilt"],
)
def test_a_small_change_gives_what_a_survey_of_the_changed_trap_gives(trap: Trap, changed: Trap) -> None:
    before, after = survey(trap, RUBIDIUM), survey(changed, RUBIDIUM)
    near = nearby(before, potential_of(changed, RUBIDIUM))
    assert near is not None
    np.testing.assert_allclose(near.frequencies, after.frequencies, rtol=1e-7)
    # Second order in the change is left out of the depth: here some 1e-5 of it.
    assert near.depth == pytest.approx(after.depth, rel=2e-5)


def test_scaling_light_without_gravity_scales_depth_and_frequencies() -> None:
    before = survey(FALLING, RUBIDIUM)
    near = nearby(before, potential_of(FALLING.with_powers_scaled(1.21), RUBIDIUM))
    assert near is not None
    np.testing.assert_allclose(near.frequencies, 1.1 * before.frequencies, rtol=1e-9)
    assert before.depth is not None
    assert near.depth == pytest.approx(1.21 * before.depth, rel=1e-9)


def test_a_trap_without_frequencies_has_no_nearby_one() -> None:
    trap = Trap(coils=Coils(gradient=1.5))
    found = survey(trap, RUBIDIUM)
    assert nearby(found, potential_of(trap, RUBIDIUM)) is None
