"""Published numbers against this program's own functions, row by row of checks.csv.

Every row carries its citation, whether its number was seen or recalled (`provenance`), a recomputation made with CODATA
2018 constants, and the distance `allowed_abs` from the published number that its digits and inputs allow. Rows whose
status is `weak` are comparisons that would be wrong; of a `bound` the source gives an inequality only.
"""

from __future__ import annotations

import csv
import json
import math
from collections.abc import Callable, Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from physics import collisions, equation_of_state
from physics.caveats import COLLAPSE
from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.constants import (
    atomic_mass,
    bohr_magneton,
    bohr_radius,
    boltzmann,
    planck,
    polarizability_atomic_unit,
    speed_of_light,
    vacuum_permittivity,
)
from physics.curve_shape import CurveShape
from physics.equilibria import FINITE_SIZE_COEFFICIENT
from physics.fermi_interactions import FermiEstimates
from physics.light import LineSum, light_shift
from physics.light_heating import harmonic_heating_rate, recoil_heating_power, recoil_temperature
from physics.loss_integrals import two_and_three_body_densities
from physics.losses import noise_heating_rate
from physics.oscillator_levels import OscillatorLevels
from physics.particles import Statistics
from physics.species import load_species
from physics.statistics import bose, fermi, zeta
from physics.traps import Coils, GaussianBeam, HarmonicTrap, Trap
from physics.traps.potential import Potential
from physics.traps.solving import levitation_gradient
from physics.traps.survey import Survey, survey, survey_of_potential
from physics.truncated_averages import truncated_averages

Inputs = Mapping[str, Any]

with (Path(__file__).parent / "checks.csv").open(encoding="utf-8", newline="") as file:
    ROWS = {row["id"]: row for row in csv.DictReader(file)}

RUBIDIUM = 86.9091805291


def cloud(
    inputs: Inputs, statistics: Statistics = Statistics.BOSE, *, model: Model | None = None, **given: Any
) -> Equilibrium:
    """The equilibrium of a row's trap and atoms; temperature and mass matter only where the row gives them."""
    frequencies = given.pop("frequencies", inputs.get("f_Hz", [100.0] * 3))
    length = inputs.get("a_m") or (inputs["a_a0"] * bohr_radius if "a_a0" in inputs else None)
    atoms = given.pop("atoms", inputs.get("N", 1e5))
    temperature = given.pop("temperature", inputs.get("T_K", 1e-6))
    return equilibrium(
        Cloud(
            statistics=statistics,
            mass=inputs.get("mass_u", RUBIDIUM) * atomic_mass,
            trap=HarmonicTrap(frequencies=frequencies),
            atoms=atoms,
            temperature=temperature,
            scattering_length=length,
        ),
        model,
    )


def critical_temperature(inputs: Inputs) -> float:
    return float(cloud(inputs).critical_temperature)


def top_trap(inputs: Inputs) -> float:
    f = inputs["f_radial_Hz"]
    return critical_temperature({**inputs, "f_Hz": [f, f, math.sqrt(8.0) * f]})


def shift_by_interaction(inputs: Inputs) -> float:
    """dTc/Tc0 over N^(1/6)."""
    return -float(cloud(inputs, atoms=1.0).interaction_shift)


def slope_in_wavelengths(inputs: Inputs) -> float:
    """dTc/Tc0 over a/lambda0, lambda0 the thermal wavelength at Tc0."""
    at = cloud({"a_m": 1e-9, "N": 1e5})
    there = cloud({"a_m": 1e-9, "N": 1e5}, temperature=float(at.critical_temperature))
    return -float(there.interaction_shift * there.thermal_wavelength) / 1e-9


def condensate_density(inputs: Inputs) -> float:
    """Peak density of a condensate without thermal atoms."""
    return float(cloud(inputs, atoms=inputs["N0"], temperature=1e-12, model=Model.SEMI_IDEAL).peak_density)


def lithium(inputs: Inputs) -> Equilibrium:
    f = inputs["w_radial_rad_s"] / (2.0 * math.pi)
    return cloud(inputs, Statistics.FERMI, frequencies=[f, f, math.sqrt(8.0) * f])


def fermi_radius(inputs: Inputs) -> float:
    """Edge of the cloud at T = 0, where the potential reaches EF, on the radial axis."""
    return float(FermiEstimates(equilibrium=lithium(inputs)).fermi_radii[0])


