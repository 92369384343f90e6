"""How fast atoms are lost and heated: rate constants, the densities that they meet, lifetimes."""

from __future__ import annotations

from app.explanations import functions, hartree_fock, inputs
from app.explanations.collisions import elastic_collision_rate, known_length, rethermalisation_time
from app.explanations.degeneracy import (
    condensate_fraction,
    coupling,
    density_scale,
    ground_level_density,
    ground_level_distance,
    height,
    local_log_fugacity,
    trapped_log_fugacity,
)
from app.explanations.densities import ideal_condensate_density, thermal_density
from app.explanations.scales import classical_phase_space_density, spacings, thermal_wavelength
from app.explanations.sheet import Regime, Sheet, once
from app.explanations.sizes import defined
from app.explanations.terms import FIVE_HALVES, PI, Leaf, Term, root
from physics.loss_integrals import two_and_three_body_densities

# ---------------------------------------------------------------- densities that losses meet

_PAIRS = "density that two-body losses meet, ∫ (n_c²/2 + 2 n_c n_th + n_th²) d³r/N"
_TRIPLES = "density squared that three-body losses meet, ∫ (n_c³/6 + (3/2) n_c² n_th + 3 n_c n_th² + n_th³) d³r/N"


@once
def pair_density(sheet: Sheet) -> Leaf:
    value = float(two_and_three_body_densities(sheet.solved)[0])
    match sheet.regime:
        case Regime.OTHER:
            return sheet.unexplained("⟨n⟩", _PAIRS, value, "1/m^3")
        case Regime.HARTREE_FOCK:
            formula: Term = hartree_fock.pair_density(sheet)
        case Regime.EXACT_LEVELS:
            L = defined(sheet, "L₂", "this integral, over n₁", functions.LEVEL_PAIRS, *_levels(sheet))
            formula = L * ground_level_density(sheet) / inputs.atoms(sheet)
        case Regime.CONDENSED_SEMI_IDEAL:
            x, B = height(sheet), density_scale(sheet)
            mixed = defined(sheet, "F_C", "overlap of thermal atoms and condensate", functions.DENSITY_PRODUCT, x)
            alike = defined(sheet, "F_2", "thermal atoms among themselves", functions.DENSITY_SQUARED, x)
            meaning = "condensate with itself, half of (4/7) of its peak density an atom"
            pure = sheet.step("F_0", meaning, 2 * B * x * coupling(sheet) * x**FIVE_HALVES / 7)
            formula = (pure + 2 * B * mixed + alike) / _volume(sheet)
        case regime:
            function = functions.overlap(sheet.statistics)
            J = defined(sheet, "J", "∫ (n_th λ³)² over the trap", function, local_log_fugacity(sheet))
            formula = J / _volume(sheet)
            if regime is Regime.CONDENSED_IDEAL:
                among = sheet.step("⟨n⟩_th", "thermal atoms among themselves", formula, "1/m^3")
                n0, n = ideal_condensate_density(sheet), thermal_density(sheet)
                formula = among + condensate_fraction(sheet) * (n0 / (2 * root(8)) + 2 * n)
    return sheet.step("⟨n⟩", _PAIRS, formula, "1/m^3", value=value)


@once
def triple_density(sheet: Sheet) -> Leaf:
    value = float(two_and_three_body_densities(sheet.solved)[1])
    match sheet.regime:
        case Regime.OTHER:
            return sheet.unexplained("⟨n²⟩", _TRIPLES, value, "1/m^6")
        case Regime.HARTREE_FOCK:
            formula: Term = hartree_fock.triple_density(sheet)
        case Regime.EXACT_LEVELS:
            L = defined(sheet, "L₃", "this integral, over n₁²", functions.LEVEL_TRIPLES, *_levels(sheet))
            formula = L * ground_level_density(sheet) ** 2 / inputs.atoms(sheet)
        case Regime.CONDENSED_SEMI_IDEAL:
            x, B = height(sheet), density_scale(sheet)
            two = defined(sheet, "F_CC", "two condensed atoms and a thermal one", functions.DENSITY_PRODUCT_CC, x)
            one = defined(sheet, "F_C2", "a condensed atom and two thermal ones", functions.DENSITY_PRODUCT_C2, x)
            none = defined(sheet, "F_3", "three thermal atoms", functions.DENSITY_CUBED, x)
            meaning = "three condensed atoms, a sixth of (8/21) of the squared peak density an atom"
            pure = sheet.step("F_00", meaning, 4 * B**2 * x**2 * coupling(sheet) * x**FIVE_HALVES / 63)
            total = pure + 3 * B**2 * two / 2 + 3 * B * one + none
            formula = total / (_volume(sheet) * thermal_wavelength(sheet) ** 3)
        case regime:
            function = functions.triple_overlap(sheet.statistics)
            J = defined(sheet, "J₃", "∫ (n_th λ³)³ over the trap", function, local_log_fugacity(sheet))
            formula = J / (_volume(sheet) * thermal_wavelength(sheet) ** 3)
            if regime is Regime.CONDENSED_IDEAL:
                among = sheet.step("⟨n²⟩_th", "thermal atoms among themselves", formula, "1/m^6")
                n0, n = ideal_condensate_density(sheet), thermal_density(sheet)
                mixed = n0**2 / (6 * root(27)) + 3 * n0 * n / (2 * root(8)) + 3 * n**2
                formula = among + condensate_fraction(sheet) * mixed
    return sheet.step("⟨n²⟩", _TRIPLES, formula, "1/m^6", value=value)


