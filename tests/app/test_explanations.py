"""Why a number is what it is: the arithmetic on show is worked out again, and must give what is printed beside it."""

from __future__ import annotations

import importlib
import json
import math
import re
from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise
from pathlib import Path
from typing import Any

import mpmath
import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import minimize_scalar

from app.engine import CloudAnswer, cloud_answer
from app.explanations import Explanation, Origin, StepKind, explain, explanation_body, explanation_text
from app.explanations.explain import unexplained
from app.plan import plan_with, read_plan
from app.quantities import QUANTITIES
from physics.constants import boltzmann, planck, reduced_planck
from physics.models import Model
from physics.statistics import bose, fermi

ROOT = Path(__file__).resolve().parents[2]
RUBIDIUM = read_plan(ROOT / "presets" / "plans" / "crossed_trap_rubidium.toml")

SMALL = {"cloud.atoms": "2000", "trap.frequencies": "200 Hz, 250 Hz, 100 Hz"}
FERMIONS = {"species.key": "6Li", "species.scattering_length": "-300 a0", "species.spin_components": "2"}
PLANS: dict[str, dict[str, str]] = {
    "thermal, ideal": {"cloud.model": "ideal"},
    "thermal, semi-ideal": {},
    "thermal, exact levels": {**SMALL, "cloud.temperature": "90 nK", "cloud.model": "exact levels"},
    "thermal, classical": {"cloud.temperature": "40 µK"},
    "condensed, ideal": {"cloud.temperature": "80 nK", "cloud.model": "ideal"},
    "condensed, semi-ideal": {"cloud.temperature": "80 nK"},
    "condensed, thin": {"cloud.temperature": "138 nK", "species.scattering_length": "2000 a0"},
    "condensed, pure": {"cloud.atoms": "1e7", "cloud.temperature": "20 nK"},
    "condensed, exact levels": {**SMALL, "cloud.temperature": "30 nK", "cloud.model": "exact levels"},
    "attractive": {"species.key": "7Li", "species.scattering_length": "-27 a0"},
    "length unknown": {"species.key": "85Rb"},
    "tuned by a field": {"species.key": "133Cs", "species.field": "21 G", "cloud.temperature": "20 nK"},
    "two boson states": {"species.spin_components": "2"},
    "fermions, hot": {**FERMIONS, "cloud.temperature": "2 µK"},
    "fermions, cold": {**FERMIONS, "cloud.temperature": "60 nK", "target.reduced_temperature": "0.2"},
    "fermions, paired": {**FERMIONS, "species.scattering_length": "3000 a0"},
    "fermions, unitary": {**FERMIONS, "species.scattering_length": "1e6 a0"},
    "fermions, one spin state": {"species.key": "40K", "species.spin_components": "1"},
}
"""Changes to a plan with 87Rb at 200 nK, Tc 138 nK, for each sort of cloud."""


@pytest.fixture(params=PLANS, scope="module")
def answer(request: pytest.FixtureRequest) -> CloudAnswer:
    return answered(PLANS[request.param])


def answered(changes: dict[str, str]) -> CloudAnswer:
    return cloud_answer(plan_with(RUBIDIUM, changes))


# --- the arithmetic on show ---


def integral(function: Callable[[float], float], *edges: float) -> float:
    """By scipy, over sqrt(u), in which the integrands are smooth but for kinks at the edges."""
    roots = [math.sqrt(edge) for edge in (0.0, *edges)]
    roots += [roots[-1] + 1.0, roots[-1] + 3.0, roots[-1] + 7.0]
    pieces = ((a, b) for a, b in pairwise(roots) if b > a)
    return float(sum(quad(lambda w: 2 * w * function(w * w), a, b, epsrel=1e-11, limit=200)[0] for a, b in pieces))


def shell(weight: Callable[[float, float, float], float]) -> Callable[[Any], float]:
    """(2/sqrt(pi)) integral of sqrt(u) weight(u, x - u, d(u)) over the trap around a condensate of height x."""

    def function(height: Any) -> float:
        x = float(height)
        return 2 / math.sqrt(math.pi) * integral(
            lambda u: math.sqrt(u) * weight(u, x - u, bose(1.5, abs(u - x))), x
        )  # fmt: skip

    return function


