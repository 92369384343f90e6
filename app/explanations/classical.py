"""How far the classical formulas are off."""

from __future__ import annotations

from app.explanations import functions, inputs
from app.explanations.degeneracy import peak_phase_space_density, trapped_log_fugacity
from app.explanations.scales import classical_phase_space_density
from app.explanations.sheet import Sheet, once
from app.explanations.sizes import defined, energy_per_atom
from app.explanations.terms import NOTHING, Leaf
from physics import equation_of_state


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
    fit, ln_z = functions.fit_temperature(sheet.statistics), trapped_log_fugacity(sheet)
    ratio = defined(sheet, "θ", "T_fit/T of a Gaussian fit to the expanded cloud", fit, ln_z)
    meaning = "fitted over true temperature, less 1"
    return sheet.step("T_fit/T − 1", meaning, ratio - 1, value=sheet.number("fitted_temperature_error"))