def _volume(sheet: Sheet) -> Term:
    return classical_phase_space_density(sheet) * thermal_wavelength(sheet) ** 3


def _levels(sheet: Sheet) -> tuple[Leaf, ...]:
    return (ground_level_distance(sheet), *spacings(sheet))


# ---------------------------------------------------------------- lifetimes


@once
def background_lifetime(sheet: Sheet) -> Leaf:
    given = inputs.loss(sheet, "background_lifetime")
    value = sheet.number("background_lifetime")
    return sheet.step("τ₁", "lifetime by collisions with the background gas", given, "s", value=value)


@once
def two_body_lifetime(sheet: Sheet) -> Leaf:
    formula = 1 / (inputs.loss(sheet, "two_body") * pair_density(sheet))
    return sheet.step("τ₂", "two-body lifetime", formula, "s", value=sheet.number("two_body_lifetime"))


@once
def three_body_lifetime(sheet: Sheet) -> Leaf:
    formula = 1 / (inputs.loss(sheet, "three_body") * triple_density(sheet))
    return sheet.step("τ₃", "three-body lifetime", formula, "s", value=sheet.number("three_body_lifetime"))


def _lifetimes(sheet: Sheet) -> list[Leaf]:
    """Those that are known."""
    losses = sheet.answer.losses.losses
    known = {
        background_lifetime: losses.background_lifetime,
        two_body_lifetime: losses.two_body,
        three_body_lifetime: losses.three_body,
        spin_flip_lifetime: losses.zero_force,
    }
    return [make(sheet) for make, value in known.items() if value is not None]


@once
def spin_flip_lifetime(sheet: Sheet) -> Leaf:
    chi = inputs.flip_coefficient(sheet)
    kT = inputs.k(sheet) * inputs.temperature(sheet)
    formula = inputs.mass(sheet) * kT**2 / (chi * inputs.hbar(sheet) * inputs.zero_force(sheet) ** 2)
    meaning = "lifetime by spin flips at the zero of the field"
    return sheet.step("τ_flip", meaning, formula, "s", value=sheet.number("spin_flip_lifetime"))


@once
def total_lifetime(sheet: Sheet) -> Leaf:
    first, *others = _lifetimes(sheet)
    rate: Term = 1 / first
    for other in others:
        rate = rate + 1 / other
    formula = 1 / rate if others else first
    return sheet.step("τ", "lifetime by all known losses", formula, "s", value=sheet.number("total_lifetime"))


@once
def good_to_bad_ratio(sheet: Sheet) -> Leaf:
    formula = elastic_collision_rate(sheet) * total_lifetime(sheet)
    meaning = "elastic collisions of an atom in its lifetime"
    return sheet.step("R", meaning, formula, value=sheet.number("good_to_bad_ratio"))


@once
def loss_per_rethermalisation(sheet: Sheet) -> Leaf:
    formula = rethermalisation_time(sheet) / total_lifetime(sheet)
    meaning = "share of the atoms lost in a rethermalisation time"
    return sheet.step("τ_th/τ", meaning, formula, value=sheet.number("loss_per_rethermalisation"))


# ---------------------------------------------------------------- heating


