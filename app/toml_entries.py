"""What entries of a plan look like in a TOML file, and putting them there with the least change."""

from __future__ import annotations

import re
from collections.abc import Mapping
from enum import Enum
from typing import Any

from app.plan_field import PlanField
from app.units import Quantity

_BARE_NUMBER = re.compile(r"-?(0|[1-9][0-9]*)(\.[0-9]+)?([eE][+-]?[0-9]+)?")
_MAY_BE_BARE = (
    "target",
    "trap.beam",
    "ramp.stage",
    "ramp.stage.move",
    "ramp.stage.trap.beam",
    "limits.control",
)  # sections whose pure numbers stand without quotes


def written(entry: object) -> object:
    """What an entry says in the file: two quantities are the same when their texts are."""
    if isinstance(entry, tuple):
        return tuple(written(part) for part in entry)
    return entry.text if isinstance(entry, Quantity) else entry


def plain(field: PlanField, entry: Any) -> Any:
    """An entry as a value of TOML."""
    if isinstance(entry, tuple):
        return [plain(field, part) for part in entry]
    if isinstance(entry, Quantity):
        if field.section in _MAY_BE_BARE and _BARE_NUMBER.fullmatch(entry.text):
            import tomlkit

            return tomlkit.value(entry.text)
        return entry.text
    if isinstance(entry, Enum):
        return entry.value
    return int(entry) if isinstance(entry, float) and entry.is_integer() else entry


def put(table: Any, field: PlanField, entry: object) -> None:
    """Set the entry of a field in a table; of a list of the same length only the parts that differ, so that its own
    comments and line breaks stay."""
    value = plain(field, entry)
    present = table.get(field.name)
    if isinstance(value, list) and isinstance(present, list) and len(present) == len(value):
        for place, part in enumerate(value):
            if present[place] != part:
                present[place] = part
    else:
        table[field.name] = value


def drop(table: Any, field: PlanField) -> None:
    """Take the entry of a field out of a table."""
    del table[field.name]  # not remove: a table whose parts stand apart in the file has none


def put_changed(
    table: Any,
    fields: Mapping[str, PlanField],
    before: Mapping[str, object],
    after: Mapping[str, object],
    usual: Mapping[str, object],
) -> None:
    """Set in a table what differs between the entries before and after; one that is no longer there goes, or says
    what is usual."""
    for name, field in fields.items():
        if written(before.get(name)) == written(after.get(name)):
            continue
        if name in after:
            put(table, field, after[name])
        elif name in usual:
            put(table, field, usual[name])
        else:
            drop(table, field)


def section_text(header: str, fields: Mapping[str, PlanField], entries: Mapping[str, object]) -> str:
    """A new section with its header line."""
    return "\n".join([header, *missing_lines({}, fields, entries), ""])


def missing_lines(
    section: Mapping[str, object], fields: Mapping[str, PlanField], entries: Mapping[str, object]
) -> list[str]:
    """The lines of those entries that a section does not have."""
    import tomlkit

    return [
        f"{name} = {tomlkit.item(plain(field, entries[name])).as_string()}"
        for name, field in fields.items()
        if name in entries and name not in section
    ]
