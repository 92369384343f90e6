"""The potential around a minimum, place by place: what atoms that come from elsewhere find there, and where those sit
that are there already.

Displacements d are from the minimum, along x, y and z of the laboratory; energies are above the minimum.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np

from physics.checks import Floats, as_floats
from physics.traps.ball import ball_places
from physics.traps.directions import unit_vector


@dataclass(frozen=True, kw_only=True, eq=False)
class Places:
    """Places that stand for the room around a minimum.

    Attributes
    ----------
    displacements : (n, 3). [m]
    energies : (n,). [J] Below which each place is not reached: its potential, or the pass that leads to it.
    lifts : (n,). [J] By which that is above the potential.
    volumes : (n,). [m^3] That each stands for.
    exact_to : float. [J] Energy up to which the volumes are those of a quadrature; above they were counted.
    """

    displacements: Floats
    energies: Floats
    lifts: Floats
    volumes: Floats
    exact_to: float


class Well(Protocol):
    """A minimum and what surrounds it."""

    @property
    def minimum(self) -> Floats | None:
        """(3,) Where it is in the laboratory; None where that is not known. [m]"""

    def energy(self, displacements: Floats) -> Floats:
        """Potential of places (..., 3); infinite where atoms would be outside. [J]"""

    def places(self, depth: float, kT: float) -> Places:
        """Places up to a depth, enough for a cloud of a temperature. [J] [J]"""


THERMAL = 38.0
"""Energy over kT above which a cloud has no atoms that would count."""


@dataclass(frozen=True, kw_only=True, eq=False)
class PowerWell:
    """U = |A d|^p: a harmonic trap, or the zero of a quadrupole, given by its numbers.

    Attributes
    ----------
    matrix : (3, 3). A, in units that make U joules.
    power : float. p, 2 or 1.
    minimum : (3,) or None. [m]
    """

    matrix: Floats
    power: float
    minimum: Floats | None = None

    def energy(self, displacements: Floats) -> Floats:
        squares: Floats = np.sum((displacements @ self.matrix.T) ** 2, axis=-1)
        return squares if self.power == 2.0 else np.sqrt(squares)

    def places(self, depth: float, kT: float) -> Places:
        level = min(depth, THERMAL * kT)
        displacements, volumes = ball_places(as_floats(np.linalg.inv(self.matrix)), level ** (1.0 / self.power))
        return Places(
            displacements=displacements,
            energies=self.energy(displacements),
            lifts=np.zeros(len(volumes)),
            volumes=volumes,
            exact_to=level,
        )


def harmonic_well(mass: float, frequencies: tuple[float, float, float]) -> PowerWell:
    """Of ordinary frequencies along x, y and z [Hz], somewhere in the laboratory."""
    return PowerWell(matrix=np.sqrt(0.5 * mass) * 2.0 * np.pi * np.diag(frequencies), power=2.0)


def quadrupole_well(
    force: float, axis: Sequence[float] | Floats, centre: Sequence[float] | Floats | None = None
) -> PowerWell:
    """Of a force [N] along the strong axis, half of it across, around a place [m] if that is known."""
    along = unit_vector("axis of a quadrupole", axis)
    matrix = 0.5 * force * (np.eye(3) + np.outer(along, along))
    return PowerWell(matrix=matrix, power=1.0, minimum=None if centre is None else as_floats(centre))
