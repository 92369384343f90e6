"""How atoms get out: the least energy at which a way leads from a minimum to the outside, and where.

Minima and the outside are joined by passes. Taken by rising energy, each pass joins what lies on its two sides; the one
that first joins a minimum to the outside is where its atoms escape.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.boundary import EdgePass, Exit, arm_end_passes, knife_passes, wall_passes
from physics.traps.charts import Chart
from physics.traps.descent import NOWHERE, OUTSIDE, destinations
from physics.traps.potential import Potential
from physics.traps.stationary import StationaryPoint

_ALIKE, _FEW_ALIKE = 1e-9, 4
"""Relative difference of the energies of minima that count as one, and for how many of those the edge is looked at."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Escape:
    """The lowest way out of a minimum.

    Attributes
    ----------
    kind : Exit.
    energy : float. [J] Of the pass, on the scale of the potential.
    position : (3,) or None. [m] None for free space, which is equally high everywhere.
    direction : (3,) or None. Unit vector in which atoms leave there.
    """

    kind: Exit
    energy: float
    position: Floats | None
    direction: Floats | None


@dataclass(frozen=True, kw_only=True, eq=False)
class Basin:
    """A minimum with its way out, and the passes [J] below that to other minima, the lowest first."""

    minimum: StationaryPoint
    escape: Escape
    inner_passes: tuple[float, ...] = ()

    @property
    def depth(self) -> float:
        """Energy of the way out over that of the minimum. [J]"""
        return self.escape.energy - self.minimum.energy


@dataclass(frozen=True, kw_only=True, eq=False)
class _Way:
    """A pass and the two minima, or the outside, that it joins; the direction is that from the first to the second."""

    escape: Escape
    ends: tuple[int, int]

    @property
    def reversed(self) -> _Way:
        """The way back."""
        direction = None if self.escape.direction is None else -self.escape.direction
        return _Way(escape=replace(self.escape, direction=direction), ends=(self.ends[1], self.ends[0]))


def basins(
    potential: Potential, points: Sequence[StationaryPoint], charts: tuple[Chart, ...], wall: float
) -> list[Basin]:
    """The minima that hold atoms, the deepest first; minima that one way out joins count once, by the lowest of them.

    Parameters
    ----------
    points : stationary points in the charts.
    wall : float. [m] Distance from the coils' centre at which atoms are lost, where a field has a shape.
    """
    minima = [point for point in points if point.minimum]
    if not minima:
        return []
    ways, further = _ways(potential, points, minima, charts, wall)
    if further:
        # A slide ended in a minimum that the search had missed.
        minima += further
        ways, _ = _ways(potential, points, minima, charts, wall)
    ways.sort(key=lambda way: way.escape.energy)
    group = list(range(len(minima)))
    exits: dict[int, Escape] = {}
    inner: dict[int, list[float]] = {index: [] for index in group}
    for way in ways:
        here, there = (OUTSIDE if end == OUTSIDE or group[end] in exits else group[end] for end in way.ends)
        if here == there:
            continue
        if OUTSIDE in (here, there):
            exits[max(here, there)] = way.escape if there == OUTSIDE else way.reversed.escape
            continue
        group = [there if label == here else label for label in group]
        inner[there] = [*inner[there], *inner.pop(here), way.escape.energy]
    found = []
    for label, escape in exits.items():
        members = [minima[index] for index in range(len(minima)) if group[index] == label]
        lowest = min(members, key=lambda point: point.energy)
        if escape.energy > lowest.energy:
            passes = tuple(sorted(inner.get(label, [])))
            found.append(Basin(minimum=lowest, escape=escape, inner_passes=passes))
    return sorted(found, key=lambda basin: -basin.depth)


