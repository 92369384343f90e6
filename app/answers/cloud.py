"""The cloud of a plan: its equilibrium, how uncertain it is, and what the answer does not cover."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, cached_property, partial
from typing import TYPE_CHECKING, cast

import numpy as np
from numpy.typing import NDArray

from app.answers.inputs import Numbers, cloud_of, scattering_in_use, values_of
from app.answers.losses import LossesInUse, Solution, losses_in_use
from app.answers.part import part
from app.answers.trap import trap_answer
from app.answers.trap_inputs import trap_change
from app.answers.trap_losses import trap_losses
from app.answers.uncertainty import Spread, Uncertainty
from app.quantities import Need, Row
from physics.caveats import Caveat, Severity, caveats_of, gravest_first
from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.loss_caveats import loss_caveats
from physics.particles import Statistics
from physics.scattering import LengthInUse
from physics.species import State, load_species
from physics.traps.harmonic import HarmonicTrap

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.real_equilibria import RealEquilibrium

Array = NDArray[np.float64]

FERMI_THRESHOLD = 0.5
"""T/TF that counts as degenerate where the plan's target names none."""


@dataclass(frozen=True, kw_only=True, eq=False)
class CloudAnswer:
    """One cloud: what it is made of, its equilibrium, and what the answer does not cover.

    Numbers are read with `value`, and with `spread` where the plan states uncertainties.
    """

    plan: Plan
    state: State
    cloud: Cloud
    equilibrium: Equilibrium
    scattering: LengthInUse
    losses: LossesInUse
    solution: Solution
    uncertainty: Uncertainty
    find_caveats: Callable[[], tuple[Caveat, ...]]
    efficiency: float | None
    threshold: float

    @property
    def model(self) -> Model:
        """The model used, which may not be the one asked for."""
        return self.equilibrium.model

    @property
    def bosons(self) -> bool:
        return self.cloud.statistics is Statistics.BOSE

    @property
    def caveats(self) -> tuple[Caveat, ...]:
        """What the answer does not cover, the gravest first; worked out when first asked for, as a row of a comparison
        never is."""
        return self.find_caveats()

    def value(self, name: str) -> float | Array:
        """A quantity by its NAME, in SI; NaN where it does not apply, three values for a quantity with axes."""
        return self.solution.value(name)

    def missing(self, row: Row) -> Need | None:
        """The first thing that a quantity needs and this cloud does not have."""
        need = next((need for need in row.needs if not self._has(need)), None)
        return self._missing_of_trap(row) if need is None or self.overfull else need

    def _missing_of_trap(self, row: Row) -> Need | None:
        """What a real trap lacks, so that a quantity of its clouds is not known."""
        trap = self.cloud.trap
        if isinstance(trap, HarmonicTrap) or not np.any(np.isnan(self.value(row.name))):
            return None
        if self.overfull:
            return Need.ROOM
        if row.name == "critical_temperature_exact_levels":
            return Need.HARMONIC
        return None if trap.has_frequencies else Need.FREQUENCIES

    @property
    def real_trap(self) -> RealEquilibrium | None:
        """The equilibrium, where it is that in a surveyed trap."""
        return None if isinstance(self.cloud.trap, HarmonicTrap) else cast("RealEquilibrium", self.equilibrium)

    @cached_property
    def overfull(self) -> bool:
        """Whether the trap does not hold so many atoms."""
        return self.real_trap is not None and bool(self.real_trap.atoms_over_most >= 1.0)

    def _has(self, need: Need) -> bool:
        match need:
            case Need.BOSONS:
                return self.bosons
            case Need.FERMIONS:
                return not self.bosons
            case Need.CONDENSATE:
                return self.bosons and float(self.equilibrium.condensate_fraction) > 0.0
            case Need.INTERACTING_CONDENSATE:
                condensed = self.bosons and float(self.equilibrium.condensate_fraction) > 0.0
                return condensed and self.model in (Model.SEMI_IDEAL, Model.HARTREE_FOCK)
            case Need.SCATTERING_LENGTH:
                return self.cloud.scattering_length is not None
            case Need.COLLISIONS:
                return bool(np.isfinite(self.equilibrium.elastic_collision_rate))
            case Need.REPULSIVE:
                return bool(self.cloud.length > 0.0)
            case Need.ATTRACTIVE:
                return bool(self.cloud.length < 0.0)
            case Need.STABLE_CONDENSATE:
                return bool(np.isfinite(self.solution.condensate.release_energy_per_atom))
            case Need.DIPOLES:
                return bool(np.isfinite(self.solution.condensate.dipolar_ratio))
            case Need.DEPTH:
                return self.cloud.trap.depth is not None
            case Need.EFFICIENCY:
                return self.efficiency is not None
            case Need.REAL_TRAP:
                return self.real_trap is not None and self.real_trap.trap.has_frequencies
            case _:
                return self._allows(need)

    def _allows(self, need: Need) -> bool:
        """Whether there is what rates and estimates need."""
        losses, rates, solved = self.losses.losses, self.solution.rates, self.equilibrium
        match need:
            case Need.COLLIDING:
                return bool(solved.elastic_collision_rate > 0.0)
            case Need.BACKGROUND:
                return losses.background_lifetime is not None
            case Need.TWO_BODY:
                return losses.two_body is not None
            case Need.THREE_BODY:
                return losses.three_body is not None
            case Need.LOSSES:
                return bool(np.isfinite(rates.total_loss_rate))
            case Need.NO_CONDENSATE:
                return not self.bosons or bool(solved.reduced_temperature > 1.0)
            case Need.HEATING:
                return bool(np.isfinite(rates.heating_rate))
            case Need.LIGHT:
                return losses.scattering_rate is not None
            case Need.LIGHT_HEATING:
                return bool(np.isfinite(rates.light_heating_rate))
            case Need.FIELD_ZERO:
                return losses.zero_force is not None
            case Need.MIXTURE:
                return not bool(np.isnan(self.solution.estimates.interaction_parameter))
            case Need.POSITIVE_LENGTH:
                return bool(self.cloud.length > 0.0)
            case Need.KNOWN_COUPLING:
                return bool(np.isfinite(self.solution.estimates.superfluid_temperature))
            case _:
                raise ValueError(f"whether there is {need.value} is not known")

    def spread(self, name: str) -> Spread | None:
        """16, 50 and 84 percent of a quantity over the stated uncertainties, or None where nothing is uncertain."""
        return self.uncertainty.spread(name)

    @property
    def probability_beyond_threshold(self) -> float | None:
        """Probability of being condensed, or below the chosen T/TF; None where nothing is uncertain."""
        return self.uncertainty.share("reduced_temperature", 1.0 if self.bosons else self.threshold)


