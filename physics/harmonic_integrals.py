"""Means of squared densities over a harmonic trap, in units of kT: the density that atoms meet on average.

With u = V/kT a sum over the trap is <h> = (2/sqrt(pi)) integral of sqrt(u) h(u) du over u > 0, and N lambda^3/V_T is
<g_3/2> = g_3. What is needed here, <g_3/2^2> and <f_3/2^2>, has no closed form.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import cache

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.smooth import through_nodes
from physics.statistics import bose, fermi

# Trapezoidal rule in ln w, u = w^2. g_3/2(e^(-alpha-w^2)) is regular for |arg w| < pi/4, so the rule converges as
# e^(-pi^2/(2 step)); the integrand falls as w^3 below and as e^(-2 w^2) above.
_STEP = 0.14
_LOG_W = np.arange(-11.0, 1.7, _STEP)
_CELLS = 512  # cells at once, to bound the memory

Integrand = Callable[[Floats, Floats], Floats]
"""h of u and of the argument of the Bose or Fermi functions."""


@cache
def legendre(order: int) -> tuple[Floats, Floats]:
    """Nodes and weights of Gauss-Legendre quadrature over 0 to 1."""
    nodes, weights = np.polynomial.legendre.leggauss(order)
    return 0.5 * (nodes + 1.0), 0.5 * weights


def bose_overlap(alpha: ArrayLike) -> Floats:
    """<g_3/2(e^(-alpha-u))^2> for alpha >= 0. [1] Relative error below 1e-12."""
    return bose_mean(alpha, lambda u, deep: bose(1.5, deep) ** 2)


def fermi_overlap(log_z: ArrayLike) -> Floats:
    """<f_3/2(z e^-u)^2>. [1] Relative error below 1e-10, below 1e-12 outside 20 < ln z < 2000."""
    return fermi_mean(log_z, lambda u, local: fermi(1.5, local) ** 2)


def bose_mean(alpha: ArrayLike, integrand: Integrand) -> Floats:
    """<h> of h(u, alpha + u), a product of powers of u and of at least two Bose functions of order 3/2 or more. [1]

    Several integrands at once: their values may have more dimensions in front, which the answer keeps.
    """
    a = np.asarray(alpha, dtype=np.float64)
    u = np.exp(2.0 * _LOG_W)
    weights = 4.0 / math.sqrt(math.pi) * _STEP * u**1.5
    # The means are regular in sqrt(alpha) near saturation.
    root = np.sqrt(a.reshape(-1))
    means = through_nodes(lambda root: _in_parts(lambda part: integrand(u, part + u) @ weights, root * root), root)
    return means.reshape((*means.shape[:-1], *a.shape))


def fermi_mean(log_z: ArrayLike, integrand: Integrand) -> Floats:
    """<h> of h(u, ln z - u), likewise of Fermi functions. [1]"""
    x, weights = legendre(48)

    def column(part: Floats) -> Floats:
        # Two panels in w = sqrt(u): the filled inside, and the rim of width kT and the empty outside.
        edge = np.sqrt(np.maximum(part, 1.0))
        end = np.sqrt(np.maximum(part, 0.0) + 40.0)
        total: Floats = np.zeros(part.shape[0])
        for low, high in ((np.zeros_like(edge), edge), (edge, end)):
            w = low + (high - low) * x
            total = total + ((high - low) * weights * w * w * integrand(w * w, part - w * w)).sum(axis=-1)
        return 4.0 / math.sqrt(math.pi) * total

    z = np.asarray(log_z, dtype=np.float64)
    means = through_nodes(lambda flat: _in_parts(column, flat), z.reshape(-1))
    return means.reshape((*means.shape[:-1], *z.shape))


def _in_parts(function: Callable[[Floats], Floats], values: Floats) -> Floats:
    """The function of a column of values, over any number of them; its answers run along the last axis."""
    flat = values.reshape(-1, 1)
    parts = [function(flat[start : start + _CELLS]) for start in range(0, max(len(flat), 1), _CELLS)]
    result: Floats = np.concatenate(parts, axis=-1)
    return result.reshape((*result.shape[:-1], *values.shape))
