"""What it would cost to answer for a cloud in the harmonic trap of the same frequencies instead of the real one."""

from __future__ import annotations

from types import MappingProxyType

import numpy as np

from physics.caveats import Caveat, Severity
from physics.constants import boltzmann
from physics.real_equilibria import RealEquilibrium, classical_cloud
from physics.real_trap import RealTrap
from physics.traps.survey import Survey

_ARMS = 0.01
"""Share of a cloud in the arms of crossed beams from which they are worth a word."""


def harmonic_trap_caveat(found: Survey, solved: RealEquilibrium) -> Caveat:
    """How a single cloud in a surveyed trap differs from that in the harmonic trap of the same frequencies.

    Raises
    ------
    ValueError : for a trap without frequencies.
    """
    temperature = float(solved.cloud.temperature)
    kT = boltzmann * temperature
    numbers = {"truncation": float(solved.trap.depth) / kT}
    for name, value in (("real", solved.reduced_temperature), ("harmonic", solved.harmonic.reduced_temperature)):
        if np.isfinite(value):
            numbers[name] = float(value)
    share = 0.0 if found.volume_curve is None else float(found.volume_curve.atoms_in_arms(temperature))
    if found.arm_depth is not None and share > _ARMS:
        numbers |= {"arms": found.arm_depth / kT, "in_arms": share}
    return Caveat(
        id="harmonic_trap",
        severity=Severity.NOTE,
        value=volume_ratio(solved.trap, temperature),
        numbers=MappingProxyType(numbers),
    )


def volume_ratio(trap: RealTrap, temperature: float) -> float:
    """Volume N/n(0) of a classical cloud cut at the depth, over that in the harmonic trap without end. [1]

    `temperature`: [K]. Raises ValueError for a trap without frequencies.
    """
    if not trap.has_frequencies:
        raise ValueError("a trap must have frequencies to be compared with its harmonic trap")
    kT = boltzmann * temperature
    cloud = classical_cloud(trap, np.array([float(trap.held) / kT]))
    radii = np.sqrt(kT / trap.mass) / trap.angular_frequencies
    harmonic = (2.0 * np.pi) ** 1.5 * np.prod(radii)
    return float(trap.volume * cloud.number[0] / cloud.centre[0] / harmonic)
