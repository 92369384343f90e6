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

from dataclasses import dataclass, fields
from typing import NamedTuple

import numpy as np

from physics.checks import Floats
from physics.curve_shape import CurveShape
from physics.held_densities import HeldBose
from physics.real_semi_ideal_integrals import CondensateSums
from physics.real_sums import ends_between, panels
from physics.roots import rising_roots
from physics.statistics import bose_inverse

SUMS = (
    "condensate", "thermal", "condensate_potential", "thermal_potential", "kinetic", "squared", "pairs", "triples",
)  # fmt: skip
"""Sums over the trap: of n_c, n_t, V n_c, V n_t, the kinetic energy of thermal atoms, (n_c + n_t)^2,
n_c^2 + 4 n_c n_t + 2 n_t^2 and n_c^3 + 9 n_c^2 n_t + 18 n_c n_t^2 + 6 n_t^3."""

_REACH, _ORDER = 42.0, 8
_WEAKEST, _TINY = 1e-100, 1e-300
_CELLS = 64
_STEPS = 2  # of the top, which the mean field hardly moves


class _Edge(NamedTuple):
    """v on both sides of a condensate's edge, densities there, and y_min = (mu - V)/kT."""

    inside: Floats
    outside: Floats
    thermal_inside: Floats
    thermal_outside: Floats
    height: Floats


