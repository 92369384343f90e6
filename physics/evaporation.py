"""Evaporation along a ramp, by the kinetics of a cut classical cloud.

The state is (ln N, ln E); temperature follows from E/N, which below the depth has a largest value: a cloud with more is
not trapped. Near degeneracy the kinetics carries the energy of the classical cloud, more than the quantum cloud has, so
that N and T are estimates there; phase-space density and T/Tc are those of the quantum cloud at this N and T.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996).
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from enum import Enum
from typing import Protocol

import numpy as np

from physics.checks import Floats
from physics.evaporation_rates import FEWEST_ATOMS, CloudNow, Kinetics
from physics.evaporation_target import Target
from physics.evaporation_track import EndReason, Evaporation, Mark, Track
from physics.gas import Gas
from physics.losses import Losses
from physics.ramps import Placed, Ramp
from physics.runge_kutta import Integrator, OutOfRange, Step
from physics.stage_trap import StageTrap
from physics.trap_path import TrapPath

__all__ = ["Cancelled", "EndReason", "Evaporation", "evaporate"]

TOLERANCE = 1e-7
"""Error of a step, in ln N and ln E; results are good to about ten times this."""

ROWS = 240
"""Rows of the columns over a whole ramp, shared by its stages according to their duration."""

MOST_STEPS = 20_000
"""Of a stretch of a ramp: hundreds are usual where rates range over many decades."""

FEWEST_ROWS = 12
"""Of a stage."""


def evaporate(
    gas: Gas,
    atoms: float,
    temperature: float,
    ramp: Ramp,
    path: TrapPath,
    *,
    losses: Losses | None = None,
    target: Target | None = None,
    fewest_atoms: float = FEWEST_ATOMS,
    rows: int = ROWS,
    tolerance: float = TOLERANCE,
    tick: Callable[[float], bool] | None = None,
) -> Evaporation:
    """Simulate a ramp.

    Parameters
    ----------
    gas : Gas. What the atoms are.
    atoms, temperature : float. [1] [K] Of one spin state, at the start.
    ramp : Ramp
    path : TrapPath. The trap at the start and how its controls change it.
    losses : Losses. Single numbers; what is None does not count.
    target : Target or None. Where to end before the ramp does.
    fewest_atoms : float. [1] Number at which all counts as lost.
    rows : int. About as many rows come back.
    tolerance : float. [1] Of a step.
    tick : called with the share of the ramp that is done; False ends the simulation with `Cancelled`.

    Raises
    ------
    ValueError : for values that cannot be, a scattering length that is needed and unknown, a control without a start,
        or rates that make more than `MOST_STEPS` steps of a stage.
    """
    require_start(atoms, temperature)
    _ = gas.cold_cross_section
    track = Track(gas, losses or Losses())
    run = Run(track, path, Limits(target=target, fewest_atoms=fewest_atoms, tolerance=tolerance))
    reason = run.follow(ramp, (atoms, temperature), rows, tick)
    return track.finished(reason)


def require_start(atoms: float, temperature: float, of: str = "") -> None:
    """Raise ValueError unless both are positive and finite. of : whose they are, for the sentence"""
    for name, value, unit in (("atom number", atoms, ""), ("temperature", temperature, "K")):
        if not 0.0 < value < math.inf:
            raise ValueError(f"{name} {of}".rstrip() + f" must be positive and finite, got {value:g} {unit}".rstrip())


class Cancelled(Exception):
    """The caller's tick said to stop."""


@dataclass(frozen=True, kw_only=True)
class Limits:
    """When a simulation ends, and how exactly it steps."""

    target: Target | None
    fewest_atoms: float
    tolerance: float


class Solver(Protocol):
    """Takes steps; see `physics.runge_kutta.Integrator`."""

    def advance(self, time: float, values: Floats, end: float) -> Step | None: ...


class System(Protocol):
    """What moves together along one stretch of a ramp, the gas that evaporates first."""

    def variables(self) -> Floats: ...

    def solver(self, tolerance: float, smallest: float) -> Solver: ...

    def lead(self, time: float, values: Floats) -> CloudNow:
        """The cloud that evaporates."""

    def ends(self, values: Floats) -> dict[Enum, float]:
        """What is left until ends of its own, not positive where they have come."""

    def settle(self, values: Floats) -> None: ...

    def keep(self, placed: Placed, rows: Iterator[tuple[float, Floats]]) -> None:
        """Rows at times, from the variables then."""


class Alone:
    """A gas by itself."""

    def __init__(self, track: Track, kinetics: Kinetics) -> None:
        self.track, self.kinetics = track, kinetics

    def variables(self) -> Floats:
        return self.track.variables()

    def solver(self, tolerance: float, smallest: float) -> Solver:
        return Integrator(
            derivatives=self.kinetics.derivatives,
            tolerance=tolerance,
            scales=self.track.scales(),
            smallest=smallest,
        )

    def lead(self, time: float, values: Floats) -> CloudNow:
        return self.kinetics.cloud(time, math.exp(values[0]), math.exp(values[1]))

    def ends(self, values: Floats) -> dict[Enum, float]:
        return {}

    def settle(self, values: Floats) -> None:
        self.track.settle(values)

    def keep(self, placed: Placed, rows: Iterator[tuple[float, Floats]]) -> None:
        times, clouds = [], []
        for time, values in rows:
            try:
                clouds.append(self.lead(time, values))
            except OutOfRange:
                continue
            times.append(time)
        controls = {control: course.values(np.array(times)) for control, course in placed.courses.items()}
        self.track.keep(placed, self.kinetics, times, clouds, controls)


