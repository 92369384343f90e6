"""Repelling bosons in traps with arms, against sums over cells of potential and of space that solve each by itself."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.optimize import brentq

from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.constants import atomic_mass, bohr_radius, boltzmann, reduced_planck
from physics.curve_shape import CurveShape
from physics.particles import Statistics
from physics.real_equilibria import RealEquilibrium
from physics.real_trap import RealTrap
from physics.species import load_species
from physics.traps import GaussianBeam, Trap
from physics.traps.survey import survey

Array = NDArray[np.float64]

MASS = 87.0 * atomic_mass
LENGTH = 100.0 * bohr_radius
FREQUENCIES = np.array([100.0, 150.0, 40.0])


def legendre(order: int) -> tuple[Array, Array]:
    x, weights = np.polynomial.legendre.leggauss(order)
    return 0.5 * (x + 1.0), 0.5 * weights


def held(v: Any, top: float) -> tuple[Array, Array]:
    """n lambda^3 = (2/sqrt(pi)) integral of sqrt(p)/(e^(v + p) - 1) dp up to v + p = top, and its fall with v.

    p = v sinh^2 t, which is smooth down to v = 0.
    """
    v = np.maximum(np.asarray(v, dtype=np.float64), 1e-14)[..., np.newaxis]
    reach = np.arcsinh(np.sqrt(np.clip(top - v, 0.0, 45.0) / v))
    x, weights = legendre(40)
    density, fall = np.zeros(v.shape[:-1]), np.zeros(v.shape[:-1])
    for panel in range(4):
        t, dt = (panel + x) / 4.0 * reach, weights / 4.0 * reach
        sinh, cosh = np.sinh(t), np.cosh(t)
        filled = dt * cosh / np.expm1(v * cosh**2)
        density += np.sum(2.0 * v**1.5 * sinh**2 * filled, axis=-1)
        fall += np.sum(np.sqrt(v) * filled, axis=-1)
    return 2.0 / math.sqrt(math.pi) * density, 2.0 / math.sqrt(math.pi) * fall


def edge(g: float, top: float) -> tuple[float, float, float]:
    """v inside and outside of the edge, and (mu - V)/kT there: where 1 = 2 g fall, at the same potential."""

    def flat(log_v: float) -> float:
        return math.log(max(2.0 * g * float(held(math.exp(log_v), top)[1]), 1e-300))

    inside = math.exp(brentq(flat, -60.0, math.log(min(top, 30.0) * (1.0 - 1e-12)), xtol=1e-14, rtol=1e-14))
    height = inside + 2.0 * g * float(held(inside, top)[0])
    root = brentq(
        lambda r: r * r - 2.0 * g * float(held(r * r, top)[0]) + height, 1e-9, math.sqrt(inside), xtol=1e-16, rtol=1e-14
    )
    return inside, root * root, height


def places(curve: CurveShape, eta: float, low: float, high: float) -> tuple[Array, Array]:
    """V and dw between two potentials: between all points of the curve, and closer and closer to both ends."""
    near = 0.5 * 0.35 ** np.arange(14.0)
    ends = [low, high, *(low + (high - low) * near), *(high - (high - low) * near)]
    points = eta * (curve.energies if curve.energies is not None else np.empty(0))
    points = np.concatenate([points, eta * np.geomspace(1e-6, 1.0, 100)])
    ends = np.unique(np.concatenate([ends, points[(points > low) & (points < high)]]))
    x, weights = legendre(8)
    width = np.diff(ends)[:, np.newaxis]
    V = (ends[:-1, np.newaxis] + width * x).ravel()
    return V, curve.slope(V / eta) * (width * weights).ravel() / eta


def levels(g: float, top: float, target: Array, low: float, high: float, sign: float) -> Array:
    """v of each place: v + sign 2 g d(v) = target, by Newton steps within brackets."""
    grid = low + np.append(0.0, (high - low) * np.geomspace(1e-13, 1.0, 400))
    values = grid + sign * 2.0 * g * held(grid, top)[0]
    index = np.clip(np.searchsorted(values, target) - 1, 0, grid.size - 2)
    below, above = grid[index], grid[index + 1]
    v = np.interp(target, values, grid)
    for _ in range(60):
        d, fall = held(v, top)
        miss = v + sign * 2.0 * g * d - target
        below, above = np.where(miss < 0.0, v, below), np.where(miss > 0.0, v, above)
        new = v - miss / np.maximum(1.0 - sign * 2.0 * g * fall, 1e-9)
        new = np.where((new >= below) & (new <= above), new, 0.5 * (below + above))
        done = np.max(np.abs(new - v)) < 1e-13
        v = new
        if done:
            break
    return v


def brute_force(curve: CurveShape, eta: float, g: float, m: float, condensed: bool) -> tuple[float, float, float]:
    """N lambda^3, N0 lambda^3 and the integral of (n lambda^3)^2, over the volume, at mu = m kT."""
    top, number, condensate, squared, start = eta - m, 0.0, 0.0, 0.0, 0.0
    if condensed:
        inside, first, height = edge(g, top)
        start = m - height
        V, dw = places(curve, eta, 1e-9 * start, start)
        v = levels(g, top, m - V, inside, m, 1.0)
        c, d = v / g, held(v, top)[0]
        condensate = float(np.sum(c * dw))
        number, squared = float(np.sum((c + d) * dw)), float(np.sum((c + d) ** 2 * dw))
    else:
        first = brentq(lambda v: v - 2.0 * g * float(held(v, top)[0]) + m, 1e-12, top, xtol=1e-14)
    end = min(eta, start + 45.0)
    V, dw = places(curve, eta, max(start, 1e-9), end)
    d = held(levels(g, top, V - m, first, min(top, first + 50.0), -1.0), top)[0]
    return number + float(np.sum(d * dw)), condensate, squared + float(np.sum(d * d * dw))


def arms() -> CurveShape:
    """From half of the depth on, arms have a hundred times the volume of the crossing."""
    u = np.concatenate([np.geomspace(1e-4, 1.0 / 128.0, 32)[:-1], np.arange(1, 129) / 128.0])
    w = u**1.5 * (1.0 + 100.0 * np.clip(40.0 * (u - 0.53), 0.0, 1.0))
    return CurveShape(energies=u, volumes=w / w[-1])


def trap_of(curve: CurveShape, depth: float = 1.6e-6) -> RealTrap:
    held_energy = depth * boltzmann
    volume = 4.0 * math.pi / 3.0 * (2.0 * held_energy / MASS) ** 1.5 / np.prod(2.0 * math.pi * FREQUENCIES)
    full = 1.0 if curve.power_law else float(1e-4**1.5 / curve.volume(np.array(1e-4)))
    return RealTrap(mass=MASS, curve=curve, held=held_energy, volume=full * volume, frequencies=FREQUENCIES)


def solved(trap: RealTrap, model: Model, atoms: Any, temperature: Any) -> Equilibrium:
    cloud = Cloud(
        trap=trap, statistics=Statistics.BOSE, mass=MASS, atoms=atoms, temperature=temperature,
        scattering_length=LENGTH,
    )  # fmt: skip
    return equilibrium(cloud, model)


@pytest.mark.parametrize("share", [0.04, 0.12, 0.3])
@pytest.mark.parametrize("curve", [CurveShape(), arms()], ids=["harmonic", "arms"])
def test_a_cloud_is_the_sum_of_its_local_densities(curve: CurveShape, share: float) -> None:
    trap = trap_of(curve)
    T = share * 1.6e-6
    threshold = 1e4 * float(solved(trap, Model.IDEAL, 1e4, T).atoms_to_threshold)
    for ratio in (0.7, 1.4, 8.0):
        cloud = solved(trap, Model.HARTREE_FOCK, ratio * threshold, T)
        assert isinstance(cloud, RealEquilibrium)
        m, eta, n0 = float(cloud.log_fugacity), 1.0 / share, float(cloud.condensate_fraction)
        g = 2.0 * LENGTH / float(cloud.thermal_wavelength)
        number, condensate, squared = brute_force(curve, eta, g, m, n0 > 0.0)
        assert (n0 > 0.0) == (ratio > 1.0) or share == 0.3, (ratio, n0)
        assert number == pytest.approx(float(cloud._volume_number), rel=6e-6), ratio
        assert condensate == pytest.approx(n0 * number, rel=6e-6), ratio
        assert squared / number == pytest.approx(float(cloud.mean_density * cloud._quantum_volume), rel=6e-6), ratio


def test_many_clouds_are_answered_as_each_by_itself() -> None:
    trap = trap_of(arms())
    atoms, temperature = np.geomspace(1e4, 1e8, 6), np.geomspace(3e-8, 5e-7, 6)[:, np.newaxis]
    grid = solved(trap, Model.HARTREE_FOCK, atoms, temperature)
    assert np.any(np.asarray(grid.chemical_potential) > 0.5 * trap.held)
    for i, j in np.ndindex(6, 6):
        single = solved(trap, Model.HARTREE_FOCK, atoms[j], temperature[i, 0])
        for name in ("chemical_potential", "condensate_fraction", "peak_density", "mean_density"):
            expected = float(getattr(single, name))
            assert getattr(grid, name)[i, j] == pytest.approx(expected, rel=1e-6, nan_ok=True), (name, i, j)


RUBIDIUM = load_species("87Rb").state("F=1 mF=-1")
BEAMS = tuple(
    GaussianBeam(name=name, wavelength=1064e-9, power=power, waists=waist, direction=direction)
    for name, power, waist, direction in (("A", 0.52, 72e-6, (1, 0, 0)), ("B", 0.48, 85e-6, (0, 1, 0)))
)


@pytest.mark.parametrize(("atoms", "eta"), [(2.5e5, 9.0), (8e5, 20.0)])
def test_a_cloud_in_a_sagging_crossed_trap_is_a_sum_over_cells_of_space(atoms: float, eta: float) -> None:
    found = survey(Trap(beams=BEAMS), RUBIDIUM)
    depth, potential, escape = found.depth, found.potential, found.escape
    assert depth is not None
    assert potential is not None
    assert escape is not None
    kT = depth / eta
    cloud = equilibrium(
        Cloud(
            trap=found, statistics=Statistics.BOSE, mass=RUBIDIUM.mass, atoms=atoms, temperature=kT / boltzmann,
            scattering_length=LENGTH,
        ),
        Model.HARTREE_FOCK,
    )  # fmt: skip
    mu, cubed = float(cloud.chemical_potential) / kT, float(cloud.thermal_wavelength) ** 3
    g = 4.0 * math.pi * reduced_planck**2 * LENGTH / RUBIDIUM.mass / (kT * cubed)  # of n lambda^3, in kT
    fraction, top = float(cloud.condensate_fraction), eta - mu
    assert (fraction > 0.2) == (eta > 10.0)

    # Densities against the potential, tabulated on both sides of the edge of the condensate.
    inside, first, height = edge(g, top) if fraction else (0.0, 0.0, mu)
    within = np.linspace(0.0, mu - height, 400)
    outside = mu - height + (eta - mu + height) * np.linspace(0.0, 1.0, 1500) ** 2
    thermal = held(levels(g, top, outside - mu, first, top, -1.0), top)[0]
    if fraction:
        v = levels(g, top, mu - within, inside, mu, 1.0)
        table = np.concatenate([within, outside])
        thermal = np.concatenate([held(v, top)[0], thermal])
        condensate = np.concatenate([v / g, np.zeros_like(outside)])
    else:
        table, condensate = outside, np.zeros_like(outside)

    def summed(low: Any, high: Any, counts: tuple[int, int, int]) -> tuple[float, float]:
        """Atoms and condensed ones in a box, by cells of one size."""
        low, high = np.asarray(low), np.asarray(high)
        sides = [a + (b - a) * (np.arange(n) + 0.5) / n for a, b, n in zip(low, high, counts, strict=True)]
        points = np.stack(np.meshgrid(*sides, indexing="ij"), axis=-1).reshape(-1, 3) + found.minimum
        V = (potential.energy(points) - found.energy_at_minimum) / kT
        V = V[eta > V]
        condensed = float(np.interp(V, table, condensate).sum())
        cell = float(np.prod((high - low) / np.array(counts))) / cubed
        return cell * (float(np.interp(V, table, thermal).sum()) + condensed), cell * condensed

    # All that is below the depth, down to the pass below which atoms fall, or all of a cold cloud; the condensate once
    # more, finely.
    assert escape.position[2] < found.minimum[2]
    side, below = (3e-4, escape.position[2] - found.minimum[2]) if eta < 10.0 else (1.2e-4, -8e-5)
    total, rough = summed((-side, -side, below), (side, side, 1.2e-4), (120, 120, 90))
    reach = 1.3 * np.asarray(cloud.condensate_radii) if fraction else np.full(3, 1e-6)
    _, fine = summed(-np.max(reach) * np.ones(3), np.max(reach) * np.ones(3), (80, 80, 80))
    assert total - rough + fine == pytest.approx(atoms, rel=0.003)
    assert fine == pytest.approx(fraction * atoms, rel=0.001)
