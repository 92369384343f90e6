"""The scattering length between two kinds of atoms: two species, or two states of one.

From the resonances between the two states where a field is given and a form covers it, else from the pairs in the data.
A pair holds for the states that it names; a length between other states of the same species is another number, and is
handed out as known of others only.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum

from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.particles import Certainty
from physics.scattering import WhyUnknown, length_at_field, scattering_length_at_field, tuning
from physics.species import State, load_species
from physics.species_tables import Pair, ResonanceForm, least_certain, load_forms, load_pairs

_ANY_STATE = ("any", "any mF", "ground", "lowest states")
"""Words of the data for whichever state: of closed shells, and of atoms whose spin hardly enters."""


class WhyNoLength(Enum):
    """Why there is no scattering length between two kinds of atoms."""

    NOT_IN_DATA = "the data have no scattering length between these two"
    OTHER_STATES = "the data have a scattering length between these two for other states only"
    NEEDS_FIELD = "the scattering length between these two depends on the magnetic field, and no field is given"
    OUTSIDE_RANGE = "the data do not describe the scattering length between these two at this field"
    AT_POLE = "the field is at the pole of a resonance, where the scattering length diverges"
    DIFFERENT_COMPONENTS = "the scattering length is not the same for all spin states of the mixture"
    SAME = "both are the same atoms in the same state"


@dataclass(frozen=True, kw_only=True)
class PairLength:
    """The scattering length between two kinds of atoms [m], or why there is none.

    `uncertainty` is as the data print it, in units of the Bohr radius; `sign_unknown` says that only the magnitude was
    measured. `ranges` are the fields [T] that resonances describe; `others` are known for other states of the two.
    """

    value: float | None
    certainty: Certainty | None = None
    source: str = ""
    note: str = ""
    uncertainty: str = ""
    sign_unknown: bool = False
    from_resonances: bool = False
    reason: WhyNoLength | None = None
    ranges: tuple[tuple[float, float], ...] = ()
    others: tuple[Pair, ...] = ()

    def __post_init__(self) -> None:
        if (self.value is None) == (self.reason is None):
            raise ValueError("a scattering length needs either a value or a reason, got both or neither")


def length_between(first: State, second: State, field: float | None = None) -> PairLength:
    """The scattering length between two states, or mixtures of states, in a magnetic field if one is given. [T]

    The order of the two does not matter. Of a mixture all components must have the same length with the other.
    """
    if field is not None and not math.isfinite(field):
        raise ValueError(f"field must be a finite number of tesla, got {field}")
    found = [_single(a, b, field) for a in _components(first) for b in _components(second)]
    known = {one.value for one in found}
    if len(known) == 1:
        return found[0]
    missing = next((one for one in found if one.value is None), None)
    return missing or PairLength(value=None, reason=WhyNoLength.DIFFERENT_COMPONENTS)


def lengths_in_fields(first: State, second: State, fields: ArrayLike) -> Floats:
    """The scattering length between two states by the resonances of the data, in many magnetic fields. [m]

    NaN outside of the ranges that they describe, see `length_between`.

    Parameters
    ----------
    fields : array_like. [T]
    """
    return scattering_length_at_field(_forms(_components(first)[0], _components(second)[0]), fields)


def _components(state: State) -> tuple[State, ...]:
    """Of a mixture; itself where it is none, or one of all its states, which the data do not name."""
    return load_species(state.key).components_of(state) or (state,)


def _single(first: State, second: State, field: float | None) -> PairLength:
    if first.key == second.key:
        return _within(first, second, field)
    named, forms = _names(first, second), _forms(first, second)
    ranges = tuple(sorted((form.low, form.high) for form in forms))
    if field is not None:
        value = float(scattering_length_at_field(forms, field))
        if math.isinf(value):
            return PairLength(value=None, reason=WhyNoLength.AT_POLE, ranges=ranges)
        if not math.isnan(value):
            return _of_form(value, forms, field, ranges)
    rows = [pair for pair in load_pairs() if sorted((pair.first[0], pair.second[0])) == [name for name, _ in named]]
    fitting = [pair for pair in rows if _fits(pair, first) and _fits(pair, second)]
    if fitting:
        number = fitting[0].scattering_length
        return PairLength(
            value=number.value,
            certainty=number.certainty,
            source=number.source,
            note=number.note,
            uncertainty=fitting[0].uncertainty,
            sign_unknown="magnitude only" in number.note,
            ranges=ranges,
        )
    if forms:
        reason = WhyNoLength.NEEDS_FIELD if field is None else WhyNoLength.OUTSIDE_RANGE
    else:
        reason = WhyNoLength.OTHER_STATES if rows else WhyNoLength.NOT_IN_DATA
    return PairLength(value=None, reason=reason, ranges=ranges, others=tuple(rows))


def _names(first: State, second: State) -> list[tuple[str, str]]:
    return sorted(((first.key, first.name), (second.key, second.name)))


def _forms(first: State, second: State) -> tuple[ResonanceForm, ...]:
    """The resonances between two states."""
    if first.key == second.key:
        mixture = _mixture(first, second)
        return () if mixture is None else tuning(mixture)
    named = _names(first, second)
    return tuple(
        form for form in load_forms() if sorted((form.resonances[0].first, form.resonances[0].second)) == named
    )


def _mixture(first: State, second: State) -> State | None:
    """Of two states of one isotope; None where the data have none."""
    names = {first.name, second.name}
    return next((state for state in load_species(first.key).states if set(state.components) == names), None)


def _of_form(
    value: float, forms: tuple[ResonanceForm, ...], field: float, ranges: tuple[tuple[float, float], ...]
) -> PairLength:
    form = min((f for f in forms if f.low <= field <= f.high), key=lambda f: f.high - f.low)
    return PairLength(
        value=value,
        certainty=least_certain(form.certainty),
        source="; ".join(dict.fromkeys(r.position.source for r in form.resonances)),
        note=form.note,
        from_resonances=True,
        ranges=ranges,
    )


def _within(first: State, second: State, field: float | None) -> PairLength:
    """Two states of one isotope: as the data have it of their mixture."""
    if first.name == second.name:
        return PairLength(value=None, reason=WhyNoLength.SAME)
    mixture = _mixture(first, second)
    if mixture is None:
        return PairLength(value=None, reason=WhyNoLength.NOT_IN_DATA)
    found = length_at_field(mixture, field)
    if found.value is None:
        reason = _REASONS.get(found.reason, WhyNoLength.NOT_IN_DATA) if found.reason else WhyNoLength.NOT_IN_DATA
        return PairLength(value=None, reason=reason, ranges=found.ranges)
    return PairLength(
        value=found.value,
        certainty=found.certainty,
        source=found.source,
        note=found.note,
        from_resonances=found.from_resonances,
        ranges=found.ranges,
    )


_REASONS = {
    WhyUnknown.NEEDS_FIELD: WhyNoLength.NEEDS_FIELD,
    WhyUnknown.OUTSIDE_RANGE: WhyNoLength.OUTSIDE_RANGE,
    WhyUnknown.AT_POLE: WhyNoLength.AT_POLE,
}


def _fits(pair: Pair, state: State) -> bool:
    for key, name in (pair.first, pair.second):
        if key == state.key:
            return name in _ANY_STATE or name in (state.name, *state.also)
    return False
