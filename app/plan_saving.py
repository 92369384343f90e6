"""Writing plans: what did not change stays as it stands in the file, byte for byte, comments included."""

from __future__ import annotations

import os
import re
from typing import TYPE_CHECKING, Any

from app.choices import PLAN_FIELDS, Plan, PlanError, PlanField
from app.files import write_atomically
from app.plan_file import FORMAT, entries_of, parse_plan
from app.units import Quantity

if TYPE_CHECKING:
    from enum import Enum

    from tomlkit import TOMLDocument

_BARE_NUMBER = re.compile(r"-?(0|[1-9][0-9]*)(\.[0-9]+)?([eE][+-]?[0-9]+)?")


def write_plan(plan: Plan, previous_text: str | None = None) -> str:
    """The text of a plan file.

    previous_text : the file as it was; by default the one that the plan came from. Its comments, its layout and the
        sections that this version does not use are kept, and so is every entry whose meaning did not change.
    """
    previous = plan.source if previous_text is None else previous_text
    previous = previous.removeprefix("\ufeff")
    old = entries_of(parse_plan(previous, "the file as it was")) if previous.strip() else {}
    new = entries_of(plan)
    changed = [path for path in PLAN_FIELDS if _written(old.get(path)) != _written(new.get(path))]
    if previous.strip() and not changed:
        return previous

    import tomlkit

    if previous.strip():
        document = tomlkit.parse(previous)
    else:
        document = tomlkit.document()
        document["coldward"] = FORMAT
    for path in changed:
        field = PLAN_FIELDS[path]
        if path in new:
            _put(document, field, new[path])
        else:
            _drop(document, field)
    return tomlkit.dumps(document)


def _written(entry: object) -> object:
    """What an entry says in the file: two quantities are the same when their texts are."""
    if isinstance(entry, tuple):
        return tuple(_written(part) for part in entry)
    return entry.text if isinstance(entry, Quantity) else entry


def _put(document: TOMLDocument, field: PlanField, entry: Any) -> None:
    import tomlkit

    table: Any = document
    if field.section:
        if field.section not in document:
            document[field.section] = tomlkit.table()
        table = document[field.section]
    if isinstance(entry, tuple):
        texts = [quantity.text for quantity in entry]
        present = table.get(field.name)
        if isinstance(present, list) and len(present) == len(texts):
            for index, text in enumerate(texts):  # one by one: the list's own comments and line breaks stay
                if present[index] != text:
                    present[index] = text
        else:
            table[field.name] = texts
        return
    table[field.name] = _value(field, entry)


def _value(field: PlanField, entry: Any) -> Any:
    import tomlkit

    if isinstance(entry, Quantity):
        bare = field.section == "target" and _BARE_NUMBER.fullmatch(entry.text)
        return tomlkit.value(entry.text) if bare else entry.text
    if isinstance(entry, str | int):
        return entry
    choice: Enum = entry
    return choice.value


def _drop(document: TOMLDocument, field: PlanField) -> None:
    table: Any = document[field.section] if field.section else document
    del table[field.name]  # not remove: a table whose parts stand apart in the file has none


def save_plan(plan: Plan, path: str | os.PathLike[str], previous_text: str | None = None) -> str:
    """Write a plan file as a whole or not at all, and return its text.

    Raises
    ------
    PlanError
        The file could not be written; what was there is unchanged.
    """
    text = write_plan(plan, previous_text)
    try:
        write_atomically(path, text.encode("utf-8"))
    except OSError as error:
        raise PlanError(str(error)) from None
    return text
