"""The tables beside the species files: resonances, pairs of species, and lines for the polarizability.

``presets/species/resonances.csv``: magnetic Feshbach resonances as published, a(B) = abg (1 - Delta/(B - B0)).
``presets/species/resonance_forms.csv``: which of them belong together, how they combine, over which field the form
may be used. A resonance whose ``form`` is empty is not used (a second parametrisation of one that is).
``presets/species/pairs.csv``: scattering lengths between species at low field.
``presets/species/lines.csv``: transitions and constants whose sum is the scalar polarizability of the ground level.

States are named as in the species files; ``any`` means whichever. Columns ending in ``_certainty`` say how sure the
number to their left is; the column's ending gives its unit. Everything handed out is in SI.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from enum import Enum
from functools import lru_cache
from typing import TypeVar

from physics.constants import DATA_FACTORS, bohr_radius, elementary_charge
from physics.particles import Certainty
from physics.species import PRESETS, PresetError, Sourced

ANY = "any"


class Combination(Enum):
    """How several resonances of one form act together on its background."""

    PRODUCT = "product"
    SUM = "sum"


@dataclass(frozen=True, kw_only=True)
class Resonance:
    """One resonance between two states, each given as (species key, state name). Fields in [T], background in [m].

    `form` is the label of the `ResonanceForm` that uses it, None where none does.
    """

    first: tuple[str, str]
    second: tuple[str, str]
    position: Sourced
    width: Sourced
    background: Sourced
    form: str | None
    note: str


@dataclass(frozen=True, kw_only=True)
class ResonanceForm:
    """Resonances that describe one channel together between the fields `low` and `high` [T]."""

    label: str
    combination: Combination
    background: float
    resonances: tuple[Resonance, ...]
    low: float
    high: float
    certainty: Certainty
    note: str

    def __post_init__(self) -> None:
        if not self.low < self.high:
            raise ValueError(f"form {self.label!r} must have low < high, got {self.low} T and {self.high} T")
        if not self.resonances:
            raise ValueError(f"form {self.label!r} is used by no resonance")


@dataclass(frozen=True, kw_only=True)
class Pair:
    """Scattering length between two species [m], each given as (species key, state name or "any")."""

    first: tuple[str, str]
    second: tuple[str, str]
    scattering_length: Sourced
    uncertainty: str


@dataclass(frozen=True, kw_only=True)
class Line:
    """One term of the polarizability of an element: a transition, or a constant for all that is not listed.

    wavelength [m] in vacuum; einstein_A [1/s] is the partial rate to the ground level; reduced_dipole [C m];
    oscillator_strength dimensionless, of absorption; constant [C^2 m^2/J].
    """

    element: str
    transition: str
    J_lower: float
    J_upper: float | None
    wavelength: Sourced | None
    einstein_A: float | None
    reduced_dipole: float | None
    oscillator_strength: Sourced | None
    constant: Sourced | None
    note: str


def least_certain(*certainties: Certainty) -> Certainty:
    """The weakest of several: what is recalled outweighs what was worked out, and that what was read."""
    order = (Certainty.MEMORY, Certainty.COMPUTED, Certainty.SEEN)
    return min(certainties, key=order.index)


@lru_cache(maxsize=1)
def load_resonances() -> tuple[Resonance, ...]:
    """All resonances of the data, used or not."""
    return _read("resonances.csv", _resonance)


@lru_cache(maxsize=1)
def load_forms() -> tuple[ResonanceForm, ...]:
    """All resonance forms, each with its resonances by rising position."""
    return _read("resonance_forms.csv", _form)


@lru_cache(maxsize=1)
def load_pairs() -> tuple[Pair, ...]:
    """Scattering lengths between species."""
    return _read("pairs.csv", _pair)


def load_lines(element: str) -> tuple[Line, ...]:
    """Polarizability terms of an element (helium: of the metastable level); empty where the data have none."""
    return tuple(line for line in _all_lines() if line.element == element)


@lru_cache(maxsize=1)
def _all_lines() -> tuple[Line, ...]:
    return _read("lines.csv", _line)


_T = TypeVar("_T")


def _read(name: str, build: Callable[[_Row], _T]) -> tuple[_T, ...]:
    built = []
    with (PRESETS / name).open(encoding="utf-8", newline="") as file:
        reader = csv.DictReader(file)
        for cells in reader:
            row = _Row(where=f"{name}, line {reader.line_num}", cells=cells)
            try:
                built.append(build(row))
            except PresetError:
                raise
            except ValueError as error:
                raise PresetError(f"{row.where}: {error}") from error
    return tuple(built)


@dataclass(frozen=True)
class _Row:
    """One line of a table; every complaint names file, line and column."""

    where: str
    cells: Mapping[str, str | None]

    def text(self, column: str) -> str:
        cell = self.cells.get(column)
        if cell is None:
            raise PresetError(f"{self.where}: {column} is missing")
        return cell.strip()

    def number(self, column: str) -> float | None:
        text = self.text(column)
        if not text:
            return None
        try:
            value = float(text)
        except ValueError:
            value = math.nan
        if not math.isfinite(value):
            raise PresetError(f'{self.where}: {column} must be a number or empty, got "{text}"')
        return value

    def needed(self, column: str) -> float:
        value = self.number(column)
        if value is None:
            raise PresetError(f"{self.where}: {column} must be a number, got nothing")
        return value

    def sourced(self, column: str, unit: str, certainty: str, source: str, note: str = "") -> Sourced:
        value = self.needed(column)
        try:
            sure = Certainty(self.text(certainty))
        except ValueError:
            allowed = ", ".join(f'"{choice.value}"' for choice in Certainty)
            raise PresetError(
                f'{self.where}: {certainty} must be one of {allowed}, got "{self.text(certainty)}"'
            ) from None
        text = self.text(column) if unit == "1" else f"{self.text(column)} {unit}"
        return Sourced(value=value * DATA_FACTORS[unit], text=text, source=self.text(source), certainty=sure, note=note)

    def sourced_or_none(self, column: str, unit: str, certainty: str, source: str) -> Sourced | None:
        return self.sourced(column, unit, certainty, source) if self.text(column) else None

    def partner(self, which: str) -> tuple[str, str]:
        return self.text(f"species_{which}"), self.text(f"state_{which}")


def _resonance(row: _Row) -> Resonance:
    return Resonance(
        first=row.partner("a"),
        second=row.partner("b"),
        position=row.sourced("B0_G", "G", "B0_certainty", "source"),
        width=row.sourced("Delta_G", "G", "Delta_certainty", "source"),
        background=row.sourced("abg_a0", "a0", "abg_certainty", "source"),
        form=row.text("form") or None,
        note=row.text("note"),
    )


def _form(row: _Row) -> ResonanceForm:
    label = row.text("form")
    members = tuple(sorted((r for r in load_resonances() if r.form == label), key=lambda r: r.position.value))
    own = row.number("background_a0")
    backgrounds = {r.background.value for r in members}
    if own is None and len(backgrounds) > 1:
        raise PresetError(f"{row.where}: background_a0 must be given where the resonances of a form differ in theirs")
    try:
        combination = Combination(row.text("combination"))
    except ValueError:
        allowed = " or ".join(f'"{choice.value}"' for choice in Combination)
        raise PresetError(f'{row.where}: combination must be {allowed}, got "{row.text("combination")}"') from None
    sure = [number.certainty for r in members for number in (r.position, r.width, r.background)]
    return ResonanceForm(
        label=label,
        combination=combination,
        background=own * bohr_radius if own is not None else next(iter(backgrounds), math.nan),
        resonances=members,
        low=row.needed("low_G") * DATA_FACTORS["G"],
        high=row.needed("high_G") * DATA_FACTORS["G"],
        certainty=least_certain(*sure) if sure else Certainty.MEMORY,
        note=row.text("note"),
    )


def _pair(row: _Row) -> Pair:
    return Pair(
        first=row.partner("a"),
        second=row.partner("b"),
        scattering_length=row.sourced("a_a0", "a0", "certainty", "source", row.text("note")),
        uncertainty=row.text("uncertainty_a0"),
    )


def _line(row: _Row) -> Line:
    dipole = row.number("reduced_dipole_au")
    return Line(
        element=row.text("element"),
        transition=row.text("transition"),
        J_lower=row.needed("J_lower"),
        J_upper=row.number("J_upper"),
        wavelength=row.sourced_or_none("wavelength_nm", "nm", "wavelength_certainty", "wavelength_source"),
        einstein_A=row.number("einstein_A_per_s"),
        reduced_dipole=None if dipole is None else dipole * elementary_charge * bohr_radius,
        oscillator_strength=row.sourced_or_none("oscillator_strength", "1", "strength_certainty", "strength_source"),
        constant=row.sourced_or_none("constant_au", "au", "constant_certainty", "constant_source"),
        note=row.text("note"),
    )
