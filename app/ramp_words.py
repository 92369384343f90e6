"""What is said of a simulated ramp: how it ends, where the atoms went, what limits it, what it does not cover."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.control_kinds import CONTROL_KINDS
from app.language import translate as _
from app.units import best_unit, format_quantity
from app.words import number, percent, temperature
from physics.evaporation import EndReason
from physics.evaporation_rates import Process

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.sympathetic import SympatheticAnswer
    from physics.evaporation_budget import Budget
    from physics.evaporation_target import Target
    from physics.ramps import Control

CONDENSES = 2.6
"""Peak phase-space density of bosons from which a target is called condensation."""

PROCESSES: Mapping[Process, str] = MappingProxyType(
    {
        Process.EVAPORATED: _("evaporation"),
        Process.SPILLED: _("spilling"),
        Process.BACKGROUND: _("background gas"),
        Process.TWO_BODY: _("two-body loss"),
        Process.THREE_BODY: _("three-body loss"),
        Process.SPIN_FLIPS: _("spin flips at the field's zero"),
        Process.TRANSFER: _("transfer and jumps"),
        Process.RECOMBINATION: _("heat of recombination"),
        Process.WORK: _("work of the trap"),
        Process.HEATING: _("heating"),
        Process.LIGHT: _("scattered light"),
        Process.NOISE: _("intensity noise"),
        Process.POINTING: _("pointing noise"),
        Process.CONTACT: _("contact with the other species"),
    }
)
"""What takes atoms or brings energy, for reading."""

LOSSES = (Process.BACKGROUND, Process.TWO_BODY, Process.THREE_BODY, Process.SPIN_FLIPS)
"""Processes that take atoms without cooling the others."""

_GOOD = (Process.EVAPORATED, Process.SPILLED)


def duration(seconds: float) -> str:
    """A time for reading: "8.1 s", "310 ms"."""
    return format_quantity(seconds, best_unit(seconds, ("s", "ms", "µs")), digits=3)


def control_text(control: Control, value: float, unit: str = "") -> str:
    """A value of a control for reading: "12.5 mW"; "–" where it is not known."""
    if math.isnan(value):
        return "–"
    kind = CONTROL_KINDS[control.knob]
    if not kind.si_unit:
        return number(value, 4)
    return format_quantity(value, unit or best_unit(value, kind.units, kind.si_unit), digits=4, si_unit=kind.si_unit)


def aim(target: Target, *, bosons: bool) -> str:
    """A target as the object of "reaches"."""
    if target.condensate_atoms is not None:
        return _("a condensate of {atoms} atoms").format(atoms=number(target.condensate_atoms, 3))
    if target.reduced_temperature is not None:
        if bosons and abs(target.reduced_temperature - 1.0) < 0.01:
            return _("the critical temperature")
        ratio = _("T/Tc") if bosons else _("T/TF")
        return f"{ratio} = {number(target.reduced_temperature, 3)}"
    density = target.peak_phase_space_density or math.nan
    if bosons and CONDENSES <= density < 2.62:
        return _("condensation")
    return _("a peak phase-space density of {density}").format(density=number(density, 3))


def ramp_verdict(answer: RampAnswer, *, passenger: bool = True) -> str:
    """How the ramp ends, and what took the atoms, in words a colleague would say; where the passenger ends, or why it
    is not in it.

    passenger : whether to say where it ends
    """
    said = ""
    if answer.passenger_left_out:
        said = _("The passenger is left out: {why}.").format(why=answer.passenger_left_out)
    elif answer.passenger is not None and passenger:
        said = _passenger_end(answer.passenger)
    return " ".join(part for part in (_end(answer), _shares(answer.run.budget), said) if part)


def _passenger_end(passenger: SympatheticAnswer) -> str:
    end = passenger.passenger_reduced_temperature
    if math.isnan(end):  # its own verdict says why
        return ""
    ratio = _("T/Tc") if passenger.run.passenger.gas.bosons else _("T/TF")
    return _("The passenger, {species}, ends at {ratio} = {end}.").format(
        species=passenger.states[1].key, ratio=ratio, end=number(end)
    )


def _end(answer: RampAnswer) -> str:
    run = answer.run
    final = run.final
    if math.isnan(final["time"]):
        return _("Not trapped from the start: {why}.").format(
            why=run.explanation or _("the cloud is too hot for the trap")
        )
    time, left = duration(final["time"]), number(final["atoms"], 2)
    if answer.measured is not None:
        time = _("another {time}").format(time=time)
    cloud = _("{atoms} atoms at {temperature}").format(atoms=left, temperature=temperature(final["temperature"]))
    match run.reason:
        case EndReason.TARGET:
            assert answer.target is not None
            return _("Reaches {aim} after {time} with {cloud}.").format(
                aim=aim(answer.target, bosons=answer.bosons), time=time, cloud=cloud
            )
        case EndReason.RAMP:
            short = ""
            if answer.target is not None:
                short = _(", short of {aim}").format(aim=aim(answer.target, bosons=answer.bosons))
            return _("Ends after {time} with {cloud}, {degeneracy}{short}.").format(
                time=time, cloud=cloud, degeneracy=_degeneracy(answer, final), short=short
            )
        case EndReason.ATOMS:
            return _("Loses its atoms: after {time} fewer than {atoms} are left.").format(
                time=time, atoms=number(1.001 * final["atoms"], 2)
            )
        case EndReason.NOT_TRAPPED:
            why = (
                f": {run.explanation}" if run.explanation else _(", as the cloud is too hot for the depth that is left")
            )
            return _("Holds the cloud for {time} only{why}; {cloud} are left until then.").format(
                time=time, why=why, cloud=cloud
            )


def _degeneracy(answer: RampAnswer, final: Mapping[str, float]) -> str:
    condensed = final["condensate_atoms"] / final["atoms"] if answer.bosons else 0.0
    if condensed > 0.001:
        return _("{share} of them condensed").format(share=percent(condensed))
    if not answer.bosons and math.isfinite(final["reduced_temperature"]):
        return _("T/TF = {ratio}").format(ratio=number(final["reduced_temperature"], 2))
    return _("peak phase-space density {density}").format(density=number(final["peak_phase_space_density"], 2))


def _shares(budget: Budget) -> str:
    """Of the atoms that are gone, what took how many."""
    lost = sum(budget.atoms.values())
    if not lost > 1e-3 * budget.atoms_before:
        return _("Hardly an atom is lost.")
    cooling = sum(budget.atoms[process] for process in _GOOD) / lost
    others = sorted(
        (
            (budget.atoms[p] / lost, PROCESSES[p])
            for p in budget.atoms
            if p not in _GOOD and budget.atoms[p] > 0.005 * lost
        ),
        reverse=True,
    )
    taken = [_("{process} took {share}").format(process=word, share=percent(share)) for share, word in others]
    if not taken:
        return _("Of the atoms lost, all but a few left over the depth, as they should.")
    listed = ", ".join(taken)
    return _("Of the atoms lost, {listed}; the other {cooling} left over the depth.").format(
        listed=listed, cooling=percent(cooling)
    )


def limiting(answer: RampAnswer) -> str:
    """What limits the ramp, as far as a single simulation tells."""
    budget = answer.run.budget
    lost = sum(budget.atoms.values())
    worst = max(LOSSES, key=lambda process: budget.atoms[process])
    rows = answer.run.rows
    if not len(rows.atoms) or not lost > 0.0:
        return ""
    slowest = min(rows.elastic_collision_rate.tolist())
    share = budget.atoms[worst] / lost
    collisions = _("{rate} collisions per atom and second at the least").format(rate=number(slowest, 2))
    if share > 0.1:
        return _("What limits: {process}, with {share} of the atoms lost, and {collisions}.").format(
            process=PROCESSES[worst], share=percent(share), collisions=collisions
        )
    return _("Losses are small; collisions set the pace, {collisions}.").format(collisions=collisions)
