"""Passes at an edge: where the radio-frequency knife, the wall or the end of a beam's arm is lowest.

On a surface around the atoms, the places where the potential is least in all directions along the surface, and rises
towards it from inside, are passes like those between two hills: atoms get there over nothing higher.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from enum import Enum

import numpy as np

from physics.checks import Floats
from physics.traps.charts import Chart
from physics.traps.potential import Potential

Surface = Callable[[Floats], tuple[Floats, Floats, Floats]]
"""Height above a surface at points (n, 3), with its gradient and Hessian: negative inside."""

_POLAR, _AROUND = 16, 32
_STEPS = 40
_FLAT = 1e-6
"""Curvature along a surface over that of the potential and the surface below which the way along it is level."""

_LONGEST = 1e150
"""[m] What can be squared: where nearly all is flat, a step of Newton's method has no bounds."""

_ALIKE = 4
"""Places of one energy that are kept; where the edge is round about an axis, all of a circle are alike."""


class Exit(Enum):
    """What atoms pass when they leave."""

    PASS = "a pass of the potential"
    KNIFE = "the radio-frequency knife"
    WALL = "the wall"
    ARM_END = "the end of a beam's arm"
    OPEN_SPACE = "free space around the light"


@dataclass(frozen=True, kw_only=True, eq=False)
class EdgePass:
    """The lowest place of an edge, its energy [J], and the direction across, outwards."""

    kind: Exit
    position: Floats
    energy: float
    outward: Floats


def wall_passes(potential: Potential, wall: float) -> list[EdgePass]:
    """On a sphere of radius `wall` [m] around the coils' centre, where a field has a shape."""
    if not potential.shaped or potential.coils is None:
        return []
    centre = np.asarray(potential.coils.centre)
    directions = _directions(potential)
    starts = _least(potential.energy(centre + wall * directions), centre + wall * directions)
    starts = np.concatenate([starts, *_piercings(potential, centre, wall)])

    def surface(points: Floats) -> tuple[Floats, Floats, Floats]:
        away = points - centre
        height = 0.5 * (np.sum(away**2, axis=-1) / wall - wall)
        return height, away / wall, np.broadcast_to(np.eye(3) / wall, (*points.shape, 3))

    return list(_lowest(potential, surface, starts, Exit.WALL, 0.05 * wall))


def knife_passes(potential: Potential, inside: Floats, wall: float) -> list[EdgePass]:
    """On the surface where the magnetic energy is that of the knife, as seen from a point inside it.

    Parameters
    ----------
    inside : (3,). [m]
    wall : float. [m] How far from there the surface is looked for.
    """
    limit = potential.knife_energy
    if limit is None or not potential.magnetic(inside) < limit:
        return []
    directions = _directions(potential)
    distance = np.geomspace(1e-5 * wall, 2.0 * wall, 64)
    above = potential.magnetic(inside + directions[..., np.newaxis, :] * distance[:, np.newaxis]) >= limit
    first = np.argmax(above, axis=-1)
    reached = np.any(above, axis=-1)
    if not np.any(reached):
        return []
    low, high = np.where(first > 0, distance[np.maximum(first - 1, 0)], 0.0), distance[first]
    for _ in range(40):
        middle = 0.5 * (low + high)
        beyond = potential.magnetic(inside + directions * middle[..., np.newaxis]) >= limit
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    points = inside + directions * high[..., np.newaxis]
    starts = _least(np.where(reached, potential.energy(points), np.inf), points)
    typical = float(np.min(high[reached]))
    radius = float(np.max(high[reached]))
    starts = np.concatenate([starts, *_piercings(potential, inside, radius)])

    def surface(r: Floats) -> tuple[Floats, Floats, Floats]:
        value, gradient, hessian = potential.magnetic_derivatives(r)
        assert gradient is not None
        assert hessian is not None
        return value - limit, gradient, hessian

    return list(_lowest(potential, surface, starts, Exit.KNIFE, 0.2 * typical))


def arm_end_passes(potential: Potential, charts: tuple[Chart, ...]) -> list[EdgePass]:
    """At the ends of the charts of attractive beams, where a force keeps free space from being level."""
    if potential.shaped or potential.level_outside is not None:
        return []
    found = []
    for chart in charts:
        if chart.beam not in potential.attractive:
            continue
        ends = chart.stretches[2].position[[0, -1]]
        for end, sign in zip(ends, (-1.0, 1.0), strict=True):
            outward = sign * chart.frame[2]
            across = chart.frame[:2]
            r = chart.points(np.array([0.0, 0.0, end]))
            for _ in range(_STEPS):
                energy, gradient, hessian = potential.hessian(r)
                slope, bend = across @ gradient, across @ hessian @ across.T
                if not np.all(np.linalg.eigvalsh(bend) > 0.0):
                    break
                step = -np.linalg.solve(bend, slope)
                r = r + step @ across
                if np.linalg.norm(step) < 1e-9 * np.min(chart.widths(end)):
                    if gradient @ outward > 0.0:
                        found.append(EdgePass(kind=Exit.ARM_END, position=r, energy=float(energy), outward=outward))
                    break
    return found


