"""Temperatures at which a boson cloud condenses, by formula and by model, at its atom number. NaN of fermions.

References
----------
[1] V. Bagnato, D. E. Pritchard, D. Kleppner, Phys. Rev. A 35, 4354 (1987): the ideal threshold Tc0.
[2] S. Grossmann and M. Holthaus, Phys. Lett. A 208, 188 (1995); W. Ketterle and N. J. van Druten, Phys. Rev. A 54, 656
    (1996): its finite-size shift.
[3] S. Giorgini, L. P. Pitaevskii, S. Stringari, Phys. Rev. A 54, R4633 (1996): its shift by interaction.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from physics.checks import Floats
from physics.constants import boltzmann, planck
from physics.equilibria import Equilibrium, quantity
from physics.hartree_fock_integrals import onset_ratio
from physics.models import Model
from physics.oscillator_levels import OscillatorLevels
from physics.traps.harmonic import HarmonicTrap

_STEPS = 60


@dataclass(frozen=True, kw_only=True, eq=False)
class Thresholds:
    """Thresholds of a cloud at its atom number; its temperature does not enter."""

    equilibrium: Equilibrium

    @quantity
    def ideal(self) -> Floats:
        """Tc0 of a large cloud without interaction. [K] [1]"""
        return self.equilibrium.critical_temperature

    @quantity
    def finite_size(self) -> Floats:
        """Tc0 (1 - 0.7275 (wmean/wbar) N^(-1/3)), first order; NaN where that is not positive. [K] [2]"""
        return self._shifted(self.equilibrium.finite_size_shift)

    @quantity
    def interaction(self) -> Floats:
        """Tc0 (1 - 1.3255 (a/aho) N^(1/6)), first order; NaN where that is not positive or a is unknown. [K] [3]"""
        return self._shifted(self.equilibrium.interaction_shift)

    @quantity
    def finite_size_and_interaction(self) -> Floats:
        """Tc0 with the sum of both shifts, that by interaction if a is known. [K]"""
        return self.equilibrium.critical_temperature_shifted

    def _shifted(self, shift: Floats) -> Floats:
        remaining = 1.0 - shift
        return self.equilibrium.critical_temperature * np.where(remaining > 0.0, remaining, np.nan)

    @quantity
    def exact_saturation(self) -> Floats:
        """Where the excited levels of the oscillator, mu at the ground level, hold all the atoms; no interaction. [K]

        A small cloud has no sharp threshold: this is the temperature at which its ground level is bound to fill. About
        a millisecond each. NaN in a real trap, whose levels are not known.
        """
        solved = self.equilibrium
        if not solved.bosons or not isinstance(solved.cloud.trap, HarmonicTrap):
            return np.full((), np.nan)
        frequencies = solved.cloud.trap.frequencies
        shape = np.broadcast_shapes(np.shape(solved.cloud.atoms), frequencies.shape[:-1])
        atoms = np.broadcast_to(solved.cloud.atoms, shape)
        levels = np.broadcast_to(planck * frequencies / boltzmann, (*shape, 3))
        start = np.broadcast_to(solved.critical_temperature, shape)
        temperature = np.empty(shape)
        for index in np.ndindex(shape):
            temperature[index] = _saturation(float(atoms[index]), levels[index], float(start[index]))
        return temperature

    @quantity
    def hartree_fock(self) -> Floats:
        """Where the condensate of the Hartree-Fock model appears, finite size left out; NaN unless a is known to be
        positive. [K]"""
        solved = self.equilibrium
        if not solved.bosons:
            return np.full((), np.nan)
        if not isinstance(solved.cloud.trap, HarmonicTrap):
            from physics.real_hartree_fock import RealHartreeFock

            return RealHartreeFock(cloud=solved.cloud, model=Model.HARTREE_FOCK).onset_temperature
        ideal: Floats = np.asarray(solved.critical_temperature)
        repulsion = 2.0 * solved.cloud.length * np.sqrt(2.0 * math.pi * solved.cloud.mass * boltzmann * ideal) / planck
        known = repulsion > 0.0
        ratio = np.full(np.shape(repulsion), np.nan)
        ratio[known] = onset_ratio(np.asarray(repulsion)[known])
        onset: Floats = ideal * ratio
        return onset

    @property
    def of_model(self) -> Floats:
        """Threshold of the model that the equilibrium uses. [K]"""
        match self.equilibrium.model:
            case Model.EXACT_LEVELS:
                return self.exact_saturation
            case Model.HARTREE_FOCK:
                return self.hartree_fock
            case _:
                return self.ideal


def _saturation(atoms: float, levels: Floats, start: float) -> float:
    """Temperature [K] at which the levels above the ground level hold so many atoms at most.

    Parameters
    ----------
    levels : (3,). [K] Level spacings over k.
    start : float. [K]
    """
    # Secant for ln N against ln T: nearly the straight line of slope 3 that it is in a large cloud. Levels far above kT
    # are empty, so in a narrow trap the slope is 1 or, at kT below every spacing, exponential; then steps are bounded.
    y, step, before = math.log(start), 0.0, 0.0
    for _ in range(_STEPS):
        miss = math.log(OscillatorLevels(levels / math.exp(y)).excited_atoms(0.0) / atoms)
        slope = (before - miss) / step if step else 3.0
        step = max(-0.5, min(0.5, miss / (slope if slope > 0.9 else 3.0)))
        y, before = y - step, miss
        if abs(step) < 1e-14 * max(1.0, abs(y)) or abs(miss) < 1e-15:
            break
    return math.exp(y)
