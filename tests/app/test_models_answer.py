"""All models of one cloud: in order, in steps, with what they say and how it is put in words."""

from __future__ import annotations

import numpy as np
import pytest

from app.answers.models import ModelsAnswer, models_of
from app.engine import cloud_answer, models_answer
from app.figures.models import models_picture
from app.figures.picture import Role
from app.model_words import cells_of, difference_text, headings_of, interaction_sentence, spread_sentence
from app.plan import DEFAULT_PLAN, Plan, plan_with
from physics.models import Model

CONDENSED = plan_with(DEFAULT_PLAN, {"cloud.temperature": "80 nK"})
MIXTURE = plan_with(DEFAULT_PLAN, {"species.key": "6Li", "species.field": "900 G"})


def answer_of(plan: Plan) -> ModelsAnswer:
    answer = models_answer(plan)
    assert answer is not None
    return answer


def test_every_model_has_a_row_and_a_curve_and_quick_ones_come_first() -> None:
    steps: list[ModelsAnswer] = []
    shares: list[float] = []

    def deliver(answer: ModelsAnswer) -> bool:
        steps.append(answer)
        return True

    def tick(share: float) -> bool:
        shares.append(share)
        return True

    last = models_answer(CONDENSED, deliver, tick)
    assert last is not None
    assert [list(step.rows) for step in (*steps, last)] == [list(last.models[: n + 1]) for n in range(4)]
    assert last.models == (Model.IDEAL, Model.SEMI_IDEAL, Model.EXACT_LEVELS, Model.HARTREE_FOCK)
    assert [step.complete for step in (*steps, last)] == [False, False, False, True]
    assert shares == [0.25, 0.5, 0.75, 1.0]
    assert [curve.model for curve in last.curves] == list(last.models)


@pytest.mark.parametrize("after", [1, 2, 3])
def test_the_work_stops_where_nobody_wants_the_rest(after: int) -> None:
    told: list[float] = []

    def tick(share: float) -> bool:
        told.append(share)
        return len(told) < after

    assert models_answer(plan_with(CONDENSED, {"cloud.atoms": f"{after}e5"}), tick=tick) is None
    assert len(told) == after


def test_the_row_of_the_model_in_use_is_the_cloud() -> None:
    for name in ("ideal", "semi-ideal", "exact levels", "Hartree-Fock"):
        plan = plan_with(CONDENSED, {"cloud.model": name})
        answer, cloud = answer_of(plan), cloud_answer(plan)
        row = answer.rows[cloud.model]
        assert answer.present is cloud.model
        assert float(row.condensate_fraction) == pytest.approx(float(cloud.equilibrium.condensate_fraction))
        assert float(row.energy_per_atom) == pytest.approx(float(cloud.equilibrium.energy_per_atom))
        curve = next(curve for curve in answer.curves if curve.model is cloud.model)
        at = np.interp(answer.reduced_temperature, curve.reduced_temperature, curve.value)
        assert answer.now == pytest.approx(at, abs=2e-3)


def test_a_model_that_cannot_hold_has_its_obstacle_and_no_curve() -> None:
    answer = answer_of(plan_with(CONDENSED, {"species.scattering_length": "-20 a0"}))
    assert answer.present is Model.IDEAL
    assert [curve.model for curve in answer.curves] == [Model.IDEAL, Model.EXACT_LEVELS]
    assert cells_of(answer, Model.HARTREE_FOCK) == ("needs a positive scattering length", "", "", "")


def test_fermions_are_compared_with_exact_levels() -> None:
    answer = answer_of(MIXTURE)
    assert models_of(cloud_answer(MIXTURE)) == (Model.IDEAL, Model.EXACT_LEVELS)
    ideal, exact = (curve.value for curve in answer.curves)
    # Zero temperature: mu = EF; and the shift of the levels is far below a percent for 100 000 atoms.
    assert ideal[0] == pytest.approx(1.0, abs=0.01)
    assert np.interp(0.5, answer.curves[1].reduced_temperature, exact) == pytest.approx(
        np.interp(0.5, answer.curves[0].reduced_temperature, ideal), abs=5e-3
    )
    assert headings_of(answer)[0] == "µ/k"


# --- words ---