def _directions(potential: Potential) -> Floats:
    """(polar, around, 3) Unit vectors all around, poles along the coils' axis."""
    theta = (np.arange(_POLAR) + 0.5) * np.pi / _POLAR
    phi = np.arange(_AROUND) * 2.0 * np.pi / _AROUND
    x = np.sin(theta)[:, np.newaxis] * np.cos(phi)
    y = np.sin(theta)[:, np.newaxis] * np.sin(phi)
    z = np.broadcast_to(np.cos(theta)[:, np.newaxis], x.shape)
    frame = np.eye(3) if potential.coils is None else potential.coils.frame
    directions: Floats = np.stack([x, y, z], axis=-1) @ frame
    return directions


def _least(values: Floats, points: Floats) -> Floats:
    """(n, 3) The points whose value is no larger than those of their neighbours on a grid (polar, around)."""
    padded = np.concatenate([values[:1], values, values[-1:]])
    # Across a pole the neighbour is the same row, half way around.
    half = values.shape[1] // 2
    padded[0], padded[-1] = np.roll(values[0], half), np.roll(values[-1], half)
    least = np.ones(values.shape, dtype=bool)
    for row in (padded[:-2], padded[1:-1], padded[2:]):
        for shift in (-1, 0, 1):
            least &= values <= np.roll(row, shift, axis=1)
    least &= np.isfinite(values)
    chosen = np.argwhere(least)
    order = np.argsort(values[tuple(chosen.T)])[:64]
    found: Floats = points[tuple(chosen[order].T)]
    return found


def _piercings(potential: Potential, centre: Floats, radius: float) -> Iterator[Floats]:
    """(2, 3) Where the axis of each attractive beam goes through a sphere."""
    for index in potential.attractive:
        beam = potential.beams[index]
        n, away = np.asarray(beam.direction), np.asarray(beam.focus) - centre
        middle = float(away @ n)
        root = middle**2 - float(away @ away) + radius**2
        if root > 0.0:
            yield np.asarray(beam.focus) + np.outer([-middle - np.sqrt(root), -middle + np.sqrt(root)], n)


def _lowest(potential: Potential, surface: Surface, starts: Floats, kind: Exit, longest: float) -> Iterator[EdgePass]:
    """Least places on a surface near starts (n, 3), by Newton's method along it, steps no longer than `longest`."""
    r = starts.copy()
    for _ in range(_STEPS):
        height, normal, bend = surface(r)
        length = np.linalg.norm(normal, axis=-1, keepdims=True)
        # First back onto the surface, then along it.
        r = r - normal * (height / np.maximum(length[:, 0] ** 2, 1e-300))[:, np.newaxis]
        n = normal / np.maximum(length, 1e-300)
        _, gradient, hessian = potential.hessian(r)
        pull = np.sum(gradient * n, axis=-1) / np.maximum(length[:, 0], 1e-300)
        across = np.eye(3) - n[:, :, np.newaxis] * n[:, np.newaxis, :]
        curved = across @ (hessian - pull[:, np.newaxis, np.newaxis] * bend) @ across
        values, vectors = np.linalg.eigh(curved)
        along = np.einsum("nki,nk->ni", vectors, gradient - np.sum(gradient * n, axis=-1, keepdims=True) * n)
        # The normal is flat, and so is a way along the surface on which the energy is one.
        largest = np.abs(pull) * np.max(np.abs(bend), axis=(-2, -1)) + np.max(np.abs(hessian), axis=(-2, -1))
        flat = np.abs(values) <= _FLAT * largest[:, np.newaxis]
        step = np.where(flat, 0.0, -along / np.where(flat, 1.0, np.abs(values)))
        step = np.clip(step, -_LONGEST, _LONGEST)
        step *= np.minimum(1.0, longest / np.maximum(np.linalg.norm(step, axis=-1, keepdims=True), 1e-300))
        r = r + np.einsum("nij,nj->ni", vectors, step)
    height, normal, _ = surface(r)
    energy, gradient = potential.gradient(r)
    length = np.linalg.norm(normal, axis=-1)
    n = normal / np.maximum(length[:, np.newaxis], 1e-300)
    rising = np.sum(gradient * n, axis=-1)
    rest = np.linalg.norm(gradient - rising[:, np.newaxis] * n, axis=-1)
    still = (rest <= 1e-5 * np.abs(rising)) & (np.abs(height) <= 1e-6 * longest * length)
    seen: list[int] = []
    for k in np.flatnonzero(still & (rising > 0.0)):
        alike = [other for other in seen if abs(energy[k] - energy[other]) < 1e-6 * abs(rising[k]) * longest]
        if len(alike) < _ALIKE and all(np.linalg.norm(r[k] - r[other]) > 1e-3 * longest for other in alike):
            seen.append(int(k))
            yield EdgePass(kind=kind, position=r[k], energy=float(energy[k]), outward=n[k])
