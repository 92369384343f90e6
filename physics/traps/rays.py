"""Volume of the region below an energy by rays from its minimum, while every ray leaves it once.

Coordinates q are such that near the minimum the potential is |q|^2 (smooth) or |q| + f.q (cusp); along each ray it is
known at a few dozen radii with its slope, and inverted by a cubic. Directions are a product rule, Clenshaw-Curtis along
the polar axis, which is the softest one, and equal steps around it; for a tilted cusp they are even around the middle
of the ellipsoids that are its levels. Every second of each makes a coarser rule; while both agree, the fine one is far
better than their difference.

Reference
---------
[1] P. J. Davis and P. Rabinowitz, Methods of Numerical Integration (1984), sections 2.5 and 5.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from physics.checks import Floats
from physics.traps.ball import all_around, places_along, sphere
from physics.traps.potential import Potential
from physics.traps.stationary import StationaryPoint

_POLAR, _AROUND = 24, 32
_RADII = np.concatenate([np.linspace(0.0, 1.5, 19)[1:], 1.5 * np.geomspace(1.0, 1000.0, 46)[1:]])
_AT_ONCE = 16
"""Radii computed together; a ray that has ended by then is not followed further."""

_AGREE = 2e-3
"""Relative difference of the fine and the coarse rule that is let pass; the fine rule is then good to about 1e-5."""

_FLAT = 1e-6
"""Curvature over the largest one below which a minimum is a ring or a line, and has no such coordinates."""


@dataclass(frozen=True, kw_only=True, eq=False)
class RayVolumes:
    """Volumes [m^3] below energies [J] above the minimum, as far as rays can tell; `limit` [J] says how far."""

    energies: Floats
    volumes: Floats
    limit: float


@dataclass(frozen=True, kw_only=True, eq=False)
class Shape:
    """How the potential starts to rise: W = coefficient U^power for small U, the matrix from q to space, and f."""

    matrix: Floats
    power: float
    coefficient: float
    tilt: Floats


def shape_of(minimum: StationaryPoint) -> Shape | None:
    """The shape of a minimum; None where it is flat in a direction."""
    if minimum.cusp:
        # U = |q| + f.q has ellipsoids for levels, W = (4 pi/3) U^3 / (1 - f^2)^2 in q.
        assert minimum.force is not None
        _, sizes, rows = np.linalg.svd(minimum.curvature)
        matrix = _softest_last(rows.T / sizes)
        tilt = matrix.T @ minimum.force
        volume = abs(float(np.linalg.det(matrix))) / (1.0 - float(tilt @ tilt)) ** 2
        return Shape(matrix=matrix, power=3.0, coefficient=4.0 * np.pi / 3.0 * volume, tilt=tilt)
    values, vectors = np.linalg.eigh(minimum.curvature)
    if values[0] <= _FLAT * values[-1]:
        return None
    matrix = _softest_last(vectors / np.sqrt(0.5 * values))
    volume = abs(float(np.linalg.det(matrix)))
    return Shape(matrix=matrix, power=1.5, coefficient=4.0 * np.pi / 3.0 * volume, tilt=np.zeros(3))


def _softest_last(matrix: Floats) -> Floats:
    return matrix[:, np.argsort(np.linalg.norm(matrix, axis=0))]


def ray_volumes(potential: Potential, minimum: StationaryPoint, shape: Shape, energies: Floats) -> RayVolumes:
    """Volumes below energies, from the lowest up to where a ray comes back or the directions no longer suffice.

    Parameters
    ----------
    energies : (n,) [J] Rising, above the minimum.
    """
    directions, weights, coarse = _rule()
    top = float(energies[-1])
    radii = _RADII * (top if minimum.cusp else np.sqrt(top))
    steps, room = _rays(shape, directions)
    height, rise = _along(potential, minimum, steps, radii, top)
    # Along rays the root of the energy, or for a cusp the energy, starts as a straight line.
    bent = 1.0 if minimum.cusp else 0.5
    below = np.maximum.accumulate(height <= 0.0, axis=1)
    coming_back = np.maximum.accumulate(below | (rise <= 0.0), axis=1)
    good = ~coming_back
    # The highest energy to which each ray rises without a turn.
    last = np.sum(good, axis=1) - 1
    reaches = np.where(last >= 0, height[np.arange(len(height)), np.maximum(last, 0)], 0.0)
    limit = min(top, float(np.min(reaches)))
    able = energies[energies <= limit * (1.0 - 1e-12)] if limit < top else energies
    if not len(able):
        return RayVolumes(energies=able, volumes=able, limit=0.0)
    y = np.where(good, np.maximum(height, 0.0), np.inf) ** bent
    known = good & np.isfinite(height)
    slope = bent * np.where(known, rise, np.inf) * np.where(known, height, 1.0) ** (bent - 1.0)
    cubes = _inverse(radii, y, slope, able**bent) ** 3 / 3.0 * room[:, np.newaxis]
    fine, rough = weights @ cubes, coarse @ cubes
    differ = np.abs(rough / fine - 1.0) > _AGREE
    count = int(np.argmax(differ)) if np.any(differ) else len(able)
    limit = float(able[count - 1]) if count else 0.0
    return RayVolumes(energies=able[:count], volumes=fine[:count], limit=limit)


def ray_places(potential: Potential, minimum: StationaryPoint, shape: Shape, level: float) -> tuple[Floats, Floats]:
    """Places (n, 3) [m], from the minimum, and the volumes (n,) [m^3] that they stand for, in the region below a level.

    For smooth functions of the place that vanish, or end, at the level. Every ray must leave the region once.

    Parameters
    ----------
    level : float. [J] Above the minimum.
    """
    directions, weights = all_around()
    steps, room = _rays(shape, directions)
    bent = 1.0 if minimum.cusp else 0.5
    radii = _RADII * level**bent
    height, rise = _along(potential, minimum, steps, radii, level)
    with np.errstate(divide="ignore"):
        y = np.maximum(height, 0.0) ** bent
        slope = np.where(np.isfinite(height), bent * rise * np.where(height > 0.0, height, 1.0) ** (bent - 1.0), np.inf)
    ends = _inverse(radii, y, slope, np.array([level**bent]))
    return places_along(steps, ends, weights * room)


def _rays(shape: Shape, directions: Floats) -> tuple[Floats, Floats]:
    """(rays, 3) Steps in space, of one energy near the minimum, and what the weight of each direction is worth.

    A tilted cusp has ellipsoids with one focus at the minimum for levels. Directions are even around their middle: of
    those around the focus, nearly all would go the steep way once the tilt is nearly too much.
    """
    f = shape.tilt
    square = float(f @ f)
    volume = abs(float(np.linalg.det(shape.matrix)))
    if square == 0.0:
        return directions @ shape.matrix.T, np.full(len(directions), volume)
    root, along = math.sqrt(1.0 - square), directions @ f
    ends = (root * directions + np.outer(along * (1.0 - root) / square - 1.0, f)) / (1.0 - square)
    return ends @ shape.matrix.T, volume * (1.0 - along) / (1.0 - square) ** 2


def _along(
    potential: Potential, minimum: StationaryPoint, steps: Floats, radii: Floats, top: float
) -> tuple[Floats, Floats]:
    """(rays, radii) Energy above the minimum and its slope along rays, until it is over `top` or falls.

    Where a ray is not followed any more, its energy is infinite.
    """
    height, rise = np.full((len(steps), len(radii)), np.inf), np.ones((len(steps), len(radii)))
    going = np.arange(len(steps))
    for first in range(0, len(radii), _AT_ONCE):
        part = slice(first, first + _AT_ONCE)
        points = minimum.position + steps[going, np.newaxis, :] * radii[part, np.newaxis]
        energy, gradient = potential.gradient(points)
        height[going, part] = energy - minimum.energy
        rise[going, part] = np.einsum("nrk,nk->nr", gradient, steps[going])
        ended = np.any((height[going, part] > top) | (rise[going, part] <= 0.0), axis=1)
        going = going[~ended]
        if not len(going):
            break
    return height, rise


def _inverse(radii: Floats, y: Floats, slope: Floats, levels: Floats) -> Floats:
    """(rays, levels) Radius at which y, known with its slope at (rays, radii), comes to a level; at radius 0 it is 0
    and has the slope 1."""
    start = np.zeros((len(y), 1))
    values = np.concatenate([start, y], axis=1)
    at = np.concatenate([[0.0], radii])
    slopes = np.concatenate([np.ones((len(y), 1)), slope], axis=1)
    upper = np.array([np.searchsorted(row, levels, side="right") for row in values])
    upper = np.clip(upper, 1, values.shape[1] - 1)
    rows = np.arange(len(y))[:, np.newaxis]
    y0, y1 = values[rows, upper - 1], values[rows, upper]
    r0, r1 = at[upper - 1], at[upper]
    with np.errstate(divide="ignore", invalid="ignore"):
        t = (levels - y0) / (y1 - y0)
        m0, m1 = (y1 - y0) / slopes[rows, upper - 1], (y1 - y0) / slopes[rows, upper]
    h = r1 - r0
    # Slopes of a curve that bends too much between two radii would make it come back.
    m0, m1 = np.clip(m0, 0.0, 3.0 * h), np.clip(m1, 0.0, 3.0 * h)
    radius: Floats = r0 + t * m0 + t * t * (3.0 * h - 2.0 * m0 - m1) + t**3 * (m0 + m1 - 2.0 * h)
    return radius


@lru_cache(maxsize=1)
def _rule() -> tuple[Floats, Floats, Floats]:
    """Directions (n, 3), their weights (sum 4 pi), and weights of the coarse rule among them."""
    polar = np.arange(_POLAR + 1) * np.pi / _POLAR
    fine = np.outer(_clenshaw_curtis(_POLAR), np.full(_AROUND, 2.0 * np.pi / _AROUND))
    coarse = np.zeros(fine.shape)
    coarse[::2, ::2] = np.outer(_clenshaw_curtis(_POLAR // 2), np.full(_AROUND // 2, 4.0 * np.pi / _AROUND))
    return sphere(polar, _AROUND), fine.ravel(), coarse.ravel()


def _clenshaw_curtis(n: int) -> Floats:
    """Weights of the n + 1 points cos(k pi/n), n even. [1] eq. (2.5.9)"""
    k, j = np.arange(n + 1), np.arange(1, n // 2 + 1)
    factor = np.where(j == n // 2, 1.0, 2.0) / (4.0 * j**2 - 1.0)
    weights = (1.0 - np.cos(2.0 * np.outer(k, j) * np.pi / n) @ factor) * 2.0 / n
    weights[[0, -1]] *= 0.5
    result: Floats = weights
    return result
