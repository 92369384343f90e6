"""Places all around a minimum, and what volume each stands for: quadrature over a ball, or over what is made of one."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from physics.checks import Floats
from physics.harmonic_integrals import legendre

_POLAR, _AROUND, _ALONG = 24, 36, 28
"""Directions, and places along each: for functions that change in space as a cloud does in another trap."""


def ball_places(matrix: Floats, radius: float) -> tuple[Floats, Floats]:
    """Places (n, 3) and volumes (n,) in what a matrix (3, 3) makes of a ball of a radius, in its own units."""
    directions, weights = all_around()
    ends = np.full((len(directions), 1), radius)
    return places_along(directions @ matrix.T, ends, weights * abs(float(np.linalg.det(matrix))))


def places_along(steps: Floats, ends: Floats, weights: Floats) -> tuple[Floats, Floats]:
    """Along rays (rays, 3), up to radii (rays, 1) in units of their steps; weights are the rays' parts of 4 pi, with
    the determinant of the steps."""
    x, w = legendre(_ALONG)
    q = ends * x
    volumes: Floats = weights[:, np.newaxis] * q**2 * ends * w
    return (q[..., np.newaxis] * steps[:, np.newaxis, :]).reshape(-1, 3), volumes.ravel()


@lru_cache(maxsize=1)
def all_around() -> tuple[Floats, Floats]:
    """Directions (n, 3) and their weights (sum 4 pi): Gauss-Legendre along the polar axis, even steps around it."""
    t, w = legendre(_POLAR)
    return sphere(np.arccos(2.0 * t - 1.0), _AROUND), np.repeat(4.0 * np.pi * w / _AROUND, _AROUND)


def sphere(polar: Floats, count: int) -> Floats:
    """(n, 3) Directions at angles from the polar axis, each at as many even steps around it."""
    around = np.arange(count) * 2.0 * np.pi / count
    theta, phi = (grid.ravel() for grid in np.meshgrid(polar, around, indexing="ij"))
    return np.stack([np.sin(theta) * np.cos(phi), np.sin(theta) * np.sin(phi), np.cos(theta)], axis=-1)
