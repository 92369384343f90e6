"""Local densities of repelling bosons in the Hartree-Fock mean field, and their sums over a harmonic trap.

Energies in kT, densities times lambda^3. The one parameter is the repulsion g = 2a/lambda, so that G n = g d kT for
d = n lambda^3, G = 4 pi hbar^2 a/m. Where mu - V = y, thermal atoms are d_t = g_3/2(e^-alpha) and

    inside the condensate   alpha = g d_c,    y = alpha + 2 g d_t(alpha),
    outside it              d_c = 0,          y = 2 g d_t(alpha) - alpha.

Both are explicit in alpha, which therefore takes the place of the potential in every integral: nothing is solved for
locally, and only alpha at the centre follows from the atom number. Condensed solutions exist for y >= y_min, where
1 = 2 g g_1/2(e^-alpha), and are taken wherever they exist. Thermal ones reach up to 2 g zeta(3/2), a little higher, so
at the edge, y = y_min, the density jumps: an artefact of the mean field, 4 a/lambda of the density for small a/lambda.

A sum over the trap is <h> = (2/sqrt(pi)) integral of sqrt(u) h du, u = V/kT; along a line of sight it is
(1/sqrt(pi)) integral of h du/sqrt(u). Inside, Gauss-Legendre in a variable in which the square root at the centre is
regular, as g is in sqrt(alpha); outside, a double-exponential rule.

Functions take and give flat arrays, one element a cell. Sums over the trap have a relative error below 1e-12, sums
along a line of sight below 1e-8, and below 1e-5 where it passes within 1e-10 kT of the edge.

References
----------
[1] V. V. Goldman, I. F. Silvera, A. J. Leggett, Phys. Rev. B 24, 2870 (1981): the mean field in a trap. Recalled.
[2] S. Giorgini, L. P. Pitaevskii, S. Stringari, Phys. Rev. A 54, R4633 (1996).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats
from physics.harmonic_integrals import legendre
from physics.statistics import bose, bose_inverse, zeta

# Outside the edge nodes lie at v = alpha - alpha_edge = e^(2 (t - e^-t)), equal steps of t: double-exponential towards
# the edge, where structure of all sizes down to g^2 may sit, and as far out as there are atoms.
_STEP = 0.08
_T = np.arange(-3.2, 2.0, _STEP)
_BEYOND = np.exp(2.0 * (_T - np.exp(-_T)))
_BEYOND_WEIGHTS = 2.0 * _STEP * _BEYOND * (1.0 + np.exp(-_T))
_REACH = math.sqrt(40.0)  # there are no thermal atoms at a greater sqrt(alpha)
_HEART, _MANTLE = 16, 40  # nodes inside the condensate: where it is too dense for thermal atoms, and around that
CELLS_AT_ONCE = 256  # to bound the memory
_STEPS = 60  # far more than ever needed: from 4 to 8
_TINY = float(np.finfo(np.float64).tiny)
_WEAKEST = 1e-100  # a repulsion that makes no difference


@dataclass(frozen=True, kw_only=True, eq=False)
class Shells:
    """Nodes of a sum over the trap: shells of equal potential, and the densities there.

    Attributes
    ----------
    potential, weight : (cells, nodes). [1] u = V/kT, and the du that goes with it.
    alpha : (cells, nodes). [1] How far mu is below the lowest thermal level there, mean field included, in kT.
    condensate, thermal : (cells, nodes). [1] n lambda^3.
    """

    potential: Floats
    weight: Floats
    alpha: Floats
    condensate: Floats
    thermal: Floats

    def total(self, values: Floats) -> Floats:
        """<values> over the trap, of values at the nodes. [1]"""
        summed: Floats = np.sum(self.weight * np.sqrt(self.potential) * values, axis=-1)
        return 2.0 / math.sqrt(math.pi) * summed

    def column(self, values: Floats) -> Floats:
        """Values summed along a line of sight through the centre, in units of sqrt(2 pi) thermal lengths; of a density
        also the derivative of `total` by mu/kT. [1]"""
        summed: Floats = np.sum(self.weight / np.sqrt(np.maximum(self.potential, _TINY)) * values, axis=-1)
        return summed / math.sqrt(math.pi)

    def lifted(self, height: Floats) -> Shells:
        """The same shells where the potential is higher by `height`, (cells,)."""
        return Shells(
            potential=self.potential + height[:, np.newaxis],
            weight=self.weight,
            alpha=self.alpha,
            condensate=self.condensate,
            thermal=self.thermal,
        )


def thermal_shells(repulsion: Floats, alpha: Floats) -> Shells:
    """The thermal gas outside a shell of the given alpha, with the potential counted from there: a whole cloud without
    condensate if alpha is that of its centre."""
    g, first = repulsion[:, np.newaxis], alpha[:, np.newaxis]
    outer = first + _BEYOND
    thermal, fall = bose(1.5, outer), bose(0.5, outer)
    # The potential rises by more than alpha does, since the mean field falls; g_3/2 is convex, which bounds what the
    # difference of two nearly equal densities leaves uncertain.
    drop = np.clip(bose(1.5, first) - thermal, _BEYOND * fall, _BEYOND * bose(0.5, first))
    return Shells(
        potential=_BEYOND + 2.0 * g * drop,
        weight=_BEYOND_WEIGHTS * (1.0 + 2.0 * g * fall),
        alpha=outer,
        condensate=np.zeros_like(outer),
        thermal=thermal,
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class Edge:
    """Where a condensate ends, and where it begins as mu rises. Depends on the repulsion only.

    Attributes
    ----------
    repulsion : (cells,). [1] g = 2a/lambda.
    inside, outside : (cells,). [1] alpha on both sides.
    height : (cells,). [1] y_min, the least (mu - V)/kT inside.
    """

    repulsion: Floats
    inside: Floats
    outside: Floats
    height: Floats

    @classmethod
    def of(cls, repulsion: Floats) -> Edge:
        g = np.maximum(repulsion, _WEAKEST)
        inside = bose_inverse(0.5, 0.5 / g)
        height = inside + 2.0 * g * bose(1.5, inside)
        return cls(repulsion=g, inside=inside, outside=_alpha_outside(g, inside, height), height=height)

    def at(self, cells: NDArray[np.bool_] | NDArray[np.int_] | slice) -> Edge:
        """Of some of the cells."""
        return Edge(**{field.name: getattr(self, field.name)[cells] for field in fields(self)})

    def outer_shells(self) -> Shells:
        """The thermal gas around a condensate, the potential counted from the edge."""
        return thermal_shells(self.repulsion, self.outside)

    def rise(self, centre: Floats) -> Floats:
        """mu/kT less y_min of a condensate, from alpha at its centre: V/kT of its edge. [1]"""
        g, above = self.repulsion, centre - self.inside
        steepest = np.maximum(1.0 - 2.0 * g * bose(0.5, centre), 0.0)
        rise = above + 2.0 * g * (bose(1.5, centre) - bose(1.5, self.inside))
        return np.clip(rise, 0.0, steepest * above)  # y is convex and flat at the edge


def _alpha_outside(g: Floats, alpha_inside: Floats, height: Floats) -> Floats:
    """alpha of the thermal gas at y_min: between 0 and that of the condensate."""
    # Newton for r = sqrt(alpha), in which g_3/2 is regular; a step that leaves the bracket becomes a bisection.
    low, high = np.zeros_like(g), np.sqrt(alpha_inside)
    r: Floats = (math.sqrt(2.0) - 1.0) * high  # the limit of small g
    for _ in range(_STEPS):
        alpha = r * r
        miss = alpha - 2.0 * g * bose(1.5, alpha) + height
        low, high = np.where(miss > 0.0, low, r), np.where(miss > 0.0, r, high)
        step = miss / (2.0 * r * (1.0 + 2.0 * g * bose(0.5, alpha)))
        inside = (r - step >= low) & (r - step <= high)
        r = np.where(inside, r - step, 0.5 * (low + high))
        if np.all(np.abs(step) < 2e-15 * np.maximum(r, 1.0)):  # rounding of the mean field; also where r is at the end
            break
    return r * r


def inner_shells(edge: Edge, centre: Floats) -> Shells:
    """The condensate and the thermal atoms in it, from alpha at the centre, above that of the edge."""
    g, alpha0, alpha1 = (value[:, np.newaxis] for value in (edge.repulsion, centre, edge.inside))
    q0, q1 = np.sqrt(alpha0), np.sqrt(alpha1)
    # q = sqrt(alpha) falls from q0 as t^2 rises from 0 to 1, so that the square root of u at the centre is like t. The
    # heart is free of thermal atoms; in the mantle nodes are placed by p = 1 - t, counted from the edge.
    length = q0 - q1
    part = np.minimum((_REACH - q1) / np.maximum(length, _TINY), 1.0)
    deep = part / (1.0 + np.sqrt(1.0 - part))
    heart, heart_weights = legendre(_HEART)
    mantle, mantle_weights = legendre(_MANTLE)
    t_heart, p = (1.0 - deep) * heart, deep * mantle
    t = np.concatenate([t_heart, 1.0 - p], axis=-1)
    weights = np.concatenate([(1.0 - deep) * heart_weights, deep * mantle_weights], axis=-1)
    q = np.concatenate([q0 - length * t_heart**2, q1 + length * p * (2.0 - p)], axis=-1)
    alpha = q * q
    thermal = bose(1.5, alpha)
    slope = np.maximum(1.0 - 2.0 * g * bose(0.5, alpha), 0.0)  # dy/dalpha, which rises from 0 at the edge
    steepest = np.maximum(1.0 - 2.0 * g * bose(0.5, alpha0), 0.0)
    above = length * t * t * (q0 + q)  # alpha at the centre less alpha here
    potential = above + 2.0 * g * (bose(1.5, alpha0) - thermal)
    return Shells(
        # y is convex in alpha, which bounds what the difference of two nearly equal densities leaves uncertain.
        potential=np.clip(potential, slope * above, steepest * above),
        weight=4.0 * slope * q * length * t * weights,
        alpha=alpha,
        condensate=alpha / g,
        thermal=thermal,
    )


def condensed_centre(edge: Edge, degeneracy: Floats, without: Floats) -> Floats:
    """alpha at the centre of clouds with a condensate.

    Parameters
    ----------
    degeneracy : (cells,). [1] N (hbar wbar/kT)^3.
    without : (cells,). [1] That of a cloud which has the edge at its centre, less than `degeneracy`.
    """
    # Newton for the logarithm of the atoms beyond `without`, against ln of alpha beyond the edge; the slope stays
    # between 1/2 and 5/2. It starts from the semi-ideal estimate, with y quadratic in alpha near the edge.
    g, outer = edge.repulsion, edge.outer_shells()
    beyond = degeneracy - without
    alone = (15.0 * math.sqrt(math.pi) / 8.0 * g * beyond) ** 0.4
    lifted = beyond / 1.64 + (beyond / 3.03) ** 2
    height = alone * lifted / (alone + lifted)
    x: Floats = 0.5 * (height + np.sqrt(height * (height + 200.0 * g * g)))
    low, high = np.zeros_like(x), np.full_like(x, np.inf)
    for _ in range(_STEPS):
        centre = edge.inside + x
        inner, around = inner_shells(edge, centre), outer.lifted(edge.rise(centre))
        density = inner.condensate + inner.thermal
        total = inner.total(density) + around.total(around.thermal)
        slope = (inner.column(density) + around.column(around.thermal)) * (1.0 - 2.0 * g * bose(0.5, centre))
        miss = total - degeneracy
        low, high = np.where(miss < 0.0, x, low), np.where(miss < 0.0, high, x)
        extra = total - without
        with np.errstate(all="ignore"):
            proposed = x * np.exp(-np.log(extra / beyond) * extra / (slope * x))
        middle = np.where(np.isfinite(high), 0.5 * (low + high), 4.0 * x)
        new = np.where((proposed > low) & (proposed < high), proposed, middle)
        moved = np.abs(np.log(new / x))
        done = (np.abs(miss) < 2e-15 * degeneracy) | (moved < 1e-15)
        x = np.where(done, x, new)
        # Quadratic convergence: the step just made is squared.
        if np.all(done | (moved < 1e-8)):
            return edge.inside + x
    raise ArithmeticError("the Hartree-Fock condensate did not converge")


def thermal_centre(edge: Edge, degeneracy: Floats) -> Floats:
    """alpha at the centre of clouds without a condensate, of the given N (hbar wbar/kT)^3."""
    # Newton for the logarithm of the atoms against alpha, from the side of the ideal gas, where alpha is smaller.
    g = edge.repulsion
    x: Floats = np.maximum(bose_inverse(3.0, degeneracy), edge.outside)
    low, high = edge.outside, np.full_like(x, np.inf)
    for _ in range(_STEPS):
        shells = thermal_shells(g, x)
        total = shells.total(shells.thermal)
        slope = shells.column(shells.thermal) * (1.0 + 2.0 * g * bose(0.5, x))
        miss = np.log(total / degeneracy)
        low, high = np.where(miss > 0.0, x, low), np.where(miss > 0.0, high, x)
        proposed = x + miss * total / slope
        middle = np.where(np.isfinite(high), 0.5 * (low + high), 2.0 * x + 1.0)
        new = np.where((proposed >= low) & (proposed <= high), proposed, middle)
        done = (np.abs(miss) < 2e-15) | (np.abs(new - x) < 1e-15)
        settled = done | (np.abs(new - x) < 1e-8 * x)
        x = np.where(done, x, new)
        if np.all(settled):
            return x
    raise ArithmeticError("the Hartree-Fock cloud did not converge")


def onset_ratio(repulsion: Floats) -> Floats:
    """T/Tc0 at which a condensate appears, from 2a/lambda at Tc0. [1]"""
    # At T = t Tc0 a cloud holds without a condensate what the edge at g sqrt(t) allows, and it has zeta(3)/t^3. The
    # former depends little on t: take it as constant, then follow the secant.
    y: Floats = np.zeros_like(repulsion)
    step, miss_before = np.full_like(y, np.nan), y
    for _ in range(_STEPS):
        outer = Edge.of(repulsion * np.exp(0.5 * y)).outer_shells()
        miss = np.log(outer.total(outer.thermal) / zeta(3.0)) + 3.0 * y
        with np.errstate(all="ignore"):
            slope = (miss_before - miss) / step
        step = miss / np.where((slope > 1.0) & (slope < 5.0), slope, 3.0)
        y, miss_before = y - step, miss
        if np.max(np.abs(step), initial=0.0) < 1e-13:
            onset: Floats = np.exp(y)
            return onset
    raise ArithmeticError("the Hartree-Fock onset did not converge")


def condensed_alpha(edge: Edge, height: Floats) -> Floats:
    """alpha inside the condensate where (mu - V)/kT = height, at least that of the edge."""
    # y is convex in alpha and below it: Newton from alpha = y falls onto the root without passing it.
    g, x = edge.repulsion, np.maximum(height, edge.inside)
    for _ in range(_STEPS):
        slope = 1.0 - 2.0 * g * bose(0.5, x)
        miss = x + 2.0 * g * bose(1.5, x) - height
        with np.errstate(all="ignore"):
            new = np.maximum(np.where((miss > 0.0) & (slope > 0.0), x - miss / slope, x), edge.inside)
        moved = np.max(np.abs(new - x) / x, initial=0.0)
        x = new
        if moved < 1e-15:
            break
    return x


def thermal_alpha(edge: Edge, height: Floats) -> Floats:
    """alpha outside the condensate where (mu - V)/kT = height, at most that of the edge."""
    # 2 g g_3/2 - alpha is convex and falls: Newton from below rises to the root without passing it.
    g, x = edge.repulsion, np.maximum(-height, edge.outside)
    for _ in range(_STEPS):
        miss = 2.0 * g * bose(1.5, x) - x - height
        new = x + np.maximum(miss, 0.0) / (1.0 + 2.0 * g * bose(0.5, x))
        moved = np.max(np.abs(new - x) / new, initial=0.0)
        x = new
        if moved < 1e-15:
            break
    return x


def local_densities(repulsion: float, height: Floats, *, condensed: bool) -> tuple[Floats, Floats]:
    """n lambda^3 of the thermal atoms and of the condensate where (mu - V)/kT = height, (cells,). [1]

    `condensed` false leaves a condensate out whatever the height.
    """
    edge = Edge.of(np.full_like(height, repulsion))
    inside = (height >= edge.height) & condensed
    alpha = np.where(inside, condensed_alpha(edge, height), thermal_alpha(edge, height))
    return bose(1.5, alpha), np.where(inside, alpha / edge.repulsion, 0.0)


def column_densities(repulsion: float, height: Floats, *, condensed: bool) -> tuple[Floats, Floats]:
    """`local_densities` summed along lines of sight on which (mu - V)/kT is at most `height`, in units of
    sqrt(2 pi) thermal lengths. [1]"""
    thermal, condensate = np.empty_like(height), np.zeros_like(height)
    for start in range(0, height.size, CELLS_AT_ONCE):
        part = slice(start, start + CELLS_AT_ONCE)
        thermal[part], condensate[part] = _columns(repulsion, height[part], condensed)
    return thermal, condensate


def _columns(repulsion: float, height: Floats, condensed: bool) -> tuple[Floats, Floats]:
    edge = Edge.of(np.full_like(height, repulsion))
    inside = (height >= edge.height) & condensed
    thermal, condensate = np.empty_like(height), np.zeros_like(height)
    if np.any(inside):
        within = edge.at(inside)
        centre = condensed_alpha(within, height[inside])
        inner, outer = inner_shells(within, centre), within.outer_shells().lifted(within.rise(centre))
        thermal[inside] = inner.column(inner.thermal) + outer.column(outer.thermal)
        condensate[inside] = inner.column(inner.condensate)
    without = edge.at(~inside)
    shells = thermal_shells(without.repulsion, thermal_alpha(without, height[~inside]))
    thermal[~inside] = shells.column(shells.thermal)
    return thermal, condensate
