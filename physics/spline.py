"""Cubic splines of several functions at once: evaluated at single points in two microseconds, and at arrays.

The library's own splines cost ten times as much at a single point, where the kinetics of evaporation asks, and half a
second to load.
"""

from __future__ import annotations

from bisect import bisect_right

import numpy as np

from physics.checks import Floats


class Spline:
    """Cubic spline with two continuous derivatives through values at given places, a straight line beyond them.

    At the ends the third derivative is continuous across the second and the last but one place [1]. With two places it
    is a straight line, with three a parabola, with one constant.

    Parameters
    ----------
    places : (n,), increasing.
    values : (n, m). m functions.
    monotone : bool. Give up the second continuous derivative so that the curve never falls where the values rise, nor
        the other way round [2].

    References
    ----------
    [1] C. de Boor, A Practical Guide to Splines (1978), chapter IV, "not-a-knot". Recalled.
    [2] F. N. Fritsch and R. E. Carlson, SIAM J. Numer. Anal. 17, 238 (1980). Recalled.
    """

    def __init__(self, places: Floats, values: Floats, *, monotone: bool = False) -> None:
        x, y = np.asarray(places, dtype=np.float64), np.asarray(values, dtype=np.float64)
        if x.ndim != 1 or y.ndim != 2 or len(x) != len(y) or len(x) < 1:
            raise ValueError(f"places (n,) and values (n, m) must go together, got shapes {x.shape} and {y.shape}")
        if np.any(np.diff(x) <= 0.0):
            raise ValueError("places of a spline must increase")
        slopes = _monotone(x, y, _slopes(x, y)) if monotone else _slopes(x, y)
        self.places = x
        self._list: list[float] = x.tolist()
        self._last = max(len(x) - 2, 0)
        if len(x) == 1:
            zero = np.zeros_like(y)
            self._pieces = np.stack([y, zero, zero, zero], axis=1)
            return
        h, rise = np.diff(x)[:, np.newaxis], np.diff(y, axis=0)
        first, second = slopes[:-1], slopes[1:]
        mean = rise / h
        self._pieces = np.stack(
            [y[:-1], first, (3.0 * mean - 2.0 * first - second) / h, (first + second - 2.0 * mean) / h**2], axis=1
        )

    @property
    def pieces(self) -> Floats:
        """(n - 1, 4, m) Coefficients of 1, t, t^2, t^3 with t counted from the left end of each interval."""
        return self._pieces

    def place(self, x: float) -> tuple[int, float]:
        """Index of the interval and the distance from its left end."""
        index = min(max(bisect_right(self._list, x) - 1, 0), self._last)
        return index, x - self._list[index]

    def at(self, x: float) -> list[float]:
        """All functions at one point."""
        low, high = self._list[0], self._list[-1]
        if low <= x <= high:
            index, t = self.place(x)
            inside: list[float] = np.dot((1.0, t, t * t, t * t * t), self._pieces[index]).tolist()
            return inside
        end = low if x < low else high
        value, slope = self.at(end), self.slope(end)
        return [v + (x - end) * s for v, s in zip(value, slope, strict=True)]

    def slope(self, x: float) -> list[float]:
        """All first derivatives at one point."""
        index, t = self.place(min(max(x, self._list[0]), self._list[-1]))
        slopes: list[float] = np.dot((0.0, 1.0, 2.0 * t, 3.0 * t * t), self._pieces[index]).tolist()
        return slopes

    def both(self, x: float) -> tuple[list[float], list[float]]:
        """All functions and all first derivatives at one point between the ends."""
        index, t = self.place(x)
        t2 = t * t
        values, slopes = np.dot(((1.0, t, t2, t2 * t), (0.0, 1.0, 2.0 * t, 3.0 * t2)), self._pieces[index]).tolist()
        return values, slopes

    def __call__(self, points: Floats) -> Floats:
        """(..., m) All functions at an array of points."""
        x = np.asarray(points, dtype=np.float64)
        inside = np.clip(x, self._list[0], self._list[-1])
        index = np.clip(np.searchsorted(self.places, inside, side="right") - 1, 0, self._last)
        t = (inside - self.places[index])[..., np.newaxis]
        a, b, c, d = np.moveaxis(self._pieces[index], -2, 0)
        beyond = (x - inside)[..., np.newaxis]
        found: Floats = a + t * (b + t * (c + t * d)) + beyond * (b + t * (2.0 * c + t * 3.0 * d))
        return found

    def with_slopes(self, points: Floats) -> tuple[Floats, Floats]:
        """(..., m) All functions and their first derivatives at an array of points between the ends."""
        index = np.clip(np.searchsorted(self.places, points, side="right") - 1, 0, self._last)
        t = (points - self.places[index])[..., np.newaxis]
        a, b, c, d = np.moveaxis(self._pieces[index], -2, 0)
        values: Floats = a + t * (b + t * (c + t * d))
        slopes: Floats = b + t * (2.0 * c + t * 3.0 * d)
        return values, slopes

    def slopes(self, points: Floats) -> Floats:
        """(..., m) First derivatives at an array of points."""
        x = np.clip(np.asarray(points, dtype=np.float64), self._list[0], self._list[-1])
        index = np.clip(np.searchsorted(self.places, x, side="right") - 1, 0, self._last)
        t = (x - self.places[index])[..., np.newaxis]
        _, b, c, d = np.moveaxis(self._pieces[index], -2, 0)
        found: Floats = b + t * (2.0 * c + t * 3.0 * d)
        return found


