"""The cloud of a plan: its equilibrium, how uncertain it is, and what the answer does not cover."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.losses import LossesInUse, Solution, losses_in_use, typed_losses
from app.answers.part import part
from app.quantities import QUANTITIES, Need, Row
from physics.caveats import Caveat, caveats_of, gravest_first
from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.constants import bohr_radius
from physics.loss_caveats import loss_caveats
from physics.particles import Statistics
from physics.scattering import LengthInUse, dipolar_length, length_at_field
from physics.sensitivity import interval, lattice, sample
from physics.species import State, load_species
from physics.traps import HarmonicTrap

if TYPE_CHECKING:
    from app.plan import Plan
    from app.units import Quantity

Array = NDArray[np.float64]

STRONG_DIPOLES = 10.0 * bohr_radius
"""Dipolar lengths below are left out: alkali atoms have less than one Bohr radius, chromium 15, dysprosium 130."""

SAMPLES = 4096
SEED = 20
FERMI_THRESHOLD = 0.5
"""T/TF that counts as degenerate where the plan's target names none."""


@dataclass(frozen=True, kw_only=True, eq=False)
class CloudAnswer:
    """One cloud: what it is made of, its equilibrium, and what the answer does not cover.

    Numbers are read with `value`, and with `interval` where the plan states uncertainties.
    """

    plan: Plan
    state: State
    cloud: Cloud
    equilibrium: Equilibrium
    scattering: LengthInUse
    losses: LossesInUse
    solution: Solution
    caveats: tuple[Caveat, ...]
    efficiency: float | None
    threshold: float

    @property
    def model(self) -> Model:
        """The model used, which may not be the one asked for."""
        return self.equilibrium.model

    @property
    def bosons(self) -> bool:
        return self.cloud.statistics is Statistics.BOSE

    def value(self, name: str) -> float | Array:
        """A quantity by its NAME, in SI; NaN where it does not apply, three values for a quantity with axes."""
        return self.solution.value(name)

    def missing(self, row: Row) -> Need | None:
        """The first thing that a quantity needs and this cloud does not have."""
        return next((need for need in row.needs if not self._has(need)), None)

    def _has(self, need: Need) -> bool:
        match need:
            case Need.BOSONS:
                return self.bosons
            case Need.FERMIONS:
                return not self.bosons
            case Need.CONDENSATE:
                return self.bosons and float(self.equilibrium.condensate_fraction) > 0.0
            case Need.INTERACTING_CONDENSATE:
                return bool(np.all(np.isfinite(self.equilibrium.condensate_radii)))
            case Need.SCATTERING_LENGTH:
                return self.cloud.scattering_length is not None
            case Need.COLLISIONS:
                return bool(np.isfinite(self.equilibrium.elastic_collision_rate))
            case Need.DEPTH:
                return self.cloud.trap.depth is not None
            case Need.EFFICIENCY:
                return self.efficiency is not None
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
            case Need.MIXTURE:
                return not bool(np.isnan(self.solution.estimates.interaction_parameter))
            case Need.POSITIVE_LENGTH:
                return bool(self.cloud.length > 0.0)
            case Need.KNOWN_COUPLING:
                return bool(np.isfinite(self.solution.estimates.superfluid_temperature))
            case _:
                raise ValueError(f"whether there is {need.value} is not known")

    @cached_property
    def uncertain(self) -> bool:
        """Whether any number of the plan that enters has an uncertainty."""
        return any(quantity.sigma for quantity in _inputs(self.plan).values())

    @cached_property
    def _draws(self) -> dict[str, float | Array]:
        return _draws(self.plan)

    @cached_property
    def _sampled_solution(self) -> Solution:
        assert self._sampled is not None
        return Solution(
            equilibrium=self._sampled, losses=losses_in_use(self.plan, self.state, self._draws).losses
        )  # fmt: skip

    @cached_property
    def _sampled(self) -> Equilibrium | None:
        """The same cloud at many draws of its uncertain inputs; None where there are none, or where a model is too
        slow to be sampled."""
        if not self.uncertain or self.model not in (Model.IDEAL, Model.SEMI_IDEAL):
            return None
        drawn = _cloud(self.plan, self.state, self.scattering.value, self._draws)
        return equilibrium(drawn, self.model, fermi_threshold=self.threshold, efficiency=self.efficiency)

    def interval(self, name: str) -> tuple[float | Array, float | Array] | None:
        """16 and 84 percent of a quantity over the stated uncertainties, or None where nothing is uncertain."""
        if name not in self._intervals:
            self._intervals[name] = self._interval(name)
        return self._intervals[name]

    @cached_property
    def _intervals(self) -> dict[str, tuple[float | Array, float | Array] | None]:
        """Intervals already worked out: the verdict and its numbers ask for the same few."""
        return {}

    def _interval(self, name: str) -> tuple[float | Array, float | Array] | None:
        if self._sampled is None:
            return None
        row = QUANTITIES[name]
        samples = np.asarray(self._sampled_solution.value(name), dtype=float)
        samples = np.broadcast_to(samples, (SAMPLES, 3) if row.axes else (SAMPLES,))
        if not np.all(np.isfinite(samples)):
            return None
        low, _median, high = interval(samples)
        return (low, high) if row.axes else (float(low), float(high))

    @cached_property
    def probability_beyond_threshold(self) -> float | None:
        """Share of the draws that are condensed, or below the chosen T/TF; None where nothing is uncertain."""
        if self._sampled is None:
            return None
        limit = 1.0 if self.bosons else self.threshold
        return float(np.mean(np.asarray(self._sampled.reduced_temperature) < limit))


