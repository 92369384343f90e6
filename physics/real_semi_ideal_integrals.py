"""Sums over a real trap of thermal bosons around a Thomas-Fermi condensate, and of the condensate.

Energies in kT: mu = m, the highest energy that is held eta. The condensate lifts the potential V of thermal atoms to
|V - mu| = v above mu, and those above top = eta - m are gone, so that n lambda^3 is a function of v and of the top.
A sum of h over the volumes dw is done by parts, as -(integral of w dh), which needs no derivative of a curve. Outside
the condensate it runs over sqrt(v), inside it over theta, v = m cos^2 theta, in which the roots at both ends are
regular. Functions take flat arrays, one element a cloud; w is the volume over that at eta.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from physics.checks import Floats
from physics.curve_shape import CurveShape
from physics.harmonic_integrals import legendre
from physics.held_densities import HeldBose
from physics.real_sums import STEPS, ends_between, panels, panels_to_top, turns_above
from physics.roots import rising_roots
from physics.smooth_surface import Surface
from physics.spline import Spline

_OUTSIDE, _INSIDE, _DEEP = 8, 8, 48  # nodes, of each panel but for the last
_REACH = 42.0  # kT beyond which there are no thermal atoms
_LOWEST, _PLACES, _PANEL = 1e-6, 200, 6
_TINY = 1e-300
_CELLS = 128  # at once, to bound the memory
_DIRECT = 160  # clouds up to which sums are done one by one
_STEP, _IN_ETA, _PER_STEP = 0.4, 12, 2.4  # of surfaces: steps of ln eta, nodes along it
_KEPT, _LEAST, _FOUND = 16, 1e-9, 1e-8
_EVEN, _BEFORE, _NARROW, _MARGIN = 0.35, 0.8, 0.06, 1.1
_TOPS = ((0.03, 14), (0.12, 16), (0.35, 20), (0.9, 26))
"""Shares of eta up to which mu is on a surface, with its nodes along mu. There are several, for where arms open a trap
is not smooth, and what polynomials do there must not disturb small condensates. What the last of them says is where the
search for each cloud by itself begins."""

_SHARES = np.geomspace(1e-6, 1.0, 100)

THERMAL_SUMS = ("number", "energy", "potential", "squared", "cubed", "product", "squared_product", "product_squared")
"""Rows of `CondensateSums.thermal`: with d = n lambda^3 and c = m - V, positive inside the condensate, the sums of d;
of the energy above mu; of V d; of d^2 and d^3; and over the condensate of c d, c^2 d and c d^2."""


@dataclass(frozen=True, kw_only=True, eq=False)
class CondensateSums:
    """Sums over a trap of a shape."""

    shape: CurveShape

    def thermal(self, eta: Floats, m: Floats) -> Floats:
        """(8, cells) `THERMAL_SUMS`, for m from 0 to eta. [1]"""
        gas = HeldBose(top=eta - m)
        with np.errstate(all="ignore"):
            v, w = self._outside(eta, m)
            d, fall = gas.density_and_fall(v)
            potential, nothing = v + m[:, np.newaxis], np.zeros(d.shape)
            # -dh/dv of each row.
            falls = [fall, 0.5 * d + v * fall, potential * fall - d, 2.0 * d * fall, 3.0 * d * d * fall, *3 * [nothing]]
            outside = np.stack([np.sum(np.where(w > 0.0, w * each, 0.0), axis=-1) for each in falls])
            v, w = self._inside(eta, m)
            d, fall = gas.density_and_fall(v)
            potential = m[:, np.newaxis] - v
            falls = [fall, 0.5 * d + v * fall, potential * fall + d, 2.0 * d * fall, 3.0 * d * d * fall,
                     v * fall - d, v * (v * fall - 2.0 * d), d * (2.0 * v * fall - d)]  # fmt: skip
            inside = np.stack([np.sum(np.where(w > 0.0, w * each, 0.0), axis=-1) for each in falls])
        total: Floats = outside - inside
        return total

    def _number(self, eta: Floats, m: Floats) -> Floats:
        """(cells,) The first row of `thermal`, in a third of the time."""
        gas = HeldBose(top=eta - m)
        total = np.zeros(eta.shape)
        with np.errstate(all="ignore"):
            for sign, (v, w) in ((1.0, self._outside(eta, m)), (-1.0, self._inside(eta, m))):
                total += sign * np.sum(np.where(w > 0.0, w * gas.fall(v), 0.0), axis=-1)
        return total

    def thermal_of_many(self, eta: Floats, m: Floats) -> Floats:
        """`thermal` of any number of clouds: of many by way of a grid, with a relative error of about 1e-5, but for
        those of which mu is near the energies where arms open."""

        def of_group(top: float, eta: Floats, m: Floats) -> Floats:
            if eta.size <= _DIRECT or top > self._even:
                return self._in_parts(self.thermal, eta, m)
            surface = self._surface(eta, top)
            parts = []
            for start in range(0, eta.size, 4096):
                part = slice(start, start + 4096)
                found = surface.along(surface.across(np.log(eta[part])), _place(top, eta[part], m[part]))
                parts.append(np.exp(found) * _scales(self.shape.exponent, eta[part], m[part]))
            return np.concatenate(parts, axis=-1)

        return _in_groups(of_group, m / eta, eta, m)

    def _in_parts(self, function: Callable[[Floats, Floats], Floats], eta: Floats, m: Floats) -> Floats:
        starts = range(0, max(eta.size, 1), _CELLS)
        return np.concatenate([function(eta[at : at + _CELLS], m[at : at + _CELLS]) for at in starts], axis=-1)

    @cached_property
    def _surfaces(self) -> dict[tuple[float, float, float], Surface]:
        return {}

    def _surface(self, eta: Floats, top: float) -> Surface:
        """ln of `thermal` over its scales, for these eta and m up to a share of them."""
        low = _STEP * math.floor(math.log(float(np.min(eta))) / _STEP)
        high = _STEP * math.ceil(math.log(float(np.max(eta))) / _STEP)
        for (_, _, reach), surface in self._surfaces.items():
            if reach == top and surface.x_range[0] <= low and high <= surface.x_range[1]:
                return surface

        def scaled(log_eta: Floats, place: Floats) -> Floats:
            eta = np.exp(log_eta)
            m = 0.25 * np.sinh(place * np.arcsinh(2.0 * np.sqrt(top * eta))) ** 2
            return np.log(self._in_parts(self.thermal, eta, m) / _scales(self.shape.exponent, eta, m))

        counts = (_IN_ETA + math.ceil(_PER_STEP * (high - low) / _STEP), dict(_TOPS)[top])
        if len(self._surfaces) > _KEPT:
            self._surfaces.clear()
        self._surfaces[low, high, top] = Surface(scaled, (low, high), (0.0, 1.0), counts)
        return self._surfaces[low, high, top]

    def height(self, eta: Floats, wanted: Floats, saturated: Floats, scale: Floats) -> Floats:
        """m = mu/kT at which thermal atoms and the condensate, of density `scale` (m - V), are as many as wanted.

        Parameters
        ----------
        wanted, saturated : N lambda^3 over the volume: of all atoms, and of the thermal ones at the threshold, fewer.

        NaN where the trap does not hold so many.
        """
        # No mu is above that of the condensate if all atoms were in it.
        highest = self.share(wanted / (scale * eta))
        return _in_groups(self._height, highest, eta, wanted, saturated, scale)

    def _height(self, top: float, eta: Floats, wanted: Floats, saturated: Floats, scale: Floats) -> Floats:
        """The same of clouds whose mu is not above a share of eta."""
        given = eta, wanted, saturated, scale
        if eta.size <= _DIRECT:
            return self._one_by_one(*given)
        surface, exponent = self._surface(eta, top), self.shape.exponent
        polynomials = surface.across(np.log(eta))[:1]

        def of_surface(m: Floats) -> Floats:
            held: Floats = np.exp(surface.along(polynomials, _place(top, eta, m))[0]) * _scales(exponent, eta, m)[0]
            return held

        found = self._root(of_surface, *given)
        if top <= self._even:
            return found
        # The surface is rough: it says which of the others serves, or where each cloud by itself is sought.
        return _in_groups(self._again, _MARGIN * found / eta, *given, found)

    def _again(self, top: float, eta: Floats, wanted: Floats, saturated: Floats, scale: Floats, near: Floats) -> Floats:
        given = eta, wanted, saturated, scale
        if top <= self._even:
            return self._height(top, *given)
        known, found = np.isfinite(near), np.full_like(near, np.nan)
        if np.any(known):
            found[known] = self._one_by_one(*(each[known] for each in (*given, near)))
        return found

    def _one_by_one(
        self, eta: Floats, wanted: Floats, saturated: Floats, scale: Floats, near: Floats | None = None
    ) -> Floats:
        return self._root(lambda m: self._in_parts(self._number, eta, m), eta, wanted, saturated, scale, near)

    def _root(
        self,
        number: Callable[[Floats], Floats],
        eta: Floats,
        wanted: Floats,
        saturated: Floats,
        scale: Floats,
        near: Floats | None = None,
    ) -> Floats:
        """m at which the condensate and thermal atoms, of a `number` of m, are as many as wanted."""
        start = number(np.zeros_like(eta))
        beyond = wanted - saturated

        def miss(log_m: Floats) -> Floats:
            m = np.exp(log_m)
            extra = scale * eta * self.condensed(m / eta)[0] + number(m) - start
            with np.errstate(all="ignore"):
                return np.where(extra > 0.0, np.log(extra / beyond), -np.inf)

        # The logarithm of the atoms beyond the threshold against that of m: its slope is between 1/2 and 5/2 in a deep
        # harmonic trap, steeper in arms, and it is followed by secants within a bracket.
        high = np.log(eta)
        if near is None:
            # Below the roots of either part alone, of the condensate and of thermal atoms, which it lifts.
            alone, lifted = eta * self.share(beyond / (scale * eta)), 0.73 * beyond / saturated
            near = np.maximum(alone * lifted / (alone + lifted), _LEAST)
        fits = scale * eta * self.full >= wanted
        first = np.where(fits, np.minimum(np.log(near), high - 1e-3), np.nan)
        low = np.full_like(high, math.log(_LEAST))
        return np.exp(rising_roots(miss, low, high, first, slope=1.5, slopes=(0.2, 200.0), tolerance=_FOUND))

    @cached_property
    def _even(self) -> float:
        """Share of eta up to which surfaces serve: the trap is smooth some way beyond. Where arms open, panels of the
        curve are narrow."""
        ends = np.append(self.shape.turns, 1.0)
        narrow = ends[:-1][np.diff(np.log(ends)) < _NARROW]
        return min(_EVEN, _BEFORE * float(narrow[0]) if narrow.size else _EVEN)

    def _outside(self, eta: Floats, m: Floats) -> tuple[Floats, Floats]:
        """v, and w with the weights of an integral over v, (cells, nodes)."""
        end = np.minimum(eta - m, _REACH)
        ends = ends_between(turns_above(self.shape.turns, eta, m), np.zeros_like(m), end, STEPS)
        root, width = panels_to_top(np.sqrt(ends), _OUTSIDE)
        v = root * root
        u = np.minimum((m[:, np.newaxis] + v) / eta[:, np.newaxis], 1.0)
        return v, self.shape.volume(u) * 2.0 * root * width

    def _inside(self, eta: Floats, m: Floats) -> tuple[Floats, Floats]:
        """The same, as far from the edge as there are thermal atoms."""
        reach = np.minimum(np.minimum(m, eta - m), _REACH)
        above = -ends_between(turns_above(self.shape.turns, eta, m), -reach, np.zeros_like(m), (-10.0, -2.0, -0.3))
        share = np.minimum(above / np.maximum(m, _TINY)[:, np.newaxis], 1.0)
        theta, width = panels(np.arccos(np.sqrt(share)), _INSIDE)
        sine, cosine, height = np.sin(theta), np.cos(theta), m[:, np.newaxis]
        u = height * sine**2 / eta[:, np.newaxis]
        return height * cosine**2, self.shape.volume(u) * 2.0 * height * sine * cosine * width

    def condensate(self, x: Floats) -> Floats:
        """(3, cells) Integrals of x - u, its square and cube over dw, u up to x = mu over the highest energy. [1]"""
        t, weights = legendre(_DEEP)
        angle = 0.5 * math.pi * t
        u, weights = np.cos(angle) ** 2, math.pi * weights * np.sin(angle) * np.cos(angle)
        w = self.shape.volume(np.multiply.outer(x, u))
        above = 1.0 - u
        return np.stack(
            [x * (w @ weights), 2.0 * x**2 * (w @ (weights * above)), 3.0 * x**3 * (w @ (weights * above**2))]
        )

    @cached_property
    def _table(self) -> Spline:
        """ln of the first of `condensate` over its power law, against ln x."""
        x = np.geomspace(_LOWEST, 1.0, _PLACES)
        if not self.shape.power_law:
            points = self.shape.energies
            between = points[:-1, np.newaxis] + np.multiply.outer(np.diff(points), np.arange(4.0) / 4.0)
            x = np.concatenate([x[x < points[0] * (1.0 - 1e-9)], between.ravel(), points[-1:]])
            x = x[x >= _LOWEST]
        # The integral of w, panel by panel, for w may turn at every point of the curve.
        t, weights = legendre(_PANEL)
        width = np.diff(x)
        each = self.shape.volume(x[:-1, np.newaxis] + np.multiply.outer(width, t)) @ weights * width
        logs = np.log(self.condensate(x[:1])[0] + np.cumsum(np.append(0.0, each)))
        logs -= (self.shape.exponent + 1.0) * np.log(x)
        # A spline of two derivatives would swing where w turns.
        return Spline(np.log(x), logs[:, np.newaxis], monotone=True)

    @cached_property
    def full(self) -> float:
        """The first of `condensate` where mu is the highest energy. [1]"""
        return float(self.condensed(np.ones(1))[0][0])

    @cached_property
    def _logs(self) -> Floats:
        """ln of the first of `condensate` and ln x, roughly, from small to large. [1]"""
        return np.stack([np.log(self.condensed(_SHARES)[0]), np.log(_SHARES)])

    def share(self, number: Floats) -> Floats:
        """x at which the first of `condensate` is about so much; 1 where it is never. [1]"""
        logs, log_x = self._logs
        log_number = np.log(number)
        # Below the first the curve is a power.
        below = np.minimum(log_number - logs[0], 0.0) / (self.shape.exponent + 1.0)
        found: Floats = np.exp(np.interp(log_number, logs, log_x) + below)
        return found

    def prepare(self) -> None:
        """Work out the tables that sums need, which takes some ten milliseconds, now and not with the first cloud."""
        _ = self.shape.turns, self._logs, self.full

    def condensed(self, x: Floats) -> tuple[Floats, Floats]:
        """The first of `condensate`, tabulated, and its derivative by ln x."""
        log = np.log(x)
        inside, power = np.maximum(log, math.log(_LOWEST)), self.shape.exponent + 1.0
        number = np.exp(self._table(inside)[..., 0] + power * log)
        return number, number * (power + np.where(log > inside, 0.0, self._table.slopes(inside)[..., 0]))


def _in_groups(function: Callable[..., Floats], shares: Floats, *columns: Floats) -> Floats:
    """A function of a top and of flat arrays, for each group of clouds by the least of the tops above `shares`."""
    tops = [top for top, _ in _TOPS]
    group = np.minimum(np.searchsorted(tops, shares), len(tops) - 1)
    groups = np.unique(group)
    if groups.size <= 1:
        return function(tops[groups[0]] if groups.size else tops[0], *columns)
    parts = [(group == k, function(tops[k], *(column[group == k] for column in columns))) for k in groups]
    found = np.empty((*parts[0][1].shape[:-1], group.size))
    for these, values in parts:
        found[..., these] = values
    return found


def _place(top: float, eta: Floats, m: Floats) -> Floats:
    """Where m stands between 0 and a share of eta: in equal steps of its root, or of its logarithm where large."""
    place: Floats = np.arcsinh(2.0 * np.sqrt(m)) / np.arcsinh(2.0 * np.sqrt(top * eta))
    return place


def _scales(exponent: float, eta: Floats, m: Floats) -> Floats:
    """(8, cells) What sums over the thermal atoms vary as: the volume that they reach, what is held of them, and for
    products the part that is inside the condensate. What is left is taken as constant as mu nears the depth."""
    held = eta**-exponent * np.maximum(1.0 - m / eta, 0.0) ** 1.5
    inside = held * m ** (exponent + 1.0) / (1.0 + m) ** 2
    return np.stack([held, held, held, held, held, inside, inside * m / (1.0 + m), inside])
