"""Minima and passes of a potential: all points in the charts where its gradient vanishes.

Where every component of the gradient changes its sign within a cell and its neighbours, or nearly so, Newton's method
starts from that cell and keeps what it reaches nearby. The number of falling directions tells minima (none) from
passes (one).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.charts import Chart
from physics.traps.landscape import Landscape
from physics.traps.potential import Potential

_MARGIN = 0.3
"""Share of its range in the neighbourhood by which a component may miss the change of sign: two points that are about
to merge lie within one cell."""

_STEPS = 20
_STRAY = 4.0
_PATIENCE, _SLOW = 8, 0.05
"""Newton steps at most, cells over which they may lead, and how short they must be after how many of them."""

_TOGETHER = 3.0
"""One over the distance, in cells, at which two searches count as one after the first step; its powers after more."""

_FEW, _NEAR, _LEFT = 50, 3.0, 0.3
"""With more starts than a few, only those count whose first step is shorter than so many cells and leaves no more than
this part of the force."""

_MOST_AROUND, _AROUND = 4, np.array([0.15, 0.4, 1.0])
"""The lowest minima around which passes are looked for once more, and distances in cells."""

_NOTHING = 1e-4
"""Share of the deepest light shift below which a place counts as outside, where there is nothing but light."""

_FLAT = 1e-9
"""Eigenvalue, relative to the largest in units of the cell, below which a direction counts as flat."""


@dataclass(frozen=True, kw_only=True, eq=False)
class StationaryPoint:
    """A point without force; at a `cusp` the force jumps, and there is no curvature.

    `curvature` is the Hessian [N/m]; at a cusp, the matrix A of U = U0 + |A r| + f.r [N] whose f is `force`.
    """

    position: Floats
    energy: float
    falling: int
    curvature: Floats
    cusp: bool = False
    force: Floats | None = None

    @property
    def minimum(self) -> bool:
        """Whether the energy rises, or stays, in all directions."""
        return self.falling == 0


def stationary_points(landscape: Landscape) -> list[StationaryPoint]:
    """All minima, passes and tops in the charts, each once, by rising energy; cusps of the field among them."""
    potential = landscape.potential
    found: list[StationaryPoint] = [cusp_at(potential, point) for point in potential.cusps()]
    zeros = () if potential.coils is None or not potential.shaped else potential.coils.zeros()
    searches = [_starts(landscape, index) for index in range(len(landscape.charts))]
    if potential.zeeman_slope > 0.0:
        searches += [_beside(potential, zero) for zero in zeros]

    def add(starts: Sequence[tuple[Floats, Floats]], charts: Sequence[Chart]) -> None:
        for point in _refined(potential, starts, charts):
            # Newton's method also closes in on a cusp from all sides, whether it is a minimum or not.
            at_zero = any(np.linalg.norm(point.position - zero) < 1e-8 * potential.length for zero in zeros)
            if not at_zero and _apart(point, found):
                found.append(point)

    add(searches, landscape.charts)
    # A pass that is about to merge with a minimum lies in the same cell.
    minima = [point for point in found if point.minimum and not point.cusp]
    add([_around(chart, minima) for chart in landscape.charts], ())
    return sorted(found, key=lambda point: point.energy)


def _around(chart: Chart, minima: Sequence[StationaryPoint]) -> tuple[Floats, Floats]:
    """Starts around minima, along the axes of their Hessians in units of the cell that holds them."""
    starts, edges = [np.zeros((0, 3))], [np.zeros((0, 3, 3))]
    for minimum in minima[:_MOST_AROUND]:
        index, inside = chart.cells_of(minimum.position)
        if inside:
            edge = chart.cell_edges(np.array([np.unravel_index(int(index), chart.shape)]))
            _, vectors = np.linalg.eigh(edge[0].T @ minimum.curvature @ edge[0])
            ways = np.concatenate([vectors.T, -vectors.T]) @ edge[0].T
            starts.append(minimum.position + (_AROUND[:, np.newaxis, np.newaxis] * ways).reshape(-1, 3))
            edges.append(np.repeat(edge, len(starts[-1]), axis=0))
    return np.concatenate(starts), np.concatenate(edges)


def _beside(potential: Potential, zero: Floats) -> tuple[Floats, Floats]:
    """Starts on the valley that leads away from a zero of the field where other forces pull harder than it holds."""
    assert potential.coils is not None
    matrix = potential.zeeman_slope * potential.coils.jacobian(zero)
    if abs(np.linalg.det(matrix)) == 0.0:
        return np.zeros((0, 3)), np.zeros((0, 3, 3))
    pull = np.linalg.solve(matrix.T, potential.smooth_gradient(zero))
    if not np.linalg.norm(pull) >= 1.0:
        return np.zeros((0, 3)), np.zeros((0, 3, 3))
    valley = -np.linalg.solve(matrix, pull)
    distances = potential.length * np.geomspace(1e-5, 3.0, 24)
    starts = zero + np.outer(distances, valley / np.linalg.norm(valley))
    return starts, distances[:, np.newaxis, np.newaxis] * np.eye(3)


def cusp_at(potential: Potential, point: Floats) -> StationaryPoint:
    """The minimum at a zero of the field."""
    assert potential.coils is not None
    return StationaryPoint(
        position=point,
        energy=float(potential.energy(point)),
        falling=0,
        curvature=potential.zeeman_slope * potential.coils.jacobian(point),
        cusp=True,
        force=potential.smooth_gradient(point),
    )


def _apart(point: StationaryPoint, others: Sequence[StationaryPoint]) -> bool:
    """Whether a point is none of the others: where minima form a ring, there are hundreds of them."""
    places = np.array([other.position for other in others]).reshape(-1, 3)
    sizes = np.maximum(np.linalg.norm(places, axis=-1), max(float(np.linalg.norm(point.position)), 1e-6))
    return bool(np.all(np.linalg.norm(places - point.position, axis=-1) > 1e-6 * sizes))


def _starts(landscape: Landscape, index: int) -> tuple[Floats, Floats]:
    """Cells from which a search is worth while: their middles (n, 3), and their edges as columns (n, 3, 3)."""
    potential, chart = landscape.potential, landscape.charts[index]
    points = chart.cell_points
    energy, gradient = landscape.energies[index], landscape.gradients[index]
    # Over the depth of the light there, which takes the steep fall of its wings out of the comparison.
    light = np.abs(energy - potential.dark(points))
    scale = light + max(1e-9 * float(np.max(light)), np.finfo(float).tiny)
    able = np.ones(tuple(n - 2 for n in chart.shape), dtype=bool)
    for axis in chart.frame:
        component = (gradient @ axis) / scale
        low, high = _neighbourhood(component, np.minimum), _neighbourhood(component, np.maximum)
        margin = _MARGIN * (high - low)
        able &= (low <= margin) & (high >= -margin) & (high > low)
    if potential.level_outside is not None:
        # Far from all light the gradient vanishes everywhere.
        able &= (light > _NOTHING * np.max(light))[1:-1, 1:-1, 1:-1]
    indices = np.argwhere(able) + 1
    starts, edges = points[tuple(indices.T)], chart.cell_edges(indices)
    if len(starts) > _FEW:
        steps, _, _ = _newton(potential, starts, edges)
        near = np.linalg.norm(steps, axis=-1) < _NEAR
        starts, edges, steps = starts[near], edges[near], steps[near]
        # Where the first step leads, little of the force may be left; in the wings of a beam, 0.4 of it always is.
        there = starts + np.einsum("nij,nj->ni", edges, steps)
        left = np.linalg.norm(_slopes(potential, there, edges), axis=-1)
        good = left < _LEFT * np.linalg.norm(_slopes(potential, starts, edges), axis=-1)
        starts, edges = starts[good], edges[good]
    return starts, edges


def _neighbourhood(values: Floats, extreme: np.ufunc) -> Floats:
    """Extremes over each inner cell and the six that share a face with it."""
    inner = slice(1, -1)
    result = values[inner, inner, inner]
    for shifted in (slice(None, -2), slice(2, None)):
        result = extreme(result, values[shifted, inner, inner])
        result = extreme(result, values[inner, shifted, inner])
        result = extreme(result, values[inner, inner, shifted])
    return result


def _slopes(potential: Potential, points: Floats, edges: Floats) -> Floats:
    """(n, 3) Slopes of the energy along the edges of cells. [J]"""
    slopes: Floats = np.einsum("nki,nk->ni", edges, potential.gradient(points)[1])
    return slopes


def _spread_out(
    charts: Sequence[Chart], origin: NDArray[np.int64], r: Floats, which: NDArray[np.int64], per_cell: float
) -> NDArray[np.int64]:
    """Those indices whose points r are the first of their chart at a place; `per_cell` places fit along a cell."""
    kept = [which[origin >= len(charts)]]
    for k, chart in enumerate(charts):
        own = np.flatnonzero(origin == k)
        places = np.rint(per_cell * chart.cell_coordinates(r[own])).astype(np.int64)
        kept.append(which[own[np.sort(np.unique(places, axis=0, return_index=True)[1])]])
    return np.concatenate(kept)


def _newton(potential: Potential, points: Floats, edges: Floats) -> tuple[Floats, NDArray[np.bool_], Floats]:
    """Newton's step (n, 3) in units of the cell, whether the point is settled, and the energy.

    A flat direction gets no step, and settles only without a force along it.
    """
    energy, gradient, hessian = potential.hessian(points)
    slope = np.einsum("nki,nk->ni", edges, gradient)
    bend = np.swapaxes(edges, 1, 2) @ hessian @ edges
    scale = np.maximum(np.max(np.abs(bend), axis=(-2, -1)), np.finfo(float).tiny)
    step, determinant = _solved(bend / scale[:, np.newaxis, np.newaxis], -slope / scale[:, np.newaxis])
    settled = np.max(np.abs(step), axis=-1) < 1e-9
    for k in map(int, np.flatnonzero(np.abs(determinant) < _FLAT)):
        values, vectors = np.linalg.eigh(bend[k] / scale[k])
        along, flat = slope[k] / scale[k] @ vectors, np.abs(values) <= _FLAT
        step[k] = vectors @ np.where(flat, 0.0, -along / np.where(flat, 1.0, values))
        settled[k] = np.max(np.abs(step[k])) < 1e-9 and not np.any(flat & (np.abs(along) > 1e-6))
    return step, settled, energy


def _solved(matrices: Floats, right: Floats) -> tuple[Floats, Floats]:
    """Solutions of symmetric systems (n, 3, 3) by their adjugates, and the determinants."""
    a, b, c = matrices[:, 0], matrices[:, 1], matrices[:, 2]
    adjugate = np.stack([np.cross(b, c), np.cross(c, a), np.cross(a, b)], axis=1)
    determinant = np.einsum("ni,ni->n", a, adjugate[:, 0])
    safe = np.where(np.abs(determinant) > 0.0, determinant, 1.0)
    return np.einsum("nji,nj->ni", adjugate, right) / safe[:, np.newaxis], determinant


def _refined(
    potential: Potential, searches: Sequence[tuple[Floats, Floats]], charts: Sequence[Chart]
) -> list[StationaryPoint]:
    """What Newton's method reaches from starts, in units of their cells; what strays far or takes long is dropped.

    Each of the first searches belongs to the chart of the same place; in it, starts that head for one place count once.
    """
    starts = np.concatenate([np.zeros((0, 3)), *(points for points, _ in searches)])
    edges = np.concatenate([np.zeros((0, 3, 3)), *(cells for _, cells in searches)])
    origin = np.repeat(np.arange(len(searches)), np.array([len(points) for points, _ in searches], dtype=np.int64))
    r, alive = starts.copy(), np.arange(len(starts))
    units = np.linalg.inv(edges) if len(starts) else edges
    done: list[tuple[Floats, float, int]] = []
    for count in range(_STEPS):
        if 0 < count < 5:
            alive = _spread_out(charts, origin[alive], r[alive], alive, _TOGETHER**count)
        if not len(alive):
            break
        step, settled, energy = _newton(potential, r[alive], edges[alive])
        last = np.einsum("nij,nj->ni", edges[alive], step)
        for k in map(int, np.flatnonzero(settled)):
            place = r[alive[k]] + last[k]
            away = (place - np.array([other for other, _, _ in done]).reshape(-1, 3)) @ units[alive[k]].T
            if np.all(np.any(np.abs(away) > 1e-6, axis=-1)):
                done.append((place, float(energy[k]), int(alive[k])))
        length = np.linalg.norm(step, axis=-1, keepdims=True)
        step *= np.minimum(1.0, 1.0 / np.maximum(length, 1e-300))
        r[alive] += np.einsum("nij,nj->ni", edges[alive], step)
        away = np.linalg.norm(np.einsum("nij,nj->ni", units[alive], r[alive] - starts[alive]), axis=-1)
        going = (away < _STRAY) & (length[:, 0] < (_SLOW if count >= _PATIENCE else np.inf))
        alive = alive[~settled & going]
    found = []
    for position, energy_there, k in done:
        curvature = potential.hessian(position)[2]
        values = np.linalg.eigvalsh(edges[k].T @ curvature @ edges[k])
        falling = int(np.sum(values < -_FLAT * np.max(np.abs(values))))
        found.append(StationaryPoint(position=position, energy=energy_there, falling=falling, curvature=curvature))
    return found
