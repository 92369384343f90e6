"""The shape of a trap's volume curve W(U), for clouds that are cut off at its depth.

Every integral over a large cloud is one over dW. Here U is in units of the depth and W in units of its value there; the
scales are kept beside it. The volume curve of a trap in the laboratory is in `physics.traps.volume_curve`.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np

from physics.checks import Floats, as_floats, require_positive
from physics.harmonic_integrals import legendre
from physics.spline import Spline
from physics.truncated_boltzmann import HARMONIC

# Panels: halves down to 2^-(_HALVINGS + 1), cut where the curve has points, then the power law of the bottom.
_HALVINGS = 14
_RIM, _BOTTOM = 24, 24
_LEAST = 1e-30
_BETWEEN, _ORDER, _TOLERANCE = 6, 8, 1e-6  # of the panels between turns
_NODES = ((0.05, 3), (0.1, 4), (0.18, 6), (0.35, 8), (math.inf, 12))
"""Nodes of panels, by the change of ln U along them, or a fifth of that of ln W, up to which they do."""

TURNS = (0.01, 0.02, 0.035, 0.05, 0.07, 0.1, 0.15, 0.2, 0.3, 0.4, 0.45, 0.5, 0.55, 0.6, 0.65, 0.7, 0.8, 0.9, 0.96)
"""Energies over the depth between which panels of a quadrature lie where a curve may turn: where arms of crossed beams
open, or a further minimum joins."""


@dataclass(frozen=True, kw_only=True, eq=False)
class CurveShape:
    """Shape of a volume curve.

    Attributes
    ----------
    energies : (n,). [1] U over the depth, increasing, from above 0 to 1. None for a pure power law.
    volumes : (n,). [1] W over its value at the depth, increasing to 1. None for a pure power law.
    exponent : float. [1] d of W ~ U^d below the first of the energies, or everywhere: 3/2 at a harmonic bottom.

    Raises
    ------
    ValueError : for an exponent that is negative, or curves that do not increase to 1 at the depth.
    """

    energies: Any = None
    volumes: Any = None
    exponent: float = HARMONIC

    _spline: Spline | None = field(init=False, repr=False, default=None)

    def __post_init__(self) -> None:
        if not 0.0 < self.exponent < math.inf:
            raise ValueError(f"exponent of a volume curve must be positive and finite, got {self.exponent:g}")
        if (self.energies is None) != (self.volumes is None):
            raise ValueError("a volume curve needs energies and volumes, got only one of them")
        if self.energies is None:
            return
        u, w = as_floats(self.energies), as_floats(self.volumes)
        if u.ndim != 1 or u.shape != w.shape or len(u) < 2:
            raise ValueError(
                f"energies and volumes must be lists of one length, 2 or more, got shapes {u.shape} and {w.shape}"
            )
        require_positive("energy of a volume curve", u, "")
        require_positive("volume of a volume curve", w, "")
        for name, values in (("energies", u), ("volumes", w)):
            if np.any(np.diff(values) <= 0.0):
                raise ValueError(f"{name} of a volume curve must increase")
            if abs(values[-1] - 1.0) > 1e-12:
                raise ValueError(f"{name} of a volume curve must end at 1, at the depth, got {values[-1]:g}")
        object.__setattr__(self, "energies", u)
        object.__setattr__(self, "volumes", w)
        spline = Spline(np.log(u), np.log(w)[:, np.newaxis], monotone=True)
        object.__setattr__(self, "_spline", spline)

    @property
    def power_law(self) -> bool:
        """Whether the curve is one power law all the way."""
        return self._spline is None

    def volume(self, energy: Floats) -> Floats:
        """W over its value at the depth at energies between 0 and 1. [1]"""
        u = np.asarray(energy, dtype=np.float64)
        if self._spline is None:
            powers: Floats = u**self.exponent
            return powers
        first, lowest = float(self.energies[0]), float(self.volumes[0])
        inside = np.exp(self._spline(np.log(np.maximum(u, first)))[..., 0])
        return np.where(u < first, lowest * (u / first) ** self.exponent, inside)

    def energy(self, volume: Floats) -> Floats:
        """U over the depth at which W has a share, between 0 and 1, of its value there. [1]"""
        w = np.asarray(volume, dtype=np.float64)
        if self._spline is None:
            powers: Floats = w ** (1.0 / self.exponent)
            return powers
        first, lowest = float(self.energies[0]), float(self.volumes[0])
        # Newton steps on the logarithms, from the straight line between the points.
        target = np.log(np.maximum(w, lowest))
        place = np.interp(target, np.log(self.volumes), np.log(self.energies))
        for _ in range(6):
            step = (target - self._spline(place)[..., 0]) / np.maximum(self._spline.slopes(place)[..., 0], 1e-3)
            place = np.clip(place + step, math.log(first), 0.0)
        return np.where(w < lowest, first * (w / lowest) ** (1.0 / self.exponent), np.exp(place))

    def volume_and_slope(self, energy: Floats) -> tuple[Floats, Floats]:
        """`volume`, and dW/dU, at energies between 0 and 1. [1]"""
        u = np.maximum(energy, _LEAST)
        if self._spline is None:
            w = u**self.exponent
            return w, self.exponent * w / u
        first, lowest = float(self.energies[0]), float(self.volumes[0])
        log_w, growth = (each[..., 0] for each in self._spline.with_slopes(np.log(np.maximum(u, first))))
        below = u < first
        w = np.exp(log_w)
        if np.any(below):
            w = np.where(below, lowest * (u / first) ** self.exponent, w)
            growth = np.where(below, self.exponent, growth)
        return w, w * growth / u

    def _growth(self, energy: Floats) -> Floats:
        """d ln W/d ln U."""
        if self._spline is None:
            return np.full_like(energy, self.exponent)
        first = float(self.energies[0])
        inside = self._spline.slopes(np.log(np.maximum(energy, first)))[..., 0]
        return np.where(energy < first, self.exponent, inside)

    @cached_property
    def turns(self) -> Floats:
        """(panels - 1,) Energies between which quadratures of eight nodes in sqrt(U), or of the like, integrate W.

        Their error is below `_TOLERANCE` of the integral over each panel, evenly weighted or rising with U, but for
        panels between two points of the curve. Where arms of crossed beams open, or a further minimum joins, panels
        are narrow.
        """
        if self.power_law:
            return np.empty(0)
        points = np.concatenate([[0.0], self.energies])
        x, weights = legendre(_BETWEEN)
        width, power = np.diff(points), np.arange(2)[:, np.newaxis, np.newaxis]
        u = points[:-1, np.newaxis] + np.multiply.outer(width, x)
        each = (self.volume(u) * u**power) @ weights * width
        first = float(self.energies[0])
        each[:, 0] = self.volumes[0] * first ** (power[:, 0, 0] + 1.0) / (self.exponent + 1.0 + power[:, 0, 0])
        below = np.concatenate([np.zeros((2, 1)), np.cumsum(each, axis=-1)], axis=-1)
        x, weights = legendre(_ORDER)

        def even(first: int, last: int) -> bool:
            low, width = math.sqrt(points[first]), math.sqrt(points[last]) - math.sqrt(points[first])
            root = low + width * x
            u = root * root
            found = (self.volume(u) * u ** power[:, 0]) @ (2.0 * width * weights * root)
            exact = below[:, last] - below[:, first]
            miss, rising = found - exact, exact[1] - points[first] * exact[0]
            return bool(
                abs(miss[0]) < _TOLERANCE * exact[0] and abs(miss[1] - points[first] * miss[0]) < _TOLERANCE * rising
            )

        # From the top down, each panel as wide as it may be: by steps that double, and then halve.
        last, ends = points.size - 1, []
        while not even(0, last):
            first, step = last - 1, 1
            while step and first:
                if first - step > 0 and even(first - step, last):
                    first, step = first - step, 2 * step
                else:
                    step //= 2
            if not first:
                break
            ends.append(points[first])
            last = first
        return as_floats(ends[::-1])

    @cached_property
    def measure(self) -> tuple[Floats, Floats]:
        """Energies U and weights dW of a quadrature from 0 to 1 that resolves e^(-eta U) up to eta of some thousands
        and the square root with which densities end at the depth."""
        return self.measure_below(1.0)

    def measure_below(self, limit: float) -> tuple[Floats, Floats]:
        """The same from 0 to another limit, at most 1."""
        ends = 0.5 ** np.arange(_HALVINGS + 2.0)
        if self._spline is not None:
            # Between its points the curve is one cubic, at them it bends.
            ends = np.append(ends, self.energies[(self.energies > ends[-1] * limit) & (self.energies < limit)] / limit)
        ends = np.unique(ends)
        low, high = ends[:-1], ends[1:]
        x, w = legendre(_RIM)
        # 1 - U goes as v^2 in the last panel, which takes away its half-integer powers.
        width = high[-1] - low[-1]
        nodes, weights = [high[-1] - width * x * x], [2.0 * width * x * w]
        changes = np.maximum(np.diff(np.log(ends)), 0.2 * np.diff(np.log(self.volume(limit * ends))))[:-1]
        least = 0.0
        for most, count in _NODES:
            these = np.flatnonzero((changes > least) & (changes <= most))
            x, w = legendre(count)
            widths = (high - low)[these, np.newaxis]
            nodes.append((low[these, np.newaxis] + widths * x).ravel())
            weights.append((widths * w).ravel())
            least = most
        x, w = legendre(_BOTTOM)
        nodes.append(ends[0] * x * x)
        weights.append(2.0 * ends[0] * x * w)
        u, du = limit * np.concatenate(nodes), limit * np.concatenate(weights)
        return as_floats(u), as_floats(self.slope(u) * du)

    def slope(self, energy: Floats) -> Floats:
        """dW/dU at energies above 0 and up to 1. [1]"""
        slope: Floats = self.volume(energy) * self._growth(energy) / energy
        return slope

    @cached_property
    def rim_levels(self) -> float:
        """s = integral of (1 - U)^(3/2) dW: levels below the depth over those of a box of that volume. [1]"""
        u, dw = self.measure
        return float(np.sum(dw * (1.0 - u) ** 1.5))

    @cached_property
    def highest_energy(self) -> float:
        """Mean energy over the depth of a cloud that fills all levels evenly: none that is cut has more. [1]"""
        u, dw = self.measure
        return float(np.sum(dw * (u * (1.0 - u) ** 1.5 + 0.6 * (1.0 - u) ** 2.5))) / self.rim_levels
