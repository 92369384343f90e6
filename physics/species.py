"""Atoms and their trapped states: every number with its unit, its source and how sure it is.

The data are files, one an isotope, in ``presets/species``; `physics.species_file` describes and reads them.
"""

from __future__ import annotations

import math
from collections.abc import Hashable
from dataclasses import dataclass
from functools import cache
from pathlib import Path

from physics.particles import Certainty, Statistics
from physics.species_names import mass_order, nearest_first, plain_key, spelling, suggest

PRESETS = Path(__file__).resolve().parent.parent / "presets" / "species"


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
        wanted = spelling(name)
        for state in self.states:
            if wanted in _spellings(state):
                return state
        allowed = ", ".join(f'"{known}"' for known in nearest_first(name, [state.name for state in self.states]))
        raise ValueError(f'{self.key} has no state "{name}"; its states are {allowed}')

    def components_of(self, state: State) -> tuple[State, ...]:
        """The single states that a mixture is made of, where the data name them; of a single state, itself."""
        if state.spin_components == 1:
            return (state,)
        return tuple(self.state(name) for name in state.components)


@cache
def species_keys() -> tuple[str, ...]:
    """Keys of all species in the data, by mass number, then by symbol. Reads no file, and the folder once."""
    return tuple(sorted((path.stem for path in PRESETS.glob("*.toml")), key=mass_order))


def load_species(key: str) -> Species:
    """Read one species from its preset file.

    Case does not matter; ``Rb87``, ``87-Rb`` and, for metastable helium, ``4He*`` are understood.

    Raises
    ------
    ValueError
        Unknown key; the text names the nearest ones. A bad preset file raises its subclass `PresetError`.
    """
    known = {name.casefold(): name for name in species_keys()}
    found = known.get(plain_key(key))
    if found is None:
        raise ValueError(f'no species "{key}" in the data; {suggest(key, list(known.values()))}')
    return _load(found)


@cache
def _load(key: str) -> Species:
    # The file format builds what this module defines, so it can be loaded only after it.
    from physics.species_file import read_species

    return read_species(PRESETS / f"{key}.toml")


def _is_half_integer(number: float) -> bool:
    return math.isfinite(number) and (2.0 * number).is_integer()


def _spellings(state: State) -> frozenset[Hashable]:
    forms = {spelling(name) for name in (state.name, *state.also)}
    if state.components:
        forms.add(frozenset(spelling(part) for part in state.components))
    return frozenset(forms)
