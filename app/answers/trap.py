"""The trap of a plan: what it is made of, what that is to its atoms, and the harmonic trap that a cloud is put in."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.answers.part import part
from physics.species import State, load_species
from physics.traps import Coils, GaussianBeam, Gravity, HarmonicTrap, Trap

if TYPE_CHECKING:
    from app.plan import BeamChoice, CoilsChoice, Plan, TrapChoice
    from app.units import Quantity
    from physics.traps.survey import Survey


@dataclass(frozen=True, kw_only=True, eq=False)
class TrapAnswer:
    """A trap as the atoms of one state see it.

    trap : what the user said of it
    survey : what follows; where the atoms are not held, why
    """

    state: State
    trap: TrapChoice
    survey: Survey

    @property
    def trapped(self) -> bool:
        return self.survey.trapped


KEPT = 192
"""Surveys that are kept, some 50 kB each once they forgot how they were found: going back to an earlier value of a
control costs none, nor does another cloud for all candidates."""


@part("species.key", "species.state", "trap", keep=KEPT)
def trap_answer(plan: Plan) -> TrapAnswer:
    """The trap of the plan; nothing in it depends on the cloud."""
    from physics.traps.survey import survey, survey_of_harmonic  # loads in 100 ms, which a start need not wait for

    state = load_species(plan.species.key).state(plan.species.state)
    made = trap_of(plan)
    if isinstance(made, HarmonicTrap):
        found = survey_of_harmonic(made, state.mass)
    else:
        found = _survey_in_light(plan) if made.coils is None else survey(made, state)
    return TrapAnswer(state=state, trap=plan.trap, survey=found)


@part("species.key", "trap", keep=KEPT)
def _survey_in_light(plan: Plan) -> Survey:
    """The trap of beams only, which holds all states of an isotope alike."""
    from physics.traps.survey import survey

    made = trap_of(plan)
    assert isinstance(made, Trap)
    return survey(made, load_species(plan.species.key).states[0])


def trap_of(plan: Plan) -> Trap | HarmonicTrap:
    """What physics makes of the plan's trap: its frequencies where they are given, else beams, coils and gravity."""
    choice = plan.trap
    if choice.frequencies is not None:
        frequencies = [quantity.value for quantity in choice.frequencies]
        return HarmonicTrap(frequencies=frequencies, depth=_value(choice.depth))
    down = choice.gravity_direction
    return Trap(
        beams=tuple(_beam(beam) for beam in choice.beams),
        coils=None if choice.coils is None else _coils(choice.coils),
        gravity=None if down is None else Gravity(direction=down),
    )


def _beam(choice: BeamChoice) -> GaussianBeam:
    return GaussianBeam(
        name=choice.name,
        on=choice.on,
        wavelength=choice.wavelength.value,
        power=choice.power.value,
        waists=[choice.waists[0].value, choice.waists[-1].value],
        direction=choice.direction,
        focus=[place.value for place in choice.focus],
        m2=1.0 if choice.m2 is None else choice.m2.value,
    )


def _coils(choice: CoilsChoice) -> Coils:
    return Coils(
        axis=choice.axis,
        centre=[place.value for place in choice.centre],
        bias=_value(choice.bias),
        gradient=_value(choice.gradient),
        curvature=_value(choice.curvature),
        levitation=_value(choice.levitation),
        knife=_value(choice.knife),
    )


def _value(quantity: Quantity | None) -> float | None:
    return None if quantity is None else quantity.value
