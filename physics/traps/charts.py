"""Coordinates that suit a trap: tubes that widen with each beam, and a box around coils.

A chart maps the unit cube onto a part of space. Its cells are small where something happens (around the crossing with
other beams, across the waist) and grow away from there, so that a few ten thousand of them cover arms of many
millimetres and cores of a few micrometres alike.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.beam import GaussianBeam
from physics.traps.potential import Potential

ARM_REACH = 100.0
"""Rayleigh lengths over which the arm of a beam is followed; the light there is down to 1e-4."""

_ACROSS = 3.5
"""Local beam radii over which a tube reaches: the light there is down to 2e-11."""

_BEYOND_WALL = 1.15
"""Half edge of a box over the distance of the wall, which lies inside it."""

_FINE = 0.25
_COARSE = 0.35
"""Cell size over the distance from the nearest place where something happens, in tubes and in a box."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Stretch:
    """A rising, piecewise linear map from [0, 1] to a coordinate, through the pairs of `parameter` and `position`."""

    parameter: Floats
    position: Floats
    cells: int

    @classmethod
    def around(cls, low: float, high: float, places: Sequence[tuple[float, float]], size: float) -> Stretch:
        """From low to high, with cells of `size` times the distance from the nearest place (centre, scale), and of
        size times scale at its centre."""
        steps = np.linspace(-1.0, 1.0, 401)
        knots = [np.array([low, high])]
        for centre, scale in places:
            reach = np.arcsinh(max(high - centre, centre - low, scale) / scale)
            knots.append(centre + scale * np.sinh(reach * steps))
        x = np.unique(np.clip(np.concatenate(knots), low, high))
        density = np.max([1.0 / np.hypot(scale, x - centre) for centre, scale in places], axis=0)
        t = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]) * np.diff(x))])
        return cls(parameter=t / t[-1], position=x, cells=max(4, int(np.ceil(t[-1] / size))))

    def at(self, parameter: Floats) -> Floats:
        """Coordinate of parameters in [0, 1]."""
        return np.interp(parameter, self.parameter, self.position)

    def of(self, position: Floats) -> Floats:
        """Parameter of coordinates; below 0 or above 1 outside."""
        t = np.interp(position, self.position, self.parameter)
        return np.where(position < self.position[0], -1.0, np.where(position > self.position[-1], 2.0, t))

    @cached_property
    def centres(self) -> Floats:
        """(cells,) Coordinates half way through the cells by the parameter."""
        return self.at((np.arange(self.cells) + 0.5) / self.cells)

    @cached_property
    def _ends(self) -> Floats:
        return self.at(np.arange(self.cells + 1) / self.cells)

    @cached_property
    def sizes(self) -> Floats:
        """(cells,) Lengths of the cells."""
        return np.diff(self._ends)

    @cached_property
    def middles(self) -> Floats:
        """(cells,) Coordinates half way between the ends of the cells."""
        middles: Floats = 0.5 * (self._ends[1:] + self._ends[:-1])
        return middles


@dataclass(frozen=True, kw_only=True, eq=False)
class Chart:
    """A tube around an axis, or a box where the Rayleigh lengths are infinite.

    Attributes
    ----------
    origin : (3,). [m]
    frame : (3, 3) rows: two axes across, the axis.
    waists : (2,). [m] Units of the coordinates across, at the origin.
    rayleigh_lengths : (2,). [m] Over which they widen.
    stretches : of the coordinates (across, across, along); those across in local widths, that along in metres.
    beam : index of the beam among those of the potential; None for a box.
    """

    origin: Floats
    frame: Floats
    waists: Floats
    rayleigh_lengths: Floats
    stretches: tuple[Stretch, Stretch, Stretch]
    beam: int | None = None

    @property
    def shape(self) -> tuple[int, int, int]:
        """Cells along the three coordinates."""
        a, b, c = (stretch.cells for stretch in self.stretches)
        return a, b, c

    def widths(self, along: Floats) -> Floats:
        """(..., 2) Units of the coordinates across at distances along the axis. [m]"""
        widths: Floats = self.waists * np.sqrt(1.0 + (along[..., np.newaxis] / self.rayleigh_lengths) ** 2)
        return widths

    def points(self, coordinates: Floats) -> Floats:
        """(..., 3) Points in space of coordinates (..., 3). [m]"""
        local = np.array(coordinates, dtype=np.float64)
        local[..., :2] *= self.widths(coordinates[..., 2])
        points: Floats = self.origin + local @ self.frame
        return points

    def coordinates(self, points: Floats) -> Floats:
        """(..., 3) Coordinates of points in space (..., 3)."""
        local: Floats = (points - self.origin) @ self.frame.T
        local[..., :2] /= self.widths(local[..., 2])
        return local

    def cell_coordinates(self, points: Floats) -> Floats:
        """(..., 3) Coordinates of points counted in cells; below 0 or above their number outside."""
        x = self.coordinates(points)
        return np.stack([s.of(x[..., k]) * s.cells for k, s in enumerate(self.stretches)], axis=-1)

    def cells_of(self, points: Floats) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
        """Flat index of the cell that holds each point (..., 3), and whether one does."""
        x = self.cell_coordinates(points)
        index = np.zeros(x.shape[:-1], dtype=np.int64)
        inside = np.all((x >= 0.0) & (x <= self.shape), axis=-1)
        for k, cells in enumerate(self.shape):
            index = index * cells + np.clip(x[..., k].astype(np.int64), 0, cells - 1)
        return index, inside

    def tangents(self, coordinates: Floats) -> Floats:
        """(..., 3, 3) Rows: change of the point in space by each of the coordinates (..., 3)."""
        along = coordinates[..., 2]
        widths = self.widths(along)
        local = np.zeros((*coordinates.shape, 3))
        local[..., 0, 0], local[..., 1, 1], local[..., 2, 2] = widths[..., 0], widths[..., 1], 1.0
        widening = self.waists**2 * along[..., np.newaxis] / self.rayleigh_lengths**2 / widths
        local[..., 2, :2] = coordinates[..., :2] * widening
        tangents: Floats = local @ self.frame
        return tangents

    def contains(self, points: Floats) -> NDArray[np.bool_]:
        """Whether points (..., 3) lie in the chart."""
        return self.cells_of(points)[1]

    @cached_property
    def cell_points(self) -> Floats:
        """(*shape, 3) Middles of the cells. [m]"""
        mesh = np.meshgrid(*(stretch.centres for stretch in self.stretches), indexing="ij")
        return self.points(np.stack(mesh, axis=-1))

    def cell_edges(self, indices: NDArray[np.int64]) -> Floats:
        """(n, 3, 3) Columns: edges of cells given by (n, 3) indices, without their slant. [m]"""
        lengths = np.stack([s.sizes[indices[:, k]] for k, s in enumerate(self.stretches)], axis=-1)
        lengths[:, :2] *= self.widths(self.stretches[2].centres[indices[:, 2]])
        edges: Floats = self.frame.T[np.newaxis] * lengths[:, np.newaxis, :]
        return edges

    @cached_property
    def cell_volumes(self) -> Floats:
        """(*shape,) Volumes of the cells. [m^3]"""
        a, b, c = (stretch.sizes for stretch in self.stretches)
        areas = np.prod(self.widths(self.stretches[2].centres), axis=-1)
        volumes: Floats = a[:, np.newaxis, np.newaxis] * b[:, np.newaxis] * (c * areas)
        return volumes


