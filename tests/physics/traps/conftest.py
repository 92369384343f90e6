"""Traps for tests, of rubidium where nothing else is said."""

from __future__ import annotations

from typing import Any

import pytest

from physics.species import State, load_species
from physics.traps import Coils, GaussianBeam, Trap


@pytest.fixture(scope="session")
def rubidium() -> State:
    """87Rb in F=1 mF=-1, a low-field seeker of half a Bohr magneton."""
    return load_species("87Rb").state("F=1 mF=-1")


@pytest.fixture(scope="session")
def crossed() -> Trap:
    """2.5 W on 70 um across 1.7 W on 55 um, both horizontal."""
    return Trap(
        beams=(
            GaussianBeam(name="A", wavelength=1064e-9, power=2.5, waists=70e-6, direction=(1.0, 0.0, 0.0)),
            GaussianBeam(name="B", wavelength=1064e-9, power=1.7, waists=55e-6, direction=(0.0, 1.0, 0.0)),
        )
    )


@pytest.fixture(scope="session")
def single() -> Trap:
    """One horizontal beam of 2.5 W on 70 um."""
    return Trap(beams=(GaussianBeam(name="A", wavelength=1064e-9, power=2.5, waists=70e-6, direction=(1.0, 0.0, 0.0)),))


@pytest.fixture(scope="session")
def ioffe() -> Trap:
    """1 G, 150 G/cm and 100 G/cm^2 along x."""
    return Trap(coils=Coils(bias=1e-4, gradient=1.5, curvature=100.0, axis=(1.0, 0.0, 0.0)))


@pytest.fixture(scope="session")
def ellipse() -> dict[str, Any]:
    """An astigmatic beam in no special direction."""
    return {
        "name": "A",
        "wavelength": 1064e-9,
        "power": 2.5,
        "waists": (70e-6, 40e-6),
        "direction": (1.0, 0.3, 0.2),
        "focus": (1e-5, 2e-5, 0.0),
        "m2": 1.3,
    }
