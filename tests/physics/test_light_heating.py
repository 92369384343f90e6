"""Recoil and shaking: against the trade's table and against moving the trap by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.constants import atomic_mass, boltzmann
from physics.light_heating import (
    harmonic_heating_rate,
    pointing_heating_power,
    recoil_energy,
    recoil_heating_power,
    recoil_temperature,
)


def test_an_atom_that_took_up_a_photon_has_its_momentum() -> None:
    mass, wavelength = 87.0 * atomic_mass, 780e-9
    momentum = 6.62607015e-34 / wavelength
    assert recoil_energy(mass, wavelength) == pytest.approx(momentum**2 / (2.0 * mass), rel=1e-14)


def test_each_scattered_photon_leaves_a_third_of_the_recoil_temperature() -> None:
    # Grimm, Weidemueller, Ovchinnikov (2000), eq. (22) with a harmonic trap, where potential energy is half.
    power = recoil_heating_power(87.0 * atomic_mass, 780e-9, 3.0)
    rate = harmonic_heating_rate(power)
    assert rate == pytest.approx(recoil_temperature(87.0 * atomic_mass, 780e-9) * 3.0 / 3.0, rel=1e-14)


def test_recoil_broadcasts() -> None:
    wavelengths = np.array([532e-9, 1064e-9])
    assert recoil_temperature(87.0 * atomic_mass, wavelengths).shape == (2,)


def test_a_shaking_trap_heats_as_a_kicked_oscillator_does() -> None:
    # White noise of the position with a one-sided density S: an oscillator at rest, driven by w^2 x0(t), gains energy
    # at (m/2) w^4 S/2, whatever the time step of the noise.
    mass, f, S, step = 1.0, 50.0, 1e-6, 1e-4
    rng = np.random.default_rng(3)
    count, runs = 4000, 2000
    w = 2.0 * math.pi * f
    # Steps of length `step` with variance S/(2 step) have that density far below 1/step.
    x = np.zeros(runs)
    v = np.zeros(runs)
    c, s = math.cos(w * step), math.sin(w * step)
    for _ in range(count):
        x0 = rng.normal(size=runs) * math.sqrt(S / (2.0 * step))
        y = x - x0
        x, v = x0 + c * y + s / w * v, -w * s * y + c * v
    gained = np.mean(0.5 * mass * (v**2 + (w * x) ** 2)) / (count * step)
    # 2000 runs: 2.2 % each standard deviation.
    assert gained == pytest.approx(float(pointing_heating_power(mass, f, S)), rel=0.08)


def test_heat_is_shared_by_three_directions() -> None:
    assert harmonic_heating_rate(3.0 * boltzmann) == pytest.approx(1.0)
