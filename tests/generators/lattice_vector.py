"""Finds the generating vector of physics.sensitivity, component by component.

Each component minimises the worst-case error P_2 of the rank-1 lattice so far, with weight 1/j^2 for the j-th variable.
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


def kernel(x: NDArray[np.float64]) -> NDArray[np.float64]:
    """2 pi^2 B_2(x), the sum of e^(2 pi i h x)/h^2 over h other than 0."""
    return 2.0 * np.pi**2 * (x * x - x + 1.0 / 6.0)


def generating_vector(count: int = COUNT, dimensions: int = DIMENSIONS) -> tuple[int, ...]:
    candidates = np.arange(1, count // 2, 2)
    points = np.arange(count)
    product = np.ones(count)
    vector: list[int] = []
    for j in range(1, dimensions + 1):
        errors = [product @ (1.0 + kernel(points * z % count / count) / j**2) for z in candidates]
        best = 1 if j == 1 else int(candidates[int(np.argmin(errors))])
        vector.append(best)
        product = product * (1.0 + kernel(points * best % count / count) / j**2)
    return tuple(vector)


if __name__ == "__main__":
    print(generating_vector())
