"""What a trap does to an atom: its potential energy, gradient and Hessian.

    U(r) = -sum_b alpha_b I_b(r)/(2 eps0 c)  +  (dE/dB) |B(r)|  -  m g d.r  +  s |dE/dB| b' d.r

with d the direction of gravity, b' the levitation and s = 1 where it lifts the state, -1 where it pulls it down. Beams
add in intensity. The Zeeman effect is linear: the slope at low field.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from enum import Enum
from functools import cached_property
from types import MappingProxyType
from typing import TYPE_CHECKING

import numpy as np

from physics.checks import Floats, as_floats
from physics.constants import planck, speed_of_light, standard_gravity, vacuum_permittivity
from physics.traps.beam import GaussianBeam
from physics.traps.coils import Coils, FieldSeeker

if TYPE_CHECKING:
    from physics.light import Polarizability
    from physics.species import State
    from physics.traps.trap import Trap


class NotTrapped(Enum):
    """Why a trap holds no atoms of a state."""

    NOTHING_ON = "no beam is on and the coils make no field that changes in space"
    NO_POLARIZABILITY = "the polarizability at the wavelength of a beam is not known"
    NO_MOMENT = "the magnetic moment of the state is not known, or its components have different ones"
    NOT_MAGNETIC = "the state has no magnetic moment that coils could hold"
    HIGH_FIELD_SEEKER = "the state is drawn to high fields, and no coils have a field maximum"
    BLUE_LIGHT = "all beams repel the atoms"
    FIELD_OPENS = "the bias is too high for the gradient: the field falls away from the axis"
    GRAVITY = "gravity pulls the atoms out"
    LEVITATION = "the levitation gradient pulls the atoms out"
    KNIFE = "the radio-frequency knife takes away every atom"
    NO_MINIMUM = "the potential has no minimum"


class NoPotential(ValueError):
    """The potential of a state cannot be told. `reason` says why, `beam` and `light` which beam and what its light."""

    def __init__(self, reason: NotTrapped, beam: str = "", light: Polarizability | None = None) -> None:
        super().__init__(reason.value)
        self.reason, self.beam, self.light = reason, beam, light


@dataclass(frozen=True, kw_only=True, eq=False)
class Potential:
    """Potential energy of one atom.

    Attributes
    ----------
    mass : float. [kg]
    beams : beams that shine.
    shifts : (beams,). [J m^2/W] Energy over intensity of each; negative where light attracts.
    coils : Coils or None.
    zeeman_slope : float. [J/T] dE/dB at low field.
    weight : (3,). [N] Force of gravity; zero where gravity is off.
    lift : (3,). [N] Force of the levitation.
    knife_energy : float or None. [J] |m| h f: the magnetic energy at which the knife takes atoms away.
    lights : polarizability at each beam, by its name.
    stretched : bool. Whether the Zeeman effect of the state is linear in any field, but for the nucleus.
    """

    mass: float
    beams: tuple[GaussianBeam, ...] = ()
    shifts: Floats = field(default_factory=lambda: as_floats([]))
    coils: Coils | None = None
    zeeman_slope: float = 0.0
    weight: Floats = field(default_factory=lambda: as_floats(np.zeros(3)))
    lift: Floats = field(default_factory=lambda: as_floats(np.zeros(3)))
    knife_energy: float | None = None
    lights: Mapping[str, Polarizability] = field(default_factory=lambda: MappingProxyType({}))
    stretched: bool = False

    @cached_property
    def shaped(self) -> bool:
        """Whether the field's magnitude changes in space and acts on the atom."""
        return self.coils is not None and self.coils.shaped and self.zeeman_slope != 0.0

    @cached_property
    def force(self) -> Floats:
        """(3,) Sum of gravity and levitation, exactly zero where they balance to rounding. [N]"""
        force = self.weight + self.lift
        small = np.linalg.norm(force) <= 1e-9 * np.linalg.norm(self.weight)
        return as_floats(np.zeros(3) if small else force)

    @cached_property
    def without_coils(self) -> Potential:
        """The potential of light and gravity alone."""
        return replace(self, coils=None, lift=as_floats(np.zeros(3)), knife_energy=None)

    @cached_property
    def without_force(self) -> Potential:
        """The potential without gravity and levitation."""
        return replace(self, weight=as_floats(np.zeros(3)), lift=as_floats(np.zeros(3)))

    @cached_property
    def length(self) -> float:
        """A length over which the potential changes: the least waist, or what the field needs to bend. [m]"""
        lengths = [float(np.min(beam.waists)) for beam in self.beams]
        coils = self.coils
        if coils is not None and self.shaped:
            # A quadrupole has no length of its own; gravity and kT of a microkelvin give it one.
            lengths.append(coils.bend if coils.bend > 0.0 else 2e-5)
        return min(lengths, default=2e-5)

    @cached_property
    def attractive(self) -> tuple[int, ...]:
        """Indices of the beams that attract."""
        return tuple(int(i) for i in np.flatnonzero(self.shifts < 0.0))

    @cached_property
    def level_outside(self) -> float | None:
        """Energy far from everything, where that is one number: no net force and no field that changes. [J]"""
        if self.shaped or np.any(self.force != 0.0):
            return None
        return self.zeeman_slope * abs(self.coils.bias or 0.0) if self.coils is not None else 0.0

    def energy(self, points: Floats) -> Floats:
        """Potential energy at points (..., 3). [J]"""
        energy, _, _ = self._derivatives(np.asarray(points, dtype=np.float64), 0)
        return energy

    def dark(self, points: Floats) -> Floats:
        """Potential energy at points (..., 3) without the light. [J]"""
        r = np.asarray(points, dtype=np.float64)
        energy: Floats = -(r @ self.force)
        if self.coils is not None and self.zeeman_slope != 0.0:
            energy = energy + self.zeeman_slope * self.coils.magnitude_derivatives(r, 0)[0]
        return energy

    def gradient(self, points: Floats) -> tuple[Floats, Floats]:
        """Energy [J] and its gradient (..., 3) [N] at points (..., 3)."""
        energy, gradient, _ = self._derivatives(np.asarray(points, dtype=np.float64), 1)
        assert gradient is not None
        return energy, gradient

    def hessian(self, points: Floats) -> tuple[Floats, Floats, Floats]:
        """Energy, gradient and Hessian (..., 3, 3) [N/m] at points (..., 3)."""
        energy, gradient, hessian = self._derivatives(np.asarray(points, dtype=np.float64), 2)
        assert gradient is not None
        assert hessian is not None
        return energy, gradient, hessian

    def _derivatives(self, r: Floats, order: int) -> tuple[Floats, Floats | None, Floats | None]:
        energy = -(r @ self.force)
        gradient = np.broadcast_to(-self.force, r.shape) if order > 0 else None
        hessian = np.zeros((*r.shape, 3)) if order > 1 else None
        parts = [(beam.intensity_derivatives, float(k)) for beam, k in zip(self.beams, self.shifts, strict=True)]
        if self.coils is not None and self.zeeman_slope != 0.0:
            parts.append((self.coils.magnitude_derivatives, self.zeeman_slope))
        for derivatives, factor in parts:
            value, first, second = derivatives(r, order)
            energy = energy + factor * value
            if gradient is not None and first is not None:
                gradient = gradient + factor * first
            if hessian is not None and second is not None:
                hessian = hessian + factor * second
        return energy, gradient, hessian

    def magnetic(self, points: Floats) -> Floats:
        """Magnetic part of the energy at points (..., 3), which the knife goes by. [J]"""
        value, _, _ = self.magnetic_derivatives(points, 0)
        return value

    def magnetic_derivatives(self, points: Floats, order: int = 2) -> tuple[Floats, Floats | None, Floats | None]:
        """Magnetic part of the energy, levitation included, its gradient and Hessian up to an order."""
        r = np.asarray(points, dtype=np.float64)
        value = -(r @ self.lift)
        if self.coils is None:
            gradient = np.broadcast_to(-self.lift, r.shape) if order > 0 else None
            return value, gradient, np.zeros((*r.shape, 3)) if order > 1 else None
        strength, first, second = self.coils.magnitude_derivatives(r, order)
        slope = self.zeeman_slope
        return (
            value + slope * strength,
            None if first is None else slope * first - self.lift,
            None if second is None else slope * second,
        )

    def cusps(self) -> tuple[Floats, ...]:
        """Zeros of the field at which a low-field seeker has a minimum without a curvature. [m]

        Near one, U = U0 + (dE/dB)|J r| + f.r with f the gradient of the rest: a minimum where |J^-T f| < dE/dB.
        """
        if self.coils is None or self.zeeman_slope <= 0.0:
            return ()
        found = []
        for point in self.coils.zeros():
            jacobian = self.coils.jacobian(point)
            if abs(np.linalg.det(jacobian)) == 0.0:
                continue
            if np.linalg.norm(np.linalg.solve(jacobian.T, self.smooth_gradient(point))) < self.zeeman_slope:
                found.append(point)
        return tuple(found)

    def smooth_gradient(self, point: Floats) -> Floats:
        """(3,) Gradient at a zero of the field of all but the field. [N]"""
        _, gradient = self.gradient(point)
        # At the zero itself the coils contribute no gradient, see Coils.magnitude_derivatives.
        return gradient

    def magnetic_field(self, points: Floats) -> Floats:
        """Magnitude of the coils' field, levitation apart; zero without coils. [T]"""
        if self.coils is None:
            return as_floats(np.zeros(np.shape(points)[:-1]))
        return self.coils.magnitude_derivatives(np.asarray(points), 0)[0]


