"""Splines: cubics exactly, the library's own elsewhere, straight lines beyond the ends."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.interpolate import CubicSpline

from physics.spline import Spline

PLACES = np.array([-1.0, -0.2, 0.1, 0.9, 2.0, 2.3])


def test_the_library_has_the_same_spline() -> None:
    values = np.stack([np.exp(PLACES), np.sin(3.0 * PLACES)], axis=-1)
    points = np.linspace(-1.0, 2.3, 41)
    ours, theirs = Spline(PLACES, values), CubicSpline(PLACES, values)
    np.testing.assert_allclose(ours(points), theirs(points), rtol=1e-12, atol=1e-13)
    np.testing.assert_allclose(ours.slopes(points), theirs(points, 1), rtol=1e-11, atol=1e-12)


def test_single_points_are_those_of_arrays_and_lines_beyond_the_ends() -> None:
    spline = Spline(PLACES, np.stack([np.exp(PLACES), PLACES**2], axis=-1))
    for x in (-1.7, -1.0, 0.0, 0.9, 2.3, 3.1):
        np.testing.assert_allclose(spline.at(x), spline(np.asarray(x)), rtol=1e-13)
        np.testing.assert_allclose(spline.slope(x), spline.slopes(np.asarray(x)), rtol=1e-13)
    values, slopes = spline.both(0.4)
    assert values == pytest.approx(spline.at(0.4))
    assert slopes == pytest.approx(spline.slope(0.4))
    assert spline.at(4.3)[1] == pytest.approx(2.3**2 + 2.0 * 2.0 * 2.3)


@pytest.mark.parametrize("count", [1, 2, 3, 4])
def test_few_places_give_the_polynomial_through_them(count: int) -> None:
    x = np.linspace(0.0, 1.0, count) if count > 1 else np.zeros(1)
    spline = Spline(x, (x ** (count - 1))[:, np.newaxis])
    points = np.linspace(0.0, 1.0, 9)
    np.testing.assert_allclose(spline(points)[:, 0], points ** (count - 1), atol=1e-14)


def test_a_monotone_one_never_turns_back() -> None:
    x = np.array([0.0, 1.0, 2.0, 2.1, 3.0, 4.0])
    y = np.array([0.0, 0.0, 0.1, 3.0, 3.1, 3.1])[:, np.newaxis]
    points = np.linspace(0.0, 4.0, 401)
    found = Spline(x, y, monotone=True)(points)[:, 0]
    assert np.all(np.diff(found) >= -1e-15)
    assert np.any(np.diff(Spline(x, y)(points)[:, 0]) < -1e-3)
    np.testing.assert_allclose(Spline(x, y, monotone=True)(x), y, atol=1e-14)
    # Where the values are smooth it is the same spline.
    smooth = np.exp(x)[:, np.newaxis]
    np.testing.assert_allclose(Spline(x, smooth, monotone=True)(x), smooth)


def test_places_must_increase() -> None:
    with pytest.raises(ValueError, match=r"^places of a spline must increase$"):
        Spline(np.array([0.0, 0.0]), np.zeros((2, 1)))
    with pytest.raises(ValueError, match=r"must go together, got shapes \(2,\) and \(3, 1\)$"):
        Spline(np.zeros(2), np.zeros((3, 1)))
