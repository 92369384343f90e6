"""Where atoms and energy of an evaporation went, for a whole ramp and stage by stage."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from physics.evaporation_rates import ATOM_PROCESSES, ENERGY_PROCESSES, Process


@dataclass(frozen=True, kw_only=True)
class Budget:
    """What left and what came, by process.

    Attributes
    ----------
    atoms_before, atoms_after : of one spin state. [1]
    atoms : lost by each process; they add up to the difference. [1]
    energy_before, energy_after : from the bottom of the trap. [J]
    energy : gained by each process, negative where atoms took it away; it adds up to the difference. [J]
    """

    atoms_before: float
    atoms_after: float
    atoms: Mapping[Process, float]
    energy_before: float
    energy_after: float
    energy: Mapping[Process, float]

    @property
    def atoms_missing(self) -> float:
        """What the sum over the processes misses of the difference, over the atoms before. [1] An error of steps."""
        return (self.atoms_before - self.atoms_after - sum(self.atoms.values())) / self.atoms_before

    @property
    def energy_missing(self) -> float:
        """The same of the energy, over the larger of that before and after. [1]"""
        missing = self.energy_after - self.energy_before - sum(self.energy.values())
        return missing / max(self.energy_before, self.energy_after)

    def share(self, process: Process) -> float:
        """Of the atoms lost; NaN where none were. [1]"""
        lost = sum(self.atoms.values())
        return self.atoms[process] / lost if lost > 0.0 else math.nan


@dataclass(frozen=True, kw_only=True)
class StageSummary:
    """One stage of a simulated ramp.

    Attributes
    ----------
    number : from 0. label : of the user.
    begin, end : float. [s]
    first, last : rows of the columns at its ends.
    budget : Budget of the stage, its transfer and jumps included.
    efficiency : gamma = -dlnD/dlnN of the classical peak phase-space density, over the stage after its transfer. [1]
    cooling : alpha = dlnT/dlnN over the same. [1]
        Both are NaN where less than a thousandth of the atoms is lost.
    """

    number: int
    label: str
    begin: float
    end: float
    first: int
    last: int
    budget: Budget
    efficiency: float
    cooling: float

    @property
    def handed(self) -> bool:
        """Whether it begins with a transfer, or with a jump of a control that changes the trap."""
        return self.budget.energy[Process.TRANSFER] != 0.0 or self.budget.atoms[Process.TRANSFER] != 0.0

    @property
    def caught(self) -> float:
        """Share of the atoms that its trap has caught; NaN where none were handed to it. [1] Number and temperature of
        what was caught are those of its first row."""
        return 1.0 - self.budget.atoms[Process.TRANSFER] / self.budget.atoms_before if self.handed else math.nan


class Ledger:
    """Running totals of a simulation; a budget is the difference of two of its entries."""

    def __init__(self) -> None:
        self.atoms = dict.fromkeys((*ATOM_PROCESSES, Process.TRANSFER), 0.0)
        self.energy = dict.fromkeys((*ENERGY_PROCESSES, Process.TRANSFER), 0.0)

    def copy(self) -> Ledger:
        other = Ledger()
        other.atoms.update(self.atoms)
        other.energy.update(self.energy)
        return other

    def add_rows(self, lost: list[float], gained: list[float]) -> None:
        """Add what the processes did, in the order of the kinetics."""
        for process, value in zip(ATOM_PROCESSES, lost, strict=True):
            self.atoms[process] += value
        for process, value in zip(ENERGY_PROCESSES, gained, strict=True):
            self.energy[process] += value

    def add_transfer(self, atoms: float, energy: float) -> None:
        self.atoms[Process.TRANSFER] += atoms
        self.energy[Process.TRANSFER] += energy

    def since(self, before: Ledger, atoms: tuple[float, float], energy: tuple[float, float]) -> Budget:
        """Budget between an earlier copy and now, with number and energy then and now."""
        return Budget(
            atoms_before=atoms[0],
            atoms_after=atoms[1],
            atoms=MappingProxyType({p: value - before.atoms[p] for p, value in self.atoms.items()}),
            energy_before=energy[0],
            energy_after=energy[1],
            energy=MappingProxyType({p: value - before.energy[p] for p, value in self.energy.items()}),
        )


def efficiencies(
    atoms: tuple[float, float], temperature: tuple[float, float], phase_space_density: tuple[float, float]
) -> tuple[float, float]:
    """gamma and alpha between two clouds; NaN where hardly an atom is lost."""
    lost = math.log(atoms[1] / atoms[0])
    if abs(lost) < 1e-3:
        return math.nan, math.nan
    gain = math.log(phase_space_density[1] / phase_space_density[0])
    return -gain / lost, math.log(temperature[1] / temperature[0]) / lost
