"""Heating in a trap: averages over the cloud, noise, and the zero of a quadrupole."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from physics.constants import boltzmann
from physics.species import State
from physics.traps import Coils, Trap
from physics.traps.heating import light_shares, noise_growth_rate, pointing_power, thermal_heating
from physics.traps.survey import Survey, survey


def test_a_cold_cloud_scatters_as_at_the_minimum_and_a_warm_one_less(single: Trap, rubidium: State) -> None:
    found = survey(replace(single, gravity=None), rubidium)
    assert found.potential is not None
    assert found.basin is not None
    at_rest = found.heating.scattering_rate
    cold = thermal_heating(found.potential, found.basin.minimum, 1e-9)
    assert cold.scattering_rate == pytest.approx(at_rest, rel=1e-4)
    # To first order the light is weaker by 3 kT/2 over the depth, all of the potential energy being the light's.
    T = 2e-6
    warm = thermal_heating(found.potential, found.basin.minimum, T)
    first = 1.0 - 1.5 * T / found.depth_temperature  # type: ignore[operator]
    assert warm.scattering_rate / at_rest == pytest.approx(first, abs=3.0 * (T / found.depth_temperature) ** 2)  # type: ignore[operator]
    assert warm.heating_rate / found.heating.heating_rate == pytest.approx(warm.scattering_rate / at_rest)


def test_no_thermal_average_at_a_cusp(rubidium: State) -> None:
    found: Survey = survey(Trap(coils=Coils(gradient=2.0)), rubidium)
    assert found.potential is not None
    assert found.basin is not None
    with pytest.raises(ValueError, match="needs a minimum with three frequencies"):
        thermal_heating(found.potential, found.basin.minimum, 1e-6)


def test_the_light_makes_all_of_a_trap_of_beams_and_none_of_one_of_coils(single: Trap, rubidium: State) -> None:
    coils = Coils(axis=[1.0, 0.0, 0.0], bias=2e-4, gradient=1.5, curvature=100.0)
    for trap, share in ((single, 1.0), (Trap(coils=coils), 0.0)):
        found = survey(trap, rubidium)
        assert found.potential is not None
        np.testing.assert_allclose(light_shares(found.potential, found.minimum, found.axes), share, atol=1e-12)
    # Springs add: with both, the light's is its share of the sum.
    found = survey(Trap(beams=single.beams, coils=coils, gravity=None), rubidium)
    alone = survey(Trap(beams=single.beams, gravity=None), rubidium)
    assert found.potential is not None
    shares = light_shares(found.potential, found.minimum, found.axes)
    np.testing.assert_allclose(shares, (alone.frequencies / found.frequencies) ** 2, rtol=1e-6)


def test_noise_of_the_intensity_counts_as_the_mean_over_the_axes() -> None:
    # pi^2 f^2 S(2f): Savard, O'Hara, Thomas, Phys. Rev. A 56, R1095 (1997).
    f, S = np.array([100.0, 200.0, 20.0]), 1e-10
    assert noise_growth_rate(f, S) == pytest.approx(math.pi**2 * S * (1e4 + 4e4 + 400.0) / 3.0)
    assert noise_growth_rate(f, [S, 0.0, 0.0]) == pytest.approx(math.pi**2 * S * 1e4 / 3.0)


def test_shaking_adds_over_the_axes() -> None:
    one = pointing_power(1.4e-25, [100.0], 1e-18)
    assert pointing_power(1.4e-25, [100.0, 200.0, 100.0], 1e-18) == pytest.approx(18.0 * one)
    # 1e-18 m^2/Hz at 100 Hz: 4 pi^4 m f^4 S/(3k), 0.13 nK/s.
    assert one == pytest.approx(4.0 * math.pi**4 * 1.4e-25 * 1e8 * 1e-18, rel=1e-12)
    assert one / (3.0 * boltzmann) == pytest.approx(1.317e-10, rel=1e-3)
