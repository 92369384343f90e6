"""One sentence for a number that cannot be: quantity, limit, value and unit."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]
"""A float64 array, or np.float64 where a single number is meant."""


def as_floats(value: ArrayLike) -> Floats:
    """A private, read-only float64 copy of the value; a single number becomes np.float64."""
    array = np.array(value, dtype=np.float64)
    array.setflags(write=False)
    result: Floats = array[()]
    return result


def require_positive(quantity: str, value: Floats, unit: str) -> None:
    """Raise ValueError unless every element is finite and above zero; the sentence names the first that is not."""
    bad = ~(np.isfinite(value) & (np.asarray(value) > 0.0))
    if np.any(bad):
        raise ValueError(f"{quantity} must be positive and finite, got {_first(value, bad)} {unit}".rstrip())


def require_not_infinite(quantity: str, value: Floats, unit: str) -> None:
    """Raise ValueError where an element is infinite; NaN, which stands for unknown, passes."""
    bad = np.isinf(value)
    if np.any(bad):
        raise ValueError(f"{quantity} must be finite, got {_first(value, bad)} {unit}".rstrip())


def _first(value: Floats, bad: NDArray[np.bool_]) -> str:
    return f"{float(np.atleast_1d(value)[np.atleast_1d(bad)][0]):g}"
