"""Where atoms that slide downhill come to rest: from a pass to the minima on its two sides, or from anywhere.

Steps are those of Newton's method with every curvature counted as positive, each component cut to a radius that grows
while the potential is what its expansion says.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.potential import Potential
from physics.traps.stationary import StationaryPoint

OUTSIDE = -1
NOWHERE = -2

_MOST_STEPS = 300
_FINEST = 1e-9
"""Radius, over the length in which the potential changes, below which there is no way on."""

_FINE, _MOST_ON_WAY = 0.25, 500
"""Distance of the points of a straight way at which the energy is looked at, over the length in which the potential
changes, and how many there are at most."""

_LOW = 0.1
"""Height, over that of the lowest pass above a minimum, below which a place can be close to it."""

_AT = 1e-6
"""Distance from a minimum, over the length in which the potential changes, within which a place is the minimum."""

Ends = NDArray[np.int64]


class _Slide:
    """Points (n, 3) on their way down; `lengths` (n,) of their latest steps."""

    def __init__(self, potential: Potential, starts: Floats, length: float) -> None:
        self._potential = potential
        self.points = np.array(starts, dtype=np.float64)
        self.energy, self._gradient, self._hessian = potential.hessian(self.points)
        self.radius = np.full(len(self.points), 0.05 * length)
        self.lengths = np.full(len(self.points), np.inf)

    def step(self, which: NDArray[np.int64]) -> None:
        """Move some of the points, by their indices."""
        values, vectors = np.linalg.eigh(self._hessian[which])
        along = np.einsum("nki,nk->ni", vectors, self._gradient[which])
        limit = self.radius[which, np.newaxis]
        size = np.abs(along) / np.maximum(np.abs(values), np.finfo(float).tiny)
        # On a ridge nothing pulls to either side, and one of them has to be taken.
        size = np.where(values < 0.0, np.maximum(size, 0.1 * limit), size)
        step = np.where(along > 0.0, -1.0, 1.0) * np.minimum(size, limit)
        trial = self.points[which] + np.einsum("nij,nj->ni", vectors, step)
        energy, gradient, hessian = self._potential.hessian(trial)
        expected = np.sum(along * step + 0.5 * values * step**2, axis=-1)
        gain = energy - self.energy[which]
        with np.errstate(divide="ignore", invalid="ignore"):
            ratio = gain / expected
        better = (gain < 0.0) & (ratio > 0.2) & (ratio < 2.0)
        better[better] = _level(self._potential, self.points[which][better], trial[better], self.energy[which][better])
        self.radius[which] *= np.where(better & (np.abs(ratio - 1.0) < 0.4), 2.0, np.where(better, 0.8, 0.25))
        self.lengths[which] = np.linalg.norm(step, axis=-1)
        moved = which[better]
        self.points[moved], self.energy[moved] = trial[better], energy[better]
        self._gradient[moved], self._hessian[moved] = gradient[better], hessian[better]


def destinations(
    potential: Potential,
    starts: Floats,
    minima: Sequence[StationaryPoint],
    passes: Floats,
    contains: Callable[[Floats], NDArray[np.bool_]],
    length: float,
) -> tuple[Ends, Floats]:
    """The minimum, by its index, in which each start ends; OUTSIDE where it leaves, NOWHERE where it is none of these.

    With the places (n, 3) where the slides ended: of a slide to NOWHERE, a minimum that is not among the given ones.

    Parameters
    ----------
    starts : (n, 3). [m]
    passes : (m,). [J] Energies of all passes, and of what else limits the trap.
    contains : tells which points (n, 3) are still inside.
    length : float. [m] Over which the potential may change; the first steps are a part of it.
    """
    slide = _Slide(potential, starts, length)
    ends = np.full(len(starts), NOWHERE, dtype=np.int64)
    alive = np.arange(len(starts))
    for _ in range(_MOST_STEPS):
        r, energy = slide.points[alive], slide.energy[alive]
        where = _arrived(potential, r, energy, minima, passes)
        where = np.where((where == NOWHERE) & ~contains(r), OUTSIDE, where)
        ends[alive] = where
        moving = (slide.radius[alive] > _FINEST * length) & (slide.lengths[alive] > _FINEST * length)
        alive = alive[(where == NOWHERE) & moving]
        if not len(alive):
            break
        slide.step(alive)
    return ends, slide.points


def settle(potential: Potential, start: Floats, length: float, reach: float) -> Floats | None:
    """The minimum (3,) to which the way leads down from a point (3,); None where it leads further than `reach` [m]."""
    slide, only = _Slide(potential, start[np.newaxis], length), np.array([0])
    for _ in range(_MOST_STEPS):
        slide.step(only)
        if np.linalg.norm(slide.points[0] - start) > reach:
            return None
        # At a cusp no step is short enough, and the radius shrinks to nothing.
        if slide.lengths[0] < _FINEST * length or slide.radius[0] < _FINEST * length:
            rest: Floats = slide.points[0]
            return rest
    return None


def _arrived(
    potential: Potential, r: Floats, energy: Floats, minima: Sequence[StationaryPoint], passes: Floats
) -> Ends:
    """The minimum that each point is at, or so close to that the potential is what it starts as there.

    Close means low against the lowest pass above that minimum, and with a straight way down to it.
    """
    where = np.full(len(r), NOWHERE, dtype=np.int64)
    for index, point in enumerate(minima):
        away = r - point.position
        where[np.linalg.norm(away, axis=-1) < _AT * potential.length] = index
        above = passes[passes > point.energy]
        level = point.energy + _LOW * (float(np.min(above)) - point.energy) if len(above) else np.inf
        start = _start(point, away)
        height = energy - point.energy
        able = np.flatnonzero((where == NOWHERE) & (energy < level) & (height < 2.0 * start) & (start < 2.0 * height))
        if len(able):
            ways = _level(potential, r[able], np.broadcast_to(point.position, (len(able), 3)), energy[able])
            where[able[ways]] = index
    return where


def _level(potential: Potential, here: Floats, there: Floats, energy: Floats) -> NDArray[np.bool_]:
    """Whether straight ways (n, 3) to (n, 3) stay, at points fine enough to see a thin barrier, below energies (n,)."""
    longest = float(np.max(np.linalg.norm(there - here, axis=-1), initial=0.0))
    count = int(np.clip(longest / (_FINE * potential.length), 2, _MOST_ON_WAY))
    share = np.linspace(0.0, 1.0, count)[1:-1, np.newaxis]
    ways = here[:, np.newaxis] + share * (there - here)[:, np.newaxis]
    below: NDArray[np.bool_] = np.all(potential.energy(ways) <= energy[:, np.newaxis], axis=1)
    return below


def _start(point: StationaryPoint, away: Floats) -> Floats:
    """What the potential starts as, from a minimum: a quadratic form, or a cone."""
    if point.cusp:
        assert point.force is not None
        cone: Floats = np.linalg.norm(away @ point.curvature.T, axis=-1) + away @ point.force
        return cone
    form: Floats = 0.5 * np.einsum("ni,ij,nj->n", away, point.curvature, away)
    return form
