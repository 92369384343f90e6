"""What becomes of a cloud along a ramp: one small picture a quantity, all over the same time."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from app.figures.picture import Array, Axis, Curve, Mark, Picture, Role
from app.figures.ticks import raised
from app.language import translate as _
from app.units import best_unit, format_quantity
from physics.constants import boltzmann
from physics.evaporation import Evaporation

_NEAR, _BESIDE = 0.03, 0.15
"""Of a decade: what is so near to the end of an axis gets so much room."""

MOST_DECADES = 6
"""Of a logarithmic axis: what lies further below is not worth the ink."""

_PREFIXED = {"K": ("pK", "nK", "µK", "mK", "K"), "s": ("µs", "ms", "s")}

_CONDENSED = 2.612375348685488  # zeta(3/2)


@dataclass(frozen=True, kw_only=True)
class Column:
    """One quantity along a ramp.

    name : of the column in the rows of a simulation
    symbol, label : for readings and for the title
    factor : SI value of the unit shown
    prefixed : the unit takes prefixes, as 1.2 µK
    linear : on a linear axis from zero
    """

    name: str
    symbol: str
    label: str
    unit: str = ""
    factor: float = 1.0
    prefixed: bool = False
    linear: bool = False

    def values(self, run: Evaporation) -> Array:
        """The column, in the unit shown."""
        column: Array = getattr(run.rows, self.name)
        return column / self.factor

    def text(self, value: float) -> str:
        """A value, in the unit shown, for reading."""
        if not math.isfinite(value):
            return "–"
        if self.prefixed:
            return format_quantity(value, best_unit(value, _PREFIXED[self.unit]), digits=3)
        return format_quantity(value, raised(self.unit), digits=3)


ATOMS = Column(name="atoms", symbol="N", label=_("atoms N"))
TEMPERATURE = Column(name="temperature", symbol="T", label=_("temperature T"), unit="K", prefixed=True)
DENSITY = Column(name="peak_phase_space_density", symbol="D", label=_("phase-space density"))
TRUNCATION = Column(name="truncation", symbol="η", label=_("truncation η = U/kT"), linear=True)
TRAP_DEPTH = Column(name="depth", symbol="U", label=_("depth U/k"), unit="K", factor=boltzmann, prefixed=True)
RATE = Column(name="elastic_collision_rate", symbol="γel", label=_("collisions/s, mean"))

COLUMNS = (ATOMS, TEMPERATURE, DENSITY, TRUNCATION, TRAP_DEPTH, RATE)


@dataclass(frozen=True, kw_only=True, eq=False)
class Course:
    """A simulated ramp to be drawn. begin : [s] of its first row in the time of the plan's ramp."""

    name: str
    run: Evaporation
    begin: float = 0.0
    role: Role = Role.FIRST

    @property
    def times(self) -> Array:
        return self.run.time + self.begin

    @property
    def end(self) -> float:
        """[s]"""
        return float(self.times[-1]) if len(self.run.time) else self.begin


@dataclass(frozen=True, kw_only=True)
class MeasuredPoint:
    """A measured cloud. sigma : standard uncertainty in the same unit, or None."""

    label: str
    time: float
    atoms: float
    temperature: float
    atoms_sigma: float | None = None
    temperature_sigma: float | None = None

    def value(self, column: Column) -> tuple[float, float | None] | None:
        """The value for a column, with its uncertainty; None where it says nothing of it."""
        if column is ATOMS:
            return self.atoms, self.atoms_sigma
        if column is TEMPERATURE:
            return self.temperature, self.temperature_sigma
        return None


def round_end(time: float) -> float:
    """A round time at or somewhat after one, in coarse steps: an edit of a duration seldom moves the axis."""
    step = 0.5 * 10.0 ** math.floor(math.log10(time))
    return step * math.ceil(1.02 * time / step)


