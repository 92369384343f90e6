"""Atoms and their trapped states: every number with its unit, its source and how sure it is.

The data are files, one an isotope, in ``presets/species/KEY.toml``; adding a species is adding a file. A file reads

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
(use it with the resonances of the state only), ``field_dependent`` and ``note``. A number that nobody knows is absent.
"""

from __future__ import annotations

import math
import re
import tomllib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any, TypeVar

from physics.constants import DATA_FACTORS
from physics.particles import Certainty, Statistics

PRESETS = Path(__file__).resolve().parent.parent / "presets" / "species"

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


class PresetError(ValueError):
    """A preset file says something that it must not; the text names file, key and what is allowed."""


@dataclass(frozen=True, kw_only=True)
class Sourced:
    """A number of the data files: `value` in SI, `text` as the file has it, where it is from and how sure it is."""

    value: float
    text: str
    source: str
    certainty: Certainty
    note: str = ""

    def __post_init__(self) -> None:
        if not math.isfinite(self.value):
            raise ValueError(f"value must be finite, got {self.value}")
        if not self.source.strip():
            raise ValueError(f"source must name where {self.text} is from, got nothing")


@dataclass(frozen=True, kw_only=True)
class Isotope:
    """What all states of an isotope share. Wavelengths in vacuum [m]; linewidths are Gamma/(2 pi) [Hz].

    `polarizability_1064` is the scalar polarizability of the ground level at 1064 nm [C^2 m^2/J].
    """

    key: str
    element: str
    mass_number: int
    statistics: Statistics
    ground_term: str
    J: float
    imaging_transition: str
    mass: Sourced
    nuclear_spin: Sourced
    gJ: Sourced | None = None
    imaging_wavelength: Sourced | None = None
    imaging_linewidth: Sourced | None = None
    D1_wavelength: Sourced | None = None
    D1_linewidth: Sourced | None = None
    D2_wavelength: Sourced | None = None
    D2_linewidth: Sourced | None = None
    polarizability_1064: Sourced | None = None
    note: str = ""

    def __post_init__(self) -> None:
        if self.mass.value <= 0.0:
            raise ValueError(f"mass must be positive, got {self.mass.text}")
        for name, number in (("nuclear_spin", self.nuclear_spin.value), ("J", self.J)):
            if number < 0.0 or not _is_half_integer(number):
                raise ValueError(f"{name} must be 0, 1/2, 1, ..., got {number:g}")


@dataclass(frozen=True, kw_only=True)
class State:
    """A trapped state of an isotope, or an equal mixture of `spin_components` of its states.

    Quantum numbers are None where they do not apply: a mixture has no mF, an atom without nuclear spin no F.
    `magnetic_moment` is a magnitude [J/T]; `zeeman_slope` is dE/dB at low field [J/T], positive for low-field seekers.
    `scattering_length` [m] is that of the state with itself, for a fermion mixture that between its components;
    where `scattering_length_is_background`, it means something only together with the resonances
    (`physics.scattering.length_at_field`). `two_body` [m^3/s] and `three_body` [m^6/s] are thermal rate constants
    in dn/dt = -K n^2 and -K n^3.
    """

    isotope: Isotope
    name: str
    also: tuple[str, ...] = ()
    F: float | None = None
    mF: float | None = None
    mJ: float | None = None
    spin_components: int = 1
    components: tuple[str, ...] = ()
    scattering_length_is_background: bool = False
    gF: Sourced | None = None
    magnetic_moment: Sourced | None = None
    zeeman_slope: Sourced | None = None
    scattering_length: Sourced | None = None
    two_body: Sourced | None = None
    three_body: Sourced | None = None
    scattering_note: str = ""
    loss_note: str = ""
    note: str = ""

    def __post_init__(self) -> None:
        if not self.name.strip():
            raise ValueError("name must not be empty")
        if self.spin_components < 1:
            raise ValueError(f"spin_components must be 1 or more, got {self.spin_components}")
        if self.components and len(self.components) != self.spin_components:
            raise ValueError(
                f"components must name {self.spin_components} states (spin_components), got {len(self.components)}"
            )
        for name, number in (("F", self.F), ("mF", self.mF), ("mJ", self.mJ)):
            if number is not None and not _is_half_integer(number):
                raise ValueError(f"{name} must be a whole or half number, got {number:g}")
        if self.mF is not None and (self.F is None or abs(self.mF) > self.F or (self.F - self.mF) % 1.0):
            raise ValueError(f"mF must be one of -F, -F+1, ... F, got mF = {self.mF:g} with F = {self.F}")
        if self.scattering_length_is_background and self.scattering_length is None:
            raise ValueError("scattering_length_is_background needs a scattering_length, got none")
        if self.polarised and self.scattering_length is not None:
            raise ValueError("scattering_length must be absent for fermions in one spin state, got one")

    @property
    def key(self) -> str:
        """Key of the isotope."""
        return self.isotope.key

    @property
    def statistics(self) -> Statistics:
        """Quantum statistics of the isotope."""
        return self.isotope.statistics

    @property
    def mass(self) -> float:
        """Mass of one atom [kg]."""
        return self.isotope.mass.value

    @property
    def polarised(self) -> bool:
        """True for fermions in one spin state, which have no s-wave collisions among themselves."""
        return self.statistics is Statistics.FERMI and self.spin_components == 1


