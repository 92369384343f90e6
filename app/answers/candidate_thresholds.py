"""Where candidates become degenerate, along the atom number."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from app.answers.candidate_row import CandidateRow
from physics.cloud import Model, equilibrium
from physics.constants import boltzmann

Array = NDArray[np.float64]

ALIKE = 0.005
"""Relative difference below which thresholds count as one line: it would not be seen."""

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
    grid = np.geomspace(max(1.0, atoms * 10.0**-_DECADES), atoms * 10.0**_DECADES, _POINTS)
    drawn = ((row, _threshold(row, grid)) for row in rows if row.cloud is not None)
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
    return bool(np.allclose(one, other, rtol=ALIKE, atol=0.0, equal_nan=True))


def _threshold(row: CandidateRow, atoms: Array) -> Array:
    assert row.cloud is not None
    cloud = replace(row.cloud.cloud, atoms=atoms)
    solved = equilibrium(cloud, Model.IDEAL, fermi_threshold=row.cloud.threshold)
    found = np.asarray(
        solved.critical_temperature if row.bosons else row.cloud.threshold * solved.fermi_temperature, dtype=float
    )
    if cloud.trap.depth is not None:
        # Hotter than the trap is deep there is no cloud that could cross a threshold.
        found = np.where(boltzmann * found > np.asarray(cloud.trap.depth), np.nan, found)
    return np.broadcast_to(found, atoms.shape)
