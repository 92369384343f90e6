"""Plan files: TOML, format number `FORMAT`, read strictly and saved without touching what did not change."""

from __future__ import annotations

import os
import tomllib
from collections.abc import Callable, Iterator, Mapping
from dataclasses import replace
from pathlib import Path
from types import MappingProxyType
from typing import Any

from app.candidate_choices import CandidatesChoice
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
from app.candidate_file import read_candidates, read_passenger
from app.choices import PLAN_FIELDS, CloudChoice, LossesChoice, Plan, SpeciesChoice, TargetChoice
from app.plan_entries import Written, nearest, one_line, read_entry, shown
from app.plan_field import PlanError
from app.ramp_choices import LimitsChoice
from app.ramp_fields import (
    CONTROL_LIMITS,
    CONTROL_LIMITS_FIELDS,
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
)
from app.ramp_file import read_limits, read_measured, read_ramp
from app.trap_choices import BEAM_FIELDS, BEAMS, COILS, COILS_FIELDS, TrapChoice
from app.trap_file import read_beams, read_coils

FORMAT = 1

_SECTIONS = ("species", "trap", "cloud", "losses", "target")
_OUTERMOST = (RAMP, LIMITS, MEASURED, CANDIDATES, CANDIDATE, PASSENGER)

_KEYS: Mapping[str, tuple[str, ...]] = MappingProxyType(
    {
        "": ("coldward", "title", *_SECTIONS, *_OUTERMOST),
        **{section: tuple(f.name for f in PLAN_FIELDS.values() if f.section == section) for section in _SECTIONS},
        "trap": (*(f.name for f in PLAN_FIELDS.values() if f.section == "trap"), "beam", "coils"),
        BEAMS: tuple(BEAM_FIELDS),
        COILS: tuple(COILS_FIELDS),
        RAMP: ("stage",),
        STAGES: (*STAGE_FIELDS, *MOVE_FIELDS, "move", "trap"),
        MOVES: tuple(MOVE_FIELDS),
        STAGE_TRAP: (*STAGE_TRAP_FIELDS, "beam", "coils"),
        f"{STAGE_TRAP}.beam": tuple(BEAM_FIELDS),
        f"{STAGE_TRAP}.coils": tuple(COILS_FIELDS),
        LIMITS: (*LIMITS_FIELDS, "control"),
        CONTROL_LIMITS: tuple(CONTROL_LIMITS_FIELDS),
        MEASURED: tuple(MEASURED_FIELDS),
        CANDIDATES: tuple(CANDIDATES_FIELDS),
        CANDIDATE: tuple(CANDIDATE_FIELDS),
        PASSENGER: (*PASSENGER_FIELDS, "species", "cloud"),
        PASSENGER_SPECIES: tuple(PASSENGER_SPECIES_FIELDS),
        PASSENGER_CLOUD: tuple(PASSENGER_CLOUD_FIELDS),
    }
)
"""Section -> its keys."""

_DEEPEST = max(section.count(".") for section in _KEYS)


# --- reading ---------------------------------------------------------------------------------------------------------


def read_plan(path: str | os.PathLike[str]) -> Plan:
    """The plan in a file. `PlanError`, in one sentence, where there is none."""
    path = Path(path)
    try:
        text = path.read_bytes().decode("utf-8-sig")
    except FileNotFoundError:
        raise PlanError(f"{path}: there is no such file") from None
    except OSError as error:
        raise PlanError(f"{path} could not be read: {error.strerror or error}") from None
    except UnicodeDecodeError:
        raise PlanError(f"{path} is not a plan file: it is not text in UTF-8") from None
    return parse_plan(text, path.name)


def parse_plan(text: str, name: str) -> Plan:
    """The plan that a text says. `name` is what errors call it."""
    try:
        data = tomllib.loads(text, parse_float=Written)
    except tomllib.TOMLDecodeError as error:
        raise PlanError(f"{name} is not a readable TOML file: {one_line(str(error))}") from None
    except ValueError:  # the one other error of the reader: a whole number of thousands of digits
        raise PlanError(f"{name} is not a plan file: it holds a number beyond every one that can be read") from None
    except RecursionError:
        raise PlanError(f"{name} is not a plan file: its lists or tables are nested too deeply") from None
    _check_format(data, name)
    _check_keys(data, name)
    entries: dict[str, object] = {}
    for field in PLAN_FIELDS.values():
        table = _table(data, field.section, name) if field.section else data
        if field.name in table:
            entries[field.path] = table[field.name]
    made = [part for part in (BEAMS, COILS) if _holds(data, part)]
    if "trap.frequencies" not in entries:
        entries |= {part: data["trap"][part.rpartition(".")[2]] for part in made}
        made = []
    entries |= {section: data[section] for section in _OUTERMOST if section in data}
    plan = build_plan(entries, lambda path: f"{name}: {path}")
    return replace(plan, unused=tuple(made), source=text)


