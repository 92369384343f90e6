"""Slices through the plane of atom number and temperature, at the cloud."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from enum import Enum
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.cloud import cloud_answer
from app.answers.losses import Solution
from app.answers.part import part
from app.answers.uncertainty import Joint
from app.quantities import QUANTITIES
from physics.cloud import Model, equilibrium

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

SLICE_POINTS = 241


class Against(Enum):
    """What runs along the horizontal axis of a slice."""

    TEMPERATURE = "T"
    ATOMS = "N"


@dataclass(frozen=True, kw_only=True, eq=False)
class SlicesAnswer:
    """Quantities along temperature at the plan's atom number, and along atom number at its temperature.

    `values_temperature` and `values_atoms` hold the quantities asked for, by NAME, on the two grids;
    `joints_temperature` and `joints_atoms` how each scatters together with what runs along the grid, None where nothing
    is uncertain.
    """

    atoms: float
    temperature: float
    temperature_grid: Array
    atoms_grid: Array
    names: tuple[str, ...]
    values_temperature: tuple[Array, ...]
    values_atoms: tuple[Array, ...]
    now: tuple[float, ...]
    joints_temperature: tuple[Joint | None, ...]
    joints_atoms: tuple[Joint | None, ...]
    threshold_temperature: float
    threshold_atoms: float


@part("species", "trap", "cloud", "losses", "target")
def slices_answer(plan: Plan, names: tuple[str, ...]) -> SlicesAnswer:
    """Slices through the map at the cloud. A quantity with axes gives its mean over them."""
    central = cloud_answer(plan)
    atoms, temperature = float(central.cloud.atoms), float(central.cloud.temperature)
    # A level sum costs milliseconds, and a hundred points draw a smooth line.
    points = 61 if central.model is Model.EXACT_LEVELS else SLICE_POINTS
    temperatures = np.geomspace(*decades_around(temperature), points)
    numbers = np.geomspace(*decades_around(atoms), points)

    def along(atoms: float | Array, temperature: float | Array) -> tuple[Array, ...]:
        cloud = replace(central.cloud, atoms=atoms, temperature=temperature)
        solved = equilibrium(cloud, central.model, fermi_threshold=central.threshold, efficiency=central.efficiency)
        solution = Solution(equilibrium=solved, losses=central.losses.losses)
        return tuple(_plain(solution, name, points) for name in names)

    return SlicesAnswer(
        atoms=atoms,
        temperature=temperature,
        temperature_grid=temperatures,
        atoms_grid=numbers,
        names=names,
        values_temperature=along(atoms, temperatures),
        values_atoms=along(numbers, temperature),
        now=tuple(float(_plain(central.solution, name, 1)[0]) for name in names),
        joints_temperature=tuple(central.uncertainty.joint(name, "temperature") for name in names),
        joints_atoms=tuple(central.uncertainty.joint(name, "atoms") for name in names),
        threshold_temperature=temperature * float(central.equilibrium.temperature_to_threshold),
        threshold_atoms=atoms * float(central.equilibrium.atoms_to_threshold),
    )


def decades_around(value: float) -> tuple[float, float]:
    """A range that reaches at least a decade to both sides and moves only in half decades, so that a drag seldom
    changes an axis."""
    place = round(2.0 * math.log10(value)) / 2.0
    return 10.0 ** (place - 1.5), 10.0 ** (place + 1.5)


def _plain(solution: Solution, name: str, points: int) -> Array:
    values = np.asarray(solution.value(name), dtype=float)
    if QUANTITIES[name].axes:
        values = np.mean(values, axis=-1)
    return np.broadcast_to(values, (points,))
