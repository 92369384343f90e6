"""How far the plan's uncertainties spread what its two clouds are to each other.

As `app.answers.uncertainty` does for one cloud, with the inputs of both. What both share (beams and coils, or
frequencies that are those of both, and the magnetic field) is drawn once for both.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from types import MappingProxyType
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.cloud import CloudAnswer
from app.answers.inputs import Numbers, inputs_of, values_of
from app.answers.passenger import field_of, vertical_of
from app.answers.trap import trap_answer
from app.answers.trap_inputs import minimum_in_use, trap_inputs
from app.answers.uncertainty import (
    DEVIATION,
    SAMPLED_MODELS,
    SAMPLES,
    SAMPLES_IN_REAL_TRAPS,
    Method,
    Spread,
    deviates,
    one_deviation,
)
from app.mixture_quantities import MIXTURE_QUANTITIES
from physics.equilibria import Equilibrium
from physics.mixtures import Mixture, Place
from physics.overlap import sag
from physics.pair_scattering import PairLength, lengths_in_fields
from physics.sensitivity import interval, sample

if TYPE_CHECKING:
    from app.plan import Plan
    from app.units import Quantity

Array = NDArray[np.float64]

_COOLING = "efficiency"
_BETWEEN = "scattering length between"


@dataclass(frozen=True, kw_only=True, eq=False)
class Together:
    """The two clouds of a plan, and how their numbers make a mixture.

    plan, own : of the first species and of the passenger
    clouds : of both
    between : the scattering length between the two
    """

    plan: Plan
    own: Plan
    clouds: tuple[CloudAnswer, CloudAnswer]
    between: PairLength

    @cached_property
    def inputs(self) -> Mapping[str, Quantity]:
        """The quantities that enter, by the name of what they are."""
        found = inputs_of(self.plan)
        for name, quantity in inputs_of(self.own).items():
            found.setdefault(self._of_passenger(name), quantity)
        assert self.plan.passenger is not None
        typed, efficiency = self.plan.passenger.scattering_length, self.plan.target.efficiency
        optional = {_BETWEEN: typed, _COOLING: efficiency}
        return MappingProxyType(found | {name: value for name, value in optional.items() if value is not None})

    def _of_passenger(self, name: str) -> str:
        return name if name in self._shared else f"{name} of the passenger"

    @cached_property
    def _shared(self) -> frozenset[str]:
        """Names of inputs that are one and the same to both."""
        first, second = trap_inputs(self.plan), trap_inputs(self.own)
        own = self.plan.passenger
        assert own is not None
        typed = {"field", *self._shared_losses}
        if own.frequencies is None:
            typed |= {name for name in second if name != "depth"}
        if own.depth is None and "depth" in first:
            typed.add("depth")
        return frozenset(typed)

    @property
    def _shared_losses(self) -> tuple[str, ...]:
        return ("background_lifetime", "intensity_noise", "pointing_noise")

    @property
    def central(self) -> Mixture:
        """Of the plan's numbers."""
        return self._of((self.clouds[0].equilibrium, self.clouds[1].equilibrium), self.values)

    @property
    def values(self) -> dict[str, float | Array]:
        """The plan's numbers."""
        return {name: quantity.value for name, quantity in self.inputs.items()}

    def mixture(self, numbers: Numbers) -> Mixture:
        """Of other numbers, or of as many draws of some of them, by the models in use."""
        first, second = self._each(numbers)
        solved = (self.clouds[0].uncertainty.solve(first), self.clouds[1].uncertainty.solve(second))
        return self._of((solved[0].equilibrium, solved[1].equilibrium), numbers)

    def _each(self, numbers: Numbers) -> tuple[Numbers, Numbers]:
        first = {name: numbers[name] for name in values_of(self.plan)}
        return first, {name: numbers[self._of_passenger(name)] for name in values_of(self.own)}

    def _of(self, solved: tuple[Equilibrium, Equilibrium], numbers: Numbers) -> Mixture:
        first, second = self._each(numbers)
        gamma = numbers.get(_COOLING)
        return Mixture(
            coolant=solved[0],
            passenger=solved[1],
            places=(self._place(self.plan, first), self._place(self.own, second)),
            scattering_length=self._length(numbers),
            cooling=None if gamma is None else (gamma + 1.0) / 3.0,
        )

    def _place(self, plan: Plan, numbers: Numbers) -> Place:
        """Of atoms whose frequencies are given, the centre, or as far below it as they sag."""
        if plan.trap.frequencies is None:
            axes = trap_answer(plan).survey.axes
            return Place(minimum=minimum_in_use(plan, numbers), axes=np.eye(3) if axes is None else axes)
        vertical = vertical_of(self.plan)
        if vertical is None:
            return Place()
        axis, down = vertical
        below = down * sag(numbers[f"frequency {axis}"])
        return Place(minimum=below[..., np.newaxis] * np.eye(3)[axis])

    def _length(self, numbers: Numbers) -> float | Array | None:
        if _BETWEEN in numbers:
            return numbers[_BETWEEN]
        field = numbers.get("field")
        if field is None or np.ndim(field) == 0 or not self.between.from_resonances:
            return self._at(field)
        first, second = (cloud.state for cloud in self.clouds)
        return lengths_in_fields(first, second, field)

    def _at(self, field: float | Array | None) -> float | None:
        """In one field: that of the plan, or another."""
        given = field_of(self.plan)
        if field is None or given is None or field == given.value or not self.between.from_resonances:
            return self.between.value
        first, second = (cloud.state for cloud in self.clouds)
        return float(lengths_in_fields(first, second, field))


