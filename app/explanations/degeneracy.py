"""Chemical potential, fugacity and condensate: how each model shares N atoms among the levels."""

from __future__ import annotations

from app.explanations import fermi_levels, functions, hartree_fock, inputs
from app.explanations.scales import (
    classical_phase_space_density,
    oscillator_length,
    spacings,
    thermal_wavelength,
)
from app.explanations.sheet import Regime, Sheet, once
from app.explanations.terms import FIVE_HALVES, NOTHING, PI, THREE_HALVES, Leaf, exp, ln, root
from physics import equation_of_state
from physics.exact_levels import ground_distance
from physics.models import Model


@once
def log_fugacity(sheet: Sheet) -> Leaf:
    value = sheet.number("log_fugacity")
    match sheet.regime:
        case Regime.THERMAL | Regime.FERMIONS:
            X, unknown = classical_phase_space_density(sheet), Leaf("ln z", value)
            left = functions.polylog(sheet.statistics, 3.0, unknown)
            meaning = "log of the fugacity z, at which the levels hold N atoms"
            return sheet.solve(unknown, meaning, left, X, where=functions.definition(sheet.statistics))
        case Regime.CONDENSED_IDEAL:
            condensed(sheet)
            return sheet.step("ln z", "log of the fugacity z: the excited levels are saturated", NOTHING, value=value)
        case Regime.CONDENSED_SEMI_IDEAL:
            return sheet.step("ln z", "log of the fugacity z, which is µ/kT", height(sheet), value=value)
        case Regime.EXACT_LEVELS:
            b1, b2, b3 = spacings(sheet)
            formula = (b1 + b2 + b3) / 2 - ground_level_distance(sheet)
            return sheet.step("ln z", "log of the fugacity z: µ/kT, from the trap bottom", formula, value=value)
        case Regime.HARTREE_FOCK:
            return hartree_fock.log_fugacity(sheet)
        case Regime.EXACT_FERMIONS:
            return fermi_levels.log_fugacity(sheet)
        case Regime.OTHER:
            return sheet.given("log_fugacity", "ln z")


@once
def trapped_log_fugacity(sheet: Sheet) -> Leaf:
    """ln z of an ideal gas of the same X, whatever the model."""
    X = classical_phase_space_density(sheet)
    unknown = Leaf("ln z_X", float(equation_of_state.trapped_log_fugacity(sheet.statistics, X.amount)))
    if sheet.bosons and X.amount >= inputs.zeta_3(sheet).amount:
        sheet.case("the thermal atoms are saturated", X, "≥", inputs.zeta_3(sheet))
        return sheet.step("ln z_X", "log of the fugacity of the thermal atoms", NOTHING, value=unknown.amount)
    left = functions.polylog(sheet.statistics, 3.0, unknown)
    meaning = "log of the fugacity of an ideal gas of these atoms"
    return sheet.solve(unknown, meaning, left, X, where=functions.definition(sheet.statistics))


def local_log_fugacity(sheet: Sheet) -> Leaf:
    """ln z of the density in local density: fermions in discrete levels have their mean densities so."""
    return trapped_log_fugacity(sheet) if sheet.regime is Regime.EXACT_FERMIONS else log_fugacity(sheet)


@once
def fugacity(sheet: Sheet) -> Leaf:
    return sheet.step("z", "fugacity", exp(log_fugacity(sheet)), value=sheet.number("fugacity"))


@once
def chemical_potential(sheet: Sheet) -> Leaf:
    formula = log_fugacity(sheet) * inputs.k(sheet) * inputs.temperature(sheet)
    meaning = "chemical potential, from the trap bottom"
    return sheet.step("µ", meaning, formula, "J", value=sheet.number("chemical_potential"))


@once
def peak_phase_space_density(sheet: Sheet) -> Leaf:
    value = sheet.number("peak_phase_space_density")
    match sheet.regime:
        case Regime.THERMAL | Regime.FERMIONS | Regime.CONDENSED_IDEAL:
            formula = functions.polylog(sheet.statistics, 1.5, log_fugacity(sheet))
            meaning = "n λ³ of the thermal atoms at the centre, where it is largest"
            return sheet.step("D", meaning, formula, value=value, where=functions.definition(sheet.statistics))
        case Regime.CONDENSED_SEMI_IDEAL:
            condensed(sheet)
            meaning = "n λ³ of the thermal atoms at the edge of the condensate, where V = µ and g_3/2(z) is g_3/2(1)"
            return sheet.step("D", meaning, inputs.zeta_3_2(sheet), value=value)
        case Regime.EXACT_LEVELS:
            formula = excited_density(sheet) * thermal_wavelength(sheet) ** 3
            meaning = "n λ³ of the atoms in excited levels, at the centre"
            return sheet.step("D", meaning, formula, value=value)
        case Regime.HARTREE_FOCK:
            return hartree_fock.peak_phase_space_density(sheet)
        case Regime.EXACT_FERMIONS:
            return fermi_levels.peak_phase_space_density(sheet)
        case Regime.OTHER:
            return sheet.given("peak_phase_space_density", "D")


@once
def harmonic_peak_phase_space_density(sheet: Sheet) -> Leaf:
    symbol, name = "D harm.", "harmonic_peak_phase_space_density"
    if sheet.regime is Regime.HARTREE_FOCK:
        classical_phase_space_density(sheet)
        return sheet.given(name, symbol)
    formula = functions.polylog(sheet.statistics, 1.5, trapped_log_fugacity(sheet))
    meaning = "largest n λ³ of the thermal atoms in the harmonic trap"
    value, where = sheet.number(name), functions.definition(sheet.statistics)
    return sheet.step(symbol, meaning, formula, value=value, where=where)


