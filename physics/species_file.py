"""The file of a species: TOML, one an isotope, ``presets/species/KEY.toml``; adding a species is adding a file.

A file reads

    key = "87Rb"                     # the file's own name
    element = "Rb"
    mass_number = 87
    statistics = "boson"             # or "fermion"
    ground_term = "5s 2S1/2"
    J = 0.5                          # electronic angular momentum of the ground term
    imaging_transition = "D2"

    [mass]                           # a sourced number, one table each
    value = "86.909180529 u"         # number, blank, unit
    certainty = "seen"               # seen | memory | computed
    source = "..."
    note = "..."                     # optional: checks, caveats

    [[state]]                        # first one: the state used when none is named
    name = "F=1 mF=-1"
    F = 1.0                          # quantum numbers are labels and need no source
    mF = -1.0
    [state.scattering_length]        # sourced numbers again
    ...

Top level sourced numbers: `ISOTOPE_NUMBERS`; those of a state: `STATE_NUMBERS`, each with the units it allows.
A state may also hold ``mJ``, ``also`` (other spellings of its name), ``spin_components`` and ``components`` (an equal
mixture: how many states, and the names of those of the same file that it mixes), ``scattering_length_is_background``
(it means something only with the resonances of the state), ``scattering_note``, ``loss_note`` and ``note``.
A number that nobody knows is absent.
"""

from __future__ import annotations

import math
import tomllib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar

from physics.constants import DATA_FACTORS
from physics.particles import Certainty, Statistics
from physics.species import Isotope, PresetError, Sourced, Species, State
from physics.species_names import nearest_first

ISOTOPE_NUMBERS: Mapping[str, tuple[str, ...]] = {
    "mass": ("u",),
    "nuclear_spin": ("1",),
    "gJ": ("1",),
    "imaging_wavelength": ("nm",),
    "imaging_linewidth": ("MHz",),
    "D1_wavelength": ("nm",),
    "D1_linewidth": ("MHz",),
    "D2_wavelength": ("nm",),
    "D2_linewidth": ("MHz",),
    "polarizability_1064": ("au",),
}
STATE_NUMBERS: Mapping[str, tuple[str, ...]] = {
    "gF": ("1",),
    "magnetic_moment": ("muB",),
    "zeeman_slope": ("muB",),
    "scattering_length": ("a0",),
    "two_body": ("cm^3/s",),
    "three_body": ("cm^6/s",),
}


def read_species(path: Path) -> Species:
    """Read a preset file of the format that this module describes; `PresetError` says in one sentence what is wrong."""
    try:
        data = tomllib.loads(path.read_text(encoding="utf-8"))
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise PresetError(f"{path.name} is not a readable TOML file: {error}") from error
    reader = _Reader(path.name)
    states = reader.take(data, "", "state", list)
    try:
        isotope = reader.isotope(data)
        if isotope.key != path.stem:
            raise PresetError(f'{path.name}: key must be the name of the file, "{path.stem}", got "{isotope.key}"')
        return Species(isotope=isotope, states=tuple(reader.state(isotope, table) for table in states))
    except PresetError:
        raise
    except ValueError as error:
        raise PresetError(f"{path.name}: {error}") from error


_T = TypeVar("_T")