def fermions_at(inputs: Inputs) -> Equilibrium:
    ratio = inputs.get("T_over_TF", 1.0)
    cold = cloud({"N": 1e5}, Statistics.FERMI)
    return cloud({"N": 1e5}, Statistics.FERMI, temperature=ratio * float(cold.fermi_temperature))


def lowest_levels_filled(inputs: Inputs) -> float:
    z = float(fermions_at(inputs).fugacity)
    return z / (1.0 + z)


def reduced_temperature_without_mu(inputs: Inputs) -> float:
    """T/TF at z = 1: read back from the degeneracy f_3(1) that the equilibrium assigns to it."""
    solved = cloud({}, Statistics.FERMI, temperature=1e-6, atoms=1.0)
    atoms = fermi(3.0, 0.0) / float(solved.classical_phase_space_density)
    there = cloud({}, Statistics.FERMI, temperature=1e-6, atoms=atoms)
    assert abs(float(there.log_fugacity)) < 1e-14
    return float(there.reduced_temperature)


def bosons_at(inputs: Inputs) -> Equilibrium:
    threshold = critical_temperature({"N": 1e5})
    return cloud({"N": 1e5}, temperature=inputs["T_over_Tc"] * threshold, model=Model.IDEAL)


def energy_over_threshold(inputs: Inputs) -> float:
    threshold = critical_temperature({"N": 1e5})
    solved = cloud({"N": 1e5}, temperature=threshold, model=Model.IDEAL)
    return float(solved.energy_per_atom) / (boltzmann * threshold)


def heat_below_threshold(inputs: Inputs) -> float:
    """dE/dT per atom just below Tc, in k: E goes as a power of T there, found from two temperatures."""
    threshold = critical_temperature({"N": 1e5})
    at, below = (
        float(cloud({"N": 1e5}, temperature=f * threshold, model=Model.IDEAL).energy_per_atom) for f in (1.0, 0.5)
    )
    return math.log2(at / below) * at / (boltzmann * threshold)


def heat_jump(inputs: Inputs) -> float:
    above = equation_of_state.trapped_heat_capacity_over_classical(Statistics.BOSE, zeta(3.0))
    return heat_below_threshold(inputs) - 3.0 * float(above)


def uniform_heat(inputs: Inputs) -> float:
    return 1.5 * float(equation_of_state.heat_capacity_over_classical(Statistics.BOSE, zeta(1.5)))


def series_near_threshold(order: int) -> Callable[[Inputs], float]:
    """Coefficient of a power of alpha in g_3/2, or of its square root (order 0), fitted to the function itself."""

    def coefficient(inputs: Inputs) -> float:
        # In y = sqrt(alpha): g = zeta + c y + c1 y^2 + c2 y^4 ...: exact to rounding with a few more powers.
        y = np.linspace(0.02, 1.0, 200)
        powers = np.stack([y, *(y ** (2 * k) for k in range(1, 12))], axis=-1)
        fitted = np.linalg.lstsq(powers, bose(1.5, y * y) - zeta(1.5), rcond=None)[0]
        return float(fitted[order])

    return coefficient


def levels(inputs: Inputs) -> float:
    """Atoms in all levels of an isotropic trap, mu counted from the ground level in level spacings."""
    alpha = -inputs["c"] / inputs["t"]
    excited = OscillatorLevels(np.full(3, 1.0 / inputs["t"])).excited_atoms(alpha)
    return excited + 1.0 / math.expm1(alpha)


def ground_share(inputs: Inputs) -> float:
    spacing = planck * 100.0 / boltzmann
    solved = cloud(inputs, temperature=inputs["t"] * spacing, model=Model.EXACT_LEVELS)
    return float(solved.condensate_fraction)


def collapse_number(inputs: Inputs) -> float:
    solved = cloud(inputs)
    return COLLAPSE * float(solved.oscillator_length) / abs(float(solved.cloud.length))


def helium_collisions(inputs: Inputs) -> float:
    """As the source has it: n(0) from D, low-energy cross-section, classical averages."""
    mass, temperature = inputs["mass_u"] * atomic_mass, np.asarray(inputs["T_K"])
    wavelength = float(cloud(inputs).thermal_wavelength)
    sigma = collisions.low_energy_cross_section(Statistics.BOSE, np.asarray(inputs["a_m"]), 1)
    speed = collisions.mean_speed(mass, temperature)
    return float(collisions.mean_collision_rate(np.asarray(zeta(1.5) / wavelength**3), sigma, speed))


