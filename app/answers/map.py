"""The plane of atom number and temperature."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.cloud import cloud_answer
from app.answers.part import part
from physics.cloud import Cloud, Model, equilibrium
from physics.rows import answer_rows
from physics.thresholds import Thresholds

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

MAP_POINTS = 100
SLOW_MAP_POINTS = 60
"""Along each direction, of a model of which a cell takes a fraction of a millisecond."""


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
    if not math.isfinite(threshold):
        threshold = temperature  # more fermions than the trap holds
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

    model : the model that the map is of; `asked` is that of the plan's cloud, of which this may be a draft only
    threshold, threshold_shifted, threshold_of_model : temperatures along `atoms` [K]: the ideal one of a large cloud,
        with its first-order shifts by finite size and interaction, and the one of the model asked for where it has its
        own. The latter two are NaN for fermions, or where there is none.
    """

    limits: MapLimits
    bosons: bool
    model: Model
    asked: Model
    fermi_threshold: float
    atoms: Array
    temperature: Array
    peak_phase_space_density: Array
    reduced_temperature: Array
    condensate_fraction: Array
    threshold: Array
    threshold_shifted: Array
    threshold_of_model: Array

    @property
    def complete(self) -> bool:
        """Whether this is the map that was asked for."""
        return self.model is self.asked


def is_slow(model: Model) -> bool:
    """Whether a map of this model takes long enough for a draft of another one to be shown first."""
    return model in (Model.EXACT_LEVELS, Model.HARTREE_FOCK)


def map_points(model: Model) -> int:
    """Grid points along each direction."""
    return SLOW_MAP_POINTS if is_slow(model) else MAP_POINTS


@part("species", "trap", "cloud.model", "target")
def map_answer(plan: Plan, limits: MapLimits, points: int | None = None) -> MapAnswer:
    """The map of the plan's trap and species. The plan's own atom number and temperature do not enter."""
    answer = _map(plan, limits, cloud_answer(plan).model, points, None)
    assert answer is not None
    return answer


@part("species", "trap", "cloud.model", "target")
def draft_map(plan: Plan, limits: MapLimits) -> MapAnswer:
    """The same map by a model that is quick: what is shown while a slow one is worked out."""
    central = cloud_answer(plan)
    quick = central.bosons and central.model is Model.HARTREE_FOCK
    answer = _map(plan, limits, Model.SEMI_IDEAL if quick else Model.IDEAL, None, None)
    assert answer is not None
    return answer


def map_with_progress(plan: Plan, limits: MapLimits, tick: Callable[[float], bool]) -> MapAnswer | None:
    """`map_answer`, row by row: `tick` is told the share that is done, and stops the work by a false answer."""
    return _map(plan, limits, cloud_answer(plan).model, None, tick)


def _map(
    plan: Plan, limits: MapLimits, model: Model, points: int | None, tick: Callable[[float], bool] | None
) -> MapAnswer | None:
    points = points or map_points(model)
    atoms = np.geomspace(limits.atoms_low, limits.atoms_high, points)
    temperature = np.geomspace(limits.temperature_low, limits.temperature_high, points)
    central = cloud_answer(plan)
    grid = replace(central.cloud, atoms=atoms[np.newaxis, :], temperature=temperature[:, np.newaxis])
    bosons = central.bosons
    solved = equilibrium(grid, model, fermi_threshold=central.threshold)
    shape = (points, points)
    if is_slow(model):
        names = ("peak_phase_space_density", "condensate_fraction")
        rows = answer_rows(grid, model, names, tick, fermi_threshold=central.threshold)
        if rows is None:
            return None
        density, fraction = rows
    else:
        density, fraction = solved.peak_phase_space_density, solved.condensate_fraction
    line = solved.critical_temperature if bosons else central.threshold * np.asarray(solved.fermi_temperature)
    return MapAnswer(
        limits=limits,
        bosons=bosons,
        model=model,
        asked=central.model,
        fermi_threshold=central.threshold,
        atoms=atoms,
        temperature=temperature,
        peak_phase_space_density=np.broadcast_to(density, shape),
        reduced_temperature=np.broadcast_to(solved.reduced_temperature, shape),
        condensate_fraction=np.broadcast_to(fraction, shape),
        threshold=np.ravel(line),
        threshold_shifted=np.ravel(np.broadcast_to(solved.critical_temperature_shifted, (1, points))),
        threshold_of_model=_threshold_of_model(central.cloud, atoms, central.model),
    )


def _threshold_of_model(cloud: Cloud, atoms: Array, model: Model) -> Array:
    """Where the excited levels saturate, or Hartree-Fock condenses, along atom numbers [K]."""
    if not is_slow(model):
        return np.full(atoms.shape, np.nan)
    solved = equilibrium(replace(cloud, atoms=atoms), model)
    return np.broadcast_to(Thresholds(equilibrium=solved).of_model, atoms.shape)
