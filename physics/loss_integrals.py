"""The densities that count for losses, averaged over the atoms of a trapped cloud, model by model.

With K2 and K3 of a thermal gas, two- and three-body losses take from each atom, in the mean,

    K2 <n>,     N <n>   = integral of (n_c^2 + 4 n_c n_t + 2 n_t^2)/2
    K3 <n^2>,   N <n^2> = integral of (n_c^3 + 9 n_c^2 n_t + 18 n_c n_t^2 + 6 n_t^3)/6,

n_c of the condensate, n_t of the thermal atoms: atoms of one state bunch, those of a condensate do not [1]. A classical
cloud has <n> = n(0)/2^(3/2), <n^2> = n(0)^2/3^(3/2); a Thomas-Fermi condensate alone (4/7) n_c(0)/2, (8/21) n_c(0)^2/6.

Reference
---------
[1] J. Soeding et al., Appl. Phys. B 69, 257 (1999), appendix. Recalled.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from physics import semi_ideal_integrals
from physics.checks import Floats
from physics.equation_of_state import trapped_log_fugacity
from physics.equilibria import Equilibrium
from physics.exact_levels import ExactLevels, ground_distance
from physics.harmonic_integrals import bose_mean, fermi_mean
from physics.hartree_fock import HartreeFock
from physics.ideal_bose import IdealBose
from physics.ideal_fermi import IdealFermi
from physics.oscillator_levels import COARSE_ORDER, OscillatorLevels
from physics.particles import Statistics
from physics.real_equilibria import RealEquilibrium
from physics.semi_ideal import SemiIdeal
from physics.statistics import bose, fermi, zeta

_MANY = 128  # values beyond which nodes through their range are cheaper

Ufunc = Callable[[Floats], Floats]


def _through_nodes(function: Callable[[Floats], Floats], values: Floats, straighten: Ufunc, back: Ufunc) -> Floats:
    """A positive function of one variable at any number of values, by way of its logarithm at Chebyshev nodes where
    there are many; relative error below 1e-8.

    `straighten` takes the variable to one in which the logarithm is smooth on the scale of 1, and `back` undoes it.
    """
    flat = np.asarray(values, dtype=np.float64).reshape(-1)
    if flat.size <= _MANY or not np.all(np.isfinite(flat)):
        found = function(flat)
    else:
        t = straighten(flat)
        low, high = float(t.min()), float(t.max())
        count = 16 + math.ceil(12.0 * (high - low))
        if high - low < 1e-9 or count > _MANY:
            found = function(flat) if count > _MANY else np.repeat(function(flat[:1]), flat.size, axis=-1)
        else:
            angle = math.pi * (np.arange(count) + 0.5) / count
            nodes = 0.5 * (low + high) + 0.5 * (high - low) * np.cos(angle)
            at_nodes = np.log(function(back(nodes)))
            coefficients = at_nodes @ np.cos(np.outer(angle, np.arange(count))) * (2.0 / count)
            coefficients[..., 0] *= 0.5
            place = (2.0 * t - low - high) / (high - low)
            found = np.exp(np.polynomial.chebyshev.chebval(place, np.moveaxis(coefficients, -1, 0)))
    return found.reshape((*found.shape[:-1], *np.shape(values)))


def energies_of_lost_atoms(statistics: Statistics, degeneracy: Floats) -> Floats:
    """(2, ...) Mean energy of an atom that two- and three-body collisions take from a thermal cloud, in kT. [1]

    9/4 and 2 in a classical cloud, against 3 of all its atoms: losses take the cold atoms of the centre.

    Parameters
    ----------
    degeneracy : X = N (hbar wbar/kT)^3. [1] NaN comes back above zeta(3) of bosons, which then have a condensate.
    """
    X = np.asarray(degeneracy, dtype=np.float64)
    log_z = trapped_log_fugacity(statistics, X)

    def products(n: Floats, pressure: Floats, u: Floats) -> Floats:
        # Where an atom is lost it has the local mean of the kinetic energy, 3/2 kT times g_5/2/g_3/2, and V = u kT.
        energy = 1.5 * pressure + u * n
        return np.stack([n * energy, n * n * energy, n * n, n**3])

    def bosons(alpha: Floats) -> Floats:
        means = bose_mean(alpha, lambda u, deep: products(bose(1.5, deep), bose(2.5, deep), u))
        ratios: Floats = means[:2] / means[2:]
        return ratios

    def fermions(log_z: Floats) -> Floats:
        means = fermi_mean(log_z, lambda u, local: products(fermi(1.5, local), fermi(2.5, local), u))
        ratios: Floats = means[:2] / means[2:]
        return ratios

    if statistics is Statistics.FERMI:
        return _through_nodes(fermions, log_z, np.arcsinh, np.sinh)
    return np.where(zeta(3.0) > X, _through_nodes(bosons, 0.0 - log_z, np.sqrt, np.square), np.nan)


def two_and_three_body_densities(equilibrium: Equilibrium) -> tuple[Floats, Floats]:
    """<n> [1/m^3] and <n^2> [1/m^6] as defined above.

    Raises
    ------
    TypeError : for a model that this module does not know.
    """
    solved = equilibrium
    with np.errstate(all="ignore"):
        if isinstance(solved, SemiIdeal):
            return _semi_ideal(solved)
        if isinstance(solved, IdealBose):
            return _ideal_bose(solved)
        if isinstance(solved, IdealFermi):
            return _ideal_fermi(solved)
        if isinstance(solved, ExactLevels):
            return _exact_levels(solved)
        if isinstance(solved, HartreeFock):
            return solved.pair_density, solved.triple_density
        if isinstance(solved, RealEquilibrium):
            return solved.pair_density, solved.triple_density
    raise TypeError(f"no mean density for losses is known for {type(solved).__name__}")


def _thermal_bosons(alpha: Floats) -> Floats:
    """(2, ...) <g_3/2^2>, <g_3/2^3>."""

    def powers(u: Floats, deep: Floats) -> Floats:
        g = bose(1.5, deep)
        return np.stack([g * g, g**3])

    return _through_nodes(lambda alpha: bose_mean(alpha, powers), alpha, np.sqrt, np.square)


def _ideal_bose(solved: IdealBose) -> tuple[Floats, Floats]:
    """The condensate, of the ground level, counts as small against the thermal cloud around it."""
    volume, X, fraction = solved._quantum_volume, solved._degeneracy, solved.condensate_fraction
    squared, cubed = _thermal_bosons(solved._alpha) / X
    centre, n0 = solved.peak_phase_space_density / volume, solved._condensate_density
    two: Floats = squared / volume + fraction * (0.5 * n0 / math.sqrt(8.0) + 2.0 * centre)
    pairs = n0**2 / math.sqrt(27.0) / 6.0 + 1.5 * n0 / math.sqrt(8.0) * centre + 3.0 * centre**2
    three: Floats = cubed / volume**2 + fraction * pairs
    return two, three


def _semi_ideal(solved: SemiIdeal) -> tuple[Floats, Floats]:
    above_two, above_three = _ideal_bose_thermal(solved)

    def below() -> Floats:
        x, scale, X = solved._height, solved._below(solved._density_scale), solved._below(solved._degeneracy)
        # scale = n_c lambda^3 over x - u; that of the condensate alone in closed form.
        once = 8.0 / (15.0 * math.sqrt(math.pi)) * x**2 * np.sqrt(x)
        pairs, alike, mixed, few, thermal = _semi_ideal_products(x)
        two = 0.5 * scale**2 * 4.0 / 7.0 * x * once + 2.0 * scale * pairs + alike
        three = scale**3 * 8.0 / 21.0 * x**2 * once / 6.0 + 1.5 * scale**2 * mixed + 3.0 * scale * few + thermal
        volume = solved._below(solved._quantum_volume)
        return np.stack([two / X / volume, three / X / volume**2])

    if not np.any(solved._condensed):
        return above_two, above_three
    found = below()
    return solved._merged(above_two, lambda: found[0]), solved._merged(above_three, lambda: found[1])


def _semi_ideal_products(x: Floats) -> Floats:
    """(5, ...) <(x - u) d>, <d^2>, <(x - u)^2 d>, <(x - u) d^2>, <d^3> of d = n_thermal lambda^3."""

    def scale(x: Floats) -> Floats:
        # Those with a condensate vanish with it.
        heart = x**2 * np.sqrt(x)
        return np.stack([heart, np.ones_like(x), heart * x, heart, np.ones_like(x)])

    def scaled(x: Floats) -> Floats:
        pairs, alike = semi_ideal_integrals.density_product(x), semi_ideal_integrals.density_squared(x)
        products: Floats = np.concatenate([np.stack([pairs, alike]), semi_ideal_integrals.triple_products(x)])
        return products / scale(x)

    return scale(x) * _through_nodes(scaled, x, np.sqrt, np.square)


def _ideal_bose_thermal(solved: IdealBose) -> tuple[Floats, Floats]:
    """Thermal atoms of the ideal gas alone."""
    squared, cubed = _thermal_bosons(solved._alpha) / solved._degeneracy
    return squared / solved._quantum_volume, cubed / solved._quantum_volume**2


def _ideal_fermi(solved: IdealFermi) -> tuple[Floats, Floats]:
    def powers(u: Floats, local: Floats) -> Floats:
        f = fermi(1.5, local)
        return np.stack([f * f, f**3])

    means = _through_nodes(lambda log_z: fermi_mean(log_z, powers), solved._log_z, np.arcsinh, np.sinh)
    squared, cubed = means / solved._degeneracy
    return squared / solved._quantum_volume, cubed / solved._quantum_volume**2


def _exact_levels(solved: ExactLevels) -> tuple[Floats, Floats]:
    """The ground level is the condensate, though without a threshold the excited atoms near it are hardly thermal."""
    shape = solved.cloud.shape
    two, three = np.empty(shape), np.empty(shape)
    for index in np.ndindex(shape):
        ground = float(solved._cells[index][0])
        two[index], three[index] = _level_densities(solved.spacings[index], ground)
    unit = solved._ground_density / solved._atoms
    return two * unit, three * unit * solved._ground_density


def _level_densities(spacings: Floats, ground: float) -> tuple[float, float]:
    """Integrals for two- and three-body losses, in units of the peak density of one ground-level atom. [1]"""
    levels = OscillatorLevels(spacings, COARSE_ORDER)
    excited, condensate, weights = levels.densities_in_space(float(ground_distance(ground)))
    c, t = ground * condensate, excited
    two = float(np.sum(weights * (0.5 * c * c + 2.0 * c * t + t * t)))
    three = float(np.sum(weights * (c**3 / 6.0 + 1.5 * c * c * t + 3.0 * c * t * t + t**3)))
    return two, three
