"""What a row of the table of quantities says: heading, label, units, formula, source, and what the quantity needs."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum


class Group(Enum):
    """Heading under which a quantity is read."""

    DEGENERACY = "Degeneracy"
    HARMONIC = "In the harmonic trap of these frequencies"
    THRESHOLD = "Distance to threshold"
    CONDENSATE = "Condensate"
    FERMI_SEA = "Fermi sea"
    CLOUD = "Cloud"
    COLLISIONS = "Collisions"
    LOSSES = "Losses and heating"
    CLASSICAL = "Classical formulas against quantum"


class Need(Enum):
    """What must be there for a quantity to have a value; the text completes "needs ..."."""

    BOSONS = "bosons"
    FERMIONS = "fermions"
    CONDENSATE = "a condensate"
    INTERACTING_CONDENSATE = "a condensate with a known repulsive scattering length"
    SCATTERING_LENGTH = "a known scattering length"
    COLLISIONS = "collisions between the atoms, with a known scattering length"
    REPULSIVE = "a known repulsive scattering length"
    ATTRACTIVE = "a known attractive scattering length"
    STABLE_CONDENSATE = "a known scattering length at which the condensate does not collapse"
    DIPOLES = "large magnetic moments and a known repulsive scattering length"
    DEPTH = "a trap depth"
    EFFICIENCY = "an evaporation efficiency in the target"
    COLLIDING = "atoms that collide"
    BACKGROUND = "a background lifetime"
    TWO_BODY = "a two-body rate constant"
    THREE_BODY = "a three-body rate constant"
    LOSSES = "a background lifetime or a rate constant of losses"
    NO_CONDENSATE = "a cloud without a condensate"
    HEATING = "losses or a heating rate"
    LIGHT = "a trap of beams whose light the atoms scatter at a known rate"
    LIGHT_HEATING = "a trap of beams, and no heating rate that is given"
    FIELD_ZERO = "a trap at whose minimum the field vanishes"
    MIXTURE = "two spin states with a known scattering length"
    POSITIVE_LENGTH = "a positive scattering length between the spin states"
    FREQUENCIES = "trap frequencies, which this trap does not have"
    REAL_TRAP = "a trap of beams and coils that has frequencies"
    HARMONIC = "a trap given by its frequencies, of which the levels are known"
    ROOM = "fewer atoms than these, which the trap does not hold"
    KNOWN_COUPLING = "1/(kF a) below −1, within ±0.2 or above 1: between, there is no simple estimate"


@dataclass(frozen=True, kw_only=True)
class Row:
    """A quantity. `unit` is its SI unit, `units` the ones offered for display (the first also for tables).

    `in_real_trap` is the formula in a trap of beams and coils, where it is another one.
    """

    name: str
    label: str
    symbol: str
    unit: str
    units: tuple[str, ...]
    group: Group
    formula: str
    source: str
    validity: str
    needs: tuple[Need, ...] = ()
    in_real_trap: str = ""
    axes: bool = False  # one value for each trap axis

    def __post_init__(self) -> None:
        if not self.units:
            raise ValueError(f"quantity {self.name!r} must offer at least one unit")
