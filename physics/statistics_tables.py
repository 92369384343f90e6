"""Bose and Fermi functions and their inverses as tables of short polynomials: a few nanoseconds an element.

A table holds one polynomial in t, -1/2 <= t <= 1/2, for each segment of the argument. Segments are found without
rounding the argument: either pieces of ln z 1/16 wide, or the leading bits of a float, which gives every binade equally
many segments and so resolves the roots and logarithms at 0. The first use samples a table from
physics.statistics_masters.

Each kernel has `many` for flat float64 arrays and `one` for a float, the same polynomials in plain Python. Kernels hold
nothing but their tables, so threads may share them.
"""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from collections.abc import Callable
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from physics import statistics_masters as masters
from physics.statistics_coefficients import BOSE_EXPANSION, FERMI_EDGES
from physics.statistics_masters import LARGE_BOSE_HALF, LARGE_ETA, SMALL_DEFICIT, SMALL_VALUE, Array

Integers = NDArray[np.int64]

# Elements worked on at once: the buffers of one block stay in the second-level cache.
BLOCK = 16384

FERMI_SEGMENTS = 16  # per unit of ln z
FERMI_REACH = FERMI_EDGES[-1]  # tails beyond: e^(ln z) and the Sommerfeld expansion are exact to rounding
FORWARD_DEGREE = 6
INVERSE_DEGREE = 7

MANTISSA = 52
BIAS = 1023
FRACTION_MASK = np.int64((1 << MANTISSA) - 1)
ONE = np.int64(BIAS << MANTISSA)

BOSE_BITS = 5  # 32 segments per binade
INVERSE_BITS = 4  # 16
# sqrt(alpha) still counts at 1e-17 of the value, hence 2^-112; above 2^6 e^alpha g_s is 1.
BOSE_BINADES = (-112, 6)
BOSE_LOW, BOSE_HIGH = 2.0 ** BOSE_BINADES[0], math.nextafter(2.0 ** BOSE_BINADES[1], 0)
SMALL_VALUE_BINADE = round(math.log2(SMALL_VALUE))
SMALL_DEFICIT_BINADE = round(math.log2(SMALL_DEFICIT))
# The binade below the smallest deficit of the table stands for "no deficit": alpha = 0.
SATURATED = 1.5 * 2.0 ** (SMALL_DEFICIT_BINADE - 1)


class Segments:
    """Polynomials in t, stored power by power: a gather then reads one contiguous row."""

    def __init__(self, coefficients: Array) -> None:
        self.coefficients = np.ascontiguousarray(coefficients)

    @classmethod
    def fitted(cls, sample: Callable[[Array], Array], centres: Array, widths: Array, degree: int) -> Segments:
        """Interpolants of `sample` at Chebyshev nodes of each segment.

        Nodes are multiples of 2^-11, so that the arguments at them are exact; the value at the centre is taken out
        before solving for the powers, so that rounding acts on the small differences only.
        """
        nodes = np.cos(np.pi * (np.arange(degree + 1) + 0.5) / (degree + 1)) / 2
        nodes = np.rint(nodes * 2048) / 2048
        arguments = centres + np.append(nodes, 0.0)[:, np.newaxis] * widths
        # (Branches not taken may divide by zero.)
        with np.errstate(all="ignore"):
            *values, middle = sample(arguments.reshape(-1)).reshape(arguments.shape)
        coefficients = np.linalg.solve(np.vander(nodes, increasing=True), np.array(values) - middle)
        coefficients[0] += middle
        return cls(coefficients)

    @classmethod
    def by_bits(cls, sample: Callable[[Array], Array], lowest: int, highest: int, bits: int, degree: int) -> Segments:
        """Segments of the binades [2^lowest, 2^highest), 2^bits to each."""
        count = 1 << bits
        binade = np.repeat(2.0 ** np.arange(lowest, highest), count)
        centres = binade * (1 + (np.tile(np.arange(count), highest - lowest) + 0.5) / count)
        return cls.fitted(sample, centres, binade / count, degree)

    @classmethod
    def joined(cls, *parts: Segments) -> Segments:
        return cls(np.concatenate([p.coefficients for p in parts], axis=1))

    def __len__(self) -> int:
        return int(self.coefficients.shape[1])

    @cached_property
    def rows(self) -> list[list[float]]:
        """Coefficients of each segment, highest power first, for the scalar path."""
        rows: list[list[float]] = self.coefficients[::-1].T.tolist()
        return rows

    @cached_property
    def powers(self) -> tuple[Array, ...]:
        """Coefficients of each power, the highest first, for arrays."""
        return tuple(self.coefficients[::-1])

    def gather(self, index: Integers, t: Array, out: Array, scratch: Array) -> None:
        # mode="clip": with the default mode, take would buffer `out`.
        top, *rest = self.powers
        top.take(index, out=out, mode="clip")
        for row in rest:
            out *= t
            row.take(index, out=scratch, mode="clip")
            out += scratch

    def at(self, index: int, t: float) -> float:
        total = 0.0
        for c in self.rows[index]:
            total = total * t + c
        return total


