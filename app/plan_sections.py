"""What a plan says of ramp, limits, measured clouds, candidates and passenger, as sections of its file."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from app import candidate_file, ramp_file, trap_file
from app.candidate_fields import (
    CANDIDATE,
    CANDIDATE_FIELDS,
    CANDIDATES,
    CANDIDATES_FIELDS,
    PASSENGER,
    PASSENGER_CLOUD,
    PASSENGER_CLOUD_FIELDS,
    PASSENGER_FIELDS,
    PASSENGER_SPECIES,
    PASSENGER_SPECIES_FIELDS,
)
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
    STAGE_BEAM_FIELDS,
    STAGE_COILS_FIELDS,
    STAGE_FIELDS,
    STAGE_TRAP,
    STAGE_TRAP_FIELDS,
    STAGES,
)
from app.section_saving import Section, Sections, sources_of

if TYPE_CHECKING:
    from app.choices import Plan
    from app.ramp_choices import StageChoice
    from app.trap_choices import TrapChoice

ROOTS: Mapping[str, tuple[str, ...]] = {
    RAMP: (STAGES,),
    LIMITS: (LIMITS, CONTROL_LIMITS),
    MEASURED: (MEASURED,),
    CANDIDATES: (CANDIDATES,),
    CANDIDATE: (CANDIDATE,),
    PASSENGER: (PASSENGER, PASSENGER_SPECIES, PASSENGER_CLOUD),
}
"""Outermost section -> paths of the sections that say something."""

Data = Mapping[str, Any]
"""A file as the TOML reader has it."""


def sections_of(plan: Plan, data: Data) -> Sections:
    """The sections of a plan that was read from this file, laid out as there."""
    stages = data.get(RAMP, {}).get("stage", [])
    return {STAGES: [_stage(stage, raw) for stage, raw in zip(plan.ramp, stages, strict=True)], **_others(plan)}


def new_sections(plan: Plan, before: Plan | None = None, data: Data = MappingProxyType({})) -> Sections:
    """The sections of a plan. Where it takes the place of another one, which was read from this file, each stage is
    laid out as the one that it was."""
    raw = data.get(RAMP, {}).get("stage", [])
    old = [] if before is None else [_stage(stage, own) for stage, own in zip(before.ramp, raw, strict=True)]
    sources = sources_of(old, [_stage(stage, {}) for stage in plan.ramp])
    stages = [
        _stage(stage, {} if source is None else raw[source]) for stage, source in zip(plan.ramp, sources, strict=True)
    ]
    return {STAGES: stages, **_others(plan)}


def changed_roots(old: Sections, new: Sections) -> list[str]:
    """The outermost sections that say something else."""

    def said(sections: Sections, root: str) -> list[object]:
        return [section.said for path in ROOTS[root] for section in sections[path]]

    return [root for root in ROOTS if said(old, root) != said(new, root)]


def within_roots(sections: Sections, roots: Sequence[str]) -> Sections:
    """The sections of some outermost ones."""
    return {path: sections[path] for root in roots for path in ROOTS[root]}


def texts(sections: Sections, roots: Sequence[str]) -> list[str]:
    """The sections of some outermost ones as new text."""
    return [section.text for root in roots for path in ROOTS[root] for section in sections[path]]


def _stage(stage: StageChoice, raw: Data) -> Section:
    """A stage, its first move on itself unless the file has it in a section of its own."""
    direct = bool(stage.moves) and ("move" not in raw or "control" in raw)
    own = ramp_file.move_entries(stage.moves[0]) if direct else {}
    moves = stage.moves[1:] if direct else stage.moves
    inner: dict[str, list[Section]] = {
        MOVES: [
            Section(
                path=MOVES,
                fields=MOVE_FIELDS,
                entries=ramp_file.move_entries(move),
                usual=ramp_file.USUAL,
                identity=("control", "beam"),
            )
            for move in moves
        ],
        **_trap(stage.trap),
    }
    return Section(
        path=STAGES,
        fields={**STAGE_FIELDS, **DIRECT_MOVE_FIELDS},
        entries={**ramp_file.stage_entries(stage), **own},
        usual=ramp_file.USUAL,
        identity=("label",),
        inner=inner,
    )


def _trap(trap: TrapChoice | None) -> dict[str, list[Section]]:
    beam_path, coils_path = f"{STAGE_TRAP}.beam", f"{STAGE_TRAP}.coils"
    found: dict[str, list[Section]] = {STAGE_TRAP: [], beam_path: [], coils_path: []}
    if trap is None:
        return found
    entries = {name: getattr(trap, name) for name in STAGE_TRAP_FIELDS if getattr(trap, name) is not None}
    if entries:
        found[STAGE_TRAP] = [Section(path=STAGE_TRAP, many=False, fields=STAGE_TRAP_FIELDS, entries=entries)]
    for beam in trap.beams:
        own = trap_file.beam_entries(beam)
        found[beam_path].append(
            Section(path=beam_path, fields=STAGE_BEAM_FIELDS, entries=own, usual=trap_file.USUAL, identity=("name",))
        )
    if trap.coils is not None:
        own = trap_file.coils_entries(trap.coils)
        found[coils_path] = [
            Section(path=coils_path, many=False, fields=STAGE_COILS_FIELDS, entries=own, usual=trap_file.USUAL)
        ]
    return found


def _others(plan: Plan) -> dict[str, list[Section]]:
    """All but the stages."""
    found: dict[str, list[Section]] = {path: [] for paths in ROOTS.values() for path in paths if path != STAGES}
    limits, candidates, passenger = plan.limits, plan.candidates, plan.passenger
    if limits.time is not None:
        found[LIMITS] = [Section(path=LIMITS, many=False, fields=LIMITS_FIELDS, entries={"time": limits.time})]
    for one in limits.controls:
        entries = ramp_file.limits_entries(one)
        found[CONTROL_LIMITS].append(
            Section(path=CONTROL_LIMITS, fields=CONTROL_LIMITS_FIELDS, entries=entries, identity=("control", "beam"))
        )
    for measured in plan.measured:
        entries = ramp_file.measured_entries(measured)
        found[MEASURED].append(Section(path=MEASURED, fields=MEASURED_FIELDS, entries=entries, identity=("label",)))
    own = candidate_file.candidates_entries(candidates)
    if own:
        found[CANDIDATES] = [
            Section(path=CANDIDATES, many=False, fields=CANDIDATES_FIELDS, entries=own, usual=candidate_file.USUAL)
        ]
    for candidate in candidates.candidates:
        entries = candidate_file.entries_by_key(candidate, CANDIDATE_FIELDS)
        found[CANDIDATE].append(
            Section(path=CANDIDATE, fields=CANDIDATE_FIELDS, entries=entries, identity=("key", "state"))
        )
    if passenger is not None:
        parts = (
            (PASSENGER, PASSENGER_FIELDS, passenger),
            (PASSENGER_SPECIES, PASSENGER_SPECIES_FIELDS, passenger.species),
            (PASSENGER_CLOUD, PASSENGER_CLOUD_FIELDS, passenger.cloud),
        )
        for path, fields, choice in parts:
            entries = candidate_file.entries_by_key(choice, fields)
            if entries:
                found[path] = [Section(path=path, many=False, fields=fields, entries=entries)]
    return found
