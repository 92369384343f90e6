"""Elastic collisions: how large atoms are to one another, how often they meet, and what that means for the cloud."""

from __future__ import annotations

from app.explanations import functions, inputs
from app.explanations.densities import thermal_density
from app.explanations.scales import angular_frequencies
from app.explanations.sheet import Axes, Sheet, once
from app.explanations.sizes import defined, thermal_radii
from app.explanations.terms import NOTHING, PI, Leaf, Number, Term, root
from physics.collisions import RETHERMALISATION_COLLISIONS

_COLLISIONS = Number(RETHERMALISATION_COLLISIONS, f"{RETHERMALISATION_COLLISIONS:g}")


def known_length(sheet: Sheet) -> Leaf:
    """a, where an answer is not given without."""
    a = inputs.scattering_length(sheet)
    if a is None:
        raise ValueError("this quantity needs a scattering length")
    return a


@once
def low_energy_cross_section(sheet: Sheet) -> Leaf:
    a, s = known_length(sheet), inputs.spin_states(sheet)
    meaning = "cross-section of slow atoms, summed over the partners in all spin states"
    formula = 8 * PI * a**2 + 4 * PI * (s - 1) * a**2 if sheet.bosons else 4 * PI * (s - 1) * a**2
    return sheet.step("σ₀", meaning, formula, "m^2")


def _s_waves(sheet: Sheet) -> Term:
    slow, a, m = low_energy_cross_section(sheet), known_length(sheet), inputs.mass(sheet)
    kT = inputs.k(sheet) * inputs.temperature(sheet)
    K = sheet.step("K", "(wavenumber times a)², at the energy kT", m * kT * a**2 / inputs.hbar(sheet) ** 2)
    meaning = "what the unitarity limit leaves of σ₀, averaged over the thermal speeds"
    return slow * defined(sheet, "c", meaning, functions.SPEED_AVERAGE, K)


@once
def collision_cross_section(sheet: Sheet) -> Leaf:
    s, dipoles = inputs.spin_states(sheet), inputs.dipolar_length(sheet)
    meaning = "cross-section of an atom with its partners in all spin states"
    if not sheet.bosons and s.amount == 1.0 and dipoles is None:
        return sheet.step("σ", "cross-section: fermions of one spin state do not collide", NOTHING, "m^2")
    total: Term = NOTHING if not sheet.bosons and s.amount == 1.0 else _s_waves(sheet)
    if dipoles is not None:
        of_dipoles = 32 * PI * (3 * dipoles / 2) ** 2 / (45 if sheet.bosons else 15)
        total = of_dipoles if total is NOTHING else total + of_dipoles
    return sheet.step("σ", meaning, total, "m^2", value=sheet.number("collision_cross_section"))


@once
def mean_speed(sheet: Sheet) -> Leaf:
    kT, m = inputs.k(sheet) * inputs.temperature(sheet), inputs.mass(sheet)
    return sheet.step("v̄", "mean thermal speed", root(8 * kT / (PI * m)), "m/s")


@once
def elastic_collision_rate(sheet: Sheet) -> Leaf:
    formula = thermal_density(sheet) * collision_cross_section(sheet) * mean_speed(sheet) / 2
    meaning = "elastic collisions of an atom, mean over the cloud"
    return sheet.step("Γ", meaning, formula, "1/s", value=sheet.number("elastic_collision_rate"))


@once
def peak_collision_rate(sheet: Sheet) -> Leaf:
    formula = root(2) * thermal_density(sheet) * collision_cross_section(sheet) * mean_speed(sheet)
    meaning = "elastic collisions of an atom where thermal atoms are densest"
    return sheet.step("Γ(0)", meaning, formula, "1/s", value=sheet.number("peak_collision_rate"))


@once
def mean_free_path(sheet: Sheet) -> Leaf:
    formula = 1 / (root(2) * thermal_density(sheet) * collision_cross_section(sheet))
    meaning = "mean free path where the thermal density is largest"
    return sheet.step("ℓ", meaning, formula, "m", value=sheet.number("mean_free_path"))


@once
def rethermalisation_time(sheet: Sheet) -> Leaf:
    meaning = f"time of {RETHERMALISATION_COLLISIONS:g} collisions of an atom"
    formula = _COLLISIONS / elastic_collision_rate(sheet)
    return sheet.step("τ_th", meaning, formula, "s", value=sheet.number("rethermalisation_time"))


@once
def hydrodynamic_ratio(sheet: Sheet) -> Leaf:
    fastest = max(angular_frequencies(sheet), key=lambda w: w.amount)
    formula = elastic_collision_rate(sheet) / fastest
    meaning = "collisions of an atom over the highest angular trap frequency"
    return sheet.step("Γ/ω_max", meaning, formula, value=sheet.number("hydrodynamic_ratio"))


@once
def free_path_ratios(sheet: Sheet) -> Axes:
    path, (s1, s2, s3) = mean_free_path(sheet), thermal_radii(sheet)
    meaning = "mean free path over the thermal radius"
    return sheet.along("free_path_ratios", "ℓ/σ", meaning, (path / s1, path / s2, path / s3), unit="1")
