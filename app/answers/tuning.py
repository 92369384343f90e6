"""The scattering length of the plan's state against magnetic field."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.answers.part import part
from physics.particles import Certainty
from physics.scattering import LengthInUse, length_at_field, tuning
from physics.species import State, load_species
from physics.species_tables import Resonance, ResonanceForm, least_certain
from physics.tuning_curve import TuningCurve, tuning_curve

if TYPE_CHECKING:
    from app.plan import Plan


@dataclass(frozen=True, kw_only=True, eq=False)
class TuningAnswer:
    """How a field tunes the state of a plan, over a range of fields [T]; the plan's own field does not enter.

    curve : None where the data have no resonance that may be used
    resonances : those that the curve is made of, by rising position
    certainty : of the least certain number among them
    notes : what the data say of themselves
    without_field : the scattering length that holds where no field is given
    tunable : other states of the species that have resonances
    """

    state: State
    curve: TuningCurve | None
    resonances: tuple[Resonance, ...]
    certainty: Certainty | None
    notes: tuple[str, ...]
    without_field: LengthInUse
    tunable: tuple[State, ...]


@part("species.key", "species.state")
def tuning_answer(plan: Plan, fields: tuple[float, float] | None = None) -> TuningAnswer:
    """The curve between two fields [T]; by default over all that the data describe."""
    species = load_species(plan.species.key)
    state = species.state(plan.species.state)
    forms = tuning(state)
    described = _described(forms)
    curve = None if described is None else tuning_curve(forms, *(fields or described))
    resonances = {resonance.position.value: resonance for form in forms for resonance in form.resonances}
    return TuningAnswer(
        state=state,
        curve=curve,
        resonances=tuple(resonances[position] for position in sorted(resonances)),
        certainty=least_certain(*(form.certainty for form in forms)) if forms else None,
        notes=tuple(form.note for form in forms if form.note),
        without_field=length_at_field(state),
        tunable=tuple(other for other in species.states if other is not state and tuning(other)),
    )


def usual_fields(plan: Plan) -> tuple[float, float] | None:
    """The fields that a plot shows when nothing else is asked [T]: all that the data describe, and the plan's own
    field; None for a state that no field tunes."""
    described = _described(tuning(load_species(plan.species.key).state(plan.species.state)))
    field = plan.species.field
    if described is None or field is None or described[0] <= field.value <= described[1]:
        return described
    low, high = described
    # Coarse steps, so that a field that moves on seldom moves the axis.
    step = 0.25 * (high - low)
    below = step * math.ceil(max(low - field.value, 0.0) / step)
    above = step * math.ceil(max(field.value - high, 0.0) / step)
    return max(0.0, low - below), high + above


def _described(forms: Sequence[ResonanceForm]) -> tuple[float, float] | None:
    if not forms:
        return None
    return min(form.low for form in forms), max(form.high for form in forms)
