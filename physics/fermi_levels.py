"""Sums over the discrete levels of a three-dimensional oscillator, for ideal fermions of any number.

Energies in kT, from the bottom of the trap; b_i = hbar w_i/kT. An axis is summed in one of two ways:

    coarse, b > 1/2: level by level. Axes of equal frequency are one ladder with degenerate rungs.
    fine, b <= 1/2: by the series of its partition function in powers of b^2, see `physics.fermi_series`.

Where there would be more than a million rungs all axes are taken as fine: then thousands of shells are filled, and what
their steps do to the atom number is below 1e-6. So the cost is bounded, and small in traps with equal frequencies.

References
----------
[1] Poisson's or the Euler-Maclaurin formula, DLMF 2.10; for oscillators see M. Brack and R. K. Bhaduri, Semiclassical
    Physics (1997), ch. 3. Recalled.
[2] D. A. Butts and D. S. Rokhsar, Phys. Rev. A 55, 4346 (1997): fermions in a trap, and its shells.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.fermi_series import (
    FINE,
    centre_series,
    energy_series,
    fermi_series,
    partition_series,
    product_series,
)
from physics.statistics import fermi

_RANGE = 38.0  # e^-38 is nothing beside 1
_MOST = 1_000_000  # rungs
_AT_ONCE = 200_000
_STEPS = 200
_MOST_ALONG = 1500  # levels along an axis of which a profile is made
_SAME = 1e-12  # relative difference of equal frequencies


def finite_size_number(fermi_energy: ArrayLike, level_spacings: ArrayLike) -> Floats:
    """Relative excess dN/N of atoms that local density finds at a given Fermi energy, sum of (hbar w_i)^2/(4 EF^2). [1]

    Parameters
    ----------
    fermi_energy : array_like. [J]
    level_spacings : (..., 3). [J] hbar w_i.

    Valid for kT << EF, and for EF of more than a few level spacings. It is the second term of the series [1].
    """
    share: Floats = np.sum(np.square(level_spacings), axis=-1) / (4.0 * np.square(fermi_energy))
    return share


def finite_size_chemical_potential(fermi_energy: ArrayLike, level_spacings: ArrayLike) -> Floats:
    """Relative error (mu_local - mu)/EF of local density at a given number, minus sum of (hbar w_i)^2/(12 EF^2). [1]"""
    shift: Floats = -finite_size_number(fermi_energy, level_spacings) / 3.0
    return shift


def atoms_with_curvature(log_z: ArrayLike, spacings: Floats) -> Floats:
    """Atoms of one spin state by local density and its first correction: [f_3 - (sum b_i^2/24) f_1]/(b1 b2 b3). [1]

    Parameters
    ----------
    log_z : array_like. mu/kT from the bottom of the trap.
    spacings : (3,). b_i.
    """
    curvature = float(np.sum(np.square(spacings))) / 24.0
    eta = np.asarray(log_z, dtype=np.float64)
    atoms: Floats = (np.asarray(fermi(3.0, eta)) - curvature * np.asarray(fermi(1.0, eta))) / np.prod(spacings)
    return atoms


class FermiLevels:
    """The levels of one trap at one temperature.

    Parameters
    ----------
    spacings : (3,). [1] b_i = hbar w_i/kT.
    highest_log_z : float. [1] The largest mu/kT, from the bottom of the trap, that will be asked for.
    """

    def __init__(self, spacings: Floats, highest_log_z: float) -> None:
        self.spacings = spacings
        self._made: dict[tuple[tuple[int, ...], tuple[int, ...]], Floats] = {}
        self._reach = max(highest_log_z, 0.0) + _RANGE
        self._coarse = tuple(i for i in range(3) if spacings[i] > FINE)
        if _rung_count([spacings[group[0]] for group in _equal(spacings, self._coarse)], self._reach) > _MOST:
            self._coarse = ()
        self._energies, self._counts = self._rungs(self._coarse, ())
        # Atoms in all levels below each rung.
        order = np.argsort(self._energies)
        self._energies, self._counts = self._energies[order], self._counts[order]
        self._below = np.concatenate([[0.0], np.cumsum(self._counts)])

    def _rungs(self, summed: Sequence[int], centred: Sequence[int]) -> tuple[Floats, Floats]:
        """Energies of the levels of coarse axes together, and how many atoms count there when all are filled; of
        centred axes their density at the centre, in units of 1/a."""
        ladders = [_ladder(self.spacings[group[0]], len(group), self._reach) for group in _equal(self.spacings, summed)]
        for group in _equal(self.spacings, centred):
            energies, _ = _ladder(self.spacings[group[0]], len(group), self._reach)
            ladders.append((energies[::2], _densities_at_centre(len(group), len(energies[::2]))))
        return _combined(ladders, self._reach)

    def _fine_sum(self, local: Floats, summed: Sequence[int], centred: Sequence[int], raised: int = 0) -> Floats:
        """Atoms in fine axes at mu/kT, of centred ones in a length lambda at the centre; `raised` by -1 the derivative
        by mu/kT."""
        coefficients = self._coefficients(tuple(summed), tuple(centred))
        order = len(summed) + 0.5 * len(centred) + raised
        return fermi_series(coefficients, order, local) / float(np.prod(self.spacings[list(summed)]))

    def _coefficients(self, summed: tuple[int, ...], centred: tuple[int, ...]) -> Floats:
        """Of the series over fine axes."""
        if (summed, centred) not in self._made:
            ladders = [partition_series(self.spacings[i]) for i in summed]
            centres = [centre_series(self.spacings[i]) for i in centred]
            self._made[summed, centred] = product_series([*ladders, *centres])
        return self._made[summed, centred]

    def _fine(self, axes: Sequence[int]) -> tuple[int, ...]:
        return tuple(i for i in axes if i not in self._coarse)

    def _sum(self, local: Floats, summed: Sequence[int], centred: Sequence[int]) -> Floats:
        """Atoms at each of some values of mu/kT, in all levels of summed axes and at the centre of centred ones, there
        per length lambda each."""
        coarse_summed, coarse_centred = (tuple(i for i in axes if i in self._coarse) for axes in (summed, centred))
        energies, counts = self._rungs(coarse_summed, coarse_centred)
        # lambda = sqrt(2 pi b) a
        counts = counts * math.sqrt(float(np.prod(2.0 * math.pi * self.spacings[list(coarse_centred)])))
        fine = self._fine(summed), self._fine(centred)
        parts = max(_AT_ONCE // energies.size, 1)  # to bound the memory
        sums = [
            self._fine_sum(local[start : start + parts, np.newaxis] - energies, *fine) @ counts
            for start in range(0, local.size, parts)
        ]
        return np.concatenate(sums)

    def atoms(self, log_z: float) -> float:
        """Atoms of one spin state at mu/kT."""
        return float(self._sum(np.array([log_z]), (0, 1, 2), ())[0])

    def _excess(self, log_z: float, atoms: float) -> tuple[float, float]:
        """Atoms beyond a number, and the derivative."""
        if len(self._coarse) < 3:
            local, fine = log_z - self._energies, self._fine((0, 1, 2))
            total = float(self._counts @ self._fine_sum(local, fine, ()))
            return total - atoms, float(self._counts @ self._fine_sum(local, fine, (), -1))
        # Full levels are counted as such: what is left are holes below mu and atoms above it, however few.
        part = slice(*np.searchsorted(self._energies, (log_z - 700.0, log_z + 700.0)))
        distance = self._energies[part] - log_z
        tails = np.exp(-np.abs(distance))
        tails = tails / (1.0 + tails)
        filled = self._below[np.searchsorted(self._energies, log_z)]
        moved = float(self._counts[part] @ np.where(distance < 0.0, -tails, tails))
        return float(filled - atoms) + moved, float(self._counts[part] @ (tails * (1.0 - tails)))

    def log_fugacity(self, atoms: float, start: float, high: float) -> float:
        """mu/kT at which the levels hold so many atoms of one spin state: below `high`, and looked for from `start` on,
        both ways."""
        x, low, width = min(start, high), -math.inf, max(high - start, 1e-3)
        for _ in range(_STEPS):
            miss, slope = self._excess(x, atoms)
            low, high = (low, x) if miss > 0.0 else (x, high)
            step = miss / slope if slope > 0.0 else math.copysign(math.inf, miss)
            proposed = x - step
            if miss == 0.0 or abs(step) < 1e-8:  # squared by the step just made
                return proposed if low <= proposed <= high else x
            if not low < proposed < high:
                width *= 2.0
                proposed = 0.5 * (low + high) if math.isfinite(low) else high - width
                if proposed in (low, high):
                    break
            x = proposed
        return x

    def energies(self, log_z: float) -> Floats:
        """(3,) Energy of all atoms in each axis, zero-point energy included, in kT."""
        result = np.empty(3)
        for axis in range(3):
            others = tuple(i for i in range(3) if i != axis)
            if axis in self._coarse:
                energies, counts = _ladder(self.spacings[axis], 1, self._reach)
                result[axis] = (energies * counts) @ self._sum(log_z - energies, others, ())
                continue
            fine = self._fine(others)
            own = energy_series(partition_series(self.spacings[axis]))
            coefficients = product_series([own, *(partition_series(self.spacings[i]) for i in fine)])
            each = fermi_series(coefficients, len(fine) + 2.0, log_z - self._energies)
            result[axis] = self._counts @ each / float(np.prod(self.spacings[[axis, *fine]]))
        return result

    def central_density(self, log_z: float) -> float:
        """n lambda^3 at the centre. [1]"""
        return float(self._sum(np.array([log_z]), (), (0, 1, 2))[0])

    def resolves(self, axis: int) -> bool:
        """Whether there are few enough levels along an axis for `density`."""
        return bool(self._reach < _MOST_ALONG * self.spacings[axis])

    def density(self, log_z: float, axis: int, squares: Floats, along: int | None = None) -> Floats:
        """n lambda^3 along an axis; with a line of sight, summed over that axis and times lambda^2. [1]

        Parameters
        ----------
        squares : (points,). [1] (x/a)^2, a = sqrt(hbar/(m w)) of the axis.
        """
        energies, _ = _ladder(self.spacings[axis], 1, self._reach)
        summed = () if along is None else (along,)
        centred = tuple(i for i in range(3) if i not in (axis, along))
        filled = self._sum(log_z - energies, summed, centred)
        density: Floats = math.sqrt(2.0 * math.pi * self.spacings[axis]) * _level_densities(filled, squares)
        return density


def _equal(spacings: Floats, axes: Sequence[int]) -> list[list[int]]:
    """The axes, those of equal frequency together."""
    groups: list[list[int]] = []
    for axis in axes:
        for group in groups:
            if abs(spacings[axis] - spacings[group[0]]) < _SAME * spacings[axis]:
                group.append(axis)
                break
        else:
            groups.append([axis])
    return groups


def _rung_count(spacings: Sequence[float], reach: float) -> float:
    """About how many levels there are below an energy, degenerate ones counted once."""
    return math.prod(reach / b + i for i, b in enumerate(spacings, start=1)) / math.factorial(len(spacings))


def _ladder(spacing: float, axes: int, reach: float) -> tuple[Floats, Floats]:
    """Energies and degeneracies of the levels of equal axes."""
    n = np.arange(max(math.floor(reach / spacing) + 1, 1), dtype=np.float64)
    degeneracy = {1: np.ones_like(n), 2: n + 1.0, 3: 0.5 * (n + 1.0) * (n + 2.0)}[axes]
    return (n + 0.5 * axes) * spacing, degeneracy


def _densities_at_centre(axes: int, count: int) -> Floats:
    """Density at the centre of all states of the even levels 0, 2, ... of equal axes, in units of 1/a^axes."""
    # Squares of Hermite functions at 0: coefficients of (1 - t)^(-axes/2), by their generating function.
    m = np.arange(1.0, count)
    coefficients: Floats = math.pi ** (-0.5 * axes) * np.concatenate([[1.0], np.cumprod((m - 1.0 + 0.5 * axes) / m)])
    return coefficients


def _combined(ladders: Sequence[tuple[Floats, Floats]], reach: float) -> tuple[Floats, Floats]:
    """Levels of several ladders together, as far as any can be filled."""
    energies, counts = np.zeros(1), np.ones(1)
    for more, weights in ladders:
        total = (energies[:, np.newaxis] + more).reshape(-1)
        kept = total <= max(reach, float(total.min()))
        energies, counts = total[kept], np.outer(counts, weights).reshape(-1)[kept]
    return energies, counts


def _level_densities(filled: Floats, squares: Floats) -> Floats:
    """Sum of the levels' densities times their filling, at (x/a)^2, in units of 1/a."""
    # Hermite functions by their recursion; psi_n underflows outside its turning point, and there it is nothing.
    x, before = np.sqrt(squares), np.zeros_like(squares)
    psi = math.pi**-0.25 * np.exp(-0.5 * squares)
    total = np.zeros_like(squares)
    for n, share in enumerate(filled.tolist(), start=1):
        total += share * psi * psi
        psi, before = math.sqrt(2.0 / n) * x * psi - math.sqrt((n - 1.0) / n) * before, psi
    return total
