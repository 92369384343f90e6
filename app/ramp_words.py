"""What is said of a simulated ramp: how it ends, where the atoms went, what limits it, what it does not cover."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.control_kinds import CONTROL_KINDS
from app.language import translate as _
from app.units import best_unit, format_quantity
from app.words import number, percent, temperature, times
from physics.caveats import Severity
from physics.evaporation import EndReason
from physics.evaporation_rates import Process
from physics.ramp_caveats import RampCaveat, RampCaveatKind
from physics.ramp_design import Bound
from physics.ramp_sensitivity import Input, RampSensitivity

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.ramp_design import DesignAnswer
    from app.answers.ramp_sensitivity import SensitivityAnswer
    from app.answers.sympathetic import SympatheticAnswer
    from physics.evaporation_budget import Budget
    from physics.evaporation_target import Target
    from physics.ramps import Control

FIRST_ALONE = _("of the first species alone")

CONDENSES = 2.6
"""Peak phase-space density of bosons from which a target is called condensation."""

SIGNS: Mapping[Severity, str] = MappingProxyType({Severity.NOTE: "○", Severity.WARNING: "△", Severity.REFUSAL: "■"})
WEIGHTS: Mapping[Severity, str] = MappingProxyType(
    {Severity.NOTE: _("Note"), Severity.WARNING: _("Take care"), Severity.REFUSAL: _("Not this cloud")}
)

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

_PLAIN: Callable[[float], str] = number


def _length(value: float) -> str:
    return format_quantity(value, "a0", digits=4)


_CAVEATS: Mapping[RampCaveatKind, tuple[str, Callable[[float], str]]] = MappingProxyType(
    {
        RampCaveatKind.POLARISED: (
            _("Fermions of one spin state do not collide at these energies: this cloud does not evaporate by itself."),
            _PLAIN,
        ),
        RampCaveatKind.SHALLOW: (
            _("The trap gets as shallow as {value} kT: the cut thermal distribution is an estimate below 5."),
            _PLAIN,
        ),
        RampCaveatKind.ESTIMATES: (
            _("The classical phase-space density reaches {value}: N and T are estimates from 0.3 on."),
            _PLAIN,
        ),
        RampCaveatKind.FAST_TRAP: (
            _("The trap changes fast, |dω/dt|/ω² = {value}: the cloud follows smoothly below 0.1. Take more time."),
            _PLAIN,
        ),
        RampCaveatKind.FAST_DEPTH: (
            _("The depth falls by {value} of itself in a rethermalisation time: collisions do not keep up. Slow down."),
            times,
        ),
        RampCaveatKind.HYDRODYNAMIC: (
            _("Atoms collide {value} times per radian of the fastest axis: they do not leave freely, and fewer do."),
            _PLAIN,
        ),
        RampCaveatKind.FAST_LOSS: (
            _("In one rethermalisation time {value} of the atoms are lost without cooling: no equilibrium."),
            percent,
        ),
        RampCaveatKind.ONE_WAY_OUT: (
            _(
                "Only {value} of all directions lead out of this trap: evaporation is slower than this answer, an "
                "upper bound, says."
            ),
            percent,
        ),
        RampCaveatKind.TRANSFER_APART: (
            _(
                "Two traps of a sudden transfer have their minima {value} cloud radii apart: the cloud swings there, "
                "and all of that energy counts as heat at once."
            ),
            _PLAIN,
        ),
        RampCaveatKind.PAULI_BLOCKING: (
            _("T/TF falls to {value}: filled levels block collisions, which is left out, and evaporation is slower."),
            _PLAIN,
        ),
        RampCaveatKind.LIGHT_HEATING: (
            _("Scattered light brings in {value} of the energy at the end. Lower powers sooner, or detune further."),
            percent,
        ),
        RampCaveatKind.SPIN_FLIPS: (
            _("About {value} of the atoms are lost at the zero of the field, an order of magnitude: known to ×4."),
            percent,
        ),
        RampCaveatKind.NO_BACKGROUND: (
            _("No background lifetime is given: slow ramps look better than they are. Type one."),
            _PLAIN,
        ),
        RampCaveatKind.THREE_BODY_UNKNOWN: (
            _("The three-body rate constant is not known: dense clouds look better than they are."),
            _PLAIN,
        ),
        RampCaveatKind.THREE_BODY_SCALING: (
            _("K₃ is {value} times what resonant three-body loss at this scattering length can be. Check K₃ and a."),
            times,
        ),
        RampCaveatKind.THREE_BODY_UNITARITY: (
            _("K₃ is {value} times what is possible at the highest temperature: this loss is too fast there."),
            times,
        ),
        RampCaveatKind.LENGTH_RECALLED: (
            _("The scattering length {value} is recalled from its source. Check it before you rely on it."),
            _length,
        ),
        RampCaveatKind.TWO_BODY_RECALLED: (
            _("The two-body rate constant {value} is recalled from its source. Check it before you rely on it."),
            lambda value: format_quantity(value, "cm^3/s", digits=2),
        ),
        RampCaveatKind.THREE_BODY_RECALLED: (
            _("The three-body rate constant {value} is recalled from its source. Check it before you rely on it."),
            lambda value: format_quantity(value, "cm^6/s", digits=2),
        ),
    }
)

_BOUNDS: Mapping[Bound, str] = MappingProxyType(
    {
        Bound.BACKGROUND: _("background gas: a tenth longer lifetime leaves {gain} more atoms"),
        Bound.TWO_BODY: _("two-body loss: a tenth less of it leaves {gain} more atoms"),
        Bound.THREE_BODY: _("three-body loss: a tenth less of it leaves {gain} more atoms"),
        Bound.HEATING: _("heating: a tenth less of it leaves {gain} more atoms"),
        Bound.COLLISIONS: _("slow collisions: a tenth more of them leaves {gain} more atoms"),
        Bound.PASSENGER: _("the passenger's heat: a tenth fewer passengers leave {gain} more atoms"),
        Bound.TIME: _("the time limit: a tenth more time leaves {gain} more atoms"),
        Bound.SPEED: _("the speed limit of the control: a tenth more leaves {gain} more atoms"),
    }
)

_UNTOLD_BOUNDS: Mapping[Bound, str] = MappingProxyType(
    {
        Bound.RANGE: _("the range of the control, at whose end it rests for part of the time"),
        Bound.SPEED: _("the speed limit of the control, at which it moves for part of the time"),
        Bound.TIME: _("the time limit, at which the cloud is still getting denser"),
    }
)
"""Of which it is not told what easing them gains."""

_INPUTS: Mapping[Input, str] = MappingProxyType(
    {
        Input.ATOMS: _("atoms at the start"),
        Input.TEMPERATURE: _("temperature at the start"),
        Input.SCATTERING_LENGTH: _("scattering length"),
        Input.BACKGROUND_LIFETIME: _("background lifetime"),
        Input.TWO_BODY: _("two-body loss K₂"),
        Input.THREE_BODY: _("three-body loss K₃"),
        Input.HEATING: _("heating"),
        Input.INTENSITY_NOISE: _("intensity noise"),
        Input.POINTING_NOISE: _("pointing noise"),
        Input.FREQUENCIES: _("trap frequencies, at this depth"),
        Input.DURATION: _("duration of the ramp"),
        Input.CONTROL: _("calibration of {control}"),
        Input.PASSENGER_ATOMS: _("atoms of the passenger at the start"),
        Input.PASSENGER_TEMPERATURE: _("temperature of the passenger at the start"),
        Input.LENGTH_BETWEEN: _("scattering length between the species"),
    }
)


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


def ramp_caveat_text(caveat: RampCaveat) -> str:
    """The sentence of a caveat, with its number."""
    template, say = _CAVEATS[caveat.kind]
    return template.format(value="" if caveat.value is None else say(caveat.value))


def bound_text(bound: Bound, gain: float) -> str:
    """What binds a design, and what easing it by a tenth gains, as a clause."""
    if not math.isfinite(gain):
        return _UNTOLD_BOUNDS[bound]
    return _BOUNDS[bound].format(gain=percent(math.expm1(gain)))


def design_sentence(found: DesignAnswer) -> str:
    """What was designed, and what for."""
    design = found.design
    held = number(design.truncation, 3)
    if design.drift:
        rate = f"{design.drift:+.3g}".replace("-", "−")
        held = _("{eta}, {rate} for each tenfold lower depth,").format(eta=held, rate=rate)
    goal = aim(found.target, bosons=found.answer.bosons)
    if found.assumed:
        goal = _("{aim} (assumed: the plan names no target)").format(aim=goal)
    if not design.reached:
        template = _("No ramp of {control} reaches {aim}; the one that comes closest holds η at {held}.")
        if found.others:
            template += " " + _(
                "The light of {others} stays as it is: design the scale, which moves all beams together."
            )
    else:
        template = _("Most atoms reach {aim} where {control} moves so that the truncation parameter stays at {held}.")
    if found.answer.passenger is not None:
        counted = _("The heat of the passenger is counted.")
        alone = _("η is chosen for the first species alone.")
        template = f"{template} {alone if found.design.passenger is None else counted}"
    others = ", ".join(found.others)
    return template.format(control=found.control.label, aim=goal, held=held.removesuffix(","), others=others)


def input_text(one: RampSensitivity) -> str:
    """The input of a sensitivity, for reading."""
    return _INPUTS[one.input].format(control="" if one.control is None else one.control.label)


def passenger_sensitivity_sentence(found: SensitivityAnswer) -> str:
    """Which input moves T/Tc or T/TF of the passenger most; empty without one, or where that is not known."""
    one = found.strongest_for_passenger()
    if one is None:
        return ""
    ratio = _("T/Tc") if found.passenger_bosons else _("T/TF")
    return _("Most for the passenger: {input}; a tenth of it changes its {ratio} at the end by {share}.").format(
        input=input_text(one), ratio=ratio, share=percent(abs(math.expm1(found.change * one.passenger_slope)))
    )


def change_text(one: RampSensitivity, planned: float) -> tuple[str, str]:
    """What less and what more of an input does to the atoms at the end, for reading."""

    def effect(atoms: float, reason: EndReason, other: EndReason) -> str:
        if not planned > 0.0:
            return number(atoms, 2)
        change = 100.0 * (atoms / planned - 1.0)
        text = f"{change:+.1f} %".replace("-", "−") if abs(change) < 1000.0 else f"{number(atoms / planned, 2)} ×"
        return text if reason is other else f"{text} ({reason.label})"

    return (
        effect(one.atoms_less, one.reason_less, one.reason_more),
        effect(one.atoms_more, one.reason_more, one.reason_less),
    )
