"""Panels for sums over the volume curve of a real trap, which may turn where arms open or further minima join."""

from __future__ import annotations

import numpy as np

from physics.checks import Floats
from physics.harmonic_integrals import legendre

_TURNS = np.array([0.02, 0.05, 0.1, 0.2, 0.35, 0.45, 0.55, 0.65, 0.8, 0.92])


def ends_between(eta: Floats, m: Floats, low: Floats, high: Floats, steps: tuple[float, ...]) -> Floats:
    """(cells, ends) Ends of panels between two energies, counted from mu, rising: where a curve may turn, and
    at `steps` besides. Some panels may be empty."""
    inner = np.concatenate([np.multiply.outer(eta, _TURNS) - m[:, np.newaxis], np.tile(steps, (m.size, 1))], axis=-1)
    low, high = low[:, np.newaxis], high[:, np.newaxis]
    ends: Floats = np.sort(np.concatenate([low, np.clip(inner, low, high), high], axis=-1), axis=-1)
    return ends


def panels(ends: Floats, order: int) -> tuple[Floats, Floats]:
    """Nodes and weights, (cells, panels order), of panels between ends (cells, panels + 1)."""
    x, weights = legendre(order)
    low, width = ends[:, :-1, np.newaxis], np.diff(ends, axis=-1)[..., np.newaxis]
    shape = (ends.shape[0], -1)
    return (low + width * x).reshape(shape), (width * weights).reshape(shape)
