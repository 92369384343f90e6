"""How far two thermal clouds in one trap meet: Gaussians, apart by the difference of their sags.

Both are classical and in harmonic traps, so that their densities are exp(-r S^-1 r/2) around their minima, with
S = kT/(m w^2) along each axis. Where the axes of the two traps differ the integral is that of turned Gaussians.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.constants import boltzmann, standard_gravity

Spread = tuple[Floats, Floats, Floats, Floats, Floats, Floats]
"""A symmetric matrix as xx, yy, zz, xy, xz, yz."""


def sag(frequency: ArrayLike) -> Floats:
    """How far below the trap's centre atoms hang, g/w^2. [m]

    Parameters
    ----------
    frequency : array_like. [Hz] Of the trap along gravity.
    """
    below: Floats = standard_gravity / (2.0 * math.pi * np.asarray(frequency, dtype=np.float64)) ** 2
    return below


def inverse_stiffness(frequencies: ArrayLike, axes: ArrayLike | None = None) -> Spread:
    """1/w^2 of a harmonic trap as a matrix. [s^2]

    Parameters
    ----------
    frequencies : (..., 3). [Hz]
    axes : (3, 3) or None. Rows: the unit vectors that they belong to; None: x, y and z.
    """
    f = np.asarray(frequencies, dtype=np.float64)
    return turned(1.0 / (2.0 * math.pi * f) ** 2, np.eye(3) if axes is None else axes)


def turned(squares: ArrayLike, axes: ArrayLike) -> Spread:
    """A matrix by its eigenvalues.

    Parameters
    ----------
    squares : (..., 3). axes : (3, 3). Rows: the unit vectors that they belong to.
    """
    squares, e = np.asarray(squares, dtype=np.float64), np.asarray(axes, dtype=np.float64)
    xx, yy, zz, xy, xz, yz = (
        np.sum(squares * e[:, i] * e[:, j], axis=-1) for i, j in ((0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2))
    )
    return xx, yy, zz, xy, xz, yz


def joint_spread(
    first: Sequence[ArrayLike],
    second: Sequence[ArrayLike],
    masses: tuple[float, float],
    temperatures: tuple[ArrayLike, ArrayLike],
) -> Spread:
    """S of both clouds together, kT1/m1 1/w1^2 + kT2/m2 1/w2^2. [m^2]

    Parameters
    ----------
    first, second : as of `inverse_stiffness`. [s^2]
    masses : [kg]. temperatures : array_like. [K]
    """
    a, b = (boltzmann * np.asarray(T, dtype=np.float64) / m for m, T in zip(masses, temperatures, strict=True))
    xx, yy, zz, xy, xz, yz = (a * np.asarray(x) + b * np.asarray(y) for x, y in zip(first, second, strict=True))
    return xx, yy, zz, xy, xz, yz


def overlap_exponent(spread: Spread, displacement: Sequence[ArrayLike]) -> Floats:
    """d S^-1 d/2 of two clouds whose centres are d apart: the overlap is e to the minus of it times that of concentric
    clouds. [1]

    Parameters
    ----------
    spread : S of both together. [m^2]
    displacement : three array_like. [m]
    """
    x, y, z = (np.asarray(d, dtype=np.float64) for d in displacement)
    exponent: Floats = _exponent(spread, x, y, z)
    return exponent


def overlap_density(spread: Spread, displacement: Sequence[ArrayLike] = (0.0, 0.0, 0.0)) -> Floats:
    """Integral of the product of two clouds of one atom each. [1/m^3]

    prod_i exp(-d_i^2/(2 S_i))/sqrt(2 pi S_i) along common axes. Times N2 it is the mean density of the second cloud
    that an atom of the first meets.
    """
    density: Floats = np.exp(-overlap_exponent(spread, displacement)) / np.sqrt(
        (2.0 * math.pi) ** 3 * _determinant(spread)
    )
    return density


def overlap_of(spread: Sequence[float], displacement: Sequence[float]) -> tuple[float, float]:
    """`overlap_density` of two single clouds, and what it is over that of concentric ones, in plain numbers.

    For the kinetics, which asks for it a thousand times.
    """
    share = math.exp(-_exponent(spread, *displacement))
    return share / math.sqrt((2.0 * math.pi) ** 3 * _determinant(spread)), share


def _exponent(spread: Any, x: Any, y: Any, z: Any) -> Any:
    xx, yy, zz, xy, xz, yz = spread
    found = 0.5 * (
        x * x * (yy * zz - yz * yz)
        + y * y * (xx * zz - xz * xz)
        + z * z * (xx * yy - xy * xy)
        + 2.0 * x * y * (xz * yz - xy * zz)
        + 2.0 * x * z * (xy * yz - xz * yy)
        + 2.0 * y * z * (xy * xz - yz * xx)
    )
    return found / _determinant(spread)


def _determinant(spread: Any) -> Any:
    xx, yy, zz, xy, xz, yz = spread
    return xx * (yy * zz - yz * yz) - xy * (xy * zz - xz * yz) + xz * (xy * yz - xz * yy)