def split(x: Array, bits: int, index: Integers, t: Array) -> None:
    """Leading bits of x > 0 (exponent and `bits` of the mantissa) as index, the others as t: both exact."""
    pattern, rest = x.view(np.int64), t.view(np.int64)
    np.right_shift(pattern, MANTISSA - bits, out=index)
    np.left_shift(pattern, bits, out=rest)
    np.bitwise_and(rest, FRACTION_MASK, out=rest)
    np.bitwise_or(rest, ONE, out=rest)
    np.subtract(t, 1.5, out=t)


def split_one(x: float, bits: int) -> tuple[int, float]:
    """`split` for a normal positive float."""
    mantissa, exponent = math.frexp(x)
    scaled = (2 * mantissa - 1) * (1 << bits)
    segment = int(scaled)
    return ((exponent - 1 + BIAS) << bits) + segment, scaled - segment - 0.5


def first_index(binade: int, bits: int) -> int:
    """Index that `split` gives to 2^binade."""
    return (binade + BIAS) << bits


class Kernel(ABC):
    """A function of one variable on flat arrays and on floats."""

    def many(self, x: Array) -> Array:
        out = np.empty_like(x)
        size = min(x.size, BLOCK)
        index, t, scratch = np.empty(size, np.int64), np.empty(size), np.empty(size)
        with np.errstate(all="ignore"):
            for start in range(0, x.size, BLOCK):
                part = x[start : start + BLOCK]
                n = part.size
                self.block(part, out[start : start + n], index[:n], t[:n], scratch[:n])
        return out

    def one(self, x: float) -> float:
        """Only the ordinary range has a path of its own; edges take the one of arrays."""
        return float(self.many(np.array([x]))[0])

    @abstractmethod
    def block(self, x: Array, out: Array, index: Integers, t: Array, scratch: Array) -> None: ...


class Bose(Kernel):
    """g_s(alpha)."""

    def __init__(self, twice: int) -> None:
        self.twice = twice
        # At and above s = 3/2 the lowest segment holds zeta(s): what lies below needs no path of its own.
        self.lowest = 0.0 if twice > 2 else BOSE_LOW
        self.offset = first_index(BOSE_BINADES[0], BOSE_BITS)
        self.segments = Segments.by_bits(self._scaled, *BOSE_BINADES, BOSE_BITS, FORWARD_DEGREE)

    def _scaled(self, alpha: Array) -> Array:
        """e^alpha g_s."""
        return np.exp(alpha) * masters.bose_master(self.twice, alpha)

    def block(self, x: Array, out: Array, index: Integers, t: Array, scratch: Array) -> None:
        # (Above the table the gather clips to its last segment, where the polynomial is 1.)
        np.maximum(x, BOSE_LOW, out=scratch)
        split(scratch, BOSE_BITS, index, t)
        index -= self.offset
        self.segments.gather(index, t, out, scratch)
        np.negative(x, out=scratch)
        np.exp(scratch, out=scratch)
        out *= scratch
        if not x.min() >= self.lowest:
            edge = np.flatnonzero(~(x >= self.lowest))
            out[edge] = self._edge(x[edge])

    def _edge(self, alpha: Array) -> Array:
        """Below the table, for s <= 1: the diverging term alone; NaN for alpha < 0."""
        value = np.sqrt(math.pi / alpha) if self.twice == 1 else -np.log(alpha)
        return np.where(alpha == 0, np.inf, np.where(alpha > 0, value, np.nan))

    def one(self, x: float) -> float:
        if not x >= BOSE_LOW:
            return super().one(x)
        index, t = split_one(min(x, BOSE_HIGH), BOSE_BITS)
        return self.segments.at(index - self.offset, t) * math.exp(-x)


