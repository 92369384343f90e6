"""What is done to beams and coils, as plans: names that are free, ramps that follow, what is refused."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.engine import trap_answer
from app.plan import DEFAULT_PLAN, ControlLimits, LimitsChoice, MoveChoice, Plan, PlanError, StageChoice, read_plan
from app.trap_edits import (
    OtherSide,
    crossed_pair,
    drawing_wavelength,
    given_by_frequencies,
    made_of_beams,
    with_beam,
    with_beam_moved,
    with_coils,
    with_duplicate,
    with_new_beam,
    without_beam,
    without_coils,
)
from app.units import BEAM_POWER, BIAS_FIELD, LIFETIME, read_quantity
from physics.ramps import Control, Knob
from physics.species import species_keys

PRESETS = Path(__file__).parents[2] / "presets" / "traps"
CROSSED = made_of_beams(DEFAULT_PLAN, OtherSide())


def names(plan: Plan) -> list[str]:
    return [beam.name for beam in plan.trap.beams]


def with_ramp(plan: Plan, beam: str) -> Plan:
    power = read_quantity("100 mW", BEAM_POWER)
    move = MoveChoice(control=Control(Knob.POWER, beam), end=power)
    stage = StageChoice(duration=read_quantity("2 s", LIFETIME), moves=(move,))
    limits = LimitsChoice(controls=(ControlLimits(control=Control(Knob.POWER, beam), high=power),))
    return replace(plan, ramp=(stage,), limits=limits)


@pytest.mark.parametrize("key", [key for key in species_keys() if key != "169Tm"])  # its light is not known
def test_the_first_beams_hold_every_species(key: str) -> None:
    plan = made_of_beams(replace(DEFAULT_PLAN, species=replace(DEFAULT_PLAN.species, key=key, state=None)), OtherSide())
    answer = trap_answer(plan)
    assert answer.trapped
    assert answer.survey.depth_temperature > 0.5e-6


def test_light_that_would_push_the_atoms_out_is_not_chosen() -> None:
    helium = replace(DEFAULT_PLAN, species=replace(DEFAULT_PLAN.species, key="4He_metastable", state=None))
    assert drawing_wavelength(helium).text == "1550 nm"  # 1064 nm is blue of the line at 1083 nm
    assert drawing_wavelength(DEFAULT_PLAN).text == "1064 nm"


def test_changing_over_and_back_is_the_same_plan() -> None:
    other = OtherSide().noting(DEFAULT_PLAN.trap)
    made = made_of_beams(DEFAULT_PLAN, other)
    other = other.noting(made.trap)
    assert given_by_frequencies(made, other, None) == DEFAULT_PLAN
    assert made_of_beams(DEFAULT_PLAN, other) == made


def test_without_a_survey_the_frequencies_are_the_usual_ones() -> None:
    given = given_by_frequencies(CROSSED, OtherSide(), None)
    assert given.trap.frequencies == DEFAULT_PLAN.trap.frequencies
    quadrupole = read_plan(PRESETS / "quadrupole_rubidium.toml")
    given = given_by_frequencies(quadrupole, OtherSide(), trap_answer(quadrupole))  # which has no frequencies
    assert given.trap.frequencies == DEFAULT_PLAN.trap.frequencies
    assert given.trap.depth is None


@given(st.lists(st.sampled_from(["add", "duplicate", "up", "down", "remove", "rename"]), max_size=12), st.randoms())
def test_names_stay_different_whatever_is_done(acts: list[str], chance: object) -> None:
    plan = CROSSED
    for number, act in enumerate(acts):
        name = chance.choice(names(plan))  # type: ignore[attr-defined]
        count = len(plan.trap.beams)
        match act:
            case "add":
                plan, new = with_new_beam(plan)
                assert names(plan)[-1] == new
            case "duplicate":
                plan, new = with_duplicate(plan, name)
                assert names(plan).index(new) == names(plan).index(name) + 1
            case "up" | "down":
                plan = with_beam_moved(plan, name, -1 if act == "up" else 1)
            case "remove":
                if count > 1:
                    plan = without_beam(plan, name)
                    assert len(plan.trap.beams) == count - 1
            case "rename":
                plan = with_beam(plan, name, replace(plan.trap.beam(name), name=f"beam {number}"))
        assert len(set(names(plan))) == len(plan.trap.beams)


def test_moved_down_and_up_again_a_beam_is_where_it_was() -> None:
    plan = with_new_beam(CROSSED)[0]
    assert names(plan) == ["A", "B", "C"]
    assert names(with_beam_moved(plan, "A", 1)) == ["B", "A", "C"]
    assert with_beam_moved(with_beam_moved(plan, "A", 1), "A", -1) == plan
    assert with_beam_moved(plan, "C", 1) == plan
    assert with_beam_moved(plan, "A", -1) == plan


def test_a_new_beam_goes_along_an_axis_that_none_has() -> None:
    plan, name = with_new_beam(CROSSED)
    assert plan.trap.beam(name).direction == (0.0, 0.0, 1.0)
    plan, name = with_new_beam(plan)
    assert plan.trap.beam(name).direction == (1.0, 0.0, 0.0)
    lone = replace(
        CROSSED, trap=replace(CROSSED.trap, beams=(replace(crossed_pair(CROSSED)[0], direction=(0, 0, -2)),))
    )
    assert with_new_beam(lone)[0].trap.beams[1].direction == (1.0, 0.0, 0.0)


def test_a_renamed_beam_takes_its_ramp_and_its_limits_along() -> None:
    plan = with_ramp(CROSSED, "B")
    renamed = with_beam(plan, "B", replace(plan.trap.beam("B"), name="across"))
    assert renamed.ramp[0].moves[0].control == Control(Knob.POWER, "across")
    assert renamed.limits.controls[0].control == Control(Knob.POWER, "across")
    assert with_beam(renamed, "across", plan.trap.beam("B")) == plan
    assert with_beam(plan, "A", replace(plan.trap.beam("A"), name="along")).ramp == plan.ramp


def test_what_could_not_be_read_again_is_refused() -> None:
    with pytest.raises(PlanError, match=r'^two beams are named "B"'):
        with_beam(CROSSED, "A", replace(CROSSED.trap.beam("A"), name="B"))
    with pytest.raises(PlanError, match=r"^the ramp moves the power of beam B, so it stays"):
        without_beam(with_ramp(CROSSED, "B"), "B")
    last = without_beam(CROSSED, "A")
    with pytest.raises(PlanError, match=r"^a trap needs a beam or coils"):
        without_beam(last, "B")
    coils = with_coils(last)
    assert without_beam(coils, "B").trap.beams == ()
    with pytest.raises(PlanError, match=r"^a trap needs a beam or coils"):
        without_coils(without_beam(coils, "B"))
    assert without_coils(coils) == last
    move = MoveChoice(control=Control(Knob.BIAS), end=read_quantity("2 G", BIAS_FIELD))
    ramped = replace(coils, ramp=(StageChoice(duration=read_quantity("1 s", LIFETIME), moves=(move,)),))
    with pytest.raises(PlanError, match=r"^the ramp moves the bias of the coils, so they stay"):
        without_coils(ramped)