def levels(alpha: Any, spacings: tuple[Any, ...], term: Callable[..., Any]) -> float:
    """Sum over j of exp(-j alpha) term(j b_1, j b_2, j b_3), term by term."""
    b = np.array([float(spacing) for spacing in spacings])
    j = np.arange(1.0, 60.0 / b.min())
    return float(np.sum(np.exp(-j * float(alpha)) * term(*(j * spacing for spacing in b))))


def product(*jb: Any) -> Any:
    return 1.0 / np.prod([-np.expm1(-x) for x in jb], axis=0)


def squared_levels(alpha: Any, *spacings: Any) -> float:
    """The double sum, with what long powers leave, the ground level's share, summed by itself."""
    b = np.array([float(spacing) for spacing in spacings])
    j = np.arange(1.0, 45.0 / b.min())
    powers, ground = np.exp(-j * float(alpha)), 1.0 / math.expm1(float(alpha))
    pairs, mixed, both = np.ones((j.size, j.size)), np.ones_like(j), 8.0**-0.5
    for spacing in b:
        one, tanh = -np.expm1(-2 * j * spacing), np.tanh(j * spacing / 2)
        pairs = pairs / np.sqrt(one[:, None] * one * (tanh[:, None] + tanh))
        mixed = mixed / np.sqrt(one * (tanh + 1.0))
    excited = powers @ (pairs - mixed - mixed[:, None] + both) @ powers
    return float(excited + 2.0 * ground * (powers @ (mixed - both)) + both * ground * ground)


def fitted(statistics: Callable[[float, float], float]) -> Callable[[Any], float]:
    def image(q: float, log_z: float) -> float:
        return integral(lambda t: statistics(2.0, log_z - t) * math.exp(-q * t), max(log_z, 0.0))

    def ratio(log_z: Any) -> float:
        x = float(log_z)
        best = minimize_scalar(lambda q: -q * image(q, x) ** 2, bracket=(0.5, 1.2), options={"xtol": 1e-9})
        return 1.0 / float(best.x)

    return ratio


def bose_at(s: float, log_z: float) -> float:
    return float(bose(s, -log_z))


def fermi_at(s: float, log_z: float) -> float:
    return float(fermi(s, log_z))


def fermi_function(s: float) -> Callable[[Any], Any]:
    """By its integral, without the polylogarithm's cut."""
    return lambda z: (
        mpmath.quad(
            lambda t: t ** (s - 1) / (mpmath.exp(t) / z + 1), [0, 1, abs(mpmath.log(z)) + 1, abs(mpmath.log(z)) + 60]
        )
        / mpmath.gamma(s)
    )


def interaction_average(K: Any) -> Any:
    return (1 - mpmath.exp(1 / K) * mpmath.e1(1 / K) / K) / K


BOSONS = {f"g_{name}": (lambda z, s=s: mpmath.polylog(s, z)) for name, s in
          (("3_2", 1.5), ("5_2", 2.5), ("2", 2), ("3", 3), ("4", 4))}  # fmt: skip
FERMI = {f"f_{name}": fermi_function(s) for name, s in (("3_2", 1.5), ("5_2", 2.5), ("2", 2), ("3", 3), ("4", 4))}
SHARED: dict[str, Any] = {
    **BOSONS, **FERMI, "pi": mpmath.pi, "exp": mpmath.exp, "ln": mpmath.log, "c": interaction_average,
    "F": shell(lambda u, v, d: d),
    "F_V": shell(lambda u, v, d: u * d),
    "F_L": shell(lambda u, v, d: abs(v) * d),
    "F_2": shell(lambda u, v, d: d * d),
    "F_C": shell(lambda u, v, d: max(v, 0.0) * d),
    "F_K": lambda x: 3 / math.sqrt(math.pi) * integral(
        lambda u: math.sqrt(u) * bose(2.5, abs(u - float(x))), float(x)),
    "S": lambda alpha, *b: levels(alpha, b, lambda *jb: product(*jb) - 1),
    "Q": lambda alpha, *b: levels(alpha, b, lambda *jb: np.sqrt(product(*(2 * x for x in jb))) - 1),
    "W": lambda alpha, *b: float(b[0]) * levels(
        alpha, b, lambda *jb: (product(*jb) - 1) / 2 + product(*jb) / np.expm1(jb[0])),
    "M": squared_levels,
}  # fmt: skip


