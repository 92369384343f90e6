"""The potential of a trap over a plane: contours, where atoms leave, and where the cloud is."""

from __future__ import annotations

import math
from typing import cast

import numpy as np
from contourpy import ContourGenerator, LineType, contour_generator

from app.answers.profile import round_up
from app.answers.trap_section import Section
from app.answers.trap_shape import TrapShape
from app.figures.picture import Array, Axis, Curve, Field, Label, Mark, Picture, Role
from app.figures.trap_cuts import CloudLevels, energy_unit, length_unit
from app.language import translate as _
from app.units import factor
from app.words import temperature
from physics.constants import boltzmann

_TICKS = 5
_SHORTEST_LABELLED = 24  # points of a contour
_ARROW = 0.11  # length of the arrow at the way out, in parts of the plot
_HEAD = 0.022
_ABOVE = 0.032


def section_picture(shape: TrapShape, section: Section, levels: CloudLevels) -> Picture:
    """Contours up to the depth, and beyond; the cloud as the lines where U = kT and U = µ."""
    bottom, highest = 0.0, round_up(shape.top / boltzmann) * boltzmann
    if not shape.answer.trapped:
        # There is no well to fill with colour: all that is seen has its place on the scale.
        bottom, highest = float(np.min(section.energy)), float(np.max(section.energy))
    unit = energy_unit(max(abs(bottom), abs(highest)))
    kelvin = boltzmann * factor(unit)
    x_unit, y_unit = (length_unit(float(np.ptp(values)) / 2.0) for values in (section.x, section.y))
    x, y = section.x / factor(x_unit), section.y / factor(y_unit)
    axes = (
        Axis(label=_label(section, 0), unit=x_unit, low=float(x[0]), high=float(x[-1])),
        Axis(label=_label(section, 1), unit=y_unit, low=float(y[0]), high=float(y[-1])),
    )
    low, top = bottom / kelvin, highest / kelvin
    levels_shown = _levels(low, top)
    energy = section.energy / kelvin
    inside = ~(section.knife >= 0.0)
    seen = np.where(inside, energy, np.nan)
    contours = contour_generator(x, y, energy, name="serial", line_type=LineType.Separate)
    lines: list[Curve] = []
    labels: list[Label] = []
    marks: list[Mark] = []
    lift = _ABOVE * (axes[1].high - axes[1].low)
    if section.minimum is not None:
        middle = section.minimum[0] / factor(x_unit), section.minimum[1] / factor(y_unit)
        marks.append(Mark(name="", role=Role.THRESHOLD_OF_MODEL, x=middle[0], y=middle[1]))
        for energy_of, name, role in (
            (levels.filled, levels.filled_name, Role.CONDENSATE),
            (levels.thermal, "kT", Role.CLOUD),
        ):
            pieces = [] if energy_of is None else _around(_pieces(contours, energy_of / kelvin), middle)
            if pieces:
                lines.append(_joined(pieces, role))
                labels.append(_on_top(pieces, role, _("U = {name}").format(name=name), lift))
    if section.escape is not None and not section.aside:
        arrow, mark, label = _way_out(section, axes, factor(x_unit), factor(y_unit))
        lines.append(arrow)
        marks.append(mark)
        labels.append(label)
    depth = shape.answer.survey.depth
    if depth is not None and depth <= shape.top * 1.001:
        # At a pass the line crosses itself: just below it, it is the rim of what is held.
        pieces = _pieces(contours, (1.0 - 1e-4) * depth / kelvin)
        if pieces:
            lines.append(_joined(pieces, Role.THRESHOLD))
            text = _("depth {T}").format(T=temperature(depth / boltzmann))
            inner = pieces if section.minimum is None else _around(pieces, middle)
            labels.append(
                _on_top([max(inner, key=lambda piece: float(np.max(piece[:, 1])))], Role.THRESHOLD, text, lift)
            )
    if np.any(section.knife >= 0.0):
        knife = contour_generator(x, y, section.knife, name="serial", line_type=LineType.Separate)
        pieces = _pieces(knife, 0.0)
        if pieces:
            lines.append(_joined(pieces, Role.FRACTION))
            labels.append(_on_top(pieces, Role.FRACTION, _("knife")))
    for level in levels_shown:
        pieces = _pieces(contours, level)
        if pieces:
            lines.insert(0, _joined(pieces, Role.DECADE))
            if max(map(len, pieces)) >= _SHORTEST_LABELLED:
                labels.append(_on_top(pieces, Role.DECADE, f"{level:g}"))
    return Picture(
        title=_title(shape, section),
        x=axes[0],
        y=axes[1],
        field=Field(
            x=x,
            y=y,
            shade=np.clip((seen - low) / (top - low), 0.0, 1.0),
            split=1.0,
            bar_label=_("potential U/k [{unit}]").format(unit=unit),
            ticks=tuple(
                ((level - low) / (top - low), f"{level:g}")
                for level in (low, *levels_shown)
                if level != low or low == 0.0
            ),
        ),
        curves=tuple(lines),
        marks=tuple(marks),
        labels=tuple(labels),
        summary=_("The potential over the plane {plane}.").format(plane=section.plane.name),
        note=_note(section),
    )