@dataclass(frozen=True)
class _Reader:
    """Reads the tables of one file; every complaint names the file and the key."""

    file: str

    def isotope(self, data: Mapping[str, Any]) -> Isotope:
        texts = ("key", "element", "ground_term", "imaging_transition")
        self.refuse_unknown(data, "", (*texts, "note", "mass_number", "statistics", "J", "state", *ISOTOPE_NUMBERS))
        words: dict[str, Any] = {name: self.take(data, "", name, str) for name in texts}
        try:
            statistics = Statistics(data.get("statistics"))
        except ValueError:
            allowed = " or ".join(f'"{choice.value}"' for choice in Statistics)
            raise PresetError(f"{self.file}: statistics must be {allowed}, got {data.get('statistics')!r}") from None
        numbers = self.numbers(data, "", ISOTOPE_NUMBERS)
        for name in ("mass", "nuclear_spin"):
            if name not in numbers:
                raise PresetError(f"{self.file}: {name} is missing")
        return Isotope(
            **words,
            **numbers,
            statistics=statistics,
            mass_number=self.take(data, "", "mass_number", int),
            J=float(self.take(data, "", "J", float)),
            note=str(data.get("note", "")),
        )

    def state(self, isotope: Isotope, table: Mapping[str, Any]) -> State:
        where = f'state "{table.get("name", "?")}": '
        optional: dict[str, type] = {
            "F": float, "mF": float, "mJ": float, "spin_components": int, "scattering_length_is_background": bool,
            "scattering_note": str, "loss_note": str, "note": str,
        }  # fmt: skip
        lists = ("also", "components")
        self.refuse_unknown(table, where, ("name", *optional, *lists, *STATE_NUMBERS))
        plain: dict[str, Any] = {
            name: self.take(table, where, name, kind) for name, kind in optional.items() if name in table
        }
        texts: dict[str, Any] = {name: tuple(self.take(table, where, name, list)) for name in lists if name in table}
        name = self.take(table, where, "name", str)
        try:
            return State(isotope=isotope, name=name, **plain, **texts, **self.numbers(table, where, STATE_NUMBERS))
        except PresetError:
            raise
        except ValueError as error:
            raise PresetError(f"{self.file}: {where}{error}") from error

    def numbers(self, table: Mapping[str, Any], where: str, units: Mapping[str, tuple[str, ...]]) -> dict[str, Any]:
        return {
            name: self.sourced(table[name], f"{where}{name}", allowed)
            for name, allowed in units.items()
            if name in table
        }

    def sourced(self, entry: object, where: str, units: tuple[str, ...]) -> Sourced:
        if not isinstance(entry, dict):
            raise PresetError(f"{self.file}: {where} must be a table with value, certainty and source, got {entry!r}")
        self.refuse_unknown(entry, f"{where}.", ("value", "certainty", "source", "note"))
        text = self.take(entry, f"{where}.", "value", str)
        try:
            certainty = Certainty(entry.get("certainty"))
        except ValueError:
            allowed = ", ".join(f'"{choice.value}"' for choice in Certainty)
            raise PresetError(
                f"{self.file}: {where}.certainty must be one of {allowed}, got {entry.get('certainty')!r}"
            ) from None
        value = self.value(text, f"{where}.value", units)
        source = self.take(entry, f"{where}.", "source", str)
        if not source.strip():
            raise PresetError(f"{self.file}: {where}.source must name a source, got an empty text")
        return Sourced(value=value, text=text, source=source, certainty=certainty, note=str(entry.get("note", "")))

    def value(self, text: str, where: str, units: tuple[str, ...]) -> float:
        number, _, unit = text.partition(" ")
        unit = unit or "1"
        try:
            value = float(number)
        except ValueError:
            value = math.nan
        if unit not in units or not math.isfinite(value):
            raise PresetError(f'{self.file}: {where} must be a number with unit {" or ".join(units)}, got "{text}"')
        return value * DATA_FACTORS[unit]

    def take(self, table: Mapping[str, Any], where: str, name: str, kind: type[_T]) -> _T:
        if name not in table:
            raise PresetError(f"{self.file}: {where}{name} is missing")
        entry = table[name]
        accepted = (float, int) if kind is float else (kind,)
        if not isinstance(entry, accepted) or (isinstance(entry, bool) and kind is not bool):
            raise PresetError(f"{self.file}: {where}{name} must be {_KIND_WORDS[kind]}, got {entry!r}")
        return entry  # type: ignore[return-value]

    def refuse_unknown(self, table: Mapping[str, Any], where: str, allowed: Iterable[str]) -> None:
        known = list(allowed)
        for name in table:
            if name not in known:
                nearest = nearest_first(name, known)[0]
                raise PresetError(f'{self.file}: {where}{name} is not a known key; the nearest is "{nearest}"')


_KIND_WORDS: Mapping[type, str] = {
    str: "a text",
    int: "a whole number",
    float: "a number",
    bool: "true or false",
    list: "a list",
}
