"""Which candidates a plan names, and the plan with others."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace
from typing import TYPE_CHECKING

from app.candidate_choices import CandidateChoice
from app.plan_field import PlanError
from physics.species import load_species, species_keys

if TYPE_CHECKING:
    from app.answers.candidate_row import CandidateRow
    from app.plan import Plan

Which = tuple[str, str]
"""Key of a species, and name of a state."""


def own_of(plan: Plan) -> Which:
    """The plan's own atoms."""
    state = load_species(plan.species.key).state(plan.species.state)
    return state.key, state.name


def with_candidates(plan: Plan, chosen: Collection[Which]) -> Plan:
    """The plan with just these states to compare, written as briefly as it can be; conditions of their own stay.

    Raises PlanError where none is left.
    """
    if not chosen:
        raise PlanError("a comparison needs at least one species")
    own = {
        (load_species(c.key).key, load_species(c.key).state(c.state).name): c for c in plan.candidates.candidates
    }  # fmt: skip
    keys, single = [], []
    for key in species_keys():
        states = [(key, state.name) for state in load_species(key).states]
        picked = [which for which in states if which in chosen]
        whole = len(picked) == len(states)
        if whole:
            keys.append(key)
        for which in picked:
            conditions = own.get(which)
            if conditions is not None and _has_own(conditions):
                single.append(conditions)
            elif not whole:
                single.append(CandidateChoice(key=which[0], state=which[1]))
    if len(keys) == len(species_keys()) and not single:
        keys = []  # all there are, also those of later data
    return replace(plan, candidates=replace(plan.candidates, keys=tuple(keys), candidates=tuple(single)))


def with_conditions(plan: Plan, choice: CandidateChoice) -> Plan:
    """The plan with one of its candidates in conditions of its own, or again in the plan's where it has none."""
    which = (choice.key, choice.state)
    given = plan.candidates
    keys = given.keys if given.keys or given.candidates else species_keys()
    others = tuple(
        other
        for other in given.candidates
        if (load_species(other.key).key, load_species(other.key).state(other.state).name) != which
    )
    single = (*others, choice) if _has_own(choice) or choice.key not in keys else others
    if keys == species_keys() and not single:
        keys = ()
    return replace(plan, candidates=replace(given, keys=keys, candidates=single))


def _has_own(choice: CandidateChoice) -> bool:
    return choice != CandidateChoice(key=choice.key, state=choice.state)


def with_species_of(plan: Plan, row: CandidateRow) -> Plan:
    """The plan with a candidate in the place of its own species, and the conditions of its own if it has any; trap,
    and all else that the comparison took for it, stay as they are."""
    own = row.candidate
    cloud = replace(
        plan.cloud, atoms=own.atoms or plan.cloud.atoms, temperature=own.temperature or plan.cloud.temperature
    )
    return replace(plan, species=row.plan.species, losses=row.plan.losses, cloud=cloud)
