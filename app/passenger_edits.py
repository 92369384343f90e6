"""Changes of the plan's passenger: one is put in, its species and cloud are edited, it is taken out again."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import TYPE_CHECKING

from app.candidate_choices import PassengerChoice
from app.choices import CloudChoice, SpeciesChoice
from app.kinds import ATOM_NUMBER
from app.units import quantity
from physics.pair_scattering import length_between
from physics.species import load_species, species_keys
from physics.species_tables import load_pairs

if TYPE_CHECKING:
    from app.plan import Plan
    from app.units import Quantity
    from physics.species import State

_SHARE = 0.1  # of the plan's atoms, that a passenger begins with: few, so that they can be cooled


def with_usual_passenger(plan: Plan) -> Plan:
    """The plan with a passenger to begin with: atoms whose scattering length with the first species is known, a tenth
    of its number, as hot."""
    other = _usual_partner(plan)
    cloud = CloudChoice(
        atoms=quantity(max(_SHARE * plan.cloud.atoms.value, 1.0), "", kind=ATOM_NUMBER, digits=2),
        temperature=plan.cloud.temperature,
    )
    return replace(plan, passenger=PassengerChoice(species=SpeciesChoice(key=other.key, state=other.name), cloud=cloud))


def without_passenger(plan: Plan) -> Plan:
    """The plan with its first species alone."""
    return replace(plan, passenger=None)


def own_plan(plan: Plan) -> Plan:
    """The plan as forms of one species show its passenger: species and cloud are the passenger's, all else stays."""
    passenger = plan.passenger
    if passenger is None:
        raise ValueError("the plan has no passenger to show")
    return replace(plan, species=passenger.species, cloud=passenger.cloud)


def with_own_plan(plan: Plan, own: Plan) -> Plan:
    """The plan whose passenger is as such a form has it."""
    passenger = own.passenger
    if passenger is None:
        raise ValueError("the plan has no passenger to edit")
    if own.species.key != passenger.species.key:  # the trap as other atoms saw it
        passenger = replace(passenger, frequencies=None, depth=None)
    return replace(plan, passenger=replace(passenger, species=own.species, cloud=own.cloud))


def with_length_between(plan: Plan, length: Quantity | None) -> Plan:
    """The plan with this scattering length between the two; None: as the data have it."""
    passenger = plan.passenger
    return plan if passenger is None else replace(plan, passenger=replace(passenger, scattering_length=length))


def with_own_frequency(plan: Plan, place: int, frequency: Quantity | None) -> Plan:
    """The plan whose passenger has a frequency of its own along one axis; None: that of the first species."""
    passenger, both = plan.passenger, plan.trap.frequencies
    if passenger is None:
        return plan
    own, wanted = passenger.frequencies or both, frequency or (None if both is None else both[place])
    changed = None
    if own is not None and wanted is not None:
        x, y, z = (wanted if axis == place else own[axis] for axis in range(3))
        changed = None if (x, y, z) == both else (x, y, z)
    return replace(plan, passenger=replace(passenger, frequencies=changed))


def with_own_depth(plan: Plan, depth: Quantity | None) -> Plan:
    """The plan whose passenger has a depth of its own; None: that of the first species."""
    passenger = plan.passenger
    return plan if passenger is None else replace(plan, passenger=replace(passenger, depth=depth))


def _usual_partner(plan: Plan) -> State:
    """Another species whose scattering length with the first is known, those that pairs in the data name before all
    others; else another state of the same atoms; else any other species."""
    first = load_species(plan.species.key).state(plan.species.state)
    field = None if plan.species.field is None else plan.species.field.value
    tried = list(dict.fromkeys((*_paired_with(first.key), *species_keys())))
    for key in tried:
        for state in load_species(key).states:
            if key != first.key and length_between(first, state, field).value is not None:
                return state
    others = [state for state in load_species(first.key).states if state.name != first.name]
    return others[0] if others else load_species(next(key for key in tried if key != first.key)).states[0]


def _paired_with(key: str) -> Iterator[str]:
    for pair in load_pairs():
        for one, other in ((pair.first, pair.second), (pair.second, pair.first)):
            if one[0] == key != other[0]:
                yield other[0]
