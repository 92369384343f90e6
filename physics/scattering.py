"""Scattering lengths: tuned by a magnetic field, the one to use for a state, and the dipolar length.

A resonance form is one published description of a channel: a background `abg` and one or more poles,

    product:  a(B) = abg * prod_i (1 - Delta_i / (B - B0_i))        [1] eq. (1); several poles multiply
    sum:      a(B) = abg * (1 - sum_i Delta_i / (B - B0_i))         where the published widths are meant so

Each form holds over a stated range of field only. A channel with several resonances far apart has a form for each,
with its own local background; between the ranges nothing is known and the answer is NaN, not an extrapolation.

Reference
---------
[1] C. Chin, R. Grimm, P. Julienne, E. Tiesinga, Feshbach resonances in ultracold gases,
    Rev. Mod. Phys. 82, 1225 (2010).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from physics.constants import reduced_planck, vacuum_permeability
from physics.particles import Certainty
from physics.species_tables import Combination, Pair, Resonance, ResonanceForm, load_forms, load_pairs, load_resonances

if TYPE_CHECKING:
    from physics.species import State


def scattering_length_at_field(forms: Sequence[ResonanceForm], field: ArrayLike) -> NDArray[np.float64]:
    """Scattering length in a magnetic field.

    Parameters
    ----------
    forms : sequence of ResonanceForm
        Those of one channel, see `tuning`.
    field : array_like
        Magnetic field, any shape. [T]

    Returns
    -------
    array of the shape of `field`. [m]
        NaN outside the ranges of all forms. At a pole, where the sign depends on the side, +inf. Where two ranges
        overlap, the narrower one decides.
    """
    B = np.asarray(field, dtype=np.float64)
    a = np.full(B.shape, np.nan)
    for form in sorted(forms, key=lambda form: form.low - form.high):
        inside = (form.low <= B) & (form.high >= B)
        a = np.where(inside, _one_form(form, B), a)
    return a


def _one_form(form: ResonanceForm, B: NDArray[np.float64]) -> NDArray[np.float64]:
    product = form.combination is Combination.PRODUCT
    factor = np.ones_like(B)
    pole = np.zeros(B.shape, dtype=bool)
    for resonance in form.resonances:
        detuning = B - resonance.position.value
        pole |= detuning == 0.0
        share = resonance.width.value / np.where(detuning == 0.0, np.nan, detuning)
        factor = factor * (1.0 - share) if product else factor - share
    return np.where(pole, np.inf, form.background * factor)


def resonances_of(state: State) -> tuple[Resonance, ...]:
    """All resonances of a state with itself, or between the two components of a mixture; also the unused ones."""
    channel = _channel(state)
    return tuple(r for r in load_resonances() if channel is not None and _same_channel(r, channel))


def tuning(state: State) -> tuple[ResonanceForm, ...]:
    """The resonance forms of a state with itself, or of the two components of a mixture, by rising field."""
    channel = _channel(state)
    if channel is None:
        return ()
    forms = (form for form in load_forms() if _same_channel(form.resonances[0], channel))
    return tuple(sorted(forms, key=lambda form: form.low))


def resonances_with_others(key: str) -> tuple[Resonance, ...]:
    """Resonances of any state of a species with another species."""
    return tuple(r for r in load_resonances() if key in (r.first[0], r.second[0]) and r.first[0] != r.second[0])


def pairs_of(key: str) -> tuple[Pair, ...]:
    """Scattering lengths of a species with others."""
    return tuple(pair for pair in load_pairs() if key in (pair.first[0], pair.second[0]))


_Channel = tuple[tuple[str, str], tuple[str, str]]


def _channel(state: State) -> _Channel | None:
    if state.polarised or state.spin_components > 2:
        return None
    names = state.components or (state.name, state.name)
    return ((state.key, names[0]), (state.key, names[1]))


def _same_channel(resonance: Resonance, channel: _Channel) -> bool:
    return sorted((resonance.first, resonance.second)) == sorted(channel)


class WhyUnknown(Enum):
    """Why there is no scattering length to use."""

    POLARISED = "fermions in one spin state have no s-wave scattering"
    NOT_IN_DATA = "the data have no scattering length for this state"
    NEEDS_FIELD = "the scattering length of this state depends on the magnetic field, and no field is given"
    OUTSIDE_RANGE = "the data do not describe the scattering length of this state at this field"
    AT_POLE = "the field is at the pole of a resonance, where the scattering length diverges"


@dataclass(frozen=True, kw_only=True)
class LengthInUse:
    """The scattering length to use for a state [m], or why there is none.

    `from_resonances` says whether the field entered. `ranges` are the fields [T] that the data
    describe, lowest first; empty where the field plays no part.
    """

    value: float | None
    certainty: Certainty | None = None
    source: str = ""
    note: str = ""
    reason: WhyUnknown | None = None
    from_resonances: bool = False
    ranges: tuple[tuple[float, float], ...] = ()

    def __post_init__(self) -> None:
        if (self.value is None) == (self.reason is None):
            raise ValueError("a scattering length needs either a value or a reason, got both or neither")


def length_at_field(state: State, field: float | None = None) -> LengthInUse:
    """The scattering length to use for a state, in a magnetic field if one is given.

    Parameters
    ----------
    state : State
        One state, or a mixture, for which it is the length between two of its components.
    field : float, optional
        Magnetic field. [T]

    Returns
    -------
    LengthInUse
        Without a field: the stated length, unless it is a background only. With a field: from the resonances where a
        form covers it; elsewhere the stated length, unless it is a background only.
    """
    if state.polarised:
        return LengthInUse(value=None, reason=WhyUnknown.POLARISED)
    # Reading the tables costs more than the rest of a small answer; a fixed length without a field needs none.
    forms = tuning(state) if field is not None or state.scattering_length_is_background else ()
    ranges = tuple((form.low, form.high) for form in forms)
    if field is not None:
        if not math.isfinite(field):
            raise ValueError(f"field must be a finite number of tesla, got {field}")
        value = float(scattering_length_at_field(forms, field))
        if math.isinf(value):
            return LengthInUse(value=None, reason=WhyUnknown.AT_POLE, ranges=ranges)
        if not math.isnan(value):
            form = min((f for f in forms if f.low <= field <= f.high), key=lambda f: f.high - f.low)
            sources = tuple(dict.fromkeys(r.position.source for r in form.resonances))
            return LengthInUse(
                value=value, certainty=form.certainty, source="; ".join(sources), note=form.note,
                from_resonances=True, ranges=ranges,
            )  # fmt: skip
    stated = state.scattering_length
    if stated is None:
        return LengthInUse(value=None, reason=WhyUnknown.NOT_IN_DATA, ranges=ranges)
    if state.scattering_length_is_background:
        reason = WhyUnknown.NEEDS_FIELD if field is None else WhyUnknown.OUTSIDE_RANGE
        return LengthInUse(value=None, reason=reason, ranges=ranges)
    return LengthInUse(
        value=stated.value, certainty=stated.certainty, source=stated.source, note=state.scattering_note, ranges=ranges
    )


def dipolar_length(mass: ArrayLike, magnetic_moment: ArrayLike) -> NDArray[np.float64]:
    """Dipolar length a_dd = mu0 mu^2 m / (12 pi hbar^2) [m], for masses [kg] and moments [J/T] that broadcast.

    With this definition a condensate whose scattering length is below a_dd is unstable to dipolar attraction [1].

    Reference
    ---------
    [1] T. Lahaye et al., The physics of dipolar bosonic quantum gases, Rep. Prog. Phys. 72, 126401 (2009), eq. (2.4).
    """
    m, mu = np.asarray(mass, dtype=np.float64), np.asarray(magnetic_moment, dtype=np.float64)
    length: NDArray[np.float64] = vacuum_permeability * mu**2 * m / (12.0 * np.pi * reduced_planck**2)
    return length