class Fermi(Kernel):
    """f_s(ln z)."""

    def __init__(self, twice: int) -> None:
        self.twice = twice
        self.middle = round(FERMI_REACH * FERMI_SEGMENTS)
        centres = np.arange(-self.middle, self.middle + 1) / FERMI_SEGMENTS
        widths = np.full_like(centres, 1 / FERMI_SEGMENTS)
        self.segments = Segments.fitted(lambda eta: masters.fermi_master(twice, eta), centres, widths, FORWARD_DEGREE)

    def block(self, x: Array, out: Array, index: Integers, t: Array, scratch: Array) -> None:
        np.multiply(x, FERMI_SEGMENTS, out=t)
        np.rint(t, out=scratch)
        t -= scratch
        scratch += self.middle
        np.copyto(index, scratch, casting="unsafe")
        self.segments.gather(index, t, out, scratch)
        # NaN makes the comparisons false: it takes the path of the lower tail, and stays.
        if not (x.min() >= -FERMI_REACH and x.max() <= FERMI_REACH):
            low = np.flatnonzero(~(x >= -FERMI_REACH))
            out[low] = np.exp(x[low])
            high = np.flatnonzero(x > FERMI_REACH)
            out[high] = masters.fermi_large(self.twice, x[high])

    def one(self, x: float) -> float:
        if -FERMI_REACH <= x <= FERMI_REACH:
            scaled = x * FERMI_SEGMENTS
            nearest = round(scaled)
            return self.segments.at(nearest + self.middle, scaled - nearest)
        return math.exp(x) if x < -FERMI_REACH else super().one(x)


class FermiInverse(Kernel):
    """ln z at which f_s has a value."""

    def __init__(self, twice: int) -> None:
        self.twice = twice
        top = float(masters.fermi_master(twice, np.array([LARGE_ETA]))[0])
        binades = SMALL_VALUE_BINADE, math.frexp(top)[1] - 1
        self.high = 2.0 ** binades[1]
        self.offset = first_index(binades[0], INVERSE_BITS)
        self.segments = Segments.by_bits(
            lambda value: masters.fermi_root(twice, value), *binades, INVERSE_BITS, INVERSE_DEGREE
        )

    def block(self, x: Array, out: Array, index: Integers, t: Array, scratch: Array) -> None:
        split(x, INVERSE_BITS, index, t)
        index -= self.offset
        self.segments.gather(index, t, out, scratch)
        if not (x.min() >= SMALL_VALUE and x.max() < self.high):
            low = np.flatnonzero(~(x >= SMALL_VALUE))
            out[low] = masters.fermi_inverse_small(self.twice, x[low])
            high = np.flatnonzero(x >= self.high)
            out[high] = masters.fermi_inverse_large(self.twice, x[high])

    def one(self, x: float) -> float:
        if not SMALL_VALUE <= x < self.high:
            return super().one(x)
        index, t = split_one(x, INVERSE_BITS)
        return self.segments.at(index - self.offset, t)


class BoseHalfInverse(Kernel):
    """alpha at which g_1/2 has a value: it never saturates.

    alpha = pi/value^2 bends more than the other inverses: twice as many segments.
    """

    def __init__(self) -> None:
        self.offset = first_index(SMALL_VALUE_BINADE, BOSE_BITS)
        self.segments = Segments.by_bits(
            lambda value: masters.bose_root(1, value),
            SMALL_VALUE_BINADE,
            round(math.log2(LARGE_BOSE_HALF)),
            BOSE_BITS,
            INVERSE_DEGREE,
        )

    def block(self, x: Array, out: Array, index: Integers, t: Array, scratch: Array) -> None:
        split(x, BOSE_BITS, index, t)
        index -= self.offset
        self.segments.gather(index, t, out, scratch)
        if not (x.min() >= SMALL_VALUE and x.max() < LARGE_BOSE_HALF):
            low = np.flatnonzero(~(x >= SMALL_VALUE))
            out[low] = masters.bose_inverse_small(1, x[low])
            high = np.flatnonzero(x >= LARGE_BOSE_HALF)
            out[high] = masters.bose_inverse_large_half(x[high])

    def one(self, x: float) -> float:
        if not SMALL_VALUE <= x < LARGE_BOSE_HALF:
            return super().one(x)
        index, t = split_one(x, BOSE_BITS)
        return self.segments.at(index - self.offset, t)


