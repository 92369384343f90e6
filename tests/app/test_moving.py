"""Quantities moved by hand keep what was written around them."""

import pytest

from app.moving import fine_step, moved_quantity, stepped
from app.units import ATOM_NUMBER, MAGNETIC_FIELD, TEMPERATURE, read_quantity

TEMPERATURES = ("nK", "µK", "mK")


@pytest.mark.parametrize(
    ("old", "value", "text"),
    [
        ("200 nK", 3.4567e-7, "346 nK"),
        ("200(10) nK", 4e-7, "400(20) nK"),
        ("1.2 uK", 5e-8, "50 nK"),
        ("200(10) nK", 2.8e-7, "280(14) nK"),
    ],
)
def test_three_digits_a_fitting_unit_and_the_same_relative_uncertainty(old: str, value: float, text: str) -> None:
    moved = moved_quantity(read_quantity(old, TEMPERATURE), value, TEMPERATURE, TEMPERATURES)
    assert moved == read_quantity(text, TEMPERATURE)


def test_a_unit_that_is_not_among_those_offered_stays() -> None:
    moved = moved_quantity(read_quantity("4.2 kHz", TEMPERATURE), 4e-7, TEMPERATURE, TEMPERATURES)
    assert moved.text.endswith("kHz")
    assert moved.value == pytest.approx(4e-7)


def test_what_cannot_be_is_not_reached() -> None:
    assert moved_quantity(read_quantity("2", ATOM_NUMBER), 1e-3, ATOM_NUMBER, ("",)).value == 1.0


def test_steps_round_and_an_absolute_uncertainty_stays() -> None:
    old = read_quantity("155.20(5) G", MAGNETIC_FIELD)
    moved = moved_quantity(old, 163.4567e-4, MAGNETIC_FIELD, (), step=fine_step(150e-4), relative=False)
    assert moved == read_quantity("163.50(5) G", MAGNETIC_FIELD)
    assert moved.sigma == old.sigma


@pytest.mark.parametrize(("span", "step"), [(0.015, 1e-5), (0.08, 1e-5), (0.1, 1e-4), (3e-6, 1e-9)])
def test_a_fine_step_is_at_most_a_thousandth(span: float, step: float) -> None:
    assert fine_step(span) == pytest.approx(step)


def test_a_stepped_value_has_no_stray_digits() -> None:
    assert stepped(0.1 + 0.2, 0.1) == 0.3
