"""Steps of what a condensate is by itself, from weak to strong interaction, and of thresholds beyond the ideal one.

See `physics.condensate` and `physics.variational` for the two shapes between which it stands.
"""

from __future__ import annotations

import math

from app.explanations import functions, inputs
from app.explanations.collisions import known_length
from app.explanations.degeneracy import condensate_atoms
from app.explanations.functions import Defined
from app.explanations.scales import angular_frequencies, mean_angular_frequency, oscillator_length
from app.explanations.sheet import Axes, Sheet, once
from app.explanations.terms import ALL, NOTHING, PI, THIRD, THREE_HALVES, Binding, Leaf, Number, Power, Term, root, term
from physics.condensate import COLLAPSE, Condensate
from physics.thresholds import Thresholds

_TWO_FIFTHS = Number(0.4, "2/5", Binding.PRODUCT)
_HALF_THOMAS_FERMI = Number(25.0, "25")
_HALF_FLATTENED = Number(2.2, "2.2")


@once
def critical_temperature_exact_levels(sheet: Sheet) -> Leaf:
    h, k, N = inputs.h(sheet), inputs.k(sheet), inputs.atoms(sheet)
    t1, t2, t3 = (
        sheet.step(f"T{'₁₂₃'[axis]}", f"level spacing along axis {axis + 1}, as a temperature", h * f / k, "K")
        for axis, f in enumerate(inputs.frequencies(sheet))
    )
    unknown = Leaf("T_s", float(Thresholds(equilibrium=sheet.solved).exact_saturation), "K")
    excited = functions.EXCITED_ATOMS(NOTHING, t1 / unknown, t2 / unknown, t3 / unknown)
    meaning = "temperature at which the excited levels hold no more than N atoms, µ being at the ground level"
    return sheet.solve(unknown, meaning, excited, N, where=functions.EXCITED_ATOMS.definition)


# ---------------------------------------------------------------- the shape


@once
def interaction(sheet: Sheet) -> Leaf:
    formula = condensate_atoms(sheet) * known_length(sheet) / oscillator_length(sheet)
    value = _float(_condensate(sheet).interaction_parameter)
    return sheet.step("P", "interaction of the condensate, N₀ a/a_ho", formula, value=value)


def _condensate(sheet: Sheet) -> Condensate:
    return Condensate(equilibrium=sheet.solved)


def _float(value: object) -> float:
    return float(value)  # type: ignore[arg-type]


def _total(strength: float, *levels: float) -> float:
    widths = [strength / level + math.hypot(1.0, strength / level) for level in levels]
    return math.sqrt(2.0 * math.pi) * strength * math.sqrt(math.prod(widths))


GAUSSIAN = Defined("V", "V(I, l₁, l₂, l₃) = (2π)^(1/2) I (s₁ s₂ s₃)^(1/2), s_i = I/l_i + [1 + (I/l_i)²]^(1/2)", _total)


@once
def level_ratios(sheet: Sheet) -> Axes:
    mean = mean_angular_frequency(sheet)
    first, second, third = (
        sheet.step(f"l{'₁₂₃'[axis]}", f"angular frequency along axis {axis + 1} over the mean one", w / mean)
        for axis, w in enumerate(angular_frequencies(sheet))
    )
    return first, second, third


@once
def gaussian_interaction(sheet: Sheet) -> Leaf:
    P, levels = interaction(sheet), level_ratios(sheet)
    unknown = Leaf("I", _float(_condensate(sheet).gaussian.interaction))
    meaning = "interaction energy of an atom over ħω̄, in the Gaussian condensate of least energy"
    return sheet.solve(unknown, meaning, GAUSSIAN(unknown, *levels), P, where=GAUSSIAN.definition)


@once
def squared_widths(sheet: Sheet) -> Axes:
    strength = gaussian_interaction(sheet)
    first, second, third = (
        sheet.step(
            f"s{'₁₂₃'[axis]}", f"squared width of the Gaussian along axis {axis + 1}, over that of the ground level",
            _widened(strength / level),
        )
        for axis, level in enumerate(level_ratios(sheet))
    )  # fmt: skip
    return first, second, third


def _widened(ratio: Term) -> Term:
    return ratio + root(1 + ratio**2)


def _isotropic(ratio: Term) -> Term:
    """N0 a/aho of an isotropic trap with this interaction energy over its level spacing."""
    return root(2 * PI) * ratio * Power(_widened(ratio), THREE_HALVES)


@once
def weight(sheet: Sheet) -> Leaf:
    strength, (l1, l2, l3) = gaussian_interaction(sheet), level_ratios(sheet)
    value = _float(_condensate(sheet).thomas_fermi_weight)
    meaning = "weight of the Thomas-Fermi shape against the Gaussian"
    if strength.amount < 0.0:
        return sheet.step("w", f"{meaning}: none of attractive atoms", NOTHING, value=value)
    as_strong = "N₀ a/a_ho of an isotropic trap in which interaction is as strong"
    p = sheet.step("p", as_strong, _isotropic(3 * strength / (l1 + l2 + l3)))
    return sheet.step("w", meaning, p / (p + _HALF_THOMAS_FERMI), value=value)


