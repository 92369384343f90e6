"""Profiles of the cloud: density along a trap axis through the centre, and the column density along it."""

from __future__ import annotations

import math
from enum import Enum

import numpy as np

from app.engine import ProfileAnswer, round_up
from app.figures.picture import Array, Axis, Curve, Picture, Role
from app.figures.ticks import raised
from app.language import translate as _
from app.units import factor
from app.words import number

AXES = ("x", "y", "z")
"""Names of the trap axes, in the order of the plan's frequencies."""


class Depth(Enum):
    """Which density a profile shows."""

    DENSITY = "density"
    COLUMN = "column density"


_UNITS = {Depth.DENSITY: "cm^-3", Depth.COLUMN: "cm^-2"}

_LENGTHS = ("nm", "µm", "mm", "m")


def profile_picture(answer: ProfileAnswer, shows: Depth, *, log: bool = False) -> Picture:
    """Thermal, condensed and total density, and the classical cloud of the same N and T dashed."""
    profile = answer.density if shows is Depth.DENSITY else answer.column
    unit = _UNITS[shows]
    reach = float(answer.positions[-1])
    length = next((name for name in reversed(_LENGTHS) if reach >= 3.0 * factor(name)), "nm")
    x = answer.positions / factor(length)
    parts = [(_("total"), Role.TOTAL, profile.total), (_("classical cloud"), Role.CLASSICAL, profile.classical)]
    if np.any(profile.condensate > 0.0):
        parts[1:1] = [
            (_("thermal"), Role.THERMAL, profile.thermal),
            (_("condensate"), Role.CONDENSATE, profile.condensate),
        ]
    peak = max(float(np.max(values)) for _name, _role, values in parts) / factor(unit)
    axis = AXES[answer.axis]
    what = (
        _("density along {axis} through the centre")
        if shows is Depth.DENSITY
        else _("column density along {axis}, summed along {sight}")
    )
    title = what.format(axis=axis, sight=AXES[answer.line_of_sight])
    return Picture(
        title=title,
        x=Axis(label=_("position {axis}").format(axis=axis), unit=length, low=float(x[0]), high=float(x[-1])),
        y=_density_axis(shows, unit, peak, log),
        curves=tuple(
            Curve(name=name, role=role, x=x, y=_above_zero(values / factor(unit), log)) for name, role, values in parts
        ),
        summary=_("{what}; largest value {peak} {unit}").format(what=title, peak=number(peak), unit=raised(unit)),
    )


def _density_axis(shows: Depth, unit: str, top: float, log: bool) -> Axis:
    label = _("density n") if shows is Depth.DENSITY else _("column density")
    if log:
        high = 10.0 ** math.ceil(math.log10(1.2 * top))
        return Axis(label=label, unit=unit, low=1e-5 * high, high=high, log=True)
    # A power of ten in the title keeps the ticks short; a logarithmic axis has its own powers.
    power = 3 * math.floor(math.log10(top) / 3.0)
    return Axis(label=label, unit=unit, low=0.0, high=round_up(1.05 * top), power=power)


def _above_zero(values: Array, log: bool) -> Array:
    return np.where(values > 0.0, values, np.nan) if log else values
