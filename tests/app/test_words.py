"""The verdict and its numbers, as a reader meets them."""

from __future__ import annotations

from pathlib import Path

import pytest

from app.engine import cloud_answer
from app.plan import DEFAULT_PLAN, plan_with, read_plan
from app.words import deciding_figures, percent, times, verdict

PLAIN = plan_with(DEFAULT_PLAN, {"cloud.atoms": "1e5", "cloud.temperature": "200 nK"})


def sentence(**texts: str) -> str:
    return verdict(cloud_answer(plan_with(PLAIN, {key.replace("__", "."): text for key, text in texts.items()})))


@pytest.mark.parametrize(
    ("temperature", "expected"),
    [
        ("30 µK", "A thermal cloud, 217 times too hot for condensation."),
        ("200 nK", "Close, not condensed: 1.45 times too hot for condensation."),
        ("140 nK", "At the edge of condensation: T is 101 % of the critical temperature."),
        ("100 nK", "Condensed: 43 % of the atoms are in the condensate, at 72 % of the critical temperature."),
        ("20 nK", "A nearly pure condensate: 99 % of the atoms are condensed."),
    ],
)
def test_bosons_are_told_where_they_stand(temperature: str, expected: str) -> None:
    assert sentence(cloud__temperature=temperature) == expected


@pytest.mark.parametrize(
    ("temperature", "expected"),
    [
        ("30 µK", "A thermal cloud: 224 times too hot for T/TF = 0.5."),
        ("200 nK", "Partly degenerate at T/TF = 0.75: 1.50 times too hot for T/TF = 0.5."),
        ("134 nK", "At the edge of degeneracy: T/TF = 0.50."),
        ("80 nK", "Degenerate: T/TF = 0.30, with 91 % of the lowest level filled."),
        ("20 nK", "Deeply degenerate: T/TF = 0.075, with 100 % of the lowest level filled."),
    ],
)
def test_fermions_are_told_where_they_stand(temperature: str, expected: str) -> None:
    assert sentence(species__key="40K", cloud__temperature=temperature) == expected


def test_a_cloud_whose_error_spans_the_threshold_may_be_on_either_side() -> None:
    assert sentence(cloud__temperature="160(30) nK") == (
        "Condensed or not, within the uncertainty: T is 116 % of the critical temperature."
    )
    assert sentence(cloud__temperature="160 nK").startswith("Close, not condensed")
    assert sentence(cloud__temperature="140(30) nK").startswith("At the edge of condensation")
    assert sentence(species__key="40K", cloud__temperature="150(30) nK") == (
        "Degenerate or not, within the uncertainty: T/TF = 0.56, and the edge is at 0.5."
    )


def test_the_distance_to_the_threshold_is_given_three_ways() -> None:
    figures = deciding_figures(cloud_answer(plan_with(PLAIN, {"target.efficiency": "2.5"})))
    shown = [(figure.caption, figure.value, figure.detail) for figure in figures[-3:]]
    assert shown == [
        ("colder by", "1.45 ×", "at this N, to 138 nK"),
        ("or more atoms by", "3.0 ×", "at this T, to 3.0e5"),
        ("or evaporate", "64 % left", "with efficiency γ = 2.5"),
    ]


def test_beyond_the_threshold_it_says_how_much_is_to_spare() -> None:
    figures = deciding_figures(cloud_answer(plan_with(PLAIN, {"cloud.temperature": "80 nK"})))
    assert [figure.caption for figure in figures[-2:]] == ["below threshold", "atoms to spare"]


def test_uncertainties_stand_under_the_numbers() -> None:
    figures = deciding_figures(cloud_answer(plan_with(PLAIN, {"cloud.temperature": "150(20) nK"})))
    assert figures[1].detail == "0.950 to 1.24"
    assert figures[2].detail == "condensed with 27 % probability"


@pytest.mark.parametrize(
    ("share", "text"),
    [(0.0, "0 %"), (5e-4, "< 0.1 %"), (0.034, "3.4 %"), (0.62, "62 %"), (0.9985, "99.9 %"), (1.0, "100 %")],
)
def test_shares_have_sensible_digits(share: float, text: str) -> None:
    assert percent(share) == text


@pytest.mark.parametrize(
    ("factor", "text"), [(1.0, "1.00"), (1.449, "1.45"), (3.02, "3.0"), (12.3, "12"), (4.4e5, "4.4e5")]
)
def test_factors_have_sensible_digits(factor: float, text: str) -> None:
    assert times(factor) == text


def test_more_atoms_than_a_trap_holds_is_no_cloud() -> None:
    plan = read_plan(Path(__file__).parents[2] / "presets" / "traps" / "single_beam_lithium.toml")
    answer = cloud_answer(plan_with(plan, {"cloud.atoms": "1e12"}))
    assert verdict(answer).startswith("There is no such cloud: the trap holds no more than ")
    (figure,) = deciding_figures(answer)
    assert figure.detail.startswith("at most ")
