"""A cloud in a trap, and the way from it to its equilibrium."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np

from physics.checks import Floats, as_floats, require_not_infinite, require_positive
from physics.equilibria import Equilibrium
from physics.models import AVAILABLE_MODELS, Model, Replacement
from physics.particles import Statistics
from physics.traps.harmonic import HarmonicTrap

if TYPE_CHECKING:
    from physics.real_trap import RealTrap

__all__ = ["AVAILABLE_MODELS", "Cloud", "Equilibrium", "Model", "Replacement", "equilibrium"]


@dataclass(frozen=True, kw_only=True, eq=False)
class Cloud:
    """Identical atoms in thermal equilibrium in a trap.

    Arrays are welcome where a number is meant; atoms, temperature, scattering length and the trap's leading
    dimensions broadcast with one another to `shape`.

    Attributes
    ----------
    statistics : Statistics
    mass : float. [kg]
    trap : HarmonicTrap or RealTrap. A Survey is taken as the trap that it found.
    atoms : array_like. [1] Atom number of ONE spin state.
    temperature : array_like. [K]
    spin_components : int. Number of equally filled spin states.
    scattering_length : array_like or None. [m] s-wave length: of two atoms of the same state for bosons, of different
        states for fermions. None, and NaN within an array, where unknown. It may be negative.
    dipolar_length : float or None. [m] Of the magnetic moment, `physics.scattering.dipolar_length`; None leaves
        collisions of dipoles out. It enters collision rates only.

    Raises
    ------
    ValueError : where a value cannot be, in one sentence naming it.
    """

    statistics: Statistics
    mass: float
    trap: HarmonicTrap | RealTrap
    atoms: Any
    temperature: Any
    spin_components: int = 1
    scattering_length: Any = None
    dipolar_length: float | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "trap", _filled(self.trap))
        for field, quantity, unit in (
            ("mass", "mass", "kg"),
            ("atoms", "atom number", ""),
            ("temperature", "temperature", "K"),
        ):
            value = as_floats(getattr(self, field))
            require_positive(quantity, value, unit)
            object.__setattr__(self, field, value)
        if np.ndim(self.mass):
            raise ValueError(f"mass must be one number, got an array of shape {np.shape(self.mass)}")
        if self.spin_components != int(self.spin_components) or self.spin_components < 1:
            raise ValueError(f"spin components must be a whole number from 1 on, got {self.spin_components:g}")
        if self.scattering_length is not None:
            length = as_floats(self.scattering_length)
            require_not_infinite("scattering length", length, "m")
            object.__setattr__(self, "scattering_length", length)
        if self.dipolar_length is not None and not 0.0 <= self.dipolar_length < np.inf:
            raise ValueError(f"dipolar length must be finite and not negative, got {self.dipolar_length:g} m")
        try:
            _ = self.shape
        except ValueError:
            shapes = f"atoms {np.shape(self.atoms)}, temperature {np.shape(self.temperature)}, trap {self.trap.shape}"
            raise ValueError(
                f"atoms, temperature, scattering length and trap must broadcast, got shapes {shapes},"
                f" scattering length {np.shape(self.scattering_length)}"
            ) from None

    @cached_property
    def shape(self) -> tuple[int, ...]:
        """Common shape of everything that may be an array; () for a single cloud."""
        return np.broadcast_shapes(
            np.shape(self.atoms), np.shape(self.temperature), np.shape(self.scattering_length), self.trap.shape
        )

    @property
    def length(self) -> Floats:
        """Scattering length, NaN where unknown. [m]"""
        return as_floats(np.nan) if self.scattering_length is None else self.scattering_length


def _filled(trap: Any) -> HarmonicTrap | RealTrap:
    """The trap that a cloud is put in."""
    if isinstance(trap, HarmonicTrap):
        return trap
    from physics.real_trap import RealTrap, real_trap

    if isinstance(trap, RealTrap):
        return trap
    from physics.traps.survey import Survey

    if not isinstance(trap, Survey):
        raise ValueError(f"trap of a cloud must be a HarmonicTrap, a RealTrap or a Survey, got {type(trap).__name__}")
    return real_trap(trap) if trap.given is None else trap.given


def equilibrium(
    cloud: Cloud,
    model: Model | None = None,
    *,
    fermi_threshold: float = 0.5,
    efficiency: float | None = None,
) -> Equilibrium:
    """Thermal equilibrium of a cloud; every quantity of the answer is computed when it is first asked for.

    Parameters
    ----------
    cloud : Cloud
    model : Model or None. None is semi-ideal for bosons and ideal for fermions. Where the model cannot hold, the
        ideal one is used, for all of an array, and `replaced` of the answer says why.
    fermi_threshold : float. [1] The T/TF that counts as the threshold of degeneracy of fermions.
    efficiency : float or None. [1] Efficiency -dlnD/dlnN assumed for an evaporation to the threshold, D being the
        classical phase-space density; None leaves `atoms_left_at_target` unknown.

    Raises
    ------
    ValueError : unless fermi_threshold and efficiency are positive.
    """
    from physics.exact_fermions import ExactFermions
    from physics.exact_levels import ExactLevels
    from physics.hartree_fock import HartreeFock
    from physics.ideal_bose import IdealBose
    from physics.ideal_fermi import IdealFermi
    from physics.semi_ideal import SemiIdeal

    require_positive("threshold T/TF", as_floats(fermi_threshold), "")
    if efficiency is not None:
        require_positive("evaporation efficiency", as_floats(efficiency), "")
    if model is None:
        model = Model.SEMI_IDEAL if cloud.statistics is Statistics.BOSE else Model.IDEAL
    replaced = _obstacle(cloud, model)
    if replaced is not None:
        model = Model.IDEAL
    kind: type[Equilibrium]
    if not isinstance(cloud.trap, HarmonicTrap):
        from physics.real_models import real_model

        kind = real_model(cloud.statistics, model)
    elif cloud.statistics is Statistics.FERMI:
        kind = ExactFermions if model is Model.EXACT_LEVELS else IdealFermi
    else:
        kind = {
            Model.IDEAL: IdealBose,
            Model.EXACT_LEVELS: ExactLevels,
            Model.SEMI_IDEAL: SemiIdeal,
            Model.HARTREE_FOCK: HartreeFock,
        }[model]
    return kind(
        cloud=cloud, model=model, replaced=replaced, fermi_threshold=float(fermi_threshold), efficiency=efficiency
    )


def _obstacle(cloud: Cloud, model: Model) -> Replacement | None:
    """What keeps the cloud from being described by the model, or None."""
    if model is Model.IDEAL:
        return None
    if model is Model.EXACT_LEVELS:
        return None if isinstance(cloud.trap, HarmonicTrap) else Replacement.HARMONIC_ONLY
    if cloud.statistics is Statistics.FERMI:
        return Replacement.BOSONS_ONLY
    if model in (Model.SEMI_IDEAL, Model.HARTREE_FOCK):
        if np.any(np.isnan(cloud.length)):
            return Replacement.LENGTH_UNKNOWN
        if np.any(cloud.length <= 0.0):
            return Replacement.NOT_REPULSIVE
    return None
