"""A trap of beams and coils along its controls: a survey at each setting, remembered."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from types import MappingProxyType

import numpy as np

from physics.ramps import Control, Knob
from physics.real_trap import held_curve
from physics.species import State
from physics.trap_path import SCALE, TrapPoint
from physics.traps.heating import light_shares
from physics.traps.survey import Survey, survey
from physics.traps.surveyed_well import SurveyedWell
from physics.traps.trap import Trap

_COIL_PARTS = {
    Knob.KNIFE: "knife",
    Knob.BIAS: "bias",
    Knob.GRADIENT: "gradient",
    Knob.CURVATURE: "curvature",
    Knob.LEVITATION: "levitation",
}

Setting = tuple[tuple[Control, float], ...]
"""Values of controls, in the order of their labels. [SI]"""


@dataclass(frozen=True, kw_only=True, eq=False)
class SurveyedPath:
    """A trap in the laboratory whose controls can be moved.

    They are the power of each beam that is on, the scale of all powers together, and each part of the coils that the
    trap has.

    Attributes
    ----------
    trap : Trap. As it stands before the ramp.
    state : State
    nodes : int. Surveys for a hundredfold change of a control, between which all is interpolated.
    progress : called after each new survey.
    """

    trap: Trap
    state: State
    nodes: int = 25
    progress: Callable[[], None] | None = None

    _known: dict[Setting, TrapPoint] = field(default_factory=dict, init=False, repr=False)

    @property
    def known(self) -> Mapping[Setting, TrapPoint]:
        """What was surveyed so far."""
        return MappingProxyType(self._known)

    def learn(self, points: Mapping[Setting, TrapPoint]) -> None:
        """Take over what another path of this trap and state has surveyed."""
        self._known.update({key: point for key, point in points.items() if key not in self._known})

    @cached_property
    def standing(self) -> Mapping[Control, float]:
        found = {Control(Knob.POWER, beam.name): float(beam.power) for beam in self.trap.beams if beam.on}
        if found:
            found[SCALE] = 1.0
        for knob, part in _COIL_PARTS.items():
            value = None if self.trap.coils is None else getattr(self.trap.coils, part)
            if value is not None:
                found[Control(knob)] = float(value)
        return MappingProxyType(found)

    def trap_at(self, controls: Mapping[Control, float]) -> Trap:
        """The trap with its controls at these values."""
        trap, scale = self.trap, controls.get(SCALE, 1.0)
        for beam in self.trap.beams:
            power = controls.get(Control(Knob.POWER, beam.name))
            if power is not None:
                trap = trap.with_beam(beam.name, power=scale * power)
        parts = {part: controls[Control(knob)] for knob, part in _COIL_PARTS.items() if Control(knob) in controls}
        return trap.with_coils(**parts) if parts else trap

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        key = setting_of(controls)
        if key not in self._known:
            self._known[key] = point_of(survey(self.trap_at(controls), self.state))
            if self.progress is not None:
                self.progress()
        return self._known[key]


def setting_of(controls: Mapping[Control, float]) -> Setting:
    """The setting of a trap that controls make."""
    # Powers times scale make the trap, so that a scale and a common change of the powers share surveys.
    scale = controls.get(SCALE, 1.0)
    values = {c: scale * v if c.knob is Knob.POWER else v for c, v in controls.items() if c != SCALE}
    # To twelve digits: the same setting comes along with different roundings.
    return tuple((c, float(f"{v:.12g}")) for c, v in sorted(values.items(), key=lambda item: item[0].label))


def point_of(found: Survey) -> TrapPoint:
    """What the kinetics needs of a survey.

    The volume of a focused beam without gravity has no end at the depth; there 0.95 of it counts as the depth.
    """
    if not found.trapped or found.depth is None or found.volume_curve is None:
        reason = "the depth is not known" if found.reason is None else found.reason.value
        return TrapPoint(depth=None, reason=reason)
    depth, volume, curve = held_curve(found)
    frequencies = None
    if found.frequencies is not None:
        x, y, z = (float(f) for f in found.frequencies)
        frequencies = (x, y, z)
    minimum = None
    if found.minimum is not None:
        x, y, z = (float(place) for place in found.minimum)
        minimum = (x, y, z)
    return TrapPoint(
        depth=depth if math.isfinite(depth) else None,
        volume=volume,
        curve=curve,
        frequencies=frequencies,
        minimum=minimum,
        axes=None if found.axes is None else tuple(tuple(row) for row in np.asarray(found.axes).tolist()),
        light_heating=float(found.heating.power),
        light_shares=_light_shares(found),
        zero_force=0.0 if found.spin_flips is None else found.spin_flips.force,
        well=None if found.landscape is None or found.basin is None else SurveyedWell.of(found.landscape, found.basin),
    )


def _light_shares(found: Survey) -> tuple[float, float, float] | None:
    if found.frequencies is None or found.potential is None:
        return None
    x, y, z = (float(share) for share in light_shares(found.potential, found.minimum, found.axes))
    return x, y, z