def _note(section: Section) -> str:
    if section.aside:
        return _("the way out lies beside this plane")
    if section.escape is not None:
        x, y = section.escape[:2]
        if not (section.x[0] <= x <= section.x[-1] and section.y[0] <= y <= section.y[-1]):
            return _("the way out lies further out")
    return ""


def _title(shape: TrapShape, section: Section) -> str:
    if not shape.answer.trapped:
        return _("potential over the plane {plane} through the middle").format(plane=section.plane.name)
    if section.plane.absolute:
        return _("potential over the plane {plane} through the minimum").format(plane=section.plane.name)
    return _("potential over the plane of {plane}").format(plane=section.plane.name)


def _label(section: Section, place: int) -> str:
    direction = (section.plane.first, section.plane.second)[place]
    return direction.name if section.plane.absolute else _("along {axis}").format(axis=direction.name)


def _levels(low: float, top: float) -> tuple[float, ...]:
    """Round energies between the lowest and the top, about five."""
    step = (top - low) / _TICKS
    power = 10.0 ** math.floor(math.log10(step))
    step = next(s * power for s in (1.0, 2.0, 5.0, 10.0) if s * power >= 0.999 * step)
    return tuple(step * k for k in range(math.floor(low / step) + 1, math.ceil(top / step)))


def _pieces(contours: ContourGenerator, level: float) -> list[Array]:
    return [piece for piece in cast(list[Array], contours.lines(level)) if len(piece) > 1]


def _joined(pieces: list[Array], role: Role) -> Curve:
    """Pieces as one broken curve."""
    gap = np.full((1, 2), np.nan)
    points = np.concatenate([part for piece in pieces for part in (piece, gap)])[:-1]
    return Curve(name="", role=role, x=points[:, 0], y=points[:, 1])


def _on_top(pieces: list[Array], role: Role, text: str, above: float = 0.0) -> Label:
    """A label where the longest piece is highest, or so much above."""
    longest = max(pieces, key=len)
    x, y = longest[int(np.argmax(longest[:, 1]))]
    return Label(text=text, role=role, x=float(x), y=float(y) + above)


def _around(pieces: list[Array], place: tuple[float, float]) -> list[Array]:
    """The closed pieces that run around a place; without one, those that leave the plot."""
    closed = [piece for piece in pieces if np.array_equal(piece[0], piece[-1])]
    inside = [piece for piece in closed if _encloses(piece, place)]
    return inside or [piece for piece in pieces if not np.array_equal(piece[0], piece[-1])]


def _encloses(piece: Array, place: tuple[float, float]) -> bool:
    """Whether a closed line runs around a place: a ray from there crosses it an odd number of times."""
    x, y = piece[:, 0] - place[0], piece[:, 1] - place[1]
    crossing = (y[:-1] > 0.0) != (y[1:] > 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        at = x[:-1] - y[:-1] * np.diff(x) / np.diff(y)
    return bool(np.count_nonzero(crossing & (at > 0.0)) % 2)


def _way_out(section: Section, axes: tuple[Axis, Axis], x_unit: float, y_unit: float) -> tuple[Curve, Mark, Label]:
    """An arrow in the direction in which atoms leave, its point at the way out."""
    assert section.escape is not None
    x, y, dx, dy = section.escape
    x, y = x / x_unit, y / y_unit
    width, height = axes[0].high - axes[0].low, axes[1].high - axes[1].low
    # in parts of the plot, where the arrow has its length
    u, v = dx / x_unit / width, dy / y_unit / height
    size = math.hypot(u, v) or 1.0
    u, v = u / size, v / size
    tip = np.array([_ARROW * u, _ARROW * v])
    back = np.array([[-u - 0.7 * v, -v + 0.7 * u], [-u + 0.7 * v, -v - 0.7 * u]]) * _HEAD
    path = np.array([[0.0, 0.0], tip, [np.nan, np.nan], tip + back[0], tip, tip + back[1]])
    arrow = Curve(name="", role=Role.TOTAL, x=x + path[:, 0] * width, y=y + path[:, 1] * height)
    mark = Mark(name="", role=Role.TOTAL, x=x, y=y)
    label = Label(text=_("way out"), role=Role.TOTAL, x=x, y=y + 0.5 * _ARROW * v * height, side=1 if u <= 0.0 else -1)
    return arrow, mark, label