def bunching(inputs: Inputs) -> float:
    """Three-body loss of thermal atoms over that of a condensate, each over the mean of its own n^2: n(0)^2/3^(3/2) of
    a Gaussian cloud, (8/21) n(0)^2 of a Thomas-Fermi condensate."""
    thermal = cloud({"N": 1e5, "a_m": 5e-9}, temperature=1e-2, model=Model.SEMI_IDEAL)
    condensed = cloud({"N": 1e7, "a_m": 5e-9}, temperature=1e-12, model=Model.SEMI_IDEAL)
    met = [float(two_and_three_body_densities(c)[1] / c.peak_density**2) for c in (thermal, condensed)]
    return 3.0**1.5 * met[0] / (21.0 / 8.0 * met[1])


def rubidium_constants(inputs: Inputs) -> float:
    """K3 of the data, which is the thermal one, over the condensate's of the same source."""
    known = load_species("87Rb").state("F=1 mF=-1").three_body
    assert known is not None
    assert known.value == pytest.approx(inputs["K_thermal_cm6_s"] * 1e-12, rel=1e-12)
    return known.value / (inputs["K_condensate_cm6_s"] * 1e-12)


def fermi_integral(inputs: Inputs) -> float:
    return fermi(1.5, inputs["eta"])


def truncated(what: str) -> Callable[[Inputs], float]:
    """A cut cloud in a trap of W ~ U^(a - 3/2), by quadrature; volumes over that of the uncut cloud."""

    def value(inputs: Inputs) -> float:
        exponent, eta = inputs["a"] - 1.5, inputs["eta"]
        found = truncated_averages(CurveShape(exponent=exponent), eta)
        number = float(found.number) * eta**exponent / math.gamma(exponent + 1.0)
        if what == "number":
            return number
        return float(getattr(found, what)) * (number if what == "evaporation" else 1.0)

    return value


def focus(inputs: Inputs) -> Survey:
    """A survey of one round beam without gravity, of the row's depth; its wavelength does not matter across it."""
    beam = GaussianBeam(name="A", wavelength=1e-5, power=1.0, waists=inputs["w0_m"], direction=(1.0, 0.0, 0.0))
    shifts = np.array([-inputs["U0_K"] * boltzmann / beam.peak_intensity])
    return survey_of_potential(Potential(mass=inputs["mass_u"] * atomic_mass, beams=(beam,), shifts=shifts))


def depth_of_intensity(inputs: Inputs) -> float:
    """U0/k of the row's peak intensity, or of its power on its waist."""
    intensity = inputs.get("I0_W_m2")
    if intensity is None:
        waist = inputs["w0_m"]
        intensity = GaussianBeam(
            name="A", wavelength=inputs["wavelength_m"], power=inputs["P_W"], waists=waist, direction=(1, 0, 0)
        ).peak_intensity
    alpha = inputs["alpha_au"] * polarizability_atomic_unit
    return -float(light_shift(alpha, intensity)) / boltzmann


def d_lines(inputs: Inputs) -> float:
    """Polarizability of the two D lines alone, of the row's wavelengths and decay rates, in atomic units."""
    w = 2.0 * math.pi * speed_of_light / np.array([inputs["lambda_D1_m"], inputs["lambda_D2_m"]])
    widths, ratios = np.array([inputs["Gamma_D1_s"], inputs["Gamma_D2_s"]]), np.array([1.0, 2.0])
    lines = LineSum(
        names=("D1", "D2"),
        frequencies=w,
        # f of absorption from the decay rate, the ratio of level sizes being 1 and 2.
        strengths=2.0 * math.pi * vacuum_permittivity * speed_of_light**3 * widths * ratios / w**2,
        linewidths=widths,
        constant=0.0,
        class_weights=ratios / 3.0,
        membership=np.diag(3.0 / ratios),
    )
    value = lines.at(inputs["wavelength_m"]).value
    assert value is not None
    return value / polarizability_atomic_unit


def recoil(inputs: Inputs) -> float:
    return float(recoil_temperature(inputs["mass_u"] * atomic_mass, inputs["wavelength_m"]))


def recoil_heating(inputs: Inputs) -> float:
    """Of rubidium on its D2 line, whose recoil temperature the row gives to five digits."""
    isotope = load_species("87Rb").isotope
    assert isotope.D2_wavelength is not None
    rate = inputs["Gamma_sc_per_s"]
    return float(harmonic_heating_rate(recoil_heating_power(isotope.mass.value, isotope.D2_wavelength.value, rate)))


