"""Densities: at the densest point, and as an atom meets it on average."""

from __future__ import annotations

from app.explanations import functions, hartree_fock, inputs
from app.explanations.degeneracy import (
    condensate_atoms,
    condensate_fraction,
    coupling,
    density_scale,
    excited_density,
    ground_level_density,
    ground_level_distance,
    height,
    local_log_fugacity,
    peak_phase_space_density,
)
from app.explanations.scales import classical_phase_space_density, oscillator_length, spacings, thermal_wavelength
from app.explanations.sheet import Regime, Sheet, once
from app.explanations.sizes import defined
from app.explanations.terms import FIVE_HALVES, PI, THREE_HALVES, Leaf, root
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
        case Regime.THERMAL | Regime.FERMIONS | Regime.EXACT_FERMIONS:
            formula = peak_phase_space_density(sheet) / thermal_wavelength(sheet) ** 3
        case Regime.CONDENSED_IDEAL:
            formula = thermal_density(sheet) + ideal_condensate_density(sheet)
        case Regime.CONDENSED_SEMI_IDEAL:
            return _semi_ideal_peak(sheet)
        case Regime.EXACT_LEVELS:
            formula = excited_density(sheet) + condensate_atoms(sheet) * ground_level_density(sheet)
        case Regime.HARTREE_FOCK:
            return hartree_fock.peak_density(sheet)
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
        case Regime.HARTREE_FOCK:
            return hartree_fock.mean_density(sheet)
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
            J = defined(sheet, "J", "∫ (n_th λ³)² over the trap", function, local_log_fugacity(sheet))
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
