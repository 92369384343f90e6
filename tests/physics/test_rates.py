"""Rates and lifetimes against what they are made of, conservation of atoms and energy, and their limits."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from physics.cloud import Equilibrium, Model
from physics.constants import boltzmann, reduced_planck
from physics.losses import Losses
from physics.rates import Rates

Maker = Callable[..., Equilibrium]

K2, K3 = 1e-20, 4e-41
LOSSES = {"background_lifetime": 60.0, "two_body": K2, "three_body": K3}


def rates(solved: Equilibrium, **losses: Any) -> Rates:
    return Rates(equilibrium=solved, losses=Losses(**losses))


# --- collisions ---


def test_the_peak_rate_is_the_mean_rate_times_root_eight(bosons: Maker) -> None:
    # n(0) sigma sqrt(2) vbar against n(0) sigma vbar/2.
    solved = bosons()
    assert rates(solved).peak_collision_rate == pytest.approx(
        math.sqrt(8.0) * float(solved.elastic_collision_rate), rel=1e-14
    )
    path = float(solved.mean_free_path)
    speed = math.sqrt(8.0 * boltzmann * 2e-7 / (math.pi * solved.cloud.mass))
    assert rates(solved).peak_collision_rate == pytest.approx(speed / path, rel=1e-12)


def test_rethermalisation_takes_2_7_collisions(bosons: Maker) -> None:
    solved = bosons()
    assert float(rates(solved).rethermalisation_time * solved.elastic_collision_rate) == pytest.approx(2.7, rel=1e-14)


def test_atoms_that_do_not_collide_do_not_rethermalise(fermions: Maker) -> None:
    polarised = rates(fermions(scattering_length=1e-9), **LOSSES)
    assert polarised.equilibrium.elastic_collision_rate == 0.0
    for name in ("rethermalisation_time", "loss_per_rethermalisation"):
        assert np.isnan(getattr(polarised, name))
    assert np.all(np.isnan(polarised.free_path_ratios))
    assert polarised.good_to_bad_ratio == 0.0


def test_polarised_dipoles_collide(fermions: Maker) -> None:
    # K. Aikawa et al., Phys. Rev. Lett. 112, 010404 (2014): 1.8e-12 cm^2 expected of 167Er at 7 Bohr magnetons,
    # a_dd = 66 a0. Recalled, two digits.
    solved = fermions(dipolar_length=66.0 * 5.29177e-11)
    assert solved.collision_cross_section == pytest.approx(1.8e-16, rel=0.03)
    assert float(rates(solved).rethermalisation_time) > 0.0


def test_hydrodynamic_and_path_ratios(bosons: Maker) -> None:
    solved = bosons()
    found = rates(solved)
    assert found.hydrodynamic_ratio == pytest.approx(
        float(solved.elastic_collision_rate) / (2.0 * math.pi * 120.0), rel=1e-14
    )
    np.testing.assert_allclose(found.free_path_ratios * solved.thermal_radii, solved.mean_free_path, rtol=1e-14)


# --- losses ---


def test_losses_add_and_unknown_ones_are_nan(bosons: Maker) -> None:
    solved = bosons()
    every, some, none = rates(solved, **LOSSES), rates(solved, three_body=K3), rates(solved)
    parts = every.background_loss_rate + every.two_body_loss_rate + every.three_body_loss_rate
    assert every.total_loss_rate == pytest.approx(float(parts), rel=1e-14)
    assert every.background_lifetime == 60.0
    assert some.total_lifetime == some.three_body_lifetime == every.three_body_lifetime
    for name in ("background_lifetime", "two_body_lifetime", "two_body_loss_rate"):
        assert np.isnan(getattr(some, name))
    for name in ("total_lifetime", "three_body_lifetime", "good_to_bad_ratio", "loss_heating_rate", "heating_rate"):
        assert np.isnan(getattr(none, name))


def test_a_constant_of_zero_is_known(bosons: Maker) -> None:
    found = rates(bosons(), two_body=0.0)
    assert found.two_body_loss_rate == 0.0
    assert found.total_loss_rate == 0.0
    assert np.isposinf(found.two_body_lifetime)


def test_lifetimes_of_a_classical_cloud(bosons: Maker) -> None:
    solved = bosons(temperature=1e-4)
    n = float(solved.peak_density)
    found = rates(solved, **LOSSES)
    assert found.two_body_lifetime == pytest.approx(2.0**1.5 / (K2 * n), rel=1e-6)
    assert found.three_body_lifetime == pytest.approx(3.0**1.5 / (K3 * n * n), rel=1e-6)


def test_good_and_bad_collisions(bosons: Maker) -> None:
    solved = bosons()
    found = rates(solved, **LOSSES)
    assert found.good_to_bad_ratio == pytest.approx(
        float(solved.elastic_collision_rate * found.total_lifetime), rel=1e-14
    )
    assert found.loss_per_rethermalisation == pytest.approx(2.7 / float(found.good_to_bad_ratio), rel=1e-12)


@pytest.mark.parametrize("name", ["three_body_lifetime", "total_lifetime", "loss_heating_rate", "free_path_ratios"])
def test_arrays_broadcast_and_are_read_only(bosons: Maker, name: str) -> None:
    solved = bosons(atoms=np.array([[1e4], [1e5]]), temperature=np.array([2e-7, 3e-7, 4e-7]))
    value = getattr(rates(solved, **LOSSES), name)
    assert value.shape == ((2, 3, 3) if name == "free_path_ratios" else (2, 3))
    with pytest.raises(ValueError, match="read-only"):
        value[0, 0] = 1.0


# --- heating ---


def test_loss_heats_a_classical_cloud_by_a_quarter_and_a_third(bosons: Maker) -> None:
    # T. Weber et al., Phys. Rev. Lett. 91, 123201 (2003).
    T = 1e-4
    solved = bosons(temperature=T)
    two, three = rates(solved, two_body=K2), rates(solved, three_body=K3)
    assert two.loss_heating_rate == pytest.approx(T / 4.0 * float(two.two_body_loss_rate), rel=1e-5)
    assert three.loss_heating_rate == pytest.approx(T / 3.0 * float(three.three_body_loss_rate), rel=1e-5)


def test_recombination_heat_of_three_atoms_is_shared_by_the_cloud(bosons: Maker) -> None:
    # Weber et al. write dT/dt = K3 <n^2> (T + Th)/3: an event, of three lost atoms, leaves 3 k Th.
    T, Th = 1e-4, 2e-4
    solved = bosons(temperature=T)
    found = rates(solved, three_body=K3, recombination_heat=3.0 * boltzmann * Th)
    assert found.loss_heating_rate == pytest.approx((T + Th) / 3.0 * float(found.three_body_loss_rate), rel=1e-5)


@pytest.mark.parametrize("losses", [{"background_lifetime": 60.0}, {"two_body": K2}, {"three_body": K3}])
@pytest.mark.parametrize("kind", ["bosons", "fermions"])
def test_heating_conserves_energy(bosons: Maker, fermions: Maker, kind: str, losses: dict[str, float]) -> None:
    # After a short time dt there are N (1 - rate dt) atoms at T + (dT/dt) dt: their energy is that of before less what
    # the lost atoms carried, by quadrature over the cloud of T and N halfway.
    from physics.profiles import density_profile

    maker, T, N, dt = {"bosons": (bosons, 1.4e-7, 1e5, 0.05), "fermions": (fermions, 4e-8, 1e5, 0.05)}[kind]
    start = rates(maker(temperature=T, model=Model.IDEAL), **losses)
    rate, slope = float(start.total_loss_rate), float(start.loss_heating_rate)

    def energy(share: float) -> float:
        there = maker(temperature=T + slope * share * dt, atoms=N * (1.0 - rate * share * dt), model=Model.IDEAL)
        return float(there.energy_per_atom) * N * (1.0 - rate * share * dt)

    change = (energy(0.5) - energy(-0.5)) / dt
    solved = start.equilibrium
    x = np.linspace(0.0, 9.0 * float(solved.thermal_radii[0]), 20001)
    n = density_profile(solved, 0, x).total
    # Local kinetic energy: half the pressure's 3, the pressure being the integral of n dV.
    potential = 0.5 * solved.cloud.mass * (2.0 * math.pi * 120.0 * x) ** 2
    steps = 0.5 * (n[1:] + n[:-1]) * np.diff(potential)
    pressure = np.concatenate([np.cumsum(steps[::-1])[::-1], [0.0]])
    volume = 4.0 * math.pi * x * x * 120.0**2 / (90.0 * 20.0)
    lost = n / 60.0 if "background_lifetime" in losses else K2 * n**2 if "two_body" in losses else K3 * n**3
    each = potential + 1.5 * np.divide(pressure, n, out=np.zeros_like(n), where=n > 0.0)
    assert change == pytest.approx(-float(np.trapezoid(volume * lost * each, x)), rel=1e-4)
    assert rate * N == pytest.approx(float(np.trapezoid(volume * lost, x)), rel=1e-4)


def test_holes_heat_a_fermi_sea_and_random_loss_cools_bosons(bosons: Maker, fermions: Maker) -> None:
    # E. Timmermans, Phys. Rev. Lett. 87, 240403 (2001): the sign, for fermions.
    assert rates(fermions(temperature=2e-8), background_lifetime=60.0).loss_heating_rate > 0.0
    assert rates(bosons(temperature=1.4e-7), background_lifetime=60.0).loss_heating_rate < 0.0
    classical = rates(bosons(temperature=1e-4), background_lifetime=60.0)
    assert abs(float(classical.loss_heating_rate)) < 1e-8 * 1e-4 / 60.0


def test_a_condensate_leaves_heating_by_loss_open_and_keeps_the_rest(bosons: Maker) -> None:
    cold = rates(bosons(temperature=5e-8), three_body=K3, heating=2e-9)
    assert np.isnan(cold.loss_heating_rate)
    assert cold.heating_rate == 2e-9


def test_noise_heats_by_the_mean_over_the_axes(bosons: Maker) -> None:
    # Savard, O'Hara, Thomas, Phys. Rev. A 56, R1095 (1997): energy of each axis by pi^2 f^2 S.
    found = rates(bosons(), intensity_noise=1e-10)
    mean = math.pi**2 * 1e-10 * (120.0**2 + 90.0**2 + 20.0**2) / 3.0
    assert found.noise_heating_rate == pytest.approx(2e-7 * mean, rel=1e-13)
    assert rates(bosons(), intensity_noise=1e-10, heating=1e-9).heating_rate == pytest.approx(
        2e-7 * mean + 1e-9, rel=1e-13
    )
    several = rates(bosons(temperature=[1e-7, 2e-7]), intensity_noise=[1e-10, 2e-10]).noise_heating_rate
    np.testing.assert_allclose(several, [1e-7 * mean, 4e-7 * mean], rtol=1e-13)


def test_only_the_stiffness_of_the_light_shakes_with_its_intensity(bosons: Maker) -> None:
    # k = k_light (1 + e) + k_rest: the relative noise of k is that of the light times its share.
    found = rates(bosons(), intensity_noise=1e-10, light_shares=[1.0, 0.5, 0.0])
    mean = math.pi**2 * 1e-10 * (120.0**2 + 0.25 * 90.0**2) / 3.0
    assert found.noise_heating_rate == pytest.approx(2e-7 * mean, rel=1e-13)


def test_a_trap_that_shakes_heats_by_the_sum_over_the_axes(bosons: Maker) -> None:
    # Savard, O'Hara, Thomas, Phys. Rev. A 56, R1095 (1997): dE/dt = 4 pi^4 m f^4 S_x for each axis; E = 3kT.
    solved = bosons()
    found = rates(solved, pointing_noise=1e-18)
    fourth = 120.0**4 + 90.0**4 + 20.0**4
    expected = 4.0 * math.pi**4 * solved.cloud.mass * fourth * 1e-18 / (3.0 * boltzmann)
    assert found.pointing_heating_rate == pytest.approx(expected, rel=1e-13)
    assert found.heating_rate == pytest.approx(expected, rel=1e-13)


def test_a_heating_rate_that_is_given_has_that_of_the_light_in_it(bosons: Maker) -> None:
    cold = bosons(temperature=5e-8)  # with a condensate, so that heating by loss does not count
    light = rates(cold, light_heating=2e-9, scattering_rate=0.1)
    assert light.heating_rate == light.light_heating_rate == 2e-9
    both = rates(cold, light_heating=2e-9, heating=5e-9)
    assert both.heating_rate == 5e-9
    assert np.isnan(both.light_heating_rate)
    assert light.scattering_rate == 0.1
    assert np.isnan(rates(cold).scattering_rate)


def test_spin_flips_are_a_loss_that_grows_as_the_cloud_cools(bosons: Maker) -> None:
    temperatures = np.array([1e-6, 2e-6])
    found = rates(bosons(temperature=temperatures), zero_force=1e-25, background_lifetime=60.0)
    # chi (hbar/m)(F/kT)^2, chi between 0.16 and 1.85
    unit = reduced_planck / found.equilibrium.cloud.mass * (1e-25 / (boltzmann * temperatures)) ** 2
    np.testing.assert_allclose(found.spin_flip_loss_rate, math.sqrt(0.16 * 1.85) * unit, rtol=1e-12)
    np.testing.assert_allclose(found.total_loss_rate, found.spin_flip_loss_rate + 1.0 / 60.0, rtol=1e-12)
    np.testing.assert_allclose(found.spin_flip_lifetime * found.spin_flip_loss_rate, 1.0, rtol=1e-12)
    assert np.isnan(rates(bosons()).spin_flip_loss_rate)


# --- bounds ---


def test_the_lower_ceiling_counts(bosons: Maker, fermions: Maker) -> None:
    weak, strong = rates(bosons()), rates(bosons(scattering_length=1e-6))
    assert weak.three_body_ceiling < strong.three_body_ceiling
    hotter = rates(bosons(scattering_length=1e-6, temperature=4e-7))
    assert hotter.three_body_ceiling == pytest.approx(float(strong.three_body_ceiling) / 4.0, rel=1e-13)
    assert np.isnan(rates(bosons(Model.IDEAL, scattering_length=None)).three_body_ceiling)
    assert np.isnan(rates(fermions()).three_body_ceiling)
