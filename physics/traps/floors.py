"""The floor of a beam's arm: along an attractive beam, the places where the potential is least across it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.potential import Potential

_STEPS = 25


@dataclass(frozen=True, kw_only=True, eq=False)
class Floor:
    """Places (n, 3) [m], their energies (n,) [J], and at which of them the potential rises to all sides (n,)."""

    positions: Floats
    energies: Floats
    held: NDArray[np.bool_]


def floor_along(potential: Potential, index: int, starts: Floats) -> Floor:
    """The floor of a beam, by its index, near starts (n, 3), each moved across the beam alone."""
    beam = potential.beams[index]
    across, width = beam.frame[:2], float(np.min(beam.waists))
    r = starts
    for _ in range(_STEPS):
        _, gradient, hessian = potential.hessian(r)
        values, vectors = np.linalg.eigh(across @ hessian @ across.T)
        slope = np.einsum("nki,nk->ni", vectors, gradient @ across.T)
        step = -slope / np.maximum(np.abs(values), np.finfo(float).tiny)
        step *= np.minimum(1.0, 0.2 * width / np.maximum(np.linalg.norm(step, axis=-1, keepdims=True), 1e-300))
        r = r + np.einsum("nij,nj->ni", vectors, step) @ across
        if np.max(np.abs(step)) < 1e-9 * width:
            break
    return Floor(positions=r, energies=potential.energy(r), held=np.all(values > 0.0, axis=-1))
