"""Plan files: TOML, format number `FORMAT`, read strictly and saved without touching what did not change."""

from __future__ import annotations

import contextlib
import difflib
import os
import tomllib
from collections.abc import Callable, Iterator, Mapping
from dataclasses import replace
from enum import Enum
from pathlib import Path
from typing import TYPE_CHECKING, Any

from app.choices import (
    PLAN_FIELDS,
    CloudChoice,
    Entry,
    LossesChoice,
    Plan,
    PlanError,
    PlanField,
    SpeciesChoice,
    TargetChoice,
    TrapChoice,
)
from app.units import FREQUENCY, Quantity, read_quantity

if TYPE_CHECKING:
    from physics.cloud import Model

FORMAT = 1

_MOVE = ("control", "beam", "start", "end", "shape", "points", "tau", "exponent")
_SPECIES_KEYS = tuple(f.name for f in PLAN_FIELDS.values() if f.section == "species")
_CLOUD_KEYS = tuple(f.name for f in PLAN_FIELDS.values() if f.section == "cloud")

KEPT: Mapping[str, tuple[str, ...]] = {
    "trap.beam": ("name", "on", "wavelength", "power", "waist", "waists", "direction", "focus"),
    "trap.coils": ("axis", "centre", "bias", "gradient", "curvature", "levitation", "knife"),
    "ramp": ("stage",),
    "ramp.stage": ("duration", *_MOVE, "move"),
    "ramp.stage.move": _MOVE,
    "limits": ("time", "control"),
    "limits.control": ("control", "beam", "low", "high", "fastest"),
    "measured": ("label", "stage", "time", "atoms", "temperature", "widths", "expansion_time"),
    "candidates": ("basis", "keys"),
    "candidate": ("key", "state", "atoms", "temperature", "field", "scattering_length"),
    "passenger": ("species", "cloud"),
    "passenger.species": _SPECIES_KEYS,
    "passenger.cloud": _CLOUD_KEYS,
}
"""Sections of the format that this version keeps as they are and does not compute, with their keys."""

_SECTIONS = ("species", "trap", "cloud", "losses", "target")
_DEEPEST = max(section.count(".") for section in KEPT)
LONGEST = 80  # characters of a name, and of a file's own words in a message


class _Written(str):
    """A floating-point number of the file, with the digits that stand there."""

    __slots__ = ()


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
        data = tomllib.loads(text, parse_float=_Written)
    except tomllib.TOMLDecodeError as error:
        raise PlanError(f"{name} is not a readable TOML file: {_one_line(str(error))}") from None
    except ValueError:  # the one other error of the reader: a whole number of thousands of digits
        raise PlanError(f"{name} is not a plan file: it holds a number beyond every one that can be read") from None
    except RecursionError:
        raise PlanError(f"{name} is not a plan file: its lists or tables are nested too deeply") from None
    _check_format(data, name)
    _check_keys(data, name)
    parts = [part for part in ("beam", "coils") if part in _table(data, "trap", name)]
    if parts and "frequencies" not in data["trap"]:
        raise PlanError(
            f"{name}: the trap is given by {' and '.join(parts)} only; this version needs trap.frequencies, such as "
            '["120 Hz", "120 Hz", "20 Hz"]'
        )
    entries: dict[str, object] = {}
    for field in PLAN_FIELDS.values():
        table = _table(data, field.section, name) if field.section else data
        if field.name in table:
            entries[field.path] = table[field.name]
    plan = build_plan(entries, lambda field: f"{name}: {field.path}")
    held = [section for section in KEPT if _holds(data, section)]
    outermost = tuple(s for s in held if not any(s.startswith(f"{other}.") for other in held))
    return replace(plan, unused=outermost, source=text)


