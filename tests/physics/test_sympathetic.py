"""Two gases along one ramp: against one gas of two spin states, balances, relaxation, ends of the passenger."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import pytest
from scipy.integrate import quad, solve_ivp
from scipy.optimize import brentq
from scipy.special import gammainc

from physics.checks import Floats
from physics.constants import atomic_mass, bohr_radius, boltzmann, reduced_planck
from physics.evaporation import Cancelled, EndReason, evaporate
from physics.evaporation_rates import Process
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.interspecies import coldest_temperature, common_temperature
from physics.losses import Losses
from physics.particles import Statistics
from physics.passenger import Passenger
from physics.ramp_shapes import Shape
from physics.ramps import Control, Move, Ramp, Stage
from physics.sympathetic import SympatheticCooling, evaporate_with_passenger
from physics.transfer import Transfer
from physics.trap_path import DEPTH, SCALE, HarmonicPath, QuadrupolePath, TrapPoint
from physics.traps import HarmonicTrap

HEAVY, LIGHT = 87.0 * atomic_mass, 40.0 * atomic_mass
RUBIDIUM = Gas(statistics=Statistics.BOSE, mass=HEAVY, scattering_length=100.0 * bohr_radius)
POTASSIUM = Gas(statistics=Statistics.FERMI, mass=LIGHT)
RATIO = math.sqrt(HEAVY / LIGHT)
LENGTH = -200.0 * bohr_radius


def trap(mass: float, *frequencies: float, depth: float = 2e-4) -> HarmonicPath:
    """Depth in kelvin."""
    return HarmonicPath(
        mass=mass, trap=HarmonicTrap(frequencies=frequencies or (100.0, 100.0, 20.0), depth=boltzmann * depth)
    )


HEAVY_TRAP, LIGHT_TRAP = trap(HEAVY), trap(LIGHT, 100.0 * RATIO, 100.0 * RATIO, 20.0 * RATIO)


def riding(**changes: object) -> Passenger:
    given = {
        "gas": POTASSIUM, "path": LIGHT_TRAP, "atoms": 1e5, "temperature": 2.5e-5, "scattering_length": LENGTH,
    }  # fmt: skip
    return Passenger(**(given | changes))  # type: ignore[arg-type]


def lowering(control: Control, end: float, duration: float = 8.0) -> Ramp:
    return Ramp(stages=(Stage(duration=duration, moves=(Move(control=control, end=end, shape=Shape.EXPONENTIAL),)),))


def cut(end: float, duration: float = 8.0) -> Ramp:
    """The depth lowered to a temperature."""
    return lowering(DEPTH, boltzmann * end, duration)


def hold(duration: float) -> Ramp:
    return Ramp(stages=(Stage(duration=duration),))


def assert_balanced(run: SympatheticCooling) -> None:
    for one in (run.coolant, run.passenger):
        assert abs(one.budget.atoms_missing) < 1e-5
        assert abs(one.budget.energy_missing) < 1e-5
    given, taken = (one.budget.energy[Process.CONTACT] for one in (run.coolant, run.passenger))
    assert given == pytest.approx(-taken, rel=1e-9)
    rows = len(run.passenger.time)
    assert all(
        len(getattr(run.contact, name)) == rows
        for name in ("overlap_share", "coolant_collision_rate", "relaxation_time")
    )


def test_two_spin_states_are_one_gas_of_two() -> None:
    one = Gas(statistics=Statistics.FERMI, mass=LIGHT)
    both = Gas(statistics=Statistics.FERMI, mass=LIGHT, spin_components=2, scattering_length=100.0 * bohr_radius)
    path = trap(LIGHT, 500.0, 500.0, 100.0, depth=3e-4)
    ramp = Ramp(stages=(*lowering(SCALE, 0.1, 3.0).stages, *cut(1.2e-5, 2.0).stages))
    losses = Losses(background_lifetime=50.0, three_body=1e-38)
    alone = evaporate(both, 2e6, 3e-5, ramp, path, losses=losses)
    other = Passenger(
        gas=one, path=path, atoms=2e6, temperature=3e-5, scattering_length=100.0 * bohr_radius,
        losses=losses, follows_depth=True,
    )  # fmt: skip
    shared = evaporate_with_passenger(one, 2e6, 3e-5, ramp, path, other, losses=losses, tolerance=1e-7)
    assert shared.coolant.temperature[-1] < 0.1 * shared.coolant.temperature[0]
    for run in (shared.coolant, shared.passenger):
        assert run.atoms == pytest.approx(alone.atoms, rel=1e-4)
        assert run.temperature == pytest.approx(alone.temperature, rel=1e-4)
        assert run.rows.evaporation_rate == pytest.approx(alone.rows.evaporation_rate, rel=1e-3)
    assert shared.contact.coolant_collision_rate == pytest.approx(alone.rows.elastic_collision_rate, rel=1e-3)
    assert_balanced(shared)


def test_two_clouds_in_contact_come_to_one_temperature() -> None:
    # Deep traps, so that nothing is lost, and a light cloud whose heat the heavy one hardly feels.
    cold = Gas(statistics=Statistics.BOSE, mass=HEAVY, scattering_length=10.0 * bohr_radius)
    path, other = trap(HEAVY, depth=1.0), riding(
        path=trap(LIGHT, 100.0 * RATIO, 100.0 * RATIO, 20.0 * RATIO, depth=1.0), atoms=3e3, temperature=3e-5,
        scattering_length=5.0 * bohr_radius,
    )  # fmt: skip
    run = evaporate_with_passenger(cold, 1e6, 2.8e-5, hold(400.0), path, other)
    difference = run.passenger.temperature - run.coolant.temperature
    time, relaxation = run.passenger.time, run.contact.relaxation_time
    slope = -np.gradient(np.log(difference), time)
    assert slope[2:-2] == pytest.approx(1.0 / relaxation[2:-2], rel=5e-3)
    # Energy is kept, so that both go to the common temperature.
    common = float(common_temperature((1e6, 3e3), (2.8e-5, 3e-5)))
    mean = (1e6 * run.coolant.temperature + 3e3 * run.passenger.temperature) / (1e6 + 3e3)
    assert mean == pytest.approx(np.full(len(mean), common), rel=1e-6)
    assert_balanced(run)


def test_relaxation_by_the_published_law() -> None:
    # d(T1 - T2)/dt = -(xm/3)(1/N1 + 1/N2) Z12 (T1 - T2), Z12 with the sag between the two, written out here and
    # followed by another integrator: M. Mudrich et al., Phys. Rev. Lett. 88, 253001 (2002).
    a, N1, N2, starts = 5.0 * bohr_radius, 1e6, 4e5, (2e-5, 4e-5)
    f1, f2 = np.array([100.0, 90.0, 60.0]), np.array([150.0, 140.0, 80.0])
    apart = 9.80665 * (1.0 / (2.0 * math.pi * f1[2]) ** 2 - 1.0 / (2.0 * math.pi * f2[2]) ** 2)

    def slope(_: float, T: Floats) -> list[float]:
        widths = boltzmann * (T[0] / (HEAVY * f1**2) + T[1] / (LIGHT * f2**2)) / (2.0 * math.pi) ** 2
        overlap = math.exp(-(apart**2) / (2.0 * widths[2])) / float(np.prod(np.sqrt(2.0 * math.pi * widths)))
        speed = math.sqrt(8.0 * boltzmann / math.pi * (T[0] / HEAVY + T[1] / LIGHT))
        Z = 4.0 * math.pi * a * a * speed * N1 * N2 * overlap
        share = 4.0 * HEAVY * LIGHT / (HEAVY + LIGHT) ** 2
        heat = share / 3.0 * Z * (T[0] - T[1])
        return [-heat / N1, heat / N2]

    still = Gas(statistics=Statistics.FERMI, mass=HEAVY)
    run = evaporate_with_passenger(
        still, N1, starts[0], hold(3000.0), trap(HEAVY, *f1, depth=1.0),
        Passenger(
            gas=POTASSIUM, path=trap(LIGHT, *f2, depth=1.0), atoms=N2, temperature=starts[1], scattering_length=a,
            vertical=2,
        ),
    )  # fmt: skip
    time = run.coolant.time
    exact = solve_ivp(slope, (0.0, 3000.0), starts, t_eval=time, rtol=1e-10, atol=1e-16).y
    assert exact[1, -1] - exact[0, -1] < 0.5 * (starts[1] - starts[0])
    # k^2 a^2 is 1e-3 there.
    assert run.coolant.temperature == pytest.approx(exact[0], rel=1e-3)
    assert run.passenger.temperature == pytest.approx(exact[1], rel=1e-3)


def test_evaporation_with_a_passenger_goes_as_an_integration_of_its_own() -> None:
    # A knife comes down on the first gas; the second, in the same frequencies and hardly cut, follows. Mudrich et al.,
    # Phys. Rev. Lett. 88, 253001 (2002), with the cross-section averaged over speeds by quadrature, and the balance
    # of a cut cloud by the library's incomplete gamma functions.
    a, a12, lifetime, duration = 5.3e-9, -200.0 * bohr_radius, 40.0, 3.0
    high, low, deep = boltzmann * 5e-5, boltzmann * 1.5e-5, boltzmann * 2e-3
    w = 2.0 * math.pi * np.array([120.0, 120.0, 60.0])
    fall = math.log(low / high) / duration
    xm, mr = 4.0 * HEAVY * LIGHT / (HEAVY + LIGHT) ** 2, HEAVY * LIGHT / (HEAVY + LIGHT)

    def weighted(K: float, power: int) -> float:
        def f(x: float) -> float:
            return x**power * math.exp(-x) / (1.0 + K * x)

        return float(quad(f, 0.0, 60.0)[0]) / math.factorial(power)

    def truncation(share: float) -> float:
        return float(brentq(lambda e: 3.0 * gammainc(4, e) / gammainc(3, e) / e - share, 1e-2, 1e5, xtol=1e-12))

    def cut(N: float, E: float, depth: float, mass: float) -> tuple[float, float, float, float, float]:
        """eta, kT, P(3, eta), n_ref, and the mean density over that of the uncut Gaussian."""
        eta = truncation(E / N / depth)
        kT, Z = depth / eta, float(gammainc(3, eta))
        gauss = N * float(np.prod(w * np.sqrt(mass / (4.0 * math.pi * kT))))
        n = gauss * 2.0**1.5 / Z

        def pair(x: float) -> float:
            return 2.0 / math.sqrt(math.pi) * math.sqrt(x) * (float(gammainc(1.5, eta - x)) * math.exp(-x)) ** 2

        return eta, kT, Z, n, n * float(quad(pair, 0.0, min(eta, 40.0))[0]) / Z / gauss

    def flow(t: float, y: Floats) -> list[float]:
        N1, E1, N2, E2 = np.exp(y).tolist()
        U = high * math.exp(fall * t)
        eta, kT, Z, n, denser = cut(N1, E1, U, HEAVY)
        _, kT2, _, _, denser2 = cut(N2, E2, deep, LIGHT)
        spread = kT / HEAVY + kT2 / LIGHT
        speed = math.sqrt(8.0 * spread / math.pi)
        overlap = float(np.prod(w / np.sqrt(2.0 * math.pi * spread))) * math.sqrt(denser * denser2)
        K = 2.0 * (mr * a12 / reduced_planck) ** 2 * spread
        met = 4.0 * math.pi * a12**2 * speed * overlap
        power = xm * (kT - kT2) * met * weighted(K, 2)
        V = eta - 4.0 * float(gammainc(4, eta)) / Z
        kappa = 1.0 - float(gammainc(5, eta)) / Z / V
        sigma = 8.0 * math.pi * a * a * weighted(HEAVY * kT * (a / reduced_planck) ** 2, 1)
        escape = math.exp(-eta) * V
        evaporated = n * sigma * math.sqrt(8.0 * kT / (math.pi * HEAVY)) * escape
        # As many collisions with the passenger as lift an atom, over those of its own kind, <n> sigma sqrt(2) v.
        own = n / (denser * N1 * float(np.prod(w * np.sqrt(HEAVY / (4.0 * math.pi * kT)))))
        evaporated += math.sqrt(xm) * N2 * met * weighted(K, 1) * own / math.sqrt(2.0) * escape
        spilled = -3.0 * fall * eta**3 / 6.0 * math.exp(-eta) / Z
        mean = E1 / N1
        lost = -evaporated * (eta + kappa) * kT - spilled * U - mean / lifetime
        return [
            -(evaporated + spilled + 1.0 / lifetime),
            (lost - N2 * power) / mean,
            -1.0 / lifetime,
            -1.0 / lifetime + N1 * power * N2 / E2,
        ]

    eta = 10.0
    start = [2e6, 2e6 * 3.0 * float(gammainc(4, eta) / gammainc(3, eta)) * boltzmann * 5e-6]
    start += [2e5, 2e5 * 3.0 * boltzmann * 9e-6]
    own = solve_ivp(flow, (0.0, duration), np.log(start), method="LSODA", rtol=1e-6, atol=1e-7)
    N1, E1, N2, E2 = np.exp(own.y[:, -1]).tolist()
    frequencies = (120.0, 120.0, 60.0)
    run = evaporate_with_passenger(
        Gas(statistics=Statistics.BOSE, mass=HEAVY, scattering_length=a),
        2e6,
        5e-6,
        Ramp(stages=(Stage(duration=duration, moves=(Move(control=DEPTH, end=low, shape=Shape.EXPONENTIAL),)),)),
        HarmonicPath(mass=HEAVY, trap=HarmonicTrap(frequencies=frequencies, depth=high)),
        Passenger(
            gas=Gas(statistics=Statistics.FERMI, mass=LIGHT),
            path=HarmonicPath(mass=LIGHT, trap=HarmonicTrap(frequencies=frequencies, depth=deep)),
            atoms=2e5,
            temperature=9e-6,
            scattering_length=a12,
            losses=Losses(background_lifetime=lifetime),
        ),
        losses=Losses(background_lifetime=lifetime),
    )
    assert run.coolant.atoms[-1] == pytest.approx(N1, rel=2e-5)
    assert run.coolant.rows.energy[-1] == pytest.approx(E1, rel=2e-5)
    assert run.passenger.atoms[-1] == pytest.approx(N2, rel=2e-5)
    assert run.passenger.temperature[-1] == pytest.approx(E2 / (3.0 * boltzmann * N2), rel=2e-5)
    assert run.passenger.temperature[-1] < 0.25 * 9e-6


def test_equal_temperatures_stay_equal() -> None:
    # Nothing evaporates from a deep trap.
    run = evaporate_with_passenger(
        RUBIDIUM, 1e6, 2e-5, hold(5.0), trap(HEAVY, depth=1.0), riding(path=trap(LIGHT, depth=1.0), temperature=2e-5)
    )
    assert run.passenger.temperature == pytest.approx(np.full(len(run.passenger.time), 2e-5), rel=1e-9)
    assert abs(run.passenger.budget.energy[Process.CONTACT]) < 1e-9 * run.passenger.budget.energy_before


def test_the_passenger_is_cooled_and_keeps_its_atoms() -> None:
    run = evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, cut(8e-6), HEAVY_TRAP, riding())
    assert run.passenger.temperature[-1] < 0.1 * run.passenger.temperature[0]
    assert run.passenger.atoms[-1] > 0.95 * run.passenger.atoms[0]
    assert np.all(run.passenger.temperature[60:] > run.coolant.temperature[60:])  # it follows
    assert run.coolant.temperature[-1] == pytest.approx(float(run.passenger.temperature[-1]), rel=0.15)
    # More passengers leave the coolant fewer atoms and warmer.
    alone = evaporate(RUBIDIUM, 1e7, 2.5e-5, cut(8e-6), HEAVY_TRAP)
    assert run.coolant.atoms[-1] < alone.atoms[-1]
    assert run.passenger.rows.reduced_temperature[-1] < run.passenger.rows.reduced_temperature[0]
    assert_balanced(run)


def test_heat_capacity_limit() -> None:
    # A held truncation in close contact: d ln T = alpha dN1/(N1 + N2), alpha from the evaporated energy.
    many = 2e6
    run = evaporate_with_passenger(
        RUBIDIUM, 1e7, 2.5e-5, cut(3e-5, 30.0), HEAVY_TRAP, riding(atoms=many, scattering_length=10.0 * LENGTH)
    )
    N = run.coolant.atoms
    alpha = run.coolant.rows.evaporated_energy / 3.0 - 1.0
    steps = 0.5 * (alpha[1:] + alpha[:-1]) * np.diff(np.log(N + run.passenger.atoms))
    assert math.log(run.coolant.temperature[-1] / run.coolant.temperature[0]) == pytest.approx(np.sum(steps), rel=0.03)
    mean = np.sum(steps) / math.log((N[-1] + many) / (N[0] + many))
    limit = float(coldest_temperature((1e7, many), 2.5e-5, mean))
    assert run.coolant.temperature[-1] > limit


def test_without_collisions_each_goes_its_own_way() -> None:
    run = evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, cut(1e-5), HEAVY_TRAP, riding(scattering_length=0.0))
    alone = evaporate(RUBIDIUM, 1e7, 2.5e-5, cut(1e-5), HEAVY_TRAP)
    assert run.coolant.temperature == pytest.approx(alone.temperature, rel=1e-4)
    assert run.passenger.temperature == pytest.approx(np.full(len(run.passenger.time), 2.5e-5), rel=1e-6)
    assert np.all(np.isnan(run.contact.relaxation_time))


def test_sag_takes_the_clouds_apart() -> None:
    # Other vertical frequencies, and cold: the contact goes.
    soft = Passenger(
        gas=POTASSIUM, path=trap(LIGHT, 40.0, 40.0, 40.0, depth=1e-3), atoms=1e5, temperature=2.5e-5,
        scattering_length=LENGTH, vertical=2,
    )  # fmt: skip
    run = evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, cut(3e-6), trap(HEAVY, 100.0, 100.0, 100.0), soft)
    assert run.contact.distance == pytest.approx(
        np.full(len(run.contact.overlap_share), (155.26 - 24.84) * 1e-6), rel=1e-3
    )
    assert run.contact.overlap_share[-1] < 0.3 * run.contact.overlap_share[0]
    assert run.passenger.temperature[-1] > 1.5 * run.coolant.temperature[-1]


def test_very_close_contact_is_not_slow() -> None:
    # At unitarity the two relax in a thousandth of the time of the ramp or less.
    run = evaporate_with_passenger(
        RUBIDIUM, 1e7, 2.5e-5, cut(6e-6), HEAVY_TRAP, riding(atoms=1e4, scattering_length=1e5 * bohr_radius)
    )
    assert run.contact.relaxation_time[-1] < 5e-3
    assert run.passenger.temperature[-1] == pytest.approx(float(run.coolant.temperature[-1]), rel=5e-3)
    assert_balanced(run)


@dataclass(frozen=True)
class Failing:
    """A trap whose scale must stay above a half."""

    path: HarmonicPath
    nodes: int = 17

    @property
    def standing(self) -> Mapping[Control, float]:
        return self.path.standing

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        if controls[SCALE] < 0.5:
            return TrapPoint(depth=None, reason="gravity pulls the atoms out")
        return self.path.at(controls)


def test_a_passenger_that_is_not_held_any_more_leaves() -> None:
    run = evaporate_with_passenger(
        RUBIDIUM, 1e7, 2.5e-5, lowering(SCALE, 0.1), HEAVY_TRAP, riding(path=Failing(LIGHT_TRAP))
    )
    assert run.passenger.reason is EndReason.NOT_TRAPPED
    assert run.passenger.explanation == "gravity pulls the atoms out"
    assert run.coolant.reason is EndReason.RAMP
    assert run.coolant.time[-1] == 8.0
    assert 1.0 < run.passenger.time[-1] < 3.0
    assert_balanced(run)


def test_a_passenger_that_is_held_from_the_start_by_nothing() -> None:
    nowhere = Failing(trap(LIGHT))
    ramp = Ramp(stages=(Stage(duration=3.0, moves=(Move(control=SCALE, start=0.4, end=0.1),)),))
    run = evaporate_with_passenger(RUBIDIUM, 1e7, 1e-5, ramp, HEAVY_TRAP, riding(path=nowhere))
    assert run.passenger.reason is EndReason.NOT_TRAPPED
    assert len(run.passenger.time) == 0
    alone = evaporate(RUBIDIUM, 1e7, 1e-5, ramp, HEAVY_TRAP)
    assert run.coolant.atoms == pytest.approx(alone.atoms, rel=1e-6)


def test_a_passenger_that_is_lost_by_collisions() -> None:
    run = evaporate_with_passenger(
        RUBIDIUM, 1e7, 2.5e-5, cut(1e-5), HEAVY_TRAP,
        riding(path=trap(LIGHT, depth=1.0), atoms=1e3, losses=Losses(background_lifetime=1.0)),
    )  # fmt: skip
    assert run.passenger.reason is EndReason.ATOMS
    assert run.passenger.time[-1] == pytest.approx(math.log(10.0), rel=1e-3)
    assert run.passenger.atoms[-1] == pytest.approx(100.0, rel=1e-4)
    assert run.coolant.reason is EndReason.RAMP
    assert_balanced(run)


def test_a_coolant_that_is_not_held_ends_it() -> None:
    run = evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, lowering(SCALE, 0.1), Failing(HEAVY_TRAP), riding())
    assert run.coolant.reason is EndReason.NOT_TRAPPED
    assert run.passenger.time[-1] == run.coolant.time[-1] < 3.0


def test_target_and_stop() -> None:
    run = evaporate_with_passenger(
        RUBIDIUM, 1e7, 2.5e-5, cut(2e-6), HEAVY_TRAP, riding(), target=Target(reduced_temperature=15.0)
    )
    assert run.coolant.reason is EndReason.TARGET
    assert run.coolant.rows.reduced_temperature[-1] == pytest.approx(15.0, rel=1e-6)
    assert run.passenger.time[-1] == run.coolant.time[-1]
    with pytest.raises(Cancelled):
        evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, cut(2e-6), HEAVY_TRAP, riding(), tick=lambda share: False)


def test_a_boson_of_unknown_scattering_length_may_ride() -> None:
    other = Gas(statistics=Statistics.BOSE, mass=LIGHT)
    run = evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, cut(1.2e-5), HEAVY_TRAP, riding(gas=other))
    assert np.all(run.passenger.rows.elastic_collision_rate == 0.0)
    assert run.passenger.temperature[-1] < run.passenger.temperature[0]


def test_what_cannot_be() -> None:
    with pytest.raises(ValueError, match="atom number of the passenger must be positive and finite, got 0"):
        riding(atoms=0.0)
    with pytest.raises(ValueError, match="temperature must be positive and finite, got -1 K"):
        evaporate_with_passenger(RUBIDIUM, 1e7, -1.0, hold(1.0), HEAVY_TRAP, riding())
    away = Ramp(stages=(Stage(duration=1.0, transfer=Transfer(path=HEAVY_TRAP)),))
    with pytest.raises(ValueError, match="stage 1 goes into another trap, which is not computed with a second species"):
        evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, away, HEAVY_TRAP, riding())
    field = QuadrupolePath(moment=9.27e-24, gradient=1.0, depth=boltzmann * 3e-4)
    with pytest.raises(ValueError, match="two species in contact need a trap with frequencies"):
        evaporate_with_passenger(RUBIDIUM, 1e7, 2.5e-5, hold(1.0), HEAVY_TRAP, riding(path=field))
