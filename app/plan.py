"""The Plan and everything that makes one: files, flags, forms.

The dataclasses are in `app.choices`, `app.trap_choices`, `app.ramp_choices` and `app.candidate_choices`, the tables of
fields there and in `app.ramp_fields` and `app.candidate_fields`, the file format in `app.plan_file`; other modules
import them from here.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import fields, is_dataclass, replace
from types import MappingProxyType
from typing import Any

from app.candidate_choices import Basis, CandidateChoice, CandidatesChoice, PassengerChoice
from app.candidate_fields import (
    CANDIDATE_FIELDS,
    CANDIDATES_FIELDS,
    PASSENGER_CLOUD_FIELDS,
    PASSENGER_FIELDS,
    PASSENGER_SPECIES_FIELDS,
)
from app.choices import (
    DEFAULT_PLAN,
    PLAN_FIELDS,
    TARGETS,
    CloudChoice,
    LossesChoice,
    Plan,
    SpeciesChoice,
    TargetChoice,
)
from app.plan_field import Entry, PlanError, PlanField
from app.plan_file import FORMAT, build_plan, entries_of, parse_plan, read_plan
from app.plan_saving import save_plan, write_plan
from app.ramp_choices import ControlLimits, Handing, LimitsChoice, MeasuredChoice, MoveChoice, StageChoice
from app.ramp_fields import (
    CONTROL_LIMITS_FIELDS,
    LIMITS_FIELDS,
    MEASURED_FIELDS,
    MOVE_FIELDS,
    STAGE_FIELDS,
    fields_of_control,
)
from app.trap_choices import BEAM_FIELDS, BEAMS, COILS, COILS_FIELDS, BeamChoice, CoilsChoice, Gravity, TrapChoice

__all__ = [
    "BEAM_FIELDS",
    "CANDIDATES_FIELDS",
    "CANDIDATE_FIELDS",
    "COILS_FIELDS",
    "CONTROL_LIMITS_FIELDS",
    "DEFAULT_PLAN",
    "FORMAT",
    "LIMITS_FIELDS",
    "MEASURED_FIELDS",
    "MOVE_FIELDS",
    "PASSENGER_CLOUD_FIELDS",
    "PASSENGER_FIELDS",
    "PASSENGER_SPECIES_FIELDS",
    "PLAN_FIELDS",
    "STAGE_FIELDS",
    "TARGETS",
    "Basis",
    "BeamChoice",
    "CandidateChoice",
    "CandidatesChoice",
    "CloudChoice",
    "CoilsChoice",
    "ControlLimits",
    "Entry",
    "Gravity",
    "Handing",
    "LimitsChoice",
    "LossesChoice",
    "MeasuredChoice",
    "MoveChoice",
    "PassengerChoice",
    "Plan",
    "PlanError",
    "PlanField",
    "SpeciesChoice",
    "StageChoice",
    "TargetChoice",
    "TrapChoice",
    "fields_of_control",
    "parse_plan",
    "plan_with",
    "read_plan",
    "save_plan",
    "with_same_change",
    "write_plan",
]


_FLAGS = {path: field.flag for path, field in PLAN_FIELDS.items()}
_NO_NAMES: Mapping[str, str] = MappingProxyType({})


def plan_with(plan: Plan | None, texts: Mapping[str, str], *, where: Mapping[str, str] = _NO_NAMES) -> Plan:
    """A plan with some entries replaced by texts, as a command line or a form gives them.

    Parameters
    ----------
    plan : what the texts override; None: there is nothing yet, and all required entries must be among the texts
    texts : dotted path of PLAN_FIELDS -> text; an empty text removes an optional entry
    where : what errors call a field, by its dotted path; by default, and where the path is not named, its flag

    A new species drops what was said of the other one's state, spin states, scattering length, field and losses by
    collision; a scattering length drops a field and the other way round; a target drops the other targets; trap
    frequencies drop beams and coils.

    Raises
    ------
    PlanError
        One sentence that names the flag, what was read and what is allowed.
    """
    entries = {} if plan is None else entries_of(plan)
    before = dict(entries)
    for path, text in texts.items():
        if path not in PLAN_FIELDS:
            raise KeyError(f"{path} is not a field of a plan")
        entries.pop(path, None)
        if text.strip():
            entries[path] = text
    for path, text in texts.items():
        if not text.strip() or (path == "species.key" and _same_species(before.get(path), text)):
            continue
        for other in PLAN_FIELDS[path].excludes:
            if not texts.get(other, "").strip():
                entries.pop(other, None)
    if texts.get("trap.frequencies", "").strip():
        entries.pop(BEAMS, None)
        entries.pop(COILS, None)
    changed = build_plan(entries, lambda path: where.get(path) or _FLAGS.get(path, path))
    return changed if plan is None else replace(changed, unused=plan.unused, source=plan.source)


def with_same_change(plan: Plan, before: Plan, after: Plan) -> Plan:
    """A plan with each part, such as the atom number, that differs between two other ones, as the later one has it.

    Raises
    ------
    PlanError
        No plan can have that part beside what this one says.
    """
    changes: dict[str, Any] = {}
    for section in fields(Plan):
        old, new = getattr(before, section.name), getattr(after, section.name)
        if old == new or not section.compare:
            continue
        own = getattr(plan, section.name)
        if is_dataclass(new) and not isinstance(new, type) and old is not None and own is not None:
            parts = {part.name: getattr(new, part.name) for part in fields(new)}
            parts = {name: value for name, value in parts.items() if value != getattr(old, name)}
            new = replace(own, **parts)
        changes[section.name] = new
    return replace(plan, **changes)


def _same_species(before: object, text: str) -> bool:
    from physics.species import load_species

    try:
        return load_species(text).key == before
    except ValueError:  # reported when the entry is read
        return False