def potential_of(trap: Trap, state: State) -> Potential:
    """The potential of a trap for atoms of a state.

    Raises
    ------
    NoPotential : where the polarizability at a beam's wavelength, or the magnetic moment in a field that acts on it, is
        not known.
    """
    from physics.light import polarizability

    mass, beams = state.mass, trap.shining
    lights = {beam.name: polarizability(state.isotope, beam.wavelength) for beam in beams}
    shifts = []
    for beam in beams:
        light = lights[beam.name]
        if light.value is None:
            raise NoPotential(NotTrapped.NO_POLARIZABILITY, beam.name, light)
        shifts.append(-light.value / (2.0 * vacuum_permittivity * speed_of_light))
    down = np.zeros(3) if trap.gravity is None else np.asarray(trap.gravity.direction)
    coils, slope, lift, knife = trap.coils, 0.0, np.zeros(3), None
    if coils is not None:
        if state.zeeman_slope is not None:
            slope = state.zeeman_slope.value
        elif coils.shaped or coils.levitation or coils.knife:
            raise NoPotential(NotTrapped.NO_MOMENT)
        if coils.levitation:
            own = FieldSeeker.LOW if slope > 0.0 else FieldSeeker.HIGH
            lifted = coils.lifts is None or coils.lifts is own
            lift = -down * abs(slope) * coils.levitation * (1.0 if lifted else -1.0)
        number = state.mF if state.mF is not None else state.mJ
        # A knife takes high-field seekers to states that are held no worse; only low-field seekers are cut.
        if coils.knife is not None and slope > 0.0 and number:
            knife = abs(number) * planck * coils.knife
    return Potential(
        mass=mass,
        beams=beams,
        shifts=as_floats(shifts),
        coils=coils,
        zeeman_slope=slope,
        weight=as_floats(mass * standard_gravity * down),
        lift=as_floats(lift),
        knife_energy=knife,
        lights=MappingProxyType(lights),
        stretched=_stretched(state),
    )


def _stretched(state: State) -> bool:
    """Whether all angular momenta of the state point one way."""
    isotope = state.isotope
    number = state.mF if state.mF is not None else state.mJ
    spin = isotope.J if state.mF is None else isotope.J + isotope.nuclear_spin.value
    return number is not None and abs(number) == spin
