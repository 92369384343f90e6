"""The basin of a surveyed potential, place by place: rays from its minimum as far as they serve, cells beyond."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import Any

import numpy as np

from physics.checks import Floats
from physics.traps.boundary import Exit
from physics.traps.charts import Chart, charts_of
from physics.traps.counting import Region, parts_of, region_of
from physics.traps.escape import Basin
from physics.traps.landscape import Landscape, Mask
from physics.traps.potential import Potential
from physics.traps.rays import Shape, ray_places, ray_volumes, shape_of
from physics.traps.volumes import OPEN_SPACE_SHARE
from physics.traps.wells import THERMAL, Places

_NEAR = 1.2
"""Energy over the depth up to which it is told whether a place belongs to the region."""


@dataclass(frozen=True, kw_only=True, eq=False)
class SurveyedWell:
    """A basin of a potential.

    Attributes
    ----------
    potential : Potential
    basin : Basin. Its minimum and its depth.
    wall : float. [m] Distance from the coils' centre at which atoms are lost.
    """

    potential: Potential
    basin: Basin
    wall: float

    @classmethod
    def of(cls, landscape: Landscape, basin: Basin) -> SurveyedWell:
        """Without the charts, which take megabytes; they are made again when they are needed."""
        # What is known of the light is for those who read about it.
        return cls(potential=replace(landscape.potential, lights={}), basin=basin, wall=landscape.wall)

    def __getstate__(self) -> dict[str, Any]:
        """The trap alone: what was worked out is larger, and soon made again."""
        return {field.name: getattr(self, field.name) for field in fields(self)}

    @property
    def minimum(self) -> Floats:
        return self.basin.minimum.position

    def energy(self, displacements: Floats) -> Floats:
        r = self.minimum + displacements
        found = self.potential.energy(r) - self.basin.minimum.energy
        near = found < _NEAR * self.basin.depth
        near[near] = self._holds(r[near])
        return np.where(near, found, np.inf)

    def places(self, depth: float, kT: float) -> Places:
        top = min(depth, THERMAL * kT)
        low = min(top, self._limit)
        parts: list[tuple[Floats, Floats, Floats, Floats]] = []
        if low > 0.0:
            assert self._shape is not None
            displacements, volumes = ray_places(self.potential, self.basin.minimum, self._shape, low)
            energies = self.potential.energy(self.minimum + displacements) - self.basin.minimum.energy
            parts.append((displacements, energies, np.zeros(len(volumes)), volumes))
        if low < top:
            height = self._counted[1]
            # A part counts where its middle is.
            these = (height >= low) & (height < top)
            away, height, lift, room = (values[these] for values in self._counted)
            parts.append((away, height, lift, room))
        displacements, energies, lifts, volumes = (np.concatenate(values) for values in zip(*parts, strict=True))
        return Places(displacements=displacements, energies=energies, lifts=lifts, volumes=volumes, exact_to=low)

    @cached_property
    def _shape(self) -> Shape | None:
        return shape_of(self.basin.minimum)

    @cached_property
    def _top(self) -> float:
        """Energy up to which the region has an end. [J]"""
        return self.basin.depth * (OPEN_SPACE_SHARE if self.basin.escape.kind is Exit.OPEN_SPACE else 1.0)

    @cached_property
    def _inner(self) -> tuple[float, ...]:
        """Energies of the passes to further minima. [J]"""
        return tuple(energy - self.basin.minimum.energy for energy in self.basin.inner_passes)

    @cached_property
    def _limit(self) -> float:
        """Energy up to which every ray from the minimum leaves the region once. [J]"""
        if self._shape is None:
            return 0.0
        energies: Floats = min([self._top, *self._inner]) * np.arange(1.0, 65.0) / 64.0
        return ray_volumes(self.potential, self.basin.minimum, self._shape, energies).limit

    @cached_property
    def _region(self) -> Region:
        landscape = Landscape(potential=self.potential, wall=self.wall)
        return region_of(landscape, self.minimum, self.basin.minimum.energy, self._top)

    @cached_property
    def _cells(self) -> tuple[tuple[Chart, Mask], ...]:
        """Charts that find the cell of a place, and which cells belong to the region."""
        landscape = self._region.landscape
        charts = charts_of(self.potential, self.wall, landscape.fineness)
        landscape.forget()
        return tuple(zip(charts, (mask.ravel() for mask in self._region.masks), strict=True))

    @cached_property
    def _counted(self) -> tuple[Floats, Floats, Floats, Floats]:
        """Displacements, energies, lifts and volumes of all parts of the region's cells."""
        region, minimum = self._region, self.basin.minimum
        parts = list(parts_of(region, self.minimum, minimum.energy, self._top, self._inner))
        region.landscape.forget()
        energies = np.concatenate([part.energies for part in parts])
        displacements = np.concatenate([part.points for part in parts]) - self.minimum
        lifts = energies - (self.potential.energy(self.minimum + displacements) - minimum.energy)
        return displacements, energies, lifts, np.concatenate([part.volumes for part in parts])

    def _holds(self, points: Floats) -> Mask:
        """Whether places (n, 3) lie in cells of the region."""
        found = np.zeros(len(points), dtype=bool)
        for chart, mask in self._cells:
            left = np.flatnonzero(~found)
            index, inside = chart.cells_of(points[left])
            found[left] = inside & mask[index]
        return found
