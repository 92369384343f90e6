"""What can be turned on a trap of beams and coils, and what can be wanted of it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from app.plan import TrapChoice
    from physics.traps import Trap


class ControlKind(Enum):
    """What can be turned; the value is its name on the command line."""

    POWER = "power"
    POWERS = "powers"
    WAIST = "waist"
    GRADIENT = "gradient"
    BIAS = "bias"
    CURVATURE = "curvature"
    LEVITATION = "levitation"
    KNIFE = "knife"


OF_BEAM = (ControlKind.POWER, ControlKind.WAIST)
"""Controls of one beam."""

_COILS = (
    ControlKind.GRADIENT,
    ControlKind.BIAS,
    ControlKind.CURVATURE,
    ControlKind.LEVITATION,
    ControlKind.KNIFE,
)


@dataclass(frozen=True)
class Control:
    """A control of a trap; `beam` names the beam of a power, or of a waist: the geometric mean of two, whose ratio
    stays."""

    kind: ControlKind
    beam: str = ""

    def now(self, trap: Trap) -> float:
        """Where the control stands, in SI; a factor of 1 for all powers."""
        if self.kind is ControlKind.POWER:
            return float(trap.beam(self.beam).power)
        if self.kind is ControlKind.POWERS:
            return 1.0
        if self.kind is ControlKind.WAIST:
            return math.sqrt(math.prod(_waists(trap, self.beam)))
        return float(getattr(trap.coils, self.kind.value) or 0.0)

    def turned(self, trap: Trap, value: float) -> Trap:
        """The trap with the control at another value."""
        if self.kind is ControlKind.POWER:
            return trap.with_beam(self.beam, power=value, on=True)
        if self.kind is ControlKind.POWERS:
            return trap.with_powers_scaled(value)
        if self.kind is ControlKind.WAIST:
            waists = [waist * value / self.now(trap) for waist in _waists(trap, self.beam)]
            return trap.with_beam(self.beam, waists=waists)
        return trap.with_coils(**{self.kind.value: value})


def controls(choice: TrapChoice) -> tuple[Control, ...]:
    """The controls that a trap has; none where it is given by its frequencies."""
    beams = [beam for beam in choice.beams if beam.power.value > 0.0]
    found = [Control(ControlKind.POWERS)] if sum(beam.on for beam in beams) > 1 else []
    found += [Control(kind, beam.name) for kind in OF_BEAM for beam in beams]
    if choice.coils is not None:
        found += [Control(kind) for kind in _COILS if _stands(choice, kind)]
    return tuple(found)


def _stands(choice: TrapChoice, kind: ControlKind) -> bool:
    quantity = getattr(choice.coils, kind.value)
    return quantity is not None and quantity.value != 0.0


def _waists(trap: Trap, beam: str) -> list[float]:
    horizontal, vertical = trap.beam(beam).waists  # type: ignore[misc]  # two, once the beam has checked itself
    return [float(horizontal), float(vertical)]


class Until(Enum):
    """What is wanted of the trap; the value is its name on the command line."""

    DEPTH = "depth"
    MEAN_FREQUENCY = "mean_frequency"
    FREQUENCY_X = "frequency_x"
    FREQUENCY_Y = "frequency_y"
    FREQUENCY_Z = "frequency_z"
    HOLDS = "holds"
    LEVITATES = "levitates"

    @property
    def wants_number(self) -> bool:
        """Whether a value is wanted: a depth [J] or a frequency [Hz]."""
        return self not in (Until.HOLDS, Until.LEVITATES)
