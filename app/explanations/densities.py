"""Densities, collisions, and how far the classical formulas are off."""

from __future__ import annotations

from app.explanations import functions, inputs
from app.explanations.degeneracy import (
    condensate_atoms,
    condensate_fraction,
    coupling,
    density_scale,
    excited_density,
    ground_level_density,
    ground_level_distance,
    height,
    log_fugacity,
    peak_phase_space_density,
    spacings,
)
from app.explanations.scales import classical_phase_space_density, oscillator_length, thermal_wavelength
from app.explanations.sheet import Regime, Sheet, once
from app.explanations.sizes import defined, energy_per_atom
from app.explanations.terms import FIVE_HALVES, NOTHING, PI, THREE_HALVES, Leaf, root
from physics import equation_of_state
from physics.particles import Statistics


@once
def thermal_density(sheet: Sheet) -> Leaf:
    """Largest density of the thermal atoms."""
    formula = peak_phase_space_density(sheet) / thermal_wavelength(sheet) ** 3
    return sheet.step("n_th", "largest density of the thermal atoms of one spin state", formula, "1/m^3")


@once
def ideal_condensate_density(sheet: Sheet) -> Leaf:
    formula = condensate_atoms(sheet) / (PI**THREE_HALVES * oscillator_length(sheet) ** 3)
    return sheet.step("n₀", "density of the condensate at the centre, in the ground level", formula, "1/m^3")


@once
def peak_density(sheet: Sheet) -> Leaf:
    value, meaning = sheet.number("peak_density"), "peak density of one spin state"
    match sheet.regime:
        case Regime.THERMAL | Regime.FERMIONS:
            formula = peak_phase_space_density(sheet) / thermal_wavelength(sheet) ** 3
        case Regime.CONDENSED_IDEAL:
            formula = thermal_density(sheet) + ideal_condensate_density(sheet)
        case Regime.CONDENSED_SEMI_IDEAL:
            return _semi_ideal_peak(sheet)
        case Regime.EXACT_LEVELS:
            formula = excited_density(sheet) + condensate_atoms(sheet) * ground_level_density(sheet)
        case Regime.OTHER:
            return sheet.given("peak_density", "n(0)")
    return sheet.step("n(0)", meaning, formula, "1/m^3", value=value)


def _semi_ideal_peak(sheet: Sheet) -> Leaf:
    x, B, edge = height(sheet), density_scale(sheet), inputs.zeta_3_2(sheet)
    thermal = functions.polylog(Statistics.BOSE, 1.5, -x)
    meaning = "n λ³ at the centre, condensate and thermal atoms"
    centre = sheet.step("d", meaning, B * x + thermal, where=functions.BOSE_FUNCTION)
    if centre.amount >= edge.amount:
        sheet.case("the centre is denser than the edge of the condensate", centre, "≥", edge)
        largest = centre
    else:
        sheet.case("the edge of the condensate is denser than the centre", edge, ">", centre)
        largest = edge
    formula = largest / thermal_wavelength(sheet) ** 3
    return sheet.step("n(0)", "peak density of one spin state", formula, "1/m^3", value=sheet.number("peak_density"))


@once
def mean_density(sheet: Sheet) -> Leaf:
    value, meaning = sheet.number("mean_density"), "density that an atom meets on average, ∫ n² d³r/N"
    match sheet.regime:
        case Regime.OTHER:
            return sheet.given("mean_density", "⟨n⟩")
        case Regime.EXACT_LEVELS:
            function = functions.SQUARED_DENSITY
            alpha, b = ground_level_distance(sheet), spacings(sheet)
            M = defined(sheet, "M", "∫ n² d³r of all levels, over n₁", function, alpha, *b)
            formula = M * ground_level_density(sheet) / inputs.atoms(sheet)
        case Regime.CONDENSED_SEMI_IDEAL:
            total = _semi_ideal_squares(sheet)
            formula = total / (classical_phase_space_density(sheet) * thermal_wavelength(sheet) ** 3)
        case regime:
            function = functions.overlap(sheet.statistics)
            J = defined(sheet, "J", "∫ (n_th λ³)² over the trap", function, log_fugacity(sheet))
            thermal = J / (classical_phase_space_density(sheet) * thermal_wavelength(sheet) ** 3)
            if regime is Regime.CONDENSED_IDEAL:
                among = sheet.step("⟨n⟩_th", "thermal atoms among themselves", thermal, "1/m^3")
                n0, n_th = ideal_condensate_density(sheet), thermal_density(sheet)
                formula = among + condensate_fraction(sheet) * (n0 / root(8) + 2 * n_th)
            else:
                formula = thermal
    return sheet.step("⟨n⟩", meaning, formula, "1/m^3", value=value)


def _semi_ideal_squares(sheet: Sheet) -> Leaf:
    x, B = height(sheet), density_scale(sheet)
    product = defined(sheet, "F_C", "overlap of thermal atoms and condensate", functions.DENSITY_PRODUCT, x)
    square = defined(sheet, "F_2", "thermal atoms among themselves", functions.DENSITY_SQUARED, x)
    condensate = sheet.step(
        "F_0",
        "condensate with itself, (4/7) of its peak density an atom",
        4 * B * x * coupling(sheet) * x**FIVE_HALVES / 7,
    )
    total = condensate + 2 * B * product + square
    return sheet.step("P", "∫ (n λ³)² over the trap", total)


