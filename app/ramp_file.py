"""Ramps of a plan file: [[ramp.stage]], [limits] and [[measured]]."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

from app.plan_entries import read_entry, read_section, shown
from app.plan_field import PlanError, PlanField
from app.ramp_choices import ControlLimits, LimitsChoice, MeasuredChoice, MoveChoice, StageChoice
from app.ramp_fields import (
    CONTROL_LIMITS,
    CONTROL_LIMITS_FIELDS,
    DIRECT_MOVE_FIELDS,
    LIMITS,
    LIMITS_FIELDS,
    MEASURED,
    MEASURED_FIELDS,
    MOVE_FIELDS,
    MOVES,
    RAMP,
    STAGE_FIELDS,
    STAGE_TRAP,
    STAGE_TRAP_FIELDS,
    STAGES,
    fields_of_control,
)
from app.trap_choices import TrapChoice
from app.trap_file import Where, read_beams, read_coils
from physics.ramp_shapes import Shape
from physics.ramps import Control


def read_ramp(section: object, where: Where) -> tuple[StageChoice, ...]:
    """The stages of [ramp]. PlanError in one sentence, which names key and stage."""
    if isinstance(section, tuple):  # read before
        return section
    if not isinstance(section, Mapping):
        raise PlanError(f"{where(RAMP)}: a ramp is sections [[{STAGES}]], one for each stage, got {shown(section)}")
    stages = sections_in(section, "stage", STAGES, where)
    return tuple(_stage(stage, f" of stage {number}", where) for number, stage in enumerate(stages, start=1))


def sections_in(table: Mapping[str, Any], key: str, path: str, where: Where) -> list[Mapping[str, Any]]:
    """The tables [[path]] of a table; none where it has no such key."""
    found = table.get(key, [])
    if not isinstance(found, list) or not all(isinstance(part, Mapping) for part in found):
        raise PlanError(f"{where(path)} must be sections [[{path}]], one for each, got {shown(found)}")
    return found


def _stage(section: Mapping[str, Any], of: str, where: Where) -> StageChoice:
    def place(field: PlanField) -> str:
        return f"{where(field.path)}{of}"

    values = read_section(section, STAGE_FIELDS, place)
    listed = sections_in(section, "move", MOVES, lambda path: f"{where(path)}{of}")
    direct = [key for key in DIRECT_MOVE_FIELDS if key in section]
    moves = [_move(section, DIRECT_MOVE_FIELDS, of, where)] if direct else []
    for number, move in enumerate(listed, start=1):
        name = of if len(listed) == 1 else f" of move {number}{of}"
        moves.append(_move(move, MOVE_FIELDS, name, where))
    trap = _trap(section["trap"], of, where) if "trap" in section else None
    try:
        return StageChoice(
            duration=values["duration"],
            moves=tuple(moves),
            label=values.get("label", ""),
            handing=values.get("transfer"),
            trap=trap,
        )
    except PlanError as error:
        path = error.path
        if not listed:
            path = path.replace(MOVES, STAGES)
        raise PlanError(f"{where(path)}{of}: {error}") from None


def _move(section: Mapping[str, Any], fields: Mapping[str, PlanField], of: str, where: Where) -> MoveChoice:
    control, own = _control(section, fields, of, where)
    values = read_section(section, own, lambda field: f"{where(field.path)}{of}")
    given = {name: value for name, value in values.items() if name not in ("control", "beam")}
    try:
        return MoveChoice(control=control, **given)
    except PlanError as error:
        path = own[error.path.rpartition(".")[2]].path
        raise PlanError(f"{where(path)}{of}: {error}") from None


def _control(
    section: Mapping[str, Any], fields: Mapping[str, PlanField], of: str, where: Where
) -> tuple[Control, Mapping[str, PlanField]]:
    """The control that a section names, and its fields with the kinds that follow from it."""
    named = {name: fields[name] for name in ("control", "beam")}
    values = read_section(section, named, lambda field: f"{where(field.path)}{of}")
    try:
        control = Control(values["control"], values.get("beam"))
    except ValueError as error:
        raise PlanError(f"{where(fields['beam'].path)}{of}: {error}") from None
    return control, fields_of_control(fields, control.knob)


def _trap(section: object, of: str, where: Where) -> TrapChoice:
    """The trap that a stage hands the cloud to, written as [trap] is."""

    def place(path: str) -> str:
        return f"{where(path.replace('trap', STAGE_TRAP, 1))}{of}"

    if not isinstance(section, Mapping):
        raise PlanError(f"{place('trap')} must be a section [{STAGE_TRAP}], got {shown(section)}")
    values: dict[str, Any] = {}
    for name, field in STAGE_TRAP_FIELDS.items():
        if name in section:
            try:
                values[name] = read_entry(field, section[name], {})
            except ValueError as error:
                raise PlanError(f"{where(field.path)}{of}: {error}") from None
    beams = read_beams(section["beam"], place) if "beam" in section else ()
    coils = read_coils(section["coils"], place) if "coils" in section else None
    try:
        return TrapChoice(**values, beams=beams, coils=coils)
    except PlanError as error:
        raise PlanError(f"{place(error.path or 'trap')}: {error}") from None


def read_limits(section: object, where: Where) -> LimitsChoice:
    """What [limits] says. PlanError in one sentence, which names key and control."""
    if isinstance(section, LimitsChoice):  # read before
        return section
    if not isinstance(section, Mapping):
        raise PlanError(f"{where(LIMITS)} must be a section [{LIMITS}], got {shown(section)}")
    values = read_section(section, LIMITS_FIELDS, lambda field: where(field.path))
    controls = []
    for number, own in enumerate(sections_in(section, "control", CONTROL_LIMITS, where), start=1):
        controls.append(_control_limits(own, f" of control {number}", where))
    try:
        return LimitsChoice(time=values.get("time"), controls=tuple(controls))
    except PlanError as error:
        raise PlanError(f"{where(error.path)}: {error}") from None


def _control_limits(section: Mapping[str, Any], of: str, where: Where) -> ControlLimits:
    control, fields = _control(section, CONTROL_LIMITS_FIELDS, of, where)
    values = read_section(section, fields, lambda field: f"{where(field.path)}{of}")
    try:
        return ControlLimits(
            control=control, low=values.get("low"), high=values.get("high"), fastest=values.get("fastest")
        )
    except PlanError as error:
        raise PlanError(f"{where(error.path)}{of}: {error}") from None


def read_measured(sections: object, where: Where) -> tuple[MeasuredChoice, ...]:
    """The clouds that were measured. PlanError in one sentence, which names key and cloud."""
    if isinstance(sections, tuple):  # read before
        return sections
    found = sections_in({MEASURED: sections}, MEASURED, MEASURED, where)
    return tuple(_measured(section, f" of cloud {number}", where) for number, section in enumerate(found, start=1))


def _measured(section: Mapping[str, Any], of: str, where: Where) -> MeasuredChoice:
    values = read_section(section, MEASURED_FIELDS, lambda field: f"{where(field.path)}{of}")
    try:
        return MeasuredChoice(**values)
    except PlanError as error:
        raise PlanError(f"{where(error.path)}{of}: {error}") from None


# --- the other way: what they say in the file -------------------------------------------------------------------------


USUAL: Mapping[str, object] = MappingProxyType({"shape": Shape.LINEAR})
"""What holds where a key is left out."""


def stage_entries(stage: StageChoice) -> dict[str, object]:
    """The entries of a stage by key, without those of its moves and its trap."""
    entries = {"label": stage.label or None, "duration": stage.duration, "transfer": stage.handing}
    return {name: value for name, value in entries.items() if value is not None}


def move_entries(move: MoveChoice) -> dict[str, object]:
    """The entries of a move by key, in the order of the file, without those that are open or say what is usual."""
    entries = _control_entries(move.control)
    for name in MOVE_FIELDS:
        if name not in entries and name != "beam":
            entries[name] = getattr(move, name)
    return {name: value for name, value in entries.items() if value not in (None, (), USUAL.get(name))}


def limits_entries(limits: ControlLimits) -> dict[str, object]:
    """The entries of the limits of a control by key, in the order of the file."""
    entries = _control_entries(limits.control)
    entries |= {"low": limits.low, "high": limits.high, "fastest": limits.fastest}
    return {name: value for name, value in entries.items() if value is not None}


def measured_entries(measured: MeasuredChoice) -> dict[str, object]:
    """The entries of a measured cloud by key, in the order of the file."""
    entries = {name: getattr(measured, name) for name in MEASURED_FIELDS}
    return {name: value for name, value in entries.items() if value is not None and value != ()}


def _control_entries(control: Control) -> dict[str, object]:
    named: dict[str, object] = {"control": control.knob}
    return named if control.beam is None else {**named, "beam": control.beam}
