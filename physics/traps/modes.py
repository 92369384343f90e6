"""Normal modes of a smooth minimum."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import permutations

import numpy as np

from physics.checks import Floats, as_floats

_FLAT = 1e-9
_ALIKE = 1e-9
"""Squared frequencies, relative to the highest, below which a mode is flat, and within which two modes are one."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Modes:
    """Ordinary frequencies (3,) [Hz], and their axes as the rows of (3, 3), nearest to x, y and z in turn."""

    frequencies: Floats
    axes: Floats


def modes_of(curvature: Floats, mass: float) -> Modes | None:
    """Modes of a Hessian (3, 3) [N/m]; None where a direction is flat.

    Axes of equal frequencies are turned among themselves as near to x, y and z as they go.
    """
    values, vectors = np.linalg.eigh(0.5 * (curvature + curvature.T))
    if values[0] <= _FLAT * values[-1]:
        return None
    axes = vectors.T.copy()
    first = 0
    for last in (1, 2, 3):
        if last == 3 or values[last] - values[last - 1] > _ALIKE * values[-1]:
            if last - first > 1:
                axes[first:last] = _turned(axes[first:last])
            first = last
    order = max(permutations(range(3)), key=lambda p: sum(float(axes[p[k], k]) ** 2 for k in range(3)))
    axes = axes[list(order)]
    axes *= np.where(np.diag(axes) < 0.0, -1.0, 1.0)[:, np.newaxis]
    frequencies = np.sqrt(values[list(order)] / mass) / (2.0 * np.pi)
    return Modes(frequencies=as_floats(frequencies), axes=as_floats(axes))


def _turned(rows: Floats) -> Floats:
    """Another orthonormal basis of the space of some rows, nearest to those of x, y and z that lie most in it."""
    inside = np.linalg.norm(rows, axis=0)
    chosen = np.sort(np.argsort(-inside)[: len(rows)])
    u, _, v = np.linalg.svd(rows[:, chosen])
    turned: Floats = (u @ v).T @ rows
    return turned