class _Nodes(NamedTuple):
    """Nodes of an integral over v, (cells, nodes): densities of thermal atoms, how they fall, the potential of the
    trap, and w with the weights."""

    v: Floats
    d: Floats
    fall: Floats
    V: Floats
    w: Floats


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

    def solve(self, eta: Floats, g: Floats, wanted: Floats, alpha: Floats) -> Solution:
        """Clouds of N lambda^3 = `wanted` times the volume; NaN where the trap does not hold so many.

        Parameters
        ----------
        alpha : -ln z of the ideal gas, from which the search starts.
        """
        parts = []
        for start in range(0, max(eta.size, 1), _CELLS):
            part = slice(start, start + _CELLS)
            parts.append(self._solve(eta[part], np.maximum(g[part], _WEAKEST), wanted[part], alpha[part]))
        return Solution(
            **{
                field.name: np.concatenate([getattr(part, field.name) for part in parts], -1)
                for field in fields(Solution)
            }
        )

    def threshold(self, eta: Floats, g: Floats) -> Floats:
        """N lambda^3 over the volume at which a condensate appears."""
        weak = np.maximum(g, _WEAKEST)
        first, top = _edge_at_centre(eta, weak)
        return self._outer_number(eta, weak, top, first.height, first.outside)

    def _solve(self, eta: Floats, g: Floats, wanted: Floats, alpha: Floats) -> Solution:
        first, top = _edge_at_centre(eta, g)
        without = self._outer_number(eta, g, top, first.height, first.outside)
        m, found = np.full_like(eta, np.nan), np.full((len(SUMS), eta.size), np.nan)
        densest, centre, rise = (np.full_like(eta, np.nan) for _ in range(3))
        thermal = wanted <= without
        if np.any(thermal):
            at = eta[thermal], g[thermal]
            v, top_v, m[thermal] = self._thermal(*at, wanted[thermal], alpha[thermal], first.outside[thermal])
            found[:, thermal] = self._outer(*at, top_v, m[thermal], v)
            densest[thermal] = centre[thermal] = _density(top_v, v)
        if not np.all(thermal):
            below = ~thermal
            at = eta[below], g[below]
            near = _Edge(*(each[below] for each in first))
            v, top_v, edge = self._condensed(*at, wanted[below], without[below], top[below], near)
            d = _density(top_v, v)
            m[below] = v + 2.0 * at[1] * d
            found[:, below] = self._inner(*at, top_v, m[below], v, edge)
            found[:, below] += self._outer(*at, top_v, m[below], edge.outside)
            densest[below], centre[below] = edge.thermal_outside, d + v / at[1]
            rise[below] = m[below] - edge.height
        jump = (first.inside / g + first.thermal_inside) / first.thermal_outside - 1.0
        return Solution(m=m, sums=found, densest=densest, centre=centre, jump=jump, rise=rise)

    def _thermal(
        self, eta: Floats, g: Floats, wanted: Floats, alpha: Floats, least: Floats
    ) -> tuple[Floats, Floats, Floats]:
        """v at the centre, the top and m of clouds without a condensate."""
        state = {"top": eta + alpha}

        def miss(v: Floats) -> Floats:
            for _ in range(_STEPS):
                m = 2.0 * g * _density(state["top"], v) - v
                state["top"] = eta - m
            state["m"] = m
            number = self._outer_number(eta, g, state["top"], m, v)
            missing: Floats = -np.log(number / wanted)
            return missing

        start = np.maximum(alpha, least)
        v = rising_roots(miss, least * (1.0 - 1e-9), np.full_like(eta, np.inf), start, slopes=(0.3, 1e6))
        miss(v)
        return v, state["top"], state["m"]

    def _condensed(
        self, eta: Floats, g: Floats, wanted: Floats, without: Floats, top: Floats, near: _Edge
    ) -> tuple[Floats, Floats, _Edge]:
        """v at the centre, the top and the edge, of clouds with a condensate; `near` is the edge of a small one."""
        state, edges = {"top": top}, {"edge": near}
        beyond = wanted - without

        def miss(log_x: Floats) -> Floats:
            v = edges["edge"].inside + np.nan_to_num(np.exp(log_x), nan=1.0)
            for _ in range(_STEPS):
                m = np.minimum(v + 2.0 * g * _density(state["top"], v), eta)
                state["top"] = eta - m
            edges["edge"] = edge = _refined(edges["edge"], g, state["top"])
            number = self._inner_number(eta, g, state["top"], m, v, edge)
            number = number + self._outer_number(eta, g, state["top"], m, edge.outside)
            extra = number - without
            return np.where(extra > 0.0, np.log(extra / beyond), -np.inf)

        high = np.log(eta)
        # At mu = depth no thermal atoms are held: the condensate alone fills the trap.
        fits = eta / g * CondensateSums(shape=self.shape).condensate(np.ones(1))[0] >= wanted
        first = np.where(fits, np.log(np.clip(beyond / without, 1e-7, 0.3)) + np.minimum(high, 0.0), np.nan)
        log_x = rising_roots(miss, np.full_like(eta, -25.0), high, first, slope=1.5)
        miss(log_x)
        v = edges["edge"].inside + np.exp(log_x)
        return v, state["top"], edges["edge"]

    def _outer_nodes(self, eta: Floats, g: Floats, top: Floats, m: Floats, first: Floats) -> _Nodes:
        """Of the thermal gas outside the place where its lowest level is `first` above mu."""
        end = np.maximum(np.minimum(top, first + _REACH), first)
        ends = ends_between(eta, m, first, end, (0.3, 2.0, 10.0))
        root0 = np.sqrt(first)[:, np.newaxis]
        q, width = panels(np.sqrt(np.maximum(np.sqrt(ends) - root0, 0.0)), _ORDER)
        root = root0 + q * q
        v, dv = root * root, 4.0 * root * q * width
        d, fall = HeldBose(top=top).density_and_fall(v)
        V = m[:, np.newaxis] + v - 2.0 * g[:, np.newaxis] * d
        return _Nodes(v=v, d=d, fall=fall, V=V, w=self._volume(eta[:, np.newaxis], V) * dv)

    def _inner_nodes(self, eta: Floats, g: Floats, top: Floats, m: Floats, centre: Floats, edge: _Edge) -> _Nodes:
        """Of the inside of a condensate, from its edge to v at the centre."""
        low, high = np.minimum(edge.inside, centre), centre
        ends = -ends_between(eta, m, -high, -low, (-10.0, -2.0, -0.3))
        # The fall of the thermal density changes over a distance like v itself.
        steps = np.concatenate([np.multiply.outer(low, [0.7, 3.0]), np.tile([0.1, 1.0, 5.0, 20.0], (low.size, 1))], -1)
        near = np.clip(low[:, np.newaxis] + steps, low[:, np.newaxis], high[:, np.newaxis])
        ends = np.sort(np.concatenate([ends, near], axis=-1), axis=-1)[:, ::-1]
        q, width = panels(np.sqrt(np.maximum(high[:, np.newaxis] - ends, 0.0)), _ORDER)
        v, dv = high[:, np.newaxis] - q * q, 2.0 * q * width
        d, fall = HeldBose(top=top).density_and_fall(v)
        V = m[:, np.newaxis] - v - 2.0 * g[:, np.newaxis] * d
        return _Nodes(v=v, d=d, fall=fall, V=V, w=self._volume(eta[:, np.newaxis], V) * dv)

    def _volume(self, eta: Floats, V: Floats) -> Floats:
        w: Floats = self.shape.volume(np.clip(V / eta, 0.0, 1.0))
        return w

    def _outer_number(self, eta: Floats, g: Floats, top: Floats, m: Floats, first: Floats) -> Floats:
        """Thermal atoms outside, (cells,)."""
        at, d = self._outer_nodes(eta, g, top, m, first), _density(top, first)
        w_first = self._volume(eta, m + first - 2.0 * g * d)
        return _total(at.w, at.fall) - w_first * d

    def _outer(self, eta: Floats, g: Floats, top: Floats, m: Floats, first: Floats) -> Floats:
        """(8, cells) `SUMS` of the thermal gas outside."""
        at, d = self._outer_nodes(eta, g, top, m, first), _density(top, first)
        V_first = m + first - 2.0 * g * d
        start = self._volume(eta, V_first) * _at_place(np.zeros_like(d), d, V_first, _kinetic(top, first))
        rise = 1.0 + 2.0 * g[:, np.newaxis] * at.fall
        nothing = np.zeros_like(at.d)
        falls = (nothing, at.fall, nothing, at.V * at.fall - rise * at.d, 1.5 * at.d, 2.0 * at.d * at.fall,
                 4.0 * at.d * at.fall, 18.0 * at.d * at.d * at.fall)  # fmt: skip
        return np.stack([_total(at.w, each) for each in falls]) - start

    def _inner_number(self, eta: Floats, g: Floats, top: Floats, m: Floats, centre: Floats, edge: _Edge) -> Floats:
        """Atoms inside, (cells,)."""
        at = self._inner_nodes(eta, g, top, m, centre, edge)
        w_edge = self._volume(eta, m - edge.height)
        return w_edge * (edge.inside / g + edge.thermal_inside) + _total(at.w, 1.0 / g[:, np.newaxis] - at.fall)

    def _inner(self, eta: Floats, g: Floats, top: Floats, m: Floats, centre: Floats, edge: _Edge) -> Floats:
        """(8, cells) `SUMS` of the inside."""
        at, slope = self._inner_nodes(eta, g, top, m, centre, edge), 1.0 / g[:, np.newaxis]
        c, d, fall, V = at.v * slope, at.d, at.fall, at.V
        V_edge = m - edge.height
        kinetic = _kinetic(top, edge.inside)
        end = self._volume(eta, V_edge) * _at_place(edge.inside / g, edge.thermal_inside, V_edge, kinetic)
        rise = 2.0 / slope * fall - 1.0
        rises = (
            np.broadcast_to(slope, d.shape), -fall, rise * c + V * slope, rise * d - V * fall, -1.5 * d,
            2.0 * (c + d) * (slope - fall), 2.0 * c * slope + 4.0 * (slope * d - c * fall - d * fall),
            3.0 * c * c * slope + 9.0 * c * (2.0 * slope * d - c * fall)
            + 18.0 * d * (slope * d - 2.0 * c * fall - d * fall),
        )  # fmt: skip
        return np.stack([_total(at.w, each) for each in rises]) + end


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


