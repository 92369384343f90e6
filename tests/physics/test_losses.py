"""Losses: what may be given, and the bounds on three-body loss against published numbers."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from physics.constants import atomic_mass, bohr_radius
from physics.losses import Losses, noise_heating_rate, scaling_ceiling, unitary_ceiling

HELIUM, CAESIUM = 4.002603254 * atomic_mass, 132.905451961 * atomic_mass


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({"background_lifetime": 0.0}, r"^background lifetime must be positive and finite, got 0 s$"),
        ({"background_lifetime": [60.0, math.inf]}, r"^background lifetime must be positive and finite, got inf s$"),
        ({"two_body": -1e-20}, r"^two body must not be negative, got -1e-20 m\^3/s$"),
        ({"three_body": math.inf}, r"^three body must be finite, got inf m\^6/s$"),
        ({"heating": [1e-9, -2e-9]}, r"^heating must not be negative, got -2e-09 K/s$"),
        ({"intensity_noise": -1.0}, r"^intensity noise must not be negative, got -1 1/Hz$"),
        ({"recombination_heat": -1e-30}, r"^recombination heat must not be negative, got -1e-30 J$"),
    ],
)
def test_losses_that_cannot_be_are_refused_in_a_sentence(given: dict[str, Any], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        Losses(**given)


def test_nothing_is_known_unless_given_and_zero_is_a_value() -> None:
    assert Losses().two_body is None
    assert Losses(two_body=0.0).two_body == 0.0
    assert Losses(heating=[1e-9, 2e-9]).heating.shape == (2,)


def test_scaling_ceiling_of_metastable_helium_as_printed() -> None:
    # "universal ceiling 201 hbar a^4/m = 1.0e-26 cm^6/s" for a = 142 a0, loss note of its data file; 2 digits.
    assert scaling_ceiling(HELIUM, 142.0 * bohr_radius) == pytest.approx(1.0e-38, rel=0.07)


def test_unitary_ceiling_of_lithium() -> None:
    # B. S. Rem et al., Phys. Rev. Lett. 110, 163202 (2013): K3 T^2 = 1.52e-20 uK^2 cm^6/s of 7Li, of which
    # 1 - e^(-4 eta) with eta = 0.21 is the share that reaches a deep molecule. Recalled; three digits.
    lithium = 7.0160034 * atomic_mass
    share = -math.expm1(-4.0 * 0.21)
    assert float(unitary_ceiling(lithium, 1e-6)) * share == pytest.approx(1.52e-32, rel=0.01)


def test_ceilings_scale_as_they_must() -> None:
    assert scaling_ceiling(CAESIUM, 2e-8) == pytest.approx(16.0 * float(scaling_ceiling(CAESIUM, 1e-8)), rel=1e-14)
    assert scaling_ceiling(CAESIUM, -1e-8) == scaling_ceiling(CAESIUM, 1e-8)
    assert unitary_ceiling(CAESIUM, 2e-7) == pytest.approx(float(unitary_ceiling(CAESIUM, 1e-7)) / 4.0, rel=1e-14)


def test_noise_heating_of_a_kilohertz_trap() -> None:
    # Savard, O'Hara, Thomas, Phys. Rev. A 56, R1095 (1997): pi^2 f^2 S, 9.87 1/s at 1 kHz and 1e-6 1/Hz.
    assert noise_heating_rate(1e3, 1e-6) == pytest.approx(9.8696, rel=1e-5)
    assert np.shape(noise_heating_rate([1e3, 2e3], 1e-6)) == (2,)
