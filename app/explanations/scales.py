"""The scales of a cloud, which hold for every model: frequencies, lengths, X, and how far the threshold is."""

from __future__ import annotations

from app.explanations import inputs
from app.explanations.sheet import Axes, Sheet, once
from app.explanations.terms import ALL, PI, SIXTH, TWO_THIRDS, Leaf, cube_root, root


@once
def mean_frequency(sheet: Sheet) -> Leaf:
    f1, f2, f3 = inputs.frequencies(sheet)
    meaning = "mean trap frequency"
    return sheet.step("f̄", meaning, cube_root(f1 * f2 * f3), "Hz", value=sheet.number("mean_frequency"))


@once
def mean_angular_frequency(sheet: Sheet) -> Leaf:
    return sheet.step("ω̄", "the same as an angular frequency", 2 * PI * mean_frequency(sheet), "rad/s")


@once
def angular_frequencies(sheet: Sheet) -> Axes:
    first, second, third = (
        sheet.step(f"ω{number}", f"angular frequency along axis {axis}", 2 * PI * f, "rad/s")
        for axis, (number, f) in enumerate(zip("₁₂₃", inputs.frequencies(sheet), strict=True), start=1)
    )
    return first, second, third


@once
def spacings(sheet: Sheet) -> Axes:
    h, kT = inputs.h(sheet), inputs.k(sheet) * inputs.temperature(sheet)
    first, second, third = (
        sheet.step(f"b{number}", f"level spacing along axis {axis}, over kT", h * f / kT)
        for axis, (number, f) in enumerate(zip("₁₂₃", inputs.frequencies(sheet), strict=True), start=1)
    )
    return first, second, third


@once
def thermal_wavelength(sheet: Sheet) -> Leaf:
    m, T, h, k = inputs.mass(sheet), inputs.temperature(sheet), inputs.h(sheet), inputs.k(sheet)
    formula = h / root(2 * PI * m * k * T)
    return sheet.step("λ", "thermal wavelength", formula, "m", value=sheet.number("thermal_wavelength"))


@once
def oscillator_length(sheet: Sheet) -> Leaf:
    formula = root(inputs.hbar(sheet) / (inputs.mass(sheet) * mean_angular_frequency(sheet)))
    meaning = "oscillator length, the width of the ground level"
    return sheet.step("a_ho", meaning, formula, "m", value=sheet.number("oscillator_length"))


@once
def classical_phase_space_density(sheet: Sheet) -> Leaf:
    N, T, w = inputs.atoms(sheet), inputs.temperature(sheet), mean_angular_frequency(sheet)
    formula = N * (inputs.hbar(sheet) * w / (inputs.k(sheet) * T)) ** 3
    value = sheet.number("classical_phase_space_density")
    return sheet.step("X", "classical phase-space density", formula, value=value)


@once
def level_temperature(sheet: Sheet) -> Leaf:
    formula = inputs.hbar(sheet) * mean_angular_frequency(sheet) / inputs.k(sheet)
    return sheet.step("T₀", "mean level spacing as a temperature", formula, "K")


@once
def critical_temperature(sheet: Sheet) -> Leaf:
    N, spacing = inputs.atoms(sheet), level_temperature(sheet)
    formula = spacing * cube_root(N / inputs.zeta_3(sheet))
    value = sheet.number("critical_temperature")
    return sheet.step("Tc", "temperature at which the excited levels hold N atoms", formula, "K", value=value)


@once
def critical_temperature_shifted(sheet: Sheet) -> Leaf:
    N, Tc = inputs.atoms(sheet), critical_temperature(sheet)
    f1, f2, f3 = inputs.frequencies(sheet)
    mean = sheet.step("f_mean", "arithmetic mean of the trap frequencies", (f1 + f2 + f3) / 3, "Hz")
    c1 = sheet.step(
        "c₁",
        "coefficient of the finite-size shift",
        inputs.zeta_2(sheet) / (2 * inputs.zeta_3(sheet) ** TWO_THIRDS),
    )
    finite = sheet.step(
        "δ₁",
        "shift by the finite size of the levels",
        c1 * (mean / mean_frequency(sheet)) / cube_root(N),
        value=sheet.number("finite_size_shift"),
    )
    remaining = 1 - finite
    a = inputs.scattering_length(sheet)
    if a is not None:
        c2 = inputs.interaction_coefficient(sheet)
        remaining = remaining - sheet.step(
            "δ₂",
            "shift by interaction",
            c2 * (a / oscillator_length(sheet)) * N**SIXTH,
            value=sheet.number("interaction_shift"),
        )
    value = sheet.number("critical_temperature_shifted")
    if value != value:  # the first-order shifts add up to all of Tc
        return sheet.step("1 − δ₁ − δ₂" if a is not None else "1 − δ₁", "what the shifts leave of Tc", remaining)
    return sheet.step("Tc + δTc", "critical temperature with both shifts", Tc * remaining, "K", value=value)


