"""Bose and Fermi functions of ideal quantum gases, and their inverses, to rounding.

With alpha = -ln z >= 0 and ln z the logarithm of the fugacity,

    bose(s, alpha) = Li_s(e^-alpha)     = 1/Gamma(s) integral of t^(s-1) / (e^(t + alpha) - 1) over t > 0,
    fermi(s, log_z) = -Li_s(-e^log_z)   = 1/Gamma(s) integral of t^(s-1) / (e^(t - log_z) + 1) over t > 0.

Everything takes -ln z or ln z, never z: z near 1 has lost alpha, and e^(ln z) overflows at 709. The order s is 1/2, 1,
3/2, ... 4. Derivatives are other orders: d bose(s)/d ln z = bose(s - 1), d fermi(s)/d ln z = fermi(s - 1).

A number gives a float, an array or sequence of any shape a float64 array of that shape. NaN gives NaN. Functions keep
no scratch memory and may be called from several threads.

References
----------
[1] NIST Digital Library of Mathematical Functions, https://dlmf.nist.gov/25.12 (polylogarithms).
"""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING, Any, overload

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    from physics.statistics_tables import Kernel, Saturation

    _Array = NDArray[np.float64]
    _Arrays = NDArray[Any] | Sequence[Any]

# Twice the order, for every order served.
_TWICE = {n / 2: n for n in range(1, 9)}

# Riemann zeta(s): the largest value of bose(s).
_ZETA = {
    1.5: 2.612375348685488,
    2.0: 1.6449340668482264,
    2.5: 1.341487257250917,
    3.0: 1.2020569031595942,
    3.5: 1.1267338673170566,
    4.0: 1.0823232337111381,
}


def _twice(s: float) -> int:
    try:
        return _TWICE[s]
    except (KeyError, TypeError):
        raise ValueError(f"order s must be one of 1/2, 1, 3/2, 2, 5/2, 3, 7/2 and 4, got {s!r}") from None


def zeta(s: float) -> float:
    """Riemann zeta(s) for s = 3/2, 2, 5/2, 3, 7/2 and 4: bose(s, 0), where a gas saturates."""
    try:
        return _ZETA[s]
    except (KeyError, TypeError):
        raise ValueError(f"order s must be one of 3/2, 2, 5/2, 3, 7/2 and 4, got {s!r}") from None


# Kernels, and with them the coefficients, are loaded by the first call that needs them. Two threads that ask at once
# may both build one; either serves.
@cache
def _bose(twice: int) -> Kernel:
    from physics.statistics_tables import Bose

    return Bose(twice)


@cache
def _fermi(twice: int) -> Kernel:
    from physics.statistics_tables import Fermi

    return Fermi(twice)


@cache
def _fermi_inverse(twice: int) -> Kernel:
    from physics.statistics_tables import FermiInverse

    return FermiInverse(twice)


@cache
def _saturation(twice: int) -> Saturation:
    from physics.statistics_tables import Saturation

    return Saturation(twice)


@cache
def _bose_inverse(twice: int) -> Kernel:
    from physics.statistics_tables import BoseHalfInverse, BoseInverse

    if twice == 1:
        return BoseHalfInverse()
    # g_1 = -ln(1 - e^-alpha) is its own inverse.
    return _bose(2) if twice == 2 else BoseInverse(_saturation(twice))


@cache
def _deficit_inverse(twice: int) -> Kernel:
    from physics.statistics_tables import DeficitInverse

    return DeficitInverse(_saturation(twice))


def _apply(kernel: Kernel, argument: float | ArrayLike) -> float | _Array:
    if isinstance(argument, (float, int)):
        return kernel.one(float(argument))
    x = np.asarray(argument, dtype=np.float64)
    if x.ndim == 0:
        return kernel.one(float(x))
    return kernel.many(x.reshape(-1)).reshape(x.shape)


@overload
def bose(s: float, alpha: float) -> float: ...
@overload
def bose(s: float, alpha: _Arrays) -> _Array: ...
def bose(s: float, alpha: ArrayLike) -> float | _Array:
    """Bose function g_s = Li_s(e^-alpha).

    Parameters
    ----------
    s : one of 1/2, 1, ... 4.
    alpha : array_like. [1] -ln z, from 0 to inf. alpha = 0 gives zeta(s), inf for s <= 1; alpha < 0 gives NaN.

    Returns
    -------
    float or array of the shape of alpha. [1] Relative error at most 2e-15.

    Raises
    ------
    ValueError : for any other order.
    """
    return _apply(_bose(_twice(s)), alpha)


@overload
def fermi(s: float, log_z: float) -> float: ...
@overload
def fermi(s: float, log_z: _Arrays) -> _Array: ...
def fermi(s: float, log_z: ArrayLike) -> float | _Array:
    """Fermi function f_s = -Li_s(-z).

    Parameters
    ----------
    s : one of 1/2, 1, ... 4.
    log_z : array_like. [1] ln z, from -inf to inf.

    Returns
    -------
    float or array of the shape of log_z. [1] Relative error at most 2e-15.

    Raises
    ------
    ValueError : for any other order.
    """
    return _apply(_fermi(_twice(s)), log_z)


@overload
def bose_inverse(s: float, value: float) -> float: ...
@overload
def bose_inverse(s: float, value: _Arrays) -> _Array: ...
def bose_inverse(s: float, value: ArrayLike) -> float | _Array:
    """alpha at which g_s has the given value; 0 (condensed) at and above zeta(s).

    bose(s, alpha) returns the value to about 2e-15. Near saturation alpha itself is no better known than the rounding
    of the value allows: by |error| = 1e-16 g_s/g_(s-1). `bose_inverse_from_deficit` has no such limit.

    Parameters
    ----------
    s : one of 1/2, 1, ... 4.
    value : array_like. [1] From 0 (alpha = inf) on. A negative value gives NaN.

    Returns
    -------
    float or array of the shape of value. [1]

    Raises
    ------
    ValueError : for any other order.
    """
    return _apply(_bose_inverse(_twice(s)), value)


@overload
def bose_inverse_from_deficit(s: float, deficit: float) -> float: ...
@overload
def bose_inverse_from_deficit(s: float, deficit: _Arrays) -> _Array: ...
def bose_inverse_from_deficit(s: float, deficit: ArrayLike) -> float | _Array:
    """alpha at which zeta(s) - g_s has the given value; 0 (condensed) for a deficit of 0 or less.

    Parameters
    ----------
    s : one of 3/2, 2, ... 4.
    deficit : array_like. [1] zeta(s) - g_s, to zeta(s) (alpha = inf). Above zeta(s) gives NaN.

    Returns
    -------
    float or array of the shape of deficit. [1] Relative error at most 4e-15 up to half of zeta(s).

    Raises
    ------
    ValueError : for any other order; at s = 1/2 and 1 no gas saturates.
    """
    zeta(s)
    return _apply(_deficit_inverse(_twice(s)), deficit)


@overload
def fermi_inverse(s: float, value: float) -> float: ...
@overload
def fermi_inverse(s: float, value: _Arrays) -> _Array: ...
def fermi_inverse(s: float, value: ArrayLike) -> float | _Array:
    """ln z at which f_s has the given value.

    Parameters
    ----------
    s : one of 1/2, 1, ... 4.
    value : array_like. [1] From 0 (ln z = -inf) to inf. A negative value gives NaN.

    Returns
    -------
    float or array of the shape of value. [1] Error at most 4e-15 max(1, |ln z|).

    Raises
    ------
    ValueError : for any other order.
    """
    return _apply(_fermi_inverse(_twice(s)), value)
