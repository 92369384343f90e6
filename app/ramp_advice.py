"""What limits a simulated ramp, and what to change; and what it does otherwise than another one."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from app.language import translate as _
from app.ramp_edits import with_known_depth
from app.ramp_words import duration
from app.words import number, percent
from physics.evaporation import EndReason
from physics.evaporation_rates import Process

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.plan import Plan
    from physics.evaporation import Evaporation
    from physics.evaporation_budget import StageSummary

_OUTRUN = 5.5
"""Truncation parameter below which a stage cuts into the cloud faster than evaporation pays."""

_IDLE = 11.0
"""Truncation parameter above which hardly an atom is hot enough to leave."""

_MUCH = 0.25
"""Share of the lost atoms from which a loss is worth a word."""

_POOR = 1.5
"""Efficiency of a stage below which its atoms are spent badly; 3 is usual in a tight trap."""


@dataclass(frozen=True)
class Advice:
    """What stands in the way, and what to change, in a sentence each."""

    limit: str
    change: str

    @property
    def text(self) -> str:
        return f"{self.limit} {self.change}".strip()


def assumed_depth(plan: Plan) -> str:
    """How deep a trap is taken to be that has no depth of its own; empty where it has one."""
    depth = with_known_depth(plan).trap.depth
    if plan.trap.depth is not None or depth is None:
        return ""
    return _("The trap has no depth of its own; it is taken to be {depth} deep at the start.").format(depth=depth.text)


def onset(answer: RampAnswer) -> str:
    """When bosons condense along a ramp that has no target, and how many there are then; empty where they do not."""
    if not answer.bosons or answer.target is not None:
        return ""
    run = answer.run
    found = np.flatnonzero(run.rows.condensate_atoms > 0.0)
    if not len(found) or not found[0]:
        return ""
    return _("Condenses after {time} with {atoms} atoms.").format(
        time=duration(float(run.time[found[0]]) + answer.begin), atoms=number(float(run.atoms[found[0]]))
    )


def advice(answer: RampAnswer) -> Advice:
    """What limits the ramp most, and what to change; the first that holds of a list, the gravest first."""
    return next(_advices(answer))


def _advices(answer: RampAnswer) -> Iterator[Advice]:
    run = answer.run
    if answer.extremes.polarised:
        yield Advice(
            _("Fermions of one spin state do not collide, so nothing evaporates but what is cut."),
            _("Use two spin states, or a second species."),
        )
    if run.reason is EndReason.NOT_TRAPPED:
        yield Advice("", _("Start deeper or colder: the depth should be some ten times kT."))
    stages = [stage for stage in run.stages if stage.last > stage.first]
    if not stages:
        yield Advice("", "")
        return
    yield from _outrun(answer, stages)
    yield from _losses(answer)
    yield from _idle(answer, stages)
    yield from _short(answer, stages)
    yield from _poor(answer, stages)
    slowest = min(stages, key=lambda stage: _least_rate(run, stage))
    yield Advice(
        _("Nothing stands out: stage {n} has the slowest collisions, {rate} a second for each atom.").format(
            n=slowest.number + 1, rate=number(_least_rate(run, slowest), 2)
        ),
        "",
    )


def _outrun(answer: RampAnswer, stages: list[StageSummary]) -> Iterator[Advice]:
    run = answer.run
    lowest = min(stages, key=lambda stage: _ends(run.rows.truncation, stage, np.fmin))
    eta = _ends(run.rows.truncation, lowest, np.fmin)
    if eta < _OUTRUN and run.budget.share(Process.EVAPORATED) < 0.999:
        first = lowest.first == lowest.last or run.rows.truncation[lowest.first] < _OUTRUN
        if first and lowest is stages[0]:
            yield Advice(
                _("The trap is shallow from the start: η = {eta}.").format(eta=number(eta, 2)),
                _("Start deeper, or hold until the cloud has cooled."),
            )
        else:
            yield Advice(
                _("Stage {n} outruns the collisions: η falls to {eta}.").format(
                    n=lowest.number + 1, eta=number(eta, 2)
                ),
                _("Give it more time, or a higher end."),
            )


def _losses(answer: RampAnswer) -> Iterator[Advice]:
    run = answer.run
    bad = {
        process: run.budget.share(process)
        for process in (Process.BACKGROUND, Process.TWO_BODY, Process.THREE_BODY, Process.SPIN_FLIPS)
        if process in run.budget.atoms
    }
    worst = max(bad, key=lambda process: bad[process])
    if not bad[worst] >= _MUCH:
        return
    share = percent(bad[worst])
    if worst is Process.BACKGROUND:
        yield Advice(
            _("Background gas takes {share} of the lost atoms.").format(share=share),
            _("Ramp faster, or start denser so that collisions allow it."),
        )
    elif worst is Process.TWO_BODY:
        yield Advice(
            _("Two-body loss takes {share} of the lost atoms.").format(share=share),
            _("A weaker trap loses fewer; another state may have none."),
        )
    elif worst is Process.SPIN_FLIPS:
        yield Advice(
            _("Spin flips at the zero of the field take {share} of the lost atoms.").format(share=share),
            _("Leave the quadrupole while the cloud is hotter, or keep it from the zero by light."),
        )
    else:
        yield Advice(
            _("Three-body loss takes {share} of the lost atoms.").format(share=share),
            _("Weaken the trap where the cloud is densest, towards the end."),
        )


def _idle(answer: RampAnswer, stages: list[StageSummary]) -> Iterator[Advice]:
    run = answer.run
    for stage in stages:
        eta = float(np.median(run.rows.truncation[stage.first : stage.last + 1]))
        length = stage.end - stage.begin
        if eta > _IDLE and length > 0.15 * float(run.time[-1] - run.time[0]):
            yield Advice(
                _("In stage {n} hardly an atom is hot enough to leave: η is about {eta}.").format(
                    n=stage.number + 1, eta=number(eta, 2)
                ),
                _("Shorten it, or lower the depth further."),
            )
            return


def _short(answer: RampAnswer, stages: list[StageSummary]) -> Iterator[Advice]:
    if answer.reached or answer.run.reason is not EndReason.RAMP:
        return
    condensed = answer.bosons and answer.run.rows.condensate_atoms[-1] > 0.0
    if answer.target is None and (condensed or not answer.bosons):
        return
    last = stages[-1]
    eta = float(answer.run.rows.truncation[-1])
    gain = "" if math.isnan(last.efficiency) else _(", and γ = {gamma}").format(gamma=number(last.efficiency, 2))
    yield Advice(
        _("The ramp ends while evaporation still works: η = {eta}{gain}.").format(eta=number(eta, 2), gain=gain),
        _("Add a stage that goes on lowering the depth."),
    )


def _poor(answer: RampAnswer, stages: list[StageSummary]) -> Iterator[Advice]:
    known = [stage for stage in stages if not math.isnan(stage.efficiency)]
    if not known:
        return
    worst = min(known, key=lambda stage: stage.efficiency)
    if worst.efficiency < _POOR:
        yield Advice(
            _("Stage {n} gains little for its atoms: γ = {gamma}.").format(
                n=worst.number + 1, gamma=number(worst.efficiency, 2)
            ),
            _("Give it more time, or a tighter trap."),
        )


def _ends(column: np.ndarray, stage: StageSummary, ufunc: np.ufunc) -> float:
    return float(ufunc.reduce(column[stage.first : stage.last + 1]))


def _least_rate(run: Evaporation, stage: StageSummary) -> float:
    return _ends(run.rows.elastic_collision_rate, stage, np.fmin)


def difference(answer: RampAnswer, reference: RampAnswer) -> str:
    """What a ramp does otherwise than one that was kept, in numbers."""
    run, other = answer.run, reference.run
    if not len(run.time) or not len(other.time):
        return _("One of the two ramps holds nothing.")
    atoms = float(run.atoms[-1] / other.atoms[-1])
    kelvin = float(run.temperature[-1] / other.temperature[-1])
    density = float(run.rows.peak_phase_space_density[-1] / other.rows.peak_phase_space_density[-1])
    later = float(run.time[-1]) + answer.begin - float(other.time[-1]) - reference.begin
    parts = [
        _("N × {factor}").format(factor=f"{atoms:.3g}"),
        _("T × {factor}").format(factor=f"{kelvin:.3g}"),
        _("D × {factor}").format(factor=f"{density:.3g}"),
        _("{time} longer").format(time=duration(later))
        if later > 5e-4
        else _("{time} shorter").format(time=duration(-later))
        if later < -5e-4
        else _("as long"),
    ]
    return ", ".join(parts)