# ---------------------------------------------------------------- collisions


@once
def low_energy_cross_section(sheet: Sheet) -> Leaf:
    a, s = _length(sheet), inputs.spin_states(sheet)
    meaning = "cross-section of slow atoms, summed over the partners in all spin states"
    formula = 8 * PI * a**2 + 4 * PI * (s - 1) * a**2 if sheet.bosons else 4 * PI * (s - 1) * a**2
    return sheet.step("σ₀", meaning, formula, "m^2")


def _length(sheet: Sheet) -> Leaf:
    a = inputs.scattering_length(sheet)
    if a is None:
        raise ValueError("collisions need a scattering length")
    return a


@once
def cross_section(sheet: Sheet) -> Leaf:
    slow, a, m = low_energy_cross_section(sheet), _length(sheet), inputs.mass(sheet)
    kT = inputs.k(sheet) * inputs.temperature(sheet)
    K = sheet.step("K", "(wavenumber times a)², at the energy kT", m * kT * a**2 / inputs.hbar(sheet) ** 2)
    meaning = "what the unitarity limit leaves of σ₀, averaged over the thermal speeds"
    c = defined(sheet, "c", meaning, functions.SPEED_AVERAGE, K)
    return sheet.step("σ", "cross-section", c * slow, "m^2")


@once
def elastic_collision_rate(sheet: Sheet) -> Leaf:
    value, meaning = sheet.number("elastic_collision_rate"), "elastic collisions of an atom, mean over the cloud"
    if not sheet.bosons and sheet.answer.cloud.spin_components == 1:
        inputs.spin_states(sheet)
        why = "collisions of an atom: none among fermions of one spin state"
        return sheet.step("Γ", why, NOTHING, "1/s", value=value)
    n, sigma = thermal_density(sheet), cross_section(sheet)
    kT, m = inputs.k(sheet) * inputs.temperature(sheet), inputs.mass(sheet)
    speed = sheet.step("v̄", "mean thermal speed", root(8 * kT / (PI * m)), "m/s")
    return sheet.step("Γ", meaning, n * sigma * speed / 2, "1/s", value=value)


@once
def mean_free_path(sheet: Sheet) -> Leaf:
    formula = 1 / (root(2) * thermal_density(sheet) * cross_section(sheet))
    meaning = "mean free path where the thermal density is largest"
    return sheet.step("ℓ", meaning, formula, "m", value=sheet.number("mean_free_path"))


# ---------------------------------------------------------------- classical formulas


@once
def classical_density_error(sheet: Sheet) -> Leaf:
    formula = classical_phase_space_density(sheet) / peak_phase_space_density(sheet) - 1
    meaning = "classical over quantum peak density of the thermal atoms, less 1"
    return sheet.step("n_cl/n − 1", meaning, formula, value=sheet.number("classical_density_error"))


@once
def classical_energy_error(sheet: Sheet) -> Leaf:
    formula = 3 * inputs.k(sheet) * inputs.temperature(sheet) / energy_per_atom(sheet) - 1
    meaning = "classical over quantum energy, less 1"
    return sheet.step("3kT N/E − 1", meaning, formula, value=sheet.number("classical_energy_error"))


@once
def classical_pressure_error(sheet: Sheet) -> Leaf:
    D = peak_phase_space_density(sheet)
    unknown = Leaf("ln z_D", float(equation_of_state.log_fugacity(sheet.statistics, D.amount)))
    where = functions.definition(sheet.statistics)
    density, pressure = (functions.polylog(sheet.statistics, order, unknown) for order in (1.5, 2.5))
    if sheet.bosons and unknown.amount == 0.0:
        sheet.case("the thermal atoms are saturated where they are densest", D, "≥", inputs.zeta_3_2(sheet))
        sheet.step("ln z_D", "log of the fugacity there", NOTHING)
    else:
        sheet.solve(unknown, "log of the fugacity where the atoms are densest", density, D, where=where)
    meaning = "classical over quantum pressure where the thermal atoms are densest, less 1"
    formula = density / pressure - 1
    value = sheet.number("classical_pressure_error")
    return sheet.step("n kT/p − 1", meaning, formula, value=value, where=where)


@once
def fitted_temperature_error(sheet: Sheet) -> Leaf:
    X = classical_phase_space_density(sheet)
    unknown = Leaf("ln z_X", float(equation_of_state.trapped_log_fugacity(sheet.statistics, X.amount)))
    if sheet.bosons and X.amount >= inputs.zeta_3(sheet).amount:
        sheet.case("the thermal atoms are saturated", X, "≥", inputs.zeta_3(sheet))
        sheet.step("ln z_X", "log of the fugacity of the thermal atoms", NOTHING)
    else:
        left = functions.polylog(sheet.statistics, 3.0, unknown)
        meaning = "log of the fugacity of an ideal gas of these atoms"
        sheet.solve(unknown, meaning, left, X, where=functions.definition(sheet.statistics))
    ratio = defined(
        sheet,
        "θ",
        "T_fit/T of a Gaussian fit to the expanded cloud",
        functions.fit_temperature(sheet.statistics),
        unknown,
    )
    meaning = "fitted over true temperature, less 1"
    return sheet.step("T_fit/T − 1", meaning, ratio - 1, value=sheet.number("fitted_temperature_error"))