def levitation(key: str, name: str) -> Callable[[Inputs], float]:
    def gradient(inputs: Inputs) -> float:
        state = load_species(key).state(name)
        moment = inputs["mu_over_muB"] * bohr_magneton
        assert state.zeeman_slope is not None
        assert state.mass == pytest.approx(inputs["mass_u"] * atomic_mass, rel=1e-7)
        # The data have the moment with the electron's g-factor, the row with 2.
        assert abs(state.zeeman_slope.value) == pytest.approx(moment, rel=2e-3)
        return levitation_gradient(replace(state, zeeman_slope=replace(state.zeeman_slope, value=moment)))

    return gradient


def quadrupole_volume(inputs: Inputs) -> float:
    """int exp(-U/kT) d^3r = int W exp(-U/kT) dU/kT, in cubes of kT over the force on the weak axes."""
    state = load_species("87Rb").state()
    assert state.zeeman_slope is not None
    found = survey(Trap(coils=Coils(gradient=2.0), gravity=None), state)
    curve = found.volume_curve
    assert curve is not None
    kT = curve.ceiling / 40.0
    x, weights = np.polynomial.laguerre.laggauss(30)
    below = x < 40.0
    integral = float(weights[below] @ curve.volume(x[below] * kT))
    return integral / (kT / state.zeeman_slope.value) ** 3


def _from(function: Callable[..., Equilibrium], name: str) -> Callable[[Inputs], float]:
    return lambda inputs: float(getattr(function(inputs), name))


RECIPES: dict[str, Callable[[Inputs], float]] = {
    "A01": critical_temperature,
    "A02": top_trap,
    "A05": critical_temperature,
    "A06": critical_temperature,
    "A07": lambda i: float(cloud(i).critical_temperature_shifted / cloud(i).critical_temperature),
    "A08": critical_temperature,
    "A12": lambda i: float(cloud(i, Statistics.FERMI).fermi_temperature),
    "A13": lowest_levels_filled,
    "A14": _from(lithium, "fermi_temperature"),
    "A15": fermi_radius,
    "A16": lambda i: float(lithium(i).oscillator_lengths[0]),
    "A17": lambda i: 1.0 / float(lithium(i).fermi_wavenumber),
    "A18": shift_by_interaction,
    "A19": shift_by_interaction,
    "A20": slope_in_wavelengths,
    "A21": slope_in_wavelengths,
    "B01": lambda i: float(cloud({"N": 1.0}).critical_temperature) * boltzmann / (planck * 100.0),
    "B02": heat_below_threshold,
    "B03": heat_jump,
    "B04": energy_over_threshold,
    "B05": lambda i: critical_temperature({"f_Hz": [i["fbar_Hz"]] * 3, "N": i["N"]}),
    "B06": lambda i: FINITE_SIZE_COEFFICIENT,
    "B07": lambda i: 3.0 * FINITE_SIZE_COEFFICIENT,
    "B08": lambda i: float(bosons_at({"T_over_Tc": 0.5}).peak_phase_space_density),
    "B09": lambda i: bose(2.5, 0.0),
    "B10": lambda i: float(equation_of_state.pressure_over_classical(Statistics.BOSE, zeta(1.5))),
    "B11": uniform_heat,
    "B12": series_near_threshold(0),
    "B13": series_near_threshold(1),
    "B14": series_near_threshold(2),
    "B15": series_near_threshold(3),
    **{f"B{n}": fermi_integral for n in (16, 18, 19, 20, 21)},
    **{f"B{n}": lambda i: math.gamma(1.5) * fermi_integral(i) for n in (22, 23, 24)},
    "B25": reduced_temperature_without_mu,
    "B26": lambda i: float(fermions_at(i).chemical_potential / fermions_at(i).fermi_energy),
    "B27": _from(fermions_at, "log_fugacity"),
    "B28": lambda i: float(fermions_at(i).energy_per_atom / fermions_at(i).fermi_energy),
    "B29": condensate_density,
    "B30": levels,
    "B31": levels,
    "B32": collapse_number,
    "B33": ground_share,
    "B34": ground_share,
    "B35": lambda i: float(fermions_at(i).chemical_potential / fermions_at(i).fermi_energy),
    "B36": _from(fermions_at, "fugacity"),
    "B37": lambda i: float(fermions_at(i).chemical_potential / fermions_at(i).fermi_energy),
    "B38": _from(fermions_at, "fugacity"),
    "B39": _from(bosons_at, "fugacity"),
    "B40": _from(bosons_at, "peak_phase_space_density"),
    "E01": bunching,
    "E02": rubidium_constants,
    "E04": helium_collisions,
    **{f"E{n:02}": truncated("number") for n in (5, 9, 13)},
    **{f"E{n:02}": truncated("energy") for n in (6, 10, 14)},
    **{f"E{n:02}": truncated("evaporation") for n in (7, 11, 15)},
    **{f"E{n:02}": truncated("excess") for n in (8, 12, 16)},
    "C01": depth_of_intensity,
    "C02": lambda i: float(focus(i).frequencies[2]),
    "C04": depth_of_intensity,
    "C05": d_lines,
    "C06": d_lines,
    "C08": lambda i: polarizability_atomic_unit / planck,
    **{f"C{n:02}": recoil for n in (9, 10, 11, 12, 13)},
    "D01": levitation("87Rb", "F=1 mF=-1"),
    "D02": levitation("87Rb", "F=2 mF=+2"),
    "D03": levitation("133Cs", "F=3 mF=+3"),
    "D04": levitation("23Na", "F=1 mF=-1"),
    "D08": quadrupole_volume,
    "E18": lambda i: float(noise_heating_rate(i["f_trap_Hz"], i["S_one_sided_per_Hz"])),
    "E19": recoil_heating,
    "F04": recoil,
    "F08": recoil,
}

