"""Magnetic tuning of a plan: what its curve depends on, the range that is shown, and what is said of it."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from app.engine import cloud_answer, tuning_answer, usual_fields
from app.plan import DEFAULT_PLAN, Plan, plan_with
from app.tuning_words import data_sentence, field_text, length_note, length_sentence, no_curve_sentences, sources_text
from physics.constants import bohr_radius
from physics.particles import Certainty

G = 1e-4


def a_plan(key: str, **entries: str) -> Plan:
    return plan_with(DEFAULT_PLAN, {"species.key": key, **{f"species.{name}": text for name, text in entries.items()}})


def in_gauss(fields: tuple[float, float] | None) -> Any:
    return pytest.approx(np.array(fields if fields is not None else ()) / G)


def test_the_curve_is_kept_while_the_field_moves_and_the_species_stays() -> None:
    here, there = a_plan("39K", field="380 G"), a_plan("39K", field="390 G")
    assert tuning_answer(here, (0.03, 0.05)) is tuning_answer(there, (0.03, 0.05))
    assert tuning_answer(here, (0.03, 0.05)) is not tuning_answer(a_plan("85Rb"), (0.03, 0.05))


def test_the_usual_range_is_what_the_data_describe_and_grows_to_hold_the_field() -> None:
    assert np.array([0.0, 800.0]) == in_gauss(usual_fields(a_plan("39K")))
    assert np.array([0.0, 800.0]) == in_gauss(usual_fields(a_plan("39K", field="400 G")))
    wide = usual_fields(a_plan("39K", field="900 G"))
    assert wide is not None
    assert wide[0] == 0.0
    assert wide[1] > 900 * G
    assert usual_fields(a_plan("39K", field="905 G")) == wide  # coarse steps
    assert usual_fields(a_plan("87Rb", state="F=1 mF=-1")) is None


def test_the_curve_passes_through_the_length_in_use() -> None:
    plan = a_plan("39K", field="380 G")
    curve = tuning_answer(plan).curve
    assert curve is not None
    used = cloud_answer(plan).scattering
    at = np.interp(380 * G, curve.field, curve.length)
    assert used.value == pytest.approx(at, rel=1e-3)
    assert used.from_resonances


def test_resonances_and_how_sure_they_are_come_with_the_curve() -> None:
    answer = tuning_answer(a_plan("39K"))
    assert [round(r.position.value / G, 2) for r in answer.resonances] == [25.85, 402.7, 752.3]
    assert answer.certainty is Certainty.MEMORY
    assert "D'Errico" in sources_text(answer)


def test_a_state_without_resonances_has_no_curve_and_names_those_that_do() -> None:
    answer = tuning_answer(a_plan("87Rb", state="F=1 mF=-1"))
    assert answer.curve is None
    assert [state.name for state in answer.tunable] == ["F=1 mF=+1"]


# --- words ---


@pytest.mark.parametrize(
    ("plan", "said"),
    [
        (a_plan("85Rb", field="163 G"), "a = 153.1 a0 at 163 G (recalled)."),
        (a_plan("85Rb"), "No field is given, and the scattering length of this state depends on the magnetic field"),
        (a_plan("6Li", scattering_length="-290 a0"), "a = −290.0 a0, as typed. It overrides the data at any field."),
        (a_plan("40K", field="1000 G"), "a = 167.0 a0 is used at 1000 G: the data describe no tuning there"),
        (a_plan("133Cs", field="200 G"), "a is not known at 200 G: the data do not describe"),
        (a_plan("87Rb"), "No field is given: a = 100.4 a0 is used (recalled)."),
    ],
)
def test_it_is_said_which_length_holds_and_why(plan: Plan, said: str) -> None:
    assert length_sentence(cloud_answer(plan)).startswith(said)


def test_under_the_field_stands_what_it_makes_of_the_length() -> None:
    assert length_note(cloud_answer(a_plan("85Rb", field="163 G")).scattering) == (
        "a = 153.1 a0 at this field (recalled)"
    )
    assert length_note(cloud_answer(a_plan("40K", field="1000 G")).scattering).startswith("no resonance of the data")
    assert "do not describe" in length_note(cloud_answer(a_plan("133Cs", field="200 G")).scattering)


def test_poles_zeros_and_gaps_are_named() -> None:
    said = data_sentence(tuning_answer(a_plan("39K")))
    assert "Resonances at 25.85 G, 402.7 G, 752.3 G (recalled)." in said
    assert "350.7 G" in said
    assert "The data say nothing from 60 to 250 G and from 550 to 700 G." in said
    assert "No resonance in this range." in data_sentence(tuning_answer(a_plan("39K"), (0.03, 0.035)))


def test_where_there_is_no_curve_it_is_said_why_and_what_helps() -> None:
    plan = a_plan("87Rb", state="F=1 mF=-1")
    why, remedy = no_curve_sentences(tuning_answer(plan), cloud_answer(plan))
    assert "no magnetic resonance" in why
    assert "100.4 a0" in why
    assert "Choose a state" in remedy
    typed = a_plan("174Yb", scattering_length="50 a0")
    why, remedy = no_curve_sentences(tuning_answer(typed), cloud_answer(typed))
    assert "as typed" in why
    assert "Choose a state" not in remedy
    alone = plan_with(DEFAULT_PLAN, {"species.key": "40K", "species.state": "F=9/2 mF=-9/2"})
    why, remedy = no_curve_sentences(tuning_answer(alone), cloud_answer(alone))
    assert "one spin state" in why
    assert "mixture" in remedy


def test_fields_are_written_with_the_digits_that_tell_resonances_apart() -> None:
    assert field_text(853.0025 * G) == "853.0025 G"
    assert field_text(0.0) == "0 G"
    assert field_text(12.5e-7) == "12.5 mG"


def test_a_field_typed_in_the_plan_sets_the_length_of_the_cloud() -> None:
    length = cloud_answer(a_plan("85Rb", field="163 G")).cloud.scattering_length
    assert float(length) / bohr_radius == pytest.approx(153.1, abs=0.1)
