"""Volume of the connected region below an energy, cell by cell of the charts, where rays no longer serve.

Each cell that the region reaches is cut in parts, smaller ones where there are few cells, and the energy expanded about
the middle of each part. Places that lie in cells of several charts are shared among them in proportion to how small
their cells are there, as importance sampling from several distributions does it [1]; so overlapping charts need no
seam.

Reference
---------
[1] E. Veach, L. J. Guibas, Proc. SIGGRAPH 1995, p. 419: the balance heuristic.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.landscape import Landscape, Mask, widened

_BACK_OFF = (0.995, 0.985, 0.97, 0.95)
_FURTHER = (0.9, 0.8, 0.7, 0.6, 0.5, 0.4, 0.3, 0.2, 0.1)
"""Shares of the depth at which the region is looked for: the highest that does not reach the outside over a barrier
that the cells show too low. Before going further down, cells of half the size are tried."""

_BEFORE = 0.97
"""Share of the height of an inner pass just below which the region is still apart from what is beyond the pass."""

_CUTS = ((2_000, (4, 4, 2)), (15_000, (2, 2, 2)))
"""Into how many parts cells are cut, those across first, where there are fewer of them; more are not cut any more."""


@dataclass(frozen=True, kw_only=True, eq=False)
class CountedVolumes:
    """Volumes of the region [m^3] below energies, in all and where a caller's question is answered by yes.

    `sound` is the share of the depth up to which the cells tell the region from the outside.
    """

    volumes: Floats
    marked: Floats
    sound: float


def counted_volumes(
    landscape: Landscape,
    start: Floats,
    bottom: float,
    energies: Floats,
    inner_passes: Sequence[float],
    mark: Callable[[Floats], NDArray[np.bool_]],
) -> CountedVolumes:
    """Count the region around a minimum.

    Parameters
    ----------
    start : (3,). [m] The minimum.
    bottom : float. [J] Its energy.
    energies : (n,). [J] Above the minimum, rising, the last one up to where the region is one.
    inner_passes : [J] Energies above the minimum at which other minima join the region.
    mark : answers a question about points (n, 3).
    """
    region = region_of(landscape, start, bottom, float(energies[-1]))
    volumes, marked = np.zeros(len(energies)), np.zeros(len(energies))
    for parts in parts_of(region, start, bottom, float(energies[-1]), inner_passes):
        asked = mark(parts.points)
        values = parts.energies, parts.half_ranges, parts.volumes
        volumes += _spread(values, energies)
        marked += _spread((values[0][asked], values[1][asked], values[2][asked]), energies)
    return CountedVolumes(volumes=volumes, marked=marked, sound=region.sound)


@dataclass(frozen=True, kw_only=True, eq=False)
class Region:
    """The cells of a landscape's charts, one mask each, that hold the region around a minimum below an energy, with the
    cells around them; and the share of that energy up to which they tell the region from the outside."""

    landscape: Landscape
    masks: tuple[Mask, ...]
    sound: float


@dataclass(frozen=True, kw_only=True, eq=False)
class Parts:
    """Parts of cells, in the shape of `energies`: middles (..., 3) [m], mean energies [J], half of what the energy
    changes along each edge in rising order (..., 3) [J], volumes [m^3]."""

    points: Floats
    energies: Floats
    half_ranges: Floats
    volumes: Floats


def parts_of(
    region: Region, start: Floats, bottom: float, top: float, inner_passes: Sequence[float]
) -> Iterator[Parts]:
    """The region chart by chart, in parts whose energies count from the bottom; together they hold each place once.

    Low places beyond an inner pass have the energy of the pass: below it they are not reached.
    """
    landscape, masks = region.landscape, region.masks
    late = [_beyond(landscape, start, bottom + _BEFORE * energy) for energy in inner_passes]
    for k, mask in enumerate(masks):
        cells = np.argwhere(mask)
        if not len(cells):
            continue
        cuts = next((cuts for most, cuts in _CUTS if len(cells) < most), None)
        parts = _wholes(landscape, k, cells) if cuts is None else _parts(landscape, k, cells, cuts)
        height, half = parts.energies - bottom, parts.half_ranges
        for energy, beyond in zip(inner_passes, late, strict=True):
            apart = beyond[k][tuple(cells.T)][:, np.newaxis] & (height < energy)
            height, half = np.where(apart, energy, height), np.where(apart[..., np.newaxis], 0.0, half)
        near = height - np.sum(half, axis=-1) < top
        r = parts.points[near]
        share = _share(landscape, masks, k, np.broadcast_to(cells[:, np.newaxis], (*near.shape, 3))[near], r)
        yield Parts(points=r, energies=height[near], half_ranges=half[near], volumes=parts.volumes[near] * share)


def _spread(parts: tuple[Floats, Floats, Floats], energies: Floats) -> Floats:
    """Volume below energies of parts, given by their mean energy (n,), half ranges (n, 3) and volumes (n,).

    Along the steepest edge, the last, the energy is spread evenly; along the others two points with the variance of an
    even distribution stand for it.
    """
    height, half, volume = parts
    offsets = np.array([[-1.0, -1.0], [-1.0, 1.0], [1.0, -1.0], [1.0, 1.0]]) / np.sqrt(3.0)
    middle = (height[:, np.newaxis] + half[:, :2] @ offsets.T).ravel()
    width = np.repeat(np.maximum(half[:, 2], 1e-5 * energies[-1]), len(offsets))
    slope = np.repeat(volume, len(offsets)) / len(offsets) / (2.0 * width)
    below = np.zeros(len(energies))
    for sign, end in ((1.0, middle - width), (-1.0, middle + width)):
        level = np.searchsorted(energies, end)
        count = len(energies) + 1
        rate = np.cumsum(np.bincount(level, slope, count))[:-1]
        base = np.cumsum(np.bincount(level, slope * end, count))[:-1]
        below += sign * (energies * rate - base)
    return below


def _parts(landscape: Landscape, k: int, cells: NDArray[np.int64], cuts: tuple[int, int, int]) -> Parts:
    """Cells (n, 3), each cut into so many along its edges."""
    chart = landscape.charts[k]
    place = np.indices(cuts).reshape(3, -1)
    x = np.empty((len(cells), place.shape[1], 3))
    size = np.empty(x.shape)
    for axis, stretch in enumerate(chart.stretches):
        n = stretch.cells * cuts[axis]
        edges = stretch.at(np.arange(n + 1) / n)
        part = cuts[axis] * cells[:, axis, np.newaxis] + place[axis]
        x[..., axis] = 0.5 * (edges[part] + edges[part + 1])
        size[..., axis] = edges[part + 1] - edges[part]
    points = chart.points(x)
    energy, gradient = landscape.potential.gradient(points)
    slope = np.einsum("npck,npk->npc", chart.tangents(x), gradient)
    # The curvature, from the slopes of the parts at both ends; over a part its mean is a shift.
    shift = np.zeros(energy.shape)
    for axis in range(3):
        up, down = place[axis] == cuts[axis] - 1, place[axis] == 0
        apart = (x[:, up, axis] - x[:, down, axis]).mean(axis=1)
        bend = (slope[:, up, axis] - slope[:, down, axis]).mean(axis=1) / apart
        shift += bend[:, np.newaxis] * size[..., axis] ** 2 / 24.0
    return Parts(
        points=points,
        energies=energy + shift,
        half_ranges=np.sort(0.5 * np.abs(slope * size), axis=-1),
        volumes=np.prod(size, axis=-1) * np.prod(chart.widths(x[..., 2]), axis=-1),
    )


def _wholes(landscape: Landscape, k: int, cells: NDArray[np.int64]) -> Parts:
    """Cells (n, 3) as they are, one part each."""
    chart, chosen = landscape.charts[k], tuple(cells.T)
    x = np.stack(np.meshgrid(*(stretch.centres for stretch in chart.stretches), indexing="ij"), axis=-1)
    slope = np.einsum("...ck,...k->...c", chart.tangents(x), landscape.gradients[k])
    energy = landscape.energies[k][chosen]
    half = np.empty((len(cells), 3))
    for axis, stretch in enumerate(chart.stretches):
        size = stretch.sizes[cells[:, axis]]
        bend = np.gradient(slope[..., axis], stretch.centres, axis=axis)[chosen]
        # The energy is known in the middle by the parameter, which is not that by the coordinate.
        aside = stretch.middles[cells[:, axis]] - stretch.centres[cells[:, axis]]
        energy = energy + slope[..., axis][chosen] * aside + bend * (0.5 * aside**2 + size**2 / 24.0)
        half[:, axis] = 0.5 * np.abs(slope[..., axis][chosen]) * size
    return Parts(
        points=chart.cell_points[chosen][:, np.newaxis],
        energies=energy[:, np.newaxis],
        half_ranges=np.sort(half, axis=-1)[:, np.newaxis],
        volumes=chart.cell_volumes[chosen][:, np.newaxis],
    )


def _share(landscape: Landscape, masks: Sequence[Mask], k: int, cells: NDArray[np.int64], r: Floats) -> Floats:
    """What part of places r (n, 3) in cells (n, 3) a chart counts, where others hold them too."""
    own = 1.0 / landscape.charts[k].cell_volumes[tuple(cells.T)]
    total = own
    for m, other in enumerate(landscape.charts):
        if m != k and np.any(masks[m]):
            # Also where the other chart sees nothing of the region: with smaller cells it knows better.
            index, inside = other.cells_of(r)
            total = total + np.where(inside, 1.0 / other.cell_volumes.ravel()[index], 0.0)
    share: Floats = own / total
    return share


def _beyond(landscape: Landscape, start: Floats, level: float) -> tuple[Mask, ...]:
    """Cells below a level that are not reached, with those around them that are around none that is reached."""
    reached = landscape.reach(start, level).masks
    others = tuple((energy < level) & ~mask for energy, mask in zip(landscape.energies, reached, strict=True))
    around = zip(others, widened(others), widened(reached), strict=True)
    return tuple(other | (wide & ~near) for other, wide, near in around)


def region_of(landscape: Landscape, start: Floats, bottom: float, depth: float) -> Region:
    """The region around a minimum (3,) of energy `bottom` [J], on this landscape or a finer one."""
    finer = replace(landscape, fineness=2.0 * landscape.fineness)
    tries = [(landscape, share) for share in _BACK_OFF] + [(finer, share) for share in (*_BACK_OFF, *_FURTHER)]
    for ground, share in tries:
        reach = ground.reach(start, bottom + share * depth)
        if not reach.leaks:
            return Region(landscape=ground, masks=widened(reach.masks), sound=share)
    return Region(landscape=finer, masks=widened(finer.reach(start, bottom).masks), sound=0.0)
