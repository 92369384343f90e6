"""Roots of many rising functions at once, by tangents or secants that a bracket keeps from straying."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from physics.checks import Floats

_STEPS, _PATIENCE = 120, 14


def rising_roots(
    function: Callable[[Floats], Floats | tuple[Floats, Floats]],
    low: Floats,
    high: Floats,
    start: Floats,
    *,
    slope: float = 1.0,
    slopes: tuple[float, float] = (0.2, 20.0),
    tolerance: float | Floats = 1e-9,
) -> Floats:
    """Where each of many functions, which rise, is zero.

    Parameters
    ----------
    function : of (n,) arguments, one for each function; -inf counts as below zero. It may give slopes beside the
        values, which are followed where they are positive, secants elsewhere.
    low, high : (n,) brackets; an end may be infinite.
    start : (n,). Where it is NaN the root is NaN.
    slope, slopes : that of the first step, and the range in which that of a secant is believed.
    tolerance : one for all or (n,); steps below end the search: the error is about the square of the last one.

    Raises
    ------
    ArithmeticError : where that takes more than 120 evaluations.
    """
    low, high = np.array(low, dtype=np.float64), np.array(high, dtype=np.float64)
    y = np.array(start, dtype=np.float64)
    y = np.where(np.isnan(y), y, np.clip(y, low, high))
    steep, before, missed = np.full_like(y, slope), y, np.zeros_like(y)
    for step in range(_STEPS):
        found = function(y)
        here, slopes_here = found if isinstance(found, tuple) else (found, None)
        low, high = np.where(here < 0.0, y, low), np.where(here > 0.0, y, high)
        with np.errstate(all="ignore"):
            if step:
                secant = (here - missed) / (y - before)
                steep = np.where((secant > slopes[0]) & (secant < slopes[1]), secant, steep)
            if slopes_here is not None:
                steep = np.where(slopes_here > 0.0, slopes_here, steep)
            new = y - here / steep
            middle = np.where(np.isinf(low), high - 2.0 * (high - y) - 1.0, 0.5 * (low + high))
            middle = np.where(np.isinf(high), low + 2.0 * (y - low) + 1.0, middle)
        before, missed = y, here
        inside = (new >= low) & (new <= high) & np.isfinite(new)
        if step > _PATIENCE and step % 2:
            inside = inside & ~np.isfinite(high - low)  # a secant that creeps gives way to halving
        y = np.where(np.isnan(y) | (here == 0.0), y, np.where(inside, new, middle))
        if np.all((np.abs(y - before) < tolerance) | np.isnan(y)):
            return y
    raise ArithmeticError("a bracketed root was not found")
