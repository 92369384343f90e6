"""From the plan to the numbers that physics takes: one value each, or many draws of the uncertain ones."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.losses import typed_losses
from app.answers.trap_inputs import trap_in_use, trap_inputs
from physics.cloud import Cloud
from physics.constants import bohr_radius
from physics.scattering import LengthInUse, dipolar_length, length_at_field, scattering_length_at_field, tuning

if TYPE_CHECKING:
    from app.plan import Plan
    from app.units import Quantity
    from physics.species import State

Array = NDArray[np.float64]
Numbers = Mapping[str, float | Array]
"""Inputs by the name of what they are, in SI: a value, or an array of draws."""

STRONG_DIPOLES = 10.0 * bohr_radius
"""Dipolar lengths below are left out: alkali atoms have less than one Bohr radius, chromium 15, dysprosium 130."""


def inputs_of(plan: Plan) -> dict[str, Quantity]:
    """The plan's quantities that enter an answer, by the name of what they are."""
    optional = {
        "scattering_length": plan.species.scattering_length,
        "field": plan.species.field,
    }
    return {
        "atoms": plan.cloud.atoms,
        "temperature": plan.cloud.temperature,
        **trap_inputs(plan),
        **{name: quantity for name, quantity in optional.items() if quantity is not None},
        **typed_losses(plan),
    }


def values_of(plan: Plan) -> dict[str, float | Array]:
    """The central value of each input."""
    return {name: quantity.value for name, quantity in inputs_of(plan).items()}


def scattering_in_use(plan: Plan, state: State) -> LengthInUse:
    """The scattering length: typed, or tuned by the typed field, or from the data."""
    typed, field = plan.species.scattering_length, plan.species.field
    if typed is not None:
        return LengthInUse(value=typed.value, source="given in the plan")
    return length_at_field(state, None if field is None else field.value)


def cloud_of(plan: Plan, state: State, scattering: LengthInUse, numbers: Numbers) -> Cloud:
    """The cloud that these numbers describe; draws of a number make a cloud of as many draws."""
    return Cloud(
        statistics=state.statistics,
        mass=state.mass,
        trap=trap_in_use(plan, numbers),
        atoms=numbers["atoms"],
        temperature=numbers["temperature"],
        spin_components=plan.species.spin_components or state.spin_components,
        scattering_length=_length(state, scattering, numbers),
        dipolar_length=dipolar_length_of(plan, state),
    )


def _length(state: State, scattering: LengthInUse, numbers: Numbers) -> float | Array | None:
    if "scattering_length" in numbers:
        return numbers["scattering_length"]
    if scattering.from_resonances and np.ndim(numbers["field"]):
        return scattering_length_at_field(tuning(state), numbers["field"])
    return scattering.value


def dipolar_length_of(plan: Plan, state: State) -> float | None:
    """Of atoms whose moments count in collisions; None for mixtures, whose states have moments of their own."""
    if state.magnetic_moment is None or (plan.species.spin_components or state.spin_components) > 1:
        return None
    length = float(dipolar_length(state.mass, state.magnetic_moment.value))
    return length if length > STRONG_DIPOLES else None
