"""A passenger in the trap of the plan: its cloud, and what the two clouds do to each other."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.answers.cloud import CloudAnswer, cloud_answer
from app.answers.mixture_uncertainty import Together, mixture_spreads, mixture_value
from app.answers.part import part
from app.answers.passenger import between_of, frequencies_caveat, passenger_plan
from app.answers.uncertainty import Spread
from app.plan_field import PlanError
from physics.caveats import Severity, gravest_first
from physics.mixture_caveats import (
    MixtureCaveat,
    MixtureCaveatKind,
    between_caveats,
    mixture_caveats,
)
from physics.mixtures import Mixture
from physics.pair_scattering import PairLength
from physics.species import State, load_species

if TYPE_CHECKING:
    from app.plan import Plan


@dataclass(frozen=True, kw_only=True, eq=False)
class MixtureAnswer:
    """Two clouds in one trap.

    coolant : the cloud of the plan
    state : of the passenger
    passenger : its cloud by itself; None where the trap does not answer for it, for the reason
    mixture : both together; None with it
    between : the scattering length between the two
    own_trap : whether the passenger's frequencies and depth follow from beams and coils; else they are those given
    spreads : of the quantities of both together that the plan's uncertainties reach, by NAME
    """

    plan: Plan
    coolant: CloudAnswer
    state: State
    passenger: CloudAnswer | None
    mixture: Mixture | None
    between: PairLength
    own_trap: bool
    caveats: tuple[MixtureCaveat, ...]
    spreads: Mapping[str, Spread] = field(default_factory=lambda: MappingProxyType({}))
    reason: str = ""

    @property
    def trapped(self) -> bool:
        return self.passenger is not None

    def value(self, name: str) -> float:
        """A quantity of `app.mixture_quantities` by its NAME, in SI; NaN where it is unknown or does not apply."""
        if name == "scattering_length_between":
            return math.nan if self.between.value is None else self.between.value
        return math.nan if self.mixture is None else float(mixture_value(self.mixture, name))


@part("species", "trap", "cloud", "losses", "target", "passenger")
def mixture_answer(plan: Plan) -> MixtureAnswer:
    """The passenger of the plan beside its cloud.

    Raises
    ------
    PlanError
        There is no passenger, or none that can be; or the trap does not answer for the first species.
    """
    own = passenger_plan(plan)
    between, own_trap = between_of(plan), not plan.trap.harmonic
    coolant = cloud_answer(plan)
    state = load_species(own.species.key).state(own.species.state)
    passenger, mixture, reason = None, None, ""
    spreads: Mapping[str, Spread] = {}
    caveats = [*between_caveats(between)]
    try:
        passenger = cloud_answer(own)
    except PlanError as error:
        if not own_trap:
            raise
        reason = str(error)
        caveats.append(MixtureCaveat(kind=MixtureCaveatKind.PASSENGER_NOT_HELD, severity=Severity.REFUSAL))
    if passenger is not None:
        together = Together(plan=plan, own=own, clouds=(coolant, passenger), between=between)
        mixture = together.central
        spreads = mixture_spreads(together, mixture)
        caveats += mixture_caveats(mixture, lifetime=_lifetime(coolant, passenger))
        if not own_trap:
            caveats.append(frequencies_caveat(plan))
    return MixtureAnswer(
        plan=plan,
        coolant=coolant,
        state=state,
        passenger=passenger,
        mixture=mixture,
        between=between,
        own_trap=own_trap,
        caveats=gravest_first(caveats),
        spreads=spreads,
        reason=reason,
    )


def _lifetime(*answers: CloudAnswer) -> float:
    rates = [float(answer.solution.rates.total_loss_rate) for answer in answers]
    known = [rate for rate in rates if math.isfinite(rate) and rate > 0.0]
    return 1.0 / max(known) if known else math.inf
