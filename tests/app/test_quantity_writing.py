"""Quantities as text: digits and units, and that writing and reading agree."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.units import (
    ATOM_NUMBER,
    DEPTH,
    TEMPERATURE,
    QuantityError,
    best_unit,
    exact_text,
    format_quantity,
    quantity,
    read_quantity,
)
from physics import constants

h, k = constants.planck, constants.boltzmann


@pytest.mark.parametrize(
    ("value", "unit", "sigma", "text"),
    [
        (1.46e-7, "nK", None, "146 nK"),
        (1.2e-6, "µK", 5e-8, "1.20(5) µK"),
        (1e5, "", 1e4, "1.0(1)e5"),
        (2e-7, "nK", 1e-8, "200(10) nK"),
        (2e-7, "nK", 1.23e-8, "200(12) nK"),
        (2e-7, "nK", 0.0, "200(0) nK"),
        (9.996e-9, "nK", None, "10.0 nK"),
        (0.0, "nK", None, "0 nK"),
        (1e20, "1/m^3", None, "1.00e20 1/m^3"),
        (0.312, "%", None, "31.2 %"),
        (2.612, "1", None, "2.61"),
        (1.2e-4, "", None, "1.20e-4"),
        (-1.058e-9, "a0", None, "-20.0 a0"),
        (math.nan, "nK", None, "–"),
        (math.inf, "s", None, "∞ s"),
    ],
)
def test_quantities_are_written_with_sensible_digits(value: float, unit: str, sigma: float | None, text: str) -> None:
    assert format_quantity(value, unit, sigma) == text


def test_energies_are_written_as_temperatures_and_frequencies() -> None:
    assert format_quantity(k * 5e-6, "µK", si_unit="J") == "5.00 µK"
    assert format_quantity(h * 1e4, "kHz", si_unit="J") == "10.0 kHz"


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (9.96e4, 2, "1.0e5"),
        (9.94e4, 2, "9.9e4"),
        (9.996e-6, 3, "1.00e-5"),
        (99996.0, 4, "1.000e5"),
        (-9.96e4, 2, "-1.0e5"),
    ],
)
def test_numbers_that_round_up_to_a_power_of_ten(value: float, digits: int, text: str) -> None:
    assert format_quantity(value, digits=digits) == text


def test_the_best_unit_has_few_zeros() -> None:
    assert best_unit(1.46e-7, TEMPERATURE.units) == "nK"
    assert best_unit(1e-6, TEMPERATURE.units) == "µK"
    assert best_unit(1e-15, TEMPERATURE.units) == "nK"
    assert best_unit(k * 5e-6, DEPTH.units, "J") == "µK"
    assert best_unit(math.nan, TEMPERATURE.units) == "nK"


ordinary = st.floats(min_value=1e-12, max_value=10.0, allow_nan=False)


@given(
    value=st.floats(2e-12, 5.0),
    share=st.one_of(st.none(), st.floats(1e-4, 0.5)),
    unit=st.sampled_from(TEMPERATURE.units),
)
def test_written_quantities_are_read_back_to_the_printed_digits(value: float, share: float | None, unit: str) -> None:
    sigma = None if share is None else value * share
    text = format_quantity(value, unit, sigma, si_unit="K")
    read = read_quantity(text, TEMPERATURE)
    if sigma is None:
        assert read.value == pytest.approx(value, rel=5.1e-3)
        assert read.sigma is None
        assert format_quantity(read.value, unit, si_unit="K") == text
    else:
        assert read.sigma == pytest.approx(sigma, rel=0.17)  # one digit from 3 on: at most 0.5 in 3
        assert abs(read.value - value) <= 0.51 * sigma


@given(value=ordinary, unit=st.sampled_from(("nK", "µK", "mK", "K")), digits=st.integers(17, 20))
def test_enough_digits_give_the_same_double_back(value: float, unit: str, digits: int) -> None:
    assert read_quantity(format_quantity(value, unit, digits=digits), TEMPERATURE).value == value


@given(value=st.floats(1.0, 1e15), digits=st.integers(17, 20))
def test_enough_digits_give_the_same_number_of_atoms_back(value: float, digits: int) -> None:
    assert read_quantity(format_quantity(value, digits=digits), ATOM_NUMBER).value == value


@given(
    count=st.integers(1, 99_999),
    place=st.integers(-2, 3),
    spread=st.one_of(st.none(), st.integers(1, 99)),
    unit=st.sampled_from(("nK", "µK", "mK")),
    other=st.sampled_from(("nK", "µK", "mK", "K")),
)
def test_a_typed_quantity_is_exact_in_every_unit_of_its_dimension(
    count: int, place: int, spread: int | None, unit: str, other: str
) -> None:
    body = f"{count}e{place}" if spread is None else f"{count}({spread})e{place}"
    try:
        first = read_quantity(f"{body} {unit}", TEMPERATURE)
    except QuantityError:
        return
    text = exact_text(first.value, other, first.sigma, kind=TEMPERATURE)
    again = read_quantity(text, TEMPERATURE)
    assert (again.value, again.sigma) == (first.value, first.sigma)


def test_a_temperature_as_a_frequency_is_rounded_to_ten_digits() -> None:
    text = exact_text(2e-7, "kHz", 1e-8, kind=TEMPERATURE)
    assert text == "4.167323825 ± 0.2084 kHz"
    assert read_quantity(text, TEMPERATURE).value == pytest.approx(2e-7, rel=2e-10)


@given(value=st.floats(1e-9, 1.0), share=st.floats(0.001, 1.0))
def test_a_made_quantity_is_what_its_text_says(value: float, share: float) -> None:
    made = quantity(value, "µK", value * share, kind=TEMPERATURE)
    assert made == read_quantity(made.text, TEMPERATURE)