BOUNDS: dict[str, Callable[[Inputs], float]] = {"A09": condensate_density, "A23": critical_temperature}
"""One-sided statements: what the program computes must be above the published number."""

# The program has no TOP trap (D06, D07, D09), no recoil velocity (F03, F07), no imaging (F01, F02, F05, F06) and no
# expansion (F09 to F12).
NOT_YET = {
    *(f"D{n:02}" for n in (6, 7, 9)),
    *(f"F{n:02}" for n in (1, 2, 3, 5, 6, 7, 9, 10, 11, 12)),
}

# Large-eta formulas that the program does not use; `recomputed` has the exact number.
ASYMPTOTIC: dict[str, Callable[[Inputs], float]] = {
    "E17": lambda i: (
        math.sqrt(2.0) * math.exp(i["eta"])
        / float(truncated_averages(CurveShape(exponent=1.5), i["eta"]).evaporation)
    ),
}  # fmt: skip

# Recomputed numbers that are good to fewer digits than the others.
LOOSER = {
    "B32": 1e-4,  # "recomputed value good to about 4 digits", note of the row
}


def test_every_row_is_computed_or_named_as_not_yet_or_weak() -> None:
    weak = {name for name, row in ROWS.items() if row["status"] == "weak"}
    assert len(ROWS) == 116
    assert len([*RECIPES, *BOUNDS, *NOT_YET, *weak]) == len(ROWS)
    assert {*RECIPES, *BOUNDS, *NOT_YET, *weak} == set(ROWS)
    assert all(ROWS[name]["status"] == "ok" for name in RECIPES)
    assert all(ROWS[name]["status"] == "bound" for name in BOUNDS)


@pytest.mark.parametrize("name", RECIPES)
def test_row(name: str) -> None:
    row = ROWS[name]
    value = RECIPES[name](json.loads(row["inputs"]))
    assert value == pytest.approx(float(row["recomputed"]), rel=LOOSER.get(name, 1e-6)), row["formula"]
    assert abs(value - float(row["expected"])) <= float(row["allowed_abs"]), row["citation"]


@pytest.mark.parametrize("name", ASYMPTOTIC)
def test_asymptotic(name: str) -> None:
    row = ROWS[name]
    assert row["status"] == "weak"
    value = ASYMPTOTIC[name](json.loads(row["inputs"]))
    assert value == pytest.approx(float(row["recomputed"]), rel=1e-6)
    assert value / float(row["expected"]) == pytest.approx(float(row["ratio"]), rel=1e-5)


@pytest.mark.parametrize("name", BOUNDS)
def test_bound(name: str) -> None:
    row = ROWS[name]
    value = BOUNDS[name](json.loads(row["inputs"]))
    assert value > float(row["expected"]), row["citation"]
    assert value == pytest.approx(float(row["recomputed"]), rel=1e-6)
