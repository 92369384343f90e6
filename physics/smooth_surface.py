"""Smooth functions of two variables at many points, at the cost of a grid: Chebyshev polynomials on a rectangle."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from physics.checks import Floats
from physics.smooth import chebyshev_coefficients


class Surface:
    """Functions of x and y, interpolated between Chebyshev nodes of a rectangle.

    Parameters
    ----------
    function : of flat arrays x and y (n,), giving (k, n).
    x_range, y_range : ends of the rectangle; where the ends of one are the same, functions are taken as constant there.
    counts : numbers of nodes along x and y.
    """

    def __init__(
        self,
        function: Callable[[Floats, Floats], Floats],
        x_range: tuple[float, float],
        y_range: tuple[float, float],
        counts: tuple[int, int],
    ) -> None:
        self.x_range, self.y_range, self.counts = x_range, y_range, counts
        x, y = (_nodes(*ends, count) for ends, count in zip((x_range, y_range), counts, strict=True))
        grid = np.meshgrid(x, y, indexing="ij")
        values = function(grid[0].ravel(), grid[1].ravel())
        values = values.reshape((values.shape[0], x.size, y.size))
        along_y = np.moveaxis(chebyshev_coefficients(values), 0, -1)  # (k, x, coefficients)
        self.coefficients = np.moveaxis(chebyshev_coefficients(along_y.swapaxes(-1, -2)), 0, 1)  # (k, in x, in y)

    def holds(self, x: Floats) -> bool:
        """Whether the rectangle reaches over all of x."""
        return self.x_range[0] <= float(np.min(x)) and float(np.max(x)) <= self.x_range[1]

    def across(self, x: Floats) -> Floats:
        """(k, n, coefficients) Polynomials in y at each x."""
        waves = _waves(x, *self.x_range, self.coefficients.shape[1])
        polynomials: Floats = np.matmul(waves, self.coefficients)
        return polynomials

    def along(self, polynomials: Floats, y: Floats) -> Floats:
        """(k, n) Their values at one y each."""
        found: Floats = np.sum(polynomials * _waves(y, *self.y_range, polynomials.shape[-1]), axis=-1)
        return found


def _nodes(low: float, high: float, count: int) -> Floats:
    angles = math.pi * (np.arange(count) + 0.5)[::-1] / count
    nodes: Floats = 0.5 * (low + high) + 0.5 * (high - low) * np.cos(angles)
    return nodes


def _waves(values: Floats, low: float, high: float, count: int) -> Floats:
    """(n, count) Chebyshev polynomials, of arguments from -1 to 1 between the ends."""
    width = high - low
    t = np.clip((2.0 * values - low - high) / width, -1.0, 1.0) if width > 0.0 else np.zeros_like(values)
    return np.cos(np.multiply.outer(np.arccos(t), np.arange(count)))