def overlap(statistics: Callable[[float, float], float]) -> Callable[[Any], float]:
    return lambda log_z: (
        2
        / math.sqrt(math.pi)
        * integral(lambda u: math.sqrt(u) * statistics(1.5, float(log_z) - u) ** 2, max(float(log_z), 0.0))
    )


def calculated(numbers: str, bosons: bool) -> float:
    """What a pocket calculator with the functions of the definitions makes of a line of numbers."""
    text = re.sub(r"([gf])_(\d)/2\(", r"\1_\2_2(", numbers)
    text = re.sub(r"([gf])([₂₃₄])\(", lambda m: f"{m[1]}_{'₀₁₂₃₄'.index(m[2])}(", text)
    text = text.replace("×", "*").replace("^", "**").replace("π", "pi").replace("θ", "theta")
    text = re.sub(r"(?<![\w.])(\d+(?:\.\d+)?(?:e-?\d+)?)", r"mpf('\1')", text)
    statistics = bose_at if bosons else fermi_at
    names = {**SHARED, "J": overlap(statistics), "theta": fitted(statistics), "mpf": mpmath.mpf}
    with mpmath.workdps(25):
        return float(eval(text, {"__builtins__": {}}, names))


def last_place(text: str) -> float:
    """The value of one unit in the last digit of a number as printed."""
    mantissa, _, exponent = text.partition("e")
    return 10.0 ** (int(exponent or 0) - len(mantissa.partition(".")[2]))


def assert_printed(value: float, text: str, what: object) -> None:
    """The value, rounded to the digits printed, is what is printed."""
    slack = 1e-8 * abs(float(text))  # of the quadratures here
    assert abs(value - float(text)) <= 0.5 * last_place(text) + slack, what


def explanations(answer: CloudAnswer) -> list[Explanation]:
    return [explain(answer, name) for name in QUANTITIES]


def test_every_line_of_numbers_gives_the_result_beside_it(answer: CloudAnswer) -> None:
    seen: set[tuple[str, str]] = set()
    for explanation in explanations(answer):
        for step in explanation.steps:
            if (step.numbers, step.result) in seen:
                continue
            seen.add((step.numbers, step.result))
            what = (explanation.name, step)
            if step.kind is StepKind.FORMULA:
                assert_printed(calculated(step.numbers, answer.bosons), step.result, what)
            elif step.kind is StepKind.EQUATION:
                assert_printed(calculated(step.numbers, answer.bosons), step.left, what)
                assert step.left == step.right, what
            elif step.kind is StepKind.CASE:
                left, sign, right = step.numbers.split()
                assert {">": float(left) > float(right), "≤": float(left) <= float(right),
                        "≥": float(left) >= float(right)}[sign], what  # fmt: skip
            assert step.agrees, what
    assert len(seen) > 10


def test_results_have_six_digits_or_are_nothing(answer: CloudAnswer) -> None:
    """Fewer only for a difference that vanishes: the classical formulas of a cloud that is classical."""
    for explanation in explanations(answer):
        for step in explanation.steps:
            digits = re.sub(r"e.*|[-.]", "", step.result).lstrip("0")
            short = step.kind is StepKind.CASE or step.result == "0" or explanation.name.endswith("_error")
            assert short or len(digits) == 6, (explanation.name, step)


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


def test_numbers_come_from_inputs_or_from_steps_before(answer: CloudAnswer) -> None:
    """Every symbol of a line stands among the inputs or was found in a line above."""
    functions = set("fgFJMQSWcθ") | {"F_V", "F_L", "F_K", "F_2", "F_C", "exp", "ln", "π"}
    for explanation in explanations(answer):
        known = {entry.symbol for entry in explanation.inputs} | functions
        for step in explanation.steps:
            unknown = step.expression
            for symbol in sorted(known | {step.symbol} - {""}, key=len, reverse=True):
                if step.kind is StepKind.EQUATION or symbol != step.symbol or symbol in known:
                    unknown = unknown.replace(symbol, " ")
            left = re.sub(r"_[35]/2|[₁₂₃₄²³\d\s()+−×/^=>≤≥,.]", "", unknown)
            assert step.kind is StepKind.GIVEN or left == "", (explanation.name, step, left)
            known |= {step.symbol} - {""}