@pytest.mark.parametrize(
    ("value", "reference", "text"),
    [
        (1.02, 1.0, "+2.0 %"),
        (0.996, 1.0, "−0.4 %"),
        (1.0, 1.0, "="),
        (52.0, 1.0, "52 ×"),
        (0.0, 0.0, "="),
        (0.1, 0.0, ""),
        (-1.1, -1.0, "−10.0 %"),
        (float("nan"), 1.0, ""),
    ],
)
def test_a_difference_is_in_percent_or_a_factor(value: float, reference: float, text: str) -> None:
    assert difference_text(value, reference) == text


def test_cells_say_the_value_and_how_far_it_is_from_the_model_in_use() -> None:
    answer = answer_of(CONDENSED)
    assert cells_of(answer, Model.SEMI_IDEAL)[:2] == ("138 nK", "66 %")
    ideal = cells_of(answer, Model.IDEAL)
    assert ideal[0] == "138 nK   ="
    assert ideal[1].startswith("81 %   +22")
    assert cells_of(answer, Model.HARTREE_FOCK)[0].startswith("134 nK   −3.2 %")
    assert "65 % to 81 %" in spread_sentence(answer)
    hot = answer_of(plan_with(DEFAULT_PLAN, {"cloud.temperature": "800 nK"}))
    assert spread_sentence(hot) == (
        "By no model is more than an atom in a thousand condensed; condensation begins at 134 nK to 138 nK."
    )


def test_models_that_are_not_done_yet_have_no_numbers() -> None:
    steps: list[ModelsAnswer] = []

    def deliver(answer: ModelsAnswer) -> bool:
        steps.append(answer)
        return True

    models_answer(CONDENSED, deliver)
    assert set(cells_of(steps[0], Model.HARTREE_FOCK)) == {"…"}


@pytest.mark.parametrize(
    ("entries", "said"),
    [
        ({"species.field": "900 G"}, "Estimates exist below −1"),
        ({"species.field": "832 G"}, "near unitarity"),
        ({"species.scattering_length": "-4000 a0"}, "weak attraction"),
        ({"species.scattering_length": "-290 a0"}, "far below any temperature"),
        ({"species.scattering_length": "500 a0"}, "as pairs"),
        ({"species.state": "F=1/2 mF=+1/2"}, "no s-wave interaction"),
        ({}, "the scattering length is not known"),
    ],
)
def test_the_interaction_of_fermions_is_estimated_where_it_can_be(entries: dict[str, str], said: str) -> None:
    plan = plan_with(DEFAULT_PLAN, {"species.key": "6Li", **entries})
    assert said in interaction_sentence(cloud_answer(plan))


# --- picture ---


def test_the_picture_has_a_curve_a_model_the_shifts_and_the_cloud() -> None:
    picture = models_picture(answer_of(CONDENSED))
    names = [curve.name for curve in picture.curves if curve.name]
    assert names == ["ideal", "first-order shifts", "semi-ideal", "exact levels", "Hartree-Fock"]
    (mark,) = picture.marks
    cloud = cloud_answer(CONDENSED).equilibrium
    assert (mark.x, mark.y) == (float(cloud.reduced_temperature), float(cloud.condensate_fraction))
    assert len({curve.role for curve in picture.curves}) == len(picture.curves)


def test_a_cloud_far_from_the_curves_is_told_of() -> None:
    picture = models_picture(answer_of(plan_with(CONDENSED, {"cloud.temperature": "2 µK"})))
    assert picture.marks == ()
    assert "further right, at T/Tc = 14.5" in picture.note


def test_estimates_of_a_mixture_are_marked() -> None:
    plan = plan_with(DEFAULT_PLAN, {"species.key": "6Li", "species.field": "832 G", "cloud.temperature": "100 nK"})
    picture = models_picture(answer_of(plan))
    estimate = next(mark for mark in picture.marks if mark.role is Role.THRESHOLD)
    # Unitarity at T = 0: mu = sqrt(xi) EF, xi = 0.376(4), Ku et al., Science 335, 563 (2012).
    assert estimate.x == 0.0
    assert estimate.y == pytest.approx(0.376**0.5)
    assert any(curve.name.startswith("superfluid below") for curve in picture.curves)
