"""Clouds in real traps against harmonic ones, closed forms, a direct sum in space, and invariants."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import gammainc

from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.constants import atomic_mass, bohr_radius, boltzmann, reduced_planck
from physics.curve_shape import CurveShape
from physics.losses import Losses
from physics.models import Replacement
from physics.particles import Statistics
from physics.rates import Rates
from physics.real_equilibria import RealEquilibrium
from physics.real_semi_ideal_integrals import CondensateSums
from physics.real_trap import RealTrap, real_trap
from physics.species import load_species
from physics.statistics import bose
from physics.thresholds import Thresholds
from physics.traps import Coils, GaussianBeam, HarmonicTrap, Trap
from physics.traps.survey import survey
from physics.truncated_boltzmann import HARMONIC, QUADRUPOLE, mean_energy, reduced_number

MASS = 87.0 * atomic_mass
FREQUENCIES = np.array([100.0, 150.0, 40.0])
KELVIN = boltzmann
BOSON = {"statistics": Statistics.BOSE, "mass": MASS, "scattering_length": 100.0 * bohr_radius}
FERMION = {"statistics": Statistics.FERMI, "mass": MASS, "scattering_length": -50.0 * bohr_radius, "spin_components": 2}
DEEP = 6e-5 * KELVIN

SAME = [
    "peak_phase_space_density",
    "log_fugacity",
    "critical_temperature",
    "critical_temperature_shifted",
    "condensate_fraction",
    "reduced_temperature",
    "temperature_to_threshold",
    "atoms_to_threshold",
    "atoms_left_at_target",
    "temperature_at_target",
    "peak_density",
    "mean_density",
    "thermal_radii",
    "condensate_radii",
    "energy_per_atom",
    "elastic_collision_rate",
    "mean_free_path",
    "classical_phase_space_density",
    "fermi_temperature",
    "fermi_wavenumber",
]


def harmonic_trap(depth: Any) -> RealTrap:
    """A harmonic trap, by its volume curve."""
    volume = 4.0 * math.pi / 3.0 * (2.0 * np.asarray(depth) / MASS) ** 1.5 / np.prod(2.0 * math.pi * FREQUENCIES)
    return RealTrap(mass=MASS, curve=CurveShape(), held=depth, volume=volume, frequencies=FREQUENCIES)


def quadrupole_trap(depth: float, slope: float) -> RealTrap:
    """W = (16 pi/3) (U/slope)^3, `slope` the energy by length along the strong axis."""
    volume = 16.0 * math.pi / 3.0 * (depth / slope) ** 3
    return RealTrap(mass=MASS, curve=CurveShape(exponent=3.0), held=depth, volume=volume)


def solved(kind: dict[str, Any], trap: Any, model: Model | None = None, **given: Any) -> Equilibrium:
    return equilibrium(Cloud(trap=trap, **{**kind, "atoms": 2e5, "temperature": 3e-7, **given}), model, efficiency=2.5)


@pytest.mark.parametrize("temperature", [9e-7, 2.5e-7, 1.5e-7, 6e-8])
@pytest.mark.parametrize("model", [Model.IDEAL, Model.SEMI_IDEAL, Model.HARTREE_FOCK, "fermions"])
def test_a_deep_harmonic_curve_is_the_harmonic_trap(model: Any, temperature: float) -> None:
    kind, used = (FERMION, Model.IDEAL) if model == "fermions" else (BOSON, model)
    real = solved(kind, harmonic_trap(DEEP), used, temperature=temperature)
    plain = solved(kind, HarmonicTrap(frequencies=FREQUENCIES, depth=DEEP), used, temperature=temperature)
    assert isinstance(real, RealEquilibrium)
    for name in SAME:
        np.testing.assert_allclose(getattr(real, name), getattr(plain, name), rtol=2e-6, err_msg=name)
    losses = Losses(background_lifetime=50.0, two_body=1e-20, three_body=1e-41)
    rates, expected = Rates(equilibrium=real, losses=losses), Rates(equilibrium=plain, losses=losses)
    for name in ("two_body_loss_rate", "three_body_loss_rate", "loss_heating_rate", "hydrodynamic_ratio"):
        np.testing.assert_allclose(getattr(rates, name), getattr(expected, name), rtol=2e-5, err_msg=name)
    assert real.harmonic.reduced_temperature == plain.reduced_temperature


def test_many_clouds_are_answered_as_each_by_itself() -> None:
    atoms, temperature = np.geomspace(1e4, 1e6, 30), np.geomspace(8e-8, 5e-7, 20)[:, np.newaxis]
    for kind, model in ((BOSON, Model.SEMI_IDEAL), (FERMION, Model.IDEAL)):
        grid = solved(kind, harmonic_trap(2e-6 * KELVIN), model, atoms=atoms, temperature=temperature)
        assert grid.cloud.shape == (20, 30)
        for i, j in ((0, 29), (7, 3), (12, 17), (19, 0)):
            single = solved(kind, harmonic_trap(2e-6 * KELVIN), model, atoms=atoms[j], temperature=temperature[i, 0])
            for name in ("peak_phase_space_density", "log_fugacity", "mean_density", "energy_per_atom", "pair_density"):
                value = np.broadcast_to(getattr(grid, name), (20, 30))[i, j]
                assert value == pytest.approx(getattr(single, name), rel=3e-4), name
    grid = solved(BOSON, harmonic_trap(2e-6 * KELVIN), atoms=atoms, temperature=temperature)
    assert np.all(np.diff(grid.condensate_fraction, axis=0) <= 1e-6)
    assert np.all(np.diff(grid.condensate_fraction, axis=1) >= -1e-6)


def test_many_clouds_are_so_where_arms_open_at_once() -> None:
    # From half of the depth on, arms have a hundred times the volume of the crossing.
    u = np.concatenate([np.geomspace(1e-4, 1.0 / 128.0, 32)[:-1], np.arange(1, 129) / 128.0])
    w = u**1.5 * (1.0 + 100.0 * np.clip(40.0 * (u - 0.53), 0.0, 1.0))
    volume = harmonic_trap(1.6e-6 * KELVIN).volume * w[-1]
    trap = RealTrap(
        mass=MASS, curve=CurveShape(energies=u, volumes=w / w[-1]), held=1.6e-6 * KELVIN, volume=volume,
        frequencies=FREQUENCIES,
    )  # fmt: skip
    atoms, temperature = np.geomspace(1e4, 1e9, 40), np.geomspace(2e-8, 5e-7, 40)[:, np.newaxis]
    grid = solved(BOSON, trap, Model.SEMI_IDEAL, atoms=atoms, temperature=temperature)
    assert float(np.nanmax(grid.chemical_potential)) > 0.5 * trap.held
    condensed = np.argwhere(np.nan_to_num(grid.condensate_fraction) > 0.0)
    for i, j in condensed[:: len(condensed) // 20]:
        single = solved(BOSON, trap, Model.SEMI_IDEAL, atoms=atoms[j], temperature=temperature[i, 0])
        for name in ("chemical_potential", "condensate_fraction", "peak_density", "mean_density", "energy_per_atom"):
            expected = float(getattr(single, name))
            assert getattr(grid, name)[i, j] == pytest.approx(expected, rel=3e-4), (name, expected)


CROSSING = {"A": (1.0, 70e-6, (1.0, 0.0, 0.0)), "B": (0.7, 55e-6, (0.0, 1.0, 0.0))}
TILTED = {"A": (3.0, 70e-6, (math.cos(0.02), 0.0, math.sin(0.02))), "B": (2.5, 60e-6, (0.0, 1.0, 0.0))}
BELOW_ZERO = {"C": (1.0, 60e-6, (1.0, 0.0, 0.0))}


@pytest.mark.parametrize(
    ("beams", "coils"),
    [(CROSSING, None), (TILTED, None), (BELOW_ZERO, Coils(gradient=0.28))],
    ids=["sagging", "tilted", "under a quadrupole"],
)
def test_many_clouds_are_so_in_surveyed_traps_with_arms(beams: dict[str, Any], coils: Coils | None) -> None:
    """Through the threshold, and with mu up to the depth."""
    focus = (0.0, 0.0, -60e-6 if coils else 0.0)
    trap = real_trap(
        survey(
            Trap(
                beams=tuple(
                    GaussianBeam(
                        name=name, wavelength=1064e-9, power=power, waists=waist, direction=direction, focus=focus
                    )
                    for name, (power, waist, direction) in beams.items()
                ),
                coils=coils,
            ),
            RUBIDIUM,
        )
    )
    kind = {"statistics": Statistics.BOSE, "mass": RUBIDIUM.mass, "scattering_length": 100.0 * bohr_radius}
    held = float(trap.held) / KELVIN
    atoms, temperature = np.geomspace(1e4, 3e11, 30), held * np.geomspace(0.02, 0.5, 30)[:, np.newaxis]
    grid = solved(kind, trap, Model.SEMI_IDEAL, atoms=atoms, temperature=temperature)
    condensed = np.argwhere(np.nan_to_num(grid.condensate_fraction) > 0.0)
    assert len(condensed) > 200
    mu = np.asarray(grid.chemical_potential)[tuple(condensed.T)] / float(trap.held)
    assert np.sum(mu > 0.7) > 5
    # The largest and the smallest condensates, and some between.
    order = np.argsort(mu)
    for place in [*order[:12], *order[12:-12:12], *order[-12:]]:
        i, j = condensed[place]
        single = solved(kind, trap, Model.SEMI_IDEAL, atoms=atoms[j], temperature=temperature[i, 0])
        for name in ("chemical_potential", "condensate_fraction", "peak_density", "reduced_temperature"):
            found = np.broadcast_to(getattr(grid, name), grid.cloud.shape)[i, j]
            assert found == pytest.approx(float(getattr(single, name)), rel=2e-4), (name, mu[place])


def test_a_condensate_that_reaches_into_arms_is_the_integral_of_the_volume() -> None:
    u = np.concatenate([np.geomspace(1e-4, 1.0 / 128.0, 32)[:-1], np.arange(1, 129) / 128.0])
    w = u**1.5 * (1.0 + 100.0 * np.clip(40.0 * (u - 0.53), 0.0, 1.0))
    curve = CurveShape(energies=u, volumes=w / w[-1])
    sums = CondensateSums(shape=curve)
    for x in (0.01, 0.3, 0.52, 0.56, 0.8, 1.0):
        ends = [0.0, *u[u < x], x]
        pieces = [
            quad(lambda v: float(curve.volume(v)), *ends[k : k + 2], epsrel=1e-10)[0] for k in range(len(ends) - 1)
        ]
        assert float(sums.condensed(np.array([x]))[0][0]) == pytest.approx(math.fsum(pieces), rel=2e-3), x


@pytest.mark.parametrize(("eta", "density", "share"), [(5.0, 2.594, 0.896), (4.0, 2.566, 0.800)])
def test_the_threshold_of_a_cut_gas(eta: float, density: float, share: float) -> None:
    temperature = 3e-7
    trap = harmonic_trap(eta * KELVIN * temperature)
    deep = 1.2020569 * (KELVIN * temperature / (reduced_planck * 2.0 * math.pi * trap.mean_frequency)) ** 3
    cloud = solved(BOSON, trap, Model.IDEAL, atoms=1.002 * share * deep)
    assert cloud.peak_phase_space_density == pytest.approx(density, abs=5e-4)
    assert cloud.atoms_to_threshold == pytest.approx(1.0, abs=4e-3)
    assert cloud.critical_temperature == pytest.approx(temperature, rel=2e-3)
    assert cloud.condensate_fraction < 4e-3


@pytest.mark.parametrize("d", [HARMONIC, QUADRUPOLE])
def test_a_dilute_gas_is_the_cut_boltzmann_gas(d: float) -> None:
    eta, temperature, atoms = 6.0, 1e-5, 100.0
    depth = eta * KELVIN * temperature
    trap = harmonic_trap(depth) if d == HARMONIC else quadrupole_trap(depth, 1e-23)
    for kind in (BOSON, FERMION):
        cloud = solved(kind, trap, Model.IDEAL, atoms=atoms, temperature=temperature)
        assert isinstance(cloud, RealEquilibrium)
        # n_ref V_e, V_e = Gamma(d + 1) W(kT) P(d + 3/2, eta)
        volume = math.gamma(d + 1.0) * trap.volume / eta**d * reduced_number(d, eta)
        peak = atoms / volume * gammainc(1.5, eta) * cloud.thermal_wavelength**3
        assert cloud.peak_phase_space_density == pytest.approx(peak, rel=1e-4)
        assert cloud.classical_peak == pytest.approx(peak, rel=1e-9)
        energy = mean_energy(d, eta) * KELVIN * temperature
        assert cloud.energy_per_atom == pytest.approx(energy, rel=1e-4)
        assert cloud.classical_energy_error == pytest.approx(0.0, abs=1e-4)
        assert cloud.reduced_temperature > 10.0


def test_a_quadrupole_has_no_frequencies_and_what_needs_them_is_unknown() -> None:
    trap = quadrupole_trap(3e-6 * KELVIN, 2e-24)
    cloud = solved(BOSON, trap, atoms=1e6)
    for name in ("mean_frequency", "classical_phase_space_density", "critical_temperature_shifted", "thermal_radii"):
        assert np.all(np.isnan(getattr(cloud, name))), name
    for name in ("critical_temperature", "reduced_temperature", "peak_density", "mean_density", "energy_per_atom"):
        assert np.isfinite(getattr(cloud, name)), name
    # Saturation of rho ~ e^(7/2): N = Gamma(4) W(kT)/lambda^3 zeta(9/2) without a cut.
    deep = quadrupole_trap(100.0 * KELVIN * 3e-7, 2e-24)
    cold = solved(BOSON, deep, Model.IDEAL, atoms=1e3)
    saturated = 6.0 * deep.volume / 100.0**3 / cold.thermal_wavelength**3 * 1.0547075107614543
    assert 1e3 * cold.atoms_to_threshold == pytest.approx(saturated, rel=1e-9)
    with pytest.raises(ValueError, match="trap frequencies must be three values"):
        _ = RealTrap(mass=MASS, curve=CurveShape(), held=1e-29, volume=1e-15, frequencies=[1.0, 2.0])


def test_spin_flips_at_the_zero_of_a_quadrupole_heat_as_published() -> None:
    # Dubessy et al., Phys. Rev. A 85, 013643 (2012), recalled: T^2 grows evenly, dT/dt = (4/9) Gamma T: atoms of
    # 5/2 kT leave a cloud of 9/2 kT an atom.
    trap = quadrupole_trap(30.0 * KELVIN * 1e-5, 1e-23)
    cloud = solved(BOSON, trap, atoms=1e4, temperature=1e-5)
    rates = Rates(equilibrium=cloud, losses=Losses(zero_force=1e-23))
    assert rates.loss_heating_rate == pytest.approx(4.0 / 9.0 * 1e-5 * float(rates.spin_flip_loss_rate), rel=1e-4)


def test_fermions_beyond_the_levels_of_the_trap_have_no_answer() -> None:
    depth = 2e-6 * KELVIN
    trap = harmonic_trap(depth)
    most = (depth / (reduced_planck * 2.0 * math.pi * trap.mean_frequency)) ** 3 / 6.0
    nearly = solved(FERMION, trap, atoms=0.99 * most)
    assert nearly.fermi_energy == pytest.approx(depth * 0.99 ** (1.0 / 3.0), rel=1e-6)
    assert nearly.log_fugacity > 0.0
    over = solved(FERMION, trap, atoms=1.01 * most)
    assert isinstance(over, RealEquilibrium)
    assert over.atoms_over_most == pytest.approx(1.01, rel=1e-6)
    for name in ("log_fugacity", "peak_phase_space_density", "energy_per_atom", "mean_density", "fermi_temperature"):
        assert np.isnan(getattr(over, name)), name


@pytest.mark.parametrize("model", [Model.SEMI_IDEAL, Model.HARTREE_FOCK])
def test_a_condensate_that_would_spill_has_no_answer(model: Model) -> None:
    depth = 1e-6 * KELVIN
    # mu = (hbar wbar/2) (15 N0 a/aho)^(2/5) at the depth
    wbar = 2.0 * math.pi * float(np.cbrt(np.prod(FREQUENCIES)))
    length = math.sqrt(reduced_planck / (MASS * wbar))
    most = (2.0 * depth / (reduced_planck * wbar)) ** 2.5 / 15.0 * length / (100.0 * bohr_radius)
    fits = solved(BOSON, harmonic_trap(depth), model, atoms=0.7 * most, temperature=5e-8)
    assert 0.9 < fits.condensate_fraction < 1.0
    assert fits.chemical_potential < depth
    over = solved(BOSON, harmonic_trap(depth), model, atoms=1.02 * most, temperature=5e-8)
    assert isinstance(over, RealEquilibrium)
    assert over.atoms_over_most == pytest.approx(1.02, rel=1e-6)
    assert np.isnan(over.log_fugacity)
    assert np.isnan(over.mean_density)


def test_exact_levels_give_way_to_the_ideal_gas() -> None:
    cloud = solved(BOSON, harmonic_trap(DEEP), Model.EXACT_LEVELS)
    assert (cloud.model, cloud.replaced) == (Model.IDEAL, Replacement.HARMONIC_ONLY)
    assert np.isnan(Thresholds(equilibrium=cloud).exact_saturation)


def test_the_onset_of_hartree_fock_is_that_of_the_harmonic_model() -> None:
    real = solved(BOSON, harmonic_trap(DEEP), Model.HARTREE_FOCK)
    plain = solved(BOSON, HarmonicTrap(frequencies=FREQUENCIES), Model.HARTREE_FOCK)
    assert Thresholds(equilibrium=real).of_model == pytest.approx(Thresholds(equilibrium=plain).of_model, rel=1e-6)
    assert solved(BOSON, harmonic_trap(DEEP), Model.HARTREE_FOCK, temperature=1.9e-7).condensate_fraction > 0.0


RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
CROSSED = survey(
    Trap(
        beams=tuple(
            GaussianBeam(name=name, wavelength=1064e-9, power=power, waists=waist, direction=direction)
            for name, power, waist, direction in (("A", 0.52, 72e-6, (1, 0, 0)), ("B", 0.48, 85e-6, (0, 1, 0)))
        )
    ),
    RUBIDIUM,
)


def test_clouds_in_a_crossed_trap_are_sums_over_its_potential() -> None:
    """N, <n> and E of ideal bosons, by a sum over cells of space and an integral over momenta at each energy."""
    assert CROSSED.depth is not None
    assert CROSSED.potential is not None
    temperature = CROSSED.depth / KELVIN / 9.0
    cloud = equilibrium(
        Cloud(trap=CROSSED, statistics=Statistics.BOSE, mass=RUBIDIUM.mass, atoms=3e5, temperature=temperature),
        Model.IDEAL,
    )
    z, kT = float(cloud.fugacity), KELVIN * temperature
    assert 0.1 < z < 1.0
    # A box around all that is below the depth, down to the pass below which atoms fall; its cells are summed.
    assert CROSSED.escape is not None
    below = CROSSED.escape.position[2] - CROSSED.minimum[2]
    assert below < 0.0
    ends = [np.linspace(*reach) for reach in ((-3e-4, 3e-4, 161), (-3e-4, 3e-4, 161), (below, 1.2e-4, 101))]
    places = np.stack(np.meshgrid(*ends, indexing="ij"), axis=-1).reshape(-1, 3) + CROSSED.minimum
    energy = CROSSED.potential.energy(places) - CROSSED.energy_at_minimum
    inside = energy[energy < CROSSED.depth] / kT
    table = np.linspace(0.0, 9.0, 200)
    # n lambda^3 = (2/sqrt(pi)) integral of sqrt(p)/(e^(p + u)/z - 1) dp up to 9 - u
    held = np.array(
        [
            2.0 / math.sqrt(math.pi)
            * quad(lambda r, u=u: 2.0 * r * r / (math.exp(r * r + u) / z - 1.0), 0.0, math.sqrt(9.0 - u))[0]
            for u in table
        ]
    )  # fmt: skip
    density = np.interp(inside, table, held) / float(cloud.thermal_wavelength) ** 3
    cell = math.prod(axis[1] - axis[0] for axis in ends)
    assert cell * density.sum() == pytest.approx(3e5, rel=0.01)
    assert (density**2).sum() / density.sum() == pytest.approx(float(cloud.mean_density), rel=0.005)
    assert density.max() == pytest.approx(float(cloud.peak_density), rel=0.005)
    assert float(cloud.peak_phase_space_density) < float(np.asarray(bose(1.5, -math.log(z))))


def test_a_survey_fills_a_cloud_and_a_trap_that_holds_nothing_does_not() -> None:
    cloud = Cloud(trap=CROSSED, statistics=Statistics.BOSE, mass=RUBIDIUM.mass, atoms=1e5, temperature=3e-7)
    assert isinstance(cloud.trap, RealTrap)
    assert real_trap(CROSSED) is cloud.trap
    np.testing.assert_array_equal(cloud.trap.frequencies, CROSSED.frequencies)
    falls = survey(Trap(beams=()), RUBIDIUM)
    with pytest.raises(ValueError, match="a cloud needs a trap that holds it"):
        Cloud(trap=falls, statistics=Statistics.BOSE, mass=RUBIDIUM.mass, atoms=1e5, temperature=3e-7)
    with pytest.raises(ValueError, match="trap of a cloud must be a HarmonicTrap, a RealTrap or a Survey, got str"):
        Cloud(trap="deep", statistics=Statistics.BOSE, mass=RUBIDIUM.mass, atoms=1e5, temperature=3e-7)  # type: ignore[arg-type]


def test_a_tighter_trap_scales() -> None:
    """Frequencies by s, depth by s^2 and temperatures by s leave T/Tc and D as they are, where eta stays."""
    trap, s = harmonic_trap(2e-6 * KELVIN), 1.3
    tighter = trap.resized(depth=s, frequencies=np.full(3, s), room=s**-3)
    for kind, model in ((BOSON, Model.IDEAL), (FERMION, Model.IDEAL)):
        one, other = solved(kind, trap, model), solved(kind, tighter, model, temperature=s * 3e-7)
        for name in ("reduced_temperature", "peak_phase_space_density", "truncation", "log_fugacity"):
            assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-9), name
