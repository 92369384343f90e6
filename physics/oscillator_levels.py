"""Sums over the discrete levels of a three-dimensional oscillator, for ideal bosons of any number.

The occupation of a level is a power series in the fugacity, and the sum over levels of each power is in closed form:

    N = 1/expm1(alpha) + sum_j e^(-j alpha) [prod_i 1/(1 - e^(-j b_i)) - 1],    b_i = hbar w_i/kT,

alpha = (E0 - mu)/kT from the ground level E0. Densities follow in the same way from the oscillator's propagator. Up to
about 45/b terms count, millions in a long trap; but over j from J to 2J a term is smooth, its singularities being on
the imaginary axis of j, so a Gauss rule for sums over integers takes 20 of them. The cost hardly depends on the trap.

References
----------
[1] S. Grossmann and M. Holthaus, Phys. Lett. A 208, 188 (1995); W. Ketterle and N. J. van Druten, Phys. Rev. A 54, 656
    (1996): the sums.
[2] R. P. Feynman, Statistical Mechanics (1972), ch. 2: the propagator. Recalled.
[3] DLMF 18.19: the Hahn polynomials, here with weight 1, orthogonal on integers.
"""

from __future__ import annotations

import math
from functools import cache

import numpy as np

from physics.checks import Floats

_ORDER = 20  # nodes a block: relative error 5.8^-40
COARSE_ORDER = 8  # where pairs of them are summed: 5.8^-16
_RANGE = 45.0  # e^-45 is nothing
_STEPS = 200
_NODES = 4.0  # of an integral over space, for each unit of t


@cache
def integer_rule(count: int, order: int) -> tuple[Floats, Floats]:
    """Nodes and weights that sum polynomials of degree below 2 order over 0, 1, ... count - 1; every integer itself
    where order reaches count."""
    if order >= count:
        return np.arange(count, dtype=np.float64), np.ones(count)
    n = np.arange(1.0, order)
    off_diagonal = 0.5 * n * np.sqrt((count * count - n * n) / (4.0 * n * n - 1.0))
    jacobi = np.diag(off_diagonal, 1) + np.diag(off_diagonal, -1)
    nodes, vectors = np.linalg.eigh(jacobi)
    return nodes + 0.5 * (count - 1), count * vectors[0] ** 2


@cache
def _powers(blocks: int, order: int) -> tuple[Floats, Floats]:
    """Nodes and weights for a sum over j from 1 to 2^blocks - 1."""
    rules = [integer_rule(1 << k, order) for k in range(blocks)]
    nodes = np.concatenate([(1 << k) + nodes for k, (nodes, _) in enumerate(rules)])
    return nodes, np.concatenate([weights for _, weights in rules])


