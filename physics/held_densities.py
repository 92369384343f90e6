"""Densities of quantum gases of which only the atoms below an energy are held: incomplete Bose and Fermi functions.

Where the bottom of the local potential lies v kT above mu, and atoms of more than `top` kT above mu are gone,

    n lambda^3 = (2/sqrt(pi)) integral from v to top of sqrt(E - v)/(e^E -/+ 1) dE,

which is g_3/2(e^-v) or f_3/2(e^-v) where nothing is cut off [1]. Of bosons the part above the top is taken from the
complete function. There E = top + s, so that the occupation is the same wherever the place, and a place brings in a
square root only. Fermions, and bosons where hardly anything is held, are summed up from the bottom.

Energies in kT. `top` has the shape of the clouds, v one more axis, of places.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996): the cut in phase space.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from physics.checks import Floats
from physics.harmonic_integrals import legendre
from physics.statistics import bose

_TWO_OVER_ROOT_PI = 2.0 / math.sqrt(math.pi)
_TAIL, _TAIL_REACH = 16, 5.8  # nodes above the top, and sqrt(s) beyond which nothing is left
_BOTTOM = 24  # nodes of what is summed from the bottom
_FEW = 1.0  # tops below which little is held
_NEAR = 0.5  # places so close below the top that what is held there is a small difference
_NOTHING_CUT = 32.0
_PANEL = 16
_WIDE, _NARROW = 36.0, 9.0  # of the Fermi edge, kT


@dataclass(frozen=True, kw_only=True, eq=False)
class HeldBose:
    """Bosons below an energy `top`, (cells,): 0 or more."""

    top: Floats

    def _tail(self, y: Floats, orders: tuple[float, ...]) -> list[Floats]:
        """integral of (y + s)^order/(e^(top + s) - 1) over s > 0, for each order."""
        x, weights = legendre(_TAIL)
        root = _TAIL_REACH * x
        s = root * root
        with np.errstate(over="ignore", divide="ignore"):
            occupied = (2.0 * _TAIL_REACH * root * weights / np.expm1(self.top[:, np.newaxis] + s))[..., np.newaxis]
        above = y[..., np.newaxis] + s
        distance = np.sqrt(above)
        tails = []
        for order in orders:
            power = distance if order == 0.5 else 1.0 / distance if order < 0.0 else above * distance
            tails.append(np.matmul(power, occupied)[..., 0])
        return tails

    def _sums(self, v: Floats, orders: tuple[float, ...]) -> list[Floats]:
        """integral of (E - v)^order/(e^E - 1) from v to the top, for each order."""
        y = np.maximum(self.top[:, np.newaxis] - v, 0.0)
        found = [math.gamma(order + 1.0) * np.asarray(bose(order + 1.0, v)) for order in orders]
        cut = self.top < _NOTHING_CUT
        if np.any(cut):
            for total, tail in zip(found, HeldBose(top=self.top[cut])._tail(y[cut], orders), strict=True):
                total[cut] -= tail
            near = (cut[:, np.newaxis] & (y < _NEAR)) | (self.top < _FEW)[:, np.newaxis]
            if np.any(near):
                x, weights = legendre(_BOTTOM)
                p = y[near][:, np.newaxis] * x * x
                with np.errstate(divide="ignore", invalid="ignore"):
                    filled = 1.0 / np.expm1(v[near][:, np.newaxis] + p)
                    for total, order in zip(found, orders, strict=True):
                        shares = np.where(p > 0.0, p**order * filled, 0.0)
                        total[near] = 2.0 * y[near] * (shares @ (x * weights))
        return [np.where(y > 0.0, np.maximum(total, 0.0), 0.0) for total in found]

    def density(self, v: Floats) -> Floats:
        """n lambda^3, (cells, places). [1]"""
        return _TWO_OVER_ROOT_PI * self._sums(v, (0.5,))[0]

    def density_and_fall(self, v: Floats) -> tuple[Floats, Floats]:
        """n lambda^3, and -d(n lambda^3)/dv, which is g_1/2 without a cut. [1]"""
        density, fall = self._sums(v, (0.5, -0.5))
        return _TWO_OVER_ROOT_PI * density, 0.5 * _TWO_OVER_ROOT_PI * fall

    def fall(self, v: Floats) -> Floats:
        """The latter. [1]"""
        return 0.5 * _TWO_OVER_ROOT_PI * self._sums(v, (-0.5,))[0]

    def kinetic(self, v: Floats) -> Floats:
        """Kinetic energy times lambda^3 per volume, in kT: (3/2) g_5/2 without a cut. [1]"""
        return _TWO_OVER_ROOT_PI * self._sums(v, (1.5,))[0]


@dataclass(frozen=True, kw_only=True, eq=False)
class HeldFermi:
    """Fermions below an energy `top`, (cells,): of either sign, for mu may be above all that is held."""

    top: Floats

    def _sums(self, v: Floats, orders: tuple[float, ...]) -> list[Floats]:
        y = np.maximum(self.top[:, np.newaxis] - v, 0.0)
        edge = np.clip(-v, 0.0, y)
        # In sqrt(p), split around the Fermi edge.
        ends = [np.zeros_like(y), *(np.sqrt(np.clip(edge + step, 0.0, y)) for step in (-_NARROW, 0.0, _NARROW, _WIDE))]
        x, weights = legendre(_PANEL)
        totals = [np.zeros_like(y) for _ in orders]
        for low, high in pairwise(ends):
            root = low[..., np.newaxis] + (high - low)[..., np.newaxis] * x
            p = root * root
            with np.errstate(over="ignore"):
                filled = 1.0 / (np.exp(v[..., np.newaxis] + p) + 1.0)
            for total, order in zip(totals, orders, strict=True):
                power = filled if order < 0.0 else filled * p if order < 1.0 else filled * p * p
                total += 2.0 * (high - low) * (power @ weights)
        return totals

    def density(self, v: Floats) -> Floats:
        """n lambda^3, (cells, places). [1]"""
        return _TWO_OVER_ROOT_PI * self._sums(v, (0.5,))[0]

    def density_and_fall(self, v: Floats) -> tuple[Floats, Floats]:
        """n lambda^3, and -d(n lambda^3)/dv, which is f_1/2 without a cut. [1]"""
        density, fall = self._sums(v, (0.5, -0.5))
        return _TWO_OVER_ROOT_PI * density, 0.5 * _TWO_OVER_ROOT_PI * fall

    def kinetic(self, v: Floats) -> Floats:
        """Kinetic energy times lambda^3 per volume, in kT: (3/2) f_5/2 without a cut. [1]"""
        return _TWO_OVER_ROOT_PI * self._sums(v, (1.5,))[0]