def build_plan(entries: Mapping[str, object], where: Callable[[PlanField], str]) -> Plan:
    """A plan from its entries by dotted path: as they stand in a file or on a command line, or as read before.

    `where` gives the name of a field in errors: file and key, or flag.
    """
    missing = [field for field in PLAN_FIELDS.values() if field.required and field.path not in entries]
    if missing:
        example = f', such as "{missing[0].kind.example}"' if missing[0].kind else ', such as "87Rb"'
        raise PlanError(f"{where(missing[0])} is missing: give the {missing[0].label.lower()}{example}")
    values: dict[str, Any] = {}
    for path, field in PLAN_FIELDS.items():
        if path not in entries:
            continue
        try:
            values[path] = _read_entry(field, entries[path], values)
        except ValueError as error:
            raise PlanError(f"{where(field)}: {error}") from None

    def section(name: str) -> dict[str, Any]:
        return {PLAN_FIELDS[path].name: value for path, value in values.items() if PLAN_FIELDS[path].section == name}

    last = PLAN_FIELDS["title"]
    try:
        last = _last_of("species", values)
        species = SpeciesChoice(**section("species"))
        last = _last_of("target", values)
        target = TargetChoice(**section("target"))
        last = PLAN_FIELDS["title"]
        return Plan(
            title=values.get("title", ""),
            species=species,
            trap=TrapChoice(**section("trap")),
            cloud=CloudChoice(**section("cloud")),
            losses=LossesChoice(**section("losses")),
            target=target,
        )
    except PlanError as error:
        raise PlanError(f"{where(last)}: {error}") from None


def entries_of(plan: Plan) -> dict[str, object]:
    """The entries of a plan by dotted path, in the order of the file, without those that are left open."""
    entries: dict[str, object] = {}
    for path, field in PLAN_FIELDS.items():
        value = getattr(getattr(plan, field.section) if field.section else plan, field.name)
        if value is not None and value != "":
            entries[path] = value
    return entries


def _last_of(section: str, values: Mapping[str, object]) -> PlanField:
    """The field that a clash within a section is reported at: the last one given."""
    given = [PLAN_FIELDS[path] for path in values if PLAN_FIELDS[path].section == section]
    return given[-1] if given else PLAN_FIELDS["title"]


def _read_entry(field: PlanField, entry: object, so_far: Mapping[str, Any]) -> object:
    """The value of one entry; ValueError with the end of a sentence."""
    if isinstance(entry, Quantity | tuple | Enum):
        return entry
    match field.entry:
        case Entry.FREQUENCIES:
            return _frequencies(entry)
        case Entry.QUANTITY:
            assert field.kind is not None
            return read_quantity(_quantity_text(entry, bool(field.kind.si_unit), field.kind.example), field.kind)
        case Entry.WHOLE:
            return _whole(entry)
    if not isinstance(entry, str) or isinstance(entry, _Written):
        raise PlanError(f"must be a text in quotes, got {_shown(entry)}")
    if field.entry is Entry.TEXT:
        return entry
    if len(entry) > LONGEST or not entry.isprintable():
        raise PlanError(f"must be one line of at most {LONGEST} characters, got {_shown(entry)}")
    if field.entry is Entry.MODEL:
        return _model(entry)
    from physics.species import load_species

    if field.entry is Entry.SPECIES:
        return load_species(entry).key
    return load_species(so_far["species.key"]).state(entry).name


def _quantity_text(entry: object, unit_needed: bool, example: str) -> str:
    if isinstance(entry, bool) or not isinstance(entry, str | int):
        raise PlanError(f'must be a text in quotes, such as "{example}", got {_shown(entry)}')
    text = entry.replace("_", "") if isinstance(entry, _Written) else str(entry)
    if unit_needed and (isinstance(entry, _Written) or not isinstance(entry, str)):
        raise PlanError(f'needs a unit: write a text in quotes, such as "{example}", not {_one_line(text)}')
    return text


def _frequencies(entry: object) -> tuple[Quantity, ...]:
    """Three quantities, from a list in a file or from a flag's text with commas."""
    example = '["120 Hz", "120 Hz", "20 Hz"]'
    if isinstance(entry, str) and not isinstance(entry, _Written):
        entry = [part.strip() for part in entry.split(";" if ";" in entry else ",")]
        example = '"120 Hz,120 Hz,20 Hz"'
    if not isinstance(entry, list) or len(entry) != 3:
        got = f"{len(entry)} of them" if isinstance(entry, list) else _shown(entry)
        raise PlanError(f"must be three, such as {example}, got {got}")
    return tuple(read_quantity(_quantity_text(part, True, FREQUENCY.example), FREQUENCY) for part in entry)


