"""How far the harmonic trap stands in for a real one."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import gammainc

from physics.caveats import Severity
from physics.constants import boltzmann
from physics.species import load_species
from physics.trap_caveats import harmonic_trap_caveat, volume_ratio
from physics.traps import Coils, GaussianBeam, HarmonicTrap, Trap
from physics.traps.survey import Survey, survey, survey_of_harmonic

RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
BEAMS = tuple(
    GaussianBeam(name=name, wavelength=1064e-9, power=power, waists=waist, direction=direction)
    for name, power, waist, direction in (("A", 0.52, 72e-6, (1, 0, 0)), ("B", 0.48, 85e-6, (0, 1, 0)))
)
CROSSED = survey(Trap(beams=BEAMS), RUBIDIUM)
IOFFE = survey(
    Trap(coils=Coils(axis=(1.0, 0.0, 0.0), bias=1.6e-4, gradient=1.65, curvature=190.0, knife=1.52e6)), RUBIDIUM
)


def by_the_volume_curve(found: Survey, temperature: float) -> float:
    """The same ratio, by a sum over the counted volumes."""
    curve, kT = found.volume_curve, boltzmann * temperature
    assert curve is not None
    edges = np.linspace(0.0, curve.ceiling, 20001)
    middle = 0.5 * (edges[1:] + edges[:-1])
    held = np.exp(-middle / kT) * gammainc(1.5, (curve.ceiling - middle) / kT)
    radii = np.sqrt(kT / found.mass) / (2.0 * np.pi * found.frequencies)
    return float(held @ np.diff(curve.volume(edges)) / ((2.0 * np.pi) ** 1.5 * np.prod(radii)))


@pytest.mark.parametrize("eta", [8.0, 12.0, 20.0])
@pytest.mark.parametrize("found", [CROSSED, IOFFE], ids=["crossed beams", "Ioffe-Pritchard"])
def test_the_ratio_of_volumes_is_that_of_the_volume_curve(found: Survey, eta: float) -> None:
    assert found.depth is not None
    temperature = found.depth / boltzmann / eta
    assert volume_ratio(found, temperature) == pytest.approx(by_the_volume_curve(found, temperature), rel=0.02)


def test_a_cold_cloud_sees_the_harmonic_trap() -> None:
    assert volume_ratio(CROSSED, 1e-10) == pytest.approx(1.0, abs=1e-3)
    caveat = harmonic_trap_caveat(CROSSED, 1e-10)
    assert (caveat.id, caveat.severity) == ("harmonic_trap", Severity.NOTE)


def test_a_warm_cloud_is_warned_about_with_the_depth_and_the_arms() -> None:
    assert CROSSED.depth is not None
    assert CROSSED.arm_depth is not None
    temperature = CROSSED.depth / boltzmann / 9.0
    caveat = harmonic_trap_caveat(CROSSED, temperature)
    assert caveat.severity is Severity.WARNING
    assert caveat.value == volume_ratio(CROSSED, temperature)
    assert caveat.numbers["truncation"] == pytest.approx(9.0)
    assert caveat.numbers["arms"] == pytest.approx(9.0 * CROSSED.arm_depth / CROSSED.depth)


def test_given_frequencies_are_not_compared() -> None:
    trap = HarmonicTrap(frequencies=[100.0, 100.0, 100.0])
    with pytest.raises(ValueError, match="a trap must have a potential and frequencies"):
        volume_ratio(survey_of_harmonic(trap, RUBIDIUM.mass), 1e-6)
