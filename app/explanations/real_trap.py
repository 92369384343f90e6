"""Steps in a real trap, where they differ: what in a harmonic trap is a closed formula is an integral over its volume
curve here, written out with the numbers that bound it. What follows from these by arithmetic is worked out as anywhere.

The names are those of the functions whose place is taken, see `app.explanations.sheet.once`.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType

from app.explanations import inputs
from app.explanations.sheet import Axes, Sheet, once
from app.explanations.terms import ALL, Leaf, root
from physics.models import Model

_LEVELS = (
    "ρ(ε) = π (2m)^(3/2) h⁻³ ∫₀^ε W(U) (ε − U)^(−1/2) dU, W(U) is the volume around the minimum in which the potential "
    "is below U, as the survey of the trap counts it, and no level above ε_t is held"
)
_SHELLS = "dW runs over shells of equal potential U, up to ε_t; densities have the momenta only that are held"
_EXACT_DENSITY = "n_th λ³ = (2/√π) ∫ √p dp/(exp(p + (U − µ)/kT) ∓ 1), up to p = (ε_t − U)/kT"


@once
def bounds(sheet: Sheet) -> Leaf:
    """What every integral is taken between: eta."""
    inputs.atoms(sheet), inputs.mass(sheet)
    held, T = inputs.highest_energy(sheet), inputs.temperature(sheet)
    inputs.volume_at_highest_energy(sheet)
    meaning = "highest energy that is held, over kT"
    return sheet.step("η_t", meaning, held / (inputs.k(sheet) * T))


def _integral(sheet: Sheet, name: str, symbol: str, meaning: str, expression: str, where: str) -> Leaf:
    bounds(sheet)
    if sheet.solved.model in (Model.SEMI_IDEAL, Model.HARTREE_FOCK) and sheet.condensed:
        inputs.scattering_length(sheet)
    return sheet.integral(name, symbol, meaning, expression, where)


def log_fugacity(sheet: Sheet) -> Leaf:
    sign = "−" if sheet.bosons else "+"
    meaning, where = "log of the fugacity z, at which the levels below ε_t hold N atoms", _LEVELS
    expression = f"the root of N = ∫ ρ(ε) dε/(exp(ε/kT)/z {sign} 1)"
    if sheet.solved.model is Model.HARTREE_FOCK:
        meaning = "µ/kT, at which the densities of the mean field sum to N"
        expression, where = "the root of N = ∫ (n_c + n_th) dW, U + 2G(n_c + n_th) in the place of U", _SHELLS
    elif sheet.condensed and sheet.solved.model is Model.SEMI_IDEAL:
        meaning = "µ/kT, at which condensed and thermal atoms are N"
        expression, where = "the root of N = (1/G) ∫₀^µ W dU + ∫ n_th(|U − µ|) dW, G = 4πħ²a/m", _SHELLS
    elif sheet.condensed:
        meaning, expression = "log of the fugacity: the levels above the lowest are saturated", "0, as N > N_c"
        saturated(sheet)
    return _integral(sheet, "log_fugacity", "ln z", meaning, expression, where)


def peak_phase_space_density(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    place = "at the edge of the condensate, where U = µ" if sheet.condensed else "at the minimum, where U = 0"
    sign = "−" if sheet.bosons else "+"
    mean_field = sheet.solved.model is Model.HARTREE_FOCK
    exponent = "p + (U + 2G(n_c + n_th) − µ)/kT" if mean_field else "p + (U − µ)/kT"
    expression = f"(2/√π) ∫ √p dp/(exp({exponent}) {sign} 1), up to p = (ε_t − U)/kT, {place}"
    meaning = "n λ³ of the thermal atoms where it is largest, of the momenta that are held"
    return _integral(sheet, "peak_phase_space_density", "D", meaning, expression, "")


@once
def log_fugacity_of(sheet: Sheet) -> Leaf:
    from app.explanations import degeneracy

    return degeneracy.log_fugacity(sheet)


@once
def saturated(sheet: Sheet) -> Leaf:
    """The most thermal atoms."""
    N = inputs.atoms(sheet)
    bounds(sheet)
    amount = sheet.number("atoms_to_threshold") * N.amount
    return sheet.integral_of(
        "N_c", "atoms at which the levels saturate", "∫ ρ(ε) dε/(exp(ε/kT) − 1)", _LEVELS, amount, "1"
    )


def condensed(sheet: Sheet) -> None:
    N, full = inputs.atoms(sheet), saturated(sheet)
    if sheet.condensed:
        sheet.case("more atoms than the levels hold: the rest is condensed", N, ">", full)
    else:
        sheet.case("the levels hold all atoms: no condensate", N, "≤", full)


def critical_temperature(sheet: Sheet) -> Leaf:
    meaning = "temperature at which the levels below ε_t saturate with N atoms"
    expression = "the root of N = ∫ ρ(ε) dε/(exp(ε/kTc) − 1)"
    return _integral(sheet, "critical_temperature", "Tc", meaning, expression, _LEVELS)


def fermi_temperature(sheet: Sheet) -> Leaf:
    meaning = "Fermi temperature: the trap has N levels below k TF"
    return _integral(sheet, "fermi_temperature", "TF", meaning, "the root of N = ∫ ρ(ε) dε up to ε = k TF", _LEVELS)


def temperature_to_threshold(sheet: Sheet) -> Leaf:
    from app.explanations.scales import reduced_temperature

    reduced = reduced_temperature(sheet)
    formula = 1 / reduced if sheet.bosons else inputs.fermi_threshold(sheet) / reduced
    value = sheet.number("temperature_to_threshold")
    return sheet.step("Tθ/T", "threshold temperature over T, at this N", formula, value=value)


def atoms_to_threshold(sheet: Sheet) -> Leaf:
    N, value = inputs.atoms(sheet), sheet.number("atoms_to_threshold")
    if sheet.bosons:
        most = saturated(sheet)
    else:
        inputs.fermi_threshold(sheet), bounds(sheet)
        most = sheet.integral_of(
            "Nθ", "levels below kT/t, which so many atoms fill", "∫ ρ(ε) dε up to ε = kT/t", _LEVELS,
            value * N.amount, "1",
        )  # fmt: skip
    return sheet.step("Nθ/N", "threshold atom number over N, at this T", most / N, value=value)


def atoms_left_at_target(sheet: Sheet) -> Leaf:
    from app.explanations import scales

    more, value = scales.atoms_to_threshold(sheet), sheet.number("atoms_left_at_target")
    if more.amount <= 1.0:
        return sheet.step("N'/N", "share of atoms left: all, the threshold is reached already", ALL, value=value)
    formula = (1 / more) ** (1 / inputs.efficiency(sheet))
    meaning = "share of atoms left where the classical phase-space density, ~ N at this T, has grown to the threshold"
    return sheet.step("N'/N", meaning, formula, value=value)


def condensate_fraction(sheet: Sheet) -> Leaf:
    value = sheet.number("condensate_fraction")
    if not sheet.condensed:
        condensed(sheet)
        return sheet.nothing("N₀/N", "condensed share of the atoms")
    if sheet.solved.model is Model.IDEAL:
        meaning = "condensed share of the atoms: those that the levels do not hold"
        return sheet.step("N₀/N", meaning, 1 - saturated(sheet) / inputs.atoms(sheet), value=value)
    log_fugacity_of(sheet)
    expression = "(1/N) ∫ n_c dW" if sheet.solved.model is Model.HARTREE_FOCK else "(1/(G N)) ∫₀^µ W dU"
    return _integral(sheet, "condensate_fraction", "N₀/N", "condensed share of the atoms", expression, "")


def condensate_radii(sheet: Sheet) -> Axes:
    return sheet.integral_along(
        "condensate_radii", "R", "harmonic radius at which V reaches the edge of the condensate",
        "√(2 (µ − µ_edge)/m)/ω, µ_edge = 0 but for the mean field of all",
    )  # fmt: skip


def thermal_radii(sheet: Sheet) -> Axes:
    bounds(sheet)
    return sheet.integral_along(
        "thermal_radii", "σ", "rms radius of a harmonic cloud of the same mean potential energy", "√(2⟨U⟩/3m)/ω"
    )


def peak_density(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    expression = "n_c + n_th at the minimum" if sheet.condensed else "D/λ³"
    return _integral(sheet, "peak_density", "n(0)", "peak density of one spin state", expression, _EXACT_DENSITY)


def mean_density(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    return _integral(sheet, "mean_density", "⟨n⟩", "mean density", "(1/N) ∫ n² dW", f"{_SHELLS}; {_EXACT_DENSITY}")


def pair_density(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    bounds(sheet)
    meaning, expression = "density that two-body losses meet", "(1/N) ∫ (n_c²/2 + 2 n_c n_th + n_th²) dW"
    return sheet.integral_of("n₂", meaning, expression, _SHELLS, sheet.of_solution("pair_density"), "1/m^3")


def triple_density(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    bounds(sheet)
    meaning = "squared density that three-body losses meet"
    expression = "(1/N) ∫ (n_c³/6 + 3/2 n_c² n_th + 3 n_c n_th² + n_th³) dW"
    return sheet.integral_of("n₃", meaning, expression, _SHELLS, sheet.of_solution("triple_density"), "1/m^6")


def energy_per_atom(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    sign = "−" if sheet.bosons else "+"
    expression, where = f"(1/N) ∫ ρ(ε) ε dε/(exp(ε/kT)/z {sign} 1)", _LEVELS
    if sheet.solved.model is Model.HARTREE_FOCK:
        expression, where = "(1/N) ∫ (kinetic + U n + (G/2)(n_c² + 4 n_c n_th + 2 n_th²)) dW", _SHELLS
    elif sheet.condensed and sheet.solved.model is Model.SEMI_IDEAL:
        expression, where = "(1/N) [∫ (kinetic + (µ + |U − µ|) n_th) dW + µ N₀ − ∫₀^µ N₀ dµ]", _SHELLS
    return _integral(sheet, "energy_per_atom", "E/N", "energy of an atom, from the minimum", expression, where)


def elastic_collision_rate(sheet: Sheet) -> Leaf:
    from app.explanations.collisions import collision_cross_section, mean_speed
    from app.explanations.densities import thermal_density

    n, s, v = thermal_density(sheet), collision_cross_section(sheet), mean_speed(sheet)
    value = sheet.number("elastic_collision_rate")
    amount = value / (n.amount * s.amount * v.amount * 2.0**0.5) if value else 2.0**-1.5
    expression = "∫ n_cl² dW/(N n_cl(0)), of a classical cloud in this trap"
    share = sheet.integral_of("c_t", "mean density over that at the minimum", expression, _SHELLS, amount, "1")
    meaning = "elastic collisions of an atom, mean over the cloud"
    return sheet.step("Γ", meaning, share * n * s * root(2) * v, "1/s", value=value)


def loss_heating_rate(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    meaning, symbol = "heating by loss: what lost atoms leave behind", "Ṫ_loss"
    expression = "(T/C) Σ rates × (∂E/∂N − mean energy of a lost atom)/kT, each an integral over the trap"
    return _integral(sheet, "loss_heating_rate", symbol, meaning, expression, _SHELLS)


def classical_density_error(sheet: Sheet) -> Leaf:
    from app.explanations import degeneracy

    D = degeneracy.peak_phase_space_density(sheet)
    amount = sheet.of_solution("classical_peak")
    expression = "N λ³ P(3/2, η_t)/∫ exp(−U/kT) P(3/2, (ε_t − U)/kT) dW"
    where = f"P is the regularised incomplete gamma function; {_SHELLS}"
    classical = sheet.integral_of("D_cl", "n λ³ of a classical cloud at the minimum", expression, where, amount, "1")
    value = sheet.number("classical_density_error")
    return sheet.step("n_cl/n − 1", "error of the classical density", classical / D - 1, value=value)


def classical_energy_error(sheet: Sheet) -> Leaf:
    from app.explanations import sizes

    energy, value = sizes.energy_per_atom(sheet), sheet.number("classical_energy_error")
    amount = (1.0 + value) * energy.amount
    expression = "∫ ρ(ε) ε exp(−ε/kT) dε/∫ ρ(ε) exp(−ε/kT) dε"
    classical = sheet.integral_of("E_cl", "energy of a classical atom in this trap", expression, _LEVELS, amount, "J")
    return sheet.step("3kT N/E − 1", "error of the classical energy", classical / energy - 1, value=value)


def fitted_temperature_error(sheet: Sheet) -> Leaf:
    log_fugacity_of(sheet)
    meaning = "temperature of a Gaussian fit over T, minus 1"
    expression = "as after a long expansion from a harmonic trap, of the same z"
    return _integral(sheet, "fitted_temperature_error", "T_fit/T − 1", meaning, expression, "")


IN_REAL_TRAPS: Mapping[str, Callable[[Sheet], object]] = MappingProxyType(
    {
        function.__name__: function
        for function in (
            log_fugacity, peak_phase_space_density, condensed, critical_temperature, fermi_temperature,
            temperature_to_threshold, atoms_to_threshold, atoms_left_at_target, condensate_fraction, condensate_radii,
            thermal_radii, peak_density, mean_density, pair_density, triple_density, energy_per_atom,
            elastic_collision_rate, loss_heating_rate, classical_density_error, classical_energy_error,
            fitted_temperature_error,
        )
    }
)  # fmt: skip
"""What takes the place of a function of the same name in a real trap."""
