"""The course of one control through one stage: its value and how fast that changes."""

from __future__ import annotations

import itertools
import math
from bisect import bisect_left, bisect_right
from dataclasses import dataclass, replace
from enum import Enum
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from physics.checks import Floats

if TYPE_CHECKING:
    from physics.ramps import Move

_SLIGHT = 0.25
"""Share of its slope by which the course of a table may turn at a point without a corner that counts."""


class Shape(Enum):
    """How a control goes from a to b, x the share of the time that has passed.

    LINEAR: a + (b - a) x. EXPONENTIAL: a (b/a)^x. POWER_LAW: a (1 + t/tau)^-exponent. TABLE: straight between points.
    """

    LINEAR = "linear"
    EXPONENTIAL = "exponential"
    POWER_LAW = "power law"
    TABLE = "table"

    @property
    def label(self) -> str:
        return self.value


@dataclass(frozen=True, kw_only=True)
class Course:
    """One control through one stage.

    Attributes
    ----------
    shape : Shape
    start, end : float. [SI]
    duration : float. [s] inf for one that rests.
    exponent : of a power law; 1 otherwise.
    times, levels : of a table.
    """

    shape: Shape
    start: float
    end: float
    duration: float
    exponent: float = 1.0
    times: tuple[float, ...] = ()
    levels: tuple[float, ...] = ()

    @classmethod
    def resting(cls, value: float) -> Course:
        return cls(shape=Shape.LINEAR, start=value, end=value, duration=math.inf)

    @cached_property
    def still(self) -> bool:
        return self.start == self.end and len(set(self.levels)) <= 1

    @property
    def corners(self) -> tuple[float, ...]:
        """Times within the stage at which the course has a corner that counts. [s]

        A table of many points that follows a curve has a slight one at each, over which the kinetics goes as over the
        curve.
        """
        slopes = [(b - a) / (t - s) for (s, a), (t, b) in itertools.pairwise(zip(self.times, self.levels, strict=True))]
        turns = zip(self.times[1:-1], itertools.pairwise(slopes), strict=True)
        return tuple(t for t, (a, b) in turns if abs(b - a) > _SLIGHT * max(abs(a), abs(b)))

    def within(self, begin: float, finish: float) -> Course:
        """The course between two neighbouring corners; times stay those of the stage."""
        if self.shape is not Shape.TABLE:
            return self
        first = self._interval(begin)
        last = max(bisect_left(self.times, finish), first + 1)
        times, levels = self.times[first : last + 1], self.levels[first : last + 1]
        return replace(self, start=levels[0], end=levels[-1], times=times, levels=levels)

    @cached_property
    def _stretch(self) -> float:
        """duration/tau of a power law."""
        return math.expm1(math.log(self.start / self.end) / self.exponent)

    def value(self, time: float) -> float:
        """Value at a time from 0 to the duration. [SI]"""
        if self.still:
            return self.start
        x, a, b = time / self.duration, self.start, self.end
        if self.shape is Shape.TABLE:
            index = self._interval(time)
            t0, t1 = self.times[index], self.times[index + 1]
            share = (time - t0) / (t1 - t0)
            return self.levels[index] + (self.levels[index + 1] - self.levels[index]) * share
        # The end itself, not what rounding makes of it.
        if x >= 1.0:
            return b
        if self.shape is Shape.LINEAR:
            return a + (b - a) * x
        if self.shape is Shape.EXPONENTIAL:
            return a * math.exp(x * math.log(b / a))
        return a * math.exp(-self.exponent * math.log1p(self._stretch * x))

    def values(self, times: Floats) -> Floats:
        """Values at many times. [SI]"""
        t = np.asarray(times, dtype=np.float64)
        if self.still:
            return np.full(t.shape, self.start)
        x, a, b = t / self.duration, self.start, self.end
        if self.shape is Shape.TABLE:
            return np.interp(t, self.times, self.levels)
        if self.shape is Shape.LINEAR:
            inside = a + (b - a) * x
        elif self.shape is Shape.EXPONENTIAL:
            inside = a * np.exp(x * math.log(b / a))
        else:
            inside = a * np.exp(-self.exponent * np.log1p(self._stretch * x))
        return np.where(x >= 1.0, b, inside)

    def slope(self, time: float) -> float:
        """Change per second. [SI/s]"""
        if self.still:
            return 0.0
        a, b, T = self.start, self.end, self.duration
        if self.shape is Shape.TABLE:
            index = self._interval(time)
            return (self.levels[index + 1] - self.levels[index]) / (self.times[index + 1] - self.times[index])
        if self.shape is Shape.LINEAR:
            return (b - a) / T
        if self.shape is Shape.EXPONENTIAL:
            return self.value(time) * math.log(b / a) / T
        stretch = self._stretch
        return -self.exponent * self.value(time) * stretch / (T + stretch * time)

    def _interval(self, time: float) -> int:
        return min(max(bisect_right(self.times, time) - 1, 0), len(self.times) - 2)


def course(move: Move, start: float, duration: float) -> Course:
    """The course of a move that starts at a value and takes a time.

    Raises
    ------
    ValueError : where the shape cannot lead from there to the end.
    """
    if move.shape is Shape.TABLE:
        times, levels = zip(*move.points, strict=True)
        return Course(shape=move.shape, start=levels[0], end=levels[-1], duration=duration, times=times, levels=levels)
    end, name = move.last, move.control.label
    if move.shape is not Shape.LINEAR and start * end <= 0.0:
        raise ValueError(f"{name} cannot go {_HOW[move.shape]} from {start:g} to {end:g}: one sign, and not zero")
    return Course(shape=move.shape, start=start, end=end, duration=duration, exponent=move.exponent or 1.0)


_HOW = {Shape.EXPONENTIAL: "exponentially", Shape.POWER_LAW: "by a power law"}
