"""Sums over the levels of a trap up to its depth, from its volume curve: how many atoms, with how much energy.

Energies x are in units of the highest that is held, and the levels of a trap are a number A times a function of its
shape: with w the volume over that at the highest energy e_c,

    rho(e) de = A r(x) dx,   r(x) = integral of w(u) (x - u)^(-1/2) du,   A = pi (2 m e_c)^(3/2) W(e_c)/h^3.

At temperature T, eta = e_c/kT, N/A = integral of r(x)/(e^(eta x - ln z) -/+ 1) dx up to x = 1 [1]. Functions take flat
arrays, one element a cloud, and give N over A.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996), eqs. (10) and (A1).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.constants import planck
from physics.curve_shape import TURNS, CurveShape
from physics.harmonic_integrals import legendre
from physics.spline import Spline

# Panels of the levels, in x: where curves may turn, then by halves down to 2^-_HALVINGS, and the rest.
_HALVINGS, _PANEL, _BOTTOM, _INNER = 14, 8, 16, 96
_ENDS = (*(0.5**k for k in range(_HALVINGS, 6, -1)), *TURNS, 1.0)
_LOWEST = 1e-7  # of the tables, below which levels follow the power law of the bottom
_PER_DECADE = 24
_CELLS = 512  # clouds at once, to bound the memory
_FERMI_PANEL = 18
_EDGE = (-36.0, -9.0, 0.0, 9.0, 40.0)  # ends of the panels around a Fermi edge, kT
_STEPS = 60


def level_unit(mass: float, energy: Floats, volume: Floats) -> Floats:
    """A = pi (2 m e_c)^(3/2) W(e_c)/h^3, for the highest energy that is held [J] and the volume there [m^3]. [1]"""
    unit: Floats = math.pi * (2.0 * mass * energy) ** 1.5 * volume / planck**3
    return unit


@dataclass(frozen=True, kw_only=True, eq=False)
class Moments:
    """Sums over the levels, in units of A, energies over e_c. With f the occupation, f' = f (1 +/- f) its derivative by
    ln z.

    number, energy : of f, and of x f
    softness : (3, ...) of f', x f' and x^2 f'
    """

    number: Floats
    energy: Floats
    softness: Floats

    @property
    def rows(self) -> Floats:
        """(5, ...) All of them."""
        return np.concatenate([self.number[np.newaxis], self.energy[np.newaxis], self.softness])

    @classmethod
    def of(cls, rows: Floats) -> Moments:
        """From `rows`."""
        return cls(number=rows[0], energy=rows[1], softness=rows[2:])

    @property
    def energy_of_another(self) -> Floats:
        """dE/dN at fixed T, over e_c. [1]"""
        energy: Floats = self.softness[1] / self.softness[0]
        return energy

    def where(self, known: NDArray[np.bool_]) -> Moments:
        """The same, NaN elsewhere."""
        return Moments(**{name: np.where(known, value, np.nan) for name, value in vars(self).items()})

    def heat_capacity(self, eta: Floats) -> Floats:
        """dE/dT at fixed N, an atom and over k. [1]"""
        spread = self.softness[2] - self.softness[1] ** 2 / self.softness[0]
        capacity: Floats = eta**2 * spread / self.number
        return capacity


@dataclass(frozen=True, kw_only=True, eq=False)
class LevelSums:
    """Levels of a trap of a shape."""

    shape: CurveShape

    def prepare(self) -> None:
        """Work out the tables that sums need, which takes some ten milliseconds, now and not with the first cloud."""
        _ = self._rule, self._pieces, self._saturation

    def density(self, x: Floats) -> Floats:
        """r(x), exactly as the curve has it, for x in (0, 1]. [1]"""
        u, _, weights = _cosines()
        density: Floats = 2.0 * np.sqrt(x) * (self.shape.volume(x[..., np.newaxis] * u) @ weights)
        return density

    @cached_property
    def _rule(self) -> tuple[Floats, Floats]:
        """x, and r(x) with the weights of an integral over x."""
        nodes, widths = [], []
        x, weights = legendre(_PANEL)
        for low, high in pairwise(_ENDS):
            nodes.append(low + (high - low) * x)
            widths.append((high - low) * weights)
        x, weights = legendre(_BOTTOM)
        bottom = 0.5**_HALVINGS
        nodes.append(bottom * x * x)
        widths.append(2.0 * bottom * x * weights)
        at = np.concatenate(nodes)
        return at, self.density(at) * np.concatenate(widths)

    @cached_property
    def _table(self) -> Spline:
        """ln of r and of the number of levels over their power laws, against ln x."""
        count = math.ceil(-math.log10(_LOWEST) * _PER_DECADE)
        x = np.geomspace(_LOWEST, 1.0, count + 1)
        d = self.shape.exponent
        u, t, weights = _cosines()
        below = 4.0 * x**1.5 * (self.shape.volume(x[:, np.newaxis] * u) @ (t * t * weights))
        log = np.log(x)
        logs = [np.log(self.density(x)) - (d + 0.5) * log, np.log(below) - (d + 1.5) * log]
        return Spline(log, np.stack(logs, axis=-1))

    @cached_property
    def _pieces(self) -> Floats:
        """(2, 4, intervals) Coefficients of the cubics of the table: its places, at equal steps, need no search."""
        return np.ascontiguousarray(np.moveaxis(self._table.pieces, 0, -1).swapaxes(0, 1))

    def _tabulated(self, x: Floats, column: int) -> Floats:
        log = np.log(np.maximum(x, 1e-300))
        lowest, power = math.log(_LOWEST), self.shape.exponent + 0.5 + column
        a, b, c, d = self._pieces[column]
        step = -lowest / a.size
        along = np.maximum(log, lowest) - lowest
        index = np.minimum((along / step).astype(np.intp), a.size - 1)
        t = along - step * index
        found: Floats = np.exp(((d[index] * t + c[index]) * t + b[index]) * t + a[index] + power * log)
        return found

    def levels_below(self, x: Floats) -> Floats:
        """Number of levels below an energy, in units of A, for x in [0, 1]; NaN beyond. [1]"""
        return np.where((x >= 0.0) & (x <= 1.0 + 1e-12), self._tabulated(np.clip(x, 0.0, 1.0), 1), np.nan)

    def energy_of_levels(self, number: Floats) -> Floats:
        """x below which there are so many levels; NaN where there are not so many. [1]"""
        target = np.log(np.asarray(number, dtype=np.float64))
        known = target <= math.log(float(self.levels_below(np.ones(1))[0])) + 1e-13
        y = np.where(known, 0.0, np.nan)
        low, high = np.full_like(y, -np.inf), np.zeros_like(y)
        for _ in range(_STEPS):
            inside = np.maximum(y, math.log(_LOWEST))
            slope = self._table.slopes(inside)[..., 1] * (y > math.log(_LOWEST)) + self.shape.exponent + 1.5
            miss = self._table(inside)[..., 1] + (self.shape.exponent + 1.5) * y - target
            low, high = np.where(miss < 0.0, y, low), np.where(miss < 0.0, high, y)
            new = np.clip(y - miss / slope, low, high)
            if not np.any(np.abs(new - y) > 1e-14):
                break
            y = new
        found: Floats = np.exp(y)
        return found

    # Bosons, of alpha = -ln z >= 0.

    def bosons(self, eta: Floats, alpha: Floats) -> Floats:
        """N/A. [1]"""
        x, levels = self._rule
        with np.errstate(over="ignore"):
            return _in_parts(lambda e, a: (1.0 / np.expm1(e * x + a)) @ levels, eta, alpha)

    def boson_moments(self, eta: Floats, alpha: Floats) -> Moments:
        """N and E, and their derivatives; those by ln z are infinite or nearly so at alpha = 0."""
        x, levels = self._rule

        def sums(e: Floats, a: Floats) -> Floats:
            with np.errstate(over="ignore"):
                f = 1.0 / np.expm1(e * x + a)
            soft = f * (1.0 + f)
            return np.stack([f @ levels, f @ (levels * x), soft @ levels, soft @ (levels * x), soft @ (levels * x * x)])

        return Moments.of(_in_parts(sums, eta, alpha))

    def boson_alpha(self, eta: Floats, number: Floats) -> Floats:
        """-ln z of thermal bosons of a given N/A; 0 where they are saturated, or beyond."""
        x, levels = self._rule
        classical = np.exp(-np.multiply.outer(eta, x)) @ levels
        alpha = np.maximum(np.log(classical / number), 0.0)  # z of a Bose gas is smaller than that of a classical one
        active = np.arange(alpha.size)

        def both(e: Floats, a: Floats) -> Floats:
            with np.errstate(over="ignore"):
                f = 1.0 / np.expm1(e * x + a)
            return np.stack([f @ levels, (f * (1.0 + f)) @ levels])

        for _ in range(_STEPS):
            held, slope = _in_parts(both, eta[active], alpha[active])
            # ln N against ln(e^alpha - 1) would be straighter; N itself is convex, so that no step passes the root.
            step = np.log(held / number[active]) * held / slope
            new = np.maximum(alpha[active] + step, 0.0)
            moved = np.abs(new - alpha[active])
            alpha[active] = new
            active = active[(moved > 1e-9 * (1.0 + new)) & np.isfinite(new)]
            if not active.size:
                break
        return alpha

    # Fermions, of ln z.

    def _fermi_rule(self, eta: Floats, log_z: Floats) -> tuple[Floats, Floats]:
        """x and r(x) with the weights, (cells, nodes), by panels around the Fermi edge."""
        edge = np.clip(log_z, 0.0, eta)
        ends = [np.zeros_like(eta), *(np.clip(edge + step, 0.0, eta) for step in _EDGE)]
        t, weights = legendre(_FERMI_PANEL)
        nodes, widths = [], []
        for low, high in pairwise(ends):
            a, b = np.sqrt(low / eta)[:, np.newaxis], np.sqrt(high / eta)[:, np.newaxis]
            root = a + (b - a) * t
            nodes.append(root * root)
            widths.append(2.0 * (b - a) * root * weights)
        x = np.concatenate(nodes, axis=-1)
        return x, self._tabulated(x, 0) * np.concatenate(widths, axis=-1)

    def fermion_moments(self, eta: Floats, log_z: Floats) -> Moments:
        """N and E, and their derivatives."""

        def sums(e: Floats, z: Floats) -> Floats:
            x, levels = self._fermi_rule(e[:, 0], z[:, 0])
            f = _fermi(e * x - z)
            soft = f * (1.0 - f)
            return np.stack([np.sum(levels * part, axis=-1) for part in (f, x * f, soft, x * soft, x * x * soft)])

        return Moments.of(_in_parts(sums, eta, log_z))

    def fermi_log_z(self, eta: Floats, number: Floats) -> Floats:
        """ln z of fermions of a given N/A; NaN where there are not so many levels."""
        x, levels = self._rule
        most = float(self.levels_below(np.ones(1))[0])
        log_z = np.where(number < most, np.log(number / (np.exp(-np.multiply.outer(eta, x)) @ levels)), np.nan)
        filled = eta * self.energy_of_levels(number)
        # A degenerate gas starts from its Fermi energy, a classical one from its Boltzmann factor, which is too low.
        log_z = np.where(filled > 2.0, np.maximum(np.minimum(log_z, filled), filled - 5.0), log_z)
        low, high = np.full_like(log_z, -np.inf), np.full_like(log_z, np.inf)
        active = np.flatnonzero(np.isfinite(log_z))
        for _ in range(_STEPS):
            if not active.size:
                break
            at = self.fermion_moments(eta[active], log_z[active])
            here = log_z[active]
            miss = np.log(at.number / number[active])
            low[active] = np.where(miss < 0.0, here, low[active])
            high[active] = np.where(miss < 0.0, high[active], here)
            power = self.shape.exponent + 1.5
            empty, wanted = most - at.number, most - number[active]
            with np.errstate(divide="ignore", invalid="ignore"):
                # In a classical gas z goes as N, in a degenerate one mu as a root of N, and where the trap is nearly
                # full its empty levels change by a factor.
                rising = -miss * at.number / at.softness[0]
                rooted = power * at.number * np.expm1(-miss / power) / at.softness[0]
                emptying = np.log(empty / wanted) * empty / at.softness[0]
            step = np.where(wanted < 0.3 * most, emptying, np.where(filled[active] > 2.0, rooted, rising))
            new = here + step
            bounded = np.isfinite(low[active]) & np.isfinite(high[active])
            middle = np.where(bounded, 0.5 * (low[active] + high[active]), here - np.sign(miss) * (1.0 + np.abs(here)))
            inside = (new >= low[active]) & (new <= high[active]) & np.isfinite(new)
            new = np.where(inside, new, middle)
            moved = np.abs(new - here)
            log_z[active] = new
            active = active[moved > 1e-6 * (1.0 + np.abs(new))]
        return log_z

    # Classical gas.

    def classical(self, eta: Floats) -> tuple[Floats, Floats]:
        """N/A at z = 1, and E/N over e_c. [1]"""
        x, levels = self._rule

        def sums(e: Floats, _: Floats) -> Floats:
            f = np.exp(-e * x)
            return np.stack([f @ levels, f @ (levels * x)])

        number, energy = _in_parts(sums, eta, eta)
        return number, energy / number

    # Saturation of bosons.

    @cached_property
    def _saturation(self) -> Spline:
        """ln of the saturated N/A times eta^(d + 3/2), against ln eta."""
        eta = np.geomspace(1e-4, 2.0**_HALVINGS, 240)
        full = self.bosons(eta, np.zeros_like(eta))
        return Spline(np.log(eta), (np.log(full) + (self.shape.exponent + 1.5) * np.log(eta))[:, np.newaxis])

    def saturated(self, eta: Floats) -> Floats:
        """The most thermal bosons, N/A. [1]"""
        return self.bosons(eta, np.zeros_like(eta))

    def eta_at_saturation(self, number: Floats) -> Floats:
        """eta at which a given N/A saturates: e_c over the critical temperature. [1]"""
        target = np.log(number)
        power = self.shape.exponent + 1.5
        y = np.zeros_like(target)
        for _ in range(_STEPS):
            slope = self._saturation.slopes(y)[..., 0] - power
            step = (self._saturation(y)[..., 0] - power * y - target) / slope
            y = y - np.clip(step, -3.0, 3.0)
            if np.all(np.abs(step) < 1e-13):
                break
        # One step of Newton's method with the sum itself takes the error of the table away.
        full = self.saturated(np.exp(y))
        y = y - (np.log(full) - target) / (self._saturation.slopes(y)[..., 0] - power)
        eta: Floats = np.exp(y)
        return eta


@cache
def _cosines() -> tuple[Floats, Floats, Floats]:
    """u = 1 - t^2, t, and weights of an integral over t from 0 to 1. With t a sine, curves start smoothly."""
    x, weights = legendre(_INNER)
    angle = 0.5 * math.pi * x
    return np.cos(angle) ** 2, np.sin(angle), 0.5 * math.pi * weights * np.cos(angle)


def _fermi(energy: Floats) -> Floats:
    with np.errstate(over="ignore"):
        occupation: Floats = 1.0 / (np.exp(energy) + 1.0)
    return occupation


def _in_parts(function: Callable[[Floats, Floats], Floats], eta: Floats, other: Floats) -> Floats:
    """A function of columns of two arrays, over any number of cells; its answers run along the last axis."""
    parts = []
    for start in range(0, max(eta.size, 1), _CELLS):
        part = slice(start, start + _CELLS)
        parts.append(function(eta[part, np.newaxis], other[part, np.newaxis]))
    found: Floats = np.concatenate(parts, axis=-1)
    return found
