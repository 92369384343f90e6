"""What must not matter to a survey, and what scales: turning it all, order, beams that are off, powers."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from physics.species import State, load_species
from physics.traps import Coils, GaussianBeam, Gravity, Trap
from physics.traps.survey import Survey, survey

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
angles = st.floats(0.0, 2.0 * math.pi)
few = settings(max_examples=6)


def turn(a: float, b: float, c: float) -> Any:
    """A rotation by Euler angles."""

    def about(axis: int, angle: float) -> Any:
        i, j = ((1, 2), (2, 0), (0, 1))[axis]
        matrix = np.eye(3)
        matrix[[i, i, j, j], [i, j, i, j]] = np.cos(angle), -np.sin(angle), np.sin(angle), np.cos(angle)
        return matrix

    return about(2, a) @ about(0, b) @ about(2, c)


def turned(trap: Trap, rotation: Any) -> Trap:
    """The whole set-up turned; beams must be round and coils make a quadrupole, which have no sense of what is up."""
    beams = tuple(
        replace(beam, direction=rotation @ np.asarray(beam.direction), focus=rotation @ np.asarray(beam.focus))
        for beam in trap.beams
    )
    coils = trap.coils
    if coils is not None:
        coils = replace(coils, axis=rotation @ np.asarray(coils.axis), centre=rotation @ np.asarray(coils.centre))
    gravity = trap.gravity
    if gravity is not None:
        gravity = Gravity(direction=rotation @ np.asarray(gravity.direction))
    return Trap(beams=beams, coils=coils, gravity=gravity)


def round_beam(name: str, power: float, waist: float, direction: Any, focus: Any = (0.0, 0.0, 0.0)) -> GaussianBeam:
    return GaussianBeam(name=name, wavelength=1064e-9, power=power, waists=waist, direction=direction, focus=focus)


SETUPS = {
    "crossed": Trap(
        beams=(
            round_beam("A", 2.5, 70e-6, (1, 0, 0)),
            round_beam("B", 1.7, 55e-6, (0.3, 1, 0.05), (1e-5, 0, 5e-6)),
        )
    ),
    "magnetic": Trap(coils=Coils(gradient=1.5, axis=(1, 0, 0.2), knife=3e6)),
    "hybrid": Trap(beams=(round_beam("A", 2.5, 70e-6, (1, 0, 0), (0, 0, -7e-5)),), coils=Coils(gradient=0.25)),
}


def check_alike(one: Survey, other: Survey, rotation: Any) -> None:
    assert one.trapped
    assert other.trapped
    assert other.depth == pytest.approx(one.depth, rel=1e-7)
    assert other.sag == pytest.approx(one.sag, rel=1e-5, abs=1e-12)
    assert np.asarray(other.minimum) == pytest.approx(rotation @ one.minimum, rel=1e-6, abs=1e-10)
    assert (one.frequencies is None) == (other.frequencies is None)
    if one.frequencies is not None:
        a, b = np.argsort(one.frequencies), np.argsort(other.frequencies)
        assert np.sort(other.frequencies) == pytest.approx(np.sort(one.frequencies), rel=1e-7)
        # Axes have no sign.
        overlap = np.abs(np.sum(other.axes[b] * (one.axes[a] @ rotation.T), axis=1))
        assert overlap == pytest.approx(np.ones(3), abs=1e-6)
    assert one.volume_curve is not None
    assert other.volume_curve is not None
    U = one.volume_curve.ceiling * np.array([0.1, 0.3])
    assert other.volume_curve.volume(U) == pytest.approx(one.volume_curve.volume(U), rel=1e-3)


@pytest.mark.parametrize("name", SETUPS)
@few
@given(a=angles, b=st.floats(0.0, math.pi), c=angles)
def test_turning_the_whole_set_up_turns_the_axes_and_nothing_else(name: str, a: float, b: float, c: float) -> None:
    rotation = turn(a, b, c)
    trap = SETUPS[name]
    check_alike(survey(trap, RUBIDIUM), survey(turned(trap, rotation), RUBIDIUM), rotation)


@few
@given(angle=angles)
def test_elliptical_beams_may_be_turned_about_the_vertical(angle: float) -> None:
    sheet = GaussianBeam(name="S", wavelength=1064e-9, power=2.0, waists=(150e-6, 30e-6), direction=(1, 0.2, 0))
    trap = Trap(beams=(sheet, round_beam("B", 1.0, 60e-6, (0, 1, 0))))
    rotation = turn(angle, 0.0, 0.0)
    check_alike(survey(trap, RUBIDIUM), survey(turned(trap, rotation), RUBIDIUM), rotation)


@st.composite
def crossings(draw: st.DrawFn) -> Trap:
    """Two or three round beams close to a common point, in no special directions."""
    count = draw(st.integers(2, 3))
    beams = []
    for k in range(count):
        angle, slope = 1.1 * k + draw(st.floats(-0.3, 0.3)), draw(st.floats(-0.2, 0.2))
        focus = [draw(st.floats(-1e-5, 1e-5)) for _ in range(3)]
        waist, power = draw(st.floats(3e-5, 1.2e-4)), draw(st.floats(1.0, 8.0))
        beams.append(round_beam(str(k), power, waist, (math.cos(angle), math.sin(angle), slope), focus))
    return Trap(beams=tuple(beams))


@few
@given(trap=crossings(), factor=st.sampled_from([0.25, 2.0, 3.7]))
def test_without_gravity_powers_scale_depth_and_squared_frequencies(trap: Trap, factor: float) -> None:
    free = replace(trap, gravity=None)
    one, other = survey(free, RUBIDIUM), survey(free.with_powers_scaled(factor), RUBIDIUM)
    assert other.frequencies == pytest.approx(math.sqrt(factor) * np.asarray(one.frequencies), rel=1e-7)
    assert other.depth == pytest.approx(factor * one.depth, rel=1e-9)  # type: ignore[operator]
    assert other.minimum == pytest.approx(np.asarray(one.minimum), rel=1e-6, abs=1e-11)
    assert other.heating.scattering_rate == pytest.approx(factor * one.heating.scattering_rate, rel=1e-9)


@few
@given(trap=crossings(), seed=st.integers(0, 5))
def test_the_order_of_beams_does_not_matter_and_beams_that_are_off_do_nothing(trap: Trap, seed: int) -> None:
    one = survey(trap, RUBIDIUM)
    order = np.random.default_rng(seed).permutation(len(trap.beams))
    off = GaussianBeam(name="off", wavelength=532e-9, power=9.0, waists=1e-5, direction=(1, 0, 0), on=False)
    other = survey(replace(trap, beams=(off, *(trap.beams[k] for k in order))), RUBIDIUM)
    assert one.reason == other.reason
    if one.trapped:
        check_alike(one, other, np.eye(3))


@few
@given(trap=crossings())
def test_more_gravity_never_makes_a_trap_of_light_deeper(trap: Trap) -> None:
    free, held = survey(replace(trap, gravity=None), RUBIDIUM), survey(trap, RUBIDIUM)
    assert free.depth is not None
    if held.depth is not None:
        assert held.depth < free.depth
        assert held.minimum[2] < free.minimum[2]


@few
@given(trap=crossings())
def test_the_pass_is_a_place_without_force_at_the_height_of_the_depth(trap: Trap) -> None:
    found = survey(trap, RUBIDIUM)
    if not found.trapped:
        return
    potential, escape = found.potential, found.escape
    assert potential is not None
    assert escape is not None
    energy, gradient = potential.gradient(np.asarray(escape.position))
    assert energy - found.energy_at_minimum == pytest.approx(found.depth, rel=1e-12)
    assert np.linalg.norm(gradient) < 1e-6 * np.linalg.norm(potential.weight)
    # Atoms that have passed fall.
    assert np.asarray(escape.direction)[2] < 0.0


def test_states_of_one_isotope_feel_the_same_light(crossed: Trap, rubidium: State) -> None:
    stretched = load_species("87Rb").state("F=2 mF=+2")
    assert survey(crossed, stretched).depth == survey(crossed, rubidium).depth
