"""How the potential of a trap lies around its minimum: which lines and planes to look at, and how far.

Where nothing is held, around the middle of the light or of the field, so that it can be seen why.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.part import part
from app.answers.profile import round_up
from app.answers.trap import TrapAnswer, trap_answer
from physics.constants import boltzmann

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.traps.potential import Potential

Array = NDArray[np.float64]

LABORATORY = ("x", "y", "z")
_ALONG = 0.9995
"""Cosine from which two directions count as one."""

_MOST_KT = 40.0
"""A well that is deeper is shown up to that many kT: further up there are no atoms."""

_SHARE = 0.9
"""Share of the energy up to which is shown that the potential reaches at the end of the well."""

_MARGIN = 1.7
"""How much further than the well is shown."""

_SEARCH = np.geomspace(2e-8, 3e-2, 241)
"""[m] Distances from the middle at which the end of the well is looked for."""

BESIDE = 0.03
"""Distance from a line, or from a plane, over how far the well extends that way, that does not count."""

_MOST_UNLIKE = 4.0
"""How many times further one side of a line is shown than the other, at most."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Direction:
    """A line through the middle.

    Attributes
    ----------
    name : str
    vector : (3,) unit vector.
    backward, forward : [m] How far the well extends to either side, and a bit more.
    upright : whether it runs along gravity, upwards.
    """

    name: str
    vector: Array
    backward: float
    forward: float
    upright: bool = False

    @property
    def reach(self) -> float:
        """The larger of both distances. [m]"""
        return max(self.backward, self.forward)


@dataclass(frozen=True, kw_only=True, eq=False)
class TrapShape:
    """The potential around the minimum, or around where one would be.

    Attributes
    ----------
    answer : TrapAnswer
    middle : (3,) [m]
    top : [J] Energy over the middle up to which is shown: the depth, or less of a very deep trap.
    """

    answer: TrapAnswer
    middle: Array
    top: float

    @property
    def potential(self) -> Potential | None:
        """None where the frequencies are given."""
        return self.answer.survey.potential

    def energy(self, points: Array) -> Array:
        """Potential energy at points (..., 3), over that of the middle. [J]"""
        potential = self.potential
        if potential is None:
            return self.harmonic_energy(points)
        return potential.energy(points) - self._level

    @cached_property
    def _level(self) -> float:
        assert self.potential is not None
        return float(self.potential.energy(self.middle))

    def harmonic_energy(self, points: Array) -> Array:
        """Energy in the harmonic potential of the same frequencies; NaN without frequencies. [J]"""
        found = self.answer.survey
        if found.frequencies is None or found.axes is None:
            return np.full(np.shape(points)[:-1], np.nan)
        along = (points - self.middle) @ np.transpose(found.axes)
        energy: Array = 0.5 * found.mass * np.sum((2.0 * np.pi * np.asarray(found.frequencies) * along) ** 2, axis=-1)
        return energy

    def knifed(self, points: Array) -> Array:
        """Magnetic energy at points over that of the radio-frequency knife; negative inside, NaN without one. [J]"""
        potential = self.potential
        if potential is None or potential.knife_energy is None:
            return np.full(np.shape(points)[:-1], np.nan)
        return potential.magnetic(points) - potential.knife_energy

    @cached_property
    def up(self) -> Array | None:
        """Unit vector against gravity; None where there is none, or it is part of given frequencies."""
        down = None if self.potential is None else self.answer.trap.gravity_direction
        return None if down is None else -np.asarray(down, dtype=float) / float(np.linalg.norm(down))

    @cached_property
    def axes(self) -> tuple[Direction, Direction, Direction]:
        """The three axes of the trap, or those of the laboratory where it has none."""
        found = self.answer.survey.axes
        vectors = np.eye(3) if found is None else np.asarray(found)
        first, second, third = (self.direction(_axis_name(place, vectors[place]), vectors[place]) for place in range(3))
        return first, second, third

    @cached_property
    def lines(self) -> tuple[Direction, ...]:
        """The three axes, and gravity where it runs along none of them."""
        if self.up is None or any(axis.upright for axis in self.axes):
            return self.axes
        return (*self.axes, self.direction("gravity", self.up))

    @cached_property
    def laboratory(self) -> tuple[Direction, Direction, Direction]:
        """x, y and z."""
        x, y, z = (self.direction(name, row) for name, row in zip(LABORATORY, np.eye(3), strict=True))
        return x, y, z

    @property
    def tilted(self) -> bool:
        """Whether the axes of the trap are not those of the laboratory."""
        return any(axis.name not in LABORATORY for axis in self.axes)

    def aside(self, point: Array, *lines: Direction) -> bool:
        """Whether a point lies beside the line, or the plane, of one or two lines through the middle that are at right
        angles: further than a small share of how far the well extends that way."""
        away = np.asarray(point) - self.middle
        for line in lines:
            away = away - float(away @ line.vector) * line.vector
        return any(abs(float(away @ axis.vector)) > BESIDE * axis.reach for axis in self.axes)

    def direction(self, name: str, vector: Array) -> Direction:
        """A line through the middle with its reach."""
        upright = self.up is not None and abs(float(vector @ self.up)) > _ALONG
        if upright and self.up is not None and float(vector @ self.up) < 0.0:
            vector = -vector
        backward, forward = self._ends(vector)
        return Direction(name=name, vector=vector, backward=backward, forward=forward, upright=upright)

    def _ends(self, vector: Array) -> tuple[float, float]:
        """Where on either side of a line the well ends, and a bit more."""
        wanted = _SHARE * min(self.top, self.answer.survey.arm_depth or np.inf)
        ends = []
        for sign in (-1.0, 1.0):
            energy = self._energy_of_shape(self.middle + sign * _SEARCH[:, np.newaxis] * vector)
            above = energy >= wanted
            ends.append(float(_SEARCH[np.argmax(above) if np.any(above) else np.argmax(energy)]))
        # A side that never rises so high is not shown further than some times the other one.
        least = min(ends)
        backward, forward = (round_up(_MARGIN * min(end, _MOST_UNLIKE * least)) for end in ends)
        return backward, forward

    def _energy_of_shape(self, points: Array) -> Array:
        """Of a trap that holds nothing that of light and field alone: with gravity there is no well."""
        potential = self.potential
        if self.answer.trapped or potential is None:
            return self.energy(points)
        alone = potential.without_force
        return np.abs(alone.energy(points) - float(alone.energy(self.middle)))


