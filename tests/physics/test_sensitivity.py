"""Draws of uncertain inputs: well spread, reproducible, with the quantiles that they stand for."""

from __future__ import annotations

import math
import runpy
from pathlib import Path

import numpy as np
import pytest

from physics import sensitivity
from physics.sensitivity import DIMENSIONS, interval, lattice, sample

GENERATOR = Path(__file__).parents[1] / "generators" / "lattice_vector.py"


def test_columns_are_normal_and_uncorrelated() -> None:
    draws = lattice(4096, DIMENSIONS)
    np.testing.assert_allclose(draws.mean(axis=0), 0.0, atol=2e-3)
    np.testing.assert_allclose(draws.std(axis=0), 1.0, atol=5e-3)
    np.testing.assert_allclose(np.corrcoef(draws.T), np.eye(DIMENSIONS), atol=0.04)


def test_more_inputs_than_the_lattice_has_are_drawn_too() -> None:
    draws = lattice(4096, DIMENSIONS + 8)
    np.testing.assert_array_equal(draws[:, :DIMENSIONS], lattice(4096, DIMENSIONS))
    np.testing.assert_allclose(draws.std(axis=0), 1.0, atol=5e-3)
    np.testing.assert_allclose(np.corrcoef(draws.T), np.eye(DIMENSIONS + 8), atol=0.08)


def test_equal_seeds_give_equal_draws() -> None:
    np.testing.assert_array_equal(lattice(256, 3, seed=4), lattice(256, 3, seed=4))
    assert not np.allclose(lattice(256, 3, seed=4), lattice(256, 3, seed=5))


def test_the_lattice_is_far_better_than_chance() -> None:
    # The mean of exp(sum/10) over 4 normal deviates is e^(4/200); chance would miss by about 0.2/sqrt(4096) = 3e-3.
    mean = np.exp(lattice(4096, 4).sum(axis=1) / 10.0).mean()
    assert mean == pytest.approx(math.exp(0.02), abs=5e-4)


def test_generating_vector_is_the_one_of_the_generator() -> None:
    made = runpy.run_path(str(GENERATOR))
    assert made["generating_vector"](dimensions=4) == sensitivity._VECTORS[4096][:4]
    assert made["generating_vector"](1024, weight=0.03) == sensitivity._VECTORS[1024]


@pytest.mark.parametrize(("count", "most"), [(1024, 0.09), (4096, 0.03)])
def test_intervals_of_sums_of_inputs_are_as_wide_as_they_should_be(count: int, most: float) -> None:
    random = np.random.default_rng(1)
    draws = lattice(count, DIMENSIONS, seed=20)
    for _ in range(60):
        weights = random.normal(size=DIMENSIONS) * (random.random(DIMENSIONS) < 0.5)
        if not np.any(weights):
            continue
        low, _, high = interval(draws @ (weights / np.linalg.norm(weights)))
        assert high - low == pytest.approx(2.0 * 0.99446, rel=most)


def test_a_positive_quantity_stays_positive_and_keeps_its_median() -> None:
    column = lattice(4096, 1)[:, 0]
    draws = sample(2.0, 3.0, column)
    assert draws.min() > 0.0
    assert np.median(draws) == pytest.approx(2.0, rel=1e-3)
    # A small relative uncertainty is the standard deviation.
    assert sample(5.0, 0.05, column).std() == pytest.approx(0.05, rel=5e-3)


def test_a_negative_quantity_is_drawn_normally() -> None:
    column = lattice(4096, 1)[:, 0]
    draws = sample(-3.0, 2.0, column)
    assert draws.mean() == pytest.approx(-3.0, abs=5e-3)
    assert draws.std() == pytest.approx(2.0, rel=5e-3)
    assert sample(0.0, 1.0, column).std() == pytest.approx(1.0, rel=5e-3)


def test_no_uncertainty_is_no_spread() -> None:
    np.testing.assert_array_equal(sample(2.0, 0.0, lattice(64, 1)[:, 0]), np.full(64, 2.0))
    assert lattice(64, 0).shape == (64, 0)


def test_interval_is_one_standard_deviation_wide() -> None:
    low, median, high = interval(sample(-1.0, 0.1, lattice(4096, 1)[:, 0]))
    assert (low, median, high) == pytest.approx((-1.0994, -1.0, -0.9006), abs=1e-3)  # +-0.9945 sigma is 16 % and 84 %


def test_impossible_requests_are_refused() -> None:
    with pytest.raises(ValueError, match=r"^number of draws must be 1 or more, got 0$"):
        lattice(0, 2)
    with pytest.raises(ValueError, match=r"^number of uncertain inputs must not be negative, got -1$"):
        lattice(16, -1)
    with pytest.raises(ValueError, match=r"^standard uncertainty must not be negative, got -1$"):
        sample(1.0, -1.0, np.zeros(3))


def test_deviates_are_the_quantiles_of_the_normal_distribution() -> None:
    from scipy.special import ndtr

    draws = lattice(4096, 2)
    # Each column is a shifted grid: its probabilities, in order, are 1/4096 apart.
    steps = np.diff(np.sort(ndtr(draws), axis=0), axis=0)
    np.testing.assert_allclose(steps, 1.0 / 4096.0, atol=1e-15)
