"""What a surveyed trap does to an answer that the answer does not show: its light, its field, its way out.

Ids, severities and SI numbers, as in `physics.caveats`, whose table has what each value means.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from types import MappingProxyType

from physics.caveats import NARROW, Caveat, Severity
from physics.rates import Rates
from physics.traps.notes import NoteKind
from physics.traps.survey import Survey

_NOTES = MappingProxyType(
    {
        NoteKind.BLUE_LIGHT: Severity.NOTE,
        NoteKind.NEAR_RESONANCE: Severity.WARNING,
        NoteKind.PUBLISHED_POLARIZABILITY: Severity.NOTE,
        NoteKind.TIGHT_FOCUS: Severity.WARNING,
        NoteKind.WALL: Severity.WARNING,
        NoteKind.ARM_END: Severity.NOTE,
        NoteKind.LINEAR_ZEEMAN: Severity.NOTE,
        NoteKind.KNIFE_IDLE: Severity.WARNING,
    }
)
"""Notes that are caveats as they are; the others have one of their own, with more to say."""

_ALIKE = 1e-3
"""Relative distance of two wavelengths at which far-off light does the same."""

_HEATED, _TOO_WARM = 0.25, 1.0
"""Share of T by which light warms a cloud while it lasts: worth knowing, and too much."""

_LASTS = 10.0
"""[s] How long a cloud lasts where nothing is known to take it away."""


def survey_caveats(found: Survey, rates: Rates) -> tuple[Caveat, ...]:
    """The caveats of a single cloud in a surveyed trap that holds atoms."""
    return tuple(_caveats(found, rates))


def _caveats(found: Survey, rates: Rates) -> Iterator[Caveat]:
    for note in found.notes:
        severity = _NOTES.get(note.kind)
        # A value published for the very wavelength is as good as lines are.
        if severity is not None and not (note.kind is NoteKind.PUBLISHED_POLARIZABILITY and note.value < _ALIKE):
            yield Caveat(id=note.kind.name.lower(), severity=severity, value=note.value, subject=note.beam)
    temperature = float(rates.equilibrium.cloud.temperature)
    share = found.open_share(temperature)
    if share is not None and share < NARROW:
        yield Caveat(id="one_way_out", severity=Severity.NOTE, value=share)
    if found.spin_flips is not None:
        least, largest = (float(rate) for rate in found.spin_flips.rates(temperature))
        other = 1.0 / _LASTS if rates.losses.background_lifetime is None else float(rates.background_loss_rate)
        yield Caveat(
            id="spin_flips",
            severity=Severity.WARNING if largest > other else Severity.NOTE,
            value=math.sqrt(least * largest),
            numbers=MappingProxyType({"least": least, "largest": largest}),
        )
    heating, lost = float(rates.light_heating_rate), float(rates.total_loss_rate)
    lasts = 1.0 / lost if lost > 0.0 else _LASTS
    warmed = heating * lasts / temperature
    if warmed > _HEATED:
        yield Caveat(
            id="light_heating",
            severity=Severity.WARNING if warmed > _TOO_WARM else Severity.NOTE,
            value=heating,
            numbers=MappingProxyType({"share": warmed, "time": lasts}),
        )
