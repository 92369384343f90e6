"""Bosons in a harmonic trap: a Thomas-Fermi condensate that repels thermal atoms, which do not repel one another.

Above the threshold, which stays at Tc0, this is the ideal gas. Below, the thermal atoms feel |V - mu| and the
condensate feels no thermal atoms. Valid for hbar w << kT, N0 a >> aho and a weakly interacting gas, n a^3 << 1; within
a few percent of Tc the neglected repulsion among thermal atoms counts.

References
----------
[1] M. Naraschewski and D. M. Stamper-Kurn, Phys. Rev. A 58, 2423 (1998).
[2] F. Dalfovo, S. Giorgini, L. P. Pitaevskii, S. Stringari, Rev. Mod. Phys. 71, 463 (1999): the condensate.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from physics import semi_ideal_integrals as integrals
from physics.checks import Floats
from physics.condensed_cells import CondensedCells
from physics.equilibria import quantity
from physics.ideal_bose import IdealBose
from physics.statistics import bose, zeta

_STEPS = 40  # far more than ever needed: from 4 to 7


@dataclass(frozen=True, kw_only=True, eq=False)
class SemiIdeal(CondensedCells, IdealBose):
    """x = mu/kT of the condensate solves X = coupling x^(5/2) + F(x): condensed and thermal atoms."""

    @cached_property
    def _is_condensed(self) -> NDArray[np.bool_]:
        return np.asarray(self._degeneracy > zeta(3.0))

    @cached_property
    def _coupling(self) -> Floats:
        """N0 (hbar wbar/kT)^3 is this times x^(5/2): the Thomas-Fermi density summed over the trap. [1]"""
        return self._below(8.0 / (15.0 * math.sqrt(math.pi)) * self._density_scale)

    @cached_property
    def _height(self) -> Floats:
        """x = mu/kT of the condensed cells, flat. [1]"""
        # Atoms beyond saturation; to be found as condensed ones and as thermal ones that the condensate makes room for.
        beyond = self._below(self._degeneracy) - zeta(3.0)
        return _height(beyond, self._coupling)

    @quantity
    def log_fugacity(self) -> Floats:
        """mu/kT, mu from the bottom of the trap: positive below threshold. [1]"""
        return self._merged(0.0 - self._alpha, lambda: self._height)

    @quantity
    def condensate_fraction(self) -> Floats:
        """From mu = (hbar wbar/2) (15 N0 a/aho)^(2/5). [1]"""

        def below() -> Floats:
            share = self._coupling * self._height**2 * np.sqrt(self._height) / self._below(self._degeneracy)
            return np.minimum(share, 1.0)

        return self._merged(0.0, below)

    @cached_property
    def _thermal_share(self) -> Floats:
        return self._merged(1.0, lambda: integrals.thermal_number(self._height) / self._below(self._degeneracy))

    @quantity
    def peak_density(self) -> Floats:
        """At the centre; just below threshold, where the condensate is thinner than the thermal gas at its edge, there.
        [1/m^3]"""

        def below() -> Floats:
            # Along V the sum of both is convex inside the condensate, so it is largest at one of the ends.
            centre = self._below(self._density_scale) * self._height + bose(1.5, self._height)
            return np.maximum(centre, zeta(1.5))

        return self._merged(self.peak_phase_space_density, below) / self._quantum_volume

    @quantity
    def mean_density(self) -> Floats:
        """(integral of n^2)/N, n the sum of both densities. [1/m^3]"""

        def below() -> Floats:
            x, scale, X = self._height, self._below(self._density_scale), self._below(self._degeneracy)
            condensate = 4.0 / 7.0 * scale * x * self._coupling * x**2 * np.sqrt(x)
            both = 2.0 * scale * integrals.density_product(x)
            return (condensate + both + integrals.density_squared(x)) / X / self._below(self._quantum_volume)

        return self._merged(super().mean_density, below)

    @cached_property
    def _potential_share(self) -> Floats:
        return self._merged(
            super()._potential_share,
            lambda: integrals.trap_energy(self._height) / integrals.thermal_number(self._height) / 1.5,
        )

    @quantity
    def condensate_radii(self) -> Floats:
        """sqrt(2 mu/m)/w_i, where the Thomas-Fermi density ends. [m]"""
        x = self._merged(np.nan, lambda: self._height)
        return np.expand_dims(np.sqrt(2.0 * x), -1) * self._thermal_lengths

    @quantity
    def energy_per_atom(self) -> Floats:
        """Kinetic and trap energy, and the repulsion within the condensate and between it and thermal atoms. [J]

        (5/7) mu a condensed atom; a thermal one has its kinetic energy and the lifted potential.
        """

        def below() -> Floats:
            x, X = self._height, self._below(self._degeneracy)
            thermal = integrals.kinetic_energy(x) + integrals.lifted_energy(x) + x * integrals.thermal_number(x)
            condensate = 5.0 / 7.0 * self._coupling * x**3 * np.sqrt(x)
            return self._below(self.thermal_energy) * (thermal + condensate) / X

        return self._merged(super().energy_per_atom, below)


def _height(beyond: Floats, coupling: Floats) -> Floats:
    """x at which coupling x^(5/2) + [F(x) - zeta(3)] = beyond > 0, for flat arrays."""
    # Newton for the logarithm of the sum against ln x: its slope stays between 1/2 and 5/2, so it converges from
    # anywhere. It starts below the roots of either part alone.
    condensate_alone = (beyond / coupling) ** 0.4
    thermal_alone = beyond / zeta(2.0) + (beyond * math.sqrt(math.pi) / (4.0 * zeta(2.5))) ** 2
    x: Floats = condensate_alone * thermal_alone / (condensate_alone + thermal_alone)
    for _ in range(_STEPS):
        excess, slope = integrals.excess(x)
        condensate = coupling * x**2 * np.sqrt(x)
        total = condensate + x * excess
        step = np.log(total / beyond) * total / (2.5 * condensate + x * (excess + slope))
        x = x * np.exp(-step)
        if np.max(np.abs(step), initial=0.0) < 1e-8:  # squared by the step just made
            return x
    raise ArithmeticError("the semi-ideal condensate did not converge")
