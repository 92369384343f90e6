"""The functions of the models as terms, each with the sentence that defines it.

`Defined` functions have no closed form; their definitions stand beside the step that uses them, so that a reader can
put them into a quadrature.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from app.explanations.terms import Call, Term, exp
from physics import equation_of_state, harmonic_integrals, semi_ideal_integrals
from physics.checks import as_floats
from physics.collisions import thermal_cross_section_factor
from physics.constants import atomic_mass, boltzmann, reduced_planck
from physics.loss_integrals import energies_of_lost_atoms
from physics.oscillator_levels import COARSE_ORDER, OscillatorLevels, squared_density
from physics.particles import Statistics
from physics.statistics import bose, fermi

_ORDERS = {0.5: "1/2", 1.5: "3/2", 2.0: "2", 2.5: "5/2", 3.0: "3", 4.0: "4"}
_PRINTED = {"2": "₂", "3": "₃", "4": "₄"}

BOSE_FUNCTION = "g_s(z) = Σ_j z^j/j^s, the Bose function"
FERMI_FUNCTION = "f_s(z) = (1/Γ(s)) ∫ t^(s−1)/(exp(t)/z + 1) dt over t > 0, the Fermi function"


def polylog_name(statistics: Statistics, order: float) -> str:
    """The function in print: "g₃", "f_3/2"."""
    order_text = _ORDERS[order]
    letter = "g" if statistics is Statistics.BOSE else "f"
    return letter + (_PRINTED.get(order_text) or f"_{order_text}")


def polylog(statistics: Statistics, order: float, log_z: Term) -> Term:
    """g_s or f_s of z = exp(ln z), worked out from ln z."""

    def function(log_z: float) -> float:
        return float(bose(order, -log_z) if statistics is Statistics.BOSE else fermi(order, log_z))

    return Call(polylog_name(statistics, order), function, (log_z,), shown=(exp(log_z),))


def definition(statistics: Statistics) -> str:
    """What the function of these statistics is."""
    return BOSE_FUNCTION if statistics is Statistics.BOSE else FERMI_FUNCTION


@dataclass(frozen=True)
class Defined:
    """A function given by a sum or an integral."""

    name: str
    definition: str
    function: Callable[..., float]

    def __call__(self, *arguments: Term) -> Term:
        return Call(self.name, self.function, arguments)


def _of_height(function: Callable[[np.ndarray], np.ndarray]) -> Callable[[float], float]:
    return lambda x: float(function(np.array([x]))[0])


_SHELL = "du over u > 0, with d(u) = g_3/2(exp(−|u − x|))"
THERMAL_NUMBER = Defined("F", f"F(x) = (2/√π) ∫ √u d(u) {_SHELL}", _of_height(semi_ideal_integrals.thermal_number))
TRAP_ENERGY = Defined("F_V", f"F_V(x) = (2/√π) ∫ √u u d(u) {_SHELL}", _of_height(semi_ideal_integrals.trap_energy))
LIFTED_ENERGY = Defined(
    "F_L", f"F_L(x) = (2/√π) ∫ √u |u − x| d(u) {_SHELL}", _of_height(semi_ideal_integrals.lifted_energy)
)
KINETIC_ENERGY = Defined(
    "F_K",
    "F_K(x) = (3/√π) ∫ √u g_5/2(exp(−|u − x|)) du over u > 0",
    _of_height(semi_ideal_integrals.kinetic_energy),
)
DENSITY_SQUARED = Defined(
    "F_2", f"F_2(x) = (2/√π) ∫ √u d(u)² {_SHELL}", _of_height(semi_ideal_integrals.density_squared)
)
DENSITY_PRODUCT = Defined(
    "F_C",
    "F_C(x) = (2/√π) ∫ √u (x − u) d(u) du over 0 < u < x, with d(u) = g_3/2(exp(−|u − x|))",
    _of_height(semi_ideal_integrals.density_product),
)
BOSE_OVERLAP = Defined(
    "J",
    "J(ln z) = (2/√π) ∫ √u g_3/2(z exp(−u))² du over u > 0",
    lambda log_z: float(harmonic_integrals.bose_overlap(0.0 - log_z)),
)
FERMI_OVERLAP = Defined(
    "J",
    "J(ln z) = (2/√π) ∫ √u f_3/2(z exp(−u))² du over u > 0",
    lambda log_z: float(harmonic_integrals.fermi_overlap(log_z)),
)
DENSITY_PRODUCT_CC = Defined(
    "F_CC",
    "F_CC(x) = (2/√π) ∫ √u (x − u)² d(u) du over 0 < u < x, with d(u) = g_3/2(exp(−|u − x|))",
    lambda x: float(semi_ideal_integrals.triple_products(np.array([x]))[0, 0]),
)
DENSITY_PRODUCT_C2 = Defined(
    "F_C2",
    "F_C2(x) = (2/√π) ∫ √u (x − u) d(u)² du over 0 < u < x, with d(u) = g_3/2(exp(−|u − x|))",
    lambda x: float(semi_ideal_integrals.triple_products(np.array([x]))[1, 0]),
)
DENSITY_CUBED = Defined(
    "F_3",
    f"F_3(x) = (2/√π) ∫ √u d(u)³ {_SHELL}",
    lambda x: float(semi_ideal_integrals.triple_products(np.array([x]))[2, 0]),
)


def overlap(statistics: Statistics) -> Defined:
    return BOSE_OVERLAP if statistics is Statistics.BOSE else FERMI_OVERLAP


def triple_overlap(statistics: Statistics) -> Defined:
    """<n^3> in units of lambda^-9 over the trap."""
    name = polylog_name(statistics, 1.5)

    def function(log_z: float) -> float:
        if statistics is Statistics.BOSE:
            return float(harmonic_integrals.bose_mean(0.0 - log_z, lambda u, deep: bose(1.5, deep) ** 3))
        return float(harmonic_integrals.fermi_mean(log_z, lambda u, local: fermi(1.5, local) ** 3))

    return Defined("J₃", f"J₃(ln z) = (2/√π) ∫ √u {name}(z exp(−u))³ du over u > 0", function)


def lost_energy(statistics: Statistics, atoms: int) -> Defined:
    """Mean energy of an atom that collisions of so many take from a thermal cloud, in kT."""
    density, pressure = polylog_name(statistics, 1.5), polylog_name(statistics, 2.5)
    power, name = {2: "", 3: "²"}[atoms], f"e_{atoms}"

    def function(log_z: float) -> float:
        X = bose(3.0, -log_z) if statistics is Statistics.BOSE else fermi(3.0, log_z)
        return float(energies_of_lost_atoms(statistics, as_floats(X))[atoms - 2])

    return Defined(
        name,
        f"{name}(ln z) = ∫ √u d(u){power} [(3/2) p(u) + u d(u)] du/∫ √u d(u){'²³'[atoms - 2]} du over u > 0, "
        f"with d(u) = {density}(z exp(−u)), p(u) = {pressure}(z exp(−u))",
        function,
    )


def _levels(*spacings: float) -> OscillatorLevels:
    return OscillatorLevels(np.array(spacings))


EXCITED_ATOMS = Defined(
    "S",
    "S(α, b₁, b₂, b₃) = Σ_j exp(−jα) {1/Π_i[1 − exp(−j b_i)] − 1}, j = 1, 2, ...",
    lambda alpha, *b: _levels(*b).excited_atoms(float(alpha)),
)
EXCITED_DENSITY = Defined(
    "Q",
    "Q(α, b₁, b₂, b₃) = Σ_j exp(−jα) {1/Π_i[1 − exp(−2j b_i)]^(1/2) − 1}, j = 1, 2, ...",
    lambda alpha, *b: float(_levels(*b).excited_density(float(alpha), np.zeros((3, 1)))[0]),
)
EXCITED_ENERGY = Defined(
    "W",
    "W(α, b, b′, b″) = b Σ_j exp(−jα) {(P_j − 1)/2 + P_j/[exp(j b) − 1]}, P_j = 1/{[1 − exp(−j b)] [1 − exp(−j b′)] "
    "[1 − exp(−j b″)]}, j = 1, 2, ...",
    lambda alpha, *b: float(_levels(*b).excited_energies(float(alpha))[0]),
)
SQUARED_DENSITY = Defined(
    "M",
    "M(α, b₁, b₂, b₃) = Σ_jl exp(−(j+l)α) Π_i {[1 − exp(−2j b_i)] [1 − exp(−2l b_i)] [tanh(j b_i/2) + "
    "tanh(l b_i/2)]}^(−1/2), j and l = 1, 2, ...",
    lambda alpha, *b: squared_density(np.array(b), float(alpha), 1.0 / float(np.expm1(alpha))),
)


def _level_sum(alpha: float, spacings: tuple[float, ...], triples: bool) -> float:
    levels = OscillatorLevels(np.array(spacings), COARSE_ORDER)
    t, ground, weights = levels.densities_in_space(float(alpha))
    c = ground / float(np.expm1(alpha))
    if triples:
        return float(np.sum(weights * (c**3 / 6.0 + 1.5 * c * c * t + 3.0 * c * t * t + t**3)))
    return float(np.sum(weights * (0.5 * c * c + 2.0 * c * t + t * t)))


_IN_SPACE = (
    "a_i² = ħ/(m ω_i), ρ = Σ_i r_i²/a_i², c = exp(−ρ)/(exp(α) − 1), t = Σ_j exp(−jα) {Π_i [1 − exp(−2j b_i)]^(−1/2) "
    "exp[−(r_i/a_i)² tanh(j b_i/2)] − exp(−ρ)}, j = 1, 2, ..."
)
LEVEL_PAIRS = Defined(
    "L₂",
    f"L₂(α, b₁, b₂, b₃) = ∫ (c²/2 + 2 c t + t²) d³r/(π^(3/2) a₁ a₂ a₃), {_IN_SPACE}",
    lambda alpha, *b: _level_sum(alpha, b, triples=False),
)
LEVEL_TRIPLES = Defined(
    "L₃",
    f"L₃(α, b₁, b₂, b₃) = ∫ (c³/6 + (3/2) c² t + 3 c t² + t³) d³r/(π^(3/2) a₁ a₂ a₃), {_IN_SPACE}",
    lambda alpha, *b: _level_sum(alpha, b, triples=True),
)


def _speed_average(energy_ratio: float) -> float:
    # The length that makes m kT a^2/hbar^2 this number, for any mass and temperature.
    length = np.sqrt(energy_ratio * reduced_planck**2 / (atomic_mass * boltzmann))
    return float(thermal_cross_section_factor(atomic_mass, as_floats(1.0), as_floats(length)))


SPEED_AVERAGE = Defined("c", "c(K) = ∫ t exp(−t)/(1 + K t) dt over t > 0", _speed_average)


def fit_temperature(statistics: Statistics) -> Defined:
    """T_fit/T of a Gaussian fit."""
    image = polylog_name(statistics, 2.0)
    return Defined(
        "θ",
        f"θ(ln z) = 1/q, where q = T/T_fit makes q P(q)² largest, P(q) = ∫ {image}(z exp(−t)) exp(−q t) dt over t > 0: "
        f"least squares of a Gaussian against the image {image}(z exp(−r²/2))",
        lambda log_z: float(equation_of_state.gaussian_fit_temperature(statistics, log_z)),
    )
