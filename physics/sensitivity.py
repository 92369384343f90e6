"""How uncertain inputs spread an answer: the same few thousand well-spread draws every time.

Draws are a rank-1 lattice, shifted by a seeded random vector and mapped to normal deviates. A positive quantity is
drawn log-normally, so that it stays positive. The answer at all draws is one array, whose quantiles are the interval.

References
----------
[1] I. H. Sloan and S. Joe, Lattice Methods for Multiple Integration (1994).
[2] D. Nuyens and R. Cools, Math. Comp. 75, 903 (2006): construction component by component.
[3] M. J. Wichura, Appl. Stat. 37, 477 (1988), algorithm AS 241; as in the standard library.
"""

from __future__ import annotations

from functools import cache

import numpy as np

from physics.checks import Floats

# Made by tests/generators/lattice_vector.py, each for its number of points.
_VECTORS = {
    1024: (1, 275, 421, 231, 71, 453, 135, 305, 155, 265, 43, 203),
    4096: (1, 1557, 1087, 701, 1163, 321, 1649, 207, 1827, 1203, 1935, 1869),
}

DIMENSIONS = 12
"""Inputs that the lattice spreads jointly; of more, each has its draws at even quantiles in an order by chance."""


def lattice(count: int, dimensions: int, *, seed: int = 0) -> Floats:
    """Normal deviates, mean 0 and standard deviation 1, one column for each uncertain input.

    Parameters
    ----------
    count : int. Draws; made for 1024 and 4096, fair for other powers of two.
    dimensions : int. Best up to `DIMENSIONS`.
    seed : int. Equal seeds give equal draws.

    Returns
    -------
    (count, dimensions). [1]

    Raises
    ------
    ValueError : for no draws, or fewer dimensions than none.
    """
    if count < 1:
        raise ValueError(f"number of draws must be 1 or more, got {count}")
    if dimensions < 0:
        raise ValueError(f"number of uncertain inputs must not be negative, got {dimensions}")
    return _deviates(count, dimensions, seed)


@cache
def _deviates(count: int, dimensions: int, seed: int) -> Floats:
    # The standard library's quantile of the normal distribution is good to 1e-16 [3]; loading scipy.special for it
    # would take longer than all else that an answer needs.
    from random import Random
    from statistics import NormalDist

    random = Random(seed)
    shift = np.array([random.random() for _ in range(dimensions)])
    vector = np.array(_VECTORS.get(count, _VECTORS[4096])[:dimensions], dtype=np.int64)
    places = np.arange(count)[:, np.newaxis] * vector % count
    more = [random.sample(range(count), count) for _ in range(dimensions - len(vector))]
    points = (np.column_stack([places, *more]) / count + shift) % 1.0
    # A point at 0 would be infinitely far out; the shift keeps all from it, but for its own rounding.
    inside = np.clip(points, 1e-16, 1.0 - 1e-16)
    deviates = np.array([*map(NormalDist().inv_cdf, inside.ravel().tolist())], dtype=np.float64).reshape(inside.shape)
    deviates.flags.writeable = False
    return deviates


def sample(value: float, sigma: float, column: Floats) -> Floats:
    """Draws of one input.

    A positive value is drawn log-normally, with the value as median and a relative spread that is sigma/value where
    that is small; any other value normally.

    Parameters
    ----------
    value, sigma : float. [any unit] sigma >= 0.
    column : (count,). [1] Of the lattice.

    Raises
    ------
    ValueError : for a negative sigma.
    """
    if not sigma >= 0.0:
        raise ValueError(f"standard uncertainty must not be negative, got {sigma:g}")
    if value > 0.0:
        spread = np.sqrt(np.log1p((sigma / value) ** 2))
        drawn: Floats = value * np.exp(spread * column)
        return drawn
    return value + sigma * column


LOW, HIGH = 0.16, 0.84
"""The quantiles between which an answer is said to lie."""


def interval(draws: Floats) -> tuple[Floats, Floats, Floats]:
    """16 %, 50 % and 84 % quantiles over the first axis, interpolated linearly between draws."""
    places = [quantile * (draws.shape[0] - 1) for quantile in (LOW, 0.5, HIGH)]
    below = [int(place) for place in places]
    above = [min(place + 1, draws.shape[0] - 1) for place in below]
    # A partition finds these few order statistics without the bookkeeping of a general quantile.
    ordered = np.partition(draws, sorted({*below, *above}), axis=0)
    low, median, high = (
        ordered[one] + (place - one) * (ordered[other] - ordered[one])
        for place, one, other in zip(places, below, above, strict=True)
    )
    return low, median, high
