"""How high the two clouds of a mixture lie in the trap, and their densities along the vertical."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from app.answers.mixture import mixture_answer
from app.answers.part import part
from app.answers.profile import PROFILE_POINTS, round_up
from physics.profiles import density_profile

if TYPE_CHECKING:
    from app.answers.cloud import CloudAnswer
    from app.plan import Plan

Array = NDArray[np.float64]

_RADII = 3.2  # rms radii to each side: the edge of a cold Fermi gas is at 2.83
_EDGE = 1.3  # Thomas-Fermi radii
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
    """Profiles of the plan's two clouds; None where one is not held, or has no size, as in a quadrupole.

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
    centres = tuple(float((np.asarray(place.minimum) - lowest) @ up) for place in mixture.places)
    reaches = [_reach(cloud, axis) for cloud, axis in zip(clouds, axes, strict=True)]
    if not np.all(np.isfinite(reaches)):
        return None
    reach = round_up(max(reach + abs(centre) for reach, centre in zip(reaches, centres, strict=True)))
    heights = np.linspace(-reach, reach, PROFILE_POINTS)
    first, second = (
        density_profile(_shaped(cloud), axis, heights - centre).total
        for cloud, axis, centre in zip(clouds, axes, centres, strict=True)
    )
    peaks = [float(cloud.equilibrium.peak_density) for cloud in clouds]
    return MixtureProfiles(
        heights=heights, centres=(centres[0], centres[1]), densities=(first, second), peaks=(peaks[0], peaks[1])
    )


def _upwards(plan: Plan) -> Array:
    """Against gravity; the laboratory's z where it is off."""
    down = None if plan.trap.harmonic else plan.trap.gravity_direction
    if down is None:
        return _Z
    return np.asarray(-np.asarray(down, dtype=np.float64) / np.linalg.norm(down), dtype=np.float64)


def _reach(cloud: CloudAnswer, axis: int) -> float:
    """How far from its centre a cloud is worth drawing. [m]"""
    radii = np.asarray(cloud.equilibrium.condensate_radii, dtype=np.float64)
    edge = float(radii[axis]) if radii.shape == (3,) and np.isfinite(radii[axis]) else 0.0
    return max(_RADII * float(np.asarray(cloud.equilibrium.thermal_radii)[axis]), _EDGE * edge)


def _shaped(cloud: CloudAnswer) -> Any:
    """The equilibrium whose profile is drawn: in a real trap that of the harmonic trap at its bottom."""
    real = getattr(cloud, "real_trap", None)
    return cloud.equilibrium if real is None else real.harmonic
