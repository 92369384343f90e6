"""How far the plan's uncertainties spread each quantity.

Models that take arrays are answered at a few thousand draws of the uncertain inputs at once; the others by derivatives
of first order, from one answer above and one below for each uncertain input.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from enum import Enum
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.inputs import Numbers, inputs_of, values_of
from app.quantities import QUANTITIES
from physics.models import Model
from physics.sensitivity import interval, lattice, sample

if TYPE_CHECKING:
    from app.answers.losses import Solution
    from app.plan import Plan
    from app.units import Quantity

Array = NDArray[np.float64]

SAMPLES = 4096
SAMPLES_IN_REAL_TRAPS = 1024
"""Fewer where each costs more; the ends of a range then lie within some hundredths of its width."""
SEED = 20
DEVIATION = 0.994457883209753
"""Standard deviations between the median and the 84 percent quantile of a normal distribution."""

SAMPLED_MODELS = frozenset({Model.IDEAL, Model.SEMI_IDEAL})


class Method(Enum):
    """How a spread was found."""

    DRAWS = "draws of the uncertain inputs"
    FIRST_ORDER = "derivatives of first order"


@dataclass(frozen=True, kw_only=True, eq=False)
class Spread:
    """A quantity under the plan's uncertainties: 16, 50 and 84 percent quantiles, in SI; three values for axes."""

    low: float | Array
    median: float | Array
    high: float | Array
    method: Method


@dataclass(frozen=True, kw_only=True)
class Joint:
    """How an input and a quantity scatter together.

    input_deviation : standard deviation of the input's logarithm
    deviation : of the quantity, SI
    log_deviation : of the quantity's logarithm; NaN unless it is positive
    correlation : of the two, -1 to 1
    """

    input_deviation: float
    deviation: float
    log_deviation: float
    correlation: float


