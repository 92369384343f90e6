"""The averages of a cut cloud as functions of its energy, tabulated for the kinetics of evaporation.

The kinetics knows the mean energy per atom as a share h of the depth. Every average is a smooth function of
L = ln(highest/h - 1), which goes from ln eta for a hot cloud to ln eta for a cold one, but for constants. Along a stage
whose trap changes its shape they depend also on where the controls stand.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import cache, lru_cache
from typing import NamedTuple, Protocol

import numpy as np

from physics.checks import Floats
from physics.curve_shape import CurveShape
from physics.spline import Spline
from physics.truncated_averages import relative_number, truncated_averages


class Averages(NamedTuple):
    """Averages of a cut cloud, logarithms where they range over decades; see `TruncatedAverages`.

    `log_number` is that of V_e over the level volume, the volume at the depth times `CurveShape.rim_levels`: both leave
    the very rim out, where a counted volume curve is uncertain. `log_number_half` and `log_number_third` are the same
    at half and a third of the temperature; `number_slope` is the change of `log_number` along the stage at fixed eta.
    """

    log_truncation: float
    log_number: float
    log_evaporation: float
    excess: float
    centre: float
    log_pair: float
    log_triple: float
    pair_energy: float
    triple_energy: float
    log_number_half: float
    log_number_third: float
    number_slope: float


LOWEST_TRUNCATION, HIGHEST_TRUNCATION = 0.05, 2000.0
"""Range of eta of the tables. A colder cloud is uncut, and its averages power laws; a hotter one is not trapped."""

_FINE, _COARSE, _EVEN = 300, 160, 200


class KineticTable(Protocol):
    """Averages at a place along a stage and at L."""

    def averages(self, place: float, position: float) -> Averages: ...


def _truncations(count: int) -> Floats:
    """Values of eta, closest where the averages bend."""
    logs = np.log([LOWEST_TRUNCATION, 0.8, 40.0, HIGHEST_TRUNCATION])
    return np.exp(np.interp(np.linspace(0.0, 1.0, count), [0.0, 0.12, 0.88, 1.0], logs))


def _rows(curve: CurveShape, count: int) -> tuple[Floats, Floats]:
    """L and the averages, all but the last, at the tabulated values of eta."""
    eta = _truncations(count)
    found = truncated_averages(curve, eta)
    position = np.log(curve.highest_energy * eta / found.energy - 1.0)
    columns = (
        np.log(eta),
        np.log(found.number / curve.rim_levels),
        np.log(found.evaporation),
        found.excess,
        found.centre,
        np.log(found.pair),
        np.log(found.triple),
        found.pair_energy,
        found.triple_energy,
        np.log(relative_number(curve, 2.0 * eta) / curve.rim_levels),
        np.log(relative_number(curve, 3.0 * eta) / curve.rim_levels),
    )
    return position, np.stack(columns, axis=-1)


@lru_cache(maxsize=1024)
def _coarse_rows(curve: CurveShape) -> tuple[Floats, Floats]:
    return _rows(curve, _COARSE)


class FixedShape:
    """Averages in a trap that keeps its shape."""

    def __init__(self, curve: CurveShape) -> None:
        position, rows = _rows(curve, _FINE)
        still = np.zeros((len(rows), 1))
        self._spline = Spline(position, np.concatenate([rows, still], axis=-1))
        self._exponent, self._high = curve.exponent, float(position[-1])

    def averages(self, place: float, position: float) -> Averages:
        found = Averages._make(self._spline.at(min(position, self._high)))
        return found if position <= self._high else _colder(found, self._exponent, position, self._high)


class ChangingShape:
    """Averages along a stage: cubic in the place along it and in L."""

    def __init__(self, places: Floats, curves: Sequence[CurveShape]) -> None:
        found = [_coarse_rows(curve) for curve in curves]
        numbers = np.stack([rows[:, 1] for _, rows in found])
        slopes = Spline(places, numbers).slopes(places)
        low = max(position[0] for position, _ in found)
        high = min(position[-1] for position, _ in found)
        even = np.linspace(low, high, _EVEN)
        grid = np.stack(
            [
                Spline(position, np.concatenate([rows, slope[:, np.newaxis]], axis=-1))(even)
                for (position, rows), slope in zip(found, slopes, strict=True)
            ]
        )
        count, _, columns = grid.shape
        along = Spline(even, np.moveaxis(grid, 0, 1).reshape(_EVEN, -1)).pieces
        along = np.moveaxis(along.reshape(_EVEN - 1, 4, count, columns), 2, 0)
        both = Spline(places, along.reshape(count, -1)).pieces.reshape(-1, 4, _EVEN - 1, 4, columns)
        self._pieces = np.ascontiguousarray(np.swapaxes(both, 1, 2)).reshape(-1, _EVEN - 1, 16, columns)
        self._places = Spline(places, np.zeros((count, 1)))
        self._exponent = curves[0].exponent
        self._low, self._high, self._step = low, high, (high - low) / (_EVEN - 1)

    def averages(self, place: float, position: float) -> Averages:
        i, s = self._places.place(place)
        x = (position - self._low) / self._step
        j = min(max(int(x), 0), _EVEN - 2)
        t = min(max(x - j, 0.0), 1.0) * self._step
        s2, t2 = s * s, t * t
        s3, t3 = s2 * s, t2 * t
        weights = (
            *(1.0, t, t2, t3),
            *(s, s * t, s * t2, s * t3),
            *(s2, s2 * t, s2 * t2, s2 * t3),
            *(s3, s3 * t, s3 * t2, s3 * t3),
        )
        found = Averages._make(np.dot(weights, self._pieces[i, j]).tolist())
        return found if x <= _EVEN - 1 else _colder(found, self._exponent, position, self._high)


def _colder(last: Averages, exponent: float, position: float, end: float) -> Averages:
    """Averages beyond the end of a table, from those there: of an uncut cloud at the bottom of the trap.

    There E/NkT is a constant, so that eta goes as 1/h, which is 1 + e^L.
    """
    further = math.log1p(math.exp(position)) - math.log1p(math.exp(end)) if position < 600.0 else position - end
    return last._replace(
        log_truncation=last.log_truncation + further,
        log_number=last.log_number - exponent * further,
        log_number_half=last.log_number_half - exponent * further,
        log_number_third=last.log_number_third - exponent * further,
        log_evaporation=last.log_evaporation + further,
    )


@cache
def power_law_table(exponent: float) -> FixedShape:
    """The table of a power law, made once."""
    return FixedShape(CurveShape(exponent=exponent))


@lru_cache(maxsize=64)
def _single_table(curve: CurveShape) -> FixedShape:
    return FixedShape(curve)


@lru_cache(maxsize=32)
def _changing_table(places: tuple[float, ...], curves: tuple[CurveShape, ...]) -> ChangingShape:
    return ChangingShape(np.array(places), curves)


def kinetic_table(places: Floats, curves: Sequence[CurveShape]) -> KineticTable:
    """The table along a stage, from the curves at some places along it; remembered for the next ramp."""
    first = curves[0]
    if all(curve.power_law and curve.exponent == first.exponent for curve in curves):
        return power_law_table(first.exponent)
    if all(curve is first for curve in curves):
        return _single_table(first)
    return _changing_table(tuple(places.tolist()), tuple(curves))
