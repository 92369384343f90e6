"""Density of a cloud in a real trap along an axis through its minimum, and its column density.

Local density: the density at a place is a function of the potential there. Atoms are where the potential rises to less
than the highest energy that is held on the straight way from the axis, so that what lies beyond a pass does not count.
An ideal condensate has the shape of the ground level of the oscillator at the bottom; it is unknown in a trap without
frequencies.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.held_densities import HeldBose, HeldFermi
from physics.profiles import Profile
from physics.real_equilibria import RealEquilibrium
from physics.real_hartree_fock import RealHartreeFock
from physics.real_ideal import RealIdealBose, RealIdealFermi
from physics.real_semi_ideal import RealSemiIdeal
from physics.traps.survey import Survey
from physics.truncated_boltzmann import incomplete_gamma

_TABLE = 800  # places in sqrt(V) between which densities are interpolated
_SIGHT = 241  # along a line of sight
_FAR = 9.0  # kT above mu beyond which hardly an atom is
_SEARCH = np.concatenate([[0.0], np.geomspace(1e-9, 0.03, 1200)])  # [m]


@dataclass(frozen=True, kw_only=True, eq=False)
class RealProfiles:
    """Profiles of a single cloud in a surveyed trap.

    Attributes
    ----------
    equilibrium : RealEquilibrium of one cloud.
    survey : of its trap.

    Raises
    ------
    ValueError : for an array of clouds, or a survey without a potential.
    """

    equilibrium: RealEquilibrium
    survey: Survey

    def __post_init__(self) -> None:
        if self.equilibrium.cloud.shape:
            raise ValueError(f"a profile is of one cloud, got clouds of shape {self.equilibrium.cloud.shape}")
        if self.survey.potential is None or self.survey.energy_at_minimum is None:
            raise ValueError("a profile in a real trap needs the survey of one that holds atoms")

    @property
    def axes(self) -> Floats:
        """Rows: unit vectors of the normal modes; x, y and z where there are none."""
        return np.eye(3) if self.survey.axes is None else np.asarray(self.survey.axes)

    @cached_property
    def _held(self) -> float:
        return float(self.equilibrium.trap.held)

    def potential(self, offsets: Floats) -> Floats:
        """V at offsets (..., 3) from the minimum along the axes, from the bottom. [J]"""
        assert self.survey.potential is not None
        assert self.survey.energy_at_minimum is not None
        places = self.survey.minimum + offsets.reshape(-1, 3) @ self.axes
        energy = self.survey.potential.energy(places) - self.survey.energy_at_minimum
        found: Floats = np.maximum(energy, 0.0).reshape(offsets.shape[:-1])
        return found

    def reach(self, axis: int, above: float = _FAR) -> float:
        """Distance along an axis at which the potential is `above` kT over mu: the cloud is faint, or ends. [m]"""
        solved = self.equilibrium
        kT = float(solved.thermal_energy)
        height = max(float(np.nan_to_num(solved.log_fugacity)), 0.0)
        limit = min(self._held, (height + above) * kT)
        reach = 0.0
        for sign in (-1.0, 1.0):
            beyond = self.potential(_along(axis, sign * _SEARCH)) > limit
            reach = max(reach, float(_SEARCH[np.argmax(beyond)]) if np.any(beyond) else float(_SEARCH[-1]))
        return reach

    @cached_property
    def _table(self) -> tuple[Floats, Floats, Floats, Floats]:
        """sqrt(V), and there the densities of thermal atoms, condensate and a classical cloud; [1/m^3] but for the
        first."""
        solved, root = self.equilibrium, np.linspace(0.0, math.sqrt(self._held), _TABLE)
        eta = float(solved._eta)
        u = eta * (root / root[-1]) ** 2
        thermal, condensate = _densities(solved, u)
        classical = solved._classical
        peak = float(solved._volume_number / classical.number)
        cut = peak * np.exp(-u) * incomplete_gamma(1.5, eta - u)
        volume = float(solved.thermal_wavelength) ** 3
        return root, thermal / volume, condensate / volume, cut / volume

    def _at(self, energies: Floats) -> tuple[Floats, Floats, Floats]:
        root, *densities = self._table
        V = np.sqrt(energies)
        thermal, condensate, classical = (np.interp(V, root, density, right=0.0) for density in densities)
        return thermal, condensate, classical

    def _ground_level(self, axis: int, x: Floats, along: int | None) -> Floats:
        """Condensate of an ideal gas. [1/m^3], or [1/m^2] along a line of sight"""
        atoms, lengths = float(self.equilibrium.condensate_atoms), self.equilibrium.oscillator_lengths
        if not atoms > 0.0:
            return np.zeros_like(x)
        axes = [i for i in range(3) if i != along]
        density: Floats = atoms * np.exp(-((x / lengths[axis]) ** 2)) / np.prod(math.sqrt(math.pi) * lengths[axes])
        return density

    def _profile(self, axis: int, x: Floats, along: int | None, parts: tuple[Floats, Floats, Floats]) -> Profile:
        thermal, condensate, classical = parts
        solved = self.equilibrium
        if isinstance(solved, RealIdealBose) and not isinstance(solved, RealSemiIdeal):
            condensate = self._ground_level(axis, x, along)
        return Profile(
            positions=x, thermal=thermal, condensate=condensate, total=thermal + condensate, classical=classical
        )

    def density(self, axis: int, positions: ArrayLike) -> Profile:
        """Density along an axis. [1/m^3] `positions`: (points,), rising. [m] From the minimum."""
        x = np.asarray(positions, dtype=np.float64)
        energies = _connected(self.potential(_along(axis, x)), x, self._held)
        return self._profile(axis, x, None, self._at(energies))

    def column(self, axis: int, positions: ArrayLike, along: int) -> Profile:
        """Density summed along another axis. [1/m^2]"""
        x = np.asarray(positions, dtype=np.float64)
        y = self.reach(along) * np.linspace(-1.0, 1.0, _SIGHT) ** 3  # dense where the cloud is
        offsets = _along(axis, x)[:, np.newaxis, :] + _along(along, y)
        energies = self.potential(offsets)
        on_axis = _connected(energies[:, _SIGHT // 2], x, self._held)
        energies = np.stack([_connected(row, y, self._held) for row in energies])
        energies[~np.isfinite(on_axis)] = np.inf
        thermal, condensate, classical = (np.asarray(np.trapezoid(part, y, axis=-1)) for part in self._at(energies))
        return self._profile(axis, x, along, (thermal, condensate, classical))


def _along(axis: int, x: Floats) -> Floats:
    offsets = np.zeros((*x.shape, 3))
    offsets[..., axis] = x
    return offsets


def _connected(energies: Floats, x: Floats, held: float) -> Floats:
    """Energies along a line, infinite from where they first reach the highest that is held, on both sides of x = 0."""
    out = energies >= held
    right, left = np.logical_or.accumulate(out & (x >= 0.0)), np.logical_or.accumulate((out & (x <= 0.0))[::-1])[::-1]
    return np.where(right | left | out, np.inf, energies)


def _densities(solved: RealEquilibrium, u: Floats) -> tuple[Floats, Floats]:
    """n lambda^3 of thermal atoms and of the condensate where the potential is u kT."""
    eta, m = float(solved._eta), float(solved.log_fugacity)
    nothing = np.zeros_like(u)
    if math.isnan(m):
        return np.full_like(u, np.nan), np.full_like(u, np.nan)
    top = np.array([eta - m])
    if isinstance(solved, RealIdealFermi):
        return HeldFermi(top=top).density((u - m)[np.newaxis])[0], nothing
    if isinstance(solved, RealHartreeFock):
        return solved.local_densities(u)
    gas = HeldBose(top=top)
    if isinstance(solved, RealSemiIdeal) and m > 0.0:
        scale = float(solved._density_scale)
        return gas.density(np.abs(u - m)[np.newaxis])[0], scale * np.maximum(m - u, 0.0)
    return gas.density(np.maximum(u - m, 0.0)[np.newaxis])[0], nothing
