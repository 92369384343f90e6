"""Typed quantities that are stepped up and down: round numbers, one ladder."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.units import (
    ATOM_NUMBER,
    FREQUENCY,
    SCATTERING_LENGTH,
    TEMPERATURE,
    Kind,
    format_quantity,
    read_quantity,
    step,
)


@pytest.mark.parametrize(
    ("text", "steps", "kind", "coarse", "result"),
    [
        ("200 nK", 1, TEMPERATURE, False, "202 nK"),
        ("200 nK", -1, TEMPERATURE, False, "199 nK"),
        ("200 nK", 1, TEMPERATURE, True, "220 nK"),
        ("203.7 nK", 1, TEMPERATURE, False, "204 nK"),
        ("203.7 nK", -1, TEMPERATURE, False, "202 nK"),
        ("99.5 nK", 1, TEMPERATURE, False, "100 nK"),
        ("100 nK", -1, TEMPERATURE, False, "99.5 nK"),
        ("200(10) nK", 5, TEMPERATURE, False, "210(10) nK"),
        ("1.20(5) uK", 1, TEMPERATURE, False, "1.21(5) uK"),
        ("1.0(1)e5", 1, ATOM_NUMBER, False, "1.01(10)e5"),
        ("1.0(1)e5", 1, ATOM_NUMBER, True, "1.1(1)e5"),
        ("9.5e4", 1, ATOM_NUMBER, True, "1e5"),
        ("2×10^5", 1, ATOM_NUMBER, True, "2.2×10^5"),
        ("-20 a0", 1, SCATTERING_LENGTH, False, "-19.9 a0"),
        ("-20 a0", -1, SCATTERING_LENGTH, False, "-20.2 a0"),
        ("0 a0", 1, SCATTERING_LENGTH, False, "0 a0"),
        ("1", -1, ATOM_NUMBER, False, "1"),  # at its bound
        ("200 nK", 0, TEMPERATURE, False, "200 nK"),
        ("2pi x 120 Hz", 1, FREQUENCY, True, "130 Hz"),
    ],
)
def test_steps_land_on_round_numbers(text: str, steps: int, kind: Kind, coarse: bool, result: str) -> None:
    assert step(text, steps, kind, coarse=coarse) == result


def test_steps_keep_the_decimal_comma() -> None:
    assert step("1,2 µK", 1, TEMPERATURE, decimal_comma=True) == "1,21 µK"


@given(value=st.floats(1e-8, 1e-3), steps=st.integers(1, 200), coarse=st.booleans())
def test_steps_up_and_down_come_back_to_the_ladder(value: float, steps: int, coarse: bool) -> None:
    first = step(format_quantity(value, "µK"), 1, TEMPERATURE, coarse=coarse)
    there = step(first, steps, TEMPERATURE, coarse=coarse)
    back = step(there, -steps, TEMPERATURE, coarse=coarse)
    if there != first:  # a bound ends the ladder
        assert read_quantity(back, TEMPERATURE).value == read_quantity(first, TEMPERATURE).value
        assert read_quantity(there, TEMPERATURE).value > read_quantity(first, TEMPERATURE).value


@given(value=st.floats(1e-8, 1.0))
def test_a_fine_step_is_one_per_cent_or_less_and_a_coarse_one_ten(value: float) -> None:
    text = format_quantity(value, "nK", digits=6)
    start = read_quantity(text, TEMPERATURE).value
    for coarse, most in ((False, 0.0101), (True, 0.101)):
        share = read_quantity(step(text, 1, TEMPERATURE, coarse=coarse), TEMPERATURE).value / start - 1
        assert 0 < share < most
