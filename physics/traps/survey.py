"""What a trap is to atoms of a state: where they sit, how stiffly, how deep, how they leave, how much room they have.

The minimum, the passes and the frequencies are found when a survey is made; the volume curve, the arms and the heating
when they are first asked for.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum
from functools import cached_property
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

import numpy as np

from physics.checks import Floats, as_floats
from physics.constants import boltzmann
from physics.traps.arms import Arm, arms_of, crossing_beams
from physics.traps.boundary import Exit
from physics.traps.descent import settle
from physics.traps.escape import Basin, Escape, basins
from physics.traps.harmonic import HarmonicTrap
from physics.traps.heating import Heating, SpinFlips, heating_of, spin_flips_of
from physics.traps.landscape import Landscape
from physics.traps.modes import Modes, modes_of
from physics.traps.notes import Note, notes_of
from physics.traps.openings import barriers
from physics.traps.potential import NoPotential, NotTrapped, Potential, potential_of
from physics.traps.reasons import why_not_trapped
from physics.traps.stationary import StationaryPoint, stationary_points
from physics.traps.volume_curve import VolumeCurve
from physics.traps.volumes import volume_curve_of

if TYPE_CHECKING:
    from physics.light import Polarizability
    from physics.species import State
    from physics.traps.trap import Trap

WALL = 0.02
"""[m] Distance from the coils' centre at which atoms count as lost, where the field of coils has a shape."""


_PART_OF_REACH = 0.9
"""Part of the distance over which the expansion of the field means something that is used; the wall is no further."""


class NoFrequencies(Enum):
    """Why a trap that holds atoms has no three frequencies."""

    CUSP = "the field vanishes at the minimum, and the potential has a cusp there"
    FLAT = "the potential does not rise in every direction from the minimum"


@dataclass(frozen=True, kw_only=True, eq=False)
class Survey:
    """A trap as atoms of one state see it. Where they are not trapped, `reason` says why and the rest is None.

    Attributes
    ----------
    mass : float. [kg]
    reason : NotTrapped or None.
    beam, light : where the reason is a beam's light: its name, and what is known of the polarizability.
    minimum : (3,) or None. [m]
    energy_at_minimum : float or None. [J] On the scale of the potential.
    frequencies : (3,) or None. [Hz] Ordinary ones, of the axes in turn.
    axes : (3, 3) or None. Rows: unit vectors of the normal modes, in the order and the sense nearest to x, y and z.
    no_frequencies : NoFrequencies or None. Why there are none.
    depth : float or None. [J] Energy over the minimum at which atoms get out; None where unknown.
    escape : Escape or None. Where and which way they do.
    sag : float or None. [m] How far along gravity the minimum lies from where it would be without gravity and
        levitation; None where gravity is off or part of given frequencies, or without it nothing is held.
    """

    mass: float
    reason: NotTrapped | None = None
    beam: str = ""
    light: Polarizability | None = None
    minimum: Any = None
    energy_at_minimum: float | None = None
    frequencies: Any = None
    axes: Any = None
    no_frequencies: NoFrequencies | None = None
    depth: float | None = None
    escape: Escape | None = None
    sag: float | None = None
    landscape: Landscape | None = None
    basin: Basin | None = None
    given: HarmonicTrap | None = None

    @property
    def trapped(self) -> bool:
        """Whether atoms are held."""
        return self.reason is None

    @property
    def potential(self) -> Potential | None:
        """The potential, where the trap is not given by its frequencies."""
        return None if self.landscape is None else self.landscape.potential

    @property
    def mean_frequency(self) -> float | None:
        """Geometric mean of the frequencies. [Hz]"""
        return None if self.frequencies is None else float(np.cbrt(np.prod(self.frequencies)))

    @property
    def depth_temperature(self) -> float | None:
        """Depth over k. [K]"""
        return None if self.depth is None else self.depth / boltzmann

    @cached_property
    def harmonic(self) -> HarmonicTrap | None:
        """The harmonic trap of the same frequencies and depth; None without frequencies."""
        if self.given is not None:
            return self.given
        return None if self.frequencies is None else HarmonicTrap(frequencies=self.frequencies, depth=self.depth)

    @property
    def lights(self) -> Mapping[str, Polarizability]:
        """Polarizability at each beam that shines, by its name."""
        return MappingProxyType({}) if self.potential is None else self.potential.lights

    @cached_property
    def volume_curve(self) -> VolumeCurve | None:
        """W(U) up to the depth, or up to 0.95 of it where the volume there is infinite; None without a depth."""
        if not self.trapped or self.depth is None:
            return None
        if self.landscape is None or self.basin is None:
            return _harmonic_curve(self.mass, as_floats(self.frequencies), self.depth)
        return volume_curve_of(self.landscape, self.basin)

    @cached_property
    def arms(self) -> tuple[Arm, ...]:
        """Arms of crossing beams that open below the depth, the lowest first."""
        if self.potential is None or self.basin is None:
            return ()
        minimum = self.basin.minimum
        found = arms_of(self.potential, minimum, crossing_beams(self.potential, minimum))
        return tuple(arm for arm in found if self.depth is not None and 0.0 < arm.energy < self.depth)

    @property
    def arm_depth(self) -> float | None:
        """Energy over the minimum at which atoms get out of the crossing into an arm; None where none opens. [J]"""
        return self.arms[0].energy if self.arms else None

    @cached_property
    def heating(self) -> Heating:
        """Photon scattering at the minimum, and the heat it brings."""
        return Heating() if self.potential is None or self.basin is None else heating_of(self.potential, self.minimum)

    @cached_property
    def spin_flips(self) -> SpinFlips | None:
        """Loss at the zero of a quadrupole; None where the minimum is not one."""
        if self.potential is None or self.basin is None or not self.basin.minimum.cusp:
            return None
        return spin_flips_of(self.potential, self.basin.minimum)

    @cached_property
    def barriers(self) -> Floats | None:
        """(rays,) The highest energy over the minimum on the straight way out, in directions all around; None where the
        trap is given by its frequencies or has no depth. [J]"""
        if self.potential is None or self.depth is None:
            return None
        return barriers(self.potential, self.minimum, self.depth, self.frequencies, self.axes)

    def open_share(self, temperature: float) -> float | None:
        """Share of the directions in which nothing higher than the depth + kT stands in the way. [1]

        Where it is small, atoms that have the energy to leave must first find the way: they evaporate more slowly than
        kinetics in three dimensions says. `temperature`: [K]. None as `barriers`.
        """
        if self.barriers is None or self.depth is None:
            return None
        return float(np.mean(self.barriers <= self.depth + boltzmann * temperature))

    @cached_property
    def notes(self) -> tuple[Note, ...]:
        """What about the trap deserves a word."""
        return () if self.landscape is None else notes_of(self.landscape, self.basin, self.volume_curve_ceiling)

    def forget(self) -> None:
        """Let go of what was needed to find all this, most of the memory of a survey; what was found stays."""
        if self.landscape is not None:
            self.landscape.forget()

    @property
    def volume_curve_ceiling(self) -> float | None:
        """Share of the depth up to which the volume curve goes, where that is not all of it."""
        open_space = self.escape is not None and self.escape.kind is Exit.OPEN_SPACE
        return 0.95 if open_space else None