def build_plan(entries: Mapping[str, object], where: Callable[[str], str]) -> Plan:
    """A plan from its entries by dotted path: as they stand in a file or on a command line, or as read before. Beams,
    coils and each of ramp, limits, measured clouds, candidates and passenger are one entry.

    `where` gives the name of a path in errors: file and key, or flag.
    """
    _require_all(entries, where)
    values: dict[str, Any] = {}
    for path, field in PLAN_FIELDS.items():
        if path not in entries:
            continue
        try:
            values[path] = read_entry(field, entries[path], values)
        except ValueError as error:
            raise PlanError(f"{where(path)}: {error}") from None

    def section(name: str) -> dict[str, Any]:
        return {PLAN_FIELDS[path].name: value for path, value in values.items() if PLAN_FIELDS[path].section == name}

    beams = read_beams(entries[BEAMS], where) if BEAMS in entries else ()
    coils = read_coils(entries[COILS], where) if COILS in entries else None
    others: dict[str, Any] = {}
    if RAMP in entries:
        others["ramp"] = read_ramp(entries[RAMP], where)
    if LIMITS in entries:
        others["limits"] = read_limits(entries[LIMITS], where)
    if MEASURED in entries:
        others["measured"] = read_measured(entries[MEASURED], where)
    if CANDIDATES in entries or CANDIDATE in entries:
        others["candidates"] = read_candidates(entries.get(CANDIDATES), entries.get(CANDIDATE), where)
    if PASSENGER in entries:
        others["passenger"] = read_passenger(entries[PASSENGER], where)
    last = "title"
    try:
        last = _last_of("species", values)
        species = SpeciesChoice(**section("species"))
        last = _last_of("target", values)
        target = TargetChoice(**section("target"))
        last = _last_of("trap", values)
        trap = TrapChoice(**section("trap"), beams=beams, coils=coils)
        last = "title"
        return Plan(
            title=values.get("title", ""),
            species=species,
            trap=trap,
            cloud=CloudChoice(**section("cloud")),
            losses=LossesChoice(**section("losses")),
            target=target,
            **others,
        )
    except PlanError as error:
        raise PlanError(f"{where(error.path or last)}: {error}") from None


def _require_all(entries: Mapping[str, object], where: Callable[[str], str]) -> None:
    made = BEAMS in entries or COILS in entries
    for path, field in PLAN_FIELDS.items():
        frequencies = path == "trap.frequencies"
        if field.required and path not in entries and not (frequencies and made):
            example = field.kind.example if field.kind else "87Rb"
            instead = ", or make the trap of beams and coils in a plan file" if frequencies else ""
            raise PlanError(f'{where(path)} is missing: give the {field.label.lower()}, such as "{example}"{instead}')


def entries_of(plan: Plan) -> dict[str, object]:
    """The entries of a plan by dotted path, in the order of the file, without those that are left open."""
    entries: dict[str, object] = {}
    for path, field in PLAN_FIELDS.items():
        value = getattr(getattr(plan, field.section) if field.section else plan, field.name)
        if value is not None and value != "":
            entries[path] = value
    if plan.trap.beams:
        entries[BEAMS] = plan.trap.beams
    if plan.trap.coils is not None:
        entries[COILS] = plan.trap.coils
    others = (
        (RAMP, plan.ramp, ()),
        (LIMITS, plan.limits, LimitsChoice()),
        (MEASURED, plan.measured, ()),
        (CANDIDATES, plan.candidates, CandidatesChoice()),
        (PASSENGER, plan.passenger, None),
    )
    entries |= {section: value for section, value, usual in others if value != usual}
    return entries


def _last_of(section: str, values: Mapping[str, object]) -> str:
    """The path that a clash within a section is reported at: that of the last field given."""
    given = [path for path in values if PLAN_FIELDS[path].section == section]
    return given[-1] if given else "title"


def _check_format(data: Mapping[str, object], name: str) -> None:
    found = data.get("coldward")
    if isinstance(found, bool) or not isinstance(found, int) or found < 1:
        got = "it is missing" if found is None else f"got {shown(found)}"
        raise PlanError(f'{name} is not a plan file: it must say "coldward = {FORMAT}", {got}')
    if found > FORMAT:
        raise PlanError(
            f"{name} is a plan of format {shown(found)}, and this version of Coldward reads format {FORMAT}: "
            "open it with a newer version; the file was not changed"
        )


def _check_keys(data: Mapping[str, Any], name: str) -> None:
    """Every key of the file is one of the format's."""
    for section, key in _keys(data, ""):
        allowed = _KEYS.get(section)
        if allowed is None or key in allowed:  # None: a table where a value belongs, which its own check refuses
            continue
        everywhere = sorted({f"{s}.{k}".lstrip(".") for s, keys in _KEYS.items() for k in keys})
        path = f"{section}.{key}".lstrip(".")
        place = f"in [{section}]" if section else "at the top"
        raise PlanError(
            f"{name}: {one_line(path)} is not a key of a plan: the nearest is {nearest(path, everywhere)}; "
            f"allowed {place} are {', '.join(allowed)}"
        )


def _keys(table: Mapping[str, Any], section: str) -> Iterator[tuple[str, str]]:
    """(section, key) of all keys, those of tables within lists too, as deep as the format goes."""
    for key, value in table.items():
        yield section, key
        if section.count(".") >= _DEEPEST:
            continue
        for inner in value if isinstance(value, list) else [value]:
            if isinstance(inner, Mapping):
                yield from _keys(inner, f"{section}.{key}".lstrip("."))


def _table(data: Mapping[str, Any], section: str, name: str) -> Mapping[str, Any]:
    table = data.get(section, {})
    if not isinstance(table, Mapping):
        raise PlanError(f"{name}: {section} must be a section [{section}], got {shown(table)}")
    return table


def _holds(data: Mapping[str, Any], section: str) -> bool:
    for part in section.split("."):
        if not isinstance(data, Mapping) or part not in data:
            return False
        data = data[part]
    return True
