"""Density and column density of the plan's cloud along a trap axis.

In a real trap the axes are its normal modes; where it has none, x, y and z.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.cloud import CloudAnswer, cloud_answer
from app.answers.part import part
from app.answers.trap import trap_answer
from app.plan_field import PlanError
from app.quantities import QUANTITIES
from physics.cloud import Cloud
from physics.constants import boltzmann
from physics.profiles import Profile, column_density_profile, density_profile

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.real_equilibria import RealEquilibrium

Array = NDArray[np.float64]

PROFILE_POINTS = 301
_FAINT = 5.0
"""kT above mu at which profiles in a real trap end, before they run out along the arms."""


@dataclass(frozen=True, kw_only=True, eq=False)
class ProfileAnswer:
    """Density along one trap axis through the centre [1/m^3], and the column density along it [1/m^2], which is
    summed along another axis. Positions in m."""

    axis: int
    line_of_sight: int
    bosons: bool
    positions: Array
    density: Profile
    column: Profile


@part("species", "trap", "cloud")
def profile_answer(plan: Plan, axis: int = 0) -> ProfileAnswer:
    """Profiles of the plan's cloud along trap axis 0, 1 or 2."""
    central = cloud_answer(plan)
    line_of_sight = 2 if axis != 2 else 1
    if central.real_trap is not None:
        return _in_real_trap(plan, central, central.real_trap, axis, line_of_sight)
    reach = 4.0 * float(np.max(_classical_radii(central.cloud)[axis]))
    if central.missing(QUANTITIES["condensate_radii"]) is None:
        reach = max(reach, 1.3 * float(np.asarray(central.equilibrium.condensate_radii)[axis]))
    if not central.bosons:
        energy = float(central.equilibrium.fermi_energy)
        edge = math.sqrt(2.0 * energy / central.cloud.mass) / (
            2.0 * math.pi * float(central.cloud.trap.frequencies[axis])
        )
        reach = max(reach, 1.3 * edge)
    reach = round_up(reach)
    positions = np.linspace(-reach, reach, PROFILE_POINTS)
    return ProfileAnswer(
        axis=axis,
        line_of_sight=line_of_sight,
        bosons=central.bosons,
        positions=positions,
        density=density_profile(central.equilibrium, axis, positions),
        column=column_density_profile(central.equilibrium, axis, positions, line_of_sight),
    )


def _in_real_trap(
    plan: Plan, central: CloudAnswer, solved: RealEquilibrium, axis: int, line_of_sight: int
) -> ProfileAnswer:
    from physics.real_profiles import RealProfiles

    if central.overfull:
        raise PlanError("the trap of this plan does not hold so many atoms below its depth: there is no profile")
    profiles = RealProfiles(equilibrium=solved, survey=trap_answer(plan).survey)
    reach = round_up(profiles.reach(axis, _FAINT))
    positions = np.linspace(-reach, reach, PROFILE_POINTS)
    return ProfileAnswer(
        axis=axis,
        line_of_sight=line_of_sight,
        bosons=central.bosons,
        positions=positions,
        density=profiles.density(axis, positions),
        column=profiles.column(axis, positions, line_of_sight),
    )


def round_up(value: float) -> float:
    """The next number 1, 1.5, 2, 3, 4, 5, 6 or 8 times a power of ten: axes that seldom change while a value moves."""
    power = 10.0 ** math.floor(math.log10(value))
    return next(
        (step * power for step in (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0) if value <= step * power), 10.0 * power
    )


def _classical_radii(cloud: Cloud) -> Array:
    omega = 2.0 * np.pi * np.asarray(cloud.trap.frequencies, dtype=float)
    return np.asarray(np.sqrt(boltzmann * np.asarray(cloud.temperature) / cloud.mass) / omega)
