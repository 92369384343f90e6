"""The edge of a condensate in the Hartree-Fock mean field, where only atoms below an energy are held.

As in `physics.real_hartree_fock_integrals`: energies in kT, densities d times lambda^3, g = 2a/lambda, v the lowest
level of thermal atoms above mu, top the highest energy that is held, above mu. Condensed solutions end where
1 = 2 g |dd/dv|, at v = `inside`; at the same potential thermal atoms alone have their lowest level at `outside`.

Functions take flat arrays, one element a cloud.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.held_densities import HeldBose
from physics.roots import rising_roots
from physics.statistics import bose_inverse

WEAKEST = 1e-100
"""The least g: below it nothing changes."""

_TINY = 1e-300
_ROUNDS, _SETTLED = 80, 1e-10
_LOW = 1.0  # tops


class Edge(NamedTuple):
    """v on both sides of an edge, thermal densities there, and (mu - V)/kT, the least that a condensate has."""

    inside: Floats
    outside: Floats
    thermal_inside: Floats
    thermal_outside: Floats
    height: Floats


class Centre(NamedTuple):
    """v at the centre of a condensate, the thermal density and -dd/dv there, the top, and the edge."""

    v: Floats
    d: Floats
    fall: Floats
    top: Floats
    edge: Edge

    def where(self, these: NDArray[np.bool_]) -> Centre:
        """Of these cells."""
        return self._of(lambda each: each[these])

    def known(self, these: NDArray[np.bool_]) -> Centre:
        """The same, NaN elsewhere."""
        return self._of(lambda each: np.where(these, each, np.nan))

    def _of(self, change: Callable[[Floats], Floats]) -> Centre:
        edge = Edge(*(change(each) for each in self.edge))
        return Centre(change(self.v), change(self.d), change(self.fall), change(self.top), edge)


def centre(eta: Floats, g: Floats, beyond: Floats, near: Centre | None = None) -> Centre:
    """Of condensates with v at the centre so much `beyond` that inside the edge, in a trap that holds up to eta.

    Parameters
    ----------
    near : from which the search starts.
    """
    edge, top = (_uncut(g, eta), eta) if near is None else (near.edge, near.top)
    return _settled(g, beyond, edge, top, eta)


def _uncut(g: Floats, top: Floats) -> Edge:
    """Exact inside, where the top is high."""
    inside = np.minimum(np.asarray(bose_inverse(0.5, 0.5 / g)), 0.5 * top)
    nothing = np.zeros_like(g)
    return Edge(inside, (math.sqrt(2.0) - 1.0) ** 2 * inside, nothing, nothing, nothing)


def _settled(g: Floats, beyond: Floats, start: Edge, top: Floats, eta: Floats | None) -> Centre:
    """What is left as it is by one step of v on both sides, and of the top where there is an eta."""
    inside, outside = start.inside, start.outside
    for _ in range(_ROUNDS):
        v = inside + beyond
        places = np.stack([inside, outside, v], axis=-1)
        d, fall = (each.T for each in HeldBose(top=np.maximum(top, _TINY)).density_and_fall(places))
        height = inside + 2.0 * g * d[0]  # at its least, so that it has settled first
        found = Centre(v, d[2], fall[2], top, Edge(inside, outside, d[0], d[1], height))
        # 1/fall^2 is nearly in proportion to v, but for low tops.
        steps = (2.0 * g * fall[0]) ** np.where(top > _LOW, 2.0, 1.3)
        new_inside = inside * np.clip(steps, 0.2, 5.0)
        root = np.sqrt(outside)
        step = (outside - 2.0 * g * d[1] + height) / (2.0 * root * (1.0 + 2.0 * g * fall[1]))
        new_outside = np.clip(root - step, 0.1 * root, np.sqrt(new_inside)) ** 2
        new_top = top if eta is None else eta - np.minimum(v + 2.0 * g * d[2], eta)
        moved = [
            np.abs(new - old) > _SETTLED * new
            for new, old in ((new_inside, inside), (new_outside, outside), (new_top, top))
        ]
        if not np.any(moved):
            break
        inside, outside, top = new_inside, new_outside, new_top
    return found


def local_densities(g: float, m: float, top: float, potential: Floats, *, condensed: bool) -> tuple[Floats, Floats]:
    """n lambda^3 of thermal atoms and condensate where the potential is `potential` kT, (places,). [1]"""
    strength, tops = np.array([g]), np.array([top])
    gas, edge = HeldBose(top=tops), _settled(strength, np.zeros(1), _uncut(strength, tops), tops, None).edge
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
