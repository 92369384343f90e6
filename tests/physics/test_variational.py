"""The Gaussian condensate against brute-force minimisation, published numbers, the virial theorem and limits.

References
----------
[1] V. M. Perez-Garcia, H. Michinel, J. I. Cirac, M. Lewenstein, P. Zoller, Phys. Rev. Lett. 77, 5320 (1996).
[2] F. Dalfovo and S. Stringari, Phys. Rev. A 53, 2477 (1996), table I: the numerical ground state. Recalled.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import minimize

from physics.constants import reduced_planck
from physics.variational import GaussianCondensate, collapse_parameter, gaussian_condensate, isotropic_parameter

MASS = 1.44e-25
FREQUENCIES = 2.0 * math.pi * np.array([120.0, 90.0, 20.0])
SPHERE = 2.0 * math.pi * np.full(3, 100.0)
# [2]: atoms, energy per atom in hbar w_perp, for a = 4.33e-3 sqrt(hbar/(m w_perp)) and w_z = sqrt(8) w_perp.
GROUND_STATE = {100: 2.66, 200: 2.86, 500: 3.30, 1000: 3.84, 2000: 4.61, 5000: 6.12, 10000: 7.76, 20000: 9.98}


def condensate(parameter: object, angular: object = FREQUENCIES, atoms: float = 1e4) -> GaussianCondensate:
    """1e4 atoms with N a/aho given."""
    w = np.asarray(angular)
    aho = np.sqrt(reduced_planck / (MASS * np.cbrt(np.prod(w, axis=-1))))
    return gaussian_condensate(MASS, w, atoms, np.asarray(parameter) * aho / atoms)


def energy(log_lengths: np.ndarray, atoms: float, a: float) -> float:
    """Energy per atom of a Gaussian of given lengths, in hbar times the mean of the frequencies: the definition."""
    b, w = np.exp(log_lengths), FREQUENCIES
    G = 4.0 * math.pi * reduced_planck**2 * a / MASS
    kinetic = np.sum(reduced_planck**2 / (4.0 * MASS * b**2))
    trap = np.sum(0.25 * MASS * w**2 * b**2)
    return float(
        (kinetic + trap + 0.5 * G * atoms / ((2.0 * math.pi) ** 1.5 * np.prod(b))) / (reduced_planck * w.mean())
    )


@pytest.mark.parametrize("parameter", [-0.3, 0.0, 0.5, 10.0, 1e4])
def test_no_other_widths_have_less_energy(parameter: float) -> None:
    solved = condensate(parameter)
    aho = math.sqrt(reduced_planck / (MASS * math.prod(FREQUENCIES) ** (1 / 3)))
    start = np.log(
        np.sqrt(reduced_planck / (MASS * FREQUENCIES)) * max(1.0, parameter**0.2 if parameter > 0.0 else 1.0)
    )
    found = minimize(
        energy, start, (1e4, parameter * aho / 1e4), method="Nelder-Mead", options={"xatol": 1e-10, "fatol": 1e-14}
    )
    unit = reduced_planck * FREQUENCIES.mean()
    assert float(solved.energy) / unit == pytest.approx(found.fun, rel=1e-10)
    np.testing.assert_allclose(solved.rms_radii, np.exp(found.x) / math.sqrt(2.0), rtol=1e-5)


@given(st.floats(-0.63, 6.0))
def test_energies_obey_the_virial_theorem(value: float) -> None:
    solved = condensate(value if value < 0.0 else 10.0**value - 1.0)
    virial = 2.0 * solved.kinetic_energy - 2.0 * solved.trap_energy + 3.0 * solved.interaction_energy
    if not np.isnan(virial):
        assert float(virial / solved.energy) == pytest.approx(0.0, abs=1e-12)
    else:
        assert -value > collapse_parameter(FREQUENCIES)


@pytest.mark.parametrize("parameter", [-0.2, 0.1, 3.0, 300.0])
def test_chemical_potential_is_the_energy_of_one_more_atom(parameter: float) -> None:
    aho = math.sqrt(reduced_planck / (MASS * math.prod(FREQUENCIES) ** (1 / 3)))
    atoms = 1e4 * np.array([1.0 - 1e-5, 1.0 + 1e-5])
    total = atoms * gaussian_condensate(MASS, FREQUENCIES, atoms, parameter * aho / 1e4).energy
    slope = (total[1] - total[0]) / (atoms[1] - atoms[0])
    assert float(condensate(parameter).chemical_potential) == pytest.approx(slope, rel=1e-8)


def test_without_interaction_it_is_the_ground_level() -> None:
    solved = condensate(0.0)
    lengths = np.sqrt(reduced_planck / (MASS * FREQUENCIES))
    np.testing.assert_allclose(solved.rms_radii, lengths / math.sqrt(2.0), rtol=1e-14)
    assert solved.energy == pytest.approx(0.5 * reduced_planck * FREQUENCIES.sum(), rel=1e-14)
    assert solved.peak_density == pytest.approx(1e4 / (math.pi**1.5 * np.prod(lengths)), rel=1e-14)
    np.testing.assert_allclose(condensate(1e-12).rms_radii, solved.rms_radii, rtol=1e-11)
    np.testing.assert_allclose(condensate(-1e-12).rms_radii, solved.rms_radii, rtol=1e-11)


def test_a_strong_repulsion_has_the_known_power_law() -> None:
    # w^5 = sqrt(2/pi) N a/aho in a sphere, kinetic energy left out.
    solved = condensate(1e12, SPHERE)
    aho = math.sqrt(reduced_planck / (MASS * SPHERE[0]))
    assert solved.rms_radii[0] / aho == pytest.approx(
        (math.sqrt(2.0 / math.pi) * 1e12) ** 0.2 / math.sqrt(2.0), rel=1e-6
    )


def test_attraction_collapses_as_published() -> None:
    # [1]: 0.671 in a sphere; in closed form 4 sqrt(pi/2)/5^(5/4).
    assert collapse_parameter(SPHERE) == pytest.approx(0.671, abs=5e-4)
    assert collapse_parameter(SPHERE) == pytest.approx(4.0 * math.sqrt(math.pi / 2.0) / 5.0**1.25, rel=1e-14)
    limit = float(collapse_parameter(FREQUENCIES))
    assert limit < 0.671
    below, above = condensate([-limit * (1.0 - 1e-9), -limit * (1.0 + 1e-9)]).energy
    assert np.isfinite(below)
    assert np.isnan(above)
    assert np.all(np.isnan(condensate(-2.0).rms_radii))
    assert np.isnan(condensate(math.nan).energy)


def test_a_long_trap_collapses_radially() -> None:
    # One axis far softer than the others, I/(hbar w_r) = 1 of two axes: 2 I/(2 sqrt(I^2 + w^2)) + 1/2 = 1 at
    # I = w_r/sqrt(3), s_r = 1/sqrt(3), s_z = w_z/(2 I).
    radial, axial = 1e6, 1.0
    mean = (radial * radial * axial) ** (1 / 3)
    strength = radial / math.sqrt(3.0)
    expected = math.sqrt(2.0 * math.pi) * strength / mean * math.sqrt(1.0 / 3.0 * axial / (2.0 * strength))
    assert collapse_parameter([radial, radial, axial]) == pytest.approx(expected, rel=1e-6)


def test_it_is_an_upper_bound_near_the_true_ground_state() -> None:
    # [2], three printed digits; from 0.3 % above at 100 atoms to 6.3 % at 20000.
    w = 2.0 * math.pi * np.array([100.0, 100.0, 100.0 * math.sqrt(8.0)])
    a = 4.33e-3 * math.sqrt(reduced_planck / (MASS * w[0]))
    for atoms, exact in GROUND_STATE.items():
        found = float(gaussian_condensate(MASS, w, atoms, a).energy) / (reduced_planck * w[0])
        assert exact - 0.005 < found < 1.065 * exact
    assert float(gaussian_condensate(MASS, w, 100, a).energy) / (reduced_planck * w[0]) == pytest.approx(
        2.66, rel=0.004
    )


def test_arrays_broadcast() -> None:
    angular = np.stack([FREQUENCIES, SPHERE])
    solved = gaussian_condensate(MASS, angular, np.array([[1e3], [1e5], [0.0]]), np.array([1e-9, -1e-10]))
    assert solved.energy.shape == (3, 2)
    assert solved.rms_radii.shape == (3, 2, 3)
    one = gaussian_condensate(MASS, SPHERE, 1e3, -1e-10)
    np.testing.assert_allclose(solved.rms_radii[0, 1], one.rms_radii, rtol=1e-14)
    assert solved.peak_density[2, 0] == 0.0


@given(st.floats(-3.0, 5.0))
def test_isotropic_parameter_is_the_inverse(log_parameter: float) -> None:
    parameter = 10.0**log_parameter
    assert isotropic_parameter(condensate(parameter, SPHERE).interaction) == pytest.approx(parameter, rel=1e-12)