@once
def loss_heating_rate(sheet: Sheet) -> Leaf:
    ln_z, statistics = trapped_log_fugacity(sheet), sheet.statistics
    g2, g3, g4 = (functions.polylog(statistics, order, ln_z) for order in (2.0, 3.0, 4.0))
    where = functions.definition(statistics)
    another = sheet.step("e₊", "energy that one more atom brings at this T, over kT", 3 * g3 / g2, where=where)
    heat = sheet.step("C", "heat capacity of an atom, over k", 12 * g4 / g3 - 9 * g3 / g2, where=where)
    losses, parts = sheet.answer.losses.losses, []
    if losses.background_lifetime is not None:
        mean = sheet.step("e₁", "mean energy of an atom, over kT", 3 * g4 / g3, where=where)
        parts.append((another - mean) / background_lifetime(sheet))
    if losses.two_body is not None:
        energy = functions.lost_energy(statistics, 2)
        two = defined(sheet, "e₂", "mean energy that an atom lost to two-body collisions takes, over kT", energy, ln_z)
        parts.append((another - two) / two_body_lifetime(sheet))
    if losses.three_body is not None:
        energy = functions.lost_energy(statistics, 3)
        three = defined(sheet, "e₃", "the same of three-body collisions", energy, ln_z)
        parts.append((another - three) / three_body_lifetime(sheet))
    total = parts[0]
    for part in parts[1:]:
        total = total + part
    formula = inputs.temperature(sheet) / heat * total
    meaning = "heating by loss: what lost atoms leave behind"
    return sheet.step("Ṫ_loss", meaning, formula, "K/s", value=sheet.number("loss_heating_rate"))


@once
def scattering_rate(sheet: Sheet) -> Leaf:
    (_, total), *others = inputs.scattering(sheet)
    rate: Term = total
    for _, photons in others:
        rate = rate + photons
    return sheet.step("Γ_sc", "photons scattered", rate, "1/s", value=sheet.number("scattering_rate"))


@once
def light_heating_rate(sheet: Sheet) -> Leaf:
    m, h, k = inputs.mass(sheet), inputs.h(sheet), inputs.k(sheet)
    power: Term | None = None
    for place, (wavelength, photons) in enumerate(inputs.scattering(sheet), start=1):
        mark = str(place).translate(inputs.LOWERED)
        recoil = sheet.step(
            f"E{mark}", f"recoil energy of a photon, wavelength {mark}", h**2 / (2 * m * wavelength**2), "J"
        )
        part = 2 * recoil * photons
        power = part if power is None else power + part
    assert power is not None  # there is light, or there would be no value
    meaning = "heating by the trap's light, where an atom holds 3 kT"
    return sheet.step("Ṫ_light", meaning, power / (3 * k), "K/s", value=sheet.number("light_heating_rate"))


@once
def heating_rate(sheet: Sheet) -> Leaf:
    losses, parts = sheet.answer.losses.losses, []
    if losses.heating is not None:
        parts.append(inputs.loss(sheet, "heating"))
    elif losses.light_heating is not None:
        parts.append(light_heating_rate(sheet))
    if losses.intensity_noise is not None:
        f1, f2, f3 = inputs.frequencies(sheet)
        S, T = inputs.loss(sheet, "intensity_noise"), inputs.temperature(sheet)
        squares = [f1**2, f2**2, f3**2]
        for place, share in enumerate(inputs.light_shares(sheet)):
            squares[place] = squares[place] * share**2
        formula = T * PI**2 * S * (squares[0] + squares[1] + squares[2]) / 3
        parts.append(sheet.step("Ṫ_noise", "heating by noise of the light's intensity", formula, "K/s"))
    if losses.pointing_noise is not None:
        f1, f2, f3 = inputs.frequencies(sheet)
        S, m, k = inputs.loss(sheet, "pointing_noise"), inputs.mass(sheet), inputs.k(sheet)
        formula = 4 * PI**4 * m * S * (f1**4 + f2**4 + f3**4) / (3 * k)
        parts.append(sheet.step("Ṫ_pointing", "heating by a trap that shakes", formula, "K/s"))
    if sheet.number("loss_heating_rate") == sheet.number("loss_heating_rate"):
        parts.append(loss_heating_rate(sheet))
    total: Term = parts[0]
    for part in parts[1:]:
        total = total + part
    return sheet.step("dT/dt", "heating by all that is known", total, "K/s", value=sheet.number("heating_rate"))


# ---------------------------------------------------------------- bounds


@once
def three_body_ceiling(sheet: Sheet) -> Leaf:
    m, hbar = inputs.mass(sheet), inputs.hbar(sheet)
    kT = inputs.k(sheet) * inputs.temperature(sheet)
    scaling = sheet.step(
        "K_a", "most that K₃ can be at this scattering length", 201 * hbar * known_length(sheet) ** 4 / m, "m^6/s"
    )
    unitary = sheet.step(
        "K_T", "most that it can be at this temperature", 36 * root(3) * PI**2 * hbar**5 / (m**3 * kT**2), "m^6/s"
    )
    if scaling.amount <= unitary.amount:
        sheet.case("the scattering length sets the limit", scaling, "≤", unitary)
        lower = scaling
    else:
        sheet.case("the temperature sets the limit", scaling, ">", unitary)
        lower = unitary
    return sheet.step("K₃ max", "the lower of the two", lower, "m^6/s", value=sheet.number("three_body_ceiling"))
