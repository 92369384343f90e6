"""Why a potential holds nothing."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from physics.traps.landscape import Landscape
from physics.traps.potential import NotTrapped
from physics.traps.stationary import StationaryPoint, stationary_points


def why_not_trapped(landscape: Landscape, points: Sequence[StationaryPoint]) -> NotTrapped:
    """The plainest reason for which nothing is held, `points` being where the potential is stationary."""
    potential = landscape.potential
    minima = [point for point in points if point.minimum]
    limit = potential.knife_energy
    if limit is not None and minima and all(potential.magnetic(point.position) >= limit for point in minima):
        return NotTrapped.KNIFE
    coils = potential.coils
    if not len(potential.beams) and not (coils is not None and coils.shaped):
        return NotTrapped.NOTHING_ON
    if not potential.attractive:
        if coils is not None and coils.shaped and potential.zeeman_slope < 0.0:
            return NotTrapped.HIGH_FIELD_SEEKER
        if coils is not None and coils.shaped and potential.zeeman_slope == 0.0:
            return NotTrapped.NOT_MAGNETIC
        if len(potential.beams) and not potential.shaped:
            return NotTrapped.BLUE_LIGHT
    opposed = potential.shaped and potential.zeeman_slope < 0.0
    if opposed and _holds(replace(landscape, potential=potential.without_coils)):
        return NotTrapped.HIGH_FIELD_SEEKER
    if np.any(potential.force) and _holds(replace(landscape, potential=potential.without_force)):
        # Something else would hold, but for what pulls: gravity, or a gradient that is more than enough against it.
        return NotTrapped.GRAVITY if float(potential.force @ potential.weight) > 0.0 else NotTrapped.LEVITATION
    if (
        potential.zeeman_slope > 0.0
        and coils is not None
        and coils.bias
        and coils.curvature
        and (coils.gradient or 0.0) ** 2 < 0.5 * coils.curvature * coils.bias
    ):
        return NotTrapped.FIELD_OPENS
    return NotTrapped.NO_MINIMUM


def _holds(landscape: Landscape) -> bool:
    return any(point.minimum for point in stationary_points(landscape))
