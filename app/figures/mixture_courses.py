"""Two clouds along one ramp: one small picture a quantity, both species in each, all over the same time."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from app.answers.sympathetic import SympatheticAnswer
from app.figures.picture import Array, Axis, Curve, Label, Mark, Picture, Role
from app.figures.ramp_columns import ATOMS, TEMPERATURE, Column, upright, value_axis
from app.language import translate as _

DEGENERACY = Column(name="reduced_temperature", symbol="T/Tc", label=_("T/Tc, T/TF"))
CONTACT_RATE = Column(name="contact_rate", symbol="Γ₁₂", label=_("collisions/s"))
OVERLAP = Column(name="overlap_share", symbol="overlap", label=_("overlap"), linear=True)
RELAXATION = Column(name="relaxation_time", symbol="τ₁₂", label=_("rethermalisation"), unit="s", prefixed=True)

MIXTURE_COLUMNS = (TEMPERATURE, ATOMS, DEGENERACY, CONTACT_RATE, RELAXATION, OVERLAP)

_NAMED_AT = (0.25, 0.6)  # of the time axis
_OFF = 0.09  # of the value axis, that a name stands off its curve


@dataclass(frozen=True, kw_only=True, eq=False)
class Line:
    """A quantity of one of the two along the ramp, or of both where it has no name."""

    name: str
    role: Role
    time: Array
    values: Array

    def at(self, time: float) -> float:
        """The value at a time; NaN outside."""
        if not len(self.time) or not self.time[0] <= time <= self.time[-1]:
            return math.nan
        return float(np.interp(time, self.time, self.values))

    @property
    def last(self) -> float:
        return float(self.values[-1]) if len(self.values) else math.nan


def lines_of(answer: SympatheticAnswer, column: Column, names: tuple[str, str]) -> tuple[Line, ...]:
    """A column of both species, or of their contact."""
    run = answer.run
    time = run.passenger.time
    contact = run.contact
    if column in (OVERLAP, RELAXATION):
        values: Array = getattr(contact, column.name)
        return (Line(name="", role=Role.TOTAL, time=time, values=values),)
    if column is CONTACT_RATE:
        columns = (contact.coolant_collision_rate, contact.passenger_collision_rate)
        times = (time, time)
    else:
        columns = (column.values(run.coolant), column.values(run.passenger))
        times = (run.coolant.time, time)
    return tuple(
        Line(name=name, role=role, time=t, values=values)
        for name, role, t, values in zip(names, (Role.FIRST, Role.SECOND), times, columns, strict=True)
    )


def course_picture(
    column: Column, lines: Sequence[Line], end: float, bounds: Sequence[float], cursor: float | None = None
) -> Picture:
    """One quantity along the ramp.

    end : [s] of the time axis
    bounds : [s] times at which stages end
    cursor : [s] time that is read
    """
    axis = _axis(column, lines)
    curves = [upright(axis, bounds, Role.STAGE)] if bounds else []
    if column is DEGENERACY and axis.low < 1.0 < axis.high:
        curves.append(Curve(name="", role=Role.FRACTION, x=np.array([0.0, end]), y=np.array([1.0, 1.0])))
    for line in lines:  # the passenger's dashes over the first one's line, which they may follow
        shown = line.values if column.linear else np.where(line.values > 0.0, line.values, np.nan)
        curves.append(Curve(name="", role=line.role, x=line.time, y=shown))
    marks: list[Mark] = []
    if cursor is None:
        read = [line.last for line in lines]
    else:
        read = [line.at(cursor) for line in lines]
        curves.append(upright(axis, (cursor,), Role.CURSOR))
        marks = [
            Mark(name="", role=Role.CLOUD, x=cursor, y=value)
            for value in read
            if math.isfinite(value) and axis.low <= value <= axis.high
        ]
    said = _joined([column.text(value) for value in read])
    note = f"→ {said}" if cursor is None else said
    return Picture(
        title=column.label,
        x=Axis(label=_("time"), unit="s", low=0.0, high=end, titled=False),
        y=axis,
        curves=tuple(curves),
        marks=tuple(marks),
        labels=_names(axis, lines),
        summary=f"{column.label}: {note}",
        note=note,
    )


def _joined(texts: Sequence[str]) -> str:
    """Two values; a unit that is that of both is written once."""
    units = {text.partition(" ")[2] for text in texts}
    if len(units) > 1:
        return ", ".join(texts)
    return ", ".join([*(text.partition(" ")[0] for text in texts[:-1]), *texts[-1:]])


def _axis(column: Column, lines: Sequence[Line]) -> Axis:
    if column is OVERLAP:
        return Axis(label=column.label, unit="", low=0.0, high=1.05, titled=False)
    return value_axis(column, [line.values for line in lines], [])


def _names(axis: Axis, lines: Sequence[Line]) -> tuple[Label, ...]:
    """The upper curve is named above it, the lower one below, at different times: they may lie on each other."""
    named = [line for line in lines if line.name and len(line.time)]
    if len(named) < 2:
        return ()
    spans = [line.time[-1] for line in named]
    places = [share * float(min(spans)) for share in _NAMED_AT]
    heights = [np.array([line.at(place) for place in places]) for line in named]
    upper = 0 if np.nansum(np.sign(heights[0] - heights[1])) >= 0.0 else 1
    labels = []
    for place, line in enumerate(named):
        up = place == upper
        time = places[place]
        value = line.at(time)
        if math.isfinite(value) and axis.low <= value <= axis.high:
            labels.append(Label(text=line.name, role=line.role, x=time, y=_moved(axis, value, _OFF if up else -_OFF)))
    return tuple(labels)


def _moved(axis: Axis, value: float, share: float) -> float:
    """A value some way up the axis, and within it."""
    if axis.log:
        low, high = math.log10(axis.low), math.log10(axis.high)
        place = math.log10(value) + share * (high - low)
        return float(10.0 ** min(max(place, low + 0.05 * (high - low)), high - 0.06 * (high - low)))
    span = axis.high - axis.low
    return min(max(value + share * span, axis.low + 0.05 * span), axis.high - 0.06 * span)
