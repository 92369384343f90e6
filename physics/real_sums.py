"""Panels for sums over the volume curve of a real trap, which may turn where arms open or further minima join."""

from __future__ import annotations

import numpy as np

from physics.checks import Floats
from physics.harmonic_integrals import legendre

STEPS = (0.5, 2.0, 6.0, 15.0)
"""kT above mu between which panels lie where a thermal gas thins out."""

_LEAST = 1e-300


def turns_above(turns: Floats, eta: Floats, m: Floats) -> Floats:
    """(cells, turns) Where a curve turns, at shares of eta, counted from mu."""
    above: Floats = np.multiply.outer(eta, turns) - m[:, np.newaxis]
    return above


def ends_between(turns: Floats, low: Floats, high: Floats, steps: tuple[float, ...]) -> Floats:
    """(cells, ends) Ends of panels between two energies, counted from mu, rising: at turns, (cells, turns), and at
    `steps` besides. Some panels may be empty."""
    inner = np.concatenate([turns, np.tile(steps, (low.size, 1))], axis=-1)
    low, high = low[:, np.newaxis], high[:, np.newaxis]
    ends: Floats = np.sort(np.concatenate([low, np.clip(inner, low, high), high], axis=-1), axis=-1)
    return ends


def panels(ends: Floats, order: int) -> tuple[Floats, Floats]:
    """Nodes and weights, (cells, nodes), of panels between ends (cells, panels + 1) that rise. Panels that are empty
    for all cells have none."""
    x, weights = legendre(order)
    low, width = ends[:, :-1], np.diff(ends, axis=-1)
    wide = np.any(width > 0.0, axis=0)
    low, width = low[:, wide, np.newaxis], width[:, wide, np.newaxis]
    shape = (ends.shape[0], order * int(np.count_nonzero(wide)))
    return (low + width * x).reshape(shape), (width * weights).reshape(shape)


def panels_to_top(ends: Floats, order: int) -> tuple[Floats, Floats]:
    """`panels` of integrands with a square root at the last of the ends, which are positive: equal steps of an arc of
    which the nodes are the sines."""
    last = np.maximum(ends[:, -1:], _LEAST)
    angle, width = panels(np.arcsin(np.minimum(ends / last, 1.0)), order)
    return last * np.sin(angle), last * np.cos(angle) * width
