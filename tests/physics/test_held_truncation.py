"""A held truncation parameter: published scaling laws, the runaway threshold, and what limits the control."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from scipy.integrate import quad, solve_ivp
from scipy.optimize import brentq, minimize_scalar
from scipy.special import gammainc

from physics import truncated_boltzmann as cut
from physics.checks import Floats
from physics.constants import atomic_mass, boltzmann, reduced_planck
from physics.curve_shape import CurveShape
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.held_truncation import HeldKinetics, HeldRun, Law, Limits, line_of
from physics.losses import Losses
from physics.particles import Statistics
from physics.ramps import Control
from physics.trap_path import DEPTH, GRADIENT, SCALE, HarmonicPath, QuadrupolePath
from physics.traps import HarmonicTrap
from physics.truncated_averages import truncated_averages

MASS = 87.0 * atomic_mass
GAS = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=5.3e-9)
# A short scattering length keeps the cross-section free of the speed.
HARD = Gas(statistics=Statistics.BOSE, mass=MASS, scattering_length=1e-11)
PATH = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(500.0, 500.0, 100.0), depth=boltzmann * 3e-4))
FAR = Target(peak_phase_space_density=1.0)


def held_run(
    eta: float,
    *,
    gas: Gas = HARD,
    losses: Losses | None = None,
    control: Control = SCALE,
    law: Law | None = None,
    limits: Limits | None = None,
    time: float = 1e9,
    tolerance: float = 1e-8,
) -> tuple[HeldKinetics, HeldRun]:
    limits = limits or Limits()
    held = HeldKinetics(gas, losses or Losses(), line_of(PATH, control, limits), limits)
    values = held.start(2e6, 3e-4 / eta)
    return held, held.run(law or Law(start=eta), values, FAR, time, tolerance)


def light_exponent(eta: float) -> float:
    """d ln N/d ln U at a held eta in a harmonic trap whose frequencies go as sqrt(U), from closed forms alone.

    Per -dlnU: x evaporates, s spills, the potential half of the energy falls with U, and E/N falls as U.
    """
    energy, carried = float(cut.mean_energy(1.5, eta)), eta + float(cut.excess_energy(1.5, eta))
    s = 1.5 * float(cut.spilled_share(1.5, eta))
    x = (0.5 - s * (eta / energy - 1.0)) / (carried / energy - 1.0)
    return x + s


@pytest.mark.parametrize(
    ("eta", "published", "off"),
    [(8.0, 0.260870, -0.026), (9.0, 0.220588, -0.011), (10.0, 0.191489, -0.005), (12.0, 0.151899, -0.001)],
)
def test_atoms_in_a_lowered_light_trap_go_as_published(eta: float, published: float, off: float) -> None:
    # O'Hara, Gehm, Granade, Thomas, Phys. Rev. A 64, 051403 (2001): N ~ U^(3/(2(eta' - 3))), with
    # eta' = eta + (eta - 5)/(eta - 4), for eta large; spilling is not in it. The formula recalled, three digits of
    # what spilling and the finite eta change.
    shifted = eta + (eta - 5.0) / (eta - 4.0)
    assert 1.5 / (shifted - 3.0) == pytest.approx(published, abs=1e-6)
    _, run = held_run(eta)
    first, last = run.steps[2].start, run.steps[-1].start
    exponent = (last[0] - first[0]) / (last[2] - first[2])
    assert exponent == pytest.approx(light_exponent(eta), rel=1e-6)
    assert exponent / published - 1.0 == pytest.approx(off, abs=6e-4)
    if eta == 10.0:
        assert exponent == pytest.approx(0.19057, abs=1e-5)
        # D ~ N U^(-3/2), against -3(eta' - 4)/(2(eta' - 3)).
        assert exponent - 1.5 == pytest.approx(-1.3094, abs=1e-4)
        assert -1.5 * (shifted - 4.0) / (shifted - 3.0) == pytest.approx(-1.3085, abs=1e-4)


def test_the_depth_falls_in_time_nearly_as_published() -> None:
    # The same source: U = U0 (1 + t/tau)^(-2(eta' - 3)/eta'), 1/tau = (2/3) eta' (eta - 4) e^-eta gamma0; with
    # gamma0 = n(0) sigma vbar/2 the cut gas at eta = 10 is 7.6 % faster.
    eta = 10.0
    shifted = eta + (eta - 5.0) / (eta - 4.0)
    held, run = held_run(eta)
    y = run.steps[0].start
    cloud = held.kinetics.cloud_in(held.line.curve.at(float(y[2]), 0.0), math.exp(y[0]), math.exp(y[1]))
    n0 = cloud.reference_density * float(cut.central_density(eta))
    gamma0 = 0.5 * n0 * cloud.cross_section * cloud.speed
    tau = 1.0 / (2.0 / 3.0 * shifted * (eta - 4.0) * math.exp(-eta) * gamma0)
    power = 2.0 * (shifted - 3.0) / shifted
    # U^(-1/p) is straight in time; its slope at the start is 1/tau.
    rate = -float(held.derivatives(Law(start=eta), y)[2]) / power
    assert rate * tau == pytest.approx(1.076, abs=2e-3)
    step = run.steps[len(run.steps) // 2]
    t, x = step.end, step.finish[2] - y[2]
    assert math.expm1(-x / power) / t * tau == pytest.approx(1.076, abs=0.01)


@pytest.mark.parametrize("eta", [6.0, 8.0, 11.0])
def test_cooling_at_fixed_frequencies_and_the_runaway(eta: float) -> None:
    # alpha = dlnT/dlnN = (mean energy of the lost)/(mean energy) - 1, evaporated and spilled; the collision rate goes
    # as N^(1 - alpha). No loss, large eta: alpha = (eta + 1 - X/V)/3 - 1 (Ketterle and van Druten, Adv. At. Mol. Opt.
    # Phys. 37, 181 (1996), recalled).
    held, run = held_run(eta, control=DEPTH)
    first, last = run.steps[2], run.steps[len(run.steps) // 2]
    lost = last.start[0] - first.start[0]
    alpha = (last.start[2] - first.start[2]) / lost
    rates = []
    for step in (first, last):
        y = step.start
        trap = held.line.curve.at(float(y[2]), 0.0)
        rates.append(held.kinetics.cloud_in(trap, math.exp(y[0]), math.exp(y[1])).collision_rate)
    assert math.log(rates[1] / rates[0]) / lost == pytest.approx(1.0 - alpha, rel=1e-5)
    energy, carried = float(cut.mean_energy(1.5, eta)), eta + float(cut.excess_energy(1.5, eta))
    s = 3.0 * float(cut.spilled_share(1.5, eta))
    # dlnT = -x (carried/energy - 1) + s dlnT (eta/energy - 1), and dlnN = -x + s dlnT.
    x = (1.0 - s * (eta / energy - 1.0)) / (carried / energy - 1.0)
    assert alpha == pytest.approx(1.0 / (x + s), rel=1e-6)
    if eta > 10.0:
        assert alpha == pytest.approx((eta + float(cut.excess_energy(1.5, eta))) / 3.0 - 1.0, rel=0.02)


def least_ratio(eta: float, exponent: float = cut.HARMONIC) -> float:
    """Elastic collisions, mean over the cloud, in the lifetime by background gas at which their rate stays, at a held
    eta and a fixed shape of the trap: from the averages that the program uses."""
    energy, carried = float(cut.mean_energy(exponent, eta)), eta + float(cut.excess_energy(exponent, eta))
    s = (exponent + 1.5) * float(cut.spilled_share(exponent, eta))
    # In units of n_ref sigma vbar.
    x = math.exp(-eta) * float(cut.evaporation_volume(exponent, eta))
    cooling = x * (carried / energy - 1.0) / (1.0 - s * (eta / energy - 1.0))
    # Rate ~ N T^(1/2 - d): it stays where the loss of atoms is d - 1/2 times the cooling.
    loss = (exponent - 0.5) * cooling - x - s * cooling
    pair = float(truncated_averages(CurveShape(exponent=exponent), eta).pair)
    return math.sqrt(2.0) * pair / loss if loss > 0.0 else math.inf


def own_least_ratio(eta: float, exponent: float) -> float:
    """The same by integrals over levels and positions, and the balance of atoms and energy solved as it stands."""

    def over_levels(weight: Callable[[float], float]) -> float:
        return float(quad(lambda e: e ** (exponent + 0.5) * weight(e), 0.0, eta, epsabs=0.0, epsrel=1e-11)[0])

    rim = math.exp(-eta)
    number = over_levels(lambda e: math.exp(-e))
    energy = over_levels(lambda e: e * math.exp(-e)) / number
    V = over_levels(lambda e: (eta - e - 1.0) * math.exp(-e) + rim) / number
    X = over_levels(lambda e: math.exp(-e) - (eta - e + 1.0) * rim) / number

    def over_positions(power: int) -> float:
        def density(u: float) -> float:
            return float(gammainc(1.5, eta - u)) * math.exp(-u)

        return float(quad(lambda u: u ** (exponent - 1.0) * density(u) ** power, 0.0, eta, epsabs=0.0)[0])

    levels = eta ** (exponent + 1.5) / (exponent + 1.5) * rim / number
    # Unknown: atoms lost N', temperature lost T', background G, all relative, for one unit of evaporation.
    x = rim * V
    rows = [
        [1.0, -(exponent + 1.5) * levels, -1.0],  # N' = x + spilled + G
        [energy, energy - (exponent + 1.5) * levels * eta, -energy],  # (N' + T') E = what the lost carry
        [1.0, 0.5 - exponent, 0.0],  # the rate stays
    ]
    _, _, G = np.linalg.solve(rows, [x, x * (eta + 1.0 - X / V), 0.0])
    rate = math.sqrt(2.0) * over_positions(2) / over_positions(1)
    return rate / float(G) if G > 0.0 else math.inf


@pytest.mark.parametrize(
    ("exponent", "least", "best", "bracket"), [(cut.HARMONIC, 145.15, 5.83, (5.0, 7.0)), (3.0, 18.83, 4.58, (3.8, 6.0))]
)
def test_the_least_ratio_of_good_to_bad_collisions_by_a_search_of_its_own(
    exponent: float, least: float, best: float, bracket: tuple[float, float]
) -> None:
    # Figures computed here. Published ones could not be read; recalled are 150 or so for a parabolic trap and 25 for a
    # linear one (Ketterle and van Druten, 1996), whose rates are taken otherwise.
    own = minimize_scalar(lambda eta: own_least_ratio(eta, exponent), bounds=bracket, method="bounded")
    found = minimize_scalar(lambda eta: least_ratio(eta, exponent), bounds=bracket, method="bounded")
    assert own.fun == pytest.approx(least, abs=0.01)
    assert own.x == pytest.approx(best, abs=0.01)
    assert found.fun == pytest.approx(own.fun, rel=1e-6)
    assert found.x == pytest.approx(own.x, abs=1e-3)
    for eta in (best - 0.5, best + 1.5, best + 4.0):
        assert least_ratio(eta, exponent) == pytest.approx(own_least_ratio(eta, exponent), rel=1e-6)


def test_the_kinetics_runs_away_beyond_the_least_ratio() -> None:
    # With that much loss the collision rate hardly changes, with less it grows, with more it falls.
    held, _ = held_run(6.0, control=DEPTH, time=1e-3)
    y = held.start(2e6, 3e-4 / 6.0)
    trap = held.line.curve.at(float(y[2]), 0.0)
    start = held.kinetics.cloud_in(trap, math.exp(y[0]), math.exp(y[1]))
    slopes = []
    for factor in (0.8, 1.0, 1.25):
        losses = Losses(background_lifetime=factor * least_ratio(6.0) / start.collision_rate)
        kinetics, run = held_run(6.0, control=DEPTH, losses=losses, time=losses.background_lifetime)
        end = run.steps[-1].finish
        there = kinetics.line.curve.at(float(end[2]), 0.0)
        slopes.append(kinetics.kinetics.cloud_in(there, math.exp(end[0]), math.exp(end[1])).collision_rate)
    rates = np.array(slopes) / start.collision_rate
    assert rates[0] < 0.9
    assert rates[1] == pytest.approx(1.0, abs=2e-3)
    assert rates[2] > 1.1


@pytest.mark.parametrize("eta", [5.5, 7.0, 8.5, 10.0, 12.0])
def test_in_a_lowered_light_trap_the_collision_rate_always_falls(eta: float) -> None:
    # n v ~ N U^(3/2) U^(-3/2) U^(1/2): with no loss but evaporation and spilling.
    held, run = held_run(eta)
    rates = []
    for step in run.steps[2:]:
        y = step.start
        trap = held.line.curve.at(float(y[2]), 0.0)
        rates.append(held.kinetics.cloud_in(trap, math.exp(y[0]), math.exp(y[1])).collision_rate)
    assert len(rates) > 5
    assert np.all(np.diff(rates) < 0.0)
    # As N U^(1/2).
    first, last = run.steps[2].start, run.steps[-1].start
    lower = last[2] - first[2]
    assert math.log(rates[-1] / rates[0]) / lower == pytest.approx(0.5 + light_exponent(eta), rel=1e-5)


def test_a_held_run_with_losses_goes_to_its_quantum_target_as_an_integration_of_its_own() -> None:
    # Held eta: U = eta kT, and one unknown, r = dlnT/dt = dlnU/dt, of the energy balance; the target by the sum over j
    # of the cut Bose gas.
    eta, wanted, lifetime, K3, heating = 10.0, 2.0, 20.0, 4e-41, 2e-8
    frequency, depth, T0, N0 = 1500.0, boltzmann * 5e-4, 5e-5, 2e6
    Z, j = float(gammainc(3.0, eta)), np.arange(1, 200)
    mean = 3.0 * float(gammainc(4.0, eta)) / Z
    V = eta - 4.0 * float(gammainc(4.0, eta)) / Z
    carried = eta + 1.0 - float(gammainc(5.0, eta)) / Z / V
    rim = eta**3 / 6.0 * math.exp(-eta) / Z
    work = 1.5 * quad(lambda x: x**3 / 6.0 * math.exp(-x), 0.0, eta)[0] / Z

    def triple(u: float) -> float:
        return 2.0 / math.sqrt(math.pi) * math.sqrt(u) * (float(gammainc(1.5, eta - u)) * math.exp(-u)) ** 3

    def energy(u: float) -> float:
        return u + 1.5 * float(gammainc(2.5, eta - u) / gammainc(1.5, eta - u))

    met = quad(triple, 0.0, eta)[0]
    met_energy = quad(lambda u: triple(u) * energy(u), 0.0, eta)[0] / met

    def angular(T: float) -> float:
        return 2.0 * math.pi * frequency * math.sqrt(eta * boltzmann * T / depth)

    def flow(_: float, y: Floats) -> list[float]:
        N, T = math.exp(y[0]), math.exp(y[1])
        kT = boltzmann * T
        n = N / Z * (MASS * angular(T) ** 2 / (2.0 * math.pi * kT)) ** 1.5
        K = MASS * kT * (5.3e-9 / reduced_planck) ** 2
        factor = quad(lambda x: x * math.exp(-x) / (1.0 + K * x), 0.0, 60.0)[0]
        speed = math.sqrt(8.0 * kT / (math.pi * MASS))
        g = n * 8.0 * math.pi * 5.3e-9**2 * factor * speed * math.exp(-eta) * V
        g3 = K3 * n * n * met / Z
        rest = g * (carried / mean - 1.0) + g3 * (met_energy / mean - 1.0) - 3.0 * heating / (mean * T)
        r = -rest / (1.0 - 1.5 * rim * (eta / mean - 1.0) - work / mean)
        return [-(g + g3 + 1.0 / lifetime - 1.5 * rim * r), r]

    def missing(_: float, y: Floats) -> float:
        T = math.exp(y[1])
        numbers = gammainc(3.0, j * eta) / j**3.0
        x = math.exp(y[0]) * (reduced_planck * angular(T) / (boltzmann * T)) ** 3
        z = brentq(lambda z: float(np.sum(numbers * z**j)) - x, 0.0, 1.0)
        return wanted - float(np.sum(z**j * gammainc(1.5, j * eta) / j**1.5))

    missing.terminal = True  # type: ignore[attr-defined]
    own = solve_ivp(flow, (0.0, 2.0), [math.log(N0), math.log(T0)], events=missing, rtol=1e-8, atol=1e-9)
    path = HarmonicPath(mass=MASS, trap=HarmonicTrap(frequencies=(frequency,) * 3, depth=depth))
    losses = Losses(background_lifetime=lifetime, three_body=K3, heating=heating)
    held = HeldKinetics(GAS, losses, line_of(path, SCALE, Limits()), Limits())
    run = held.run(Law(start=eta), held.start(N0, T0), Target(peak_phase_space_density=wanted), 10.0)
    assert run.reached
    assert run.atoms == pytest.approx(math.exp(own.y[0, -1]), rel=5e-6)
    assert run.energy / run.atoms / (mean * boltzmann) == pytest.approx(math.exp(own.y[1, -1]), rel=5e-6)
    assert run.time == pytest.approx(own.t[-1], rel=1e-5)


def test_a_drift_raises_the_truncation_with_each_decade() -> None:
    held, run = held_run(8.0, law=Law(start=8.0, drift=1.5), gas=GAS)
    y = run.steps[-1].start
    cloud = held.kinetics.cloud_in(held.line.curve.at(float(y[2]), 0.0), math.exp(y[0]), math.exp(y[1]))
    decades = math.log10(3e-4 * boltzmann / cloud.trap.depth)
    assert cloud.truncation == pytest.approx(8.0 + 1.5 * decades, abs=0.1)


def test_a_cloud_that_starts_too_hot_waits_and_one_too_cold_is_taken_down_at_once() -> None:
    held, hot = held_run(7.0, law=Law(start=10.0), gas=GAS)
    assert hot.steps[0].finish[2] == hot.steps[0].start[2]
    _, cold = held_run(12.0, law=Law(start=7.0), gas=GAS)
    assert cold.reached
    assert held.goal(Law(start=10.0), 1e-30) == 10.0


def test_limits_hold() -> None:
    _, free = held_run(7.0, gas=GAS)
    _, slow = held_run(7.0, gas=GAS, limits=Limits(fastest=0.01))
    assert slow.speed_limited > 0.5
    drop = (math.exp(slow.steps[3].finish[2]) - math.exp(slow.steps[0].start[2])) / slow.steps[3].end
    assert abs(drop) <= 0.01 * (1.0 + 1e-6)
    _, short = held_run(7.0, gas=GAS, limits=Limits(low=0.2), time=50.0)
    assert short.at_end > 0.1
    assert math.exp(short.place) == pytest.approx(0.2, rel=1e-3)
    _, brief = held_run(7.0, gas=GAS, time=0.5 * free.time)
    assert not brief.reached
    assert brief.time == pytest.approx(0.5 * free.time)


def test_what_cannot_be_is_said_in_a_sentence() -> None:
    with pytest.raises(ValueError, match=r"^limit of time must be positive and finite, got 0 s$"):
        Limits(time=0.0)
    with pytest.raises(ValueError, match=r"^range of a control must rise, got 2 to 1$"):
        Limits(low=2.0, high=1.0)
    with pytest.raises(
        ValueError, match=r"^gradient cannot be designed: controls with a known start are depth, scale$"
    ):
        line_of(PATH, GRADIENT, Limits())
    with pytest.raises(ValueError, match=r"^scale stands at 1, outside of its range from 0.1 to 0.5$"):
        line_of(PATH, SCALE, Limits(low=0.1, high=0.5))
    quadrupole = QuadrupolePath(moment=4.6e-24, gradient=1.0, depth=boltzmann * 1e-3)
    assert line_of(quadrupole, DEPTH, Limits()).curve.bottom_exponent == 3.0
