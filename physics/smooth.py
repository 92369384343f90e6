"""Smooth functions of one variable at many points: through a few Chebyshev nodes where that is exact enough."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from physics.checks import Floats

TOLERANCE = 1e-11
_DIRECT = 192
_DEGREES = (16, 32, 64, 128)


def through_nodes(function: Callable[[Floats], Floats], points: Floats) -> Floats:
    """A function at many points of a narrow range, at the cost of a few.

    The function is interpolated between Chebyshev nodes of the range of the points [1]. The degree is doubled until
    the last third of the coefficients is below `TOLERANCE` of the largest; where none of the degrees does it, and for
    few points, the function is evaluated at each point.

    Parameters
    ----------
    function : of a flat array, giving one value an element.
    points : (n,). Finite.

    Returns
    -------
    (n,). Relative to the largest value in the range the error is about `TOLERANCE`.

    Reference
    ---------
    [1] L. N. Trefethen, Approximation Theory and Approximation Practice (2013), chapters 3 and 8. Recalled.
    """
    if points.size <= _DIRECT:
        return function(points)
    from numpy.polynomial import chebyshev

    low, high = float(np.min(points)), float(np.max(points))
    if not low < high:
        return np.full(points.shape, function(np.array([low]))[0])
    for degree in _DEGREES:
        if 4 * degree > points.size:
            break
        nodes = low + 0.5 * (high - low) * (chebyshev.chebpts1(degree + 1) + 1.0)
        coefficients = np.asarray(_coefficients(function(nodes)), dtype=np.float64)
        tail = np.abs(coefficients[-(degree // 3) :])
        if np.max(tail) <= TOLERANCE * np.max(np.abs(coefficients)):
            # Clipped, for the ends may come out an ulp beyond -1 and 1.
            t = np.clip(2.0 * (points - low) / (high - low) - 1.0, -1.0, 1.0)
            return np.asarray(chebyshev.chebval(t, coefficients), dtype=np.float64)
    return function(points)


def _coefficients(values: Floats) -> Floats:
    """Chebyshev coefficients of the polynomial through values at the roots of the next polynomial."""
    count = values.size
    angles = np.pi * (np.arange(count) + 0.5)[::-1] / count
    waves = np.cos(np.outer(np.arange(count), angles))
    coefficients: Floats = 2.0 / count * (waves @ values)
    coefficients[0] *= 0.5
    return coefficients
