"""The magnetic field at which a candidate is judged, where the user asks for the best one of a range."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from app.answers.inputs import cloud_of, values_of
from app.answers.losses import losses_in_use
from app.answers.part import part
from app.answers.trap_losses import trap_losses
from app.candidate_choices import FieldWish
from app.language import translate as _
from app.units import Quantity, format_quantity
from app.words import number
from physics.best_field import FieldFound, best_field, fields_of_length
from physics.cloud import equilibrium
from physics.constants import bohr_radius
from physics.particles import Statistics
from physics.rates import Rates
from physics.scattering import LengthInUse, WhyUnknown, tuning
from physics.species import load_species

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.checks import Floats

KEPT = 160
_DIGITS = 7  # of a field that was found: narrow resonances tune by the milligauss

_WITHOUT_LENGTH = LengthInUse(value=None, reason=WhyUnknown.NOT_IN_DATA)


@dataclass(frozen=True, kw_only=True)
class FieldSearch:
    """A search, and the field that it found; None with the reason, as a clause, where it found none."""

    wish: FieldWish
    found: FieldFound | None = None
    reason: str = ""

    @property
    def quantity(self) -> Quantity | None:
        """The field as a plan has it."""
        if self.found is None:
            return None
        return Quantity(format_quantity(self.found.field, "G", digits=_DIGITS, si_unit="T"), self.found.field)


@part("species", "trap", "cloud", "losses", keep=KEPT)
def field_search(plan: Plan, wish: FieldWish) -> FieldSearch:
    """The best field for the plan's atoms, whose trap holds them; the plan itself names no field.

    Raises ValueError or ArithmeticError where the cloud has no answer.
    """
    state = load_species(plan.species.key).state(plan.species.state)
    forms, low, high = tuning(state), wish.lowest.value, wish.highest.value
    found: FieldFound | None
    if not any(form.low < high and form.high > low for form in forms):
        described = _(" or ").join(f"{1e4 * form.low:.4g}–{1e4 * form.high:.4g} G" for form in forms)
        return FieldSearch(
            wish=wish,
            reason=_("the data tune this state at {fields}, not in the range").format(fields=described)
            if forms
            else _("the data have no magnetic resonance by which a field tunes this state"),
        )
    if wish.length is not None:
        found = next(iter(fields_of_length(forms, low, high, wish.length.value)), None)
        reason = _("no field in the range that the data describe makes a = {length}").format(length=wish.length.text)
        return FieldSearch(wish=wish, found=found, reason="" if found else reason)
    if state.statistics is not Statistics.BOSE:
        return FieldSearch(
            wish=wish, reason=_("how fast fermions are lost near a resonance is not known: name a wanted length")
        )
    if plan.losses.background_lifetime is None:
        return FieldSearch(
            wish=wish, reason=_("the best ratio needs a background lifetime: give one, or name a wanted length")
        )
    numbers = values_of(plan)
    cloud = cloud_of(plan, state, _WITHOUT_LENGTH, numbers)
    losses = losses_in_use(plan, state, numbers, trap_losses(plan)).losses

    def gain(lengths: Floats) -> Floats:
        repulsive = lengths > 0.0
        gains = np.full(lengths.shape, np.nan)
        if np.any(repulsive):
            solved = equilibrium(replace(cloud, scattering_length=lengths[repulsive]), plan.cloud.model)
            gains[repulsive] = Rates(equilibrium=solved, losses=losses).good_to_bad_at_ceiling
        return gains

    found = best_field(forms, low, high, gain)
    return FieldSearch(wish=wish, found=found, reason="" if found else _("no field in the range makes a > 0"))


def wish_text(wish: FieldWish) -> str:
    """What field was sought, as a clause."""
    if wish.length is not None:
        said = _("field sought from {low} to {high} for a = {length}, where it changes least with the field")
        return said.format(low=wish.lowest.text, high=wish.highest.text, length=wish.length.text)
    said = _(
        "field sought from {low} to {high} for the most elastic collisions per loss, three-body loss taken at "
        "201 ħa⁴/m: no bound for a below some 30 a0 (Li) to 100 a0 (Cs), the range of the forces"
    )
    return said.format(low=wish.lowest.text, high=wish.highest.text)


def found_text(search: FieldSearch) -> str:
    """What a search found, as a clause; where it found none, why."""
    found = search.found
    if found is None:
        return search.reason
    parts = [_("found at {field}").format(field=_gauss(found.field))]
    if search.wish.length is None:
        nearly = _("at least 90 % as good from {near} to {far}")
        parts.append(nearly.format(near=_gauss(found.low), far=_gauss(found.high)))
    if found.at_end:
        parts.append(_("still better where the range ends"))
    slope = number(found.slope / bohr_radius * 1e-4, 2).replace("-", "−")
    parts.append(_("a changes by {slope} a0 per gauss").format(slope=slope))
    return ", ".join(parts)


def search_text(search: FieldSearch) -> str:
    """What was sought and found, without a full stop."""
    return f"{wish_text(search.wish)}: {found_text(search)}"


def _gauss(field: float) -> str:
    return f"{1e4 * field:.6g} G"