@once
def harmonic_condensate_fraction(sheet: Sheet) -> Leaf:
    symbol, name = "N₀/N harm.", "harmonic_condensate_fraction"
    X, full, value = classical_phase_space_density(sheet), inputs.zeta_3(sheet), sheet.number(name)
    if X.amount <= full.amount and sheet.regime is not Regime.HARTREE_FOCK:
        sheet.case("the excited levels of the harmonic trap hold all atoms", X, "≤", full)
        return sheet.nothing(symbol, "condensed share of the atoms in the harmonic trap")
    if sheet.solved.model is Model.IDEAL:
        meaning = "condensed share of the atoms in the harmonic trap"
        return sheet.step(symbol, meaning, 1 - full / X, value=value)
    return sheet.given(name, symbol)


# ---------------------------------------------------------------- the threshold and the condensate


@once
def condensed(sheet: Sheet) -> None:
    """The comparison that says on which side of the threshold the cloud is."""
    X, full = classical_phase_space_density(sheet), inputs.zeta_3(sheet)
    if X.amount > full.amount:
        sheet.case("more atoms than the excited levels hold: the rest is condensed", X, ">", full)
    else:
        sheet.case("the excited levels hold all atoms: no condensate", X, "≤", full)


@once
def condensate_fraction(sheet: Sheet) -> Leaf:
    value, meaning = sheet.number("condensate_fraction"), "condensed fraction"
    match sheet.regime:
        case Regime.THERMAL:
            condensed(sheet)
            return sheet.nothing("N₀/N", meaning)
        case Regime.CONDENSED_IDEAL:
            condensed(sheet)
            formula = 1 - inputs.zeta_3(sheet) / classical_phase_space_density(sheet)
            return sheet.step("N₀/N", f"{meaning}: 1 − (T/Tc)³", formula, value=value)
        case Regime.CONDENSED_SEMI_IDEAL:
            x, X = height(sheet), classical_phase_space_density(sheet)
            return sheet.step("N₀/N", meaning, coupling(sheet) * x**FIVE_HALVES / X, value=value)
        case Regime.EXACT_LEVELS:
            meaning = "share of the atoms in the ground level"
            return sheet.step("N₀/N", meaning, condensate_atoms(sheet) / inputs.atoms(sheet), value=value)
        case Regime.HARTREE_FOCK:
            return hartree_fock.condensate_fraction(sheet)
        case _:
            return sheet.given("condensate_fraction", "N₀/N")


@once
def condensate_atoms(sheet: Sheet) -> Leaf:
    if sheet.regime is not Regime.EXACT_LEVELS:
        formula = condensate_fraction(sheet) * inputs.atoms(sheet)
        return sheet.step("N₀", "condensed atoms", formula, value=sheet.number("condensate_atoms"))
    unknown, N = Leaf("N₀", sheet.number("condensate_atoms")), inputs.atoms(sheet)
    excited = functions.EXCITED_ATOMS(ln(1 + 1 / unknown), *spacings(sheet))
    meaning = "atoms in the ground level: with those in excited levels, S, they are N"
    return sheet.solve(unknown, meaning, unknown + excited, N, where=functions.EXCITED_ATOMS.definition)


# ---------------------------------------------------------------- semi-ideal


@once
def density_scale(sheet: Sheet) -> Leaf:
    """lambda/2a: what n_c lambda^3 is, in units of (mu - V)/kT."""
    a = inputs.scattering_length(sheet)
    if a is None:
        raise ValueError("a semi-ideal cloud has a scattering length")
    meaning = "density scale of the condensate: n_c λ³ = B (µ − V)/kT"
    return sheet.step("B", meaning, thermal_wavelength(sheet) / (2 * a))


@once
def coupling(sheet: Sheet) -> Leaf:
    meaning = "number scale of the condensate: N₀ (ħω̄/kT)³ = C (µ/kT)^(5/2)"
    return sheet.step("C", meaning, 8 * density_scale(sheet) / (15 * root(PI)))


@once
def height(sheet: Sheet) -> Leaf:
    """x = mu/kT of a condensate in the semi-ideal model."""
    condensed(sheet)
    unknown, X = Leaf("x", sheet.number("log_fugacity")), classical_phase_space_density(sheet)
    left = coupling(sheet) * unknown**FIVE_HALVES + functions.THERMAL_NUMBER(unknown)
    meaning = "µ/kT: condensed atoms and thermal ones, N₀ + N_th = N, times (ħω̄/kT)³"
    return sheet.solve(unknown, meaning, left, X, where=functions.THERMAL_NUMBER.definition)


# ---------------------------------------------------------------- exact levels


@once
def ground_level_distance(sheet: Sheet) -> Leaf:
    """alpha = (E0 - mu)/kT."""
    N0 = condensate_atoms(sheet)
    value = float(ground_distance(N0.amount))
    return sheet.step(
        "α", "distance of the ground level from µ, over kT: N₀ = 1/(exp(α) − 1)", ln(1 + 1 / N0), value=value
    )


@once
def ground_level_density(sheet: Sheet) -> Leaf:
    formula = 1 / (PI**THREE_HALVES * oscillator_length(sheet) ** 3)
    return sheet.step("n₁", "density of one atom in the ground level, at the centre", formula, "1/m^3")


@once
def excited_density(sheet: Sheet) -> Leaf:
    Q = functions.EXCITED_DENSITY
    sum_ = sheet.step(
        "Q", "atoms in excited levels at the centre, in units of n₁", Q(ground_level_distance(sheet), *spacings(sheet)),
        where=Q.definition,
    )  # fmt: skip
    formula = sum_ * ground_level_density(sheet)
    return sheet.step("n_ex", "density of the atoms in excited levels, at the centre", formula, "1/m^3")
