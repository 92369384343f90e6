"""Roots of rising functions, many at once."""

from __future__ import annotations

import numpy as np
import pytest

from physics.roots import rising_roots


def test_roots_of_unlike_functions_are_found_together() -> None:
    power = np.array([0.05, 1.0, 9.0, 300.0])
    found = rising_roots(lambda y: power * (y - 0.3) + np.sinh(y - 0.3), np.full(4, -5.0), np.full(4, 4.0), np.zeros(4))
    np.testing.assert_allclose(found, 0.3, atol=1e-8)


def test_brackets_may_be_open_and_a_function_may_be_minus_infinity() -> None:
    def function(y: np.ndarray) -> np.ndarray:
        return np.where(y > 0.0, np.log(np.maximum(y, 1e-300) / 1e3), -np.inf)

    found = rising_roots(function, np.array([-2.0]), np.array([np.inf]), np.array([-1.0]), slopes=(1e-6, 20.0))
    assert found.item() == pytest.approx(1e3)


def test_where_there_is_no_start_there_is_no_root() -> None:
    found = rising_roots(lambda y: y - 1.0, np.zeros(2), np.full(2, 3.0), np.array([0.5, np.nan]))
    assert found[0] == pytest.approx(1.0)
    assert np.isnan(found[1])


def test_slopes_beside_the_values_are_followed() -> None:
    asked: list[np.ndarray] = []

    def function(y: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        asked.append(y)
        return np.exp(3.0 * y) - 5.0, np.where(y > -10.0, 3.0 * np.exp(3.0 * y), np.nan)

    found = rising_roots(function, np.full(2, -2.0), np.full(2, 2.0), np.array([0.7, 0.4]), tolerance=1e-6)
    np.testing.assert_allclose(found, np.log(5.0) / 3.0, rtol=1e-11)
    assert len(asked) <= 6
