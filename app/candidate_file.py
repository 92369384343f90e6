"""Other species of a plan file: [candidates], [[candidate]] and [passenger]."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

from app.candidate_choices import CandidateChoice, CandidatesChoice, PassengerChoice
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
from app.choices import CloudChoice, SpeciesChoice
from app.plan_entries import read_section, shown
from app.plan_field import PlanError, PlanField
from app.ramp_file import sections_in
from app.trap_file import Where


def read_candidates(section: object, single: object, where: Where) -> CandidatesChoice:
    """What [candidates] and the sections [[candidate]] say; each is None where the file has none."""
    if isinstance(section, CandidatesChoice):  # read before
        return section
    if section is None:
        section = {}
    if not isinstance(section, Mapping):
        raise PlanError(f"{where(CANDIDATES)} must be a section [{CANDIDATES}], got {shown(section)}")
    values = read_section(section, CANDIDATES_FIELDS, lambda field: where(field.path))
    found = sections_in({CANDIDATE: [] if single is None else single}, CANDIDATE, CANDIDATE, where)
    candidates = [_candidate(part, f" of candidate {number}", where) for number, part in enumerate(found, start=1)]
    try:
        return CandidatesChoice(**values, candidates=tuple(candidates))
    except PlanError as error:
        raise PlanError(f"{where(error.path)}: {error}") from None


def _candidate(section: Mapping[str, Any], of: str, where: Where) -> CandidateChoice:
    values = read_section(section, CANDIDATE_FIELDS, lambda field: f"{where(field.path)}{of}")
    try:
        return CandidateChoice(**values)
    except PlanError as error:
        raise PlanError(f"{where(error.path)}{of}: {error}") from None


def read_passenger(section: object, where: Where) -> PassengerChoice:
    """What [passenger] says, whose species and cloud are written as those of the plan."""
    if isinstance(section, PassengerChoice):  # read before
        return section
    if not isinstance(section, Mapping):
        raise PlanError(f"{where(PASSENGER)} must be a section [{PASSENGER}], got {shown(section)}")
    parts = {}
    for path in (PASSENGER_SPECIES, PASSENGER_CLOUD):
        part = section.get(path.rpartition(".")[2])
        if not isinstance(part, Mapping):
            got = "it is missing" if part is None else f"got {shown(part)}"
            raise PlanError(f"{where(path)}: a passenger needs a section [{path}], {got}")
        parts[path] = part
    values = read_section(section, PASSENGER_FIELDS, lambda field: where(field.path))
    named = read_section(parts[PASSENGER_SPECIES], PASSENGER_SPECIES_FIELDS, lambda field: where(field.path))
    try:
        species = SpeciesChoice(**named)
    except PlanError as error:
        last = [name for name in PASSENGER_SPECIES_FIELDS if name in named][-1]
        raise PlanError(f"{where(f'{PASSENGER_SPECIES}.{last}')}: {error}") from None
    cloud = CloudChoice(**read_section(parts[PASSENGER_CLOUD], PASSENGER_CLOUD_FIELDS, lambda field: where(field.path)))
    return PassengerChoice(species=species, cloud=cloud, **values)


# --- the other way: what they say in the file -------------------------------------------------------------------------


USUAL: Mapping[str, object] = MappingProxyType({"basis": CandidatesChoice().basis, "start": CandidatesChoice().start})
"""What holds where a key is left out."""


def candidates_entries(candidates: CandidatesChoice) -> dict[str, object]:
    """The entries of [candidates] by key, without those that are open or say what is usual."""
    entries = {name: getattr(candidates, name) for name in CANDIDATES_FIELDS}
    return {name: value for name, value in entries.items() if value not in ((), USUAL.get(name))}


def entries_by_key(
    choice: CandidateChoice | PassengerChoice | SpeciesChoice | CloudChoice, fields: Mapping[str, PlanField]
) -> dict[str, object]:
    """The entries of a candidate, or of what a passenger says, by key, without those that are left open."""
    entries = {name: getattr(choice, name) for name in fields}
    return {name: value for name, value in entries.items() if value is not None}
