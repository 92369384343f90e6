"""Where candidates become degenerate, along the atom number."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.candidate_row import CandidateRow
from app.answers.cloud import cloud_answer
from app.answers.part import part
from physics.cloud import Model, equilibrium
from physics.constants import boltzmann

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

ALIKE = 0.005
"""Relative difference below which thresholds count as one line: it would not be seen."""

KEPT = 160
"""Curves that are kept: all states of the data, twice."""

_POINTS = 33
_DECADES = 1.5


@dataclass(frozen=True, kw_only=True, eq=False)
class ThresholdLine:
    """One threshold, of all candidates whose thresholds cannot be told apart.

    temperature : [K] at the atom numbers of `thresholds_of`; NaN where there is none
    """

    rows: tuple[CandidateRow, ...]
    temperature: Array

    @property
    def bosons(self) -> bool:
        return self.rows[0].bosons


@dataclass(frozen=True, kw_only=True, eq=False)
class Thresholds:
    """The thresholds of candidates, the coldest first."""

    atoms: Array
    lines: tuple[ThresholdLine, ...]


def thresholds_of(rows: Sequence[CandidateRow], atoms: float) -> Thresholds:
    """Thresholds around an atom number, of all rows that have an answer."""
    grid = numbers_around(atoms)
    drawn = ((row, _on(grid, row)) for row in rows if row.cloud is not None)
    found = sorted(
        ((row, line) for row, line in drawn if np.any(np.isfinite(line))),
        key=lambda item: (item[0].bosons, float(np.nanmin(item[1]))),
    )
    lines: list[ThresholdLine] = []
    for row, temperature in found:
        last = lines[-1] if lines else None
        if last is not None and last.bosons is row.bosons and _alike(last.temperature, temperature):
            lines[-1] = replace(last, rows=(*last.rows, row))
        else:
            lines.append(ThresholdLine(rows=(row,), temperature=temperature))
    return Thresholds(
        atoms=grid, lines=tuple(sorted(lines, key=lambda line: float(np.nanmin(line.temperature))))
    )  # fmt: skip


def _alike(one: Array, other: Array) -> bool:
    near = np.abs(one - other) <= ALIKE * np.abs(other)  # of infinities there are none
    return bool(np.all(near | (np.isnan(one) & np.isnan(other))))


def _on(grid: Array, row: CandidateRow) -> Array:
    """The threshold of a row at these numbers, which need not be those around its own."""
    own, curve = numbers_around(row.plan.cloud.atoms.value), threshold_curve(row.plan)
    if own[0] == grid[0] and own[-1] == grid[-1]:
        return curve
    logs: Array = np.interp(np.log(grid), np.log(own), np.log(curve), left=np.nan, right=np.nan)
    return np.exp(logs)


@part("species", "trap", "cloud.atoms", "target.reduced_temperature", keep=KEPT)
def threshold_curve(plan: Plan) -> Array:
    """Temperatures [K] at which the plan's atoms become degenerate, at numbers around the plan's, see `numbers_around`.

    NaN where the cloud would be hotter than the trap is deep; the temperature of the plan does not enter.
    """
    answer = cloud_answer(plan)
    atoms = numbers_around(plan.cloud.atoms.value)
    cloud = replace(answer.cloud, atoms=atoms)
    solved = equilibrium(cloud, Model.IDEAL, fermi_threshold=answer.threshold)
    found = np.asarray(
        solved.critical_temperature if answer.bosons else answer.threshold * solved.fermi_temperature, dtype=float
    )
    if cloud.trap.depth is not None:
        found = np.where(boltzmann * found > np.asarray(cloud.trap.depth), np.nan, found)
    return np.broadcast_to(found, atoms.shape)


@lru_cache(maxsize=64)
def numbers_around(atoms: float) -> Array:
    """Atom numbers to both sides of one, down to a single atom; the array is shared and read-only."""
    numbers = np.geomspace(max(1.0, atoms * 10.0**-_DECADES), atoms * 10.0**_DECADES, _POINTS)
    numbers.setflags(write=False)
    return numbers
