"""Sections of the potential of a trap: over a plane through its minimum."""

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

PLANE_POINTS = 141
_STEPS = 5


@dataclass(frozen=True, kw_only=True, eq=False)
class Plane:
    """A plane through the middle, spanned by two lines; `absolute` ones are read in places of the laboratory."""

    first: Direction
    second: Direction
    absolute: bool

    @property
    def name(self) -> str:
        joint = "" if self.absolute else " and "
        return f"{self.first.name}{joint}{self.second.name}"


Window = tuple[float, float, float, float]
"""Part of a plane: left, right, bottom, top. [m]"""


@dataclass(frozen=True, kw_only=True, eq=False)
class Section:
    """The potential over a plane, rows along the second line.

    Attributes
    ----------
    plane : Plane
    x, y : [m] Places along the two lines: of the laboratory, or from the middle.
    energy : (y, x) [J] Over that of the middle.
    knife : (y, x) [J] Magnetic energy over that of the knife; NaN without one.
    minimum : place of the minimum, or None.
    escape : place of the way out, and the direction in which atoms leave; None where there is no single one.
    aside : whether the way out lies beside the plane.
    """

    plane: Plane
    x: Array
    y: Array
    energy: Array
    knife: Array
    minimum: tuple[float, float] | None
    escape: tuple[float, float, float, float] | None
    aside: bool


def planes(shape: TrapShape) -> tuple[Plane, ...]:
    """The planes to choose from: of the laboratory, then of the trap's axes where these are others."""
    sets = [(shape.laboratory, True)] + ([(shape.axes, False)] if shape.tilted else [])
    return tuple(
        Plane(first=lines[a], second=lines[b], absolute=absolute)
        for lines, absolute in sets
        for a, b in ((0, 2), (1, 2), (0, 1))
    )


@part("species.key", "species.state", "trap")
def trap_section(plan: Plan, scale: float, name: str, window: Window | None = None) -> tuple[TrapShape, Section] | None:
    """The potential over the plane of that name, else over the first one; None where no potential is known."""
    shape = trap_shape(plan, scale)
    if shape is None:
        return None
    there = planes(shape)
    plane = next((plane for plane in there if plane.name == name), there[0])
    return shape, _section(shape, plane, window)


def _section(shape: TrapShape, plane: Plane, window: Window | None) -> Section:
    first, second = plane.first, plane.second
    origin = np.array([shape.middle @ first.vector, shape.middle @ second.vector]) if plane.absolute else np.zeros(2)
    x0, y0 = origin
    left, right, bottom, top = window or (*_sides(x0, first), *_sides(y0, second))
    x, y = np.linspace(left, right, PLANE_POINTS), np.linspace(bottom, top, PLANE_POINTS)
    points = (
        shape.middle
        + (x - x0)[np.newaxis, :, np.newaxis] * first.vector
        + (y - y0)[:, np.newaxis, np.newaxis] * second.vector
    )
    escape, aside = None, False
    found = shape.answer.survey.escape
    if found is not None and found.position is not None and found.direction is not None:
        away = np.asarray(found.position) - shape.middle
        along = away @ first.vector, away @ second.vector
        aside = shape.aside(found.position, first, second)
        leaving = np.asarray(found.direction)
        escape = (
            float(along[0] + x0), float(along[1] + y0),
            float(leaving @ first.vector), float(leaving @ second.vector),
        )  # fmt: skip
    return Section(
        plane=plane,
        x=x,
        y=y,
        energy=shape.energy(points),
        knife=shape.knifed(points),
        minimum=(float(x0), float(y0)) if shape.answer.trapped else None,
        escape=escape,
        aside=aside,
    )


def _sides(middle: float, direction: Direction) -> tuple[float, float]:
    """Both ends of a line through a place, in steps that are coarse against the sag of a trap that is changed."""
    step = direction.reach / _STEPS
    low, high = middle - direction.backward, middle + direction.forward
    return step * round(low / step), step * round(high / step)
