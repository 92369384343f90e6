"""Simulated ramps of plans, from the start or from a measured cloud."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.answers.ramp import kept_ramp, ramp_answer
from app.answers.ramp_inputs import gas_of, losses_of, path_of, ramp_of, target_of
from app.answers.ramp_start import stage_named, start_of
from app.choices import LossesChoice, TargetChoice
from app.plan import Plan, PlanError, plan_with
from physics.evaporation import evaporate
from physics.ramp_caveats import RampCaveatKind
from physics.trap_path import SCALE

# --- from the start ---


def test_the_answer_is_the_simulation_of_what_the_plan_says(plan: Plan) -> None:
    answer = ramp_answer(plan)
    run = evaporate(
        gas_of(plan), 2e6, 5e-5, ramp_of(plan), path_of(plan), losses=losses_of(plan), target=target_of(plan)
    )
    np.testing.assert_array_equal(answer.run.atoms, run.atoms)
    assert answer.reached
    assert answer.run.rows.peak_phase_space_density[-1] == pytest.approx(2.612, abs=1e-3)
    assert abs(answer.run.budget.atoms_missing) < 1e-6
    assert abs(answer.run.budget.energy_missing) < 1e-6


def test_it_is_kept_for_the_fields_that_it_depends_on(plan: Plan) -> None:
    answer = ramp_answer(plan)
    assert ramp_answer(replace(plan, title="another title")) is answer
    assert kept_ramp(plan) is answer
    assert ramp_answer(replace(plan, ramp=plan.ramp[:2])) is not answer


def test_caveats(plan: Plan) -> None:
    kinds = {caveat.kind for caveat in ramp_answer(plan).caveats}
    assert kinds >= {RampCaveatKind.ESTIMATES, RampCaveatKind.LENGTH_RECALLED, RampCaveatKind.THREE_BODY_RECALLED}
    assert RampCaveatKind.NO_BACKGROUND not in kinds
    bare = replace(plan, losses=LossesChoice(), target=TargetChoice())
    assert RampCaveatKind.NO_BACKGROUND in {caveat.kind for caveat in ramp_answer(bare).caveats}
    polarised = plan_with(plan, {"species.key": "40K", "species.spin_components": "1"})
    assert next(iter(ramp_answer(polarised).caveats)).kind is RampCaveatKind.POLARISED


def test_what_cannot_be_answered_says_so(plan: Plan) -> None:
    with pytest.raises(PlanError, match=r"the plan has no ramp: give it stages \[\[ramp.stage\]\]"):
        ramp_answer(replace(plan, ramp=()))
    with pytest.raises(PlanError, match="nothing is left of the ramp after its last stage"):
        ramp_answer(plan, "at the end")
    with pytest.raises(PlanError, match='no measured cloud is called "tomorrow"; the plan has "After stage 2", "half'):
        ramp_answer(plan, "tomorrow")
    with pytest.raises(PlanError, match=r"the plan has none: give it \[\[measured\]\]"):
        ramp_answer(replace(plan, measured=()), "tomorrow")
    twice = replace(plan, measured=(*plan.measured, plan.measured[0]))
    with pytest.raises(PlanError, match='"after stage 2" may be two measured clouds or more'):
        ramp_answer(twice, "after stage 2")
    asked = plan_with(plan, {"species.key": "6Li", "species.spin_components": "2"})
    with pytest.raises(PlanError, match=r"species\.scattering_length, or species\.field"):
        ramp_answer(asked)


# --- from a measured cloud ---


def test_a_cloud_is_found_by_the_stage_after_which_it_was_measured(plan: Plan) -> None:
    renamed = replace(plan, measured=(replace(plan.measured[0], label="a good shot"),))
    assert renamed.measured[0].stage == 2
    assert ramp_answer(renamed, "after stage 2").run.final == ramp_answer(renamed, "A good shot").run.final
    with pytest.raises(PlanError, match='no measured cloud is called "after stage 1"'):
        ramp_answer(renamed, "after stage 1")


def test_going_on_from_the_simulated_cloud_is_the_same_ramp(plan: Plan) -> None:
    """A measured cloud that is as simulated ends as planned."""
    whole = ramp_answer(plan).run
    row = whole.stages[1].last
    atoms, temperature = float(whole.atoms[row]), float(whole.temperature[row])
    first = plan.measured[0]
    assert first.temperature is not None
    same = replace(
        first,
        atoms=replace(first.atoms, value=atoms),
        temperature=replace(first.temperature, value=temperature),
    )
    rest = ramp_answer(replace(plan, measured=(same,)), "after  STAGE 2")
    assert (rest.first, rest.begin) == (2, pytest.approx(0.16))
    assert rest.run.final["atoms"] == pytest.approx(whole.final["atoms"], rel=1e-4)
    assert rest.begin + rest.run.final["time"] == pytest.approx(whole.final["time"], rel=1e-4)


def test_measured_within_a_stage_and_before_the_ramp(plan: Plan) -> None:
    start = start_of(plan, "half of the third")
    assert (start.stage, start.begin) == (2, pytest.approx(0.235))
    assert start.path.standing[SCALE] == pytest.approx(np.sqrt(0.1 * 0.03))
    loaded = start_of(plan, "loaded")
    assert (loaded.stage, loaded.begin, loaded.atoms) == (0, 0.0, 1.8e6)
    assert loaded.ramp == ramp_of(plan)
    assert stage_named(" After  stage 12") == 12
    assert stage_named("after the MOT") is None
