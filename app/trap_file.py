"""Beams and coils of a plan file: [[trap.beam]] and [trap.coils]."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType
from typing import Any

from app.plan_entries import read_section, shown
from app.plan_field import PlanError, PlanField
from app.trap_choices import (
    ALONG_Z,
    BEAM_FIELDS,
    BEAMS,
    COILS,
    COILS_FIELDS,
    ORIGIN,
    BeamChoice,
    CoilsChoice,
    free_names,
    require_different,
)

Where = Callable[[str], str]
"""Dotted path -> what errors call it."""


def read_beams(sections: object, where: Where) -> tuple[BeamChoice, ...]:
    """The beams that a list of tables says. PlanError in one sentence, which names key and beam."""
    if isinstance(sections, tuple):  # read before
        return sections
    if not isinstance(sections, list) or not all(isinstance(section, Mapping) for section in sections):
        raise PlanError(f"{where(BEAMS)}: beams are sections [[{BEAMS}]], one for each, got {shown(sections)}")
    names = beam_names(sections)
    beams = tuple(_beam(section, name, where) for section, name in zip(sections, names, strict=True))
    try:
        require_different(names)
    except PlanError as error:
        raise PlanError(f"{where(error.path)}: {error}") from None
    return beams


def beam_names(sections: list[Mapping[str, Any]]) -> list[str]:
    """What the beams of a file are called: those without a name get the first free letters."""
    given = [str(section["name"]) for section in sections if "name" in section]
    free = free_names(set(given))
    return [str(section["name"]) if "name" in section else next(free) for section in sections]


def _beam(section: Mapping[str, Any], name: str, where: Where) -> BeamChoice:
    of = f" of beam {shown(name)[1:-1]}"

    def place(field: PlanField) -> str:
        return f"{where(field.path)}{of}"

    values = read_section(section, BEAM_FIELDS, place)
    values["name"] = name
    one, two = values.pop("waist", None), values.pop("waists", None)
    if (one is None) == (two is None):
        got = "it is missing" if one is None else "both waist and waists are given"
        raise PlanError(f'{place(BEAM_FIELDS["waist"])}: give waist = "70 um" or waists = ["70 um", "50 um"]; {got}')
    values["waists"] = two if one is None else (one,)
    return BeamChoice(**values)


def read_coils(section: object, where: Where) -> CoilsChoice:
    """The coils that a table says. PlanError in one sentence, which names the key."""
    if isinstance(section, CoilsChoice):  # read before
        return section
    if not isinstance(section, Mapping):
        raise PlanError(f"{where(COILS)}: coils are one section [{COILS}], got {shown(section)}")
    values = read_section(section, COILS_FIELDS, lambda field: where(field.path))
    try:
        return CoilsChoice(**values)
    except PlanError as error:
        raise PlanError(f"{where(error.path)}: {error}") from None


# --- the other way: what beams and coils say in the file --------------------------------------------------------------


USUAL: Mapping[str, object] = MappingProxyType({"on": True, "focus": ORIGIN, "axis": ALONG_Z, "centre": ORIGIN})
"""What holds where a key is left out."""


def beam_entries(beam: BeamChoice) -> dict[str, object]:
    """The entries of a beam by key, in the order of the file, without those that say what is usual."""
    waists: dict[str, object] = {"waist": beam.waists[0]} if len(beam.waists) == 1 else {"waists": beam.waists}
    entries = {name: waists.get(name) if name.startswith("waist") else getattr(beam, name) for name in BEAM_FIELDS}
    return {name: value for name, value in entries.items() if value is not None and value != USUAL.get(name)}


def coils_entries(coils: CoilsChoice) -> dict[str, object]:
    """The entries of coils by key, in the order of the file, without those that say what is usual."""
    entries = {name: getattr(coils, name) for name in COILS_FIELDS}
    return {name: value for name, value in entries.items() if value is not None and value != USUAL.get(name)}