def test_nothing_reads_not_a_number(answer: CloudAnswer) -> None:
    for explanation in explanations(answer):
        text = explanation_text(explanation)
        assert not re.search(r"\bnan\b|\binf\b|None", text), text
        assert explanation.title in text
        if explanation.value is None:
            assert f"no value, {explanation.reason}" in text


# --- values by other formulas ---


def value_of(changes: dict[str, str], name: str) -> float:
    value = explain(answered(changes), name).value
    assert isinstance(value, float)
    return value


def test_main_quantities_by_formulas_that_the_program_does_not_use() -> None:
    N, T, f, m = 1e5, 200e-9, (120.0, 120.0, 20.0), answered({}).state.mass
    f_mean = math.prod(f) ** (1 / 3)
    # h f/k Tc = (zeta(3)/N)^(1/3) in ordinary frequencies: Bagnato, Pritchard, Kleppner, Phys. Rev. A 35, 4354 (1987).
    Tc = planck * f_mean / boltzmann / (2 * math.pi) * 2 * math.pi * (N / float(mpmath.zeta(3))) ** (1 / 3)
    assert value_of({}, "critical_temperature") == pytest.approx(Tc, rel=1e-12)
    assert value_of({}, "reduced_temperature") == pytest.approx(T / Tc, rel=1e-12)
    z = value_of({}, "fugacity")
    # N counted over the harmonic levels' density e^2/2(hbar wbar)^3
    spacing = planck * f_mean / (boltzmann * T)
    atoms = quad(lambda e: e * e / 2 / (math.exp(e) / z - 1), 0, 60)[0] / spacing**3
    assert atoms == pytest.approx(N, rel=1e-8)
    D = float(mpmath.polylog(1.5, z))
    assert value_of({}, "peak_phase_space_density") == pytest.approx(D, rel=1e-10)
    wavelength = reduced_planck * math.sqrt(2 * math.pi / (m * boltzmann * T))
    assert value_of({}, "peak_density") == pytest.approx(D / wavelength**3, rel=1e-10)
    condensed = {"cloud.temperature": "80 nK", "cloud.model": "ideal"}
    assert value_of(condensed, "condensate_fraction") == pytest.approx(1 - (80e-9 / Tc) ** 3, rel=1e-12)
    # Thomas-Fermi, mu = (hbar wbar/2)(15 N0 a/aho)^(2/5): Dalfovo et al., Rev. Mod. Phys. 71, 463 (1999), eq. (51).
    semi = {"cloud.temperature": "80 nK", "species.scattering_length": "100 a0"}
    N0, w = value_of(semi, "condensate_atoms"), 2 * math.pi * f_mean
    aho = math.sqrt(reduced_planck / (m * w))
    mu = reduced_planck * w / 2 * (15 * N0 * 100 * 5.29177210544e-11 / aho) ** 0.4
    assert value_of(semi, "chemical_potential") == pytest.approx(mu, rel=1e-10)
    fermions = answered(FERMIONS)
    EF = planck * f_mean * (6 * N) ** (1 / 3)  # Butts, Rokhsar, Phys. Rev. A 55, 4346 (1997)
    assert explain(fermions, "fermi_energy").value == pytest.approx(EF, rel=1e-12)


# --- inputs ---


def test_inputs_keep_the_typed_text_and_the_data_s_source() -> None:
    explanation = explain(answered({"cloud.temperature": "4.2 kHz"}), "elastic_collision_rate")
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


def test_a_typed_length_is_typed_and_a_tuned_one_says_at_which_field() -> None:
    def length(changes: dict[str, str]) -> Any:
        entries = explain(answered(changes), "elastic_collision_rate").inputs
        return next(entry for entry in entries if entry.symbol == "a")

    typed = length({"species.scattering_length": "99 a0"})
    assert (typed.text, typed.origin) == ("99 a0", Origin.TYPED)
    tuned = length(PLANS["tuned by a field"])
    assert tuned.text.endswith("at 21 G")
    assert tuned.origin is Origin.DATA


def test_the_fermions_threshold_is_typed_or_assumed() -> None:
    def threshold(changes: dict[str, str]) -> Any:
        entries = explain(answered(changes), "temperature_to_threshold").inputs
        return next(entry for entry in entries if entry.symbol == "t")

    assert threshold(PLANS["fermions, hot"]).origin is Origin.ASSUMED
    assert threshold(PLANS["fermions, cold"]).text == "0.2"


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
def test_a_missing_value_says_why(plan: str, name: str, reason: str) -> None:
    explanation = explain(answered(PLANS[plan]), name)
    assert explanation.value is None
    assert explanation.text == "–"
    assert reason in explanation.reason
    assert explanation.inputs