def _ways(
    potential: Potential,
    points: Sequence[StationaryPoint],
    minima: Sequence[StationaryPoint],
    charts: tuple[Chart, ...],
    wall: float,
) -> tuple[list[_Way], list[StationaryPoint]]:
    """The ways between minima and the outside, and minima on which they came that are not among the given ones."""
    outside, length = potential.level_outside, potential.length
    ways = []
    if outside is not None:
        space = Escape(kind=Exit.OPEN_SPACE, energy=outside, position=None, direction=None)
        ways += [_Way(escape=space, ends=(index, OUTSIDE)) for index in range(len(minima))]
    saddles = [point for point in points if point.falling == 1 and (outside is None or point.energy < outside)]
    edges = [*wall_passes(potential, wall), *arm_end_passes(potential, charts)]
    for minimum in _unlike(minima):
        edges.extend(knife_passes(potential, minimum.position, wall))
    # Both sides of each pass, and the inner side of each edge.
    falling = [_falling(saddle) for saddle in saddles]
    starts = [saddle.position - 0.01 * length * across for saddle, across in zip(saddles, falling, strict=True)]
    starts += [saddle.position + 0.01 * length * across for saddle, across in zip(saddles, falling, strict=True)]
    starts += [edge.position - 1e-3 * length * edge.outward for edge in edges]
    if not starts:
        return ways, []
    heights = [saddle.energy for saddle in saddles] + [edge.energy for edge in edges]
    passes = np.array(heights if outside is None else [*heights, outside])
    inside = _inside(potential, charts, wall)
    ends, rests = destinations(potential, np.array(starts), minima, passes, inside, length)
    one, other, inner = ends[: len(saddles)], ends[len(saddles) : 2 * len(saddles)], ends[2 * len(saddles) :]
    for saddle, across, a, b in zip(saddles, falling, one, other, strict=True):
        if NOWHERE not in (a, b):
            escape = Escape(kind=Exit.PASS, energy=saddle.energy, position=saddle.position, direction=across)
            ways.append(_Way(escape=escape, ends=(int(a), int(b))))
    ways += [
        _Way(escape=_over(edge), ends=(int(end), OUTSIDE)) for edge, end in zip(edges, inner, strict=True) if end >= 0
    ]
    return ways, _unknown(potential, rests[ends == NOWHERE], length)


def _unlike(minima: Sequence[StationaryPoint]) -> list[StationaryPoint]:
    """The minima, and a few of those of one energy: all around a ring, the edge looks the same."""
    kept: list[StationaryPoint] = []
    for minimum in minima:
        alike = [other for other in kept if abs(other.energy - minimum.energy) <= _ALIKE * abs(minimum.energy)]
        if len(alike) < _FEW_ALIKE:
            kept.append(minimum)
    return kept


def _inside(potential: Potential, charts: tuple[Chart, ...], wall: float) -> Callable[[Floats], NDArray[np.bool_]]:
    def contains(r: Floats) -> NDArray[np.bool_]:
        inside = np.zeros(len(r), dtype=bool)
        for chart in charts:
            inside |= chart.contains(r)
        if potential.shaped and potential.coils is not None:
            inside &= np.linalg.norm(r - potential.coils.centre, axis=-1) < wall
        if potential.knife_energy is not None:
            inside &= potential.magnetic(r) < potential.knife_energy
        return inside

    return contains


def _unknown(potential: Potential, places: Floats, length: float) -> list[StationaryPoint]:
    """Smooth minima at places (n, 3), each once."""
    found: list[StationaryPoint] = []
    for place in places:
        energy, _, curvature = potential.hessian(place)
        new = all(np.linalg.norm(place - other.position) > 1e-3 * length for other in found)
        if new and np.all(np.linalg.eigvalsh(curvature) > 0.0):
            found.append(StationaryPoint(position=place, energy=float(energy), falling=0, curvature=curvature))
    return found


def _over(edge: EdgePass) -> Escape:
    return Escape(kind=edge.kind, energy=edge.energy, position=edge.position, direction=edge.outward)


def _falling(saddle: StationaryPoint) -> Floats:
    """The unit vector, one of two, along which the potential falls away from a pass."""
    _, vectors = np.linalg.eigh(saddle.curvature)
    direction: Floats = vectors[:, 0]
    return direction