def mixture_spreads(together: Together, central: Mixture) -> Mapping[str, Spread]:
    """16, 50 and 84 percent quantiles of each quantity of `app.mixture_quantities`; without those that nothing
    uncertain reaches, or that some draw has no value of."""
    uncertain = {name: quantity for name, quantity in together.inputs.items() if quantity.sigma}
    if not uncertain:
        return MappingProxyType({})
    sampled = all(cloud.model in SAMPLED_MODELS for cloud in together.clouds)
    found = _by_draws(together, uncertain) if sampled else _by_steps(together, uncertain, central)
    return MappingProxyType({name: spread for name, spread in found.items() if spread.low < spread.high})


def _by_draws(together: Together, uncertain: Mapping[str, Quantity]) -> dict[str, Spread]:
    count = SAMPLES if together.plan.trap.harmonic else SAMPLES_IN_REAL_TRAPS
    columns = dict(zip(uncertain, deviates(count, len(uncertain)).T, strict=True))
    drawn = {name: sample(item.value, item.sigma or 0.0, columns[name]) for name, item in uncertain.items()}
    mixture = together.mixture(together.values | drawn)
    spreads = {}
    for name in MIXTURE_QUANTITIES:
        values = np.broadcast_to(mixture_value(mixture, name), (count,))
        if np.all(np.isfinite(values)):
            low, median, high = (float(end) for end in interval(values))
            spreads[name] = Spread(low=low, median=median, high=high, method=Method.DRAWS)
    return spreads


def _by_steps(together: Together, uncertain: Mapping[str, Quantity], central: Mixture) -> dict[str, Spread]:
    values = together.values
    steps = [
        [together.mixture(values | {name: moved}) for moved in one_deviation(quantity)]
        for name, quantity in uncertain.items()
    ]
    spreads = {}
    for name in MIXTURE_QUANTITIES:
        centre = float(mixture_value(central, name))
        halves = [0.5 * float(mixture_value(above, name) - mixture_value(below, name)) for below, above in steps]
        reach = DEVIATION * math.hypot(*halves)
        if math.isfinite(centre) and math.isfinite(reach):
            spreads[name] = Spread(low=centre - reach, median=centre, high=centre + reach, method=Method.FIRST_ORDER)
    return spreads


def mixture_value(mixture: Mixture, name: str) -> Array:
    """A quantity of `app.mixture_quantities`, in SI; NaN where it is unknown or does not apply."""
    if name == "scattering_length_between":
        length = mixture.scattering_length
        return np.asarray(math.nan if length is None else length, dtype=np.float64)
    return np.asarray(getattr(mixture, name), dtype=np.float64)
