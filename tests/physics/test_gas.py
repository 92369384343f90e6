"""The atoms of an evaporation collide as those of an equilibrium."""

from __future__ import annotations

import numpy as np
import pytest

from physics.cloud import Cloud, equilibrium
from physics.constants import atomic_mass
from physics.gas import Gas
from physics.particles import Statistics
from physics.traps import HarmonicTrap

TRAP = HarmonicTrap(frequencies=(100.0, 100.0, 100.0))


@pytest.mark.parametrize("statistics", list(Statistics))
@pytest.mark.parametrize("components", [1, 2])
@pytest.mark.parametrize("length", [5e-9, -3e-7, 0.0])
@pytest.mark.parametrize("dipolar", [None, 6e-9])
def test_cross_section_is_that_of_the_equilibrium(
    statistics: Statistics, components: int, length: float, dipolar: float | None
) -> None:
    for temperature in (1e-9, 1e-6, 3e-4):
        cloud = Cloud(
            statistics=statistics,
            mass=87.0 * atomic_mass,
            trap=TRAP,
            atoms=1e4,
            temperature=temperature,
            spin_components=components,
            scattering_length=length,
            dipolar_length=dipolar,
        )
        gas = Gas.of(cloud)
        assert gas.cross_section(temperature) == pytest.approx(
            float(equilibrium(cloud).collision_cross_section), rel=1e-7, abs=1e-40
        )
        assert gas.collides == (gas.cross_section(temperature) > 0.0)
        assert gas.wavelength(temperature) == pytest.approx(float(equilibrium(cloud).thermal_wavelength), rel=1e-14)


def test_what_is_not_known_is_said() -> None:
    with pytest.raises(ValueError, match=r"^the scattering length must be known to compute an evaporation$"):
        _ = Gas(statistics=Statistics.BOSE, mass=1e-25).cold_cross_section
    assert Gas(statistics=Statistics.FERMI, mass=1e-25).cold_cross_section == 0.0
    assert not Gas(statistics=Statistics.FERMI, mass=1e-25, scattering_length=1e-8).collides
    with pytest.raises(ValueError, match=r"^mass must be positive and finite, got 0 kg$"):
        Gas(statistics=Statistics.BOSE, mass=0.0)


def test_a_cloud_of_unknown_length_is_one_of_unknown_length() -> None:
    cloud = Cloud(
        statistics=Statistics.BOSE, mass=1e-25, trap=TRAP, atoms=1e4, temperature=1e-6, scattering_length=np.nan
    )
    assert Gas.of(cloud).scattering_length is None
