"""Traps of beams and coils check themselves."""

from __future__ import annotations

import itertools
from dataclasses import fields, replace

import pytest

from app.plan_field import QUANTITIES, PlanError
from app.trap_choices import (
    BEAM_FIELDS,
    COILS_FIELDS,
    DOWN,
    ORIGIN,
    BeamChoice,
    CoilsChoice,
    Direction,
    Gravity,
    TrapChoice,
    free_names,
)
from app.units import Quantity

WATT, MICRON, HERTZ = Quantity("1 W", 1.0), Quantity("70 µm", 7e-5), Quantity("100 Hz", 100.0)
GRADIENT = Quantity("30 G/cm", 0.3)
BEAM = BeamChoice(
    name="A", wavelength=Quantity("1064 nm", 1.064e-6), power=WATT, waists=(MICRON,), direction=(1.0, 0.0, 0.0)
)
COILS = CoilsChoice(gradient=GRADIENT)


def test_the_tables_name_every_attribute() -> None:
    """`waist` is the other way of writing `waists`."""
    assert set(BEAM_FIELDS) == {field.name for field in fields(BeamChoice)} | {"waist"}
    assert set(COILS_FIELDS) == {field.name for field in fields(CoilsChoice)}
    for field in (*BEAM_FIELDS.values(), *COILS_FIELDS.values()):
        assert field.label
        assert field.tip.endswith(".")
        assert (field.kind is not None) == (field.entry in QUANTITIES)


@pytest.mark.parametrize(
    ("parts", "sentence", "path"),
    [
        ({}, "a trap needs frequencies, or else beams or coils$", "trap.frequencies"),
        (
            {"frequencies": (HERTZ,) * 3, "beams": (BEAM,)},
            "a trap has frequencies, or else beams and coils, not both$",
            "trap.frequencies",
        ),
        ({"frequencies": (HERTZ,) * 3, "coils": COILS}, "not both$", "trap.frequencies"),
        ({"frequencies": (HERTZ,) * 2}, "frequencies must be three, got 2$", "trap.frequencies"),
        ({"beams": (BEAM,), "depth": Quantity("1 µK", 1.4e-29)}, "a depth goes with trap frequencies", "trap.depth"),
        (
            {"beams": (BEAM, replace(BEAM, name="B"), BEAM)},
            'two beams are named "A": each needs a name of its own$',
            "trap.beam.name",
        ),
        (
            {"coils": CoilsChoice(levitation=GRADIENT), "gravity": Gravity.OFF},
            "the coils levitate along gravity, so it cannot be off$",
            "trap.gravity",
        ),
        ({"beams": (BEAM,), "gravity": (0.0, 0.0, 0.0)}, "a direction must not be zero in all three numbers$", ""),
    ],
)
def test_impossible_traps_are_refused(parts: dict[str, object], sentence: str, path: str) -> None:
    with pytest.raises(PlanError, match=sentence) as caught:
        TrapChoice(**parts)  # type: ignore[arg-type]
    assert caught.value.path == path


@pytest.mark.parametrize("name", ["", " A", "A ", "a\nb", 41 * "x"])
def test_a_name_must_be_one_that_can_be_typed(name: str) -> None:
    with pytest.raises(PlanError, match="a beam's name must be one line of 1 to 40 characters, without spaces around"):
        replace(BEAM, name=name)
    assert replace(BEAM, name="crossing beam, 2nd").name == "crossing beam, 2nd"


@pytest.mark.parametrize(
    "direction", [(1.0, 0.0), (2e6, 0.0, 0.0), (float("nan"), 0.0, 1.0), (float("-inf"), 0.0, 1.0), (1e-7, 0.0, -1e-7)]
)
def test_a_direction_must_be_one(direction: Direction) -> None:
    with pytest.raises(PlanError, match="a direction must"):
        replace(BEAM, direction=direction)
    with pytest.raises(PlanError, match="a direction must"):
        replace(COILS, axis=direction)


def test_impossible_beams_and_coils_are_refused() -> None:
    for waists in ((), (MICRON,) * 3):
        with pytest.raises(PlanError, match=f"a beam has one waist, or two, got {len(waists)}"):
            replace(BEAM, waists=waists)
    with pytest.raises(PlanError, match="a place must be three lengths, got 2"):
        replace(BEAM, focus=ORIGIN[:2])  # type: ignore[arg-type]
    with pytest.raises(PlanError, match=r"coils need at least one of bias, gradient, curvature, levitation$"):
        CoilsChoice(knife=Quantity("1 MHz", 1e6))


def test_which_way_atoms_fall() -> None:
    assert TrapChoice(coils=COILS).gravity_direction == DOWN == (0.0, 0.0, -1.0)
    assert TrapChoice(coils=COILS, gravity=(0.0, 1.0, 0.0)).gravity_direction == (0.0, 1.0, 0.0)
    assert TrapChoice(coils=COILS, gravity=Gravity.OFF).gravity_direction is None


def test_a_trap_says_what_it_is_made_of() -> None:
    b, c = replace(BEAM, name="B"), replace(BEAM, name="plug")
    assert TrapChoice(beams=(BEAM,)).makers == "beam A"
    assert TrapChoice(beams=(BEAM, b)).makers == "beams A and B"
    assert TrapChoice(beams=(BEAM, b, c), coils=COILS).makers == "beams A, B and plug and coils"
    assert TrapChoice(coils=COILS).makers == "coils"
    assert TrapChoice(frequencies=(HERTZ,) * 3).harmonic
    assert not TrapChoice(coils=COILS).harmonic


def test_a_beam_is_found_and_replaced_by_its_name() -> None:
    b = replace(BEAM, name="B")
    trap = TrapChoice(beams=(BEAM, b))
    assert trap.beam("B") is b
    stronger = replace(b, name="C", power=Quantity("2 W", 2.0))
    assert trap.with_beam("B", stronger).beams == (BEAM, stronger)
    with pytest.raises(PlanError, match=r'the trap has no beam "D"; its beams: A, B$'):
        trap.with_beam("D", stronger)
    with pytest.raises(PlanError, match=r'the trap has no beam "A"; its beams: none$'):
        TrapChoice(coils=COILS).beam("A")


def test_free_names_go_on_after_z() -> None:
    names = list(itertools.islice(free_names({"B", "AA"}), 30))
    assert names[:3] == ["A", "C", "D"]
    assert names[24:27] == ["Z", "AB", "AC"]
