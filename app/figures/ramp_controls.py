"""The controls of a ramp against time, one picture a control, the ends of its stages to be dragged."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from app.control_kinds import CONTROL_KINDS
from app.figures.picture import Array, Axis, Curve, Label, Mark, Picture, Role
from app.figures.ramp_columns import decades
from app.figures.ticks import to_drawing
from app.language import translate as _
from app.units import factor, format_quantity
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob, Placed, Ramp

POINTS = 41
"""Of a curve, for each stage."""

_SHOWN: Mapping[Knob, tuple[str, bool]] = {
    Knob.DEPTH: ("K", True),
    Knob.SCALE: ("", False),
    Knob.POWER: ("W", True),
    Knob.KNIFE: ("Hz", True),
    Knob.BIAS: ("G", False),
    Knob.GRADIENT: ("G/cm", False),
    Knob.CURVATURE: ("G/cm^2", False),
    Knob.LEVITATION: ("G/cm", False),
}
"""Unit on the axis, and whether it takes prefixes."""

_LOG_FROM = 4.0
"""Ratio of the largest to the smallest value from which an axis is logarithmic."""


_LABEL_INSET = 0.08
"""Share of the axis between its edge and the labels of stages."""

_HIGH_FROM = 0.6
"""Share of the axis from which a curve in the middle of a stage would run through a label above it."""


@dataclass(frozen=True, kw_only=True)
class Handle:
    """What a mark of a picture of a control holds: where a stage ends, or where it starts from a value of its own."""

    stage: int
    control: Control
    start: bool = False


@dataclass(frozen=True, kw_only=True, eq=False)
class ControlCurve:
    """One control along a ramp, in the unit shown.

    scale : SI value of that unit. handles : one for each mark of the pictures, in order.
    """

    control: Control
    times: Array
    values: Array
    scale: float
    handles: tuple[Handle, ...]
    places: tuple[tuple[float, float], ...]

    @property
    def title(self) -> str:
        unit, prefixed = _SHOWN[self.control.knob]
        label = _("depth U/k") if self.control.knob is Knob.DEPTH else self.control.label
        return label if prefixed or not unit else f"{label} [{unit}]"

    def text(self, value: float) -> str:
        """A value in the unit shown, for reading."""
        unit, prefixed = _SHOWN[self.control.knob]
        if not math.isfinite(value):
            return "–"
        if prefixed and value:
            size = math.floor(math.log10(abs(value)) / 3.0 + 1e-9)
            prefix = {-4: "p", -3: "n", -2: "µ", -1: "m", 0: "", 1: "k", 2: "M", 3: "G"}.get(size)
            if prefix is not None:
                return format_quantity(value, f"{prefix}{unit}", digits=3)
        return format_quantity(value, unit, digits=3)

    def at(self, time: float) -> float:
        """The value at a time, the later one where it jumps; NaN outside. [unit shown]"""
        after = int(np.searchsorted(self.times, time, side="right"))
        if after == 0 or (after == len(self.times) and time > self.times[-1]):
            return math.nan
        if after == len(self.times):
            return float(self.values[-1])
        t0, t1 = self.times[after - 1], self.times[after]
        a, b = self.values[after - 1], self.values[after]
        return float(a if t1 == t0 else a + (b - a) * (time - t0) / (t1 - t0))


def control_curves(ramp: Ramp, standing: Mapping[Control, float]) -> tuple[ControlCurve, ...]:
    """Every control that moves somewhere along the ramp.

    Raises
    ------
    ValueError : as of `Ramp.placed`.
    """
    stages = list(ramp.placed(standing))
    moved = dict.fromkeys(move.control for placed in stages for move in placed.stage.moves)
    return tuple(_curve(control, stages) for control in moved)


def _curve(control: Control, stages: Sequence[Placed]) -> ControlCurve:
    unit = _SHOWN[control.knob][0]
    scale = factor(unit, CONTROL_KINDS[control.knob].si_unit) if unit else 1.0
    times, values, handles, places = [], [], [], []
    for placed in stages:
        course = placed.courses.get(control)
        if course is None:
            times.append(np.array([placed.begin, placed.end]))
            values.append(np.full(2, np.nan))
            continue
        within = np.linspace(0.0, placed.stage.duration, POINTS)
        if course.shape is Shape.TABLE:
            within = np.unique(np.concatenate([within, np.asarray(course.times)]))
        here = course.values(within) / scale
        times.append(placed.begin + within)
        values.append(here)
        move = next((move for move in placed.stage.moves if move.control == control), None)
        if move is not None and (move.start is not None or move.points):
            handles.append(Handle(stage=placed.number, control=control, start=True))
            places.append((placed.begin, float(here[0])))
        handles.append(Handle(stage=placed.number, control=control))
        places.append((placed.end, float(here[-1])))
    return ControlCurve(
        control=control,
        times=np.concatenate(times),
        values=np.concatenate(values),
        scale=scale,
        handles=tuple(handles),
        places=tuple(places),
    )


def control_picture(
    curve: ControlCurve,
    end: float,
    bounds: Sequence[float],
    labels: Sequence[str],
    *,
    cursor: float | None = None,
    axis: Axis | None = None,
    letters: int = 100,
) -> Picture:
    """A control along a ramp.

    end : [s] of the time axis. bounds : [s] at which stages end. labels : of the stages
    axis : of the values, to be kept while it is dragged; None: one that suits
    letters : about as many stand side by side: a stage too short for its label is named by its number
    """
    axis = axis or value_axis(curve)
    low, high = axis.low, axis.high
    uprights = np.repeat(np.asarray(bounds, dtype=np.float64), 3)
    uprights[2::3] = np.nan
    curves = [
        Curve(name="", role=Role.STAGE, x=uprights, y=np.tile([low, high, np.nan], len(bounds))),
        Curve(name="", role=Role.TOTAL, x=curve.times, y=curve.values),
    ]
    note = _("drag the ends of the stages")
    if cursor is not None:
        curves.append(Curve(name="", role=Role.CURSOR, x=np.array([cursor, cursor]), y=np.array([low, high])))
        note = curve.text(curve.at(cursor))
    begins = (0.0, *bounds[:-1])
    names = tuple(
        Label(
            text=label if label and len(label) <= letters * (b - a) / end else f"{number}",
            role=Role.CLASSICAL,
            x=0.5 * (a + b),
            y=_clear_of(curve.at(0.5 * (a + b)), axis),
        )
        for number, (a, b, label) in enumerate(zip(begins, bounds, labels, strict=True), start=1)
    )
    return Picture(
        title=curve.title,
        x=Axis(label=_("time"), unit="s", low=0.0, high=end),
        y=axis,
        curves=tuple(curves),
        marks=tuple(Mark(name="", role=Role.CLOUD, x=x, y=y, draggable=True) for x, y in curve.places),
        labels=names,
        summary=_("{control} from {first} to {last}").format(
            control=curve.control.label, first=curve.text(float(curve.values[0])), last=curve.text(curve.places[-1][1])
        ),
        note=note,
    )


def _clear_of(value: float, axis: Axis) -> float:
    """Where the label of a stage stands: near the upper edge, near the lower one where the curve is high."""
    bottom, top = to_drawing(axis, axis.low), to_drawing(axis, axis.high)
    is_high = math.isfinite(value) and to_drawing(axis, value) > bottom + _HIGH_FROM * (top - bottom)
    place = bottom + (_LABEL_INSET if is_high else 1.0 - _LABEL_INSET) * (top - bottom)
    return float(10.0**place if axis.log else place)


def value_axis(curve: ControlCurve) -> Axis:
    """An axis that holds the whole curve, in coarse steps."""
    unit, prefixed = _SHOWN[curve.control.knob]
    finite = curve.values[np.isfinite(curve.values)]
    least, most = (float(np.min(finite)), float(np.max(finite))) if finite.size else (0.0, 1.0)
    if least > 0.0 and most / least >= _LOG_FROM:
        low, high = decades(least, most)
        return Axis(
            label=curve.title, unit=unit, low=10.0**low, high=10.0**high, log=True, prefixed=prefixed, titled=False
        )
    reach = max(abs(least), abs(most), 1e-30)
    step = 10.0 ** math.floor(math.log10(reach)) / 2.0
    low_end = min(0.0, step * math.floor(least / step - 0.04))
    high_end = max(0.0, step * math.ceil(most / step + 0.04))
    return Axis(label=curve.title, unit=unit, low=low_end, high=high_end, prefixed=prefixed, titled=False)