def charts_of(potential: Potential, wall: float, fineness: float = 1.0) -> tuple[Chart, ...]:
    """Charts that together cover where atoms can be held: one for each beam, and a box where a field has a shape.

    Parameters
    ----------
    potential : Potential
    wall : float. [m] Distance from the coils' centre at which atoms are lost, where a field has a shape.
    fineness : float. How many times smaller than usual the cells are.
    """
    charts = [_tube(potential, index, wall, _FINE / fineness) for index in range(len(potential.beams))]
    if potential.shaped:
        charts.append(_box(potential, wall, _COARSE / fineness))
    return tuple(charts)


def _tube(potential: Potential, index: int, wall: float, size: float) -> Chart:
    beam = potential.beams[index]
    longest = float(np.max(beam.rayleigh_lengths))
    places = [(0.0, 0.7 * float(np.min(beam.rayleigh_lengths)))]
    for other in potential.beams:
        crossing = None if other is beam else _crossing(beam, other)
        if crossing is not None:
            places.append(crossing)
    low, high = -ARM_REACH * longest, ARM_REACH * longest
    if potential.shaped and potential.coils is not None:
        at = float(beam.local(np.asarray(potential.coils.centre))[2])
        places.append((at, 2.0 * float(np.min(beam.waists))))
        low, high = max(low, at - wall), min(high, at + wall)
    places = [(centre, scale) for centre, scale in places if low < centre < high]
    across = Stretch.around(-_ACROSS, _ACROSS, [(0.0, 0.8)], size)
    return Chart(
        origin=np.asarray(beam.focus),
        frame=beam.frame,
        waists=np.asarray(beam.waists),
        rayleigh_lengths=beam.rayleigh_lengths,
        stretches=(across, across, Stretch.around(low, high, places, size)),
        beam=index,
    )


def _crossing(beam: GaussianBeam, other: GaussianBeam) -> tuple[float, float] | None:
    """Where along a beam another one comes closest and over what length it matters; None where it passes far away."""
    n, m = np.asarray(beam.direction), np.asarray(other.direction)
    apart = np.asarray(other.focus) - np.asarray(beam.focus)
    sine_squared = 1.0 - float(n @ m) ** 2
    width = float(np.min(other.waists))
    if sine_squared < 1e-6:
        # Parallel: the other one's focus is where it matters.
        return float(apart @ n), float(np.min(other.rayleigh_lengths))
    along = (float(apart @ n) - float(apart @ m) * float(n @ m)) / sine_squared
    nearest = np.asarray(beam.focus) + along * n
    reach = float(beam.widths(np.asarray(along))[0].max()) / float(np.max(other.widths(other.local(nearest)[2])))
    if float(other.scaled_radius(nearest)) > 3.0 * (1.0 + reach):
        return None
    return along, width / float(np.sqrt(sine_squared))


def _box(potential: Potential, wall: float, size: float) -> Chart:
    coils = potential.coils
    assert coils is not None
    scales = [0.002 * wall, *(float(np.min(beam.waists)) for beam in potential.beams)]
    if coils.bend > 0.0:
        scales.append(coils.bend)
    places = [(0.0, float(np.clip(min(scales), 1e-4 * wall, 0.1 * wall)))]
    stretch = Stretch.around(-_BEYOND_WALL * wall, _BEYOND_WALL * wall, places, size)
    return Chart(
        origin=np.asarray(coils.centre),
        frame=coils.frame,
        waists=np.ones(2),
        rayleigh_lengths=np.full(2, np.inf),
        stretches=(stretch, stretch, stretch),
    )