def _fall(top: Floats, v: Floats) -> Floats:
    return HeldBose(top=np.maximum(top, _TINY)).fall(v[:, np.newaxis])[:, 0]


def local_densities(g: float, m: float, top: float, potential: Floats, *, condensed: bool) -> tuple[Floats, Floats]:
    """n lambda^3 of thermal atoms and condensate where the potential is `potential` kT, (places,). [1]"""
    gas, edge = HeldBose(top=np.array([top])), _edge(np.array([g]), np.array([top]))
    height = m - potential
    inside = (height >= edge.height[0]) & condensed

    def density(v: Floats) -> Floats:
        d: Floats = gas.density(v[np.newaxis])[0]
        return d

    v = np.empty_like(potential)
    if np.any(inside):
        y, least = height[inside], np.full(np.count_nonzero(inside), edge.inside[0])
        v[inside] = rising_roots(lambda v: v + 2.0 * g * density(v) - y, least, np.maximum(y, least), y)
    if not np.all(inside):
        y = height[~inside]
        first = float(edge.outside[0]) if condensed else 0.0
        low, high = np.full_like(y, first), np.full_like(y, top)
        v[~inside] = rising_roots(lambda v: v - 2.0 * g * density(v) + y, low, high, np.clip(-y, first, top))
    return density(v), np.where(inside, v / g, 0.0)


