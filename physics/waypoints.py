"""Clouds to aim at along an evaporation, at chosen phase-space densities.

From a simulated ramp, or from nothing but an assumed efficiency gamma = -dlnD/dlnN at a held truncation parameter. D is
the peak phase-space density: of the quantum cloud where it is asked for, of the classical one where an efficiency is.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

import numpy as np

from physics.constants import boltzmann, reduced_planck
from physics.continued_ramp import after_time
from physics.equation_of_state import energy_over_classical
from physics.evaporation import Evaporation, evaporate
from physics.evaporation_rates import CloudNow
from physics.evaporation_rows import degeneracy_of, occupation
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.held_truncation import HeldKinetics, Limits, line_of
from physics.losses import Losses
from physics.particles import Statistics
from physics.passenger import Passenger
from physics.ramps import Control, Ramp
from physics.statistics import zeta
from physics.trap_path import TrapPath


@dataclass(frozen=True, kw_only=True)
class Waypoint:
    """One cloud to aim at. NaN where something is not known. [SI]

    Attributes
    ----------
    phase_space_density : the one asked for, of the quantum cloud.
    atoms, temperature : of one spin state.
    time : from the start of the ramp; NaN from an assumed efficiency.
    controls : values by control.
    depth, truncation, collision_rate : collision_rate is the mean elastic one.
    widths : (3,) rms widths along the axes of the trap after the expansion time, of the thermal cloud released from a
        harmonic trap without collisions.
    passenger : PassengerThen or None. A second gas in the trap, where there is one and it is still held.
    """

    phase_space_density: float
    atoms: float
    temperature: float
    time: float
    controls: Mapping[Control, float]
    depth: float
    truncation: float
    collision_rate: float
    widths: tuple[float, float, float]
    passenger: PassengerThen | None = None


@dataclass(frozen=True, kw_only=True)
class PassengerThen:
    """The passenger at a waypoint. [SI]

    Attributes
    ----------
    atoms, temperature : of one spin state.
    reduced_temperature : T/Tc or T/TF. [1]
    widths : (3,) rms, after the same expansion.
    """

    atoms: float
    temperature: float
    reduced_temperature: float
    widths: tuple[float, float, float]


def expanded_widths(
    gas: Gas, atoms: float, temperature: float, frequencies: Sequence[float], time: float
) -> tuple[float, float, float]:
    """rms widths sqrt(E (1/w^2 + t^2)/(3Nm)) of a thermal cloud after ballistic expansion, with quantum E. [m]

    Bosons below their threshold: of the saturated thermal part.
    """
    angular = 2.0 * math.pi * np.asarray(frequencies, dtype=np.float64)
    X = atoms * (reduced_planck * float(np.prod(angular)) ** (1.0 / 3.0) / (boltzmann * temperature)) ** 3
    if math.isnan(X):
        return (math.nan,) * 3
    if gas.statistics is Statistics.BOSE:
        X = min(X, zeta(3.0))
    mean = boltzmann * temperature * float(energy_over_classical(gas.statistics, X))
    x, y, z = np.sqrt(mean / gas.mass * (1.0 / angular**2 + time**2)).tolist()
    return (x, y, z)


def waypoints(
    run: Evaporation, densities: Sequence[float], expansion_time: float, passenger: Evaporation | None = None
) -> tuple[Waypoint, ...]:
    """Where a simulated ramp first reaches each phase-space density; those that it does not reach are left out.

    passenger : of a second gas along the same ramp, see `physics.sympathetic`; it has its own columns at each.

    Between rows logarithms are taken as straight, which is good to 1e-3 for the usual number of rows.
    """
    if not expansion_time >= 0.0:
        raise ValueError(f"expansion time must not be negative, got {expansion_time:g} s")
    points = _points(run, densities, expansion_time)
    if passenger is None:
        return tuple(points)
    return tuple(replace(point, passenger=_then(passenger, point.time, expansion_time)) for point in points)


def _then(run: Evaporation, time: float, expansion_time: float) -> PassengerThen | None:
    """The second gas at a time; None where it is not held any more."""
    if not len(run.time) or not run.time[0] <= time <= run.time[-1] * (1.0 + 1e-12):
        return None

    def at(column: np.ndarray) -> float:
        positive = bool(np.all(column > 0.0))
        value = float(np.interp(time, run.time, np.log(column) if positive else column))
        return math.exp(value) if positive else value

    rows = run.rows
    atoms, temperature = at(rows.atoms), at(rows.temperature)
    frequencies = [at(rows.frequencies[:, axis]) for axis in range(3)]
    return PassengerThen(
        atoms=atoms,
        temperature=temperature,
        reduced_temperature=at(rows.reduced_temperature),
        widths=expanded_widths(run.gas, atoms, temperature, frequencies, expansion_time),
    )


def _points(run: Evaporation, densities: Sequence[float], expansion_time: float) -> Iterator[Waypoint]:
    D, rows = run.rows.peak_phase_space_density, run.rows
    for density in densities:
        later = np.flatnonzero(density <= D)
        if not len(later):
            continue
        last = int(later[0])
        before = max(last - 1, 0)
        rise = math.log(D[last] / D[before]) if last else 0.0
        share = math.log(density / D[before]) / rise if rise > 0.0 else 1.0
        if last == 0 and density < D[0] * (1.0 - 1e-9):
            continue  # passed before the ramp began

        def between(column: np.ndarray, share: float = share, a: int = before, b: int = last) -> float:
            if column[a] > 0.0 and column[b] > 0.0:
                return float(column[a] * (column[b] / column[a]) ** share)
            return float(column[a] + share * (column[b] - column[a]))

        atoms, temperature = between(rows.atoms), between(rows.temperature)
        frequencies = [between(rows.frequencies[:, axis]) for axis in range(3)]
        yield Waypoint(
            phase_space_density=density,
            atoms=atoms,
            temperature=temperature,
            time=float(run.time[before] + share * (run.time[last] - run.time[before])),
            controls=MappingProxyType({control: between(column) for control, column in run.controls.items()}),
            depth=between(rows.depth),
            truncation=between(rows.truncation),
            collision_rate=between(rows.elastic_collision_rate),
            widths=expanded_widths(run.gas, atoms, temperature, frequencies, expansion_time),
        )


def assumed_waypoints(
    gas: Gas,
    atoms: float,
    temperature: float,
    path: TrapPath,
    control: Control,
    densities: Sequence[float],
    efficiency: float,
    expansion_time: float,
    *,
    limits: Limits | None = None,
) -> tuple[Waypoint, ...]:
    """The same without kinetics: N falls as D^(-1/efficiency), and the control keeps the truncation of the start.

    Classical densities enter the efficiency: gamma = 3 alpha - 1 at fixed frequencies and (3/2) alpha - 1 where w^2
    goes as T, with alpha = dlnT/dlnN. Points out of the range of the control are left out.

    Raises
    ------
    ValueError : for an efficiency that is not positive, or what `line_of` refuses.
    """
    if not 0.0 < efficiency < math.inf:
        raise ValueError(f"evaporation efficiency must be positive and finite, got {efficiency:g}")
    limits = limits or Limits()
    line = line_of(path, control, limits)
    held = HeldKinetics(gas, Losses(), line, limits)
    first = held.start(atoms, temperature)
    kinetics, curve = held.kinetics, line.curve
    start = kinetics.cloud_in(curve.at(float(first[2]), 0.0), atoms, math.exp(first[1]))
    share = start.energy / start.atoms / start.trap.depth

    def cloud(place: float) -> tuple[CloudNow, float]:
        """At a place on the line the truncation gives T, and D(N) = D0 (N/N0)^-gamma with D ~ N at fixed T gives N."""
        trap = curve.at(place, 0.0)
        one = kinetics.cloud_in(trap, 1.0, share * trap.depth)
        log_ratio = math.log(occupation(gas, one) * start.atoms / occupation(gas, start))
        here = start.atoms * math.exp(-log_ratio / (1.0 + efficiency))
        found = kinetics.cloud_in(trap, here, here * share * trap.depth)
        return found, float(degeneracy_of(gas, curve.bottom_exponent, [found]).peak_phase_space_density[0])

    points = []
    others = {c: value for c, value in path.standing.items() if not math.isnan(value)}
    for density in densities:
        low, high = curve.low, float(first[2])
        if not cloud(high)[1] * (1.0 - 1e-9) <= density <= cloud(low)[1]:
            continue
        for _ in range(60):
            middle = 0.5 * (low + high)
            low, high = (middle, high) if cloud(middle)[1] >= density else (low, middle)
        found, _ = cloud(low)
        frequencies = [math.exp(log) for log in found.trap.log_frequencies]
        points.append(
            Waypoint(
                phase_space_density=density,
                atoms=found.atoms,
                temperature=found.temperature,
                time=math.nan,
                controls=MappingProxyType({**others, control: line.value(low)}),
                depth=found.trap.depth,
                truncation=found.truncation,
                collision_rate=found.collision_rate,
                widths=expanded_widths(gas, found.atoms, found.temperature, frequencies, expansion_time),
            )
        )
    return tuple(points)


@dataclass(frozen=True, kw_only=True)
class Departure:
    """What the rest of the ramp makes of a cloud that is off at a waypoint.

    Attributes
    ----------
    atoms_factor, temperature_factor : by which it is off. [1]
    run : the rest of the ramp from there.
    passenger : of a second gas along it; None without one.
    """

    atoms_factor: float
    temperature_factor: float
    run: Evaporation
    passenger: Evaporation | None = None


def departures(
    waypoint: Waypoint,
    gas: Gas,
    ramp: Ramp,
    path: TrapPath,
    *,
    atoms_error: float,
    temperature_error: float,
    losses: Losses | None = None,
    target: Target | None = None,
    passenger: Passenger | None = None,
) -> tuple[Departure, ...]:
    """The rest of the ramp from a waypoint: as planned, and with N or T above or below by a relative error. [1]

    passenger : a second gas, with the atoms and the temperature that it has at the waypoint

    Empty for a waypoint at the very end of the ramp.
    """
    if math.isnan(waypoint.time):
        raise ValueError("a waypoint from an assumed efficiency has no time, so that no rest of a ramp follows it")
    rest = after_time(ramp, path, waypoint.time)
    if rest.ramp is None:
        return ()
    factors = [(1.0, 1.0)]
    factors += [(1.0 + sign * atoms_error, 1.0) for sign in (-1.0, 1.0) if atoms_error > 0.0]
    factors += [(1.0, 1.0 + sign * temperature_error) for sign in (-1.0, 1.0) if temperature_error > 0.0]
    found = []
    for n, t in factors:
        start = (gas, n * waypoint.atoms, t * waypoint.temperature, rest.ramp, rest.path)
        if passenger is None:
            run, own = evaporate(*start, losses=losses, target=target), None
        else:
            from physics.sympathetic import evaporate_with_passenger

            both = evaporate_with_passenger(*start, passenger, losses=losses, target=target)
            run, own = both.coolant, both.passenger
        found.append(Departure(atoms_factor=n, temperature_factor=t, run=run, passenger=own))
    return tuple(found)
