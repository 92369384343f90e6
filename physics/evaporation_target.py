"""Where an evaporation is to end."""

from __future__ import annotations

import math
from dataclasses import dataclass

from physics.evaporation_rates import CloudNow
from physics.evaporation_rows import degeneracy_of, occupation, reduced_temperature
from physics.gas import Gas

_MOST_ENHANCED = 2.7
"""Quantum over classical peak phase-space density of bosons is below this, 2.18 in a deep harmonic trap."""


@dataclass(frozen=True, kw_only=True)
class Target:
    """One condition of the cloud, at which a simulation ends. Exactly one is given.

    Attributes
    ----------
    peak_phase_space_density : float. [1] Of the quantum cloud. Bosons that saturate below it, because the trap is
        shallow, have reached it at their threshold.
    reduced_temperature : float. [1] T/Tc0 or T/TF, in traps that have frequencies.
    condensate_atoms : float. [1] Of ideal bosons.
    """

    peak_phase_space_density: float | None = None
    reduced_temperature: float | None = None
    condensate_atoms: float | None = None

    def __post_init__(self) -> None:
        given = {name: value for name, value in vars(self).items() if value is not None}
        if len(given) != 1:
            got = " and ".join(name.replace("_", " ") for name in given) or "none"
            raise ValueError(
                f"a target is one of phase-space density, reduced temperature, condensate atoms: got {got}"
            )
        for name, value in given.items():
            if not 0.0 < value < math.inf:
                raise ValueError(f"{name.replace('_', ' ')} of a target must be positive and finite, got {value:g}")

    def missing(self, gas: Gas, bottom_exponent: float, cloud: CloudNow) -> float:
        """Positive while the target is not reached."""
        if self.reduced_temperature is not None:
            here = reduced_temperature(gas, cloud)
            if math.isnan(here):
                raise ValueError("a target reduced temperature needs a trap that has frequencies")
            return here - self.reduced_temperature
        occupied = occupation(gas, cloud)
        if self.peak_phase_space_density is not None:
            if _MOST_ENHANCED * occupied < self.peak_phase_space_density:
                return self.peak_phase_space_density - occupied
            solved = degeneracy_of(gas, bottom_exponent, [cloud])
            if solved.saturated[0]:
                return -1.0 if self.peak_phase_space_density < 2.6124 else 1.0
            return self.peak_phase_space_density - float(solved.peak_phase_space_density[0])
        if not gas.bosons:
            raise ValueError("a target of condensate atoms is one for bosons")
        assert self.condensate_atoms is not None
        fraction = 0.0
        if occupied > 0.5:
            fraction = float(degeneracy_of(gas, bottom_exponent, [cloud]).condensate_fraction[0])
        return self.condensate_atoms - fraction * cloud.atoms
