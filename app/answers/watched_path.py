"""A trap whose surveys are told of, one by one, so that long work shows how far it is and can be stopped."""

from __future__ import annotations

import itertools
import math
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

from physics.evaporation import Cancelled
from physics.ramps import Control, Ramp, Stage
from physics.trap_path import PathAround, TrapPath, TrapPoint, points_between

Tick = Callable[[float], bool]
"""Told the share of the work that is done, from 0 to 1; its answer says whether to go on."""

_PAUSE = 0.03
"""[s] Between two tellings: often enough to stop at once, and not so often that telling takes the time."""


@dataclass(kw_only=True)
class Progress:
    """How far work is that surveys traps, and does something else besides.

    tick : of whoever waits
    surveys : about how many there will be
    part : share of the whole that they are
    """

    tick: Tick
    surveys: int = 1
    part: float = 0.9
    share: float = field(default=0.0, init=False)
    _asked: int = field(default=0, init=False)
    _told: float = field(default=-math.inf, init=False)

    def survey(self) -> None:
        """One more; Cancelled where nobody waits any more."""
        self._asked += 1
        self._tell(self.part * min(self._asked / self.surveys, 1.0))

    def rest(self, share: float) -> bool:
        """How far the rest is; a tick itself."""
        return self._said(self.part + (1.0 - self.part) * share)

    def _tell(self, share: float) -> None:
        if not self._said(share):
            raise Cancelled

    def _said(self, share: float) -> bool:
        self.share = max(self.share, share)
        now = time.monotonic()
        if now < self._told + _PAUSE:
            return True
        self._told = now
        return self.tick(self.share)


@dataclass(frozen=True, kw_only=True)
class WatchedPath(PathAround):
    """A trap path that tells of each setting at which it is asked for."""

    progress: Progress

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        self.progress.survey()
        return self.path.at(controls)


def watched_ramp(ramp: Ramp, progress: Progress) -> Ramp:
    """The ramp with every trap that it hands the cloud to watched."""

    def stage(one: Stage) -> Stage:
        if one.transfer is None:
            return one
        return replace(one, transfer=replace(one.transfer, path=WatchedPath(path=one.transfer.path, progress=progress)))

    return Ramp(stages=tuple(stage(one) for one in ramp.stages))


def surveys_along(ramp: Ramp, path: TrapPath) -> int:
    """About how many settings a simulation asks a path for."""
    count = 2
    for placed in ramp.placed(path.standing):
        if placed.stage.transfer is not None:
            path = placed.stage.transfer.path
        moving = placed.moving
        several = 2 if len(moving) > 1 else 1
        corners = [0.0, *placed.breaks, placed.stage.duration]
        for begin, end in itertools.pairwise(corners):
            values = [(placed.courses[c].value(begin), placed.courses[c].value(end)) for c in moving]
            count += several * sum(points_between(path.nodes, *ends) for ends in values) + 1
        count += 1
    return count
