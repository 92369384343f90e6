"""Single entries of a plan: from what stands in a file or after a flag to what it means, or a sentence that says why
it means nothing."""

from __future__ import annotations

import contextlib
import difflib
import math
from collections.abc import Callable, Mapping, Sequence
from enum import Enum
from typing import TYPE_CHECKING, Any

from app.plan_field import Entry, PlanError, PlanField
from app.trap_choices import Direction, Gravity, require_direction, require_name
from app.units import TIME, Quantity, read_quantity

if TYPE_CHECKING:
    from app.kinds import Kind
    from physics.cloud import Model

LONGEST = 80  # characters of a name, and of a file's own words in a message


class Written(str):
    """A floating-point number of the file, with the digits that stand there."""

    __slots__ = ()


def read_entry(field: PlanField, entry: object, so_far: Mapping[str, Any]) -> object:
    """The value of one entry; ValueError with the end of a sentence.

    so_far : values of the fields before, by dotted path
    """
    if isinstance(entry, Quantity | tuple | Enum):
        return entry
    match field.entry:
        case Entry.FREQUENCIES | Entry.PLACE:
            return _quantities(entry, field, 3)
        case Entry.TWO:
            return _quantities(entry, field, 2)
        case Entry.QUANTITY:
            assert field.kind is not None
            return read_quantity(_quantity_text(entry, field.kind), field.kind)
        case Entry.WIDTHS:
            return _widths(entry, field)
        case Entry.POINTS:
            return _points(entry, field)
        case Entry.KEYS:
            return _keys(entry)
        case Entry.WHOLE:
            return _whole(entry)
        case Entry.SWITCH:
            return _switch(entry)
        case Entry.DIRECTION:
            return _direction(entry, "[1, 0, 0]")
        case Entry.GRAVITY:
            return _gravity(entry)
    if not isinstance(entry, str) or isinstance(entry, Written):
        raise PlanError(f"must be a text in quotes, got {shown(entry)}")
    if field.entry is Entry.TEXT:
        return entry
    if len(entry) > LONGEST or not entry.isprintable():
        raise PlanError(f"must be one line of at most {LONGEST} characters, got {shown(entry)}")
    match field.entry:
        case Entry.MODEL:
            return _model(entry)
        case Entry.CHOICE:
            return _choice(entry, field)
        case Entry.NAME:
            return _name(entry)
    from physics.species import load_species

    if field.entry is Entry.SPECIES:
        return load_species(entry).key
    return load_species(so_far["species.key"]).state(entry).name


def read_section(
    section: Mapping[str, Any], fields: Mapping[str, PlanField], place: Callable[[PlanField], str]
) -> dict[str, Any]:
    """What a section says, by key. PlanError in one sentence, which begins with the place of the field at fault."""
    values: dict[str, Any] = {}
    for name, field in fields.items():
        if name in section:
            try:
                values[name] = read_entry(field, section[name], {"species.key": values.get("key")})
            except ValueError as error:
                raise PlanError(f"{place(field)}: {error}") from None
        elif field.required:
            raise PlanError(f"{place(field)} is missing: give the {field.label.lower()}, such as {_example(field)}")
    return values


def _example(field: PlanField) -> str:
    if field.kind is not None:
        return f'"{field.kind.example}"'
    if field.options:
        return f'"{field.options[0].value}"'
    return {Entry.DIRECTION: "[1, 0, 0]", Entry.SPECIES: '"87Rb"'}.get(field.entry, '"after the first stage"')


def _quantity_text(entry: object, kind: Kind) -> str:
    if isinstance(entry, bool) or not isinstance(entry, str | int):
        raise PlanError(f'must be a text in quotes, such as "{kind.example}", got {shown(entry)}')
    text = entry.replace("_", "") if isinstance(entry, Written) else str(entry)
    if kind.si_unit and (isinstance(entry, Written) or not isinstance(entry, str)):
        raise PlanError(f'needs a unit: write a text in quotes, such as "{kind.example}", not {one_line(text)}')
    return text


