"""Overlap of two Gaussian clouds: against numerical integration, and limits."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from physics.constants import atomic_mass, boltzmann
from physics.overlap import inverse_stiffness, joint_spread, overlap_density, overlap_exponent, overlap_of, sag

RUBIDIUM, POTASSIUM = 87.0 * atomic_mass, 40.0 * atomic_mass
MASSES = (RUBIDIUM, POTASSIUM)


def spread_of(
    first: tuple[float, float, float], second: tuple[float, float, float], temperatures: tuple[float, float]
) -> tuple[float, ...]:
    found = joint_spread(inverse_stiffness(first), inverse_stiffness(second), MASSES, temperatures)
    return tuple(float(x) for x in found)


@pytest.mark.parametrize("apart", [(0.0, 0.0, 0.0), (3e-6, -5e-6, 20e-6)])
def test_numerical_integration(apart: tuple[float, float, float]) -> None:
    frequencies, temperatures = ((30.0, 120.0, 90.0), (44.0, 170.0, 130.0)), (1.2e-6, 0.8e-6)
    product = 1.0
    for axis in range(3):
        widths = [
            math.sqrt(boltzmann * T / m) / (2.0 * math.pi * f[axis])
            for T, m, f in zip(temperatures, MASSES, frequencies, strict=True)
        ]

        def density(x: float, centre: float, width: float) -> float:
            return math.exp(-((x - centre) ** 2) / (2.0 * width**2)) / math.sqrt(2.0 * math.pi * width**2)

        span = 12.0 * max(widths)
        product *= quad(
            lambda x, w=widths, d=apart[axis]: density(x, 0.0, w[0]) * density(x, d, w[1]),
            -span, span, epsabs=0.0, epsrel=1e-11, limit=300,
        )[0]  # fmt: skip
    found = overlap_density(spread_of(*frequencies, temperatures), apart)  # type: ignore[arg-type]
    assert float(found) == pytest.approx(product, rel=1e-9)


def test_turned_axes_against_drawn_positions() -> None:
    # The mean density of one cloud at the positions of the atoms of the other; seeded, so that it always holds.
    angle = 0.5
    axes = np.array([[math.cos(angle), math.sin(angle), 0.0], [-math.sin(angle), math.cos(angle), 0.0], [0, 0, 1]])
    temperatures, apart = (1.0e-6, 1.5e-6), np.array([4e-6, 0.0, 6e-6])
    stiff = inverse_stiffness((20.0, 200.0, 80.0)), inverse_stiffness((30.0, 290.0, 120.0), axes)
    draws = np.random.default_rng(7).standard_normal((400_000, 3))
    width = np.sqrt(boltzmann * temperatures[0] / RUBIDIUM) / (2.0 * math.pi * np.array([20.0, 200.0, 80.0]))
    other = np.sqrt(boltzmann * temperatures[1] / POTASSIUM) / (2.0 * math.pi * np.array([30.0, 290.0, 120.0]))
    own = ((draws * width - apart) @ axes.T) / other
    density = np.exp(-0.5 * np.sum(own**2, axis=1)) / ((2.0 * math.pi) ** 1.5 * np.prod(other))
    found = overlap_density(joint_spread(*stiff, MASSES, temperatures), apart)
    assert float(found) == pytest.approx(density.mean(), abs=5.0 * density.std() / math.sqrt(len(density)))


frequency = st.floats(5.0, 500.0)
three = st.tuples(frequency, frequency, frequency)
temperature = st.floats(1e-8, 1e-3)


@given(three, three, temperature, temperature, st.tuples(*3 * [st.floats(-1e-4, 1e-4)]))
def test_it_does_not_matter_which_is_first(
    first: tuple[float, float, float],
    second: tuple[float, float, float],
    T1: float,
    T2: float,
    apart: tuple[float, float, float],
) -> None:
    there = joint_spread(inverse_stiffness(first), inverse_stiffness(second), MASSES, (T1, T2))
    back = joint_spread(inverse_stiffness(second), inverse_stiffness(first), MASSES[::-1], (T2, T1))
    turned = [-d for d in apart]
    assert float(overlap_density(there, apart)) == pytest.approx(float(overlap_density(back, turned)), rel=1e-12)
    assert float(overlap_exponent(there, apart)) >= 0.0


def test_far_apart_they_do_not_meet() -> None:
    spread = spread_of((100.0,) * 3, (100.0,) * 3, (1e-7, 1e-7))
    assert float(overlap_density(spread, (0.0, 0.0, 1e-3))) == 0.0  # type: ignore[arg-type]
    near = overlap_density(spread)  # type: ignore[arg-type]
    assert float(overlap_density(spread, (0.0, 0.0, 1e-9))) == pytest.approx(float(near), rel=1e-5)  # type: ignore[arg-type]


def test_sag() -> None:
    # g/w^2 at 100 Hz: 9.80665/(628.3185)^2.
    assert float(sag(100.0)) == pytest.approx(24.84e-6, rel=1e-3)


def test_mass_scaled_frequencies_in_the_same_light() -> None:
    # 87Rb at 215 Hz and 16.3 Hz, 40K at 317 Hz and 24 Hz in one magnetic trap, both with a moment of one Bohr
    # magneton: G. Roati, F. Riboli, G. Modugno, M. Inguscio, Phys. Rev. Lett. 89, 150403 (2002), recalled.
    ratio = math.sqrt(86.909 / 39.964)
    assert 215.0 * ratio == pytest.approx(317.0, rel=2e-3)
    assert 16.3 * ratio == pytest.approx(24.0, rel=2e-3)
    # There the sag of the heavier is larger by the ratio of the masses.
    assert float(sag(215.0) / sag(215.0 * ratio)) == pytest.approx(86.909 / 39.964, rel=1e-12)


def test_single_numbers_for_the_kinetics_are_those_of_arrays() -> None:
    spread = (3e-10, 2e-10, 1e-10, 4e-11, -2e-11, 1e-11)
    apart = (4e-6, -8e-6, 9e-6)
    matrix = [np.array(x) for x in spread]
    density, share = overlap_of(spread, apart)
    assert density == pytest.approx(float(overlap_density(tuple(matrix), apart)), rel=1e-13)  # type: ignore[arg-type]
    assert share == pytest.approx(math.exp(-float(overlap_exponent(tuple(matrix), apart))), rel=1e-13)  # type: ignore[arg-type]
