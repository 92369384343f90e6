"""The arms of a crossing: where its beams, one by one, hold atoms that have left the others.

Atoms are in an arm where at most one of the beams that cross at the minimum still has a hundredth of the intensity on
its axis. The arm opens at the energy of the highest place of its floor on the way there.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.floors import floor_along
from physics.traps.potential import Potential
from physics.traps.stationary import StationaryPoint

CROSSING_RADIUS = float(np.sqrt(0.5 * np.log(100.0)))
"""Scaled distance from a beam's axis at which its intensity is a hundredth of that on the axis."""

_PLACES = 32


@dataclass(frozen=True, kw_only=True, eq=False)
class Arm:
    """The way from a crossing into the arm of a beam.

    Attributes
    ----------
    beam : str. Name of the beam whose arm it is.
    direction : (3,). Unit vector along it, away from the crossing.
    energy : float. [J] Above the minimum, at which it opens.
    position : (3,). [m] Of the highest place of the floor.
    """

    beam: str
    direction: Floats
    energy: float
    position: Floats


def crossing_beams(potential: Potential, minimum: StationaryPoint) -> tuple[int, ...]:
    """Indices of the attractive beams that cross at a minimum; none unless there are two."""
    found = tuple(
        index
        for index in potential.attractive
        if potential.beams[index].scaled_radius(minimum.position) < CROSSING_RADIUS
    )
    return found if len(found) > 1 else ()


def in_arms(potential: Potential, crossing: tuple[int, ...], points: Floats) -> NDArray[np.bool_]:
    """Whether points (..., 3) lie outside of all beams that cross but one."""
    held = np.zeros(points.shape[:-1], dtype=np.int64)
    for index in crossing:
        held += potential.beams[index].scaled_radius(points) < CROSSING_RADIUS
    return (held < 2) & (len(crossing) > 1)


def arms_of(potential: Potential, minimum: StationaryPoint, crossing: tuple[int, ...]) -> tuple[Arm, ...]:
    """The arms that hold atoms, the lowest first; two for each beam at most."""
    found = []
    for index in crossing:
        others = tuple(k for k in crossing if k != index)
        for sign in (-1.0, 1.0):
            arm = _arm(potential, minimum, index, others, sign)
            if arm is not None:
                found.append(arm)
    return tuple(sorted(found, key=lambda arm: arm.energy))


def _arm(
    potential: Potential, minimum: StationaryPoint, index: int, others: tuple[int, ...], sign: float
) -> Arm | None:
    beam = potential.beams[index]
    axis = sign * beam.frame[2]
    start = beam.local(minimum.position)
    reach = float(np.max(beam.rayleigh_lengths))
    distances = reach * np.geomspace(1e-5, 3.0, 400)
    on_axis = np.asarray(beam.focus) + np.outer(start[2] + sign * distances, beam.frame[2])
    outside = np.ones(len(distances), dtype=bool)
    for other in others:
        outside &= potential.beams[other].scaled_radius(on_axis) > CROSSING_RADIUS
    if not np.any(outside):
        return None
    length = float(distances[np.argmax(outside)])
    along = length * (np.arange(_PLACES) + 1.0) / _PLACES
    offset = start[:2] @ beam.frame[:2]
    r = np.asarray(beam.focus) + np.outer(start[2] + sign * along, beam.frame[2]) + offset
    floor = floor_along(potential, index, r)
    # An arm without a floor lets its atoms fall: nothing is held there.
    if not np.all(floor.held) or np.any(beam.scaled_radius(floor.positions) > CROSSING_RADIUS):
        return None
    highest = int(np.argmax(floor.energies))
    return Arm(
        beam=beam.name,
        direction=axis,
        energy=float(floor.energies[highest]) - minimum.energy,
        position=floor.positions[highest],
    )
