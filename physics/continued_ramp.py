"""The rest of a ramp, from a time within it: for a cloud that was measured there."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType

from physics.ramp_shapes import Course, Shape
from physics.ramps import Control, Move, Placed, Ramp, Stage
from physics.trap_path import TrapPath, TrapPoint


@dataclass(frozen=True, kw_only=True)
class StandingPath:
    """A trap whose controls stand elsewhere before a ramp."""

    path: TrapPath
    standing: Mapping[Control, float]

    @property
    def nodes(self) -> int:
        return self.path.nodes

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        return self.path.at(controls)


@dataclass(frozen=True, kw_only=True)
class RestOfRamp:
    """What is left of a ramp.

    Attributes
    ----------
    ramp : Ramp or None. None after its end.
    path : the trap, its controls where they then stand.
    begin : float. [s] When it begins, in the time of the whole ramp.
    """

    ramp: Ramp | None
    path: TrapPath
    begin: float


def after_stage(ramp: Ramp, path: TrapPath, stage: int) -> RestOfRamp:
    """What follows the end of a stage, counted from 1 as they are shown; 0 is all of the ramp.

    Raises
    ------
    ValueError : for a stage that the ramp does not have.
    """
    if not 0 <= stage <= len(ramp.stages):
        raise ValueError(f"the ramp has stages 1 to {len(ramp.stages)}, got {stage}")
    return _rest(ramp, path, stage, 0.0)


def after_time(ramp: Ramp, path: TrapPath, time: float) -> RestOfRamp:
    """What follows a time. [s]

    Raises
    ------
    ValueError : for a time outside of the ramp.
    """
    if not 0.0 <= time <= ramp.duration * (1.0 + 1e-12):
        raise ValueError(f"the ramp lasts {ramp.duration:g} s, got the time {time:g} s")
    begin = 0.0
    for number, stage in enumerate(ramp.stages):
        if time < begin + stage.duration * (1.0 - 1e-12):
            return _rest(ramp, path, number, max(time - begin, 0.0))
        begin += stage.duration
    return _rest(ramp, path, len(ramp.stages), 0.0)


def _rest(ramp: Ramp, path: TrapPath, number: int, within: float) -> RestOfRamp:
    """From a time within stage `number`, from 0."""
    placed = list(ramp.placed(path.standing))
    for one in placed[: number + (within > 0.0)]:
        if one.stage.transfer is not None:
            path = one.stage.transfer.path
    begin = placed[number].begin + within if number < len(placed) else ramp.duration
    stages = list(ramp.stages[number:])
    if within > 0.0:
        values = placed[number].values(within)
        stages[0] = _cut(placed[number], within)
    elif number > 0:
        before = placed[number - 1]
        values = before.values(before.stage.duration)
    else:
        values = dict(path.standing)
    standing = {**path.standing, **{c: v for c, v in values.items() if not math.isnan(v)}}
    held = StandingPath(path=path, standing=MappingProxyType(standing))
    return RestOfRamp(ramp=Ramp(stages=tuple(stages)) if stages else None, path=held, begin=begin)


def _cut(placed: Placed, within: float) -> Stage:
    """The rest of a stage. Every shape goes on as one of its own kind."""
    moves = tuple(_rest_of_move(move, placed.courses[move.control], within) for move in placed.stage.moves)
    return replace(placed.stage, duration=placed.stage.duration - within, moves=moves, transfer=None)


def _rest_of_move(move: Move, course: Course, within: float) -> Move:
    here = course.value(within)
    if move.shape is not Shape.TABLE:
        return replace(move, start=here)
    later = tuple((t - within, value) for t, value in move.points if t > within)
    return replace(move, points=((0.0, here), *later))
