"""Thresholds of all candidates on one map of atom number and temperature, and the cloud on it."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from app.answers.candidate_row import CandidateRow
from app.answers.candidate_thresholds import ThresholdLine, Thresholds
from app.candidate_words import short_state
from app.engine import CloudAnswer
from app.figures.picture import Array, Axis, Curve, Label, Mark, Picture, Role
from app.language import translate as _

_MOST_NAMED = 3
"""Species that a label names; more are counted."""

_WIDTH, _HEIGHT = 0.011, 0.07
"""Half the width of a character, and the height of a line, about, as shares of the axes."""


def thresholds_picture(thresholds: Thresholds, cloud: CloudAnswer, starts: Sequence[CandidateRow] = ()) -> Picture:
    """A line for each threshold, solid for bosons, broken for fermions, the plan's own species in ink.

    starts : rows whose clouds begin elsewhere than the plan's own
    """
    atoms, hot = float(cloud.plan.cloud.atoms.value), float(cloud.plan.cloud.temperature.value)
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
        role = _role(line, cloud)
        curves.append(
            Curve(name="" if role in named else _name(role), role=role, x=thresholds.atoms, y=line.temperature)
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
        labels=_labels(thresholds, cloud, x, y),
        summary=_summary(thresholds),
        note="" if thresholds.lines else _("no candidate has a threshold"),
    )


def _labels(thresholds: Thresholds, cloud: CloudAnswer, x: Axis, y: Axis) -> tuple[Label, ...]:
    """A label on each line, where it is furthest from those that stand already; that of the plan's own first."""
    taken: list[tuple[float, float, float]] = [
        (_share(x, float(cloud.plan.cloud.atoms.value)), _share(y, float(cloud.plan.cloud.temperature.value)), 0.02)
    ]
    labels = []
    for line in sorted(thresholds.lines, key=lambda line: _role(line, cloud) in (Role.FIRST, Role.SECOND)):
        text = line_text(line)
        reach = _WIDTH * (len(text) + 1)
        places = [
            (_share(x, float(atoms)), _share(y, float(hot)), float(atoms), float(hot))
            for atoms, hot in zip(thresholds.atoms[2:-2], line.temperature[2:-2], strict=True)
            if math.isfinite(hot)
        ]
        if not places:
            continue
        best = max(places, key=lambda place: _clearance(place[0], place[1], reach, taken))
        taken.append((best[0], best[1], reach))
        labels.append(Label(text=text, role=_role(line, cloud), x=best[2], y=best[3]))
    return tuple(labels)


def _share(axis: Axis, value: float) -> float:
    return math.log(value / axis.low) / math.log(axis.high / axis.low)


def _clearance(u: float, v: float, reach: float, taken: Sequence[tuple[float, float, float]]) -> float:
    """How far a place is from the labels that stand, in the room that they need, and from the ends of the axis; no more
    than is needed counts."""
    others = (max(abs(u - x) / (reach + other), abs(v - y) / _HEIGHT) for x, y, other in taken)
    return min(1.3, min(u, 1.0 - u) / reach, *others)


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


def _role(line: ThresholdLine, cloud: CloudAnswer) -> Role:
    own = any((row.key, row.state.name) == (cloud.state.key, cloud.state.name) for row in line.rows)
    if own:
        return Role.THRESHOLD if line.bosons else Role.THRESHOLD_SHIFTED
    return Role.FIRST if line.bosons else Role.SECOND


def _name(role: Role) -> str:
    return {
        Role.FIRST: _("bosons: critical temperature"),
        Role.SECOND: _("fermions: threshold T/TF"),
        Role.THRESHOLD: _("the plan's own, bosons"),
        Role.THRESHOLD_SHIFTED: _("the plan's own, fermions"),
    }[role]


def _summary(thresholds: Thresholds) -> str:
    if not thresholds.lines:
        return _("No candidate has a threshold.")
    first, last = thresholds.lines[-1], thresholds.lines[0]
    return _("Of {count} different thresholds the highest is that of {first}, the lowest that of {last}.").format(
        count=len(thresholds.lines), first=line_text(first), last=line_text(last)
    )