@once
def fermi_temperature(sheet: Sheet) -> Leaf:
    formula = level_temperature(sheet) * cube_root(6 * inputs.atoms(sheet))
    value = sheet.number("fermi_temperature")
    return sheet.step("TF", "Fermi temperature: N atoms fill the levels up to k TF", formula, "K", value=value)


@once
def fermi_energy(sheet: Sheet) -> Leaf:
    formula = inputs.k(sheet) * fermi_temperature(sheet)
    return sheet.step("EF", "Fermi energy", formula, "J", value=sheet.number("fermi_energy"))


@once
def fermi_wavenumber(sheet: Sheet) -> Leaf:
    formula = root(2 * inputs.mass(sheet) * fermi_energy(sheet)) / inputs.hbar(sheet)
    meaning = "wavenumber of an atom of the Fermi energy"
    return sheet.step("kF", meaning, formula, "1/m", value=sheet.number("fermi_wavenumber"))


@once
def reduced_temperature(sheet: Sheet) -> Leaf:
    T, value = inputs.temperature(sheet), sheet.number("reduced_temperature")
    scale = critical_temperature(sheet) if sheet.bosons else fermi_temperature(sheet)
    return sheet.step("T/Tc" if sheet.bosons else "T/TF", "reduced temperature", T / scale, value=value)


@once
def harmonic_reduced_temperature(sheet: Sheet) -> Leaf:
    X, value = classical_phase_space_density(sheet), sheet.number("harmonic_reduced_temperature")
    symbol = "T/Tc harm." if sheet.bosons else "T/TF harm."
    ratio = cube_root(inputs.zeta_3(sheet) / X) if sheet.bosons else 1 / cube_root(6 * X)
    return sheet.step(symbol, "reduced temperature in the harmonic trap", ratio, value=value)


@once
def threshold_degeneracy(sheet: Sheet) -> Leaf:
    """X at the threshold."""
    if sheet.bosons:
        return inputs.zeta_3(sheet)
    t = inputs.fermi_threshold(sheet)
    return sheet.step("Xθ", "X at the threshold, where T/TF = t", 1 / (6 * t**3))


@once
def temperature_to_threshold(sheet: Sheet) -> Leaf:
    formula = cube_root(classical_phase_space_density(sheet) / threshold_degeneracy(sheet))
    meaning = "threshold temperature over T: X ~ 1/T³ at fixed N"
    return sheet.step("Tθ/T", meaning, formula, value=sheet.number("temperature_to_threshold"))


@once
def atoms_to_threshold(sheet: Sheet) -> Leaf:
    X = classical_phase_space_density(sheet)
    formula = threshold_degeneracy(sheet) / X
    meaning = "threshold atom number over N: X ~ N at fixed T"
    return sheet.step("Nθ/N", meaning, formula, value=sheet.number("atoms_to_threshold"))


@once
def atoms_left_at_target(sheet: Sheet) -> Leaf:
    X, at_threshold = classical_phase_space_density(sheet), threshold_degeneracy(sheet)
    value = sheet.number("atoms_left_at_target")
    if X.amount >= at_threshold.amount:
        sheet.case("the threshold is reached already", X, "≥", at_threshold)
        return sheet.step("N'/N", "share of atoms left: all", ALL, value=value)
    formula = (X / at_threshold) ** (1 / inputs.efficiency(sheet))
    meaning = "share of atoms left where X has grown to the threshold: X ~ N^(−γ)"
    return sheet.step("N'/N", meaning, formula, value=value)


@once
def truncation(sheet: Sheet) -> Leaf:
    formula = inputs.depth(sheet) / (inputs.k(sheet) * inputs.temperature(sheet))
    return sheet.step("η", "truncation parameter", formula, value=sheet.number("truncation"))
