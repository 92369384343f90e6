"""Profiles in real traps: that they sum to the atoms, follow the potential, and end where nothing is held."""

from __future__ import annotations

import numpy as np
import pytest

from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.constants import boltzmann
from physics.particles import Statistics
from physics.profiles import column_density_profile, density_profile
from physics.real_equilibria import RealEquilibrium
from physics.real_profiles import RealProfiles
from physics.species import load_species
from physics.traps import Coils, GaussianBeam, Trap
from physics.traps.survey import Survey, survey, survey_of_harmonic

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
IOFFE = survey(Trap(coils=Coils(axis=(1.0, 0.0, 0.0), bias=3e-4, gradient=1.65, curvature=190.0, knife=3e6)), RUBIDIUM)
BEAM = survey(
    Trap(beams=(GaussianBeam(name="A", wavelength=1064e-9, power=3.0, waists=40e-6, direction=(1, 0, 0)),)), RUBIDIUM
)


def clouds(found: Survey, temperature: float, model: Model, **given: object) -> tuple[Equilibrium, Equilibrium]:
    """In the trap, and in the harmonic one at its bottom."""
    kind = {"statistics": Statistics.BOSE, "scattering_length": 5.3e-9, "atoms": 1e5, **given}
    made = [
        equilibrium(Cloud(trap=trap, mass=RUBIDIUM.mass, temperature=temperature, **kind), model)  # type: ignore[arg-type]
        for trap in (found, found.harmonic)
    ]
    return made[0], made[1]


@pytest.mark.parametrize("model", [Model.IDEAL, Model.SEMI_IDEAL, Model.HARTREE_FOCK, "fermions"])
@pytest.mark.parametrize("temperature", [6e-8, 2e-7])
def test_a_cold_cloud_has_the_profile_of_the_harmonic_trap(model: Model, temperature: float) -> None:
    given = {"statistics": Statistics.FERMI} if model == "fermions" else {}
    real, plain = clouds(IOFFE, temperature, Model.IDEAL if given else model, **given)
    assert isinstance(real, RealEquilibrium)
    profiles = RealProfiles(equilibrium=real, survey=IOFFE)
    x = np.linspace(-1.0, 1.0, 41) * 2.0 * float(plain.thermal_radii[0])
    expected = density_profile(plain, 0, x)
    columns = column_density_profile(plain, 0, x, 2)
    for part in ("thermal", "condensate", "total", "classical"):
        scale = 0.01 * getattr(expected, part).max()
        np.testing.assert_allclose(
            getattr(profiles.density(0, x), part), getattr(expected, part), rtol=0.03, atol=scale, err_msg=part
        )
        scale = 0.01 * getattr(columns, part).max()
        np.testing.assert_allclose(
            getattr(profiles.column(0, x, 2), part), getattr(columns, part), rtol=0.03, atol=scale, err_msg=part
        )


def test_columns_sum_to_the_density_along_the_sight() -> None:
    assert BEAM.depth is not None
    real, _ = clouds(BEAM, BEAM.depth / boltzmann / 8.0, Model.SEMI_IDEAL)
    assert isinstance(real, RealEquilibrium)
    profiles = RealProfiles(equilibrium=real, survey=BEAM)
    z = np.linspace(-1.0, 1.0, 2001) * profiles.reach(2)
    along = profiles.density(2, z)
    column = profiles.column(1, np.array([-1e-6, 0.0, 1e-6]), 2)
    assert column.total[1] == pytest.approx(np.trapezoid(along.total, z), rel=2e-3)
    assert along.total.max() == pytest.approx(real.peak_density, rel=1e-3)
    # Gravity pulls downwards: the pass is below, and nothing is held beyond it.
    assert BEAM.escape is not None
    below = z < BEAM.escape.position[2] - BEAM.minimum[2]
    assert np.all(along.total[below] == 0.0)


def test_a_quadrupole_has_a_cusp() -> None:
    found = survey(Trap(coils=Coils(gradient=1.6, knife=18e6)), RUBIDIUM)
    assert found.depth is not None
    cloud = Cloud(trap=found, statistics=Statistics.BOSE, mass=RUBIDIUM.mass, atoms=1e7, temperature=5e-5)
    real = equilibrium(cloud, Model.IDEAL)
    assert isinstance(real, RealEquilibrium)
    profiles = RealProfiles(equilibrium=real, survey=found)
    z = np.linspace(-1e-4, 1e-4, 5)
    V = profiles.potential(np.stack([0.0 * z, 0.0 * z, z], axis=-1))
    assert V[2] == 0.0
    assert profiles.density(2, z).classical[2] == profiles.density(2, z).classical.max()
    np.testing.assert_allclose(profiles.density(0, z).thermal, profiles.density(1, z).thermal, rtol=1e-9)


def test_errors_name_what_was_asked() -> None:
    real, _ = clouds(IOFFE, np.array([1e-7, 2e-7]), Model.IDEAL)  # type: ignore[arg-type]
    with pytest.raises(ValueError, match=r"a profile is of one cloud, got clouds of shape \(2,\)"):
        RealProfiles(equilibrium=real, survey=IOFFE)  # type: ignore[arg-type]
    one, _ = clouds(IOFFE, 1e-7, Model.IDEAL)
    harmonic = survey_of_harmonic(IOFFE.harmonic, RUBIDIUM.mass)  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="needs the survey of one that holds atoms"):
        RealProfiles(equilibrium=one, survey=harmonic)  # type: ignore[arg-type]
