"""The condensate of an equilibrium on its own: N0 atoms and their interaction, whatever the model says of its shape.

Between the Gaussian of a weak interaction and the Thomas-Fermi shape of a strong one there is no formula. The Gaussian
that minimises the energy is too wide and its energy too high by up to 8 %; Thomas-Fermi, without kinetic energy, errs
to the other side. So both are mixed, with a weight P/(P + 25) of the latter, P being N0 a/aho of an isotropic trap with
the same interaction energy over the mean level spacing. Against the numerical ground state in isotropic traps, the rms
radius so found is within 0.3 %, mu and energy within 1.5 %, peak density within 3.5 %, for any N0 a/aho >= 0; in a disc
of frequencies 1:1:2.8 mu and energy are within 2 %, in a cigar of 100:100:1 mu is within 1.5 %, the rms length within
6 %. With attraction it is the Gaussian, NaN beyond its collapse.

References
----------
[1] G. Baym and C. J. Pethick, Phys. Rev. Lett. 76, 6 (1996): both limits.
[2] F. Dalfovo, S. Giorgini, L. P. Pitaevskii, S. Stringari, Rev. Mod. Phys. 71, 463 (1999), eqs. (50) to (55):
    Thomas-Fermi.
[3] P. A. Ruprecht, M. J. Holland, K. Burnett, M. Edwards, Phys. Rev. A 51, 4704 (1995): collapse. Recalled.
[4] T. Lahaye et al., Rep. Prog. Phys. 72, 126401 (2009): dipoles.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.equilibria import Equilibrium, quantity
from physics.variational import GaussianCondensate, collapse_parameter, gaussian_condensate, isotropic_parameter

COLLAPSE = 0.575
"""N0 |a|/aho above which an attractive condensate in an isotropic trap collapses. [3]"""

_HALF_THOMAS_FERMI = 25.0
_HALF_FLATTENED = 2.2
# Peak density times the product of the rms radii, per atom: 1/(2 pi)^(3/2) of a Gaussian, 15/(8 pi) 7^(-3/2) of a
# Thomas-Fermi cloud, whose radii are sqrt(7) times the rms ones.
_GAUSSIAN_PEAK, _THOMAS_FERMI_PEAK = (2.0 * math.pi) ** -1.5, 15.0 / (8.0 * math.pi) / 7.0**1.5


class CondensateShape(Enum):
    """What a condensate looks like: which of two limits is nearer, or that there is none."""

    NONE = "no condensate"
    UNKNOWN = "scattering length unknown"
    GAUSSIAN = "Gaussian"
    THOMAS_FERMI = "Thomas-Fermi"
    COLLAPSED = "collapsed"


@dataclass(frozen=True, kw_only=True, eq=False)
class Condensate:
    """The condensate of an equilibrium. Shapes are those of the equilibrium; NaN without a condensate."""

    equilibrium: Equilibrium

    @cached_property
    def _atoms(self) -> Floats:
        atoms = np.asarray(self.equilibrium.condensate_atoms)
        return np.where(atoms > 0.0, atoms, np.nan)

    @cached_property
    def gaussian(self) -> GaussianCondensate:
        """The variational Gaussian of as many atoms."""
        cloud = self.equilibrium.cloud
        return gaussian_condensate(cloud.mass, cloud.trap.angular_frequencies, self._atoms, cloud.length)

    @quantity
    def interaction_parameter(self) -> Floats:
        """N0 a/aho. [1]"""
        return self._atoms * self.equilibrium.cloud.length / self.equilibrium.oscillator_length

    @cached_property
    def _axis_parameter(self) -> Floats:
        """(..., 3) N0 a/aho of an isotropic trap with the same interaction energy over the level spacing of the axis;
        0 of attraction. [1]"""
        gaussian = self.gaussian
        ratio = gaussian.interaction_energy[..., np.newaxis] / gaussian.level_energies
        return isotropic_parameter(np.maximum(ratio, 0.0))

    @quantity
    def thomas_fermi_weight(self) -> Floats:
        """Weight of the Thomas-Fermi shape, between 0 and 1. [1]"""
        gaussian = self.gaussian
        ratio = gaussian.interaction_energy / np.mean(gaussian.level_energies, axis=-1)
        parameter = isotropic_parameter(np.maximum(ratio, 0.0))
        return parameter / (parameter + _HALF_THOMAS_FERMI)

    @property
    def shape(self) -> CondensateShape:
        """The nearer limit, of a single cloud.

        Raises
        ------
        ValueError : for an array of clouds.
        """
        if self.equilibrium.cloud.shape:
            raise ValueError(f"a shape is of one condensate, got clouds of shape {self.equilibrium.cloud.shape}")
        if np.isnan(self._atoms):
            return CondensateShape.NONE
        if np.isnan(self.equilibrium.cloud.length):
            return CondensateShape.UNKNOWN
        if np.isnan(self.gaussian.interaction):
            return CondensateShape.COLLAPSED
        return CondensateShape.THOMAS_FERMI if self.thomas_fermi_weight > 0.5 else CondensateShape.GAUSSIAN

    @cached_property
    def _thomas_fermi_potential(self) -> Floats:
        """mu = (hbar wbar/2) (15 N0 a/aho)^(2/5); 0 of attraction. [J] [2]"""
        level = np.cbrt(np.prod(self.gaussian.level_energies, axis=-1))
        potential: Floats = 0.5 * level * (15.0 * np.maximum(self.interaction_parameter, 0.0)) ** 0.4
        return potential

    def _mixed(self, gaussian: Floats, thomas_fermi: Floats) -> Floats:
        weight = self.thomas_fermi_weight
        mixed: Floats = (1.0 - weight) * gaussian + weight * thomas_fermi
        return mixed

    @quantity
    def rms_radii(self) -> Floats:
        """(..., 3) sqrt(<x_i^2>). [m]"""
        weight = np.expand_dims(self.thomas_fermi_weight, -1)
        cloud = self.equilibrium.cloud
        squared = 2.0 * np.expand_dims(self._thomas_fermi_potential, -1) / (7.0 * cloud.mass)
        squared = squared / cloud.trap.angular_frequencies**2
        return np.sqrt((1.0 - weight) * self.gaussian.rms_radii**2 + weight * squared)

    @quantity
    def chemical_potential(self) -> Floats:
        """From the bottom of the trap. [J]"""
        return self._mixed(self.gaussian.chemical_potential, self._thomas_fermi_potential)

    @quantity
    def energy_per_atom(self) -> Floats:
        """From the bottom of the trap. [J]"""
        return self._mixed(self.gaussian.energy, 5.0 / 7.0 * self._thomas_fermi_potential)

    @quantity
    def release_energy_per_atom(self) -> Floats:
        """Kinetic energy after the trap is switched off: all but that of the trap. [J]"""
        released = self.gaussian.kinetic_energy + self.gaussian.interaction_energy
        return self._mixed(released, 2.0 / 7.0 * self._thomas_fermi_potential)

    @quantity
    def peak_density(self) -> Floats:
        """At the centre. [1/m^3]"""
        # A peak flattens long before the whole is of Thomas-Fermi shape, along each axis by itself.
        flat = self._axis_parameter / (self._axis_parameter + _HALF_FLATTENED)
        shape = np.prod(np.cbrt(_GAUSSIAN_PEAK - flat * (_GAUSSIAN_PEAK - _THOMAS_FERMI_PEAK)), axis=-1)
        density: Floats = self._atoms * shape / np.prod(self.rms_radii, axis=-1)
        return density

    @quantity
    def healing_length(self) -> Floats:
        """1/sqrt(8 pi n a) at the centre; NaN unless atoms repel. [m]"""
        length = self.equilibrium.cloud.length
        return 1.0 / np.sqrt(8.0 * math.pi * self.peak_density * np.where(length > 0.0, length, np.nan))

    @quantity
    def collapse_atoms(self) -> Floats:
        """Largest condensate of attractive atoms, 0.575 aho/|a|, isotropic trap; NaN unless atoms attract. [1] [3]"""
        return COLLAPSE * self._attraction_length

    @quantity
    def gaussian_collapse_atoms(self) -> Floats:
        """The same of the Gaussian model, in this trap: too many, 0.671 aho/|a| where it is isotropic. [1]"""
        return collapse_parameter(self.equilibrium.cloud.trap.angular_frequencies) * self._attraction_length

    @property
    def _attraction_length(self) -> Floats:
        """aho/|a| of attractive atoms. [1]"""
        length = self.equilibrium.cloud.length
        ratio: Floats = self.equilibrium.oscillator_length / np.where(length < 0.0, -length, np.nan)
        return ratio

    @quantity
    def dipolar_ratio(self) -> Floats:
        """a_dd/a: above 1 a large condensate in an isotropic trap is unstable to the attraction of its dipoles; NaN
        unless both lengths are known and atoms repel otherwise. [1] [4]"""
        cloud = self.equilibrium.cloud
        if cloud.dipolar_length is None:
            return np.full((), np.nan)
        return cloud.dipolar_length / np.where(cloud.length > 0.0, cloud.length, np.nan)
