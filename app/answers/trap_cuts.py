"""Cuts of the potential of a trap: along its three axes and along gravity."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.part import part
from app.answers.trap_shape import Direction, TrapShape, trap_shape

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

LINE_POINTS = 801
_BEYOND = 20.0
"""How many times further than the well a line is worked out, for whoever zooms out."""

_CROWDED = 5.0
"""Points of a line are sinh-spaced: closest at the middle."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Cut:
    """The potential along a line.

    Attributes
    ----------
    direction : Direction
    distance : (points,) [m] From the middle.
    energy, harmonic : (points,) [J] Over that of the middle; `harmonic` is NaN without frequencies.
    frequency : [Hz] Of the trap along the line, None without.
    knife : [m] Where the radio-frequency knife cuts the line.
    escape : [m] Where on the line the way out lies; None where it lies elsewhere.
    """

    direction: Direction
    distance: Array
    energy: Array
    harmonic: Array
    frequency: float | None
    knife: tuple[float, ...]
    escape: float | None


@part("species.key", "species.state", "trap")
def trap_cuts(plan: Plan, scale: float) -> tuple[TrapShape, tuple[Cut, ...]] | None:
    """The potential along each axis of the plan's trap, and along gravity; None where no potential is known."""
    shape = trap_shape(plan, scale)
    return None if shape is None else (shape, tuple(_cut(shape, direction) for direction in shape.lines))


def _cut(shape: TrapShape, direction: Direction) -> Cut:
    spread = np.sinh(_CROWDED * np.linspace(-1.0, 1.0, LINE_POINTS)) / np.sinh(_CROWDED)
    distance = _BEYOND * direction.reach * spread
    points = shape.middle + distance[:, np.newaxis] * direction.vector
    harmonic = shape.harmonic_energy(points)
    found = shape.answer.survey
    stiff = float(shape.harmonic_energy(shape.middle + direction.vector))  # one metre away: half the spring constant
    frequency = np.sqrt(2.0 * stiff / found.mass) / (2.0 * np.pi) if found.frequencies is not None else None
    return Cut(
        direction=direction,
        distance=distance,
        energy=shape.energy(points),
        harmonic=harmonic,
        frequency=None if frequency is None else float(frequency),
        knife=_crossings(distance, shape.knifed(points)),
        escape=_on_line(shape, direction),
    )


def _crossings(distance: Array, height: Array) -> tuple[float, ...]:
    """Where a height goes through zero nearest to the middle, on either side."""
    found = []
    for side in (distance >= 0.0, distance <= 0.0):
        outwards = np.argsort(np.abs(distance[side]))
        s, h = distance[side][outwards], height[side][outwards]
        above = np.flatnonzero(h >= 0.0)
        if above.size and above[0] > 0:
            k = above[0]
            found.append(float(s[k - 1] + (s[k] - s[k - 1]) * h[k - 1] / (h[k - 1] - h[k])))
    return tuple(found)


def _on_line(shape: TrapShape, direction: Direction) -> float | None:
    escape = shape.answer.survey.escape
    if escape is None or escape.position is None:
        return None
    along = float((np.asarray(escape.position) - shape.middle) @ direction.vector)
    return None if shape.aside(escape.position, direction) else along
