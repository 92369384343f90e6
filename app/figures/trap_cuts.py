"""The potential of a trap along its axes and along gravity, with the energies that a cloud and its condensate have."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from app.answers.profile import round_up
from app.answers.trap_cuts import Cut
from app.answers.trap_shape import TrapShape
from app.figures.picture import Array, Axis, Curve, Label, Mark, Picture, Role
from app.language import translate as _
from app.trap_words import sag_text
from app.units import best_unit, factor
from app.words import number, temperature
from physics.constants import boltzmann

_OVER, _UNDER = 1.2, 0.05
"""How far over the top of the well a cut is shown at least; how far under its bottom, in parts of that."""

_ABOVE = 0.055
"""Distance of a label from the line that it names, in parts of the plot's height."""

_HALF_A_LINE = 0.06
"""Half the height of a label, in parts of the plot's height."""

_BELOW = 0.13
"""Distance of a label from the mark above it, in parts of the plot's height."""

_NAMED_AT = 1.13
"""Height at which the harmonic curve is named, in parts of the top of the well."""

_SMALL = 0.02
"""Part of the height below which a level lies on the bottom of the well."""


@dataclass(frozen=True, kw_only=True)
class CloudLevels:
    """Energies of a cloud over the bottom of its trap. [J]

    thermal : kT
    filled : chemical potential of a condensate, or Fermi energy; None without
    filled_name : its symbol
    """

    thermal: float
    filled: float | None = None
    filled_name: str = "µ"


def energy_unit(energy: float) -> str:
    """The unit, as a temperature, in which energies up to this one [J] read well."""
    return best_unit(energy / boltzmann, ("nK", "µK", "mK"))


def length_unit(reach: float) -> str:
    """The unit in which places up to this one [m] read well."""
    return "mm" if reach >= 3e-3 else "µm"


def cut_picture(shape: TrapShape, cut: Cut, levels: CloudLevels) -> Picture:
    """One cut, the harmonic curve dashed, with the depth, kT and the condensate's chemical potential."""
    seen = (cut.distance > -cut.direction.backward) & (cut.distance < cut.direction.forward)
    high = shape.top if shape.answer.trapped else float(np.max(np.abs(cut.energy[seen])))
    unit, length = energy_unit(high), length_unit(cut.direction.reach)
    kelvin, metre = boltzmann * factor(unit), factor(length)
    top = shape.top / kelvin
    s, energy = cut.distance / metre, cut.energy / kelvin
    x = Axis(
        label=_along(shape, cut), unit=length, low=-cut.direction.backward / metre, high=cut.direction.forward / metre
    )
    # Limits in coarse steps, so that a change of the trap seldom draws the frame anew.
    over = round_up(_OVER * top)
    low, high = (-_UNDER * over, over) if shape.answer.trapped else _range(energy[seen])
    y = Axis(label=_("potential U/k"), unit=unit, low=low, high=high)
    # Far outside the plot a steep curve would only cost ink.
    harmonic = np.where(cut.harmonic / kelvin < 2.0 * y.high, cut.harmonic / kelvin, np.nan)
    height = y.high - y.low
    shown = np.clip(energy, y.low - 3.0 * height, y.high + 3.0 * height)
    curves: list[Curve] = []
    labels: list[Label] = []
    last: list[Label] = []  # gives way to the others where there is little room
    if shape.potential is not None and np.any(np.isfinite(harmonic)):
        curves.append(Curve(name="", role=Role.CLASSICAL, x=s, y=harmonic))
        _left, right = _turning_points(cut.distance, cut.harmonic, _NAMED_AT * shape.top, x, metre)
        last.append(Label(text=_("harmonic"), role=Role.CLASSICAL, x=right, y=_NAMED_AT * top, side=1))
    depth = shape.answer.survey.depth
    if depth is not None and depth / kelvin < y.high:
        curves.append(_level(x, depth / kelvin, Role.DECADE))
        text = _("depth {T}").format(T=temperature(depth / boltzmann))
        labels.append(Label(text=text, role=Role.DECADE, x=0.0, y=depth / kelvin + _ABOVE * height))
    for place in cut.knife:
        if x.low < place / metre < x.high:
            curves.append(_upright(y, place / metre))
            labels.append(Label(text=_("knife"), role=Role.FRACTION, x=place / metre, y=0.45 * top))
    for energy_of, name, role, side in (
        (levels.thermal, "kT", Role.THERMAL, 1),
        (levels.filled, levels.filled_name, Role.CONDENSATE, -1),
    ):
        if energy_of is not None and shape.answer.trapped and _SMALL < energy_of / shape.top < _OVER:
            left, right = _turning_points(cut.distance, cut.energy, energy_of, x, metre)
            level = energy_of / kelvin
            curves.append(Curve(name="", role=role, x=np.array([left, right]), y=np.array([level, level])))
            text = _("{name} {T}").format(name=name, T=temperature(energy_of / boltzmann))
            # Beside the curves even where the top of the text meets them.
            top_of_text = energy_of + _HALF_A_LINE * height * kelvin
            edges = [
                _turning_points(cut.distance, potential, top_of_text, x, metre)
                for potential in (cut.energy, cut.harmonic)
            ]
            outer = [ends[int(side > 0)] for ends in edges] + [right if side > 0 else left]
            inside = [place for place in outer if x.low < place < x.high]
            place = max(inside, default=right) if side > 0 else min(inside, default=left)
            labels.append(Label(text=text, role=role, x=place, y=level, side=side))
    curves.append(Curve(name="", role=Role.FIRST, x=s, y=shown))
    marks: tuple[Mark, ...] = ()
    if cut.escape is not None and x.low < cut.escape / metre < x.high:
        there = float(np.interp(cut.escape, cut.distance, cut.energy)) / kelvin
        marks = (Mark(name="", role=Role.THRESHOLD, x=cut.escape / metre, y=there),)
        labels.append(Label(text=_("way out"), role=Role.THRESHOLD, x=cut.escape / metre, y=there - _BELOW * height))
    return Picture(
        title=cut_title(cut),
        x=x,
        y=y,
        curves=tuple(curves),
        marks=marks,
        labels=(*labels, *last),
        summary=_summary(shape, cut, levels),
        note=_note(shape, cut),
    )


