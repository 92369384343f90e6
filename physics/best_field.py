"""Magnetic fields for a wish: where a scattering length has a wanted value, and where a gain that rests on it is best.

Both look along the curve of `physics.tuning_curve`, and so nowhere but where a resonance form describes the length.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from physics.checks import Floats
from physics.scattering import scattering_length_at_field
from physics.species_tables import ResonanceForm
from physics.tuning_curve import TuningCurve, tuning_curve

NEARLY = 0.9
"""Share of the largest gain that counts as nearly as good."""

_BISECTIONS = 60
_ROUNDS, _FINE = 4, 41  # each round of the refinement narrows the place by (_FINE - 1)/2
_ALIKE = 1e-3  # relative difference of gains that counts as none
_STEP = 1e-6  # of a slope, over the distance to the nearest end of its piece


@dataclass(frozen=True, kw_only=True)
class FieldFound:
    """A field that was looked for.

    Attributes
    ----------
    field : [T]
    length : [m] The scattering length there.
    slope : [m/T] Its change with the field.
    low, high : [T] Between these the gain is at least `NEARLY` of the best; of a wanted length, both are the field.
    at_end : whether the gain still rises where the range, or what the data describe of it, ends
    """

    field: float
    length: float
    slope: float
    low: float
    high: float
    at_end: bool = False


def fields_of_length(
    forms: Sequence[ResonanceForm], low: float, high: float, wanted: float
) -> tuple[FieldFound, ...]:  # fmt: skip
    """Fields between two [T] at which the length is `wanted` [m], the one where it changes least with the field first.

    Raises
    ------
    ValueError : unless low < high and both are finite.
    """
    found = []
    for B, a in _pieces(tuning_curve(forms, low, high)):
        off = a - wanted
        crossing = np.flatnonzero((off[:-1] == 0.0) | (off[:-1] * off[1:] < 0.0))
        below, above, sign = B[crossing], B[crossing + 1], off[crossing]
        for _ in range(_BISECTIONS if crossing.size else 0):
            middle = 0.5 * (below + above)
            same = (scattering_length_at_field(forms, middle) - wanted) * sign > 0.0
            below, above = np.where(same, middle, below), np.where(same, above, middle)
        found += [_place(forms, B, float(field)) for field in 0.5 * (below + above)]
    return tuple(sorted(found, key=lambda place: abs(place.slope)))


def best_field(
    forms: Sequence[ResonanceForm], low: float, high: float, gain: Callable[[Floats], Floats]
) -> FieldFound | None:
    """The field between two [T] at which a gain is largest; of several, the one where the length changes least with the
    field.

    Parameters
    ----------
    gain : (n,) lengths [m] -> (n,) gains; NaN where there is none. Positive, and continuous in the length.

    Returns
    -------
    FieldFound or None
        None where no field of the range has a gain.

    Raises
    ------
    ValueError : unless low < high and both are finite.
    """

    def gain_at(fields: Floats) -> Floats:
        return gain(scattering_length_at_field(forms, fields))

    pieces = [(B, gain(a)) for B, a in _pieces(tuning_curve(forms, low, high))]
    tops = [float(np.max(gains[np.isfinite(gains)], initial=-np.inf)) for _B, gains in pieces]
    promising = [piece for piece, top in zip(pieces, tops, strict=True) if NEARLY * max(tops) <= top > -np.inf]
    if not promising:
        return None
    # Every resonance has its field of the best length; the gains there differ by rounding.
    found = [_refined(forms, gain_at, *piece) for piece in promising]
    most = max(best for _place, best in found)
    places = [place for place, best in found if best >= (1.0 - _ALIKE) * most]
    return min(places, key=lambda place: abs(place.slope))


def _refined(
    forms: Sequence[ResonanceForm], gain_at: Callable[[Floats], Floats], B: Floats, gains: Floats
) -> tuple[FieldFound, float]:
    """The best field of a piece, and the gain there."""
    top = int(np.nanargmax(gains))
    start, end = B[max(top - 1, 0)], B[min(top + 1, B.size - 1)]
    for _ in range(_ROUNDS):
        fine = np.linspace(start, end, _FINE)
        values = gain_at(fine)
        here = int(np.nanargmax(values))
        start, end = fine[max(here - 1, 0)], fine[min(here + 1, _FINE - 1)]
    field, best = float(fine[here]), float(values[here])
    sides = np.less(B, field), np.greater(B, field)
    low, high = (
        _edge(gain_at, np.r_[field, B[side][::way]], np.r_[best, gains[side][::way]], NEARLY * best)
        for side, way in zip(sides, (-1, 1), strict=True)
    )
    at_end = field in (B[0], B[-1])
    return replace(_place(forms, B, field), low=low, high=high, at_end=at_end), best


def _pieces(curve: TuningCurve) -> list[tuple[Floats, Floats]]:
    """Fields and lengths of each stretch without a pole or a gap inside; those of one point, which tunes nothing, are
    left out."""
    ends = np.flatnonzero(np.isnan(curve.length))
    starts = (np.concatenate([[-1], ends]) + 1)[:-1].astype(int)
    places = ((start, end) for start, end in zip(starts, ends, strict=True) if end - start > 1)
    return [(curve.field[start:end], curve.length[start:end]) for start, end in places]


def _place(forms: Sequence[ResonanceForm], B: Floats, field: float) -> FieldFound:
    """A field of a piece, with the length and its slope there."""
    step = _STEP * float(B[-1] - B[0])
    below, above = max(field - step, float(B[0])), min(field + step, float(B[-1]))
    lengths = scattering_length_at_field(forms, [below, field, above])
    slope = float(lengths[2] - lengths[0]) / (above - below)
    return FieldFound(field=field, length=float(lengths[1]), slope=slope, low=field, high=field)


def _edge(gain_at: Callable[[Floats], Floats], fields: Floats, gains: Floats, least: float) -> float:
    """Along fields that lead away from the best one, where the gain falls below `least`; the last where it does not."""
    short = np.flatnonzero(~(gains >= least))
    if not short.size or short[0] == 0:
        return float(fields[-1] if not short.size else fields[0])
    fine = np.linspace(fields[short[0] - 1], fields[short[0]], _FINE)
    values = np.nan_to_num(gain_at(fine), nan=0.0)
    place = int(np.flatnonzero(~(values >= least))[0])
    share = (values[place - 1] - least) / (values[place - 1] - values[place])
    return float(fine[place - 1] + share * (fine[place] - fine[place - 1]))
