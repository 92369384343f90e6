"""Maps and profiles as CSV: SI units, full precision, decimal points, names and units in the first line."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from app.answers.map import MapAnswer
from app.answers.profile import ProfileAnswer


def map_csv(answer: MapAnswer) -> str:
    """One row a grid point, full precision."""
    columns = {
        "atoms": np.broadcast_to(answer.atoms[np.newaxis, :], answer.peak_phase_space_density.shape),
        "temperature [K]": np.broadcast_to(answer.temperature[:, np.newaxis], answer.peak_phase_space_density.shape),
        "peak_phase_space_density": answer.peak_phase_space_density,
        "reduced_temperature": answer.reduced_temperature,
    }
    if answer.bosons:
        columns["condensate_fraction"] = answer.condensate_fraction
    return _csv(columns)


def profile_csv(answer: ProfileAnswer) -> str:
    """One row a position, SI, full precision."""
    columns = {"position [m]": answer.positions}
    for name, unit, profile in (("density", "1/m^3", answer.density), ("column_density", "1/m^2", answer.column)):
        columns |= {
            f"{name}_total [{unit}]": profile.total,
            f"{name}_thermal [{unit}]": profile.thermal,
            f"{name}_condensate [{unit}]": profile.condensate,
            f"{name}_classical [{unit}]": profile.classical,
        }
    return _csv(columns)


def _csv(columns: Mapping[str, NDArray[np.float64]]) -> str:
    rows = zip(*(np.ravel(column).tolist() for column in columns.values()), strict=True)
    return "\n".join([",".join(columns), *(",".join(map(repr, row)) for row in rows)]) + "\n"