def cut_title(cut: Cut) -> str:
    """What a cut runs along."""
    name = cut.direction.name
    if name == "gravity":
        return _("along gravity")
    if cut.direction.upright:
        return _("along {axis} and gravity").format(axis=name)
    return _("along {axis}").format(axis=name)


def _along(shape: TrapShape, cut: Cut) -> str:
    if not shape.answer.trapped:
        return _("height over the middle") if cut.direction.upright else _("distance from the middle")
    return _("height over the minimum") if cut.direction.upright else _("distance from the minimum")


def _range(energy: Array) -> tuple[float, float]:
    """From the least to the highest energy, and a bit more."""
    low, high = float(np.min(energy)), float(np.max(energy))
    margin = 0.05 * (high - low) or 1.0
    return low - margin, high + margin


def _note(shape: TrapShape, cut: Cut) -> str:
    parts = []
    if cut.frequency is not None:
        parts.append(f"{number(cut.frequency, 4)} Hz")
    if cut.direction.upright and shape.answer.survey.sag is not None:
        parts.append(_("sag {sag}").format(sag=sag_text(shape.answer)))
    if not cut.direction.upright and cut.direction.name.startswith("axis"):
        parts.append(_vector(cut.direction.vector))
    return " · ".join(parts)


def _vector(vector: Array) -> str:
    texts = (f"{float(part) + 0.0:.2f}".replace("-0.00", "0.00").replace("-", "−") for part in vector)
    return f"({', '.join(texts)})"


def _summary(shape: TrapShape, cut: Cut, levels: CloudLevels) -> str:
    depth = shape.answer.survey.depth
    return _("The potential {where}; depth {depth}, kT {kT}.").format(
        where=cut_title(cut),
        depth="–" if depth is None else temperature(depth / boltzmann),
        kT=temperature(levels.thermal / boltzmann),
    )


def _level(x: Axis, height: float, role: Role) -> Curve:
    return Curve(name="", role=role, x=np.array([x.low, x.high]), y=np.array([height, height]))


def _upright(y: Axis, place: float) -> Curve:
    return Curve(name="", role=Role.FRACTION, x=np.array([place, place]), y=np.array([y.low, y.high]))


def _turning_points(distance: Array, potential: Array, energy: float, x: Axis, metre: float) -> tuple[float, float]:
    """Where atoms of an energy turn round on either side, or the end of the plot."""
    ends = []
    for side in (distance <= 0.0, distance >= 0.0):
        s, U = distance[side], potential[side]
        outwards = np.argsort(np.abs(s))
        s, U = s[outwards] / metre, U[outwards]
        above = np.flatnonzero(energy <= U)
        if not above.size or above[0] == 0:
            ends.append(x.high if s[-1] > 0.0 else x.low)
            continue
        k = above[0]
        place = s[k - 1] + (s[k] - s[k - 1]) * (energy - U[k - 1]) / (U[k] - U[k - 1])
        ends.append(float(np.clip(place, x.low, x.high)))
    return ends[0], ends[1]