_FAR = 0.2
"""Change of the trap by one number's uncertainty at which the second order is a few percent."""


@part("species", "trap", "cloud", "losses", "target")
def cloud_answer(plan: Plan) -> CloudAnswer:
    """The cloud of the plan."""
    state = load_species(plan.species.key).state(plan.species.state)
    scattering = scattering_in_use(plan, state)
    efficiency = None if plan.target.efficiency is None else plan.target.efficiency.value
    threshold = FERMI_THRESHOLD if plan.target.reduced_temperature is None else plan.target.reduced_temperature.value

    of_trap = trap_losses(plan)

    def solve(numbers: Numbers, model: Model | None) -> Solution:
        cloud = cloud_of(plan, state, scattering, numbers)
        solved = equilibrium(cloud, model, fermi_threshold=threshold, efficiency=efficiency)
        return Solution(equilibrium=solved, losses=losses_in_use(plan, state, numbers, of_trap).losses)

    numbers = values_of(plan)
    losses = losses_in_use(plan, state, numbers, of_trap)
    solution = solve(numbers, plan.cloud.model)
    solved, cloud = solution.equilibrium, solution.equilibrium.cloud

    @cache
    def find_caveats() -> tuple[Caveat, ...]:
        found = (
            *caveats_of(solved, certainty=scattering.certainty, dipolar=cloud.dipolar_length is not None),
            *loss_caveats(
                solution.rates,
                certainties=losses.certainties(),
                measured_length=_measured_length(state, losses),
            ),
            *_trap_caveats(plan, solution),
        )
        return gravest_first(found)

    if not plan.trap.harmonic:
        find_caveats()  # while the survey of the trap is at hand
    return CloudAnswer(
        plan=plan,
        state=state,
        cloud=cloud,
        equilibrium=solved,
        scattering=scattering,
        losses=losses,
        solution=solution,
        uncertainty=Uncertainty(
            plan=plan,
            central=solution,
            solve=partial(solve, model=solved.model),
            solve_ideal=partial(solve, model=Model.IDEAL),
        ),
        find_caveats=find_caveats,
        efficiency=efficiency,
        threshold=threshold,
    )


def _trap_caveats(plan: Plan, solution: Solution) -> tuple[Caveat, ...]:
    """What beams and coils do to the cloud, and how their harmonic trap would answer; nothing where the frequencies are
    given."""
    if plan.trap.harmonic:
        return ()
    from physics.real_equilibria import RealEquilibrium
    from physics.survey_caveats import survey_caveats
    from physics.trap_caveats import harmonic_trap_caveat

    survey, solved = trap_answer(plan).survey, solution.equilibrium
    found = [*survey_caveats(survey, solution.rates)]
    if isinstance(solved, RealEquilibrium) and solved.trap.has_frequencies:
        compared = harmonic_trap_caveat(survey, solved)
        found += [] if compared is None else [compared]
    moved = trap_change(plan)
    if moved > _FAR:
        found.append(Caveat(id="trap_uncertainty", severity=Severity.NOTE, value=moved))
    return tuple(found)


def _measured_length(state: State, losses: LossesInUse) -> float | None:
    """Scattering length at which K3 of the data was measured, as far as the data tell."""
    if losses.three_body is None or state.scattering_length is None or state.scattering_length_is_background:
        return None
    return state.scattering_length.value
