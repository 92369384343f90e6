"""The losses of a plan: what is typed, else what the data of the state say; and the quantities that need them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields
from functools import cached_property
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from app.condensate_quantities import CONDENSATE_ATTRIBUTES, THRESHOLD_ATTRIBUTES
from physics.cloud import Equilibrium
from physics.condensate import Condensate
from physics.fermi_interactions import FermiEstimates
from physics.losses import Losses
from physics.particles import Certainty
from physics.rates import Rates
from physics.thresholds import Thresholds

if TYPE_CHECKING:
    from app.plan import Plan
    from app.units import Quantity
    from physics.species import Sourced, State

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, eq=False)
class LossesInUse:
    """The losses to reckon with, and for rate constants of the data how sure these are; None for typed ones."""

    losses: Losses
    two_body: Sourced | None
    three_body: Sourced | None

    def certainties(self) -> Mapping[str, Certainty]:
        """How sure each rate constant of the data is, by its name."""
        known = {"two_body": self.two_body, "three_body": self.three_body}
        return {name: sourced.certainty for name, sourced in known.items() if sourced is not None}


def typed_losses(plan: Plan) -> dict[str, Quantity]:
    """What the plan says of losses, by name."""
    typed = {field.name: getattr(plan.losses, field.name) for field in fields(plan.losses)}
    return {name: quantity for name, quantity in typed.items() if quantity is not None}


def losses_in_use(
    plan: Plan,
    state: State,
    draws: Mapping[str, float | Array],
    of_trap: Mapping[str, Any] = MappingProxyType({}),
) -> LossesInUse:
    """The losses of the plan's cloud. `draws` has the value of each typed one by name, or many samples of it; `of_trap`
    what the trap itself does, as `trap_losses` has it, where it is to be counted."""
    typed = typed_losses(plan)
    numbers: dict[str, Any] = {**of_trap, **{name: draws[name] for name in typed}}
    data = {"two_body": state.two_body, "three_body": state.three_body}
    used = {name: sourced for name, sourced in data.items() if sourced is not None and name not in typed}
    numbers |= {name: sourced.value for name, sourced in used.items()}
    return LossesInUse(
        losses=Losses(**numbers), two_body=used.get("two_body"), three_body=used.get("three_body")
    )  # fmt: skip


@dataclass(frozen=True, kw_only=True, eq=False)
class Solution:
    """An equilibrium with all that follows from it and from the losses, by NAME."""

    equilibrium: Equilibrium
    losses: Losses

    @cached_property
    def rates(self) -> Rates:
        return Rates(equilibrium=self.equilibrium, losses=self.losses)

    @cached_property
    def estimates(self) -> FermiEstimates:
        return FermiEstimates(equilibrium=self.equilibrium)

    @cached_property
    def condensate(self) -> Condensate:
        return Condensate(equilibrium=self.equilibrium)

    @cached_property
    def thresholds(self) -> Thresholds:
        return Thresholds(equilibrium=self.equilibrium)

    def value(self, name: str) -> float | Array:
        """A quantity, in SI; NaN where it does not apply.

        Raises AttributeError for a name that is no quantity.
        """
        if name in CONDENSATE_ATTRIBUTES:
            return getattr(self.condensate, CONDENSATE_ATTRIBUTES[name])  # type: ignore[no-any-return]
        if name in THRESHOLD_ATTRIBUTES:
            return getattr(self.thresholds, THRESHOLD_ATTRIBUTES[name])  # type: ignore[no-any-return]
        for holder in (self.equilibrium, self.rates, self.estimates):
            if hasattr(type(holder), name):
                return getattr(holder, name)  # type: ignore[no-any-return]
        raise AttributeError(f"no quantity is called {name!r}")