def _edge_at_centre(eta: Floats, g: Floats) -> tuple[_Edge, Floats]:
    """The edge of a condensate that is about to appear, and the top then."""
    first = _edge(g, eta)
    for _ in range(2):
        top = eta - first.height
        first = _refined(first, g, top)
    return first, top


def _refined(edge: _Edge, g: Floats, top: Floats) -> _Edge:
    """The edge for nearly the same top: one step towards it, which a search repeats as the top settles."""
    gas = HeldBose(top=np.maximum(top, _TINY))
    _, fall = gas.density_and_fall(edge.inside[:, np.newaxis])
    # 1/fall^2 is nearly in proportion to v.
    inside = np.minimum(edge.inside * (2.0 * g * fall[:, 0]) ** 2, top)
    thermal_inside = gas.density(inside[:, np.newaxis])[:, 0]
    height = inside + 2.0 * g * thermal_inside
    d, fall = (each[:, 0] for each in gas.density_and_fall(edge.outside[:, np.newaxis]))
    root = np.sqrt(edge.outside)
    step = (edge.outside - 2.0 * g * d + height) / (2.0 * root * (1.0 + 2.0 * g * fall))
    outside = np.clip(root - step, 0.1 * root, np.sqrt(inside)) ** 2
    return _Edge(inside, outside, thermal_inside, _density(top, outside), height)


def _edge(g: Floats, top: Floats) -> _Edge:
    """Where a condensate ends."""
    # 1/fall^2 is nearly in proportion to v.
    highest = np.minimum(bose_inverse(0.5, 0.5 / g), top)
    target = np.log(2.0 * g)

    def flat(log_v: Floats) -> Floats:
        return -target - np.log(np.maximum(_fall(top, np.exp(log_v)), _TINY))

    log_v = rising_roots(flat, np.full_like(g, -500.0), np.log(highest), np.log(highest), slope=0.5, slopes=(0.1, 1e3))
    inside = np.exp(log_v)
    thermal_inside = _density(top, inside)
    height = inside + 2.0 * g * thermal_inside

    def outer(root: Floats) -> Floats:
        return root * root - 2.0 * g * _density(top, root * root) + height

    reach = np.sqrt(inside)
    slope = float(np.median(14.0 * g + 1e-3)) if g.size else 1.0
    root = rising_roots(outer, np.zeros_like(g), reach, (np.sqrt(2.0) - 1.0) * reach, slope=slope, slopes=(1e-9, 1e9))
    outside = root * root
    return _Edge(inside, outside, thermal_inside, _density(top, outside), height)