def test_shifts_that_add_up_to_all_of_tc_are_shown() -> None:
    few = answered({"cloud.atoms": "3", "trap.frequencies": "100 Hz, 100 Hz, 1 Hz"})
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


def test_an_unknown_name_gets_the_nearest_ones() -> None:
    with pytest.raises(ValueError, match='no quantity is named "critical_temprature"; the nearest are critical_temp'):
        explain(answered({}), "critical_temprature")


# --- what is shown beside the steps ---


def test_value_and_interval_are_in_the_chosen_unit() -> None:
    answer = answered({})
    assert re.fullmatch(r"138\.4 nK \(13\d nK? ?to 14\d nK in 68 % of the draws\)|138\.4 nK \(13\d to 14\d nK in .*\)",
                        explain(answer, "critical_temperature").text)  # fmt: skip
    assert explain(answer, "critical_temperature", "kHz").text.startswith("2.883 kHz (")
    assert explain(answer, "thermal_radii").text.endswith(" µm")


def test_the_model_in_use_is_named_and_why_another_is_not() -> None:
    assert explain(answered({}), "peak_density").model.startswith("semi-ideal: ")
    model = explain(answered(PLANS["attractive"]), "peak_density").model
    assert model.startswith("ideal: ")
    assert "instead of semi-ideal: scattering length not positive" in model


def test_a_definition_stands_where_it_is_first_met() -> None:
    steps = explain(answered(PLANS["condensed, semi-ideal"]), "energy_per_atom").steps
    definitions = [step.where for step in steps if step.where]
    assert len(definitions) == len(set(definitions)) > 2


def test_plain_text_has_the_formula_the_numbers_and_the_result_in_lines() -> None:
    lines = explanation_text(explain(answered({}), "critical_temperature")).splitlines()
    assert lines[0].startswith("critical temperature (ideal), Tc = 138.4 nK")
    place = lines.index("       Tc = T₀ (N/ζ(3))^(1/3)")
    assert lines[place + 1].startswith("       = 3.16935")
    assert lines[place + 2] == "       = 1.38355e-7 K"
    assert any("1.0(1)e5" in line and "typed" in line for line in lines)
    assert any(line.startswith("  So Tc = 138.4 nK") for line in lines)


def test_data_for_json_are_plain() -> None:
    body = explanation_body(explain(answered({}), "log_fugacity"))
    assert json.loads(json.dumps(body, allow_nan=False)) == body
    equation = body["steps"][-1]
    assert equation["kind"] == "equation"
    assert equation["left"] == equation["right"]


def test_values_and_reasons_exclude_each_other() -> None:
    explanation = explain(answered({}), "fugacity")
    with pytest.raises(ValueError, match="fugacity needs either a value or a reason"):
        replace(explanation, value=None)


# --- what is not explained yet ---

WITHOUT_STEPS: dict[str, frozenset[str]] = {}
"""By model, the quantities that have a value and no steps all the way to it: to be driven to nothing."""


@pytest.mark.parametrize("model", Model)
def test_no_quantity_lacks_its_steps_but_those_listed(model: Model) -> None:
    found: set[str] = set()
    for changes in PLANS.values():
        answer = answered({**changes, "cloud.model": model.value})
        if answer.model is model:
            found |= set(unexplained(answer))
    assert found == WITHOUT_STEPS.get(model.value, frozenset()), (
        "write down the steps of a new quantity in app/explanations, or list it here for now"
    )


def test_a_quantity_without_steps_is_explained_by_its_row(monkeypatch: pytest.MonkeyPatch) -> None:
    module = importlib.import_module("app.explanations.explain")
    steps = {name: make for name, make in module.EXPLAINED.items() if name != "peak_density"}
    monkeypatch.setattr(module, "EXPLAINED", steps)
    explanation = module.explain(answered({}), "peak_density")
    assert explanation.steps == ()
    assert not explanation.complete
    assert explanation.value == answered({}).value("peak_density")
    assert {"N", "T", "f₁", "m", "a"} <= {entry.symbol for entry in explanation.inputs}
    assert QUANTITIES["peak_density"].formula in explanation_text(explanation)
