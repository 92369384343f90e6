"""The trap of a plan, from what the user says to its survey and its words."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from app.engine import trap_answer, trap_of
from app.plan import DEFAULT_PLAN, Plan, parse_plan, plan_with, read_plan
from app.trap_words import NUMBERS, cautions, note_text, reason_not_trapped, reasons_missing, way_out
from physics.constants import boltzmann
from physics.light import polarizability
from physics.species import load_species
from physics.traps import HarmonicTrap, Trap
from physics.traps.notes import Note, NoteKind
from physics.traps.potential import NotTrapped
from physics.traps.survey import survey_of_harmonic

HEAD = """coldward = 1
[species]
key = "87Rb"
state = "{state}"
[cloud]
atoms = "1e5"
temperature = "200 nK"
[trap]
gravity = {gravity}
"""
BEAM = """[[trap.beam]]
name = "{name}"
wavelength = "{wavelength}"
power = "{power}"
waist = "70 um"
direction = {direction}
"""
COILS = "[trap.coils]\n"


def made(*parts: str, state: str = "F=1 mF=-1", gravity: str = "[0, 0, -1]") -> Plan:
    return parse_plan(HEAD.format(state=state, gravity=gravity) + "".join(parts), "made.toml")


def beam(power: str = "2.5 W", direction: str = "[1, 0, 0]", wavelength: str = "1064 nm", name: str = "A") -> str:
    return BEAM.format(name=name, wavelength=wavelength, power=power, direction=direction)


SINGLE = made(beam(), gravity='"off"')


def test_a_single_beam_has_the_frequencies_and_the_depth_of_its_closed_forms() -> None:
    # Grimm, Weidemueller, Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000), eqs. (36) and below: for
    # U0 = alpha I0/(2 eps0 c), w_r = sqrt(4 U0/(m w0^2)), w_z = sqrt(2 U0/(m zR^2)).
    found = trap_answer(SINGLE).survey
    light = polarizability(load_species("87Rb").isotope, 1064e-9)
    assert light.value is not None
    depth = light.value * 2 * 2.5 / (math.pi * 70e-6**2) / (2 * 8.8541878188e-12 * 299792458)
    rayleigh = math.pi * 70e-6**2 / 1064e-9
    radial = math.sqrt(4 * depth / (found.mass * 70e-6**2)) / (2 * math.pi)
    axial = math.sqrt(2 * depth / (found.mass * rayleigh**2)) / (2 * math.pi)
    np.testing.assert_allclose(found.frequencies, [axial, radial, radial], rtol=1e-6)
    assert found.depth == pytest.approx(depth, rel=1e-4)


def test_frequencies_that_are_given_are_the_trap() -> None:
    plan = plan_with(DEFAULT_PLAN, {"trap.depth": "5 uK"})
    trap = trap_of(plan)
    assert isinstance(trap, HarmonicTrap)
    assert trap.depth == pytest.approx(5e-6 * boltzmann)
    answer = trap_answer(plan)
    assert answer.trapped
    np.testing.assert_array_equal(answer.survey.frequencies, [120.0, 120.0, 20.0])
    reference = survey_of_harmonic(trap, answer.state.mass).volume_curve
    assert reference is not None
    assert answer.survey.volume_curve is not None
    np.testing.assert_array_equal(answer.survey.volume_curve.volumes, reference.volumes)
    assert "sag" in reasons_missing(answer)


def test_every_key_of_beams_and_coils_reaches_the_trap() -> None:
    text = (
        beam(power="800 mW", direction="[0, 1, 0]").replace('waist = "70 um"', 'waists = ["60 um", "45 um"]')
        + 'on = false\nm2 = 1.2\nfocus = ["1 um", "2 um", "3 um"]\n'
    )
    coils = 'axis = [1, 0, 0]\ncentre = ["4 um", "5 um", "6 um"]\nbias = "1.5 G"\ngradient = "150 G/cm"\n'
    coils += 'curvature = "200 G/cm^2"\nlevitation = "30.5 G/cm"\nknife = "2.1 MHz"\n'
    trap = trap_of(made(text, COILS, coils, gravity="[0, -3, -4]"))
    assert isinstance(trap, Trap)
    (a,), c = trap.beams, trap.coils
    assert (a.name, a.on, a.power, a.m2) == ("A", False, 0.8, 1.2)
    np.testing.assert_allclose(a.waists, [60e-6, 45e-6])
    np.testing.assert_allclose(a.focus, [1e-6, 2e-6, 3e-6])
    np.testing.assert_allclose(a.direction, [0, 1, 0])
    assert c is not None
    assert trap.gravity is not None
    np.testing.assert_allclose(c.axis, [1, 0, 0])
    np.testing.assert_allclose(c.centre, [4e-6, 5e-6, 6e-6])
    assert (c.bias, c.gradient, c.curvature) == pytest.approx((1.5e-4, 1.5, 200.0 * 1e-4 / 1e-4))
    assert (c.levitation, c.knife) == pytest.approx((0.305, 2.1e6))
    np.testing.assert_allclose(trap.gravity.direction, [0, -0.6, -0.8])
    assert trap_of(SINGLE).gravity is None  # type: ignore[union-attr]


def test_the_answer_is_kept_while_species_and_trap_stay() -> None:
    answer = trap_answer(SINGLE)
    assert trap_answer(plan_with(SINGLE, {"cloud.atoms": "3e4", "species.field": "1 G"})) is answer
    assert trap_answer(plan_with(SINGLE, {"species.state": "F=2 mF=2"})) is not answer


@pytest.mark.parametrize(
    ("plan", "reason", "words"),
    [
        (made(beam(power="1 mW")), NotTrapped.GRAVITY, r"^gravity pulls the atoms out"),
        (made(beam(wavelength="532 nm")), NotTrapped.BLUE_LIGHT, r"^every beam is tuned above the lines of 87Rb"),
        (
            made(COILS, 'gradient = "150 G/cm"\n', state="F=1 mF=+1"),
            NotTrapped.HIGH_FIELD_SEEKER,
            r"^87Rb F=1 mF=\+1 is drawn to high fields",
        ),
        (made(beam(power="0 W")), NotTrapped.NOTHING_ON, r"^no beam is on"),
    ],
)
def test_a_trap_that_holds_nothing_says_why(plan: Plan, reason: NotTrapped, words: str) -> None:
    answer = trap_answer(plan)
    assert answer.survey.reason is reason
    assert not answer.trapped
    assert re.search(words, reason_not_trapped(answer))
    assert reasons_missing(answer) == dict.fromkeys(NUMBERS, "not trapped")


def test_a_trap_that_holds_has_no_reason_not_to() -> None:
    answer = trap_answer(SINGLE)
    assert reason_not_trapped(answer) == ""
    assert reasons_missing(answer)["sag"] == "gravity is off"


def test_a_quadrupole_says_why_it_has_no_frequencies() -> None:
    answer = trap_answer(made(COILS, 'gradient = "150 G/cm"\n'))
    assert answer.trapped
    reasons = reasons_missing(answer)
    assert reasons["frequencies"] == reasons["axes"]
    assert "cusp" in reasons["frequencies"]
    assert "depth" not in reasons
    assert way_out(answer) == "at the wall"


@pytest.mark.parametrize("reason", NotTrapped)
def test_every_reason_has_its_words(reason: NotTrapped) -> None:
    answer = trap_answer(made(beam(power="1 mW")))
    text = reason_not_trapped(replace(answer, survey=replace(answer.survey, reason=reason)))
    assert text
    assert "{" not in text


@pytest.mark.parametrize("kind", NoteKind)
def test_every_note_has_its_sentence(kind: NoteKind) -> None:
    text = note_text(Note(kind=kind, value=0.02, beam="A"))
    assert text.endswith(".")
    assert "{" not in text


def test_strong_beams_and_coils_come_with_a_caution() -> None:
    assert cautions(DEFAULT_PLAN.trap) == ()
    assert cautions(made(beam(power="499 mW")).trap) == ()
    light, _estimates = cautions(made(beam(power="500 mW")).trap)
    assert "IEC 60825-1" in light
    coils, _estimates = cautions(made(COILS, 'gradient = "150 G/cm"\n').trap)
    assert "0.5 mT" in coils
    assert len(cautions(made(beam(), COILS, 'gradient = "150 G/cm"\n').trap)) == 3


@pytest.mark.parametrize(("key", "state"), [("6Li", "F=3/2 mF=+3/2"), ("23Na", "F=1 mF=-1"), ("87Rb", "F=2 mF=+2")])
def test_a_search_that_runs_far_out_ends_without_an_overflow(key: str, state: str) -> None:
    plan = read_plan(Path(__file__).parents[1] / "data" / "plan_of_beams_and_coils.toml")
    survey = trap_answer(plan_with(plan, {"species.key": key, "species.state": state})).survey
    assert survey.trapped == (survey.depth is not None and survey.depth > 0.0)
