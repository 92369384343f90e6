"""In how many directions atoms of little more than the depth leave a trap: all around, or by one narrow way."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from physics.checks import Floats, as_floats
from physics.traps.potential import Potential

_RAYS, _PLACES = 400, 60
_NEAREST, _FARTHEST = 0.1, 6.0
"""Where the rays are looked at, in parts of the distance at which the bottom of the trap, continued, is as high as the
depth."""

_OUTSIDE = 0.9
"""Share of the depth below which the end of a ray is not outside, but in an arm of a beam."""


def barriers(potential: Potential, minimum: Floats, depth: float, frequencies: Any, axes: Any) -> Floats:
    """(rays,) The highest energy over the minimum on the straight way out in each direction; infinite where it leads
    into an arm of a beam. [J]

    Directions are even in coordinates in which the bottom of the trap is round.

    Parameters
    ----------
    depth : float. [J]
    frequencies, axes : (3,) [Hz] and (3, 3), as of a survey; None without.
    """
    bottom = float(potential.energy(minimum))
    rays = _sphere(_RAYS)
    if frequencies is not None:
        scaled = rays * math.sqrt(2.0 * depth / potential.mass) / (2.0 * math.pi * as_floats(frequencies))
        rays = scaled @ as_floats(axes)
    else:
        # The bottom is a cone, or flat along some direction: so far as it rises to the depth, in each direction.
        near = 1e-3 * potential.length
        rise = np.maximum(potential.energy(minimum + near * rays) - bottom, 1e-3 * depth * near / potential.length)
        rays = rays * (depth * near / rise)[:, np.newaxis]
    far = np.geomspace(_NEAREST, _FARTHEST, _PLACES)
    points = minimum + far[:, np.newaxis] * rays[:, np.newaxis, :]
    highest = np.maximum.accumulate(potential.energy(points) - bottom, axis=1)
    found = np.where(highest[:, -1] >= _OUTSIDE * depth, highest[:, -1], np.inf)
    if potential.knife_energy is not None:
        cut = potential.magnetic(points) >= potential.knife_energy
        first = np.argmax(cut, axis=1)
        at_knife = np.take_along_axis(highest, first[:, np.newaxis], axis=1)[:, 0]
        found = np.where(np.any(cut, axis=1), at_knife, found)
    return as_floats(found)


def _sphere(count: int) -> Floats:
    """(count, 3) Directions evenly spread: a spiral from pole to pole in steps of the golden angle."""
    height = 1.0 - (2.0 * np.arange(count) + 1.0) / count
    angle = math.pi * (3.0 - math.sqrt(5.0)) * np.arange(count)
    radius = np.sqrt(1.0 - height**2)
    return as_floats(np.stack([radius * np.cos(angle), radius * np.sin(angle), height], axis=-1))
