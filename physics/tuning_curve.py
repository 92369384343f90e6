"""The scattering length over a range of magnetic field: points that follow the curve, its poles and zeros, its gaps.

The resonance forms are those of `physics.scattering`; where two overlap, the narrower one decides, and the curve may
jump at its ends. Between the ranges of the forms there is no curve.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from physics.checks import Floats
from physics.scattering import scattering_length_at_field
from physics.species_tables import ResonanceForm

_EVEN = 160  # points of a piece, evenly
_NEAR = 60  # and towards each pole, in steps of equal ratio
_NEAREST = 1e-3  # distance to a pole of the first of these, over the width of the resonance
_BISECTIONS = 60

Range = tuple[float, float]


@dataclass(frozen=True, kw_only=True, eq=False)
class TuningCurve:
    """A curve a(B). Fields in [T], lengths in [m].

    Attributes
    ----------
    low, high : the range asked for
    field, length : (points,) by rising field; a NaN length parts two pieces
    poles : where the length diverges
    zeros : where it passes through zero
    ranges : the parts of the range that the forms describe, by rising field
    """

    low: float
    high: float
    field: Floats
    length: Floats
    poles: tuple[float, ...]
    zeros: tuple[float, ...]
    ranges: tuple[Range, ...]

    @property
    def gaps(self) -> tuple[Range, ...]:
        """The parts of the range that no form describes."""
        edges = [self.low, *(edge for pair in self.ranges for edge in pair), self.high]
        return tuple((start, end) for start, end in zip(edges[::2], edges[1::2], strict=True) if end > start)


def tuning_curve(forms: Sequence[ResonanceForm], low: float, high: float) -> TuningCurve:
    """The curve of a channel's resonance forms between two fields [T].

    Raises
    ------
    ValueError : unless both are finite and low < high.
    """
    if not (math.isfinite(low) and math.isfinite(high) and low < high):
        raise ValueError(f"the fields of a tuning curve must run from low to high, got {low} T to {high} T")
    fields, lengths, zeros = [], [], []
    pieces = _pieces(forms, low, high)
    for start, end, form in pieces:
        B = _points(form, start, end)
        a = scattering_length_at_field([form], B)
        fields += [B, [end]]
        lengths += [a, [math.nan]]
        zeros += _zeros(form, B, a)
    poles = {
        resonance.position.value
        for start, end, form in pieces
        for resonance in form.resonances
        if start <= resonance.position.value <= end
    }
    return TuningCurve(
        low=low,
        high=high,
        field=np.concatenate([np.empty(0), *fields]),
        length=np.concatenate([np.empty(0), *lengths]),
        poles=tuple(sorted(poles)),
        zeros=tuple(sorted(zeros)),
        ranges=_merged((start, end) for start, end, _form in pieces),
    )


def _pieces(forms: Sequence[ResonanceForm], low: float, high: float) -> list[tuple[float, float, ResonanceForm]]:
    """Stretches between poles and ends of forms, each with the form that decides there."""
    edges = {low, high}
    for form in forms:
        edges |= {form.low, form.high, *(resonance.position.value for resonance in form.resonances)}
    inside = sorted(edge for edge in edges if low <= edge <= high)
    pieces = []
    for start, end in pairwise(inside):
        middle = 0.5 * (start + end)
        deciding = [form for form in forms if form.low <= middle <= form.high]
        if deciding:
            pieces.append((start, end, min(deciding, key=lambda form: form.high - form.low)))
    return pieces


def _points(form: ResonanceForm, start: float, end: float) -> Floats:
    """Fields that a smooth line through the curve needs: even ones, and more towards a pole at either end."""
    parts = [np.linspace(start, end, _EVEN)]
    for resonance in form.resonances:
        pole, width = resonance.position.value, abs(resonance.width.value)
        nearest = min(_NEAREST * width, 1e-3 * (end - start))
        steps = np.geomspace(nearest, end - start, _NEAR)[:-1]
        if pole == start:
            parts.append(start + steps)
        elif pole == end:
            parts.append(end - steps)
    B = np.unique(np.concatenate(parts))
    at_pole = np.isin(B, [resonance.position.value for resonance in form.resonances])
    kept: Floats = B[~at_pole]
    return kept


def _zeros(form: ResonanceForm, B: Floats, a: Floats) -> list[float]:
    """Fields between the points of a piece at which the length changes its sign. It has no pole inside."""
    found = [float(field) for field in B[a == 0.0]]
    crossing = np.flatnonzero(a[:-1] * a[1:] < 0.0)
    low, high, below = B[crossing], B[crossing + 1], a[crossing]
    for _ in range(_BISECTIONS if crossing.size else 0):
        middle = 0.5 * (low + high)
        same = scattering_length_at_field([form], middle) * below > 0.0
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    return found + [float(field) for field in 0.5 * (low + high)]


def _merged(ranges: Iterable[Range]) -> tuple[Range, ...]:
    """Ranges by rising field, those that touch made one."""
    merged: list[Range] = []
    for start, end in ranges:
        if merged and merged[-1][1] == start:
            merged[-1] = (merged[-1][0], end)
        else:
            merged.append((start, end))
    return tuple(merged)
