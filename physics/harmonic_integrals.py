"""Means of squared densities over a harmonic trap, in units of kT: the density that atoms meet on average.

With u = V/kT a sum over the trap is <h> = (2/sqrt(pi)) integral of sqrt(u) h(u) du over u > 0, and N lambda^3/V_T is
<g_3/2> = g_3. What is needed here, <g_3/2^2> and <f_3/2^2>, has no closed form.
"""

from __future__ import annotations

import math
from functools import cache

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.statistics import bose, fermi

# Trapezoidal rule in ln w, u = w^2. g_3/2(e^(-alpha-w^2)) is regular for |arg w| < pi/4, so the rule converges as
# e^(-pi^2/(2 step)); the integrand falls as w^3 below and as e^(-2 w^2) above.
_STEP = 0.14
_LOG_W = np.arange(-11.0, 1.7, _STEP)
_CELLS = 512  # cells at once, to bound the memory


@cache
def legendre(order: int) -> tuple[Floats, Floats]:
    """Nodes and weights of Gauss-Legendre quadrature over 0 to 1."""
    nodes, weights = np.polynomial.legendre.leggauss(order)
    return 0.5 * (nodes + 1.0), 0.5 * weights


def bose_overlap(alpha: ArrayLike) -> Floats:
    """<g_3/2(e^(-alpha-u))^2> for alpha >= 0. [1] Relative error below 1e-12."""
    a = np.asarray(alpha, dtype=np.float64)
    u = np.exp(2.0 * _LOG_W)
    weights = 4.0 / math.sqrt(math.pi) * _STEP * u**1.5
    flat = a.reshape(-1)
    result = np.empty_like(flat)
    for start in range(0, flat.size, _CELLS):
        part = slice(start, start + _CELLS)
        result[part] = bose(1.5, flat[part, np.newaxis] + u) ** 2 @ weights
    return result.reshape(a.shape)


def fermi_overlap(log_z: ArrayLike) -> Floats:
    """<f_3/2(z e^-u)^2>. [1] Relative error below 1e-10, below 1e-12 outside 20 < ln z < 2000."""
    eta = np.asarray(log_z, dtype=np.float64)
    x, weights = legendre(48)
    flat = eta.reshape(-1)
    result = np.empty_like(flat)
    for start in range(0, flat.size, _CELLS):
        part = flat[start : start + _CELLS, np.newaxis]
        # Two panels in w = sqrt(u): the filled inside, and the rim of width kT and the empty outside.
        edge = np.sqrt(np.maximum(part, 1.0))
        end = np.sqrt(np.maximum(part, 0.0) + 40.0)
        total = np.zeros(part.shape[0])
        for low, high in ((np.zeros_like(edge), edge), (edge, end)):
            w = low + (high - low) * x
            total += ((high - low) * weights * w * w * fermi(1.5, part - w * w) ** 2).sum(axis=-1)
        result[start : start + _CELLS] = 4.0 / math.sqrt(math.pi) * total
    return result.reshape(eta.shape)
