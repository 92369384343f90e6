"""Candidates ranked by one column: known numbers on an axis, and apart from them those that have none, with why."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from app.answers.candidate_row import Failure
from app.candidate_columns import COLUMNS
from app.candidate_order import SCORE, order_by
from app.candidate_words import short_name
from app.figures.picture import Axis, Curve, Label, Mark, Picture, Role
from app.language import translate as _
from app.quantities import display_factor
from app.sureness import Sureness, least_sure
from app.words import shown_unit

if TYPE_CHECKING:
    from app.answers.candidate_row import CandidateRow
    from app.candidate_order import Score, Weight

FIRST_SHOWN = 16
"""Rows on show at first, where nothing is said of the room that there is."""

_LOG_FROM = 20.0
"""Largest over smallest number from which an axis is logarithmic."""

_ROLES = {
    Sureness.SEEN: Role.SEEN,
    Sureness.COMPUTED: Role.COMPUTED,
    Sureness.RECALLED: Role.RECALLED,
    Sureness.ASSUMED: Role.ASSUMED,
}
_LONGEST = 58  # characters of a reason, where nothing is said of the room that there is


@dataclass(frozen=True)
class Ranked:
    """A row of the chart: its number in display units, NaN where it has no place on the axis, and then why.

    low, high : 16 and 84 percent of it over the stated uncertainties; NaN where it has none
    floor : what it would be with three-body loss as fast as theory allows, where that loss is not known; else NaN
    """

    name: str
    value: float
    sureness: Sureness
    reason: str
    low: float = math.nan
    high: float = math.nan
    floor: float = math.nan


def ranking(
    rows: Sequence[CandidateRow], name: str, unit: str, scores: Sequence[Score], weights: Sequence[Weight]
) -> tuple[Ranked, ...]:
    """The rows as the chart takes them, in their order."""
    if name == SCORE:
        return tuple(
            Ranked(
                short_name(row),
                score.value,
                least_sure(*(row.cell(weight.name).sureness for weight in weights)),
                _("a number that counts is not known") if math.isnan(score.value) else "",
            )
            for row, score in zip(rows, scores, strict=True)
        )
    factor = display_factor(unit, COLUMNS[name].row)
    return tuple(_ranked(row, name, factor) for row in rows)


def _ranked(row: CandidateRow, name: str, factor: float) -> Ranked:
    cell, spread = row.cell(name), row.spread(name)
    low, high = (math.nan, math.nan) if spread is None else (float(spread.low), float(spread.high))
    unknown_loss = row.cloud is not None and row.cloud.losses.losses.three_body is None
    floor = row.cell("good_to_bad_at_ceiling").value if name == "good_to_bad_ratio" and unknown_loss else math.nan
    return Ranked(
        name=short_name(row),
        value=cell.value / factor,
        sureness=cell.sureness,
        # What is missing says more than what a number without it would need.
        reason=row.reason if row.failure is Failure.NO_DATA and not cell.known else cell.reason or row.reason,
        low=low / factor,
        high=high / factor,
        floor=floor / factor,
    )


def ranked_picture(
    rows: Sequence[CandidateRow],
    name: str,
    unit: str,
    descending: bool,
    scores: Sequence[Score] = (),
    weights: Sequence[Weight] = (),
    *,
    room: int = FIRST_SHOWN,
    longest: int = _LONGEST,
) -> Picture:
    """The rows from top to bottom: known numbers in their order, then, under a line, the others with why. As many as
    there is `room` for are in view; `longest` is how many characters of a reason have room."""
    ranked = ranking(rows, name, unit, scores, weights)
    ranked = tuple(ranked[place] for place in order_by([item.value for item in ranked], descending))
    known = [item for item in ranked if math.isfinite(item.value)]
    log = name != SCORE and _logarithmic([item.value for item in known])
    drawn = [item for item in known if not log or item.value > 0.0]
    apart = [item for item in ranked if item not in drawn]
    listed = (*drawn, *apart)
    extent = [end for item in drawn for end in (item.value, item.low, item.high, item.floor) if not math.isnan(end)]
    x = _value_axis(name, unit, [end for end in extent if not log or end > 0.0], log)
    count = len(listed)
    shown = min(count, room)
    y = Axis(
        label=_("candidate"),
        unit="",
        low=count - shown - 0.6,
        high=max(count, 1) - 0.4,
        titled=False,
        names=tuple(item.name for item in reversed(listed)) or ("",),
    )
    marks, named = [], set()
    for place, item in enumerate(drawn):
        role = _ROLES[item.sureness]
        word = "" if role in named else item.sureness.value
        marks.append(Mark(name=word, role=role, x=item.value, y=float(count - 1 - place)))
        named.add(role)
    labels = [
        Label(text=_short(item, longest), role=Role.CLASSICAL, x=x.low, y=float(count - 1 - len(drawn) - place))
        for place, item in enumerate(apart)
    ]
    heights = [float(count - 1 - place) for place in range(len(drawn))]
    floors = [(item.floor, item.value) for item in drawn]
    spreads = [(item.low, item.high) for item in drawn]
    curves = [
        *_bars(_("down to three-body loss at 201 ħa⁴/m"), Role.ASSUMED, floors, heights, x),
        *_bars(_("68 % of the draws"), Role.UNCERTAINTY, spreads, heights, x),
    ]
    if drawn and apart:
        border = count - len(drawn) - 0.5
        curves.append(Curve(name="", role=Role.DECADE, x=np.array([x.low, x.high]), y=np.array([border, border])))
    note = ""
    if count > shown:
        note = _("first {shown} of {count}; pan down or zoom out for the others").format(shown=shown, count=count)
    return Picture(
        title=_("ranked by {what}").format(what=_title(name)),
        x=x,
        y=y,
        curves=tuple(curves),
        marks=tuple(marks),
        labels=tuple(labels),
        summary=_summary(name, drawn, apart),
        note=note,
    )


def _bars(
    name: str, role: Role, ends: Sequence[tuple[float, float]], heights: Sequence[float], x: Axis
) -> list[Curve]:  # fmt: skip
    """One broken line through the bars of all rows that have one, as far as the axis goes; none where no row has."""
    across: list[float] = []
    up: list[float] = []
    for (low, high), height in zip(ends, heights, strict=True):
        if low < high:  # false where either is not known
            across += [max(low, x.low), high, math.nan]
            up += [height, height, math.nan]
    return [Curve(name=name, role=role, x=np.array(across), y=np.array(up))] if across else []


def _title(name: str) -> str:
    return _("weighted score") if name == SCORE else COLUMNS[name].row.label


def _logarithmic(values: Sequence[float]) -> bool:
    positive = [value for value in values if value > 0.0]
    if not positive or any(value < 0.0 for value in values):
        return False
    return max(positive) > _LOG_FROM * min(positive)


def _value_axis(name: str, unit: str, values: Sequence[float], log: bool) -> Axis:
    label, shown = _title(name), "" if name == SCORE else shown_unit(unit)
    if name == SCORE:
        return Axis(label=label, unit="", low=0.0, high=1.02)
    if not values:
        return Axis(label=label, unit=shown, low=0.0, high=1.0)
    low, high = min(values), max(values)
    if log:
        margin = max(1.6, (high / low) ** 0.05)
        return Axis(label=label, unit=shown, low=low / margin, high=high * margin, log=True)
    reach = (high - low) or abs(high) or 1.0
    # Zero belongs on a linear axis, unless all numbers lie far from it and close together.
    if low > 0.0 and reach > 0.3 * high:
        low = 0.0
    elif high < 0.0 and reach > -0.3 * low:
        high = 0.0
    return Axis(label=label, unit=shown, low=low - (0.06 * reach if low else 0.0), high=high + 0.06 * reach)


def _short(item: Ranked, longest: int) -> str:
    """Why a row stands apart, in one line."""
    text = item.reason
    if math.isfinite(item.value):
        said = _("zero") if item.value == 0.0 else _("not positive")
        return f"{said}: {text}" if text else _("{said}: no place on a logarithmic axis").format(said=said)
    if len(text) > longest:
        text = text[:longest].rsplit(" ", 1)[0].rstrip(",;:") + " …"
    return _("unknown: {reason}").format(reason=text)


def _summary(name: str, drawn: Sequence[Ranked], apart: Sequence[Ranked]) -> str:
    if not drawn:
        return _("No candidate has a number for {what}.").format(what=_title(name))
    return _("By {what}, {first} comes first of {count}; {apart} have no number.").format(
        what=_title(name), first=drawn[0].name, count=len(drawn), apart=len(apart)
    )
