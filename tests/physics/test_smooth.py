"""Interpolation through Chebyshev nodes: exact enough, and given up where it would not be."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from physics.smooth import TOLERANCE, through_nodes

Function = Callable[[np.ndarray], np.ndarray]


def counted(function: Function) -> tuple[Function, list[int]]:
    sizes: list[int] = []

    def wrapped(x: np.ndarray) -> np.ndarray:
        sizes.append(x.size)
        return function(x)

    return wrapped, sizes


@pytest.mark.parametrize("function", [np.exp, np.sin, lambda x: 1.0 / (1.0 + x * x)])
def test_a_smooth_function_is_evaluated_at_few_points_only(function: Function) -> None:
    wrapped, sizes = counted(function)
    points = np.random.default_rng(1).uniform(-1.0, 2.0, 4096)
    values = through_nodes(wrapped, points)
    exact = function(points)
    assert sum(sizes) < 300
    np.testing.assert_allclose(values, exact, atol=30.0 * TOLERANCE * np.max(np.abs(exact)))


def test_a_function_with_a_kink_is_evaluated_everywhere() -> None:
    wrapped, sizes = counted(np.abs)
    points = np.random.default_rng(2).uniform(-1.0, 2.0, 4096)
    np.testing.assert_array_equal(through_nodes(wrapped, points), np.abs(points))
    assert sizes[-1] == 4096


def test_few_points_and_equal_points_are_evaluated_as_they_are() -> None:
    few = np.linspace(0.0, 1.0, 7)
    np.testing.assert_array_equal(through_nodes(np.exp, few), np.exp(few))
    np.testing.assert_array_equal(through_nodes(np.exp, np.full(1000, 0.3)), np.full(1000, np.exp(0.3)))


def test_several_functions_at_once_keep_their_shape() -> None:
    points = np.random.default_rng(3).uniform(0.5, 2.0, 1000)
    values = through_nodes(lambda x: np.stack([np.exp(x), np.log(x), 0.0 * x + 2.0]), points)
    np.testing.assert_allclose(values, [np.exp(points), np.log(points), np.full(1000, 2.0)], atol=1e-9)


def test_points_that_are_not_finite_do_not_spoil_the_others() -> None:
    points = np.array([np.nan, np.inf, *np.linspace(0.0, 1.0, 998)])
    np.testing.assert_array_equal(through_nodes(np.exp, points), np.exp(points))
