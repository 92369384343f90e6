"""The potential on the cells of its charts, and which cells can be reached from a place below a given energy."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.charts import Chart, charts_of
from physics.traps.floors import floor_along
from physics.traps.potential import Potential

Mask = NDArray[np.bool_]


@dataclass(frozen=True, kw_only=True, eq=False)
class Reach:
    """Cells that are reached, one mask a chart, and whether one of them lies at the edge of everything."""

    masks: tuple[Mask, ...]
    leaks: bool


@dataclass(frozen=True, kw_only=True, eq=False)
class Landscape:
    """A potential with its charts.

    Attributes
    ----------
    potential : Potential
    wall : float. [m] Distance from the coils' centre at which atoms are lost.
    fineness : float. How many times smaller than usual the cells are.
    """

    potential: Potential
    wall: float
    fineness: float = 1.0

    @cached_property
    def charts(self) -> tuple[Chart, ...]:
        """Charts that cover where atoms can be held."""
        return charts_of(self.potential, self.wall, self.fineness)

    @cached_property
    def _values(self) -> tuple[tuple[Floats, Floats], ...]:
        return tuple(self.potential.gradient(chart.cell_points) for chart in self.charts)

    @property
    def energies(self) -> tuple[Floats, ...]:
        """Energy at the middles of the cells, one array a chart. [J]"""
        return tuple(energy for energy, _ in self._values)

    @property
    def gradients(self) -> tuple[Floats, ...]:
        """(*cells, 3) Gradient there, one array a chart. [N]"""
        return tuple(gradient for _, gradient in self._values)

    @cached_property
    def _links(self) -> tuple[tuple[int, int, NDArray[np.int64], NDArray[np.int64]], ...]:
        """Pairs of cells of two charts, the middle of the first inside the second: (chart, chart, cells, cells)."""
        links = []
        for a, first in enumerate(self.charts):
            for b, second in enumerate(self.charts):
                if a != b:
                    index, inside = second.cells_of(first.cell_points)
                    links.append((a, b, np.flatnonzero(inside), index[inside]))
        return tuple(links)

    @cached_property
    def _edges(self) -> tuple[Mask, ...]:
        """Cells at the end of a chart whose middle lies in no other chart."""
        edges = []
        for a, chart in enumerate(self.charts):
            edge = np.ones(chart.shape, dtype=bool)
            edge[1:-1, 1:-1, 1:-1] = False
            flat = edge.ravel()
            for first, _, cells, _ in self._links:
                if first == a:
                    flat[cells] = False
            edges.append(edge)
        return tuple(edges)

    @cached_property
    def _floors(self) -> tuple[tuple[int, NDArray[np.int64], Floats], ...]:
        """Of each chart of an attractive beam: its index, the cells of the floor of its arms, and energies [J] below
        which they are not reached. An arm may be thinner than a cell, whose middle then tells nothing of it."""
        floors = []
        for k, chart in enumerate(self.charts):
            if chart.beam not in self.potential.attractive:
                continue
            along = chart.stretches[2].centres
            starts = chart.points(np.stack([np.zeros(len(along)), np.zeros(len(along)), along], axis=-1))
            floor = floor_along(self.potential, chart.beam, starts)
            index, inside = chart.cells_of(floor.positions)
            here = inside & floor.held & (index % len(along) == np.arange(len(along)))
            # From one cell to the next the floor may also move across: then both ways around the corner are open.
            a, b = np.flatnonzero(here[:-1] & here[1:]), np.flatnonzero(here[:-1] & here[1:]) + 1
            corners = np.concatenate([index[a] + 1, index[b] - 1])
            higher = np.maximum(floor.energies[a], floor.energies[b])
            cells = np.concatenate([index[here], corners])
            floors.append((k, cells, np.concatenate([floor.energies[here], higher, higher])))
        return tuple(floors)

    def forget(self) -> None:
        """Let go of the charts and what was worked out on them, a few megabytes; they are made again when asked for."""
        for name in ("charts", "_values", "_links", "_edges", "_floors"):
            vars(self).pop(name, None)

    def reach(self, start: Floats, level: float) -> Reach:
        """The cells below an energy [J] that hang together with the one that holds a point (3,).

        A cell is below where its middle is, or a place of the floor of a beam's arm in it; the cell of the start always
        counts.
        """
        able = [energy < level for energy in self.energies]
        for k, cells, energies in self._floors:
            able[k].ravel()[cells[energies < level]] = True
        reached = [np.zeros(chart.shape, dtype=bool) for chart in self.charts]
        for chart, ok, mask in zip(self.charts, able, reached, strict=True):
            index, inside = chart.cells_of(start)
            if inside:
                ok.ravel()[index] = mask.ravel()[index] = True
        changed = [bool(np.any(mask)) for mask in reached]
        while any(changed):
            for k, mask in enumerate(reached):
                if changed[k]:
                    _spread(mask, able[k])
            changed = [False] * len(reached)
            for a, b, cells, others in self._links:
                # A link carries both ways.
                for k, here, m, there in ((a, cells, b, others), (b, others, a, cells)):
                    into = there[reached[k].ravel()[here]]
                    new = into[able[m].ravel()[into] & ~reached[m].ravel()[into]]
                    if len(new):
                        reached[m].ravel()[new] = True
                        changed[m] = True
        leaks = any(bool(np.any(mask & edge)) for mask, edge in zip(reached, self._edges, strict=True))
        return Reach(masks=tuple(reached), leaks=leaks)


def _spread(mask: Mask, able: Mask) -> None:
    """Grow a mask, in place, over all able cells that share a face with it, and so on."""
    count = -1
    while count != (count := int(np.count_nonzero(mask))):
        for axis in range(3):
            here, ok = np.moveaxis(mask, axis, 0), np.moveaxis(able, axis, 0)
            for k in range(1, len(here)):
                here[k] |= here[k - 1] & ok[k]
            for k in range(len(here) - 2, -1, -1):
                here[k] |= here[k + 1] & ok[k]


def widened(masks: Sequence[Mask]) -> tuple[Mask, ...]:
    """Masks with the cells around theirs added, corners included."""
    wide = []
    for mask in masks:
        grown = mask.copy()
        for axis in range(3):
            here = np.moveaxis(grown, axis, 0)
            before = here.copy()
            here[1:] |= before[:-1]
            here[:-1] |= before[1:]
        wide.append(grown)
    return tuple(wide)
