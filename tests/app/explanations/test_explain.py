"""Explanations: inputs, values, reasons, words; and which quantities have no steps yet."""

from __future__ import annotations

import importlib
import json
import math
import re
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import mpmath
import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from app.engine import CloudAnswer, cloud_answer
from app.explanations import Explanation, Input, Origin, explain, explanation_body, explanation_text
from app.explanations.explain import disagreeing, unexplained
from app.plan import read_plan
from app.quantities import QUANTITIES
from physics.constants import boltzmann, planck, reduced_planck
from physics.models import Model
from physics.particles import Statistics

ROOT = Path(__file__).resolve().parents[3]
Answered = Callable[..., CloudAnswer]


def explanations(answer: CloudAnswer) -> list[Explanation]:
    return [explain(answer, name) for name in QUANTITIES]


def test_steps_end_in_the_answer_s_own_value(answer: CloudAnswer) -> None:
    for name, row in QUANTITIES.items():
        explanation, value = explain(answer, name), np.asarray(answer.value(name), dtype=float)
        if explanation.value is None:
            assert explanation.reason
            assert answer.missing(row) is not None or not np.all(np.isfinite(value))
            continue
        np.testing.assert_array_equal(explanation.value, value)
        if explanation.steps:
            last = explanation.steps[-value.size :]
            assert [step.value for step in last] == list(np.atleast_1d(value)), name


def test_nothing_reads_not_a_number(answer: CloudAnswer) -> None:
    for explanation in explanations(answer):
        text = explanation_text(explanation)
        assert not re.search(r"\bnan\b|\binf\b|None", text), text
        assert explanation.title in text
        if explanation.value is None:
            assert f"no value, {explanation.reason}" in text


# --- values by other formulas ---


def value_of(answer: CloudAnswer, name: str) -> float:
    value = explain(answer, name).value
    assert isinstance(value, float)
    return value


def test_main_quantities_by_formulas_that_the_program_does_not_use(answered: Answered) -> None:
    thermal = answered()
    N, T, f, m = 1e5, 200e-9, (120.0, 120.0, 20.0), thermal.state.mass
    f_mean = math.prod(f) ** (1 / 3)
    # kTc = hf (N/zeta(3))^(1/3): Bagnato, Pritchard, Kleppner, Phys. Rev. A 35, 4354 (1987).
    Tc = planck * f_mean / boltzmann * (N / float(mpmath.zeta(3))) ** (1 / 3)
    assert value_of(thermal, "critical_temperature") == pytest.approx(Tc, rel=1e-12)
    assert value_of(thermal, "reduced_temperature") == pytest.approx(T / Tc, rel=1e-12)
    z = value_of(thermal, "fugacity")
    # N counted over the density of states e^2/2(hf)^3
    atoms = quad(lambda e: e * e / 2 / (math.exp(e) / z - 1), 0, 60)[0] * (boltzmann * T / (planck * f_mean)) ** 3
    assert atoms == pytest.approx(N, rel=1e-8)
    D = float(mpmath.polylog(1.5, z))
    assert value_of(thermal, "peak_phase_space_density") == pytest.approx(D, rel=1e-10)
    wavelength = reduced_planck * math.sqrt(2 * math.pi / (m * boltzmann * T))
    assert value_of(thermal, "peak_density") == pytest.approx(D / wavelength**3, rel=1e-10)
    fraction = value_of(answered("condensed, ideal"), "condensate_fraction")
    assert fraction == pytest.approx(1 - (80e-9 / Tc) ** 3, rel=1e-12)
    # Thomas-Fermi, mu = (hbar wbar/2)(15 N0 a/aho)^(2/5): Dalfovo et al., Rev. Mod. Phys. 71, 463 (1999), eq. (51).
    semi = answered("condensed, semi-ideal", {"species.scattering_length": "100 a0"})
    N0, w = value_of(semi, "condensate_atoms"), 2 * math.pi * f_mean
    aho = math.sqrt(reduced_planck / (m * w))
    mu = reduced_planck * w / 2 * (15 * N0 * 100 * 5.29177210544e-11 / aho) ** 0.4
    assert value_of(semi, "chemical_potential") == pytest.approx(mu, rel=1e-10)
    EF = planck * f_mean * (6 * N) ** (1 / 3)  # Butts, Rokhsar, Phys. Rev. A 55, 4346 (1997)
    assert value_of(answered("fermions, hot"), "fermi_energy") == pytest.approx(EF, rel=1e-12)


# --- inputs ---


