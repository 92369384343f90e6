"""Smooth functions of two variables at many points, at the cost of a grid: Chebyshev polynomials on a rectangle."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from physics.checks import Floats
from physics.smooth import chebyshev_coefficients

_FEW, _LEAST, _PER_UNIT, _AT_ONCE = 160, 7, 6.0, 4096


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


def through_grid(function: Callable[[Floats, Floats], Floats], x: Floats, y: Floats) -> Floats:
    """Positive functions at many points that lie close together, by their logarithms on a grid; relative error about
    1e-7 where these are smooth on the scale of 1.

    Parameters
    ----------
    function : of flat arrays x and y (n,), giving (k, n).
    x, y : (n,). For few points, or points that are spread wide, the function is evaluated at each.
    """
    if x.size <= _FEW or not (np.all(np.isfinite(x)) and np.all(np.isfinite(y))):
        return function(x, y)
    ranges = (float(np.min(x)), float(np.max(x))), (float(np.min(y)), float(np.max(y)))
    counts = tuple(_LEAST + math.ceil(_PER_UNIT * (high - low)) if high > low else 1 for low, high in ranges)
    if math.prod(counts) > x.size / 2:
        return function(x, y)
    surface = Surface(lambda x, y: np.log(function(x, y)), *ranges, (counts[0], counts[1]))
    parts = []
    for start in range(0, x.size, _AT_ONCE):
        part = slice(start, start + _AT_ONCE)
        parts.append(np.exp(surface.along(surface.across(x[part]), y[part])))
    return np.concatenate(parts, axis=-1)


def _nodes(low: float, high: float, count: int) -> Floats:
    angles = math.pi * (np.arange(count) + 0.5)[::-1] / count
    nodes: Floats = 0.5 * (low + high) + 0.5 * (high - low) * np.cos(angles)
    return nodes


def _waves(values: Floats, low: float, high: float, count: int) -> Floats:
    """(n, count) Chebyshev polynomials, of arguments from -1 to 1 between the ends."""
    width = high - low
    t = np.clip((2.0 * values - low - high) / width, -1.0, 1.0) if width > 0.0 else np.zeros_like(values)
    return np.cos(np.multiply.outer(np.arccos(t), np.arange(count)))
