"""The answer of an evaporation, and the track that leads to it: number, energy, budget and rows of one gas."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, fields
from enum import Enum

import numpy as np

from physics.checks import Floats
from physics.constants import boltzmann
from physics.evaporation_budget import Budget, Ledger, StageSummary, efficiencies
from physics.evaporation_rates import ATOM_PROCESSES, ENERGY_PROCESSES, CloudNow, Kinetics
from physics.evaporation_rows import Rows, joined, rows_of
from physics.gas import Gas
from physics.losses import Losses
from physics.ramps import Control, Placed
from physics.stage_trap import StageTrap
from physics.transfer import Transfer, distance_in_radii, slow_transfer, sudden_transfer
from physics.trap_path import FixedTrap, TrapPoint
from physics.truncated_averages import truncated_averages


class EndReason(Enum):
    """Why a simulation ended."""

    TARGET = "target reached"
    RAMP = "ramp ended"
    ATOMS = "atoms lost"
    NOT_TRAPPED = "not trapped"

    @property
    def label(self) -> str:
        return self.value


@dataclass(frozen=True, kw_only=True, eq=False)
class Evaporation:
    """A simulated ramp.

    Attributes
    ----------
    time : (n,) [s] From the start of the ramp; the same time twice where a control jumps or the trap changes.
    stage : (n,) number of the stage, from 0.
    rows : Rows. The columns.
    controls : (n,) each. NaN where a trap does not have one. [SI]
    reason : EndReason. explanation : text of the trap where it held nothing, else empty.
    budget : Budget of the whole ramp.
    stages : one StageSummary each, of those that began.
    farthest_transfer : distance of the minima of two traps over the mean radius of the cloud in the first, the largest
        of its sudden transfers; NaN without one whose minima are known. [1]
    """

    gas: Gas
    losses: Losses
    time: Floats
    stage: Floats
    rows: Rows
    controls: Mapping[Control, Floats]
    reason: EndReason
    explanation: str
    budget: Budget
    stages: tuple[StageSummary, ...]
    farthest_transfer: float = math.nan

    @property
    def final(self) -> dict[str, float]:
        """The last of each single column; NaN where there is no row, of a cloud that was never trapped."""
        columns = {"time": self.time, **{field.name: getattr(self.rows, field.name) for field in fields(self.rows)}}
        return {
            name: float(column[-1]) if len(column) else math.nan for name, column in columns.items() if column.ndim == 1
        }

    @property
    def atoms(self) -> Floats:
        return self.rows.atoms

    @property
    def temperature(self) -> Floats:
        return self.rows.temperature


@dataclass(frozen=True, kw_only=True)
class Mark:
    """Where a track stood when a stage began."""

    ledger: Ledger
    atoms: float
    energy: float
    count: int


class Track:
    """One gas on its way along a ramp.

    Attributes
    ----------
    atoms, energy : now, of one spin state. [1] [J]
    point : the trap at the end of the last stage; None where there is none yet, or it held nothing.
    count : rows so far.
    jumped : whether it has changed at once since the last row.
    explanation : why it is not held, where it is not.
    """

    def __init__(self, gas: Gas, losses: Losses) -> None:
        self.gas, self.losses = gas, losses
        self.ledger = Ledger()
        self.explanation = ""
        self.point: TrapPoint | None = None
        self.atoms = self.energy = math.nan
        self.count = 0
        self.jumped = False
        self._farthest = math.nan
        self._handed: float | None = None  # atoms that the trap of this stage has caught
        self._begun = (math.nan, math.nan)
        self._parts: list[tuple[Floats, int, Rows, dict[Control, Floats]]] = []
        self._summaries: list[StageSummary] = []

    def start(self, atoms: float, temperature: float, point: TrapPoint) -> None:
        """The first cloud: as many atoms at that temperature in the cut trap."""
        self.atoms, self.energy, self._begun = atoms, math.nan, (atoms, math.nan)
        self.point = point
        if point.depth is None:
            return
        mean = truncated_averages(point.curve, point.depth / (boltzmann * temperature)).energy
        self.energy = atoms * float(mean) * boltzmann * temperature
        self._begun = (atoms, self.energy)

    def hand_over(self, new: TrapPoint, transfer: Transfer | None, fewest: float) -> bool:
        """From the trap of the last stage to that of the next, if they differ; False where that does not hold it."""
        old = self.point
        if old is None or old.depth is None or new.depth is None:
            return True
        jumps = any(abs(a / b - 1.0) > 1e-9 for a, b in ((old.depth, new.depth), (old.volume, new.volume)))
        if transfer is None and not jumps:
            return True
        temperature = self._temperature(old)
        if transfer is not None and not transfer.sudden:
            found = slow_transfer(temperature, old, new)
        else:
            found = sudden_transfer(temperature, old, new, transfer.displacement if transfer else (0.0, 0.0, 0.0))
            if transfer is not None:
                self._farthest = float(np.fmax(self._farthest, distance_in_radii(self.gas.mass, temperature, old, new)))
        atoms = self.atoms * found.share
        if atoms < fewest or math.isnan(found.energy):
            slow = transfer is not None and not transfer.sudden
            self.explanation = _NO_ROOM if slow else _NOT_CAUGHT
            return False
        if found.energy >= new.curve.highest_energy * new.depth:
            self.explanation = f"what the new trap catches, {found.share:.2g} of the atoms, is too hot for its depth"
            return False
        energy = atoms * found.energy
        self.ledger.add_transfer(self.atoms - atoms, energy - self.energy)
        self.atoms, self.energy, self.jumped, self._handed = atoms, energy, True, atoms
        return True

    def _temperature(self, point: TrapPoint) -> float:
        """Of the cloud in a trap at rest."""
        trap = StageTrap({}, FixedTrap(point=point), 0.0, 1.0)
        return Kinetics(self.gas, self.losses, trap).cloud(0.0, self.atoms, self.energy).temperature

    def variables(self) -> Floats:
        """(ln N, ln E, budgets of atoms and energy from now on)."""
        values = np.zeros(VARIABLES)
        values[:2] = math.log(self.atoms), math.log(self.energy)
        return values

    def scales(self) -> Floats:
        """What counts as 1 in each variable."""
        scales = np.ones(VARIABLES)
        scales[2 : 2 + _MANY], scales[2 + _MANY :] = self.atoms, self.energy
        return scales

    def settle(self, values: Floats) -> None:
        """Take the variables at the end of a stretch."""
        self.atoms, self.energy = math.exp(values[0]), math.exp(values[1])
        self.ledger.add_rows(values[2 : 2 + _MANY].tolist(), values[2 + _MANY :].tolist())

    def keep(
        self,
        placed: Placed,
        kinetics: Kinetics,
        times: list[float],
        clouds: list[CloudNow],
        controls: dict[Control, Floats],
    ) -> None:
        """Rows of clouds at times within a stage, and the controls there."""
        if not times:
            return
        self._parts.append((placed.begin + np.array(times), placed.number, rows_of(kinetics, clouds), controls))
        self.count += len(times)

    def mark(self) -> Mark:
        """Where it stands, before a stage."""
        self._handed = None
        return Mark(ledger=self.ledger.copy(), atoms=self.atoms, energy=self.energy, count=self.count)

    def summarise(self, placed: Placed, before: Mark, end: float) -> None:
        """A stage, from its mark to now; nothing where it has no row."""
        if self.count == before.count:
            return
        temperature, density = (
            np.concatenate([getattr(rows, name) for _, _, rows, _ in self._parts])
            for name in ("temperature", "classical_phase_space_density")
        )
        # What a transfer does to the cloud is no evaporation.
        start = max(before.count - 1, 0) if self._handed is None else before.count
        gamma, alpha = efficiencies(
            (before.atoms if self._handed is None else self._handed, self.atoms),
            (float(temperature[start]), float(temperature[-1])),
            (float(density[start]), float(density[-1])),
        )
        self._summaries.append(
            StageSummary(
                number=placed.number,
                label=placed.stage.label,
                begin=placed.begin,
                end=end,
                first=before.count,
                last=self.count - 1,
                budget=self.ledger.since(before.ledger, (before.atoms, self.atoms), (before.energy, self.energy)),
                efficiency=gamma,
                cooling=alpha,
            )
        )

    def finished(self, reason: EndReason) -> Evaporation:
        """The answer."""
        parts = self._parts
        controls = dict.fromkeys(control for *_, values in parts for control in values)
        return Evaporation(
            gas=self.gas,
            losses=self.losses,
            time=np.concatenate([np.empty(0), *(time for time, *_ in parts)]),
            stage=np.concatenate([np.empty(0), *(np.full(len(time), number) for time, number, *_ in parts)]),
            rows=joined([rows for _, _, rows, _ in parts]),
            controls={
                control: np.concatenate(
                    [values.get(control, np.full(len(time), np.nan)) for time, _, _, values in parts]
                )
                for control in controls
            },
            reason=reason,
            explanation=self.explanation,
            budget=self.ledger.since(Ledger(), (self._begun[0], self.atoms), (self._begun[1], self.energy)),
            stages=tuple(self._summaries),
            farthest_transfer=self._farthest,
        )


_NO_ROOM = "the new trap is too shallow for what the cloud becomes in it"
_NOT_CAUGHT = "the new trap catches none of the cloud"
_MANY = len(ATOM_PROCESSES)
VARIABLES = 2 + _MANY + len(ENERGY_PROCESSES)
"""Of one gas: ln N, ln E and its budgets."""
