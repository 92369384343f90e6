"""Writing plans: what did not change stays as it stands in the file, byte for byte, comments included."""

from __future__ import annotations

import itertools
import os
import tomllib
from functools import partial
from typing import TYPE_CHECKING, Any

from app.choices import PLAN_FIELDS, Plan
from app.files import write_atomically
from app.plan_field import PlanError, PlanField
from app.plan_file import FORMAT, entries_of, parse_plan
from app.plan_sections import ROOTS, changed_roots, new_sections, sections_of, texts, within_roots
from app.section_saving import with_sections
from app.toml_blocks import blocks_of, with_lines
from app.toml_entries import drop, missing_lines, put, section_text, written
from app.trap_choices import TrapChoice
from app.trap_saving import beam_text, coils_text, put_beams_and_coils, rearranged, with_new_keys

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator, Mapping

    from tomlkit import TOMLDocument


def write_plan(plan: Plan, previous_text: str | None = None) -> str:
    """The text of a plan file.

    previous_text : the file as it was; by default the one that the plan came from. Its comments, its layout and the
        sections that this version does not use are kept, and so is every entry whose meaning did not change. Beams and
        coils move with the comments above them; where they stand in no sections of their own (in one line, say), and
        others are wanted, all of [trap] is written anew. So it is with the sections of ramp, limits, measured clouds,
        candidates and passenger.

    Raises
    ------
    PlanError
        The layout of the file is one that the plan cannot be put into.
    """
    previous = plan.source if previous_text is None else previous_text
    previous = previous.removeprefix("\ufeff")
    if not previous.strip():
        return _new_text(plan)
    before = parse_plan(previous, "the file as it was")
    if _says_the_same(before, plan):
        return previous
    for text in _texts(previous, before, plan):
        if text is not None and _reads_as(text, plan):
            return text
    raise PlanError("the plan cannot be put into a file of this layout: save it under another name")


def _texts(previous: str, before: Plan, plan: Plan) -> Iterator[str | None]:
    """The file with what differs, in more and more of it written anew; None where its layout does not allow it."""
    from tomlkit.exceptions import TOMLKitError

    ways: tuple[Callable[[str, Plan, Plan], str | None], ...] = (
        _with_sections,
        _with_new_sections,
        partial(_with_new_sections, all_of_them=True),
    )
    for with_parts, put_all in itertools.product(ways, (_with_changes, _with_new_trap)):
        try:
            text = with_parts(previous, before, plan)
            yield None if text is None else put_all(text, before, plan)
        except (tomllib.TOMLDecodeError, TOMLKitError):  # the sections that came are at odds with those there
            yield None


def _with_sections(previous: str, before: Plan, plan: Plan) -> str | None:
    """The file with the ramp, the other species and what goes with them as the plan has it; None where its layout does
    not allow it."""
    data = tomllib.loads(previous)
    old, new = sections_of(before, data), new_sections(plan, before, data)
    roots = changed_roots(old, new)
    return with_sections(previous, within_roots(old, roots), within_roots(new, roots))


def _with_new_sections(previous: str, before: Plan, plan: Plan, *, all_of_them: bool = False) -> str:
    """The file with those of these parts that changed, or with all of them, written anew at its end."""
    import tomlkit

    data = tomllib.loads(previous)
    changed = changed_roots(sections_of(before, data), new_sections(plan, before, data))
    roots = tuple(ROOTS) if all_of_them else changed
    text = "".join(block.text for block in blocks_of(previous) if block.path.split(".")[0] not in roots)
    document = tomlkit.parse(text)
    for root in roots:
        if root in document:  # in one line, say
            del document[root]
    return "\n\n".join([tomlkit.dumps(document).rstrip(), *texts(new_sections(plan), roots)])


def _says_the_same(one: Plan, other: Plan) -> bool:
    a, b = entries_of(one), entries_of(other)
    return a.keys() == b.keys() and all(written(a[path]) == written(b[path]) for path in a)


def _reads_as(text: str, plan: Plan) -> bool:
    try:
        return _says_the_same(parse_plan(text, "the new file"), plan)
    except PlanError:
        return False


def _new_text(plan: Plan) -> str:
    """A plan that had no file: sections in the order of the fields."""
    import tomlkit

    document = tomlkit.parse(f"coldward = {FORMAT}\n")
    _put_fields(document, {}, entries_of(plan), PLAN_FIELDS)
    text = tomlkit.dumps(document)
    if not plan.trap.harmonic:
        text = rearranged(text, None, plan.trap) or text
    return "\n".join([text, *texts(new_sections(plan), tuple(ROOTS))])


def _with_changes(previous: str, before: Plan, plan: Plan) -> str | None:
    """The file with what differs; None where its layout does not allow it."""
    import tomlkit

    text: str | None = previous
    made = not (plan.trap.harmonic and before.trap.harmonic)
    if made:
        text = rearranged(previous, before.trap, plan.trap)
    if text is None:
        return None
    document = tomlkit.parse(_with_new_lines(with_new_keys(text, plan.trap) if made else text, plan))
    if made:
        put_beams_and_coils(document, before.trap, plan.trap)
    _put_fields(document, entries_of(before), entries_of(plan), PLAN_FIELDS)
    return tomlkit.dumps(document)


def _with_new_lines(text: str, plan: Plan) -> str:
    """The file with a line for each field that it has no entry for, in sections that it has."""
    data, blocks, entries = tomllib.loads(text), blocks_of(text), entries_of(plan)
    for section in {field.section for field in PLAN_FIELDS.values()}:
        places = [place for place, block in enumerate(blocks) if block.path == section]
        table = data.get(section) if section else data
        if len(places) == 1 and isinstance(table, dict):
            fields = {field.name: field for field in PLAN_FIELDS.values() if field.section == section}
            own = {name: entries[field.path] for name, field in fields.items() if field.path in entries}
            blocks[places[0]] = with_lines(blocks[places[0]], missing_lines(table, fields, own))
    return "".join(block.text for block in blocks)


def _with_new_trap(previous: str, before: Plan, plan: Plan) -> str:
    """The file with all of its trap written anew, at its end."""
    import tomlkit

    document = tomlkit.parse(previous)
    del document["trap"]
    others = [path for path, field in PLAN_FIELDS.items() if field.section != "trap"]
    _put_fields(document, entries_of(before), entries_of(plan), others)
    text = tomlkit.dumps(document).rstrip()
    return "\n\n".join([text, *_trap_sections(plan.trap)])


def _trap_sections(trap: TrapChoice) -> list[str]:
    fields = {field.name: field for field in PLAN_FIELDS.values() if field.section == "trap"}
    entries = {name: value for name in fields if (value := getattr(trap, name)) is not None}
    sections = [section_text("[trap]", fields, entries)] if entries else []
    sections += [beam_text(beam) for beam in trap.beams]
    return sections if trap.coils is None else [*sections, coils_text(trap.coils)]


def _put_fields(
    document: TOMLDocument, before: Mapping[str, object], after: Mapping[str, object], paths: Iterable[str]
) -> None:
    for path in paths:
        if written(before.get(path)) == written(after.get(path)):
            continue
        field = PLAN_FIELDS[path]
        if path in after:
            put(_table(document, field), field, after[path])
        else:
            drop(_table(document, field), field)


def _table(document: TOMLDocument, field: PlanField) -> Any:
    """The table that a field stands in, made where there is none yet."""
    if not field.section:
        return document
    if field.section not in document:
        import tomlkit

        document[field.section] = tomlkit.table()
    return document[field.section]


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
