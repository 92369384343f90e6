"""Thresholds of all candidates on one map of atom number and temperature, and the cloud on it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from app.answers.candidate_row import CandidateRow
from app.answers.candidate_thresholds import ThresholdLine, Thresholds
from app.answers.cloud import FERMI_THRESHOLD
from app.candidate_selection import own_of
from app.candidate_words import short_state
from app.figures.picture import Array, Axis, Curve, Label, Mark, Picture, Role
from app.language import translate as _
from app.sureness import least_sure

if TYPE_CHECKING:
    from app.plan import Plan

_MOST_NAMED = 3
"""Species that a label names; more are counted."""

_USUAL_CHARACTER = 0.022
"""Width of a character, about, as a share of the axis, where that is not known."""

_LOOKS = 9
"""Places along a label at which it is to keep clear of lines."""

_USUAL_LINE = 0.07
"""Height of a line of text as a share of the axis, where that is not known."""

_HALF = 0.6
"""From the middle of a label to its line, in heights of a text."""

_LEGIBLE = 0.52
"""How far, in heights of a text, a label has to be from lines that it does not belong to."""

_SIDES = (1, -1)
"""Over a line, or under it."""


def thresholds_picture(
    thresholds: Thresholds,
    plan: Plan,
    starts: Sequence[CandidateRow] = (),
    *,
    text_height: float = _USUAL_LINE,
    character: float = _USUAL_CHARACTER,
) -> Picture:
    """A line for each threshold, solid for bosons, broken for fermions, the plan's own species in ink.

    starts : rows whose clouds begin elsewhere than the plan's own
    text_height : of one line, as a share of the axes' height: lines too close for it go without labels
    character : the width of one, as a share of the axes' width
    """
    atoms, hot = float(plan.cloud.atoms.value), float(plan.cloud.temperature.value)
    x = Axis(
        label=_("atoms N per spin state"),
        unit="",
        low=float(thresholds.atoms[0]),
        high=float(thresholds.atoms[-1]),
        log=True,
    )
    temperatures = [hot, *(row.plan.cloud.temperature.value for row in starts)]
    temperatures += [float(value) for line in thresholds.lines for value in _ends(line.temperature)]
    y = Axis(
        label=_("temperature T"),
        unit="K",
        low=10.0 ** (math.floor(4.0 * math.log10(min(temperatures)) - 0.4) / 4.0),
        high=10.0 ** (math.ceil(4.0 * math.log10(max(temperatures)) + 0.4) / 4.0),
        log=True,
        prefixed=True,
    )
    named: set[Role] = set()
    curves = []
    for line in thresholds.lines:
        role = _role(line, plan)
        curves.append(
            Curve(name="" if role in named else _name(role, plan), role=role, x=thresholds.atoms, y=line.temperature)
        )
        named.add(role)
    marks = [Mark(name=_("cloud"), role=Role.CLOUD, x=atoms, y=hot)]
    marks += [
        Mark(name="", role=Role.TRACK, x=row.plan.cloud.atoms.value, y=row.plan.cloud.temperature.value)
        for row in starts
        if row.plan.cloud.temperature.value != hot or row.plan.cloud.atoms.value != atoms
    ]
    if len(marks) > 1:
        marks[1] = Mark(name=_("other starts"), role=Role.TRACK, x=marks[1].x, y=marks[1].y)
    return Picture(
        title=_("where each becomes degenerate"),
        x=x,
        y=y,
        # The plan's own last, so that no other lies on it.
        curves=tuple(sorted(curves, key=lambda curve: curve.role not in (Role.FIRST, Role.SECOND))),
        marks=tuple(marks),
        labels=_labels(thresholds, plan, x, y, text_height, character),
        summary=_summary(thresholds),
        note="" if thresholds.lines else _("no candidate has a threshold"),
    )


def _labels(
    thresholds: Thresholds, plan: Plan, x: Axis, y: Axis, high: float, wide: float
) -> tuple[Label, ...]:  # fmt: skip
    """A label over or under each line, where it is furthest from those that stand already and from other lines; that of
    the plan's own first. Lines rise: over one, a label ends where it belongs; under one, it begins there. A line that
    others crowd goes without, but for the plan's own."""
    taken: list[tuple[float, float, float]] = [
        (_share(x, float(plan.cloud.atoms.value)), _share(y, float(plan.cloud.temperature.value)), 0.02)
    ]
    labels = []
    across = np.array([_share(x, float(atoms)) for atoms in thresholds.atoms])
    heights = {id(line): np.log(line.temperature / y.low) / math.log(y.high / y.low) for line in thresholds.lines}
    for line in sorted(thresholds.lines, key=lambda line: _role(line, plan) in (Role.FIRST, Role.SECOND)):
        text = line_text(line) + _mark(line)
        reach = 0.5 * wide * (len(text) + 1)
        own = heights[id(line)]
        others = [height for height in heights.values() if height is not own]
        here = np.flatnonzero(np.isfinite(own[2:-2])) + 2
        if not here.size:
            continue
        # all places at once, over and under each point of the line
        points, sides = np.repeat(here, len(_SIDES)), np.tile(_SIDES, len(here))
        us, vs = across[points] - sides * reach, own[points] + sides * (_HALF * high)
        clear = _clearance(us, vs, reach, taken, high)
        free = _free(us, vs, reach, across, others) / high
        best = int(np.argmax(clear + np.minimum(free, 1.0)))
        if (clear[best] < 1.0 or free[best] < _LEGIBLE) and _role(line, plan) in (Role.FIRST, Role.SECOND):
            continue
        u, v, k, side = float(us[best]), float(vs[best]), int(points[best]), int(sides[best])
        taken.append((u, v, reach))
        there = float(thresholds.atoms[k]), float(line.temperature[k])
        labels.append(Label(text=text, role=_role(line, plan), x=there[0], y=there[1], side=-side, lift=side))
    return tuple(labels)