def _whole(entry: object) -> int:
    with contextlib.suppress(ValueError):
        if isinstance(entry, str) and not isinstance(entry, _Written) and entry.strip().isascii():
            return int(entry.strip()) if entry.strip().isdigit() and len(entry) < LONGEST else int("")
        if isinstance(entry, int) and not isinstance(entry, bool) and abs(entry) < 10**LONGEST:
            return entry
    raise PlanError(f"must be a whole number, got {_shown(entry)}")


def _model(entry: str) -> Model:
    from physics.cloud import AVAILABLE_MODELS

    def plain(text: str) -> str:
        return "".join(c for c in text.casefold() if c.isalpha())

    names = ", ".join(f'"{model.value}"' for model in AVAILABLE_MODELS)
    found = next((model for model in AVAILABLE_MODELS if plain(model.value) == plain(entry)), None)
    if found is None:
        near = _nearest(entry, [model.value for model in AVAILABLE_MODELS])
        raise PlanError(f'"{entry}" is not a model: {names} are; the nearest is "{near}"')
    return found


def _shown(entry: object) -> str:
    """An entry as it may stand in the file, short."""
    if isinstance(entry, bool):
        return "true" if entry else "false"
    if isinstance(entry, Mapping):
        return "a table"
    if isinstance(entry, list):
        return f"a list of {len(entry)}"
    if isinstance(entry, str) and not isinstance(entry, _Written):
        return f'"{_one_line(entry)}"'
    return _one_line(str(entry))


def _one_line(text: str) -> str:
    """A text that may be anything, fit to stand in a sentence: printable, and not longer than one can read."""
    shown = "".join(c if c.isprintable() else ascii(c)[1:-1] for c in text[:LONGEST])
    return shown if len(text) <= LONGEST else f"{shown[: LONGEST - 1]}…"


def _check_format(data: Mapping[str, object], name: str) -> None:
    found = data.get("coldward")
    if isinstance(found, bool) or not isinstance(found, int) or found < 1:
        got = "it is missing" if found is None else f"got {_shown(found)}"
        raise PlanError(f'{name} is not a plan file: it must say "coldward = {FORMAT}", {got}')
    if found > FORMAT:
        raise PlanError(
            f"{name} is a plan of format {_shown(found)}, and this version of Coldward reads format {FORMAT}: "
            "open it with a newer version; the file was not changed"
        )


def _check_keys(data: Mapping[str, Any], name: str) -> None:
    """Every key of the file is one of the format's."""
    known = _known_keys()
    for section, key in _keys(data, ""):
        allowed = known.get(section)
        if allowed is None or key in allowed:  # None: a table where a value belongs, which its own check refuses
            continue
        everywhere = sorted({f"{s}.{k}".lstrip(".") for s, keys in known.items() for k in keys})
        path = f"{section}.{key}".lstrip(".")
        place = f"in [{section}]" if section else "at the top"
        raise PlanError(
            f"{name}: {_one_line(path)} is not a key of a plan: the nearest is {_nearest(path, everywhere)}; "
            f"allowed {place} are {', '.join(allowed)}"
        )


def _known_keys() -> dict[str, tuple[str, ...]]:
    known: dict[str, tuple[str, ...]] = dict(KEPT)
    for section in _SECTIONS:
        known[section] = tuple(f.name for f in PLAN_FIELDS.values() if f.section == section)
    known["trap"] += ("gravity", "beam", "coils")
    outermost = [section for section in KEPT if "." not in section]
    known[""] = ("coldward", "title", *_SECTIONS, *outermost)
    return known


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
        raise PlanError(f"{name}: {section} must be a section [{section}], got {_shown(table)}")
    return table


def _holds(data: Mapping[str, Any], section: str) -> bool:
    for part in section.split("."):
        if not isinstance(data, Mapping) or part not in data:
            return False
        data = data[part]
    return True


def _nearest(text: str, known: list[str]) -> str:
    plain = text[:LONGEST].casefold()
    return max(known, key=lambda name: difflib.SequenceMatcher(None, plain, name.casefold()).ratio())
