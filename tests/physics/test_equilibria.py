"""What all models share: names, shapes, scales, distances to the threshold, limits of temperature and number."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from physics.cloud import AVAILABLE_MODELS, Equilibrium, Model
from physics.constants import boltzmann, planck
from physics.equilibria import FINITE_SIZE_COEFFICIENT, INTERACTION_COEFFICIENT
from physics.statistics import bose, zeta

Maker = Callable[..., Equilibrium]

# Not a number where there is nothing to tell: of the other statistics, without a condensate, depth or efficiency.
OF_FERMIONS = {"fermi_temperature", "fermi_energy", "fermi_wavenumber"}
OF_BOSONS = {"critical_temperature", "critical_temperature_shifted", "condensate_fraction", "condensate_atoms"}


@pytest.mark.parametrize("model", AVAILABLE_MODELS)
@pytest.mark.parametrize("temperature", [1e-30, 1e-12, 2e-8, 1.5e-7, 1e-6, 1.0, 1e4])
@pytest.mark.parametrize("atoms", [1.0, 1e5, 1e12])
def test_bosons_of_any_number_and_temperature_have_finite_answers(
    bosons: Maker, names: list[str], model: Model, temperature: float, atoms: float
) -> None:
    solved = bosons(model, atoms=atoms, temperature=temperature, depth=1e-29, efficiency=3.0)
    for name in set(names) - OF_FERMIONS - {"condensate_radii", "fugacity"}:
        value = getattr(solved, name)
        assert np.all(np.isfinite(value)), name
    assert all(np.isnan(getattr(solved, name)) for name in OF_FERMIONS)
    assert solved.fugacity > 0.0  # inf where e^(mu/kT) is out of range
    assert 0.0 <= solved.condensate_fraction <= 1.0
    has_radii = model in (Model.SEMI_IDEAL, Model.HARTREE_FOCK) and solved.condensate_fraction > 0.0
    assert np.all(np.isfinite(solved.condensate_radii)) == has_radii


@pytest.mark.parametrize("temperature", [1e-30, 1e-12, 2e-8, 1.5e-7, 1e-6, 1.0, 1e4])
@pytest.mark.parametrize("atoms", [1.0, 1e5, 1e12])
def test_fermions_of_any_number_and_temperature_have_finite_answers(
    fermions: Maker, names: list[str], temperature: float, atoms: float
) -> None:
    solved = fermions(
        atoms=atoms, temperature=temperature, depth=1e-29, efficiency=3.0, spin_components=2, scattering_length=1e-9
    )
    for name in set(names) - OF_BOSONS - {"condensate_radii", "fugacity"}:
        assert np.all(np.isfinite(getattr(solved, name))), name
    assert all(np.isnan(getattr(solved, name)) for name in OF_BOSONS)


def test_what_is_not_known_is_nan_not_zero(bosons: Maker, fermions: Maker) -> None:
    solved = bosons(scattering_length=None)
    for name in ("truncation", "atoms_left_at_target", "elastic_collision_rate", "mean_free_path"):
        assert math.isnan(getattr(solved, name)), name
    polarised = fermions()
    assert polarised.elastic_collision_rate == 0.0
    assert math.isnan(polarised.mean_free_path)


@pytest.mark.parametrize("model", AVAILABLE_MODELS)
def test_arrays_give_what_single_clouds_give(bosons: Maker, names: list[str], model: Model) -> None:
    atoms, temperature = np.geomspace(1e2, 1e7, 4)[:, np.newaxis], np.geomspace(1e-9, 1e-6, 5)
    depth = np.geomspace(1e-30, 1e-28, 5)
    grid = bosons(model, atoms=atoms, temperature=temperature, depth=depth, efficiency=2.0)
    for name in names:
        value = getattr(grid, name)
        last = (3,) if name in ("thermal_radii", "condensate_radii") else ()
        spread = np.broadcast_to(value, (4, 5, *last))
        for i, j in np.ndindex(4, 5):
            one = bosons(model, atoms=atoms[i, 0], temperature=temperature[j], depth=depth[j], efficiency=2.0)
            np.testing.assert_allclose(spread[i, j], getattr(one, name), rtol=2e-12, err_msg=name)


@pytest.mark.parametrize("model", AVAILABLE_MODELS)
def test_arrays_of_traps_and_lengths_agree_too(bosons: Maker, names: list[str], model: Model) -> None:
    frequencies = np.array([[10.0, 20.0, 30.0], [100.0, 200.0, 50.0], [500.0, 500.0, 1.0]])
    lengths = np.array([[1e-10], [1e-8]])
    grid = bosons(model, frequencies=frequencies, scattering_length=lengths, temperature=4e-8, spin_components=2)
    for name in names:
        last = (3,) if name in ("thermal_radii", "condensate_radii") else ()
        spread = np.broadcast_to(getattr(grid, name), (2, 3, *last))
        for i, j in np.ndindex(2, 3):
            given = {"frequencies": frequencies[j], "scattering_length": lengths[i, 0], "temperature": 4e-8}
            one = getattr(bosons(model, spin_components=2, **given), name)
            np.testing.assert_allclose(spread[i, j], one, rtol=2e-12, err_msg=name)


def test_fermion_arrays_give_what_single_clouds_give(fermions: Maker, names: list[str]) -> None:
    frequencies = np.array([[10.0, 20.0, 30.0], [100.0, 200.0, 50.0]])
    temperature = np.array([[1e-8], [1e-7], [1e-5]])
    grid = fermions(frequencies=frequencies, temperature=temperature)
    for name in names:
        last = (3,) if name in ("thermal_radii", "condensate_radii") else ()
        spread = np.broadcast_to(getattr(grid, name), (3, 2, *last))
        for i, j in np.ndindex(3, 2):
            one = fermions(frequencies=frequencies[j], temperature=temperature[i, 0])
            np.testing.assert_allclose(spread[i, j], getattr(one, name), rtol=2e-12, err_msg=name)


def test_quantities_are_made_once_and_cannot_be_written(bosons: Maker) -> None:
    solved = bosons(atoms=np.geomspace(1e3, 1e6, 7))
    first = solved.peak_density
    assert solved.peak_density is first
    with pytest.raises(ValueError, match="read-only"):
        first[0] = 0.0


def test_a_single_cloud_answers_with_numbers(bosons: Maker, names: list[str]) -> None:
    solved = bosons()
    for name in names:
        value = getattr(solved, name)
        assert isinstance(value, float) or value.shape == (3,), name


def test_scales_by_hand(bosons: Maker) -> None:
    # Worked out from the formulas with a pocket calculator's arithmetic, in other groupings than the program's.
    solved = bosons()
    m, T, f, N = solved.cloud.mass, 2e-7, (120.0 * 90.0 * 20.0) ** (1 / 3), 1e5
    assert solved.mean_frequency == pytest.approx(60.0, rel=1e-14)  # 216000^(1/3)
    assert solved.thermal_wavelength == pytest.approx(planck / math.sqrt(2 * math.pi * m * boltzmann * T), rel=1e-14)
    tau = boltzmann * T / (planck * f)
    assert solved.classical_phase_space_density == pytest.approx(N / tau**3, rel=1e-13)
    assert solved.critical_temperature == pytest.approx(
        (N / 1.2020569031595942) ** (1 / 3) * planck * f / boltzmann, rel=1e-13
    )
    assert solved.reduced_temperature == pytest.approx(T / solved.critical_temperature, rel=1e-13)


def test_both_shifts_of_the_critical_temperature(bosons: Maker) -> None:
    solved = bosons()
    finite = FINITE_SIZE_COEFFICIENT * (230.0 / 3.0 / 60.0) * 1e5 ** (-1 / 3)
    interaction = INTERACTION_COEFFICIENT * float(solved.cloud.length / solved.oscillator_length) * 1e5 ** (1 / 6)
    expected = solved.critical_temperature * (1.0 - finite - interaction)
    assert solved.critical_temperature_shifted == pytest.approx(expected, rel=1e-13)
    # Without a length the shift by interaction is left out; where shifts use up Tc there is no answer.
    unknown = bosons(scattering_length=None)
    assert unknown.critical_temperature_shifted == pytest.approx(
        unknown.critical_temperature * (1.0 - finite), rel=1e-13
    )
    assert math.isnan(bosons(atoms=2.0, frequencies=(1000.0, 1000.0, 1.0)).critical_temperature_shifted)


def test_interaction_coefficient_from_its_integral() -> None:
    # First-order perturbation by 2 G n(r) of the ideal gas: -dTc/Tc = (4/3) (a/lambda) [zeta(3/2) zeta(2) - S]/zeta(3),
    # S = <g_1/2 g_3/2> over the trap at alpha = 0; S. Giorgini et al., Phys. Rev. A 54, R4633 (1996).
    log_w = np.arange(-18.0, 1.9, 0.1)
    w = np.exp(log_w)
    S = 4.0 / math.sqrt(math.pi) * 0.1 * np.sum(w**3 * bose(0.5, w * w) * bose(1.5, w * w))
    slope = 4.0 / 3.0 * (zeta(1.5) * zeta(2.0) - S) / zeta(3.0)
    assert pytest.approx(slope / (math.sqrt(2.0 * math.pi) * zeta(3.0) ** (1 / 6)), rel=1e-7) == INTERACTION_COEFFICIENT


@given(st.floats(1.0, 1e9), st.floats(-10.0, -3.0), st.floats(0.1, 1.0))
def test_following_a_distance_leads_to_the_threshold(
    bosons: Maker, fermions: Maker, atoms: float, log_temperature: float, limit: float
) -> None:
    temperature = 10.0**log_temperature
    for maker, at_threshold in ((bosons, 1.0), (fermions, limit)):
        here = maker(Model.IDEAL, atoms=atoms, temperature=temperature, fermi_threshold=limit)
        colder = maker(Model.IDEAL, atoms=atoms, temperature=temperature * float(here.temperature_to_threshold))
        assert colder.reduced_temperature == pytest.approx(at_threshold, rel=1e-12)
        more = maker(Model.IDEAL, atoms=atoms * float(here.atoms_to_threshold), temperature=temperature)
        assert more.reduced_temperature == pytest.approx(at_threshold, rel=1e-12)


@given(st.floats(0.5, 10.0))
def test_evaporation_keeps_its_efficiency_all_the_way(bosons: Maker, gamma: float) -> None:
    here = bosons(temperature=2e-6, efficiency=gamma)
    share = float(here.atoms_left_at_target)
    rise = math.log(zeta(3.0) / float(here.classical_phase_space_density))
    assert -rise / math.log(share) == pytest.approx(gamma, rel=1e-10)


def test_no_atom_need_be_lost_beyond_the_threshold(bosons: Maker) -> None:
    assert bosons(temperature=1e-8, efficiency=2.0).atoms_left_at_target == 1.0


def test_classical_limit_of_errors_and_collisions(bosons: Maker) -> None:
    solved = bosons(Model.IDEAL, temperature=1e-4, depth=1.380649e-23 * 8e-4)
    for name in (
        "classical_density_error",
        "classical_energy_error",
        "classical_pressure_error",
        "fitted_temperature_error",
    ):
        assert abs(getattr(solved, name)) < 1e-8, name
    assert solved.truncation == pytest.approx(8.0, rel=1e-14)
    # <n> of a classical cloud in a harmonic trap is n(0)/2^(3/2), and the mean relative speed sqrt(2) vbar.
    assert solved.mean_density == pytest.approx(solved.peak_density / math.sqrt(8.0), rel=1e-8)
    m, kT, a = solved.cloud.mass, boltzmann * 1e-4, float(solved.cloud.length)
    sigma = 8.0 * math.pi * a**2
    rate = float(solved.mean_density) * sigma * math.sqrt(2.0) * math.sqrt(8.0 * kT / (math.pi * m))
    assert solved.elastic_collision_rate < rate  # unitarity
    assert bosons(temperature=1e-4, scattering_length=a / 1e3).elastic_collision_rate == pytest.approx(
        rate / 1e6, rel=1e-5
    )


def quantum_boltzmann_rate(z: float) -> float:
    """Collisions per atom of an ideal Bose gas in a harmonic trap by Monte Carlo over momenta: integral of
    f1 f2 sigma |v1 - v2| (1 + f3)(1 + f4) over space, per atom, in sigma vbar/lambda^3."""
    rng = np.random.default_rng(5)
    count, narrow = 20_000, 0.3
    t, weights = np.polynomial.legendre.leggauss(20)
    met = atoms = 0.0
    # U = t^2 kT; momenta of variance 1.
    for root, weight in zip(1.6 * (t + 1.0), 1.6 * weights, strict=True):
        p = rng.normal(size=(2, count, 3)) * rng.choice([1.0, narrow], (2, count, 1))
        energy = 0.5 * np.sum(p * p, axis=-1)
        drawn = 0.5 * (np.exp(-energy) + narrow**-3 * np.exp(-energy / narrow**2)) / (2.0 * math.pi) ** 1.5
        filled = lambda e, U=root * root: 1.0 / np.expm1(e + U - math.log(z))  # noqa: E731
        shares = filled(energy) / drawn
        apart = np.linalg.norm(p[0] - p[1], axis=-1)
        way = rng.normal(size=(count, 3))
        way *= (0.5 * apart / np.linalg.norm(way, axis=-1))[:, np.newaxis]
        after = [0.5 * np.sum((0.5 * (p[0] + p[1]) + sign * way) ** 2, axis=-1) for sign in (1.0, -1.0)]
        enhanced = (1.0 + filled(after[0])) * (1.0 + filled(after[1]))
        met += weight * root**2 * float(np.mean(shares[0] * shares[1] * apart * enhanced))
        atoms += weight * root**2 * float(np.mean(shares))
    return met / atoms / (2.0 * math.pi) ** 1.5 / math.sqrt(8.0 / math.pi)


@pytest.mark.parametrize(("reduced", "more"), [(1.567, 1.07), (1.097, 1.27)])
def test_bosons_near_threshold_collide_more_often_than_the_mean_rate_says(
    bosons: Maker, reduced: float, more: float
) -> None:
    far = bosons(Model.IDEAL)
    solved = bosons(Model.IDEAL, temperature=float(far.critical_temperature) * reduced)
    speed = math.sqrt(8.0 * float(solved.thermal_energy) / (math.pi * solved.cloud.mass))
    unit = float(solved.collision_cross_section) * speed / float(solved.thermal_wavelength) ** 3
    rate = quantum_boltzmann_rate(math.exp(float(solved.log_fugacity))) * unit
    assert rate / float(solved.elastic_collision_rate) == pytest.approx(more, abs=0.03)


def test_errors_of_the_classical_formulas_follow_the_virial_series(bosons: Maker, fermions: Maker) -> None:
    # E/3NkT = 1 -/+ X/16, D = X +/- 0.22855 X^2, Robinson, Phys. Rev. 83, 678 (1951).
    for maker, sign in ((bosons, 1.0), (fermions, -1.0)):
        solved = maker(Model.IDEAL, temperature=4e-6)
        X = float(solved.classical_phase_space_density)
        assert X < 1e-3
        assert solved.classical_energy_error == pytest.approx(sign * X / 16.0, rel=1e-3)
        assert solved.classical_density_error == pytest.approx(-sign * 0.2285534 * X, rel=1e-3)
        assert solved.classical_pressure_error == pytest.approx(sign * X / 2.0**2.5, rel=1e-3)
        assert solved.fitted_temperature_error == pytest.approx(-sign * X / 9.0, rel=1e-3)


@settings(max_examples=40)
@given(st.floats(2.0, 8.0), st.floats(-9.0, -5.0), st.floats(0.1, 10.0))
def test_ideal_answers_scale_with_the_trap(
    bosons: Maker, fermions: Maker, log_atoms: float, log_temperature: float, factor: float
) -> None:
    # Frequencies and temperature scaled alike leave every ratio alone, and energies scale with them.
    for maker in (bosons, fermions):
        case: dict[str, Any] = {"atoms": 10.0**log_atoms}
        one = maker(Model.IDEAL, temperature=10.0**log_temperature, frequencies=(10.0, 20.0, 40.0), **case)
        frequencies = (10.0 * factor, 20.0 * factor, 40.0 * factor)
        other = maker(Model.IDEAL, temperature=factor * 10.0**log_temperature, frequencies=frequencies, **case)
        for name in ("peak_phase_space_density", "reduced_temperature", "classical_energy_error"):
            assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-9), name
        assert other.energy_per_atom == pytest.approx(factor * one.energy_per_atom, rel=1e-9)
        assert other.thermal_radii == pytest.approx(one.thermal_radii / math.sqrt(factor), rel=1e-9)
