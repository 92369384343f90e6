"""Evaporation along a ramp, by the kinetics of a cut classical cloud.

The state is (ln N, ln E); temperature follows from E/N, which below the depth has a largest value: a cloud with more is
not trapped. Near degeneracy the kinetics carries the energy of the classical cloud, more than the quantum cloud has, so
that N and T are estimates there; phase-space density and T/Tc are those of the quantum cloud at this N and T.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996).
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields
from enum import Enum

import numpy as np

from physics.checks import Floats
from physics.constants import boltzmann
from physics.evaporation_budget import Budget, Ledger, StageSummary, efficiencies
from physics.evaporation_rates import ATOM_PROCESSES, ENERGY_PROCESSES, FEWEST_ATOMS, Kinetics
from physics.evaporation_rows import Rows, joined, rows_of
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.losses import Losses
from physics.ramps import Control, Placed, Ramp
from physics.runge_kutta import Integrator, OutOfRange, Step
from physics.stage_trap import StageTrap
from physics.transfer import slow_transfer, sudden_transfer
from physics.trap_path import FixedTrap, TrapPath, TrapPoint
from physics.truncated_averages import truncated_averages

TOLERANCE = 1e-7
"""Error of a step, in ln N and ln E; results are good to about ten times this."""

ROWS = 240
"""Rows of the columns over a whole ramp, shared by its stages according to their duration."""

MOST_STEPS = 20_000
"""Of a stretch of a ramp: hundreds are usual where rates range over many decades."""

FEWEST_ROWS = 12
"""Of a stage."""


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


def evaporate(
    gas: Gas,
    atoms: float,
    temperature: float,
    ramp: Ramp,
    path: TrapPath,
    *,
    losses: Losses | None = None,
    target: Target | None = None,
    fewest_atoms: float = FEWEST_ATOMS,
    rows: int = ROWS,
    tolerance: float = TOLERANCE,
    tick: Callable[[float], bool] | None = None,
) -> Evaporation:
    """Simulate a ramp.

    Parameters
    ----------
    gas : Gas. What the atoms are.
    atoms, temperature : float. [1] [K] Of one spin state, at the start.
    ramp : Ramp
    path : TrapPath. The trap at the start and how its controls change it.
    losses : Losses. Single numbers; what is None does not count.
    target : Target or None. Where to end before the ramp does.
    fewest_atoms : float. [1] Number at which all counts as lost.
    rows : int. About as many rows come back.
    tolerance : float. [1] Of a step.
    tick : called with the share of the ramp that is done; False ends the simulation with `Cancelled`.

    Raises
    ------
    ValueError : for values that cannot be, a scattering length that is needed and unknown, a control without a start,
        or rates that make more than `MOST_STEPS` steps of a stage.
    """
    for name, value, unit in (("atom number", atoms, ""), ("temperature", temperature, "K")):
        if not 0.0 < value < math.inf:
            raise ValueError(f"{name} must be positive and finite, got {value:g} {unit}".rstrip())
    _ = gas.cold_cross_section
    run = _Run(gas, losses or Losses(), target, fewest_atoms, tolerance, ramp.duration)
    share = rows / ramp.duration
    for placed in ramp.placed(path.standing):
        if tick is not None and not tick(placed.begin / ramp.duration):
            raise Cancelled
        transfer = placed.stage.transfer
        if transfer is not None:
            path = transfer.path
        count = max(FEWEST_ROWS, round(share * placed.stage.duration))
        if placed.number == 0:
            run.start(atoms, temperature, path.at(placed.values(0.0)))
        if run.stage(placed, path, count) is not None:
            break
    return run.finished()


class Cancelled(Exception):
    """The caller's tick said to stop."""


