"""A ramp: stages one after another, in each of which controls of the trap move.

A stage in which nothing moves is a hold. A control that a stage does not move stays where it stood.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from enum import Enum
from types import MappingProxyType
from typing import TYPE_CHECKING

import numpy as np

from physics.checks import Floats
from physics.ramp_shapes import Course, Shape, course

if TYPE_CHECKING:
    from physics.transfer import Transfer


class Knob(Enum):
    """What of a trap can be moved.

    DEPTH: the depth, frequencies stay. SCALE: the whole trap times s, depth as s and frequencies as sqrt(s). The others
    are parts of a trap of beams and coils, and go to its surveys.
    """

    DEPTH = "depth"
    SCALE = "scale"
    POWER = "power"
    KNIFE = "knife"
    BIAS = "bias"
    GRADIENT = "gradient"
    CURVATURE = "curvature"
    LEVITATION = "levitation"

    @property
    def label(self) -> str:
        return self.value

    @property
    def unit(self) -> str:
        return _UNITS[self]


_UNITS = {
    Knob.DEPTH: "J",
    Knob.SCALE: "",
    Knob.POWER: "W",
    Knob.KNIFE: "Hz",
    Knob.BIAS: "T",
    Knob.GRADIENT: "T/m",
    Knob.CURVATURE: "T/m^2",
    Knob.LEVITATION: "T/m",
}
_POSITIVE = (Knob.DEPTH, Knob.SCALE)
_NOT_NEGATIVE = (Knob.POWER, Knob.KNIFE)


@dataclass(frozen=True)
class Control:
    """One control: which knob, and of which beam where there are several. Hashable, a key of values by control."""

    knob: Knob
    beam: str | None = None

    def __post_init__(self) -> None:
        if (self.beam is not None) != (self.knob is Knob.POWER):
            what = "needs the name of a beam" if self.knob is Knob.POWER else f"has no beam, got {self.beam}"
            raise ValueError(f"control {self.knob.value} {what}")

    @property
    def label(self) -> str:
        return self.knob.label if self.beam is None else f"{self.knob.label} {self.beam}"

    def check(self, value: float) -> None:
        """Raise ValueError for a value that this control cannot have."""
        if not math.isfinite(value):
            raise ValueError(f"{self.label} must be finite, got {value:g}")
        low = "must be positive" if self.knob in _POSITIVE and value <= 0.0 else ""
        if self.knob in _NOT_NEGATIVE and value < 0.0:
            low = "must not be negative"
        if low:
            raise ValueError(f"{self.label} {low}, got {value:g} {self.knob.unit}".rstrip())


@dataclass(frozen=True, kw_only=True)
class Move:
    """How one control moves in a stage. Values are SI, in the unit of the control.

    Attributes
    ----------
    control : Control
    start : float or None. None: where it stood. Another value than that is a sudden jump.
    end : float or None. None for a table, which has its own.
    shape : Shape
    exponent : float or None. Of the power law a (1 + t/tau)^-exponent, which then finds tau from the end.
    points : ((time [s], value), ...) of a table, from time 0 to the duration.
    """

    control: Control
    start: float | None = None
    end: float | None = None
    shape: Shape = Shape.LINEAR
    exponent: float | None = None
    points: tuple[tuple[float, float], ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "points", tuple((float(t), float(value)) for t, value in self.points))
        name = self.control.label
        if self.shape is Shape.TABLE:
            if len(self.points) < 2 or self.start is not None or self.end is not None:
                raise ValueError(f"{name} by a table needs two points or more and neither start nor end")
            times = [t for t, _ in self.points]
            if times[0] != 0.0 or any(b <= a for a, b in itertools.pairwise(times)):
                raise ValueError(f"times of the table of {name} must increase from 0 s")
        elif self.points:
            raise ValueError(f"{name} has points, which only the shape {Shape.TABLE.value} takes")
        elif self.end is None:
            raise ValueError(f"{name} moves without an end")
        if (self.exponent is not None) != (self.shape is Shape.POWER_LAW):
            what = "needs an exponent" if self.exponent is None else f"takes no exponent, got {self.exponent:g}"
            raise ValueError(f"{name} with the shape {self.shape.value} {what}")
        if self.exponent is not None and not 0.0 < self.exponent < math.inf:
            raise ValueError(f"exponent of a power law must be positive and finite, got {self.exponent:g}")
        for value in (self.start, self.end, *(v for _, v in self.points)):
            if value is not None:
                self.control.check(value)

    @property
    def last(self) -> float:
        """Value at the end."""
        return self.points[-1][1] if self.end is None else self.end


@dataclass(frozen=True, kw_only=True)
class Stage:
    """One stage of a ramp.

    Attributes
    ----------
    duration : float. [s]
    moves : what moves, each control once. Empty: a hold.
    transfer : Transfer or None. Into another trap, before the moves, whose controls are then those of that trap.
    label : text of the user.
    """

    duration: float
    moves: tuple[Move, ...] = ()
    transfer: Transfer | None = None
    label: str = ""

    def __post_init__(self) -> None:
        object.__setattr__(self, "moves", tuple(self.moves))
        if not 0.0 < self.duration < math.inf:
            raise ValueError(f"duration of a stage must be positive and finite, got {self.duration:g} s")
        controls = [move.control for move in self.moves]
        for control in controls:
            if controls.count(control) > 1:
                raise ValueError(f"a stage moves {control.label} twice")
        for move in self.moves:
            if move.points and abs(move.points[-1][0] / self.duration - 1.0) > 1e-9:
                raise ValueError(
                    f"table of {move.control.label} must end at the duration of its stage, {self.duration:g} s,"
                    f" got {move.points[-1][0]:g} s"
                )


@dataclass(frozen=True, kw_only=True)
class Placed:
    """A stage where it stands in its ramp: when it begins, and the course of every control."""

    stage: Stage
    number: int
    begin: float
    courses: Mapping[Control, Course] = field(default_factory=lambda: MappingProxyType({}))

    @property
    def end(self) -> float:
        return self.begin + self.stage.duration

    def values(self, time: float) -> dict[Control, float]:
        """Every control at a time from 0 to the duration, counted within the stage."""
        return {control: moved.value(time) for control, moved in self.courses.items()}

    @property
    def moving(self) -> tuple[Control, ...]:
        return tuple(control for control, moved in self.courses.items() if not moved.still)

    @property
    def breaks(self) -> tuple[float, ...]:
        """Times within the stage at which a course has a corner."""
        times = {t for moved in self.courses.values() for t in moved.corners}
        return tuple(sorted(times))


@dataclass(frozen=True, kw_only=True)
class Ramp:
    """Stages one after another."""

    stages: tuple[Stage, ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "stages", tuple(self.stages))
        if not self.stages:
            raise ValueError("a ramp needs one stage or more")

    @property
    def duration(self) -> float:
        """Of all stages. [s]"""
        return sum(stage.duration for stage in self.stages)

    def placed(self, standing: Mapping[Control, float]) -> Iterator[Placed]:
        """The stages in turn, every control followed from where it stands before the ramp.

        Raises
        ------
        ValueError : for a control that a trap does not have, or one whose start is not known.
        """
        values, begin = dict(standing), 0.0
        for number, stage in enumerate(self.stages):
            if stage.transfer is not None:
                values = dict(stage.transfer.path.standing)
            courses = {control: Course.resting(value) for control, value in values.items() if not math.isnan(value)}
            for move in stage.moves:
                if move.control not in values:
                    known = ", ".join(control.label for control in values) or "none"
                    raise ValueError(
                        f"stage {number + 1} moves {move.control.label}, which the trap does not have: {known}"
                    )
                start = move.start if move.start is not None else values[move.control]
                if move.shape is not Shape.TABLE and math.isnan(start):
                    raise ValueError(f"stage {number + 1} needs a start of {move.control.label}, which is not known")
                try:
                    courses[move.control] = course(move, start, stage.duration)
                except ValueError as error:
                    raise ValueError(f"stage {number + 1}: {error}") from None
                values[move.control] = move.last
            yield Placed(stage=stage, number=number, begin=begin, courses=MappingProxyType(courses))
            begin += stage.duration

    def values(self, standing: Mapping[Control, float], times: Floats) -> dict[Control, Floats]:
        """Every control at times from 0 to the duration; NaN where a trap does not have it. [SI]

        At the seam of two stages the value is that of the later one, at the very end that of the last.
        """
        placed = list(self.placed(standing))
        begins = np.array([one.begin for one in placed])
        index = np.clip(np.searchsorted(begins, times, side="right") - 1, 0, len(placed) - 1)
        controls = dict.fromkeys(control for one in placed for control in one.courses)
        found = {control: np.full(np.shape(times), np.nan) for control in controls}
        for k, one in enumerate(placed):
            here = index == k
            for control, moved in one.courses.items():
                found[control][here] = moved.values(np.asarray(times)[here] - one.begin)
        return found
