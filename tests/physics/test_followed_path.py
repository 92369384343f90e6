"""Traps followed from surveys nearby: what is exact there, and how far off the rest is."""

from __future__ import annotations

from dataclasses import replace

import pytest

from physics.followed_path import FollowedPath
from physics.ramps import Control, Knob
from physics.species import load_species
from physics.surveyed_path import SurveyedPath
from physics.transfer import sudden_transfer
from physics.traps.beam import GaussianBeam
from physics.traps.coils import Coils
from physics.traps.trap import Trap

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
A, B, KNIFE = Control(Knob.POWER, "A"), Control(Knob.POWER, "B"), Control(Knob.KNIFE)
CROSSED = Trap(
    beams=(
        GaussianBeam(name="A", wavelength=1064e-9, power=2.5, waists=70e-6, direction=(1.0, 0.0, 0.0)),
        GaussianBeam(name="B", wavelength=1064e-9, power=1.7, waists=55e-6, direction=(0.0, 1.0, 0.0)),
    )
)
QUADRUPOLE = Trap(coils=Coils(gradient=1.6, knife=12e6))
IOFFE = Trap(coils=Coils(bias=2e-4, gradient=1.5, curvature=100.0, knife=8e6))


def surveyed(trap: Trap, *settings: dict[Control, float]) -> SurveyedPath:
    path = SurveyedPath(trap=trap, state=RUBIDIUM)
    for setting in settings:
        path.at({**path.standing, **setting})
    return path


def test_where_it_was_surveyed_it_is_the_survey() -> None:
    path = surveyed(CROSSED, {A: 2.0})
    followed = FollowedPath(path=path)
    assert followed.able
    assert followed.standing == path.standing
    assert followed.at({**path.standing, A: 2.0}) is path.at({**path.standing, A: 2.0})


def test_without_a_survey_there_is_nothing_to_follow() -> None:
    path = surveyed(CROSSED)
    assert not FollowedPath(path=path).able
    assert FollowedPath(path=path).at(path.standing) is path.at(path.standing)


@pytest.mark.parametrize(
    ("trap", "known", "asked", "room"),
    [
        (CROSSED, ({A: 2.5}, {A: 1.6}), {A: 2.0}, 0.03),
        (CROSSED, ({A: 2.5}, {A: 1.6}), {A: 2.2, B: 1.5}, 0.1),
        (QUADRUPOLE, ({KNIFE: 12e6},), {KNIFE: 9e6}, 0.02),
        (IOFFE, ({KNIFE: 8e6},), {KNIFE: 6e6}, 0.3),
    ],
)
def test_elsewhere_it_is_nearly_what_a_survey_finds(
    trap: Trap, known: tuple[dict[Control, float], ...], asked: dict[Control, float], room: float
) -> None:
    path = surveyed(trap, *known)
    count = len(path.known)
    controls = {**path.standing, **asked}
    draft = FollowedPath(path=path).at(controls)
    assert len(path.known) == count
    exact = path.at(controls)
    assert draft.depth == pytest.approx(exact.depth, rel=1e-5)
    assert draft.minimum == pytest.approx(exact.minimum, abs=1e-10)
    if exact.frequencies is not None:
        assert draft.frequencies == pytest.approx(exact.frequencies, rel=1e-6)
    assert draft.light_heating == pytest.approx(exact.light_heating, rel=1e-6)
    assert draft.zero_force == pytest.approx(exact.zero_force, rel=1e-9)
    assert draft.volume == pytest.approx(exact.volume, rel=room)


def test_a_trap_that_gravity_empties_holds_nothing() -> None:
    path = surveyed(CROSSED, {A: 2.5})
    draft = FollowedPath(path=path).at({**path.standing, A: 0.005, B: 0.005})
    assert draft.depth is None
    assert draft.reason


def test_what_is_handed_on_from_there_is_nearly_what_a_survey_would_hand_on() -> None:
    path = surveyed(CROSSED, {A: 2.5}, {A: 1.6})
    other = tuple(replace(beam, power=0.8 * beam.power, focus=(1.5e-5, 0.0, -5e-6)) for beam in CROSSED.beams)
    there = SurveyedPath(trap=replace(CROSSED, beams=other), state=RUBIDIUM)
    new = there.at(there.standing)
    controls = {**path.standing, A: 2.0}
    draft = sudden_transfer(8e-6, FollowedPath(path=path).at(controls), new)
    exact = sudden_transfer(8e-6, path.at(controls), new)
    assert exact.share < 0.98
    assert draft.share == pytest.approx(exact.share, rel=5e-3)
    assert draft.energy == pytest.approx(exact.energy, rel=5e-3)