def shape_scale(plan: Plan) -> float:
    """An energy of the cloud of a plan that moves in coarse steps. [J]"""
    return boltzmann * round_up(_MOST_KT * plan.cloud.temperature.value)


@part("species.key", "species.state", "trap")
def trap_shape(plan: Plan, scale: float) -> TrapShape | None:
    """The shape of the plan's trap, shown up to an energy `scale` [J] at most; None where no potential is known."""
    answer = trap_answer(plan)
    found = answer.survey
    if found.trapped:
        return TrapShape(
            answer=answer,
            middle=np.asarray(found.minimum, dtype=float),
            top=min(found.depth if found.depth is not None else 0.5 * scale, scale),
        )
    if found.potential is None:
        return None
    middle = _middle(found.potential)
    return TrapShape(answer=answer, middle=middle, top=_height(found.potential, middle, scale))


def _middle(potential: Potential) -> Array:
    """Where a minimum would be: the focus of the strongest light, else the middle of the coils."""
    if potential.attractive:
        strongest = max(
            (potential.beams[place] for place in potential.attractive),
            key=lambda beam: float(beam.intensity(np.asarray(beam.focus, dtype=float))),
        )
        return np.asarray(strongest.focus, dtype=float)
    if potential.coils is not None:
        return np.asarray(potential.coils.centre, dtype=float)
    return np.asarray(potential.beams[0].focus, dtype=float)


def _height(potential: Potential, middle: Array, scale: float) -> float:
    """How much light and field alone rise around the middle. [J]"""
    alone = potential.without_force
    points = middle + _SEARCH[:, np.newaxis, np.newaxis] * np.concatenate([np.eye(3), -np.eye(3)])
    rise = float(np.max(np.abs(alone.energy(points) - float(alone.energy(middle)))))
    return min(rise, scale) if rise > 0.0 else scale


def _axis_name(place: int, vector: Array) -> str:
    nearest = int(np.argmax(np.abs(vector)))
    return LABORATORY[nearest] if abs(vector[nearest]) > _ALONG else f"axis {place + 1}"
