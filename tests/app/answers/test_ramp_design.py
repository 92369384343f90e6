"""Designed ramps: plans that can be edited and simulated, limits, and which control is designed."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from app.answers.ramp import ramp_answer
from app.answers.ramp_design import controls_of, design_answer, unit_in_use, usual_control
from app.design_words import design_sentence
from app.plan import Plan, PlanError, parse_plan, write_plan
from physics.ramps import Control, Knob
from physics.trap_path import DEPTH, SCALE

DATA = Path(__file__).parents[2] / "data"
BEAM = (DATA / "plan_of_one_beam.toml").read_text(encoding="utf-8")


@pytest.mark.usefixtures("quick_designs")
def test_a_designed_ramp_is_one_that_can_be_edited_saved_and_simulated(plan: Plan) -> None:
    found = design_answer(plan)
    assert found.control == SCALE
    assert found.design.reached
    assert not found.assumed
    designed = parse_plan(write_plan(found.plan(plan)), "designed.toml")
    again = ramp_answer(designed)
    assert again.reached
    assert again.run.final["atoms"] == pytest.approx(found.design.simulated.final["atoms"], rel=0.01)
    assert again.run.final["atoms"] == pytest.approx(found.answer.run.final["atoms"], rel=1e-9)
    assert again.run.final["atoms"] > ramp_answer(plan).run.final["atoms"]
    for stage in found.stages:
        digits = stage.duration.text.split()[0].replace(".", "").lstrip("0")
        assert len(digits) <= 4


@pytest.mark.usefixtures("quick_designs")
def test_a_held_truncation_parameter_leaves_no_more_atoms_than_one_that_may_drift(plan: Plan) -> None:
    held, free = design_answer(plan, drift=False), design_answer(plan)
    assert held.design.drift == 0.0
    assert held.design.simulated.final["atoms"] <= free.design.simulated.final["atoms"] * (1.0 + 1e-6)


@pytest.mark.usefixtures("quick_designs")
def test_a_design_keeps_to_the_limits_and_to_the_unit(plan: Plan) -> None:
    limits = '[limits]\ntime = "300 ms"\n[[limits.control]]\ncontrol = "depth"\nlow = "0.5 uK"\nhigh = "0.5 mK"\n'
    limited = parse_plan(write_plan(replace(plan, ramp=(), measured=())) + limits, "a.toml")
    assert usual_control(limited) == DEPTH
    assert unit_in_use(limited, DEPTH) == "µK"
    found = design_answer(limited)
    assert sum(stage.duration.value for stage in found.stages) <= 0.3 * (1.0 + 1e-3)
    assert all(stage.moves[0].end is not None and stage.moves[0].end.text.endswith("µK") for stage in found.stages)
    assert (
        found.answer.run.final["atoms"] < design_answer(replace(limited, limits=plan.limits)).answer.run.final["atoms"]
    )


@pytest.mark.usefixtures("quick_designs")
def test_the_rest_can_be_designed_from_a_measured_cloud(plan: Plan) -> None:
    found = design_answer(plan, None, "after stage 2")
    assert found.stages[:2] == plan.ramp[:2]
    assert found.answer.begin == pytest.approx(0.16)
    again = ramp_answer(found.plan(plan), "after stage 2")
    assert again.run.final["atoms"] == pytest.approx(found.answer.run.final["atoms"], rel=1e-6)
    within = design_answer(plan, None, "half of the third")
    assert within.stages[:2] == plan.ramp[:2]
    assert within.stages[2].duration.value == pytest.approx(0.075)
    assert within.stages[2].moves[0].end is not None
    assert within.stages[2].moves[0].end.value == pytest.approx(np.sqrt(0.1 * 0.03), rel=1e-3)


@pytest.mark.usefixtures("quick_designs")
def test_a_design_without_a_target_assumes_one_and_says_so(plan: Plan) -> None:
    found = design_answer(replace(plan, target=replace(plan.target, peak_phase_space_density=None), ramp=()))
    assert found.assumed
    assert found.target.peak_phase_space_density == pytest.approx(2.612)
    assert found.answer.reached


def test_controls_that_can_be_designed(plan: Plan) -> None:
    assert controls_of(plan) == (DEPTH, SCALE)
    unknown = replace(plan, trap=replace(plan.trap, depth=None), ramp=())
    assert controls_of(unknown) == (SCALE,)
    with pytest.raises(ValueError, match="knife cannot be designed: controls with a known start are depth, scale"):
        design_answer(plan, Control(Knob.KNIFE))
    with pytest.raises(ValueError, match="depth of the trap must be known"):
        design_answer(unknown)
    gone = replace(plan, limits=replace(plan.limits, time=replace(plan.ramp[0].duration, value=0.1)))
    with pytest.raises(PlanError, match=r"limits.time, 0.1 s, is over"):
        design_answer(gone, None, "after stage 2")


def test_beams_that_move_together_are_designed_together() -> None:
    second = BEAM.replace(
        "[cloud]",
        """[[trap.beam]]
name = "B"
wavelength = "1064 nm"
power = "2 W"
waist = "60 um"
direction = [0, 1, 0]
[cloud]""",
    )
    limit = '[[limits.control]]\ncontrol = "power"\nbeam = "A"\nlow = "0.1 W"\n'
    both = '[[ramp.stage.move]]\ncontrol = "power"\nbeam = "B"\nend = "1 W"\n'
    A = Control(Knob.POWER, "A")
    assert usual_control(parse_plan(BEAM, "a.toml")) == A
    assert usual_control(parse_plan(second, "a.toml")) == A  # as the ramp does
    assert usual_control(parse_plan(second + both, "a.toml")) == SCALE
    assert usual_control(parse_plan(second + both + limit, "a.toml")) == SCALE
    assert usual_control(parse_plan(second + limit, "a.toml")) == A
    assert usual_control(replace(parse_plan(second + limit, "a.toml"), ramp=())) == SCALE
    assert usual_control(replace(parse_plan(BEAM + limit, "a.toml"), ramp=())) == A


def test_a_beam_that_does_not_reach_the_target_names_those_that_stay(plan: Plan) -> None:
    found = design_answer(plan, SCALE)
    assert found.others == ()
    short = replace(found, control=Control(Knob.POWER, "A"), others=("B",), design=replace(found.design, reached=False))
    assert design_sentence(short).startswith("No ramp of power A reaches ")
    assert design_sentence(short).endswith(
        "The light of B stays as it is: design the scale, which moves all beams together."
    )
    assert "{" not in design_sentence(found)
