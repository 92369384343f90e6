"""What a trap is to a cloud while its controls move: depth, volume curve and frequencies, control by control.

`TrapPath` is all that the kinetics of evaporation asks of a trap. Closed forms for a harmonic trap and for a quadrupole
are here; a trap of beams and coils gives a path of surveys.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from types import MappingProxyType
from typing import Protocol

from physics.checks import Floats
from physics.constants import planck
from physics.curve_shape import CurveShape
from physics.ramps import Control, Knob
from physics.traps.harmonic import HarmonicTrap
from physics.traps.wells import Well, harmonic_well, quadrupole_well
from physics.truncated_boltzmann import HARMONIC, QUADRUPOLE

DEPTH, SCALE, GRADIENT = Control(Knob.DEPTH), Control(Knob.SCALE), Control(Knob.GRADIENT)


@dataclass(frozen=True, kw_only=True)
class TrapPoint:
    """A trap at one setting of its controls, for atoms of one state.

    Attributes
    ----------
    depth : float or None. [J] Energy above the bottom at which atoms leave; None where the trap holds nothing.
    volume : float. [m^3] W at the depth.
    curve : CurveShape. Shape of W below it.
    frequencies : (3,) or None. [Hz] None in a quadrupole, which has none.
    minimum : (3,) or None. [m] Where the bottom is; None where that is not known.
    axes : (3, 3) or None. Rows: unit vectors that the frequencies belong to; None: x, y and z.
    light_heating : float. [W] Energy per atom and second that scattered light leaves.
    light_shares : (3,) or None. [1] Share of the spring constant along each axis that the light makes; None: all of it.
    zero_force : float. [N] Force of the field on its strong axis, where it vanishes at the bottom; else 0.
    reason : text. Why nothing is held.
    well : Well or None. The potential, place by place; None where only its volumes are known.
    """

    depth: float | None
    volume: float = math.nan
    curve: CurveShape = field(default_factory=CurveShape)
    frequencies: tuple[float, float, float] | None = None
    minimum: tuple[float, float, float] | None = None
    axes: tuple[tuple[float, ...], ...] | None = None
    light_heating: float = 0.0
    light_shares: tuple[float, float, float] | None = None
    zero_force: float = 0.0
    reason: str = ""
    well: Well | None = field(default=None, repr=False, compare=False)

    def __post_init__(self) -> None:
        if self.depth is None:
            return
        for name, value, unit in (("depth", self.depth, "J"), ("volume at the depth", self.volume, "m^3")):
            if not 0.0 < value < math.inf:
                raise ValueError(f"{name} of a trap must be positive and finite, got {value:g} {unit}")
        if not 0.0 <= self.light_heating < math.inf:
            raise ValueError(f"heating by light must be finite and not negative, got {self.light_heating:g} W")
        if not 0.0 <= self.zero_force < math.inf:
            raise ValueError(f"force at a zero must be finite and not negative, got {self.zero_force:g} N")

    @property
    def level_volume(self) -> float:
        """Volume of the box of this depth that has as many levels. [m^3]"""
        return self.volume * self.curve.rim_levels

    @property
    def noise_share(self) -> float:
        """Heating by noise of the light's intensity over that in a trap of light alone. [1] It goes as the square of
        the light's share of the spring constant along each axis."""
        if self.light_shares is None or self.frequencies is None:
            return 1.0
        squares = [f * f for f in self.frequencies]
        lit = (share * share * square for share, square in zip(self.light_shares, squares, strict=True))
        return sum(lit) / sum(squares)

    def levels(self, mass: float) -> float:
        """Number of levels below the depth. [1]"""
        assert self.depth is not None
        momentum = math.sqrt(2.0 * mass * self.depth) / planck
        return 4.0 * math.pi / 3.0 * momentum**3 * self.level_volume


FEWEST_NODES = 5


def points_between(nodes: int, first: float, last: float) -> int:
    """Number of points for a change of one control from one value to another.

    As dense as `nodes` for a hundredfold change; of a control that vanishes or changes its sign, `nodes`.
    """
    if min(first, last) <= 0.0:
        return nodes
    return max(FEWEST_NODES, 1 + math.ceil(nodes * abs(math.log(last / first)) / math.log(100.0)))