class Saturation:
    """alpha of g_s, s >= 3/2, in two tables laid end to end: over g_s itself, and over the deficit zeta(s) - g_s.

    Each serves its half of the values; near saturation only the deficit knows alpha.
    """

    def __init__(self, twice: int) -> None:
        self.twice = twice
        self.zeta = BOSE_EXPANSION[twice][0]
        top = math.frexp(self.zeta / 2)[1]
        far = Segments.by_bits(self._far, SMALL_VALUE_BINADE, top, INVERSE_BITS, INVERSE_DEGREE)
        zero = Segments(np.zeros((INVERSE_DEGREE + 1, 1 << INVERSE_BITS)))
        near = Segments.by_bits(self._near, SMALL_DEFICIT_BINADE, top, INVERSE_BITS, INVERSE_DEGREE)
        self.segments = Segments.joined(far, zero, near)
        self.offset = first_index(SMALL_VALUE_BINADE, INVERSE_BITS)
        # Added to the index of a deficit: the far table is passed, and the near one starts at another binade.
        self.step = len(far) + self.offset - first_index(SMALL_DEFICIT_BINADE - 1, INVERSE_BITS)

    # The tables end with a binade, so they go on beyond zeta(s)/2: the segment that holds it is the last one used, and
    # reaches to 0.54 zeta(s) at most.
    def _far(self, value: Array) -> Array:
        return masters.bose_root(self.twice, np.minimum(value, 0.54 * self.zeta))

    def _near(self, deficit: Array) -> Array:
        return masters.bose_deficit_root(self.twice, np.minimum(deficit, 0.54 * self.zeta))

    def block(self, value: Array, deficit: Array, out: Array, index: Integers, t: Array) -> None:
        """`deficit` (positive) is used up."""
        near = deficit < value
        np.minimum(deficit, value, out=deficit)
        split(deficit, INVERSE_BITS, index, t)
        # By product, not by `where`, whose masked loops cost ten times as much.
        index += near * np.int64(self.step)
        index -= self.offset
        self.segments.gather(index, t, out, deficit)

    def one(self, value: float, deficit: float) -> float:
        near = deficit < value
        index, t = split_one(deficit if near else value, INVERSE_BITS)
        return self.segments.at(index - self.offset + (self.step if near else 0), t)


class BoseInverse(Kernel):
    """alpha at which g_s, s >= 3/2, has a value; 0 at and above zeta(s)."""

    def __init__(self, saturation: Saturation) -> None:
        self.saturation = saturation

    def block(self, x: Array, out: Array, index: Integers, t: Array, scratch: Array) -> None:
        np.subtract(self.saturation.zeta, x, out=scratch)
        np.maximum(scratch, SATURATED, out=scratch)
        self.saturation.block(x, scratch, out, index, t)
        if not x.min() >= SMALL_VALUE:
            low = np.flatnonzero(~(x >= SMALL_VALUE))
            out[low] = masters.bose_inverse_small(self.saturation.twice, x[low])

    def one(self, x: float) -> float:
        if not x >= SMALL_VALUE:
            return super().one(x)
        return self.saturation.one(x, max(self.saturation.zeta - x, SATURATED))


class DeficitInverse(Kernel):
    """alpha at which zeta(s) - g_s, s >= 3/2, has a value; 0 at and below 0."""

    def __init__(self, saturation: Saturation) -> None:
        self.saturation = saturation
        self.high = saturation.zeta - SMALL_VALUE

    def block(self, x: Array, out: Array, index: Integers, t: Array, scratch: Array) -> None:
        np.maximum(x, SATURATED, out=scratch)
        self.saturation.block(self.saturation.zeta - x, scratch, out, index, t)
        if not (x.min() >= SMALL_DEFICIT and x.max() < self.high):
            low = np.flatnonzero(~(x >= SMALL_DEFICIT))
            out[low] = masters.bose_deficit_inverse_small(self.saturation.twice, np.maximum(x[low], 0))
            high = np.flatnonzero(x >= self.high)
            out[high] = masters.bose_inverse_small(self.saturation.twice, self.saturation.zeta - x[high])

    def one(self, x: float) -> float:
        if not SMALL_DEFICIT <= x < self.high:
            return super().one(x)
        return self.saturation.one(self.saturation.zeta - x, x)
