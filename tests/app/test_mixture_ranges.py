"""Ranges of what two clouds are to each other, against draws and derivatives of the tests' own."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from scipy.special import roots_genlaguerre

from app.__main__ import main
from app.answers.mixture import MixtureAnswer, mixture_answer
from app.answers.uncertainty import DEVIATION, Method
from app.commands.mixture_report import mixture_text
from app.mixture_sentences import mixture_facts
from app.plan import Plan, write_plan
from app.plan_file import parse_plan
from physics.constants import bohr_radius, boltzmann, reduced_planck
from physics.models import Model

HARMONIC = """
coldward = 1
[species]
key = "87Rb"
state = "F=2 mF=+2"
[trap]
frequencies = ["120 Hz", "120 Hz", "40(2) Hz"]
depth = "2 mK"
[cloud]
atoms = "1.0(2)e5"
temperature = "20(1) uK"
[target]
efficiency = 2.5
[passenger]
scattering_length = "160(12) a0"
frequencies = ["170 Hz", "170 Hz", "50(3) Hz"]
[passenger.species]
key = "41K"
state = "F=2 mF=+2"
[passenger.cloud]
atoms = "3.0(4)e4"
temperature = "25(2) uK"
"""
BEAMS = """
coldward = 1
[species]
key = "87Rb"
state = "F=2 mF=+2"
[[trap.beam]]
wavelength = "1064 nm"
power = "1.50(3) W"
waist = "70 um"
direction = [1, 0, 0]
[[trap.beam]]
wavelength = "1064 nm"
power = "1.5 W"
waist = "70 um"
direction = [0, 1, 0]
[cloud]
atoms = "1e5"
temperature = "3 uK"
[passenger.species]
key = "40K"
state = "F=9/2 mF=+9/2"
[passenger.cloud]
atoms = "3e4"
temperature = "3 uK"
"""


def plan_of(text: str, **replaced: str) -> Plan:
    for old, new in replaced.items():
        assert old in text
        text = text.replace(old, new)
    return parse_plan(text, "a plan")


def ends(answer: MixtureAnswer, name: str) -> tuple[float, float, float]:
    spread = answer.spreads[name]
    return float(spread.low), float(spread.median), float(spread.high)


def lognormal(random: np.random.Generator, value: float, sigma: float, count: int) -> np.ndarray:
    return value * np.exp(math.sqrt(math.log1p((sigma / value) ** 2)) * random.standard_normal(count))


def test_classical_clouds_spread_as_closed_forms_do_at_random_draws() -> None:
    answer = mixture_answer(plan_of(HARMONIC))
    assert answer.spreads["relaxation_time"].method is Method.DRAWS
    random, count = np.random.default_rng(5), 100_000

    def draw(value: float, sigma: float) -> np.ndarray:
        return lognormal(random, value, sigma, count)

    N1, T1, N2, T2 = draw(1e5, 2e4), draw(20e-6, 1e-6), draw(3e4, 4e3), draw(25e-6, 2e-6)
    w1, w2 = 2.0 * math.pi * draw(40.0, 2.0), 2.0 * math.pi * draw(50.0, 3.0)
    a = draw(160.0, 12.0) * bohr_radius
    m1, m2 = answer.mixture.masses  # type: ignore[union-attr]
    d = 9.80665 * np.abs(1.0 / w1**2 - 1.0 / w2**2)
    radial = (2.0 * math.pi * np.array([120.0, 170.0])) ** 2
    S_radial = boltzmann * (T1 / (m1 * radial[0]) + T2 / (m2 * radial[1]))
    S = boltzmann * (T1 / (m1 * w1**2) + T2 / (m2 * w2**2))
    share = np.exp(-(d**2) / (2.0 * S))
    overlap = share / ((2.0 * math.pi) ** 1.5 * S_radial * np.sqrt(S))
    spread = boltzmann * (T1 / m1 + T2 / m2)
    # Rates by <sigma v^3>/<v^3> of 4 pi a^2/(1 + k^2 a^2), t = v^2/(2 <v_x^2>) weighted t^2 e^-t.
    K = 2.0 * (m1 * m2 / (m1 + m2) / reduced_planck) ** 2 * spread * a**2
    t, weights = roots_genlaguerre(16, 2.0)
    mean = (weights / (1.0 + K[:, np.newaxis] * t)).sum(axis=-1) / weights.sum()
    exchange = 4.0 * math.pi * a**2 * mean * np.sqrt(8.0 / math.pi * spread)
    xm = 4.0 * m1 * m2 / (m1 + m2) ** 2
    closed = {
        "distance": d,
        "overlap_share": share,
        "met_density": N1 * overlap,
        "relaxation_time": 3.0 / (xm * (N1 + N2) * exchange * overlap),
        "common_temperature": (N1 * T1 + N2 * T2) / (N1 + N2),
        "scattering_length_between": a,
    }
    for name, values in closed.items():
        expected = np.quantile(values, [0.16, 0.5, 0.84])
        width = expected[2] - expected[0]
        # Of 4096 well-spread draws; quantum statistics moves radii by a thousandth here.
        assert ends(answer, name) == pytest.approx(expected.tolist(), abs=0.02 * width + 0.004 * expected[1]), name


def test_miscibility_spreads_with_the_square_of_the_length_between() -> None:
    answer = mixture_answer(plan_of(HARMONIC))
    low, median, high = ends(answer, "miscibility_parameter")
    sigma = math.sqrt(math.log1p((12.0 / 160.0) ** 2))
    assert median == pytest.approx(answer.value("miscibility_parameter"), rel=1e-3)
    assert math.log(high / low) == pytest.approx(2.0 * 2.0 * DEVIATION * sigma, rel=0.01)


def test_frequencies_that_are_those_of_both_are_drawn_once() -> None:
    text = HARMONIC.replace('frequencies = ["170 Hz", "170 Hz", "50(3) Hz"]\n', "")
    for uncertain in ("1.0(2)e5", "20(1) uK", "160(12) a0", "3.0(4)e4", "25(2) uK"):
        text = text.replace(uncertain, uncertain.split("(")[0] + uncertain.split(")")[1])
    answer = mixture_answer(parse_plan(text, "a plan"))
    low, _, high = ends(answer, "passenger_collision_rate")
    # The overlap of two concentric clouds goes as the one frequency that is uncertain.
    assert math.log(high / low) == pytest.approx(2.0 * DEVIATION * math.sqrt(math.log1p(0.05**2)), rel=0.02)
    assert not {"distance", "overlap_share", "common_temperature"} & answer.spreads.keys()


def test_what_is_exact_has_no_range() -> None:
    text = HARMONIC
    for uncertain in ("1.0(2)e5", "20(1) uK", "160(12) a0", "3.0(4)e4", "25(2) uK", "40(2) Hz", "50(3) Hz"):
        text = text.replace(uncertain, uncertain.split("(")[0] + uncertain.split(")")[1])
    assert not mixture_answer(parse_plan(text, "a plan")).spreads
    assert "rethermalisation_collisions" not in mixture_answer(plan_of(HARMONIC)).spreads


def test_in_beams_the_range_is_that_of_traps_surveyed_anew() -> None:
    """The minima move with the power, too: both species hang lower in less light."""
    answer = mixture_answer(plan_of(BEAMS))
    sigma = math.sqrt(math.log1p((0.03 / 1.5) ** 2)) * DEVIATION
    moved = [
        mixture_answer(plan_of(BEAMS, **{"1.50(3) W": f"{1.5 * math.exp(sign * sigma):.9g} W"})) for sign in (-1, 1)
    ]
    for name in ("distance", "passenger_collision_rate", "shift_of_passenger", "relaxation_time"):
        expected = sorted(one.value(name) for one in moved)
        low, _, high = ends(answer, name)
        # The shape of the volume curve is kept, which the light of one beam alone does not quite do.
        assert high - low == pytest.approx(expected[1] - expected[0], rel=0.01 if name == "distance" else 0.07), name
    # As the plan's cloud has it by itself.
    passenger = answer.passenger
    assert passenger is not None
    spread = passenger.spread("reduced_temperature")
    expected = sorted(one.passenger.value("reduced_temperature") for one in moved if one.passenger is not None)
    assert spread is not None
    assert spread.high - spread.low == pytest.approx(expected[1] - expected[0], rel=0.04)


def test_models_without_draws_go_by_derivatives() -> None:
    cold = {"20(1) uK": "400(20) nK", "25(2) uK": "400 nK", "50(3) Hz": "50 Hz", "40(2) Hz": "40 Hz"}
    plan = plan_of(HARMONIC, **cold, **{"1.0(2)e5": "1.0e5", "3.0(4)e4": "3.0e4", "160(12) a0": "160 a0"})
    plan = replace(plan, cloud=replace(plan.cloud, model=Model.HARTREE_FOCK))
    answer = mixture_answer(plan)
    assert answer.coolant.model is Model.HARTREE_FOCK
    assert answer.spreads["passenger_collision_rate"].method is Method.FIRST_ORDER
    temperature = plan.cloud.temperature
    sigma = math.sqrt(math.log1p(0.05**2))
    values = [
        mixture_answer(
            replace(
                plan,
                cloud=replace(plan.cloud, temperature=replace(temperature, value=400e-9 * math.exp(s), sigma=None)),
            )
        ).value("passenger_collision_rate")
        for s in (-sigma, sigma)
    ]
    low, median, high = ends(answer, "passenger_collision_rate")
    assert median == answer.value("passenger_collision_rate")
    assert high - low == pytest.approx(DEVIATION * abs(values[1] - values[0]), rel=1e-6)


def test_a_length_in_an_uncertain_field() -> None:
    """40K with 87Rb near 546.9 G: a(B) of the data, by itself at both ends of the field."""
    text = (
        BEAMS.replace('key = "87Rb"\nstate = "F=2 mF=+2"', 'key = "87Rb"\nstate = "F=1 mF=+1"\nfield = "548.0(2) G"')
        .replace("F=9/2 mF=+9/2", "F=9/2 mF=-9/2")
        .replace("1.50(3) W", "1.5 W")
    )
    answer = mixture_answer(parse_plan(text, "a plan"))
    low, median, high = ends(answer, "scattering_length_between")
    # Resonances at 546.9 and 495.6 G, -3.1 and 0.16 G wide, about -189 a0.
    expected = sorted(
        -189.0 * (1.0 + 3.1 / (B - 546.9)) * (1.0 - 0.16 / (B - 495.6))
        for B in (548.0 - 0.2 * DEVIATION, 548.0 + 0.2 * DEVIATION)
    )
    assert [low / bohr_radius, high / bohr_radius] == pytest.approx(expected, rel=3e-3)
    assert median == pytest.approx(answer.value("scattering_length_between"), rel=1e-3)


def test_ranges_are_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plan = plan_of(HARMONIC)
    answer = mixture_answer(plan)
    facts = {fact.label: fact for fact in mixture_facts(answer)}
    assert " to " in facts["rethermalisation time"].first
    assert " to " in facts["degeneracy"].first
    assert " to " in facts["degeneracy"].second
    assert "(148.5 to 172.4)" in facts["scattering length a₁₂"].first
    row = next(line for line in mixture_text(answer).splitlines() if "rethermalisation time of the two" in line)
    assert " to " in row
    file = tmp_path / "plan.toml"
    file.write_text(write_plan(plan), encoding="utf-8")
    assert main(["state", str(file), "--json"]) == 0
    body = json.loads(capsys.readouterr().out)["passenger"]
    entry = body["mixture"]["quantities"]["relaxation_time"]
    assert entry["low"] < entry["median"] < entry["high"]
    assert body["quantities"]["reduced_temperature"]["low"] < body["quantities"]["reduced_temperature"]["high"]
    assert body["mixture"]["quantities"]["rethermalisation_collisions"]["low"] is None