@dataclass(frozen=True, kw_only=True)
class Species:
    """An isotope and the states that the data know, the usual one first."""

    isotope: Isotope
    states: tuple[State, ...]

    def __post_init__(self) -> None:
        if not self.states:
            raise ValueError("a species needs at least one state, got none")
        names = [state.name for state in self.states]
        twice = sorted({name for name in names if names.count(name) > 1})
        if twice:
            raise ValueError(f"state names must differ, got {twice[0]!r} twice")
        unknown = sorted({part for state in self.states for part in state.components} - set(names))
        if unknown:
            raise ValueError(f"components must be states of the same file, got {unknown[0]!r}")

    @property
    def key(self) -> str:
        """Key of the isotope, e.g. ``87Rb``."""
        return self.isotope.key

    def state(self, name: str | None = None) -> State:
        """The state of that name; None or an empty text gives the usual one.

        Case and blanks do not matter, and neither does the way of writing: ``F=1 mF=-1``, ``f=1,mf=-1``, ``1,-1`` and
        ``|1,-1>`` are one state. A mixture may name its components in either order, joined by "and" or "&".

        Raises
        ------
        ValueError
            No such state; the text names the allowed ones, the nearest first.
        """
        if name is None or not name.strip():
            return self.states[0]
        wanted = _spelling(name)
        for state in self.states:
            if wanted in _spellings(state):
                return state
        allowed = ", ".join(f'"{known}"' for known in _nearest_first(name, [state.name for state in self.states]))
        raise ValueError(f'{self.key} has no state "{name}"; its states are {allowed}')

    def components_of(self, state: State) -> tuple[State, ...]:
        """The single states that a mixture is made of, where the data name them; of a single state, itself."""
        if state.spin_components == 1:
            return (state,)
        return tuple(self.state(name) for name in state.components)


def species_keys() -> tuple[str, ...]:
    """Keys of all species in the data, by mass number, then by symbol. Reads no file."""
    return tuple(sorted((path.stem for path in PRESETS.glob("*.toml")), key=_mass_order))


def load_species(key: str) -> Species:
    """Read one species from its preset file.

    Case does not matter; ``Rb87``, ``87-Rb`` and, for metastable helium, ``4He*`` are understood.

    Raises
    ------
    ValueError
        Unknown key; the text names the nearest ones. A bad preset file raises its subclass `PresetError`.
    """
    known = {name.casefold(): name for name in species_keys()}
    found = known.get(_plain_key(key))
    if found is None:
        raise ValueError(f'no species "{key}" in the data; {_suggest(key, list(known.values()))}')
    return _load(found)


