"""What a trap of beams and coils itself does to its atoms: the heat of scattered light, the light's share of the
stiffness, the loss at a field's zero."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from app.answers.part import part
from app.answers.trap import trap_answer

if TYPE_CHECKING:
    from app.plan import Plan


@part("species.key", "species.state", "trap")
def trap_losses(plan: Plan) -> Mapping[str, Any]:
    """Fields of `Losses` that follow from the plan's trap; none where its frequencies are given or it holds nothing."""
    if plan.trap.harmonic:
        return MappingProxyType({})
    from physics.traps.heating import light_shares

    found = trap_answer(plan).survey
    potential, known = found.potential, dict[str, Any]()
    if not found.trapped or potential is None:
        return MappingProxyType({})
    if found.lights and math.isfinite(found.heating.heating_rate):
        known["scattering_rate"] = found.heating.scattering_rate
        known["light_heating"] = found.heating.heating_rate
    if found.spin_flips is not None:
        known["zero_force"] = found.spin_flips.force
    if found.frequencies is not None:
        known["light_shares"] = light_shares(potential, found.minimum, found.axes)
    return MappingProxyType(known)
