"""Steps of the Hartree-Fock model: local densities explicit in β, the distance of µ from the lowest thermal level.

See `physics.hartree_fock_integrals`, whose sums over the trap are the functions here. The one number that is solved
for is β at the centre, α.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from app.explanations import inputs
from app.explanations.functions import BOSE_FUNCTION, Defined, polylog
from app.explanations.scales import angular_frequencies, classical_phase_space_density, thermal_wavelength
from app.explanations.sheet import Axes, Sheet, once
from app.explanations.terms import Leaf, Term, root
from physics.checks import Floats
from physics.hartree_fock_integrals import Edge, Shells, inner_shells, thermal_shells
from physics.particles import Statistics
from physics.statistics import bose

_THERMAL = "t = g_3/2(exp(−β)) and c = 0 at u = V/kT = β − α + 2 g [g_3/2(exp(−α)) − g_3/2(exp(−β))], β from α on"
_CONDENSED = (
    "t = g_3/2(exp(−β)) and, in the condensate, c = β/g at u = V/kT = α − β + 2 g [g_3/2(exp(−α)) − g_3/2(exp(−β))], β "
    "from α down to where 2 g g_1/2(exp(−β)) = 1 and α − β has become u_e; around it c = 0 at u = u_e + β − β_e + "
    "2 g [g_3/2(exp(−β_e)) − g_3/2(exp(−β))], β from β_e on, where 2 g g_3/2(exp(−β_e)) − β_e is what β + 2 g "
    "g_3/2(exp(−β)) is at the inner end"
)
_ATOMS = "H"
Density = Callable[[Shells], Floats]


def _sum(sheet: Sheet, name: str, integrand: str, density: Density) -> Defined:
    """<h> over the trap as a function of α and g; that of the atoms, which gives α, comes first and defines u, c, t."""
    condensed = _is_condensed(sheet)

    def function(alpha: float, g: float) -> float:
        centre, edge = np.array([alpha]), Edge.of(np.array([g]))
        if not condensed:
            shells = [thermal_shells(edge.repulsion, centre)]
        else:
            shells = [inner_shells(edge, centre), edge.outer_shells().lifted(edge.rise(centre))]
        return float(sum(part.total(density(part))[0] for part in shells))

    local = "the same u, c and t" if name != _ATOMS else _CONDENSED if condensed else _THERMAL
    return Defined(name, f"{name}(α, g) = (2/√π) ∫ √u {integrand} du over u > 0, with {local}", function)


def _is_condensed(sheet: Sheet) -> bool:
    return sheet.number("condensate_fraction") > 0.0


# ---------------------------------------------------------------- the state


@once
def repulsion(sheet: Sheet) -> Leaf:
    a = inputs.scattering_length(sheet)
    if a is None:
        raise ValueError("a Hartree-Fock cloud has a scattering length")
    return sheet.step(
        "g", "repulsion: n λ³ of thermal atoms lifts them by 2 g n λ³ kT", 2 * a / thermal_wavelength(sheet)
    )


@once
def condensed(sheet: Sheet) -> None:
    """The comparison that says whether there is a condensate."""
    X, g = classical_phase_space_density(sheet), repulsion(sheet)

    def function(g: float) -> float:
        outer = Edge.of(np.array([g])).outer_shells()
        return float(outer.total(outer.thermal)[0])

    most = Defined(
        "H_e",
        "H_e(g) = (2/√π) ∫ √u g_3/2(exp(−β)) du over u = β − β_e + 2 g [g_3/2(exp(−β_e)) − g_3/2(exp(−β))], β from β_e "
        "on; β_e < β_i, 2 g g_3/2(exp(−β_e)) − β_e = 2 g g_3/2(exp(−β_i)) + β_i, 2 g g_1/2(exp(−β_i)) = 1",
        function,
    )
    X_e = sheet.step("X_e", "X of a cloud on the verge of a condensate", most(g), where=most.definition)
    if _is_condensed(sheet):
        sheet.case("more atoms than a cloud without a condensate holds", X, ">", X_e)
    else:
        sheet.case("a cloud without a condensate holds all atoms", X, "≤", X_e)


@once
def centre(sheet: Sheet) -> Leaf:
    """α."""
    condensed(sheet)
    g, X = repulsion(sheet), classical_phase_space_density(sheet)
    # mu/kT is 2 g t + α inside a condensate, 2 g t − α without one; n λ³ is t + α/g, or t: either way
    n = sheet.number("peak_density") * sheet.number("thermal_wavelength") ** 3
    unknown = Leaf("α", 2.0 * g.amount * n - sheet.number("log_fugacity"))
    atoms = _sum(sheet, _ATOMS, "(c + t)", lambda shells: shells.condensate + shells.thermal)
    meaning = "how far µ is from the lowest thermal level at the centre, over kT: N atoms, times (ħω̄/kT)³"
    return sheet.solve(unknown, meaning, atoms(unknown, g), X, where=atoms.definition)


def _thermal(sheet: Sheet, alpha: Term) -> Term:
    return polylog(Statistics.BOSE, 1.5, -alpha)


@once
def log_fugacity(sheet: Sheet) -> Leaf:
    g, alpha = repulsion(sheet), centre(sheet)
    field = 2 * g * _thermal(sheet, alpha)
    formula = field + alpha if _is_condensed(sheet) else field - alpha
    meaning = "log of the fugacity z: µ/kT, from the trap bottom"
    return sheet.step("ln z", meaning, formula, value=sheet.number("log_fugacity"), where=BOSE_FUNCTION)


@once
def edge(sheet: Sheet) -> tuple[Leaf, Leaf]:
    """β on the outer side of the edge of the condensate, and (mu - V)/kT there."""
    g = repulsion(sheet)
    found = Edge.of(np.array([g.amount]))
    inner, outer = Leaf("β_i", float(found.inside[0])), Leaf("β_e", float(found.outside[0]))
    one = Leaf("1", 1.0)
    meaning = "β inside the edge of the condensate, where it has its least µ − V"
    sheet.solve(inner, meaning, 2 * g * polylog(Statistics.BOSE, 0.5, -inner), one, where=BOSE_FUNCTION)
    y = sheet.step("y", "(µ − V)/kT at the edge", 2 * g * _thermal(sheet, inner) + inner, value=float(found.height[0]))
    sheet.solve(outer, "β outside the edge", 2 * g * _thermal(sheet, outer) - outer, y)
    return outer, y


@once
def peak_phase_space_density(sheet: Sheet) -> Leaf:
    value = sheet.number("peak_phase_space_density")
    if not _is_condensed(sheet):
        formula, meaning = _thermal(sheet, centre(sheet)), "n λ³ at the centre, where it is largest"
    else:
        condensed(sheet)
        beta, _ = edge(sheet)
        formula, meaning = _thermal(sheet, beta), "n λ³ of the thermal atoms at the edge of the condensate"
    return sheet.step("D", meaning, formula, value=value, where=BOSE_FUNCTION)


@once
def condensate_fraction(sheet: Sheet) -> Leaf:
    value, meaning = sheet.number("condensate_fraction"), "condensed fraction"
    if not _is_condensed(sheet):
        condensed(sheet)
        return sheet.nothing("N₀/N", meaning)
    atoms = _sum(sheet, "H_0", "c", lambda shells: shells.condensate)
    H0 = _value(sheet, "H_0", "condensed atoms, times (ħω̄/kT)³", atoms)
    return sheet.step("N₀/N", meaning, H0 / classical_phase_space_density(sheet), value=value)


def _value(sheet: Sheet, symbol: str, meaning: str, function: Defined) -> Leaf:
    return sheet.step(symbol, meaning, function(centre(sheet), repulsion(sheet)), where=function.definition)


# ---------------------------------------------------------------- densities


def _volume(sheet: Sheet) -> Term:
    return classical_phase_space_density(sheet) * thermal_wavelength(sheet) ** 3


@once
def peak_density(sheet: Sheet) -> Leaf:
    alpha, g = centre(sheet), repulsion(sheet)
    centre_density = _thermal(sheet, alpha) + alpha / g if _is_condensed(sheet) else _thermal(sheet, alpha)
    d = sheet.step("d", "n λ³ at the centre, condensate and thermal atoms", centre_density, where=BOSE_FUNCTION)
    formula = d / thermal_wavelength(sheet) ** 3
    return sheet.step("n(0)", "peak density of one spin state", formula, "1/m^3", value=sheet.number("peak_density"))


@once
def mean_density(sheet: Sheet) -> Leaf:
    squares = _sum(sheet, "H_N", "(c + t)²", lambda shells: (shells.condensate + shells.thermal) ** 2)
    formula = _value(sheet, "H_N", "∫ (n λ³)² over the trap", squares) / _volume(sheet)
    meaning = "density that an atom meets on average, ∫ n² d³r/N"
    return sheet.step("⟨n⟩", meaning, formula, "1/m^3", value=sheet.number("mean_density"))


@once
def pair_sum(sheet: Sheet) -> Leaf:
    def pairs(shells: Shells) -> Floats:
        c, t = shells.condensate, shells.thermal
        return c * c + 4.0 * c * t + 2.0 * t * t

    return _value(sheet, "H_2", "pairs of atoms; those of a condensate do not bunch",
                  _sum(sheet, "H_2", "(c² + 4 c t + 2 t²)", pairs))  # fmt: skip


def pair_density(sheet: Sheet) -> Term:
    return pair_sum(sheet) / (2 * _volume(sheet))


def triple_density(sheet: Sheet) -> Term:
    def triples(shells: Shells) -> Floats:
        c, t = shells.condensate, shells.thermal
        return c**3 + 9.0 * c * t * (c + 2.0 * t) + 6.0 * t**3

    function = _sum(sheet, "H_3", "(c³ + 9 c² t + 18 c t² + 6 t³)", triples)
    H3 = _value(sheet, "H_3", "triples of atoms, likewise", function)
    return H3 / (6 * _volume(sheet) * thermal_wavelength(sheet) ** 3)


# ---------------------------------------------------------------- sizes and energy


@once
def potential_share(sheet: Sheet) -> Leaf:
    """<V> of a thermal atom over (3/2) kT."""
    above = _sum(sheet, "H_V", "u t", lambda shells: shells.potential * shells.thermal)
    atoms = _sum(sheet, "H_T", "t", lambda shells: shells.thermal)
    HV = _value(sheet, "H_V", "potential energy of thermal atoms, / kT (kT/ħω̄)³", above)
    HT = _value(sheet, "H_T", "thermal atoms, times (ħω̄/kT)³", atoms)
    return sheet.step("q", "mean potential energy of a thermal atom, over (3/2) kT", 2 * HV / (3 * HT))


@once
def condensate_radii(sheet: Sheet) -> Axes:
    (_, y), ln_z, m = edge(sheet), log_fugacity(sheet), inputs.mass(sheet)
    kT = inputs.k(sheet) * inputs.temperature(sheet)
    w1, w2, w3 = angular_frequencies(sheet)
    reach = root(2 * kT * (ln_z - y) / m)
    meaning = "radius of the condensate, where µ − V has fallen to y kT,"
    return sheet.along("condensate_radii", "R", meaning, (reach / w1, reach / w2, reach / w3))


@once
def energy_per_atom(sheet: Sheet) -> Leaf:
    pressure = _sum(sheet, "H_P", "g_5/2(exp(−β))", lambda shells: np.asarray(bose(2.5, shells.alpha)))
    potential = _sum(sheet, "H_U", "u (c + t)", lambda shells: shells.potential * (shells.condensate + shells.thermal))
    HP = _value(sheet, "H_P", "pressure of thermal atoms, of which 3/2 is kinetic energy", pressure)
    HU = _value(sheet, "H_U", "potential energy of all atoms, / kT (kT/ħω̄)³", potential)
    total = 3 * HP / 2 + HU + repulsion(sheet) * pair_sum(sheet) / 2
    energy = sheet.step("ε", "energy of all atoms, likewise; the last part is their repulsion", total)
    formula = inputs.k(sheet) * inputs.temperature(sheet) * energy / classical_phase_space_density(sheet)
    meaning = "energy per atom, from the trap bottom"
    return sheet.step("E/N", meaning, formula, "J", value=sheet.number("energy_per_atom"))