_WORDS = {2: "two", 3: "three"}
_EXAMPLES = {Entry.FREQUENCIES: ("120 Hz", "120 Hz", "20 Hz"), Entry.TWO: ("70 um", "50 um")}


def _quantities(entry: object, field: PlanField, count: int) -> tuple[Quantity, ...]:
    """So many quantities of one kind, from a list in a file or from a flag's text with commas."""
    kind = field.kind
    assert kind is not None
    texts = _EXAMPLES.get(field.entry, (kind.example.replace("µ", "u"),) * count)
    quoted = ", ".join(f'"{text}"' for text in texts)
    example = f"[{quoted}]"
    if isinstance(entry, str) and not isinstance(entry, Written):
        entry = _parts(entry)
        example = f'"{",".join(texts)}"'
    if not isinstance(entry, list) or len(entry) != count:
        got = f"{len(entry)} of them" if isinstance(entry, list) else shown(entry)
        raise PlanError(f"must be {_WORDS[count]}, such as {example}, got {got}")
    return tuple(read_quantity(_quantity_text(part, kind), kind) for part in entry)


def _widths(entry: object, field: PlanField) -> tuple[Quantity, ...]:
    """One to three quantities of one kind."""
    kind = field.kind
    assert kind is not None
    if not isinstance(entry, list) or not 1 <= len(entry) <= 3:
        example = ", ".join([f'"{kind.example.replace("µ", "u")}"'] * 2)
        got = f"{len(entry)} of them" if isinstance(entry, list) else shown(entry)
        raise PlanError(f"must be a list of one to three, such as [{example}], got {got}")
    return tuple(read_quantity(_quantity_text(part, kind), kind) for part in entry)


def _points(entry: object, field: PlanField) -> tuple[tuple[Quantity, Quantity], ...]:
    """Pairs of a time and a value."""
    kind = field.kind
    assert kind is not None
    plain = kind.example.replace("µ", "u")
    example = f'[["0 s", "{plain}"], ["1 s", "{plain}"]]'
    if not isinstance(entry, list):
        raise PlanError(f"must be a list of times and values, such as {example}, got {shown(entry)}")
    points = []
    for place, pair in enumerate(entry, start=1):
        if not isinstance(pair, list) or len(pair) != 2:
            raise PlanError(f"must be pairs of a time and a value, such as {example}, point {place} is {shown(pair)}")
        try:
            time = read_quantity(_quantity_text(pair[0], TIME), TIME)
            points.append((time, read_quantity(_quantity_text(pair[1], kind), kind)))
        except ValueError as error:
            raise PlanError(f"point {place}: {error}") from None
    return tuple(points)


def _keys(entry: object) -> tuple[str, ...]:
    """Names of species, from a list in a file or from a text with commas."""
    from physics.species import load_species

    if isinstance(entry, str) and not isinstance(entry, Written):
        entry = [part for part in _parts(entry) if part]
    if not isinstance(entry, list):
        raise PlanError(f'must be a list of species, such as ["87Rb", "41K"], got {shown(entry)}')
    for part in entry:
        if not isinstance(part, str) or isinstance(part, Written) or len(part) > LONGEST or not part.isprintable():
            raise PlanError(f'must be a list of species, such as ["87Rb", "41K"], got {shown(part)} among them')
    keys = tuple(load_species(part).key for part in entry)
    twice = next((key for place, key in enumerate(keys) if key in keys[:place]), None)
    if twice is not None:
        raise PlanError(f"names {twice} twice")
    return keys


def _parts(text: str) -> list[str]:
    return [part.strip() for part in text.split(";" if ";" in text else ",")]


