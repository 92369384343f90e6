"""What the harmonic trap of the same frequencies would answer."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import gammainc

from physics.caveats import Severity, caveats_of
from physics.cloud import Cloud, Model, equilibrium
from physics.constants import boltzmann
from physics.particles import Statistics
from physics.real_equilibria import RealEquilibrium
from physics.real_trap import real_trap
from physics.species import load_species
from physics.trap_caveats import harmonic_trap_caveat, volume_ratio
from physics.traps import Coils, GaussianBeam, Trap
from physics.traps.survey import Survey, survey

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
BEAMS = tuple(
    GaussianBeam(name=name, wavelength=1064e-9, power=power, waists=waist, direction=direction)
    for name, power, waist, direction in (("A", 0.52, 72e-6, (1, 0, 0)), ("B", 0.48, 85e-6, (0, 1, 0)))
)
CROSSED = survey(Trap(beams=BEAMS), RUBIDIUM)
OPEN = survey(Trap(beams=BEAMS, gravity=None), RUBIDIUM)
IOFFE = survey(
    Trap(coils=Coils(axis=(1.0, 0.0, 0.0), bias=1.6e-4, gradient=1.65, curvature=190.0, knife=1.52e6)), RUBIDIUM
)
QUADRUPOLE = survey(Trap(coils=Coils(gradient=1.6, knife=18e6)), RUBIDIUM)


def cloud_in(found: Survey, temperature: float, atoms: float = 1e5) -> RealEquilibrium:
    cloud = Cloud(trap=found, statistics=Statistics.BOSE, mass=RUBIDIUM.mass, atoms=atoms, temperature=temperature)
    solved = equilibrium(cloud, Model.IDEAL)
    assert isinstance(solved, RealEquilibrium)
    return solved


def by_the_volume_curve(found: Survey, temperature: float) -> float:
    """The ratio of the volumes, by a sum over the counted ones."""
    curve, kT = found.volume_curve, boltzmann * temperature
    assert curve is not None
    edges = np.linspace(0.0, curve.ceiling, 20001)
    middle = 0.5 * (edges[1:] + edges[:-1])
    held = np.exp(-middle / kT) * gammainc(1.5, (curve.ceiling - middle) / kT)
    radii = np.sqrt(kT / found.mass) / (2.0 * np.pi * found.frequencies)
    volume = float(held @ np.diff(curve.volume(edges)) / ((2.0 * np.pi) ** 1.5 * np.prod(radii)))
    return volume / float(gammainc(1.5, curve.ceiling / kT))


@pytest.mark.parametrize("eta", [4.0, 8.0, 20.0])
@pytest.mark.parametrize("found", [CROSSED, OPEN, IOFFE], ids=["crossed beams", "no gravity", "Ioffe-Pritchard"])
def test_the_ratio_of_volumes_is_that_of_the_volume_curve(found: Survey, eta: float) -> None:
    assert found.depth is not None
    temperature = found.depth / boltzmann / eta
    expected = by_the_volume_curve(found, temperature)
    assert volume_ratio(real_trap(found), temperature) == pytest.approx(expected, rel=1e-3)


def test_a_cold_cloud_sees_the_harmonic_trap() -> None:
    assert volume_ratio(real_trap(CROSSED), 1e-10) == pytest.approx(1.0, abs=4e-3)


def test_both_traps_stand_side_by_side() -> None:
    assert OPEN.depth is not None
    assert OPEN.arm_depth is not None
    temperature = OPEN.depth / boltzmann / 9.0
    solved = cloud_in(OPEN, temperature)
    caveat = harmonic_trap_caveat(OPEN, solved)
    assert (caveat.id, caveat.severity) == ("harmonic_trap", Severity.NOTE)
    assert caveat.value == volume_ratio(solved.trap, temperature)
    assert caveat.numbers["truncation"] == pytest.approx(9.0)
    assert caveat.numbers["arms"] == pytest.approx(9.0 * OPEN.arm_depth / OPEN.depth)
    assert 0.1 < caveat.numbers["in_arms"] < 1.0
    assert caveat.numbers["real"] == solved.reduced_temperature
    harmonic = np.cbrt(1.2020569 / float(solved.classical_phase_space_density))
    assert caveat.numbers["harmonic"] == pytest.approx(harmonic, rel=1e-6)
    assert caveat.numbers["real"] > caveat.numbers["harmonic"]


def test_what_the_real_trap_itself_calls_for() -> None:
    def ids(found: Survey, eta: float) -> set[str]:
        assert found.depth is not None
        return {caveat.id for caveat in caveats_of(cloud_in(found, found.depth / boltzmann / eta))}

    assert "open_trap" in ids(OPEN, 10.0)
    assert "open_trap" not in ids(IOFFE, 10.0)
    assert "no_frequencies" in ids(QUADRUPOLE, 10.0)
    assert {"shallow"} == ids(IOFFE, 4.0) & {"shallow", "truncated"}


def test_a_trap_without_frequencies_is_not_compared() -> None:
    with pytest.raises(ValueError, match="a trap must have frequencies to be compared"):
        volume_ratio(real_trap(QUADRUPOLE), 1e-6)
