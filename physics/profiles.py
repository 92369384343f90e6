"""Density of a trapped cloud along a trap axis, and its column density.

A model answers with the same formulas as for its other quantities: local density for ideal, semi-ideal and Hartree-Fock
gases, the propagator for exact levels. In local density an ideal condensate has no width of its own; it is given that
of the oscillator's ground level, a Gaussian. The classical profile is the Boltzmann cloud of the same N and T.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from physics import semi_ideal_integrals as integrals
from physics.checks import Floats
from physics.equilibria import Equilibrium
from physics.exact_fermions import ExactFermions
from physics.exact_levels import ExactLevels, ground_distance
from physics.hartree_fock import HartreeFock
from physics.hartree_fock_integrals import column_densities, local_densities
from physics.ideal_bose import IdealBose
from physics.ideal_fermi import IdealFermi
from physics.oscillator_levels import OscillatorLevels
from physics.semi_ideal import SemiIdeal
from physics.statistics import bose, fermi

_ROOT_PI = math.sqrt(math.pi)


@dataclass(frozen=True, kw_only=True, eq=False)
class Profile:
    """Densities of one spin state at given positions, [1/m^3], or column densities, [1/m^2].

    Attributes
    ----------
    positions : (points,). [m] From the centre.
    thermal, condensate, total, classical : (points,).
    """

    positions: Floats
    thermal: Floats
    condensate: Floats
    total: Floats
    classical: Floats


def density_profile(equilibrium: Equilibrium, axis: int, positions: ArrayLike) -> Profile:
    """Density along a trap axis through the centre. [1/m^3]

    Parameters
    ----------
    equilibrium : Equilibrium of a single cloud.
    axis : 0, 1 or 2.
    positions : (points,). [m] From the centre.

    Raises
    ------
    ValueError : for an array of clouds, or an axis that does not exist.
    """
    return _profile(equilibrium, axis, positions, None)


def column_density_profile(equilibrium: Equilibrium, axis: int, positions: ArrayLike, along: int) -> Profile:
    """Density summed along one axis, against the position on another, the third being 0. [1/m^2]

    Parameters
    ----------
    equilibrium : Equilibrium of a single cloud.
    axis : 0, 1 or 2. Of the positions.
    positions : (points,). [m] From the centre.
    along : 0, 1 or 2, not `axis`. The line of sight.

    Raises
    ------
    ValueError : for an array of clouds, an axis that does not exist, or a line of sight along the positions.
    """
    if along not in (0, 1, 2) or along == axis:
        raise ValueError(f"line of sight must be a trap axis 0, 1 or 2 other than axis {axis}, got {along}")
    return _profile(equilibrium, axis, positions, along)


def _profile(equilibrium: Equilibrium, axis: int, positions: ArrayLike, along: int | None) -> Profile:
    if equilibrium.cloud.shape:
        raise ValueError(f"a profile is of one cloud, got an array of clouds of shape {equilibrium.cloud.shape}")
    if axis not in (0, 1, 2):
        raise ValueError(f"axis must be 0, 1 or 2, got {axis}")
    x = np.asarray(positions, dtype=np.float64).reshape(-1)
    with np.errstate(all="ignore"):
        thermal, condensate = _parts(equilibrium, axis)(x, axis, along)
        classical = _classical(equilibrium, x, axis, along)
    return Profile(positions=x, thermal=thermal, condensate=condensate, total=thermal + condensate, classical=classical)


_Parts = Callable[[Floats, int, int | None], tuple[Floats, Floats]]


def _parts(equilibrium: Equilibrium, axis: int) -> _Parts:
    """Thermal and condensate density of the equilibrium's model, as a function of positions, axis, line of sight."""
    if isinstance(equilibrium, SemiIdeal) and equilibrium.condensate_fraction > 0.0:
        return lambda x, axis, along: _semi_ideal(equilibrium, x, axis, along)
    if isinstance(equilibrium, IdealBose):
        return lambda x, axis, along: _ideal_bose(equilibrium, x, axis, along)
    if isinstance(equilibrium, ExactFermions) and equilibrium.levels().resolves(axis):
        return lambda x, axis, along: _exact_fermions(equilibrium, x, axis, along)
    if isinstance(equilibrium, IdealFermi):
        return lambda x, axis, along: _ideal_fermi(equilibrium, x, axis, along)
    if isinstance(equilibrium, ExactLevels):
        return lambda x, axis, along: _exact_levels(equilibrium, x, axis, along)
    if isinstance(equilibrium, HartreeFock):
        return lambda x, axis, along: _hartree_fock(equilibrium, x, axis, along)
    raise TypeError(f"no profile is known for {type(equilibrium).__name__}")


def _thermal_length(equilibrium: Equilibrium, axis: int) -> float:
    """sqrt(kT/(m w^2)), the rms radius of the classical cloud. [m]"""
    kT = equilibrium.thermal_energy
    omega = equilibrium.cloud.trap.angular_frequencies[axis]
    return float(np.sqrt(kT / equilibrium.cloud.mass) / omega)


