"""A trap made of laser beams, coils and gravity, as it stands in the laboratory: no atom yet."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from physics.checks import Floats
from physics.traps.beam import GaussianBeam
from physics.traps.coils import Coils
from physics.traps.directions import unit_vector


@dataclass(frozen=True, kw_only=True, eq=False)
class Gravity:
    """Which way atoms fall, with the standard acceleration. `direction`: three numbers, not all zero."""

    direction: Sequence[float] | Floats = (0.0, 0.0, -1.0)

    def __post_init__(self) -> None:
        object.__setattr__(self, "direction", unit_vector("direction of gravity", self.direction))


@dataclass(frozen=True, kw_only=True, eq=False)
class Trap:
    """The sum of its parts. What it does to an atom is `physics.traps.potential.potential_of`.

    Attributes
    ----------
    beams : tuple of GaussianBeam, of different names.
    coils : Coils or None.
    gravity : Gravity or None. None: off, as in free fall.

    Raises
    ------
    ValueError : for two beams of one name, or levitation without gravity.
    """

    beams: tuple[GaussianBeam, ...] = ()
    coils: Coils | None = None
    gravity: Gravity | None = Gravity()

    def __post_init__(self) -> None:
        object.__setattr__(self, "beams", tuple(self.beams))
        names = [beam.name for beam in self.beams]
        for name in names:
            if names.count(name) > 1:
                raise ValueError(f"beams must have different names, got {names.count(name)} of name {name}")
        if self.coils is not None and self.coils.levitation and self.gravity is None:
            raise ValueError("levitation is a gradient along gravity, which must be on, got gravity off")

    @property
    def shining(self) -> tuple[GaussianBeam, ...]:
        """The beams that are on and have power."""
        return tuple(beam for beam in self.beams if beam.on and beam.power > 0.0)

    def beam(self, name: str) -> GaussianBeam:
        """The beam of that name; ValueError with the names that there are."""
        for beam in self.beams:
            if beam.name == name:
                return beam
        raise ValueError(f"no beam {name} in the trap; its beams are {', '.join(beam.name for beam in self.beams)}")

    def with_beam(self, name: str, **changes: object) -> Trap:
        """The trap with one beam changed, its place among the others kept."""
        old = self.beam(name)
        new = replace(old, **changes)  # type: ignore[arg-type]
        return replace(self, beams=tuple(new if beam is old else beam for beam in self.beams))

    def with_coils(self, **changes: object) -> Trap:
        """The trap with its coils changed; ValueError without coils."""
        if self.coils is None:
            raise ValueError("the trap has no coils to change")
        return replace(self, coils=replace(self.coils, **changes))  # type: ignore[arg-type]

    def with_powers_scaled(self, factor: float) -> Trap:
        """The trap with the power of every beam multiplied."""
        return replace(self, beams=tuple(replace(beam, power=factor * beam.power) for beam in self.beams))