def test_inputs_keep_the_typed_text_and_the_data_s_source(answered: Answered) -> None:
    explanation = explain(answered(changes={"cloud.temperature": "4.2 kHz"}), "elastic_collision_rate")
    found = {entry.symbol: entry for entry in explanation.inputs}
    assert (found["T"].text, found["T"].origin) == ("4.2 kHz", Origin.TYPED)
    assert found["T"].value == pytest.approx(4200 * planck / boltzmann, rel=1e-12)
    assert found["N"].text == "1.0(1)e5"
    assert found["m"].origin is Origin.DATA
    assert "AME2020" in found["m"].source
    assert found["m"].text.endswith(" u")
    assert found["a"].certainty is not None
    assert found["k"].origin is Origin.CONSTANT
    assert [entry.origin for entry in explanation.inputs] == sorted(
        (entry.origin for entry in explanation.inputs), key=list(Origin).index
    )


def test_a_typed_length_is_typed_and_a_tuned_one_says_at_which_field(answered: Answered) -> None:
    typed = entry("a", explain(answered(changes={"species.scattering_length": "99 a0"}), "elastic_collision_rate"))
    assert (typed.text, typed.origin) == ("99 a0", Origin.TYPED)
    tuned = entry("a", explain(answered("tuned by a field"), "elastic_collision_rate"))
    assert tuned.text.endswith("at 21 G")
    assert tuned.origin is Origin.DATA


def test_the_fermions_threshold_is_typed_or_assumed(answered: Answered) -> None:
    assert entry("t", explain(answered("fermions, hot"), "temperature_to_threshold")).origin is Origin.ASSUMED
    assert entry("t", explain(answered("fermions, cold"), "temperature_to_threshold")).text == "0.2"


def test_a_rate_constant_is_typed_or_from_the_data(answered: Answered) -> None:
    typed = entry("K₃", explain(answered("thermal, losses"), "three_body_lifetime"))
    assert (typed.text, typed.origin) == ("4.3e-29 cm^6/s", Origin.TYPED)
    known = entry("K₃", explain(answered(), "three_body_lifetime"))
    assert known.origin is Origin.DATA
    assert known.certainty is not None
    assert known.source


def entry(symbol: str, explanation: Explanation) -> Input:
    return next(entry for entry in explanation.inputs if entry.symbol == symbol)


# --- no value ---


@pytest.mark.parametrize(
    ("plan", "name", "reason"),
    [
        ("thermal, ideal", "fermi_energy", "needs fermions; 87Rb is a boson"),
        ("fermions, hot", "condensate_fraction", "needs bosons; 6Li is a fermion"),
        ("thermal, ideal", "condensate_radii", "nothing is condensed at T/Tc = 1.45"),
        ("condensed, ideal", "condensate_radii", "the model ideal gives the condensate the shape of the ground level"),
        ("length unknown", "elastic_collision_rate", "depends on the magnetic field, and no field is given"),
        ("fermions, one spin state", "mean_free_path", "the atoms do not collide"),
    ],
)
def test_a_missing_value_says_why(plan: str, name: str, reason: str, answered: Answered) -> None:
    explanation = explain(answered(plan), name)
    assert explanation.value is None
    assert explanation.text == "–"
    assert reason in explanation.reason
    assert explanation.inputs


def test_shifts_that_add_up_to_all_of_tc_are_shown(answered: Answered) -> None:
    few = answered(changes={"cloud.atoms": "3", "trap.frequencies": "100 Hz, 100 Hz, 1 Hz"})
    explanation = explain(few, "critical_temperature_shifted")
    assert explanation.value is None
    assert "add up to all of Tc" in explanation.reason
    assert explanation.steps[-1].symbol == "1 − δ₁ − δ₂"
    assert explanation.steps[-1].value is not None
    assert explanation.steps[-1].value < 0.0


def test_a_depth_or_an_efficiency_that_is_not_given_is_asked_for() -> None:
    bare = cloud_answer(read_plan(ROOT / "presets" / "plans" / "pure_condensate_sodium.toml"))
    for name, words in (("truncation", "a trap depth"), ("atoms_left_at_target", "an evaporation efficiency")):
        assert words in explain(bare, name).reason
        assert explain(bare, name).reason.endswith("which the plan does not give")


def test_an_unknown_name_gets_the_nearest_ones(answered: Answered) -> None:
    with pytest.raises(ValueError, match='no quantity is named "critical_temprature"; the nearest are critical_temp'):
        explain(answered(), "critical_temprature")


# --- what is shown beside the steps ---


def test_value_and_interval_are_in_the_chosen_unit(answered: Answered) -> None:
    answer = answered()
    in_nanokelvin, in_kilohertz = (explain(answer, "critical_temperature", unit).text for unit in (None, "kHz"))
    assert re.fullmatch(r"138\.4 nK \(13\d to 14\d nK, 16 to 84 %\)", in_nanokelvin)
    assert re.fullmatch(r"2\.883 kHz \(2\.\d+ to [23]\.\d+ kHz, 16 to 84 %\)", in_kilohertz)
    assert explain(answer, "thermal_radii").text.endswith(" µm")


