"""Finds the generating vector of physics.sensitivity, component by component.

Each component minimises the worst-case error P_2 of the rank-1 lattice so far, with weight 1/j^2 for the j-th variable;
few points serve all variables alike, with one small weight for each.
Run it to print the vector:

    python tests/generators/lattice_vector.py

Reference
---------
[1] I. H. Sloan and A. V. Reztsov, Math. Comp. 71, 263 (2002): component-by-component construction.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

COUNT = 4096
DIMENSIONS = 12
TIE = 1e-12
"""Relative difference of errors below which they are the same number."""


def kernel(x: NDArray[np.float64]) -> NDArray[np.float64]:
    """2 pi^2 B_2(x), the sum of e^(2 pi i h x)/h^2 over h other than 0."""
    return 2.0 * np.pi**2 * (x * x - x + 1.0 / 6.0)


def generating_vector(
    count: int = COUNT, dimensions: int = DIMENSIONS, *, weight: float | None = None
) -> tuple[int, ...]:
    """The vector for a number of points. `weight`: of every variable; None: 1/j^2."""
    candidates = np.arange(1, count // 2, 2)
    points = np.arange(count)
    product = np.ones(count)
    vector: list[int] = []
    for j in range(1, dimensions + 1):
        w = 1.0 / j**2 if weight is None else weight
        errors = np.array([product @ (1.0 + w * kernel(points * z % count / count)) for z in candidates])
        # z and its inverse give the same lattice with axes exchanged: the first, whichever way the sums are rounded.
        best = 1 if j == 1 else int(candidates[np.argmax(errors <= errors.min() * (1.0 + TIE))])
        vector.append(best)
        product = product * (1.0 + w * kernel(points * best % count / count))
    return tuple(vector)


if __name__ == "__main__":
    print(generating_vector(1024, weight=0.03))
    print(generating_vector())
