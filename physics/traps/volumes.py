"""The volume curve of a surveyed trap: rays from the minimum as far as they serve, counted cells beyond."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.arms import crossing_beams, in_arms
from physics.traps.boundary import Exit
from physics.traps.counting import counted_volumes
from physics.traps.escape import Basin
from physics.traps.landscape import Landscape
from physics.traps.rays import Shape, ray_volumes, shape_of
from physics.traps.volume_curve import VolumeCurve

OPEN_SPACE_SHARE = 0.95
"""Share of the depth at which the curve ends where free space lies at the depth: there the volume is infinite."""

_LOW, _HIGH = 32, 128

_CLEAR = 0.9
"""Share of the height of the lowest inner pass up to which cells tell what is on this side of it."""


def volume_curve_of(landscape: Landscape, basin: Basin) -> VolumeCurve:
    """W(U) of a basin up to its depth; up to `OPEN_SPACE_SHARE` of it where the way out is free space."""
    potential, minimum = landscape.potential, basin.minimum
    top = basin.depth * (OPEN_SPACE_SHARE if basin.escape.kind is Exit.OPEN_SPACE else 1.0)
    energies = top * np.concatenate([np.geomspace(1e-4, 1.0 / _HIGH, _LOW)[:-1], np.arange(1, _HIGH + 1) / _HIGH])
    shape = shape_of(minimum)
    inner = [energy - minimum.energy for energy in basin.inner_passes]
    volumes = np.zeros(0)
    if shape is not None:
        volumes = ray_volumes(potential, minimum, shape, energies[energies <= min([top, *inner])]).volumes
    crossing = crossing_beams(potential, minimum)
    shares = np.zeros(len(energies))
    if len(volumes) < len(energies):
        counted = counted_volumes(
            landscape, minimum.position, minimum.energy, energies, inner, lambda r: in_arms(potential, crossing, r)
        )
        # Where rays end, counting goes on from their volume, which is the better one. Near an inner pass cells take
        # some of what lies beyond it for this side, which is not to be made up for above.
        done = len(volumes)
        sure = min([done, *(int(np.sum(energies <= _CLEAR * energy)) for energy in inner)])
        base = volumes[sure - 1] - counted.volumes[sure - 1] if sure else 0.0
        counted.marked[sure:done] = counted.marked[sure - 1] if sure else 0.0
        volumes = np.concatenate([volumes, np.maximum(base + counted.volumes[done:], volumes[-1] if done else 0.0)])
        with np.errstate(divide="ignore", invalid="ignore"):
            shares = np.nan_to_num(np.clip(counted.marked / volumes, 0.0, 1.0))
    kept = _rising(volumes)
    coefficient, power = _start(shape, energies[kept][0], volumes[kept][0])
    return VolumeCurve(
        mass=potential.mass,
        energies=energies[kept],
        volumes=volumes[kept],
        arm_shares=shares[kept],
        coefficient=coefficient,
        power=power,
    )


def _rising(volumes: Floats) -> NDArray[np.intp]:
    """Indices of what is positive and does not fall back."""
    highest = np.maximum.accumulate(volumes)
    return np.flatnonzero((volumes > 0.0) & (volumes >= highest))


def _start(shape: Shape | None, energy: float, volume: float) -> tuple[float, float]:
    """Coefficient and power of the curve's start; a ring or a line of minima starts with the first power."""
    if shape is not None:
        return shape.coefficient, shape.power
    return volume / energy, 1.0