def test_the_model_in_use_is_named_and_why_another_is_not(answered: Answered) -> None:
    assert explain(answered(), "peak_density").model.startswith("semi-ideal: ")
    model = explain(answered("attractive"), "peak_density").model
    assert model.startswith("ideal: ")
    assert "instead of semi-ideal: scattering length not positive" in model


def test_a_definition_stands_where_it_is_first_met(answered: Answered) -> None:
    steps = explain(answered("condensed, semi-ideal"), "energy_per_atom").steps
    definitions = [step.where for step in steps if step.where]
    assert len(definitions) == len(set(definitions)) > 2


def test_plain_text_has_the_formula_the_numbers_and_the_result_in_lines(answered: Answered) -> None:
    lines = explanation_text(explain(answered(), "critical_temperature")).splitlines()
    assert lines[0].startswith("critical temperature (ideal), Tc = 138.4 nK")
    place = lines.index("       Tc = T₀ (N/ζ(3))^(1/3)")
    assert lines[place + 1].startswith("       = 3.16935")
    assert lines[place + 2] == "       = 1.38355e-7 K"
    assert any("1.0(1)e5" in line and "typed" in line for line in lines)
    assert any(line.startswith("  So Tc = 138.4 nK") for line in lines)


def test_data_for_json_are_plain(answered: Answered) -> None:
    body = explanation_body(explain(answered(), "log_fugacity"))
    assert json.loads(json.dumps(body, allow_nan=False)) == body
    equation = body["steps"][-1]
    assert equation["kind"] == "equation"
    assert equation["left"] == equation["right"]


def test_values_and_reasons_exclude_each_other(answered: Answered) -> None:
    explanation = explain(answered(), "fugacity")
    with pytest.raises(ValueError, match="fugacity needs either a value or a reason"):
        replace(explanation, value=None)


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    key=st.sampled_from(["87Rb", "7Li", "164Dy", "6Li", "161Dy"]),
    model=st.sampled_from(Model),
    atoms=st.floats(0.0, 9.0),
    temperature=st.floats(0.0, 5.0),
    frequencies=st.tuples(*[st.floats(0.5, 3.5)] * 3),
    length=st.none() | st.floats(-2000.0, 2000.0),
    spin_states=st.sampled_from(["1", "2"]),
)
def test_the_arithmetic_of_any_cloud_agrees(
    key: str,
    model: Model,
    atoms: float,
    temperature: float,
    frequencies: tuple[float, float, float],
    length: float | None,
    spin_states: str,
    answered: Answered,
) -> None:
    changes = {
        "species.key": key,
        "species.spin_components": spin_states,
        "cloud.model": model.value,
        "cloud.atoms": f"{10**atoms:.6g}",
        "cloud.temperature": f"{10**temperature:.6g} nK",
        "trap.frequencies": ", ".join(f"{10**f:.4g} Hz" for f in frequencies),
    }
    if length is not None:
        changes["species.scattering_length"] = f"{length:.4g} a0"
    answer = answered(changes=changes)
    for name in QUANTITIES:
        explanation = explain(answer, name)
        assert disagreeing(explanation) == ()
        assert not re.search(r"\bnan\b", explanation_text(explanation))


# --- what is not explained yet ---

OTHERS = ("condensed, attractive", "condensed, dipoles", "condensed, pure")
WITHOUT_STEPS: dict[tuple[Model, Statistics], frozenset[str]] = {}
"""The quantities that have a value and no steps all the way to it: to be driven to nothing."""


@pytest.mark.parametrize("statistics", Statistics)
@pytest.mark.parametrize("model", Model)
def test_no_quantity_lacks_its_steps_but_those_listed(
    model: Model, statistics: Statistics, answered: Answered, clouds: tuple[str, ...]
) -> None:
    found: set[str] = set()
    for cloud in (name for name in clouds if "losses" in name or "fermions" in name or name in OTHERS):
        answer = answered(cloud, {"cloud.model": model.value})
        if (answer.model, answer.cloud.statistics) == (model, statistics):
            found |= set(unexplained(answer))
    assert found == WITHOUT_STEPS.get((model, statistics), frozenset()), (
        "write down the steps of a new quantity in app/explanations, or list it here for now"
    )


def test_a_quantity_without_steps_is_explained_by_its_row(monkeypatch: pytest.MonkeyPatch, answered: Answered) -> None:
    module = importlib.import_module("app.explanations.explain")
    steps = {name: make for name, make in module.EXPLAINED.items() if name != "peak_density"}
    monkeypatch.setattr(module, "EXPLAINED", steps)
    explanation = module.explain(answered(), "peak_density")
    assert explanation.steps == ()
    assert not explanation.complete
    assert explanation.value == answered().value("peak_density")
    assert {"N", "T", "f₁", "m", "a"} <= {entry.symbol for entry in explanation.inputs}
    assert QUANTITIES["peak_density"].formula in explanation_text(explanation)
