"""A second gas in the trap of an evaporation: what the kinetics of two takes of it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from physics.evaporation import require_start
from physics.gas import Gas
from physics.losses import Losses
from physics.ramp_shapes import Course
from physics.ramps import Control, Knob, Placed
from physics.trap_path import TrapPath


@dataclass(frozen=True, kw_only=True, eq=False)
class Passenger:
    """A second gas in the trap.

    Attributes
    ----------
    gas : Gas. Collisions among its own atoms do not count where their scattering length is not known.
    path : TrapPath. Of the same trap, as these atoms see it.
    atoms, temperature : float. [1] [K] Of one spin state, at the start.
    scattering_length : float. [m] Between the two kinds of atoms.
    losses : Losses. Single numbers; what is None does not count.
    follows_depth : bool. Whether the depth as a control of its own is this gas's too; else that control cuts the first
        gas alone, as a knife does that it does not see.
    vertical : index of the axis along which both sag where a trap says only its frequencies; None: they do not.
    """

    gas: Gas
    path: TrapPath
    atoms: float
    temperature: float
    scattering_length: float
    losses: Losses = field(default_factory=Losses)
    follows_depth: bool = False
    vertical: int | None = None

    def __post_init__(self) -> None:
        require_start(self.atoms, self.temperature, "of the passenger")

    @property
    def colliding(self) -> Gas:
        """Its gas, whose atoms do not collide with each other where nothing is known of it."""
        known = self.gas.scattering_length is not None
        return self.gas if known or not self._needs_length else replace(self.gas, scattering_length=0.0)

    @property
    def _needs_length(self) -> bool:
        return self.gas.bosons or self.gas.spin_components > 1

    def follows(self, control: Control) -> bool:
        """Whether a control of this name is one and the same for both gases."""
        return self.follows_depth or control.knob is not Knob.DEPTH

    def courses(self, placed: Placed) -> Mapping[Control, Course]:
        """Its controls along a stage of the first gas."""
        found = {}
        for control, value in self.path.standing.items():
            if self.follows(control) and control in placed.courses:
                found[control] = placed.courses[control]
            elif not math.isnan(value):
                found[control] = Course.resting(value)
        return found
