"""What the choice of the truncation parameter does to a designed ramp: atoms at the target, and time to it."""

from __future__ import annotations

import math

import numpy as np

from app.figures.picture import Array, Axis, Curve, Mark, Picture, Role
from app.language import translate as _
from app.words import number
from physics.ramp_design import RampDesign


def eta_picture(design: RampDesign) -> Picture:
    """Atoms at the end of runs at held truncation parameters; those that miss the target apart."""
    trade = design.trade_off
    reached = trade.reached.astype(bool)
    atoms = trade.atoms
    # Runs that miss the target end with hardly an atom: they do not set the range where others reach it.
    end = float(design.simulated.atoms[-1]) if len(design.simulated.time) else math.nan
    told = np.append(atoms[reached] if np.any(reached) else atoms[atoms > 0.0], end)
    low, high = _decades(told[np.isfinite(told)])
    curves = (
        Curve(name=_("reaches the target"), role=Role.FIRST, x=trade.truncation, y=np.where(reached, atoms, np.nan)),
        Curve(name=_("misses it"), role=Role.CLASSICAL, x=trade.truncation, y=np.where(reached, np.nan, atoms)),
    )
    marks = (Mark(name=_("chosen"), role=Role.CLOUD, x=design.truncation, y=end),) if low <= end <= high else ()
    return Picture(
        title=_("atoms left against η"),
        x=_linear(_("truncation parameter η at the start"), "", trade.truncation),
        y=Axis(label=_("atoms N at the end"), unit="", low=low, high=high, log=True),
        curves=tuple(curve for curve in curves if np.any(np.isfinite(curve.y))),
        marks=marks,
        summary=_("most atoms, {atoms}, at η = {eta}").format(atoms=number(end), eta=number(design.truncation)),
        note=f"η = {number(design.truncation)}",
    )


def time_picture(design: RampDesign) -> Picture:
    """Most atoms at the target for each time that it may take."""
    trade = design.trade_off
    low, high = _decades(trade.best_atoms)
    end = float(design.simulated.atoms[-1]) if len(design.simulated.time) else math.nan
    time = float(design.simulated.time[-1]) if len(design.simulated.time) else math.nan
    times = trade.times if len(trade.times) else np.array([time])
    span = times[np.isfinite(times) & (times > 0.0)]
    first, last = (float(span.min()), float(span.max())) if span.size else (1.0, 10.0)
    inside = low <= end <= high and math.isfinite(time)
    return Picture(
        title=_("atoms left against time"),
        x=Axis(label=_("time to the target"), unit="s", low=0.8 * min(first, time or first), high=1.25 * last, log=True)
        if last / first > 3.0
        else _linear(_("time to the target"), "s", np.array([first, last])),
        y=Axis(label=_("atoms N at the target"), unit="", low=low, high=high, log=True),
        curves=(Curve(name="", role=Role.FIRST, x=trade.times, y=trade.best_atoms),),
        marks=(Mark(name="", role=Role.CLOUD, x=time, y=end),) if inside else (),
        summary=_("{atoms} atoms after {time} s").format(atoms=number(end), time=number(time)),
        note=f"{number(time)} s",
    )


def _decades(values: Array) -> tuple[float, float]:
    if not len(values):
        return 1.0, 10.0
    top = float(np.max(values))
    bottom = max(float(np.min(values)), 1e-4 * top)
    low, high = math.log10(bottom), math.log10(top)
    margin = max(0.08 * (high - low), 0.05)
    return 10.0 ** (low - margin), 10.0 ** (high + margin)


def _linear(label: str, unit: str, values: Array) -> Axis:
    low, high = float(np.min(values)), float(np.max(values))
    margin = 0.04 * (high - low) or 0.1 * (abs(high) or 1.0)
    return Axis(label=label, unit=unit, low=max(low - margin, 0.0), high=high + margin)