@dataclass(frozen=True, kw_only=True, eq=False)
class Uncertainty:
    """The spread of every quantity of one cloud. `solve` answers for other numbers by the model in use, `solve_ideal`
    by the ideal one, which is exact for what does not depend on the model."""

    plan: Plan
    central: Solution
    solve: Callable[[Numbers], Solution]
    solve_ideal: Callable[[Numbers], Solution]

    @cached_property
    def _uncertain(self) -> dict[str, Quantity]:
        return {name: quantity for name, quantity in inputs_of(self.plan).items() if quantity.sigma}

    @property
    def samples(self) -> int:
        """How many draws there are."""
        return SAMPLES if self.plan.trap.harmonic else SAMPLES_IN_REAL_TRAPS

    @property
    def any(self) -> bool:
        """Whether any number of the plan that enters has an uncertainty."""
        return bool(self._uncertain)

    @property
    def method(self) -> Method:
        """How quantities that depend on the model are spread."""
        sampled = self.central.equilibrium.model in SAMPLED_MODELS
        return Method.DRAWS if sampled else Method.FIRST_ORDER

    def spread(self, name: str) -> Spread | None:
        """The spread of a quantity; None where nothing is uncertain, or where some draw has no value."""
        if name not in self._kept:
            self._kept[name] = self._spread(name) if self.any else None
        return self._kept[name]

    @cached_property
    def _kept(self) -> dict[str, Spread | None]:
        """Spreads already worked out: the verdict and its numbers ask for the same few."""
        return {}

    def _spread(self, name: str) -> Spread | None:
        if name in ONE_BY_ONE:
            return self._first_order(name)
        if self.method is Method.DRAWS:
            return self._from_draws(self._drawn, name)
        if name in MODEL_FREE:
            return self._from_draws(self._drawn_ideal, name)
        return self._first_order(name)

    def _from_draws(self, drawn: Solution, name: str) -> Spread | None:
        axes = QUANTITIES[name].axes
        values = np.asarray(drawn.value(name), dtype=float)
        values = np.broadcast_to(values, (self.samples, 3) if axes else (self.samples,))
        if not np.all(np.isfinite(values)):
            return None
        return _spread(*interval(values), Method.DRAWS)

    def _first_order(self, name: str) -> Spread | None:
        centre = np.asarray(self.central.value(name), dtype=float)
        halves = [
            0.5 * (np.asarray(above.value(name), dtype=float) - np.asarray(below.value(name), dtype=float))
            for below, above in self._steps
        ]
        reach = DEVIATION * np.sqrt(np.sum(np.square(halves), axis=0))
        if not np.all(np.isfinite(reach) & np.isfinite(centre)):
            return None
        return _spread(centre - reach, centre, centre + reach, Method.FIRST_ORDER)

    def joint(self, name: str, against: str) -> Joint | None:
        """How a quantity, or its mean over the axes, scatters together with the input `against`, "atoms" or
        "temperature"; None where nothing is uncertain, or where some draw has no value."""
        if not self.any:
            return None
        x, y = self._scatter(name, against)
        if not np.all(np.isfinite(y)):
            return None
        positive = bool(np.all(y > 0.0))
        scale = np.log(y) if positive else y
        deviations = float(np.std(x)), float(np.std(scale))
        # Without a scatter of their own, rounding would be all that is correlated.
        known = min(deviations) > 1e-12 * max(1.0, float(np.max(np.abs(scale))))
        correlation = float(np.mean((x - x.mean()) * (scale - scale.mean())) / math.prod(deviations)) if known else 0.0
        return Joint(
            input_deviation=deviations[0],
            deviation=float(np.std(y)),
            log_deviation=deviations[1] if positive else math.nan,
            correlation=min(max(correlation, -1.0), 1.0),
        )

    def _scatter(self, name: str, against: str) -> tuple[Array, Array]:
        """Logarithms of the input, and values of the quantity: at the draws, or for derivatives of first order at
        points that have the same moments, one deviation to both sides along each uncertain input."""

        def plain(solution: Solution) -> Array:
            values = np.asarray(solution.value(name), dtype=float)
            return values.mean(axis=-1) if QUANTITIES[name].axes else values

        if self.method is Method.DRAWS and name not in ONE_BY_ONE:
            x = np.log(np.broadcast_to(self._draws[against], (self.samples,)))
            return x, np.broadcast_to(plain(self._drawn), (self.samples,))
        reach, start = math.sqrt(len(self._uncertain)), math.log(float(values_of(self.plan)[against]))
        centre, shifts, values = float(plain(self.central)), [], []
        for pair, (item, quantity) in zip(self._steps, self._uncertain.items(), strict=True):
            for solution, moved in zip(pair, one_deviation(quantity), strict=True):
                shifts.append(math.log(moved) - start if item == against else 0.0)
                values.append(float(plain(solution)) - centre)
        return start + reach * np.array(shifts), centre + reach * np.array(values)

    @cached_property
    def _steps(self) -> tuple[tuple[Solution, Solution], ...]:
        """Answers one standard deviation below and above, input by input."""
        values = values_of(self.plan)
        return tuple(
            (self.solve({**values, name: below}), self.solve({**values, name: above}))
            for name, quantity in self._uncertain.items()
            for below, above in [one_deviation(quantity)]
        )

    @cached_property
    def _draws(self) -> Numbers:
        """Every input: its samples where it has an uncertainty, else its value. One column of the lattice each, so that
        equal texts are still independent measurements."""
        normal = deviates(self.samples, len(self._uncertain))
        columns = dict(zip(self._uncertain, normal.T, strict=True))
        return {
            **values_of(self.plan),
            **{name: sample(item.value, item.sigma or 0.0, columns[name]) for name, item in self._uncertain.items()},
        }

    @cached_property
    def _drawn(self) -> Solution:
        return self.solve(self._draws)

    @cached_property
    def _drawn_ideal(self) -> Solution:
        return self.solve_ideal(self._draws)

    def share(self, name: str, below: float) -> float | None:
        """Share of the draws in which a quantity that does not depend on the model is below a value."""
        if not self.any:
            return None
        drawn = self._drawn if self.method is Method.DRAWS else self._drawn_ideal
        return float(np.mean(np.asarray(drawn.value(name)) < below))


MODEL_FREE = frozenset(
    {
        "atoms_left_at_target",
        "atoms_to_threshold",
        "background_lifetime",
        "classical_phase_space_density",
        "critical_temperature",
        "critical_temperature_shifted",
        "fermi_energy",
        "fermi_temperature",
        "fermi_wavenumber",
        "mean_frequency",
        "reduced_temperature",
        "temperature_to_threshold",
        "thermal_wavelength",
        "truncation",
    }
)
"""Quantities that every model gives alike."""


ONE_BY_ONE = frozenset({"critical_temperature_exact_levels"})
"""Quantities found by a search for each cloud, too slow for thousands of draws."""


def _spread(low: Array, median: Array, high: Array, method: Method) -> Spread:
    if np.ndim(median) == 0:
        return Spread(low=float(low), median=float(median), high=float(high), method=method)
    return Spread(low=low, median=median, high=high, method=method)


def one_deviation(quantity: Quantity) -> tuple[float, float]:
    """One standard deviation below and above, as the draws have it: in the logarithm for positive quantities."""
    low, high = sample(quantity.value, quantity.sigma or 0.0, np.array([-1.0, 1.0]))
    return float(low), float(high)


@lru_cache(maxsize=16)
def deviates(samples: int, dimensions: int) -> Array:
    """The same draws for every answer."""
    return lattice(samples, dimensions, seed=SEED)
