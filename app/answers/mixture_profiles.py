"""How high the two clouds of a mixture lie in the trap, and their densities along the vertical."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.mixture import mixture_answer
from app.answers.part import part
from app.answers.profile import PROFILE_POINTS, profile_answer, round_up
from app.plan_field import PlanError

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

_FAINT = 2e-3  # of the peak
_Z = np.array([0.0, 0.0, 1.0])


@dataclass(frozen=True, kw_only=True, eq=False)
class MixtureProfiles:
    """Both clouds along the vertical, each through its own centre and along its own axis nearest to the vertical.

    heights : (points,). [m] Upwards, from where the first species has its minimum.
    centres : of both. [m] In the same way; equal where the plan gives frequencies.
    densities : of both, (points,) each. [1/m^3] Of one spin state.
    peaks : [1/m^3] of both, in the same way; NaN where one is not known.
    """

    heights: Array
    centres: tuple[float, float]
    densities: tuple[Array, Array]
    peaks: tuple[float, float]


@part("species", "trap", "cloud", "losses", "target", "passenger")
def mixture_profiles(plan: Plan) -> MixtureProfiles | None:
    """Profiles of the plan's two clouds; None where one is not held, or has no profile.

    Raises
    ------
    PlanError
        As `mixture_answer`.
    """
    answer = mixture_answer(plan)
    mixture = answer.mixture
    if answer.passenger is None or mixture is None:
        return None
    up = _upwards(plan)
    clouds = (answer.coolant, answer.passenger)
    axes = [int(np.argmax(np.abs(np.asarray(place.axes) @ up))) for place in mixture.places]
    lowest = np.asarray(mixture.places[0].minimum)
    first, second = (float((np.asarray(place.minimum) - lowest) @ up) for place in mixture.places)
    try:
        profiles = [profile_answer(cloud.plan, axis) for cloud, axis in zip(clouds, axes, strict=True)]
    except PlanError:
        return None
    shapes = [(profile.positions, profile.density.total) for profile in profiles]
    if not all(np.all(np.isfinite(density)) and np.max(density) > 0.0 for _, density in shapes):
        return None
    reaches = [_reach(*shape) + abs(centre) for shape, centre in zip(shapes, (first, second), strict=True)]
    reach = round_up(max(reaches))
    heights = np.linspace(-reach, reach, PROFILE_POINTS)
    densities = [
        np.interp(heights - centre, positions, density, left=0.0, right=0.0)
        for (positions, density), centre in zip(shapes, (first, second), strict=True)
    ]
    peaks = [float(cloud.equilibrium.peak_density) for cloud in clouds]
    return MixtureProfiles(
        heights=heights, centres=(first, second), densities=(densities[0], densities[1]), peaks=(peaks[0], peaks[1])
    )


def _upwards(plan: Plan) -> Array:
    """Against gravity; the laboratory's z where it is off."""
    down = None if plan.trap.harmonic else plan.trap.gravity_direction
    if down is None:
        return _Z
    return np.asarray(-np.asarray(down, dtype=np.float64) / np.linalg.norm(down), dtype=np.float64)


def _reach(positions: Array, density: Array) -> float:
    """How far from its centre a cloud is worth drawing. [m]"""
    return float(np.max(np.abs(positions[density >= _FAINT * np.max(density)])))
