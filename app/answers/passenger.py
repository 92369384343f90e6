"""The passenger of a plan: a plan of its own for it, and how it scatters with the first species."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING

from app.choices import LossesChoice, TargetChoice
from app.plan_field import PlanError
from physics.caveats import Severity
from physics.mixture_caveats import MixtureCaveat, MixtureCaveatKind
from physics.pair_scattering import PairLength, WhyNoLength, length_between
from physics.species import load_species

if TYPE_CHECKING:
    from app.candidate_choices import PassengerChoice
    from app.plan import Plan
    from app.units import Quantity


def passenger_of(plan: Plan) -> PassengerChoice:
    """What the plan says of its passenger.

    Raises
    ------
    PlanError
        It has none; or one of the same atoms in the same state, or in another magnetic field.
    """
    passenger = plan.passenger
    if passenger is None:
        raise PlanError("the plan has no second species: give it [passenger.species] and [passenger.cloud]")
    own, first = passenger.species, plan.species
    states = [load_species(choice.key).state(choice.state) for choice in (first, own)]
    if (states[0].key, states[0].name) == (states[1].key, states[1].name):
        raise PlanError(
            f"passenger.species: {states[0].key} {states[0].name} is the first species too; a passenger is another "
            "species or another state"
        )
    if first.field is not None and own.field is not None and first.field.value != own.field.value:
        raise PlanError(
            f"passenger.species.field is {own.field.text} and species.field {first.field.text}: both are in one trap, "
            "give one field"
        )
    for name in ("frequencies", "depth"):
        if getattr(passenger, name) is not None and not plan.trap.harmonic:
            raise PlanError(
                f"passenger.{name} is for a trap that is given by its frequencies; this one is made of beams and "
                "coils, from which those of the passenger follow"
            )
    return passenger


def passenger_plan(plan: Plan) -> Plan:
    """The plan of the passenger alone: its atoms in the same trap, at the same field.

    Frequencies and depth that are given are those of both, unless the passenger has its own. Background gas and noise
    of the light are the same; what else is typed of losses belongs to the first species, and its own rate constants
    are those of the data.
    """
    passenger, losses = passenger_of(plan), plan.losses
    species = passenger.species
    if species.field is None and species.scattering_length is None:
        species = replace(species, field=plan.species.field)
    trap = plan.trap
    if passenger.frequencies is not None:
        trap = replace(trap, frequencies=passenger.frequencies)
    if passenger.depth is not None:
        trap = replace(trap, depth=passenger.depth)
    return replace(
        plan,
        species=species,
        trap=trap,
        cloud=passenger.cloud,
        losses=LossesChoice(
            background_lifetime=losses.background_lifetime,
            intensity_noise=losses.intensity_noise,
            pointing_noise=losses.pointing_noise,
        ),
        target=TargetChoice(),
        ramp=(),
        measured=(),
        passenger=None,
    )


def vertical_of(plan: Plan) -> tuple[int, float] | None:
    """The axis along which both species sag, by g/w^2 of their own frequencies, and the sign of down on it.

    None in a trap of beams and coils, which has their minima; where both have the same frequencies; and where gravity
    is off or points along none of the axes.
    """
    down = plan.trap.gravity_direction
    if plan.passenger is None or plan.passenger.frequencies is None or not plan.trap.harmonic or down is None:
        return None
    size = math.hypot(*down)
    found = [(place, math.copysign(1.0, part)) for place, part in enumerate(down) if abs(part) > (1.0 - 1e-9) * size]
    return found[0] if found else None


def frequencies_caveat(plan: Plan) -> MixtureCaveat:
    """What the frequencies of a trap that is given by them are for the passenger."""
    own = plan.passenger is not None and plan.passenger.frequencies is not None
    kind = MixtureCaveatKind.OWN_FREQUENCIES if own else MixtureCaveatKind.SAME_FREQUENCIES
    return MixtureCaveat(kind=kind, severity=Severity.NOTE)


def field_of(plan: Plan) -> Quantity | None:
    """The magnetic field that both are in."""
    own = passenger_of(plan).species.field
    return own if own is not None else plan.species.field


def between_of(plan: Plan) -> PairLength:
    """The scattering length between the two: typed, or tuned by the field, or from the data."""
    passenger = passenger_of(plan)
    typed, field = passenger.scattering_length, field_of(plan)
    if typed is not None:
        return PairLength(value=typed.value, source="given in the plan")
    first, second = (load_species(choice.key).state(choice.state) for choice in (plan.species, passenger.species))
    found = length_between(first, second, None if field is None else field.value)
    if found.reason is WhyNoLength.SAME:  # components of a mixture
        return replace(found, reason=WhyNoLength.NOT_IN_DATA)
    return found