def _monotone(x: Floats, y: Floats, slopes: Floats) -> Floats:
    """Slopes no steeper than three times the lesser of the two secants beside each place, and of their sign."""
    if len(x) < 2:
        return slopes
    secants = np.diff(y, axis=0) / np.diff(x)[:, np.newaxis]
    before, after = np.concatenate([secants[:1], secants]), np.concatenate([secants, secants[-1:]])
    least = np.where(before * after > 0.0, np.minimum(np.abs(before), np.abs(after)), 0.0)
    sign = np.sign(after)
    limited: Floats = sign * np.clip(sign * slopes, 0.0, 3.0 * least)
    return limited


def _slopes(x: Floats, y: Floats) -> Floats:
    """First derivatives at the places: a tridiagonal system, solved by elimination without pivots."""
    n = len(x)
    if n == 1:
        return np.zeros_like(y)
    h = np.diff(x)
    mean = np.diff(y, axis=0) / h[:, np.newaxis]
    if n == 2:
        return np.concatenate([mean, mean])
    if n == 3:
        curved = (mean[1] - mean[0]) / (h[0] + h[1])
        first = mean[0] - curved * h[0]
        return np.stack([first, mean[0] + curved * h[0], mean[1] + curved * h[1]])
    diagonal, right = np.empty(n), np.empty_like(y)
    above, below = np.empty(n - 1), np.empty(n - 1)
    diagonal[1:-1] = 2.0 * (h[:-1] + h[1:])
    below[:-1], above[1:] = h[1:], h[:-1]
    right[1:-1] = 3.0 * (h[1:, np.newaxis] * mean[:-1] + h[:-1, np.newaxis] * mean[1:])
    both = h[0] + h[1]
    diagonal[0], above[0] = h[1], both
    right[0] = ((h[0] + 2.0 * both) * h[1] * mean[0] + h[0] ** 2 * mean[1]) / both
    both = h[-1] + h[-2]
    diagonal[-1], below[-1] = h[-2], both
    right[-1] = (h[-1] ** 2 * mean[-2] + (2.0 * both + h[-1]) * h[-2] * mean[-1]) / both
    for i in range(1, n):
        factor = below[i - 1] / diagonal[i - 1]
        diagonal[i] -= factor * above[i - 1]
        right[i] -= factor * right[i - 1]
    right[-1] /= diagonal[-1]
    for i in range(n - 2, -1, -1):
        right[i] = (right[i] - above[i] * right[i + 1]) / diagonal[i]
    return right
