"""The JSON object of `coldward evaporate`: SI throughout, null where a number does not apply."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.ramp_design import DesignAnswer
    from app.answers.ramp_sensitivity import SensitivityAnswer
    from app.answers.waypoints import DeparturesAnswer, WaypointsAnswer
    from app.commands.evaporate import Evaporated
    from physics.evaporation import Evaporation
    from physics.evaporation_budget import Budget
    from physics.ramp_sensitivity import RampSensitivity
    from physics.waypoints import PassengerThen

CONTRACT = (
    "time",
    "atoms",
    "temperature",
    "peak_phase_space_density",
    "reduced_temperature",
    "truncation",
    "elastic_collision_rate",
    "depth",
)
"""Columns of the contract, controls apart."""


def evaporate_body(found: Evaporated) -> dict[str, Any]:
    """Columns, final cloud, why it ended, budget, stages, caveats; and what was asked for besides."""
    body = _no_ramp() if found.answer is None else ramp_body(found.answer)
    if found.design is not None:
        body["design"] = _design(found.design)
    if found.waypoints is not None:
        body["waypoints"] = _waypoints(found.waypoints)
        body["departures"] = [_departures(one) for one in found.departures]
    if found.reference is not None:
        file, other = found.reference
        body["reference"] = {"file": file, **ramp_body(other)}
    if found.sensitivity is not None:
        body["sensitivities"] = _sensitivities(found.sensitivity)
        body["sensitivities_planned"] = _finite(found.sensitivity.planned)
        if found.sensitivity.passenger_bosons is not None:
            body["sensitivities_planned_passenger"] = _finite(found.sensitivity.planned_passenger)
    return body


def _no_ramp() -> dict[str, Any]:
    return {
        "columns": {name: [] for name in CONTRACT},
        "final": dict.fromkeys(CONTRACT),
        "reason": None,
        "budget": {},
        "stages": [],
        "caveats": [],
    }


def ramp_body(answer: RampAnswer) -> dict[str, Any]:
    """A simulated ramp. A control whose values differ from the trap depth though it is called so is "depth setting"."""
    from app.ramp_caveat_words import ramp_caveat_text
    from app.ramp_words import limiting, ramp_verdict

    run = answer.run
    columns, units, controls = _columns(run, answer.first)
    return {
        "columns": columns,
        "units": units,
        "controls": controls,
        "final": {name: numbers[-1] if numbers else None for name, numbers in columns.items()},
        "reason": run.reason.value,
        "explanation": run.explanation or None,
        "begin": answer.begin,
        "from": None if answer.measured is None else answer.measured.choice.label,
        "atoms_before": run.budget.atoms_before,
        "atoms_after": run.budget.atoms_after,
        "budget": _atoms(run.budget),
        "energy_before": _finite(run.budget.energy_before),
        "energy_after": _finite(run.budget.energy_after),
        "energy_budget": _energy(run.budget),
        "stages": [
            {
                "number": stage.number + 1 + answer.first,
                "label": stage.label or None,
                "begin": stage.begin,
                "end": stage.end,
                "first_row": stage.first,
                "last_row": stage.last,
                "efficiency": _finite(stage.efficiency),
                "cooling": _finite(stage.cooling),
                "caught": _finite(stage.caught),
                "atoms_before": stage.budget.atoms_before,
                "atoms_after": stage.budget.atoms_after,
                "budget": _atoms(stage.budget),
                "energy_before": _finite(stage.budget.energy_before),
                "energy_after": _finite(stage.budget.energy_after),
                "energy_budget": _energy(stage.budget),
            }
            for stage in run.stages
        ],
        "caveats": [
            {
                "id": caveat.id,
                "severity": caveat.severity.value,
                "text": ramp_caveat_text(caveat),
                "value": _finite(caveat.value),
            }
            for caveat in answer.caveats
        ],
        "verdict": ramp_verdict(answer),
        "limits": limiting(answer) or None,
        **_passenger(answer),
    }


def _columns(run: Evaporation, first: int) -> tuple[dict[str, Any], dict[str, str], list[dict[str, Any]]]:
    """The columns of one gas by name, their units, and which of them are controls."""
    from app.ramp_quantities import RAMP_COLUMNS, control_column
    from physics.trap_path import DEPTH

    columns, units = {}, {}
    for name, column in RAMP_COLUMNS.items():
        columns[name] = _list(run.time if name == "time" else getattr(run.rows, name))
        units[name] = column.unit
    columns["stage"], units["stage"] = [int(number) + 1 + first for number in run.stage], "1"
    controls = []
    for control, values in run.controls.items():
        column = control_column(control)
        numbers = _list(values)
        name = column.name
        if control == DEPTH:
            if np.allclose(values, run.rows.depth, rtol=1e-4, atol=0.0):
                controls.append({"name": name, "control": control.knob.value, "beam": control.beam})
                continue
            name = "depth setting"
        columns[name], units[name] = numbers, column.unit
        controls.append({"name": name, "control": control.knob.value, "beam": control.beam})
    return columns, units, controls


def _passenger(answer: RampAnswer) -> dict[str, Any]:
    """What a passenger adds: its columns, with those of the contact; why it is left out; nothing without one."""
    from app.mixture_quantities import CONTACT_COLUMNS
    from app.mixture_words import sympathetic_caveat_texts, sympathetic_verdict

    if answer.passenger_left_out:
        return {"passenger": {"left_out": answer.passenger_left_out}}
    if answer.passenger is None:
        return {}
    found = answer.passenger
    run, contact, state = found.run.passenger, found.run.contact, found.states[1]
    columns, units, _ = _columns(run, answer.first)
    for row in CONTACT_COLUMNS:
        columns[row.name], units[row.name] = _list(getattr(contact, row.name)), row.unit
    return {
        "passenger": {
            "key": state.key,
            "state": state.name,
            "columns": columns,
            "units": units,
            "final": {name: numbers[-1] if numbers else None for name, numbers in columns.items()},
            "reason": run.reason.value,
            "explanation": run.explanation or None,
            "atoms_before": run.budget.atoms_before,
            "atoms_after": run.budget.atoms_after,
            "budget": _atoms(run.budget),
            "energy_before": _finite(run.budget.energy_before),
            "energy_after": _finite(run.budget.energy_after),
            "energy_budget": {process: _finite(energy) for process, energy in _energy(run.budget).items()},
            "scattering_length": found.between.value,
            "scattering_length_source": found.between.source or None,
            "caveats": [
                {
                    "id": caveat.id,
                    "severity": caveat.severity.value,
                    "text": text,
                    "value": _finite(caveat.value),
                }
                for caveat, text in zip(found.caveats, sympathetic_caveat_texts(found), strict=True)
            ],
            "verdict": sympathetic_verdict(found),
        }
    }


def _design(found: DesignAnswer) -> dict[str, Any]:
    from app.design_words import design_sentence

    design, trade = found.design, found.design.trade_off
    target = {name: value for name, value in vars(found.target).items() if value is not None}
    return {
        "control": found.control.label,
        "target": target,
        "target_assumed": found.assumed,
        "reached": design.reached,
        "truncation": design.truncation,
        "drift": design.drift,
        "bounds": [{"bound": bound.value, "gain": _finite(gain)} for bound, gain in design.bounds],
        **_designed_passenger(found),
        "trade_off": {
            "truncation": _list(trade.truncation),
            "atoms": _list(trade.atoms),
            "time": _list(trade.time),
            "reached": [bool(reached) for reached in trade.reached],
            "times": _list(trade.times),
            "best_atoms": _list(trade.best_atoms),
            "best_truncation": _list(trade.best_truncation),
        },
        "ramp": [_stage_choice(stage) for stage in found.stages],
        "text": design_sentence(found),
    }


def _designed_passenger(found: DesignAnswer) -> dict[str, Any]:
    """Whether the heat of the passenger is in the design, and where it ends; nothing without one."""
    passenger = found.answer.passenger
    if passenger is None:
        return {}
    end = _finite(passenger.passenger_reduced_temperature)
    return {"passenger_counted": found.design.passenger is not None, "passenger_reduced_temperature": end}


def _stage_choice(stage: Any) -> dict[str, Any]:
    """A stage as a plan file would have it."""
    return {
        "label": stage.label or None,
        "duration": stage.duration.text,
        "moves": [
            {
                "control": move.control.knob.value,
                "beam": move.control.beam,
                "start": None if move.start is None else move.start.text,
                "end": None if move.end is None else move.end.text,
                "shape": move.shape.value,
            }
            for move in stage.moves
        ],
    }


def _waypoints(found: WaypointsAnswer) -> dict[str, Any]:
    return {
        "expansion_time": found.expansion_time,
        "efficiency": found.efficiency,
        "missed": list(found.missed),
        "points": [
            {
                "peak_phase_space_density": point.phase_space_density,
                "atoms": _finite(point.atoms),
                "temperature": _finite(point.temperature),
                "time": _finite(point.time),
                "controls": {control.label: _finite(value) for control, value in point.controls.items()},
                "depth": _finite(point.depth),
                "truncation": _finite(point.truncation),
                "elastic_collision_rate": _finite(point.collision_rate),
                "widths": _list_of(list(point.widths)),
                **({} if found.passenger is None else {"passenger": _passenger_then(point.passenger)}),
            }
            for point in found.points
        ],
    }


def _passenger_then(then: PassengerThen | None) -> dict[str, Any] | None:
    """The passenger at a waypoint; null where it is not held any more."""
    if then is None:
        return None
    return {
        "atoms": _finite(then.atoms),
        "temperature": _finite(then.temperature),
        "reduced_temperature": _finite(then.reduced_temperature),
        "widths": _list_of(list(then.widths)),
    }


def _departures(found: DeparturesAnswer) -> dict[str, Any]:
    return {
        "peak_phase_space_density": found.waypoint.phase_space_density,
        "time": found.waypoint.time,
        "from": found.source or None,
        "runs": [
            {
                "atoms_factor": one.atoms_factor,
                "temperature_factor": one.temperature_factor,
                "reason": one.run.reason.value,
                **{
                    name: _finite(one.run.final[name])
                    for name in ("time", "atoms", "temperature", "peak_phase_space_density")
                },
                **(
                    {}
                    if one.passenger is None
                    else {"passenger_reduced_temperature": _finite(one.passenger.final["reduced_temperature"])}
                ),
            }
            for one in found.departures
        ],
    }


def _sensitivities(found: SensitivityAnswer) -> list[dict[str, Any]]:
    return [
        {
            "input": one.input.value,
            "control": None if one.control is None else one.control.label,
            "change": one.change,
            "atoms_less": _finite(one.atoms_less),
            "atoms_more": _finite(one.atoms_more),
            "reason_less": one.reason_less.value,
            "reason_more": one.reason_more.value,
            "slope": _finite(one.slope),
            **({} if found.passenger_bosons is None else _passenger_sensitivity(one)),
        }
        for one in found.found
    ]


def _passenger_sensitivity(one: RampSensitivity) -> dict[str, float | None]:
    return {
        "passenger_less": _finite(one.passenger_less),
        "passenger_more": _finite(one.passenger_more),
        "passenger_slope": _finite(one.passenger_slope),
    }


def _atoms(budget: Budget) -> dict[str, float]:
    return {process.value: atoms for process, atoms in budget.atoms.items()}


def _energy(budget: Budget) -> dict[str, float]:
    return {process.value: energy for process, energy in budget.energy.items()}


def _finite(value: float | None) -> float | None:
    return None if value is None or not math.isfinite(value) else float(value)


def _list(values: Any) -> list[Any]:
    """Numbers, or rows of them; null for those that are not finite."""
    found = values.tolist()
    return [_list_of(row) if isinstance(row, list) else _finite(row) for row in found]


def _list_of(row: list[float]) -> list[float] | None:
    return row if all(math.isfinite(number) for number in row) else None
