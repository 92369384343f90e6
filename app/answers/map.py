"""The plane of atom number and temperature."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.cloud import cloud_answer
from app.answers.part import part
from physics.cloud import Model, equilibrium

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

MAP_POINTS = 100


@dataclass(frozen=True, kw_only=True)
class MapLimits:
    """Range of a map: atoms per spin state, temperature [K]."""

    atoms_low: float
    atoms_high: float
    temperature_low: float
    temperature_high: float

    def __post_init__(self) -> None:
        for name, low, high in (
            ("atoms", self.atoms_low, self.atoms_high),
            ("temperature", self.temperature_low, self.temperature_high),
        ):
            if not (0.0 < low < high < math.inf):
                raise ValueError(
                    f"{name} of the map must run from a low to a high positive limit, got {low:g} to {high:g}"
                )

    def holds(self, atoms: float, temperature: float) -> bool:
        return (
            self.atoms_low <= atoms <= self.atoms_high and self.temperature_low <= temperature <= self.temperature_high
        )


def usual_limits(plan: Plan) -> MapLimits:
    """The range that a map shows when nothing else is asked: whole decades, at least one of them on every side of the
    cloud and of its threshold."""
    answer = cloud_answer(plan)
    atoms, temperature = float(answer.cloud.atoms), float(answer.cloud.temperature)
    threshold = temperature * float(answer.equilibrium.temperature_to_threshold)
    low_t, high_t = min(temperature, threshold), max(temperature, threshold)
    return MapLimits(
        atoms_low=min(1e3, 10.0 ** math.floor(math.log10(atoms) - 0.8)),
        atoms_high=max(1e7, 10.0 ** math.ceil(math.log10(atoms) + 0.8)),
        temperature_low=10.0 ** math.floor(math.log10(low_t) - 0.8),
        temperature_high=10.0 ** math.ceil(math.log10(high_t) + 0.8),
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class MapAnswer:
    """The plane of atom number and temperature: grids in steps of equal ratio, answers with rows along T.

    `threshold` and `threshold_shifted` are temperatures along `atoms` [K]; the shifted one is NaN for fermions.
    """

    limits: MapLimits
    bosons: bool
    model: Model
    fermi_threshold: float
    atoms: Array
    temperature: Array
    peak_phase_space_density: Array
    reduced_temperature: Array
    condensate_fraction: Array
    threshold: Array
    threshold_shifted: Array


@part("species", "trap", "cloud.model", "target")
def map_answer(plan: Plan, limits: MapLimits, points: int = MAP_POINTS) -> MapAnswer:
    """The map of the plan's trap and species. The plan's own atom number and temperature do not enter.

    Exact levels are summed level by level and would take minutes here: the map then shows the ideal gas, and says so
    by its `model`.
    """
    atoms = np.geomspace(limits.atoms_low, limits.atoms_high, points)
    temperature = np.geomspace(limits.temperature_low, limits.temperature_high, points)
    central = cloud_answer(plan)
    model = Model.IDEAL if central.model is Model.EXACT_LEVELS else central.model
    grid = replace(central.cloud, atoms=atoms[np.newaxis, :], temperature=temperature[:, np.newaxis])
    solved = equilibrium(grid, model, fermi_threshold=central.threshold)
    bosons = central.bosons
    line = solved.critical_temperature if bosons else central.threshold * np.asarray(solved.fermi_temperature)
    shape = (points, points)
    return MapAnswer(
        limits=limits,
        bosons=bosons,
        model=model,
        fermi_threshold=central.threshold,
        atoms=atoms,
        temperature=temperature,
        peak_phase_space_density=np.broadcast_to(solved.peak_phase_space_density, shape),
        reduced_temperature=np.broadcast_to(solved.reduced_temperature, shape),
        condensate_fraction=np.broadcast_to(solved.condensate_fraction, shape),
        threshold=np.ravel(line),
        threshold_shifted=np.ravel(np.broadcast_to(solved.critical_temperature_shifted, (1, points))),
    )