@once
def thomas_fermi_potential(sheet: Sheet) -> Leaf:
    P, meaning = interaction(sheet), "chemical potential of a Thomas-Fermi condensate"
    if P.amount < 0.0:
        return sheet.nothing("µ_TF", f"{meaning}: none of attractive atoms", "J")
    formula = inputs.hbar(sheet) * mean_angular_frequency(sheet) * (15 * P) ** _TWO_FIFTHS / 2
    return sheet.step("µ_TF", meaning, formula, "J")


@once
def condensate_rms_radii(sheet: Sheet) -> Axes:
    m, w, mu = inputs.mass(sheet), weight(sheet), thomas_fermi_potential(sheet)
    hbar, widths = inputs.hbar(sheet), squared_widths(sheet)
    first, second, third = (
        root((1 - w) * hbar * s / (2 * m * omega) + 2 * w * mu / (7 * m * omega**2))
        for s, omega in zip(widths, angular_frequencies(sheet), strict=True)
    )
    return sheet.along("condensate_rms_radii", "x", "rms radius of the condensate", (first, second, third))


@once
def condensate_release_energy(sheet: Sheet) -> Leaf:
    hbar, w, mu = inputs.hbar(sheet), weight(sheet), thomas_fermi_potential(sheet)
    (w1, w2, w3), (s1, s2, s3) = angular_frequencies(sheet), squared_widths(sheet)
    kinetic = sheet.step(
        "E_kin", "kinetic energy of an atom in the Gaussian", hbar * (w1 / s1 + w2 / s2 + w3 / s3) / 4, "J"
    )
    repelled = sheet.step(
        "E_int", "its interaction energy", hbar * mean_angular_frequency(sheet) * gaussian_interaction(sheet), "J"
    )
    formula = (1 - w) * (kinetic + repelled) + 2 * w * mu / 7
    value = _float(_condensate(sheet).release_energy_per_atom)
    return sheet.step("E_rel/N₀", "kinetic and interaction energy of a condensed atom", formula, "J", value=value)


@once
def condensate_peak_density(sheet: Sheet) -> Leaf:
    strength = gaussian_interaction(sheet)
    gauss = sheet.step("k_G", "peak density times rms radii, per atom, of a Gaussian", 1 / (2 * PI) ** THREE_HALVES)
    parabola = sheet.step("k_TF", "the same of a Thomas-Fermi shape", 15 / (8 * PI * term(7) ** THREE_HALVES))
    product: Term = ALL
    for axis, level in enumerate(level_ratios(sheet)):
        number = "₁₂₃"[axis]
        if strength.amount < 0.0:
            flat = sheet.nothing(f"φ{number}", f"flattening along axis {axis + 1}: none of attractive atoms")
        else:
            meaning = f"N₀ a/a_ho of an isotropic trap in which interaction is as strong as along axis {axis + 1}"
            p = sheet.step(f"p{number}", meaning, _isotropic(strength / level))
            flat = sheet.step(f"φ{number}", f"flattening of the peak along axis {axis + 1}", p / (p + _HALF_FLATTENED))
        factor = (gauss - flat * (gauss - parabola)) ** THIRD
        product = factor if product is ALL else product * factor
    x1, x2, x3 = condensate_rms_radii(sheet)
    formula = condensate_atoms(sheet) * product / (x1 * x2 * x3)
    value = _float(_condensate(sheet).peak_density)
    return sheet.step("n₀", "density of the condensate at the centre", formula, "1/m^3", value=value)


@once
def healing_length(sheet: Sheet) -> Leaf:
    formula = 1 / root(8 * PI * condensate_peak_density(sheet) * known_length(sheet))
    value = _float(_condensate(sheet).healing_length)
    return sheet.step("ξ", "healing length at the centre", formula, "m", value=value)


# ---------------------------------------------------------------- limits of stability


@once
def collapse_atoms(sheet: Sheet) -> Leaf:
    formula = Number(COLLAPSE, f"{COLLAPSE:g}") * oscillator_length(sheet) / (-known_length(sheet))
    value = _float(_condensate(sheet).collapse_atoms)
    return sheet.step("N_collapse", "largest condensate of attractive atoms", formula, value=value)


@once
def dipolar_ratio(sheet: Sheet) -> Leaf:
    dipoles = inputs.dipolar_length(sheet)
    if dipoles is None:
        raise ValueError("a dipolar ratio needs dipoles")
    value = _float(_condensate(sheet).dipolar_ratio)
    return sheet.step("a_dd/a", "dipolar over scattering length", dipoles / known_length(sheet), value=value)