def _potential(equilibrium: Equilibrium, x: Floats, axis: int) -> Floats:
    """V/kT. [1]"""
    u: Floats = 0.5 * (x / _thermal_length(equilibrium, axis)) ** 2
    return u


def _density_unit(equilibrium: Equilibrium, along: int | None) -> float:
    """1/lambda^3, times sqrt(2 pi) and the thermal length of the line of sight if there is one: the integral of
    g_s(z e^(-t^2/2)) over t is sqrt(2 pi) g_(s+1/2)(z)."""
    unit = float(equilibrium.thermal_wavelength**-3)
    return unit if along is None else unit * math.sqrt(2.0 * math.pi) * _thermal_length(equilibrium, along)


def _classical(equilibrium: Equilibrium, x: Floats, axis: int, along: int | None) -> Floats:
    peak = float(equilibrium.classical_phase_space_density) * _density_unit(equilibrium, along)
    density: Floats = peak * np.exp(-_potential(equilibrium, x, axis))
    return density


def _ground_level(equilibrium: Equilibrium, x: Floats, axis: int, along: int | None) -> Floats:
    """Density of one atom in the ground level of the oscillator."""
    a = equilibrium.oscillator_lengths
    axes = [i for i in range(3) if i != along]
    density: Floats = np.exp(-((x / a[axis]) ** 2)) / np.prod(_ROOT_PI * a[axes])
    return density


def _ideal_bose(equilibrium: IdealBose, x: Floats, axis: int, along: int | None) -> tuple[Floats, Floats]:
    alpha = -float(equilibrium.log_fugacity) if equilibrium.log_fugacity < 0.0 else 0.0
    order = 1.5 if along is None else 2.0
    thermal = bose(order, alpha + _potential(equilibrium, x, axis)) * _density_unit(equilibrium, along)
    atoms = float(equilibrium.condensate_atoms)
    condensate = atoms * _ground_level(equilibrium, x, axis, along) if atoms > 0.0 else np.zeros_like(x)
    return thermal, condensate


def _ideal_fermi(equilibrium: IdealFermi, x: Floats, axis: int, along: int | None) -> tuple[Floats, Floats]:
    order = 1.5 if along is None else 2.0
    log_z = float(equilibrium.log_fugacity) - _potential(equilibrium, x, axis)
    return fermi(order, log_z) * _density_unit(equilibrium, along), np.zeros_like(x)


def _exact_fermions(equilibrium: ExactFermions, x: Floats, axis: int, along: int | None) -> tuple[Floats, Floats]:
    squares = (x / float(equilibrium.oscillator_lengths[axis])) ** 2
    density = equilibrium.levels().density(float(equilibrium.log_fugacity), axis, squares, along)
    return density / float(equilibrium.thermal_wavelength) ** (3 if along is None else 2), np.zeros_like(x)


def _semi_ideal(equilibrium: SemiIdeal, x: Floats, axis: int, along: int | None) -> tuple[Floats, Floats]:
    height = float(equilibrium.log_fugacity) - _potential(equilibrium, x, axis)  # (mu - V)/kT
    inside = height > 0.0
    unit = _density_unit(equilibrium, along)
    # n_c lambda^3 = (mu - V)/kT lambda/(2a); along a line of sight the parabola sums to (4/3) sqrt(2 height) of it.
    scale = float(equilibrium.thermal_wavelength / (2.0 * equilibrium.cloud.length))
    depth = np.where(inside, height, 0.0)
    if along is None:
        return bose(1.5, np.abs(height)) * unit, unit * scale * depth
    thermal = bose(2.0, np.maximum(-height, 0.0))
    thermal[inside] = integrals.column_through_shell(height[inside])
    condensate: Floats = unit * scale * 4.0 / (3.0 * _ROOT_PI) * depth**1.5
    return thermal * unit, condensate


def _hartree_fock(equilibrium: HartreeFock, x: Floats, axis: int, along: int | None) -> tuple[Floats, Floats]:
    height = float(equilibrium.log_fugacity) - _potential(equilibrium, x, axis)  # (mu - V)/kT
    # At the centre rounding must not take a cloud that is all but condensed over the edge.
    condensed = float(equilibrium.condensate_fraction) > 0.0
    densities = local_densities if along is None else column_densities
    thermal, condensate = densities(float(equilibrium.repulsion), height, condensed=condensed)
    unit = _density_unit(equilibrium, along)
    return thermal * unit, condensate * unit


def _exact_levels(equilibrium: ExactLevels, x: Floats, axis: int, along: int | None) -> tuple[Floats, Floats]:
    levels = OscillatorLevels(equilibrium.spacings)
    ground = float(equilibrium.condensate_atoms)
    alpha = float(ground_distance(ground))
    squares = np.zeros((3, x.size))
    squares[axis] = (x / equilibrium.oscillator_lengths[axis]) ** 2
    excited = levels.excited_density(alpha, squares) if along is None else levels.excited_column(alpha, squares, along)
    one_at_centre = _ground_level(equilibrium, np.zeros(1), axis, along)
    return excited * one_at_centre, ground * _ground_level(equilibrium, x, axis, along)
