"""Local densities of repelling bosons in the Hartree-Fock mean field, and their sums over a real trap.

As in `physics.hartree_fock_integrals`: energies in kT, densities times lambda^3, g = 2a/lambda. Where thermal atoms
have their lowest level v above mu, mean field included, they are d(v), and the potential of the trap is

    inside the condensate   V = m - v - 2 g d(v),    condensate v/g,
    outside it              V = m + v - 2 g d(v),

m = mu/kT. What is held of the thermal atoms ends at top = eta - m, on which d depends. v takes the place of the
potential in every sum, and a sum of h over the volumes dw is done by parts, as -(integral of w dh), with a step at the
condensate's edge. Condensed solutions are taken wherever they exist, down to where 1 = 2 g |dd/dv|.

Functions take flat arrays, one element a cloud. w is the volume over that at the highest energy.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, fields
from typing import NamedTuple

import numpy as np

from physics.checks import Floats
from physics.curve_shape import CurveShape
from physics.held_densities import HeldBose
from physics.real_hartree_fock_edge import WEAKEST, Centre, centre
from physics.real_semi_ideal_integrals import CondensateSums
from physics.real_sums import STEPS, ends_between, panels, panels_to_top, turns_above
from physics.roots import rising_roots
from physics.statistics import zeta

SUMS = (
    "condensate", "thermal", "condensate_potential", "thermal_potential", "kinetic", "squared", "pairs", "triples",
)  # fmt: skip
"""Sums over the trap: of n_c, n_t, V n_c, V n_t, the kinetic energy of thermal atoms, (n_c + n_t)^2,
n_c^2 + 4 n_c n_t + 2 n_t^2 and n_c^3 + 9 n_c^2 n_t + 18 n_c n_t^2 + 6 n_t^3."""

_REACH, _ORDER = 42.0, 8
_TINY = 1e-300
_CELLS = 64
_ROUNDS, _SETTLED = 40, 1e-11  # of the top of clouds without a condensate
_SMALLEST = -25.0  # ln of what the centre of a condensate is beyond its edge
_DEEP, _FOUND, _FOUND_NEAR_TOP = 40.0, 1e-6, 1e-8
_HIGH = 2.0  # tops from which on the derivative of N is close, which leaves out how they move densities at one place


class _Nodes(NamedTuple):
    """Nodes of an integral over v, (cells, nodes), those inside the condensate first.

    d, fall, V : densities of thermal atoms, how they fall with v, and the potential of the trap
    w, slope : w and dw/dV, with the weights
    inside : how many are inside
    """

    d: Floats
    fall: Floats
    v: Floats
    V: Floats
    w: Floats
    slope: Floats
    inside: int

    def cut(self, top: Floats) -> Floats:
        """d(fall)/d(top)."""
        y = top[:, np.newaxis] - self.v
        with np.errstate(all="ignore"):
            held = 1.0 / (math.sqrt(math.pi) * np.expm1(top))
            cut: Floats = np.where(y > 0.0, held[:, np.newaxis] / np.sqrt(y), 0.0)
        return cut


@dataclass(frozen=True, kw_only=True, eq=False)
class Solution:
    """(cells,) each but for the sums, (8, cells).

    m : mu/kT
    sums : `SUMS`, of densities times lambda^3 over dw
    densest, centre : largest thermal n lambda^3, and n lambda^3 of all atoms at the centre
    jump : density inside the edge over that outside, minus 1
    rise : V/kT at the edge; NaN without a condensate
    """

    m: Floats
    sums: Floats
    densest: Floats
    centre: Floats
    jump: Floats
    rise: Floats


@dataclass(frozen=True, kw_only=True, eq=False)
class MeanField:
    """The mean field in a trap of a shape."""

    shape: CurveShape
    condensates: CondensateSums

    def solve(self, eta: Floats, g: Floats, wanted: Floats, alpha: Floats) -> Solution:
        """Clouds of N lambda^3 = `wanted` times the volume; NaN where the trap does not hold so many.

        Parameters
        ----------
        alpha : -ln z of the ideal gas, from which the search starts.
        """
        parts = []
        for start in range(0, max(eta.size, 1), _CELLS):
            part = slice(start, start + _CELLS)
            parts.append(self._solve(eta[part], np.maximum(g[part], WEAKEST), wanted[part], alpha[part]))
        if len(parts) == 1:
            return parts[0]
        return Solution(
            **{
                field.name: np.concatenate([getattr(part, field.name) for part in parts], -1)
                for field in fields(Solution)
            }
        )

    def threshold(self, eta: Floats, g: Floats) -> Floats:
        """N lambda^3 over the volume at which a condensate appears."""
        weak = np.maximum(g, WEAKEST)
        return self._threshold(eta, weak, centre(eta, weak, np.zeros_like(eta)))

    def _threshold(self, eta: Floats, g: Floats, first: Centre) -> Floats:
        at = self._nodes(eta, g, first.edge.height, first.top, first.edge.outside)
        return _total(at.w, at.fall)

    def _solve(self, eta: Floats, g: Floats, wanted: Floats, alpha: Floats) -> Solution:
        first = centre(eta, g, np.zeros_like(eta))
        without = self._threshold(eta, g, first)
        edge = first.edge
        m, found = np.full_like(eta, np.nan), np.full((len(SUMS), eta.size), np.nan)
        densest, middle, rise = (np.full_like(eta, np.nan) for _ in range(3))
        thermal = wanted <= without
        if np.any(thermal):
            at = eta[thermal], g[thermal]
            v, m[thermal] = self._thermal(*at, wanted[thermal], alpha[thermal], edge.outside[thermal])
            top = at[0] - m[thermal]
            found[:, thermal] = self._outside(at[1], self._nodes(*at, m[thermal], top, v))
            densest[thermal] = middle[thermal] = _density(top, v)
        if not np.all(thermal):
            below = ~thermal
            at = eta[below], g[below]
            near = first.where(below)
            here = self._condensed(*at, wanted[below], without[below], near)
            m[below] = at[0] - here.top
            found[:, below] = self._around(*at, here)
            densest[below], middle[below] = here.edge.thermal_outside, here.d + here.v / at[1]
            rise[below] = m[below] - here.edge.height
        jump = (edge.inside / g + edge.thermal_inside) / edge.thermal_outside - 1.0
        return Solution(m=m, sums=found, densest=densest, centre=middle, jump=jump, rise=rise)

    def _thermal(self, eta: Floats, g: Floats, wanted: Floats, alpha: Floats, least: Floats) -> tuple[Floats, Floats]:
        """v at the centre, and m, of clouds without a condensate."""
        state = {"top": eta + alpha, "m": alpha}

        def miss(v: Floats) -> tuple[Floats, Floats]:
            for _ in range(_ROUNDS):
                before = state["top"]
                d, fall = (each[:, 0] for each in HeldBose(top=before).density_and_fall(v[:, np.newaxis]))
                state["m"] = m = 2.0 * g * d - v
                state["top"] = eta - m
                if not np.any(np.abs(state["top"] - before) > _SETTLED * before):
                    break
            at = self._nodes(eta, g, m, state["top"], v)
            number = _total(at.w, at.fall)
            by_m = _total(at.slope, at.fall) - _total(at.w, at.cut(state["top"]))
            slope = by_m * (1.0 + 2.0 * g * fall) / number
            return -np.log(number / wanted), np.where(state["top"] > _HIGH, slope, np.nan)

        start, low = np.maximum(alpha, least), least * (1.0 - 1e-9)
        v = rising_roots(
            miss, low, np.full_like(eta, np.inf), start, slope=1.0, slopes=(0.3, 1e6), tolerance=_tolerance(eta)
        )
        miss(v)
        return v, state["m"]

    def _condensed(self, eta: Floats, g: Floats, wanted: Floats, without: Floats, near: Centre) -> Centre:
        """The centre of clouds with a condensate; `near` is that of a small one."""
        state = {"centre": near}
        beyond = wanted - without

        def miss(log_x: Floats) -> tuple[Floats, Floats]:
            x = np.nan_to_num(np.exp(log_x), nan=1.0)
            state["centre"] = here = centre(eta, g, x, state["centre"])
            number, by_m = self._number(eta, g, here)
            extra = number - without
            slope = by_m * (1.0 - 2.0 * g * here.fall) * x / extra
            logs = np.where(extra > 0.0, np.log(extra / beyond), -np.inf)
            return logs, np.where((extra > 0.0) & (here.top > _HIGH), slope, np.nan)

        # At mu = depth no thermal atoms are held: the condensate alone fills the trap.
        fits = eta / g * self.condensates.full >= wanted
        # Below the roots of either part alone, of the condensate and of thermal atoms, which it lifts.
        alone, lifted = eta * self.condensates.share(beyond * g / eta), 0.73 * beyond / without
        high = np.log(eta)
        first = np.where(fits, np.minimum(np.log(alone * lifted / (alone + lifted)), high - 1e-3), np.nan)
        log_x = rising_roots(miss, np.full_like(eta, _SMALLEST), high, first, slope=1.5, tolerance=_tolerance(eta))
        return centre(eta, g, np.nan_to_num(np.exp(log_x), nan=1.0), state["centre"]).known(fits)

    def _nodes(
        self, eta: Floats, g: Floats, m: Floats, top: Floats, first: Floats, condensate: Centre | None = None
    ) -> _Nodes:
        """Of the thermal gas outside the place where its lowest level is `first` above mu, and of the inside of a
        condensate."""
        end = np.maximum(np.minimum(top, first + _REACH), first)
        ends = ends_between(self._turns(eta, g, m, top, first, end), first, end, STEPS)
        root0 = np.sqrt(first)[:, np.newaxis]
        q, width = panels_to_top(np.sqrt(np.maximum(np.sqrt(ends) - root0, 0.0)), _ORDER)
        root = root0 + q * q
        v, dv = root * root, 4.0 * root * q * width
        side, inside = np.ones(v.shape[1]), 0
        if condensate is not None:
            high = condensate.v
            low = np.minimum(condensate.edge.inside, high)
            ends = -ends_between(self._turns(eta, g, m, top, -high, -low), -high, -low, (-10.0, -2.0, -0.3))
            # The fall of the thermal density changes over a distance like v itself.
            steps = np.concatenate(
                [np.multiply.outer(low, [0.7, 3.0]), np.tile([0.1, 1.0, 5.0, 20.0], (low.size, 1))], axis=-1
            )
            near = np.clip(low[:, np.newaxis] + steps, low[:, np.newaxis], high[:, np.newaxis])
            ends = np.sort(np.concatenate([ends, near], axis=-1), axis=-1)[:, ::-1]
            q, width = panels(np.sqrt(np.maximum(high[:, np.newaxis] - ends, 0.0)), _ORDER)
            inside = q.shape[1]
            v = np.concatenate([high[:, np.newaxis] - q * q, v], axis=-1)
            dv = np.concatenate([2.0 * q * width, dv], axis=-1)
            side = np.concatenate([np.full(inside, -1.0), side])
        d, fall = HeldBose(top=top).density_and_fall(v)
        V = m[:, np.newaxis] + side * v - 2.0 * g[:, np.newaxis] * d
        w, slope = self._volume(eta[:, np.newaxis], V)
        return _Nodes(d, fall, v, V, w * dv, slope * dv, inside)

    def _turns(self, eta: Floats, g: Floats, m: Floats, top: Floats, low: Floats, high: Floats) -> Floats:
        """(cells, turns) v, or -v inside a condensate, about where the curve turns, of those between low and high."""
        above = turns_above(self.shape.turns, eta, m)
        lift = 2.0 * zeta(1.5) * g[:, np.newaxis]
        between = np.any((above > low[:, np.newaxis] - lift) & (above < high[:, np.newaxis]), axis=0)
        above = above[:, between]
        if not above.size:
            return above
        lifted: Floats = above + 2.0 * g[:, np.newaxis] * HeldBose(top=top).density(np.abs(above))
        return lifted

    def _volume(self, eta: Floats, V: Floats) -> tuple[Floats, Floats]:
        w, slope = self.shape.volume_and_slope(np.clip(V / eta, 0.0, 1.0))
        return w, slope / eta

    def _number(self, eta: Floats, g: Floats, here: Centre) -> tuple[Floats, Floats]:
        """All atoms around a condensate, (cells,), and about the derivative by m."""
        edge, m = here.edge, eta - here.top
        at = self._nodes(eta, g, m, here.top, edge.outside, here)
        w, slope = self._volume(eta, m - edge.height)
        drop = edge.inside / g + edge.thermal_inside - edge.thermal_outside
        falls = np.concatenate([1.0 / g[:, np.newaxis] - at.fall[:, : at.inside], at.fall[:, at.inside :]], axis=-1)
        cut = at.cut(here.top)
        lost = _total(at.w[:, at.inside :], cut[:, at.inside :]) - _total(at.w[:, : at.inside], cut[:, : at.inside])
        return w * drop + _total(at.w, falls), slope * drop + _total(at.slope, falls) - lost

    def _around(self, eta: Floats, g: Floats, here: Centre) -> Floats:
        """(8, cells) `SUMS` of clouds with a condensate."""
        edge, m = here.edge, eta - here.top
        at = self._nodes(eta, g, m, here.top, edge.outside, here)
        slope, inner = 1.0 / g[:, np.newaxis], slice(at.inside)
        c, d, fall, V = at.v[:, inner] * slope, at.d[:, inner], at.fall[:, inner], at.V[:, inner]
        rise = 2.0 / slope * fall - 1.0
        rises = (
            np.broadcast_to(slope, d.shape), -fall, rise * c + V * slope, rise * d - V * fall, -1.5 * d,
            2.0 * (c + d) * (slope - fall), 2.0 * c * slope + 4.0 * (slope * d - c * fall - d * fall),
            3.0 * c * c * slope + 9.0 * c * (2.0 * slope * d - c * fall)
            + 18.0 * d * (slope * d - 2.0 * c * fall - d * fall),
        )  # fmt: skip
        V_edge = m - edge.height
        nothing = np.zeros_like(m)
        step = _at_place(edge.inside / g, edge.thermal_inside, V_edge, _kinetic(here.top, edge.inside))
        step -= _at_place(nothing, edge.thermal_outside, V_edge, _kinetic(here.top, edge.outside))
        at_edge = self._volume(eta, V_edge)[0] * step
        within = np.stack([_total(at.w[:, inner], each) for each in rises])
        return within + at_edge + self._outside(g, at)

    def _outside(self, g: Floats, at: _Nodes) -> Floats:
        """(8, cells) `SUMS` of the thermal gas outside, but for the step at its beginning."""
        outer = slice(at.inside, None)
        d, fall, w = at.d[:, outer], at.fall[:, outer], at.w[:, outer]
        rise, nothing = 1.0 + 2.0 * g[:, np.newaxis] * fall, np.zeros_like(d)
        falls = (nothing, fall, nothing, at.V[:, outer] * fall - rise * d, 1.5 * d, 2.0 * d * fall, 4.0 * d * fall,
                 18.0 * d * d * fall)  # fmt: skip
        return np.stack([_total(w, each) for each in falls])


def _tolerance(eta: Floats) -> Floats:
    return np.where(eta > _DEEP, _FOUND, _FOUND_NEAR_TOP)


def _at_place(c: Floats, d: Floats, V: Floats, kinetic: Floats) -> Floats:
    """(8, cells) What `SUMS` are sums of, at one place."""
    pairs, triples = c * c + 4.0 * c * d + 2.0 * d * d, c**3 + 9.0 * c * d * (c + 2.0 * d) + 6.0 * d**3
    return np.stack([c, d, V * c, V * d, kinetic, (c + d) ** 2, pairs, triples])


def _kinetic(top: Floats, v: Floats) -> Floats:
    energy: Floats = HeldBose(top=np.maximum(top, _TINY)).kinetic(v[:, np.newaxis])[:, 0]
    return energy


def _total(w: Floats, values: Floats) -> Floats:
    total: Floats = np.sum(np.where(w > 0.0, w * values, 0.0), axis=-1)
    return total


def _density(top: Floats, v: Floats) -> Floats:
    return HeldBose(top=np.maximum(top, _TINY)).density(v[:, np.newaxis])[:, 0]
