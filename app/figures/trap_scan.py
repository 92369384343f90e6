"""Frequencies, depth and sag of a trap along a control that is turned."""

from __future__ import annotations

import math

import numpy as np

from app.answers.profile import round_up
from app.answers.trap_scan import TrapScan
from app.answers.trap_shape import LABORATORY
from app.figures.picture import Array, Axis, Curve, Label, Picture, Role
from app.figures.trap_cuts import energy_unit
from app.language import translate as _
from app.trap_sentences import CONTROL_UNITS, control_name, control_text
from app.units import best_unit, factor
from physics.constants import boltzmann

_ROLES = (Role.FIRST, Role.SECOND, Role.THIRD)
_NAMED_AT = 0.05  # of the curve, from its end
_FAR_APART = 30.0
"""Ratio of the highest to the lowest frequency from which their axis goes by decades: one focused beam has more."""


def scan_pictures(scan: TrapScan) -> tuple[Picture, Picture, Picture]:
    """Frequencies, named for the nearest axis of the laboratory; depth; sag."""
    top = float(np.nanmax(scan.depth)) if np.any(np.isfinite(scan.depth)) else boltzmann * 1e-6
    unit = energy_unit(top)
    sags = np.abs(scan.sag[np.isfinite(scan.sag)])
    length = best_unit(float(np.max(sags)) if sags.size else 1e-6, ("nm", "µm", "mm"))
    return (
        _picture(scan, _("frequencies"), _("frequency f"), "Hz", np.transpose(scan.frequencies), LABORATORY),
        _picture(scan, _("depth"), _("depth U/k"), unit, scan.depth[np.newaxis] / boltzmann / factor(unit), ("",)),
        _picture(scan, _("sag"), _("sag"), length, scan.sag[np.newaxis] / factor(length), ("",)),
    )


def _picture(scan: TrapScan, what: str, label: str, unit: str, values: Array, names: tuple[str, ...]) -> Picture:
    x_axis, scale = _x_axis(scan)
    x = scan.values / scale
    finite = values[np.isfinite(values)]
    y = _y_axis(label, unit, values)
    curves: list[Curve] = []
    labels: list[Label] = []
    for row, name, role in zip(values, names, _ROLES, strict=False):
        # Between points that hold nothing the line is broken; those still to come are passed over.
        curves.append(Curve(name="", role=role, x=x[scan.done], y=row[scan.done]))
        if name and np.any(np.isfinite(row)):
            # Curves that lie on one another are named one beside the other.
            known = np.flatnonzero(np.isfinite(row))
            place = int(known[round((len(known) - 1) * (1.0 - _NAMED_AT * (1 + len(labels))))])
            labels.append(Label(text=name, role=role, x=float(x[place]), y=float(row[place])))
    lost, words = _lost(scan, x, x_axis, y)
    now = scan.now / scale
    curves += [*lost, Curve(name="", role=Role.CLOUD, x=np.array([now, now]), y=np.array([y.low, y.high]))]
    labels += [*words, Label(text=_("now"), role=Role.CLOUD, x=now, y=_at(y, 0.92), side=1)]
    return Picture(
        title=what,
        x=x_axis,
        y=y,
        curves=tuple(curves),
        labels=tuple(labels),
        summary=_("{what} along the {control}; now {now}.").format(
            what=what, control=control_name(scan.control), now=control_text(scan.control, scan.now)
        ),
        note="" if finite.size or not scan.complete else _("no value here"),
    )


def _y_axis(label: str, unit: str, values: Array) -> Axis:
    """From zero; by decades where one of several curves would lie along the bottom."""
    finite = values[np.isfinite(values)]
    usual = [float(np.median(row[np.isfinite(row)])) for row in values if np.any(np.isfinite(row))]
    if usual and 0.0 < _FAR_APART * min(usual) < max(usual) and np.min(finite) > 0.0:
        low, high = math.floor(math.log10(np.min(finite))), math.ceil(math.log10(np.max(finite)))
        return Axis(label=label, unit=unit, low=10.0**low, high=10.0**high, log=True)
    return Axis(label=label, unit=unit, low=_low(finite), high=_high(finite))


def _at(axis: Axis, share: float) -> float:
    """The place at a share of the length of an axis."""
    if axis.log:
        return float(axis.low ** (1.0 - share) * axis.high**share)
    return float(axis.low + share * (axis.high - axis.low))


def _x_axis(scan: TrapScan) -> tuple[Axis, float]:
    low, high = float(scan.values[0]), float(scan.values[-1])
    unit = best_unit(scan.now, CONTROL_UNITS[scan.control.kind])
    scale = factor(unit)
    axis = Axis(
        label=control_name(scan.control), unit=unit, low=low / scale, high=high / scale, log=low > 0.0
    )  # fmt: skip
    return axis, scale


def _lost(scan: TrapScan, x: Array, x_axis: Axis, y: Axis) -> tuple[list[Curve], list[Label]]:
    """The ranges in which nothing is held: an upright line where they begin, and a word."""
    places = np.flatnonzero(scan.done)
    held = scan.trapped[places]
    curves: list[Curve] = []
    labels: list[Label] = []
    start = 0
    for stop in range(1, len(places) + 1):
        if stop < len(places) and held[stop] == held[start]:
            continue
        if not held[start]:
            ends = [x[places[start]], x[places[stop - 1]]]
            if start > 0:
                ends[0] = _between(x_axis, x[places[start - 1]], ends[0])
                curves.append(_upright(y, ends[0]))
            if stop < len(places):
                ends[1] = _between(x_axis, ends[1], x[places[stop]])
                curves.append(_upright(y, ends[1]))
            middle = _between(x_axis, *ends)
            labels.append(Label(text=_("not trapped"), role=Role.CLASSICAL, x=middle, y=_at(y, 0.5)))
        start = stop
    return curves, labels


def _between(axis: Axis, left: float, right: float) -> float:
    return float(math.sqrt(left * right) if axis.log else 0.5 * (left + right))


def _upright(y: Axis, place: float) -> Curve:
    return Curve(name="", role=Role.CLASSICAL, x=np.array([place, place]), y=np.array([y.low, y.high]))


def _high(finite: Array) -> float:
    top = float(np.max(finite)) if finite.size else 0.0
    return round_up(1.08 * top) if top > 0.0 else 1.0


def _low(finite: Array) -> float:
    bottom = float(np.min(finite)) if finite.size else 0.0
    return -round_up(-1.08 * bottom) if bottom < 0.0 else 0.0
