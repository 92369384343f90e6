"""The volume curve: interpolation, density of states, what it refuses."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.special import gammainc

from physics.constants import boltzmann, reduced_planck
from physics.traps.volume_curve import VolumeCurve

MASS = 1.4e-25


def power_law(power: float, count: int = 60) -> VolumeCurve:
    energies = 1e-29 * np.linspace(1.0 / count, 1.0, count)
    return VolumeCurve(
        mass=MASS,
        energies=energies,
        volumes=3e20 * energies**power,
        arm_shares=np.zeros(count),
        coefficient=3e20,
        power=power,
    )


@pytest.mark.parametrize("power", [1.5, 3.0])
def test_a_power_law_comes_back(power: float) -> None:
    curve = power_law(power)
    U = np.array([1e-33, 1e-31, 1.234e-30, 9.99e-30, 1e-29])
    assert curve.volume(U) == pytest.approx(3e20 * U**power, rel=1e-10)
    assert curve.volume(0.0) == 0.0
    assert curve.volume(-1e-30) == 0.0
    assert np.isnan(curve.volume(1.01e-29))
    assert curve.volume(np.full((2, 3), 1e-30)).shape == (2, 3)


def test_the_density_of_states_of_a_harmonic_trap() -> None:
    # e^2/(2 (hbar w)^3), Bagnato, Pritchard, Kleppner, Phys. Rev. A 35, 4354 (1987).
    omegas = 2.0 * math.pi * np.array([120.0, 90.0, 20.0])
    coefficient = 4.0 * math.pi / 3.0 * (2.0 / MASS) ** 1.5 / np.prod(omegas)
    energies = 1e-29 * np.array([0.5, 1.0])
    curve = VolumeCurve(
        mass=MASS,
        energies=energies,
        volumes=coefficient * energies**1.5,
        arm_shares=np.zeros(2),
        coefficient=coefficient,
        power=1.5,
    )
    e = np.array([1e-32, 1e-30, 1e-29])
    expected = e**2 / (2.0 * reduced_planck**3 * np.prod(omegas))
    assert curve.density_of_states(e) == pytest.approx(expected, rel=1e-10)
    assert curve.density_of_states(0.0) == 0.0
    assert np.isnan(curve.density_of_states(2e-29))


def test_the_density_of_states_of_a_quadrupole() -> None:
    # rho = pi (2m)^{3/2}/h^3 C int_0^e U^3 (e-U)^{-1/2} dU, the integral being (32/35) e^{7/2}.
    curve = power_law(3.0)
    e = np.array([1e-31, 7e-30])
    h = 2.0 * math.pi * reduced_planck
    expected = math.pi * (2.0 * MASS) ** 1.5 / h**3 * 3e20 * 32.0 / 35.0 * e**3.5
    assert curve.density_of_states(e) == pytest.approx(expected, rel=1e-10)


def test_the_volume_never_falls_however_ragged_the_numbers() -> None:
    rng = np.random.default_rng(4)
    volumes = np.cumsum(rng.exponential(size=40) ** 4) * 1e-18
    energies = 1e-30 * np.linspace(0.1, 4.0, 40)
    curve = VolumeCurve(
        mass=MASS, energies=energies, volumes=volumes, arm_shares=np.zeros(40), coefficient=1e27, power=1.5
    )
    U = np.linspace(1e-33, 4e-30, 5000)
    assert np.all(np.diff(curve.volume(U)) >= -1e-12 * volumes[-1])
    assert curve.volume(energies) == pytest.approx(volumes, rel=1e-12)


def test_atoms_in_arms_are_weighed_by_what_is_filled() -> None:
    # All that is above a quarter of the ceiling is called an arm, in a harmonic trap of depth eta kT.
    count = 2000
    energies = 1e-29 * np.arange(1, count + 1) / count
    volumes = energies**1.5
    arms = np.maximum(1.0 - (2.5e-30 / energies) ** 1.5, 0.0)
    curve = VolumeCurve(mass=MASS, energies=energies, volumes=volumes, arm_shares=arms, coefficient=1.0, power=1.5)
    eta = 6.0
    u = (np.arange(200_000) + 0.5) / 200_000 * eta
    filled = np.sqrt(u) * np.exp(-u) * gammainc(1.5, eta - u)
    expected = np.sum(filled[u > eta / 4.0]) / np.sum(filled)
    assert curve.atoms_in_arms(1e-29 / (eta * boltzmann)) == pytest.approx(expected, rel=1e-3)
    coldest, hottest = curve.atoms_in_arms(np.array([1e-6, 1e6]) * 1e-29 / boltzmann)
    assert 0.0 <= coldest < hottest < 1.0
    assert curve.arm_share(np.array([1e-30, 1e-29])) == pytest.approx([0.0, 1.0 - 0.125])


def test_what_is_no_curve_is_refused() -> None:
    good = {"mass": MASS, "arm_shares": [0.0, 0.0], "coefficient": 1.0, "power": 1.5}
    with pytest.raises(ValueError, match=r"^energies and volumes of a volume curve must rise$"):
        VolumeCurve(energies=[2e-30, 1e-30], volumes=[1.0, 2.0], **good)
    with pytest.raises(ValueError, match=r"^volume of a volume curve must be positive and finite, got 0 m\^3$"):
        VolumeCurve(energies=[1e-30, 2e-30], volumes=[0.0, 2.0], **good)
    with pytest.raises(ValueError, match="rows of one length"):
        VolumeCurve(energies=[1e-30, 2e-30, 3e-30], volumes=[1.0, 2.0, 3.0], **good)