def _free(u: Array, v: Array, reach: float, across: Array, lines: Sequence[Array]) -> Array:
    """How far the middles of labels are from the nearest of other lines, as a share of the axis."""
    nearest = np.ones(u.shape)
    along = np.linspace(u - reach, u + reach, _LOOKS, axis=-1)
    for line in lines:
        gaps = np.abs(np.interp(along, across, line) - v[:, np.newaxis])
        nearest = np.minimum(nearest, np.min(gaps, axis=-1, where=np.isfinite(gaps), initial=1.0))
    return nearest


def _share(axis: Axis, value: float) -> float:
    return math.log(value / axis.low) / math.log(axis.high / axis.low)


def _clearance(
    u: Array, v: Array, reach: float, taken: Sequence[tuple[float, float, float]], high: float
) -> Array:  # fmt: skip
    """How far places are from the labels that stand, in the room that they need, and from the ends of the axis; no more
    than is needed counts."""
    room = np.minimum(np.minimum(u, 1.0 - u) / reach, np.minimum(v, 1.0 - v) / (_HALF * high))
    for x, y, other in taken:
        room = np.minimum(room, np.maximum(np.abs(u - x) / (reach + other), np.abs(v - y) / high))
    return np.minimum(room, 1.3)


def _mark(line: ThresholdLine) -> str:
    """The mark of the least sure threshold of a line."""
    return least_sure(*(row.cell("threshold_temperature").sureness for row in line.rows)).mark


def line_text(line: ThresholdLine) -> str:
    """The candidates of a line in a few words."""
    keys = list(dict.fromkeys(row.key for row in line.rows))
    if len(line.rows) == 1:
        row = line.rows[0]
        return f"{row.key} {short_state(row.state)}" if row.state.isotope.statistics.value == "fermion" else row.key
    if len(keys) <= _MOST_NAMED:
        return ", ".join(keys)
    kind = _("bosons") if line.bosons else _("fermions")
    return _("{count} species of {kind}").format(count=len(keys), kind=kind)


def line_near(thresholds: Thresholds, atoms: float, temperature: float) -> ThresholdLine | None:
    """The line next to a place on the map, if it is not more than a few percent away."""
    best, nearest = None, 0.06
    for line in thresholds.lines:
        here = float(np.interp(math.log(atoms), np.log(thresholds.atoms), np.log(line.temperature)))
        distance = abs(here - math.log(temperature))
        if distance < nearest:
            best, nearest = line, distance
    return best


def _ends(temperature: Array) -> tuple[Array, Array]:
    finite = temperature[np.isfinite(temperature)]
    return (finite.min(), finite.max()) if finite.size else (temperature[:0], temperature[:0])


def _role(line: ThresholdLine, plan: Plan) -> Role:
    own = own_of(plan) in [(row.key, row.state.name) for row in line.rows]
    if own:
        return Role.THRESHOLD if line.bosons else Role.THRESHOLD_SHIFTED
    return Role.FIRST if line.bosons else Role.SECOND


def _name(role: Role, plan: Plan) -> str:
    target = plan.target.reduced_temperature
    limit = f"{FERMI_THRESHOLD if target is None else target.value:.3g}"
    if target is None:
        limit = _("{limit}, assumed").format(limit=limit)
    return {
        Role.FIRST: _("bosons: critical temperature"),
        Role.SECOND: _("fermions: T/TF = {limit}").format(limit=limit),
        Role.THRESHOLD: _("the plan's own, bosons"),
        Role.THRESHOLD_SHIFTED: _("the plan's own: T/TF = {limit}").format(limit=limit),
    }[role]


def _summary(thresholds: Thresholds) -> str:
    if not thresholds.lines:
        return _("No candidate has a threshold.")
    first, last = thresholds.lines[-1], thresholds.lines[0]
    return _("Of {count} different thresholds the highest is that of {first}, the lowest that of {last}.").format(
        count=len(thresholds.lines), first=line_text(first), last=line_text(last)
    )
