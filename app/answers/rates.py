"""How fast atoms collide, are lost and are heated, along temperature or atom number through the cloud."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.cloud import cloud_answer
from app.answers.losses import Solution
from app.answers.part import part
from app.answers.slices import Against, decades_around
from physics.cloud import Model, equilibrium

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

RATE_POINTS = 161
_FEW_POINTS = 41


@dataclass(frozen=True, kw_only=True, eq=False)
class RateSet:
    """Rates of one cloud or of many, all in 1/s, so that they can stand on one axis; NaN where one is unknown.

    elastic : elastic collisions of an atom, mean over the cloud
    rethermalisation : 1 over the rethermalisation time
    background, two_body, three_body, spin_flips : losses, per atom; 1 over the lifetimes
    losses : all losses that are known
    heating : relative rise of the temperature, of all heating that is known; negative where losses cool
    by_light : the part of it that the trap's own light brings
    """

    elastic: Array
    rethermalisation: Array
    background: Array
    two_body: Array
    three_body: Array
    spin_flips: Array
    losses: Array
    heating: Array
    by_light: Array


@dataclass(frozen=True, kw_only=True, eq=False)
class RatesAnswer:
    """Rates along temperature [K] at the plan's atom number, or along atom number at its temperature.

    place, now : where the cloud is on the grid, and its rates
    threshold : place on the same axis where degeneracy begins
    """

    against: Against
    atoms: float
    temperature: float
    grid: Array
    rates: RateSet
    place: float
    now: RateSet
    threshold: float
    bosons: bool


@part("species", "trap", "cloud", "losses", "target")
def rates_answer(plan: Plan, against: Against) -> RatesAnswer:
    """Rates and lifetimes of the plan's cloud against temperature or atom number."""
    central = cloud_answer(plan)
    atoms, temperature = float(central.cloud.atoms), float(central.cloud.temperature)
    along_t = against is Against.TEMPERATURE
    # Level sums and self-consistent clouds cost milliseconds a point.
    points = RATE_POINTS if central.model in (Model.IDEAL, Model.SEMI_IDEAL) else _FEW_POINTS
    place = temperature if along_t else atoms
    grid = np.geomspace(*decades_around(place), points)
    cloud = replace(central.cloud, temperature=grid) if along_t else replace(central.cloud, atoms=grid)
    solved = equilibrium(cloud, central.model, fermi_threshold=central.threshold)
    to_threshold = central.equilibrium.temperature_to_threshold if along_t else central.equilibrium.atoms_to_threshold
    return RatesAnswer(
        against=against,
        atoms=atoms,
        temperature=temperature,
        grid=grid,
        rates=_rates(Solution(equilibrium=solved, losses=central.losses.losses), grid.shape),
        place=place,
        now=_rates(central.solution, ()),
        threshold=place * float(to_threshold),
        bosons=central.bosons,
    )


def _rates(solution: Solution, shape: tuple[int, ...]) -> RateSet:
    rates, solved = solution.rates, solution.equilibrium

    def spread(values: Array) -> Array:
        return np.broadcast_to(np.asarray(values, dtype=float), shape)

    return RateSet(
        elastic=spread(solved.elastic_collision_rate),
        rethermalisation=spread(1.0 / rates.rethermalisation_time),
        background=spread(rates.background_loss_rate),
        two_body=spread(rates.two_body_loss_rate),
        three_body=spread(rates.three_body_loss_rate),
        spin_flips=spread(rates.spin_flip_loss_rate),
        losses=spread(rates.total_loss_rate),
        heating=spread(rates.heating_rate / np.asarray(solved.cloud.temperature)),
        by_light=spread(rates.light_heating_rate / np.asarray(solved.cloud.temperature)),
    )