class OscillatorLevels:
    """The levels of one trap at one temperature.

    Attributes
    ----------
    spacings : (3,). [1] b_i = hbar w_i/kT.
    """

    def __init__(self, spacings: Floats, order: int = _ORDER) -> None:
        self.spacings = spacings
        blocks = max(1, math.ceil(math.log2(_RANGE / float(spacings.min()) + 2.0)))
        self._j, self._weights = _powers(blocks, order)
        # Occupations above 1e-300 are all that matters, and expm1 must not overflow.
        x, y, z = self._axis = 1.0 / np.expm1(np.minimum(spacings[:, np.newaxis] * self._j, 690.0))
        # prod(1 + e_i) - 1, without the difference.
        self._excited = x + y + z + x * y + y * z + z * x + x * y * z

    def _fugacity_powers(self, alpha: float) -> Floats:
        powers: Floats = self._weights * np.exp(-self._j * alpha)
        return powers

    def excited_atoms(self, alpha: float) -> float:
        """Atoms above the ground level; alpha = 0 gives the most there can be."""
        return float(self._fugacity_powers(alpha) @ self._excited)

    def ground_atoms(self, atoms: float) -> float:
        """Atoms in the ground level when all levels hold `atoms`, in the grand-canonical mean."""
        # Newton for ln N against ln N0. A level at e holds at most e^(-e/kT) as many atoms as the ground level, which
        # gives the lower end of the bracket; what leaves the bracket is bisected.
        high = math.log(atoms)
        low = high + float(np.log(-np.expm1(-self.spacings)).sum())
        y = high
        for _ in range(_STEPS):
            ground = math.exp(y)
            powers = self._fugacity_powers(math.log1p(1.0 / ground)) * self._excited
            excited = float(powers.sum())
            total = ground + excited
            miss = math.log(total / atoms)
            if miss > 0.0:
                high = y
            else:
                low = y
            rise = (ground + float(self._j @ powers) / (1.0 + ground)) / total
            step = miss / rise
            if abs(miss) < 2e-16 or abs(step) < 1e-15 * abs(y):
                break
            proposed = y - step
            if not low < proposed < high:
                proposed = 0.5 * (low + high)
                if proposed in (low, high):
                    break
            y = proposed
        return min(math.exp(y), atoms)

    def excited_energies(self, alpha: float) -> Floats:
        """(3,) Energy of the excited atoms in each axis, zero-point energy included, in kT."""
        powers = self._fugacity_powers(alpha)
        zero_point = 0.5 * float(powers @ self._excited)
        above: Floats = self._axis @ (powers * (1.0 + self._excited))
        return self.spacings * (zero_point + above)

    def excited_density(self, alpha: float, squares: Floats) -> Floats:
        """Density of the excited atoms, in units of the peak density 1/(pi^(3/2) aho^3) of one ground-level atom.

        Parameters
        ----------
        alpha : float. [1]
        squares : (3, points). [1] (x_i/a_i)^2 with a_i = sqrt(hbar/(m w_i)).
        """
        return self._sum_of_propagators(alpha, squares, None)

    def excited_column(self, alpha: float, squares: Floats, along: int) -> Floats:
        """`excited_density` summed along one axis, in units of 1/(pi a_j a_k) of the other two; the row of `squares`
        of that axis is not used."""
        return self._sum_of_propagators(alpha, squares, along)

    def densities_in_space(self, alpha: float) -> tuple[Floats, Floats, Floats]:
        """Density of the excited atoms and of one atom in the ground level at points of an eighth of space, and the
        weights that make a sum over them an integral over all of it.

        Densities in units of 1/(pi^(3/2) aho^3), the integral in the inverse of that: one atom gives 1. Nodes are even
        in t = arsinh(x/a), in which the narrow ground level and the wide cloud of excited atoms are both smooth and
        end as e^(-e^2t); integrals of densities squared and cubed have relative errors below 1e-6.
        """
        tables, grounds, weights = [], [], []
        for spacing in self.spacings:
            end = math.asinh(math.sqrt(40.0 * max(1.0, 1.0 / spacing)))
            t, step = np.linspace(0.0, end, math.ceil(_NODES * end), retstep=True)
            x, weight = np.sinh(t), 2.0 / math.sqrt(math.pi) * np.cosh(t) * step
            weight[0] *= 0.5
            jb = np.minimum(self._j * spacing, 300.0)[:, np.newaxis]
            tables.append(np.exp(-x * x * np.tanh(0.5 * jb)) / np.sqrt(-np.expm1(-2.0 * jb)))
            grounds.append(np.exp(-x * x))
            weights.append(weight)
        powers = self._fugacity_powers(alpha)
        first = tables[0] * powers[:, np.newaxis]
        pairs = (first[:, :, np.newaxis] * tables[1][:, np.newaxis, :]).reshape(self._j.size, -1)
        ground = np.einsum("a,b,c->abc", *grounds)
        # Less the ground level itself, as everywhere here: it has no power series where it holds many atoms.
        together = (pairs.T @ tables[2]).reshape(ground.shape)
        excited = np.maximum(together - powers.sum() * ground, 0.0)
        return excited, ground, np.einsum("a,b,c->abc", *weights)

    def _sum_of_propagators(self, alpha: float, squares: Floats, along: int | None) -> Floats:
        j = self._j[:, np.newaxis]
        # ln of each propagator over that of the ground level: 1/sqrt(1 - e^(-2jb)) at the centre, and a wider Gaussian.
        ratio = np.zeros((j.size, squares.shape[1]))
        ground = np.zeros(squares.shape[1])
        for i, spacing in enumerate(self.spacings):
            jb = np.minimum(j * spacing, 300.0)
            if i == along:
                ratio += np.log1p(1.0 / np.expm1(jb))
            else:
                ratio += 0.5 * np.log1p(1.0 / np.expm1(2.0 * jb)) + squares[i] * 2.0 / (np.exp(jb) + 1.0)
                ground -= squares[i]
        # Less the ground level itself: as a product where both are alike, as a difference where one dwarfs the other.
        alike = np.expm1(np.minimum(ratio, 1.0)) * np.exp(ground)
        terms = np.where(ratio < 1.0, alike, np.exp(ratio + ground) - np.exp(ground))
        density: Floats = self._fugacity_powers(alpha) @ terms
        return density


def squared_density(spacings: Floats, alpha: float, ground: float) -> float:
    """Integral of the squared density of all atoms, ground level and excited ones, in 1/(pi^(3/2) aho^3). [1]

    Relative error below 1e-10.
    """
    levels = OscillatorLevels(spacings, COARSE_ORDER)
    j = levels._j
    amplitude, tanh = np.ones_like(j), np.empty((3, j.size))
    for i in range(3):
        jb = np.minimum(spacings[i] * j, 300.0)
        amplitude /= np.sqrt(-np.expm1(-2.0 * jb))
        tanh[i] = np.tanh(0.5 * jb)
    powers = levels._fugacity_powers(alpha)
    both = 1.0 / math.sqrt(8.0)
    # Overlaps of two propagators, less those with the ground level: what is left falls off in both indices.
    with_ground = amplitude / np.sqrt(np.prod(tanh + 1.0, axis=0))
    pairs = np.outer(amplitude, amplitude) / np.sqrt(np.prod(tanh[:, :, np.newaxis] + tanh[:, np.newaxis, :], axis=0))
    excited = float(powers @ (pairs - with_ground - with_ground[:, np.newaxis] + both) @ powers)
    mixed = 2.0 * ground * float(powers @ (with_ground - both))
    return excited + mixed + both * ground * ground
