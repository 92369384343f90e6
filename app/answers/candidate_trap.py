"""What the plan's trap is to the atoms of one candidate: the few numbers of its survey that a comparison needs."""

from __future__ import annotations

import math
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.answers.part import part
from app.answers.trap import TrapAnswer, trap_answer
from app.language import translate as _
from app.sureness import Sureness, least_sure, sureness_of
from app.trap_words import reason_no_frequencies, reason_not_trapped, reasons_missing
from app.words import percent
from physics.species import State
from physics.species_tables import load_lines
from physics.traps.notes import NoteKind
from physics.traps.potential import NotTrapped

if TYPE_CHECKING:
    from app.plan import Plan, TrapChoice

_NAMES = MappingProxyType(
    {
        "trap_depth": "depth",
        "sag": "sag",
        "light_scattering_rate": "scattering_rate",
        "recoil_heating_rate": "heating_rate",
    }
)
"""NAME of a column -> what the words about traps call it."""

_SAME_WAVELENGTH = 1e-3
"""Relative distance of two wavelengths below which they are one."""

_UNTOLD = (NotTrapped.NO_POLARIZABILITY, NotTrapped.NO_MOMENT)

KEPT = 160


@dataclass(frozen=True, kw_only=True)
class TrapFacts:
    """The trap as one state sees it.

    not_held : why nothing is held, as a clause; empty where atoms are
    no_frequencies : why a trap that holds them has no frequencies; empty where it has
    mean_frequency : [Hz] NaN without
    values : NAME of a column -> its number in SI, NaN where there is none
    reasons : NAME -> why there is none
    sureness : of what light and field do to the atoms
    untold : whether the data leave open what light or field do, so that nobody knows if atoms are held
    assumed : what stands for a number that the data do not have, as a clause; empty where nothing does
    light_assumed : the same of photons that the atoms scatter
    """

    not_held: str
    no_frequencies: str
    mean_frequency: float
    values: MappingProxyType[str, float]
    reasons: MappingProxyType[str, str]
    sureness: Sureness
    untold: bool = False
    assumed: str = ""
    light_assumed: str = ""

    @property
    def held(self) -> bool:
        return not self.not_held


@part("species.key", "species.state", "trap", keep=KEPT)
def trap_facts(plan: Plan) -> TrapFacts:
    """The trap of the plan for its species and state."""
    answer = trap_answer(plan)
    found, missing = answer.survey, reasons_missing(answer)
    values, reasons = {}, {}
    for name, word in _NAMES.items():
        number = None
        if word not in missing:
            number = getattr(found.heating if word.endswith("_rate") else found, word)
        values[name] = math.nan if number is None else float(number)
        reasons[name] = missing.get(word, "")
    distance = _distance_of_published(answer)
    return TrapFacts(
        not_held=reason_not_trapped(answer),
        no_frequencies="" if not answer.trapped else reason_no_frequencies(answer),
        mean_frequency=math.nan if found.mean_frequency is None else found.mean_frequency,
        values=MappingProxyType(values),
        reasons=MappingProxyType(reasons),
        sureness=trap_sureness(answer.state, plan.trap),
        untold=found.reason in _UNTOLD,
        assumed=""
        if distance is None or distance < _SAME_WAVELENGTH
        else _("the polarizability is one published for a wavelength {share} away").format(share=percent(distance)),
        light_assumed=""
        if distance is None
        else _("from one published polarizability, without the lines of the species: a lower bound"),
    )


def _distance_of_published(answer: TrapAnswer) -> float | None:
    """The largest relative distance of a beam from the wavelength of a published polarizability that stands for the
    lines of the species; None where none does."""
    notes = (note for note in answer.survey.notes if note.kind is NoteKind.PUBLISHED_POLARIZABILITY)
    return max((abs(note.value) for note in notes), default=None)


def trap_sureness(state: State, trap: TrapChoice) -> Sureness:
    """How sure it is what the trap does to atoms of a state; of given frequencies, entirely."""
    if trap.harmonic:
        return Sureness.SEEN
    numbers = []
    if any(beam.on for beam in trap.beams):
        lines = load_lines(state.isotope.element)
        numbers += [sourced for line in lines for sourced in (line.wavelength, line.oscillator_strength, line.constant)]
        if not any(line.wavelength is not None for line in lines):
            numbers = [state.isotope.polarizability_1064]
    if trap.coils is not None:
        numbers += [state.zeeman_slope or state.magnetic_moment]
    return least_sure(*(sureness_of(sourced.certainty) for sourced in numbers if sourced is not None))
