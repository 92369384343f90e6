"""Sizes and energy of a cloud: what the shape of its density in the trap gives."""

from __future__ import annotations

from app.explanations import fermi_levels, functions, hartree_fock, inputs
from app.explanations.degeneracy import (
    chemical_potential,
    condensate_atoms,
    condensed,
    coupling,
    ground_level_distance,
    height,
    log_fugacity,
)
from app.explanations.functions import Defined
from app.explanations.scales import angular_frequencies, classical_phase_space_density, spacings
from app.explanations.sheet import Axes, Regime, Sheet, once
from app.explanations.terms import SEVEN_HALVES, Leaf, Term, root


def defined(sheet: Sheet, symbol: str, meaning: str, function: Defined, *arguments: Term) -> Leaf:
    """The value of a function that has no closed form, with its definition."""
    return sheet.step(symbol, meaning, function(*arguments), where=function.definition)


@once
def thermal_number(sheet: Sheet) -> Leaf:
    return defined(sheet, "F", "thermal atoms, times (ħω̄/kT)³", functions.THERMAL_NUMBER, height(sheet))


@once
def excited_atoms(sheet: Sheet) -> Leaf:
    alpha, b = ground_level_distance(sheet), spacings(sheet)
    return defined(sheet, "S", "atoms in excited levels", functions.EXCITED_ATOMS, alpha, *b)


@once
def excited_energies(sheet: Sheet) -> Axes:
    alpha, (b1, b2, b3) = ground_level_distance(sheet), spacings(sheet)
    meaning = "energy of excited atoms along axis"
    return (
        defined(sheet, "W₁", f"{meaning} 1, over kT", functions.EXCITED_ENERGY, alpha, b1, b2, b3),
        defined(sheet, "W₂", f"{meaning} 2, over kT", functions.EXCITED_ENERGY, alpha, b2, b3, b1),
        defined(sheet, "W₃", f"{meaning} 3, over kT", functions.EXCITED_ENERGY, alpha, b3, b1, b2),
    )


@once
def potential_share(sheet: Sheet) -> Leaf:
    """<V> of a thermal atom over (3/2) kT, in the models of local density."""
    meaning = "mean potential energy of a thermal atom, over (3/2) kT"
    if sheet.regime is Regime.HARTREE_FOCK:
        return hartree_fock.potential_share(sheet)
    if sheet.regime is Regime.CONDENSED_SEMI_IDEAL:
        x, F = height(sheet), thermal_number(sheet)
        energy = defined(sheet, "F_V", "potential energy of thermal atoms, / kT (kT/ħω̄)³", functions.TRAP_ENERGY, x)
        return sheet.step("q", meaning, 2 * energy / (3 * F))
    ln_z = log_fugacity(sheet)
    above = functions.polylog(sheet.statistics, 4.0, ln_z)
    below = functions.polylog(sheet.statistics, 3.0, ln_z) if sheet.bosons else classical_phase_space_density(sheet)
    return sheet.step("q", meaning, above / below, where=functions.definition(sheet.statistics))


@once
def thermal_radii(sheet: Sheet) -> Axes:
    if sheet.regime is Regime.OTHER:
        return sheet.given_along("thermal_radii", "σ")
    speed_squared = inputs.k(sheet) * inputs.temperature(sheet) / inputs.mass(sheet)
    v = sheet.step("v", "thermal speed along one axis", root(speed_squared), "m/s")
    w1, w2, w3 = angular_frequencies(sheet)
    formulas: tuple[Term, Term, Term]
    if sheet.regime is Regime.EXACT_LEVELS:
        S, (W1, W2, W3) = excited_atoms(sheet), excited_energies(sheet)
        formulas = (v * root(W1 / S) / w1, v * root(W2 / S) / w2, v * root(W3 / S) / w3)
    elif sheet.regime is Regime.EXACT_FERMIONS:
        N, (E1, E2, E3) = inputs.atoms(sheet), fermi_levels.energies(sheet)
        formulas = (v * root(E1 / N) / w1, v * root(E2 / N) / w2, v * root(E3 / N) / w3)
    else:
        shape = root(potential_share(sheet))
        formulas = (v * shape / w1, v * shape / w2, v * shape / w3)
    return sheet.along("thermal_radii", "σ", "rms radius of the thermal atoms", formulas)


@once
def condensate_radii(sheet: Sheet) -> Axes:
    if sheet.regime is Regime.HARTREE_FOCK:
        return hartree_fock.condensate_radii(sheet)
    if sheet.regime is not Regime.CONDENSED_SEMI_IDEAL:
        return sheet.given_along("condensate_radii", "R")
    mu, m = chemical_potential(sheet), inputs.mass(sheet)
    w1, w2, w3 = angular_frequencies(sheet)
    reach = root(2 * mu / m)
    return sheet.along("condensate_radii", "R", "radius at which V = µ,", (reach / w1, reach / w2, reach / w3))


@once
def energy_per_atom(sheet: Sheet) -> Leaf:
    value, meaning = sheet.number("energy_per_atom"), "energy per atom, from the trap bottom"
    if sheet.regime is Regime.OTHER:
        return sheet.given("energy_per_atom", "E/N")
    if sheet.regime is Regime.HARTREE_FOCK:
        return hartree_fock.energy_per_atom(sheet)
    kT = inputs.k(sheet) * inputs.temperature(sheet)
    match sheet.regime:
        case Regime.CONDENSED_SEMI_IDEAL:
            formula = kT * _semi_ideal_energy(sheet) / classical_phase_space_density(sheet)
        case Regime.EXACT_FERMIONS:
            E1, E2, E3 = fermi_levels.energies(sheet)
            formula = kT * (E1 + E2 + E3) / inputs.atoms(sheet)
        case Regime.EXACT_LEVELS:
            formula = kT * _level_energy(sheet) / inputs.atoms(sheet)
        case Regime.CONDENSED_IDEAL:
            q = potential_share(sheet)
            condensed(sheet)
            share = sheet.step(
                "N_th/N", "thermal share; a condensed atom has no energy here",
                inputs.zeta_3(sheet) / classical_phase_space_density(sheet),
            )  # fmt: skip
            formula = 3 * kT * q * share
        case _:
            formula = 3 * kT * potential_share(sheet)
    return sheet.step("E/N", meaning, formula, "J", value=value)


def _semi_ideal_energy(sheet: Sheet) -> Leaf:
    x, F = height(sheet), thermal_number(sheet)
    kinetic = defined(sheet, "F_K", "kinetic energy of thermal atoms, / kT (kT/ħω̄)³", functions.KINETIC_ENERGY, x)
    lifted = defined(sheet, "F_L", "their energy in the potential above µ, likewise", functions.LIFTED_ENERGY, x)
    condensate = sheet.step(
        "F_0", "energy of the condensate, (5/7) µ an atom, likewise", 5 * coupling(sheet) * x**SEVEN_HALVES / 7
    )
    total = kinetic + lifted + x * F + condensate
    return sheet.step("ε", "energy of all atoms, likewise; µ is in x F", total)


def _level_energy(sheet: Sheet) -> Leaf:
    b1, b2, b3 = spacings(sheet)
    N0, (W1, W2, W3) = condensate_atoms(sheet), excited_energies(sheet)
    total = N0 * ((b1 + b2 + b3) / 2) + W1 + W2 + W3
    return sheet.step("ε", "energy of all atoms over kT, zero-point energy included", total)
