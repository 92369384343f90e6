"""Each caveat is raised where it should be, with its number, and is silent where it should be.

The plain cloud, 1e6 atoms in a trap of nearly equal frequencies, has none.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from physics.caveats import CAVEAT_IDS, COLLAPSE, Caveat, Severity, caveats_of
from physics.cloud import Equilibrium, Model
from physics.constants import boltzmann, planck
from physics.particles import Certainty

Maker = Callable[..., Equilibrium]
PLAIN = {"atoms": 1e6, "temperature": 5e-7, "frequencies": (50.0, 40.0, 30.0)}  # T/Tc0 = 2.8
COLD = {**PLAIN, "temperature": 1e-7}  # T/Tc0 = 0.56


def found(solved: Equilibrium, **given: Any) -> dict[str, Caveat]:
    caveats = caveats_of(solved, **given)
    assert len({caveat.id for caveat in caveats}) == len(caveats)
    return {caveat.id: caveat for caveat in caveats}


def test_a_plain_cloud_has_no_caveat(bosons: Maker, fermions: Maker) -> None:
    assert caveats_of(bosons(**PLAIN), certainty=Certainty.SEEN) == ()
    assert caveats_of(bosons(**COLD)) == ()
    assert caveats_of(bosons(Model.HARTREE_FOCK, **COLD)) == ()
    assert caveats_of(fermions(**PLAIN, spin_components=2, scattering_length=1e-9)) == ()


@pytest.mark.parametrize(
    ("given", "id", "value"),
    [
        ({"scattering_length": None}, "model_length_unknown", None),
        ({"scattering_length": -1e-10}, "model_not_repulsive", -1e-10),
        ({"model": Model.HARTREE_FOCK, "scattering_length": -1e-10}, "model_not_repulsive", -1e-10),
    ],
)
def test_a_replaced_model_is_told(bosons: Maker, given: dict[str, Any], id: str, value: float | None) -> None:
    caveat = found(bosons(**{**PLAIN, **given}))[id]
    assert (caveat.severity, caveat.value) == (Severity.NOTE, value)


def test_a_model_for_bosons_is_told_for_fermions(fermions: Maker) -> None:
    assert "model_bosons_only" in found(fermions(Model.SEMI_IDEAL, **PLAIN))


def test_unknown_lengths_are_told_once(bosons: Maker, fermions: Maker) -> None:
    assert "length_unknown" not in found(bosons(scattering_length=None))  # the replaced model says it
    assert "length_unknown" in found(bosons(Model.IDEAL, scattering_length=None))
    assert "length_unknown" in found(fermions(spin_components=2))
    assert "length_unknown" not in found(fermions())  # one state has no use for it


@pytest.mark.parametrize(
    ("certainty", "id"),
    [
        (Certainty.MEMORY, "length_recalled"),
        (Certainty.COMPUTED, "length_computed"),
        (Certainty.SEEN, None),
        (None, None),
    ],
)
def test_doubtful_data_are_told(bosons: Maker, fermions: Maker, certainty: Certainty | None, id: str | None) -> None:
    solved = bosons(**PLAIN)
    caveats = found(solved, certainty=certainty)
    assert set(caveats) == ({id} if id else set())
    if id:
        assert caveats[id].value == pytest.approx(float(solved.cloud.length))
    assert not {"length_recalled", "length_computed"} & set(found(fermions(**PLAIN), certainty=certainty))


def test_finite_size_is_shown_warned_about_and_too_large(bosons: Maker) -> None:
    # 0.7275 N^(-1/3) for a sphere: 2 % at 5e4 atoms, 5 % at 3e3, 12 % at 223. T = 3 Tc0.
    def at(atoms: float) -> dict[str, Caveat]:
        sphere = {"atoms": atoms, "frequencies": (50.0, 50.0, 50.0)}
        return found(bosons(temperature=3.0 * float(bosons(**sphere).critical_temperature), **sphere))

    assert not at(6e4)
    shown = at(4e4)
    assert set(shown) == {"finite_size"}
    assert shown["finite_size"].value == pytest.approx(0.7275 * 4e4 ** (-1 / 3), rel=1e-4)
    warned = at(1.5e3)
    assert set(warned) == {"finite_size", "local_density"}
    assert warned["local_density"].severity is Severity.WARNING
    assert set(at(150.0)) == {"finite_size", "exact_levels_advised"}


def test_few_thermal_levels_raise_by_their_own(bosons: Maker) -> None:
    # A long trap: hbar w_max/kTc0 above 0.1 at a shift below 5 %, and hbar w_max/kT.
    long = {"atoms": 1e5, "frequencies": (1000.0, 1000.0, 10.0)}
    threshold = float(bosons(**long).critical_temperature)
    over_tc = planck * 1000.0 / (boltzmann * threshold)
    caveats = found(bosons(temperature=2.0 * threshold, **long))
    assert caveats["local_density"].value == pytest.approx(over_tc, rel=1e-10)
    cold = found(bosons(temperature=planck * 1000.0 / (0.3 * boltzmann), **long))
    assert cold["exact_levels_advised"].value == pytest.approx(0.3, rel=1e-10)


@pytest.mark.parametrize(("temperature", "frozen"), [(4e-8, 1.0), (8e-9, 2.0), (4e-10, 3.0)])
def test_frozen_axes_make_the_gas_low_dimensional(bosons: Maker, temperature: float, frozen: float) -> None:
    # 1000, 300 and 10 Hz are 48, 14.4 and 0.48 nK.
    caveat = found(bosons(Model.IDEAL, atoms=1e4, temperature=temperature, frequencies=(1000.0, 300.0, 10.0)))[
        "low_dimension"
    ]
    assert caveat.severity is Severity.REFUSAL
    assert caveat.value == pytest.approx(planck * 1000.0 / (boltzmann * temperature), rel=1e-12)
    assert caveat.numbers == {"frozen_axes": frozen}


@pytest.mark.parametrize("model", [Model.SEMI_IDEAL, Model.HARTREE_FOCK])
def test_a_large_cold_condensate_is_three_dimensional(bosons: Maker, model: Model) -> None:
    caveats = found(bosons(model, **{**PLAIN, "temperature": 1e-9}))
    assert set(caveats) == {"frozen_thermal"}
    assert caveats["frozen_thermal"].value == pytest.approx(planck * 50.0 / (boltzmann * 1e-9), rel=1e-12)


def test_exact_levels_need_no_caveat_of_levels_but_one_of_few_atoms(bosons: Maker) -> None:
    few = {"atoms": 20.0, "temperature": 4e-9, "frequencies": (1000.0, 300.0, 10.0), "scattering_length": 1e-12}
    caveats = found(bosons(Model.EXACT_LEVELS, **few))
    assert set(caveats) == {"few_atoms"}
    assert caveats["few_atoms"].value == 20.0
    assert not found(bosons(Model.EXACT_LEVELS, **{**few, "atoms": 200.0}))


def test_small_condensates_are_not_of_thomas_and_fermi(bosons: Maker) -> None:
    weak = found(bosons(**COLD, scattering_length=1e-12))
    solved = bosons(**COLD, scattering_length=1e-12)
    ratio = float(solved.condensate_atoms) * 1e-12 / float(solved.oscillator_length)
    assert weak["thomas_fermi"].value == pytest.approx(ratio, rel=1e-12)
    assert "thomas_fermi" not in found(bosons(**COLD))
    assert "thomas_fermi" in found(bosons(Model.HARTREE_FOCK, **COLD, scattering_length=1e-12))
    assert "thomas_fermi" not in found(bosons(**PLAIN, scattering_length=1e-12))  # no condensate


@pytest.mark.parametrize(("t", "raised"), [(0.85, False), (0.95, True), (1.05, False)])
def test_just_below_threshold_thermal_repulsion_counts(bosons: Maker, t: float, raised: bool) -> None:
    threshold = float(bosons(**PLAIN).critical_temperature)
    assert "near_threshold" not in found(bosons(Model.HARTREE_FOCK, **{**PLAIN, "temperature": t * threshold}))
    caveats = found(bosons(**{**PLAIN, "temperature": t * threshold}))
    assert ("near_threshold" in caveats) is raised
    if raised:
        assert caveats["near_threshold"].value == pytest.approx(t, rel=1e-12)


def test_attraction_and_collapse(bosons: Maker) -> None:
    a = -1e-10
    limit = COLLAPSE * float(bosons(**PLAIN).oscillator_length) / abs(a)
    warm = found(bosons(**PLAIN, scattering_length=a))
    assert warm["attractive"].value == a
    assert warm["attractive"].numbers["collapse_atoms"] == pytest.approx(limit, rel=1e-12)
    assert "collapse" not in warm
    cold = bosons(**COLD, scattering_length=a)
    collapse = found(cold)["collapse"]
    assert collapse.severity is Severity.REFUSAL
    assert collapse.value == pytest.approx(float(cold.condensate_atoms) / limit, rel=1e-12)
    assert not {"attractive", "collapse"} & set(found(bosons(**COLD)))


def test_the_mean_field_tells_its_step_at_the_edge(bosons: Maker) -> None:
    # For small a/lambda the density jumps by 4 a/lambda; the next order takes a fifth of that here.
    assert "density_jump" not in found(bosons(Model.HARTREE_FOCK, **COLD))
    strong = found(bosons(Model.HARTREE_FOCK, **COLD, scattering_length=1.5e-8))["density_jump"]
    solved = bosons(Model.HARTREE_FOCK, **COLD)
    step = 4.0 * 1.5e-8 / float(solved.thermal_wavelength)
    assert 0.7 * step < strong.value < step
    assert "density_jump" not in found(bosons(Model.HARTREE_FOCK, **PLAIN, scattering_length=3e-8))  # no condensate
    assert "density_jump" not in found(bosons(**COLD, scattering_length=1.5e-8))


@pytest.mark.parametrize(
    ("dipole", "id", "severity"),
    [(4e-10, None, None), (1e-9, "dipolar", Severity.NOTE), (6e-9, "dipolar_unstable", Severity.WARNING)],
)
def test_dipoles_count_where_their_length_is_near_the_other(
    bosons: Maker, dipole: float, id: str | None, severity: Severity | None
) -> None:
    # a = 5.3 nm
    solved = bosons(**COLD, dipolar_length=dipole)
    caveats = {key: value for key, value in found(solved).items() if key.startswith("dipolar")}
    assert set(caveats) == ({id} if id else set())
    if id:
        assert caveats[id].severity is severity
        assert caveats[id].value == pytest.approx(dipole / float(solved.cloud.length), rel=1e-12)
        assert caveats[id].numbers == {"dipolar_length": dipole}


def test_strong_interaction_of_bosons(bosons: Maker) -> None:
    solved = bosons(**COLD, scattering_length=6e-8)
    strong = found(solved)
    assert strong["dense"].value == pytest.approx(float(solved.peak_density) * 6e-8**3, rel=1e-12)
    assert strong["long_range_length"].value == pytest.approx(6e-8 / float(solved.thermal_wavelength), rel=1e-12)
    warm = bosons(atoms=2e4, temperature=1e-6, scattering_length=6e-8)
    assert float(warm.reduced_temperature) > 2.0
    assert float(6e-8 / warm.thermal_wavelength) > 0.03
    assert "long_range_length" not in found(warm)
    # An ideal condensate is far denser than a real one: only the thermal gas is judged.
    assert "dense" not in found(bosons(Model.IDEAL, **COLD))


def test_one_spin_state_of_fermions_does_not_collide(fermions: Maker) -> None:
    assert found(fermions(**PLAIN))["polarised_fermions"].severity is Severity.WARNING
    assert "polarised_fermions" not in found(fermions(**PLAIN), dipolar=True)
    assert "polarised_fermions" not in found(fermions(**PLAIN, spin_components=2))


@pytest.mark.parametrize("a", [3e-7, -3e-7])
def test_strong_interaction_of_fermions(fermions: Maker, a: float) -> None:
    solved = fermions(**COLD, spin_components=2, scattering_length=a)
    caveat = found(solved)["fermi_interaction"]
    kFa = float(solved.fermi_wavenumber) * a
    assert caveat.value == pytest.approx(abs(kFa), rel=1e-12)
    assert caveat.numbers["inverse"] == pytest.approx(1.0 / kFa, rel=1e-12)


def test_pauli_blocking_below_half_the_fermi_temperature(fermions: Maker) -> None:
    pair = {**PLAIN, "spin_components": 2, "scattering_length": 1e-9}
    TF = float(fermions(**pair).fermi_temperature)
    assert "pauli_blocking" not in found(fermions(**{**pair, "temperature": 0.51 * TF}))
    assert found(fermions(**{**pair, "temperature": 0.4 * TF}))["pauli_blocking"].value == pytest.approx(0.4, rel=1e-12)


def test_few_levels_of_fermions(fermions: Maker) -> None:
    # sum (hbar w)^2/(4 EF^2) is 3/(4 (6N)^(2/3)) in a sphere: 1 % at 108 atoms; EF = 2 hbar w at 1.3 atoms.
    sphere = {"frequencies": (50.0, 50.0, 50.0), "temperature": 2e-11}
    assert "local_density" not in found(fermions(atoms=120.0, **sphere))
    small = found(fermions(atoms=100.0, **sphere))
    assert small["local_density"].value == pytest.approx(0.75 / 600.0 ** (2 / 3), rel=1e-5)
    disc = fermions(atoms=1000.0, temperature=1e-8, frequencies=(10.0, 10.0, 1000.0))
    caveat = found(disc)["low_dimension"]
    assert caveat.value == pytest.approx(float(disc.fermi_energy) / (planck * 1000.0), rel=1e-12)
    assert caveat.numbers == {"frozen_axes": 1.0}


def test_a_warm_fermi_gas_needs_no_filled_levels(fermions: Maker) -> None:
    warm = {"frequencies": (120.0, 120.0, 20.0), "temperature": 1e-6}
    assert not {"low_dimension", "local_density"} & set(found(fermions(atoms=1.0, **warm)))
    # Local density misses what the exact sum over the levels of the sphere has by this much, at any temperature.
    from mpmath import exp, nsum

    b = 0.6  # hbar w/kT
    levels = fermions(atoms=20.0, frequencies=(50.0, 50.0, 50.0), temperature=planck * 50.0 / boltzmann / b)
    log_z = float(levels.log_fugacity)

    def exact(shifted: float) -> float:
        # mu from the trap bottom: the ground level lies 3/2 hbar w above it
        return float(nsum(lambda k: (k + 1) * (k + 2) / 2 / (exp(b * (k + 1.5) - shifted) + 1), [0, 400]))

    error = 1.0 - exact(log_z) / 20.0
    assert found(levels)["local_density"].value == pytest.approx(error, rel=0.1)


def test_shells_show_in_a_cold_fermi_gas(fermions: Maker) -> None:
    spacing = planck * 50.0 / boltzmann
    assert "shell_structure" not in found(fermions(**{**PLAIN, "temperature": 0.21 * spacing}))
    shells = found(fermions(**{**PLAIN, "temperature": 0.15 * spacing}))
    assert shells["shell_structure"].value == pytest.approx(0.15, rel=1e-12)


def test_shallow_traps_cut_the_cloud(bosons: Maker) -> None:
    kT = boltzmann * PLAIN["temperature"]
    caveat = found(bosons(**PLAIN, depth=4.0 * kT))["truncated"]
    assert (caveat.severity, caveat.value) == (Severity.WARNING, pytest.approx(4.0, rel=1e-12))
    assert "truncated" not in found(bosons(**PLAIN, depth=5.1 * kT))


def test_dense_clouds_are_hydrodynamic(bosons: Maker) -> None:
    many = bosons(**{**PLAIN, "atoms": 1e8, "temperature": 2e-6}, scattering_length=3e-8)
    ratio = float(many.elastic_collision_rate) / (2.0 * math.pi * 50.0)
    assert found(many)["hydrodynamic"].value == pytest.approx(ratio, rel=1e-12)
    assert "hydrodynamic" not in found(bosons(**PLAIN))


def test_of_many_clouds_the_worst_counts_and_the_gravest_comes_first(bosons: Maker) -> None:
    atoms = np.geomspace(1e2, 1e6, 5)[:, np.newaxis]
    temperature = np.geomspace(1e-8, 1e-6, 4)
    caveats = caveats_of(bosons(Model.IDEAL, atoms=atoms, temperature=temperature, frequencies=(500.0, 40.0, 30.0)))
    order = [list(Severity).index(caveat.severity) for caveat in caveats]
    assert order == sorted(order, reverse=True)
    worst = next(caveat for caveat in caveats if caveat.id == "low_dimension")
    assert worst.value == pytest.approx(planck * 500.0 / (boltzmann * 1e-8), rel=1e-12)


def test_only_known_caveats_exist() -> None:
    with pytest.raises(ValueError, match=r"^caveat id must be one of model_length_unknown, .*, got mystery$"):
        Caveat(id="mystery", severity=Severity.NOTE)
    assert all(text for text in CAVEAT_IDS.values())