class Run:
    """A simulation while it runs.

    Parameters
    ----------
    track : Track. Of the gas that evaporates.
    path : TrapPath. Of the trap at the start.
    """

    def __init__(self, track: Track, path: TrapPath, limits: Limits) -> None:
        self.track, self.path, self.limits = track, path, limits

    def follow(
        self, ramp: Ramp, start: tuple[float, float], rows: int, tick: Callable[[float], bool] | None
    ) -> EndReason:
        """All stages in turn, from atoms and temperature at the start; why it ended."""
        share = rows / ramp.duration
        for placed in ramp.placed(self.path.standing):
            if tick is not None and not tick(placed.begin / ramp.duration):
                raise Cancelled
            transfer = placed.stage.transfer
            if transfer is not None:
                self.path = transfer.path
            count = max(FEWEST_ROWS, round(share * placed.stage.duration))
            if placed.number == 0:
                self.track.start(*start, self.path.at(placed.values(0.0)))
            reason = self.stage(placed, count)
            if reason is not None:
                return reason
        return EndReason.RAMP

    def stage(self, placed: Placed, count: int) -> EndReason | None:
        """One stage; the reason where the simulation ends in it."""
        track, path = self.track, self.path
        before = self.begin(placed)
        held = track.hand_over(path.at(placed.values(0.0)), placed.stage.transfer, self.limits.fewest_atoms)
        reason = None if held else EndReason.NOT_TRAPPED
        finish = 0.0
        for begin, end in itertools.pairwise((0.0, *placed.breaks, placed.stage.duration)):
            if reason is None:
                part = max(4, round(count * (end - begin) / placed.stage.duration))
                finish, reason = self.stretch(placed, begin, end, part)
        self.end(placed, before, placed.begin + finish)
        track.point = path.at(placed.values(placed.stage.duration)) if reason is None else None
        return reason

    def begin(self, placed: Placed) -> Mark:
        """Before a stage."""
        return self.track.mark()

    def end(self, placed: Placed, before: Mark, time: float) -> None:
        """After it, at a time of the ramp."""
        self.track.summarise(placed, before, time)

    def stretch(self, placed: Placed, begin: float, end: float, count: int) -> tuple[float, EndReason | None]:
        """One stretch without corners; where it ended, and why if before its end."""
        track = self.track
        trap = StageTrap(placed.courses, self.path, begin, end)
        if trap.end <= trap.begin:
            track.explanation = trap.reason
            return begin, EndReason.NOT_TRAPPED
        system = Alone(track, Kinetics(track.gas, track.losses, trap))
        finish, reason = self.advance(placed, system, trap.bottom_exponent, (begin, trap.end), count)
        assert reason is None or isinstance(reason, EndReason)
        if reason is None and not trap.held:
            reason, track.explanation = EndReason.NOT_TRAPPED, trap.reason
        return finish, reason

    def advance(
        self, placed: Placed, system: System, bottom_exponent: float, span: tuple[float, float], count: int
    ) -> tuple[float, Enum | None]:
        """Steps of a system from one time to another, with about as many rows; where it ended, and why if before."""
        begin, end = span
        values = system.variables()
        solver = system.solver(self.limits.tolerance, 1e-9 * (end - begin))
        steps: list[Step] = []
        time = begin

        def left(t: float, y: Floats) -> dict[Enum, float]:
            return self._left(system, bottom_exponent, t, y)

        try:
            reason = next((reason for reason, missing in left(time, values).items() if missing <= 0.0), None)
        except OutOfRange:
            reason = EndReason.NOT_TRAPPED
        while reason is None and time < end:
            step = solver.advance(time, values, end)
            if step is None:
                reason = EndReason.NOT_TRAPPED
                break
            steps.append(step)
            if len(steps) > MOST_STEPS:
                raise ValueError(
                    f"the ramp changes too fast to follow at {time:g} s of a stage, after {MOST_STEPS} steps"
                )
            reason = next((r for r, missing in left(step.end, step.finish).items() if missing <= 0.0), None)
            if reason is None:
                time, values = step.end, step.finish
            else:
                time = step.crossing(lambda t, y, event=reason: left(t, y)[event])  # type: ignore[misc]
                values = step.at(time)
        system.settle(values)
        system.keep(placed, self._rows(steps, begin, time, values, count))
        return time, reason

    def _left(self, system: System, bottom_exponent: float, time: float, values: Floats) -> dict[Enum, float]:
        """What is left until each kind of end, not positive where it has come."""
        found: dict[Enum, float] = {EndReason.ATOMS: math.exp(values[0]) / self.limits.fewest_atoms - 1.0}
        target = self.limits.target
        if target is not None:
            found[EndReason.TARGET] = target.missing(self.track.gas, bottom_exponent, system.lead(time, values))
        return found | system.ends(values)

    def _rows(
        self, steps: list[Step], begin: float, finish: float, last: Floats, count: int
    ) -> Iterator[tuple[float, Floats]]:
        """Even times of a stretch, its ends among them, and the variables there."""
        times = np.linspace(begin, finish, count + 1) if finish > begin else np.array([begin])
        if self.track.count and not self.track.jumped and len(times) > 1:
            times = times[1:]
        self.track.jumped = False
        index = 0
        for time in times.tolist():
            while index < len(steps) - 1 and steps[index].end < time:
                index += 1
            yield time, steps[index].at(time) if steps and time < finish else last
