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
    function : of a flat array (n,), giving (..., n): one value an element, or several.
    points : (n,). Where one is not finite, all are evaluated.

    Returns
    -------
    (..., n). Relative to the largest value in the range the error is about `TOLERANCE`.

    Reference
    ---------
    [1] L. N. Trefethen, Approximation Theory and Approximation Practice (2013), chapters 3 and 8. Recalled.
    """
    if points.size <= _DIRECT:
        return function(points)
    from numpy.polynomial import chebyshev

    low, high = float(np.min(points)), float(np.max(points))
    if not np.isfinite(high - low):
        return function(points)
    if low == high:
        return np.repeat(function(points[:1]), points.size, axis=-1)
    for degree in _DEGREES:
        if 4 * degree > points.size:
            break
        nodes = low + 0.5 * (high - low) * (chebyshev.chebpts1(degree + 1) + 1.0)
        coefficients = np.asarray(chebyshev_coefficients(function(nodes)), dtype=np.float64)
        sizes = np.abs(coefficients)
        if np.all(np.max(sizes[-(degree // 3) :], axis=0) <= TOLERANCE * np.max(sizes, axis=0)):
            # Clipped, for the ends may come out an ulp beyond -1 and 1.
            t = np.clip(2.0 * (points - low) / (high - low) - 1.0, -1.0, 1.0)
            return np.asarray(chebyshev.chebval(t, coefficients), dtype=np.float64)
    return function(points)


def chebyshev_coefficients(values: Floats) -> Floats:
    """Chebyshev coefficients, along the first axis, of the polynomials through values at the roots of the next one."""
    count = values.shape[-1]
    angles = np.pi * (np.arange(count) + 0.5)[::-1] / count
    waves = np.cos(np.outer(np.arange(count), angles))
    coefficients: Floats = 2.0 / count * np.moveaxis(values @ waves.T, -1, 0)
    coefficients[0] *= 0.5
    return coefficients
