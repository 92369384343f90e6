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


_DIFFERENT = 0.05
"""Difference of the volume, or of the reduced temperature, below which the harmonic trap would do as well."""


def harmonic_trap_caveat(found: Survey, solved: RealEquilibrium) -> Caveat | None:
    """How a single cloud in a surveyed trap differs from that in the harmonic trap of the same frequencies; None where
    that is by less than 5 %.

    Raises
    ------
    ValueError : for a trap without frequencies.
    """
    temperature = float(solved.cloud.temperature)
    kT = boltzmann * temperature
    ratio = volume_ratio(solved.trap, temperature)
    real, harmonic = float(solved.reduced_temperature), float(solved.harmonic.reduced_temperature)
    if not max(abs(ratio - 1.0), abs(harmonic / real - 1.0)) > _DIFFERENT:
        return None
    numbers = {"truncation": float(solved.trap.depth) / kT}
    numbers |= {name: value for name, value in (("real", real), ("harmonic", harmonic)) if np.isfinite(value)}
    densities = float(solved.peak_phase_space_density), float(solved.harmonic_peak_phase_space_density)
    if np.all(np.isfinite(densities)) and not (solved.bosons and min(real, harmonic) < 1.0):
        numbers |= {"real_density": densities[0], "harmonic_density": densities[1]}
    share = 0.0 if found.volume_curve is None else float(found.volume_curve.atoms_in_arms(temperature))
    if found.arm_depth is not None and share > _ARMS:
        numbers |= {"arms": found.arm_depth / kT, "in_arms": share}
    return Caveat(
        id="harmonic_trap",
        severity=Severity.NOTE,
        value=ratio,
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
