"""Slices through the map: one quantity against temperature at fixed N, or against N at fixed temperature."""

from __future__ import annotations

import math

import numpy as np

from app.engine import Against, Joint, SlicesAnswer
from app.figures.picture import Array, Axis, Curve, Mark, Picture, Role
from app.language import translate as _
from app.quantities import QUANTITIES, Row, display_factor
from app.words import number, temperature

LINEAR = frozenset({"condensate_fraction", "atoms_left_at_target", "classical_density_error", "classical_energy_error"})
"""Quantities that read best on a linear axis; the others span decades."""


def slice_picture(answer: SlicesAnswer, name: str, against: Against, unit: str | None = None) -> Picture:
    """One quantity of `answer` along one direction, the cloud and the threshold marked."""
    row = QUANTITIES[name]
    unit = unit or row.units[0]
    place = answer.names.index(name)
    along_t = against is Against.TEMPERATURE
    x = answer.temperature_grid if along_t else answer.atoms_grid
    raw = answer.values_temperature[place] if along_t else answer.values_atoms[place]
    factor = display_factor(unit, row)
    y, now = raw / factor, answer.now[place] / factor
    axis = _value_axis(row, unit, y, now)
    if axis.log:
        y = np.where(y > 0.0, y, np.nan)
    at = answer.temperature if along_t else answer.atoms
    threshold = answer.threshold_temperature if along_t else answer.threshold_atoms
    # The title names the curve; a legend would only say it again.
    curves = [Curve(name="", role=Role.FIRST, x=x, y=y)]
    if x[0] < threshold < x[-1]:
        curves.append(
            Curve(
                name=_("threshold"),
                role=Role.THRESHOLD,
                x=np.array([threshold, threshold]),
                y=np.array([axis.low, axis.high]),
            )
        )
    marks: tuple[Mark, ...] = ()
    if math.isfinite(now) and axis.low <= now <= axis.high:
        joint = (answer.joints_temperature if along_t else answer.joints_atoms)[place]
        outline = None if joint is None else _ellipse(at, now, joint, factor, axis.log)
        marks = (Mark(name=_("cloud"), role=Role.CLOUD, x=at, y=now, outline=outline),)
    fixed = (
        _("at N = {N}").format(N=number(answer.atoms))
        if along_t
        else _("at T = {T}").format(T=temperature(answer.temperature))
    )
    return Picture(
        title=row.label,
        x=Axis(label=_("temperature T"), unit="K", low=float(x[0]), high=float(x[-1]), log=True, prefixed=True)
        if along_t
        else Axis(label=_("atoms N"), unit="", low=float(x[0]), high=float(x[-1]), log=True),
        y=axis,
        curves=tuple(curves),
        marks=marks,
        summary=_("{what} {fixed}; now {value}").format(what=row.label, fixed=fixed, value=number(now)),
        # A note is redrawn with the data, a title with the frame: what moves with the cloud stands in the note.
        note=fixed if np.any(np.isfinite(y)) else _("no value here"),
    )


def _ellipse(at: float, now: float, joint: Joint, factor: float, log: bool) -> Curve | None:
    """One standard deviation around the cloud. The quantity follows from the input, so that the two are correlated and
    the ellipse leans; on the map, N and T are measured independently and it does not."""
    angle = np.linspace(0.0, 2.0 * np.pi, 73)
    along = np.cos(angle)
    across = joint.correlation * along + math.sqrt(1.0 - joint.correlation**2) * np.sin(angle)
    if log and not math.isfinite(joint.log_deviation):
        return None
    y = now * np.exp(joint.log_deviation * across) if log else now + joint.deviation / factor * across
    return Curve(name="", role=Role.UNCERTAINTY, x=at * np.exp(joint.input_deviation * along), y=y)


def _value_axis(row: Row, unit: str, values: Array, now: float) -> Axis:
    """Limits that move in coarse steps, so that a change of the cloud seldom changes the axis."""
    finite = values[np.isfinite(values)]
    shown = "" if unit == "1" else unit
    if row.name in LINEAR or not np.any(finite > 0.0):
        if row.name in ("condensate_fraction", "atoms_left_at_target"):
            top = 1.0 / display_factor(unit, row)
            return Axis(label=row.label, unit=shown, low=-0.02 * top, high=1.05 * top)
        low, high = (float(np.min(finite)), float(np.max(finite))) if finite.size else (0.0, 1.0)
        step = 10.0 ** math.floor(math.log10(max(high - low, abs(high), 1e-300)))
        low, high = step * math.floor(low / step), step * math.ceil(high / step)
        return Axis(label=row.label, unit=shown, low=low, high=high if high > low else low + step)
    positive = finite[finite > 0.0]
    high_exponent = math.ceil(math.log10(float(np.max(positive))) + 0.05)
    low_exponent = math.floor(math.log10(float(np.min(positive))) - 0.05)
    # Six decades tell a story; what lies further down is not worth the ink.
    low_exponent = max(low_exponent, high_exponent - 6)
    if math.isfinite(now) and now > 0.0:
        low_exponent = min(low_exponent, math.floor(math.log10(now)))
    return Axis(label=row.label, unit=shown, low=10.0**low_exponent, high=10.0**high_exponent, log=True)
