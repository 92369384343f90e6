"""What `coldward evaporate` prints: one line a stage, the verdict, where the atoms went, what limits."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from app.design_words import bound_text, design_sentence
from app.language import translate as _
from app.ramp_caveat_words import SIGNS, WEIGHTS, ramp_caveat_text
from app.ramp_words import LOSSES, PROCESSES, control_text, duration, limiting, ramp_verdict
from app.sensitivity_words import FIRST_ALONE, change_text, input_text, passenger_sensitivity_sentence
from app.tables import columns
from app.transfer_words import handed_text
from app.trap_words import cautions
from app.units import best_unit, format_quantity
from app.words import number, percent, temperature
from physics.evaporation_rates import Process
from physics.particles import Statistics

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.ramp_design import DesignAnswer
    from app.answers.ramp_sensitivity import SensitivityAnswer
    from app.answers.waypoints import DeparturesAnswer, WaypointsAnswer
    from app.commands.evaporate import Evaporated
    from app.plan import StageChoice
    from physics.waypoints import Departure

_FEW = 8


def evaporate_text(found: Evaporated) -> str:
    """All that was asked for, as a readable page."""
    blocks: list[list[str]] = []
    if found.answer is not None:
        blocks.append(_opening(found.answer))
    if found.design is not None:
        blocks += [_design(found.design), _trade_off(found.design)]
    if found.answer is not None:
        blocks += [_stages(found.answer), _handed(found.answer), [ramp_verdict(found.answer)]]
        blocks += [_budget(found.answer), _limits(found)]
        blocks += _passenger(found.answer)
        blocks += _beside(found.answer, found.reference)
    if found.waypoints is not None:
        blocks.append(_waypoints(found.waypoints))
        blocks.append(_passenger_waypoints(found.waypoints))
        alone = found.answer is not None and bool(found.answer.passenger_left_out)
        blocks.append(_departures(found.departures, alone=alone))
    if found.sensitivity is not None:
        blocks.append(_sensitivity(found.sensitivity))
    if found.answer is not None:
        blocks.append(_caveats(found.answer))
    blocks.append(list(cautions(found.plan.trap)))
    return "\n\n".join("\n".join(block) for block in blocks if block)


def _opening(answer: RampAnswer) -> list[str]:
    heading = _("{species}, {state}; kinetics of a cut thermal cloud").format(
        species=answer.state.key, state=answer.state.name
    )
    if answer.measured is None:
        return [heading]
    cloud = _('from the measured cloud "{label}", {time} into the ramp').format(
        label=answer.measured.choice.label, time=duration(answer.begin)
    )
    return [heading, cloud]


def _stages(answer: RampAnswer) -> list[str]:
    """One row for the start, and one at the end of each stage."""
    run, rows = answer.run, answer.run.rows
    if not len(run.time):
        return []
    ratio = _("T/Tc") if answer.bosons else _("T/TF")
    header = (
        _("stage"), _("until"), "N", "T", "D", ratio, "η", "Γ [1/s]", "γ", _("evaporated"), _("lost"),
    )  # fmt: skip

    def cloud(row: int) -> tuple[str, ...]:
        return (
            duration(float(run.time[row])),
            number(float(rows.atoms[row]), 3),
            temperature(float(rows.temperature[row])),
            number(float(rows.peak_phase_space_density[row]), 3),
            number(float(rows.reduced_temperature[row]), 3),
            number(float(rows.truncation[row]), 2),
            number(float(rows.elastic_collision_rate[row]), 2),
        )

    table = [header, (_("start"), *cloud(0), "", "", "")]
    for stage in run.stages:
        budget = stage.budget
        cooled = budget.atoms[Process.EVAPORATED] + budget.atoms[Process.SPILLED]
        lost = sum(budget.atoms[process] for process in (*LOSSES, Process.TRANSFER))
        name = str(stage.number + 1 + answer.first) + (f" {stage.label}" if stage.label else "")
        gamma = number(stage.efficiency, 2).replace("-", "−")
        shares = (percent(max(part, 0.0) / budget.atoms_before) for part in (cooled, lost))
        table.append((name, *cloud(stage.last), gamma, *shares))
    return columns(table, right=range(1, len(header)))


def _handed(answer: RampAnswer) -> list[str]:
    """What transfers and jumps have left of the cloud."""
    return [line for stage in answer.run.stages if (line := handed_text(answer, stage))]


def _beside(answer: RampAnswer, reference: tuple[str, RampAnswer] | None) -> list[list[str]]:
    """This ramp and the reference at their ends, side by side, and what became of the reference."""
    if reference is None:
        return []
    file, other = reference
    pair = [one.run for one in (answer, other)]
    lost = [sum(run.budget.atoms[process] for process in LOSSES) / run.budget.atoms_before for run in pair]
    rows = [
        ("", _("this ramp"), _("reference")),
        (_("time"), *(duration(run.final["time"]) for run in pair)),
        ("N", *(number(run.final["atoms"], 3) for run in pair)),
        ("T", *(temperature(run.final["temperature"]) for run in pair)),
        ("D", *(number(run.final["peak_phase_space_density"], 3) for run in pair)),
        (_("T/Tc or T/TF"), *(number(run.final["reduced_temperature"], 3) for run in pair)),
        ("η", *(number(run.final["truncation"], 2) for run in pair)),
        ("Γ [1/s]", *(number(run.final["elastic_collision_rate"], 2) for run in pair)),
        (_("lost without cooling"), *(percent(max(share, 0.0)) for share in lost)),
        (_("why it ended"), *(run.reason.label for run in pair)),
    ]
    title = _("Beside the ramp of {file}: {verdict}").format(file=file, verdict=ramp_verdict(other))
    return [[title, *columns(rows, indent=2, right=(1, 2))]]


def _budget(answer: RampAnswer) -> list[str]:
    """Where the atoms went."""
    budget = answer.run.budget
    lost = sum(budget.atoms.values())
    if not lost > 1e-3 * budget.atoms_before:
        return []
    rows = [
        (PROCESSES[process], number(atoms, 3), percent(atoms / lost))
        for process, atoms in sorted(budget.atoms.items(), key=lambda item: -item[1])
        if atoms > 0.0
    ]
    total = _("Of {before} atoms {lost} are lost, {left} are left").format(
        before=number(budget.atoms_before, 3), lost=number(lost, 3), left=number(budget.atoms_after, 3)
    )
    return [total, *columns(rows, indent=2, right=(1, 2))]


def _limits(found: Evaporated) -> list[str]:
    """What limits: of a design what was found by easing each, of a simulation what its losses say."""
    assert found.answer is not None
    if found.design is None or not found.design.design.bounds:
        said = limiting(found.answer)
        return [said] if said else []
    lines = [bound_text(bound, gain) for bound, gain in found.design.design.bounds]
    return [_("What limits"), *(f"  {line}" for line in lines)]


def _design(found: DesignAnswer) -> list[str]:
    rows = [_stage_row(place, stage) for place, stage in enumerate(found.stages, start=1)]
    return [design_sentence(found), *columns(rows, indent=2)]


def _stage_row(place: int, stage: StageChoice) -> tuple[str, ...]:
    moves = [
        f"{move.control.label} {_('to')} {move.end.text if move.end is not None else move.points[-1][1].text}"
        + f" ({move.shape.label})"
        for move in stage.moves
        if move.end is not None or move.points
    ]
    return (str(place), stage.duration.text, ", ".join(moves) or _("hold"))


def _trade_off(found: DesignAnswer) -> list[str]:
    """Final atoms and time against the truncation parameter that is held, and the most atoms in a time."""
    trade = found.design.trade_off
    even = np.linspace(0, len(trade.truncation) - 1, min(_FEW, len(trade.truncation))).round().astype(int)
    rows = [
        (
            number(float(trade.truncation[k]), 3),
            number(float(trade.atoms[k]), 3) if trade.reached[k] else "–",
            duration(float(trade.time[k])) if trade.reached[k] else _("not reached"),
        )
        for k in dict.fromkeys(even.tolist())
    ]
    lines = [_("Held truncation parameter, and what it leaves at the target")]
    lines += columns([("η", "N", _("after")), *rows], indent=2, right=(0, 1, 2))
    if len(trade.times) > 1:
        even = np.linspace(0, len(trade.times) - 1, min(_FEW, len(trade.times))).round().astype(int)
        front = [
            (duration(float(trade.times[k])), number(float(trade.best_atoms[k]), 3))
            for k in dict.fromkeys(even.tolist())
        ]
        lines += ["", _("Most atoms at the target, by the time that it may take")]
        lines += columns([(_("time"), "N"), *front], indent=2, right=(0, 1))
    return lines


def _waypoints(found: WaypointsAnswer) -> list[str]:
    after = duration(found.expansion_time)
    how = _("of the simulated ramp")
    if found.efficiency is not None:
        how = _("with an assumed efficiency of {gamma}").format(gamma=number(found.efficiency, 3))
    lines = [_("Clouds to aim at, {how}; rms widths after {time} of expansion").format(how=how, time=after)]
    if found.points:
        moved = [
            control
            for control in found.points[0].controls
            if len({point.controls.get(control) for point in found.points}) > 1 or len(found.points) == 1
        ]
        header = ("D", _("after"), "N", "T", *(c.label for c in moved), "U/k", "η", "Γ [1/s]", _("widths"))
        rows = [
            (
                number(point.phase_space_density, 3),
                "–" if math.isnan(point.time) else duration(point.time),
                number(point.atoms, 3),
                temperature(point.temperature),
                *(control_text(c, point.controls.get(c, math.nan)) for c in moved),
                format_quantity(
                    point.depth, best_unit(point.depth, ("nK", "µK", "mK", "K"), "J"), digits=3, si_unit="J"
                ),
                number(point.truncation, 2),
                number(point.collision_rate, 2),
                _widths(point.widths),
            )
            for point in found.points
        ]
        lines += columns([header, *rows], indent=2, right=range(len(header)))
    if found.missed:
        missed = ", ".join(number(density, 3) for density in found.missed)
        lines.append(_("Not reached: D = {missed}").format(missed=missed))
    return lines


def _passenger_waypoints(found: WaypointsAnswer) -> list[str]:
    """The passenger at the same times; nothing without one."""
    state = found.passenger
    if state is None or not found.points:
        return []
    ratio = _("T/Tc") if state.statistics is Statistics.BOSE else _("T/TF")
    header = ("D", _("after"), "N", "T", ratio, _("widths"))
    rows = []
    for point in found.points:
        then = point.passenger
        cells: tuple[str, ...] = ("–",) * 4
        if then is not None:
            cells = (
                number(then.atoms, 3),
                temperature(then.temperature),
                number(then.reduced_temperature, 3),
                _widths(then.widths),
            )
        rows.append((number(point.phase_space_density, 3), duration(point.time), *cells))
    title = _("{species}, the passenger, at the same times").format(species=state.key)
    return [title, *columns([header, *rows], indent=2, right=range(len(header)))]


def _widths(widths: tuple[float, float, float]) -> str:
    if not all(math.isfinite(width) for width in widths):
        return "–"
    return " × ".join(number(1e6 * width, 3) for width in widths) + " µm"


def _departures(found: tuple[DeparturesAnswer, ...], *, alone: bool) -> list[str]:
    """Atoms at the end for a cloud that is off at a waypoint, one row each."""
    if not found:
        return []
    errors = [f'"{source}"' for source in sorted({one.source for one in found}) if source]
    title = _("Atoms at the end, if the cloud is off at a waypoint by its measured error")
    title = f"{title}, {FIRST_ALONE}" if alone else title
    lines = [_("{title} (that of {clouds})").format(title=title, clouds=", ".join(errors)) if errors else title]
    order = ((0, 0), (-1, 0), (1, 0), (0, -1), (0, 1))
    header = ("D", _("off by"), _("as planned"), _("N less"), _("N more"), _("T less"), _("T more"))
    rows = []
    for one in found:
        cells = {
            (int(np.sign(d.atoms_factor - 1.0)), int(np.sign(d.temperature_factor - 1.0))): _left(d, one.departures[0])
            for d in one.departures
        }
        errors_of = (("N", one.atoms_error), ("T", one.temperature_error))
        off = ", ".join(f"{symbol} {percent(error)}" for symbol, error in errors_of if error > 0.0)
        rows.append((number(one.waypoint.phase_space_density, 3), off, *(cells.get(sign, "–") for sign in order)))
    return [*lines, *columns([header, *rows], indent=2, right=range(len(header)))]


def _left(one: Departure, planned: Departure) -> str:
    """Atoms at the end, and why it ended where that is not as planned."""
    atoms = number(one.run.final["atoms"], 3)
    if one.passenger is not None:
        ratio = _("T/Tc") if one.passenger.gas.bosons else _("T/TF")
        atoms = f"{atoms}; {ratio} {number(one.passenger.final['reduced_temperature'], 3)}"
    return atoms if one.run.reason is planned.run.reason else f"{atoms}, {one.run.reason.label}"


def _sensitivity(found: SensitivityAnswer) -> list[str]:
    rows: list[tuple[str, ...]] = [(input_text(one), *change_text(one, found.planned)) for one in found.found]
    header: tuple[str, ...] = ("", _("less"), _("more"))
    title = _("Atoms at the end, with each input {change} less or more").format(change=percent(found.change))
    title = f"{title}, {FIRST_ALONE}" if found.alone else title
    lines = []
    if found.passenger_bosons is not None:
        ratio = _("T/Tc") if found.passenger_bosons else _("T/TF")
        header = (*header, _("{ratio} less").format(ratio=ratio), _("{ratio} more").format(ratio=ratio))
        rows = [
            (*row, number(one.passenger_less, 3), number(one.passenger_more, 3))
            for row, one in zip(rows, found.found, strict=True)
        ]
        title = _("{title}; with {ratio} of the passenger, {end} without a change").format(
            title=title, ratio=ratio, end=number(found.planned_passenger, 3)
        )
        lines = [passenger_sensitivity_sentence(found)]
    return [title, *columns([header, *rows], indent=2, right=range(1, len(header))), *lines]


def _passenger(answer: RampAnswer) -> list[list[str]]:
    """The passenger at the ends of the stages, and what becomes of it; nothing without one."""
    if answer.passenger is None:  # the verdict says why one is left out
        return []
    from app.mixture_words import sympathetic_verdict

    found = answer.passenger
    run, contact, state = found.run.passenger, found.run.contact, found.states[1]
    heading = _("{species}, {state}, the passenger").format(species=state.key, state=state.name)
    ends = [0, *(stage.last for stage in run.stages)] if len(run.time) else []
    ratio = _("T/Tc") if run.gas.bosons else _("T/TF")
    header = (_("until"), "N", "T", "D", ratio, "η", _("overlap"), "Γ₂₁ [1/s]", "τ₁₂")
    table = [
        (
            duration(float(run.time[row])),
            number(float(run.rows.atoms[row]), 3),
            temperature(float(run.rows.temperature[row])),
            number(float(run.rows.peak_phase_space_density[row]), 3),
            number(float(run.rows.reduced_temperature[row]), 3),
            number(float(run.rows.truncation[row]), 2),
            number(float(contact.overlap_share[row]), 2),
            number(float(contact.passenger_collision_rate[row]), 2),
            duration(float(contact.relaxation_time[row])) if math.isfinite(contact.relaxation_time[row]) else "–",
        )
        for row in ends
    ]
    lines = columns([header, *table], right=range(len(header))) if table else []
    return [[heading, *lines], [sympathetic_verdict(found)]]


def _caveats(answer: RampAnswer) -> list[str]:
    lines = [f"  {SIGNS[c.severity]} {WEIGHTS[c.severity]}: {ramp_caveat_text(c)}" for c in answer.caveats]
    if answer.passenger is not None:
        from app.mixture_words import sympathetic_caveat_lines

        lines += [f"  {line.sign} {line.word}: {line.sentence}" for line in sympathetic_caveat_lines(answer.passenger)]
    if not lines:
        return []
    return [_("What this answer does not cover"), *lines]