def _direction(entry: object, example: str) -> Direction:
    """Three plain numbers, from a list in a file or from a text with commas."""
    parts: list[Any] = []
    if isinstance(entry, str) and not isinstance(entry, Written):
        parts = [Written(part) for part in _parts(entry)]
        example = f'"{example.strip("[]")}"'
    elif isinstance(entry, list):
        parts = entry
    values = [value for part in parts if (value := _plain_number(part)) is not None]
    if len(parts) != 3 or len(values) != 3:
        wrong = next((part for part in parts if _plain_number(part) is None), None) if len(parts) == 3 else None
        got = shown(entry) if wrong is None else shown(wrong)
        raise PlanError(f"must be three numbers, such as {example}, got {got}")
    x, y, z = values
    require_direction((x, y, z))
    return x, y, z


def _plain_number(entry: object) -> float | None:
    """A finite number of the file; None for anything else."""
    if isinstance(entry, Written):
        with contextlib.suppress(ValueError):
            value = float(entry) if entry.isascii() else math.nan
            return value if math.isfinite(value) else None
        return None
    if isinstance(entry, int) and not isinstance(entry, bool) and abs(entry) < 10**LONGEST:
        return float(entry)
    return None


def _gravity(entry: object) -> Direction | Gravity:
    if isinstance(entry, str) and not isinstance(entry, Written) and entry.strip().casefold() == Gravity.OFF.value:
        return Gravity.OFF
    try:
        return _direction(entry, "[0, 0, -1]")
    except PlanError as error:
        raise PlanError(f'{error}; or "off"') from None


def _switch(entry: object) -> bool:
    if not isinstance(entry, bool):
        raise PlanError(f"must be true or false, without quotes, got {shown(entry)}")
    return entry


def _name(entry: str) -> str:
    try:
        require_name(entry)
    except PlanError as error:
        raise PlanError(f"{error}, got {shown(entry)}") from None
    return entry


def _whole(entry: object) -> int:
    with contextlib.suppress(ValueError):
        if isinstance(entry, str) and not isinstance(entry, Written) and entry.strip().isascii():
            return int(entry.strip()) if entry.strip().isdigit() and len(entry) < LONGEST else int("")
        if isinstance(entry, int) and not isinstance(entry, bool) and abs(entry) < 10**LONGEST:
            return entry
    raise PlanError(f"must be a whole number, got {shown(entry)}")


def _model(entry: str) -> Model:
    from physics.cloud import AVAILABLE_MODELS

    found: Model = _option(entry, AVAILABLE_MODELS, "a model")
    return found


def _choice(entry: str, field: PlanField) -> Enum:
    article = "an" if field.name[0] in "aeiou" else "a"
    found: Enum = _option(entry, field.options, f"{article} {field.name}")
    return found


def _option(entry: str, options: Sequence[Any], what: str) -> Any:
    """The one of some options whose words these are; case, spaces and hyphens do not matter."""

    def plain(text: str) -> str:
        return "".join(c for c in text.casefold() if c.isalpha())

    found = next((option for option in options if plain(option.value) == plain(entry)), None)
    if found is None:
        names = ", ".join(f'"{option.value}"' for option in options)
        near = nearest(entry, [option.value for option in options])
        raise PlanError(f'"{entry}" is not {what}: {names} are; the nearest is "{near}"')
    return found


def shown(entry: object) -> str:
    """An entry as it may stand in the file, short."""
    if isinstance(entry, bool):
        return "true" if entry else "false"
    if isinstance(entry, Mapping):
        return "a table"
    if isinstance(entry, list):
        return f"a list of {len(entry)}"
    if isinstance(entry, str) and not isinstance(entry, Written):
        return f'"{one_line(entry)}"'
    return one_line(str(entry))


def one_line(text: str) -> str:
    """A text that may be anything, fit to stand in a sentence: printable, and not longer than one can read."""
    plain = "".join(c if c.isprintable() else ascii(c)[1:-1] for c in text[:LONGEST])
    return plain if len(text) <= LONGEST else f"{plain[: LONGEST - 1]}…"


def nearest(text: str, known: list[str]) -> str:
    """The known name that is most like a text."""
    plain = text[:LONGEST].casefold()
    return max(known, key=lambda name: difflib.SequenceMatcher(None, plain, name.casefold()).ratio())