@cache
def _load(key: str) -> Species:
    return read_species(PRESETS / f"{key}.toml")


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
        words = {name: self.take(data, "", name, str) for name in texts}
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
        plain = {name: self.take(table, where, name, kind) for name, kind in optional.items() if name in table}
        texts = {name: tuple(self.take(table, where, name, list)) for name in lists if name in table}
        name = self.take(table, where, "name", str)
        try:
            return State(isotope=isotope, name=name, **plain, **texts, **self.numbers(table, where, STATE_NUMBERS))
        except PresetError:
            raise
        except ValueError as error:
            raise PresetError(f"{self.file}: {where}{error}") from error

    def numbers(self, table: Mapping[str, Any], where: str, units: Mapping[str, tuple[str, ...]]) -> dict[str, Sourced]:
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
                nearest = _nearest_first(name, known)[0]
                raise PresetError(f'{self.file}: {where}{name} is not a known key; the nearest is "{nearest}"')


_KIND_WORDS: Mapping[type, str] = {
    str: "a text",
    int: "a whole number",
    float: "a number",
    bool: "true or false",
    list: "a list",
}


def _is_half_integer(number: float) -> bool:
    return math.isfinite(number) and (2.0 * number).is_integer()


# Spelling of keys and of state names.

_NUMBER = r"([+-]?\d+(?:/2|\.\d+)?)"
_LEVEL = re.compile(rf"\|?(?:f=)?{_NUMBER}[,;]?(?:m_?f?=)?{_NUMBER}[>⟩]?")
_SUBLEVEL = re.compile(rf"\|?m_?(j|f)?={_NUMBER}[>⟩]?")


def _mass_order(key: str) -> tuple[int, str]:
    digits = re.match(r"\d+", key)
    return (int(digits[0]) if digits else 0, key)


def _plain_key(key: str) -> str:
    plain = re.sub(r"[\s-]", "", key).replace("*", "_metastable").casefold()
    reversed_order = re.fullmatch(r"([a-z]+)(\d+)(_metastable)?", plain)
    if reversed_order:
        plain = f"{reversed_order[2]}{reversed_order[1]}{reversed_order[3] or ''}"
    return plain


def _suggest(key: str, known: list[str]) -> str:
    symbol = re.sub(r"[^a-z]", "", key.casefold().replace("metastable", ""))
    same_element = [name for name in known if re.fullmatch(rf"\d+{symbol}(_metastable)?", name, re.IGNORECASE)]
    nearest = same_element or _nearest_first(_plain_key(key), known)[:3]
    return "the nearest are " + ", ".join(nearest) if len(nearest) > 1 else f"the nearest is {nearest[0]}"


def _nearest_first(text: str, known: Iterable[str]) -> list[str]:
    # difflib is needed only when something was misspelt.
    from difflib import SequenceMatcher

    plain = text.casefold()
    return sorted(known, key=lambda name: -SequenceMatcher(None, plain, name.casefold()).ratio())


def _spelling(name: str) -> object:
    """A form in which all ways of writing one state are equal: numbers where there are numbers, else bare text."""
    text = name.casefold().replace("\N{MINUS SIGN}", "-")
    text = re.sub(r"^\s*(an?\s+)?(equal\s+)?(mix(ture)?\s+of\s+)", "", text)
    parts = re.split(r"\s+and\s+|\s*&\s*", text)
    if len(parts) > 1:
        return frozenset(_spelling(part) for part in parts)
    # A blank may be all that stands between two numbers: "1 -1", "9/2 7/2".
    bare = re.sub(r"(?<=\d)\s+(?=[+-]?\d)", ",", text.strip())
    bare = re.sub(r"\s", "", bare)
    level = _LEVEL.fullmatch(bare)
    if level and (re.search(r"[,;=]|\d[+-]", bare)):
        return ("F", _half(level[1]), _half(level[2]))
    sublevel = _SUBLEVEL.fullmatch(bare)
    if sublevel:
        return (sublevel[1] or "m", _half(sublevel[2]))
    return bare.replace(",", "")


def _spellings(state: State) -> frozenset[object]:
    forms = {_spelling(name) for name in (state.name, *state.also)}
    if state.components:
        forms.add(frozenset(_spelling(part) for part in state.components))
    return frozenset(forms)


def _half(text: str) -> float:
    top, _, bottom = text.partition("/")
    return float(top) / float(bottom or 1)
