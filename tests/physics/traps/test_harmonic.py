"""Harmonic traps: what they hold, and what they refuse."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from physics.traps import HarmonicTrap


def test_means_and_highest_of_three_frequencies() -> None:
    trap = HarmonicTrap(frequencies=[1.0, 8.0, 27.0])
    assert trap.mean_frequency == pytest.approx(6.0, rel=1e-15)
    assert trap.arithmetic_mean_frequency == pytest.approx(12.0, rel=1e-15)
    assert trap.angular_frequencies == pytest.approx(2.0 * math.pi * np.array([1.0, 8.0, 27.0]))


def test_leading_dimensions_and_depth_broadcast() -> None:
    trap = HarmonicTrap(frequencies=np.full((4, 1, 3), 50.0), depth=np.full(5, 1e-29))
    assert trap.shape == (4, 5)
    assert trap.mean_frequency.shape == (4, 1)


def test_the_arrays_are_private_and_cannot_be_written() -> None:
    given = np.array([10.0, 20.0, 30.0])
    trap = HarmonicTrap(frequencies=given)
    given[0] = 99.0
    assert trap.frequencies[0] == 10.0
    with pytest.raises(ValueError, match="read-only"):
        trap.frequencies[0] = 1.0


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        (
            {"frequencies": 100.0},
            r"^trap frequencies must be three values in Hz along the last axis, got a single number$",
        ),
        ({"frequencies": [1.0, 2.0]}, r"^trap frequencies must be three values .* got shape \(2,\)$"),
        ({"frequencies": [1.0, -2.0, 3.0]}, r"^trap frequency must be positive and finite, got -2 Hz$"),
        ({"frequencies": [1.0, 2.0, math.nan]}, r"^trap frequency must be positive and finite, got nan Hz$"),
        ({"frequencies": [1.0, 2.0, 3.0], "depth": 0.0}, r"^trap depth must be positive and finite, got 0 J$"),
        ({"frequencies": [1.0, 2.0, 3.0], "depth": math.inf}, r"^trap depth must be positive and finite, got inf J$"),
    ],
)
def test_impossible_values_are_refused_in_one_sentence(given: dict[str, Any], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        HarmonicTrap(**given)
