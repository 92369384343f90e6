"""Fermions: the filled sea, and the estimates for two spin states that interact."""

from __future__ import annotations

from app.explanations import inputs
from app.explanations.collisions import known_length
from app.explanations.scales import angular_frequencies, fermi_energy, fermi_temperature, fermi_wavenumber
from app.explanations.sheet import Axes, Sheet, once
from app.explanations.terms import PI, Leaf, Number, cube_root, exp, root
from physics.fermi_interactions import GORKOV, PAIRED, UNITARY, UNITARY_TC, WEAK, XI

_GORKOV_SOURCE = "Gorkov, Melik-Barkhudarov, Sov. Phys. JETP 13, 1018 (1961): (2/e)^(7/3) exp(0.57722)/π"
_KU = "Ku, Sommer, Cheuk, Zwierlein, Science 335, 563 (2012)"


@once
def fermi_radii(sheet: Sheet) -> Axes:
    w1, w2, w3 = angular_frequencies(sheet)
    reach = root(2 * fermi_energy(sheet) / inputs.mass(sheet))
    meaning = "radius of the cloud at T = 0, where V = EF,"
    return sheet.along("fermi_radii", "R_F", meaning, (reach / w1, reach / w2, reach / w3))


@once
def interaction_parameter(sheet: Sheet) -> Leaf:
    formula = 1 / (fermi_wavenumber(sheet) * known_length(sheet))
    value = sheet.number("interaction_parameter")
    return sheet.step("1/(kF a)", "how strong the interaction is; 0 at unitarity", formula, value=value)


def _limit(value: float) -> Leaf:
    return Leaf(f"{value:g}".replace("-", "−"), value)


def _regime(sheet: Sheet) -> str:
    """Which estimate holds, as a comparison on the sheet: weak, unitary or paired."""
    x = interaction_parameter(sheet)
    if x.amount < WEAK:
        sheet.case("weak attraction", x, "<", _limit(WEAK))
        return "weak"
    if abs(x.amount) <= UNITARY:
        sheet.case("at unitarity", Leaf("|1/(kF a)|", abs(x.amount)), "≤", _limit(UNITARY))
        return "unitary"
    sheet.case("repulsion of atoms, or pairs of them", x, ">", _limit(PAIRED))
    return "paired"


@once
def superfluid_temperature(sheet: Sheet) -> Leaf:
    TF, value, regime = fermi_temperature(sheet), sheet.number("superfluid_temperature"), _regime(sheet)
    match regime:
        case "weak":
            c = inputs.constant(sheet, "c_G", "coefficient of pairing by weak attraction", GORKOV, "1", _GORKOV_SOURCE)
            formula, meaning = c * TF * exp(PI * interaction_parameter(sheet) / 2), "superfluid below: weak attraction"
        case "unitary":
            formula, meaning = Number(UNITARY_TC, f"{UNITARY_TC:g}") * TF, "superfluid below, to about a tenth of it"
        case _:
            formula = TF / cube_root(6 * inputs.zeta_3(sheet))
            meaning = "superfluid below, where N ideal pairs condense in the same trap"
    return sheet.step("Tc", meaning, formula, "K", value=value)


@once
def interacting_chemical_potential(sheet: Sheet) -> Leaf:
    EF, value, regime = fermi_energy(sheet), sheet.number("interacting_chemical_potential"), _regime(sheet)
    if regime == "unitary":
        xi = inputs.constant(sheet, "ξ", "µ/EF of a uniform gas at unitarity and T = 0", XI, "1", _KU)
        return sheet.step("µ", "chemical potential at unitarity, T = 0, in a trap", root(xi) * EF, "J", value=value)
    c = sheet.step("c", "mean field of a filled sea, averaged over the trap", 512 / (315 * PI**2))
    formula = EF * (1 + c / interaction_parameter(sheet))
    return sheet.step("µ", "chemical potential at T = 0, to first order in kF a", formula, "J", value=value)


@once
def pair_binding_energy(sheet: Sheet) -> Leaf:
    formula = inputs.hbar(sheet) ** 2 / (inputs.mass(sheet) * known_length(sheet) ** 2)
    return sheet.step("E_b", "binding energy of a pair", formula, "J", value=sheet.number("pair_binding_energy"))
