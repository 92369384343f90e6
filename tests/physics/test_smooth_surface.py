"""Functions of two variables by way of a grid."""

from __future__ import annotations

import numpy as np

from physics.smooth_surface import Surface


def functions(x: np.ndarray, y: np.ndarray) -> np.ndarray:
    return np.stack([np.exp(-x) * np.cos(3.0 * y), 1.0 / (1.0 + x * y)])


def test_smooth_functions_come_back() -> None:
    surface = Surface(functions, (1.0, 2.0), (0.0, 1.0), (14, 22))
    x, y = np.linspace(1.0, 2.0, 7), np.linspace(1.0, 0.0, 7)
    np.testing.assert_allclose(surface.along(surface.across(x), y), functions(x, y), rtol=1e-11)
    assert surface.holds(x)
    assert not surface.holds(x + 0.1)


def test_a_range_without_width_is_constant() -> None:
    surface = Surface(functions, (1.5, 1.5), (0.0, 1.0), (1, 22))
    x, y = np.full(3, 1.5), np.array([0.1, 0.5, 0.9])
    np.testing.assert_allclose(surface.along(surface.across(x), y), functions(x, y), rtol=1e-11)