class TrapPath(Protocol):
    """A trap and its controls."""

    @property
    def standing(self) -> Mapping[Control, float]:
        """The controls that can be moved, where they stand before a ramp; NaN where that is not known. [SI]"""

    @property
    def nodes(self) -> int:
        """Number of points, between which all is interpolated, for a hundredfold change of a control."""

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        """The trap at values of its controls. It may remember what it has computed."""


@dataclass(frozen=True, kw_only=True)
class PathAround:
    """A trap path made of another, which `at` of a subclass asks."""

    path: TrapPath

    @property
    def standing(self) -> Mapping[Control, float]:
        return self.path.standing

    @property
    def nodes(self) -> int:
        return self.path.nodes


@dataclass(frozen=True, kw_only=True)
class FixedTrap:
    """A trap without controls."""

    point: TrapPoint
    nodes: int = 1

    @property
    def standing(self) -> Mapping[Control, float]:
        return MappingProxyType({})

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        return self.point


@dataclass(frozen=True, kw_only=True)
class HarmonicPath:
    """A harmonic trap cut at a depth, which moves by itself or with the whole trap.

    Attributes
    ----------
    mass : float. [kg]
    trap : HarmonicTrap. A single one.
    light_heating : float. [W] Per atom, at scale 1; in proportion to the scale.
    """

    mass: float
    trap: HarmonicTrap
    light_heating: float = 0.0
    nodes: int = 17

    def __post_init__(self) -> None:
        if self.trap.shape:
            raise ValueError(f"a ramp starts from one trap, got traps of shape {self.trap.shape}")

    @cached_property
    def standing(self) -> Mapping[Control, float]:
        depth = math.nan if self.trap.depth is None else float(self.trap.depth)
        return MappingProxyType({DEPTH: depth, SCALE: 1.0})

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        s = controls[SCALE]
        if DEPTH not in controls:
            raise ValueError("the depth of the trap must be known to evaporate from it")
        depth, root = s * controls[DEPTH], math.sqrt(s)
        fx, fy, fz = (float(f) * root for f in self.trap.frequencies)
        angular = (2.0 * math.pi) ** 3 * fx * fy * fz
        volume = 4.0 * math.pi / 3.0 * (2.0 * depth / self.mass) ** 1.5 / angular
        return TrapPoint(
            depth=depth,
            volume=volume,
            curve=_HARMONIC,
            frequencies=(fx, fy, fz),
            light_heating=s * self.light_heating,
            well=harmonic_well(self.mass, (fx, fy, fz)),
        )


@dataclass(frozen=True, kw_only=True)
class QuadrupolePath:
    """A quadrupole field cut at a depth, by a knife.

    Attributes
    ----------
    moment : float. [J/T] dE/dB of the atoms.
    gradient : float. [T/m] On the strong axis, half of it on the others.
    depth : float. [J]
    axis : (3,) The strong axis. centre : (3,) or None. [m] Where the field vanishes; None: not known.
    """

    moment: float
    gradient: float
    depth: float
    axis: Sequence[float] | Floats = (0.0, 0.0, 1.0)
    centre: Sequence[float] | Floats | None = None
    nodes: int = 17

    def __post_init__(self) -> None:
        for name, value, unit in (("moment", self.moment, "J/T"), ("gradient", self.gradient, "T/m")):
            if not 0.0 < value < math.inf:
                raise ValueError(f"{name} must be positive and finite, got {value:g} {unit}")

    @cached_property
    def standing(self) -> Mapping[Control, float]:
        return MappingProxyType({DEPTH: self.depth, GRADIENT: self.gradient})

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        depth, force = controls[DEPTH], self.moment * abs(controls[GRADIENT])
        if force == 0.0:
            return TrapPoint(depth=None, reason="the gradient is zero")
        volume = 16.0 * math.pi / 3.0 * (depth / force) ** 3
        well = quadrupole_well(force, self.axis, self.centre)
        return TrapPoint(depth=depth, volume=volume, curve=_QUADRUPOLE, zero_force=force, well=well)


_HARMONIC = CurveShape(exponent=HARMONIC)
_QUADRUPOLE = CurveShape(exponent=QUADRUPOLE)
