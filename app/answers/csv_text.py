"""Maps and profiles as columns of numbers, for CSV and JSON: SI units, full precision, decimal points."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.answers.map import MapAnswer
from app.answers.profile import ProfileAnswer


@dataclass(frozen=True, kw_only=True, eq=False)
class Column:
    """Numbers with a name and an SI unit, "1" for pure numbers."""

    name: str
    unit: str = "1"
    values: NDArray[np.float64]


def map_columns(answer: MapAnswer) -> tuple[Column, ...]:
    """One row a grid point."""
    shape = answer.peak_phase_space_density.shape
    columns = [
        Column(name="atoms", values=np.broadcast_to(answer.atoms[np.newaxis, :], shape)),
        Column(name="temperature", unit="K", values=np.broadcast_to(answer.temperature[:, np.newaxis], shape)),
        Column(name="peak_phase_space_density", values=answer.peak_phase_space_density),
        Column(name="reduced_temperature", values=answer.reduced_temperature),
    ]
    if answer.bosons:
        columns.append(Column(name="condensate_fraction", values=answer.condensate_fraction))
    return tuple(columns)


def profile_columns(answer: ProfileAnswer) -> tuple[Column, ...]:
    """One row a position."""
    columns = [Column(name="position", unit="m", values=answer.positions)]
    for name, unit, profile in (("density", "1/m^3", answer.density), ("column_density", "1/m^2", answer.column)):
        parts = {
            "total": profile.total,
            "thermal": profile.thermal,
            "condensate": profile.condensate,
            "classical": profile.classical,
        }
        columns += [Column(name=f"{name}_{part}", unit=unit, values=values) for part, values in parts.items()]
    return tuple(columns)


def map_csv(answer: MapAnswer) -> str:
    """The map as a CSV table, names and units in the first line."""
    return csv_of(map_columns(answer))


def csv_of(columns: Sequence[Column]) -> str:
    """Equally long columns as a CSV table."""
    header = ",".join(column.name if column.unit == "1" else f"{column.name} [{column.unit}]" for column in columns)
    rows = zip(*(np.ravel(column.values).tolist() for column in columns), strict=True)
    return "\n".join([header, *(",".join(map(repr, row)) for row in rows)]) + "\n"


def json_of(columns: Sequence[Column]) -> dict[str, Any]:
    """Equally long columns by name, and their units; null where a number does not apply."""
    return {
        "units": {column.name: column.unit for column in columns},
        "columns": {
            column.name: [value if math.isfinite(value) else None for value in np.ravel(column.values).tolist()]
            for column in columns
        },
    }
