"""What a trap becomes when its potential changes a little: frequencies and depth, without a new survey.

At a pass the potential is stationary, so that its energy changes, to first order, as the potential does at the old
place; at the radio-frequency knife the surface moves as well, and the energy on it by the ratio of the two slopes. The
minimum is followed by a few steps of Newton's method.
"""

from __future__ import annotations

import numpy as np

from physics.checks import Floats
from physics.traps.boundary import Exit
from physics.traps.harmonic import HarmonicTrap
from physics.traps.modes import modes_of
from physics.traps.potential import Potential
from physics.traps.survey import Survey

_STEPS = 3


def nearby(found: Survey, potential: Potential) -> HarmonicTrap | None:
    """Frequencies and depth in a potential that differs a little from the surveyed one.

    None where nothing has frequencies: the surveyed trap, or the changed one where its minimum was. The depth is None
    where it was, or where it would be lost.
    """
    r = nearby_minimum(found, potential)
    if r is None:
        return None
    _, _, hessian = potential.hessian(r)
    modes = modes_of(hessian, potential.mass)
    if modes is None:
        return None
    depth = _depth(found, potential, r)
    return HarmonicTrap(frequencies=modes.frequencies, depth=depth if depth is not None and depth > 0.0 else None)


def nearby_minimum(found: Survey, potential: Potential) -> Floats | None:
    """Where the minimum is in such a potential. [m] None where nothing has frequencies."""
    if found.minimum is None or found.frequencies is None:
        return None
    r = np.array(found.minimum, dtype=np.float64)
    for _ in range(_STEPS):
        _, gradient, hessian = potential.hessian(r)
        r = r - np.linalg.solve(hessian, gradient)
    return r


def _depth(found: Survey, potential: Potential, minimum: Floats) -> float | None:
    escape = found.escape
    if escape is None:
        return None
    if escape.position is None:
        outside = potential.level_outside
        return None if outside is None else outside - float(potential.energy(minimum))
    energy, gradient = potential.gradient(escape.position)
    if escape.kind is Exit.KNIFE and potential.knife_energy is not None:
        magnetic, slope, _ = potential.magnetic_derivatives(escape.position, 1)
        assert slope is not None
        energy = energy + (gradient @ slope) / (slope @ slope) * (potential.knife_energy - magnetic)
    return float(energy - potential.energy(minimum))