def survey(trap: Trap, state: State, *, wall: float = WALL) -> Survey:
    """Survey a trap for atoms of a state.

    Parameters
    ----------
    trap : Trap
    state : State
    wall : float. [m] Distance from the coils' centre at which atoms are lost, where the field of coils has a shape:
        what limits a magnetic trap without a knife. It is taken no further than the field is known, 1.8 B'/B''.

    The trap is the deepest minimum; where several hang together below the way out, the lowest of them.
    """
    if not wall > 0.0:
        raise ValueError(f"distance of the wall must be positive, got {wall:g} m")
    try:
        potential = potential_of(trap, state)
    except NoPotential as refusal:
        return Survey(mass=state.mass, reason=refusal.reason, beam=refusal.beam, light=refusal.light)
    return survey_of_potential(potential, wall=wall)


def survey_of_potential(potential: Potential, *, wall: float = WALL) -> Survey:
    """Survey a potential, however it came about. `wall`: see `survey`."""
    coils = potential.coils
    if coils is not None and potential.shaped:
        wall = min(wall, _PART_OF_REACH * coils.reach)
    landscape = Landscape(potential=potential, wall=wall)
    points = stationary_points(landscape)
    held = basins(potential, points, landscape.charts, wall)
    if not held:
        return Survey(mass=potential.mass, reason=why_not_trapped(landscape, points), landscape=landscape)
    basin = held[0]
    minimum = basin.minimum
    modes: Modes | None = None if minimum.cusp else modes_of(minimum.curvature, potential.mass)
    missing = NoFrequencies.CUSP if minimum.cusp else NoFrequencies.FLAT if modes is None else None
    return Survey(
        mass=potential.mass,
        minimum=as_floats(minimum.position),
        energy_at_minimum=minimum.energy,
        frequencies=None if modes is None else modes.frequencies,
        axes=None if modes is None else modes.axes,
        no_frequencies=missing,
        depth=basin.depth,
        escape=basin.escape,
        sag=_sag(potential, minimum),
        landscape=landscape,
        basin=basin,
    )


def survey_of_harmonic(trap: HarmonicTrap, mass: float) -> Survey:
    """A harmonic trap, given by its frequencies, with the face of a surveyed one.

    Raises
    ------
    ValueError : for an array of traps.
    """
    if trap.shape:
        raise ValueError(f"a survey is of one trap, got an array of shape {trap.shape}")
    return Survey(
        mass=mass,
        minimum=as_floats(np.zeros(3)),
        energy_at_minimum=0.0,
        frequencies=trap.frequencies,
        axes=as_floats(np.eye(3)),
        depth=None if trap.depth is None else float(trap.depth),
        given=trap,
    )


def _harmonic_curve(mass: float, frequencies: Floats, depth: float) -> VolumeCurve:
    """W = (4 pi/3)(2U/m)^{3/2}/(w1 w2 w3)."""
    coefficient = 4.0 * np.pi / 3.0 * (2.0 / mass) ** 1.5 / float(np.prod(2.0 * np.pi * frequencies))
    energies = depth * np.array([0.5, 1.0])
    return VolumeCurve(
        mass=mass,
        energies=energies,
        volumes=coefficient * energies**1.5,
        arm_shares=np.zeros(2),
        coefficient=coefficient,
        power=1.5,
    )


def _sag(potential: Potential, minimum: StationaryPoint) -> float | None:
    weight = float(np.linalg.norm(potential.weight))
    if weight == 0.0:
        return None
    rest = settle(potential.without_force, minimum.position, potential.length, 100.0 * potential.length)
    return None if rest is None else float((minimum.position - rest) @ potential.weight) / weight
