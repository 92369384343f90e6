"""What a user says of a ramp: its stages, the limits that a designed one keeps, and clouds measured on the way."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum
from itertools import pairwise

from app.plan_field import PlanError
from app.trap_choices import TrapChoice
from app.units import Quantity
from physics.ramp_shapes import Shape
from physics.ramps import Control

LONGEST_LABEL = 80


@dataclass(frozen=True, kw_only=True)
class MoveChoice:
    """How one control moves through a stage.

    control : the knob, and of a power the beam
    start : None: where it stood
    end : None of a table, and of a power law that is given by its time constant
    shape : of the way
    points : of a table, (time [s], value) from time 0 to the duration
    tau, exponent : of the power law a (1 + t/tau)^-exponent; tau [s] None: as the end needs it
    """

    control: Control
    start: Quantity | None = None
    end: Quantity | None = None
    shape: Shape = Shape.LINEAR
    points: tuple[tuple[Quantity, Quantity], ...] = ()
    tau: Quantity | None = None
    exponent: Quantity | None = None

    def __post_init__(self) -> None:
        table, power_law = self.shape is Shape.TABLE, self.shape is Shape.POWER_LAW
        if table != bool(self.points):
            what = "needs points" if table else f"takes no points; they go with the shape {Shape.TABLE.value}"
            raise PlanError(f"the shape {self.shape.value} {what}", path="ramp.stage.points")
        if table and (self.start is not None or self.end is not None):
            raise PlanError("a table has its values in its points, and neither start nor end", path="ramp.stage.points")
        if power_law != (self.exponent is not None):
            what = "needs an exponent" if power_law else "takes no exponent"
            raise PlanError(f"the shape {self.shape.value} {what}", path="ramp.stage.exponent")
        if self.tau is not None and (not power_law or self.end is not None):
            what = "an end or a tau, not both" if power_law else f"no tau; it goes with {Shape.POWER_LAW.value}"
            raise PlanError(f"the shape {self.shape.value} takes {what}", path="ramp.stage.tau")
        times = [time.value for time, _ in self.points]
        if table and (len(times) < 2 or times[0] != 0.0 or any(b <= a for a, b in pairwise(times))):
            raise PlanError(
                "the points of a table must be two or more, at times that increase from 0 s", path="ramp.stage.points"
            )
        if not table and self.end is None and self.tau is None:
            raise PlanError(f"{self.control.label} moves without an end", path="ramp.stage.end")


class Handing(Enum):
    """How a cloud comes into another trap."""

    SLOW = "slow"
    SUDDEN = "sudden"


@dataclass(frozen=True, kw_only=True)
class StageChoice:
    """One stage of a ramp.

    duration : [s]
    moves : what moves, each control once; none: a hold
    label : of the user's own
    handing, trap : at its begin the cloud goes into this trap, slowly (entropy is kept) or suddenly; both or neither
    """

    duration: Quantity
    moves: tuple[MoveChoice, ...] = ()
    label: str = ""
    handing: Handing | None = None
    trap: TrapChoice | None = None

    def __post_init__(self) -> None:
        if len(self.label) > LONGEST_LABEL or not self.label.isprintable():
            raise PlanError(f"label must be one line of at most {LONGEST_LABEL} characters", path="ramp.stage.label")
        controls = [move.control for move in self.moves]
        for control in controls:
            if controls.count(control) > 1:
                raise PlanError(f"a stage moves {control.label} twice", path="ramp.stage.move.control")
        for move in self.moves:
            last = move.points[-1][0] if move.points else self.duration
            if not math.isclose(last.value, self.duration.value, rel_tol=1e-9):
                raise PlanError(
                    f"the table of {move.control.label} must end at the duration of its stage, {self.duration.text}, "
                    f"got {last.text}",
                    path="ramp.stage.move.points",
                )
        if (self.handing is None) != (self.trap is None):
            raise PlanError(
                'a transfer needs the trap that the cloud goes into, ramp.stage.trap, and to be "slow" or "sudden"',
                path="ramp.stage.transfer",
            )


@dataclass(frozen=True, kw_only=True)
class ControlLimits:
    """Bounds that a designed ramp keeps for one control; None: no bound of the user's.

    low, high : in the unit of the control
    fastest : largest change per second, in the unit of the control per second
    """

    control: Control
    low: Quantity | None = None
    high: Quantity | None = None
    fastest: Quantity | None = None

    def __post_init__(self) -> None:
        if self.low is not None and self.high is not None and not self.low.value < self.high.value:
            raise PlanError(f"low of {self.control.label} must be below its high", path="limits.control.low")


@dataclass(frozen=True, kw_only=True)
class LimitsChoice:
    """What a designed ramp keeps. time : [s] at most, in all."""

    time: Quantity | None = None
    controls: tuple[ControlLimits, ...] = ()

    def __post_init__(self) -> None:
        controls = [limits.control for limits in self.controls]
        for control in controls:
            if controls.count(control) > 1:
                raise PlanError(f"{control.label} has limits twice", path="limits.control.control")


@dataclass(frozen=True, kw_only=True)
class MeasuredChoice:
    """A cloud that was measured: after a stage (counted from 1) or at a time [s] of the ramp, else in the trap of the
    plan; by its temperature, or by one to three rms widths [m], along x, y and z, after an expansion time [s].

    passenger_atoms, passenger_temperature : of the second species at the same time; None: as simulated
    """

    label: str
    atoms: Quantity
    stage: int | None = None
    time: Quantity | None = None
    temperature: Quantity | None = None
    widths: tuple[Quantity, ...] = ()
    expansion_time: Quantity | None = None
    passenger_atoms: Quantity | None = None
    passenger_temperature: Quantity | None = None

    def __post_init__(self) -> None:
        if not self.label.strip() or len(self.label) > LONGEST_LABEL or not self.label.isprintable():
            raise PlanError(f"label must be one line of 1 to {LONGEST_LABEL} characters", path="measured.label")
        if self.stage is not None and self.time is not None:
            raise PlanError(
                "give the stage after which a cloud was measured, or the time, not both", path="measured.time"
            )
        if self.stage is not None and self.stage < 1:
            raise PlanError(f"stages are counted from 1, got {self.stage}", path="measured.stage")
        if (self.temperature is None) == (not self.widths):
            raise PlanError("give a temperature, or else widths and an expansion time", path="measured.temperature")
        if len(self.widths) > 3:
            raise PlanError(f"widths are one to three, got {len(self.widths)}", path="measured.widths")
        if bool(self.widths) != (self.expansion_time is not None):
            raise PlanError("widths and the expansion time go together", path="measured.expansion_time")
