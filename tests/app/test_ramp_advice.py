"""What limits a ramp and what to change: the sentence names what was put into the plan."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app import ramp_edits
from app.answers.ramp import ramp_answer
from app.plan import DEFAULT_PLAN, Plan, plan_with
from app.ramp_advice import advice, difference, onset
from app.units import DURATION, read_quantity


@pytest.fixture
def plan() -> Plan:
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "3 uK", "cloud.atoms": "5e6", "target.efficiency": ""})
    return replace(plan, ramp=ramp_edits.usual_ramp(plan))


def lasting(plan: Plan, text: str) -> Plan:
    return ramp_edits.with_duration(plan, 0, read_quantity(text, DURATION))


def test_a_ramp_that_is_too_fast_outruns_its_collisions(plan):
    said = advice(ramp_answer(lasting(plan, "0.2 s")))
    assert said.limit.startswith("Stage 1 outruns the collisions: η falls to 2.")
    assert said.change == "Give it more time, or a higher end."


def test_bad_vacuum_is_named_with_its_share(plan):
    answer = ramp_answer(plan_with(plan, {"losses.background_lifetime": "3 s"}))
    share = 100.0 * answer.run.budget.atoms[next(p for p in answer.run.budget.atoms if p.value == "background")]
    share /= sum(answer.run.budget.atoms.values())
    assert advice(answer).limit == f"Background gas takes {share:.0f} % of the lost atoms."


def test_strong_three_body_loss_is_named(plan):
    said = advice(ramp_answer(plan_with(plan, {"losses.three_body": "2e-26 cm^6/s"})))
    assert said.limit.startswith("Three-body loss takes ")


def test_a_shallow_start_is_named(plan):
    hot = plan_with(plan, {"cloud.temperature": "30 uK"})
    assert advice(ramp_answer(hot)).limit.startswith("The trap is shallow from the start: η = 1")


def test_a_long_hold_in_a_deep_trap_does_little(plan):
    held = ramp_edits.with_new_stage(plan, 1, hold=True)
    held = ramp_edits.with_duration(held, 1, read_quantity("30 s", DURATION))
    assert advice(ramp_answer(held)).limit.startswith("In stage 2 hardly an atom is hot enough to leave")


def test_a_ramp_that_ends_too_early_is_to_go_on(plan):
    few = plan_with(plan, {"cloud.atoms": "3e6"})
    short = ramp_edits.with_move(
        few,
        0,
        0,
        replace(
            few.ramp[0].moves[0],
            end=ramp_edits.scaled(few.ramp[0].moves[0].end, 3.0, few.ramp[0].moves[0].control.knob),
        ),
    )
    said = advice(ramp_answer(short))
    assert said.limit.startswith("The ramp ends while evaporation still works")
    assert said.change == "Add a stage that goes on lowering the depth."


def test_the_onset_of_condensation_is_told_where_there_is_no_target(plan):
    answer = ramp_answer(plan)
    first = next(k for k, n in enumerate(answer.run.rows.condensate_atoms) if n > 0.0)
    assert onset(answer).startswith(f"Condenses after {answer.run.time[first]:.2f} s with ")
    assert onset(ramp_answer(plan_with(plan, {"target.reduced_temperature": "0.9"}))) == ""
    assert onset(ramp_answer(plan_with(plan, {"cloud.atoms": "1e5"}))) == ""


def test_two_ramps_are_compared_in_factors_and_seconds(plan):
    one, other = ramp_answer(lasting(plan, "8 s")), ramp_answer(plan)
    ratio = one.run.atoms[-1] / other.run.atoms[-1]
    assert difference(one, other).startswith(f"N × {ratio:.3g}, T × ")
    assert difference(one, other).endswith("3.00 s longer")
    assert difference(other, other) == "N × 1, T × 1, D × 1, as long"