class _Run:
    """The simulation while it runs."""

    def __init__(
        self,
        gas: Gas,
        losses: Losses,
        target: Target | None,
        fewest: float,
        tolerance: float,
        duration: float,
    ) -> None:
        self.gas, self.losses, self.target, self.fewest = gas, losses, target, fewest
        self.tolerance, self.duration = tolerance, duration
        self.ledger = Ledger()
        self.reason: EndReason | None = None
        self.explanation = ""
        self.parts: list[tuple[Floats, int, Rows, dict[Control, Floats]]] = []
        self.summaries: list[StageSummary] = []
        self.point: TrapPoint | None = None
        self.count = 0
        self.jumped = False

    def start(self, atoms: float, temperature: float, point: TrapPoint) -> None:
        """The first cloud: as many atoms at that temperature in the cut trap."""
        self.atoms, self.energy, self.begun = atoms, math.nan, (atoms, math.nan)
        self.point = point
        if point.depth is None:
            return
        mean = truncated_averages(point.curve, point.depth / (boltzmann * temperature)).energy
        self.energy = atoms * float(mean) * boltzmann * temperature
        self.begun = (atoms, self.energy)

    def stage(self, placed: Placed, path: TrapPath, count: int) -> EndReason | None:
        """One stage; the reason where the simulation ends in it."""
        before = (self.ledger.copy(), self.atoms, self.energy, self.count)
        self._hand_over(placed, path)
        reason = self.reason
        corners = (0.0, *placed.breaks, placed.stage.duration)
        finish = 0.0
        for begin, end in itertools.pairwise(corners):
            if reason is None:
                part = max(4, round(count * (end - begin) / placed.stage.duration))
                finish, reason = self._stretch(placed, path, begin, end, part)
        if self.count > before[3]:
            self._summarise(placed, before, placed.begin + finish)
        self.point = path.at(placed.values(placed.stage.duration)) if reason is None else None
        self.reason = reason
        return reason

    def _hand_over(self, placed: Placed, path: TrapPath) -> None:
        """From the trap of the last stage to that of this one, if they differ."""
        transfer, old = placed.stage.transfer, self.point
        new = path.at(placed.values(0.0))
        if old is None or old.depth is None or new.depth is None:
            return
        jumps = any(abs(a / b - 1.0) > 1e-9 for a, b in ((old.depth, new.depth), (old.volume, new.volume)))
        if transfer is None and not jumps:
            return
        temperature = self._temperature(old)
        if transfer is not None and not transfer.sudden:
            found = slow_transfer(temperature, old, new)
        else:
            found = sudden_transfer(temperature, old, new, transfer.displacement if transfer else (0.0, 0.0, 0.0))
        atoms = self.atoms * found.share
        if atoms < self.fewest or math.isnan(found.energy):
            self.reason = EndReason.NOT_TRAPPED
            self.explanation = "the new trap does not hold the cloud"
            return
        energy = atoms * found.energy
        self.ledger.add_transfer(self.atoms - atoms, energy - self.energy)
        self.atoms, self.energy, self.jumped = atoms, energy, True

    def _temperature(self, point: TrapPoint) -> float:
        """Of the cloud in a trap at rest."""
        trap = StageTrap({}, FixedTrap(point=point), 0.0, 1.0)
        return Kinetics(self.gas, self.losses, trap).cloud(0.0, self.atoms, self.energy).temperature

    def _stretch(
        self, placed: Placed, path: TrapPath, begin: float, end: float, count: int
    ) -> tuple[float, EndReason | None]:
        """One stretch without corners; where it ended, and why if before its end."""
        trap = StageTrap(placed.courses, path, begin, end)
        if trap.end <= trap.begin:
            self.explanation = trap.reason
            return begin, EndReason.NOT_TRAPPED
        kinetics = Kinetics(self.gas, self.losses, trap)
        steps, finish, reason = self._steps(kinetics, begin, trap.end)
        if reason is None and not trap.held:
            reason, self.explanation = EndReason.NOT_TRAPPED, trap.reason
        self._keep(placed, kinetics, steps, begin, finish, count)
        return finish, reason

    def _steps(self, kinetics: Kinetics, begin: float, end: float) -> tuple[list[Step], float, EndReason | None]:
        many = len(ATOM_PROCESSES)
        values = np.zeros(2 + many + len(ENERGY_PROCESSES))
        values[:2] = math.log(self.atoms), math.log(self.energy)
        scales = np.ones(len(values))
        scales[2 : 2 + many], scales[2 + many :] = self.atoms, self.energy
        integrator = Integrator(
            derivatives=kinetics.derivatives,
            tolerance=self.tolerance,
            scales=scales,
            smallest=1e-9 * (end - begin),
        )
        steps: list[Step] = []
        time = begin
        try:
            ends = self._events(kinetics, time, values)
        except OutOfRange:
            return steps, time, EndReason.NOT_TRAPPED
        reason = next((reason for reason, missing in ends.items() if missing <= 0.0), None)
        while reason is None and time < end:
            step = integrator.advance(time, values, end)
            if step is None:
                reason = EndReason.NOT_TRAPPED
                break
            steps.append(step)
            if len(steps) > MOST_STEPS:
                raise ValueError(
                    f"the ramp changes too fast to follow at {time:g} s of a stage, after {MOST_STEPS} steps"
                )
            now = self._events(kinetics, step.end, step.finish)
            for event, missing in now.items():
                if missing <= 0.0:
                    reason = event

                    def left(t: float, y: Floats, event: EndReason = event) -> float:
                        return self._events(kinetics, t, y)[event]

                    time = step.crossing(left)
                    values = step.at(time)
                    break
            else:
                time, values = step.end, step.finish
        self.atoms, self.energy = math.exp(values[0]), math.exp(values[1])
        self.ledger.add_rows(values[2 : 2 + many].tolist(), values[2 + many :].tolist())
        return steps, time, reason

    def _events(self, kinetics: Kinetics, time: float, values: Floats) -> dict[EndReason, float]:
        """What is left until each kind of end, not positive where it has come."""
        atoms, energy = math.exp(values[0]), math.exp(values[1])
        found = {EndReason.ATOMS: atoms / self.fewest - 1.0}
        if self.target is not None:
            cloud = kinetics.cloud(time, atoms, energy)
            found[EndReason.TARGET] = self.target.missing(self.gas, kinetics.trap.bottom_exponent, cloud)
        return found

    def _keep(
        self, placed: Placed, kinetics: Kinetics, steps: list[Step], begin: float, finish: float, count: int
    ) -> None:
        """Rows at even times of a stretch, its ends among them."""
        times = np.linspace(begin, finish, count + 1) if finish > begin else np.array([begin])
        if self.parts and not self.jumped and len(times) > 1:
            times = times[1:]
        self.jumped = False
        clouds, kept, index = [], [], 0
        for time in times:
            while index < len(steps) - 1 and steps[index].end < time:
                index += 1
            if steps and time < finish:
                atoms, energy = np.exp(steps[index].at(time)[:2]).tolist()
            else:
                atoms, energy = self.atoms, self.energy
            try:
                clouds.append(kinetics.cloud(float(time), atoms, energy))
            except OutOfRange:
                continue
            kept.append(float(time))
        if not kept:
            return
        controls = {control: course.values(np.array(kept)) for control, course in placed.courses.items()}
        self.parts.append((placed.begin + np.array(kept), placed.number, rows_of(kinetics, clouds), controls))
        self.count += len(kept)

    def _summarise(self, placed: Placed, before: tuple[Ledger, float, float, int], end: float) -> None:
        ledger, atoms, energy, first = before
        temperature, density = (
            np.concatenate([getattr(rows, name) for _, _, rows, _ in self.parts])
            for name in ("temperature", "classical_phase_space_density")
        )
        start = max(first - 1, 0)
        gamma, alpha = efficiencies(
            (atoms, self.atoms),
            (float(temperature[start]), float(temperature[-1])),
            (float(density[start]), float(density[-1])),
        )
        self.summaries.append(
            StageSummary(
                number=placed.number,
                label=placed.stage.label,
                begin=placed.begin,
                end=end,
                first=first,
                last=self.count - 1,
                budget=self.ledger.since(ledger, (atoms, self.atoms), (energy, self.energy)),
                efficiency=gamma,
                cooling=alpha,
            )
        )

    def finished(self) -> Evaporation:
        controls = dict.fromkeys(control for *_, values in self.parts for control in values)
        return Evaporation(
            gas=self.gas,
            losses=self.losses,
            time=np.concatenate([np.empty(0), *(time for time, *_ in self.parts)]),
            stage=np.concatenate([np.empty(0), *(np.full(len(time), number) for time, number, *_ in self.parts)]),
            rows=joined([rows for _, _, rows, _ in self.parts]),
            controls={
                control: np.concatenate(
                    [values.get(control, np.full(len(time), np.nan)) for time, _, _, values in self.parts]
                )
                for control in controls
            },
            reason=self.reason or EndReason.RAMP,
            explanation=self.explanation,
            budget=self.ledger.since(Ledger(), (self.begun[0], self.atoms), (self.begun[1], self.energy)),
            stages=tuple(self.summaries),
        )