def column_picture(
    column: Column,
    courses: Sequence[Course],
    end: float,
    bounds: Sequence[float],
    *,
    measured: Sequence[MeasuredPoint] = (),
    cursor: float | None = None,
) -> Picture:
    """One quantity along ramps.

    courses : the one in question first
    end : [s] of the time axis
    bounds : [s] times at which stages end
    cursor : [s] time that is read
    """
    shown = [(course, column.values(course.run)) for course in courses]
    points = [(point, value) for point in measured if (value := point.value(column)) is not None]
    axis = value_axis(column, [values for _course, values in shown], [value for _point, (value, _s) in points])
    curves = [upright(axis, bounds, Role.STAGE)] if bounds else []
    if column is DENSITY and axis.low < _CONDENSED < axis.high and courses and courses[0].run.gas.bosons:
        curves.append(Curve(name="", role=Role.FRACTION, x=np.array([0.0, end]), y=np.array([_CONDENSED, _CONDENSED])))
    for course, values in reversed(shown):
        y = values if column.linear else np.where(values > 0.0, values, np.nan)
        curves.append(Curve(name="", role=course.role, x=course.times, y=y))
    curves += [bar for point, (value, sigma) in points if (bar := _bar(axis, point.time, value, sigma)) is not None]
    marks = [
        Mark(name="", role=Role.MEASURED, x=point.time, y=value)
        for point, (value, _sigma) in points
        if math.isfinite(value) and axis.low <= value <= axis.high
    ]
    note = ""
    if shown:
        course, values = shown[0]
        if cursor is None:
            note = f"→ {column.text(last_of(values))}"
        else:
            here = value_at(course, values, cursor)
            note = column.text(here)
            curves.append(upright(axis, (cursor,), Role.CURSOR))
            if math.isfinite(here) and axis.low <= here <= axis.high:
                marks.append(Mark(name="", role=Role.CLOUD, x=cursor, y=here))
    return Picture(
        title=column.label,
        x=Axis(label=_("time"), unit="s", low=0.0, high=end, titled=False),
        y=axis,
        curves=tuple(curves),
        marks=tuple(marks),
        summary=f"{column.label}: {note}",
        note=note,
    )


def value_at(course: Course, values: Array, time: float) -> float:
    """A column of a ramp at a time: straight between rows, in logarithms where all is positive; NaN outside."""
    times = course.times
    if not len(times) or not times[0] <= time <= times[-1]:
        return math.nan
    if np.all(values > 0.0):
        return float(np.exp(np.interp(time, times, np.log(values))))
    return float(np.interp(time, times, values))


def last_of(values: Array) -> float:
    """The last value; NaN where there is none."""
    return float(values[-1]) if len(values) else math.nan


def upright(axis: Axis, times: Sequence[float], role: Role) -> Curve:
    """Lines from the lower to the upper end of the axis, at these times [s]."""
    x = np.repeat(np.asarray(times, dtype=np.float64), 3)
    x[2::3] = np.nan
    return Curve(name="", role=role, x=x, y=np.tile([axis.low, axis.high, np.nan], len(times)))


def _bar(axis: Axis, time: float, value: float, sigma: float | None) -> Curve | None:
    """An error bar, as far as the axis goes."""
    if not sigma or not math.isfinite(value):
        return None
    low, high = max(value - sigma, axis.low), min(value + sigma, axis.high)
    return Curve(name="", role=Role.MEASURED, x=np.array([time, time]), y=np.array([low, high]))


def decades(least: float, most: float) -> tuple[float, float]:
    """Exponents of whole decades that hold a range; a little more where it ends at one, instead of a whole one."""
    low, high = math.log10(least), math.log10(most)
    bottom, top = math.floor(low + 1e-6), math.ceil(high - 1e-6)
    return (
        bottom - (_BESIDE if low - bottom < _NEAR else 0.0),
        top + (_BESIDE if top - high < _NEAR else 0.0),
    )


def value_axis(column: Column, values: Sequence[Array], points: Sequence[float]) -> Axis:
    """Limits that move in coarse steps, so that a change of the ramp seldom changes the axis."""
    finite = np.concatenate([*values, np.asarray(points, dtype=np.float64), np.empty(0)])
    finite = finite[np.isfinite(finite) & (finite > 0.0)]
    if column.linear:
        top = float(np.max(finite)) if finite.size else 10.0
        return Axis(
            label=column.label, unit=column.unit, low=0.0, high=2.0 * math.ceil(0.52 * max(top, 1.0)), titled=False
        )
    if not finite.size:
        return Axis(label=column.label, unit=column.unit, low=0.1, high=1.0, log=True, titled=False)
    low, high = decades(float(np.min(finite)), float(np.max(finite)))
    low = max(low, high - MOST_DECADES)
    return Axis(
        label=column.label,
        unit=column.unit,
        low=10.0**low,
        high=10.0**high,
        log=True,
        prefixed=column.prefixed,
        titled=False,
    )
