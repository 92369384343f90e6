"""Directions in space: unit vectors, and the two axes across a direction that everything shares.

The vertical transverse axis of a direction is the one nearest the z axis; the horizontal one is across both. They make
a right-handed frame (horizontal, vertical, direction). Across the z axis itself, nothing is nearest: there x counts as
horizontal and y as vertical.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from physics.checks import Floats, as_floats

_ALONG_Z = 1e-9
"""Sine of the angle to the z axis below which a direction counts as along it."""


def vector(quantity: str, value: Sequence[float] | Floats, unit: str) -> Floats:
    """Three finite numbers, read-only; ValueError in one sentence otherwise."""
    components = as_floats(value)
    if components.shape != (3,) or not np.all(np.isfinite(components)):
        raise ValueError(f"{quantity} must be three finite numbers, got {value} {unit}".rstrip())
    return components


def unit_vector(quantity: str, value: Sequence[float] | Floats) -> Floats:
    """The direction of a vector that is not zero."""
    components = vector(quantity, value, "")
    length = float(np.linalg.norm(components))
    if length == 0.0:
        raise ValueError(f"{quantity} must not be zero in all three components, got {value}")
    return as_floats(components / length)


def frame_along(direction: Floats) -> Floats:
    """(3, 3) Rows: horizontal, vertical and the unit vector `direction` itself."""
    n = direction
    if np.hypot(n[0], n[1]) < _ALONG_Z:
        # Right-handed also for a direction that points down.
        return as_floats(np.stack([[np.copysign(1.0, n[2]), 0.0, 0.0], [0.0, 1.0, 0.0], n]))
    vertical = np.array([0.0, 0.0, 1.0]) - n[2] * n
    vertical /= np.linalg.norm(vertical)
    return as_floats(np.stack([np.cross(vertical, n), vertical, n]))
