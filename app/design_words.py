"""What is said of a designed ramp: what it is for, what it holds, what binds it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.language import translate as _
from app.ramp_words import aim
from app.words import number, percent
from physics.ramp_design import Bound

if TYPE_CHECKING:
    from app.answers.ramp_design import DesignAnswer

_BOUNDS: Mapping[Bound, str] = MappingProxyType(
    {
        Bound.BACKGROUND: _("background gas: a tenth longer lifetime leaves {gain} more atoms"),
        Bound.TWO_BODY: _("two-body loss: a tenth less of it leaves {gain} more atoms"),
        Bound.THREE_BODY: _("three-body loss: a tenth less of it leaves {gain} more atoms"),
        Bound.HEATING: _("heating: a tenth less of it leaves {gain} more atoms"),
        Bound.COLLISIONS: _("slow collisions: a tenth more of them leaves {gain} more atoms"),
        Bound.PASSENGER: _("the passenger's heat: a tenth fewer passengers leave {gain} more atoms"),
        Bound.TIME: _("the time limit: a tenth more time leaves {gain} more atoms"),
        Bound.SPEED: _("the speed limit of the control: a tenth more leaves {gain} more atoms"),
    }
)

_UNTOLD_BOUNDS: Mapping[Bound, str] = MappingProxyType(
    {
        Bound.RANGE: _("the range of the control, at whose end it rests for part of the time"),
        Bound.SPEED: _("the speed limit of the control, at which it moves for part of the time"),
        Bound.TIME: _("the time limit, at which the cloud is still getting denser"),
    }
)
"""Of which it is not told what easing them gains."""


def bound_text(bound: Bound, gain: float) -> str:
    """What binds a design, and what easing it by a tenth gains, as a clause."""
    if not math.isfinite(gain):
        return _UNTOLD_BOUNDS[bound]
    return _BOUNDS[bound].format(gain=percent(math.expm1(gain)))


def design_sentence(found: DesignAnswer) -> str:
    """What was designed, and what for."""
    design = found.design
    held = number(design.truncation, 3)
    if design.drift:
        rate = f"{design.drift:+.3g}".replace("-", "−")
        held = _("{eta}, {rate} for each tenfold lower depth,").format(eta=held, rate=rate)
    goal = aim(found.target, bosons=found.answer.bosons)
    if found.assumed:
        goal = _("{aim} (assumed: the plan names no target)").format(aim=goal)
    if not design.reached:
        template = _("No ramp of {control} reaches {aim}; the one that comes closest holds η at {held}.")
        if found.others:
            template += " " + _(
                "The light of {others} stays as it is: design the scale, which moves all beams together."
            )
    else:
        template = _("Most atoms reach {aim} where {control} moves so that the truncation parameter stays at {held}.")
    if found.answer.passenger is not None:
        counted = _("The heat of the passenger is counted.")
        alone = _("η is chosen for the first species alone.")
        template = f"{template} {alone if found.design.passenger is None else counted}"
    others = ", ".join(found.others)
    return template.format(control=found.control.label, aim=goal, held=held.removesuffix(","), others=others)
