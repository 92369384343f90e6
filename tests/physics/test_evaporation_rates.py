"""Rates of a cut cloud along a ramp: limits with closed answers, and an integration of its own."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType

import numpy as np
import pytest
from scipy.integrate import quad, solve_ivp
from scipy.optimize import brentq
from scipy.special import gammainc

from physics.checks import Floats
from physics.constants import atomic_mass, boltzmann, reduced_planck
from physics.curve_shape import CurveShape
from physics.evaporation import evaporate
from physics.evaporation_rates import Process
from physics.gas import Gas
from physics.losses import FLIPPED_ENERGY, Losses, spin_flip_rates
from physics.particles import Statistics
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob, Move, Ramp, Stage
from physics.trap_path import DEPTH, GRADIENT, SCALE, FixedTrap, HarmonicPath, QuadrupolePath, TrapPoint
from physics.traps import HarmonicTrap

MASS = 87.0 * atomic_mass
RUBIDIUM = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
APART = Gas(statistics=Statistics.FERMI, mass=MASS)
"""Atoms that do not collide."""


def trap(depth: float = 3e-4, *frequencies: float) -> HarmonicPath:
    """Depth in kelvin."""
    return HarmonicPath(
        mass=MASS, trap=HarmonicTrap(frequencies=frequencies or (500.0, 500.0, 100.0), depth=boltzmann * depth)
    )


def hold(duration: float) -> Ramp:
    return Ramp(stages=(Stage(duration=duration),))


def lowering(*ends: float, duration: float = 2.0) -> Ramp:
    moves = [Move(control=SCALE, end=end, shape=Shape.EXPONENTIAL) for end in ends]
    return Ramp(stages=tuple(Stage(duration=duration, moves=(move,)) for move in moves))


# An integration of its own.


def test_plain_evaporation_goes_as_the_published_equations_integrated_by_the_library() -> None:
    # Luiten, Reynolds, Walraven, Phys. Rev. A 53, 381 (1996), harmonic trap: dN/dt = -n^2 sigma v e^-eta V_ev,
    # dE/dt = dN/dt (e_t + kappa kT), written in N and T with the library's gamma functions and a constant sigma.
    cold = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=1e-12)
    depth, angular = boltzmann * 1e-4, 2.0 * math.pi * (500.0 * 500.0 * 100.0) ** (1.0 / 3.0)
    sigma = 8.0 * math.pi * 1e-24
    stretch = (5e-9 / 1e-12) ** 2  # the same collisions in a shorter unit of time

    def slopes(t: float, y: np.ndarray) -> list[float]:
        N, T = np.exp(y)
        kT = boltzmann * T
        eta = depth / kT
        P3, P4, P5 = gammainc(3, eta), gammainc(4, eta), gammainc(5, eta)
        density = N / (P3 * (2.0 * math.pi * kT / (MASS * angular**2)) ** 1.5)
        speed = math.sqrt(8.0 * kT / (math.pi * MASS))
        volume = eta - 4.0 * P4 / P3
        rate = stretch * density * sigma * speed * math.exp(-eta) * volume
        carried = eta + 1.0 - P5 / P3 / volume
        energy = 3.0 * P4 / P3
        # C = dE/dT at fixed N and depth.
        p3 = eta**2 * math.exp(-eta) / 2.0
        heat = energy - eta * p3 / P3 * (eta - energy)
        return [-rate, -rate * (carried - energy) / heat]

    exact = solve_ivp(slopes, (0.0, 10.0), np.log([2e6, 2e-5]), method="DOP853", rtol=1e-11, atol=1e-11)
    # The same number of collisions takes longer with the short scattering length.
    run = evaporate(cold, 2e6, 2e-5, hold(10.0 * stretch), trap(1e-4))
    assert run.atoms[-1] == pytest.approx(math.exp(exact.y[0, -1]), rel=1e-6)
    assert run.temperature[-1] == pytest.approx(math.exp(exact.y[1, -1]), rel=1e-6)
    assert run.atoms[-1] < 1.5e6


# Limits with closed answers.


def test_all_processes_together_go_as_an_integration_by_quadratures() -> None:
    # A lowered light trap with every loss, all from integrals over levels, positions and collisions; SciPy's steps.
    m, a = MASS, 5.3e-9
    depth, angular = boltzmann * 3e-4, 2.0 * math.pi * np.array([500.0, 500.0, 100.0])
    K2, K3, lifetime, heating, S, end, duration = 1e-21, 4.3e-41, 20.0, 2e-7, 1e-9, 0.1, 2.0
    fall = math.log(end) / duration

    def over(f: Callable[[float], float], top: float) -> float:
        return float(quad(f, 0.0, top, epsabs=0.0, epsrel=1e-9)[0])

    def truncation(share: float) -> float:
        return float(brentq(lambda eta: 3.0 * gammainc(4, eta) / gammainc(3, eta) / eta - share, 1e-2, 1e4, xtol=1e-13))

    def met(eta: float, bodies: int) -> tuple[float, float]:
        """Mean of (n/n_ref)^(bodies - 1) over the uncut volume, and the energy of those that meet, over kT."""

        def weight(u: float) -> float:
            density = float(gammainc(1.5, eta - u)) * math.exp(-u)
            return 2.0 / math.sqrt(math.pi) * math.sqrt(u) * density**bodies

        def energy(u: float) -> float:
            return u + 1.5 * float(gammainc(2.5, eta - u) / gammainc(1.5, eta - u))

        mean = over(weight, eta)
        return mean, over(lambda u: weight(u) * energy(u), eta) / mean

    def flow(t: float, y: Floats) -> list[float]:
        N, E, s = math.exp(y[0]), math.exp(y[1]), math.exp(fall * t)
        U, mean = s * depth, E / N
        eta = truncation(mean / U)
        kT = U / eta
        Z = float(gammainc(3, eta))
        n = N / Z * float(np.prod(angular)) * s**1.5 * (m / (2.0 * math.pi * kT)) ** 1.5
        K = m * kT * (a / reduced_planck) ** 2
        sigma = 8.0 * math.pi * a * a * over(lambda x: x * math.exp(-x) / (1.0 + K * x), 60.0)
        V = over(lambda e: 0.5 * e * e * ((eta - e - 1.0) * math.exp(-e) + math.exp(-eta)), eta)
        X = over(lambda e: 0.5 * e * e * (math.exp(-e) - (eta - e + 1.0) * math.exp(-eta)), eta)
        evaporated = n * sigma * math.sqrt(8.0 * kT / (math.pi * m)) * math.exp(-eta) * V / Z
        # Levels below e go as e^3 s^(-3/2), and below the depth as s^(3/2).
        spilled = -1.5 * fall * eta**3 / 6.0 * math.exp(-eta) / Z
        work = 1.5 * fall * kT * over(lambda e: e**3 / 6.0 * math.exp(-e), eta) / Z
        (pair, pair_energy), (triple, triple_energy) = met(eta, 2), met(eta, 3)
        two, three = K2 * n * pair / Z, K3 * n * n * triple / Z
        growth = math.pi**2 * S * s * float(np.mean((angular / (2.0 * math.pi)) ** 2))
        lost = evaporated + spilled + 1.0 / lifetime + two + three
        power = work + 3.0 * boltzmann * heating + growth * mean - mean / lifetime - spilled * U
        power -= kT * (evaporated * (eta + 1.0 - X / V) + two * pair_energy + three * triple_energy)
        return [-lost, power / mean]

    eta = 10.0
    start = [math.log(2e6), math.log(2e6 * 3e-5 * boltzmann * 3.0 * gammainc(4, eta) / gammainc(3, eta))]
    own = solve_ivp(flow, (0.0, duration), start, rtol=1e-7, atol=1e-8)
    N, E = np.exp(own.y[:, -1])
    losses = Losses(background_lifetime=lifetime, two_body=K2, three_body=K3, heating=heating, intensity_noise=S)
    run = evaporate(RUBIDIUM, 2e6, 3e-5, lowering(end, duration=duration), trap(), losses=losses)
    assert run.atoms[-1] == pytest.approx(N, rel=1e-6)
    assert run.rows.energy[-1] == pytest.approx(E, rel=1e-6)
    assert run.rows.truncation[-1] == pytest.approx(truncation(E / N / (end * depth)), rel=1e-6)
    taken = run.budget.atoms
    assert min(taken[p] for p in (Process.EVAPORATED, Process.SPILLED, Process.BACKGROUND, Process.TWO_BODY)) > 1e3


def test_background_loss_keeps_the_temperature() -> None:
    run = evaporate(APART, 1e6, 1e-5, hold(30.0), trap(), losses=Losses(background_lifetime=20.0))
    assert run.time[-1] == 30.0
    np.testing.assert_allclose(run.atoms, 1e6 * np.exp(-run.time / 20.0), rtol=1e-6)
    np.testing.assert_allclose(run.temperature, 1e-5, rtol=1e-7)


@pytest.mark.parametrize(("body", "share"), [("two_body", 0.25), ("three_body", 1.0 / 3.0)])
def test_losses_of_the_centre_heat(body: str, share: float) -> None:
    # dT/dt = (T/4) K2 <n>, (T/3) K3 <n^2> in a deep harmonic trap: T as the power -1/4 or -1/3 of N.
    constant = 1e-19 if body == "two_body" else 3e-38
    run = evaporate(APART, 1e6, 1e-5, hold(1.0), trap(), losses=Losses(**{body: constant}))
    assert 0.6e6 < run.atoms[-1] < 0.9e6
    np.testing.assert_allclose(run.temperature, 1e-5 * (run.atoms / 1e6) ** -share, rtol=1e-6)
    n = run.rows.peak_density[0]
    rate = constant * (n / 8.0**0.5 if body == "two_body" else n**2 / 27.0**0.5)
    assert (run.rows.two_body_rate + run.rows.three_body_rate)[0] == pytest.approx(rate, rel=1e-7)


def test_recombination_heat_comes_once_an_event() -> None:
    losses = Losses(three_body=3e-35, recombination_heat=boltzmann * 1e-4)
    budget = evaporate(APART, 1e6, 1e-5, hold(0.2), trap(), losses=losses).budget
    events = budget.atoms[Process.THREE_BODY] / 3.0
    assert budget.energy[Process.RECOMBINATION] == pytest.approx(events * boltzmann * 1e-4, rel=1e-9)


def test_heating_raises_the_temperature_at_its_rate() -> None:
    deep = trap(1e-3)
    run = evaporate(APART, 1e6, 1e-5, hold(2.0), deep, losses=Losses(heating=1e-6))
    assert run.temperature[-1] == pytest.approx(1.2e-5, rel=1e-7)
    light = HarmonicPath(mass=MASS, trap=deep.trap, light_heating=3.0 * boltzmann * 1e-6)
    assert evaporate(APART, 1e6, 1e-5, hold(2.0), light).temperature[-1] == pytest.approx(1.2e-5, rel=1e-7)
    # A heating rate that is given has that by scattered light in it.
    both = evaporate(APART, 1e6, 1e-5, hold(2.0), light, losses=Losses(heating=5e-7))
    assert both.temperature[-1] == pytest.approx(1.1e-5, rel=1e-7)
    # 4 pi^4 m f^4 S_x along each axis, and 3k to be warmed.
    shaken = evaporate(APART, 1e6, 1e-5, hold(2.0), deep, losses=Losses(pointing_noise=1e-17))
    power = 4.0 * math.pi**4 * MASS * 1e-17 * (2.0 * 500.0**4 + 100.0**4)
    assert shaken.temperature[-1] == pytest.approx(1e-5 + 2.0 * power / (3.0 * boltzmann), rel=1e-7)
    # Noise makes the energy grow by e at the mean over the axes of pi^2 f^2 S.
    S = 1e-7
    noisy = evaporate(APART, 1e6, 1e-5, hold(2.0), deep, losses=Losses(intensity_noise=S))
    growth = math.pi**2 * S * (2.0 * 500.0**2 + 100.0**2) / 3.0
    assert noisy.temperature[-1] == pytest.approx(1e-5 * math.exp(2.0 * growth), rel=1e-7)


def test_noise_of_the_light_counts_by_the_square_of_its_share() -> None:
    bare = trap(1e-3).at({DEPTH: boltzmann * 1e-3, SCALE: 1.0})
    S = 1e-7
    for shares in ((1.0, 0.5, 0.0), (0.0, 0.0, 0.0), (0.2, 1.3, 1.0)):
        lit = FixedTrap(point=replace(bare, light_shares=shares))
        run = evaporate(APART, 1e6, 1e-5, hold(2.0), lit, losses=Losses(intensity_noise=S))
        part = sum((share * f) ** 2 for share, f in zip(shares, (500.0, 500.0, 100.0), strict=True))
        assert run.temperature[-1] == pytest.approx(1e-5 * math.exp(2.0 * math.pi**2 * S * part / 3.0), rel=1e-7)
    noise, shaking = (
        evaporate(APART, 1e6, 1e-5, hold(2.0), trap(1e-3), losses=losses).budget.energy
        for losses in (Losses(intensity_noise=S), Losses(pointing_noise=1e-17))
    )
    assert noise[Process.NOISE] > 0.0 == noise[Process.POINTING]
    assert shaking[Process.POINTING] > 0.0 == shaking[Process.NOISE]


def test_spin_flips_take_the_slow_atoms_of_a_quadrupole() -> None:
    # Atoms of 5/2 kT leave a cloud of 9/2 kT an atom at Gamma = chi (hbar/m)(F/kT)^2: dT/dt = (4/9) Gamma T, so that
    # T^2 grows evenly, by (8/9) chi hbar F^2/(m k^2) a second, and N goes as T^(-9/4).
    moment, gradient = 4.64e-24, 2.0
    path = QuadrupolePath(moment=moment, gradient=gradient, depth=boltzmann * 2e-3)
    run = evaporate(APART, 1e6, 2e-5, hold(5.0), path)
    chi = math.sqrt(0.16 * 1.85)
    growth = 8.0 / 9.0 * chi * reduced_planck / MASS * (moment * gradient / boltzmann) ** 2
    warmer = math.sqrt(1.0 + 5.0 * growth / 2e-5**2)
    assert warmer > 1.05
    assert run.temperature[-1] == pytest.approx(2e-5 * warmer, rel=1e-6)
    assert run.atoms[-1] == pytest.approx(1e6 * warmer**-2.25, rel=1e-6)
    budget = run.budget
    assert budget.atoms[Process.SPIN_FLIPS] == pytest.approx(1e6 - run.atoms[-1], rel=1e-6)
    assert abs(budget.atoms_missing) < 1e-6
    assert abs(budget.energy_missing) < 1e-6
    first = chi * reduced_planck / MASS * (moment * gradient / (boltzmann * 2e-5)) ** 2
    assert run.rows.spin_flip_rate[0] == pytest.approx(first, rel=1e-6)
    low, high = spin_flip_rates(MASS, moment * gradient, 2e-5)
    assert first == pytest.approx(math.sqrt(low * high), rel=1e-9)
    rows = evaporate(RUBIDIUM, 1e6, 2e-5, hold(0.1), path).rows
    assert rows.good_to_bad_ratio[0] == pytest.approx(rows.elastic_collision_rate[0] / first, rel=1e-6)


def test_an_atom_near_the_zero_carries_five_halves_of_kt_away() -> None:
    # Drawn: passages of a small sphere by a thermal gas, each with the chance of an area that grows as the speed.
    draw = np.random.default_rng(5)
    speeds = np.linalg.norm(draw.normal(size=(400_000, 3)), axis=1)
    weights = speeds * speeds
    energy = np.sum(weights * 0.5 * speeds**2) / np.sum(weights)
    assert energy == pytest.approx(FLIPPED_ENERGY, rel=0.01)


@pytest.mark.parametrize("shape", [Shape.LINEAR, Shape.EXPONENTIAL])
@pytest.mark.parametrize("end", [4.0, 0.5])
def test_a_slow_change_of_strength_keeps_the_phase_space_density(shape: Shape, end: float) -> None:
    # T goes as the frequencies, sqrt(scale); depth and T apart, an almost uncut cloud.
    ramp = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=SCALE, end=end, shape=shape),)),))
    run = evaporate(APART, 1e6, 1e-5, ramp, trap(4e-4))
    assert run.temperature[-1] == pytest.approx(1e-5 * math.sqrt(end), rel=2e-6)
    assert run.rows.classical_phase_space_density[-1] == pytest.approx(
        run.rows.classical_phase_space_density[0], rel=1e-5
    )


def test_compression_of_a_quadrupole() -> None:
    # W ~ (U/B')^3 and N T^-9/2 B'^3: T as B'^(2/3). Hot enough that hardly a spin flips.
    path = QuadrupolePath(moment=4.6e-24, gradient=1.0, depth=boltzmann * 2.0)
    ramp = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=GRADIENT, end=3.0),)),))
    run = evaporate(APART, 1e6, 2e-2, ramp, path)
    assert run.temperature[-1] == pytest.approx(2e-2 * 3.0 ** (2.0 / 3.0), rel=1e-6)


BIAS = Control(Knob.BIAS)


@dataclass(frozen=True)
class Morphing:
    """A trap whose volume curve goes from U^(3/2) to U^3 as its control goes from 0 to 1, at one depth and volume."""

    depth: float
    nodes: int = 25

    @property
    def standing(self) -> Mapping[Control, float]:
        return MappingProxyType({BIAS: 0.0})

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        d = 1.5 + 1.5 * controls[BIAS]
        u = np.geomspace(1e-4, 1.0, 50)
        return TrapPoint(depth=self.depth, volume=1e-12, curve=CurveShape(energies=u, volumes=u**d, exponent=d))


def test_a_slow_change_of_shape_changes_the_phase_space_density_by_the_exponents() -> None:
    # Entropy: D2/D1 = e^(d2 - d1) for a cloud that is hardly cut.
    ramp = Ramp(stages=(Stage(duration=1.0, moves=(Move(control=BIAS, end=1.0),)),))
    for kelvin in (1e-6, 2e-6):
        run = evaporate(APART, 1e6, kelvin, ramp, Morphing(depth=boltzmann * 9e-5))
        assert float(np.min(run.rows.truncation)) > 12.0
        change = run.rows.classical_phase_space_density[-1] / run.rows.classical_phase_space_density[0]
        assert change == pytest.approx(math.exp(1.5), rel=1e-4)
        assert run.budget.atoms[Process.SPILLED] < 1e-3 * 1e6


def test_spilling_of_a_light_trap() -> None:
    # d ln N/d ln U = (eta^3/4) e^-eta/P(3, eta) without collisions, at the first moment.
    for eta in (4.0, 6.0):
        run = evaporate(APART, 1e6, 3e-4 / eta, lowering(0.999), trap())
        P = float(gammainc(3, eta))
        slope = math.log(run.atoms[-1] / 1e6) / math.log(0.999)
        assert slope == pytest.approx(eta**3 / 4.0 * math.exp(-eta) / P, rel=3e-3)
    # A knife spills twice as much, at the same frequencies, and does no work.
    cut = Ramp(
        stages=(Stage(duration=1.0, moves=(Move(control=DEPTH, start=boltzmann * 3e-4, end=boltzmann * 2.7e-4),)),)
    )
    run = evaporate(APART, 1e6, 3e-4 / 6.0, cut, trap())
    assert run.temperature[-1] == pytest.approx(3e-4 / 6.0, rel=1e-6)
    assert run.atoms[-1] / 1e6 == pytest.approx(float(gammainc(3, 5.4) / gammainc(3, 6.0)), rel=1e-7)
    assert abs(run.budget.energy[Process.WORK]) < 1e-7 * run.budget.energy_before


def test_polarised_fermions_do_not_evaporate() -> None:
    run = evaporate(APART, 1e6, 5e-5, hold(5.0), trap())
    assert run.atoms[-1] == pytest.approx(1e6, rel=1e-12)
    assert run.rows.elastic_collision_rate[-1] == 0.0


def test_a_tabulated_volume_curve_is_as_good_as_the_closed_form() -> None:
    u = np.geomspace(1e-4, 1.0, 60)
    curve = CurveShape(energies=u, volumes=u**1.5)
    closed = trap()

    @dataclass(frozen=True)
    class Tabulated:
        nodes: int = 25

        @property
        def standing(self) -> Mapping[Control, float]:
            return closed.standing

        def at(self, controls: Mapping[Control, float]) -> TrapPoint:
            point = closed.at(controls)
            # A new curve at each place, so that the changing table is used.
            again = CurveShape(energies=u, volumes=curve.volumes)
            return TrapPoint(depth=point.depth, volume=point.volume, curve=again, frequencies=point.frequencies)

    losses = Losses(background_lifetime=30.0, three_body=4e-41)
    one = evaporate(RUBIDIUM, 2e6, 3e-5, lowering(0.1), closed, losses=losses)
    other = evaporate(RUBIDIUM, 2e6, 3e-5, lowering(0.1), Tabulated(), losses=losses)
    assert other.atoms[-1] == pytest.approx(one.atoms[-1], rel=1e-6)
    assert other.temperature[-1] == pytest.approx(one.temperature[-1], rel=1e-6)