@part("species", "trap", "cloud", "losses", "target")
def cloud_answer(plan: Plan) -> CloudAnswer:
    """The cloud of the plan."""
    state = load_species(plan.species.key).state(plan.species.state)
    scattering = _scattering(plan, state)
    numbers: dict[str, float | Array] = {name: item.value for name, item in _inputs(plan).items()}
    cloud, losses = _cloud(plan, state, scattering.value, numbers), losses_in_use(plan, state, numbers)
    efficiency = _number(plan.target.efficiency)
    threshold = _number(plan.target.reduced_temperature) or FERMI_THRESHOLD
    solved = equilibrium(cloud, plan.cloud.model, fermi_threshold=threshold, efficiency=efficiency)
    solution = Solution(equilibrium=solved, losses=losses.losses)
    caveats = (
        *caveats_of(solved, certainty=scattering.certainty, dipolar=cloud.dipolar_length is not None),
        *loss_caveats(
            solution.rates,
            certainties=losses.certainties(),
            measured_length=_measured_length(state, losses),
        ),
    )
    return CloudAnswer(
        plan=plan,
        state=state,
        cloud=cloud,
        equilibrium=solved,
        scattering=scattering,
        losses=losses,
        solution=solution,
        caveats=gravest_first(caveats),
        efficiency=efficiency,
        threshold=threshold,
    )


def _measured_length(state: State, losses: LossesInUse) -> float | None:
    """Scattering length at which K3 of the data was measured, as far as the data tell."""
    if losses.three_body is None or state.scattering_length is None or state.scattering_length_is_background:
        return None
    return state.scattering_length.value


def _inputs(plan: Plan) -> dict[str, Quantity]:
    """The plan's numbers that enter an answer and may be uncertain, by the name of what they are."""
    optional = {"depth": plan.trap.depth, "scattering_length": plan.species.scattering_length}
    return {
        "atoms": plan.cloud.atoms,
        "temperature": plan.cloud.temperature,
        **{f"frequency {axis}": quantity for axis, quantity in enumerate(plan.trap.frequencies)},
        **{name: quantity for name, quantity in optional.items() if quantity is not None},
        **typed_losses(plan),
    }


@lru_cache(maxsize=16)
def _normal_deviates(dimensions: int) -> Array:
    """The same draws for every answer, so made once."""
    deviates = lattice(SAMPLES, dimensions, seed=SEED)
    deviates.setflags(write=False)
    return deviates


def _draws(plan: Plan) -> dict[str, float | Array]:
    """Every input of `_inputs`: its samples where it has an uncertainty, else its value. One column of the lattice
    each, so that equal texts are still independent measurements."""
    inputs = _inputs(plan)
    uncertain = [name for name, quantity in inputs.items() if quantity.sigma]
    normal = _normal_deviates(len(uncertain))
    columns = dict(zip(uncertain, normal.T, strict=True))
    return {
        name: sample(quantity.value, quantity.sigma or 0.0, columns[name]) if name in columns else quantity.value
        for name, quantity in inputs.items()
    }


def _cloud(plan: Plan, state: State, scattering_length: float | None, draws: dict[str, float | Array]) -> Cloud:
    frequencies = np.stack(np.broadcast_arrays(*(draws[f"frequency {axis}"] for axis in range(3))), axis=-1)
    return Cloud(
        statistics=state.statistics,
        mass=state.mass,
        trap=HarmonicTrap(frequencies=frequencies, depth=draws.get("depth")),
        atoms=draws["atoms"],
        temperature=draws["temperature"],
        spin_components=plan.species.spin_components or state.spin_components,
        scattering_length=draws.get("scattering_length", scattering_length),
        dipolar_length=_dipolar_length(plan, state),
    )


def _dipolar_length(plan: Plan, state: State) -> float | None:
    """Of atoms whose moments count in collisions; None for mixtures, whose states have moments of their own."""
    if state.magnetic_moment is None or (plan.species.spin_components or state.spin_components) > 1:
        return None
    length = float(dipolar_length(state.mass, state.magnetic_moment.value))
    return length if length > STRONG_DIPOLES else None


def _scattering(plan: Plan, state: State) -> LengthInUse:
    """The scattering length: typed, or tuned by the typed field, or from the data."""
    typed = plan.species.scattering_length
    if typed is not None:
        return LengthInUse(value=typed.value, source="given in the plan")
    return length_at_field(state, _number(plan.species.field))


def _number(quantity: Quantity | None) -> float | None:
    return None if quantity is None else quantity.value
