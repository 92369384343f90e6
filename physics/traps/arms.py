"""The arms of a crossing: where its beams, one by one, hold atoms that have left the others.

Atoms are in an arm where at most one of the beams that cross at the minimum still has a hundredth of the intensity on
its axis. The arm opens at the energy of the highest place of its floor on the way there.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.traps.potential import Potential
from physics.traps.stationary import StationaryPoint

CROSSING_RADIUS = float(np.sqrt(0.5 * np.log(100.0)))
"""Scaled distance from a beam's axis at which its intensity is a hundredth of that on the axis."""

_PLACES = 32
_STEPS = 25


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
    across = beam.frame[:2]
    width = float(np.min(beam.waists))
    for _ in range(_STEPS):
        energy, gradient, hessian = potential.hessian(r)
        values, vectors = np.linalg.eigh(across @ hessian @ across.T)
        slope = np.einsum("nki,nk->ni", vectors, gradient @ across.T)
        step = -slope / np.maximum(np.abs(values), np.finfo(float).tiny)
        step *= np.minimum(1.0, 0.2 * width / np.maximum(np.linalg.norm(step, axis=-1, keepdims=True), 1e-300))
        r = r + np.einsum("nij,nj->ni", vectors, step) @ across
        if np.max(np.abs(step)) < 1e-9 * width:
            break
    energy = potential.energy(r)
    # An arm without a floor lets its atoms fall: nothing is held there.
    if np.any(values <= 0.0) or np.any(beam.scaled_radius(r) > CROSSING_RADIUS):
        return None
    highest = int(np.argmax(energy))
    return Arm(beam=beam.name, direction=axis, energy=float(energy[highest]) - minimum.energy, position=r[highest])
