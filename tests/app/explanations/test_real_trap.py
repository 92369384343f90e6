"""Explanations in traps of beams and coils: integrals over the volume curve, and arithmetic that agrees."""

from __future__ import annotations

from pathlib import Path

import pytest

from app.engine import CloudAnswer, cloud_answer
from app.explanations import StepKind, explain, explanation_text
from app.explanations.explain import disagreeing, unexplained
from app.plan import plan_with, read_plan
from app.quantities import QUANTITIES

TRAPS = Path(__file__).resolve().parents[3] / "presets" / "traps"
BY_INTEGRALS = ["log_fugacity", "peak_phase_space_density", "energy_per_atom", "mean_density", "reduced_temperature"]


def answer_in(name: str, **texts: str) -> CloudAnswer:
    plan = read_plan(TRAPS / f"{name}.toml")
    return cloud_answer(plan_with(plan, {path.replace("__", "."): text for path, text in texts.items()}))


CLOUDS = [
    ("telecom_beams_helium", {}),
    ("sheet_strontium", {}),
    ("sheet_strontium", {"cloud__model": "ideal"}),
    ("sheet_strontium", {"cloud__model": "Hartree-Fock"}),
    ("hybrid_rubidium", {"cloud__model": "Hartree-Fock"}),
    ("quadrupole_rubidium", {}),
    ("single_beam_lithium", {"cloud__temperature": "5 uK"}),
]


@pytest.mark.parametrize(("name", "texts"), CLOUDS, ids=str)
def test_steps_agree_with_the_answer_and_are_those_of_the_real_trap(name: str, texts: dict[str, str]) -> None:
    answer = answer_in(name, **texts)
    for quantity in QUANTITIES:
        explanation = explain(answer, quantity)
        assert disagreeing(explanation) == (), quantity
        assert explanation_text(explanation)
    for quantity in BY_INTEGRALS:
        explanation = explain(answer, quantity)
        assert any(step.kind is StepKind.INTEGRAL for step in explanation.steps), quantity
        assert "ω̄" not in "".join(step.expression for step in explanation.steps), quantity
        assert explanation.complete
    assert set(unexplained(answer)) <= {"harmonic_peak_phase_space_density", "harmonic_condensate_fraction"}


def test_an_integral_is_written_with_what_bounds_it() -> None:
    text = explanation_text(explain(answer_in("single_beam_lithium"), "fermi_temperature"))
    assert "TF is the root of N = ∫ ρ(ε) dε up to ε = k TF" in text
    assert "where ρ(ε) = π (2m)^(3/2) h⁻³ ∫₀^ε W(U)" in text
    assert "highest energy that the trap holds" in text
    assert "formula    N = ∫ ρ(ε) dε up to k TF" in text


def test_what_a_trap_lacks_is_the_reason() -> None:
    explanation = explain(answer_in("quadrupole_rubidium"), "thermal_radii")
    assert explanation.value is None
    assert explanation.reason == "needs trap frequencies, which this trap does not have"
